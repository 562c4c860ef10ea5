"""A plateau: an edge that stands still or turns back between the levels it is judged at."""

import pytest
from build import board, clock, driver, seen_of, segment, setting

from edgeplan import fidelity
from edgeplan.checks import condition_words


def plateau_of(b):
    (table,) = fidelity.checks_of("plateau")(seen_of(b))
    return table


def chain(ohm=50.0, edge_s=0.3e-9):
    """Put a second receiver half way along 160 mm of source-terminated line."""
    two = clock(receiver=("in", "in"), receiver_pin=("U2.1", "U3.1"))
    routes = (
        segment("U1.1", "U2.1", 0.08, name="CLK"),
        segment("U2.1", "U3.1", 0.08, name="CLK"),
    )
    return board(two, routes=routes, driver=[driver(setting(ohm=ohm, edge_s=edge_s))])


def test_the_middle_of_a_source_terminated_line_stands_at_half_level():
    found = plateau_of(chain())
    assert found.value[0, 0] == pytest.approx(0.0, abs=0.02)
    assert condition_words(int(found.condition[0, 0]))[0] == 0


def test_an_edge_longer_than_the_echo_bridges_the_step():
    assert plateau_of(chain(edge_s=3e-9)).margin[0, 0] > 0.1


def test_the_end_of_the_same_line_goes_on_in_one_direction():
    one = board(clock(length_m=0.16), driver=[driver(setting(edge_s=0.3e-9))])
    assert plateau_of(one).value[0, 0] > 0.3


def test_a_branch_that_echoes_turns_the_edge_back_and_fails():
    # A strong driver into a long open stub: the trunk's end sees the stub's echo fall.
    two = clock(receiver=("in", "in"), receiver_pin=("U2.1", "U3.1"))
    routes = (
        segment("U1.1", "tee", 0.03, name="CLK"),
        segment("tee", "U2.1", 0.005, name="CLK"),
        segment("tee", "U3.1", 0.12, name="CLK"),
    )
    b = board(two, routes=routes, driver=[driver(setting(ohm=50.0, edge_s=0.2e-9))])
    found = plateau_of(b)
    assert found.fails[0, 0]
    assert found.wants == "slower"


def test_a_mean_slope_is_one_by_definition_so_the_margin_has_no_unit():
    found = plateau_of(chain(edge_s=3e-9))
    assert found.unit == "1"
    assert found.share[0, 0] == pytest.approx(found.margin[0, 0])
