"""Searches in rows against plain loops over their samples."""

import numpy as np
import pytest

from edgeplan.physics.crossings import (
    cubic_time,
    edges,
    first_reach,
    first_readings,
    highest_after,
    last_reach,
    last_readings,
    lowest_between,
    lowest_from,
    straight_time,
)


def rings(rows=300, samples=192, seed=5):
    """Rising edges of many lengths and delays that ring about 1."""
    rng = np.random.default_rng(seed)
    time = np.arange(samples)
    start = rng.uniform(2, 60, rows)[:, None]
    length = rng.choice([6, 12, 40, 110], rows)[:, None]
    edge = np.clip((time - start) / length, 0, 1)
    swing = rng.uniform(0, 0.6, rows)[:, None]
    after = np.maximum(time - start - length, 0)
    ring = swing * np.exp(-after / 25) * np.sin(after / rng.uniform(2, 9, rows)[:, None])
    return (edge + ring).astype(np.float32)


def found_by_loop(row, threshold):
    """First reach and start of the final stay, one sample after the other."""
    above = row >= threshold
    first = next((i for i, value in enumerate(above) if value), len(row))
    last = len(row)
    while last > 0 and above[last - 1]:
        last -= 1
    return first, last


THRESHOLDS = [0.1, 0.3, 0.5, 0.7, 0.9]


def readings_of(level):
    """First and last readings of all thresholds."""
    threshold = np.tile(np.float32(THRESHOLDS)[:, None], len(level))
    guard = np.float32(0.01)
    found = edges(level, threshold.min(axis=0) - guard, threshold.max(axis=0) + guard)
    first = first_readings(level, threshold, found)
    lowest = np.stack([lowest_from(level, own[None])[0] for own in first[2]])
    return threshold, first, last_readings(level, threshold, first, lowest)


def test_first_and_last_readings_are_those_of_a_loop_over_the_samples():
    level = rings()
    threshold, first, last = readings_of(level)
    for reading, shift in enumerate(np.float32([-0.01, 0, 0.01])):
        for kind in range(len(THRESHOLDS)):
            for row in range(len(level)):
                expected = found_by_loop(level[row], threshold[kind, row] + shift)
                assert (first[reading, kind, row], last[reading, kind, row]) == expected


def test_single_searches_are_those_of_a_loop_over_the_samples():
    level = rings(80, seed=6)
    threshold = np.float32(np.random.default_rng(7).uniform(-0.1, 1.4, 80))
    expected = [found_by_loop(*pair) for pair in zip(level, threshold, strict=True)]
    assert first_reach(level, threshold).tolist() == [first for first, _ in expected]
    assert last_reach(level, threshold).tolist() == [last for _, last in expected]


def test_extremes_are_those_of_slices():
    rng = np.random.default_rng(8)
    level = rng.normal(size=(50, 40)).astype(np.float32)
    start = rng.integers(0, 45, (3, 50))
    expected = [
        [row[min(s, 39) :].min() for row, s in zip(level, own, strict=True)] for own in start
    ]
    np.testing.assert_array_equal(lowest_from(level, start), expected)
    highest = [row[min(s, 39) :].max() for row, s in zip(level, start[0], strict=True)]
    np.testing.assert_array_equal(highest_after(level, start[0]), highest)
    stop = np.minimum(start[0] + 4, 39)
    between = [
        row[min(s, 38) : max(e, min(s, 38) + 1)].min()
        for row, s, e in zip(level, start[0], stop, strict=True)
    ]
    np.testing.assert_array_equal(lowest_between(level, start[0], stop), between)


def test_cubic_crossing_of_a_raised_cosine_is_exact_to_a_thousandth_of_a_sample():
    # Ten samples an edge: level (1 - cos(pi t/10))/2 crosses x at 10 arccos(1 - 2x)/pi.
    offset = np.linspace(0, 1, 21)[:, None]
    level = (1 - np.cos(np.pi * np.clip(np.arange(30) - 8 - offset, 0, 10) / 10)) / 2
    for x in (0.3, 0.5, 0.7):
        threshold = np.full(21, x)
        index = first_reach(level, threshold)
        exact = 8 + offset[:, 0] + 10 * np.arccos(1 - 2 * x) / np.pi
        cubic = cubic_time(level, np.arange(21), index, threshold)
        straight = straight_time(level, np.arange(21), index, threshold)
        assert np.abs(cubic - exact).max() < 2e-3
        assert np.abs(straight - exact).max() < 0.1


@pytest.mark.parametrize(("index", "expected"), [(0, 0.0), (12, np.nan)])
def test_crossings_before_and_beyond_a_row(index, expected):
    level = np.linspace(0, 1, 12)[None]
    found = cubic_time(level, np.array([0]), np.array([index]), np.array([0.5]))
    np.testing.assert_equal(found, [expected])
