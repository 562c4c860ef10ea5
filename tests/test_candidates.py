"""What a person can change on a net, and what each change costs."""

import numpy as np
import pytest
from build import board, driver, interface, net, nets_of, setting

from edgeplan.board import Resistors
from edgeplan.candidates import (
    COST_NAMES,
    allowed_values,
    drive,
    list_candidates,
    list_continuous,
    list_drawn,
    setting_table,
)

THREE = driver(setting("A", 20.0), setting("B", 35.0), setting("C", 60.0))
FEW = Resistors(values_ohm=[22.0, 33.0])


def candidates_of(*nets, resistors=FEW, **changes):
    plain = {"driver": [THREE]} | changes
    return list_candidates(nets_of(board(*nets, **plain)), resistors)


def listed(candidates, net=0):
    """Pairs of setting and resistor that exist, in order."""
    rows = candidates.exists[net]
    pairs = zip(candidates.setting[net][rows], candidates.series_ohm[net][rows], strict=True)
    return [(int(s), float(r)) for s, r in pairs]


def cost(candidates, setting, ohm, net=0):
    """Cost of one candidate by name."""
    at = listed(candidates, net).index((setting, ohm))
    return {name: int(n) for name, n in zip(COST_NAMES, candidates.cost[net, at], strict=True) if n}


def test_the_first_candidate_is_the_net_as_drawn():
    found = candidates_of(net(setting=("B",), site="fitted", resistor_ohm=47.0))
    assert listed(found)[0] == (1, 47.0)
    assert cost(found, 1, 47.0) == {}


def test_every_setting_meets_every_value_of_the_site_once():
    found = candidates_of(net(setting=("B",), site="fitted", resistor_ohm=33.0))
    assert sorted(listed(found)) == [(s, r) for s in (0, 1, 2) for r in (0.0, 22.0, 33.0)]


def test_without_a_site_only_the_setting_can_change():
    assert listed(candidates_of(net(setting=("A",)))) == [(0, 0.0), (1, 0.0), (2, 0.0)]


@pytest.mark.parametrize(
    ("driver_changes", "net_changes"),
    [({"programmable": False}, {}), ({}, {"setting_fixed": True})],
)
def test_a_driver_that_cannot_change_keeps_its_setting(driver_changes, net_changes):
    found = candidates_of(net(setting=("C",), **net_changes), driver=[THREE | driver_changes])
    assert listed(found) == [(2, 0.0)]


@pytest.mark.parametrize(
    ("site", "drawn_ohm", "name"),
    [("fitted", 47.0, "value"), ("link", 0.0, "link_to_value"), ("possible", 0.0, "new_site")],
)
def test_a_changed_resistor_costs_by_the_kind_of_its_site(site, drawn_ohm, name):
    found = candidates_of(net(setting=("A",), site=site, resistor_ohm=drawn_ohm))
    assert cost(found, 0, 22.0) == {name: 1}
    assert cost(found, 2, 22.0) == {name: 1, "setting": 1}
    assert cost(found, 2, drawn_ohm) == {"setting": 1}


def test_costs_are_ordered_from_the_dearest_change_to_the_cheapest():
    # Nothing, setting, value at a fitted site, value instead of a link, value at a possible site.
    assert COST_NAMES == ("new_site", "link_to_value", "value", "setting")


def test_values_are_those_of_the_series_between_both_ends_with_a_link():
    # IEC 60063, E6: 1.0 1.5 2.2 3.3 4.7 6.8.
    found = allowed_values(Resistors(series="E6", lowest_ohm=10, highest_ohm=100))
    assert found.tolist() == [0, 10, 15, 22, 33, 47, 68, 100]


def test_stated_values_replace_the_series():
    assert allowed_values(Resistors(values_ohm=[33.0, 22.0, 33.0])).tolist() == [0, 22, 33]


def test_nets_with_fewer_candidates_are_padded_with_what_does_not_exist():
    found = candidates_of(
        net("A", setting=("A",), site="fitted", resistor_ohm=22.0), net("B", setting=("A",))
    )
    assert found.exists.sum(axis=1).tolist() == [9, 3]
    assert found.count == 9
    assert not found.exists[1, 3:].any()


def open_drain(**changes):
    return candidates_of(
        net(setting=("A",), pull_up="R1", pull_up_ohm=4700.0, **changes),
        interface=[interface("open-drain")],
        driver=[THREE | {"programmable": False}],
        resistors=Resistors(series="E3"),
    )


def test_an_open_drain_net_changes_its_pull_up_and_has_no_series_resistor():
    found = open_drain()
    ohms = found.pull_up_ohm[0].tolist()
    assert ohms[0] == 4700.0
    assert sorted(ohms) == [470, 1000, 2200, 4700, 10000]
    assert not found.series_ohm.any()
    assert found.cost[0, 0].sum() == 0
    assert {tuple(c) for c in found.cost[0, 1:]} == {(0, 0, 1, 0)}


def test_a_pull_up_without_a_place_cannot_change():
    found = candidates_of(
        net(setting=("A",), pull_up_ohm=4700.0),
        interface=[interface("open-drain")],
        driver=[THREE | {"programmable": False}],
    )
    assert found.pull_up_ohm.tolist() == [[4700.0]]


def test_the_board_as_drawn_is_one_candidate_each():
    nets = nets_of(board(net("A", site="fitted", resistor_ohm=22.0), net("B")))
    found = list_drawn(nets)
    assert found.series_ohm.tolist() == [[22.0], [0.0]]
    assert found.exists.all()


def test_a_dense_ladder_ignores_whether_a_site_exists():
    nets = nets_of(board(net(setting=("A",)), driver=[THREE]))
    found = list_continuous(nets, 200.0, count=5)
    assert found.count == 3 * 6
    assert set(found.setting[0]) == {0, 1, 2}
    assert (found.series_ohm.min(), found.series_ohm.max()) == (0.0, pytest.approx(200.0))
    steps = np.diff(np.log(found.series_ohm[0, 1:6]))
    np.testing.assert_allclose(steps, steps[0])


def test_a_state_is_one_candidate_per_net_and_spreads_over_ramp_factors():
    found = candidates_of(
        net("A", setting=("A",), site="fitted", resistor_ohm=22.0), net("B", setting=("C",))
    )
    state = found.state(np.array([4, 1]))
    assert [listed(state, net) for net in (0, 1)] == [[listed(found, 0)[4]], [listed(found, 1)[1]]]
    ramps = state.with_ramps(np.array([[0.5, np.nan, 2.0], [1.0, 2.0, 4.0]]))
    assert ramps.series_ohm.shape == (2, 3)
    assert ramps.exists.tolist() == [[True, False, True], [True, True, True]]
    assert ramps.cost.shape == (2, 3, 4)


def test_taking_nets_takes_their_candidates():
    found = candidates_of(net("A", setting=("A",)), net("B", setting=("C",)))
    assert found.take([1]).setting.tolist() == [found.setting[1].tolist()]


SPREAD = driver(
    setting(
        "A",
        ohm={"min": 20, "typ": 30, "max": 40},
        edge_s={"min": 1e-9, "typ": 1.5e-9, "max": 2e-9},
        capacitance_f={"min": 3e-12, "typ": 4e-12, "max": 5e-12},
    )
)


@pytest.mark.parametrize(
    ("corner", "ohm", "series", "farad", "edge_s"),
    [("slow", 40, 36.3, 5e-12, 2e-9), ("fast", 20, 29.7, 3e-12, 1e-9)],
)
def test_a_corner_moves_driver_pad_edge_and_resistor_to_the_same_side(
    corner, ohm, series, farad, edge_s
):
    nets = nets_of(board(net(site="fitted", resistor_ohm=33.0), driver=[SPREAD]))
    source = drive(nets, list_drawn(nets), corner, "rising", 0.1)
    assert source.resistance_ohm[0, 0] == ohm
    assert source.series_ohm[0, 0] == pytest.approx(series)
    assert source.pad_farad[0, 0] == farad
    assert source.candidate_ramp_s()[0, 0] == pytest.approx(edge_s / 0.590334, rel=1e-6)


def test_a_setting_that_lacks_a_value_does_not_exist_at_its_corner_only():
    half = driver(setting("A", edge_s={"max": 2e-9}), setting("B"))
    nets = nets_of(board(net(setting=("A",)), driver=[half]))
    candidates = list_candidates(nets, FEW)
    assert drive(nets, candidates, "slow", "rising", 0.0).exists.tolist() == [[True, True]]
    assert drive(nets, candidates, "fast", "rising", 0.0).exists.tolist() == [[False, True]]


def test_a_ramp_factor_scales_every_corner_alike():
    nets = nets_of(board(net(), driver=[SPREAD]))
    ramps = list_drawn(nets).with_ramps(np.array([[0.5, 3.0]]))
    for corner in ("slow", "fast"):
        plain = drive(nets, list_drawn(nets), corner, "rising", 0.0).candidate_ramp_s()
        scaled = drive(nets, ramps, corner, "rising", 0.0).candidate_ramp_s()
        np.testing.assert_allclose(scaled, plain * [0.5, 3.0])


def test_tables_of_settings_are_padded_where_a_driver_has_fewer():
    two = [driver(setting("A", 20.0)), driver(setting("A"), setting("B", 70.0), name="more")]
    nets = nets_of(board(net("A"), net("B", driver=("more",), setting=("B",)), driver=two))
    table = setting_table(nets, "resistance_ohm", "slow", "falling")
    np.testing.assert_array_equal(table, [[20, np.nan], [50, 70]])
