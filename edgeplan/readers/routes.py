"""routes.csv: the pieces of each routed net, checked to be one tree that joins its pins."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import hypot, nan
from typing import Any

from edgeplan.board import Columns, Point, RouteSegment
from edgeplan.errors import Problem
from edgeplan.names import instead
from edgeplan.readers import tables
from edgeplan.readers.columns import ROUTE_COLUMNS
from edgeplan.readers.files import Where
from edgeplan.readers.netlist import Entry, NetList, cells_of, find_columns
from edgeplan.readers.references import Names
from edgeplan.texts import text_length_m

FILE = "routes.csv"
NEEDED = ("net", "start", "end", "length_m", "layer")
CORNERS = ("x1", "y1", "x2", "y2")
MANY_NAMES = 50_000  # comparisons, about a second
ROUNDING = 0.01  # a length may be this share shorter than its ends are apart


def read(
    text: str,
    nets: NetList | None,
    names: Names | None,
    columns: Columns | None,
    problems: list[Problem],
    file: str = FILE,
) -> list[RouteSegment]:
    """Read the routes of a board.

    Parameters
    ----------
    text : str
        The file's text.
    nets : NetList or None
        The net list; None if it cannot be read.
    names : Names or None
        Names of board.toml; None if it cannot be read.
    columns : Columns or None
        [columns] of board.toml; None if it cannot be read.
    problems : list of Problem
        Grows by everything that is wrong.
    file : str
        Name of the file, for problems.

    Returns
    -------
    list of RouteSegment
        As written, in the order of the file; a net's name is the one in the net list.
    """
    table = tables.read(text, file, problems)
    if table is None:
        return []
    before = len(problems)
    placed = find_columns(table, ROUTE_COLUMNS, columns, problems)
    there = {column.column.field for column in placed}
    for column in ROUTE_COLUMNS:
        if column.field in NEEDED and column.field not in there:
            header = next(iter(column.headers()))
            problems.append(Where(file, table.header.number).problem(f"no column {header!r}"))
    if not set(NEEDED) <= there:
        return []
    pieces = [piece for row in table.rows if (piece := _piece(row, table, placed, problems))]
    if nets is not None and nets.entries:
        problems += _unknown_nets(pieces, nets)
    for piece in pieces:
        problems += _piece_problems(piece, names)
    if len(problems) == before:
        problems += _shape_problems(pieces, nets)
    near = nets.near_names() if nets else {}
    return [piece.segment(file, near) for piece in pieces]


@dataclass(slots=True)
class _Piece:
    """One row of the table."""

    row: int
    values: dict[str, Any]
    places: dict[str, Any]

    @property
    def net(self) -> str:
        """Name as written."""
        return str(self.values["net"])

    def where(self, name: str) -> Where:
        """Return the place of a value."""
        found: Where = self.places.get(name, self.places["net"])()
        return found

    def segment(self, file: str, near: Mapping[str, str]) -> RouteSegment:
        """Return the piece as a record."""
        values = {name: value for name, value in self.values.items() if name not in CORNERS}
        x1, y1, x2, y2 = (self.values.get(name) for name in CORNERS)
        start_m = None if x1 is None or y1 is None else (x1, y1)
        end_m = None if x2 is None or y2 is None else (x2, y2)
        values["net"] = near.get(self.net, self.net)
        return RouteSegment(
            **values, start_m=start_m, end_m=end_m, at=Point(file=file, row=self.row)
        )


def _piece(
    row: tables.Row, table: tables.Table, placed: Sequence[Any], problems: list[Problem]
) -> _Piece | None:
    """Read one row; None if something needed is missing or wrong."""
    before = len(problems)
    values = {}
    places = {}
    for name, value, where in cells_of(row, table, placed, problems):
        values[name], places[name] = value, where
    if len(problems) > before:
        return None
    for column in placed:
        if column.column.field in NEEDED and column.column.field not in values:
            field = table.header.cells[column.index]
            problems.append(Where(table.file, row.number, 1, field).problem("the cell is empty"))
    return _Piece(row.number, values, places) if set(NEEDED) <= set(values) else None


def _unknown_nets(pieces: Sequence[_Piece], nets: NetList) -> Iterator[Problem]:
    """Yield routes of nets that the net list does not hold."""
    known = nets.names()
    unknown = {piece.net for piece in pieces} - known
    few = len(unknown) * len(known) < MANY_NAMES  # looking for the nearest name takes its time
    hints = {net: instead(net, known) if few else "" for net in unknown}
    for piece in pieces:
        if piece.net in unknown:
            message = f"no net {piece.net!r} in {nets.file}"
            yield piece.where("net").problem(message, hints[piece.net])


def _piece_problems(piece: _Piece, names: Names | None) -> Iterator[Problem]:
    """Yield a layer nothing answers to, and a length its own ends contradict."""
    layer = piece.values["layer"]
    if names is not None and layer not in names.layers:
        hint = instead(layer, names.layers)
        yield piece.where("layer").problem(f"no signal layer {layer!r}", hint)
    if piece.values["start"] == piece.values["end"]:
        yield piece.where("end").problem(f"the piece starts and ends at {piece.values['end']!r}")
    x1, y1, x2, y2 = (piece.values.get(name, nan) for name in CORNERS)
    apart_m = hypot(x2 - x1, y2 - y1)
    if piece.values["length_m"] < apart_m * (1 - ROUNDING):
        message = f"shorter than its ends are apart, {text_length_m(apart_m)}"
        yield piece.where("length_m").problem(message, "check the unit, or the coordinates")


def _shape_problems(pieces: Sequence[_Piece], nets: NetList | None) -> Iterator[Problem]:
    """Yield what keeps a net's pieces from being one tree that joins its pins."""
    by_net: dict[str, list[_Piece]] = {}
    far = nets.near_names() if nets else {}
    for piece in pieces:
        by_net.setdefault(far.get(piece.net, piece.net), []).append(piece)
    for net, own in by_net.items():
        yield from _one_tree(own)
        if nets is not None and net in nets.entries:
            yield from _pins(own, nets.entries[net])


def _one_tree(pieces: Sequence[_Piece]) -> Iterator[Problem]:
    """Yield pieces that close a loop, and the first piece of every part that hangs loose."""
    parts: list[tuple[set[str], _Piece]] = []
    for piece in pieces:
        ends = {piece.values["start"], piece.values["end"]}
        joined = [part for part in parts if part[0] & ends]
        if len(joined) == 1 and ends <= joined[0][0]:
            message = f"this piece of {piece.net!r} closes a loop"
            hint = "leave out pieces drawn twice; a net is judged as a tree"
            yield piece.where("start").problem(message, hint)
            continue
        first = joined[0][1] if joined else piece
        parts = [part for part in parts if not part[0] & ends]
        parts.append((ends.union(*(points for points, _ in joined)), first))
    parts.sort(key=lambda part: part[1].row)
    for _, piece in parts[1:]:
        message = f"this part of {piece.net!r} hangs together with no earlier one"
        hint = "use one name for a point in all pieces that meet there"
        yield piece.where("start").problem(message, hint)


def _pins(pieces: Sequence[_Piece], entry: Entry) -> Iterator[Problem]:
    """Yield pins of the net that its route does not touch."""
    points = {piece.values[end] for piece in pieces for end in ("start", "end")}
    for column in ("driver_pin", "receiver_pin"):
        for pin in entry.values.get(column, ()):
            if pin and pin not in points:
                message = f"the route of {pieces[0].net!r} does not touch {pin!r}"
                yield pieces[0].where("net").problem(message, instead(pin, points))
