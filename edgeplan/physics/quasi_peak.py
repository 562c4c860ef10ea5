"""Quasi-peak receiver rebuilt from its time constants: what it reads of pulses and of noise.

Two critically coupled double-tuned stages, a half-wave diode that charges a capacitor
through a resistor, discharge, and a critically damped meter whose highest reading counts.
"""

from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.detectors import Band

Array = NDArray[Any]

PULSE_STEPS = 400
PULSE_TURNS = 12.0  # the filter's response has died away to e^-12
LONGEST_PERIOD_S = 1e3  # an isolated pulse
LARGEST_ENVELOPE = 6.0  # over rms: noise is above it once in 4e15
SHARES = (np.arange(2000) + 0.5) / 2000


def pulse_reading_v(band: Band, area_vs: ArrayLike, repetition_hz: ArrayLike) -> Array:
    """Read equal short pulses: the rms value of the sine that reads the same.

    Parameters
    ----------
    band : Band
        Receiver, of `detectors.BANDS`; band E has no quasi-peak detector.
    area_vs : array_like
        Area of one pulse, volts of electromotive force times seconds. [V s]
    repetition_hz : array_like
        Pulses per second, shape ``(M,)``; 0 is one isolated pulse. NaN where pulses
        overlap in the filter, above about B/6. [Hz]

    Returns
    -------
    numpy.ndarray
        Reading, ``(M,)``. [V]

    Notes
    -----
    Within 0.8 dB of the pulse response the standard prints, 1.5 dB at 1 Hz, where it allows
    2 dB. A capacitor charged in proportion to the envelope instead of by a conducting
    diode would read up to 3.4 dB less of rare pulses.

    Examples
    --------
    0.044 microvolt seconds at 100 Hz shall read 2 mV, within 1.5 dB.

    >>> from edgeplan.physics.detectors import BANDS
    >>> print(f"{pulse_reading_v(BANDS['C/D'], 0.044e-6, [100.0])[0] * 1e3:.1f} mV")
    2.2 mV

    References
    ----------
    .. [1] CISPR 16-1-1, clause 4 (quasi-peak receivers) and its annex on their response.
    """
    repetition_hz = np.atleast_1d(np.asarray(repetition_hz, dtype=float))
    period_s = 1 / np.maximum(repetition_hz, 1 / LONGEST_PERIOD_S)
    turns_per_s = np.pi * band.bandwidth_hz / np.sqrt(2)
    pulse_s = PULSE_TURNS / turns_per_s
    turns = np.linspace(0, PULSE_TURNS, PULSE_STEPS + 1)
    # the stages' impulse response; the envelope of a pulse of unit area is twice that
    response = 2 * turns_per_s * np.exp(-turns) * (np.sin(turns) - turns * np.cos(turns))
    before = np.linspace(0, 2.2 * band.bandwidth_hz, 257)
    after = _charged(before, 2 * np.abs(response), pulse_s / PULSE_STEPS, band)
    peak = _steady_peak(before, after, period_s - pulse_s, band)
    reading = _highest_meter_reading(peak, period_s, band) / (np.sqrt(2) * sine_share(band))
    return np.where(period_s > pulse_s, reading * np.asarray(area_vs), np.nan)


def noise_over_rms_db(band: Band) -> float:
    """Level that the quasi-peak detector reads of Gaussian noise, over its rms value.

    Parameters
    ----------
    band : Band
        Receiver whose discharge is slow against its bandwidth (not band A).

    Returns
    -------
    float
        Level. [dB]

    Notes
    -----
    The capacitor stands where the mean charging current, over the Rayleigh distribution of
    the envelope, equals the discharge.

    Examples
    --------
    >>> from edgeplan.physics.detectors import BANDS
    >>> print(f"{noise_over_rms_db(BANDS['C/D']):.1f} dB")
    5.6 dB
    """
    envelope = (np.arange(4000) + 0.5) / 4000 * LARGEST_ENVELOPE
    chance = 2 * envelope * np.exp(-(envelope**2)) * LARGEST_ENVELOPE / 4000  # rms 1
    low, high, product_s = 0.0, LARGEST_ENVELOPE, charging_s(band)
    for _ in range(40):
        volt = (low + high) / 2
        current = np.sum(chance * envelope * conduction(volt / envelope)) / product_s
        low, high = (volt, high) if current > volt / band.discharge_s else (low, volt)
    return float(20 * np.log10(low / sine_share(band)))


def charging_s(band: Band) -> float:
    """Resistor times capacitor of the charging path, from the standard's charge time.

    Parameters
    ----------
    band : Band
        Receiver.

    Returns
    -------
    float
        Product that lets a sine charge the capacitor to 63 % in the charge time. [s]

    Notes
    -----
    About a quarter of the charge time: the diode conducts for part of each cycle.

    Examples
    --------
    >>> from edgeplan.physics.detectors import BANDS
    >>> print(f"{charging_s(BANDS['C/D']) * 1e3:.2f} ms")
    0.25 ms
    """
    product_s = band.charge_s / 4
    for _ in range(30):
        final = _sine_share(product_s, band)
        share = SHARES * (1 - np.exp(-1)) * final
        rate = conduction(share) / product_s - share / band.discharge_s
        taken_s = np.sum(1 / rate) * (share[1] - share[0])
        product_s *= band.charge_s / taken_s
    return float(product_s)


def sine_share(band: Band) -> float:
    """Capacitor voltage over the amplitude of a steady sine.

    Parameters
    ----------
    band : Band
        Receiver.

    Returns
    -------
    float
        Share, a little below 1 as the capacitor always leaks. [-]

    Examples
    --------
    >>> from edgeplan.physics.detectors import BANDS
    >>> print(f"{sine_share(BANDS['C/D']):.2f}")
    0.99
    """
    return _sine_share(charging_s(band), band)


def _sine_share(product_s: float, band: Band) -> float:
    """Share at which charge and discharge balance, by bisection."""
    low, high = 0.0, 1.0
    for _ in range(50):
        share = (low + high) / 2
        charges = conduction(np.array(share)) / product_s > share / band.discharge_s
        low, high = (share, high) if charges else (low, share)
    return low


def conduction(share: Array) -> Array:
    r"""Mean current of the diode, over a cycle, times resistor over amplitude.

    .. math:: \frac{\sqrt{1 - s^2} - s\arccos s}{\pi}

    Parameters
    ----------
    share : numpy.ndarray
        Capacitor voltage over the amplitude, s; held between 0 and 1. [-]

    Returns
    -------
    numpy.ndarray
        1/pi at an empty capacitor, 0 at a full one. [-]

    Examples
    --------
    >>> print(conduction(np.array([0.0, 1.0])).round(4))
    [0.3183 0.    ]
    """
    share = np.clip(share, 0, 1)
    return np.asarray((np.sqrt(1 - share**2) - share * np.arccos(share)) / np.pi)


def _charged(before: Array, envelope: Array, step_s: float, band: Band) -> Array:
    """Capacitor voltage after an envelope passed, for each voltage before it (midpoint rule)."""
    product_s = charging_s(band)

    def slope(volt: Array, amplitude: float) -> Array:
        """Rate of the capacitor voltage."""
        share = volt / max(amplitude, 1e-300)
        return amplitude * conduction(share) / product_s - volt / band.discharge_s

    volt = before.copy()
    for start, end in pairwise(envelope):
        halfway = volt + slope(volt, start) * step_s / 2
        volt = volt + slope(halfway, (start + end) / 2) * step_s
    return volt


def _steady_peak(before: Array, after: Array, pause_s: Array, band: Band) -> Array:
    """Voltage right after a pulse once pulse and pause repeat, for each pause."""
    left = np.exp(-np.maximum(pause_s, 0) / band.discharge_s)
    low, high = np.zeros(pause_s.shape), np.full(pause_s.shape, before[-1])
    for _ in range(50):
        volt = (low + high) / 2
        rises = np.interp(volt, before, after) * left > volt
        low, high = np.where(rises, volt, low), np.where(rises, high, volt)
    return np.interp(low, before, after)


def _highest_meter_reading(peak: Array, period_s: Array, band: Band) -> Array:
    """Highest reading of a critically damped meter on a repeated decay from a peak."""
    decay = 1 / band.discharge_s
    meter = 1.0001 / band.meter_s  # band B: equal rates would need the formula's limit
    gain = meter / (meter - decay)
    ends, settles = np.exp(-decay * period_s), np.exp(-meter * period_s)
    first = -gain * (1 - ends) / (1 - settles)
    second = (-(gain**2) * (1 - ends) + first * meter * period_s * settles) / (1 - settles)
    time_s = np.linspace(0, 1, 4001)[:, None] * np.minimum(period_s, 10 * band.discharge_s)
    shape = gain**2 * np.exp(-decay * time_s)
    shape = shape + (second + first * meter * time_s) * np.exp(-meter * time_s)
    return np.asarray(peak * shape.max(axis=0))
