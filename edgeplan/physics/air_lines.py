"""Impedance in air of a strip over a plane and between planes.

Impedance over the speed of light is inductance per metre, so the same formulas
give impedance (`cross_section`) and, by their derivative, skin loss
(`line_losses`). Complex sizes are taken for that reason. Nothing is checked here.
"""

from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]

SPEED_OF_LIGHT_M_PER_S = 299_792_458.0
MU_0_HENRY_PER_M = 4e-7 * np.pi
ETA_0_OHM = MU_0_HENRY_PER_M * SPEED_OF_LIGHT_M_PER_S
NO_THICKNESS = 1e-12  # the widening ends at 0 with the thickness; its formula does not


def strip_widening(u: Array, t: Array) -> Array:
    r"""Widening of a strip over a plane for its thickness.

    .. math:: \Delta u = \frac{t}{\pi} \ln\Bigl(1 + \frac{4e}{t\coth^2\sqrt{6.517 u}}\Bigr)

    Parameters
    ----------
    u, t : numpy.ndarray
        Width and thickness of the strip, as shares of its height. [-]

    Returns
    -------
    numpy.ndarray
        Widening as a share of the height, 0 at t = 0. [-]

    Examples
    --------
    A very wide strip, t/h = 4e/(e - 1), so that the logarithm is 1: t / pi.

    >>> t = np.array(4 * np.e / (np.e - 1))
    >>> print(f"{strip_widening(np.array(100.0), t) / t * np.pi:.6f}")
    1.000000

    References
    ----------
    .. [1] E. Hammerstad and O. Jensen, IEEE MTT-S Symposium Digest, 1980, eq. (6).
    """
    t = np.where(t == 0, NO_THICKNESS, t)
    return np.asarray(t / np.pi * np.log(1 + 4 * np.e / t * np.tanh(np.sqrt(6.517 * u)) ** 2))


def microstrip_air_ohm(u: Array) -> Array:
    r"""Impedance in air of a thin strip over a plane.

    .. math:: Z_{01} = \frac{\eta_0}{2\pi} \ln\bigl[f(u)/u + \sqrt{1 + (2/u)^2}\bigr]

    Parameters
    ----------
    u : numpy.ndarray
        Width of the strip over its height. [-]

    Returns
    -------
    numpy.ndarray
        Impedance. [ohm]

    Examples
    --------
    The exact value at w = h is 126.424 ohm.

    >>> print(f"{microstrip_air_ohm(np.array(1.0)):.3f}")
    126.424

    References
    ----------
    .. [1] E. Hammerstad and O. Jensen, IEEE MTT-S Symposium Digest, 1980, eq. (1), (2).
    """
    f = 6 + (2 * np.pi - 6) * np.exp(-((30.666 / u) ** 0.7528))
    return np.asarray(ETA_0_OHM / (2 * np.pi) * np.log(f / u + np.sqrt(1 + (2 / u) ** 2)))


def stripline_air_ohm(w: Array, b: Array, t: Array) -> Array:
    """Impedance in air of a strip midway between two planes, finite thickness.

    Parameters
    ----------
    w, b, t : numpy.ndarray
        Width of the strip, gap from plane to plane, thickness of the strip. [m]

    Returns
    -------
    numpy.ndarray
        Impedance. [ohm]

    Examples
    --------
    >>> print(f"{stripline_air_ohm(np.array(1e-4), np.array(1e-3), np.array(0.0)):.2f}")
    194.22

    References
    ----------
    .. [1] H. A. Wheeler, IEEE Trans. MTT-26, 1978, pp. 866-876.
    """
    x = np.where(t == 0, NO_THICKNESS, t / b)
    n = 2 / (1 + 2 / 3 * x / (1 - x))
    bend = (x / (2 - x)) ** 2 + (0.0796 * x / (w / b + 1.1 * x)) ** n
    m = w / (b - t) + x / (np.pi * (1 - x)) * (1 - 0.5 * np.log(bend))
    a = 8 / (np.pi * m)
    bracket = 1 + 4 / (np.pi * m) * (a + np.sqrt(a**2 + 6.27))
    return np.asarray(ETA_0_OHM / (4 * np.pi) * np.log(bracket))
