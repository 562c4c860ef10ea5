"""Waveforms and spectra of one net as drawn and as proposed, for pictures."""

from dataclasses import replace
from typing import Any, Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from edgeplan.activity import is_data
from edgeplan.candidates import Candidates, drive, setting_table
from edgeplan.draft import Draft
from edgeplan.emission_target import Target
from edgeplan.nets import Nets
from edgeplan.physics import waveforms
from edgeplan.physics.radiation import level_dbuv_per_m
from edgeplan.physics.spectra import corner_frequencies_hz
from edgeplan.radiated import Passive, source_levels
from edgeplan.results import Pictures, Spectrum, Trace
from edgeplan.scoring import Block
from edgeplan.source_edges import edge_shares

Array = NDArray[Any]

SAMPLES = 240
STEPS_PER_RAMP = 40  # so that a drawn curve shows no corners
When = Literal["now", "after"]


def draw(block: Block, row: int, draft: Draft) -> Pictures:
    """Received waveforms at both corners and the judged spectrum, now and after.

    Parameters
    ----------
    block : Block
        The block that holds the net.
    row : int
        Its row there.
    draft : Draft
        The run.

    Returns
    -------
    Pictures
        Waveforms [s], [V] and levels [dBuV/m].
    """
    nets = block.nets.take([row])
    candidates = block.candidates.take(np.array([row]))
    index = int(block.index[row])
    changes: list[tuple[When, Candidates]] = [
        ("now", candidates.state(draft.now.chosen[[index]])),
        ("after", candidates.state(draft.after.chosen[[index]])),
    ]
    if draft.now.chosen[index] == draft.after.chosen[index]:
        changes = changes[:1]
    bench = draft.bench_after
    traces: list[Trace] = []
    spectra: list[Spectrum] = []
    passive = bench.radiation.passive(nets)
    drawn = _source(nets, changes[0][1], passive, bench.tolerance)
    for when, state in changes:
        traces += _traces(nets, state, bench.tolerance, when)
        source = _source(nets, state, passive, bench.tolerance)
        if np.isfinite(source.levels).all() and passive.lines.exists[0].any():
            found = _spectrum(nets, state, passive, source.levels, bench.radiation.target, when)
            spectra.append(found if when == "now" else _with_change(found, passive, drawn, source))
    supply = nets.swing_v["typical"][0]
    thresholds = {
        "VIL": float(nets.threshold_low["typical"][0] * supply),
        "VIH": float(nets.threshold_high["typical"][0] * supply),
    }
    return Pictures(waveforms=traces, spectra=spectra, thresholds_v=thresholds)


def _ramp_s(nets: Nets, state: Candidates, direction: str) -> float:
    """Ramp of one edge at the fast corner. [s]"""
    table = setting_table(nets, "trapezoid_s", "fast", direction)
    return float(table[0, state.setting[0, 0]] * state.ramp_factor[0, 0])


class _Source(NamedTuple):
    """Volts over D of one state at every line, and the share of its edge in them. (F,)"""

    levels: Array
    edge: Array


def _source(nets: Nets, state: Candidates, passive: Passive, tolerance: float) -> _Source:
    """Source levels of one state and the share of its edges in them, fast corner."""
    return _Source(
        levels=source_levels(nets, state, passive, tolerance)[0, 0],
        edge=edge_shares(nets, state, passive.lines)[0, 0],
    )


def _with_change(spectrum: Spectrum, passive: Passive, drawn: _Source, own: _Source) -> Spectrum:
    """The spectrum with its change against the net as drawn, by edge and by current. [dB]"""
    shown = passive.lines.exists[0] & (passive.over_budget[0] > 0)
    weaker = np.minimum(drawn.levels, own.levels)
    absent = weaker[shown] <= 1e-6 * drawn.levels.max()  # even lines of a square wave
    with np.errstate(divide="ignore", invalid="ignore"):
        whole = np.where(absent, 0.0, 20 * np.log10(own.levels / drawn.levels)[shown])
        edge = np.where(absent, 0.0, 20 * np.log10(own.edge / drawn.edge)[shown])
    return replace(
        spectrum,
        change_by_edge_db=[round(float(v), 3) for v in edge],
        change_by_current_db=[round(float(v), 3) for v in whole - edge],
    )


def _faster_edge(nets: Nets, state: Candidates) -> str:
    """Edge with the shorter ramp at the fast corner; rising where both are alike."""
    if nets.facts[0].timing == "open-drain":
        return "falling"
    rise_s, fall_s = (_ramp_s(nets, state, direction) for direction in ("rising", "falling"))
    return "falling" if fall_s < rise_s else "rising"


def _traces(nets: Nets, state: Candidates, tolerance: float, when: When) -> list[Trace]:
    """Edges at every receiver, slow and fast corner; of two unlike edges the faster one."""
    facts = nets.facts[0]
    direction = _faster_edge(nets, state)
    found = []
    for corner in ("slow", "fast"):
        source = drive(nets, state, corner, direction, tolerance)
        if not source.exists.any():
            continue
        window = _window_s(nets, source)
        fine_s = np.nanmin(source.candidate_ramp_s()) / STEPS_PER_RAMP
        rows = waveforms.step_rows(
            nets.trees[corner], source, duration_s=np.array([window]), step_s=np.array([fine_s])
        )
        keep = rows.time_s[0] <= window
        step = max(1, int(keep.sum() // SAMPLES))
        swing = nets.swing_v[corner][0]
        for k, level in enumerate(rows.level):
            volts = swing * (level if direction == "rising" else 1 - level)
            pins = facts.net.receiver_pin
            found.append(
                Trace(
                    receiver_pin=pins[k] if k < len(pins) else "",
                    corner=corner,
                    edge=direction,
                    state=when,
                    time_s=[float(t) for t in rows.time_s[k][keep][::step]],
                    volt=[float(v) for v in volts[keep][::step]],
                )
            )
    return found


def _window_s(nets: Nets, source: Any) -> float:
    """Time worth showing: the edge, eight line delays, never beyond two bits. [s]"""
    path = nets.facts[0].path
    delay = path.main_length_m * path.main_line.delay_s_per_m
    wanted = float(2 * source.candidate_ramp_s().max() + 8 * delay + 1e-9)
    bit = float(nets.bit_s[0])
    return min(wanted, max(2 * bit, 2e-9)) if np.isfinite(bit) else wanted


def _spectrum(
    nets: Nets, state: Candidates, passive: Passive, levels: Array, target: Target, when: When
) -> Spectrum:
    """Levels of every judged line against its limit."""
    facts, lines = nets.facts[0], passive.lines
    shown = lines.exists[0] & (passive.over_budget[0] > 0)
    ramp_s = min(_ramp_s(nets, state, direction) for direction in ("rising", "falling"))
    low, high = corner_frequencies_hz(facts.interface.duty, ramp_s, 1 / lines.toggle_hz[0])
    trace = levels * passive.trace[0]
    expected = levels * passive.cable_expected[0]
    up_to = levels * passive.cable_up_to[0]
    detector = passive.entries[int(passive.entry[0, int(np.argmax(shown))])][1]

    line_hz, line_db = _limit_line(target, detector)

    def decibels(field: Array) -> list[float]:
        with np.errstate(divide="ignore"):
            return [round(float(v), 3) for v in np.maximum(level_dbuv_per_m(field), -99.0)[shown]]

    return Spectrum(
        state=when,
        detector=detector,
        frequency_hz=[float(f) for f in lines.frequency_hz[0][shown]],
        order=[
            0 if is_data(facts) and not single else round(float(n))
            for n, single in zip(lines.order[0][shown], lines.discrete[0][shown], strict=True)
        ],
        expected_dbuv_per_m=decibels(np.hypot(trace, expected)),
        up_to_dbuv_per_m=decibels(np.hypot(trace, up_to)),
        trace_dbuv_per_m=decibels(trace),
        cable_dbuv_per_m=decibels(expected),
        limit_dbuv_per_m=[
            float(v) for v in (passive.budget_dbuv_per_m[0] + target.margin_db)[shown]
        ],
        limit_line_hz=line_hz,
        limit_line_dbuv_per_m=line_db,
        corner_low_hz=float(low),
        corner_high_hz=float(high),
    )


def _limit_line(target: Target, detector: str) -> tuple[list[float], list[float]]:
    """Points of the limit line of one detector inside the judged range. [Hz], [dBuV/m]"""
    bands = [b for line in target.lines for b in line.bands if b.detector == detector]
    points = [
        (float(f), float(level))
        for b in bands
        for f, level in zip(b.frequency_hz, b.level_dbuv_per_m, strict=True)
        if f <= target.highest_hz
    ]
    points.sort(key=lambda point: point[0])
    return [f for f, _ in points], [level for _, level in points]
