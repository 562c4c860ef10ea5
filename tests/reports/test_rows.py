"""The tightest margin of a row: which check, and what it says of a net still open."""

import dataclasses

from edgeplan.reports import rows
from edgeplan.results import Check, Condition, Spread


def check(name, margin, share, error, *, unit="s"):
    return Check(
        check=name,
        candidate=0,
        condition=Condition(),
        value=1.0,
        limit=1.0,
        margin=margin,
        unit=unit,
        margin_share=share,
        decided=True,
        wants="slower",
        error=Spread(low=-error, high=error),
    )


HOLD = check("hold", 0.5e-9, 0.05, 0.1e-9)  # five times its error
EMISSION = check("emission", 2.0, 0.2, 4.0, unit="dB")  # half its error


def net_with(results, **changes):
    stay = {"proposal": 0, "candidate_now": 0, "verdict": "inside", "verdict_after": "inside"}
    return dataclasses.replace(
        results.nets[0], **{**stay, "borderline_after": False, "checks": [HOLD, EMISSION]} | changes
    )


def test_a_clear_net_shows_its_smallest_share(results):
    assert rows.row(net_with(results)).margin == "+500 ps hold"


def test_a_borderline_net_shows_the_check_that_makes_it_borderline(results):
    assert rows.row(net_with(results, borderline_after=True)).margin == "+2.0 dB emission (b)"


def test_of_failing_checks_the_one_nearest_to_certain_is_shown(results):
    checks = [check("hold", -0.2e-9, -0.9, 1e-9), check("setup", -0.5e-9, -0.1, 1e-9)]
    outside = {"verdict": "too fast", "verdict_after": "too fast", "borderline_after": True}
    assert rows.row(net_with(results, checks=checks, **outside)).margin == "-500 ps setup (b)"


def test_an_undecided_net_shows_a_question_mark_before_what_is_known(results):
    open_net = {"verdict": "undecided", "verdict_after": "undecided"}
    assert rows.row(net_with(results, **open_net)).margin == "? (+500 ps hold known)"
    assert rows.row(net_with(results, checks=[], **open_net)).margin == "?"
