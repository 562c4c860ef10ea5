"""The spectrum of each net before its edge: which frequencies are judged, and how strong."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.activity import Activity, activity_of
from edgeplan.emission_target import Target, band_edges_hz
from edgeplan.nets import NetFacts
from edgeplan.physics import detectors, spectra
from edgeplan.physics.detectors import Detector

Array = NDArray[Any]

MOST_LINES = 192  # more harmonics than this are thinned to odd ones in equal ratios
DATA_POINTS = 96
ABOVE = 1 + 1e-12  # 30 MHz is measured with the receiver of what lies above it


@dataclass(frozen=True, slots=True, kw_only=True)
class EmissionLines:
    """Judged frequencies of N nets, padded to F.

    ``per_swing`` is the peak amplitude per volt of swing with an edge of no length;
    ``toggle_hz`` the frequency of the clock that sets the envelope (half the bit rate
    of data); ``order`` is frequency over ``toggle_hz``. ``exists`` is False in the padding.
    ``discrete`` marks the single lines of data at multiples of the bit rate, which stand beside
    the noise of the same net. ``sine`` and ``cosine`` are the largest shares of the sum and of
    the difference of both edges, (N, F); 1 and 0 where nothing depends on them.
    """

    frequency_hz: Array
    order: Array
    exists: Array
    per_swing: Array
    activity: Activity
    discrete: Array
    sine: Array
    cosine: Array

    @property
    def toggle_hz(self) -> Array:
        """Frequency of the clock that sets each net's envelope. (N,) [Hz]"""
        return self.activity.toggle_hz

    @property
    def number(self) -> Array:
        """Order of lines that stand by themselves, NaN for the in-band power of data. (N, F)"""
        return np.where(self.activity.is_data[:, None] & ~self.discrete, np.nan, self.order)

    def detector_db(self, detector: Detector, bandwidth_hz: Array, limit_id: str = "") -> Array:
        """What a detector reads over the envelope: data, slow and spread clocks, bursts. (N, F)

        Parameters
        ----------
        detector : {"peak", "quasi-peak", "average", "rms"}
            Detector of a limit line.
        bandwidth_hz : numpy.ndarray
            Its bandwidth at every line, (N, F). [Hz]
        limit_id : str
            The limit line.

        Returns
        -------
        numpy.ndarray
            Level over the envelope; 0 for single lines that neither rest nor are spread. [dB]
        """
        read_db = self.activity.reading_db(detector, self.frequency_hz, bandwidth_hz, limit_id)
        if not self.discrete.any():
            return read_db
        single_db = self.activity.burst_db(detector, self.frequency_hz, limit_id)
        return np.where(self.discrete, single_db, read_db)


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
        for data and for clocks with very many harmonics; for data whose edges differ also its
        single lines at multiples of the bit rate.
    """
    activity = activity_of(facts)
    toggles, data = activity.toggle_hz, activity.is_data
    ladders = [
        _frequencies(t, target, data=bool(d), bits=float(b))
        for t, d, b in zip(toggles, data, activity.pattern_bits, strict=True)
    ]
    singles = [
        _single_lines(2 * t, target) if d and _edges_differ(f) else np.zeros(0)
        for t, d, f in zip(toggles, data, facts, strict=True)
    ]
    width = max((a.size + b.size for a, b in zip(ladders, singles, strict=True)), default=0)
    frequency = np.full((len(facts), max(width, 1)), 1e9)
    exists, discrete = np.zeros((2, *frequency.shape), dtype=bool)
    for i, (ladder, single) in enumerate(zip(ladders, singles, strict=True)):
        both = np.concatenate([ladder, single])
        rising = np.argsort(both, kind="stable")
        frequency[i, : both.size] = both[rising]
        exists[i, : both.size] = True
        discrete[i, : both.size] = rising >= ladder.size
    order = frequency / np.where(np.isfinite(toggles), toggles, 1.0)[:, None]
    share, sine, cosine = _edge_parts(facts, activity, order, discrete)
    return EmissionLines(
        frequency_hz=frequency,
        order=order,
        exists=exists,
        per_swing=2 / (np.pi * order) * share,
        activity=activity,
        discrete=discrete,
        sine=sine,
        cosine=cosine,
    )


def _frequencies(toggle: float, target: Target, *, data: bool, bits: float) -> Array:
    """Judged frequencies of one net. [Hz]"""
    low, high = target.lowest_hz, target.covered_to_hz
    if not np.isfinite(toggle):
        return np.zeros(0)
    if data:
        spacing = 2 * toggle / bits
        if high - low < MOST_LINES * spacing:  # a short pattern: every line
            return np.arange(np.ceil(low / spacing - 1e-9), high / spacing + 1e-9) * spacing
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


def _edges_differ(facts: NetFacts) -> bool:
    """Whether data of this net have single lines: edges that differ in length or are skewed.

    Open-drain outputs are left out: their rise is that of the pull-up, and their rates are so
    low that the noise of the data is above.
    """
    if facts.timing == "open-drain":
        return False
    skewed = facts.interface.edge_skew_s > 0
    return skewed or not all(setting.equal_edges for setting in facts.settings)


def _single_lines(rate_bps: float, target: Target) -> Array:
    """Multiples of a bit rate that stand apart in the receiver, thinned in equal ratios. [Hz]"""
    low, high = target.lowest_hz, target.covered_to_hz
    if not np.isfinite(rate_bps) or high < rate_bps:
        return np.zeros(0)
    first, last = max(np.ceil(low / rate_bps - 1e-9), 1.0), np.floor(high / rate_bps + 1e-9)
    multiple = np.arange(first, min(last, first + DATA_POINTS) + 1)
    if last - first > DATA_POINTS:
        points = np.concatenate([np.geomspace(low, high, DATA_POINTS), band_edges_hz(target)])
        multiple = np.unique(np.clip(np.round(points / rate_bps), first, last))
    lines = multiple * rate_bps
    receiver_hz = detectors.impulse_bandwidth_hz(detectors.bandwidth_hz(lines * ABOVE))
    return np.asarray(lines[~(rate_bps <= receiver_hz)])


def _edge_parts(
    facts: Sequence[NetFacts], activity: Activity, order: Array, discrete: Array
) -> tuple[Array, Array, Array]:
    """Share of the envelope each line has before its edges, and sine and cosine. (N, F)

    Of a driver whose states differ between rising and falling the duty counts with the edges
    of each candidate, through sine and cosine. A skew of the edges is a tolerance of the duty.
    """
    duty = np.array([f.interface.duty for f in facts])[:, None]
    tolerance = np.array([f.interface.duty_tolerance for f in facts])[:, None]
    skew_s = np.array([f.interface.edge_skew_s for f in facts])[:, None]
    toggle = np.nan_to_num(activity.toggle_hz)[:, None]
    whole = np.maximum(np.round(order), 1.0)
    parts = spectra.edge_shares(whole, duty, tolerance + skew_s * toggle)
    data = activity.is_data[:, None]
    unequal = np.array([not all(s.symmetric for s in f.settings) for f in facts])[:, None]
    pulled = np.array([f.timing == "open-drain" for f in facts])[:, None]  # a fast edge, a slow one
    share = np.where(data | unequal | pulled, 1.0, parts.sine)
    half = 0.5 * discrete  # V/(4 pi m) times the difference of both edges, m = n/2
    skewed = np.sin(np.pi * np.minimum(skew_s * order * toggle, 0.5))
    sine = np.where(discrete, skewed, np.where(data | ~unequal, 1.0, parts.sine))
    cosine = np.where(data | ~unequal, 0.0, parts.cosine)
    return np.where(discrete, half, share), sine, cosine
