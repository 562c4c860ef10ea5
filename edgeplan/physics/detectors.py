"""Measuring receivers of CISPR 16-1-1: bandwidths, time constants, and how each detector reads."""

from typing import Any, Literal, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]
Detector = Literal["peak", "quasi-peak", "average", "rms"]


class Band(NamedTuple):
    """A frequency range of the standard and its receiver; no quasi-peak where NaN."""

    name: str
    from_hz: float
    to_hz: float
    bandwidth_hz: float  # at 6 dB; of band E the impulse bandwidth
    charge_s: float
    discharge_s: float
    meter_s: float


# CISPR 16-1-1: bandwidths and time constants.
BANDS = {
    "A": Band("A", 9e3, 150e3, 200.0, 45e-3, 500e-3, 160e-3),
    "B": Band("B", 150e3, 30e6, 9e3, 1e-3, 160e-3, 160e-3),
    "C/D": Band("C/D", 30e6, 1e9, 120e3, 1e-3, 550e-3, 100e-3),
    "E": Band("E", 1e9, 18e9, 1e6, np.nan, np.nan, 100e-3),
}
IMPULSE_SHARE = 1.05  # impulse over 6 dB bandwidth of two critically coupled double-tuned stages
NOISE_SHARE = np.sqrt(np.pi / np.log(4)) / 2  # noise over 6 dB bandwidth of a Gaussian: 0.753
# Detector over rms for noise: the mean of a Rayleigh envelope; 120 kHz noise in 1 ms and 550 ms.
STEADY_TERMS_DB = {"rms": 0.0, "average": 10 * np.log10(np.pi / 4), "quasi-peak": 5.6}
PEAK_SPREAD_DB = 0.6  # mean largest value of an envelope watched without gaps


def bandwidth_hz(frequency_hz: ArrayLike) -> Array:
    """Receiver bandwidth at a frequency.

    Parameters
    ----------
    frequency_hz : array_like
        Frequency, 9 kHz to 18 GHz; NaN outside. A border belongs to the band below. [Hz]

    Returns
    -------
    numpy.ndarray
        Bandwidth: at 6 dB, above 1 GHz the impulse bandwidth. [Hz]

    Examples
    --------
    >>> print(bandwidth_hz([20e6, 200e6, 2e9]))
    [   9000.  120000. 1000000.]

    References
    ----------
    .. [1] CISPR 16-1-1, clauses 4 to 7.
    """
    frequency_hz = np.asarray(frequency_hz)
    bands = list(BANDS.values())
    conditions = [(frequency_hz >= b.from_hz) & (frequency_hz <= b.to_hz) for b in bands]
    return np.select(conditions, [b.bandwidth_hz for b in bands], default=np.nan)


def noise_bandwidth_hz(bandwidth_hz: ArrayLike) -> Array:
    r"""Noise bandwidth of a Gaussian filter, :math:`0.753\,B_6`.

    Parameters
    ----------
    bandwidth_hz : array_like
        Bandwidth at 6 dB. [Hz]

    Returns
    -------
    numpy.ndarray
        Width of the rectangle that lets the same noise power through. [Hz]

    Examples
    --------
    >>> print(f"{noise_bandwidth_hz(120e3):.0f}")
    90323
    """
    return np.asarray(NOISE_SHARE * np.asarray(bandwidth_hz))


def impulse_bandwidth_hz(bandwidth_hz: ArrayLike) -> Array:
    r"""Impulse bandwidth of a receiver, :math:`1.05\,B_6`.

    Parameters
    ----------
    bandwidth_hz : array_like
        Bandwidth at 6 dB. [Hz]

    Returns
    -------
    numpy.ndarray
        Peak of the response to a short pulse over the pulse's area times 2. [Hz]

    Notes
    -----
    Above 1 GHz the standard states 1 MHz as the impulse bandwidth itself: 0.4 dB high there.

    Examples
    --------
    >>> print(f"{impulse_bandwidth_hz(120e3):.0f}")
    126000
    """
    return np.asarray(IMPULSE_SHARE * np.asarray(bandwidth_hz))


def noise_reading_db(
    detector: Detector, bandwidth_hz: ArrayLike, observed_s: ArrayLike = 1.0
) -> Array:
    r"""Level that a detector reads of Gaussian-like noise over its rms value inside the bandwidth.

    Parameters
    ----------
    detector : {"peak", "quasi-peak", "average", "rms"}
        Detector; the quasi-peak one is that of 30 MHz to 1 GHz.
    bandwidth_hz : array_like
        Receiver bandwidth B. [Hz]
    observed_s : array_like
        Time T a frequency is watched; matters to the peak only. [s]

    Returns
    -------
    numpy.ndarray
        0 rms, -1.05 average, +5.6 quasi-peak, 10 lg(ln(T B)) + 0.6 peak. [dB]

    Notes
    -----
    The peak is the mean largest value while the envelope is watched without gaps; T B
    independent values would give 0.4 dB less.

    Examples
    --------
    >>> for detector in ("average", "quasi-peak", "peak"):
    ...     print(f"{noise_reading_db(detector, 120e3):.2f}")
    -1.05
    5.60
    11.28
    """
    watched = np.asarray(bandwidth_hz, dtype=float) * np.asarray(observed_s)
    if detector == "peak":
        return np.asarray(10 * np.log10(np.log(np.maximum(watched, np.e))) + PEAK_SPREAD_DB)
    return np.full(watched.shape, STEADY_TERMS_DB[detector])
