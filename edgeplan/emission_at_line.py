"""Emission of one net at the line that binds, and what one change alone would do there."""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import reduce
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, allowed_values, drawn_ohm
from edgeplan.draft import Draft
from edgeplan.emission.inner_layer import BREAKOUT_M
from edgeplan.evaluate import boot_candidates
from edgeplan.net_fields import STRAIGHT, kind_of
from edgeplan.nets import NetFacts, Nets, build
from edgeplan.radiated import NONE, Radiation, source_levels
from edgeplan.results import Check, EmissionAtLine, MechanismAtLine, NetResult, WhatIf
from edgeplan.routing import Path
from edgeplan.scoring import Block
from edgeplan.stack import Line, printed_line
from edgeplan.texts import text_frequency_hz, text_resistance_ohm
from edgeplan.words import change_words

Array = NDArray[Any]
When = Literal["now", "after"]
Kind = Literal["proposal", "resistor", "setting", "cable filter", "inner layer"]
Parity = Literal["odd", "even", "in-band power"]

FILTER_STEPS_DB = (1.0, 3.0, 6.0, 10.0)
NEEDED_STEP_DB = 0.5  # what a net needs is rounded up to this


@dataclass(frozen=True, slots=True, kw_only=True)
class _Case:
    """One net with one candidate: all that its emission depends on.

    ``settings`` and ``values_ohm`` are what else a person may choose; ``with_filter`` says that
    the net is judged with the filter assumed on undeclared cables, as it is over budget even so.
    """

    nets: Nets
    state: Candidates
    radiation: Radiation
    tolerance: float
    settings: tuple[int, ...]
    values_ohm: tuple[float, ...]
    with_filter: bool = False

    @property
    def facts(self) -> NetFacts:
        """The net."""
        return self.nets.facts[0]

    @property
    def setting(self) -> int:
        """Its setting."""
        return int(self.state.setting[0, 0])

    @property
    def value_ohm(self) -> float:
        """Its series resistor, the pull-up of an open-drain net. [ohm]"""
        pull_up = self.facts.timing == "open-drain"
        return float((self.state.pull_up_ohm if pull_up else self.state.series_ohm)[0, 0])


@dataclass(frozen=True, slots=True, kw_only=True)
class _Levels:
    """Level over budget of one case, whole and by the trace alone, at every judged line. (F,)"""

    frequency_hz: Array
    order: Array
    over: Array
    trace: Array
    budget_dbuv_per_m: Array

    @property
    def worst(self) -> int:
        """The line that binds."""
        return int(np.argmax(self.over))

    def excess_db(self, line: int) -> float:
        """Level over budget at one line. [dB]"""
        with np.errstate(divide="ignore"):
            return float(20 * np.log10(self.over[line]))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Change:
    """One change: of what kind, in words, the case with it, and what was assumed."""

    kind: Kind
    text: str
    case: _Case
    assumption: str = ""


def added(net: NetResult, block: Block, row: int, draft: Draft) -> NetResult:
    """A net's record with its emission at the line that binds, as drawn and as proposed.

    Every what-if is a run of the emission check for this one net: no level is scaled from
    another one.

    Parameters
    ----------
    net : NetResult
        Its record so far, with its emission checks.
    block : Block
        The block that holds the net.
    row : int
        Its row there.
    draft : Draft
        The run.

    Returns
    -------
    NetResult
        ``emission_at_line`` is empty where the net's emission is not known. [dBuV/m], [dB]
    """
    drawn, proposed = (_case(block, row, int(k), draft) for k in (net.candidate_now, net.proposal))
    wish = None
    if net.proposal != net.candidate_now:
        wish = _Change(kind="proposal", text=f"the proposal: {net.proposal_text}", case=proposed)
    found = [_at_line(net, drawn, "now", wish)]
    if wish is not None:
        found.append(_at_line(net, proposed, "after", None))
    return replace(net, emission_at_line=[entry for entry in found if entry is not None])


def _case(block: Block, row: int, candidate: int, draft: Draft) -> _Case:
    """One net of a block, alone, with one of its candidates."""
    listed = block.candidates.take(np.array([row]))
    exists = listed.exists[0]
    facts = block.nets.facts[row]
    values = allowed_values(draft.board.file.resistors)
    if facts.timing == "open-drain":
        values = np.unique(listed.pull_up_ohm[0][exists])
    return _Case(
        nets=block.nets.take([row]),
        state=listed.state(np.array([candidate])),
        radiation=draft.bench_after.radiation,
        tolerance=draft.bench_after.tolerance,
        settings=tuple(map(int, np.unique(listed.setting[0][exists]))),
        values_ohm=tuple(map(float, values)),
    )


def _at_line(
    net: NetResult, case: _Case, when: When, wish: _Change | None
) -> EmissionAtLine | None:
    """One candidate of a net at its binding line; None where its level is not known."""
    check = _binding(net, net.candidate_now if when == "now" else net.proposal)
    case = _as_judged(case)
    levels = _levels(case)
    if check is None or check.frequency_hz is None or levels is None:
        return None
    line = int(np.argmin(np.abs(levels.frequency_hz - check.frequency_hz)))
    budget = float(levels.budget_dbuv_per_m[line])
    level = budget + levels.excess_db(line)
    changes, notes = _changes(case, levels, wish)
    target = case.radiation.target
    return EmissionAtLine(
        state=when,
        frequency_hz=check.frequency_hz,
        order=check.order,
        parity=_parity(check.order),
        detector=check.detector,
        driver_state=check.condition.state,
        limit_dbuv_per_m=budget + target.margin_db,
        budget_dbuv_per_m=budget,
        level_dbuv_per_m=level,
        low_dbuv_per_m=None if check.error is None else level + check.error.low,
        high_dbuv_per_m=None if check.error is None else level + check.error.high,
        mechanisms=_mechanisms(check, worst_case=target.statistic == "worst-case"),
        what_if=[_what_if(change, levels, line) for change in changes],
        notes=notes,
    )


def _as_judged(case: _Case) -> _Case:
    """The case with the filter assumed on undeclared cables, where it is over budget even so."""
    if case.radiation.passive(case.nets).filtered is None:
        return case
    filtered = replace(case, with_filter=True)
    levels = _levels(filtered)
    return filtered if levels is not None and levels.over.max() > 1 else case


def _binding(net: NetResult, candidate: int) -> Check | None:
    """The emission check of one candidate with the least margin, over run and boot."""
    own = [c for c in net.checks if c.check == "emission" and c.candidate == candidate]
    known = [c for c in own if c.frequency_hz is not None]
    return min(known, key=lambda c: -np.inf if c.margin is None else c.margin, default=None)


def _parity(order: int | None) -> Parity:
    """Odd or even harmonic; data have none."""
    if order is None:
        return "in-band power"
    return "odd" if order % 2 else "even"


def _mechanisms(check: Check, *, worst_case: bool) -> list[MechanismAtLine]:
    """Each mechanism of a check with its error band and its share of the judged power."""
    judged = [p.up_to_dbuv_per_m if worst_case else p.expected_dbuv_per_m for p in check.parts]
    power = 10 ** (np.array(judged) / 10)
    return [
        MechanismAtLine(
            mechanism=part.mechanism,
            expected_dbuv_per_m=part.expected_dbuv_per_m,
            up_to_dbuv_per_m=part.up_to_dbuv_per_m,
            low_dbuv_per_m=part.expected_dbuv_per_m + part.error_db.low,
            high_dbuv_per_m=part.expected_dbuv_per_m + part.error_db.high,
            power_share=float(share),
        )
        for part, share in zip(check.parts, power / power.sum(), strict=True)
    ]


def _levels(case: _Case) -> _Levels | None:
    """Level over budget of a case, the worse of run and boot; None where it is not known."""
    passive = case.radiation.passive(case.nets)
    states = [case.state, boot_candidates(case.nets, case.state)]
    volts = reduce(
        np.maximum,
        [
            source_levels(case.nets, state, passive, case.tolerance)[0, 0]
            for state in states
            if state is not None
        ],
    )
    per_volt = passive.over_budget if not case.with_filter else passive.filtered
    assert per_volt is not None  # noqa: S101 - a case has the filter only where one was assumed
    over = np.where(passive.lines.exists[0], volts * per_volt[0], 0.0)
    if not np.isfinite(over).all() or over.max() <= 0:
        return None
    budget = 10 ** (passive.budget_dbuv_per_m[0] / 20) * 1e-6
    return _Levels(
        frequency_hz=passive.lines.frequency_hz[0],
        order=np.where(passive.lines.is_data[0], np.nan, passive.lines.order[0]),
        over=over,
        trace=volts * passive.trace[0] / budget,
        budget_dbuv_per_m=passive.budget_dbuv_per_m[0],
    )


def _what_if(change: _Change, before: _Levels, line: int) -> WhatIf:
    """What one change does at a line, and which line binds with it."""
    after = _levels(change.case)
    unknown = WhatIf(
        kind=change.kind,
        text=change.text,
        assumption=change.assumption,
        level_dbuv_per_m=None,
        change_db=None,
        under_budget=None,
    )
    if after is None:
        return unknown
    excess_db, worst = after.excess_db(line), after.worst
    order = float(after.order[worst])
    return replace(
        unknown,
        level_dbuv_per_m=float(after.budget_dbuv_per_m[line]) + excess_db,
        change_db=excess_db - before.excess_db(line),
        under_budget=excess_db <= 0,
        binds_hz=float(after.frequency_hz[worst]),
        binds_order=round(order) if np.isfinite(order) else None,
        binds_margin_db=-after.excess_db(worst),
    )


def _changes(case: _Case, levels: _Levels, wish: _Change | None) -> tuple[list[_Change], list[str]]:
    """The proposal, a resistor, each other setting, cable filters and inner layers, and notes."""
    parts = [*_resistors(case), *_settings(case)]
    if wish is not None:
        asked = (wish.case.setting, wish.case.value_ohm)
        parts = [c for c in parts if (c.case.setting, c.case.value_ohm) != asked]
        wish = replace(wish, case=replace(wish.case, with_filter=case.with_filter))
    filters, filter_notes = _filters(case, levels)
    layers, layer_notes = _inner_layers(case)
    found = [*([wish] if wish is not None else []), *parts, *filters, *layers]
    return found, [*filter_notes, *layer_notes]


def _chosen(case: _Case, setting: int, value_ohm: float, kind: Kind) -> _Change:
    """A setting and a value; another pull-up is another net, since it loads the line."""
    facts, nets, state = case.facts, case.nets, case.state
    if facts.timing == "open-drain" and value_ohm != case.value_ohm:
        net = facts.net.model_copy(update={"pull_up_ohm": value_ohm})
        nets = build([replace(facts, net=net)], case.radiation.board)
        state = replace(state, pull_up_ohm=np.full((1, 1), value_ohm))
    elif facts.timing != "open-drain":
        state = replace(state, series_ohm=np.full((1, 1), value_ohm))
    state = replace(state, setting=np.full((1, 1), setting))
    text = change_words(facts, setting, value_ohm)[1]
    return _Change(kind=kind, text=text, case=replace(case, nets=nets, state=state))


def _resistors(case: _Case) -> Iterator[_Change]:
    """The next larger value at the site or of a new part, and the one nearest to the line."""
    larger = [v for v in case.values_ohm if v > case.value_ohm]
    if not larger:
        return
    yield _chosen(case, case.setting, larger[0], "resistor")
    if case.facts.timing == "open-drain":
        return
    output_ohm = case.facts.settings[case.setting].resistance_ohm["rising"].typical
    line_ohm = case.facts.path.main_line.impedance_ohm
    nearest = min(larger, key=lambda v: abs(output_ohm + v - line_ohm))
    if nearest > larger[0] and np.isfinite(output_ohm):
        assumption = (
            f"{text_resistance_ohm(nearest)} and the driver's {text_resistance_ohm(output_ohm)} "
            f"come nearest to the line's {text_resistance_ohm(line_ohm)}"
        )
        change = _chosen(case, case.setting, nearest, "resistor")
        yield replace(change, assumption=assumption)


def _settings(case: _Case) -> Iterator[_Change]:
    """Every other setting that a person may choose, with the resistor as it is.

    The net as drawn is no change: it stands in an entry of its own.
    """
    drawn = (case.facts.setting, drawn_ohm(case.facts))
    for setting in case.settings:
        if setting != case.setting and (setting, case.value_ohm) != drawn:
            yield _chosen(case, setting, case.value_ohm, "setting")


def _filters(case: _Case, levels: _Levels) -> tuple[list[_Change], list[str]]:
    """More attenuation on every cable: fixed steps, and what brings the net under its budget."""
    if case.radiation.cable_state == NONE:
        return [], ["the board has no cables to filter"]
    needed_db, line = _needed_db(levels)
    steps, notes = set(FILTER_STEPS_DB), []
    if np.isinf(needed_db):
        at = text_frequency_hz(float(levels.frequency_hz[line]))
        alone = f"the trace alone is {20 * np.log10(levels.trace[line]):.1f} dB over at {at}"
        notes.append(f"{alone}: no filter on the cables is enough")
    elif needed_db > 0:
        steps.add(float(np.ceil(needed_db / NEEDED_STEP_DB - 1e-9)) * NEEDED_STEP_DB)
    return [_filtered(case, step) for step in sorted(steps)], notes


def _needed_db(levels: _Levels) -> tuple[float, int]:
    """Attenuation on every cable that brings all lines to the budget, and which asks most."""
    over, trace = levels.over, levels.trace
    cable = np.sqrt(np.maximum(over**2 - trace**2, 0.0))
    room = np.sqrt(np.maximum(1 - trace**2, 0.0))
    with np.errstate(divide="ignore", invalid="ignore"):
        needed_db = np.where(over > 1, 20 * np.log10(cable / room), 0.0)
    line = int(np.argmax(needed_db))
    return float(needed_db[line]), line


def _filtered(case: _Case, more_db: float) -> _Change:
    """The net with more attenuation on every cable."""
    radiation = replace(case.radiation, more_cable_db=more_db)
    own = replace(case, nets=case.nets.take([0]), radiation=radiation)
    text = f"{more_db:g} dB more on every cable"
    return _Change(kind="cable filter", text=text, case=own)


def _inner_layers(case: _Case) -> tuple[list[_Change], list[str]]:
    """The same trace on every layer of the stack that lies between planes."""
    if not case.facts.path.main_line.surface:
        return [], []
    board = case.radiation.board.file
    width_m = case.facts.path.main_line.width_m
    found, notes = [], []
    for layer in (entry.layer for entry in board.stack if entry.kind == "signal"):
        line = printed_line(board.stack, layer, width_m, board.impedance)
        if line.surface or len(line.planes) < 2:
            continue
        if line.problem:
            notes.append(f"on {layer} the level is not known: {line.problem}")
        else:
            found.append(_moved(case, layer))
    if not found and not notes:
        notes.append("the stack has no signal layer between planes to move the trace to")
    return found, notes


def _moved(case: _Case, layer: str) -> _Change:
    """The net with its whole length on another layer."""
    board, facts = case.radiation.board, case.facts

    def line_of(line: Line) -> Line:
        return printed_line(board.file.stack, layer, line.width_m, board.file.impedance)

    moved = replace(facts, path=_on_lines(facts.path, line_of))
    assumption = (
        f"the same length, width and ends, {BREAKOUT_M * 1e3:g} mm of surface at each end"
        f"{'' if kind_of(facts) == STRAIGHT else ', places of the route left out'}"
    )
    return _Change(
        kind="inner layer",
        text=f"the trace on {layer}",
        case=replace(case, nets=build([moved], board)),
        assumption=assumption,
    )


def _on_lines(path: Path, line_of: Any) -> Path:
    """A path with other lines and without places on the board."""
    pieces = tuple(replace(p, line=line_of(p.line), end_m=None) for p in path.pieces)
    return replace(path, pieces=pieces, stub_line=line_of(path.stub_line), origin_m=None)
