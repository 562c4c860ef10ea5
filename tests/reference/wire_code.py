"""Wire structures for a general-purpose wire code (NEC-2 by PyNEC): ports, far and near fields.

Every port is driven by 1 V peak in turn while the others are shorted; terminations of any kind
follow from the port admittances, so that one solution serves all drivers, loads and filters.
"""

import warnings
from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

with warnings.catch_warnings():  # the wrapper's generator trips newer Pythons' warnings
    warnings.simplefilter("ignore", DeprecationWarning)
    import PyNEC

Array = NDArray[Any]
SPEED_OF_LIGHT_M_PER_S = 299_792_458.0


@dataclass
class Wires:
    """Straight pieces of wire, one segment each, numbered from 1 as they come."""

    pieces: list[tuple[Array, Array, float]] = field(default_factory=list)

    def piece(self, start_m: ArrayLike, end_m: ArrayLike, radius_m: float) -> int:
        """Add one segment and return its number."""
        self.pieces.append((np.asarray(start_m, float), np.asarray(end_m, float), radius_m))
        return len(self.pieces)

    def chain(self, points_m: ArrayLike, radius_m: float) -> list[int]:
        """Add segments from point to point, ``(P, 3)``, and return their numbers."""
        points = np.asarray(points_m, float)
        return [self.piece(a, b, radius_m) for a, b in pairwise(points)]


@dataclass(frozen=True, kw_only=True)
class Solution:
    """Port admittances ``(P, P)`` [S] and fields per volt at each port, ``(P, ..., 2)``."""

    admittance_s: Array
    fields: Array

    def field(self, source_v: ArrayLike, impedance_ohm: ArrayLike) -> Array:
        """Fields ``(..., 2)`` with an EMF and an impedance in each port, ``(P,)``."""
        series = np.diag(np.asarray(impedance_ohm, complex))
        matrix = np.eye(len(series)) + series @ self.admittance_s
        volts = np.linalg.solve(matrix, np.asarray(source_v, complex))
        return np.tensordot(volts, self.fields, axes=(0, 0))

    def line(self, frequency_hz: float) -> tuple[float, float]:
        """Impedance [ohm] and length in air [m] of a line between the first two ports.

        Of a line far below a half wavelength; its symmetric part.
        """
        (near, across), (_, far) = self.admittance_s[:2, :2]
        wave_per_m = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT_M_PER_S
        angle = np.arccos(np.abs(((near + far) / 2 / across).real))
        return float(np.abs(1 / np.sqrt(near * far - across**2))), float(angle / wave_per_m)


@dataclass(frozen=True, slots=True, kw_only=True)
class Scan:
    """Receiving places: a vertical axis, the distance from it, azimuths, and heights.

    ``heights_m`` is the lowest, the highest and the number of heights.
    """

    axis_m: tuple[float, float]
    distance_m: float
    azimuths: int
    heights_m: tuple[float, float, int]


def far_field(
    wires: Wires, frequency_hz: float, ports: list[int], directions: tuple[int, int], *, floor: bool
) -> Solution:
    """Distance times field, polar and azimuthal part, ``(P, T * A, 2)`` [V], peak.

    ``directions`` are the numbers of polar angles (from the zenith to the horizon over a
    floor, else to the nadir) and of azimuths all around. The floor is a perfect conductor at z = 0.
    """
    polar, azimuths = directions
    step_deg = (90.0 if floor else 180.0) / (polar - 1)
    grid = (0.0, 0.0, step_deg, 360.0 / azimuths, 0.0, 0.0)

    def field_of(nec: Any, number: int) -> Array:
        nec.rp_card(0, polar, azimuths, 0, 0, 0, 0, *grid)
        pattern = nec.get_radiation_pattern(number)
        return np.stack([pattern.get_e_theta(), pattern.get_e_phi()], axis=-1)

    return _solve(wires, frequency_hz, ports, field_of, floor=floor)


def scanned_field(wires: Wires, frequency_hz: float, ports: list[int], scan: Scan) -> Solution:
    """Field over a floor on a cylinder, ``(P, A * H, 2)`` [V/m], peak.

    Horizontal part across the line of sight, then vertical part: what an antenna sees that
    is turned to the cylinder's axis.
    """
    low_m, high_m, steps = scan.heights_m
    azimuths = scan.azimuths
    grid = (0.0, 0.0, (high_m - low_m) / (steps - 1))
    angles = 2 * np.pi * np.arange(azimuths) / azimuths

    def field_of(nec: Any, number: int) -> Array:
        rows = []
        for index, angle in enumerate(angles):
            x_m = scan.axis_m[0] + scan.distance_m * np.cos(angle)
            y_m = scan.axis_m[1] + scan.distance_m * np.sin(angle)
            nec.ne_card(0, 1, 1, steps, x_m, y_m, low_m, *grid)
            near = nec.get_near_field_pattern(number * azimuths + index)
            x, y = np.asarray(near.get_field_x()), np.asarray(near.get_field_y())
            across = y * np.cos(angle) - x * np.sin(angle)
            rows.append(np.stack([across, near.get_field_z()], axis=-1))
        return np.concatenate(rows)

    return _solve(wires, frequency_hz, ports, field_of, floor=True)


def _solve(
    wires: Wires,
    frequency_hz: float,
    ports: list[int],
    field_of: Callable[[Any, int], Array],
    *,
    floor: bool,
) -> Solution:
    """Drive the ports in turn: their currents and what `field_of` reads each time."""
    nec = PyNEC.nec_context()
    geometry = nec.get_geometry()
    for number, (start, end, radius_m) in enumerate(wires.pieces, 1):
        geometry.wire(number, 1, *start, *end, radius_m, 1.0, 1.0)
    nec.geometry_complete(int(floor))
    if floor:
        nec.gn_card(1, 0, 0, 0, 0, 0, 0, 0)
    nec.fr_card(0, 1, frequency_hz / 1e6, 0)
    currents, fields = [], []
    for number, port in enumerate(ports):
        nec.ex_card(0, port, 1, 0, 1.0, 0.0, 0.0, 0.0, 0.0, 0.0)
        nec.xq_card(0)
        solved = np.asarray(nec.get_structure_currents(number).get_current())
        currents.append(solved[np.asarray(ports) - 1])
        fields.append(field_of(nec, number))
    return Solution(admittance_s=np.array(currents).T, fields=np.array(fields))
