"""One net alone and each single change to it, for the emission check to judge."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import reduce
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, allowed_values, drawn_ohm
from edgeplan.emission.inner_layer import BREAKOUT_M
from edgeplan.evaluate import Bench, boot_candidates
from edgeplan.net_fields import STRAIGHT, kind_of
from edgeplan.nets import NetFacts, Nets, build
from edgeplan.radiated import NONE, Radiation, source_levels
from edgeplan.routing import Path
from edgeplan.scoring import Block
from edgeplan.stack import Line, printed_line
from edgeplan.texts import text_frequency_hz, text_resistance_ohm
from edgeplan.words import change_words

Array = NDArray[Any]
Kind = Literal["proposal", "resistor", "setting", "cable filter", "inner layer"]

FILTER_STEPS_DB = (1.0, 3.0, 6.0, 10.0)
NEEDED_STEP_DB = 0.5  # what a net needs is rounded up to this


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
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
class Levels:
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
class Change:
    """One change: of what kind, in words, the case with it, and what was assumed."""

    kind: Kind
    text: str
    case: Case
    assumption: str = ""


def case_of(block: Block, row: int, candidate: int, bench: Bench) -> Case:
    """One net of a block, alone, with one of its candidates.

    Parameters
    ----------
    block : Block
        The block that holds the net.
    row : int
        Its row there.
    candidate : int
        Which of its candidates.
    bench : Bench
        Emission target, cables and tolerance.

    Returns
    -------
    Case
        Judged with the filter assumed on undeclared cables where it is over budget even so.
    """
    listed = block.candidates.take(np.array([row]))
    exists = listed.exists[0]
    facts = block.nets.facts[row]
    values = allowed_values(bench.radiation.board.file.resistors)
    if facts.timing == "open-drain":
        values = np.unique(listed.pull_up_ohm[0][exists])
    case = Case(
        nets=block.nets.take([row]),
        state=listed.state(np.array([candidate])),
        radiation=bench.radiation,
        tolerance=bench.tolerance,
        settings=tuple(map(int, np.unique(listed.setting[0][exists]))),
        values_ohm=tuple(map(float, values)),
    )
    return _as_judged(case)


def _as_judged(case: Case) -> Case:
    """The case with the filter assumed on undeclared cables, where it is over budget even so."""
    if case.radiation.passive(case.nets).filtered is None:
        return case
    filtered = replace(case, with_filter=True)
    levels = levels_of(filtered)
    return filtered if levels is not None and levels.over.max() > 1 else case


def levels_of(case: Case) -> Levels | None:
    """Level over budget of a case, the worse of run and boot.

    Parameters
    ----------
    case : Case
        One net with one candidate.

    Returns
    -------
    Levels or None
        At every judged line, ``(F,)``; None where it is not known.
    """
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
    return Levels(
        frequency_hz=passive.lines.frequency_hz[0],
        order=passive.lines.number[0],
        over=over,
        trace=volts * passive.trace[0] / budget,
        budget_dbuv_per_m=passive.budget_dbuv_per_m[0],
    )


def changes_of(
    case: Case, levels: Levels, line: int, wish: Change | None
) -> tuple[list[Change], list[str]]:
    """The proposal, a resistor, each other setting, cable filters and inner layers.

    Parameters
    ----------
    case : Case
        The net as it is.
    levels : Levels
        Its emission.
    line : int
        The line that binds.
    wish : Change or None
        The proposal, where it is another candidate.

    Returns
    -------
    list of Change, list of str
        The changes, each alone, and why some kinds are not among them.
    """
    parts = [*_resistors(case), *_settings(case)]
    if wish is not None:
        asked = (wish.case.setting, wish.case.value_ohm)
        parts = [c for c in parts if (c.case.setting, c.case.value_ohm) != asked]
        wish = replace(wish, case=replace(wish.case, with_filter=case.with_filter))
    filters, filter_notes = _filters(case, levels, line)
    layers, layer_notes = _inner_layers(case)
    found = [*([wish] if wish is not None else []), *parts, *filters, *layers]
    return found, [*filter_notes, *layer_notes]


def _chosen(case: Case, setting: int, value_ohm: float, kind: Kind) -> Change:
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
    return Change(kind=kind, text=text, case=replace(case, nets=nets, state=state))


def _resistors(case: Case) -> Iterator[Change]:
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


def _settings(case: Case) -> Iterator[Change]:
    """Every other setting that a person may choose, with the resistor as it is.

    The net as drawn is no change: it stands in an entry of its own.
    """
    drawn = (case.facts.setting, drawn_ohm(case.facts))
    for setting in case.settings:
        if setting != case.setting and (setting, case.value_ohm) != drawn:
            yield _chosen(case, setting, case.value_ohm, "setting")


def _filters(case: Case, levels: Levels, line: int) -> tuple[list[Change], list[str]]:
    """More attenuation on every cable: fixed steps, what this line needs, what all lines need."""
    if case.radiation.cable_state == NONE:
        return [], ["the board has no cables to filter"]
    if case.radiation.passive(case.nets).measured["cable"].is_measured.any():
        return [], ["what goes onto the cables was measured: their filters are in the transfer"]
    needed_db = _needed_db(levels)
    wanted = {float(needed_db[line]), float(needed_db.max())}
    rounded = {float(np.ceil(db / NEEDED_STEP_DB - 1e-9)) * NEEDED_STEP_DB for db in wanted}
    steps = {db for db in rounded if 0 < db < np.inf} | set(FILTER_STEPS_DB)
    return [_filtered(case, step) for step in sorted(steps)], _alone(levels, needed_db)


def _alone(levels: Levels, needed_db: Array) -> list[str]:
    """Where the trace alone is over the budget, if it is."""
    if np.isfinite(needed_db).all():
        return []
    line = int(np.argmax(np.where(np.isinf(needed_db), levels.trace, 0.0)))
    at = text_frequency_hz(float(levels.frequency_hz[line]))
    alone = f"the trace alone is {20 * np.log10(levels.trace[line]):.1f} dB over at {at}"
    return [f"{alone}: no filter on the cables brings every line under the budget"]


def _needed_db(levels: Levels) -> Array:
    """Attenuation on every cable that brings each line to the budget; inf where none does. (F,)"""
    over, trace = levels.over, levels.trace
    cable = np.sqrt(np.maximum(over**2 - trace**2, 0.0))
    room = np.sqrt(np.maximum(1 - trace**2, 0.0))
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(over > 1, 20 * np.log10(cable / room), 0.0)


def _filtered(case: Case, more_db: float) -> Change:
    """The net with more attenuation on every cable."""
    radiation = replace(case.radiation, more_cable_db=more_db)
    own = replace(case, nets=case.nets.take([0]), radiation=radiation)
    text = f"{more_db:g} dB more on every cable"
    return Change(kind="cable filter", text=text, case=own)


def _inner_layers(case: Case) -> tuple[list[Change], list[str]]:
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


def _moved(case: Case, layer: str) -> Change:
    """The net with its whole length on another layer."""
    board, facts = case.radiation.board, case.facts

    def line_of(line: Line) -> Line:
        return printed_line(board.file.stack, layer, line.width_m, board.file.impedance)

    moved = replace(facts, path=_on_lines(facts.path, line_of))
    assumption = (
        f"the same length, width and ends, {BREAKOUT_M * 1e3:g} mm of surface at each end"
        f"{'' if kind_of(facts) == STRAIGHT else ', places of the route left out'}"
    )
    return Change(
        kind="inner layer",
        text=f"the trace on {layer}",
        case=replace(case, nets=build([moved], board)),
        assumption=assumption,
    )


def _on_lines(path: Path, line_of: Callable[[Line], Line]) -> Path:
    """A path with other lines and without places on the board."""
    pieces = tuple(replace(p, line=line_of(p.line), end_m=None) for p in path.pieces)
    return replace(path, pieces=pieces, stub_line=line_of(path.stub_line), origin_m=None)
