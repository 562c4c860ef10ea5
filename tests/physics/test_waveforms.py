"""Step responses against lattices, closed forms, ordinary differential equations and patterns."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees, point_to_point
from edgeplan.physics.sources import drive_of
from edgeplan.physics.waveform_readings import levels_of
from edgeplan.physics.waveforms import (
    dc_gain,
    incident_edge_s,
    periodic_rows,
    read,
    step_rows,
)


def at(rows, times_s, row=0):
    """Level of one row at some times."""
    return np.interp(times_s, rows.time_s[row], rows.level[row])


def test_open_line_from_a_weak_match_shows_the_lattice_plateaus():
    # 3.3 V behind 15 ohm into an open line of 50 ohm: closed-form lattice sums.
    rows = step_rows(point_to_point([0.1]), drive_of([[15.0]], ramp_s=100e-12), duration_s=8e-9)
    plateaus = 3.3 * at(rows, 0.9e-9 + 1.2e-9 * np.arange(6))
    np.testing.assert_allclose(
        plateaus, [5.07692, 2.34320, 3.81520, 3.02258, 3.44938, 3.21957], atol=1e-3
    )


def test_textbook_line_with_a_resistor_at_each_end_takes_its_printed_steps():
    # Z0 50, generator 60 V behind 100 ohm, load 25 ohm: gamma +1/3 and -1/3, 5 ns one way.
    # At mid-line 20, 13.34, 11.12, 11.86, 12.10 V (each wave rounded), dc 12.
    trees = Trees(
        segment_offset=np.array([0, 2]),
        parent=np.array([-1, 0]),
        length_m=np.full(2, 2.5e-9 / 6e-9),
        line=LineConstants(*(np.full(2, x) for x in (50.0, 6e-9, 0.0, 0.0, 0.0))),
        node_farad=np.zeros(2),
        node_siemens=np.array([0.0, 1 / 25]),
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([0]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    drive = drive_of([[100.0]], ramp_s=0.5e-9)
    rows = step_rows(trees, drive, duration_s=40e-9)
    steps = 60 * dc_gain(trees, drive)[0, 0] * at(rows, 5e-9 * np.arange(1, 6) + 0.2e-9)
    np.testing.assert_allclose(steps, [20, 13.3333, 11.1111, 11.8519, 12.0988], atol=0.02)
    assert 60 * dc_gain(trees, drive)[0, 0] == pytest.approx(12.0)


def test_line_without_source_resistance_still_answers():
    # 120 V straight on a line of 30 ohm that ends in 90 ohm: 180, 90, 135, 112.5, 123.75 V.
    trees = point_to_point([1.0], receiver_siemens=1 / 90, line=(30.0, 6e-9, 0, 0, 0))
    rows = step_rows(trees, drive_of([[0.0]], ramp_s=0.8e-9), duration_s=70e-9)
    steps = 120 * at(rows, 6e-9 + 3e-9 + 12e-9 * np.arange(5))
    np.testing.assert_allclose(steps, [180, 90, 135, 112.5, 123.75], atol=0.2)


def test_matched_source_reaches_the_end_in_one_step():
    rows = step_rows(
        point_to_point([0.1]), drive_of([[30.0]], series_ohm=20.0, ramp_s=100e-12), duration_s=8e-9
    )
    np.testing.assert_allclose(at(rows, np.linspace(0.72e-9, 7e-9, 50)), 1, atol=1.5e-3)


@pytest.mark.parametrize(
    ("line", "load_f_per_m", "length_m", "loaded_ohm", "loaded_delay_s"),
    [
        # 51 ohm, 3.5 pF/in and 12 pF/in of loads: 24.235 ohm, 3.756 ns over ten inches.
        ((51.0, 178.5e-12 / 0.0254, 0, 0, 0), 12e-12 / 0.0254, 0.254, 24.235, 3.756e-9),
        # 95 ohm, 2.40 pF/in, 15.28 pF/in of loads: 35 ohm, 11.2 ns over 17.92 in.
        ((95.0, 228e-12 / 0.0254, 0, 0, 0), 15.28e-12 / 0.0254, 17.92 * 0.0254, 35.0, 11.18e-9),
    ],
)
def test_evenly_loaded_line_has_the_published_delay_and_impedance(
    line, load_f_per_m, length_m, loaded_ohm, loaded_delay_s
):
    count = 40
    piece = length_m / count
    trees = Trees(
        segment_offset=np.array([0, count]),
        parent=np.arange(count) - 1,
        length_m=np.full(count, piece),
        line=LineConstants(*(np.full(count, float(x)) for x in line)),
        node_farad=np.full(count, load_f_per_m * piece),
        node_siemens=np.append(np.zeros(count - 1), 1 / loaded_ohm),
        receiver_offset=np.array([0, 2]),
        receiver_segment=np.array([0, count - 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    # Driven from and ended in the loaded impedance: half the final level at once, no echo.
    drive = drive_of([[loaded_ohm]], ramp_s=4e-9)
    result = read(trees, drive, levels_of(0.3, 0.7, 2), [60e-9])
    travelled = result.half_s[1, 0] - result.half_s[0, 0]
    assert travelled == pytest.approx(loaded_delay_s * (count - 1) / count, rel=0.015)
    assert result.overshoot.max() < 0.02


def ramp_into_pole(time, ramp, tau):
    """Exact response of one pole to a linear ramp."""
    one = time - tau * (1 - np.exp(-time / tau))
    later = np.maximum(time - ramp, 0)
    return (one - (later - tau * (1 - np.exp(-later / tau)))) / ramp


@pytest.mark.parametrize(
    ("ratio", "published", "delay"),
    [(0.5, 2.4925, 0.7705), (1.0, 3.1273, 0.8967), (4.0, 8.9301, 0.9985)],
)
def test_linear_ramp_into_one_pole_has_the_tabulated_transition(ratio, published, delay):
    # 10-90 % of the ramp over 2.197 tau; transition and 50 % delay in units of tau.
    tau, ramp = 1e-9, ratio * np.log(9) * 1e-9 / 0.8
    trees = point_to_point([1e-6], receiver_farad=20e-12)
    drive = drive_of([[50.0]], ramp_s=ramp)
    rows = step_rows(trees, drive, duration_s=ramp + 8e-9, step_s=[ramp / 128], shape="linear")
    level, time = rows.level[0], rows.time_s[0]
    np.testing.assert_allclose(level, ramp_into_pole(time, ramp, tau), atol=1e-3)
    low, half, high = np.interp([0.1, 0.5, 0.9], level[: level.argmax()], time[: level.argmax()])
    assert (high - low) / tau == pytest.approx(published, rel=1e-3)
    assert (half - ramp / 2) / tau == pytest.approx(delay, rel=2e-3)


def test_ten_picofarad_at_a_matched_line_make_ln_9_times_their_pole():
    # 50 ohm x 10 pF: 1.0986 ns from 10 to 90 % for a step; an edge of 20 ps adds 0.03 ps.
    result = read(
        point_to_point([0.1], receiver_farad=10e-12),
        drive_of([[50.0]], ramp_s=20e-12),
        levels_of(0.3, 0.7, 1),
        [20e-9],
    )
    assert result.transition_s[0, 0] == pytest.approx(1.0986e-9, rel=3e-4)
    assert not result.guarded[0, 0]


def test_slow_pole_of_an_open_drain_is_an_exponential_whatever_the_edge():
    # 10 kohm into 200 pF on 30 mm of line (3.6 pF): tau = 2.036 us, edge 1 ns.
    trees = point_to_point([0.03], receiver_farad=200e-12)
    ramps = np.array([[0.1e-9, 1e-9, 20e-9]])
    result = read(trees, drive_of([[1e4] * 3], ramp_s=ramps), levels_of(0.3, 0.7, 1), [10e-6])
    tau = 1e4 * 203.6e-12
    np.testing.assert_allclose(result.transition_s[0], np.log(9) * tau, rtol=1e-3)
    np.testing.assert_allclose(result.half_s[0], ramps[0] / 2 + np.log(2) * tau, rtol=1e-3)
    np.testing.assert_allclose(
        result.rise_last_s[0], ramps[0] / 2 + np.log(1 / 0.3) * tau, rtol=1e-3
    )


def test_pole_of_thirty_round_trips_agrees_with_one_fine_grid():
    trees = point_to_point([0.15], receiver_farad=60e-12)
    drive = drive_of([[1e3]], ramp_s=0.2e-9)
    result = read(trees, drive, levels_of(0.3, 0.7, 1), [400e-9])
    rows = step_rows(trees, drive, duration_s=450e-9)
    low, half, high = (
        rows.time_s[0, (rows.level[0] >= level).argmax()] for level in (0.1, 0.5, 0.9)
    )
    round_trip = 1.8e-9
    assert result.half_s[0, 0] == pytest.approx(half, abs=0.1 * round_trip)
    assert result.transition_s[0, 0] == pytest.approx(high - low, rel=3e-3)


def ladder(time, ramp, driver, pad, loads, sections=40):
    """Voltages at the ends of a T of three lines as ladders of coils and capacitors.

    Each branch: impedance, delay, capacitance at its end. Integrated by DOP853.
    """
    parts = [(z, t / sections) for z, t, _ in loads for _ in range(sections)]
    coil = np.array([z * t for z, t in parts])
    node = np.array([t / z for z, t in parts])  # capacitance after each coil
    ends = [sections - 1, 2 * sections - 1, 3 * sections - 1]
    before = np.arange(3 * sections) - 1
    before[sections], before[2 * sections] = ends[0], ends[0]
    # Half sections at the ends of every branch, loads at the far nodes.
    for branch, (_, _, load) in enumerate(loads):
        node[ends[branch]] = node[ends[branch]] / 2 + load
    for branch in (1, 2):
        z, t = parts[branch * sections]
        node[ends[0]] += t / z / 2
    first = parts[0][1] / parts[0][0] / 2 + pad
    size = 3 * sections

    def slope(t, state):
        pad_v, current, voltage = state[0], state[1 : size + 1], state[size + 1 :]
        emf = 0.5 * (1 - np.cos(np.pi * np.clip(t / ramp, 0, 1)))
        near = np.where(before < 0, pad_v, voltage[before])
        out = np.zeros(size)
        np.add.at(out, before[1:], current[1:])
        return np.concatenate(
            [
                [((emf - pad_v) / driver - current[0]) / first],
                (near - voltage) / coil,
                (current - out) / node,
            ]
        )

    found = solve_ivp(
        slope, (0, time[-1]), np.zeros(2 * size + 1), "DOP853", time, rtol=1e-7, atol=1e-10
    )
    return found.y[size + 1 :][[ends[1], ends[2]]]


def test_loaded_tree_is_that_of_a_ladder_of_coils_and_capacitors():
    loads = [(50.0, 0.3e-9, 1e-12), (60.0, 0.25e-9, 4e-12), (45.0, 0.15e-9, 6e-12)]
    line = np.array([(z, 6e-9, 0, 0, 0) for z, _, _ in loads]).T
    trees = Trees(
        segment_offset=np.array([0, 3]),
        parent=np.array([-1, 0, 0]),
        length_m=np.array([t / 6e-9 for _, t, _ in loads]),
        line=LineConstants(*line),
        node_farad=np.array([c for _, _, c in loads]),
        node_siemens=np.zeros(3),
        receiver_offset=np.array([0, 2]),
        receiver_segment=np.array([1, 2]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*line[:, :1]),
    )
    drive = drive_of([[30.0]], pad_farad=3e-12, ramp_s=1e-9)
    rows = step_rows(trees, drive, duration_s=7e-9)
    own = rows.time_s[0][rows.time_s[0] < 6e-9]
    exact = ladder(own, 1e-9, 30.0, 3e-12, loads)
    engine = rows.level[:, : len(own)]
    assert np.abs(engine - exact).max() < 0.5e-3


def test_stub_before_the_resistor_is_a_line_of_its_own():
    # The same net once with a stub, once as a tree whose root is the stub and the resistor 0.
    stub = point_to_point([0.1], stub_length_m=0.01)
    chain = Trees(
        segment_offset=np.array([0, 2]),
        parent=np.array([-1, 0]),
        length_m=np.array([0.01, 0.1]),
        line=LineConstants(*(np.full(2, x) for x in (50.0, 6e-9, 0.0, 0.0, 0.0))),
        node_farad=np.zeros(2),
        node_siemens=np.zeros(2),
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    drive = drive_of([[12.0]], pad_farad=4e-12, ramp_s=0.55e-9)
    one, other = (step_rows(trees, drive, duration_s=8e-9) for trees in (stub, chain))
    np.testing.assert_allclose(one.level, other.level, atol=1e-9)


def test_final_level_follows_the_resistances():
    # 25 ohm, 5 ohm in series, 0.1 m of 10 ohm/m, then 69 ohm to ground.
    trees = point_to_point([0.1], receiver_siemens=1 / 69, line=(50, 6e-9, 10.0, 0, 0))
    drive = drive_of([[25.0]], series_ohm=5.0, ramp_s=1e-9)
    assert dc_gain(trees, drive)[0, 0] == pytest.approx(0.69)
    rows = step_rows(trees, drive, duration_s=15e-9)
    assert rows.level[0, -1] == pytest.approx(1, abs=2e-3)


def test_periodic_state_is_the_sum_of_all_steps_before():
    trees = point_to_point([0.1], receiver_farad=5e-12, line=(50, 6.5e-9, 5, 1e-3, 0.02))
    drive = drive_of([[12.0, 60.0]], ramp_s=0.8e-9)
    period, duty = 5e-9, 0.4
    steps = step_rows(trees, drive, duration_s=100e-9, step_s=[period / 1280])
    clock = periodic_rows(trees, drive, [period], [duty])
    for row in range(2):
        sampled = np.append(steps.level[row], 1.0)
        total = np.zeros(1280)
        for back in range(-1, 18):
            for sign, start in ((1, 0), (-1, int(duty * 1280))):
                place = np.arange(1280) + back * 1280 - start
                total += sign * np.where(place < 0, 0, sampled[np.clip(place, 0, len(sampled) - 1)])
        time = period * np.arange(1280) / 1280
        np.testing.assert_allclose(
            np.interp(clock.time_s[row], time, total), clock.level[row], atol=2e-3
        )


def test_periodic_state_has_the_duty_as_its_mean():
    clock = periodic_rows(
        point_to_point([0.1, 0.2]), drive_of([[20.0], [50.0]], ramp_s=1e-9), [8e-9, 9e-9], 0.3
    )
    np.testing.assert_allclose(clock.level.mean(axis=1), 0.3, atol=1e-12)


def test_incident_edge_is_slowed_by_the_pad_through_driver_and_line_in_parallel():
    # 20 ohm and 10 pF into 0 + 50 ohm: pole 20*50/70 x 10 pF = 142.86 ps, step of 10 ps.
    edge = incident_edge_s(
        point_to_point([0.1]), drive_of([[20.0]], pad_farad=10e-12, ramp_s=10e-12)
    )
    assert edge[0, 0] == pytest.approx(np.log(9) * 142.857e-12, rel=1e-3)


def test_incident_edge_does_not_see_the_far_end():
    drive = drive_of([[20.0], [20.0]], pad_farad=3e-12, ramp_s=1e-9)
    trees = point_to_point([0.02, 0.3], receiver_farad=[1e-12, 50e-12])
    one, other = incident_edge_s(trees, drive)[:, 0]
    assert one == pytest.approx(other, rel=1e-6)


def test_one_call_reads_ramps_from_picoseconds_to_microseconds():
    # A matched line only delays: half at td + te/2, 10-90 % of 0.5903 te.
    ramps = np.geomspace(30e-12, 10e-6, 25)[None]
    drive = drive_of(np.full(ramps.shape, 50.0), ramp_s=ramps)
    result = read(point_to_point([0.1]), drive, levels_of(0.3, 0.7, 1), [10e-9])
    np.testing.assert_allclose(result.transition_s[0], 0.59033 * ramps[0], rtol=1.5e-3)
    np.testing.assert_allclose(result.half_s[0], 0.6e-9 + ramps[0] / 2, rtol=2e-4)
    np.testing.assert_allclose(result.rise_first_s, result.fall_first_s, rtol=1e-6)


def test_falling_edge_is_the_mirror_of_the_rising_one():
    # Thresholds 0.2 and 0.6: a falling edge leaves 0.6 where a rising one reaches 0.4.
    trees = point_to_point([0.1])
    drive = drive_of([[30.0]], ramp_s=1e-9)
    result = read(trees, drive, levels_of(0.2, 0.6, 1), [10e-9])
    mirror = read(trees, drive, levels_of(0.4, 0.8, 1), [10e-9])
    assert result.fall_first_s[0, 0] == mirror.rise_first_s[0, 0]
    assert result.fall_last_s[0, 0] == mirror.rise_last_s[0, 0]
    assert result.fall_first_low_s[0, 0] == mirror.rise_first_high_s[0, 0]


def test_only_the_wanted_direction_is_read():
    trees, drive = point_to_point([0.1]), drive_of([[30.0]], ramp_s=1e-9)
    result = read(trees, drive, levels_of(0.3, 0.7, 1), [10e-9], directions=("fall",))
    assert np.isnan(result.rise_last_s[0, 0])
    assert np.isfinite(result.fall_last_s[0, 0])


def test_what_does_not_exist_or_fit_is_not_a_number():
    trees = point_to_point([0.1, 3.0])
    drive = drive_of([[50.0, 50.0], [50.0, 50.0]], ramp_s=[[1e-9, 1e-9], [1e-9, 5e-12]])
    drive.exists[0, 1] = False
    result = read(trees, drive, levels_of(0.3, 0.7, 2), [10e-9, 10e-9])
    assert np.isfinite(result.half_s).tolist() == [[True, False], [True, False]]


def test_level_after_an_endless_bit_is_the_final_one():
    result = read(
        point_to_point([0.1]), drive_of([[30.0]], ramp_s=1e-9), levels_of(0.3, 0.7, 1), [np.inf]
    )
    assert result.residual[0, 0] < 2e-3
    assert result.level_after[0, 0] == pytest.approx(1 - result.residual[0, 0])


def test_arms_of_a_star_that_ring_against_each_other_are_reported():
    # The driver sits in the node of the ringing between two nearly equal arms.
    star = Trees(
        segment_offset=np.array([0, 2]),
        parent=np.array([-1, -1]),
        length_m=np.array([0.02, 0.03]),
        line=LineConstants(*(np.full(2, x) for x in (45.0, 6e-9, 0.0, 0.0, 0.0))),
        node_farad=np.full(2, 2e-12),
        node_siemens=np.zeros(2),
        receiver_offset=np.array([0, 2]),
        receiver_segment=np.array([0, 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    drive = drive_of([[22.5]], ramp_s=0.3e-9)
    result = read(star, drive, levels_of(0.3, 0.7, 2), [1e-3])
    rows = step_rows(star, drive, duration_s=12e-9)
    late = np.abs(rows.level[:, rows.time_s[0] > 8e-9] - 1).max(axis=1)
    assert (result.residual[:, 0] >= late).all()
    assert (result.residual[:, 0] > 0.01).all()
    np.testing.assert_allclose(result.level_after, 1 - result.residual)


def test_overshoot_and_ringback_of_an_open_line_are_those_of_the_lattice():
    # 15 ohm into 50 ohm, open: peaks 1.53846 and then down to 0.71006.
    result = read(
        point_to_point([0.2]), drive_of([[15.0]], ramp_s=0.2e-9), levels_of(0.3, 0.7, 1), [20e-9]
    )
    assert result.overshoot[0, 0] == pytest.approx(0.53846, abs=3e-3)
    assert result.rise_ringback[0, 0] == pytest.approx(0.71006, abs=3e-3)


def test_raised_cosine_through_one_pole_crosses_where_its_closed_form_does():
    tau, ramp = 0.4e-9, 1e-9
    w = np.pi / ramp

    def exact(t):
        """Response of the pole to the raised cosine while the edge lasts."""
        k = 1 / (1 + (w * tau) ** 2)
        forced = 1 - k * (np.cos(w * t) + w * tau * np.sin(w * t))
        return 0.5 * (forced - (1 - k) * np.exp(-t / tau))

    trees = point_to_point([1e-9], receiver_farad=8e-12)
    result = read(trees, drive_of([[50.0]], ramp_s=ramp), levels_of(0.2, 0.6, 1), [10e-9])
    for level, time in ((0.2, result.rise_first_s), (0.5, result.half_s)):
        expected = brentq(lambda t, x=level: exact(t) - x, 1e-12, ramp)
        assert time[0, 0] == pytest.approx(expected, abs=0.3e-12)
