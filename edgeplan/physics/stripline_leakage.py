"""What an inner line still drives: leakage at the side of its planes, and changes of plane."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S

Array = NDArray[Any]

LEAKAGE = 1 / (np.pi * np.sqrt(2 * np.pi * np.e))  # of a very narrow strip: 0.0770
MEAN_STEPS = 6  # of the arithmetic-geometric mean: within 4e-8 up to 5 spacings, else above it
FAR_GAPS = 3.0  # beyond so many plane spacings from the side nothing is left
CHECKED_FROM_GAPS = 0.25  # nearest side of the field solutions, over the plane spacing
CHECKED_WIDTH_M = (0.03, 0.12)  # of their planes
CHECKED_STRIP_GAPS = (0.05, 2.0)  # width of their strips, over the plane spacing
STITCH_SHARE = 1 / 20  # of a wave


def edge_leakage(
    air_impedance_ohm: ArrayLike,
    plane_gap_m: ArrayLike,
    plane_width_m: ArrayLike,
    side_distance_m: ArrayLike,
    strip_width_m: ArrayLike,
) -> Array:
    r"""Share of an inner line's voltage that stands along its planes.

    .. math:: h = \frac{\eta_0}{\pi Z_{c0}}\sqrt{\frac b{2\pi e W}}\;
       M(1, e^{-\pi w/b})\,e^{-\pi d/b}, \quad d \le 3b

    with the arithmetic-geometric mean M.

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
    strip_width_m : array_like
        Width of the strip, w. [m]

    Returns
    -------
    numpy.ndarray
        Imbalance height, magnetic and electric alike; 0 beyond three plane spacings. [-]

    Notes
    -----
    Both planes at one potential, joined all along (stitched): planes of different supplies
    are a cavity and not this. Nothing is fitted. By reciprocity h is the potential that the
    planes, charged alike, make at the strip, weighed by the strip's own charge. At the side of
    wide planes that potential is the real part of A sqrt(t) with pi z/(b/2) = 1 + t + ln t
    (Maxwell's map of a plane over a wall of symmetry), far inside
    A exp(-1/2 - pi x/b); A follows from the charge of a plane of width W near its side. The
    strip's charge, 1/sqrt(cosh(pi w/b) - cosh(2 pi x/b)) across it, has the mean
    exp(pi x/b) of pi exp(pi w/2b)/(2 K(k)) with k'= exp(-pi w/b), and pi/2/K = M(1, k').
    Against static field solutions of thin strips midway, w/b of 0.05 to 2, W of 30 to
    120 mm, d/b of 0.25 to 2.5: 0.0 to +0.7 dB, the most at d = b/4. Nearer to one plane a
    strip leaks less, about by sin(pi y/b) at height y, which is not counted.

    Examples
    --------
    At the very side of 100 mm of planes 1 mm apart, a strip so narrow that M is 1:
    0.0770 x 376.73/94.18 x 0.1. A strip as wide as the planes are apart: M(1, 0.0432) = 0.347.

    >>> print(f"{edge_leakage(94.18, 1e-3, 0.1, 0.0, 0.0):.4f}")
    0.0308
    >>> print(f"{edge_leakage(94.18, 1e-3, 0.1, 0.0, 1e-3):.4f}")
    0.0107

    References
    ----------
    .. [1] J. C. Maxwell, "A Treatise on Electricity and Magnetism", vol. 1, ch. 12: the
       map of a plate's side; the rest is derived above.
    .. [2] M. Abramowitz, I. A. Stegun, "Handbook of Mathematical Functions", 17.6: K by the
       arithmetic-geometric mean.
    """
    gap_m = np.asarray(plane_gap_m, dtype=float)
    away = np.maximum(np.asarray(side_distance_m), 0) / gap_m
    height = LEAKAGE * ETA_0_OHM / np.asarray(air_impedance_ohm)
    height = height * np.sqrt(gap_m / np.asarray(plane_width_m)) * np.exp(-np.pi * away)
    height = height * _strip_share(np.asarray(strip_width_m) / gap_m)
    return np.where(away > FAR_GAPS, 0.0, height)


def _strip_share(width_gaps: Array) -> Array:
    """What a strip leaks over one whose charge all lies at its near edge: M(1, exp(-pi w/b))."""
    mean, root = np.ones(np.shape(width_gaps)), np.exp(-np.pi * width_gaps)
    for _ in range(MEAN_STEPS):
        mean, root = (mean + root) / 2, np.sqrt(mean * root)
    return np.asarray(mean)


def outside_checked(
    plane_gap_m: ArrayLike,
    plane_width_m: ArrayLike,
    side_distance_m: ArrayLike,
    strip_width_m: ArrayLike,
) -> NDArray[np.bool_]:
    """Whether `edge_leakage` is asked for more than its field solutions cover.

    Parameters
    ----------
    plane_gap_m, plane_width_m, side_distance_m, strip_width_m : array_like
        As in `edge_leakage`. [m]

    Returns
    -------
    numpy.ndarray of bool
        True nearer to the side than a quarter of the plane spacing, or within three spacings
        of it on planes, or with a strip over their spacing, narrower or wider than theirs.

    Examples
    --------
    >>> outside_checked(1e-3, 0.1, [0.1e-3, 1e-3], 0.3e-3).tolist()
    [True, False]
    >>> outside_checked(1e-3, 0.2, [1e-3, 4e-3], 0.3e-3).tolist()
    [True, False]
    >>> outside_checked(1e-3, 0.1, 1e-3, [0.04e-3, 1e-3, 3e-3]).tolist()
    [True, False, True]
    """
    away = np.asarray(side_distance_m, dtype=float) / np.asarray(plane_gap_m)
    strip = np.asarray(strip_width_m) / np.asarray(plane_gap_m)
    inside = _within(np.asarray(plane_width_m), CHECKED_WIDTH_M) & _within(
        strip, CHECKED_STRIP_GAPS
    )
    return np.asarray((away <= FAR_GAPS) & ((away < CHECKED_FROM_GAPS) | ~inside))


def _within(values: Array, ends: tuple[float, float]) -> NDArray[np.bool_]:
    """Whether values lie between two ends, these included; NaN does not."""
    return np.asarray((values >= ends[0]) & (values <= ends[1]))


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
