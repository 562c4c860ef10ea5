"""Problems: their text and their order."""

from edgeplan.errors import InputError, Problem


def test_a_problem_prints_place_field_message_and_hint():
    problem = Problem("no net 'A'", "nets.csv", 3, 7, field="net", hint="known here: B")
    assert str(problem) == "nets.csv:3:7: error: net: no net 'A'\n  hint: known here: B"


def test_problems_are_sorted_by_place_and_told_once():
    late = Problem("late", "nets.csv", 10, 1)
    early = Problem("early", "nets.csv", 9, 5)
    first = Problem("first", "board.toml", 99, 1)
    error = InputError([late, early, first, early])
    assert error.problems == (first, early, late)
    assert str(error).splitlines()[1] == "nets.csv:9:5: error: early"
