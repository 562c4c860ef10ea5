"""From levels to the fastest acceptable edge: the shortest ramp whose spectrum keeps the budget."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.edge_factor import inverse_edge_factor, null_free_edge_factor
from edgeplan.physics.spectra import LOG_SLOPE

Array = NDArray[Any]

HALVINGS = 40


class RampLimit(NamedTuple):
    """Shortest ramp and the line of the spectrum that asks for it (-1: none does)."""

    ramp_s: Array
    line: NDArray[np.intp]


def shortest_ramp(excess: ArrayLike, frequency_hz: ArrayLike) -> RampLimit:
    r"""Shortest ramp from which on every line keeps its budget, whatever slower edge is taken.

    .. math:: t_{r,min} = \max_n\, g^{-1}(1/b_n)/f_n \quad\text{over}\quad b_n > 1

    Parameters
    ----------
    excess : array_like
        Level over budget with an edge of no length, b, shape ``(..., F)``: for a clock
        ``duty_factor * 2 V/(pi n) * |field per volt| / budget``. [-]
    frequency_hz : array_like
        Frequency of each line, broadcast against it. [Hz]

    Returns
    -------
    RampLimit
        0-100 % ramp of both edges, shape ``(...)``, 0 where no line is over budget,
        infinite where one is over by an infinite factor; and the index of the
        binding line. [s], [-]

    Notes
    -----
    Uses the edge factor without nulls: the exact spectrum is not monotone in the
    ramp, and a root search on it can stop in a null (seen at 0.53 of the safe ramp).
    Lines with an excess of 1 or less are left out: they hold for any edge. A line
    with NaN makes the result NaN (undecided), with that line's index. Unequal
    edges: `shortest_ramp_unequal`.

    Examples
    --------
    One line at 100 MHz over budget by pi/2 needs sinc(f t) = 2/pi, f t = 1/2.

    >>> limit = shortest_ramp([[1.5707963, 0.9]], [1e8, 3e8])
    >>> print(f"{limit.ramp_s[0] * 1e9:.3f} ns, line {limit.line[0]}")
    5.000 ns, line 0
    """
    excess, frequency_hz = np.asarray(excess, dtype=float), np.asarray(frequency_hz)
    with np.errstate(divide="ignore"):
        ramp_s = inverse_edge_factor(1 / np.maximum(excess, 0)) / frequency_hz
    return _longest(ramp_s)


def _longest(ramp_s: Array) -> RampLimit:
    """Largest ramp along the last axis and its index; NaN wins."""
    line = np.argmax(ramp_s, axis=-1)
    longest_s = np.take_along_axis(ramp_s, line[..., None], axis=-1)[..., 0]
    return RampLimit(longest_s, np.where(longest_s == 0, -1, line))


def shortest_ramp_unequal(
    excess: ArrayLike,
    frequency_hz: ArrayLike,
    odd_share: ArrayLike,
    even_share: ArrayLike,
    fall_over_rise: ArrayLike,
) -> RampLimit:
    r"""Shortest rise when the fall is longer or shorter by a fixed factor.

    Parameters
    ----------
    excess : array_like
        Level over budget with edges of no length and full duty factor: amplitude
        2V/(pi n), shape ``(..., F)``. [-]
    frequency_hz : array_like
        Frequency of each line. [Hz]
    odd_share, even_share : array_like
        Largest \|sin pi n d\| and \|cos pi n d\| over the duty's tolerance. [-]
    fall_over_rise : array_like
        Fall over rise time, above 0, shape of one line (``(..., 1)`` or scalar). [-]

    Returns
    -------
    RampLimit
        0-100 % rise from which on `spectra.null_free_amplitude` keeps the budget on
        every line, and the binding line. Infinite where it never does. [s], [-]

    Notes
    -----
    Bisection, 40 halvings from 0 to the ramp at which 1/(pi x) alone keeps the budget:
    the bound falls monotonically, so there is one root; its safe side is returned.

    Examples
    --------
    With equal edges it is `shortest_ramp`.

    >>> limit = shortest_ramp_unequal([1.5707963], [1e8], 1.0, 0.0, 1.0)
    >>> print(f"{limit.ramp_s * 1e9:.3f} ns")
    5.000 ns
    """
    arrays = np.broadcast_arrays(excess, frequency_hz, odd_share, even_share, fall_over_rise)
    excess, frequency_hz, odd, even, ratio = (np.asarray(a, dtype=float) for a in arrays)
    apart = LOG_SLOPE * np.abs(np.log(ratio))

    def over_budget(x: Array) -> Array:
        """Whether the bound with a rise of x over frequency is above budget."""
        both = null_free_edge_factor(x) + null_free_edge_factor(x * ratio)
        share = np.minimum(both, both * odd + np.minimum(both, apart) * even) / 2
        return np.asarray(excess * share > 1)

    low, high = np.zeros(excess.shape), excess * (1 + 1 / ratio) / (2 * np.pi)
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        over = over_budget(middle)
        low, high = np.where(over, middle, low), np.where(over, high, middle)
    needed = over_budget(np.zeros(excess.shape)) | np.isnan(excess)
    return _longest(np.where(needed, high, 0.0) / frequency_hz)


def envelope_ramp(excess: ArrayLike, frequency_hz: ArrayLike) -> RampLimit:
    r"""Shortest ramp by the envelope alone: explains a limit, never sets one.

    .. math:: \max_{f:\ b > 1} \frac{b(f)}{\pi f}

    Parameters
    ----------
    excess : array_like
        Envelope of the pulse without its edge times field per volt over budget,
        shape ``(..., F)``. [-]
    frequency_hz : array_like
        Frequency of each line. [Hz]

    Returns
    -------
    RampLimit
        0-100 % ramp, shape ``(...)``, 0 where nothing is over budget, and the line. [s], [-]

    Notes
    -----
    In the median 1.7 times the ramp that is needed, at worst 35 times: near the corner
    a small level is a large factor of the ramp. Only lines over budget count; the others
    would still give a finite ramp.

    Examples
    --------
    Four times over budget at 100 MHz: 4/(pi 100 MHz).

    >>> print(f"{envelope_ramp([4.0, 0.5], [1e8, 1e6]).ramp_s * 1e9:.2f} ns")
    12.73 ns
    """
    excess, frequency_hz = np.asarray(excess, dtype=float), np.asarray(frequency_hz)
    ramp_s = np.where(excess <= 1, 0.0, excess / (np.pi * frequency_hz))
    return _longest(ramp_s)


def out_of_reach(
    excess: ArrayLike, frequency_hz: ArrayLike, longest_ramp_s: ArrayLike
) -> NDArray[np.bool_]:
    """Lines over budget that no ramp up to the longest one brings in.

    Parameters
    ----------
    excess : array_like
        Level over budget with an edge of no length, shape ``(..., F)``. [-]
    frequency_hz : array_like
        Frequency of each line. [Hz]
    longest_ramp_s : array_like
        Longest ramp that may be tried, 0-100 %, shape ``(..., 1)`` or scalar. [s]

    Returns
    -------
    numpy.ndarray of bool
        True where the remedy is not an edge: less current, a filter, a shield, another layer.

    Notes
    -----
    A sinc null that one exact ramp would hit is no reach: no driver holds it. NaN is
    not out of reach; it is unknown and shows as NaN in `shortest_ramp`.

    Examples
    --------
    A first harmonic below 1/(pi t) is not mended by its edge; the seventh is.

    >>> print(out_of_reach([2.0, 2.0], [50e6, 350e6], 2e-9))
    [ True False]
    """
    x = np.asarray(frequency_hz, dtype=float) * np.asarray(longest_ramp_s)
    return np.asarray(np.asarray(excess) * null_free_edge_factor(x) > 1)
