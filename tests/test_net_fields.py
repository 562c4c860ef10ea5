"""Where a net runs decides how its field is worked out; the ways agree where they must."""

from itertools import pairwise

import numpy as np
import pytest
from build import board, net, nets_of, segment

from edgeplan.emission.mechanism import Cable
from edgeplan.net_fields import INNER, ROUTED, STRAIGHT, fields_per_volt, kind_of, remarks

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
    assert any("3 mm of surface" in text for text in remarks(inner.facts[0], 1e9))
    assert remarks(surface.facts[0], 1e9) == []


def test_a_changed_return_plane_is_told_with_the_distance_of_a_joint():
    """lambda/20 at 1 GHz in er 4.2: 299.8 mm / 2.049 / 20 = 7.3 mm."""
    stack = [
        *FOUR,
        LAMINATE | {"layer": "D4"},
        {"layer": "L5", "kind": "signal", "thickness_m": 35e-6},
    ]
    rows = [segment("U1.1", "via", 0.03), segment("via", "U2.1", 0.03, layer="L5")]
    nets = nets_of(board(net(length_m=LENGTH_M), stack=stack, routes=rows))
    (text,) = remarks(nets.facts[0], 1e9)
    assert "from plane L2 to L4" in text
    assert "7.3 mm" in text


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
