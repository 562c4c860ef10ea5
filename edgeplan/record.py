"""The results record of a run, assembled from what the run found."""

import hashlib
from collections import Counter, defaultdict
from collections.abc import Iterator
from math import isnan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import (
    __version__,
    activity_remarks,
    emission_at_line,
    levels,
    net_record,
    pictures_of,
    transfers,
    unused,
)
from edgeplan.board import Board
from edgeplan.candidates import Candidates, drawn_ohm
from edgeplan.caution import CAUTION
from edgeplan.choice import per_net, remedies, settles
from edgeplan.draft import Draft, State
from edgeplan.drives import CORNERS
from edgeplan.emission import mechanism_of
from edgeplan.errors import InputError, Problem
from edgeplan.evaluate import Bench, evaluate
from edgeplan.names import natural_key
from edgeplan.net_fields import INNER, kind_of, remarks
from edgeplan.nets import Blocked, NetFacts
from edgeplan.radiated import NONE, Passive, Radiation, source_levels
from edgeplan.results import (
    VERDICTS,
    ArrayChoice,
    Assumption,
    BankChoice,
    BoardEmission,
    Choice,
    Conditions,
    Corners,
    FillIn,
    Finding,
    Input,
    ModelNote,
    NetResult,
    NotJudged,
    Place,
    Remedy,
    Results,
    Spread,
    TargetSummary,
    Tool,
    ValueCount,
    Window,
    WindowEnd,
)
from edgeplan.return_planes import PlaneFinding, plane_findings
from edgeplan.scoring import Block
from edgeplan.windows import launched_edge_s

Array = NDArray[Any]

RULES = {
    "too fast": "edge-too-fast",
    "too slow": "edge-too-slow",
    "no window": "window-closed",
    "undecided": "edge-undecided",
}


def find_net(board: Board, name: str) -> str:
    """Name of a net of the board, or which ones come close.

    Raises
    ------
    InputError
        When no net has that name.
    """
    from difflib import get_close_matches

    names = [n.net for n in board.nets]
    aliases = {n.far_net: n.net for n in board.nets if n.far_net}
    if name in names or name in aliases:
        return aliases.get(name, name)
    folded = {n.casefold(): n for n in names}
    if name.casefold() in folded:
        return folded[name.casefold()]
    close = get_close_matches(name, names, n=3)
    lists = f"edgeplan plan BOARD lists all {len(names)} nets"
    raise InputError(
        [
            Problem(
                f"the board has no net {name}",
                "nets.csv",
                1,
                1,
                field="net",
                hint=f"did you mean {' or '.join(close)}?" if close else lists,
            )
        ]
    )


def results(draft: Draft) -> Results:
    """Write the whole record down."""
    board = draft.board
    planes = _plane_findings(draft)
    judged = _judged(draft, planes)
    nets = sorted(
        [*judged, *(_blocked(b) for b in draft.blocked)], key=lambda n: natural_key(n.net)
    )
    if draft.only:
        nets = [n for n in nets if n.net == draft.only]
    not_judged = [NotJudged(net=n.net, reason=n.kind) for n in board.nets if n.kind != "digital"]
    target = draft.bench_now.radiation.target
    return Results(
        command=draft.command,
        tool=Tool(version=__version__),
        caution=CAUTION,
        board=_title(board),
        inputs=[Input(path=i.path, sha256=i.sha256) for i in board.inputs],
        emission_target=TargetSummary(
            limits=[line.id for line in target.lines],
            margin_db=target.margin_db,
            statistic=target.statistic,
            highest_hz=target.highest_hz,
            highest_rule=target.highest_rule,
            verified=not target.unverified,
            unverified=[*target.unverified, *_unverified_levels(draft.facts)],
        ),
        conditions=Conditions(corners=list(CORNERS), states=_states(draft.facts)),
        models=_models(draft),
        assumptions=_assumptions(draft),
        nets=nets,
        not_judged=sorted(not_judged, key=lambda n: natural_key(n.net)),
        board_emission=BoardEmission(),
        choice=_choice(draft),
        findings=_findings(draft.command, nets, planes),
        totals=_totals([n.verdict for n in nets], len(not_judged)),
        totals_after=_totals([n.verdict_after for n in nets], len(not_judged)),
        fill_in=_fill_in(nets),
        undecided_policy=draft.undecided,
    )


def _title(board: Board) -> str:
    """Name and revision."""
    facts = board.file.board
    return f"{facts.name} {facts.revision}".strip()


def _states(facts: tuple[NetFacts, ...]) -> list[str]:
    """States that were judged."""
    boot = any(f.setting_boot != f.setting for f in facts)
    return ["boot", "run"] if boot else ["run"]


def _models(draft: Draft) -> list[ModelNote]:
    """Models that the levels of this board rest on, and what was measured in their place."""
    measured = {part: _measured_nets(draft, part) for part in transfers.PARTS}
    modelled = {part: sum(map(len, own)) < len(draft.facts) for part, own in measured.items()}
    used = ["trace"] if modelled["trace"] or not draft.facts else []
    if draft.bench_now.radiation.cable_state != NONE and (modelled["cable"] or not draft.facts):
        used.append("cable")
    if any(modelled.values()) and any(kind_of(f) == INNER for f in draft.facts):
        used.append("inner_layer")
    models = [mechanism_of(name).MODEL for name in used]
    notes = [(m, m.error_db, m.source) for m in models]
    for part, own in measured.items():
        for read, nets in zip(draft.board.transfers, own, strict=True):
            if nets:
                stated = read.stated
                count = f"{len(nets)} net{'s' if len(nets) != 1 else ''}"
                source = (
                    f"{stated.file} in place of the {part} of {count}; "
                    f"{stated.provenance}: {stated.source}"
                )
                model = mechanism_of("measured_transfer").MODEL
                notes.append((model, stated.error_db, source))
    return [
        ModelNote(
            model=model.name.replace("_", " "),
            version=model.version,
            error_db=Spread(low=-error_db, high=error_db),
            source=source,
        )
        for model, error_db, source in notes
    ]


def _measured_nets(draft: Draft, part: str) -> list[list[str]]:
    """Names of the nets of which each transfer of the board replaces a part."""
    own = {f.net.net: transfers.of_net(draft.board, f.net.net, part) for f in draft.facts}
    return [[name for name, used in own.items() if used is each] for each in draft.board.transfers]


def _plane_findings(draft: Draft) -> dict[str, list[PlaneFinding]]:
    """What each net does to its return planes beyond the models; nets without are left out."""
    highest_hz = draft.bench_now.radiation.target.highest_hz
    found = {f.net.net: plane_findings(draft.board, f, highest_hz) for f in draft.facts}
    return {name: own for name, own in found.items() if own}


def _judged(draft: Draft, planes: dict[str, list[PlaneFinding]]) -> list[NetResult]:
    """Every net that was simulated."""
    sentences = settles.minimum_edges(draft.facts, draft.board, draft.bench_now)
    advice = _remedies(draft)
    target = draft.bench_now.radiation.target
    found = []
    for block in draft.blocks:
        states = {
            "now": _net_states(block, draft.now, draft.bench_now),
            "after": _net_states(block, draft.after, draft.bench_after),
        }
        every = _every(block, draft)
        for row, i in enumerate(map(int, block.index)):
            facts = draft.facts[i]
            shown = bool(draft.only) and facts.net.net == draft.only
            written = net_record.write(
                net_record.NetDraft(
                    facts=facts,
                    board=draft.board,
                    now=states["now"][row],
                    after=states["after"][row],
                    can_pass_now=bool(draft.can_pass[i]),
                    remedies=tuple(advice.get(i, ())),
                    settles=sentences[i],
                    candidates=draft.scores.candidates,
                    passes=draft.scores.passes,
                    share=draft.scores.share,
                    every=every if shown else None,
                    every_row=row,
                    row=i,
                    remarks=(
                        *remarks(facts),
                        *(f.text for f in planes.get(facts.net.net, ())),
                        *activity_remarks.remarks(facts, target),
                    ),
                    pictures=pictures_of.draw(block, row, draft) if shown else None,
                )
            )
            if shown:
                written = emission_at_line.added(written, block, row, draft)
            found.append(written)
    return found


def _every(block: Block, draft: Draft) -> Any:
    """All candidates of the block that holds the net to be explained."""
    if not draft.only or draft.only not in {f.net.net for f in block.nets.facts}:
        return None
    return evaluate(block.nets, block.candidates, draft.bench_after)


def _net_states(block: Block, state: State, bench: Bench) -> list[net_record.NetState]:
    """One state of every net of a block."""
    column = block.candidates.state(state.chosen[block.index])
    edges = {c: launched_edge_s(block.nets, column, c)[:, 0] for c in ("slow", "fast")}
    passive = bench.radiation.passive(block.nets)
    slowest = np.array([state.window[int(i)].slowest.factor for i in block.index])
    beyond = _out_of_reach(block, column.with_ramps(slowest[:, None]), passive, bench)
    found = []
    for row, i in enumerate(map(int, block.index)):
        evaluation, own = state.evaluation[i]
        window = state.window[i]
        value = (
            column.pull_up_ohm
            if block.nets.facts[row].timing == "open-drain"
            else column.series_ohm
        )[row, 0]
        found.append(
            net_record.NetState(
                candidate=int(state.chosen[i]),
                setting=int(column.setting[row, 0]),
                value_ohm=float(value),
                evaluation=evaluation,
                row=own,
                window=window,
                edges_s={
                    "slow": float(edges["slow"][row]),
                    "typical": window.edge_s,
                    "fast": float(edges["fast"][row]),
                },
                entries=passive.entries,
                out_of_reach_hz=beyond[row],
                surroundings=_surroundings(block.nets.facts[row], bench.radiation),
                measured={
                    part: transfer.stated
                    for part, replaced in passive.measured.items()
                    if (transfer := replaced.transfers[row]) is not None
                },
            )
        )
    return found


def _surroundings(facts: NetFacts, radiation: Radiation) -> tuple[str, ...]:
    """Where what is known of cables and enclosure came from, as far as it acts on a net."""
    found = set()
    if not transfers.of_net(radiation.board, facts.net.net, "cable"):
        filtered = (c for c in radiation.cables if c.attenuation_db or c.series_impedance_ohm)
        found |= {cable.provenance for cable in filtered}
    own = radiation.board.file.board
    if own.enclosure_attenuation_db and not transfers.of_net(
        radiation.board, facts.net.net, "trace"
    ):
        found.add(own.enclosure_provenance)
    return tuple(sorted(found))


def _out_of_reach(
    block: Block, slowest: Candidates, passive: Passive, bench: Bench
) -> list[tuple[float, ...]]:
    """Lines still over budget with the slowest allowed edge, per net. [Hz]"""
    levels = source_levels(block.nets, slowest, passive, bench.tolerance)[:, 0]
    with np.errstate(invalid="ignore"):
        over = passive.lines.exists & (passive.over_budget * levels > 1)
    return [
        tuple(float(f) for f in passive.lines.frequency_hz[i][over[i]]) for i in range(len(over))
    ]


def _remedies(draft: Draft) -> dict[int, list[Remedy]]:
    """Remedies of nets that no candidate brings inside, per net."""
    found: dict[int, list[Remedy]] = defaultdict(list)
    if draft.command == "check":
        return found
    for block in draft.blocks:
        rows = [row for row, i in enumerate(map(int, block.index)) if _needs_remedy(draft, i)]
        if not rows or block.nets.facts[0].timing == "open-drain":
            continue
        for net, remedy in [*_sites(draft, block, rows), *_filters(draft, block, rows)]:
            found[net].append(remedy)
    return found


def _sites(draft: Draft, block: Block, rows: list[int]) -> Iterator[tuple[int, Remedy]]:
    """A new site for those nets of a block that have none, where one would help."""
    without = [row for row in rows if block.nets.facts[row].net.site == "none"]
    if not without:
        return
    highest = draft.board.file.resistors.highest_ohm
    sized = remedies.new_site(block.nets.take(without), draft.bench_after, highest)
    for row, remedy in zip(without, sized, strict=True):
        if remedy is not None:
            yield int(block.index[row]), remedy


def _filters(draft: Draft, block: Block, rows: list[int]) -> Iterator[tuple[int, Remedy]]:
    """A filter on the cables for those nets of a block that are over the emission budget."""
    over = [row for row in rows if _fails_emission(draft, int(block.index[row]))]
    if not over:
        return
    nets, candidates = block.nets.take(over), block.candidates.take(over)
    sized = remedies.cable_filter(nets, candidates, draft.bench_after)
    for row, remedy in zip(over, sized, strict=True):
        yield int(block.index[row]), remedy


def _needs_remedy(draft: Draft, net: int) -> bool:
    """Whether a net's chosen candidate fails some check."""
    evaluation, row = draft.after.evaluation[net]
    failing = evaluation.failing("faster") | evaluation.failing("slower")
    return bool(failing[row, 0])


def _fails_emission(draft: Draft, net: int) -> bool:
    """Whether a net's chosen candidate or the net as drawn is over the emission budget."""
    for state in (draft.now, draft.after):
        evaluation, row = state.evaluation[net]
        if any(t.fails[row, 0] for t in evaluation.tables if t.check == "emission"):
            return True
    return False


def _blocked(blocked: Blocked) -> NetResult:
    """A net that could not be simulated."""
    net = blocked.net
    nothing = Window(
        slowest_allowed=WindowEnd(edge_s=None), fastest_acceptable=WindowEnd(edge_s=None)
    )
    return NetResult(
        net=net.net,
        aliases=[net.far_net] if net.far_net else [],
        interface=net.interface or "",
        timing_class="",
        at=Place(file=net.at.file, row=net.at.row),
        verdict="undecided",
        verdict_after="undecided",
        borderline=False,
        borderline_after=False,
        undecided_because=[blocked.reason],
        edge_levels="10-90",
        edge_now_s=Corners(),
        edge_after_s=Corners(),
        window_now=nothing,
        window_after=nothing,
        candidate_now=0,
        proposal=0,
        change="none",
        proposal_text="no change",
        what_binds=blocked.reason,
        missing=[blocked.missing] if blocked.missing else [],
    )


def _totals(found: list[str], not_judged: int) -> dict[str, int]:
    """Count per verdict, zeros included."""
    counted = Counter(found)
    totals: dict[str, int] = {verdict: counted[verdict] for verdict in VERDICTS}
    return totals | {"not judged": not_judged}


def _findings(
    command: str, nets: list[NetResult], planes: dict[str, list[PlaneFinding]]
) -> list[Finding]:
    """One finding per net that is not (or cannot be) inside, then those about return planes."""
    found = []
    for net in nets:
        verdict = net.verdict if command == "check" else net.verdict_after
        if verdict not in RULES:
            continue
        reason = "; ".join(net.undecided_because) if verdict == "undecided" else net.what_binds
        found.append(_finding(RULES[verdict], net.net, f"{verdict}: {reason}"))
    found += [
        _finding(own.rule, net.net, own.text, own.where)
        for net in nets
        for own in planes.get(net.net, ())
    ]
    return found


def _finding(rule: str, net: str, text: str, where: str = "") -> Finding:
    """A finding with the fingerprint of its rule, its net and, where it has one, its place."""
    mark = f"{rule}\n{net}" + f"\n{where}" * bool(where)
    return Finding(
        rule=rule,
        net=net,
        message=f"{net}: {text}",
        fingerprint=hashlib.sha256(mark.encode()).hexdigest()[:16],
    )


def _fill_in(nets: list[NetResult]) -> list[FillIn]:
    """Missing values, those that most nets wait for first."""
    waiting: dict[tuple[str, str], list[str]] = defaultdict(list)
    for net in nets:
        if net.verdict == "undecided":
            for lack in net.missing:
                waiting[lack.value, lack.of].append(net.net)
    ordered = sorted(waiting.items(), key=lambda item: (-len(item[1]), item[0]))
    return [FillIn(value=value, of=of, nets=names) for (value, of), names in ordered]


def _assumptions(draft: Draft) -> list[Assumption]:
    """What was taken for granted, and what was accepted but not used."""
    board = draft.board
    found = [
        Assumption(subject="emission", text=note, provenance="assumed")
        for note in draft.bench_now.radiation.notes
    ]
    target = draft.bench_now.radiation.target
    if target.not_covered:
        found.append(Assumption(subject="emission", text=target.not_covered, provenance="assumed"))
    found += [
        Assumption(subject="activity", text=text, provenance="bound")
        for text in activity_remarks.assumptions(draft.facts)
    ]
    centred = sum(f.net.side_distance_m is None for f in draft.facts)
    if centred:
        text = f"{centred} nets state no distance to the board's side and count as centred"
        found.append(Assumption(subject="geometry", text=text, provenance="assumed"))
    no_pad = sorted({s.setting for f in draft.facts for s in f.settings if s.pad_f.slow == 0})
    if no_pad:
        text = f"settings without a pad capacitance have 0 pF: {', '.join(no_pad)}"
        found.append(Assumption(subject="drivers", text=text, provenance="assumed"))
    bare = sorted(
        {
            f.interface.name
            for f in draft.facts
            if f.timing == "common-clock" and f.interface.clock_net and not f.interface.skew_s
        }
    )
    if bare:
        text = (
            "the flight of its clock as drawn counts as part of the stated skew, which is 0, of "
            f"interface {', '.join(bare)}; what a proposal moves the clock by counts on top"
        )
        found.append(Assumption(subject="timing", text=text, provenance="assumed"))
    found += [Assumption(subject="input", text=t, provenance="assumed") for t in board.notes]
    found += [
        Assumption(subject="not used", text=text, provenance="assumed")
        for text in unused.unused_values(board)
    ]
    return found


def _unverified_levels(facts: tuple[NetFacts, ...]) -> list[str]:
    """Level families in use whose figures are from memory."""
    names = {r.levels or f.interface.levels for f in facts for r in f.receivers}
    shipped = set(levels.ids())
    return [
        f"level family {name}"
        for name in sorted(names & shipped)
        if not levels.family(name).verified
    ]


def _choice(draft: Draft) -> Choice:
    """How the proposals hang together: values, banks and arrays."""
    values: dict[float, list[int]] = defaultdict(lambda: [0, 0])
    tables = draft.scores.candidates
    for i, f in enumerate(draft.facts):
        pull = f.timing == "open-drain"
        chosen = (tables.pull_up_ohm if pull else tables.series_ohm)[i, draft.after.chosen[i]]
        drawn = drawn_ohm(f)
        has_part = pull or f.net.site in ("fitted", "link") or chosen > 0
        if has_part and not isnan(float(chosen)):
            values[float(chosen)][0] += 1
        if (pull or f.net.site in ("fitted", "link")) and not isnan(drawn):
            values[drawn][1] += 1
    groups = per_net.tied_groups(draft.facts)
    banks = {name: members for g in groups for name, members in g.banks.items()}
    arrays = {name: members for g in groups for name, members in g.arrays.items()}
    return Choice(
        scope="net, bank and array",
        status="proved",
        gap=0.0,
        values=[
            ValueCount(value_ohm=v, count=c[0], count_now=c[1]) for v, c in sorted(values.items())
        ],
        banks=[_bank(draft, name, members) for name, members in sorted(banks.items())],
        arrays=[_array(draft, name, members) for name, members in sorted(arrays.items())],
    )


def _bank(draft: Draft, name: str, members: tuple[int, ...]) -> BankChoice:
    """Settings of one bank as drawn and as proposed."""
    tables = draft.scores.candidates
    drawn = {draft.facts[i].settings[draft.facts[i].setting].setting for i in members}
    chosen = {
        draft.facts[i].settings[int(tables.setting[i, draft.after.chosen[i]])].setting
        for i in members
    }
    text = "" if len(chosen) == 1 else "no common setting exists"
    if len(drawn) > 1:
        text = text or "drawn with several settings; one field can hold one"
    return BankChoice(
        bank=name,
        setting_now=" ".join(sorted(drawn)),
        setting=" ".join(sorted(chosen)),
        members=[draft.facts[i].net.net for i in members],
        text=text,
    )


def _array(draft: Draft, name: str, members: tuple[int, ...]) -> ArrayChoice:
    """Value of one array as drawn and as proposed."""
    tables = draft.scores.candidates
    drawn = {drawn_ohm(draft.facts[i]) for i in members}
    chosen = {float(tables.series_ohm[i, draft.after.chosen[i]]) for i in members}
    return ArrayChoice(
        array=name,
        value_now_ohm=next(iter(drawn)) if len(drawn) == 1 else None,
        value_ohm=max(chosen),
        members=[draft.facts[i].net.net for i in members],
        text="" if len(chosen) == 1 else "no common value exists",
    )
