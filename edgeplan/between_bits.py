"""What earlier edges do to a later one: interference between bits, clocks that never settle."""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import fft

from edgeplan.nets import Nets
from edgeplan.physics import waveforms
from edgeplan.physics.crossings import cubic_time, last_reach
from edgeplan.physics.interference import peak_distortion, worst_edge
from edgeplan.physics.network import Trees
from edgeplan.physics.sources import Drive

Array = NDArray[Any]

SETTLED = 1e-3  # of the swing: what is left after one bit counts from here on
OVERLAP = 0.5  # of a bit: an edge as long as this may meet the next one before it is done
SAMPLES_PER_BIT = 32
STEPS_PER_SAMPLE = 5  # of the engine, so that a ramp of a sixteenth of a bit has ten steps
BITS = 12  # length of the pulse that is folded
SHORTEST_OF_PERIOD = 1000  # a shorter ramp would have to ring hundreds of round trips to matter
SAMPLES_PER_PERIOD = 2048  # of a steady state, so that its ends are cut to a thousandth
ROWS = 512  # waveforms held at once


@dataclass(frozen=True, slots=True, kw_only=True)
class BitEffects:
    """Later crossing than that of an isolated edge, worst level at the end of a bit. (R, C)

    ``transition_s`` is NaN except for clocks in a periodic state that differs from an
    isolated edge.
    """

    delay_rising_s: Array
    delay_falling_s: Array
    worst_level: Array
    transition_s: Array


def bit_effects(
    nets: Nets, trees: Trees, source: Drive, levels: waveforms.Levels, readings: waveforms.Readings
) -> BitEffects:
    """Effects of earlier edges where an edge has not settled within one bit.

    Parameters
    ----------
    nets : Nets
        N nets with R receivers.
    trees : Trees
        Their trees at the same corner as the source.
    source : Drive
        Candidates (N, C) at one corner.
    levels : Levels
        Thresholds (R,).
    readings : Readings
        Of isolated edges, (R, C).

    Returns
    -------
    BitEffects
        Zero delay and the isolated level where an edge settles in time. [s], [-]
    """
    shape = readings.level_after.shape
    effects = BitEffects(
        delay_rising_s=np.zeros(shape),
        delay_falling_s=np.zeros(shape),
        worst_level=np.array(readings.level_after, dtype=float),
        transition_s=np.full(shape, np.nan),
    )
    span = np.asarray(levels.transition_high) - np.asarray(levels.transition_low)
    bit_s = nets.bit_s[nets.receiver_net][:, None]
    with np.errstate(invalid="ignore"):
        unsettled = readings.residual > SETTLED
        unsettled |= readings.transition_s > OVERLAP * bit_s * span[:, None]
    unsettled &= np.isfinite(nets.bit_s)[nets.receiver_net][:, None]
    clock = np.array([f.timing == "clock" for f in nets.facts])[nets.receiver_net][:, None]
    if np.any(unsettled & ~clock):
        _data(nets, trees, source, levels, unsettled & ~clock, effects)
    if np.any(unsettled & clock):
        _clocks(nets, trees, source, levels, readings, unsettled & clock, effects)
    return effects


def _chosen(nets: Nets, source: Drive, rows: Array) -> tuple[Array, Drive]:
    """Nets and candidates that have an unsettled row at any of their receivers."""
    wanted = np.zeros(source.exists.shape, dtype=bool)
    np.logical_or.at(wanted, nets.receiver_net, rows)
    index = np.flatnonzero((wanted & source.exists).any(axis=1))
    picked = source.take(index)
    return index, replace(picked, exists=picked.exists & wanted[index])


def _place(nets: Nets, index: Array, found: waveforms.StepRows) -> tuple[Array, Array]:
    """Receiver row and candidate of every waveform in the tables of the block."""
    counts = np.diff(nets.first_receiver)[index]
    start = np.concatenate([[0], np.cumsum(counts)])[:-1]
    receiver = nets.first_receiver[index][found.net] + found.receiver - start[found.net]
    return receiver, found.candidate


def _data(
    nets: Nets,
    trees: Trees,
    source: Drive,
    levels: waveforms.Levels,
    rows: Array,
    effects: BitEffects,
) -> None:
    """Worst pattern of earlier bits, by peak distortion of the step response."""
    index, drive = _chosen(nets, source, rows)
    for few in _parts(drive, np.diff(nets.first_receiver)[index]):
        own = index[few]
        step_s = nets.bit_s[own] / (SAMPLES_PER_BIT * STEPS_PER_SAMPLE)
        found = waveforms.step_rows(
            trees.take(own),
            _not_faster(drive.take(few), 10 * step_s),
            duration_s=BITS * nets.bit_s[own],
            step_s=step_s,
        )
        _fold(nets, own, found, levels, effects)


def _parts(drive: Drive, receivers: Array) -> Iterator[Array]:
    """Nets in groups of about so many waveforms as are held at once."""
    rows = drive.exists.sum(axis=1) * receivers
    group = np.cumsum(rows) // ROWS
    return (np.flatnonzero(group == g) for g in np.unique(group))


def _not_faster(drive: Drive, shortest_s: Array) -> Drive:
    """The same sources with ramps no shorter than the steps can carry.

    What is left after a whole bit does not depend on an edge that is a sixteenth of it.
    """
    return replace(drive, ramp_s=np.maximum(drive.ramp_s, shortest_s[:, None]))


def _fold(
    nets: Nets,
    index: Array,
    found: waveforms.StepRows,
    levels: waveforms.Levels,
    effects: BitEffects,
) -> None:
    """Worst bits of the waveforms found, written into the tables."""
    receiver, candidate = _place(nets, index, found)
    per_bit = SAMPLES_PER_BIT * STEPS_PER_SAMPLE
    step = found.level[:, : BITS * per_bit]
    worst = worst_edge(step, per_bit)
    step_s = found.time_s[:, 1]
    low = np.asarray(levels.threshold_low)[receiver]
    high = np.asarray(levels.threshold_high)[receiver]
    effects.delay_rising_s[receiver, candidate] = step_s * _later(step, worst, high)
    effects.delay_falling_s[receiver, candidate] = step_s * _later(step, worst, 1 - low)
    one, zero, _ = peak_distortion(step[:, ::STEPS_PER_SAMPLE], SAMPLES_PER_BIT)
    level = np.minimum(one.max(axis=1), (1 - zero).max(axis=1))
    effects.worst_level[receiver, candidate] = level


def _later(step: Array, worst: Array, threshold: Array) -> Array:
    """Steps by which the worst edge crosses for the last time after the isolated one. (M,)"""
    row = np.arange(len(step))
    alone, crowded = (
        cubic_time(level, row, last_reach(level, threshold), threshold) for level in (step, worst)
    )
    later = np.maximum(crowded - alone, 0.0)
    never = float(worst.shape[1])  # the whole stretch looked at: no pattern got there
    return np.where(np.isnan(crowded) & np.isfinite(alone), never, later)


def _last_crossing(time_s: Array, level: Array, threshold: Array) -> Array:
    """Latest time within the bit at which the level is still below its threshold. (M,) [s]"""
    below = level < threshold[:, None]
    width = level.shape[1]
    last = np.where(below.any(axis=1), width - 1 - np.argmax(below[:, ::-1], axis=1), -1)
    rows = np.arange(len(level))
    here, after = np.maximum(last, 0), np.minimum(last + 1, width - 1)
    rise = level[rows, after] - level[rows, here]
    share = (threshold - level[rows, here]) / np.where(rise == 0, 1, rise)
    step = time_s[rows, after] - time_s[rows, here]
    crossing = time_s[rows, here] + np.clip(share, 0, 1) * step
    never = last == width - 1
    return np.where(never, np.inf, np.where(last < 0, time_s[:, 0], crossing))


def _clocks(
    nets: Nets,
    trees: Trees,
    source: Drive,
    levels: waveforms.Levels,
    readings: waveforms.Readings,
    rows: Array,
    effects: BitEffects,
) -> None:
    """Periodic steady state: crossings, transition and level of the first half of the period."""
    index, drive = _chosen(nets, source, rows)
    period = np.array([1 / (nets.facts[i].net.clock_hz or np.nan) for i in index])
    long_enough = drive.candidate_ramp_s() * SHORTEST_OF_PERIOD > period[:, None]
    drive = replace(drive, exists=drive.exists & long_enough)
    some = np.flatnonzero(drive.exists.any(axis=1))
    index, drive, period = index[some], drive.take(some), period[some]
    ramp = np.where(drive.exists, drive.candidate_ramp_s(), np.inf).min(axis=1)
    size = np.ceil(np.log2(period / ramp))
    for few in (np.flatnonzero(size == s) for s in np.unique(size)):
        _steady_state(nets, trees, index[few], drive.take(few), levels, readings, effects)


def _steady_state(
    nets: Nets,
    trees: Trees,
    index: Array,
    drive: Drive,
    levels: waveforms.Levels,
    readings: waveforms.Readings,
    effects: BitEffects,
) -> None:
    """Periodic steady state of clocks whose ramps are alike in relation to their period."""
    facts = [nets.facts[i] for i in index]
    period = np.array([1 / (f.net.clock_hz or np.nan) for f in facts])
    duty = np.array([f.interface.duty for f in facts])
    found = _finer(waveforms.periodic_rows(trees.take(index), drive, period, duty))
    receiver, candidate = _place(nets, index, found)
    low = np.asarray(levels.threshold_low)[receiver]
    high = np.asarray(levels.threshold_high)[receiver]
    duty_row = duty[found.net]
    arrival = _delays_s(nets)[receiver]
    falling = _falling(found.level, duty_row)
    for name, level, threshold, isolated, share in (
        ("delay_rising_s", found.level, high, readings.rise_last_s, duty_row),
        ("delay_falling_s", falling, 1 - low, readings.fall_last_s, 1 - duty_row),
    ):
        time, half = _while_driven(found.time_s, level, arrival, share)
        crossing = _last_crossing(time, half, threshold)
        getattr(effects, name)[receiver, candidate] = np.maximum(
            crossing - isolated[receiver, candidate], 0.0
        )
        worst = np.minimum(effects.worst_level[receiver, candidate], half.max(axis=1))
        effects.worst_level[receiver, candidate] = worst
    start = np.asarray(levels.transition_low)[receiver]
    stop = np.asarray(levels.transition_high)[receiver]
    time, half = _while_driven(found.time_s, found.level, arrival, duty_row)
    reached = half.max(axis=1) >= stop
    spread = _last_crossing(time, half, stop) - _last_crossing(time, half, start)
    # An edge that does not reach the level takes at least until it is driven again.
    effects.transition_s[receiver, candidate] = np.where(reached, spread, period[found.net])


def _finer(rows: waveforms.StepRows) -> waveforms.StepRows:
    """The same periods on more samples: exact, since a period is the sum of its harmonics."""
    count = rows.level.shape[1]
    if count >= SAMPLES_PER_PERIOD:
        return rows
    ratio = SAMPLES_PER_PERIOD / count
    level = ratio * fft.irfft(fft.rfft(rows.level, axis=1), SAMPLES_PER_PERIOD, axis=1)
    time = np.arange(SAMPLES_PER_PERIOD) * rows.time_s[:, 1:2] / ratio
    return rows._replace(time_s=time, level=level)


def _delays_s(nets: Nets) -> Array:
    """Delay from the driver to every receiver. (R,) [s]"""
    paths = [f.path for f in nets.facts]
    return np.array([path.delay_s(piece) for path in paths for piece in path.receiver_piece])


def _falling(level: Array, duty: Array) -> Array:
    """One period seen from its falling edge, upside down, so that it reads like a rising one."""
    shift = np.round(duty * level.shape[1]).astype(int)
    columns = (np.arange(level.shape[1])[None, :] + shift[:, None]) % level.shape[1]
    return 1 - np.take_along_axis(level, columns, axis=1)


def _while_driven(
    time_s: Array, level: Array, arrival_s: Array, share: Array
) -> tuple[Array, Array]:
    """From the arrival of an edge to that of the next, a share of the period later. (M, n)

    The last sample is held where another row has the longer share.
    """
    width = np.floor(share * level.shape[1]).astype(int)
    begin = np.floor(arrival_s / time_s[:, 1]).astype(int)
    along = np.minimum(np.arange(width.max())[None, :], width[:, None] - 1)
    columns = begin[:, None] + along
    level = np.take_along_axis(level, columns % level.shape[1], axis=1)
    return columns * time_s[:, 1:2], level
