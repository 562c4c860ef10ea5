"""Emission of one net at the line that binds, and what one change alone would do there."""

from dataclasses import replace
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from edgeplan.draft import Draft
from edgeplan.radiated import UNKNOWN
from edgeplan.results import Check, EmissionAtLine, MechanismAtLine, NetResult, WhatIf
from edgeplan.scoring import Block
from edgeplan.single_changes import Case, Change, Levels, case_of, changes_of, levels_of

Array = NDArray[Any]
When = Literal["now", "after"]
Parity = Literal["odd", "even", "in-band power"]


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
    drawn, proposed = (
        case_of(block, row, int(k), draft.bench_after) for k in (net.candidate_now, net.proposal)
    )
    wish = None
    if net.proposal != net.candidate_now:
        wish = Change(kind="proposal", text=f"the proposal: {net.proposal_text}", case=proposed)
    found = [_at_line(net, drawn, "now", wish)]
    if wish is not None:
        found.append(_at_line(net, proposed, "after", None))
    return replace(net, emission_at_line=[entry for entry in found if entry is not None])


def _at_line(net: NetResult, case: Case, when: When, wish: Change | None) -> EmissionAtLine | None:
    """One candidate of a net at its binding line; None where its level is not known."""
    check = _binding(net, net.candidate_now if when == "now" else net.proposal)
    levels = levels_of(case)
    if check is None or check.frequency_hz is None or levels is None:
        return None
    line = int(np.argmin(np.abs(levels.frequency_hz - check.frequency_hz)))
    budget = float(levels.budget_dbuv_per_m[line])
    level = budget + levels.excess_db(line)
    changes, notes = changes_of(case, levels, line, wish)
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
        notes=[*_early(case, check), *_assumed_filter(case), *notes],
    )


def _binding(net: NetResult, candidate: int) -> Check | None:
    """The emission check of one candidate with the least margin, over run and boot."""
    own = [c for c in net.checks if c.check == "emission" and c.candidate == candidate]
    known = [c for c in own if c.frequency_hz is not None]
    return min(known, key=lambda c: -np.inf if c.margin is None else c.margin, default=None)


def _early(case: Case, check: Check) -> list[str]:
    """Tell why no setting helps where the one before firmware decides."""
    if check.condition.state != "boot":
        return []
    setting = case.facts.settings[case.facts.setting_boot].setting
    return [f"before firmware runs the setting is {setting}, whatever is chosen for later"]


def _assumed_filter(case: Case) -> list[str]:
    """Tell with which filter a net is shown where nothing is declared about cables."""
    if case.radiation.cable_state != UNKNOWN:
        return []
    if case.with_filter:
        return ["no filter is declared: shown with a good one on all cables, over budget even so"]
    return ["no filter is declared: shown without any on the cables"]


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


def _what_if(change: Change, before: Levels, line: int) -> WhatIf:
    """What one change does at a line, and which line binds with it."""
    after = levels_of(change.case)
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
