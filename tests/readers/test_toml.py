"""Places in TOML: rows and columns of keys, however they are written."""

import pytest

from edgeplan.errors import Problem
from edgeplan.readers import toml

TEXT = """\
# é comment
stack = [  # one for each layer
  {layer = "L1", "thick ness" = 1},  # first
  {layer = "Lé", thickness = {min = 1, max = 2}},
]
a.b.c = 1

[board]
name = "x"

[[driver]]
name = "d1"
settings = [{setting = "A", edge.min = 1}]

[[driver]]
name = "d2"
[[driver.settings]]
setting = "B"
"""


@pytest.mark.parametrize(
    ("path", "row", "column"),
    [
        (("stack",), 2, 1),
        (("stack", 0), 3, 3),
        (("stack", 0, "thick ness"), 3, 18),
        (("stack", 1, "thickness", "max"), 4, 40),
        (("a", "b", "c"), 6, 1),
        (("board",), 8, 2),
        (("board", "name"), 9, 1),
        (("driver", 0, "settings", 0, "edge", "min"), 13, 29),
        (("driver", 1), 15, 3),
        (("driver", 1, "settings", 0, "setting"), 18, 1),
        (("driver", 1, "settings", 0), 17, 3),
    ],
)
def test_a_key_is_found_where_it_is_written(path, row, column):
    where = toml.read(TEXT, "board.toml").where(path)
    assert (where.row, where.column) == (row, column)


def test_a_key_that_is_not_there_has_the_place_of_its_table():
    where = toml.read(TEXT, "board.toml").where(("board", "size"))
    assert (where.row, where.column) == (8, 2)


def test_fields_are_called_by_the_names_of_their_tables():
    document = toml.read(TEXT, "board.toml")
    path = ("driver", 0, "settings", 0, "edge", "min")
    assert document.label(path) == "driver.d1.settings.A.edge.min"


@pytest.mark.parametrize(
    ("text", "row", "column"),
    [("a = \n", 1, 5), ("a = 1\na = 2\n", 2, 6), ('a = "x\n', 1, 7), ("a = [1,\n", 2, 1)],
)
def test_a_syntax_error_has_its_place(text, row, column):
    problem = toml.read(text, "board.toml")
    assert isinstance(problem, Problem)
    assert (problem.row, problem.column) == (row, column)


def test_endless_brackets_are_a_problem_and_no_crash():
    problem = toml.read("a = " + "[" * 100_000, "board.toml")
    assert isinstance(problem, Problem)
