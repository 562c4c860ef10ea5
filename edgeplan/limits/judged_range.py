"""From where to where a set of limit lines is judged."""

from collections.abc import Collection, Sequence
from math import isinf
from typing import NamedTuple

from edgeplan.limits.highest_frequency import END_OF_LINE, highest_frequency_hz
from edgeplan.limits.lines import LimitLine


class JudgedRange(NamedTuple):
    """Where the lines begin, where the measurement ends by its rule, what of it they cover."""

    lowest_hz: float
    highest_hz: float
    rule: str
    covered_to_hz: float
    unverified_rules: tuple[str, ...]


def judged_range(
    lines: Sequence[LimitLine], own: Collection[str], highest_internal_hz: float | None
) -> JudgedRange:
    """Range in which the lines of a board are judged.

    Parameters
    ----------
    lines : sequence of LimitLine
        At least one.
    own : collection of str
        Ids of the user's own lines: no rule of a standard ends them.
    highest_internal_hz : float or None
        Highest frequency generated or used inside the device. [Hz]

    Returns
    -------
    JudgedRange
        The first rule that is more than the end of a line decides. [Hz]

    Examples
    --------
    >>> from edgeplan.limits.shipped import line
    >>> found = judged_range([line("cispr32-class-b-3m")], (), 100e6)
    >>> found.lowest_hz / 1e6, found.covered_to_hz / 1e6
    (30.0, 1000.0)
    """
    rules = [highest_frequency_hz(x.id, highest_internal_hz) for x in lines if x.id not in own]
    by_rule = [r for r in rules if r.rule != END_OF_LINE] or rules
    covered = max(x.highest_hz for x in lines)
    highest = by_rule[0].highest_hz if by_rule else covered
    highest = covered if isinf(highest) else highest
    return JudgedRange(
        lowest_hz=min(x.lowest_hz for x in lines),
        highest_hz=highest,
        rule=by_rule[0].rule if by_rule else END_OF_LINE,
        covered_to_hz=min(covered, highest),
        unverified_rules=tuple(sorted({r.rule for r in by_rule if not r.verified})),
    )
