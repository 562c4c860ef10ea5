"""Data in a receiver's bandwidth: random data, repeating patterns, slow signals, discrete lines.

Levels are relative to the odd-harmonic envelope 2V/(pi n) of a clock with the same
edges, taken at the same frequency; for data that clock runs at half the bit rate.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics import detectors
from edgeplan.physics.detectors import Detector

Array = NDArray[Any]


def random_data_db(
    rate_bps: ArrayLike,
    bandwidth_hz: ArrayLike,
    detector: Detector,
    pattern_bits: ArrayLike = np.inf,
    observed_s: ArrayLike = 1.0,
) -> Array:
    r"""Level that a detector reads of a data net, over the envelope of a clock at half its rate.

    .. math:: 10\lg\frac{\min(\max(B_n, R/L), R)}{R} + D

    Parameters
    ----------
    rate_bps : array_like
        Bit rate R, non-return-to-zero. [bit/s]
    bandwidth_hz : array_like
        Receiver bandwidth; B_n is 0.753 of it. [Hz]
    detector : {"peak", "quasi-peak", "average", "rms"}
        Detector, with its term D for noise.
    pattern_bits : array_like
        Length L of a pattern that repeats, infinite for random data. [bit]
    observed_s : array_like
        Time a frequency is watched (peak only). [s]

    Returns
    -------
    numpy.ndarray
        Level over the clock's envelope 2V/(pi n), n = 2 f/R. [dB]

    Notes
    -----
    The power ratio is exactly (B_n/R) sin^2(pi f/R); the sine is not credited. Lines of a
    pattern that stand further apart than B_n are single sines: D = 0 for all detectors.
    Data slower than the bandwidth are separate impulses: see `impulse_db`, which counts
    where it is higher.

    Examples
    --------
    100 Mbit/s in 120 kHz: 10 lg(0.0903/100) + 5.6.

    >>> print(f"{random_data_db(100e6, 120e3, 'quasi-peak'):.1f} dB")
    -24.8 dB
    """
    rate_bps, bandwidth_hz = np.asarray(rate_bps, dtype=float), np.asarray(bandwidth_hz)
    noise_hz = detectors.noise_bandwidth_hz(bandwidth_hz)
    spacing_hz = rate_bps / np.asarray(pattern_bits)
    share = np.minimum(np.maximum(noise_hz, spacing_hz) / rate_bps, 1.0)
    term = detectors.noise_reading_db(detector, bandwidth_hz, observed_s)
    dense = 10 * np.log10(share) + np.where(spacing_hz > noise_hz, 0.0, term)
    return np.asarray(np.maximum(dense, impulse_db(rate_bps, bandwidth_hz, detector)))


def impulse_db(edges_per_s: ArrayLike, bandwidth_hz: ArrayLike, detector: Detector) -> Array:
    r"""Level that a detector reads of edges slower than its bandwidth, over one line's level.

    .. math:: 20\lg\frac{B_{imp}}{R}\ \text{(peak, quasi-peak)}, \quad
       10\lg\frac{B_n}{R}\ \text{(rms)}, \quad 0\ \text{(average)}; \quad \text{not below } 0

    Parameters
    ----------
    edges_per_s : array_like
        Edges per second R: twice a clock's frequency, at most the bit rate of data. [1/s]
    bandwidth_hz : array_like
        Receiver bandwidth; B_imp = 1.05 and B_n = 0.753 of it. [Hz]
    detector : {"peak", "quasi-peak", "average", "rms"}
        Detector.

    Returns
    -------
    numpy.ndarray
        Level over the clock's envelope 2V/(pi n); minus infinity where the edges come
        faster than the bandwidth (then lines are single and the envelope holds). [dB]

    Notes
    -----
    An edge of height V reads V B_imp/(pi f); a line of the clock is 2V f0/(pi f). Each
    edge must have died away in the receiver before the next: for a duty far from 50 %
    two edges closer than 1/B_imp read up to 6 dB more. Quasi-peak takes the peak: by
    the standard's pulse response it reads 4 dB less at 1 kHz, 12 dB less at 100 Hz.

    Examples
    --------
    A 20 kHz clock in 120 kHz: 126/40.

    >>> print(f"{impulse_db(2 * 20e3, 120e3, 'peak'):.2f} dB")
    9.97 dB

    References
    ----------
    .. [1] CISPR 16-1-1, clause 4 and annexes (response to pulses, impulse bandwidth).
    """
    edges_per_s = np.asarray(edges_per_s, dtype=float)
    impulse_share = detectors.impulse_bandwidth_hz(bandwidth_hz) / edges_per_s
    noise_share = detectors.noise_bandwidth_hz(bandwidth_hz) / edges_per_s
    level = {
        "peak": 20 * np.log10(impulse_share),
        "quasi-peak": 20 * np.log10(impulse_share),
        "rms": np.maximum(10 * np.log10(noise_share), 0.0),
        "average": np.zeros(impulse_share.shape),
    }[detector]
    return np.where(impulse_share > 1, level, -np.inf)


def data_line_amplitude(
    multiple: ArrayLike,
    swing_v: ArrayLike,
    rate_bps: ArrayLike,
    rise_s: ArrayLike,
    fall_s: ArrayLike,
    skew_s: ArrayLike = 0.0,
) -> Array:
    r"""Peak amplitude of the discrete line of random data at a multiple of its bit rate.

    .. math:: \frac{V}{4\pi m} \bigl|\mathrm{sinc}(mR\,t_r)
       - \mathrm{sinc}(mR\,t_f)\,e^{-j2\pi m R s}\bigr|

    Parameters
    ----------
    multiple : array_like
        Multiple m of the bit rate, 1 or more. [-]
    swing_v : array_like
        High level minus low level V. [V]
    rate_bps : array_like
        Bit rate R. [bit/s]
    rise_s, fall_s : array_like
        Rise and fall time, 0 to 100 %. [s]
    skew_s : array_like
        How much later a falling edge crosses half swing than a rising one, s. [s]

    Returns
    -------
    numpy.ndarray
        Peak amplitude; 0 for equal edges without skew. [V]

    Notes
    -----
    Ones and zeros equally likely. A laboratory sees it as a clock's harmonic, above the
    quasi-peak reading of the data around it.

    Examples
    --------
    Half a bit of skew: V/(2 pi).

    >>> print(f"{data_line_amplitude(1, 1.0, 1e8, 0.0, 0.0, 5e-9):.4f} V")
    0.1592 V
    """
    multiple = np.asarray(multiple)
    line_hz = multiple * np.asarray(rate_bps)
    turn = np.exp(-2j * np.pi * line_hz * np.asarray(skew_s))
    edges = np.sinc(line_hz * np.asarray(rise_s)) - np.sinc(line_hz * np.asarray(fall_s)) * turn
    return np.asarray(np.asarray(swing_v) / (4 * np.pi * multiple) * np.abs(edges))
