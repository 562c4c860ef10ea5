"""What the measuring site adds: floor reflection under a height scan, and the near field.

Perfectly reflecting floor, source 0.8 m above it, receiver searched from 1 to 4 m.
"""

from functools import cache
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import SPEED_OF_LIGHT_M_PER_S

Array = NDArray[Any]
Polarisation = Literal["horizontal", "vertical"]

SOURCE_HEIGHT_M = 0.8  # table height of CISPR 16-2-3
SCAN_M = np.linspace(1.0, 4.0, 301)
FLOOR_UP_TO_HZ = 1e9  # above, the floor carries absorbers (CISPR 16-1-4)
FLOOR_FROM_HZ = 30e6
BOUND_STEPS = 400  # frequencies, evenly in logarithm


def two_ray_factor(frequency_hz: ArrayLike, distance_m: float, polarisation: Polarisation) -> Array:
    r"""Largest field of a short dipole over a floor in a height scan, over free space.

    .. math:: \max_{h}\ r\,\Bigl|F(r_1) \mp F(r_2)\Bigr|, \qquad
       F_h = \Bigl(1 + \frac{1}{jkr} - \frac{1}{(kr)^2}\Bigr)\frac{e^{-jkr}}{r}

    with :math:`r_{1,2}` the ways from source and image. The vertical field of a vertical
    dipole is :math:`F_h \sin^2\theta` and its radial part
    :math:`-2(1/jkr - 1/(kr)^2) \cos^2\theta\, e^{-jkr}/r`, image added.

    Parameters
    ----------
    frequency_hz : array_like
        Frequencies, ``(F,)``. [Hz]
    distance_m : float
        Horizontal distance from source to receiver. [m]
    polarisation : {"horizontal", "vertical"}
        Of both the dipole and the receiver; the horizontal one lies broadside.

    Returns
    -------
    numpy.ndarray
        Field over the far field of the same dipole in free space at that distance, ``(F,)``. [-]

    Examples
    --------
    >>> print(f"{20 * np.log10(two_ray_factor(100e6, 3.0, 'horizontal')):.1f} dB")
    2.5 dB

    References
    ----------
    .. [1] A. A. Smith, R. F. German, J. B. Pate, "Calculation of site attenuation from
       antenna factors", IEEE Trans. EMC 24 (1982) 301.
    """
    k = 2 * np.pi * np.asarray(frequency_hz, dtype=float)[..., None] / SPEED_OF_LIGHT_M_PER_S
    ray = {"horizontal": _horizontal_ray, "vertical": _vertical_ray}[polarisation]
    image_sign = {"horizontal": -1, "vertical": 1}[polarisation]
    direct = ray(k, distance_m, SCAN_M - SOURCE_HEIGHT_M)
    image = ray(k, distance_m, SCAN_M + SOURCE_HEIGHT_M)
    return np.asarray(distance_m * np.abs(direct + image_sign * image).max(axis=-1))


def _horizontal_ray(k: Array, distance_m: float, rise_m: Array) -> Array:
    """Field of a horizontal dipole, broadside, over that of unit strength."""
    way_m = np.hypot(distance_m, rise_m)
    near = 1 / (1j * k * way_m)
    return np.asarray((1 + near + near**2) * np.exp(-1j * k * way_m) / way_m)


def _vertical_ray(k: Array, distance_m: float, rise_m: Array) -> Array:
    """Vertical field of a vertical dipole: its transverse and its radial part."""
    way_m = np.hypot(distance_m, rise_m)
    near = 1 / (1j * k * way_m)
    sine_squared = (distance_m / way_m) ** 2
    parts = (1 + near + near**2) * sine_squared - 2 * (near + near**2) * (1 - sine_squared)
    return np.asarray(parts * np.exp(-1j * k * way_m) / way_m)


@cache
def floor_bound(distance_m: float) -> float:
    """Largest two-ray factor over both polarisations and 30 MHz to 1 GHz.

    Parameters
    ----------
    distance_m : float
        Measuring distance. [m]

    Returns
    -------
    float
        Factor on the free-space field: 1.855 at 3 m, 1.984 at 10 m. [-]

    Notes
    -----
    The direction of the field of a board with cables is not known, so neither is the
    polarisation: the bound stands for all of them.

    Examples
    --------
    >>> print(f"{20 * np.log10(floor_bound(3.0)):.2f} dB")
    5.37 dB
    """
    frequency_hz = np.geomspace(FLOOR_FROM_HZ, FLOOR_UP_TO_HZ, BOUND_STEPS)
    return float(
        max(
            two_ray_factor(frequency_hz, distance_m, "horizontal").max(),
            two_ray_factor(frequency_hz, distance_m, "vertical").max(),
        )
    )


def site_factor(frequency_hz: ArrayLike, distance_m: float) -> Array:
    """Factor of the measuring site on the free-space field.

    Parameters
    ----------
    frequency_hz : array_like
        Frequency, any shape. [Hz]
    distance_m : float
        Measuring distance; the field itself must be evaluated at that distance. [m]

    Returns
    -------
    numpy.ndarray
        `floor_bound` to 1 GHz, 1 above (absorbers on the floor). [-]

    Examples
    --------
    >>> print(np.round(site_factor([100e6, 1e9, 1.1e9], 10.0), 2))
    [1.98 1.98 1.  ]
    """
    on_floor = np.asarray(frequency_hz) <= FLOOR_UP_TO_HZ
    return np.where(on_floor, floor_bound(float(distance_m)), 1.0)


def near_field_factor(frequency_hz: ArrayLike, distance_m: ArrayLike) -> Array:
    r"""Near field of a small loop over its far field, :math:`\sqrt{1 + 1/(kr)^2}`.

    Parameters
    ----------
    frequency_hz : array_like
        Frequency. [Hz]
    distance_m : array_like
        Distance from the source. [m]

    Returns
    -------
    numpy.ndarray
        Factor on the far field; for the trace's own field, not for cables. [-]

    Examples
    --------
    >>> print(f"{20 * np.log10(near_field_factor(30e6, 3.0)):.2f} dB")
    1.08 dB
    """
    kr = 2 * np.pi * np.asarray(frequency_hz) * np.asarray(distance_m) / SPEED_OF_LIGHT_M_PER_S
    return np.asarray(np.sqrt(1 + 1 / kr**2))
