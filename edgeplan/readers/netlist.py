"""nets.csv: a row per net, or a row per net and layer, as entries that groups complete."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import partial
from typing import Any, NamedTuple

from edgeplan.board import Columns, Group, Net, Point
from edgeplan.errors import Problem
from edgeplan.names import matches
from edgeplan.readers import foreign_headers, tables
from edgeplan.readers.columns import NET_COLUMNS, Column, Placed, known_headers, place
from edgeplan.readers.files import Where
from edgeplan.readers.toml import Document
from edgeplan.units import UnitError

FILE = "nets.csv"
SEVERAL_NAMES = ("driver", "receiver", "setting", "bank")  # of a group, separated by blanks
PER_LAYER = ("layer", "length_m", "width_m")


class Piece(NamedTuple):
    """What one row says about the length on one layer."""

    layer: str | None
    length_m: float | None
    width_m: float | None


@dataclass(slots=True)
class Entry:
    """What rows and groups say about one net, and the place each value came from."""

    row: int
    values: dict[str, Any]
    places: dict[str, Callable[[], Where]]
    pieces: list[Piece] = field(default_factory=list)

    @property
    def name(self) -> str:
        """Name of the net."""
        return str(self.values["net"])

    def where(self, name: str) -> Where:
        """Return the place of a value, or of the net's name if it has none."""
        return self.places.get(name, self.places["net"])()

    def net(self, file: str) -> Net:
        """Return the entry as a record."""
        values = dict(self.values)
        lengths = [piece.length_m for piece in self.pieces if piece.length_m is not None]
        complete = len(lengths) == len(self.pieces)  # without one of them the sum is not known
        values["length_m"] = sum(lengths) if complete else None
        if complete and all(piece.layer for piece in self.pieces):
            longest = max(self.pieces, key=lambda piece: piece.length_m or 0.0)
            values["layer"], values["width_m"] = longest.layer, longest.width_m
            values["layer_lengths_m"] = tuple(self.pieces)
        return Net(**values, at=Point(file=file, row=self.row))


@dataclass(slots=True)
class NetList:
    """Entries by net name, in the order of the file."""

    file: str = FILE
    entries: dict[str, Entry] = field(default_factory=dict)
    spoilt: set[str] = field(default_factory=set)  # in rows that cannot be read

    def names(self) -> set[str]:
        """Return every name a net goes by, on either side of its series part."""
        return set(self.entries) | set(self.near_names()) | self.spoilt

    def near_names(self) -> dict[str, str]:
        """Return the name at the driver's end for each name behind a series part."""
        entries = self.entries.values()
        return {far: entry.name for entry in entries if (far := entry.values.get("far_net"))}


def read(text: str, columns: Columns | None, problems: list[Problem], file: str = FILE) -> NetList:
    r"""Read a net list.

    Parameters
    ----------
    text : str
        The file's text.
    columns : Columns or None
        [columns] of board.toml; None if it cannot be read, then no header is called unknown.
    problems : list of Problem
        Grows by everything that is wrong.
    file : str
        Name of the file, for problems.

    Returns
    -------
    NetList
        What could be read.

    Examples
    --------
    >>> nets = read("net,length_mm,layer\nA,10,L1\nA,2.5,L4\n", Columns(), [])
    >>> [piece.length_m for piece in nets.entries["A"].pieces]
    [0.01, 0.0025]
    """
    found = NetList(file)
    table = tables.read(text, file, problems)
    if table is None:
        return found
    before = len(problems)
    placed = find_columns(table, NET_COLUMNS, columns, problems)
    name = next((place for place in placed if place.column.field == "net"), None)
    if name is None:
        offered = any('= "net"' in problem.hint for problem in problems[before:])
        if columns is not None and not offered:
            where = table.where(table.header, 0)
            hint = "rename the column that names the nets, or add it"
            problems.append(where._replace(field="").problem("there is no column 'net'", hint))
        return found
    for row in table.rows:
        _add(found, row, table, placed, problems)
    found.spoilt = {row.cells[name.index] for row in table.spoilt}
    return found


def find_columns(
    table: tables.Table,
    columns: tuple[Column, ...],
    settings: Columns | None,
    problems: list[Problem],
) -> list[Placed]:
    """Find our columns in a table and tell about those nobody knows in one message."""
    rename = settings.rename if settings else {}
    ignore = settings.ignore if settings else []
    placed, unknown, twice = place(table, columns, rename)
    problems += [where.problem(message, hint) for where, message, hint in twice]
    cells = table.header.cells
    told = {*ignore, *rename}  # a renamed column that is no column of ours is told at its rename
    unknown = [index for index in unknown if cells[index] not in told]
    if unknown and settings is not None:
        headers = list(dict.fromkeys(cells[index] for index in unknown))
        ours = [rename.get(header, header) for header in cells]
        taken = [header for header in ours if header in known_headers(columns)]
        hint = foreign_headers.lines_to_paste(headers, columns, rename, ignore, taken)
        names = ", ".join(repr(header) for header in headers)
        message = f"no such column: {names}" if len(headers) == 1 else f"no such columns: {names}"
        where = table.where(table.header, unknown[0])._replace(field="")
        problems.append(where.problem(message, hint))
    return placed


def cells_of(
    row: tables.Row, table: tables.Table, placed: Sequence[Placed], problems: list[Problem]
) -> Iterator[tuple[str, Any, Callable[[], Where]]]:
    """Yield field, value in SI and place of every filled cell of a row that can be read."""
    for column in placed:
        text = row.cells[column.index] if column.index < len(row.cells) else ""
        if not text:
            continue
        where = partial(table.where, row, column.index)
        try:
            yield column.column.field, column.read(text, table), where
        except UnitError as error:
            problems.append(where().problem(error.message, error.hint))


def _add(
    found: NetList,
    row: tables.Row,
    table: tables.Table,
    placed: Sequence[Placed],
    problems: list[Problem],
) -> None:
    """Add a row to its net."""
    values = {}
    places = {}
    for name, value, where in cells_of(row, table, placed, problems):
        values[name], places[name] = value, where
    if "net" not in values:
        where_row = Where(table.file, row.number, 1, "net")
        problems.append(where_row.problem("the row names no net"))
        return
    piece = Piece(*(values.get(name) for name in PER_LAYER))
    entry = found.entries.get(values["net"])
    if entry is None:
        found.entries[values["net"]] = Entry(row.number, values, places, [piece])
    else:
        _merge(entry, values, places, piece, problems)


def _merge(
    entry: Entry,
    values: Mapping[str, Any],
    places: Mapping[str, Callable[[], Where]],
    piece: Piece,
    problems: list[Problem],
) -> None:
    """Add a further row of a net: another layer or width, and nothing that disagrees."""
    if any((piece.layer, piece.width_m) == (old.layer, old.width_m) for old in entry.pieces):
        message = f"net {entry.name!r} is here twice, first in row {entry.row}"
        hint = "a net has one row, or one row for each of its layers"
        problems.append(places["net"]().problem(message, hint))
        return
    entry.pieces.append(piece)
    for name, value in values.items():
        if name in PER_LAYER:
            continue
        if name not in entry.values:
            entry.values[name], entry.places[name] = value, places[name]
        elif entry.values[name] != value:
            first = entry.where(name)
            message = f"net {entry.name!r} has another value in row {first.row}"
            problems.append(places[name]().problem(message, "rows of one net have to agree"))


def apply_groups(nets: NetList, groups: Mapping[int, Group], document: Document) -> list[str]:
    """Fill empty values from [[group]] tables; a row's own cell wins, then the later group.

    Parameters
    ----------
    nets : NetList
        Filled in place.
    groups : mapping
        Those groups of board.toml that can be read, by their number from 0.
    document : Document
        Knows where they stand.

    Returns
    -------
    list of str
        A note for each group that fits no net.
    """
    notes = []
    for index in sorted(groups, reverse=True):  # a later group is the more special one
        group = groups[index]
        fitting = [entry for entry in nets.entries.values() if matches(group.nets, entry.name)]
        if not fitting:
            notes.append(f"[[group]] nets = {group.nets!r} fits no net")
        for name, value in _values(group).items():
            key = Group.model_fields[name].alias or name
            where = partial(document.where, ("group", index, key))
            for entry in fitting:
                _fill(entry, name, value, where)
    return notes


def _values(group: Group) -> dict[str, Any]:
    """Return what a group states, in the form of a row's values."""
    stated = group.model_dump(exclude_none=True, exclude={"nets"})
    for name in SEVERAL_NAMES:
        if name in stated:
            stated[name] = tuple("" if part == "-" else part for part in stated[name].split())
    return stated


def _fill(entry: Entry, name: str, value: Any, where: Callable[[], Where]) -> None:
    """Give an entry a value it does not have."""
    if name in ("layer", "width_m"):
        entry.pieces = [
            piece._replace(**{name: value}) if getattr(piece, name) is None else piece
            for piece in entry.pieces
        ]
    if name not in entry.values:
        entry.values[name], entry.places[name] = value, where
