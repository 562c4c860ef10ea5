"""From the list and the routes to the path the engine sees."""

import pytest
from build import clock, net, segment

from edgeplan.routing import CannotRoute, path_of
from edgeplan.stack import Line

LINES = {
    "L1": Line(layer="L1", width_m=1e-4, impedance_ohm=50.0, delay_s_per_m=6e-9),
    "L4": Line(layer="L4", width_m=1e-4, impedance_ohm=60.0, delay_s_per_m=6e-9),
    "L9": Line(
        layer="L9", width_m=1e-4, delay_s_per_m=6e-9, problem="layer L9 is outside; state z0"
    ),
}


def line_of(layer, width_m):
    del width_m
    return LINES[layer]


def path(net, *routes, clock_like=False):
    return path_of(net, routes, line_of, clock_like=clock_like)


def lengths_mm(path):
    return [round(piece.length_m * 1e3, 6) for piece in path.pieces]


def test_a_net_without_a_route_is_one_line_of_its_length():
    found = path(net(length_m=0.05))
    assert lengths_mm(found) == [50.0]
    assert (found.stub_m, found.receiver_piece, found.notes) == (0.0, (0,), ())


def test_the_way_to_the_site_is_cut_off_the_length():
    found = path(net(length_m=0.05, site="fitted", site_distance_m=0.003))
    assert found.stub_m == 0.003
    assert lengths_mm(found) == [47.0]
    assert found.main_length_m == pytest.approx(0.05)


def test_a_site_beyond_half_the_net_sits_in_its_middle():
    assert path(net(length_m=0.01, site="link", site_distance_m=0.02)).stub_m == 0.005


def test_without_a_site_its_distance_does_not_count():
    assert path(net(length_m=0.05, site_distance_m=0.003)).stub_m == 0.0


def test_layers_of_an_export_follow_each_other_with_their_own_lines():
    found = path(
        net(layer_lengths_m=(("L1", 0.02, None), ("L4", 0.05, 2e-4)), length_m=None, layer=None)
    )
    assert lengths_mm(found) == [20.0, 50.0]
    assert [piece.line.impedance_ohm for piece in found.pieces] == [50.0, 60.0]
    assert found.receiver_piece == (1,)
    assert found.main_line.layer == "L4"


def two_receivers(make, **changes):
    both = {"receiver": ("in", "in"), "receiver_pin": ("U2.1", "U3.1")}
    return make(**both | changes)


def test_a_clock_with_several_receivers_needs_a_route():
    with pytest.raises(CannotRoute, match=r"needs routes\.csv") as lack:
        path(two_receivers(clock), clock_like=True)
    assert lack.value.value == "route"


def test_a_data_net_with_several_receivers_is_taken_as_a_chain_and_says_so():
    found = path(two_receivers(net, length_m=0.06))
    assert lengths_mm(found) == [30.0, 30.0]
    assert found.receiver_piece == (0, 1)
    assert [piece.parent for piece in found.pieces] == [-1, 0]
    assert "equal distances is assumed" in found.notes[0]


def test_a_chain_over_two_layers_of_one_length_is_taken_too():
    halves = (("L1", 0.03, None), ("L4", 0.03, None))
    found = path(two_receivers(net, layer_lengths_m=halves))
    assert lengths_mm(found) == [30.0, 30.0]


@pytest.mark.parametrize(
    ("change", "value"),
    [({"length_m": None}, "length"), ({"layer": None}, "layer"), ({"width_m": None}, "width")],
)
def test_what_a_line_lacks_is_named(change, value):
    with pytest.raises(CannotRoute) as lack:
        path(net(**change))
    assert lack.value.value == value


def test_a_line_without_an_impedance_asks_for_it():
    with pytest.raises(CannotRoute, match="state z0") as lack:
        path(net(layer="L9"))
    assert lack.value.value == "z0"


# The strobe of the data format's own example: site, 21 mm to a tee, 9 mm and 24.5 mm branches.
TEE = (
    segment("U1.1", "site", 0.0025),
    segment("site", "tee", 0.021),
    segment("tee", "U9.5", 0.009, layer="L4"),
    segment("tee", "J7.3", 0.0245),
)
TEE_NET = two_receivers(net, receiver_pin=("J7.3", "U9.5"))


def test_a_route_gives_stub_trunk_and_branches():
    found = path(TEE_NET, *TEE, clock_like=True)
    assert found.stub_m == 0.0025
    trunk = next(p for p in found.pieces if p.parent == -1)
    assert trunk.length_m == 0.021
    far, near = (found.pieces[i] for i in found.receiver_piece)
    assert (far.length_m, near.length_m, near.line.layer) == (0.0245, 0.009, "L4")
    assert found.pieces[far.parent] is trunk
    assert found.main_length_m == pytest.approx(0.0025 + 0.021 + 0.0245)
    assert found.delay_s(found.receiver_piece[0]) == pytest.approx(6e-9 * found.main_length_m)
    assert found.notes == ()


def test_segments_may_be_written_in_either_direction_and_any_order():
    turned = [segment(s.end, s.start, s.length_m, layer=s.layer) for s in reversed(TEE)]
    found, same = (path(TEE_NET, *route) for route in (TEE, turned))
    assert found.main_length_m == pytest.approx(same.main_length_m)
    assert [found.distance_m(i) for i in found.receiver_piece] == pytest.approx(
        [same.distance_m(i) for i in same.receiver_piece]
    )


def test_pieces_between_the_pin_and_the_site_all_belong_to_the_stub():
    route = (
        segment("U1.1", "via", 0.001),
        segment("via", "site", 0.002, layer="L4"),
        segment("site", "U2.1", 0.04),
    )
    found = path(net(), *route)
    assert found.stub_m == pytest.approx(0.003)
    assert lengths_mm(found) == [40.0]


def test_a_route_without_a_site_starts_its_tree_at_the_driver():
    star = (segment("U1.1", "J7.3", 0.02), segment("U1.1", "U9.5", 0.03))
    found = path(TEE_NET, *star)
    assert found.stub_m == 0.0
    assert [piece.parent for piece in found.pieces] == [-1, -1]


def test_a_receiver_along_the_way_sits_at_the_end_of_its_own_piece():
    chain = (segment("U1.1", "U9.5", 0.02), segment("U9.5", "J7.3", 0.03))
    found = path(TEE_NET, *chain)
    assert [found.distance_m(i) for i in found.receiver_piece] == pytest.approx([0.05, 0.02])


def test_a_branch_between_pin_and_site_is_refused():
    route = (*TEE, segment("U1.1", "test point", 0.001))
    with pytest.raises(CannotRoute, match="branches between the driver pin and its resistor site"):
        path(TEE_NET, *route)


def test_a_pin_that_the_route_does_not_reach_is_named():
    with pytest.raises(CannotRoute, match=r"does not reach J7\.3"):
        path(TEE_NET, *TEE[:3])


def test_a_receiver_without_a_pin_is_not_reached():
    with pytest.raises(CannotRoute, match="does not reach a receiver pin"):
        path(net(receiver_pin=()), *TEE)


@pytest.mark.parametrize(("pin", "said"), [(("U8.1",), "U8.1"), ((), r"\(none given\)")])
def test_a_route_that_starts_elsewhere_is_refused(pin, said):
    with pytest.raises(CannotRoute, match=f"does not start at the driver pin {said}"):
        path(net(driver_pin=pin), *TEE)


def test_a_segment_takes_the_width_of_the_net_where_it_has_none():
    found = path(net(), segment("U1.1", "U2.1", 0.04, width_m=None))
    assert lengths_mm(found) == [40.0]
    with pytest.raises(CannotRoute) as lack:
        path(net(width_m=None), segment("U1.1", "U2.1", 0.04, width_m=None))
    assert lack.value.value == "width"
