"""A missing minimum edge: from which value on the net would be inside, checked by giving it."""

import numpy as np
import pytest
from build import (
    bench_of,
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

from edgeplan.candidates import list_drawn
from edgeplan.choice.settles import minimum_edges
from edgeplan.evaluate import evaluate

LONGEST_S = 3e-9
CABLE = [{"name": "mains", "length_m": 1.5, "attenuation_db": 14.0}]


def the_board(edge_s, *nets, **changes):
    """Judge an open 50 mm line behind a strong driver for overshoot and emission."""
    plain = {
        "interface": [interface("clock")],
        "driver": [driver(setting(ohm=15.0, edge_s=edge_s))],
        "receiver": [receiver(overshoot="10 %", capacitance_f=3e-12)],
        "cable": CABLE,
    }
    return board(*(nets or (clock(clock_hz=20e6, length_m=0.05),)), **plain | changes)


def sentence(b):
    (found,) = minimum_edges(facts_of(b), b, bench_of(b))
    return found


def passes(edge_s):
    b = the_board(edge_s)
    nets = nets_of(b)
    return bool(evaluate(nets, list_drawn(nets), bench_of(b)).passes[0, 0])


def test_the_value_named_is_the_smallest_that_makes_the_net_inside():
    words = sentence(the_board({"max": LONGEST_S}))
    assert words.startswith("inside if it is ")
    assert words.endswith(" or more (10-90 %)")
    number, unit = words.split()[4:6]
    named_s = float(number) * {"ns": 1e-9, "ps": 1e-12}[unit]
    assert 0.2e-9 < named_s < LONGEST_S
    assert passes({"min": 1.03 * named_s, "max": LONGEST_S})
    assert not passes({"min": 0.9 * named_s, "max": LONGEST_S})


def test_a_net_that_nothing_hurts_is_inside_for_any_minimum():
    quiet = net(data_bps=1e6, length_m=0.005)
    b = the_board(
        {"max": LONGEST_S},
        quiet,
        interface=[interface()],
        driver=[driver(setting(ohm=60.0, edge_s={"max": LONGEST_S}))],
        cable=[],
        facts={"no_cables": True},
    )
    assert sentence(b) == "inside for any minimum edge"


def test_a_net_that_its_maximum_already_fails_is_not_mended_by_any_minimum():
    limit = {"time": 1e-9, "levels": "10-90"}
    b = the_board({"max": LONGEST_S}, receiver=[receiver(longest_transition=limit)])
    assert sentence(b) == (
        "no minimum edge would bring it inside as drawn: with the maximum edge it fails transition"
    )


@pytest.mark.parametrize("edge_s", [exactly(1e-9), {"min": 1e-9}, 1e-9])
def test_where_the_minimum_is_not_what_is_missing_nothing_is_said(edge_s):
    own = setting(ohm=15.0) | {"edge_s": edge_s}
    assert sentence(the_board(None, driver=[driver(own)])) == ""


def test_data_whose_strobe_waits_for_the_same_value_are_settled_together():
    load = {"capacitance": 10e-12, "level": 1.65}
    times = {"valid_before": 3e-9, "valid_after": 3e-9, "setup": 1e-9, "hold": 1e-9}
    bus = interface(
        "source-synchronous",
        rate_hz=20e6,
        clock_net="STB",
        direction=[{"driver": "out", "test_load": load} | times],
    )
    nets = (net("D", length_m=0.02, data_bps=20e6), clock("STB", clock_hz=20e6, length_m=0.02))
    b = the_board(
        {"max": LONGEST_S},
        *nets,
        interface=[bus],
        driver=[driver(setting(ohm=50.0, edge_s={"max": LONGEST_S}))],
    )
    found = minimum_edges(facts_of(b), b, bench_of(b))
    assert all(words.startswith("inside") for words in found)
    assert np.size(found) == 2
