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
GROWTH = 1.6  # of segment lengths along a cable


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
class Mesh:
    """Longest distances between grid lines along x (rows) and along y (columns), and segments.

    ``beside_m`` is the distance of the rows next to the trace, ``beside`` their number on
    each side; ``ends_m`` that of the columns next to its ends. A grid as coarse as the trace is
    high makes the line's impedance 18 % too large. ``first_m`` is the first segment of a cable: as
    long as a pitch it reads 0.4 dB low.
    """

    rows_m: float
    columns_m: float
    beside_m: float
    beside: int
    ends_m: float
    per_height: int  # segments of the trace in a way of its height
    first_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Board:
    """A plane with one corner at x = y = 0, a trace on it, and the places where cables leave."""

    length_m: float
    width_m: float
    trace: Trace
    exits_m: tuple[tuple[float, float], ...]
    mesh: Mesh
    floor_m: float = 0.0  # height of the plane over the floor


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
    trace, mesh = board.trace, board.mesh
    ends = [end + step for end in (trace.start_m, trace.end_m) for step in _around(1, mesh.ends_m)]
    beside = [trace.across_m + step for step in _around(mesh.beside, mesh.beside_m)]
    across, along = zip(*board.exits_m, strict=True)
    columns = _lines([*ends, *across], board.length_m, mesh.columns_m)
    rows = _lines([*beside, *along], board.width_m, mesh.rows_m)
    _grid(wires, columns, rows, board.floor_m)
    ports = _trace_ports(wires, trace, board.floor_m, mesh.per_height)
    for corners in cables_m:
        points = growing_steps(corners, mesh.first_m, longest_m)
        ports.append(wires.chain(points, CABLE_RADIUS_M)[0])
    return Model(wires=wires, ports=ports)


def _around(count: int, step_m: float) -> Array:
    """Steps to both sides of zero, and zero."""
    return step_m * np.arange(-count, count + 1)


def _lines(marks_m: Sequence[float], size_m: float, longest_m: float) -> Array:
    """Grid lines through both sides and all marks between, no further apart than that."""
    inside = [mark for mark in marks_m if 0 < mark < size_m]
    places = np.unique(np.round([0.0, *inside, size_m], 6))
    lines = [places[:1]]
    for low, high in pairwise(places):
        count = int(np.ceil((high - low) / longest_m - 1e-9))
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
