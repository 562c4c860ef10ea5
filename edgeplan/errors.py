"""What is wrong with the input, told to the person with the file: place, field, hint."""

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Problem:
    """One wrong value, or a note about a strange one.  Rows and columns count from 1.

    Examples
    --------
    >>> print(Problem("'12o mm' is not a length", "nets.csv", 14, 9,
    ...               field="length", hint="write 12 mm or 480 mil"))
    nets.csv:14:9: error: length: '12o mm' is not a length
      hint: write 12 mm or 480 mil
    """

    message: str
    file: str
    row: int
    column: int
    field: str = ""
    hint: str = ""
    severity: str = "error"

    def __str__(self) -> str:
        field = f"{self.field}: " if self.field else ""
        hint = f"\n  hint: {self.hint}" if self.hint else ""
        return f"{self.file}:{self.row}:{self.column}: {self.severity}: {field}{self.message}{hint}"


def _place(problem: Problem) -> tuple[str, int, int, str, str]:
    """Order problems by file, row and column; equal places by their words."""
    return (problem.file, problem.row, problem.column, problem.field, problem.message)


class InputError(Exception):
    """Every problem that one pass over the input found.

    Parameters
    ----------
    problems : iterable of Problem
        At least one; kept once each, sorted by file, row and column.

    Examples
    --------
    >>> error = InputError([Problem("no such net", "routes.csv", 2, 1),
    ...                     Problem("no such layer", "nets.csv", 9, 4)])
    >>> print(error)
    nets.csv:9:4: error: no such layer
    routes.csv:2:1: error: no such net
    """

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(sorted(set(problems), key=_place))
        super().__init__(*self.problems)

    def __str__(self) -> str:
        return "\n".join(str(problem) for problem in self.problems)
