"""Impedance, delay and loss of a printed line from its cross-section, in closed form.

Every function broadcasts its arguments and returns NaN where its formula is not
valid: one odd line must not stop the others, and NaN reads as undecided.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import (
    ETA_0_OHM,
    SPEED_OF_LIGHT_M_PER_S,
    microstrip_air_ohm,
    strip_widening,
    stripline_air_ohm,
)
from edgeplan.physics.line_losses import (
    dc_resistance,
    effective_loss_tangent,
    skin_factor,
    skin_factor_stripline,
)

Array = NDArray[Any]

__all__ = [
    "air_impedance_ohm",
    "dc_resistance",
    "delay_s_per_m",
    "effective_loss_tangent",
    "loaded_line",
    "microstrip",
    "skin_factor",
    "skin_factor_stripline",
    "stripline_centred",
    "stripline_offset",
    "stripline_zero_thickness",
]


def delay_s_per_m(permittivity_effective: ArrayLike) -> Array:
    r"""Delay of a line per metre, :math:`\sqrt{\varepsilon_e}/c`.

    Parameters
    ----------
    permittivity_effective : array_like
        Effective relative permittivity, 1 or more. [-]

    Returns
    -------
    numpy.ndarray
        Delay. [s/m]

    Examples
    --------
    A stripline in er 4.5, in picoseconds per inch: 84.725 sqrt(4.5).

    >>> print(f"{delay_s_per_m(4.5) * 0.0254 * 1e12:.2f}")
    179.73
    """
    return np.asarray(np.sqrt(permittivity_effective) / SPEED_OF_LIGHT_M_PER_S)


def air_impedance_ohm(impedance_ohm: ArrayLike, permittivity_effective: ArrayLike) -> Array:
    r"""Impedance of the same conductors in air, :math:`Z_0\sqrt{\varepsilon_e}`.

    Parameters
    ----------
    impedance_ohm : array_like
        Impedance with the dielectric. [ohm]
    permittivity_effective : array_like
        Effective relative permittivity. [-]

    Returns
    -------
    numpy.ndarray
        Impedance without the dielectric; over c it is the inductance per metre. [ohm]

    Examples
    --------
    >>> float(air_impedance_ohm(50.0, 4.0))
    100.0
    """
    return np.asarray(impedance_ohm) * np.sqrt(permittivity_effective)


def microstrip(
    width_m: ArrayLike, height_m: ArrayLike, thickness_m: ArrayLike, permittivity: ArrayLike
) -> tuple[Array, Array]:
    r"""Impedance and effective permittivity of a bare microstrip (Hammerstad and Jensen).

    With u = w/h, the strip is widened for its thickness, once in air (u1) and once
    with the dielectric (ur); then

    .. math:: Z_0 = Z_{01}(u_r)/\sqrt{\varepsilon_e(u_r)}, \quad
       \varepsilon = \varepsilon_e(u_r)\,(Z_{01}(u_1)/Z_{01}(u_r))^2

    Parameters
    ----------
    width_m : array_like
        Width of the strip, w. [m]
    height_m : array_like
        From the plane to the underside of the strip, h. [m]
    thickness_m : array_like
        Thickness of the strip, t; 0 for an infinitely thin one. [m]
    permittivity : array_like
        Relative permittivity of the dielectric under the strip. [-]

    Returns
    -------
    impedance_ohm : numpy.ndarray
        Characteristic impedance. [ohm]
    permittivity_effective : numpy.ndarray
        Effective relative permittivity. [-]

    Notes
    -----
    Quasi-static, no solder mask. Valid for 0.01 <= w/h <= 100, 1 <= er <= 128 and
    t <= h; NaN elsewhere. The authors state 0.2 % at t = 0.

    Examples
    --------
    An outer layer, 0.18 mm wide, 0.11 mm over its plane, 35 um thick, er 4.2:

    >>> ohm, permittivity = microstrip(0.18e-3, 0.11e-3, 35e-6, 4.2)
    >>> print(f"{ohm:.1f} ohm, {delay_s_per_m(permittivity) * 1e9:.2f} ns/m")
    51.7 ohm, 5.75 ns/m

    References
    ----------
    .. [1] E. Hammerstad and O. Jensen, "Accurate models for microstrip computer-aided
       design", IEEE MTT-S Symposium Digest, 1980, pp. 407-409.
    """
    w, h, t, er = np.broadcast_arrays(width_m, height_m, thickness_m, permittivity)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        valid = (h > 0) & (w >= 0.01 * h) & (w <= 100 * h) & (t >= 0) & (t <= h)
        valid &= (er >= 1) & (er <= 128)
        u = np.where(valid, w / h, np.nan)
        widening = strip_widening(u, t / h)
        u_air = u + widening
        u_filled = u + widening * (1 + 1 / np.cosh(np.sqrt(er - 1))) / 2
        z_filled = microstrip_air_ohm(u_filled)
        permittivity_thin = _hammerstad_jensen_permittivity(u_filled, er)
        ratio = microstrip_air_ohm(u_air) / z_filled
    return z_filled / np.sqrt(permittivity_thin), permittivity_thin * ratio**2


def _hammerstad_jensen_permittivity(u: Array, er: Array) -> Array:
    """Effective permittivity of a thin strip of relative width u, eq. (3) to (5)."""
    a = 1 + np.log((u**4 + (u / 52) ** 2) / (u**4 + 0.432)) / 49
    a = a + np.log(1 + (u / 18.1) ** 3) / 18.7
    b = 0.564 * ((er - 0.9) / (er + 3)) ** 0.053
    return np.asarray((er + 1) / 2 + (er - 1) / 2 * (1 + 10 / u) ** (-a * b))


def stripline_centred(
    width_m: ArrayLike, plane_gap_m: ArrayLike, thickness_m: ArrayLike, permittivity: ArrayLike
) -> Array:
    r"""Impedance of a strip midway between two planes (Wheeler 1978, finite thickness).

    .. math:: Z_0 = \frac{\eta_0}{4\pi\sqrt{\varepsilon_r}} \ln\Bigl[1 + \frac{4}{\pi m}
       \Bigl(\frac{8}{\pi m} + \sqrt{(8/(\pi m))^2 + 6.27}\Bigr)\Bigr]

    with m the width over b - t, widened for the thickness.

    Parameters
    ----------
    width_m : array_like
        Width of the strip, w. [m]
    plane_gap_m : array_like
        From plane to plane, b. [m]
    thickness_m : array_like
        Thickness of the strip, t. [m]
    permittivity : array_like
        Relative permittivity between the planes. [-]

    Returns
    -------
    numpy.ndarray
        Characteristic impedance; the delay is that of the permittivity itself. [ohm]

    Notes
    -----
    Valid for w/(b - t) from 0.01 to 10, t/b up to 0.25 and 1 <= er <= 128 (0.5 %,
    the author's figure); NaN elsewhere.

    Examples
    --------
    At t = 0 and w = b the exact value in air is 65.35 ohm.

    >>> print(f"{stripline_centred(1e-3, 1e-3, 0.0, 1.0):.1f}")
    65.2

    References
    ----------
    .. [1] H. A. Wheeler, "Transmission-line properties of a strip line between parallel
       planes", IEEE Trans. MTT-26, 1978, pp. 866-876.
    """
    w, b, t, er = np.broadcast_arrays(width_m, plane_gap_m, thickness_m, permittivity)
    with np.errstate(invalid="ignore", divide="ignore"):
        valid = (b > 0) & (t >= 0) & (t <= 0.25 * b) & (er >= 1) & (er <= 128)
        valid &= (w >= 0.01 * (b - t)) & (w <= 10 * (b - t))
        return np.where(valid, stripline_air_ohm(w, b, t) / np.sqrt(er), np.nan)


def stripline_offset(
    width_m: ArrayLike,
    height_1_m: ArrayLike,
    height_2_m: ArrayLike,
    thickness_m: ArrayLike,
    permittivity: ArrayLike,
) -> Array:
    r"""Impedance of a strip between two planes at unequal distances (parallel rule).

    .. math:: Z_0 = 2 Z_a Z_b / (Z_a + Z_b)

    with Za and Zb the centred striplines of plane gaps 2 h1 + t and 2 h2 + t.

    Parameters
    ----------
    width_m, thickness_m : array_like
        Width and thickness of the strip. [m]
    height_1_m, height_2_m : array_like
        From the strip's faces to the planes, in either order. [m]
    permittivity : array_like
        Relative permittivity between the planes. [-]

    Returns
    -------
    numpy.ndarray
        Characteristic impedance. [ohm]

    Notes
    -----
    Valid where the larger height is less than twice the smaller: field solutions in
    tests/reference/stripline_solved.csv lie 0.5 % lower at a ratio of 1.5 and 1.3 %
    at 1.95. NaN beyond, and where `stripline_centred` is.

    Examples
    --------
    Equal heights are the centred strip of gap 2 h + t:

    >>> offset = stripline_offset(0.2e-3, 0.2e-3, 0.2e-3, 18e-6, 4.2)
    >>> bool(abs(offset - stripline_centred(0.2e-3, 0.418e-3, 18e-6, 4.2)) < 1e-9)
    True

    References
    ----------
    .. [1] IPC-2141, "Controlled impedance circuit boards and high speed logic design",
       1996 (the parallel rule for an offset strip).
    """
    h_1, h_2, t = (np.asarray(x, dtype=float) for x in (height_1_m, height_2_m, thickness_m))
    z_a = stripline_centred(width_m, 2 * h_1 + t, t, permittivity)
    z_b = stripline_centred(width_m, 2 * h_2 + t, t, permittivity)
    valid = np.maximum(h_1, h_2) < 2 * np.minimum(h_1, h_2)
    return np.where(valid, 2 * z_a * z_b / (z_a + z_b), np.nan)


def stripline_zero_thickness(
    width_m: ArrayLike, plane_gap_m: ArrayLike, permittivity: ArrayLike
) -> Array:
    r"""Exact impedance of an infinitely thin strip midway between two planes.

    .. math:: Z_0 = \frac{\eta_0}{4\sqrt{\varepsilon_r}} \frac{K(k)}{K(k')}, \quad
       k = \mathrm{sech}\frac{\pi w}{2 b}

    A reference for tests, 13 to 27 % high for real copper.

    Parameters
    ----------
    width_m : array_like
        Width of the strip, w. [m]
    plane_gap_m : array_like
        From plane to plane, b. [m]
    permittivity : array_like
        Relative permittivity between the planes. [-]

    Returns
    -------
    numpy.ndarray
        Characteristic impedance. [ohm]

    Examples
    --------
    >>> print(f"{stripline_zero_thickness(1e-3, 1e-3, 1.0):.4f}")
    65.3536

    References
    ----------
    .. [1] S. B. Cohn, "Characteristic impedance of the shielded-strip transmission line",
       Trans. IRE MTT-2, 1954, pp. 52-57.
    """
    from scipy.special import ellipkm1  # a reference only: the screening never loads it

    angle = np.pi * np.asarray(width_m, dtype=float) / (2 * np.asarray(plane_gap_m, dtype=float))
    ratio = ellipkm1(np.tanh(angle) ** 2) / ellipkm1(np.cosh(angle) ** -2.0)
    return np.asarray(ETA_0_OHM / 4 / np.sqrt(permittivity) * ratio)


def loaded_line(
    impedance_ohm: ArrayLike,
    delay_s_per_m: ArrayLike,
    line_farad_per_m: ArrayLike,
    load_farad_per_m: ArrayLike,
) -> tuple[Array, Array]:
    r"""Impedance and delay of a line with loads spread evenly along it.

    .. math:: Z' = Z_0/\sqrt{1 + C_d/C_0}, \quad t' = t\,\sqrt{1 + C_d/C_0}

    Parameters
    ----------
    impedance_ohm : array_like
        Impedance of the bare line. [ohm]
    delay_s_per_m : array_like
        Delay of the bare line. [s/m]
    line_farad_per_m : array_like
        Capacitance of the bare line, C0. [F/m]
    load_farad_per_m : array_like
        Capacitance of the loads per metre of line, Cd. [F/m]

    Returns
    -------
    impedance_ohm, delay_s_per_m : numpy.ndarray
        Impedance [ohm] and delay [s/m] of the loaded line.

    Notes
    -----
    Holds while the loads are much closer together than the edge is long.

    Examples
    --------
    Loads of three times the line's own capacitance halve the impedance:

    >>> ohm, delay = loaded_line(60.0, 6e-9, 100e-12, 300e-12)
    >>> float(ohm), float(delay)
    (30.0, 1.2e-08)
    """
    slowing = np.sqrt(1 + np.asarray(load_farad_per_m) / np.asarray(line_farad_per_m))
    return np.asarray(impedance_ohm) / slowing, np.asarray(delay_s_per_m) * slowing
