"""Rows of a model file: current over voltage, voltage over time, in three columns."""

from collections.abc import Iterable
from math import isnan, nan

from edgeplan.ibis import Rows
from edgeplan.readers.ibis_lines import Line, Tell
from edgeplan.readers.ibis_values import BadValueError, joined, number

CELLS = 4  # of a row: the place, then typical, minimum, maximum
LEAST_ROWS = 2

SAME = {"V": 1e-9, "s": 1e-18}  # places no nearer than this are one

Cells = tuple[float, float, float, float]


def read(
    lines: Iterable[Line], units: tuple[str, str], row: int, note: Tell, error: Tell
) -> Rows | None:
    r"""Read the rows below a keyword.

    Parameters
    ----------
    lines : iterable of Line
        Lines of the section that are no subparameters.
    units : tuple of str
        Of the first column and of the others.
    row : int
        Of the keyword.
    note, error : callable
        Called with row, message and hint: what was mended, and what makes the table useless.

    Returns
    -------
    Rows or None
        Ascending and without a place twice; None after an error.

    Notes
    -----
    A line of words alone carries no data and is left out with a note. Rows may come in falling
    order; equal places with different values count with their mean.

    Examples
    --------
    >>> lines = [Line("0.0 0.0 0.0 0.0", 8), Line("1V 10mA 8mA 12mA", 9)]
    >>> read(lines, ("V", "A"), 7, print, print).max
    (0.0, 0.012)
    """
    failed = False
    cells: list[Cells] = []
    for line in lines:
        try:
            found = _cells(line, units, note)
        except BadValueError as bad:
            failed = True
            error(line.row, bad.message, bad.hint)
        else:
            cells += [found] if found else []
    if failed:
        return None
    cells = _ascending(cells, SAME[units[0]], row, note)
    if len(cells) < LEAST_ROWS:
        error(row, f"the table has {len(cells) or 'no'} row{'' if len(cells) == 1 else 's'}", "")
        return None
    at, typ, low, high = zip(*cells, strict=True)
    return Rows(at=at, typ=typ, min=low, max=high, row=row)


def _cells(line: Line, units: tuple[str, str], note: Tell) -> Cells | None:
    """Return the numbers of a row; None for a line of words."""
    words = joined(line.words)
    if not any(letter.isdigit() for letter in words[0]) and words[0].upper() != "NA":
        note(line.row, f"{line.text.strip()[:30]!r} is no row and was left out", "")
        return None
    first = number(words[0], units[0])
    values = [number(word, units[1]) for word in words[1:CELLS]]
    if isnan(first) or not values or isnan(values[0]):
        raise BadValueError("a row needs its place and its typical value", "write V typ min max")
    if len(words) > CELLS:
        note(line.row, f"{words[CELLS][:30]!r} behind the fourth column was left out", "")
    if len(values) < CELLS - 1:
        note(line.row, f"{len(values) + 1} columns; what is missing counts as NA", "")
    typ, low, high = (*values, nan, nan)[:3]
    return first, typ, low, high


def _ascending(cells: list[Cells], same: float, row: int, note: Tell) -> list[Cells]:
    """Sort rows by their place; equal places become one row."""
    ordered = sorted(cells, key=lambda each: each[0])
    if ordered not in (cells, cells[::-1]):
        note(row, "rows are neither rising nor falling and were sorted", "")
    merged: list[list[Cells]] = []
    for each in ordered:
        if merged and each[0] - merged[-1][0][0] <= same:
            merged[-1].append(each)
        else:
            merged.append([each])
    if any(len(set(group)) > 1 for group in merged):
        note(row, "rows at one place differ; their mean counts", "")
    return [group[0] if len(group) == 1 else _mean(group) for group in merged]


def _mean(group: list[Cells]) -> Cells:
    """Return the mean of rows at one place."""
    typ, low, high = (sum(column) / len(group) for column in list(zip(*group, strict=True))[1:])
    return group[0][0], typ, low, high
