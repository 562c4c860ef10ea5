"""Boards, loads, frequencies and cable layouts of the full-wave reference tables.

No board here served to find a constant of the models (those were 100 x 60, 150 x 100, 60 x 40,
200 x 120 and 80 x 160 mm).
"""

from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
from wire_boards import Board, Mesh, Trace, board_model
from wire_code import SPEED_OF_LIGHT_M_PER_S, Array, far_field

Row = dict[str, Any]
Loads = dict[str, tuple[float, float, float]]

# name: (driver ohm, load ohm, load farad in parallel)
LOADS = {
    "5 pF": (25.0, np.inf, 5e-12),
    "50 ohm": (50.0, 50.0, 0.0),
    "1 kohm": (33.0, 1e3, 0.0),
    "1 ohm": (10.0, 1.0, 0.0),
}
TRACE_LENGTHS_M = (0.02, 0.04, 0.075, 0.13, 0.2)
TRACE_HEIGHTS_M = (2e-3, 5e-3, 10e-3)
TRACE_HZ = np.geomspace(30e6, 3e9, 15)
ONE_CABLE_HZ = (70e6, 110e6, 180e6, 280e6, 430e6, 650e6, 950e6)
SEVERAL_CABLES_HZ = (60e6, 100e6, 180e6, 300e6, 550e6, 900e6)
SITE_HZ = (30e6, 50e6, 80e6, 120e6, 200e6, 320e6, 500e6, 730e6, 1000e6)
FILTER_HZ = SITE_HZ[::2]
LINE_HZ = 100e6  # where the traces' line constants are read
FILTERS_OHM = (250 + 0j, 1000 + 0j, 500 + 500j)

SHORTEST_M, LONGEST_M = 0.5, 2.0  # cables in free space
LENGTH_STEP = 0.04  # wavelengths between the lengths tried
SITE_CABLE_M = 1.5  # none is longer along its way
TABLE_M = 0.8  # height of the board over the floor
LEVEL_M = 1.4  # none runs farther towards the receiver
FREE_LAYOUTS, SITE_LAYOUTS = 16, 12

_SMALL = {"length_m": 0.07, "width_m": 0.05, "exits_m": ((0.07, 0.025),)}
_MIDDLE = {
    "length_m": 0.13,
    "width_m": 0.09,
    "exits_m": ((0.13, 0.04), (0.0, 0.05), (0.075, 0.09)),
}
_LONG = {
    "length_m": 0.18,
    "width_m": 0.06,
    "exits_m": ((0.18, 0.028), (0.0, 0.028), (0.09, 0.0)),
}
_WIDE = {
    "length_m": 0.09,
    "width_m": 0.14,
    "exits_m": ((0.09, 0.08), (0.0, 0.06), (0.045, 0.14)),
}


def coarse_mesh(pitch_m: float) -> Mesh:
    """Mesh for many cables, under a trace two thirds of the pitch high."""
    return Mesh(
        rows_m=pitch_m,
        columns_m=pitch_m,
        beside_m=pitch_m / 3,
        beside=2,
        ends_m=pitch_m / 3,
        per_height=3,
        first_m=pitch_m / 2,
    )


def fine_mesh(pitch_m: float) -> Mesh:
    """Three times as many segments, under a trace a third of that pitch high."""
    return Mesh(
        rows_m=pitch_m / 2,
        columns_m=pitch_m / 3,
        beside_m=pitch_m / 6,
        beside=3,
        ends_m=pitch_m / 3,
        per_height=2,
        first_m=pitch_m / 4,
    )


def _board(size: Row, start_m: float, end_m: float, across_m: float) -> Board:
    """Board of that size with one trace, two thirds of the pitch above it."""
    pitch_m = 0.009 if size is _SMALL else 0.015
    trace = Trace(start_m=start_m, end_m=end_m, height_m=pitch_m / 1.5, across_m=across_m)
    return Board(trace=trace, mesh=coarse_mesh(pitch_m), **size)


def fine(board: Board) -> Board:
    """The same board with the finer mesh and the trace half as high over it."""
    trace = replace(board.trace, height_m=board.trace.height_m / 2)
    return replace(board, trace=trace, mesh=fine_mesh(board.mesh.rows_m))


BOARDS = {
    "small": _board(_SMALL, 0.010, 0.055, 0.025),
    "small beside": _board(_SMALL, 0.025, 0.060, 0.035),
    "middle": _board(_MIDDLE, 0.030, 0.090, 0.065),
    "middle near cable": _board(_MIDDLE, 0.060, 0.115, 0.035),
    "long": _board(_LONG, 0.040, 0.150, 0.038),
    "wide": _board(_WIDE, 0.020, 0.075, 0.035),
}
SEVERAL = ("middle", "long", "wide")  # those that carry several cables


def load_ohm(frequency_hz: float, name: str, loads: Loads | None = None) -> tuple[float, complex]:
    """Resistance of the driver and impedance of the load of that name."""
    source, resistance, capacitance = (loads or LOADS)[name]
    return source, 1 / (1 / resistance + 2j * np.pi * frequency_hz * capacitance)


def end_columns(frequency_hz: float, name: str, source: float, load: complex) -> Row:
    """What is connected to the trace."""
    return {
        "frequency_hz": frequency_hz,
        "load": name,
        "source_ohm": source,
        "load_real_ohm": load.real,
        "load_imag_ohm": load.imag,
    }


@cache
def board_columns(name: str, board: Board) -> Row:
    """Size of a board, place of its trace, and the trace as a line by its ports, without cables."""
    trace = board.trace
    model = board_model(board, [], board.length_m)
    solved = far_field(model.wires, LINE_HZ, model.ports, (3, 4), floor=False)
    port_ohm, port_length_m = solved.line(LINE_HZ)
    return {
        "board": name,
        "board_length_m": board.length_m,
        "board_width_m": board.width_m,
        "start_m": trace.start_m,
        "end_m": trace.end_m,
        "side_offset_m": trace.across_m - board.width_m / 2,
        "height_m": trace.height_m,
        "line_ohm": trace.line_ohm(),
        "port_ohm": port_ohm,
        "port_length_m": port_length_m,
    }


def cable_lengths_m(frequency_hz: float) -> Array:
    """Lengths up to the longest, densely, over the last one and a half wavelengths."""
    wavelength_m = SPEED_OF_LIGHT_M_PER_S / frequency_hz
    shortest_m = max(SHORTEST_M, LONGEST_M - 1.5 * wavelength_m)
    count = int(np.ceil((LONGEST_M - shortest_m) / (LENGTH_STEP * wavelength_m))) + 1
    return np.linspace(shortest_m, LONGEST_M, count)


def straight_cable(board: Board, length_m: float) -> list[Array]:
    """Corners of a cable from the first exit on along x."""
    foot = np.array([*board.exits_m[0], board.floor_m])
    return [foot, foot + np.array([length_m, 0, 0])]


def free_layout(board: Board, rng: np.random.Generator) -> list[list[Array]]:
    """One straight cable per exit, of any length, up to 40 degrees off the way straight out."""
    cables = []
    for exit_m in board.exits_m:
        out = _outward(board, exit_m, np.radians(rng.uniform(-40, 40)))
        rise = np.array([0, 0, np.tan(np.radians(rng.uniform(-30, 30)))])
        way = (out + rise) / np.linalg.norm(out + rise)
        foot = np.array([*exit_m, board.floor_m])
        cables.append([foot, foot + rng.uniform(SHORTEST_M, LONGEST_M) * way])
    return cables


def site_layout(
    board: Board, rng: np.random.Generator, reach_m: float = SITE_CABLE_M
) -> list[list[Array]]:
    """One cable per exit: level, draped, down to the floor and bonded, or down and along it."""
    cables = []
    for exit_m in board.exits_m:
        out = _outward(board, exit_m, np.radians(rng.uniform(-40, 40)))
        foot = np.array([*exit_m, board.floor_m])
        kind, level_m = rng.integers(4), rng.uniform(0.2, reach_m - TABLE_M)
        along_m = rng.uniform(0.1, reach_m - 1.2)
        if kind == 0:
            cables.append([foot, foot + min(2 * level_m, LEVEL_M) * out])
            continue
        corner = foot + (min(level_m, 0.4) if kind == 3 else level_m) * out
        end_m = {1: 0.4, 2: 0.0, 3: 0.05}[int(kind)]
        down = corner * [1, 1, 0] + [0, 0, end_m]
        cables.append([foot, corner, down, *([down + along_m * out] if kind == 3 else [])])
    return cables


def _outward(board: Board, exit_m: tuple[float, float], turn_rad: float) -> Array:
    """Horizontal direction out of the board at an exit, turned by that much."""
    x, y = exit_m
    normal = {0.0: np.pi, board.length_m: 0.0}.get(x)
    if normal is None:
        normal = {0.0: -np.pi / 2, board.width_m: np.pi / 2}[y]
    return np.array([np.cos(normal + turn_rad), np.sin(normal + turn_rad), 0.0])
