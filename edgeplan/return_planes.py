"""Findings about the planes a net runs over: where its emission is not what the models hold for."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from edgeplan.board import Board, Layer
from edgeplan.nets import NetFacts
from edgeplan.physics.stripline_leakage import outside_checked, stitching_distance_m
from edgeplan.results import INNER_OUT_OF_RANGE, PLANE_CHANGES
from edgeplan.routing import Path, Piece
from edgeplan.stack import Line


@dataclass(frozen=True, slots=True, kw_only=True)
class PlaneFinding:
    """A rule, where on the net it is broken, and the sentence that says so."""

    rule: str
    where: str
    text: str


def plane_findings(board: Board, facts: NetFacts, highest_hz: float) -> list[PlaneFinding]:
    """What a net does to its return planes that no level is worked out for.

    Parameters
    ----------
    board : Board
        Its stack and size.
    facts : NetFacts
        One net.
    highest_hz : float
        Highest judged frequency. [Hz]

    Returns
    -------
    list of PlaneFinding
        Changes of plane from the driver on, then pieces between planes beyond the range of
        the leakage model; empty for a net over one plane.
    """
    changes = _changes(board.file.stack, facts.path, highest_hz)
    return [*changes, *_out_of_range(board, facts)]


def _changes(stack: Sequence[Layer], path: Path, highest_hz: float) -> Iterator[PlaneFinding]:
    """Every place where a piece has no plane in common with the one before it."""
    for piece in path.pieces:
        before = path.pieces[piece.parent].line if piece.parent >= 0 else path.stub_line
        near, far = before.planes, piece.line.planes
        if not near or not far or set(near) & set(far):
            continue
        permittivity = _permittivity(stack, near[0], far[0], before, piece.line)
        within_mm = float(stitching_distance_m(highest_hz, permittivity)) * 1e3
        where = _place(path, piece.parent)
        yield PlaneFinding(
            rule=PLANE_CHANGES,
            where=where,
            text=(
                f"its return changes from plane {near[0]} to {far[0]} {where}: what that radiates "
                f"is not judged and not zero; join the planes within {within_mm:.1f} mm of there, "
                "by a via where both are one net, else by a capacitor"
            ),
        )


def _permittivity(stack: Sequence[Layer], near: str, far: str, before: Line, behind: Line) -> float:
    """Largest permittivity between two planes; of the lines where none is stated there."""
    names = [layer.layer for layer in stack]
    low, high = sorted((names.index(near), names.index(far)))
    between = [layer.permittivity for layer in stack[low:high] if layer.permittivity]
    return max(between, default=max(before.permittivity, behind.permittivity))


def _place(path: Path, parent: int) -> str:
    """Where the far end of a piece is: name, position and distance from the driver."""
    name = path.pieces[parent].end if parent >= 0 else "the resistor"
    position = path.pieces[parent].end_m if parent >= 0 else path.origin_m
    along_mm = (path.stub_m + path.distance_m(parent)) * 1e3
    named = f"at {name}" if name else "about"
    placed = "" if position is None else f" ({position[0] * 1e3:g}, {position[1] * 1e3:g}) mm"
    comma = "," if name else ""
    return f"{named}{placed}{comma} {along_mm:.3g} mm from the driver"


def _out_of_range(board: Board, facts: NetFacts) -> Iterator[PlaneFinding]:
    """The piece between planes nearest to a side, where the leakage model was never checked."""
    size = board.file.board.size_m
    found = [
        (side_m, width_m, piece)
        for piece, start in _with_starts(facts.path)
        for side_m, width_m in _sides(facts, piece, start, size)
        if piece.line.plane_gap_m > 0
        and bool(outside_checked(piece.line.plane_gap_m, width_m, side_m, piece.line.width_m))
    ]
    if not found:
        return
    side_m, width_m, piece = min(found, key=lambda each: each[0])
    gap_mm = piece.line.plane_gap_m * 1e3
    strip_mm = piece.line.width_m * 1e3
    where = f"{max(side_m, 0) * 1e3:.3g} mm from a side"
    yield PlaneFinding(
        rule=INNER_OUT_OF_RANGE,
        where=where,
        text=(
            f"runs {strip_mm:.3g} mm wide between planes {gap_mm:.3g} mm apart on "
            f"{piece.line.layer}, {where} of planes {width_m * 1e3:g} mm wide: what leaks there "
            "counts by a formula outside its range (a quarter of the spacing from the side or "
            "more, planes of 30 to 120 mm, a width of 0.05 to 2 spacings); move it inwards by "
            "three spacings"
        ),
    )


def _with_starts(path: Path) -> Iterator[tuple[Piece, tuple[float, float] | None]]:
    """Every piece with the position of its near end."""
    for piece in path.pieces:
        yield piece, path.pieces[piece.parent].end_m if piece.parent >= 0 else path.origin_m


def _sides(
    facts: NetFacts,
    piece: Piece,
    start_m: tuple[float, float] | None,
    size_m: tuple[float, float],
) -> Iterator[tuple[float, float]]:
    """Distances of a piece from the sides along each axis, with the planes' width there. [m]"""
    if start_m is None or piece.end_m is None or not facts.path.is_placed:
        if facts.net.side_distance_m is not None:
            yield facts.net.side_distance_m, min(size_m)
        return
    half_strip_m = 0.5 * piece.line.width_m
    for axis in (0, 1):
        ends = start_m[axis], piece.end_m[axis]
        yield min(*ends, *(size_m[axis] - x for x in ends)) - half_strip_m, size_m[axis]
