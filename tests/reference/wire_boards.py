"""Wire models of what is compared: a trace over ground, a board as a wire grid, and its cables.

A grid stands for a sheet when its wires have the sheet's surface: radius = spacing / 2 pi.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike
from wire_code import Array, Wires

CABLE_RADIUS_M = 1e-3
GROWTH = 1.6  # of segment lengths along a cable, from the grid's own on


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """A straight trace along x at a height over a plane, with a vertical wire at each end."""

    start_m: float
    end_m: float
    height_m: float
    across_m: float = 0.0  # its y
    slimness: float = 10.0  # height over radius of the wire

    def line_ohm(self) -> float:
        """Impedance of a wire over a plane."""
        return float(60 * np.arccosh(self.slimness))


@dataclass(frozen=True, slots=True, kw_only=True)
class Board:
    """A plane with one corner at x = y = 0, a trace on it, and the places where cables leave.

    The grid is as fine as the trace is high beside the trace and has the pitch elsewhere; its
    segments are divided by ``refine``, those of the trace are its height over ``2 * refine``.
    """

    length_m: float
    width_m: float
    trace: Trace
    exits_m: tuple[tuple[float, float], ...]
    pitch_m: float = 0.01
    floor_m: float = 0.0  # height of the plane over the floor
    refine: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """Wires of a board with its cables; ports are source, load and the foot of each cable."""

    wires: Wires
    ports: list[int]


def even_steps(start_m: ArrayLike, end_m: ArrayLike, longest_m: float) -> Array:
    """Points ``(P, 3)`` of the fewest equal steps not longer than that."""
    start, end = np.asarray(start_m, float), np.asarray(end_m, float)
    count = max(1, int(np.ceil(np.linalg.norm(end - start) / longest_m - 1e-9)))
    return start + np.linspace(0, 1, count + 1)[:, None] * (end - start)


def growing_steps(corners_m: Sequence[ArrayLike], first_m: float, longest_m: float) -> Array:
    """Points along straight legs, steps growing from the first on up to the longest."""
    points, step = [np.asarray(corners_m[0], float)], first_m
    for corner in corners_m[1:]:
        start, end = points[-1], np.asarray(corner, float)
        way, lengths = float(np.linalg.norm(end - start)), [step]
        while sum(lengths) < way:
            lengths.append(min(lengths[-1] * GROWTH, longest_m))
        shares = np.cumsum(lengths) / sum(lengths)
        points += [start + share * (end - start) for share in shares]
        step = lengths[-1]
    return np.array(points)


def trace_over_ground(trace: Trace, per_height: int) -> Model:
    """A trace over the floor itself."""
    wires = Wires()
    return Model(wires=wires, ports=_trace_ports(wires, trace, 0.0, per_height))


def board_model(board: Board, cables_m: Sequence[Sequence[ArrayLike]], longest_m: float) -> Model:
    """A board with cables as corner points ``(x, y, z)``, the first of them on an exit."""
    wires = Wires()
    trace, refine = board.trace, board.refine
    columns = _lines([trace.start_m, trace.end_m], 1, board.length_m, board, axis=0)
    rows = _lines([trace.across_m], 2, board.width_m, board, axis=1)
    _grid(wires, columns, rows, board.floor_m)
    ports = _trace_ports(wires, trace, board.floor_m, 2 * refine)
    for corners in cables_m:
        points = growing_steps(corners, board.pitch_m / refine, longest_m)
        ports.append(wires.chain(points, CABLE_RADIUS_M)[0])
    return Model(wires=wires, ports=ports)


def _lines(marks_m: Sequence[float], fine: int, size_m: float, board: Board, axis: int) -> Array:
    """Grid lines through cable exits and marks, fine ones beside these, at most a pitch apart."""
    steps = board.trace.height_m * np.arange(-fine, fine + 1)
    beside = [mark + step for mark in marks_m for step in steps if 0 < mark + step < size_m]
    exits = [exit_m[axis] for exit_m in board.exits_m]
    places = np.unique(np.round([0.0, *beside, *exits, size_m], 6))
    lines = [places[:1]]
    for low, high in pairwise(places):
        count = int(np.ceil((high - low) / board.pitch_m - 1e-9)) * board.refine
        lines.append(np.linspace(low, high, count + 1)[1:])
    return np.concatenate(lines)


def _grid(wires: Wires, columns_m: Array, rows_m: Array, height_m: float) -> None:
    """Wires between neighbouring crossings of the grid lines."""
    row_radius, column_radius = _radii(rows_m), _radii(columns_m)
    for j, y in enumerate(rows_m):
        for left, right in pairwise(columns_m):
            wires.piece((left, y, height_m), (right, y, height_m), row_radius[j])
    for i, x in enumerate(columns_m):
        for low, high in pairwise(rows_m):
            wires.piece((x, low, height_m), (x, high, height_m), column_radius[i])


def _radii(lines_m: Array) -> Array:
    """Radius of each line's wire: half the way to both neighbours over 2 pi."""
    gaps = np.diff(lines_m)
    return np.asarray((np.append(gaps, 0.0) + np.insert(gaps, 0, 0.0)) / 2 / (2 * np.pi))


def _trace_ports(wires: Wires, trace: Trace, plane_m: float, per_height: int) -> list[int]:
    """Add a trace with its end wires; source and load port are their lowest segments."""
    top_m, radius_m = plane_m + trace.height_m, trace.height_m / trace.slimness
    corners = [
        (trace.start_m, trace.across_m, plane_m),
        (trace.start_m, trace.across_m, top_m),
        (trace.end_m, trace.across_m, top_m),
        (trace.end_m, trace.across_m, plane_m),
    ]
    numbers: list[int] = []
    for start, end in pairwise(corners):
        numbers += wires.chain(even_steps(start, end, trace.height_m / per_height), radius_m)
    return [numbers[0], numbers[-1]]
