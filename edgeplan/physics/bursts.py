"""What a receiver reads of a signal that comes in bursts, relative to the same signal all the time.

The quasi-peak chain is that of `quasi_peak`: diode, capacitor and the highest reading of a
critically damped meter, here with a burst of constant amplitude.
"""

from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.detectors import Band, Detector
from edgeplan.physics.quasi_peak import charging_s, conduction, sine_share

Array = NDArray[Any]
Rule = Literal["cispr", "fcc"]

SHORTEST_OVER_BANDWIDTH = 2.0  # a shorter burst does not get through the filter in full
NO_RELIEF_HZ = 20.0  # 47 CFR 15.35(a): pulses this rare or rarer are judged by their peak
BURST_STEPS, PAUSE_STEPS = 200, 400


def burst_reading_db(
    detector: Detector,
    band: Band,
    length_s: ArrayLike,
    repetition_hz: ArrayLike,
    rule: Rule = "cispr",
) -> Array:
    r"""Level that a detector reads of rectangular bursts, over that of the signal all the time.

    Parameters
    ----------
    detector : {"peak", "quasi-peak", "average", "rms"}
        Detector. Peak: 0; quasi-peak: diode, capacitor and meter; average: highest
        reading of the meter on the bursts; rms: 10 lg of the duty.
    band : Band
        Receiver, of `detectors.BANDS`; band E has no quasi-peak detector (NaN).
    length_s : array_like
        Length of one burst. [s]
    repetition_hz : array_like
        Bursts per second, above 0; broadcasts with ``length_s``. [Hz]
    rule : {"cispr", "fcc"}
        Under the American rule the quasi-peak of bursts at 20 Hz or rarer is the peak.

    Returns
    -------
    numpy.ndarray
        Level, 0 or below; 0 where bursts leave no pause. [dB]

    Notes
    -----
    Bursts are of constant amplitude. One shorter than two over the bandwidth is taken as
    that long: it reads less. Within the tolerance of receivers, 1 to 2 dB. A meter
    follows slow bursts, so their average reads above 20 lg of the duty.

    Examples
    --------
    A bus that is busy 1 ms a hundred times a second gains next to nothing; the average
    of 1 us at 10 kHz is its duty.

    >>> from edgeplan.physics.detectors import BANDS
    >>> print(f"{burst_reading_db('quasi-peak', BANDS['C/D'], 1e-3, 100.0):.1f} dB")
    -0.4 dB
    >>> print(f"{burst_reading_db('average', BANDS['C/D'], 100e-6, 1e3):.1f} dB")
    -20.0 dB

    References
    ----------
    .. [1] CISPR 16-1-1, clauses 4 to 7 (quasi-peak, peak, average and their meters).
    .. [2] 47 CFR 15.35(a).
    """
    repetition_hz = np.asarray(repetition_hz, dtype=float)
    shortest_s = SHORTEST_OVER_BANDWIDTH / band.bandwidth_hz
    length_s = np.maximum(np.asarray(length_s, dtype=float), shortest_s)
    length_s, period_s = np.broadcast_arrays(length_s, 1 / repetition_hz)
    busy_s = np.minimum(length_s, period_s).ravel()
    pause_s = period_s.ravel() - busy_s
    if detector == "peak":
        return np.zeros(length_s.shape)
    if detector == "rms":
        return np.asarray(10 * np.log10(busy_s / period_s.ravel())).reshape(length_s.shape)
    reading = _average if detector == "average" else _quasi_peak
    level_db = 20 * np.log10(np.minimum(reading(band, busy_s, pause_s), 1.0))
    level_db = np.where(pause_s > 0, level_db, 0.0).reshape(length_s.shape)
    if detector == "quasi-peak" and rule == "fcc":
        return np.where(repetition_hz <= NO_RELIEF_HZ, 0.0, level_db)
    return np.asarray(level_db)


def _quasi_peak(band: Band, busy_s: Array, pause_s: Array) -> Array:
    """Highest reading over that of the steady signal, (M,)."""
    if np.isnan(band.charge_s):
        return np.full(busy_s.shape, np.nan)
    share, time_s = _charge_curve(band)
    left = np.exp(-pause_s / band.discharge_s)
    low, high = np.zeros(busy_s.shape), np.full(busy_s.shape, share[-1])
    for _ in range(50):
        volt = (low + high) / 2
        ends = np.interp(np.interp(volt, share, time_s) + busy_s, time_s, share)
        low, high = (
            np.where(ends * left > volt, volt, low),
            np.where(ends * left > volt, high, volt),
        )
    since_s = np.interp(low, share, time_s)
    # finer at the start, where the capacitor charges and discharges fastest
    charging = since_s + np.linspace(0, 1, BURST_STEPS + 1)[:, None] ** 3 * busy_s
    resting = np.linspace(0, 1, PAUSE_STEPS + 1)[:, None] ** 2 * pause_s
    rise = np.interp(charging, time_s, share)
    fall = rise[-1] * np.exp(-resting / band.discharge_s)
    steps_s = np.concatenate([np.diff(charging, axis=0), np.diff(resting, axis=0)])
    starts = np.concatenate([rise[:-1], fall[:-1]])
    ends = np.concatenate([rise[1:], fall[1:]])
    return np.asarray(_highest_on_meter(starts, ends, steps_s, band.meter_s) / share[-1])


def _charge_curve(band: Band) -> tuple[Array, Array]:
    """Capacitor voltage under a steady signal of amplitude 1 from empty, and its times [s]."""
    share = sine_share(band) * -np.expm1(-np.linspace(0, 14, 1500))
    middle = (share[1:] + share[:-1]) / 2
    rate = conduction(middle) / charging_s(band) - middle / band.discharge_s
    return share, np.concatenate([[0.0], np.cumsum(np.diff(share) / rate)])


def _average(band: Band, busy_s: Array, pause_s: Array) -> Array:
    """Highest reading of the meter on bursts of amplitude 1, (M,)."""
    shares = np.full((BURST_STEPS, 1), 1 / BURST_STEPS)
    watched_s = np.minimum(pause_s, 3 * band.meter_s)  # the highest reading comes before
    steps_s = np.concatenate([shares * busy_s, shares * watched_s, (pause_s - watched_s)[None]])
    level = np.repeat([1.0, 0.0], [BURST_STEPS, BURST_STEPS + 1])[:, None]
    level = level * np.ones(busy_s.shape)
    return _highest_on_meter(level, level, steps_s, band.meter_s)


def _highest_on_meter(starts: Array, ends: Array, steps_s: Array, meter_s: float) -> Array:
    """Highest reading of a critically damped meter once a waveform of straight pieces repeats."""
    turns = steps_s / meter_s
    decay, slopes = np.exp(-turns), (ends - starts) / turns.clip(min=1e-300)
    once = turns.sum(axis=0)

    def run(first: Array, second: Array) -> tuple[Array, Array, Array]:
        """Both lags of the meter after one period, and its highest reading on the way."""
        highest = second
        for start, end, slope, turn, left in zip(starts, ends, slopes, turns, decay, strict=True):
            drive = first - start + slope
            second = end - 2 * slope + (second - start + 2 * slope + drive * turn) * left
            first = end - slope + drive * left
            highest = np.maximum(highest, second)
        return first, second, highest

    first, second, _ = run(np.zeros(once.shape), np.zeros(once.shape))
    gone = -np.expm1(-once)
    first = first / gone
    second = (second + once * np.exp(-once) * first) / gone
    return run(first, second)[2]
