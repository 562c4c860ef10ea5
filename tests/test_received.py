"""What receivers see: both corners, both edges, both states, in the direction of the edge."""

import numpy as np
import pytest
from build import (
    RAMP_S,
    board,
    delay_s,
    driver,
    exactly,
    interface,
    lossless,
    net,
    nets_of,
    pole_crossing_s,
    raised_cosine_crossing_s,
    receiver,
    seen_of,
    setting,
)

from edgeplan.candidates import list_candidates, list_drawn
from edgeplan.received import GUARD_SHARE, receive, reference_crossing_s

PICOSECOND = 1e-12


def reading(seen, corner, edge):
    return next(r for r in seen.received if (r.corner, r.edge) == (corner, edge))


def test_every_corner_and_edge_is_read_once():
    seen = seen_of(board())
    assert [r.condition for r in seen.received] == [
        (corner, edge, "run") for corner in ("slow", "fast") for edge in ("rising", "falling")
    ]


def test_an_open_drain_drives_the_falling_edge_only():
    b = board(net(pull_up="R1", pull_up_ohm=1e3), interface=[interface("open-drain")])
    assert {r.edge for r in seen_of(b).received} == {"falling"}


@pytest.mark.parametrize(("vil_v", "vih_v"), [(1.32, 1.98), (0.8, 2.0)], ids=["symmetric", "lvttl"])
def test_crossings_are_delay_and_edge_in_the_direction_of_the_edge(vil_v, vih_v):
    b = board(level=[{"name": "plain", "vil_v": vil_v, "vih_v": vih_v}])
    seen = seen_of(b)
    line = delay_s(seen.nets)
    for edge, start, end in (
        ("rising", vil_v / 3.3, vih_v / 3.3),
        ("falling", 1 - vih_v / 3.3, 1 - vil_v / 3.3),
    ):
        r = reading(seen, "slow", edge)
        first, last = (line + raised_cosine_crossing_s(x) for x in (start, end))
        assert r.first_s[0, 0] == pytest.approx(first, abs=PICOSECOND)
        assert r.last_s[0, 0] == pytest.approx(last, abs=PICOSECOND)
        assert r.arrive_s[0, 0] == pytest.approx(last, abs=PICOSECOND)
        assert r.start_level[0, 0] == pytest.approx(start)
        assert r.end_level[0, 0] == pytest.approx(end)


def test_a_weaker_pull_down_delays_the_falling_edge_alone():
    load = [receiver(capacitance_f=10e-12)]
    weak = setting(resistance_up_ohm=exactly(50), resistance_down_ohm=exactly(80))
    plain, uneven = (
        seen_of(board(driver=[driver(s)], receiver=load))
        for s in (setting(), weak | {"resistance_ohm": None})
    )
    for edge, later in (("rising", False), ("falling", True)):
        difference = reading(uneven, "slow", edge).last_s - reading(plain, "slow", edge).last_s
        assert (difference[0, 0] > 50e-12) == later
        if not later:
            assert difference[0, 0] == pytest.approx(0.0, abs=PICOSECOND)


def test_a_load_at_the_end_of_a_matched_line_is_one_pole_of_z0_and_c():
    seen = seen_of(board(receiver=[receiver(capacitance_f=10e-12)]))
    expected = delay_s(seen.nets) + pole_crossing_s(0.6, 50 * 10e-12)
    assert reading(seen, "slow", "rising").last_s[0, 0] == pytest.approx(expected, abs=PICOSECOND)


def test_a_candidate_whose_setting_lacks_a_corner_is_unknown_there_only():
    half = driver(setting("A", edge_s={"max": 1e-9}), setting("B"))
    nets = nets_of(board(net(setting=("A",)), driver=[half]))
    candidates = list_candidates(nets, board().file.resistors)
    slow, fast = (receive(nets, candidates, 0.0, corners=(c,))[0] for c in ("slow", "fast"))
    assert np.isfinite(slow.last_s).all()
    assert np.isnan(fast.last_s[0, 0])
    assert np.isfinite(fast.last_s[0, 1])


def test_the_stated_error_grows_where_a_threshold_lies_on_a_plateau():
    # The middle of a source-terminated line stands at 50 %: a threshold there has two readings.
    two = net(receiver=("in", "in"), receiver_pin=("U2.1", "U3.1"), length_m=0.3)
    fast = driver(setting(edge_s=0.3e-9))
    b = board(two, driver=[fast], level=[{"name": "plain", "vil_v": 1.0, "vih_v": 1.65}])
    r = reading(seen_of(b), "slow", "rising")
    assert r.guarded[:, 0].tolist() == [True, False]
    added = r.error_s[0, 0] - r.error_s[1, 0]
    assert added == pytest.approx(GUARD_SHARE * r.transition_s[0, 0])


def loaded(**load):
    stated = {"driver": "out", "test_load": {"capacitance": 30e-12, "level": 1.65} | load}
    return nets_of(board(interface=[interface("common-clock", direction=[stated])]))


def test_the_test_load_is_one_pole_of_driver_and_capacitor():
    found = reference_crossing_s(loaded(), "slow", "rising")
    assert found[0] == pytest.approx(pole_crossing_s(0.5, 50 * 30e-12), abs=PICOSECOND)


def test_the_pads_own_capacitance_adds_to_the_test_load():
    stated = {"driver": "out", "test_load": {"capacitance": 30e-12, "level": 1.65}}
    pad = driver(setting(capacitance_f=5e-12))
    b = board(interface=[interface("common-clock", direction=[stated])], driver=[pad])
    found = reference_crossing_s(nets_of(b), "slow", "rising")
    assert found[0] == pytest.approx(pole_crossing_s(0.5, 50 * 35e-12), abs=PICOSECOND)


def test_a_test_resistor_to_the_supply_moves_the_levels_between_which_the_edge_goes():
    # 50 ohm to 3.3 V: the rising edge starts at half the supply, the falling one ends there.
    nets = loaded(level=2.475, resistance=50.0, to=3.3)
    half = pole_crossing_s(0.5, 25 * 30e-12)
    for direction in ("rising", "falling"):
        found = reference_crossing_s(nets, "slow", direction)
        assert found[0] == pytest.approx(half, abs=PICOSECOND)


def test_without_a_test_load_there_is_no_reference():
    assert np.isnan(reference_crossing_s(nets_of(board()), "slow", "rising")).all()


def test_a_reference_is_held_for_every_candidate_and_ramp():
    nets = lossless(loaded())
    state = list_drawn(nets).with_ramps(np.array([[1.0, 4.0]]))
    r = receive(nets, state, 0.0)[0]
    assert r.reference_s.shape == (1, 1)
    moved = r.last_s[0, 1] - r.last_s[0, 0]
    assert moved == pytest.approx(raised_cosine_crossing_s(0.6, 3 * RAMP_S), abs=3 * PICOSECOND)


def test_values_per_net_become_columns_over_receivers():
    two = {"receiver": ("in", "in"), "receiver_pin": ("U2.1", "U3.1")}
    seen = seen_of(board(net("A"), net("B", **two)))
    assert seen.per_receiver(np.array([1.0, 2.0])).tolist() == [[1.0], [2.0], [2.0]]
    assert seen.shape == (2, 1)
    assert {r.corner for r in seen.at("fast")} == {"fast"}
