"""A net as a row of words: what the table and the merge-request report have in common."""

from dataclasses import dataclass

from edgeplan.names import natural_key
from edgeplan.reports import phrases
from edgeplan.results import Check, Missing, NetResult, Remedy, Results

SLOWED = 1.5  # a receiver's transition is printed beyond this multiple of the launched edge
BORDERLINE = " (b)"


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One net in words; ``below`` holds the sentences printed under its row."""

    net: str
    edge_now: str
    window_now: str
    verdict: str
    binds: str
    proposal: str
    edge_after: str
    window_after: str
    margin: str
    below: tuple[str, ...] = ()


def in_order(results: Results) -> list[NetResult]:
    """Return the nets by interface and name, both in natural order."""
    return sorted(results.nets, key=lambda net: (natural_key(net.interface), natural_key(net.net)))


def row(net: NetResult) -> Row:
    """Put one net in words.

    Parameters
    ----------
    net : NetResult
        A judged net.

    Returns
    -------
    Row
        Its cells; every text still as it came, so a format escapes in its own way.
    """
    return Row(
        net=net.net,
        edge_now=phrases.edge_span(net.edge_now_s),
        window_now=phrases.window_span(net.window_now),
        verdict=net.verdict + (BORDERLINE if net.borderline else ""),
        binds=net.what_binds or "nothing",
        proposal=net.proposal_text,
        edge_after=phrases.edge_span(net.edge_after_s),
        window_after=phrases.window_span(net.window_after),
        margin=_margin(net),
        below=below(net),
    )


def tightest(net: NetResult, candidate: int) -> Check | None:
    """Return the check of one candidate with the smallest share, the first of equals.

    Parameters
    ----------
    net : NetResult
        A judged net.
    candidate : int
        Number of the candidate.

    Returns
    -------
    Check or None
        None where no check of this candidate has a margin.
    """
    checks = [
        check
        for check in net.checks
        if check.candidate == candidate and check.decided and check.margin_share is not None
    ]
    return min(checks, key=lambda check: check.margin_share or 0.0, default=None)


def nearest_flip(net: NetResult, candidate: int) -> Check | None:
    """Return the check that makes a candidate borderline: least margin over its model's error.

    Parameters
    ----------
    net : NetResult
        A judged net.
    candidate : int
        Number of the candidate.

    Returns
    -------
    Check or None
        None where no check of this candidate has a margin and an error.
    """
    checks = [
        (margin / error, check)
        for check in net.checks
        if check.candidate == candidate and check.decided
        if (margin := check.margin) is not None and (error := _error(check)) > 0
    ]
    return min(checks, key=lambda pair: pair[0], default=(0.0, None))[1]


def _error(check: Check) -> float:
    """Error on the side that could change the outcome, as a size."""
    if check.error is None:
        return 0.0
    return -check.error.low if (check.margin or 0.0) < 0 else check.error.high


def _margin(net: NetResult) -> str:
    """Tightest margin of the proposal, and the verdict after it where that is not ``inside``."""
    check = nearest_flip(net, net.proposal) if net.borderline_after else None
    check = check or tightest(net, net.proposal)
    words = phrases.UNKNOWN if check is None else phrases.margin(check)
    if net.verdict_after == "undecided":
        # what is known so far must not read as the margin of the net
        known = "" if check is None else f" ({words} known)"
        return phrases.UNKNOWN + known
    changed = net.proposal != net.candidate_now or net.verdict_after != net.verdict
    if changed and net.verdict_after != "inside":
        words = f"{net.verdict_after}; {words}"
    return words + (BORDERLINE if net.borderline_after else "")


def below(net: NetResult) -> tuple[str, ...]:
    """Return the sentences under a row: receiver's transition, missing values, remedies."""
    sentences = [_levels(net), _transition(net), *(missing(entry) for entry in net.missing)]
    if net.verdict_after not in ("inside", "undecided"):
        sentences.append(remedies(net.remedies))
    return tuple(sentence for sentence in sentences if sentence)


def _levels(net: NetResult) -> str:
    """Tell levels of the edge that are not those of the heading."""
    return "" if net.edge_levels == "10-90" else f"edges between {net.edge_levels} %"


def _transition(net: NetResult) -> str:
    """Tell the receiver's transition, slow corner, where line and load make it, not the edge."""
    now = _slowed(net.transition_now_s, net.edge_now_s.slow)
    after = _slowed(net.transition_after_s, net.edge_after_s.slow)
    times = ((now, "now"), (after, "after"))
    words = now if now == after else ", ".join(f"{time} {when}" for time, when in times if time)
    reason = "the resistor and the load set it"
    return f"transition at the receiver {words}: {reason}" if words else ""


def _slowed(transition_s: float | None, edge_s: float | None) -> str:
    """Write a transition that is much longer than its edge; empty otherwise."""
    if transition_s is None or edge_s is None or transition_s <= SLOWED * edge_s:
        return ""
    return phrases.engineering(transition_s, "s")


def missing(entry: Missing) -> str:
    """Tell which value a verdict waits for and from which value on the net would be inside."""
    settles = f": {entry.settles}" if entry.settles else ""
    return f"needs {entry.value} of {entry.of}{settles}"


def remedies(entries: list[Remedy]) -> str:
    """Tell the sized remedies in the record's order."""
    return f"remedies: {'; '.join(map(_remedy, entries))}" if entries else ""


def _remedy(entry: Remedy) -> str:
    """Write one remedy with its amount and what it closes."""
    amount = "" if entry.amount is None else f" {phrases.engineering(entry.amount, entry.unit)}"
    closes = [
        phrases.engineering(value, unit)
        for value, unit in ((entry.closes_db, "dB"), (entry.closes_s, "s"))
        if value is not None
    ]
    what = f"{entry.remedy}{amount}" if not entry.text else entry.text
    return f"{what} (closes {', '.join(closes)})" if closes else what
