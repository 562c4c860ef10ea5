"""How each net toggles and what a detector reads of it: data, patterns, bursts, spread clocks."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import SpreadClock
from edgeplan.nets import NetFacts
from edgeplan.physics import data_spectra
from edgeplan.physics.bursts import Rule, burst_reading_db
from edgeplan.physics.detectors import BANDS, Detector
from edgeplan.physics.spread_clock import spread_credit_db

Array = NDArray[Any]

# The rebuilt quasi-peak chain reads at most 1.5 dB less of rare pulses than CISPR 16-1-1 prints;
# so much of the relief by bursts is not credited. tests/physics/test_quasi_peak.py
BURST_ALLOWANCE_DB = {"peak": 0.0, "average": 0.0, "rms": 0.0, "quasi-peak": 1.5}
APART = 2.0  # a spread clock's lines stand apart where its frequency is so many bandwidths
AMERICAN = "fcc-"  # limit lines under 47 CFR 15.35(a) begin like this


def toggle_hz(facts: NetFacts) -> float:
    """Clock frequency, or half the bit rate of data; NaN where neither is given. [Hz]

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    float
        Fundamental of the fastest pattern the net can carry. [Hz]
    """
    if facts.activity == "clock":
        return facts.net.clock_hz or np.nan
    if facts.net.data_bps:
        return 0.5 * facts.net.data_bps
    return facts.net.clock_hz or np.nan


def is_data(facts: NetFacts) -> bool:
    """Whether the net carries data; a pattern without a length is judged as a clock.

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    bool
        True where its spectrum is dense, or has the lines of a pattern.
    """
    if facts.activity == "pattern":
        return facts.net.pattern_bits is not None
    return facts.activity == "random" or (facts.activity is None and bool(facts.net.data_bps))


def spread_of(facts: NetFacts) -> SpreadClock | None:
    """Sweep that is credited on a net: its source's, where the interface allows it.

    Parameters
    ----------
    facts : NetFacts
        One net with its clock sources.

    Returns
    -------
    SpreadClock or None
        None for data, for a sweep that is no triangle, and where several sources disagree.
    """
    found = {source.spread for source in facts.sources}
    if len(found) != 1 or is_data(facts) or not facts.interface.may_spread:
        return None
    spread = found.pop()
    return spread if spread and spread.profile == "triangle" else None


@dataclass(frozen=True, slots=True, kw_only=True)
class Activity:
    """Activity of N nets, each (N,): rates [Hz], pattern lengths [bit], bursts [s].

    ``pattern_bits`` is infinite for random data; ``burst_s`` and ``burst_hz`` are NaN for a net
    that is active all the time, ``spread`` and ``spread_hz`` 0 without a credited sweep.
    """

    toggle_hz: Array
    is_data: Array
    pattern_bits: Array
    burst_s: Array
    burst_hz: Array
    spread: Array
    spread_hz: Array

    def reading_db(
        self, detector: Detector, frequency_hz: Array, bandwidth_hz: Array, limit_id: str = ""
    ) -> Array:
        """What a detector reads over the envelope 2V/(pi n) of the clock or of 1010 data. (N, F)

        Parameters
        ----------
        detector : {"peak", "quasi-peak", "average", "rms"}
            Detector of a limit line.
        frequency_hz, bandwidth_hz : numpy.ndarray
            Judged frequencies and the receiver's bandwidth there, (N, F). [Hz]
        limit_id : str
            Limit line: the American rules have their own for bursts.

        Returns
        -------
        numpy.ndarray
            Level; 0 for a clock that neither rests nor is spread. [dB]
        """
        toggle = self.toggle_hz[:, None]
        with np.errstate(invalid="ignore", divide="ignore"):
            data = data_spectra.random_data_db(
                2 * toggle, bandwidth_hz, detector, self.pattern_bits[:, None]
            )
            slow = data_spectra.impulse_db(2 * toggle, bandwidth_hz, detector)
        clock = np.maximum(slow, 0.0) - self._spread_db(frequency_hz, bandwidth_hz)
        always = np.where(self.is_data[:, None], data, clock)
        return always + self.burst_db(detector, frequency_hz, limit_id)

    def burst_db(self, detector: Detector, frequency_hz: Array, limit_id: str = "") -> Array:
        """Relief by the pauses of nets that are active in bursts, 0 or below. (N, F) [dB]

        Parameters
        ----------
        detector : {"peak", "quasi-peak", "average", "rms"}
            Detector of a limit line; the peak gets no relief.
        frequency_hz : numpy.ndarray
            Judged frequencies, (N, F). [Hz]
        limit_id : str
            Limit line.

        Returns
        -------
        numpy.ndarray
            Relief, less the allowance for the model of the quasi-peak detector. [dB]
        """
        found = np.zeros(frequency_hz.shape)
        rule: Rule = "fcc" if limit_id.startswith(AMERICAN) else "cispr"
        rests = np.flatnonzero(np.isfinite(self.burst_s))
        if not rests.size:
            return found
        bursts = np.stack([self.burst_s[rests], self.burst_hz[rests]])
        kinds, which = np.unique(bursts, axis=1, return_inverse=True)
        high = frequency_hz[rests] > BANDS["E"].from_hz
        for name, inside in (("C/D", ~high), ("E", high)):  # below 30 MHz C/D credits less than B
            if inside.any():
                read_db = burst_reading_db(detector, BANDS[name], kinds[0], kinds[1], rule)
                relief_db = np.nan_to_num(read_db) + BURST_ALLOWANCE_DB[detector]
                relief_db = np.minimum(relief_db, 0.0)[which.ravel(), None]
                found[rests] = np.where(inside, relief_db, found[rests])
        return found

    def _spread_db(self, frequency_hz: Array, bandwidth_hz: Array) -> Array:
        """Credit of spread clocks whose lines stand apart in the receiver. (N, F) [dB]"""
        if not self.spread.any():
            return np.zeros(frequency_hz.shape)
        credit_db = spread_credit_db(
            1, self.spread[:, None] * frequency_hz, self.spread_hz[:, None], bandwidth_hz
        )
        apart = self.toggle_hz[:, None] > APART * bandwidth_hz
        return np.where(apart, np.nan_to_num(credit_db), 0.0)


def activity_of(facts: Sequence[NetFacts]) -> Activity:
    """Activity of nets as arrays.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.

    Returns
    -------
    Activity
        With (N,) arrays.
    """
    spreads = [spread_of(f) for f in facts]
    return Activity(
        toggle_hz=np.array([toggle_hz(f) for f in facts]),
        is_data=np.array([is_data(f) for f in facts], dtype=bool),
        pattern_bits=np.array([_pattern_bits(f) for f in facts]),
        burst_s=np.array([f.net.burst_length_s or np.nan for f in facts]),
        burst_hz=np.array([1 / (f.net.burst_period_s or np.nan) for f in facts]),
        spread=np.array([s.width if s else 0.0 for s in spreads]),
        spread_hz=np.array([s.rate_hz if s else 0.0 for s in spreads]),
    )


def _pattern_bits(facts: NetFacts) -> float:
    """Length of a pattern that repeats, infinite for random data. [bit]"""
    return float(facts.net.pattern_bits or np.inf) if facts.activity == "pattern" else np.inf
