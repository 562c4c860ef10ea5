"""Routes of the full-wave table as the model is given them, and its errors there."""

from pathlib import Path

import numpy as np

from edgeplan.physics import imbalance, network
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.radiation import finite_board_factor
from edgeplan.physics.routed_imbalance import common_mode_per_volt
from edgeplan.physics.routed_radiation import Layout, routed_field_per_volt
from edgeplan.physics.tree_currents import end_states

TABLE = Path(__file__).parent / "reference" / "full_wave_routes.csv"
BOARD_M, HEIGHT_M, SOURCE_OHM = (0.1, 0.06), 0.01, 25.0
ROUTES_MM = {
    "along": [(30, 30), (80, 30)],
    "across": [(30, 10), (30, 50)],
    "across in the middle": [(50, 10), (50, 50)],
    "L": [(20, 20), (60, 20), (60, 50)],
    "U": [(20, 20), (70, 20), (70, 40), (20, 40)],
    "slanted": [(20, 10), (60, 50)],
}
LOADS = {"5 pF": (5e-12, 0.0), "150 ohm": (0.0, 1 / 150), "5 ohm": (0.0, 1 / 5)}


def chain(points_mm, farad, siemens):
    """Trace of the full-wave runs as a line in air, half a riser longer at each end."""
    points = np.array(points_mm) * 1e-3
    count = len(points) - 1
    length_m = np.hypot(*np.diff(points, axis=0).T)
    length_m[0] += HEIGHT_M / 2
    length_m[-1] += HEIGHT_M / 2
    last = np.arange(count) == count - 1
    fields = (60 * np.arccosh(10.0), 1 / 299_792_458.0, 0.0, 0.0, 0.0)
    trees = network.Trees(
        segment_offset=np.array([0, count]),
        parent=np.arange(count) - 1,
        length_m=length_m,
        line=LineConstants(*(np.full(count, value) for value in fields)),
        node_farad=last * farad,
        node_siemens=last * siemens,
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([count - 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )
    height, air = np.full(count, HEIGHT_M), np.ones(count)
    return trees, Layout(points[:1], points[1:], height, air, np.array([0, count]))


def model_errors_db():
    """Model over full-wave field of each row: one cable at its side, any cables, trace alone."""
    rows = np.genfromtxt(TABLE, delimiter=",", skip_header=5, dtype=None, encoding="utf-8")
    columns = {name: [] for name in ("one", "any_end", "trace")}
    for route, load, side, frequency_hz, cable_m, _ in rows:
        trees, layout = chain(ROUTES_MM[route], *LOADS[load])
        entry = end_states(trees, [2j * np.pi * frequency_hz]).near_ampere[0, 0, 0]
        volts = common_mode_per_volt(trees, layout, [frequency_hz], BOARD_M)
        axis = volts.any_along_x if side == "right" else volts.any_along_y
        antenna = imbalance.antenna_factor(frequency_hz, cable_m)
        trace = routed_field_per_volt(trees, layout, [frequency_hz])[0, 0]
        trace = trace * finite_board_factor(frequency_hz, BOARD_M[0])
        source = np.abs(1 + SOURCE_OHM * entry)
        columns["trace"].append(trace / source)
        columns["one"].append(np.hypot(getattr(volts, side)[0, 0] * antenna, trace) / source)
        columns["any_end"].append(np.hypot(axis[0, 0] * antenna, trace) / source)
    field_v = np.array([row[-1] for row in rows])
    errors = {name: 20 * np.log10(np.array(c) / field_v) for name, c in columns.items()}
    return rows, errors
