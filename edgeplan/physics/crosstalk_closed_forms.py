"""Crosstalk bounds from the even and odd modes of two coupled lines."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S

Array = NDArray[Any]

STEEPEST = 0.927  # steepest slope of a raised-cosine edge, swings per 10-90 % duration


def coupled_stripline_zero_thickness(
    width_m: ArrayLike, spacing_m: ArrayLike, plane_gap_m: ArrayLike, permittivity: ArrayLike
) -> tuple[Array, Array]:
    r"""Exact even and odd mode impedance of two thin strips midway between planes.

    .. math:: k_e = \tanh\frac{\pi w}{2b}\tanh\frac{\pi(w+s)}{2b}, \quad
       k_o = \tanh\frac{\pi w}{2b}\coth\frac{\pi(w+s)}{2b}, \quad
       Z = \frac{\eta_0}{4\sqrt{\varepsilon_r}}\frac{K(k')}{K(k)}

    Parameters
    ----------
    width_m, spacing_m, plane_gap_m : array_like
        Width of each strip, gap between them, plane to plane. [m]
    permittivity : array_like
        Relative permittivity between the planes. [-]

    Returns
    -------
    even_ohm, odd_ohm : numpy.ndarray
        Mode impedances. [ohm]

    Notes
    -----
    Real copper couples more: at 18 to 35 um the backward coupling is 14 to 18 % higher.

    Examples
    --------
    >>> even, odd = coupled_stripline_zero_thickness(0.3, 0.1, 1.0, 4.5)
    >>> print(f"{even:.4f} {odd:.4f}")
    78.5517 39.6416

    References
    ----------
    .. [1] S. B. Cohn, "Shielded coupled-strip transmission line", IRE Trans. MTT-3, 1955,
       pp. 29-38.
    """
    from scipy.special import ellipk, ellipkm1  # rarely wanted: the screening never loads it

    w, s, b = (np.asarray(x, dtype=float) for x in (width_m, spacing_m, plane_gap_m))
    own, both = np.tanh(np.pi * w / (2 * b)), np.tanh(np.pi * (w + s) / (2 * b))
    scale = ETA_0_OHM / (4 * np.sqrt(np.asarray(permittivity, dtype=float)))
    even, odd = (own * both) ** 2, (own / both) ** 2
    return scale * ellipkm1(even) / ellipk(even), scale * ellipkm1(odd) / ellipk(odd)


def backward_coupling(even_ohm: ArrayLike, odd_ohm: ArrayLike) -> Array:
    r"""Near-end voltage over the aggressor's, all ends matched, line longer than the edge.

    .. math:: K_b = \frac{Z_e - Z_o}{Z_e + Z_o + 2\sqrt{Z_e Z_o}}

    Parameters
    ----------
    even_ohm, odd_ohm : array_like
        Mode impedances. [ohm]

    Returns
    -------
    numpy.ndarray
        Coupling; (Ze - Zo)/(Ze + Zo) would be twice as large. [-]

    Examples
    --------
    81 and 49 ohm: the roots are 9 and 7, so 2/16.

    >>> float(backward_coupling(81.0, 49.0))
    0.125
    """
    even, odd = np.sqrt(even_ohm), np.sqrt(odd_ohm)
    return np.asarray((even - odd) / (even + odd))


def mode_delay_difference_s_per_m(
    even_permittivity: ArrayLike, odd_permittivity: ArrayLike
) -> Array:
    r"""Delay of the even mode over that of the odd one, :math:`(\sqrt{e_e}-\sqrt{e_o})/c`.

    Parameters
    ----------
    even_permittivity, odd_permittivity : array_like
        Effective relative permittivities of the modes. [-]

    Returns
    -------
    numpy.ndarray
        Difference per metre, 0 in a stripline. [s/m]

    Examples
    --------
    >>> print(f"{mode_delay_difference_s_per_m(3.24, 2.89) * 1e12:.1f} ps/m")
    333.6 ps/m
    """
    difference = np.sqrt(even_permittivity) - np.sqrt(odd_permittivity)
    return np.asarray(difference / SPEED_OF_LIGHT_M_PER_S)


def near_end_share(edge_s: ArrayLike, coupled_delay_s: ArrayLike, backward: ArrayLike) -> Array:
    r"""Bound of the voltage at the near end over the launched wave, all ends matched.

    .. math:: K_b \min\Bigl(1, \frac{1.854\,T_d}{t_r}\Bigr)

    Parameters
    ----------
    edge_s : array_like
        10 to 90 % duration of the launched edge. [s]
    coupled_delay_s : array_like
        Delay of the coupled length, Td. [s]
    backward : array_like
        Backward coupling Kb. [-]

    Returns
    -------
    numpy.ndarray
        Share of the launched wave. [-]

    Examples
    --------
    An edge of twice 1.854 Td leaves half of Kb:

    >>> print(f"{near_end_share(3.708e-9, 1e-9, 0.05):.4f}")
    0.0250
    """
    edge = np.asarray(edge_s, dtype=float)
    covered = np.minimum(1.0, 2 * STEEPEST * np.asarray(coupled_delay_s, dtype=float) / edge)
    return np.asarray(np.asarray(backward) * covered)


def far_end_share(edge_s: ArrayLike, mode_delay_s: ArrayLike) -> Array:
    r"""Bound of the voltage at the far end over the launched wave, all ends matched.

    .. math:: \min\Bigl(\frac12, \frac{0.927\,\Delta\tau l}{2 t_r}\Bigr)

    Parameters
    ----------
    edge_s : array_like
        10 to 90 % duration of the launched edge. [s]
    mode_delay_s : array_like
        Difference of the mode delays over the coupled length, of either sign. [s]

    Returns
    -------
    numpy.ndarray
        Share of the launched wave, 0 in a stripline. [-]

    Examples
    --------
    Modes that arrive far apart split the wave into halves:

    >>> print(f"{far_end_share(0.1e-9, 1e-9):.1f} {far_end_share(1e-9, 0.1e-9):.4f}")
    0.5 0.0464
    """
    apart = np.abs(np.asarray(mode_delay_s, dtype=float))
    return np.asarray(np.minimum(0.5, STEEPEST * apart / (2 * np.asarray(edge_s, dtype=float))))


def noise_on_a_neighbour_v(
    swing_v: ArrayLike,
    edge_s: ArrayLike,
    coupled_delay_s: ArrayLike,
    backward: ArrayLike,
    mode_delay_s: ArrayLike,
) -> Array:
    r"""Bound of the noise at the open end of a series-terminated neighbour.

    .. math:: V_n \le V_{sw}\Bigl[\frac{0.927\,\Delta\tau l}{2 t_r} +
       K_b\min\Bigl(1, \frac{1.854\,T_d}{t_r}\Bigr)\Bigr]

    Parameters
    ----------
    swing_v : array_like
        Swing of the aggressor at its open end. [V]
    edge_s : array_like
        10 to 90 % duration of its launched edge. [s]
    coupled_delay_s : array_like
        Delay of the coupled length, Td. [s]
    backward : array_like
        Backward coupling Kb. [-]
    mode_delay_s : array_like
        Difference of the mode delays over the coupled length. [s]

    Returns
    -------
    numpy.ndarray
        Bound; simulated lines gave 0.34 to 1.00 of it. [V]

    Notes
    -----
    For lines matched by series resistors only. Where both ends reflect it is no bound to
    rely on.

    Examples
    --------
    A stripline longer than the edge: Kb times the swing.

    >>> print(f"{noise_on_a_neighbour_v(3.3, 0.5e-9, 1e-9, 0.05, 0.0):.3f} V")
    0.165 V
    """
    edge = np.asarray(edge_s, dtype=float)
    forward = STEEPEST * np.asarray(mode_delay_s, dtype=float) / (2 * edge)
    both = forward + near_end_share(edge, coupled_delay_s, backward)
    return np.asarray(np.asarray(swing_v) * both)


def fastest_edge_beside_a_neighbour_s(
    swing_v: ArrayLike,
    noise_v: ArrayLike,
    coupled_delay_s: ArrayLike,
    backward: ArrayLike,
    mode_delay_s: ArrayLike,
) -> Array:
    """Shortest edge whose noise on a series-terminated neighbour stays within a limit.

    `noise_on_a_neighbour_v` solved for the edge.

    Parameters
    ----------
    swing_v, noise_v : array_like
        Swing of the aggressor and noise its neighbour bears. [V]
    coupled_delay_s, backward, mode_delay_s : array_like
        As in `noise_on_a_neighbour_v`.

    Returns
    -------
    numpy.ndarray
        Shortest 10 to 90 % edge, 0 where any will do. [s]

    Examples
    --------
    Kb 0.05 and 1 ns of coupling disturb by half of 0.165 V at twice 1.854 ns:

    >>> print(f"{fastest_edge_beside_a_neighbour_s(3.3, 0.0825, 1e-9, 0.05, 0.0) * 1e9:.3f} ns")
    3.708 ns
    """
    swing, noise = np.asarray(swing_v, dtype=float), np.asarray(noise_v, dtype=float)
    delay, kb = np.asarray(coupled_delay_s, dtype=float), np.asarray(backward, dtype=float)
    split = np.asarray(mode_delay_s, dtype=float)
    with np.errstate(divide="ignore", invalid="ignore"):
        longer = STEEPEST * swing * (split / 2 + 2 * kb * delay) / noise
        left_v = noise - kb * swing  # what the saturated backward part leaves to the forward part
        shorter = np.where(left_v > 0, STEEPEST / 2 * swing * split / left_v, np.inf)
    return np.asarray(np.where(longer > 2 * STEEPEST * delay, longer, shorter))
