"""What the emission models say for each row of the full-wave tables in tests/reference.

The references' lines have a vertical wire at each end, which real traces have not. Over a plane the
model is given them as one height more of line, both together, spread along the trace. On
boards it is given the line as the reference has it, by port admittances: the grid and the end
wires are part of it, and no field was looked at to find it.
"""

import csv
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.emission import cable, trace
from edgeplan.emission.mechanism import Cable, RadiationInputs
from edgeplan.physics import floor_reflection, imbalance, radiation

Array = NDArray[Any]
Table = dict[str, Array]

FOLDER = Path(__file__).parent / "reference"
SPEED_M_PER_S = 299_792_458.0
FREE_CABLE_M, SITE_CABLE_M, DISTANCE_M = 2.0, 1.5, 3.0  # longest cables of the tables; the site's


def read_table(name: str) -> Table:
    """Columns of ``full_wave_NAME.csv`` by name: numbers where all cells are, else words."""
    lines = (FOLDER / f"full_wave_{name}.csv").read_text(encoding="utf-8").splitlines()
    rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    return {key: _column([row[key] for row in rows]) for key in rows[0]}


def _column(cells: list[str]) -> Array:
    """Numbers, or the words as they are."""
    try:
        return np.array(cells, dtype=float)
    except ValueError:
        return np.array(cells)


def take(table: Table, rows: Array) -> Table:
    """Those rows of a table."""
    return {key: column[rows] for key, column in table.items()}


def length_m(table: Table) -> Array:
    """Length of each trace, ``(N,)``."""
    if "length_m" in table:
        return table["length_m"]
    return np.asarray(table["end_m"] - table["start_m"])


def line_m(table: Table) -> Array:
    """Length of each line with its end wires, ``(N,)``."""
    return np.asarray(table.get("port_length_m", length_m(table) + table["height_m"]))


def line_ohm(table: Table) -> Array:
    """Impedance of each line, ``(N,)``."""
    return np.asarray(table.get("port_ohm", table["line_ohm"]))


def electrical(table: Table) -> tuple[Array, Array]:
    """Phase along each whole line and reflection of its load, ``(N,)``."""
    wave_per_m = 2 * np.pi * table["frequency_hz"] / SPEED_M_PER_S
    load_ohm = table["load_real_ohm"] + 1j * table["load_imag_ohm"]
    reflection = (load_ohm - line_ohm(table)) / (load_ohm + line_ohm(table))
    return wave_per_m * line_m(table), reflection


def as_nominal_lines(table: Table) -> Table:
    """The same with each line as a wire over a plane, one height longer than drawn."""
    return {key: column for key, column in table.items() if not key.startswith("port_")}


def forward_ampere(table: Table) -> Array:
    """Forward wave at the source for an EMF of 1 V, ``(N,)`` [A]."""
    phase, reflection = electrical(table)
    source_ohm, wave_ohm = table["source_ohm"], line_ohm(table)
    at_source = (source_ohm - wave_ohm) / (source_ohm + wave_ohm)
    rounds = 1 - at_source * reflection * np.exp(-2j * phase)
    return np.asarray(np.abs(1 / (source_ohm + wave_ohm) / rounds))


def over_plane_v(table: Table) -> Array:
    """Distance times field of a trace over an infinite plane, ``(N,)``."""
    phase, reflection = electrical(table)
    per_ampere = radiation.trace_field_per_ampere(
        table["frequency_hz"],
        length_m(table),
        table["height_m"],
        1.0,
        1j * phase / length_m(table),
        reflection,
    )
    return np.asarray(forward_ampere(table) * per_ampere)


def nets(table: Table, cables: tuple[Cable, ...]) -> RadiationInputs:
    """Each row as a net on its board."""
    phase, reflection = electrical(table)

    def column(values: Array) -> Array:
        return np.asarray(values).reshape(-1, 1)

    one = np.ones((len(phase), 1))
    return RadiationInputs(
        length_m=column(length_m(table)),
        height_m=column(table["height_m"]),
        permittivity=one,
        permittivity_effective=one,
        impedance_ohm=column(line_ohm(table)),
        side_offset_m=column(table["side_offset_m"]),
        board_length_m=column(table["board_length_m"]),
        board_width_m=column(table["board_width_m"]),
        load_reflection=column(reflection),
        propagation_per_m=column(1j * phase / length_m(table)),
        cables=cables,
        start_m=column(table["start_m"]),
        end_m=column(table["end_m"]),
    )


def trace_v(table: Table) -> Array:
    """Distance times field of the trace on its board, ``(N,)``."""
    field = trace.field_per_forward_ampere(nets(table, ()), _each(table))
    return forward_ampere(table) * field[:, 0]


def cable_v(table: Table, cables: tuple[Cable, ...]) -> Array:
    """Envelope of board and cables as the program knows them, distance times field, ``(N,)``."""
    field = cable.field_per_forward_ampere(nets(table, cables), _each(table))
    return forward_ampere(table) * field[:, 0]


def cable_at_known_end_v(table: Table) -> Array:
    """Envelope of one cable at the end x = length of the board, ``(N,)``."""
    net = nets(table, ())
    assert net.start_m is not None
    assert net.end_m is not None
    ends = imbalance.Ends(
        imbalance.electrical_position_m(net.start_m, net.board_length_m),
        imbalance.electrical_position_m(net.end_m, net.board_length_m),
    )
    height = imbalance.imbalance_height(
        net.impedance_ohm, 1.0, 1.0, net.height_m, net.side_offset_m, net.board_width_m
    )
    volts = imbalance.effective_voltage_one(
        2 * np.pi * _each(table) / SPEED_M_PER_S,
        ends,
        net.board_length_m,
        imbalance.impedance_ratio(net.board_length_m, net.board_width_m),
        height,
        net.end_volts(),
    )
    field = volts * imbalance.antenna_factor(_each(table), FREE_CABLE_M)
    return forward_ampere(table) * field[:, 0]


def cables_v(table: Table, each_cable: Cable) -> Array:
    """Envelope of all of each row's cables, alike, distance times field, ``(N,)``."""
    field = np.empty(len(table["cables"]))
    for count in np.unique(table["cables"]):
        rows = table["cables"] == count
        field[rows] = cable_v(take(table, rows), (each_cable,) * int(count))
    return field


def on_site_v_per_m(table: Table, field_v: Array) -> Array:
    """Peak field on the measuring site of a distance times field, ``(N,)``."""
    return np.asarray(
        field_v / DISTANCE_M * floor_reflection.site_factor(table["frequency_hz"], DISTANCE_M)
    )


def _each(table: Table) -> Array:
    """Every net's own frequency, ``(N, 1)``."""
    return table["frequency_hz"].reshape(-1, 1)


def excess_db(model: Array, reference: Array) -> Array:
    """Model over reference."""
    return np.asarray(20 * np.log10(model / reference))
