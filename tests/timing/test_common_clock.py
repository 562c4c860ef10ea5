"""Common clock, on lossless matched lines: flight is the delay and two known crossings."""

import csv
from pathlib import Path

import numpy as np
import pytest
from build import (
    RAMP_S,
    board,
    checks_of,
    delay_s,
    driver,
    exactly,
    interface,
    net,
    nets_of,
    pole_crossing_s,
    raised_cosine_crossing_s,
    receiver,
    setting,
)

from edgeplan.checks import condition_words

PICOSECOND = 1e-12
ERROR_S = 2 * PICOSECOND  # engine's stated error, on a line and on a test load
LOAD = {"capacitance": 30e-12, "level": 1.65}
TAU_S = 50.0 * 30e-12
REFERENCE_S = pole_crossing_s(0.5, TAU_S)
BUDGETS = Path(__file__).parents[1] / "reference" / "published_budgets.csv"


def direction(**changes):
    plain = {
        "driver": "out",
        "clock_to_output": {"min": 1e-9, "max": 4.5e-9},
        "test_load": LOAD,
        "setup": 1.5e-9,
        "hold": 0.5e-9,
    }
    return plain | changes


def bus(*directions, **changes):
    plain = {"rate_hz": 100e6, "direction": list(directions or [direction()])}
    return interface("common-clock", **plain | changes)


def flights(the_board):
    """Earliest and latest flight of the first net, by closed forms alone."""
    line = delay_s(nets_of(the_board))
    return tuple(line + raised_cosine_crossing_s(x) - REFERENCE_S for x in (0.4, 0.6))


def test_setup_slack_is_the_period_less_all_that_comes_before_it():
    b = board(interface=[bus(skew_s=0.2e-9, jitter_s=0.1e-9, crosstalk_s=0.05e-9)])
    _, latest = flights(b)
    setup = checks_of(b)["setup"]
    expected = 10e-9 - 4.5e-9 - latest - 1.5e-9 - 0.35e-9
    assert setup.margin[0, 0] == pytest.approx(expected, abs=ERROR_S)
    assert setup.share[0, 0] == pytest.approx(expected / 10e-9, abs=1e-3)
    assert condition_words(int(setup.condition[0, 0]))[1] == "slow"


def test_hold_slack_is_what_comes_before_the_hold_time_and_skew_but_not_jitter():
    b = board(interface=[bus(skew_s=0.2e-9, jitter_s=0.1e-9, crosstalk_s=0.05e-9)])
    earliest, _ = flights(b)
    hold = checks_of(b)["hold"]
    assert hold.margin[0, 0] == pytest.approx(1e-9 + earliest - 0.5e-9 - 0.2e-9, abs=ERROR_S)
    assert hold.wants == "slower"
    assert condition_words(int(hold.condition[0, 0]))[1] == "fast"


def test_a_heavier_test_load_than_the_line_makes_the_flight_negative():
    heavy = direction(test_load={"capacitance": 100e-12, "level": 1.65})
    light, loaded = (checks_of(board(interface=[bus(d)])) for d in (direction(), heavy))
    gained = pole_crossing_s(0.5, 50.0 * 100e-12) - REFERENCE_S
    difference = loaded["setup"].margin - light["setup"].margin
    assert difference[0, 0] == pytest.approx(gained, abs=ERROR_S)


def test_a_test_load_with_a_resistor_to_ground_is_one_pole_to_a_lower_level():
    # 50 ohm to 0 V behind 50 ohm: final level half the supply, time constant halved.
    load = {"capacitance": 30e-12, "level": 0.66, "resistance": 50.0, "to": 0.0}
    b = board(interface=[bus(direction(test_load=load), supply_v=exactly(3.3))])
    _, latest = flights(b)
    rising = REFERENCE_S - pole_crossing_s(0.4, 0.5 * TAU_S)
    falling = REFERENCE_S - pole_crossing_s(0.6, 0.5 * TAU_S)
    expected = 10e-9 - 4.5e-9 - 1.5e-9 - latest - max(rising, falling)
    assert checks_of(b)["setup"].margin[0, 0] == pytest.approx(expected, abs=ERROR_S)


def test_a_level_that_the_test_load_never_crosses_leaves_the_flight_open():
    load = {"capacitance": 30e-12, "level": 2.0, "resistance": 50.0, "to": 0.0}
    assert checks_of(board(interface=[bus(direction(test_load=load))]))["setup"].open[0, 0]


def test_clock_to_output_belongs_to_the_setting_it_is_stated_for():
    # 20 ohm crosses its own load earlier, so that the same net has a longer flight.
    two = driver(setting("A", 50.0), setting("B", 20.0))
    stated = direction(clock_to_output={"min": 1e-9, "max": 4.5e-9, "setting": "B"})
    own, other = (
        checks_of(board(net(setting=("A",)), interface=[bus(d)], driver=[two]))["setup"]
        for d in (direction(), stated)
    )
    later = REFERENCE_S - pole_crossing_s(0.5, 20.0 * 30e-12)
    assert own.margin[0, 0] - other.margin[0, 0] == pytest.approx(later, abs=ERROR_S)


def test_another_setting_does_not_move_the_reference():
    # Candidate 1 has the setting of half the edge; its own flight shortens by the crossing only.
    two = driver(setting("A"), setting("B", edge_s=0.5e-9))
    setup = checks_of(board(net(setting=("A",)), interface=[bus()], driver=[two]), drawn=False)[
        "setup"
    ]
    gained = 0.5 * raised_cosine_crossing_s(0.6)
    assert setup.margin[0, 1] - setup.margin[0, 0] == pytest.approx(gained, abs=ERROR_S)


def test_slow_data_is_late_and_fast_data_early_each_at_its_own_corner():
    wide = driver(setting(edge_s={"min": 0.5e-9, "typ": 1e-9, "max": 2e-9}))
    b = board(interface=[bus()], driver=[wide])
    found = checks_of(b)
    late, early = (
        delay_s(nets_of(b)) + raised_cosine_crossing_s(x, r) - pole_crossing_s(0.5, TAU_S, r)
        for x, r in ((0.6, 2 * RAMP_S), (0.4, 0.5 * RAMP_S))
    )
    assert found["setup"].margin[0, 0] == pytest.approx(10e-9 - 6e-9 - late, abs=ERROR_S)
    assert found["hold"].margin[0, 0] == pytest.approx(0.5e-9 + early, abs=ERROR_S)


def budgets():
    lines = BUDGETS.read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


@pytest.mark.parametrize("row", budgets(), ids=lambda row: row["name"])
def test_a_published_budget_closes_as_printed_on_a_board_with_its_flight(row):
    # The line is as long as the published flight time asks for: delay + crossing - test load.
    ns = {name: float(value) * 1e-9 for name, value in row.items() if name != "name"}
    per_m = delay_s(nets_of(board(net(length_m=1.0))))
    wanted = ns["flight_ns"] + REFERENCE_S - raised_cosine_crossing_s(0.6)
    stated = direction(
        clock_to_output={"min": 1e-9, "max": ns["clock_to_output_ns"]}, setup=ns["setup_ns"]
    )
    b = board(
        net(length_m=wanted / per_m),
        interface=[bus(stated, rate_hz=1 / ns["period_ns"], skew_s=ns["skew_ns"])],
    )
    setup = checks_of(b)["setup"]
    assert setup.margin[0, 0] == pytest.approx(ns["slack_ns"], abs=ERROR_S)
    assert abs(setup.margin[0, 0] - ns["slack_ns"]) <= 2 * setup.error_high[0, 0]


@pytest.mark.parametrize(
    ("lack", "check", "value", "of"),
    [
        ({"setup": None}, "setup", "setup", "interface bus, driver out"),
        ({"hold": None}, "hold", "hold", "interface bus, driver out"),
        (
            {"clock_to_output": {"min": 1e-9}},
            "setup",
            "maximum clock-to-output",
            "interface bus, driver out",
        ),
        (
            {"clock_to_output": {"max": 1e-9}},
            "hold",
            "minimum clock-to-output",
            "interface bus, driver out",
        ),
        ({"test_load": None}, "setup", "test load", "interface bus, driver out"),
        ({"test_load": None}, "hold", "test load", "interface bus, driver out"),
    ],
)
def test_a_value_that_is_not_stated_leaves_its_check_open_and_is_named(lack, check, value, of):
    table = checks_of(board(interface=[bus(direction(**lack))]))[check]
    assert table.open[0, 0]
    assert (table.missing[0].value, table.missing[0].of) == (value, of)
    assert table.because[0] == f"{of} states no {value}"


def test_a_rate_or_a_direction_that_is_not_stated_opens_setup_and_hold():
    no_rate = checks_of(board(interface=[bus(rate_hz=None)]))
    other = checks_of(board(interface=[bus(direction(driver="else"))]))
    for name in ("setup", "hold"):
        assert no_rate[name].missing[0].value == "rate"
        assert no_rate[name].missing[0].of == "interface bus"
        assert other[name].missing[0].value == "direction"


def test_a_missing_hold_leaves_setup_decided():
    found = checks_of(board(interface=[bus(direction(hold=None))]))
    assert found["setup"].decided[0, 0]


def test_each_driver_of_an_interface_has_its_own_times():
    drivers = [driver(), driver(name="other")]
    two = bus(direction(), direction(driver="other", setup=2.5e-9))
    found = checks_of(board(net("A"), net("B", driver=("other",)), interface=[two], driver=drivers))
    difference = found["setup"].margin[0, 0] - found["setup"].margin[1, 0]
    assert difference == pytest.approx(1e-9, abs=PICOSECOND)


def test_every_receiver_of_a_chain_counts_with_its_own_wave():
    # Half way along an open, source-terminated line the level waits for the echo: it is the mean
    # of the source's edge half a delay and one and a half delays later.
    two = net(receiver=("in", "in"), receiver_pin=("U2.1", "U3.1"))
    b = board(two, interface=[bus()])
    line = delay_s(nets_of(b))
    time = np.linspace(0, 4e-9, 400_001)
    far = np.clip((time - 0.5 * line) / RAMP_S, 0, 1), np.clip((time - 1.5 * line) / RAMP_S, 0, 1)
    middle = 0.5 - 0.25 * (np.cos(np.pi * far[0]) + np.cos(np.pi * far[1]))
    late, early = time[np.searchsorted(middle, 0.6)], time[np.searchsorted(middle, 0.4)]
    found = checks_of(b)
    expected = 10e-9 - 6e-9 - (late - REFERENCE_S)
    assert late > line + raised_cosine_crossing_s(0.6)
    assert found["setup"].margin[0, 0] == pytest.approx(expected, abs=ERROR_S)
    assert found["hold"].margin[0, 0] == pytest.approx(0.5e-9 + early - REFERENCE_S, abs=ERROR_S)
    assert condition_words(int(found["setup"].condition[0, 0]))[0] == 0


def test_an_input_transition_is_judged_where_the_receiver_states_one():
    limit = {"time": 1.2e-9, "levels": "10-90"}
    table = checks_of(board(interface=[bus()], receiver=[receiver(longest_transition=limit)]))[
        "transition"
    ]
    assert table.value[0, 0] == pytest.approx(1e-9, rel=1e-3)
    assert table.margin[0, 0] == pytest.approx(0.2e-9, abs=ERROR_S)
    assert not checks_of(board(interface=[bus()]))["transition"].applies[0]


# Thresholds at 20 and 80 % of the swing: 2 asin(0.6)/pi of the whole raised cosine.
@pytest.mark.parametrize(("levels", "span"), [("20-80", 0.6), ("30-70", 0.4), ("vil-vih", 0.4)])
def test_a_transition_is_the_share_of_the_edge_between_its_levels(levels, span):
    limit = {"time": 1e-9, "levels": levels}
    own = [{"name": "plain", "vil_v": 0.99, "vih_v": 2.31}]
    b = board(interface=[bus()], receiver=[receiver(longest_transition=limit)], level=own)
    table = checks_of(b)["transition"]
    expected = 1e-9 * np.arcsin(span) / np.arcsin(0.8)
    assert table.value[0, 0] == pytest.approx(expected, rel=2e-3)
