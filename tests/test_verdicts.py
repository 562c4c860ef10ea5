"""Verdicts from checks: every combination, borderline both ways, and the exit code."""

from itertools import product

import numpy as np
import pytest

from edgeplan.checks import Worst
from edgeplan.evaluate import Evaluation
from edgeplan.verdicts import exit_code, judge
from edgeplan.windows import UNDECIDED, End, StateWindow

COND = ("slow", "rising", "run")


def table(name, wants, margin, error=0.0):
    """Make a check of one net and one candidate with a margin in its own unit; NaN is open."""
    worst = Worst(name, wants, "s", (1, 1))
    value = np.array([[10.0 - margin]])
    worst.add(np.array([0, 1]), value, 10.0, 10.0, COND, error=error)
    return worst.table()


def evaluation(*tables):
    return Evaluation(tables=tables, exists=np.ones((1, 1), dtype=bool))


def window(fastest=0.5, slowest=2.0, why_none=""):
    return StateWindow(
        slowest=End(factor=slowest),
        fastest=End(factor=fastest, why_none=why_none),
        slowest_edge_s=2e-9,
        fastest_edge_s=0.5e-9,
        edge_s=1e-9,
        limit_edge_s={},
    )


def verdict(faster, slower, opened, holds, can_pass):
    """Judge one candidate by which sides fail, what is open and where its edge lies."""
    tables = [table("setup", "faster", -1 if faster else 1)]
    tables.append(table("emission", "slower", -1 if slower else 1))
    if opened:
        tables.append(table("hold", "slower", np.nan))
    found = window() if holds else window(fastest=1.5)
    return judge(evaluation(*tables), 0, 0, found, can_pass=can_pass)


def expected(faster, slower, opened, holds, can_pass):
    """Read the table of verdicts in words."""
    if faster and slower:
        return "no window"
    if faster:
        return "too slow" if can_pass else "no window"
    if slower:
        return "too fast" if can_pass else "no window"
    if opened:
        return "undecided"
    if holds:
        return "inside"
    return "too fast" if can_pass else "no window"  # a pass below the window is luck


@pytest.mark.parametrize("case", list(product([False, True], repeat=5)), ids=str)
def test_every_combination_has_its_verdict(case):
    assert verdict(*case).verdict == expected(*case)


def test_a_net_without_any_check_is_inside():
    assert judge(evaluation(), 0, 0, window(), can_pass=True).verdict == "inside"


def test_a_window_that_could_not_be_decided_does_not_hold_the_edge():
    assert not window(why_none=UNDECIDED).holds_present_edge
    assert window(1.0, 1.0).holds_present_edge


@pytest.mark.parametrize(
    ("margin", "error", "borderline"), [(2.0, 3.0, True), (4.0, 3.0, False), (-1.0, 0.5, False)]
)
def test_inside_by_less_than_the_error_is_borderline(margin, error, borderline):
    found = evaluation(table("setup", "faster", margin, error), table("hold", "slower", 5.0, 1.0))
    judged = judge(found, 0, 0, window(), can_pass=True)
    assert judged.borderline == borderline


def test_outside_by_less_than_the_error_is_borderline_only_if_every_failing_check_is():
    near, far = table("emission", "slower", -1.0, 3.4), table("overshoot", "slower", -1.0, 0.1)
    one = judge(evaluation(near), 0, 0, window(), can_pass=True)
    both = judge(evaluation(near, far), 0, 0, window(), can_pass=True)
    assert (one.verdict, one.borderline) == ("too fast", True)
    assert (both.verdict, both.borderline) == ("too fast", False)


def test_a_check_that_is_outside_by_any_amount_is_not_borderline():
    near, never = table("emission", "slower", -1.0, 3.4), table("hold", "slower", -np.inf, 1e-12)
    assert not judge(evaluation(near, never), 0, 0, window(), can_pass=True).borderline


def test_what_does_not_apply_makes_nothing_borderline():
    absent = Worst("jitter", "faster", "s", (1, 1)).table()
    found = evaluation(table("setup", "faster", 5.0, 1.0), absent)
    judged = judge(found, 0, 0, window(), can_pass=True)
    assert (judged.verdict, judged.borderline) == ("inside", False)


def test_luck_and_the_undecided_are_never_borderline():
    near = table("setup", "faster", 1.0, 3.0)
    lucky = judge(evaluation(near), 0, 0, window(fastest=1.5), can_pass=True)
    opened = judge(evaluation(near, table("hold", "slower", np.nan)), 0, 0, window(), can_pass=True)
    assert (lucky.verdict, lucky.borderline) == ("too fast", False)
    assert (opened.verdict, opened.borderline) == ("undecided", False)


class Record:
    """Hold what the exit code reads."""

    def __init__(self, policy, *findings):
        self.undecided_policy = policy
        self.findings = [Finding(*f) for f in findings]


class Finding:
    """Hold a rule and whether somebody waived it."""

    def __init__(self, rule, waived=None):
        self.rule, self.waived = rule, waived


@pytest.mark.parametrize(
    ("policy", "findings", "code"),
    [
        ("fail", [], 0),
        ("fail", [("edge-too-fast",)], 1),
        ("fail", [("edge-undecided",)], 1),
        ("warn", [("edge-undecided",)], 0),
        ("warn", [("edge-undecided",), ("edge-too-slow",)], 1),
        ("fail", [("edge-too-fast", "until tomorrow")], 0),
    ],
)
def test_the_exit_code_counts_findings_that_nobody_waived(policy, findings, code):
    assert exit_code(Record(policy, *findings)) == code
