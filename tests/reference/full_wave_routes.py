"""Makes full_wave_routes.csv: routed traces on a wire-grid board with one cable, by PyNEC.

Run: python tests/reference/full_wave_routes.py > tests/reference/full_wave_routes.csv (4 minutes).
"""

from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike

SPEED_OF_LIGHT_M_PER_S = 299_792_458.0
BOARD_M, GRID_M, HEIGHT_M = (0.1, 0.06), 0.01, 0.01
WIRE_M, GRID_WIRE_M = 1e-3, 1.2e-3  # radii
SOURCE_OHM = 25.0
ROUTES_MM = {
    "along": [(30, 30), (80, 30)],
    "across": [(30, 10), (30, 50)],
    "across in the middle": [(50, 10), (50, 50)],
    "L": [(20, 20), (60, 20), (60, 50)],
    "U": [(20, 20), (70, 20), (70, 40), (20, 40)],
    "slanted": [(20, 10), (60, 50)],
}
LOADS = {"5 pF": (0.0, 5e-12), "150 ohm": (150.0, 0.0), "5 ohm": (5.0, 0.0)}
FREQUENCIES_HZ = (80e6, 150e6, 300e6, 550e6, 900e6)
CABLES = {
    "right": (np.array([0.1, 0.03]), np.array([1.0, 0.0])),
    "top": (np.array([0.05, 0.06]), np.array([0.0, 1.0])),
}


def field_per_volt(
    route_m: ArrayLike, load: tuple[float, float], side: str, frequency_hz: float, cable_m: float
) -> float:
    """Largest distance times field over all directions for 1 V of source behind 25 ohm. [V]"""
    import PyNEC

    context = PyNEC.nec_context()
    tags = _wires(context.get_geometry(), np.asarray(route_m), side, cable_m)
    context.geometry_complete(0)
    ohm, farad = load
    context.fr_card(0, 1, frequency_hz / 1e6, 0)
    context.ld_card(0, tags[0], 1, 1, SOURCE_OHM, 0, 0)
    context.ld_card(0, tags[1], 1, 1, ohm, 0, farad)
    context.ex_card(0, tags[0], 1, 0, 1.0, 0, 0, 0, 0, 0)
    context.rp_card(0, 37, 36, 0, 5, 0, 0, 0.0, 0.0, 5.0, 10.0, 0.0, 0.0)
    pattern = context.get_radiation_pattern(0)
    parts = (pattern.get_e_theta(), pattern.get_e_phi())
    return float(max(np.abs(np.asarray(part)).max() for part in parts))


def _wires(geometry, route_m, side, cable_m):
    """Draw board, trace and cable; tags of the wires of source and load."""
    tag = 0

    def wire(start, end, segments, radius):
        nonlocal tag
        tag += 1
        geometry.wire(tag, segments, *map(float, (*start, *end)), radius, 1.0, 1.0)
        return tag

    columns, rows = (round(size / GRID_M) for size in BOARD_M)
    for i in range(columns + 1):
        for j in range(rows + 1):
            here = (i * GRID_M, j * GRID_M, 0)
            if i < columns:
                wire(here, ((i + 1) * GRID_M, j * GRID_M, 0), 1, GRID_WIRE_M)
            if j < rows:
                wire(here, (i * GRID_M, (j + 1) * GRID_M, 0), 1, GRID_WIRE_M)
    source = wire((*route_m[0], 0), (*route_m[0], HEIGHT_M), 1, WIRE_M)
    for start, end in pairwise(route_m):
        segments = round(np.hypot(*(end - start)) / GRID_M)
        wire((*start, HEIGHT_M), (*end, HEIGHT_M), segments, WIRE_M)
    load = wire((*route_m[-1], HEIGHT_M), (*route_m[-1], 0), 1, WIRE_M)
    start, direction = CABLES[side]
    wire((*start, 0), (*(start + cable_m * direction), 0), round(cable_m / 0.02), WIRE_M)
    return source, load


def cable_lengths_m(frequency_hz: float) -> np.ndarray:
    """Cable lengths from 0.5 m over a little more than a wave, at most to 2.05 m."""
    wave_m = SPEED_OF_LIGHT_M_PER_S / frequency_hz
    return np.arange(0.5, min(2.05, 0.5 + 1.05 * wave_m), max(0.05 * wave_m, 0.01))


def main() -> None:
    """Print the table."""
    print("# Largest distance times field over directions and cable lengths, V per volt of source.")  # noqa: T201
    print(  # noqa: T201
        "# Source: PyNEC 2.3.4 (NEC-2), board of 100 x 60 mm as 10 mm grid of 1.2 mm radius,"
        " trace 10 mm high of 1 mm"
    )
    print(  # noqa: T201
        "# radius, 25 ohm in series, cable of 1 mm radius at the middle of a side, straight,"
        " 0.5 to 2.05 m in steps of 0.05 waves;"
    )
    print(  # noqa: T201
        "# made by full_wave_routes.py, 2026-12. Convergence: steps of 0.02 waves +0.2 dB at most,"
        " grid of 5 mm -0.6 to +0.5 dB."
    )
    print("route,load,side,frequency_hz,longest_cable_m,field_v")  # noqa: T201
    for side in CABLES:
        for route, points_mm in ROUTES_MM.items():
            for load, values in LOADS.items():
                for frequency_hz in FREQUENCIES_HZ:
                    lengths_m = cable_lengths_m(frequency_hz)
                    route_m = np.array(points_mm) * 1e-3
                    field_v = max(
                        field_per_volt(route_m, values, side, frequency_hz, length_m)
                        for length_m in lengths_m
                    )
                    cells = (route, load, side, f"{frequency_hz:g}", f"{lengths_m[-1]:.3f}")
                    print(*cells, f"{field_v:.5g}", sep=",", flush=True)  # noqa: T201


if __name__ == "__main__":
    main()
