"""From checks to verdicts, borderline and the exit code."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.evaluate import Evaluation
from edgeplan.results import BEYOND_MODEL, Results, Verdict
from edgeplan.windows import StateWindow

Array = NDArray[Any]

PASS, FINDINGS, NOT_JUDGED = 0, 1, 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """Verdict of one candidate of one net, and whether it is borderline."""

    verdict: Verdict
    borderline: bool


def judge(
    evaluation: Evaluation, net: int, candidate: int, window: StateWindow, *, can_pass: bool
) -> Judged:
    """Verdict of one candidate.

    Parameters
    ----------
    evaluation : Evaluation
        Checks (N, C).
    net, candidate : int
        Which one.
    window : StateWindow
        Window of this candidate's own state.
    can_pass : bool
        Whether anything over all settings and a continuous resistor passes (or is undecided).

    Returns
    -------
    Judged
        ``inside`` needs every check decided and held, and the edge in its own window: a pass
        below the fastest acceptable edge is luck and counts as too fast.
    """
    wants_faster = bool(evaluation.failing("faster")[net, candidate])
    wants_slower = bool(evaluation.failing("slower")[net, candidate])
    is_open = bool(evaluation.open()[net, candidate])
    lucky = not (wants_faster or wants_slower or is_open) and not window.holds_present_edge
    verdict = _verdict(
        wants_faster=wants_faster,
        wants_slower=wants_slower or lucky,
        is_open=is_open,
        can_pass=can_pass,
    )
    return Judged(verdict=verdict, borderline=_borderline(evaluation, net, candidate, verdict))


def _verdict(*, wants_faster: bool, wants_slower: bool, is_open: bool, can_pass: bool) -> Verdict:
    """One word for the two sides.

    >>> _verdict(wants_faster=True, wants_slower=True, is_open=False, can_pass=True)
    'no window'
    """
    if wants_faster and wants_slower:
        return "no window"
    if wants_faster or wants_slower:
        if not can_pass:
            return "no window"
        return "too slow" if wants_faster else "too fast"
    return "undecided" if is_open else "inside"


def _borderline(evaluation: Evaluation, net: int, candidate: int, verdict: Verdict) -> bool:
    """Whether it is inside, or outside, by less than the error that could change it."""
    if verdict in ("undecided", "not judged"):
        return False
    failing, narrow = [], []
    for table in evaluation.tables:
        margin = table.margin[net, candidate]
        if not table.applies[net] or not margin < np.inf:  # NaN is open, -inf fails by far
            continue
        if margin < 0:
            failing.append(-margin < -table.error_low[net, candidate])
        else:
            narrow.append(margin < table.error_high[net, candidate])
    return any(narrow) if verdict == "inside" else bool(failing) and all(failing)


def exit_code(results: Results) -> int:
    """0 every judged net is (or can be) inside, 1 some are not.

    ``check`` asks for the verdict as drawn, ``plan`` and ``explain`` for the one after the
    proposals.  Undecided nets count as findings unless the policy says ``warn``; waived
    findings and those about what no model holds for (`results.BEYOND_MODEL`) do not count.

    Parameters
    ----------
    results : Results
        With its findings and policy.

    Returns
    -------
    int
        0 or 1; what could not be judged at all never gets here (2).

    Examples
    --------
    >>> from types import SimpleNamespace as Some
    >>> finding = Some(rule="edge-undecided", waived=None)
    >>> [exit_code(Some(undecided_policy=p, findings=[finding])) for p in ("fail", "warn")]
    [1, 0]
    """
    counted = [f for f in results.findings if f.waived is None and f.rule not in BEYOND_MODEL]
    if results.undecided_policy == "warn":
        counted = [f for f in counted if f.rule != "edge-undecided"]
    return FINDINGS if counted else PASS
