"""Radiation of a net on an inner layer: its surface pieces at both ends, its leakage at a side."""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from edgeplan.emission import cable
from edgeplan.emission.mechanism import Array, Mechanism
from edgeplan.physics import imbalance, stripline_leakage
from edgeplan.physics.air_lines import SPEED_OF_LIGHT_M_PER_S
from edgeplan.physics.radiation import finite_board_factor, trace_field_per_ampere

MODEL = Mechanism(
    name="inner_layer",
    version=2,
    error_db=cable.MODEL.error_db,
    source="surface pieces as short traces, leakage of an inner line in closed form, held"
    " against static field solutions; the errors are those of trace and cable, no full-wave run"
    " has planes on both sides",
)
BREAKOUT_M = 3e-3  # of each end, where nothing is known: an assumption, to be printed as one


@dataclass(frozen=True, slots=True, kw_only=True)
class InnerInputs:
    """N nets between planes; arrays are ``(N, 1)`` or scalars, states complex ``(N, F)``.

    ``near_*`` and ``far_*`` are voltage and current at driver and last receiver per ampere of
    forward wave (or per any other unit: the result is per that unit); currents count
    towards the receiver. ``breakout_m`` is the surface length at the driver and at the
    receiver; ``surface_*`` the line it is drawn as. ``plane_gap_m`` is the distance of both
    planes, ``strip_ohm``, ``strip_permittivity`` and ``strip_width_m`` the line between them,
    ``side_distance_m`` from its edge to the nearest side along the net. The rest as in
    `mechanism.RadiationInputs`.
    """

    near_volt: Array
    near_ampere: Array
    far_volt: Array
    far_ampere: Array
    surface_height_m: Array
    surface_permittivity: Array
    surface_permittivity_effective: Array
    surface_ohm: Array
    strip_ohm: Array
    strip_permittivity: Array
    strip_width_m: Array
    plane_gap_m: Array
    side_distance_m: Array
    length_m: Array
    board_length_m: Array
    board_width_m: Array
    breakout_m: tuple[float | Array, float | Array] = (BREAKOUT_M, BREAKOUT_M)
    start_m: Array | None = None
    end_m: Array | None = None


def field_per_forward_ampere(paths: InnerInputs, frequency_hz: ArrayLike) -> Array:
    """Largest distance times field of the surface pieces of each net, peak.

    Parameters
    ----------
    paths : InnerInputs
        N nets.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        Both pieces added without regard to phase, ``(N, F)``. [V/A]

    Notes
    -----
    Each piece is a straight trace with voltage and current of its end of the line, on a
    board of finite size. A via through an unstitched change of plane is not in it: see
    `stripline_leakage.unstitched`.

    Examples
    --------
    Two pieces of 3 mm with 1 A and no voltage at 30 MHz, on a board that leaves half:
    131.7e-16 f^2 (3 mm x 0.2 mm) each.

    >>> net = InnerInputs(
    ...     near_volt=np.zeros((1, 1)) + 0j, near_ampere=np.ones((1, 1)) + 0j,
    ...     far_volt=np.zeros((1, 1)) + 0j, far_ampere=np.ones((1, 1)) + 0j,
    ...     surface_height_m=0.2e-3, surface_permittivity=4.3,
    ...     surface_permittivity_effective=3.2, surface_ohm=50.0, strip_ohm=50.0,
    ...     strip_permittivity=4.3, strip_width_m=0.12e-3, plane_gap_m=0.4e-3,
    ...     side_distance_m=0.02, length_m=0.08, board_length_m=0.1, board_width_m=0.1)
    >>> field = field_per_forward_ampere(net, np.array([30e6]))[0, 0]
    >>> print(f"{field / (2 * 131.686e-16 * 30e6**2 * 3e-3 * 0.2e-3):.3f}")
    1.000
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    k = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT_M_PER_S
    largest_m = np.maximum(paths.board_length_m, paths.board_width_m)
    total = np.zeros(np.broadcast_shapes(frequency_hz.shape, np.shape(paths.near_volt)))
    gamma = 1j * k * np.sqrt(paths.surface_permittivity_effective)
    ends = (
        (paths.near_volt, paths.near_ampere, paths.breakout_m[0], True),
        (paths.far_volt, paths.far_ampere, paths.breakout_m[1], False),
    )
    for volt, ampere, length_m, at_start in ends:
        forward = (ampere + volt / paths.surface_ohm) / 2
        with np.errstate(invalid="ignore"):
            reflection = np.where(forward == 0, 0.0, (forward - ampere) / forward)
        if at_start:
            reflection = reflection * np.exp(2 * gamma * length_m)
        total = total + np.abs(forward) * trace_field_per_ampere(
            frequency_hz,
            length_m,
            paths.surface_height_m,
            paths.surface_permittivity,
            gamma,
            reflection,
        )
    return total * finite_board_factor(frequency_hz, largest_m)


class InnerVolts(NamedTuple):
    """Effective common-mode voltage per unit of the states, ``(N, F)``: one cable, or any."""

    one: Array
    any_end: Array


def common_mode_per_forward_ampere(paths: InnerInputs, frequency_hz: ArrayLike) -> InnerVolts:
    """Voltage with which nets on inner layers drive board and cables.

    Parameters
    ----------
    paths : InnerInputs
        N nets.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    InnerVolts
        For one cable at the worse end of the board, and for any. Times
        `imbalance.antenna_factor` it is distance times field, peak. [V/A]

    Notes
    -----
    Both surface pieces and the leakage of the inner line, added without regard to phase.

    Examples
    --------
    Far from the sides and without surface pieces nothing is left.

    >>> one = np.ones((1, 1)) + 0j
    >>> net = InnerInputs(
    ...     near_volt=one, near_ampere=0 * one, far_volt=one, far_ampere=0 * one,
    ...     surface_height_m=0.2e-3, surface_permittivity=4.3,
    ...     surface_permittivity_effective=3.2, surface_ohm=50.0, strip_ohm=50.0,
    ...     strip_permittivity=4.3, strip_width_m=0.12e-3, plane_gap_m=0.4e-3,
    ...     side_distance_m=0.02, length_m=0.08, board_length_m=0.1, board_width_m=0.1,
    ...     breakout_m=(0.0, 0.0))
    >>> common_mode_per_forward_ampere(net, np.array([30e6])).one
    array([[0.]])
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    k = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT_M_PER_S
    ratio = imbalance.impedance_ratio(paths.board_length_m, paths.board_width_m)
    one = np.zeros(np.broadcast_shapes(frequency_hz.shape, np.shape(paths.near_volt)))
    any_end = one
    for ends, height, volts in _pieces(paths, k):
        far, near = (
            imbalance.effective_voltage_one(k, x, paths.board_length_m, ratio, height, volts)
            for x in (ends, _mirrored(ends, paths.board_length_m))
        )
        one = one + np.maximum(far, near)
        any_end = any_end + imbalance.effective_voltage_any(
            k, ends, paths.board_length_m, ratio, height, volts
        )
    return InnerVolts(one, any_end)


def _pieces(
    paths: InnerInputs, k: Array
) -> list[tuple[imbalance.Ends, imbalance.ImbalanceHeight, tuple[Array, Array]]]:
    """Electrical ends, imbalance and end voltages of both surface pieces and the inner line."""
    start_m, end_m = imbalance.centred_ends(paths.length_m, paths.board_length_m)
    if paths.start_m is not None and paths.end_m is not None:
        start_m, end_m = paths.start_m, paths.end_m
    way = np.sign(end_m - start_m)
    places_m = (
        start_m,
        start_m + way * paths.breakout_m[0],
        end_m - way * paths.breakout_m[1],
        end_m,
    )
    a, b, c, d = (imbalance.electrical_position_m(x, paths.board_length_m) for x in places_m)
    angle = k * np.sqrt(paths.surface_permittivity_effective)
    near_volt, far_volt = paths.near_volt, paths.far_volt
    after = _along(near_volt, paths.near_ampere, paths.surface_ohm, angle * paths.breakout_m[0])
    before = _along(far_volt, paths.far_ampere, paths.surface_ohm, -angle * paths.breakout_m[1])
    surface = imbalance.imbalance_height(
        paths.surface_ohm,
        paths.surface_permittivity_effective,
        paths.surface_permittivity,
        paths.surface_height_m,
        np.maximum(np.asarray(paths.board_width_m) / 2 - paths.side_distance_m, 0),
        paths.board_width_m,
    )
    leak = stripline_leakage.edge_leakage(
        paths.strip_ohm * np.sqrt(paths.strip_permittivity),
        paths.plane_gap_m,
        paths.board_width_m,
        paths.side_distance_m,
        paths.strip_width_m,
    )
    return [
        (imbalance.Ends(a, b), surface, (near_volt, after)),
        (imbalance.Ends(b, c), imbalance.ImbalanceHeight(leak, leak), (after, before)),
        (imbalance.Ends(c, d), surface, (before, far_volt)),
    ]


def _along(volt: Array, ampere: Array, ohm: Array, angle: Array) -> Array:
    """Voltage an electrical length towards the receiver, of a line without loss."""
    return np.asarray(volt * np.cos(angle) - 1j * ohm * ampere * np.sin(angle))


def _mirrored(ends: imbalance.Ends, board_length_m: Array) -> imbalance.Ends:
    """Positions from the other end of the board."""
    return imbalance.Ends(board_length_m - ends.source_m, board_length_m - ends.load_m)
