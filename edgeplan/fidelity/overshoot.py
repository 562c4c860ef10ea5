"""Overshoot and undershoot at each receiver against what it accepts."""

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen

ENGINE_ERROR = 3e-3  # of the swing, 99.9 % of readings against a four times finer run


def checks(seen: Seen) -> list[CheckTable]:
    """Peak beyond the final level, fast corner, both edges. Margin in V.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``overshoot``. [V]
    """
    worst = Worst("overshoot", "slower", "V", seen.shape)
    swing = seen.per_receiver(seen.nets.swing_v["fast"])
    limit = seen.nets.overshoot_limit["fast"][:, None] * swing
    for r in seen.at("fast"):
        worst.add(
            seen.nets.first_receiver,
            r.overshoot * swing,
            limit,
            limit,
            r.condition,
            error=ENGINE_ERROR * swing,
        )
    return [worst.table()]
