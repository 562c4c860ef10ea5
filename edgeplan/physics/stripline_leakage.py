"""What an inner line still drives: leakage at the side of its planes, and changes of plane."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S

Array = NDArray[Any]

LEAKAGE = 0.050  # fit to static field solutions, exponent and root of the width within 4 %
FAR_GAPS = 3.0  # beyond so many plane spacings from the side nothing is left
FITTED_FROM_GAPS = 0.25  # nearest side of the field solutions, over the plane spacing
FITTED_WIDTH_M = (0.03, 0.12)  # of their planes
STITCH_SHARE = 1 / 20  # of a wave


def edge_leakage(
    air_impedance_ohm: ArrayLike,
    plane_gap_m: ArrayLike,
    plane_width_m: ArrayLike,
    side_distance_m: ArrayLike,
) -> Array:
    r"""Share of an inner line's voltage that stands along its planes.

    .. math:: h = 0.050\,\frac{\eta_0}{Z_{c0}}\sqrt{\frac bW}\,e^{-\pi d/b}, \quad d \le 3b

    Parameters
    ----------
    air_impedance_ohm : array_like
        Impedance of the line without its dielectric, Z_c sqrt(er). [ohm]
    plane_gap_m : array_like
        Distance of both planes from each other, b. [m]
    plane_width_m : array_like
        Width of the planes across the line, W. [m]
    side_distance_m : array_like
        From the edge of the strip to the side of the planes, d; below 0 counts as 0. [m]

    Returns
    -------
    numpy.ndarray
        Imbalance height, magnetic and electric alike; 0 beyond three plane spacings. [-]

    Notes
    -----
    Both planes at one potential, joined all along (stitched): planes of different supplies
    are a cavity and not this. Fitted to static field solutions of one strip width (0.3 b),
    W of 30 to 120 mm, d/b of 0.25 to 2.5; that it goes with 1/Z_c0 is assumed.

    Examples
    --------
    At the very side of 100 mm of planes 1 mm apart: 0.05 x 376.73/94.18 x 0.1.

    >>> print(f"{edge_leakage(94.18, 1e-3, 0.1, 0.0):.4f}")
    0.0200
    """
    gap_m = np.asarray(plane_gap_m, dtype=float)
    away = np.maximum(np.asarray(side_distance_m), 0) / gap_m
    height = LEAKAGE * ETA_0_OHM / np.asarray(air_impedance_ohm)
    height = height * np.sqrt(gap_m / np.asarray(plane_width_m)) * np.exp(-np.pi * away)
    return np.where(away > FAR_GAPS, 0.0, height)


def outside_fit(
    plane_gap_m: ArrayLike, plane_width_m: ArrayLike, side_distance_m: ArrayLike
) -> NDArray[np.bool_]:
    """Whether `edge_leakage` is asked for more than its field solutions cover.

    Parameters
    ----------
    plane_gap_m, plane_width_m, side_distance_m : array_like
        As in `edge_leakage`. [m]

    Returns
    -------
    numpy.ndarray of bool
        True nearer to the side than a quarter of the plane spacing, or within three spacings
        of it on planes narrower or wider than those of the fit.

    Examples
    --------
    >>> outside_fit(1e-3, 0.1, [0.1e-3, 1e-3]).tolist()
    [True, False]
    >>> outside_fit(1e-3, 0.2, [1e-3, 4e-3]).tolist()
    [True, False]
    """
    away = np.asarray(side_distance_m, dtype=float) / np.asarray(plane_gap_m)
    width_m = np.asarray(plane_width_m)
    fits = (width_m >= FITTED_WIDTH_M[0]) & (width_m <= FITTED_WIDTH_M[1])
    return np.asarray((away <= FAR_GAPS) & ((away < FITTED_FROM_GAPS) | ~fits))


def stitching_distance_m(highest_hz: ArrayLike, permittivity: ArrayLike) -> Array:
    r"""Largest distance of a joint between two planes from the via that changes between them.

    .. math:: \lambda/20 = \frac{c}{20 f\sqrt{\varepsilon_r}}

    Parameters
    ----------
    highest_hz : array_like
        Highest judged frequency. [Hz]
    permittivity : array_like
        Relative permittivity between the planes. [-]

    Returns
    -------
    numpy.ndarray
        Distance. [m]

    Examples
    --------
    >>> print(f"{stitching_distance_m(1e9, 4.0) * 1e3:.1f} mm")
    7.5 mm
    """
    wave_m = SPEED_OF_LIGHT_M_PER_S / (np.asarray(highest_hz) * np.sqrt(permittivity))
    return np.asarray(STITCH_SHARE * wave_m)


def unstitched(
    changes_plane: ArrayLike,
    joint_distance_m: ArrayLike,
    highest_hz: ArrayLike,
    permittivity: ArrayLike,
) -> NDArray[np.bool_]:
    """Vias whose return current has no way near: a finding of its own, its level not judged.

    Parameters
    ----------
    changes_plane : array_like of bool
        Whether the line refers to another plane behind the via.
    joint_distance_m : array_like
        From the via to the nearest ground via (planes of one potential) or capacitor
        (others); NaN where nothing is known. [m]
    highest_hz, permittivity : array_like
        As in `stitching_distance_m`.

    Returns
    -------
    numpy.ndarray of bool
        True where the plane changes and no joint is known within `stitching_distance_m`.

    Notes
    -----
    The pair of planes is then a cavity that the via drives; no level of it is modelled.

    Examples
    --------
    >>> unstitched([True, True, False], [2e-3, np.nan, np.nan], 1e9, 4.0).tolist()
    [False, True, False]
    """
    near = np.asarray(joint_distance_m) <= stitching_distance_m(highest_hz, permittivity)
    return np.asarray(np.asarray(changes_plane, dtype=bool) & ~near)
