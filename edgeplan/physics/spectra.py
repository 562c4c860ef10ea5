"""Harmonics of trapezoidal waves: exact, enveloped, and free of the nulls no edge can be held in.

All amplitudes are peak values of a sine, not rms.
"""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.edge_factor import null_free_edge_factor

Array = NDArray[Any]

LOG_SLOPE = 1.064  # bound of |d sinc(y) / d ln y| = |cos pi y - sinc y|: 1.0632 near y = 0.87


def harmonic_amplitude(
    order: ArrayLike, swing_v: ArrayLike, duty: ArrayLike, ramp_s: ArrayLike, period_s: ArrayLike
) -> Array:
    r"""Peak amplitude of one harmonic of a trapezoidal wave with equal edges.

    .. math:: A_n = 2 V d \,|\mathrm{sinc}(n d)|\,|\mathrm{sinc}(n t_r / T)|

    All arguments broadcast: nets ``(N, 1, 1)``, candidates ``(N, C, 1)`` and
    harmonics ``(H,)`` give ``(N, C, H)``.

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    swing_v : array_like
        High level minus low level V. [V]
    duty : array_like
        Pulse width between the half-swing points over the period, d. [-]
    ramp_s : array_like
        Rise and fall time from 0 to 100 % of the swing, t_r. [s]
    period_s : array_like
        Period T. [s]

    Returns
    -------
    numpy.ndarray
        Peak amplitude, not rms. [V]

    Notes
    -----
    ``sinc(x)`` is sin(pi x)/(pi x). Equal rise and fall times only. NaN where
    the ramp is longer than the pulse or the gap (no flat top is left): one
    such candidate must not stop its block, and NaN reads as undecided.

    Examples
    --------
    A 25 MHz, 3.3 V square wave: 2 V / pi.

    >>> print(f"{harmonic_amplitude(1, 3.3, 0.5, 0.0, 40e-9):.4f} V")
    2.1008 V

    References
    ----------
    .. [1] C. R. Paul, "Introduction to Electromagnetic Compatibility",
       2nd ed., Wiley, 2006, ch. 3 (spectra of digital waveforms).
    """
    order, swing_v, duty = np.asarray(order), np.asarray(swing_v), np.asarray(duty)
    ramp_share = np.asarray(ramp_s) / np.asarray(period_s)
    pulse = np.abs(np.sinc(order * duty))
    edges = np.abs(np.sinc(order * ramp_share))
    flat_top = ramp_share <= np.minimum(duty, 1 - duty)
    return np.where(flat_top, 2 * swing_v * duty * pulse * edges, np.nan)


def unequal_edge_amplitude(
    order: ArrayLike,
    swing_v: ArrayLike,
    duty: ArrayLike,
    rise_s: ArrayLike,
    fall_s: ArrayLike,
    period_s: ArrayLike,
) -> Array:
    r"""Peak amplitude of one harmonic of a trapezoidal wave whose edges differ.

    .. math:: c_n = \frac{V}{\pi n} \bigl|\mathrm{sinc}(n t_r/T)
       - \mathrm{sinc}(n t_f/T)\, e^{-j 2\pi n d}\bigr|

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    swing_v : array_like
        High level minus low level V. [V]
    duty : array_like
        Pulse width between the half-swing points over the period, d. [-]
    rise_s, fall_s : array_like
        Rise and fall time from 0 to 100 % of the swing. [s]
    period_s : array_like
        Period T. [s]

    Returns
    -------
    numpy.ndarray
        Peak amplitude, broadcast shape of the arguments. [V]

    Notes
    -----
    NaN where half the sum of both ramps is longer than the pulse or the gap.

    Examples
    --------
    An even harmonic of a square wave appears when the edges differ: half a
    volt over pi, times 1 - sinc(1/2) = 1 - 2/pi.

    >>> print(f"{unequal_edge_amplitude(2, 1.0, 0.5, 0.0, 10e-9, 40e-9):.5f} V")
    0.05783 V

    References
    ----------
    .. [1] C. R. Paul, "Introduction to Electromagnetic Compatibility",
       2nd ed., Wiley, 2006, ch. 3 (spectra of digital waveforms).
    """
    order, duty, period_s = np.asarray(order), np.asarray(duty), np.asarray(period_s)
    rise_share, fall_share = np.asarray(rise_s) / period_s, np.asarray(fall_s) / period_s
    turn = np.exp(-2j * np.pi * order * duty)
    edges = np.abs(np.sinc(order * rise_share) - np.sinc(order * fall_share) * turn)
    flat_top = (rise_share + fall_share) / 2 <= np.minimum(duty, 1 - duty)
    return np.where(flat_top, np.asarray(swing_v) / (np.pi * order) * edges, np.nan)


def corner_frequencies_hz(
    duty: ArrayLike, ramp_s: ArrayLike, period_s: ArrayLike
) -> tuple[Array, Array]:
    r"""Both corners of the envelope, :math:`1/(\pi\tau)` and :math:`1/(\pi t_r)`.

    Parameters
    ----------
    duty : array_like
        Pulse width over the period; the shorter of pulse and gap counts. [-]
    ramp_s : array_like
        Shorter of rise and fall time, 0 to 100 %; 0 puts its corner at infinity. [s]
    period_s : array_like
        Period. [s]

    Returns
    -------
    tuple of numpy.ndarray
        Corner of the pulse and corner of the edge. [Hz]

    Examples
    --------
    >>> low, high = corner_frequencies_hz(0.5, 2e-9, 40e-9)
    >>> print(f"{low / 1e6:.4f} MHz, {high / 1e6:.3f} MHz")
    15.9155 MHz, 159.155 MHz
    """
    share = np.minimum(duty, 1 - np.asarray(duty))
    with np.errstate(divide="ignore"):
        return 1 / (np.pi * share * np.asarray(period_s)), 1 / (np.pi * np.asarray(ramp_s))


def envelope(
    frequency_hz: ArrayLike,
    swing_v: ArrayLike,
    duty: ArrayLike,
    ramp_s: ArrayLike,
    period_s: ArrayLike,
) -> Array:
    r"""Envelope of the harmonics of a trapezoidal wave, with both corners.

    .. math:: 2 V d \min\Bigl(1, \frac{1}{\pi f \tau}\Bigr) \min\Bigl(1, \frac{1}{\pi f t_r}\Bigr),
       \quad d = \min(d, 1-d),\ \tau = d T

    Parameters
    ----------
    frequency_hz : array_like
        Frequency, above 0. [Hz]
    swing_v : array_like
        High level minus low level. [V]
    duty : array_like
        Pulse width over the period. [-]
    ramp_s : array_like
        Shorter of rise and fall time, 0 to 100 % (their mean is not conservative). [s]
    period_s : array_like
        Period. [s]

    Returns
    -------
    numpy.ndarray
        Peak amplitude that no harmonic exceeds when both edges are equal. [V]

    Notes
    -----
    It explains a spectrum; it does not decide: up to 5.1 dB above the harmonics
    of a square wave past the edge corner, and it knows no missing even harmonics.

    Examples
    --------
    Below both corners: twice the mean of the pulse.

    >>> float(envelope(1e6, 3.3, 0.5, 2e-9, 40e-9))
    3.3
    """
    frequency_hz = np.asarray(frequency_hz)
    low_hz, high_hz = corner_frequencies_hz(duty, ramp_s, period_s)
    share = np.minimum(duty, 1 - np.asarray(duty))
    slopes = np.minimum(1, low_hz / frequency_hz) * np.minimum(1, high_hz / frequency_hz)
    return np.asarray(2 * np.asarray(swing_v) * share * slopes)


def duty_factor(order: ArrayLike, duty: ArrayLike, tolerance: ArrayLike = 0.0) -> Array:
    r"""Largest :math:`|\sin \pi n d|` over a tolerance of the duty cycle.

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    duty : array_like
        Pulse width over the period. [-]
    tolerance : array_like
        Largest deviation of the duty on either side, 0 or more. [-]

    Returns
    -------
    numpy.ndarray
        Share of the odd-harmonic envelope 2V/(pi n), 0 to 1. [-]

    Notes
    -----
    Without the tolerance every even harmonic of a square wave would be lost:
    one per cent of duty puts the second at -24 dB of this envelope.

    Examples
    --------
    The second harmonic at 50 % with one per cent of tolerance: sin(2 pi 0.01).

    >>> print(f"{duty_factor(2, 0.5, 0.01):.4f}")
    0.0628
    """
    return edge_shares(order, duty, tolerance).sine


class EdgeShares(NamedTuple):
    """Largest shares of a harmonic that the sum and the difference of both edges have."""

    sine: Array
    cosine: Array


def edge_shares(order: ArrayLike, duty: ArrayLike, tolerance: ArrayLike = 0.0) -> EdgeShares:
    r"""Largest :math:`|\sin \pi n d|` and :math:`|\cos \pi n d|` over a tolerance of the duty.

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    duty : array_like
        Pulse width over the period. [-]
    tolerance : array_like
        Largest deviation of the duty on either side, 0 or more. [-]

    Returns
    -------
    EdgeShares
        Both shares, 0 to 1. [-]

    Examples
    --------
    The second harmonic of an even square wave has the difference of the edges alone.

    >>> shares = edge_shares(2, 0.5)
    >>> float(shares.sine), float(shares.cosine)
    (0.0, 1.0)
    """
    order = np.asarray(order)
    low, high = _duty_range(duty, tolerance)
    return EdgeShares(
        _largest_sine(order * low, order * high),
        _largest_sine(order * low + 0.5, order * high + 0.5),
    )


def _duty_range(duty: ArrayLike, tolerance: ArrayLike) -> tuple[Array, Array]:
    """Lowest and highest duty, kept between 0 and 1."""
    duty, tolerance = np.asarray(duty), np.asarray(tolerance)
    return np.maximum(duty - tolerance, 0), np.minimum(duty + tolerance, 1)


def _largest_sine(low: Array, high: Array) -> Array:
    """Largest |sin pi x| between two numbers."""
    ends = np.maximum(_unsigned_sine(low), _unsigned_sine(high))
    crosses_peak = np.floor(high - 0.5) > np.floor(low - 0.5)
    return np.where(crosses_peak, 1.0, ends)


def _unsigned_sine(turns: Array) -> Array:
    """|sin(pi x)|, exactly 0 at whole numbers."""
    return np.asarray(np.sin(np.pi * np.abs(turns - np.round(turns))))


def null_free_amplitude(
    order: ArrayLike,
    swing_v: ArrayLike,
    duty: ArrayLike,
    tolerance: ArrayLike,
    rise_s: ArrayLike,
    fall_s: ArrayLike,
    period_s: ArrayLike,
) -> Array:
    r"""Peak amplitude that a harmonic never exceeds, with these edges or any slower ones.

    .. math:: \frac{V}{\pi n}\,\min\bigl(g_r + g_f,\ (g_r + g_f) S + \Delta\, C\bigr), \quad
       \Delta = \min(g_r + g_f,\ 1.064\,|\ln(t_f/t_r)|)

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    swing_v : array_like
        High level minus low level V. [V]
    duty : array_like
        Pulse width over the period, d. [-]
    tolerance : array_like
        Largest deviation of the duty on either side. [-]
    rise_s, fall_s : array_like
        Rise and fall time from 0 to 100 % of the swing. [s]
    period_s : array_like
        Period. [s]

    Returns
    -------
    numpy.ndarray
        Peak amplitude, broadcast shape of the arguments. [V]

    Notes
    -----
    S and C are the largest \|sin pi n d\| and \|cos pi n d\| over the tolerance. Derived
    from c_n of `unequal_edge_amplitude`: half the sum of both edge factors times the
    sine, half their difference times the cosine. *Slower* means both ramps longer by one
    factor: sinc then differs between them by no more than the integral of its slope over
    the logarithm, whatever the factor. Equal edges give 2 V g S/(pi n), the tight form.

    Examples
    --------
    Equal edges of no length at 50 %: 2 V / pi.

    >>> print(f"{null_free_amplitude(1, 3.3, 0.5, 0.0, 0.0, 0.0, 40e-9):.4f} V")
    2.1008 V
    """
    order, rise_s, fall_s = np.asarray(order), np.asarray(rise_s), np.asarray(fall_s)
    sine, cosine = edge_shares(order, duty, tolerance)
    per_second = order / np.asarray(period_s)
    both = null_free_edge_factor(per_second * rise_s) + null_free_edge_factor(per_second * fall_s)
    apart = np.minimum(both, _log_ratio(rise_s, fall_s) * LOG_SLOPE)
    level = np.minimum(both, both * sine + apart * cosine)
    return np.asarray(np.asarray(swing_v) / (np.pi * order) * level)


def _log_ratio(rise_s: Array, fall_s: Array) -> Array:
    """|ln(fall/rise)|: 0 where both are equal (also both 0), infinite where one is 0."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.abs(np.log(fall_s / rise_s))
    return np.where(rise_s == fall_s, 0.0, ratio)


def raised_cosine_factor(x: ArrayLike) -> Array:
    r"""Edge factor of a raised-cosine edge, :math:`|\cos \pi x|/|1 - 4 x^2|`.

    Parameters
    ----------
    x : array_like
        Frequency times the 0-100 % duration of the edge, 0 or more. [-]

    Returns
    -------
    numpy.ndarray
        Spectrum relative to an ideal step. [-]

    Notes
    -----
    For comparison with the ramp's \|sinc x\|: waveforms are computed with this
    edge, emission is not, as it falls by 60 instead of 40 dB per decade.

    Examples
    --------
    The removable 0/0 at x = 1/2 is pi/4.

    >>> print(np.round(raised_cosine_factor([0.0, 0.5, 1.0]), 4))
    [1.     0.7854 0.3333]
    """
    x = np.asarray(x, dtype=float)
    # cos(pi x)/(1 - 4x^2) = (pi/4) [sinc(x - 1/2) + sinc(x + 1/2)], which has no 0/0
    return np.asarray(np.pi / 4 * np.abs(np.sinc(x - 0.5) + np.sinc(x + 0.5)))
