"""The spectrum of each net before its edge: which frequencies are judged, and how strong."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.emission_target import Target, band_edges_hz
from edgeplan.nets import NetFacts
from edgeplan.physics import data_spectra, spectra
from edgeplan.physics.detectors import Detector

Array = NDArray[Any]

MOST_LINES = 192  # more harmonics than this are thinned to odd ones in equal ratios
DATA_POINTS = 96


@dataclass(frozen=True, slots=True, kw_only=True)
class EmissionLines:
    """Judged frequencies of N nets, padded to F.

    ``per_swing`` is the peak amplitude per volt of swing with an edge of no length;
    ``toggle_hz`` the frequency of the clock that sets the envelope (half the bit rate
    of data); ``order`` is frequency over ``toggle_hz``. ``exists`` is False in the padding.
    """

    frequency_hz: Array
    order: Array
    exists: Array
    per_swing: Array
    toggle_hz: Array
    is_data: Array

    def detector_db(self, detector: Detector, bandwidth_hz: Array) -> Array:
        """What a detector adds to the envelope of data and of clocks below its bandwidth. (N, F)

        Parameters
        ----------
        detector : {"peak", "quasi-peak", "average", "rms"}
            Detector of a limit line.
        bandwidth_hz : numpy.ndarray
            Its bandwidth at every line, (N, F). [Hz]

        Returns
        -------
        numpy.ndarray
            Level over the envelope; 0 for a clock whose lines stand apart. [dB]
        """
        toggle = self.toggle_hz[:, None]
        with np.errstate(invalid="ignore", divide="ignore"):
            data = data_spectra.random_data_db(2 * toggle, bandwidth_hz, detector)
            slow = data_spectra.impulse_db(2 * toggle, bandwidth_hz, detector)
        clock = np.maximum(slow, 0.0)
        return np.where(self.is_data[:, None], data, clock)


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
    """Whether the net carries random data; a repeating pattern is judged as a clock.

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    bool
        True where its spectrum is dense and a detector's bandwidth counts.
    """
    return facts.activity == "random" or (facts.activity is None and bool(facts.net.data_bps))


def lines_of(facts: Sequence[NetFacts], target: Target) -> EmissionLines:
    """Judged frequencies and amplitudes of every net.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.
    target : Target
        Range and steps of the limit lines.

    Returns
    -------
    EmissionLines
        Exact harmonics of clocks; points in equal ratios, and every step of a limit line,
        for data and for clocks with very many harmonics.
    """
    toggles = np.array([toggle_hz(f) for f in facts])
    data = np.array([is_data(f) for f in facts])
    ladders = [_frequencies(t, target, data=bool(d)) for t, d in zip(toggles, data, strict=True)]
    width = max((len(ladder) for ladder in ladders), default=0)
    frequency = np.full((len(facts), max(width, 1)), 1e9)
    exists = np.zeros(frequency.shape, dtype=bool)
    for i, ladder in enumerate(ladders):
        frequency[i, : len(ladder)] = ladder
        exists[i, : len(ladder)] = True
    order = frequency / np.where(np.isfinite(toggles), toggles, 1.0)[:, None]
    return EmissionLines(
        frequency_hz=frequency,
        order=order,
        exists=exists,
        per_swing=2 / (np.pi * order) * _duty_shares(facts, order, data),
        toggle_hz=toggles,
        is_data=data,
    )


def _frequencies(toggle: float, target: Target, *, data: bool) -> Array:
    """Judged frequencies of one net. [Hz]"""
    low, high = target.lowest_hz, target.covered_to_hz
    if not np.isfinite(toggle):
        return np.zeros(0)
    if data:
        points = np.geomspace(low, high, DATA_POINTS)
        return np.unique(np.concatenate([points, band_edges_hz(target)]))
    first, last = int(np.ceil(low / toggle - 1e-9)), int(np.floor(high / toggle + 1e-9))
    if last < first:
        return np.zeros(0)
    if last - first < MOST_LINES:
        return np.arange(max(first, 1), last + 1) * toggle
    points = np.concatenate([np.geomspace(low, high, MOST_LINES), band_edges_hz(target)])
    odd = 2 * np.round((points / toggle - 1) / 2) + 1
    odd = np.unique(np.where(odd * toggle > high, odd - 2, odd))
    return odd[odd * toggle >= low * (1 - 1e-9)] * toggle


def _duty_shares(facts: Sequence[NetFacts], order: Array, data: Array) -> Array:
    """Share of the odd-harmonic envelope each line has; 1 for data. (N, F)

    Even harmonics of a driver whose edges differ are not credited with the duty: they come
    from the difference of its edges.
    """
    duty = np.array([f.interface.duty for f in facts])[:, None]
    tolerance = np.array([f.interface.duty_tolerance for f in facts])[:, None]
    whole = np.maximum(np.round(order), 1.0)
    share = spectra.duty_factor(whole, duty, tolerance)
    unequal = np.array([not all(s.symmetric for s in f.settings) for f in facts])
    return np.where((data | unequal)[:, None], 1.0, share)
