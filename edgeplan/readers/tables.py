"""Comma- and semicolon-separated tables, row by row, with the place of every cell."""

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal

from edgeplan.errors import Problem
from edgeplan.readers.files import LINE_END, Where
from edgeplan.units import UnitError

_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?", re.ASCII)
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+(?:[eE][+-]?\d+)?", re.ASCII)
_NOT_FINITE = re.compile(r"[+-]?(?:nan|inf|infinity|#n/a|#value!|#div/0!)", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Row:
    """One line of a table: its number from 1, its text and its cells without blanks around."""

    number: int
    line: str
    cells: list[str]


@dataclass(frozen=True, slots=True)
class Table:
    """A header and the rows below it; spoilt rows are told about already."""

    file: str
    separator: str
    header: Row
    rows: list[Row]
    spoilt: list[Row]
    decimal_comma: bool

    def where(self, row: Row, index: int) -> Where:
        """Return the place of a cell; its field is the header a person sees above it."""
        field = self.header.cells[index] if index < len(self.header.cells) else ""
        column = _starts(row.line, self.separator)[index] if index < len(row.cells) else 1
        return Where(self.file, row.number, column, field)

    def number(self, text: str) -> float:
        """Return the number in a cell as this table writes numbers.

        Raises
        ------
        UnitError
            Not a finite number, or a decimal sign of the other kind.
        """
        return number(text, decimal_comma=self.decimal_comma)


def decimal(text: str, *, decimal_comma: bool = False) -> Decimal:
    """Return the number a cell holds, exactly as written.

    Parameters
    ----------
    text : str
        The cell.
    decimal_comma : bool
        Whether the table writes 12,5.

    Returns
    -------
    decimal.Decimal
        Finite.

    Raises
    ------
    UnitError
        With a hint what to write.

    Examples
    --------
    >>> decimal("12,5", decimal_comma=True)
    Decimal('12.5')
    >>> decimal("12,5")
    Traceback (most recent call last):
    ...
    edgeplan.units.UnitError: '12,5' has a decimal comma
    """
    if decimal_comma and _DECIMAL_COMMA.fullmatch(text):
        return Decimal(text.replace(",", "."))
    if decimal_comma and "." in text and _NUMBER.fullmatch(text):
        hint = f"other numbers of this file have a decimal comma: write {text.replace('.', ',')}"
        raise UnitError(f"{text!r} has a decimal point", hint)
    if _NUMBER.fullmatch(text):
        return Decimal(text)
    raise UnitError(*_why_no_number(text))


def number(text: str, *, decimal_comma: bool = False) -> float:
    """Return the number a cell holds as a float.

    Examples
    --------
    >>> number("1e-05")
    1e-05
    """
    return float(decimal(text, decimal_comma=decimal_comma))


def _why_no_number(text: str) -> tuple[str, str]:
    """Say why a text is no number, and what to write."""
    if _DECIMAL_COMMA.fullmatch(text):
        hint = f"write {text.replace(',', '.')}, or separate the columns of the file with ;"
        return f"{text!r} has a decimal comma", hint
    if _NOT_FINITE.fullmatch(text):
        return f"{text!r} is not a number a board can have", "leave the cell empty if unknown"
    start = _NUMBER.match(text)
    if start and text[start.end() :].strip().isalpha():
        return f"{text!r} has a unit", "the header holds the unit: write the number in that unit"
    return f"{text!r} is not a number", "write digits with a decimal point, such as 12.5"


def read(text: str, file: str, problems: list[Problem]) -> Table | None:
    r"""Split a text into header and rows.

    Parameters
    ----------
    text : str
        The whole file.
    file : str
        Its name, for problems.
    problems : list of Problem
        Grows by every row that cannot be read.

    Returns
    -------
    Table or None
        None if there is no header.  Rows without any content are left out; a row may end
        early, but not hold more cells than the header.

    Examples
    --------
    >>> table = read("net;length_mm\nA;12,5\n", "nets.csv", [])
    >>> table.rows[0].cells, table.number("12,5")
    (['A', '12,5'], 12.5)
    """
    lines = LINE_END.split(text)
    first = next((line for line in lines if line.strip()), "")
    separator = ";" if first.count(";") > first.count(",") else ","
    rows = list(_rows(lines, separator, file, problems))
    if not rows:
        problems.append(Where(file).problem("there is no header row"))
        return None
    header, *rest = rows
    if len(header.cells) == 1 and "\t" in first:
        hint = "save it with commas or semicolons between the columns"
        problems.append(Where(file, header.number).problem("columns are separated by tabs", hint))
        return None
    spoilt = [row for row in rest if any(row.cells[len(header.cells) :])]
    problems += [_too_long(row, header, separator, file) for row in spoilt]
    kept = [row for row in rest if not any(row.cells[len(header.cells) :])]
    comma = separator == ";" and any(
        _DECIMAL_COMMA.fullmatch(cell) for row in kept for cell in row.cells
    )
    return Table(file, separator, header, kept, spoilt, comma)


def _rows(lines: list[str], separator: str, file: str, problems: list[Problem]) -> Iterator[Row]:
    """Yield each line that holds something."""
    for index, line in enumerate(lines):
        if not line.strip():
            continue
        try:
            # line by line: an open quote spoils its own row and no other
            cells = next(csv.reader((line,), delimiter=separator, strict=True))
        except csv.Error as error:
            unclosed = "end of data" in str(error)
            message = "a quote opens and never closes" if unclosed else f"not a table row: {error}"
            hint = 'a cell with quotes in it reads "say ""yes"""; a cell is one line'
            problems.append(Where(file, index + 1).problem(message, hint))
            continue
        cells = [cell.strip() for cell in cells]
        if any(cells):
            yield Row(index + 1, line, cells)


def _too_long(row: Row, header: Row, separator: str, file: str) -> Problem:
    """Word a row with more cells than the header."""
    width = len(header.cells)
    column = _starts(row.line, separator)[width]
    message = f"{len(row.cells)} cells under {width} columns"
    hint = "is there a decimal comma? Write 12.5, or separate the columns with ;"
    return Where(file, row.number, column).problem(message, hint)


def _starts(line: str, separator: str) -> list[int]:
    """Return the column, from 1, at which the text of each cell starts."""
    starts = [0]
    inside = False  # of quotes, which count only in a cell that starts with one
    for index, letter in enumerate(line):
        if letter == '"' and line[starts[-1]] == '"':
            inside = not inside
        elif letter == separator and not inside:
            starts.append(index + 1)
    return [start + 1 + _blanks(line, start, separator) for start in starts]


def _blanks(line: str, start: int, separator: str) -> int:
    """Count blanks before the text of a cell; none if the cell is empty."""
    rest = line[start:].partition(separator)[0]
    return len(rest) - len(rest.lstrip()) if rest.strip() else 0
