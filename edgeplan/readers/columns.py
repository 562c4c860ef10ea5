"""Columns of nets.csv and routes.csv: what each holds, its units, and how a cell is read."""

import dataclasses
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

from edgeplan.names import instead
from edgeplan.readers import tables
from edgeplan.readers.cell_units import unit_problem
from edgeplan.readers.files import Where
from edgeplan.units import RESISTANCE, UnitError

Cell = str | float | bool | tuple[str, ...]
Kind = Literal["name", "names", "number", "word", "switch"]

LENGTH_UNITS = {"mm": "1e-3", "um": "1e-6", "mil": "25.4e-6", "inch": "25.4e-3", "m": "1"}
FREQUENCY_UNITS = {"mhz": "1e6", "khz": "1e3", "hz": "1", "ghz": "1e9"}
RATE_UNITS = {"mbps": "1e6", "kbps": "1e3", "bps": "1", "gbps": "1e9"}
RESISTANCE_UNITS = {"ohm": "1", "kohm": "1e3"}
CAPACITANCE_UNITS = {"pf": "1e-12", "nf": "1e-9"}
TIME_UNITS = {"ms": "1e-3", "us": "1e-6", "s": "1"}

SWITCH = {"yes": True, "no": False, "true": True, "false": False}


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column a person may fill in.

    ``lowest`` bounds a number from below; ``zero`` says whether the bound itself is allowed.
    """

    name: str
    field: str
    meaning: str
    kind: Kind = "name"
    units: Mapping[str, str] = dataclasses.field(default_factory=dict)
    words: tuple[str, ...] = ()
    lowest: float | None = 0.0
    zero: bool = True

    def headers(self) -> dict[str, Decimal]:
        """Return the headers under which the column may stand, with their factor to SI."""
        if not self.units:
            return {self.name: Decimal(1)}
        return {f"{self.name}_{unit}": Decimal(factor) for unit, factor in self.units.items()}


def _length(name: str, field: str, meaning: str, *, zero: bool = True) -> Column:
    """Return a column of lengths."""
    return Column(
        name=name, field=field, meaning=meaning, kind="number", units=LENGTH_UNITS, zero=zero
    )


def _coordinate(name: str) -> Column:
    """Return a column of board coordinates, which may lie on either side of the origin."""
    meaning = "coordinate from the lower left corner of the board"
    return Column(
        name=name, field=name, meaning=meaning, kind="number", units=LENGTH_UNITS, lowest=None
    )


NET_COLUMNS = (
    Column(name="net", field="net", meaning="name of the net at the driver's end"),
    Column(name="far_net", field="far_net", meaning="name behind the series part"),
    Column(
        name="kind",
        field="kind",
        kind="word",
        words=("digital", "differential", "analog", "power"),
        meaning="only digital nets are judged; pairs and supplies are recognised by name",
    ),
    Column(name="interface", field="interface", meaning="an [[interface]] of board.toml"),
    Column(
        name="activity",
        field="activity",
        kind="word",
        words=("clock", "random", "pattern"),
        meaning="how the net toggles",
    ),
    Column(
        name="clock",
        field="clock_hz",
        kind="number",
        units=FREQUENCY_UNITS,
        zero=False,
        meaning="frequency of a net that toggles like a clock",
    ),
    Column(
        name="data",
        field="data_bps",
        kind="number",
        units=RATE_UNITS,
        zero=False,
        meaning="bit rate of a net that carries data",
    ),
    Column(
        name="pattern_bits",
        field="pattern_bits",
        kind="number",
        zero=False,
        meaning="activity pattern: length of a pseudo-random pattern that repeats",
    ),
    Column(
        name="burst_length",
        field="burst_length_s",
        kind="number",
        units=TIME_UNITS,
        zero=False,
        meaning="how long the net is active at a stretch, with burst_period",
    ),
    Column(
        name="burst_period",
        field="burst_period_s",
        kind="number",
        units=TIME_UNITS,
        zero=False,
        meaning="from the start of one burst to that of the next",
    ),
    Column(
        name="driver",
        field="driver",
        kind="names",
        meaning="[[driver]] names, one for each output on the net, separated by blanks",
    ),
    Column(
        name="driver_pin", field="driver_pin", kind="names", meaning="pins, aligned with driver"
    ),
    Column(
        name="setting",
        field="setting",
        kind="names",
        meaning="settings the firmware runs with, aligned with driver; - for none",
    ),
    Column(
        name="setting_boot",
        field="setting_boot",
        kind="names",
        meaning="settings before firmware runs, aligned with driver; - for none",
    ),
    Column(
        name="setting_fixed",
        field="setting_fixed",
        kind="switch",
        meaning="yes: nobody can change the settings of this net",
    ),
    Column(
        name="bank",
        field="bank",
        kind="names",
        meaning="outputs with the same bank share one setting; aligned with driver; - for none",
    ),
    Column(name="resistor", field="resistor", meaning="name of the series resistor"),
    Column(
        name="resistor",
        field="resistor_ohm",
        kind="number",
        units=RESISTANCE_UNITS,
        meaning="its value as drawn",
    ),
    Column(
        name="site",
        field="site",
        kind="word",
        words=("fitted", "link", "possible", "none"),
        meaning="fitted: with a value; link: 0 ohm; possible: could be added; none: never",
    ),
    Column(name="array", field="array", meaning="elements of one array share one value"),
    _length("site_distance", "site_distance_m", "from the driver's pin to the resistor"),
    Column(
        name="receiver",
        field="receiver",
        kind="names",
        meaning="[[receiver]] names, one for each input on the net, separated by blanks",
    ),
    Column(
        name="receiver_pin",
        field="receiver_pin",
        kind="names",
        meaning="pins, aligned with receiver",
    ),
    _length(
        "length", "length_m", "routed length; on this layer if it has rows per layer", zero=False
    ),
    Column(name="layer", field="layer", meaning="a layer of the stack"),
    _length("width", "width_m", "width of the trace", zero=False),
    _length("side_distance", "side_distance_m", "from the trace to the nearest side of the plane"),
    Column(name="pull_up", field="pull_up", meaning="name of the pull-up resistor"),
    Column(
        name="pull_up",
        field="pull_up_ohm",
        kind="number",
        units=RESISTANCE_UNITS,
        zero=False,
        meaning="its value as drawn",
    ),
    Column(
        name="bus_capacitance",
        field="bus_capacitance_f",
        kind="number",
        units=CAPACITANCE_UNITS,
        zero=False,
        meaning="of everything on an open-drain net",
    ),
)

ROUTE_COLUMNS = (
    Column(name="net", field="net", meaning="a net of nets.csv"),
    Column(name="from", field="start", meaning="a pin, site, or the name of a branch point"),
    Column(name="to", field="end", meaning="the end further from the driver"),
    _length("length", "length_m", "length of this piece", zero=False),
    Column(name="layer", field="layer", meaning="a layer of the stack"),
    _length("width", "width_m", "width of the trace", zero=False),
    _coordinate("x1"),
    _coordinate("y1"),
    _coordinate("x2"),
    _coordinate("y2"),
)


@dataclass(frozen=True, slots=True)
class Placed:
    """A column of ours at its place in a table, with the factor of its header to SI."""

    index: int
    column: Column
    factor: Decimal

    def read(self, text: str, table: tables.Table) -> Cell:
        """Return what a cell holds, in SI.

        Raises
        ------
        UnitError
            With a hint what to write instead.
        """
        match self.column.kind:
            case "number":
                return self._number(text, table)
            case "names":
                return tuple("" if name == "-" else name for name in text.split())
            case "word":
                return _word(text, self.column.words)
            case "switch":
                return SWITCH[_word(text, tuple(SWITCH))]
        return text

    def _number(self, text: str, table: tables.Table) -> float:
        """Read a number in the unit of the header; resistors may be written 4k7."""
        value = None
        if self.column.units is RESISTANCE_UNITS and text.strip("0123456789.,eE+-"):
            value = _resistance(text)
        if value is None:
            self._refuse_unit(text, table)
            value = tables.decimal(text, decimal_comma=table.decimal_comma) * self.factor
        return self._bounded(float(value), text)

    def _refuse_unit(self, text: str, table: tables.Table) -> None:
        """Refuse a unit in the cell: the header holds one, perhaps another."""
        name, units = self.column.name, self.column.units
        header = next((unit for unit in units if Decimal(units[unit]) == self.factor), None)
        if header is None or text[-1:].isdigit():
            return
        found = unit_problem(text, name, units, header, decimal_comma=table.decimal_comma)
        if found is not None:
            raise UnitError(*found)

    def _bounded(self, value: float, text: str) -> float:
        """Refuse a number below the column's bound."""
        lowest = self.column.lowest
        if lowest is not None and (value < lowest or (value == lowest and not self.column.zero)):
            least = "0 or more" if self.column.zero else "above 0"
            raise UnitError(f"{text} has to be {least}", "leave the cell empty if unknown")
        if value in (float("inf"), float("-inf")):
            raise UnitError(f"{text} is not a number a board can have", "is a zero too many in it?")
        return value


def _resistance(text: str) -> Decimal | None:
    """Return a value written as it is marked on the part, such as 33R or 4k7."""
    try:
        return Decimal(repr(RESISTANCE.parse(text)))
    except UnitError:
        return None


def _word(text: str, words: tuple[str, ...]) -> str:
    """Return one of the words a column knows, whatever its case."""
    if text.lower() in words:
        return text.lower()
    raise UnitError(f"{text!r} is none of {', '.join(words)}", instead(text, words))


def known_headers(columns: tuple[Column, ...]) -> dict[str, tuple[Column, Decimal]]:
    """Return every header our columns may have.

    Examples
    --------
    >>> sorted(known_headers(ROUTE_COLUMNS))[:3]
    ['from', 'layer', 'length_inch']
    """
    return {
        header: (column, factor)
        for column in columns
        for header, factor in column.headers().items()
    }


def place(
    table: tables.Table, columns: tuple[Column, ...], rename: Mapping[str, str]
) -> tuple[list[Placed], list[int], list[tuple[Where, str, str]]]:
    """Find our columns in a table's header.

    Parameters
    ----------
    table : Table
        The table.
    columns : tuple of Column
        Those that may be in it.
    rename : mapping
        Header of the file to header of ours.

    Returns
    -------
    tuple
        Our columns; indices of headers nobody knows; places, messages and hints of columns
        that are there twice.
    """
    known = known_headers(columns)
    placed: dict[str, Placed] = {}
    unknown: list[int] = []
    twice: list[tuple[Where, str, str]] = []
    for index, written in enumerate(table.header.cells):
        header = rename.get(written, written)
        if header not in known:
            unknown += [index] if written else []
            continue
        column, factor = known[header]
        if column.field in placed:
            other = table.header.cells[placed[column.field].index]
            message = f"{written!r} and {other!r} are the same column"
            twice.append((table.where(table.header, index), message, "keep one, ignore the other"))
            continue
        placed[column.field] = Placed(index, column, factor)
    return list(placed.values()), unknown, twice
