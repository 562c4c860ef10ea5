"""A row per net for a spreadsheet: RFC 4180 quoting, units in the headers, numbers as numbers."""

import csv
import io
import math
from collections.abc import Callable

from edgeplan.reports import phrases, rows
from edgeplan.results import Check, NetResult, NotJudged, Results, WindowEnd

Cell = str | int | float | None

_FORMULA = ("=", "+", "-", "@")


def _ns(duration_s: float | None) -> float | None:
    """Return a duration in nanoseconds with nine figures; nothing for no number."""
    if duration_s is None or not math.isfinite(duration_s):
        return None
    return float(f"{duration_s * 1e9:.9g}")


def _number(value: float | None) -> float | None:
    """Return a number with nine figures; nothing for no number."""
    if value is None or not math.isfinite(value):
        return None
    return float(f"{value:.9g}")


def _word(end: WindowEnd) -> str:
    """Tell what a window's end means when it is no number: any, none, or undecided."""
    word = phrases.window_end(end)
    return {phrases.UNKNOWN: "undecided"}.get(word, word if word in ("any", "none") else "")


def _edge_of(end: WindowEnd) -> float | None:
    """Return a window end in nanoseconds; nothing where it is a word."""
    return None if _word(end) else _ns(end.edge_s)


def _tightest(read: Callable[[Check], Cell], *, now: bool) -> Callable[[NetResult], Cell]:
    """Read one thing of the tightest check, as drawn or as proposed."""

    def cell(net: NetResult) -> Cell:
        check = rows.tightest(net, net.candidate_now if now else net.proposal)
        return None if check is None else read(check)

    return cell


def _unit(check: Check) -> str:
    """Name the unit of a margin."""
    return "share" if check.unit in phrases.SHARE else check.unit


def _yes(condition: object) -> str:
    """Write a condition as a word."""
    return "yes" if condition else "no"


COLUMNS: dict[str, Callable[[NetResult], Cell]] = {
    "net": lambda net: net.net,
    "aliases": lambda net: " ".join(net.aliases),
    "interface": lambda net: net.interface,
    "timing_class": lambda net: net.timing_class,
    "file": lambda net: net.at.file,
    "row": lambda net: net.at.row,
    "verdict": lambda net: net.verdict,
    "verdict_after": lambda net: net.verdict_after,
    "borderline": lambda net: _yes(net.borderline),
    "borderline_after": lambda net: _yes(net.borderline_after),
    "what_binds": lambda net: net.what_binds,
    "change": lambda net: net.change,
    "proposal": lambda net: net.proposal_text,
    "edge_levels": lambda net: net.edge_levels.replace("-", " to "),  # not read as a date
    "edge_now_fast_ns": lambda net: _ns(net.edge_now_s.fast),
    "edge_now_typical_ns": lambda net: _ns(net.edge_now_s.typical),
    "edge_now_slow_ns": lambda net: _ns(net.edge_now_s.slow),
    "window_now_fastest_ns": lambda net: _edge_of(net.window_now.fastest_acceptable),
    "window_now_fastest_word": lambda net: _word(net.window_now.fastest_acceptable),
    "window_now_slowest_ns": lambda net: _edge_of(net.window_now.slowest_allowed),
    "window_now_slowest_word": lambda net: _word(net.window_now.slowest_allowed),
    "tightest_check_now": _tightest(lambda check: check.check, now=True),
    "tightest_margin_now": _tightest(lambda check: _number(check.margin), now=True),
    "tightest_margin_now_unit": _tightest(_unit, now=True),
    "edge_after_fast_ns": lambda net: _ns(net.edge_after_s.fast),
    "edge_after_typical_ns": lambda net: _ns(net.edge_after_s.typical),
    "edge_after_slow_ns": lambda net: _ns(net.edge_after_s.slow),
    "window_after_fastest_ns": lambda net: _edge_of(net.window_after.fastest_acceptable),
    "window_after_fastest_word": lambda net: _word(net.window_after.fastest_acceptable),
    "window_after_slowest_ns": lambda net: _edge_of(net.window_after.slowest_allowed),
    "window_after_slowest_word": lambda net: _word(net.window_after.slowest_allowed),
    "tightest_check_after": _tightest(lambda check: check.check, now=False),
    "tightest_margin_after": _tightest(lambda check: _number(check.margin), now=False),
    "tightest_margin_after_unit": _tightest(_unit, now=False),
    "transition_now_ns": lambda net: _ns(net.transition_now_s),
    "transition_after_ns": lambda net: _ns(net.transition_after_s),
    "remarks": lambda net: "; ".join((*net.undecided_because, *rows.below(net), *net.notes)),
}


def render(results: Results, *, width: int | None, colour: bool) -> str:  # noqa: ARG001
    """Write a row per net, those outside the question last.

    Parameters
    ----------
    results : Results
        The record of one run.
    width, colour
        Have no meaning here.

    Returns
    -------
    str
        Comma-separated values, one heading row, lines ended by a line feed.
    """
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(COLUMNS)
    for net in rows.in_order(results):
        writer.writerow([_cell(read(net)) for read in COLUMNS.values()])
    writer.writerows([_cell(value) for value in _not_judged(net)] for net in results.not_judged)
    return text.getvalue()


def _not_judged(net: NotJudged) -> list[Cell]:
    """Return the row of a net outside the question: its name, its verdict and why."""
    known: dict[str, Cell] = {"net": net.net, "verdict": "not judged", "remarks": net.reason}
    return [known.get(name) for name in COLUMNS]


def _cell(value: Cell) -> Cell:
    """Return a cell that a spreadsheet shows and never runs; numbers stay numbers.

    >>> _cell("=1+1"), _cell(-4.4)
    ("'=1+1", -4.4)
    """
    if not isinstance(value, str):
        return value
    text = phrases.inert(value)
    return f"'{text}" if text.lstrip().startswith(_FORMULA) else text
