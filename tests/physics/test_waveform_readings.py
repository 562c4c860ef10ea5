"""Readings of made-up rows, and of real ones against steps four times finer."""

import numpy as np
import pytest

from edgeplan.physics.grids import needs
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveform_readings import (
    allowed_spread,
    block_readings,
    levels_of,
    overshoot,
)
from edgeplan.physics.waveforms import read, step_rows

RAMP = np.clip((np.arange(200.0) - 20) / 20, 0, 1)


def readings_of(row, *, observe=60.0, trip=1.0, levels=(0.3, 0.7)):
    """Readings of one row."""
    level = np.asarray(row, dtype=np.float32)[None]
    found = block_readings(level, levels_of(*levels, 1), np.array([observe]), np.array([trip]))
    return {name: value[0] for name, value in found.items()}


def test_straight_edge_is_read_where_it_crosses():
    found = readings_of(RAMP)
    expected = {
        "half_s": 30.0,
        "rise_first_s": 26.0,
        "rise_first_high_s": 34.0,
        "rise_last_s": 34.0,
        "fall_first_s": 26.0,
        "fall_last_s": 34.0,
        "transition_s": 16.0,
        "slope_min_per_s": 0.05,
        "overshoot": 0.0,
        "rise_ringback": 1.0,
        "fall_ringback": 1.0,
        "level_after": 1.0,
        "residual": 0.0,
    }
    for name, value in expected.items():
        assert found[name] == pytest.approx(value, abs=0.02), name
    assert not found["guarded"]


def test_thresholds_of_a_falling_edge_are_mirrored():
    found = readings_of(RAMP, levels=(0.2, 0.6))
    assert found["fall_first_s"] == pytest.approx(28.0, abs=0.02)
    assert found["fall_last_s"] == pytest.approx(36.0, abs=0.02)


@pytest.mark.parametrize("middle", [60, 90, 150])
def test_ringback_is_the_bottom_of_a_dip_however_late_it_comes(middle):
    dip = RAMP - 0.2 * np.exp(-(((np.arange(200) - middle) / 6) ** 2))
    found = readings_of(dip)
    assert found["rise_ringback"] == pytest.approx(0.8, abs=1e-6)
    assert found["fall_ringback"] == pytest.approx(0.8, abs=1e-6)


def test_dip_through_a_threshold_moves_the_last_crossing_only():
    dip = RAMP - 0.5 * np.exp(-(((np.arange(200) - 80) / 6) ** 2))
    found = readings_of(dip)
    assert found["rise_first_high_s"] == pytest.approx(34.0, abs=0.05)
    assert 80 < found["rise_last_s"] < 90
    assert found["rise_ringback"] == pytest.approx(0.5, abs=1e-3)


def test_dip_at_the_end_of_the_window_leaves_the_last_crossing_unknown():
    dip = RAMP - 0.5 * np.exp(-(((np.arange(200) - 180) / 4) ** 2))
    assert np.isfinite(readings_of(dip, trip=2.0)["rise_last_s"])
    assert np.isnan(readings_of(dip, trip=40.0)["rise_last_s"])


def test_bump_just_under_a_threshold_is_guarded_and_the_worse_reading_kept():
    # A plateau at 0.295, half a percent under VIL 0.3, from sample 30 to 90.
    plateau = np.interp(np.arange(200), [20, 30, 90, 110], [0, 0.295, 0.295, 1.0])
    found = readings_of(plateau)
    assert found["guarded"]
    assert found["rise_first_s"] == pytest.approx(20 + 10 * 0.29 / 0.295, abs=0.1)


def test_plateau_just_over_a_threshold_is_guarded_and_the_worse_reading_kept():
    plateau = np.interp(np.arange(200), [20, 30, 90, 110], [0, 0.705, 0.705, 1.0])
    found = readings_of(plateau)
    assert found["guarded"]
    assert found["rise_last_s"] == pytest.approx(90 + 20 * 0.005 / 0.295, abs=0.3)


def test_single_pole_is_smooth_however_high_the_threshold():
    pole = 1 - np.exp(-np.maximum(np.arange(400.0) - 10, 0) / 20)
    found = readings_of(pole, levels=(0.2, 0.85))
    assert not found["guarded"]
    assert found["transition_s"] == pytest.approx(np.log(9) * 20, rel=1e-3)


def test_spread_allowed_is_six_percent_up_to_high_thresholds():
    np.testing.assert_allclose(allowed_spread(np.array([0.1, 0.3, 0.5, 0.7])), 0.06)
    assert allowed_spread(np.array(0.95)) > 0.2


def test_what_is_never_reached_is_not_a_number():
    found = readings_of(0.6 * RAMP)
    assert np.isnan(found["rise_last_s"])
    assert np.isnan(found["rise_first_high_s"])
    assert np.isnan(found["transition_s"])
    assert np.isfinite(found["half_s"])


def test_peak_between_samples_is_found():
    peak = 1.2 - 0.01 * (np.arange(9) - 4.4) ** 2
    assert overshoot(peak[None])[0] == pytest.approx(0.2, abs=1e-12)


def test_level_beyond_the_window_is_one_less_what_still_rings():
    ring = RAMP * (1 + 0.02 * np.sin(np.arange(200.0)))
    found = readings_of(ring, observe=1e6, trip=20.0)
    assert found["residual"] == pytest.approx(0.02, abs=1e-3)
    assert found["level_after"] == pytest.approx(1 - found["residual"])


def some_nets(count=16, seed=9):
    """Point-to-point nets and T branches with stubs, lossy, with drivers of five strengths."""
    rng = np.random.default_rng(seed)
    parents = [np.array([-1]) if i % 2 else np.array([-1, 0, 0]) for i in range(count)]
    offset = np.concatenate([[0], np.cumsum([len(p) for p in parents])])
    size = offset[-1]
    receivers = [np.array([len(p) - 1]) for p in parents]
    line = (rng.uniform(45, 65, size), np.full(size, 6.5e-9), np.full(size, 6.0))
    trees = Trees(
        segment_offset=offset,
        parent=np.concatenate(parents),
        length_m=rng.uniform(0.01, 0.06, size),
        line=LineConstants(*line, np.full(size, 1.1e-3), np.full(size, 0.018)),
        node_farad=rng.uniform(0.5e-12, 5e-12, size),
        node_siemens=np.zeros(size),
        receiver_offset=np.arange(count + 1),
        receiver_segment=np.concatenate(receivers),
        stub_length_m=rng.uniform(0, 6e-3, count),
        stub_line=LineConstants(*(np.full(count, x) for x in (50, 6.5e-9, 6.0, 1.1e-3, 0.018))),
    )
    shape = (count, 10)
    return trees, Drive(
        resistance_ohm=rng.uniform(12, 60, shape),
        series_ohm=rng.choice([0, 10.0, 22.0, 33.0], shape),
        pad_farad=np.full(shape, 3e-12),
        ramp_s=rng.uniform(0.5e-9, 2.5e-9, (count, 5)),
        ramp_index=np.broadcast_to(np.arange(10) % 5, shape),
        exists=np.ones(shape, dtype=bool),
    )


def fine_readings(trees, drive, levels, bit_s, net, candidate):
    """Readings of one row in double precision, a quarter of the step, four times the window."""
    few = drive.take([net])
    few.exists[:] = False
    few.exists[0, candidate] = True
    window = needs(trees.take([net]), few, [bit_s]).full_s[0, candidate]
    ramp = few.candidate_ramp_s()[0, candidate]
    rows = step_rows(trees.take([net]), few, duration_s=4 * window, step_s=[ramp / 40])
    step = rows.time_s[0, 1]
    found = block_readings(rows.level, levels, np.array([bit_s / step]), np.array([1.0]))
    times = {name: found[name][0] * step for name in ("half_s", "rise_last_s", "transition_s")}
    return times | {name: found[name][0] for name in ("overshoot", "level_after", "guarded")}


def test_readings_are_those_of_steps_four_times_finer():
    # Bounds: p99 of 20,560 waveforms in the design of this grid, and the maximum of clean rows.
    trees, drive = some_nets()
    found = read(trees, drive, levels_of(0.3, 0.7, 16), np.full(16, 8e-9))
    errors = {
        "half_s": [],
        "rise_last_s": [],
        "transition_s": [],
        "overshoot": [],
        "level_after": [],
    }
    for net in range(16):
        for candidate in range(10):
            fine = fine_readings(trees, drive, levels_of(0.3, 0.7, 1), 8e-9, net, candidate)
            if fine["guarded"] or found.guarded[net, candidate]:
                continue
            for name, values in errors.items():
                error = getattr(found, name)[net, candidate] - fine[name]
                values.append(abs(error) / (fine[name] if name == "transition_s" else 1))
    assert len(errors["half_s"]) > 130
    limits = {"half_s": 2e-12, "rise_last_s": 2e-12, "transition_s": 1.5e-3}
    limits |= {"overshoot": 3e-3, "level_after": 3e-3}
    for name, limit in limits.items():
        assert max(errors[name]) < limit, name
    assert np.percentile(errors["half_s"], 90) < 0.3e-12
    assert np.percentile(errors["overshoot"], 90) < 1e-3


def test_a_pause_between_both_thresholds_is_no_ringback_of_the_later_one():
    """A pause at 0.7: over VIH at 0.6 it falls back to 0.65, over 1 - VIL at 0.8 never."""
    pause = np.interp(np.arange(200), [20, 40, 50, 60, 80], [0.0, 0.7, 0.65, 0.7, 1.0])
    found = readings_of(pause, levels=(0.2, 0.6))
    assert found["rise_ringback"] == pytest.approx(0.65, abs=1e-3)
    assert found["fall_ringback"] == 1.0
