"""Resistance and effective loss tangent of a printed line from its cross-section."""

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import (
    MU_0_HENRY_PER_M,
    SPEED_OF_LIGHT_M_PER_S,
    microstrip_air_ohm,
    strip_widening,
    stripline_air_ohm,
)

Array = NDArray[Any]

COPPER_OHM_M = 1.7241e-8  # annealed copper at 20 degrees Celsius, IEC 60028 (58 MS/m)
RECESSION_M = 1e-20  # step of the complex derivative: nothing is subtracted, so tiny is exact


def dc_resistance(
    width_m: ArrayLike, thickness_m: ArrayLike, resistivity_ohm_m: ArrayLike = COPPER_OHM_M
) -> Array:
    r"""Resistance of the strip per metre at low frequency, :math:`\rho/(w t)`.

    Parameters
    ----------
    width_m, thickness_m : array_like
        Width and thickness of the strip. [m]
    resistivity_ohm_m : array_like, optional
        Resistivity of the conductor, annealed copper unless stated. [ohm m]

    Returns
    -------
    numpy.ndarray
        Resistance; the plane's part is left out, it is far wider. NaN where a size is
        not positive. [ohm/m]

    Examples
    --------
    >>> print(f"{dc_resistance(100e-6, 17.241e-6):.2f}")
    10.00
    """
    w, t, rho = np.broadcast_arrays(width_m, thickness_m, resistivity_ohm_m)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where((w > 0) & (t > 0), rho / (w * t), np.nan)


def skin_factor(
    width_m: ArrayLike,
    height_m: ArrayLike,
    thickness_m: ArrayLike,
    resistivity_ohm_m: ArrayLike = COPPER_OHM_M,
) -> Array:
    r"""Skin factor of a microstrip, strip and plane together: R tends to k sqrt(f).

    The rule of incremental inductance: with L the outer inductance per metre and n
    the depth by which every metal surface recedes,

    .. math:: k = \sqrt{\pi\mu_0\rho}\;\frac{1}{\mu_0}\frac{\partial L}{\partial n}

    The strip loses 2 n of width and thickness and the height grows by 2 n: both sides
    of the strip, its flanks and the plane are counted.

    Parameters
    ----------
    width_m, height_m, thickness_m : array_like
        Width of the strip, height over the plane, thickness of the strip. [m]
    resistivity_ohm_m : array_like, optional
        Resistivity of strip and plane. [ohm m]

    Returns
    -------
    numpy.ndarray
        Skin factor; NaN outside 0.01 <= w/h <= 100, 0 < t <= h. [ohm/(m sqrt(Hz))]

    Notes
    -----
    For strips more than about four skin depths thick (8 um at 1 GHz); smooth copper.
    Within 0.8 % of the currents of a field solution (tests/reference/
    microstrip_skin_loss.csv), where the usual current factor exp(-1.2 (Z/eta0)^0.7)
    is up to 60 % (t/h 0.3) and 90 % (w/h 0.5) high.

    Examples
    --------
    The surface resistance of copper at 1 GHz is 8.25 mohm. A wide strip has it twice,
    over its width: 10 mm make 2 * 8.25e-3 / 0.01 = 1.65 ohm/m, less the fringes' share.

    >>> print(f"{skin_factor(10e-3, 0.1e-3, 18e-6) * 1e9**0.5:.2f}")
    1.55

    References
    ----------
    .. [1] H. A. Wheeler, "Formulas for the skin effect", Proc. IRE 30, 1942, pp. 412-424.
    .. [2] R. A. Pucel, D. J. Masse and C. P. Hartwig, "Losses in microstrip", IEEE Trans.
       MTT-16, 1968, pp. 342-350.
    """
    w, h, t = np.broadcast_arrays(width_m, height_m, thickness_m)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        valid = (h > 0) & (w >= 0.01 * h) & (w <= 100 * h) & (t > 0) & (t <= h)
        return _skin_factor(_microstrip_ohm, (w, h, t), valid, resistivity_ohm_m)


def skin_factor_stripline(
    width_m: ArrayLike,
    height_1_m: ArrayLike,
    height_2_m: ArrayLike,
    thickness_m: ArrayLike,
    resistivity_ohm_m: ArrayLike = COPPER_OHM_M,
) -> Array:
    r"""Skin factor of a stripline, strip and both planes together.

    The rule of incremental inductance as in `skin_factor`.

    Parameters
    ----------
    width_m, thickness_m : array_like
        Width and thickness of the strip. [m]
    height_1_m, height_2_m : array_like
        From the strip's faces to the planes, in either order. [m]
    resistivity_ohm_m : array_like, optional
        Resistivity of strip and planes. [ohm m]

    Returns
    -------
    numpy.ndarray
        Skin factor; NaN where `cross_section.stripline_offset` is. [ohm/(m sqrt(Hz))]

    Examples
    --------
    The current of a wide strip runs on both faces and in both planes, each half of it:
    8.25 mohm / 2 mm = 4.1 ohm/m at 1 GHz, and a little for the crowding at the corners.

    >>> print(f"{skin_factor_stripline(2e-3, 0.2e-3, 0.2e-3, 18e-6) * 1e9**0.5:.1f}")
    4.2

    References
    ----------
    .. [1] H. A. Wheeler, "Formulas for the skin effect", Proc. IRE 30, 1942, pp. 412-424.
    """
    w, h_1, h_2, t = np.broadcast_arrays(width_m, height_1_m, height_2_m, thickness_m)
    near, far = np.minimum(h_1, h_2), np.maximum(h_1, h_2)
    with np.errstate(invalid="ignore", divide="ignore"):
        valid = (near > 0) & (far < 2 * near) & (t > 0) & (t <= 0.25 * (2 * near + t))
        valid &= (w >= 0.02 * far) & (w <= 20 * near)
        return _skin_factor(_stripline_ohm, (w, near, far, t), valid, resistivity_ohm_m)


def effective_loss_tangent(
    permittivity: ArrayLike, permittivity_effective: ArrayLike, loss_tangent: ArrayLike
) -> Array:
    r"""Loss tangent of a line whose field is partly in air.

    .. math:: \tan\delta_e = \tan\delta\,
       \frac{\varepsilon_r}{\varepsilon_e}\,\frac{\varepsilon_e - 1}{\varepsilon_r - 1}

    Parameters
    ----------
    permittivity : array_like
        Relative permittivity of the dielectric, 1 or more. [-]
    permittivity_effective : array_like
        Effective relative permittivity of the line. [-]
    loss_tangent : array_like
        Loss tangent of the dielectric. [-]

    Returns
    -------
    numpy.ndarray
        Effective loss tangent; that of the dielectric itself where the line is filled
        or er is 1 (there the field's share is unknown and the whole is the bound). [-]

    Examples
    --------
    er 4 and effective 3: 4/3 times 2/3, eight ninths.

    >>> print(f"{effective_loss_tangent(4.0, 3.0, 0.018):.3f}")
    0.016

    References
    ----------
    .. [1] M. V. Schneider, "Dielectric loss in integrated microwave circuits", Bell Syst.
       Tech. J. 48, 1969, pp. 2325-2332.
    """
    er, ee, tangent = np.broadcast_arrays(permittivity, permittivity_effective, loss_tangent)
    with np.errstate(invalid="ignore", divide="ignore"):
        share = np.where(er == 1, 1.0, er * (ee - 1) / (ee * (er - 1)))
    return tangent * share


def _skin_factor(
    air_ohm: Callable[..., Array], sizes: tuple[Array, ...], valid: Array, rho: ArrayLike
) -> Array:
    """Skin factor from the complex-step derivative of an impedance in air."""
    receded = [np.where(valid, size, np.nan) for size in sizes]
    signs = [-2.0] + [2.0] * (len(sizes) - 2) + [-2.0]  # width, heights, thickness
    steps = [size + 1j * RECESSION_M * sign for size, sign in zip(receded, signs, strict=True)]
    slope = air_ohm(*steps).imag / RECESSION_M / SPEED_OF_LIGHT_M_PER_S
    return np.sqrt(np.pi * np.asarray(rho) / MU_0_HENRY_PER_M) * slope


def _microstrip_ohm(w: Array, h: Array, t: Array) -> Array:
    """Impedance in air of a thick strip over a plane."""
    u = w / h
    return microstrip_air_ohm(u + strip_widening(u, t / h))


def _stripline_ohm(w: Array, h_1: Array, h_2: Array, t: Array) -> Array:
    """Impedance in air of a thick strip between two planes by the parallel rule."""
    z_a = stripline_air_ohm(w, 2 * h_1 + t, t)
    z_b = stripline_air_ohm(w, 2 * h_2 + t, t)
    return np.asarray(2 * z_a * z_b / (z_a + z_b))
