"""Measured levels over frequency: a table or a two-port, with the place of everything wrong."""

from dataclasses import dataclass
from itertools import pairwise
from math import isfinite, log10
from typing import Literal, NamedTuple

from edgeplan.errors import Problem
from edgeplan.names import instead
from edgeplan.readers import tables, touchstone
from edgeplan.readers.files import Where
from edgeplan.units import UnitError

Quantity = Literal["transfer", "attenuation", "antenna factor"]

COLUMNS: dict[Quantity, tuple[str, ...]] = {
    "transfer": ("transfer_db_per_m", "transfer_db"),
    "attenuation": ("attenuation_db",),
    "antenna factor": ("antenna_factor_db_per_m",),
}
FREQUENCY_UNITS = {
    "frequency_hz": 1.0,
    "frequency_khz": 1e3,
    "frequency_mhz": 1e6,
    "frequency_ghz": 1e9,
}
TWO_PORT_ENDINGS = (".s2p", ".ts")
WIDEST_GAP = 2 ** (1 / 3)  # a third of an octave
ROUNDING = 1e-6
HIGHEST_HZ, LARGEST_DB = 1e12, 400.0  # beyond, a cell was misread or mistyped


class _Row(NamedTuple):
    """One row and the places of both its values. [Hz], [dB]"""

    frequency_hz: float
    level_db: float
    frequency_at: Where
    level_at: Where


@dataclass(frozen=True, slots=True, kw_only=True)
class Transfer:
    """Levels by rising frequency, and the file they come from.

    ``needs_antenna_factor`` says that the level is receiver over port voltage [dB]; else a
    transfer is field over port voltage [dB(1/m)].
    """

    rows: tuple[tuple[float, float], ...]
    file: str
    needs_antenna_factor: bool


def read(
    text: str,
    file: str,
    problems: list[Problem],
    *,
    quantity: Quantity = "transfer",
    judged_hz: tuple[float, float] = (30e6, 1e9),
) -> Transfer | None:
    r"""Read measured levels over frequency.

    Parameters
    ----------
    text : str
        The file's text.
    file : str
        Its path in the board folder; ``.s2p`` and ``.ts`` are two-ports, all else a table.
    problems : list of Problem
        Grows by everything that is wrong, at its cell.
    quantity : {"transfer", "attenuation", "antenna factor"}
        What the table holds; a two-port is a transfer or, as -20 lg of its voltage
        ratio, an attenuation.
    judged_hz : tuple of float
        Lowest and highest judged frequency: inside no gap may be wider than a third of
        an octave. [Hz]

    Returns
    -------
    Transfer or None
        None if anything is wrong.

    Notes
    -----
    A table may end before the judged range does: there the level is unknown.

    Examples
    --------
    >>> found = read("frequency_mhz,attenuation_db\n30,0\n35,2.5\n", "filter.csv", [],
    ...              quantity="attenuation")
    >>> found.rows
    ((30000000.0, 0.0), (35000000.0, 2.5))
    """
    before = len(problems)
    is_two_port = file.lower().endswith(TWO_PORT_ENDINGS)
    found = _two_port if is_two_port else _table
    rows, needs_factor = found(text, file, quantity, problems)
    if len(problems) == before:
        problems += _faults(rows, file, quantity, judged_hz)
    if len(problems) > before:
        return None
    return Transfer(
        rows=tuple((row.frequency_hz, row.level_db) for row in rows),
        file=file,
        needs_antenna_factor=needs_factor,
    )


def _table(
    text: str, file: str, quantity: Quantity, problems: list[Problem]
) -> tuple[list[_Row], bool]:
    """Rows of a table, and whether they are receiver voltages."""
    table = tables.read(text, file, problems)
    if table is None:
        return [], False
    places = _places(table, quantity, problems)
    if places is None:
        return [], False
    frequency, level = places
    factor = FREQUENCY_UNITS[table.header.cells[frequency]]
    rows = []
    for row in table.rows:
        hertz = _cell(table, row, frequency, problems)
        level_db = _cell(table, row, level, problems)
        if hertz is not None and level_db is not None:
            at = table.where(row, frequency), table.where(row, level)
            rows.append(_Row(hertz * factor, level_db, *at))
    return rows, table.header.cells[level] == "transfer_db"


def _places(
    table: tables.Table, quantity: Quantity, problems: list[Problem]
) -> tuple[int, int] | None:
    """Columns of frequency and level; None after noting what is wrong with the header."""
    header = table.header.cells
    allowed = (*FREQUENCY_UNITS, *COLUMNS[quantity])
    for index, name in enumerate(header):
        if name and name not in allowed:
            where = table.where(table.header, index)._replace(field="")
            problems.append(where.problem(f"no such column {name!r}", instead(name, allowed)))
    found: list[int] = []
    before = len(problems)
    for names, example in (
        (tuple(FREQUENCY_UNITS), "frequency_mhz"),
        (COLUMNS[quantity], COLUMNS[quantity][0]),
    ):
        places = [index for index, name in enumerate(header) if name in names]
        if len(places) != 1:
            what = "stands there more than once" if places else "is missing"
            message = f"a column like {example} {what}"
            problems.append(Where(table.file, table.header.number).problem(message))
        found += places
    return (found[0], found[1]) if len(problems) == before else None


def _cell(
    table: tables.Table, row: tables.Row, place: int, problems: list[Problem]
) -> float | None:
    """Return the number in a cell, None after noting why there is none."""
    text = row.cells[place] if place < len(row.cells) else ""
    where = table.where(row, place)
    if not text:
        problems.append(where.problem("the cell is empty"))
        return None
    try:
        return table.number(text)
    except UnitError as error:
        problems.append(where.problem(error.message, error.hint))
        return None


def _two_port(
    text: str, file: str, quantity: Quantity, problems: list[Problem]
) -> tuple[list[_Row], bool]:
    """Voltage ratio of a two-port; a first row at 0 Hz is left out."""
    if quantity == "antenna factor":
        problems.append(Where(file).problem("an antenna factor is a table, not a two-port"))
        return [], False
    found = touchstone.read(text, file, problems)
    if found is None:
        return [], False
    sign = -1 if quantity == "attenuation" else 1
    rows: list[_Row] = []
    for point, ratio in zip(found.points, found.voltage_ratio(), strict=True):
        where = Where(file, point.row)
        if not isfinite(abs(ratio)) or ratio == 0:
            problems.append(where.problem("nothing gets through here", "leave the row out"))
        elif point.frequency_hz != 0 or rows:
            level_db = sign * 20 * log10(abs(ratio))
            rows.append(_Row(point.frequency_hz, level_db, where, where))
    return rows, quantity == "transfer"


def _faults(
    rows: list[_Row], file: str, quantity: Quantity, judged_hz: tuple[float, float]
) -> list[Problem]:
    """Return rows out of order, levels of the wrong sign and gaps."""
    if len(rows) < 2:
        return [Where(file).problem("a table over frequency has two rows or more")]
    found = [
        row.frequency_at.problem("a frequency lies above 0 and below 1 THz", "check the unit")
        for row in rows
        if not 0 < row.frequency_hz < HIGHEST_HZ
    ]
    found += [
        row.level_at.problem(f"{row.level_db:g} dB is no level anybody measures")
        for row in rows
        if not abs(row.level_db) < LARGEST_DB
    ]
    if quantity == "attenuation":
        found += [
            row.level_at.problem(
                f"an attenuation of {row.level_db:g} dB amplifies",
                f"write {-row.level_db:g} if the table holds gain; 0 if nothing is known",
            )
            for row in rows
            if row.level_db < -ROUNDING
        ]
    return found + [
        problem
        for low, high in pairwise(rows)
        if (problem := _between(low, high, judged_hz)) is not None
    ]


def _between(low: _Row, high: _Row, judged_hz: tuple[float, float]) -> Problem | None:
    """Return what is wrong between two rows: their order, or a gap inside the judged range."""
    from_mhz, to_mhz = low.frequency_hz / 1e6, high.frequency_hz / 1e6
    if high.frequency_hz <= low.frequency_hz:
        message = f"{to_mhz:g} MHz does not lie above {from_mhz:g} MHz of the row before"
        return high.frequency_at.problem(message, "sort the rows by frequency")
    is_wide = high.frequency_hz > low.frequency_hz * WIDEST_GAP * (1 + ROUNDING) > 0
    if is_wide and low.frequency_hz < judged_hz[1] and high.frequency_hz > judged_hz[0]:
        message = f"nothing between {from_mhz:g} and {to_mhz:g} MHz"
        hint = "inside the judged range rows lie at most a third of an octave apart"
        return high.frequency_at.problem(message, hint)
    return None
