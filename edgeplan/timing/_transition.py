"""Longest transition an input accepts, between the levels it is stated for."""

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen


def checks(seen: Seen) -> list[CheckTable]:
    """Transition at each receiver against its own limit, slow corner. Margin in s."""
    worst = Worst("transition", "faster", "s", seen.shape)
    limit = seen.nets.longest_transition_s[:, None]
    for r in seen.at("slow"):
        worst.add(
            seen.nets.first_receiver,
            r.transition_s,
            limit,
            limit,
            r.condition,
            error=r.error_s,
        )
    return [worst.table()]
