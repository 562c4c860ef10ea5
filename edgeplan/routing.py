"""From the net list and the routes to the path of one net: stub, segments and receivers."""

from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import isnan
from typing import NamedTuple

from edgeplan.board import Net, RouteSegment
from edgeplan.stack import Line

SITE = "site"
LineOf = Callable[[str, float], Line]
Position = tuple[float, float]


class _Step(NamedTuple):
    """One way to leave a node: where it leads, over which line, from and to which position."""

    end: str
    length_m: float
    line: Line
    from_m: Position | None
    to_m: Position | None


class CannotRoute(Exception):  # noqa: N818 - a finding about one net, not a fault of the run
    """A net whose path cannot be built; the text says what is missing or wrong.

    ``value`` is the value that would help and ``of`` whose it is; the net's own if empty.
    """

    def __init__(self, text: str, value: str = "", of: str = "") -> None:
        super().__init__(text)
        self.value = value
        self.of = of


@dataclass(frozen=True, slots=True, kw_only=True)
class Piece:
    """One segment of a path; ``parent`` is its index in the path, -1 at the source end.

    ``end_m`` is the position of its far end on the board, None where none is stated [m];
    ``end`` is the name that routes.csv has for it, empty without a route.
    """

    parent: int
    length_m: float
    line: Line
    end_m: Position | None = None
    end: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Path:
    """A net as the engine sees it: the stub before the series resistor, then the tree.

    ``receiver_piece`` holds, per receiver, the piece at whose far end it sits; ``origin_m``
    is the position of the resistor site (of the driver where there is none), ``pad_m`` that
    of the driver's pad. [m]
    """

    stub_m: float
    stub_line: Line
    pieces: tuple[Piece, ...]
    receiver_piece: tuple[int, ...]
    notes: tuple[str, ...] = ()
    origin_m: Position | None = None
    pad_m: Position | None = None

    @property
    def is_placed(self) -> bool:
        """Whether every end of the path has a position on the board."""
        ends = [self.origin_m, *(piece.end_m for piece in self.pieces)]
        return all(position is not None for position in ends)

    @property
    def main_length_m(self) -> float:
        """Longest way from the driver to a receiver."""
        return self.stub_m + max(self.distance_m(piece) for piece in self.receiver_piece)

    @property
    def main_line(self) -> Line:
        """The line that most of the copper is on."""
        return max(self.pieces, key=lambda piece: piece.length_m).line

    def distance_m(self, piece: int) -> float:
        """Length from the resistor site to the far end of a piece."""
        total = 0.0
        while piece >= 0:
            total += self.pieces[piece].length_m
            piece = self.pieces[piece].parent
        return total

    def delay_s(self, piece: int) -> float:
        """Delay from the driver to the far end of a piece. [s]"""
        total = self.stub_m * self.stub_line.delay_s_per_m
        while piece >= 0:
            total += self.pieces[piece].length_m * self.pieces[piece].line.delay_s_per_m
            piece = self.pieces[piece].parent
        return total


def path_of(net: Net, routes: Sequence[RouteSegment], line_of: LineOf, *, clock_like: bool) -> Path:
    """Build the path of a net from its routes, or from its length alone.

    Parameters
    ----------
    net : Net
        One row of the net list.
    routes : sequence of RouteSegment
        The rows of this net; may be empty.
    line_of : callable
        Layer and width [m] to Line.
    clock_like : bool
        Whether several receivers without a route may be taken as a chain (data) or not.

    Returns
    -------
    Path
        Lengths [m].

    Raises
    ------
    CannotRoute
        When a value is missing or the route does not reach a pin.
    """
    if routes:
        return _routed(net, routes, line_of)
    return _unrouted(net, line_of, clock_like=clock_like)


def _known_line(line: Line) -> Line:
    """The line, or why it is not known."""
    if line.problem:
        without_delay = "width" if line.planes else "plane"
        value = without_delay if isnan(line.delay_s_per_m) else "z0"
        raise CannotRoute(line.problem, value=value, of=f"layer {line.layer}")
    return line


def _layers(net: Net, line_of: LineOf) -> list[tuple[float, Line]]:
    """Lengths and lines of a net without a route, in the order of the list."""
    lengths = net.layer_lengths_m
    if not lengths:
        if net.length_m is None:
            raise CannotRoute("no length is given", value="length")
        if net.layer is None:
            raise CannotRoute("no layer is given", value="layer")
        lengths = ((net.layer, net.length_m, net.width_m),)
    found = []
    for layer, length_m, own_width in lengths:
        width = net.width_m if own_width is None else own_width
        if width is None:
            raise CannotRoute("no trace width is given", value="width")
        found.append((length_m, _known_line(line_of(layer, width))))
    return found


def _unrouted(net: Net, line_of: LineOf, *, clock_like: bool) -> Path:
    """A chain of the stated lengths; the stub is cut off the first."""
    receivers = len(net.receiver)
    if receivers > 1 and clock_like:
        raise CannotRoute(
            f"{receivers} receivers and no route: a clock needs routes.csv", value="route"
        )
    lengths = _layers(net, line_of)
    stub = 0.0
    if net.site != "none" and net.site_distance_m:
        stub = min(net.site_distance_m, 0.5 * lengths[0][0])
    stub_line = lengths[0][1]
    lengths[0] = (lengths[0][0] - stub, stub_line)
    if receivers > 1:
        return _assumed_chain(net, lengths, stub, stub_line)
    pieces = tuple(
        Piece(parent=i - 1, length_m=length, line=line) for i, (length, line) in enumerate(lengths)
    )
    return Path(stub_m=stub, stub_line=stub_line, pieces=pieces, receiver_piece=(len(pieces) - 1,))


def _assumed_chain(
    net: Net, lengths: Sequence[tuple[float, Line]], stub_m: float, stub_line: Line
) -> Path:
    """Receivers of a data net at equal distances along its length."""
    total = sum(length for length, _ in lengths)
    line = max(lengths, key=lambda piece: piece[0])[1]
    count = len(net.receiver)
    pieces = tuple(Piece(parent=i - 1, length_m=total / count, line=line) for i in range(count))
    note = f"{count} receivers without a route: a chain with equal distances is assumed"
    return Path(
        stub_m=stub_m,
        stub_line=stub_line,
        pieces=pieces,
        receiver_piece=tuple(range(count)),
        notes=(note,),
    )


def _routed(net: Net, routes: Sequence[RouteSegment], line_of: LineOf) -> Path:
    """Walk the route from the driver pin; what lies before the site is the stub."""
    neighbours: dict[str, list[_Step]] = defaultdict(list)
    for segment in routes:
        width = segment.width_m if segment.width_m is not None else net.width_m
        if width is None:
            raise CannotRoute("no trace width is given", value="width")
        line = _known_line(line_of(segment.layer, width))
        ends = (segment.start_m, segment.end_m)
        neighbours[segment.start].append(_Step(segment.end, segment.length_m, line, *ends))
        neighbours[segment.end].append(_Step(segment.start, segment.length_m, line, *ends[::-1]))
    start = net.driver_pin[0] if net.driver_pin else ""
    if start not in neighbours:
        raise CannotRoute(f"the route does not start at the driver pin {start or '(none given)'}")
    stub, stub_line, passed = _stub(start, neighbours)
    pieces, node_piece = _walk(passed, neighbours)
    missing = [pin for pin in net.receiver_pin if pin not in node_piece]
    if missing or not pieces or not net.receiver_pin:
        raise CannotRoute(f"the route does not reach {', '.join(missing) or 'a receiver pin'}")
    return Path(
        stub_m=stub,
        stub_line=stub_line or pieces[0].line,
        pieces=tuple(pieces),
        receiver_piece=tuple(node_piece[pin] for pin in net.receiver_pin),
        origin_m=_position(neighbours[passed[-1]]),
        pad_m=_position(neighbours[start]),
    )


def _position(steps: Sequence[_Step]) -> Position | None:
    """Where a node lies, by the first piece there that states it."""
    return next((step.from_m for step in steps if step.from_m is not None), None)


def _stub(start: str, neighbours: dict[str, list[_Step]]) -> tuple[float, Line | None, list[str]]:
    """Length and line from the driver pin to the site, and the nodes passed, the root last."""
    if SITE not in neighbours:
        return 0.0, None, [start]
    previous, node, length, line, passed = "", start, 0.0, None, [start]
    while node != SITE:
        onward = [step for step in neighbours[node] if step.end != previous]
        if len(onward) != 1:
            raise CannotRoute("the route branches between the driver pin and its resistor site")
        previous, node, line = node, onward[0].end, onward[0].line
        length += onward[0].length_m
        passed.append(node)
    return length, line, passed


def _walk(
    passed: Sequence[str], neighbours: dict[str, list[_Step]]
) -> tuple[list[Piece], dict[str, int]]:
    """Pieces of the tree behind the last node passed, parents first."""
    seen = set(passed)
    pieces: list[Piece] = []
    node_piece: dict[str, int] = {}
    pending = [(passed[-1], -1)]
    while pending:
        node, parent = pending.pop()
        for step in neighbours[node]:
            if step.end in seen:
                continue
            seen.add(step.end)
            pieces.append(
                Piece(
                    parent=parent,
                    length_m=step.length_m,
                    line=step.line,
                    end_m=step.to_m,
                    end=step.end,
                )
            )
            node_piece[step.end] = len(pieces) - 1
            pending.append((step.end, len(pieces) - 1))
    return pieces, node_piece
