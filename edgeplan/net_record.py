"""One net's part of the results record, from its checks, windows and choice."""

from dataclasses import dataclass
from math import isfinite, isnan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import verdicts, words
from edgeplan.board import Board, Transfer
from edgeplan.candidates import COST_NAMES, Candidates
from edgeplan.checks import CheckTable, condition_words
from edgeplan.drives import CORNERS
from edgeplan.emission import cable as cable_part
from edgeplan.emission import inner_layer as inner_part
from edgeplan.emission import trace as trace_part
from edgeplan.emission.measured_transfer import MODEL as MEASURED_MODEL
from edgeplan.emission.mechanism import Mechanism
from edgeplan.evaluate import Evaluation
from edgeplan.net_fields import INNER, kind_of
from edgeplan.nets import NetFacts
from edgeplan.physics.radiation import level_dbuv_per_m
from edgeplan.results import (
    Candidate,
    CandidateResistor,
    CandidateSetting,
    Check,
    Condition,
    Corners,
    Cost,
    EmissionPart,
    InputNote,
    LineNote,
    Missing,
    NetResult,
    Pictures,
    Place,
    Remedy,
    Spread,
    Window,
    WindowEnd,
)
from edgeplan.stack import SOLVED, Line
from edgeplan.windows import UNDECIDED, End, StateWindow

Array = NDArray[Any]

TRANSITION_RATIO = 1.5  # a receiver's transition this much over the launched edge is printed


@dataclass(frozen=True, slots=True, kw_only=True)
class NetState:
    """A net with one of its candidates: which, its checks, its window, its launched edges."""

    candidate: int
    setting: int
    value_ohm: float
    evaluation: Evaluation
    row: int
    window: StateWindow
    edges_s: dict[str, float]
    entries: tuple[tuple[str, str, float], ...]
    out_of_reach_hz: tuple[float, ...]
    measured: dict[str, Transfer]
    surroundings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class NetDraft:
    """All that is known of one net before it is written down."""

    facts: NetFacts
    board: Board
    now: NetState
    after: NetState
    can_pass_now: bool
    remedies: tuple[Remedy, ...]
    settles: str
    candidates: Candidates
    passes: Array
    share: Array
    every: Evaluation | None
    every_row: int
    row: int
    remarks: tuple[str, ...]
    pictures: Pictures | None


def write(draft: NetDraft) -> NetResult:
    """Write one net down."""
    facts = draft.facts
    now = verdicts.judge(
        draft.now.evaluation, draft.now.row, 0, draft.now.window, can_pass=draft.can_pass_now
    )
    after = verdicts.judge(
        draft.after.evaluation, draft.after.row, 0, draft.after.window, can_pass=draft.can_pass_now
    )
    checks = _checks(draft.now, facts)
    index_now = {c.check: i for i, c in enumerate(checks)}
    index_after = index_now
    if draft.after.candidate == draft.now.candidate:
        checks = _worse(checks, _checks(draft.after, facts))
    else:
        offset = len(checks)
        more = _checks(draft.after, facts)
        index_after = {c.check: offset + i for i, c in enumerate(more)}
        checks += more
    candidates, checks = _candidates(draft, checks, index_now, index_after)
    change, proposal = words.change_words(facts, draft.after.setting, draft.after.value_ohm)
    own = [c for c in checks if c.candidate == draft.now.candidate]
    failing = [c for c in own if c.margin is not None and c.margin < 0]
    tightest = next((c for c in own if c.binding), None)
    missing = _missing(draft)
    return NetResult(
        net=facts.net.net,
        aliases=[facts.net.far_net] if facts.net.far_net else [],
        interface=facts.interface.name,
        timing_class=facts.timing,
        at=Place(file=facts.net.at.file, row=facts.net.at.row),
        verdict=now.verdict,
        verdict_after=after.verdict,
        borderline=now.borderline,
        borderline_after=after.borderline,
        undecided_because=list(
            dict.fromkeys(c.undecided_because for c in own if c.undecided_because)
        ),
        edge_levels="10-90",
        edge_now_s=_corners(draft.now.edges_s),
        edge_after_s=_corners(draft.after.edges_s),
        window_now=_window(draft.now.window, index_now),
        window_after=_window(draft.after.window, index_after),
        candidate_now=draft.now.candidate,
        proposal=draft.after.candidate,
        change=change,
        proposal_text=_proposal(proposal, after.verdict, now.verdict),
        what_binds=words.binds_words(now.verdict, failing, tightest)
        if now.verdict != "undecided"
        else "; ".join(dict.fromkeys(f"{m.value} of {m.of}" for m in missing)) or "undecided",
        transition_now_s=_slow_transition(draft.now),
        transition_after_s=_slow_transition(draft.after),
        missing=missing,
        line=_line(facts),
        inputs=_inputs(facts, draft.now.setting),
        candidates=candidates,
        checks=checks,
        remedies=list(draft.remedies),
        notes=[*facts.path.notes, *draft.remarks],
        pictures=draft.pictures,
    )


def _worse(now: list[Check], after: list[Check]) -> list[Check]:
    """Of a net that stays as drawn, each check where it is worse: its clock may have moved."""
    later = {c.check: c for c in after}
    return [min((c, later.get(c.check, c)), key=_margin_of) for c in now]


def _margin_of(check: Check) -> float:
    """Margin of a check, the smallest of all where it is not decided."""
    return float("-inf") if check.margin is None else check.margin


def _proposal(words_of_change: str, after: str, now: str) -> str:
    """The proposal, marked where it does not bring the net inside."""
    if after == "inside" or (after == "undecided" and now == "undecided"):
        return words_of_change
    if words_of_change == "no change":
        return "no change; needs a remedy"
    return f"{words_of_change} (least excess)"


def _corners(edges_s: dict[str, float]) -> Corners:
    """Edges at the three corners; what is not known is None."""
    return Corners(**{c: _number(edges_s.get(c, np.nan)) for c in CORNERS})


def _number(value: float) -> float | None:
    """A plain float, None where there is none."""
    value = float(value)
    return value if isfinite(value) else None


def _window(window: StateWindow, index: dict[str, int]) -> Window:
    """Both ends of a window with their causes."""
    return Window(
        slowest_allowed=_end(window.slowest, window.slowest_edge_s, index),
        fastest_acceptable=_end(window.fastest, window.fastest_edge_s, index),
    )


def _end(end: End, edge_s: float, index: dict[str, int]) -> WindowEnd:
    """One end; ``any`` where nothing fails within the scan."""
    if end.why_none:
        return WindowEnd(
            edge_s=None,
            check=index.get(end.check),
            cause=end.check,
            frequency_hz=_number(end.frequency_hz),
            why_none="" if end.why_none == UNDECIDED else end.why_none,
        )
    return WindowEnd(
        edge_s=_number(edge_s),
        check=None if end.any else index.get(end.check),
        cause="" if end.any else end.check,
        frequency_hz=None if end.any else _number(end.frequency_hz),
        any=end.any,
    )


def _slow_transition(state: NetState) -> float | None:
    """Longest received transition where it is much longer than the launched edge. [s]"""
    for table in state.evaluation.tables:
        if table.check == "transition" and table.applies[state.row]:
            value = float(table.value[state.row, 0])
            launched = state.edges_s.get("slow", np.nan)
            if isfinite(value) and value > TRANSITION_RATIO * launched:
                return value
    return None


def _checks(state: NetState, facts: NetFacts) -> list[Check]:
    """Every check of one candidate, the binding one marked."""
    row = state.row
    tables = [t for t in state.evaluation.tables if t.applies[row]]
    shares = [float(t.share[row, 0]) if t.decided[row, 0] else np.inf for t in tables]
    binding = int(np.argmin(shares)) if shares else -1
    return [_check(t, row, 0, state, facts, binding=k == binding) for k, t in enumerate(tables)]


def _check(
    table: CheckTable, row: int, column: int, state: NetState, facts: NetFacts, *, binding: bool
) -> Check:
    """One check of one candidate as a record."""
    receiver, corner, edge, when = condition_words(int(table.condition[row, column]))
    decided = bool(table.decided[row, column])
    pins = facts.net.receiver_pin
    place = pins[receiver] if receiver < len(pins) else ""
    is_emission = table.check == "emission"
    extra = _emission_extra(table, row, column, state, facts) if is_emission else {}
    if is_emission and decided:
        beyond = state.out_of_reach_hz
        extra["out_of_reach_hz"] = list(beyond)
        extra["out_of_reach"] = extra.get("frequency_hz") in beyond
    return Check(
        check=table.check,
        candidate=state.candidate,
        condition=Condition(
            driver_pin=facts.net.driver_pin[0] if facts.net.driver_pin else "",
            receiver_pin="" if is_emission else place,
            state=when,
            corner=corner,
            edge="" if is_emission else edge,
        ),
        value=_number(table.value[row, column]) if decided else None,
        limit=_number(table.limit[row, column]),
        margin=_number(table.margin[row, column]),
        unit=table.unit,
        margin_share=_number(table.share[row, column]) if decided else None,
        decided=decided,
        wants=table.wants,
        binding=binding,
        error=Spread(
            low=float(table.error_low[row, column]), high=float(table.error_high[row, column])
        )
        if decided and isfinite(table.error_low[row, column])
        else None,
        provenance=_provenance(table, facts, state),
        undecided_because="" if decided else table.because[row] or "no number",
        limit_edge_s=_number(state.window.limit_edge_s.get(table.check, np.nan)),
        **extra,
    )


def _emission_extra(
    table: CheckTable, row: int, column: int, state: NetState, facts: NetFacts
) -> dict[str, Any]:
    """Frequency, harmonic number (data have none), detector and parts of an emission level."""
    if not table.decided[row, column] and not isfinite(table.extra["trace"][row, column]):
        return {}
    order = float(table.extra["order"][row, column])
    entry = int(table.extra["entry"][row, column])
    trace = float(level_dbuv_per_m(table.extra["trace"][row, column]))
    expected = float(level_dbuv_per_m(table.extra["cable_expected"][row, column]))
    up_to = float(level_dbuv_per_m(table.extra["cable_up_to"][row, column]))
    own = inner_part.MODEL if kind_of(facts) == INNER else trace_part.MODEL
    measured, errors = (
        state.measured,
        {name: float(table.extra[f"{name}_error_db"][row, column]) for name in ("trace", "cable")},
    )
    parts = [_part("trace", own, (trace, trace), errors, measured)]
    if isfinite(expected):
        parts.append(_part("cable", cable_part.MODEL, (expected, up_to), errors, measured))
    return {
        "frequency_hz": _number(table.extra["frequency_hz"][row, column]),
        "order": round(order) if abs(order - np.round(order)) < 1e-6 else None,
        "detector": state.entries[entry][1] if state.entries else "",
        "parts": [p for p in parts if isfinite(p.expected_dbuv_per_m)],
    }


def _part(
    mechanism: str,
    model: Mechanism,
    levels: tuple[float, float],
    errors_db: dict[str, float],
    measured: dict[str, Transfer],
) -> EmissionPart:
    """One mechanism's levels with the stated error of its model there, or of what was measured."""
    model = MEASURED_MODEL if mechanism in measured else model
    expected, up_to = levels
    error_db = errors_db[mechanism]
    return EmissionPart(
        mechanism=mechanism,
        model=model.name.replace("_", " "),
        expected_dbuv_per_m=expected,
        up_to_dbuv_per_m=up_to,
        error_db=Spread(low=-error_db, high=error_db),
    )


def _provenance(table: CheckTable, facts: NetFacts, state: NetState) -> list[str]:
    """Where the numbers of a check came from, each once."""
    corners = facts.settings[state.setting]
    found = [corners.resistance_ohm["rising"].provenance, corners.ramp_s["rising"].provenance]
    if table.check == "emission":
        found.append("assumed" if facts.net.side_distance_m is None else "datasheet")
        found += [transfer.provenance for transfer in state.measured.values()]
        found += state.surroundings
    if facts.path.main_line.provenance == "stated":
        found.append("datasheet")
    return sorted(set(found))


def _missing(draft: NetDraft) -> list[Missing]:
    """Values the verdict waits for, each once."""
    state = draft.now
    found: dict[tuple[str, str], Missing] = {}
    for table in state.evaluation.tables:
        lack = table.missing[state.row]
        if lack is not None and table.open[state.row, 0]:
            settles = draft.settles if lack.value == "minimum edge" else lack.settles
            found.setdefault(
                (lack.value, lack.of), Missing(value=lack.value, of=lack.of, settles=settles)
            )
    return list(found.values())


def _line(facts: NetFacts) -> LineNote:
    """The line most of the net is on."""
    main, path = facts.path.main_line, facts.path
    delay = sum(
        (_way_delay_s(facts, piece) for piece in [max(path.receiver_piece, key=path.distance_m)]),
        path.stub_m * path.stub_line.delay_s_per_m,
    )
    return LineNote(
        impedance_ohm=main.impedance_ohm,
        delay_s=delay,
        length_m=path.main_length_m,
        layer=main.layer,
        provenance=main.provenance,
        text=_drawn(main),
    )


def _drawn(line: Line) -> str:
    """What a line was computed from, how well where it was solved, and what that assumes."""
    parts = [f"{line.width_m * 1e3:g} mm wide, {line.height_m * 1e3:g} mm to its plane"]
    if line.provenance == SOLVED:
        parts.append(f"solved to {100 * line.error:.2g} %")
    return ", ".join([*parts, *([line.assumed] if line.assumed else [])])


def _way_delay_s(facts: NetFacts, piece: int) -> float:
    """Delay from the resistor site to the far end of a piece. [s]"""
    total = 0.0
    while piece >= 0:
        part = facts.path.pieces[piece]
        total += part.length_m * part.line.delay_s_per_m
        piece = part.parent
    return total


def _inputs(facts: NetFacts, setting: int) -> list[InputNote]:
    """Inputs a verdict rests on, with their provenance."""
    corners = facts.settings[setting]
    source = corners.source or facts.driver.source
    notes = []
    for name, quantity, unit, scale in (
        ("output resistance", corners.resistance_ohm["rising"], "Ω", 1.0),
        ("output resistance, falling", corners.resistance_ohm["falling"], "Ω", 1.0),
        ("source edge 10-90 %", corners.ramp_s["rising"], "ns", 0.590334e9),
        ("source edge 10-90 %, falling", corners.ramp_s["falling"], "ns", 0.590334e9),
        ("pad capacitance", corners.pad_f, "pF", 1e12),
    ):
        values = (quantity.fast, quantity.typical, quantity.slow)
        text = "/".join("?" if isnan(v) else f"{v * scale:.3g}" for v in values)
        notes.append(
            InputNote(
                name=f"{name} (fast/typical/slow)",
                value=f"{text} {unit}",
                provenance=quantity.provenance,
                source=f"{facts.driver.name} {corners.setting}: {source}".rstrip(": "),
            )
        )
    if corners.symmetric:
        notes = [n for n in notes if "falling" not in n.name]
    return notes


def _candidates(
    draft: NetDraft, checks: list[Check], index_now: dict[str, int], index_after: dict[str, int]
) -> tuple[list[Candidate], list[Check]]:
    """The candidates listed: as drawn and proposed, or all where everything was asked for."""
    listed = sorted({draft.now.candidate, draft.after.candidate})
    if draft.every is not None:
        listed = [int(k) for k in np.flatnonzero(draft.candidates.exists[draft.row])]
    index = {draft.after.candidate: index_after, draft.now.candidate: index_now}
    found = []
    for k in listed:
        own = index.get(k)
        rejected = [i for i in own.values() if _holds_not(checks[i])] if own is not None else []
        found.append(_candidate(draft, k, rejected))
    return found, checks


def _holds_not(check: Check) -> bool:
    """Whether a check fails or is undecided."""
    return not check.decided or (check.margin is not None and check.margin < 0)


def _candidate(draft: NetDraft, k: int, rejected: list[int]) -> Candidate:
    """One candidate as a record."""
    facts, tables, row = draft.facts, draft.candidates, draft.row
    setting = facts.settings[int(tables.setting[row, k])]
    value = float(
        tables.pull_up_ohm[row, k] if facts.timing == "open-drain" else tables.series_ohm[row, k]
    )
    settings = [_setting(facts, "run", setting.setting)]
    if facts.setting_boot != facts.setting:
        settings.insert(0, _setting(facts, "boot", facts.settings[facts.setting_boot].setting))
    has_site = facts.timing == "open-drain" or facts.net.site != "none"
    site = facts.net.pull_up if facts.timing == "open-drain" else facts.net.resistor
    return Candidate(
        candidate=k,
        settings=settings,
        resistors=[
            CandidateResistor(
                site=site or f"new site {words.resistor_place(facts.net)}",
                value_ohm=value,
                array=facts.net.array or "",
            )
        ]
        if has_site and isfinite(value)
        else [],
        passes=bool(draft.passes[row, k]),
        rejected_by=rejected,
        cost=Cost(**dict(zip(COST_NAMES, map(int, tables.cost[row, k]), strict=True))),
        smallest_share=_number(draft.share[row, k]),
        why_rejected=_why(draft, k),
    )


def _setting(facts: NetFacts, state: str, setting: str) -> CandidateSetting:
    """The setting of the driver pin in one state."""
    corners = next(c for c in facts.settings if c.setting == setting)
    return CandidateSetting(
        driver_pin=facts.net.driver_pin[0] if facts.net.driver_pin else "",
        state=state,
        setting=setting,
        bank=facts.net.bank[0] if facts.net.bank else "",
        provenance=corners.resistance_ohm["rising"].provenance,
        source=corners.source or facts.driver.source,
    )


def _why(draft: NetDraft, k: int) -> str:
    """Why a candidate was not taken; empty where it was, or was not looked at in full."""
    if draft.every is None or k == draft.after.candidate:
        return ""
    if draft.passes[draft.row, k]:
        return _why_not(draft, k)
    reasons = []
    row = draft.every_row
    for table in draft.every.tables:
        if not table.applies[row]:
            continue
        if not table.decided[row, k]:
            reasons.append(f"{table.check} undecided")
        elif table.margin[row, k] < 0:
            reasons.append(_short(table, row, k))
    return "; ".join(reasons) or "its edge lies outside its own window"


def _why_not(draft: NetDraft, k: int) -> str:
    """Why a passing candidate was not taken: the order of preference, in its order."""
    row, taken = draft.row, draft.after.candidate
    if not draft.passes[row, taken]:
        return "not with its bank or array"
    cost, own = draft.candidates.cost[row, taken].tolist(), draft.candidates.cost[row, k].tolist()
    if own != cost:
        dearer = own > cost
        return "dearer change" if dearer else "not with its bank or array"
    if draft.share[row, k] <= draft.share[row, taken]:
        return "smaller share"
    return "share about as good, a less common value"


def _short(table: CheckTable, row: int, k: int) -> str:
    """One failing check in a few words."""
    margin = -float(table.margin[row, k])
    scale, unit = {"s": (1e9, "ns"), "A": (1e3, "mA")}.get(table.unit, (1.0, table.unit))
    if table.check == "emission":
        megahertz = float(table.extra["frequency_hz"][row, k]) / 1e6
        return f"emission {margin:.1f} dB over at {megahertz:.0f} MHz"
    if table.unit == "1":
        return f"{table.check} by {margin * 100:.0f} % of the mean slope"
    return f"{table.check} by {margin * scale:.3g} {unit}"
