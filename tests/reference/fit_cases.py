"""Boards, loads and frequencies of the table that the expected level was taken from.

None of them is in another table: those tell the errors, this one only served to choose.
"""

from collections.abc import Iterator

import numpy as np
from wire_boards import Board, Trace
from wire_cases import coarse_mesh

LOADS = {  # name: (driver ohm, load ohm, load farad in parallel)
    "3 pF": (30.0, np.inf, 3e-12),
    "12 pF": (18.0, np.inf, 12e-12),
    "600 ohm": (60.0, 600.0, 0.0),
    "75 ohm": (40.0, 75.0, 0.0),
    "5 ohm": (15.0, 5.0, 0.0),
}
HZ = np.geomspace(30e6, 1e9, 16)  # every fourth of them for one board
LAYOUTS, LONG_LAYOUTS = 16, 12
LONG_BELOW_HZ = 100e6  # a cable of 1.5 m bonded to the floor is too short to resonate at 30 MHz
LONG_M = 2.2


def _board(
    size_m: tuple[float, float],
    pitch_m: float,
    trace_m: tuple[float, float, float],
    exits_m: tuple[tuple[float, float], ...],
) -> Board:
    """Board of length and width with a trace from, to, across; one cable takes the first exit."""
    start_m, end_m, across_m = trace_m
    trace = Trace(start_m=start_m, end_m=end_m, height_m=pitch_m / 1.5, across_m=across_m)
    mesh = coarse_mesh(pitch_m)
    return Board(length_m=size_m[0], width_m=size_m[1], trace=trace, mesh=mesh, exits_m=exits_m)


BOARDS = {
    "80 x 80": _board(
        (0.08, 0.08), 0.012, (0.016, 0.060, 0.028), ((0.0, 0.05), (0.08, 0.044), (0.04, 0.08))
    ),
    "110 x 75": _board(
        (0.11, 0.075), 0.015, (0.025, 0.095, 0.050), ((0.11, 0.030), (0.0, 0.020), (0.06, 0.0))
    ),
    "160 x 100": _board(
        (0.16, 0.1), 0.015, (0.070, 0.140, 0.030), ((0.0, 0.06), (0.16, 0.05), (0.05, 0.1))
    ),
    "190 x 85": _board(
        (0.19, 0.085), 0.015, (0.030, 0.160, 0.060), ((0.19, 0.04), (0.0, 0.03), (0.10, 0.0))
    ),
    "150 x 45": _board(
        (0.15, 0.045),
        0.012,
        (0.030, 0.110, 0.0225),
        ((0.15, 0.0225), (0.0, 0.0225), (0.07, 0.045)),
    ),
    "100 x 170": _board(
        (0.1, 0.17), 0.015, (0.020, 0.080, 0.130), ((0.05, 0.0), (0.1, 0.07), (0.0, 0.10))
    ),
    "60 x 45": _board(
        (0.06, 0.045), 0.009, (0.012, 0.048, 0.015), ((0.06, 0.027), (0.0, 0.033), (0.03, 0.045))
    ),
    "200 x 70": _board(
        (0.2, 0.07), 0.015, (0.100, 0.170, 0.050), ((0.06, 0.07), (0.2, 0.03), (0.0, 0.02))
    ),
}


def points() -> Iterator[tuple[str, int, float]]:
    """Boards, numbers of cables and frequencies; each frequency is looked at on two boards."""
    for index, name in enumerate(BOARDS):
        for count in (1, 2, 3):
            for frequency_hz in HZ[index % 4 :: 4]:
                yield name, count, float(frequency_hz)
