"""Credit for a clock whose frequency is swept on purpose: how much less a narrow receiver reads."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

# Below every simulated sweep. At the ends of a sweep two crossings follow within the time of the
# filter and add, 6.0 dB, of which the impulse bandwidth (1.064 B) of a crossing keeps 2.5 dB off.
ALLOWANCE_DB = 3.6
LARGEST_FILL = 0.8  # where sweep and bandwidth are alike, more than two crossings add


def spread_credit_db(
    order: ArrayLike,
    deviation_hz: ArrayLike,
    modulation_hz: ArrayLike,
    bandwidth_hz: ArrayLike,
    may_spread: ArrayLike = True,
) -> Array:
    r"""Credit on a harmonic of a clock with a triangular sweep of its frequency.

    .. math:: \max\Bigl(0,\ 10\lg\frac{n\,\Delta f}{B}\min\Bigl(\frac{f_m}{B},
       \frac{B}{f_m}, 0.8\Bigr) - 3.6\Bigr)

    Parameters
    ----------
    order : array_like
        Harmonic number n, 1 or more. [-]
    deviation_hz : array_like
        From the lowest to the highest frequency of the fundamental. [Hz]
    modulation_hz : array_like
        Sweeps there and back per second, f_m. [Hz]
    bandwidth_hz : array_like
        Receiver bandwidth at 6 dB, B. [Hz]
    may_spread : array_like of bool
        Whether this clock may spread at all: where it may not, nothing is credited.

    Returns
    -------
    numpy.ndarray
        Credit for peak, quasi-peak and average, 0 or above. [dB]

    Notes
    -----
    The often quoted 10 lg(n df/B) is the credit of the rms alone: the sweep crosses the
    bandwidth for so short a time that the filter does not fill, but each crossing gives a
    peak. A sweep faster than the bandwidth has single lines, of which the receiver reads
    one: the second branch. A triangle only: a sine gathers at its ends and gets less.

    Examples
    --------
    40 MHz, 5 % in all, 30 kHz, fifth harmonic in 120 kHz: 10 lg(83.3 x 0.25) - 3.6.

    >>> print(f"{spread_credit_db(5, 2e6, 30e3, 120e3):.1f} dB")
    9.6 dB
    """
    bandwidth_hz = np.asarray(bandwidth_hz, dtype=float)
    sweep = np.asarray(modulation_hz) / bandwidth_hz
    with np.errstate(divide="ignore", invalid="ignore"):
        fill = np.minimum(np.minimum(sweep, 1 / sweep), LARGEST_FILL)
        ratio = np.asarray(order) * np.asarray(deviation_hz) / bandwidth_hz * fill
        credit_db = 10 * np.log10(ratio) - ALLOWANCE_DB
    return np.where(may_spread, np.maximum(credit_db, 0.0), 0.0)
