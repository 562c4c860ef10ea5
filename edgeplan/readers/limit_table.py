"""A user's limit line as a table, and the place of everything wrong in it."""

from pathlib import PurePosixPath
from typing import NamedTuple

from edgeplan import limits
from edgeplan.errors import Problem
from edgeplan.names import instead
from edgeplan.readers import tables
from edgeplan.readers.files import Where
from edgeplan.units import UnitError

NUMBERS = (
    "frequency_hz",
    "frequency_mhz",
    "level_dbuv_per_m",
    "bandwidth_hz",
    "bandwidth_khz",
    "distance_m",
)
COLUMNS = (*NUMBERS, "detector")


class LimitRows(NamedTuple):
    """Cells of a limit table by column, and the place of each row."""

    rows: list[dict[str, str | float]]
    table: tables.Table

    def where(self, row: int, column: str) -> Where:
        """Return the place of a cell; rows count from 1, as the limit line counts them."""
        line = self.table.rows[min(row, len(self.table.rows)) - 1]
        header = self.table.header.cells
        place = Where(self.table.file, line.number, 1, column)
        return self.table.where(line, header.index(column)) if column in header else place


def limit_id(file: str) -> str:
    """Return the id of a user's line: the name of its file without the ending.

    Examples
    --------
    >>> limit_id("limits/house.csv")
    'house'
    """
    return PurePosixPath(file).stem


def read(text: str, file: str, problems: list[Problem]) -> LimitRows | None:
    r"""Read the cells of a limit table.

    Parameters
    ----------
    text : str
        The file's text.
    file : str
        Its name, for problems.
    problems : list of Problem
        Grows by everything that is wrong.

    Returns
    -------
    LimitRows or None
        None if anything is wrong.

    Examples
    --------
    >>> read("frequency_mhz,level_dbuv_per_m\n30,40\n", "house.csv", []).rows
    [{'frequency_mhz': 30.0, 'level_dbuv_per_m': 40.0}]
    """
    before = len(problems)
    table = tables.read(text, file, problems)
    if table is None:
        return None
    for index, header in enumerate(table.header.cells):
        if header and header not in COLUMNS:
            where = table.where(table.header, index)._replace(field="")
            problems.append(where.problem(f"no such column {header!r}", instead(header, COLUMNS)))
    rows = [_row(row, table, problems) for row in table.rows]
    if not rows:
        problems.append(Where(file, table.header.number).problem("the table has no rows"))
    return LimitRows(rows, table) if len(problems) == before else None


def _row(row: tables.Row, table: tables.Table, problems: list[Problem]) -> dict[str, str | float]:
    """Read one row."""
    cells: dict[str, str | float] = {}
    for index, (header, text) in enumerate(zip(table.header.cells, row.cells, strict=False)):
        if not text:
            continue
        try:
            cells[header] = table.number(text) if header in NUMBERS else text
        except UnitError as error:
            problems.append(table.where(row, index).problem(error.message, error.hint))
    return cells


def line(text: str, file: str, problems: list[Problem]) -> limits.LimitLine | None:
    """Return a user's limit line; its id is the file's name without the ending.

    Parameters
    ----------
    text : str
        The file's text.
    file : str
        Its path in the board folder.
    problems : list of Problem
        Grows by everything that is wrong, at its cell.

    Returns
    -------
    LimitLine or None
        None if anything is wrong.

    Notes
    -----
    The distance is that of the column ``distance_m``, 3 m without it.
    """
    found = read(text, file, problems)
    if found is None:
        return None
    distances = {row.pop("distance_m", 3.0) for row in found.rows}
    if len(distances) > 1:
        where = found.where(1, "distance_m")
        problems.append(where.problem("a line has one measuring distance", "split the table"))
        return None
    try:
        distance_m = float(distances.pop())
        return limits.user_line(found.rows, limit_id=limit_id(file), distance_m=distance_m)
    except limits.UserLineError as error:
        problems += [found.where(row, column).problem(text) for row, column, text in error.faults]
        return None
