"""Where a net runs decides how its field is worked out; the ways agree where they must."""

from itertools import pairwise

import numpy as np
import pytest
from build import board, net, nets_of, segment
from scipy.special import ellipkm1

from edgeplan.emission.mechanism import Cable
from edgeplan.net_fields import (
    INNER,
    ROUTED,
    STRAIGHT,
    fields_per_volt,
    has_placed_stub,
    kind_of,
    remarks,
)
from edgeplan.physics import stripline_leakage
from edgeplan.physics.stripline_leakage import edge_leakage

FREQUENCY_HZ = np.array([[30e6, 100e6, 300e6, 700e6, 1e9]])
CABLES = (Cable(length_m=1.5),) * 2
LENGTH_M = 0.06
PLANE = {"kind": "plane", "thickness_m": 18e-6}
LAMINATE = {"kind": "dielectric", "thickness_m": 0.11e-3, "permittivity": 4.2}
FOUR = [
    {"layer": "L1", "kind": "signal", "thickness_m": 35e-6},
    LAMINATE | {"layer": "D1"},
    PLANE | {"layer": "L2"},
    LAMINATE | {"layer": "D2"},
    {"layer": "L3", "kind": "signal", "thickness_m": 18e-6},
    LAMINATE | {"layer": "D3"},
    PLANE | {"layer": "L4"},
]


def fields(*rows, **tables):
    the_board = board(*rows, **tables)
    nets = nets_of(the_board)
    return nets, fields_per_volt(the_board, CABLES, nets, FREQUENCY_HZ)


def placed(*corners_m, layer="L1"):
    """A route along corners, from U1.1 to U2.1."""
    names = ["U1.1", *(f"c{i}" for i in range(1, len(corners_m) - 1)), "U2.1"]
    found = []
    for i, (a, b) in enumerate(pairwise(corners_m)):
        length = float(np.hypot(b[0] - a[0], b[1] - a[1]))
        found.append(segment(names[i], names[i + 1], length, layer=layer, start_m=a, end_m=b))
    return found


def test_a_straight_route_in_the_middle_of_the_board_radiates_like_the_straight_form():
    """Both are the same sums; the routed form searches a coarser grid of angles (0.5 dB)."""
    straight, (trace, cable) = fields(net(length_m=LENGTH_M))
    start = 0.5 * (0.1 - LENGTH_M)
    route = placed((start, 0.0375), (start + LENGTH_M, 0.0375))
    routed, (trace_too, cable_too) = fields(net(length_m=LENGTH_M), routes=route)
    assert kind_of(straight.facts[0]) == STRAIGHT
    assert kind_of(routed.facts[0]) == ROUTED
    np.testing.assert_allclose(20 * np.log10(trace_too / trace), 0, atol=0.7)
    assert np.all(cable_too >= cable * (1 - 1e-6))  # the routed form also tries the other axis


def test_a_bend_is_not_straightened():
    straight = placed((0.02, 0.0375), (0.08, 0.0375))
    bent = placed((0.02, 0.02), (0.05, 0.02), (0.05, 0.05))
    _, (one, _) = fields(net(length_m=LENGTH_M), routes=straight)
    _, (two, _) = fields(net(length_m=LENGTH_M), routes=bent)
    assert np.max(np.abs(20 * np.log10(two / one))) > 1.0


def test_a_net_between_planes_radiates_less_than_on_the_surface():
    surface, (above, _) = fields(net(length_m=LENGTH_M), stack=FOUR)
    inner, (below, cable) = fields(net(length_m=LENGTH_M, layer="L3"), stack=FOUR)
    assert kind_of(inner.facts[0]) == INNER
    assert np.all(below < above)
    assert np.all(np.isfinite(cable))
    assert any("3 mm of surface" in text for text in remarks(inner.facts[0]))
    assert remarks(surface.facts[0]) == []


def test_between_planes_each_strip_leaks_by_its_own_width():
    """As pi/2/K; impedance stated, edges alike, below resonance, where their losses count."""
    stack = [row | ({"z0_ohm": 50.0} if row["layer"] == "L3" else {}) for row in FOUR]
    found = []
    for width_m in (0.05e-3, 0.2e-3):
        y_m = 0.1e-3 + width_m / 2
        ends = {"start_m": (0.02, y_m), "end_m": (0.08, y_m)}
        row = segment("U1.1", "U2.1", LENGTH_M, layer="L3", width_m=width_m, **ends)
        found.append(fields(net(length_m=LENGTH_M), stack=stack, routes=[row])[1][1])
    gap_m = 2 * 0.11e-3 + 18e-6
    narrow, wide = (1 / ellipkm1(np.exp(-2 * np.pi * w / gap_m)) for w in (0.05e-3, 0.2e-3))
    ratio = (found[1] / found[0])[FREQUENCY_HZ <= 100e6]
    np.testing.assert_allclose(ratio, wide / narrow, rtol=0.005)


def test_a_net_without_positions_leaks_by_its_own_width_and_stated_distance(monkeypatch):
    asked = []

    def recorded(*values):
        asked.append([float(np.squeeze(value)) for value in values])
        return edge_leakage(*values)

    monkeypatch.setattr(stripline_leakage, "edge_leakage", recorded)
    fields(net(length_m=LENGTH_M, layer="L3", width_m=0.15e-3, side_distance_m=1e-3), stack=FOUR)
    assert [values[-2:] for values in asked] == [[1e-3, 0.15e-3]]


@pytest.mark.parametrize("side", ["left", "right"])
def test_one_cable_counts_from_its_own_side(side):
    one = (Cable(length_m=1.5),)
    route = placed((0.01, 0.03), (0.05, 0.03))
    cable = [{"name": "mains", "length_m": 1.5, "attenuation_db": 0.0}]
    declared = board(net(length_m=0.04), routes=route, cable=[cable[0] | {"side": side}])
    anywhere = board(net(length_m=0.04), routes=route, cable=cable)
    nets = nets_of(declared)
    _, own = fields_per_volt(declared, one, nets, FREQUENCY_HZ)
    _, worst = fields_per_volt(anywhere, one, nets, FREQUENCY_HZ)
    assert np.all(own <= worst * (1 + 1e-9))


SHORT_M = 0.03  # below a quarter wave to 1 GHz, so that no resonance magnifies the loss
POINTS_M = (0.02, 0.02), (0.02, 0.025), (0.045, 0.025)
FITTED = {"length_m": SHORT_M, "site": "fitted", "resistor_ohm": 33.0}


def with_site(**changes):
    """A route around a right angle with a resistor site at its corner, 5 mm from the pad."""
    pad_m, site_m, end_m = POINTS_M
    stub = {"start_m": pad_m, "end_m": site_m} | changes
    return [
        segment("U1.1", "site", 0.005, **stub),
        segment("site", "U2.1", 0.025, start_m=site_m, end_m=end_m),
    ]


def behind_5_mm(facts):
    """Voltage of an open lossless line of 30 mm 5 mm behind its beginning, over that there."""
    angle = 2 * np.pi * FREQUENCY_HZ * facts.path.main_line.delay_s_per_m
    return np.abs(np.cos(0.025 * angle) / np.cos(0.03 * angle))


def test_the_line_before_the_resistor_radiates_with_a_routed_net():
    """Per volt at the site: the field of the whole over the voltage there, by hand."""
    cut, (trace, cable) = fields(net(**FITTED), routes=with_site())
    whole, (trace_too, cable_too) = fields(net(length_m=SHORT_M), routes=placed(*POINTS_M))
    assert has_placed_stub(cut.facts[0])
    assert not has_placed_stub(whole.facts[0])
    behind = behind_5_mm(whole.facts[0])
    np.testing.assert_allclose(20 * np.log10(trace * behind / trace_too), 0, atol=0.1)
    np.testing.assert_allclose(20 * np.log10(cable * behind / cable_too), 0, atol=0.1)


def test_a_stub_without_a_place_is_left_out_and_that_is_said():
    bare, (trace, _) = fields(net(**FITTED), routes=with_site(start_m=None, end_m=None))
    drawn, (longer, _) = fields(net(**FITTED), routes=with_site())
    assert kind_of(bare.facts[0]) == ROUTED
    assert np.all(longer > trace)
    assert any("before its resistor" in text for text in remarks(bare.facts[0]))
    assert remarks(drawn.facts[0]) == []


def test_a_straight_net_counts_the_line_before_its_resistor_in_its_length():
    cut, (trace, cable) = fields(net(site_distance_m=0.005, **FITTED))
    _, (trace_too, cable_too) = fields(net(length_m=SHORT_M))
    behind = behind_5_mm(cut.facts[0])
    np.testing.assert_allclose(20 * np.log10(trace * behind / trace_too), 0, atol=0.15)
    np.testing.assert_allclose(20 * np.log10(cable * behind / cable_too), 0, atol=0.15)


def test_placed_nets_with_and_without_a_stub_keep_their_rows():
    rows = net("N1", **FITTED), net("N2", length_m=SHORT_M)
    routes = [*with_site(), *(r.model_copy(update={"net": "N2"}) for r in placed(*POINTS_M))]
    _, (both, _) = fields_of(rows, routes)
    for i, row in enumerate(rows):
        _, (alone, _) = fields_of((row,), routes)
        np.testing.assert_allclose(both[i], alone[0])


def fields_of(rows, routes):
    """Fields of several nets at the same frequencies."""
    the_board = board(*rows, routes=routes)
    nets = nets_of(the_board)
    frequency_hz = np.repeat(FREQUENCY_HZ, len(rows), axis=0)
    return nets, fields_per_volt(the_board, CABLES, nets, frequency_hz)


@pytest.mark.parametrize("side_m", [0.003, 0.01])
def test_a_route_near_a_side_drives_the_cables_harder_by_its_coordinates(side_m):
    """Re arcosh((2 y + 2jt)/W) over Re arcosh(2jt/W), y from the centre line of 80 mm of plane."""
    one = (Cable(length_m=1.5),)
    cable = [{"name": "mains", "length_m": 1.5, "attenuation_db": 0.0, "side": "right"}]
    found = []
    for y in (0.04, side_m):
        made = board(net(length_m=LENGTH_M), routes=placed((0.02, y), (0.08, y)), cable=cable)
        nets = nets_of(made)
        found.append(fields_per_volt(made, one, nets, FREQUENCY_HZ))
    height = nets.facts[0].path.main_line.height_m
    share = [np.arccosh((2 * y + 2j * height) / 0.08).real for y in (0.0, 0.04 - side_m)]
    np.testing.assert_allclose(found[1][1] / found[0][1], share[1] / share[0], rtol=1e-6)
    np.testing.assert_allclose(found[1][0], found[0][0])


def test_a_stated_side_distance_does_not_move_a_net_that_has_coordinates():
    route = placed((0.02, 0.04), (0.08, 0.04))
    _, (_, middle) = fields(net(length_m=LENGTH_M), routes=route)
    _, (_, stated) = fields(net(length_m=LENGTH_M, side_distance_m=0.001), routes=route)
    np.testing.assert_array_equal(middle, stated)
