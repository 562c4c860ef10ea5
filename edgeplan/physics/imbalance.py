"""Common mode of a board with cables: how a trace's voltage drives the board against a cable.

A trace unbalances the plane by a share h of its voltage: the plane's end voltages are
h V(x1) at the source and -h V(x2) at the load. Board and cable are one antenna.
"""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S

Array = NDArray[Any]

EPSILON_0_FARAD_PER_M = 1 / (ETA_0_OHM * SPEED_OF_LIGHT_M_PER_S)
HALF_WAVE_FACTOR = 0.82  # 60 / 73.1: a half-wave dipole in resonance radiates 0.82 V per volt
LONG_WIRE_FACTOR = 1.84  # 60 x 0.755 / 30 of resonant long wires, x 1.22 by full-wave runs
WIRE_OHM = 60 * (np.log(2 * 1.0 / 1e-3) - 1)  # mean impedance of 1 m of 1 mm radius wire, 396


class ImbalanceHeight(NamedTuple):
    """Share of the trace's voltage that drives the board, magnetic and electric [-]."""

    magnetic: Array
    electric: Array


class Ends(NamedTuple):
    """End positions of the trace along the board, corrected for the plane's charge [m]."""

    source_m: Array
    load_m: Array


def imbalance_height(
    impedance_ohm: ArrayLike,
    permittivity_effective: ArrayLike,
    permittivity: ArrayLike,
    height_m: ArrayLike,
    side_offset_m: ArrayLike,
    plane_width_m: ArrayLike,
) -> ImbalanceHeight:
    r"""Share of a trace's voltage that stands along its plane.

    .. math:: h_L = \frac{\eta_0}{2\pi Z_{c0}}\,\Re\,\mathrm{arcosh}\frac{2|y| + 2jt}{W}, \quad
       Z_{c0} = Z_c\sqrt{\varepsilon_{e}}, \quad h_C = h_L\,\varepsilon_{e}/\varepsilon_r

    Parameters
    ----------
    impedance_ohm : array_like
        Characteristic impedance of the trace, with its dielectric. [ohm]
    permittivity_effective, permittivity : array_like
        Effective permittivity of the line; relative permittivity of its layer. [-]
    height_m : array_like
        Height of the trace over the plane, t. [m]
    side_offset_m : array_like
        Distance of the trace from the plane's centre line, y. [m]
    plane_width_m : array_like
        Width of the plane across the trace, W. [m]

    Returns
    -------
    ImbalanceHeight
        h_L for the plane's inductance and h_C for the stray capacitance. [-]

    Notes
    -----
    Single solid plane. Against static field solutions: h_L within 0.03 dB, h_C within
    0.9 dB. With Z_c instead of Z_c0 it would be 5 dB wrong on common laminates.

    Examples
    --------
    Far from both sides h_L is eta0 t/(pi W Zc0): 0.2 mm, 100 mm, 90 ohm.

    >>> h = imbalance_height(45.0, 4.0, 4.4, 0.2e-3, 0.0, 0.1)
    >>> print(f"{h.magnetic:.6f} {376.73 * 0.2e-3 / (np.pi * 0.1 * 90):.6f}")
    0.002665 0.002665

    References
    ----------
    .. [1] T. Watanabe, O. Wada, T. Miyashita, R. Koga, "Common-mode-current generation caused
       by difference of unbalance of transmission lines on a printed circuit board with
       narrow ground pattern", IEICE Trans. Commun. E83-B (2000) 593.
    .. [2] C. Su, T. H. Hubing, "Imbalance difference model for common-mode radiation from
       printed circuit boards", IEEE Trans. EMC 53 (2011) 150.
    """
    effective = np.asarray(permittivity_effective)
    air_ohm = np.asarray(impedance_ohm) * np.sqrt(effective)
    place = 2 * (np.abs(side_offset_m) + 1j * np.asarray(height_m)) / np.asarray(plane_width_m)
    magnetic = ETA_0_OHM / (2 * np.pi * air_ohm) * np.arccosh(place).real
    return ImbalanceHeight(magnetic, magnetic * effective / np.asarray(permittivity))


def board_capacitance_farad(length_m: ArrayLike, width_m: ArrayLike) -> Array:
    r"""Capacitance of a board in free space, of the disc of equal area: :math:`8\epsilon_0 R`.

    Parameters
    ----------
    length_m, width_m : array_like
        Size of the board. [m]

    Returns
    -------
    numpy.ndarray
        Capacitance to infinity. [F]

    Examples
    --------
    >>> print(f"{board_capacitance_farad(0.1, 0.06) * 1e12:.2f} pF")
    3.10 pF

    References
    ----------
    .. [1] H. Shim, T. H. Hubing, "Model for estimating radiated emissions from a printed circuit
       board with attached cables due to voltage-driven sources", IEEE Trans. EMC 47 (2005) 899.
    """
    return np.asarray(
        8 * EPSILON_0_FARAD_PER_M * np.sqrt(np.asarray(length_m) * np.asarray(width_m) / np.pi)
    )


def impedance_ratio(length_m: ArrayLike, width_m: ArrayLike) -> Array:
    r"""Board over cable as antenna halves: :math:`z = Z_b/Z_w`, :math:`Z_b = D/(c\,C_b)`.

    Parameters
    ----------
    length_m, width_m : array_like
        Size of the board along the trace, D, and across it. [m]

    Returns
    -------
    numpy.ndarray
        Ratio of mean wave impedances, the cable's taken as 396 ohm. [-]

    Examples
    --------
    >>> print(f"{impedance_ratio(0.1, 0.06):.2f}")
    0.27
    """
    capacitance_farad = board_capacitance_farad(length_m, width_m)
    board_ohm = np.asarray(length_m) / (SPEED_OF_LIGHT_M_PER_S * capacitance_farad)
    return np.asarray(board_ohm / WIRE_OHM)


def centred_ends(length_m: ArrayLike, board_length_m: ArrayLike) -> Ends:
    """End positions of a trace centred along the board, for traces without coordinates.

    Parameters
    ----------
    length_m : array_like
        Length of the trace; one longer than the board ends at its sides. [m]
    board_length_m : array_like
        Size of the board along the trace. [m]

    Returns
    -------
    Ends
        Geometric positions from one board end. [m]

    Examples
    --------
    >>> [float(x) for x in centred_ends(0.25, 1.0)]
    [0.375, 0.625]
    """
    middle_m = np.asarray(board_length_m) / 2
    half_m = np.minimum(np.asarray(length_m) / 2, middle_m)
    return Ends(middle_m - half_m, middle_m + half_m)


def electrical_position_m(position_m: ArrayLike, board_length_m: ArrayLike) -> Array:
    r"""Position on a wire that stands for a plate: :math:`(D/\pi)\arccos(1 - 2x/D)`.

    Parameters
    ----------
    position_m : array_like
        Geometric position from one board end; held inside the board. [m]
    board_length_m : array_like
        Size of the board along the trace, D. [m]

    Returns
    -------
    numpy.ndarray
        Position weighted by the charge, which gathers at a plate's sides. [m]

    Examples
    --------
    A quarter of the way geometrically, a third of it for the charge.

    >>> print(f"{electrical_position_m(0.25, 1.0):.4f}")
    0.3333
    """
    board_length_m = np.asarray(board_length_m)
    share = np.clip(np.asarray(position_m) / board_length_m, 0, 1)
    return np.asarray(board_length_m / np.pi * np.arccos(1 - 2 * share))


def board_denominator(wave_per_m: Array, board_length_m: Array, ratio: Array) -> Array:
    r"""Load that the board is to its cable, up to the board's own resonance; then 1.

    .. math:: \sqrt{\sin^2 kD + z^2\cos^2 kD}, \quad kD < \pi/2

    Parameters
    ----------
    wave_per_m : numpy.ndarray
        Free-space wave number k. [1/m]
    board_length_m : numpy.ndarray
        Size of the board along the axis, D. [m]
    ratio : numpy.ndarray
        z of `impedance_ratio`. [-]

    Returns
    -------
    numpy.ndarray
        Denominator of the antenna current on the board. [-]

    Examples
    --------
    Far below resonance only the impedance ratio is left.

    >>> print(f"{board_denominator(np.array(1e-3), np.array(0.1), np.array(0.27)):.3f}")
    0.270
    """
    angle = wave_per_m * board_length_m
    loaded = np.sqrt(np.sin(angle) ** 2 + ratio**2 * np.cos(angle) ** 2)
    return np.where(angle < np.pi / 2, loaded, 1.0)


def effective_voltage_one(
    wave_per_m: Array,
    ends: Ends,
    board_length_m: ArrayLike,
    ratio: ArrayLike,
    height: ImbalanceHeight,
    end_volts: tuple[Array, Array],
) -> Array:
    r"""Voltage that drives one cable at the far end of the board (x = D).

    .. math:: \Bigl|h_L (V_2-V_1)\frac{\psi_1+\psi_2}{2}
       + h_C \frac{V_1+V_2}{2}(\psi_2-\psi_1)\Bigr|, \quad
       \psi = \frac{\sin kx}{\sqrt{\sin^2 kD + z^2\cos^2 kD}}

    Parameters
    ----------
    wave_per_m : numpy.ndarray
        Free-space wave number k, ``(F,)`` or ``(N, F)``. [1/m]
    ends : Ends
        Electrical positions from the end without a cable, ``(N, 1)``. [m]
    board_length_m : array_like
        Size of the board along the trace, D. [m]
    ratio : array_like
        z of `impedance_ratio`. [-]
    height : ImbalanceHeight
        h_L and h_C. [-]
    end_volts : tuple of numpy.ndarray
        Complex voltages of the line at source and load end, ``(N, F)``. [V]

    Returns
    -------
    numpy.ndarray
        Effective common-mode voltage, ``(N, F)``; times `antenna_factor` it is distance
        times field. [V]

    Notes
    -----
    One cable only: with a second one it can be 16 dB low. For a cable on the other end
    mirror the positions (D - x).

    Examples
    --------
    Above the board's resonance, source at its free end, load a quarter wave on: h V2.

    >>> k = np.array(2 * np.pi / 0.4)
    >>> half = ImbalanceHeight(np.array(0.01), np.array(0.01))
    >>> volts = effective_voltage_one(k, Ends(0.0, 0.1), 0.12, 0.3, half, (1 + 0j, 0.5 + 0j))
    >>> print(f"{volts:.4f}")
    0.0050
    """
    board = board_denominator(wave_per_m, np.asarray(board_length_m), np.asarray(ratio))
    psi_1 = np.sin(wave_per_m * ends.source_m) / board
    psi_2 = np.sin(wave_per_m * ends.load_m) / board
    v1, v2 = end_volts
    current_driven = height.magnetic * (v2 - v1) * (psi_1 + psi_2) / 2
    voltage_driven = height.electric * (v1 + v2) / 2 * (psi_2 - psi_1)
    return np.asarray(np.abs(current_driven + voltage_driven))


def effective_voltage_any(
    wave_per_m: Array,
    ends: Ends,
    board_length_m: ArrayLike,
    ratio: ArrayLike,
    height: ImbalanceHeight,
    end_volts: tuple[Array, Array],
) -> Array:
    r"""Voltage for cables that are several or unknown: largest over the standing wave's phase.

    .. math:: \sqrt{(|A|^2+|B|^2+|A^2+B^2|)/2}, \quad A = h_L(V_1\cos k\xi_1 - V_2\cos k\xi_2),
       \quad B = h_C(V_1\sin k\xi_1 - V_2\sin k\xi_2)/\mathrm{den}

    Parameters
    ----------
    wave_per_m, ends, board_length_m, ratio, height, end_volts
        As in `effective_voltage_one`.

    Returns
    -------
    numpy.ndarray
        Effective common-mode voltage, ``(N, F)``. [V]

    Notes
    -----
    No strict bound: worst 3.8 dB low in full-wave runs, 4 to 8 dB high in the mean.

    Examples
    --------
    A trace far shorter than a wave, open at its end, drives by its current: h (V1 - V2).

    >>> h = ImbalanceHeight(np.array(0.01), np.array(0.0))
    >>> volts = effective_voltage_any(np.array(0.1), Ends(0.0, 0.1), 0.1, 0.3, h, (1.0, 0.5))
    >>> print(f"{volts:.4f}")
    0.0050
    """
    board = board_denominator(wave_per_m, np.asarray(board_length_m), np.asarray(ratio))
    half_angle = wave_per_m * (ends.load_m - ends.source_m) / 2
    v1, v2 = end_volts
    a = height.magnetic * (v1 - v2) * np.cos(half_angle)
    b = -height.electric * (v1 + v2) * np.sin(half_angle) / board
    squares = np.abs(a) ** 2 + np.abs(b) ** 2 + np.abs(a * a + b * b)
    return np.asarray(np.sqrt(squares / 2))


def antenna_factor(frequency_hz: ArrayLike, cable_length_m: ArrayLike) -> Array:
    r"""Distance times field per volt of common mode, largest over cable lengths up to this one.

    .. math:: S = \max\Bigl(0.82,\ \frac{1.84\sqrt n}{\ln(2\pi n) + 0.577}\Bigr), \quad
       n = 2 l f/c \ge 1; \qquad S = 0.82 \text{ below}

    Parameters
    ----------
    frequency_hz : array_like
        Frequency. [Hz]
    cable_length_m : array_like
        Length of the longest cable, l. [m]

    Returns
    -------
    numpy.ndarray
        Factor; it does not grow with frequency to speak of. [-]

    Notes
    -----
    The second term belongs to wires of n half waves in resonance. Below n = 1 there are
    none, and its denominator passes through 0 at n = 0.089. A cable laid to a floor or the
    mains can resonate at any length, so the half-wave value stands there.

    Examples
    --------
    >>> print(np.round(antenna_factor([50e6, 1e9], 1.5), 2))
    [0.82 1.23]

    References
    ----------
    .. [1] C. A. Balanis, "Antenna Theory", 3rd ed., Wiley, 2005, sec. 4.6 and 8.5.
    """
    half_waves = 2 * np.asarray(cable_length_m) * np.asarray(frequency_hz) / SPEED_OF_LIGHT_M_PER_S
    n = np.maximum(half_waves, 1)
    return np.asarray(
        np.maximum(
            HALF_WAVE_FACTOR,
            LONG_WIRE_FACTOR * np.sqrt(n) / (np.log(2 * np.pi * n) + np.euler_gamma),
        )
    )


def floating_antenna_factor(
    frequency_hz: ArrayLike, wire_length_m: ArrayLike, board_length_m: ArrayLike, ratio: ArrayLike
) -> Array:
    r"""Antenna factor of a board whose cables all end free, below their first resonance.

    .. math:: S = \min\Bigl(0.82,\ \frac{60 F}{|73 F^2 + jZ_w\sin\theta|}\Bigr), \quad
       F = 1 - \cos\frac\theta2, \quad \theta = \arctan\frac{\tan kD}{z} + kl < \pi

    Parameters
    ----------
    frequency_hz : array_like
        Frequency. [Hz]
    wire_length_m : array_like
        Length of the cable, l; of several, the sum of the two longest. [m]
    board_length_m : array_like
        Size of the board along the trace, D. [m]
    ratio : array_like
        z of `impedance_ratio`. [-]

    Returns
    -------
    numpy.ndarray
        Factor, the one of `antenna_factor` from the first resonance on. [-]

    Notes
    -----
    Never for a cable that reaches a floor, the mains or another unit. Against full-wave
    runs of single cables of 0.5 to 2 m: -0.5 dB, standard deviation 1.7 dB.

    Examples
    --------
    10 cm of cable on a small board at 30 MHz: far below resonance.

    >>> print(f"{floating_antenna_factor(30e6, 0.1, 0.05, 0.3):.4f}")
    0.0032
    """
    k = 2 * np.pi * np.asarray(frequency_hz) / SPEED_OF_LIGHT_M_PER_S
    board_angle = k * np.asarray(board_length_m)
    loaded = np.arctan2(np.sin(board_angle), np.asarray(ratio) * np.cos(board_angle))
    theta = np.where(board_angle < np.pi, loaded, np.pi) + k * np.asarray(wire_length_m)
    pattern = 1 - np.cos(np.minimum(theta, np.pi) / 2)
    factor = 60 * pattern / np.abs(73 * pattern**2 + 1j * WIRE_OHM * np.sin(theta))
    long_wire = antenna_factor(frequency_hz, wire_length_m)
    return np.where(theta < np.pi, np.minimum(factor, HALF_WAVE_FACTOR), long_wire)
