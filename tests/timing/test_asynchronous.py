"""Asynchronous nets: a deadline, a pulse that must survive, and no second crossing."""

import pytest
from build import (
    board,
    checks_of,
    delay_s,
    interface,
    net,
    nets_of,
    pole_crossing_s,
    raised_cosine_crossing_s,
)

ERROR_S = 3e-12
LOAD = {"capacitance": 30e-12, "level": 1.65}


def arrival_s(b):
    return delay_s(nets_of(b)) + raised_cosine_crossing_s(0.6)


def test_without_a_clock_to_output_the_deadline_counts_from_the_sources_edge():
    b = board(interface=[interface(deadline_s=5e-9)])
    found = checks_of(b)["deadline"]
    assert found.value[0, 0] == pytest.approx(arrival_s(b), abs=ERROR_S)
    assert found.margin[0, 0] == pytest.approx(5e-9 - arrival_s(b), abs=ERROR_S)
    assert found.share[0, 0] == pytest.approx(1 - arrival_s(b) / 5e-9, abs=1e-3)


def test_with_a_clock_to_output_it_counts_from_the_test_load():
    stated = {"driver": "out", "clock_to_output": {"max": 2e-9}, "test_load": LOAD}
    b = board(interface=[interface(deadline_s=5e-9, direction=[stated])])
    flight = arrival_s(b) - pole_crossing_s(0.5, 50 * 30e-12)
    assert checks_of(b)["deadline"].value[0, 0] == pytest.approx(2e-9 + flight, abs=ERROR_S)


def test_a_clock_to_output_without_its_test_load_leaves_the_deadline_open():
    stated = {"driver": "out", "clock_to_output": {"max": 2e-9}}
    found = checks_of(board(interface=[interface(deadline_s=5e-9, direction=[stated])]))["deadline"]
    assert found.open[0, 0]
    assert found.missing[0].value == "test load"


def test_without_a_deadline_or_a_shortest_pulse_neither_is_judged():
    found = checks_of(board())
    assert not found["deadline"].applies[0]
    assert not found["pulse width"].applies[0]


def test_a_pulse_loses_the_time_between_its_first_and_last_crossing():
    # 10 Mb/s: 100 ns, less the way from 40 to 60 %.
    found = checks_of(board(interface=[interface(shortest_pulse_s=90e-9)]))["pulse width"]
    between = raised_cosine_crossing_s(0.6) - raised_cosine_crossing_s(0.4)
    assert found.value[0, 0] == pytest.approx(100e-9 - between, abs=ERROR_S)


def test_a_pulse_of_a_net_without_a_rate_is_open():
    quiet = net(data_bps=None, activity=None)
    found = checks_of(board(quiet, interface=[interface(shortest_pulse_s=90e-9)]))["pulse width"]
    assert found.open[0, 0]
    assert found.missing[0].value == "clock_mhz or data_mbps"


def test_a_second_crossing_counts_on_an_asynchronous_net():
    assert checks_of(board())["ringback"].applies[0]
