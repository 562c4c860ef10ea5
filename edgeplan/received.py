"""What every receiver sees at the corners that hurt, for all candidates of a block of nets."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.between_bits import BitEffects, bit_effects
from edgeplan.candidates import Candidates, drive
from edgeplan.nets import Nets
from edgeplan.physics import waveforms
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees
from edgeplan.physics.situations import Situation, read_together
from edgeplan.physics.sources import Drive

Array = NDArray[Any]

ENGINE_ERROR_S = 1.3e-12  # largest error of an unguarded crossing against a four times finer run
GUARD_SHARE = 0.025  # what a threshold one per cent off moves a crossing by, in transitions


@dataclass(frozen=True, slots=True, kw_only=True)
class Received:
    """Readings of one corner, edge and state; every array is (R, C).

    Times count from the start of the source's edge. Levels are fractions of the
    swing, measured in the direction of the edge, so that a falling edge reads like
    a rising one: ``end_level`` (R, 1) is VIH when rising and 1 - VIL when falling.
    """

    corner: str
    edge: str
    state: str
    first_s: Array
    arrive_s: Array
    last_s: Array
    transition_s: Array
    overshoot: Array
    ringback: Array
    slope_min: Array
    level_after: Array
    residual: Array
    guarded: Array
    end_level: Array
    start_level: Array
    reference_s: Array
    interference_s: Array
    worst_level: Array

    @property
    def condition(self) -> tuple[str, str, str]:
        """Corner, edge and state."""
        return self.corner, self.edge, self.state

    @property
    def error_s(self) -> Array:
        """Stated error of a crossing. [s]"""
        return ENGINE_ERROR_S + np.where(self.guarded, GUARD_SHARE * self.transition_s, 0.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """A block of nets of one timing class with everything its checks may read."""

    nets: Nets
    candidates: Candidates
    received: tuple[Received, ...]
    strobe: Mapping[str, Mapping[tuple[str, str], float]]
    tolerance: float
    strobe_drawn: Mapping[str, Mapping[tuple[str, str], float]] = field(default_factory=dict)
    clock_parts: Mapping[str, tuple[str, frozenset[str]]] = field(default_factory=dict)

    @property
    def shape(self) -> tuple[int, int]:
        """Nets and candidates."""
        return len(self.nets), self.candidates.count

    def at(self, corner: str) -> Iterator[Received]:
        """Readings of one corner."""
        return (r for r in self.received if r.corner == corner)

    def per_receiver(self, values: Array) -> Array:
        """A value per net (N,) as a column over receivers (R, 1)."""
        return np.asarray(values)[self.nets.receiver_net][:, None]


def receive(
    nets: Nets,
    candidates: Candidates,
    tolerance: float,
    *,
    state: str = "run",
    corners: tuple[str, ...] = ("slow", "fast"),
) -> tuple[Received, ...]:
    """Run the engine over all candidates at both corners and edges.

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        N nets with R receivers, C candidates.
    tolerance : float
        Of the series resistor. [-]
    state : {"run", "boot"}
        Which state the candidates' settings belong to.
    corners : tuple of str
        Corners to run.

    Returns
    -------
    tuple of Received
        One per corner and edge; open-drain nets have the falling edge only.
    """
    edges = _directions(nets)
    run = edges[:1] if _symmetric(nets) else edges  # one run serves both edges
    asked = [(corner, direction) for corner in corners for direction in run]
    situations = [
        Situation(
            nets.trees[corner],
            drive(nets, candidates, corner, direction, tolerance),
            _levels(nets, corner),
            _observed_s(nets),
        )
        for corner, direction in asked
    ]
    found = {}
    for which, own, readings in zip(asked, situations, read_together(situations), strict=True):
        found[which] = readings, bit_effects(nets, own.trees, own.drive, own.levels, readings)
    return tuple(
        _received(
            nets,
            *found[corner, direction if direction in run else run[0]],
            (corner, direction, state),
            reference_crossing_s(nets, corner, direction),
        )
        for corner in corners
        for direction in edges
    )


def _observed_s(nets: Nets) -> Array:
    """How long after the crossing the level is looked at: one bit, or for ever. [s]"""
    return np.where(np.isfinite(nets.bit_s), nets.bit_s, np.inf)


def _received(
    nets: Nets,
    readings: waveforms.Readings,
    between: BitEffects,
    condition: tuple[str, str, str],
    reference_s: Array,
) -> Received:
    """Readings of one edge, in its own direction."""
    corner, edge, state = condition
    rising = edge == "rising"
    low, high = nets.threshold_low[corner][:, None], nets.threshold_high[corner][:, None]
    first, arrive, last = (
        ("rise_first_s", "rise_first_high_s", "rise_last_s")
        if rising
        else ("fall_first_s", "fall_first_low_s", "fall_last_s")
    )
    periodic = np.isfinite(between.transition_s)
    shared = ("overshoot", "level_after", "residual", "guarded")
    return Received(
        corner=corner,
        edge=edge,
        state=state,
        first_s=getattr(readings, first),
        arrive_s=getattr(readings, arrive),
        last_s=getattr(readings, last),
        transition_s=np.where(periodic, between.transition_s, readings.transition_s),
        slope_min=readings.slope_min_per_s,
        ringback=readings.rise_ringback if rising else readings.fall_ringback,
        start_level=low if rising else 1 - high,
        end_level=high if rising else 1 - low,
        reference_s=reference_s[nets.receiver_net][:, None],
        interference_s=between.delay_rising_s if rising else between.delay_falling_s,
        worst_level=between.worst_level,
        **{name: getattr(readings, name) for name in shared},
    )


def _directions(nets: Nets) -> tuple[str, ...]:
    """Edges a driver makes; an open drain drives the falling one only."""
    if nets.facts and all(f.timing == "open-drain" for f in nets.facts):
        return ("falling",)
    return ("rising", "falling")


def _symmetric(nets: Nets) -> bool:
    """Whether every driver of the block rises and falls alike, so that one run serves both."""
    return all(s.symmetric for f in nets.facts for s in f.settings)


def reference_crossing_s(nets: Nets, corner: str, direction: str) -> Array:
    """When each driver crosses the level of its own test load at the stated setting. [s]

    The same engine drives a capacitor (and a resistor to a voltage, where stated)
    instead of the line.  NaN where no test load is stated.  Worked out once per block.

    Parameters
    ----------
    nets : Nets
        N nets; the result is kept with them.
    corner : {"slow", "typical", "fast"}
        Of the driver and supply.
    direction : {"rising", "falling"}
        Which edge.

    Returns
    -------
    numpy.ndarray
        (N,), from the start of the source's edge. [s]
    """
    key = ("reference", corner, direction)
    if key not in nets.kept:
        nets.kept[key] = _reference_crossing_s(nets, corner, direction)
    return np.asarray(nets.kept[key])


def _reference_crossing_s(nets: Nets, corner: str, direction: str) -> Array:
    """Crossing of each driver's own test load. (N,) [s]"""
    count = len(nets)
    load_f, level, leak = np.full(count, np.nan), np.full(count, np.nan), np.zeros(count)
    setting = np.array([f.setting for f in nets.facts], dtype=int)
    supply = nets.swing_v[corner]
    pull = np.zeros(count)
    for i, f in enumerate(nets.facts):
        load = f.direction.test_load if f.direction else None
        if load is None or f.direction is None:
            continue
        load_f[i], level[i] = load.capacitance_f, load.level_v
        if load.resistance_ohm is not None:
            leak[i], pull[i] = 1 / load.resistance_ohm, load.to_v or 0.0
        stated = f.direction.clock_to_output.setting if f.direction.clock_to_output else None
        names = [s.setting for s in f.settings]
        if stated in names:
            setting[i] = names.index(stated)
    state = Candidates(
        setting=setting[:, None],
        series_ohm=np.zeros((count, 1)),
        pull_up_ohm=np.full((count, 1), np.nan),
        exists=np.isfinite(load_f)[:, None],
        cost=np.zeros((count, 1, 4), dtype=int),
        ramp_factor=np.ones((count, 1)),
    )
    source = drive(nets, state, corner, direction, 0.0)
    with np.errstate(invalid="ignore", divide="ignore"):
        start, end = _dc_levels(source.resistance_ohm[:, 0], leak, pull, supply, direction)
        fraction = (level - start) / (end - start)
    return _crossing_into_load(source, np.nan_to_num(load_f), leak, fraction)


def _dc_levels(
    resistance_ohm: Array, leak: Array, pull_v: Array, supply_v: Array, direction: str
) -> tuple[Array, Array]:
    """Levels before and after an edge into a resistor to a voltage. [V]"""
    share = 1 / (1 + resistance_ohm * leak)
    low = pull_v * (1 - share)
    high = supply_v * share + pull_v * (1 - share)
    return (low, high) if direction == "rising" else (high, low)


def _crossing_into_load(source: Drive, load_f: Array, leak: Array, fraction: Array) -> Array:
    """Crossing of one level into a lumped load, by the engine with a line of no length."""
    count = len(load_f)
    line = LineConstants(
        impedance_ohm=np.full(count, 50.0),
        delay_s_per_m=np.full(count, 6e-9),
        resistance_dc_ohm_per_m=np.zeros(count),
        skin_ohm_per_m_rthz=np.zeros(count),
        loss_tangent=np.zeros(count),
    )
    lumped = Trees(
        segment_offset=np.arange(count + 1),
        parent=np.full(count, -1),
        length_m=np.zeros(count),
        line=line,
        node_farad=load_f,
        node_siemens=leak,
        receiver_offset=np.arange(count + 1),
        receiver_segment=np.zeros(count, dtype=int),
        stub_length_m=np.zeros(count),
        stub_line=line,
    )
    inside = (fraction > 0) & (fraction < 1)
    level = np.where(inside, fraction, 0.5)
    levels = waveforms.Levels(
        transition_low=np.full(count, 0.1),
        transition_high=np.full(count, 0.9),
        threshold_low=level,
        threshold_high=level,
    )
    readings = waveforms.read(lumped, source, levels, np.full(count, np.inf))
    return np.where(inside, np.asarray(readings.rise_last_s)[:, 0], np.nan)


def _levels(nets: Nets, corner: str) -> waveforms.Levels:
    """Thresholds of one corner in the engine's order."""
    return waveforms.Levels(
        transition_low=nets.transition_low[corner],
        transition_high=nets.transition_high[corner],
        threshold_low=nets.threshold_low[corner],
        threshold_high=nets.threshold_high[corner],
    )
