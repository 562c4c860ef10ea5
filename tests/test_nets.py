"""From records to arrays: what is judged, at which levels, with which loads."""

import numpy as np
import pytest
from build import (
    STACK,
    board,
    clock,
    driver,
    exactly,
    facts_of,
    interface,
    net,
    nets_of,
    receiver,
    setting,
)

from edgeplan.drives import CORNERS
from edgeplan.nets import resolve

RANGE = {"min": 3.0, "typ": 3.3, "max": 3.6}


def blocked(*nets, **changes):
    """Resolve a board whose first net cannot be simulated."""
    _, found = resolve(board(*nets, **changes))
    return found[0]


def test_every_digital_net_is_resolved_and_the_others_left_out():
    kinds = [net("A"), net("B", kind="power"), net("C", kind="differential"), net("D")]
    facts, stopped = resolve(board(*kinds))
    assert [f.net.net for f in facts] == ["A", "D"]
    assert stopped == []


@pytest.mark.parametrize(
    ("change", "words", "value"),
    [
        ({"interface": None}, "give an interface", "interface"),
        ({"driver": ()}, "give a driver", "driver"),
        ({"receiver": ()}, "give a receiver", "receiver"),
        ({"length_m": None}, "no length is given", "length"),
    ],
)
def test_what_a_net_lacks_is_named_as_the_value_to_give(change, words, value):
    lack = blocked(net(**change))
    assert words in lack.reason
    assert (lack.missing.value, lack.missing.of) == (value, "net N1")


def test_a_net_driven_from_two_sides_is_not_judged_yet_and_needs_no_value():
    lack = blocked(net(driver=("out", "out")))
    assert "2 drivers" in lack.reason
    assert lack.missing is None


def test_a_supply_without_both_ends_is_missing():
    lack = blocked(net(), interface=[interface(supply_v=3.3)])
    assert "states no minimum and maximum supply" in lack.reason
    assert (lack.missing.value, lack.missing.of) == ("supply", "interface bus")


@pytest.mark.parametrize(
    ("layers", "table", "value"),
    [
        (STACK[:3], {"L1": [(0.2e-3, 50.0), (0.3e-3, 40.0)]}, "z0"),
        ([STACK[0], STACK[1] | {"thickness_m": 1e-7}, STACK[2]], {}, "width"),  # unsolved
        (STACK[:2], {}, "plane"),
    ],
)
def test_what_a_line_lacks_is_missing_of_its_layer_not_of_each_net(layers, table, value):
    lack = blocked(net(), stack=layers, impedance=table)
    assert (lack.missing.value, lack.missing.of) == (value, "layer L1")


def test_several_settings_and_none_given_is_a_missing_setting():
    two = driver(setting("A"), setting("B"))
    assert blocked(net(), driver=[two]).missing.value == "setting"
    assert facts_of(board(net(setting=("B",)), driver=[two]))[0].setting == 1


def test_before_firmware_the_setting_is_as_drawn_unless_stated():
    two = driver(setting("A"), setting("B"))
    same, other = facts_of(
        board(net(setting=("B",)), net("N2", setting=("B",), setting_boot=("A",)), driver=[two])
    )
    assert (same.setting_boot, other.setting_boot) == (1, 0)


@pytest.mark.parametrize(
    ("timing", "make", "judged"),
    [
        ("common-clock", net, "common-clock"),
        ("common-clock", clock, "clock"),
        ("source-synchronous", clock, "clock"),
        ("clock", clock, "clock"),
        ("clock", net, "asynchronous"),
        ("strobe", clock, "strobe"),
        ("open-drain", net, "open-drain"),
    ],
)
def test_clock_and_data_of_an_interface_are_judged_each_in_its_class(timing, make, judged):
    assert facts_of(board(make(), interface=[interface(timing)]))[0].timing == judged


def test_the_named_clock_net_of_an_interface_is_a_clock_without_saying_so():
    b = board(
        net("CK", activity=None, clock_hz=1e6, data_bps=None),
        interface=[interface("common-clock", clock_net="CK")],
    )
    assert (facts_of(b)[0].timing, facts_of(b)[0].activity) == ("clock", "clock")


@pytest.mark.parametrize(
    ("the_net", "duty", "bit_s"),
    [
        (clock(clock_hz=50e6), 0.5, 10e-9),
        (clock(clock_hz=50e6), 0.4, 8e-9),
        (net(data_bps=100e6), 0.5, 10e-9),
        (net(data_bps=None), 0.5, np.nan),
    ],
)
def test_the_shortest_time_between_edges_is_half_a_period_or_a_bit(the_net, duty, bit_s):
    facts = facts_of(board(the_net, interface=[interface(duty=duty)]))[0]
    np.testing.assert_allclose(facts.bit_s, bit_s)


def test_thresholds_are_shares_of_the_supply_of_each_corner():
    nets = nets_of(board(interface=[interface(supply_v=RANGE)]))
    for corner, supply in zip(CORNERS, (3.0, 3.3, 3.6), strict=True):
        assert nets.swing_v[corner][0] == supply
        assert nets.threshold_low[corner][0] == pytest.approx(1.32 / supply)
        assert nets.threshold_high[corner][0] == pytest.approx(1.98 / supply)


def test_a_shipped_level_family_is_known_and_a_receiver_may_have_its_own():
    # JESD8C.01: 0.8 and 2.0 V.
    b = board(
        net(receiver=("in", "own"), receiver_pin=("U2.1", "U3.1")),
        interface=[interface(levels="lvttl-3v3")],
        receiver=[receiver(), receiver("own", levels="plain")],
    )
    nets = nets_of(b)
    np.testing.assert_allclose(nets.threshold_low["slow"] * 3.3, [0.8, 1.32])
    np.testing.assert_allclose(nets.threshold_high["slow"] * 3.3, [2.0, 1.98])


@pytest.mark.parametrize(
    ("levels", "low", "high"), [("10-90", 0.1, 0.9), ("20-80", 0.2, 0.8), ("vil-vih", 0.4, 0.6)]
)
def test_a_transition_is_judged_between_the_levels_of_its_limit(levels, low, high):
    limit = {"time": 2e-9, "levels": levels}
    nets = nets_of(board(receiver=[receiver(longest_transition=limit)]))
    assert nets.transition_low["slow"][0] == pytest.approx(low)
    assert nets.transition_high["slow"][0] == pytest.approx(high)
    assert nets.longest_transition_s[0] == 2e-9


@pytest.mark.parametrize(("limit", "share"), [("0.33 V", 0.1), ("20 %", 0.2)])
def test_an_overshoot_limit_in_volts_or_as_a_share_is_a_share_of_the_swing(limit, share):
    nets = nets_of(board(receiver=[receiver(overshoot=limit)]))
    assert nets.overshoot_limit["fast"][0] == pytest.approx(share)
    assert np.isnan(nets_of(board()).overshoot_limit["fast"][0])


def test_loads_are_largest_when_slow_and_smallest_when_fast():
    load = {"min": 3e-12, "typ": 4e-12, "max": 6e-12}
    nets = nets_of(board(receiver=[receiver(capacitance_f=load)]))
    assert [nets.trees[c].node_farad[0] for c in CORNERS] == [6e-12, 4e-12, 3e-12]


def test_bus_capacitance_and_pull_up_load_the_last_receiver():
    b = board(
        net(pull_up="R1", pull_up_ohm=1e3, bus_capacitance_f=1e-10),
        interface=[interface("open-drain")],
        receiver=[receiver(capacitance_f=1e-12)],
    )
    tree = nets_of(b).trees["slow"]
    assert tree.node_farad[0] == pytest.approx(101e-12)
    assert tree.node_siemens[0] == pytest.approx(1e-3)


def many():
    """Put three nets on a board, the middle one with two receivers."""
    two = {"receiver": ("in", "big"), "receiver_pin": ("U2.1", "U3.1")}
    return board(
        net("A", length_m=0.01),
        net("B", length_m=0.02, **two),
        net("C", length_m=0.03, receiver=("big",)),
        receiver=[receiver(), receiver("big", capacitance_f=9e-12, overshoot="10 %")],
    )


def test_rows_stand_per_receiver_and_know_their_net():
    nets = nets_of(many())
    assert nets.receiver_net.tolist() == [0, 1, 1, 2]
    assert nets.first_receiver.tolist() == [0, 1, 3, 4]


def test_taking_nets_is_the_same_as_building_them_alone():
    taken = nets_of(many()).take([2, 1])
    b = many()
    alone = nets_of(b.model_copy(update={"nets": (b.nets[2], b.nets[1])}))
    assert [f.net.net for f in taken.facts] == ["C", "B"]
    for name in ("receiver_net", "first_receiver", "longest_transition_s", "bit_s"):
        np.testing.assert_array_equal(getattr(taken, name), getattr(alone, name))
    for corner in CORNERS:
        np.testing.assert_array_equal(
            taken.trees[corner].node_farad, alone.trees[corner].node_farad
        )
        np.testing.assert_array_equal(taken.trees[corner].length_m, alone.trees[corner].length_m)
        np.testing.assert_array_equal(taken.overshoot_limit[corner], alone.overshoot_limit[corner])


def test_a_supply_without_a_typical_value_is_labelled_by_its_middle():
    nets = nets_of(board(interface=[interface(supply_v={"min": 3.0, "max": 3.6})]))
    assert nets.swing_v["typical"][0] == pytest.approx(3.3)
    assert nets_of(board(interface=[interface(supply_v=exactly(2.5))])).swing_v["fast"][0] == 2.5


def test_a_receiver_with_a_largest_capacitance_alone_misses_its_smallest():
    lack = blocked(net(), receiver=[receiver(capacitance_f={"max": 5e-12})])
    assert (lack.missing.value, lack.missing.of) == ("minimum capacitance", "receiver in")


def test_a_typical_capacitance_stands_in_for_an_end_that_is_not_stated():
    nets = nets_of(board(receiver=[receiver(capacitance_f={"typ": 4e-12, "max": 5e-12})]))
    assert [nets.trees[c].node_farad[0] for c in CORNERS] == [5e-12, 4e-12, 4e-12]
