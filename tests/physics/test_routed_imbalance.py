"""routed_imbalance against the straight form and integrals over the standing wave."""

import numpy as np
import pytest
from scipy.integrate import quad_vec

from edgeplan.physics import imbalance, network
from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.routed_imbalance import common_mode_per_volt
from edgeplan.physics.routed_radiation import Layout, routed_field_per_volt
from edgeplan.physics.stripline_leakage import edge_leakage
from edgeplan.physics.tree_currents import end_states

SPEED = 299_792_458.0
BAND_HZ = np.geomspace(30e6, 2e9, 40)
SIZE_M = (0.15, 0.1)


def routed(points_mm, *, farad=5e-12, siemens=0.0, delay=6e-9, er=4.3, lengths_mm=None, gap=None):
    """One chain through points of the board, loaded at its end."""
    origin, *ends = np.array(points_mm, dtype=float) * 1e-3
    ends, count = np.array(ends), len(ends)
    steps = np.diff(np.vstack([origin, ends]), axis=0)
    length_m = np.hypot(*steps.T) if lengths_mm is None else np.array(lengths_mm) * 1e-3
    last = np.arange(count) == count - 1
    trees = network.Trees(
        segment_offset=np.array([0, count]),
        parent=np.arange(count) - 1,
        length_m=length_m,
        line=LineConstants(*(np.full(count, v) for v in (50.0, delay, 0.0, 0.0, 0.0))),
        node_farad=last * farad,
        node_siemens=last * siemens,
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([count - 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    gap_m = None if gap is None else np.full(count, gap)
    strip_m = None if gap is None else np.full(count, 0.4 * gap)
    height = np.full(count, 2e-4 if gap is None else 0.0)
    layout = Layout(
        origin[None], ends, height, np.full(count, er), np.array([0, count]), gap_m, strip_m
    )
    return trees, layout


def straight_form(points_mm, mode, *, mirrored=False):
    """Straight model of the same line: its end voltages, positions and offset."""
    trees, _ = routed(points_mm)
    state = end_states(trees, 2j * np.pi * BAND_HZ)
    k = 2 * np.pi * BAND_HZ / SPEED
    x = np.array(points_mm)[:, 0] * 1e-3
    x = SIZE_M[0] - x if mirrored else x
    ends = imbalance.Ends(*(imbalance.electrical_position_m(v, SIZE_M[0]) for v in x))
    height = imbalance.imbalance_height(
        50.0, (6e-9 * SPEED) ** 2, 4.3, 2e-4, points_mm[0][1] * 1e-3 - SIZE_M[1] / 2, SIZE_M[1]
    )
    volts = state.near_volt[0, 0], state.far_volt[0, 0]
    ratio = imbalance.impedance_ratio(*SIZE_M)
    return mode(k, ends, SIZE_M[0], ratio, height, volts)


@pytest.mark.parametrize(
    "points_mm", [[(25, 50), (125, 50)], [(100, 50), (20, 50)], [(5, 92), (85, 92)]]
)
def test_one_straight_segment_is_the_straight_form(points_mm):
    volts = common_mode_per_volt(*routed(points_mm), BAND_HZ, SIZE_M)
    one, any_end = imbalance.effective_voltage_one, imbalance.effective_voltage_any
    np.testing.assert_allclose(volts.right[0], straight_form(points_mm, one), rtol=1e-9)
    np.testing.assert_allclose(
        volts.left[0], straight_form(points_mm, one, mirrored=True), rtol=1e-9
    )
    np.testing.assert_allclose(volts.any_along_x[0], straight_form(points_mm, any_end), rtol=1e-9)


def test_cutting_a_straight_trace_of_equal_heights_changes_nothing():
    # in air both heights are equal and the sum telescopes to both ends, wherever it is cut
    whole = routed([(20, 50), (110, 50)], delay=1 / SPEED, er=1.0)
    cut = routed([(20, 50), (41, 50), (75, 50), (110, 50)], delay=1 / SPEED, er=1.0)
    for one, other in zip(
        common_mode_per_volt(*whole, BAND_HZ, SIZE_M)[:2],
        common_mode_per_volt(*cut, BAND_HZ, SIZE_M)[:2],
        strict=True,
    ):
        np.testing.assert_allclose(one, other, rtol=1e-6)


def integral_over_the_way(frequency_hz, start_m, end_m, siemens):
    """Sum over a trace of drop times antenna current and charge times its slope (right side).

    Reciprocity: a series electromotive force counts by the current of the board as an antenna
    driven by its cable, a charge by the slope of that current. In air: both heights are one.
    """
    k, board = 2 * np.pi * frequency_hz / SPEED, SIZE_M[0]
    trees, _ = routed(np.array([start_m, end_m]) * 1e3, farad=0, siemens=siemens, delay=1 / SPEED)
    length, step = trees.length_m[0], np.subtract(end_m, start_m)
    state = end_states(trees, [2j * np.pi * frequency_hz])
    gamma, z = propagation(2j * np.pi * frequency_hz, LineConstants(*trees.line))
    volt, ampere = state.far_volt[0, 0, 0], state.far_ampere[0, 0, 0]

    def density(t):
        back, (x, y) = length * (1 - t), start_m + t * step
        v = volt * np.cosh(gamma * back) + z * ampere * np.sinh(gamma * back)
        drop = -gamma * (volt * np.sinh(gamma * back) + z * ampere * np.cosh(gamma * back))
        position = board / np.pi * np.arccos(1 - 2 * x / board)
        slope = k * np.cos(k * position) * board / np.pi / np.sqrt(x * (board - x))
        offset = abs(y - SIZE_M[1] / 2)
        height = imbalance.imbalance_height(50.0, 1.0, 1.0, 2e-4, offset, SIZE_M[1]).magnetic
        return height * (drop * step[0] * np.sin(k * position) + length * v * slope)

    value = quad_vec(density, 0, 1, epsrel=1e-8)[0]
    ratio, angle = imbalance.impedance_ratio(*SIZE_M), k * board
    den = np.hypot(np.sin(angle), ratio * np.cos(angle)) if angle < np.pi / 2 else 1.0
    return np.abs(value).item() / den


@pytest.mark.parametrize("siemens", [1e-6, 1 / 50, 1.0])
@pytest.mark.parametrize("end_mm", [(90, 50), (60, 80), (40, 90), (10, 60)])
def test_slanted_and_crossing_traces_are_the_integral_over_their_way(end_mm, siemens):
    frequency_hz = np.array([60e6, 300e6, 900e6])
    points_mm = np.linspace((40.0, 20.0), end_mm, 13)
    net = routed(points_mm, farad=0, siemens=siemens, delay=1 / SPEED, er=1.0)
    volts = common_mode_per_volt(*net, frequency_hz, SIZE_M).right[0]
    start_m, end_m = points_mm[0] * 1e-3, points_mm[-1] * 1e-3
    integral = [integral_over_the_way(f, start_m, end_m, siemens) for f in frequency_hz]
    np.testing.assert_allclose(volts, integral, rtol=0.02)


def test_a_trace_across_the_board_drives_its_cable_by_its_charge_alone():
    # no current along the axis; shorted at its end there is little voltage and little drive
    crossing = [(75, 30), (75, 70)]
    low_hz = np.array([30e6])
    open_end = common_mode_per_volt(*routed(crossing, farad=0), low_hz, SIZE_M).right[0]
    shorted = common_mode_per_volt(*routed(crossing, siemens=1e6), low_hz, SIZE_M).right[0]
    # 1 V along all of it against a drop from 1 V to 0: twice
    assert open_end == pytest.approx(2 * shorted, rel=0.02)


def test_place_decides_a_crossing_trace_near_the_free_end_drives_more():
    # the charge of a plate gathers at its sides: 1/(pi sqrt(s(1 - s))) per length
    low_hz = np.array([30e6])

    def drive(x_mm):
        return common_mode_per_volt(*routed([(x_mm, 30), (x_mm, 70)]), low_hz, SIZE_M).right[0]

    share = 15 / 150
    expected = 0.5 / np.sqrt(share * (1 - share))
    assert drive(15) / drive(75) == pytest.approx(expected, rel=0.03)


def test_mirrored_routes_swap_the_sides():
    points = np.array([(20, 20), (90, 20), (90, 70)])
    net = common_mode_per_volt(*routed(points), BAND_HZ, SIZE_M)
    in_x = common_mode_per_volt(*routed((150, 0) + points * (-1, 1)), BAND_HZ, SIZE_M)
    in_y = common_mode_per_volt(*routed((0, 100) + points * (1, -1)), BAND_HZ, SIZE_M)
    np.testing.assert_allclose(net.left, in_x.right, rtol=1e-9)
    np.testing.assert_allclose(net.top, in_y.bottom, rtol=1e-9)
    np.testing.assert_allclose(net.any_along_x, in_x.any_along_x, rtol=1e-9)
    np.testing.assert_allclose(net.any_along_y, in_y.any_along_y, rtol=1e-9)


def test_one_cable_above_the_boards_resonance_is_one_of_any():
    points = [(20, 20), (90, 20), (90, 70)]
    above_hz = np.linspace(0.55e9, 2e9, 30)
    volts = common_mode_per_volt(*routed(points), above_hz, SIZE_M)
    assert np.all(volts.left <= volts.any_along_x * (1 + 1e-9))
    assert np.all(volts.right <= volts.any_along_x * (1 + 1e-9))


def test_a_meander_carries_its_charge_but_not_its_drop():
    # drawn three times as long as its ends are apart: into a short circuit the drop is that of
    # three lengths, of which a third lies along the axis
    low_hz = np.array([30e6])
    plain = routed([(50, 50), (80, 50)], siemens=1e6)
    meander = routed([(50, 50), (80, 50)], siemens=1e6, lengths_mm=[90])
    straight = common_mode_per_volt(*plain, low_hz, SIZE_M).any_along_x
    folded = common_mode_per_volt(*meander, low_hz, SIZE_M).any_along_x
    assert folded == pytest.approx(straight / 3, rel=0.02)


def test_closer_to_a_side_and_higher_never_drive_less():
    middle, near_side = ([(25, y), (125, y)] for y in (50, 95))
    low = common_mode_per_volt(*routed(middle), BAND_HZ, SIZE_M)
    side = common_mode_per_volt(*routed(near_side), BAND_HZ, SIZE_M)
    trees, layout = routed(middle)
    high = common_mode_per_volt(trees, layout._replace(height_m=np.array([4e-4])), BAND_HZ, SIZE_M)
    np.testing.assert_array_less(low.right, side.right)
    np.testing.assert_allclose(high.right, 2 * low.right, rtol=1e-4)


def test_a_trace_beyond_the_board_ends_at_its_side():
    inside = routed([(50, 50), (150, 50)], farad=0, siemens=1.0)
    trees, layout = routed([(50, 50), (150.0, 50)], farad=0, siemens=1.0)
    beyond = layout._replace(end_m=np.array([[0.2, 0.05]]))
    for volts in common_mode_per_volt(trees, beyond, BAND_HZ, SIZE_M):
        assert np.all(np.isfinite(volts))
    volts = common_mode_per_volt(*inside, BAND_HZ, SIZE_M)
    assert np.all(volts.right > 0)


def test_an_inner_trace_leaks_at_the_side_only():
    middle = routed([(25, 50), (125, 50)], gap=1e-3)
    side = routed([(25, 98.5), (125, 98.5)], gap=1e-3)
    np.testing.assert_array_equal(common_mode_per_volt(*middle, BAND_HZ, SIZE_M).right, 0.0)
    leak = common_mode_per_volt(*side, BAND_HZ, SIZE_M).right
    open_side = common_mode_per_volt(*routed([(25, 98.5), (125, 98.5)]), BAND_HZ, SIZE_M).right
    height = edge_leakage(50 * 6e-9 * SPEED, 1e-3, 0.1, 1.5e-3 - 0.2e-3, 0.4e-3)
    surface = imbalance.imbalance_height(50, (6e-9 * SPEED) ** 2, 4.3, 2e-4, 0.0485, 0.1).magnetic
    low = BAND_HZ < 60e6
    ratio = leak[0, low] / open_side[0, low]
    assert np.all(ratio < 1.4 * height / surface)
    assert np.all(ratio > 0.7 * height / surface)


def test_an_inner_trace_of_unknown_width_is_unknown():
    trees, layout = routed([(25, 98.5), (125, 98.5)], gap=1e-3)
    for volts in common_mode_per_volt(trees, layout._replace(strip_width_m=None), BAND_HZ, SIZE_M):
        assert np.all(np.isnan(volts))


def test_an_unknown_net_is_unknown_and_stays_alone():
    trees = network.point_to_point([0.05, 0.05], receiver_farad=5e-12)
    layout = Layout(
        np.full((2, 2), 0.02),
        np.array([[0.07, 0.02]] * 2),
        np.array([np.nan, 2e-4]),
        np.full(2, 4.3),
        np.arange(3),
    )
    for volts in common_mode_per_volt(trees, layout, BAND_HZ, SIZE_M):
        assert np.all(np.isnan(volts[0]))
        assert np.all(np.isfinite(volts[1]))


def test_a_line_with_an_unknown_number_of_planes_is_unknown_and_not_silent():
    # a covered strip over one plane radiates; without its height it must not count as hidden
    for volts in common_mode_per_volt(*routed([(25, 50), (125, 50)], gap=np.nan), BAND_HZ, SIZE_M):
        assert np.all(np.isnan(volts))
    assert np.all(
        np.isnan(routed_field_per_volt(*routed([(25, 50), (125, 50)], gap=np.nan), BAND_HZ))
    )
