"""Interference between bits against every pattern there is."""

from itertools import product

import numpy as np
import pytest

from edgeplan.physics.interference import (
    bit_interference_s,
    peak_distortion,
    pulse_cursors,
    worst_edge,
)
from edgeplan.physics.network import point_to_point
from edgeplan.physics.sources import drive_of
from edgeplan.physics.waveform_readings import levels_of
from edgeplan.physics.waveforms import step_rows

BITS, PER_BIT = 12, 16


def ringing(driver_ohm=12.0, bit_s=1.6e-9):
    """Give steps of an open line driven by too low a resistance, bit by bit."""
    trees = point_to_point([0.1], receiver_farad=4e-12, line=(50, 6.5e-9, 5, 1e-3, 0.02))
    drive = drive_of([[driver_ohm]], ramp_s=0.6e-9)
    rows = step_rows(trees, drive, duration_s=BITS * bit_s, step_s=[bit_s / PER_BIT])
    return rows.level[:, : BITS * PER_BIT]


def every_pattern():
    """All sequences of twelve bits, latest first."""
    return np.array(list(product([0, 1], repeat=BITS)))


@pytest.mark.parametrize("driver_ohm", [8.0, 20.0, 50.0, 120.0])
def test_peak_distortion_is_the_extreme_of_all_patterns(driver_ohm):
    step = ringing(driver_ohm)
    cursor = pulse_cursors(step, PER_BIT)[0]
    level = every_pattern() @ cursor
    result = peak_distortion(step, PER_BIT)
    for phase in range(PER_BIT):
        own = every_pattern()[:, cursor[:, phase].argmax()]
        worst_one = level[own == 1, phase].min()
        worst_zero = level[own == 0, phase].max()
        assert result.worst_one[0, phase] == pytest.approx(worst_one, abs=1e-12)
        assert result.worst_zero[0, phase] == pytest.approx(worst_zero, abs=1e-12)


def test_worst_edge_is_the_lowest_of_all_patterns_before_it():
    step = ringing()
    pulse = step[0].copy()
    pulse[PER_BIT:] -= step[0, :-PER_BIT]
    lowest = np.full(PER_BIT, np.inf)
    for pattern in product([0, 1], repeat=8):
        wave = step[0, :PER_BIT].copy()
        for back, bit in enumerate(pattern, start=2):
            wave += bit * pulse[back * PER_BIT : (back + 1) * PER_BIT]
        lowest = np.minimum(lowest, wave)
    tested = worst_edge(step[:, : 10 * PER_BIT], PER_BIT)[0, :PER_BIT]
    np.testing.assert_allclose(tested, lowest, atol=1e-12)


def test_matched_line_has_no_memory():
    trees = point_to_point([0.05, 0.1])
    drive = drive_of([[50.0], [50.0]], ramp_s=0.5e-9)
    extra = bit_interference_s(trees, drive, levels_of(0.3, 0.7, 2), [2e-9, 3e-9])
    assert np.abs(extra.rise_s).max() < 0.1e-12
    assert np.abs(extra.fall_s).max() < 0.1e-12
    assert extra.tail.max() < 1e-4


def test_slow_pole_delays_an_edge_by_what_a_pattern_of_bits_leaves_behind():
    # 1 kohm and 10 pF: the worst pattern before the edge is all zeros but one old bit is
    # never helpful on a single pole, so nothing is later than the isolated edge.
    trees = point_to_point([0.001], receiver_farad=10e-12)
    drive = drive_of([[1e3]], ramp_s=1e-9)
    extra = bit_interference_s(trees, drive, levels_of(0.3, 0.7, 1), [20e-9])
    assert extra.rise_s[0, 0] == pytest.approx(0, abs=1e-12)


def test_ringing_line_crosses_later_after_bad_patterns():
    trees = point_to_point([0.1], receiver_farad=4e-12, line=(50, 6.5e-9, 5, 1e-3, 0.02))
    drive = drive_of([[30.0]], ramp_s=0.6e-9)
    extra = bit_interference_s(trees, drive, levels_of(0.3, 0.7, 1), [2e-9])
    # Checked by brute force: delay of the last crossing over all patterns of eight bits.
    step_s, bit = 2e-9 / 64, 64
    rows = step_rows(trees, drive, duration_s=40e-9, step_s=[step_s])
    step = rows.level[0]
    pulse = step.copy()
    pulse[bit:] -= step[:-bit]
    latest = []
    for pattern in product([0, 1], repeat=8):
        wave = step[: 4 * bit].copy()
        for back, value in enumerate(pattern, start=2):
            wave += value * pulse[back * bit : back * bit + 4 * bit]
        index = np.flatnonzero(wave < 0.7)[-1]
        latest.append(index + (0.7 - wave[index]) / (wave[index + 1] - wave[index]))
    isolated = latest[0]
    assert extra.rise_s[0, 0] == pytest.approx((max(latest) - isolated) * step_s, abs=3e-12)
    assert extra.rise_s[0, 0] > 4e-12


def test_candidates_that_do_not_exist_have_no_interference():
    drive = drive_of([[30.0, 40.0]], ramp_s=0.6e-9)
    drive.exists[0, 1] = False
    extra = bit_interference_s(point_to_point([0.1]), drive, levels_of(0.3, 0.7, 1), [2e-9])
    assert np.isfinite(extra.rise_s).tolist() == [[True, False]]
