"""Ringback: after the first peak an edge must not fall back through its threshold."""

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen

ENGINE_ERROR = 1.4e-3  # of the swing, 99 % of readings against a four times finer run


def checks(seen: Seen) -> list[CheckTable]:
    """Lowest level after the first peak against the threshold, fast corner. Margin in V.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``ringback``. [V]
    """
    worst = Worst("ringback", "slower", "V", seen.shape)
    swing = seen.per_receiver(seen.nets.swing_v["fast"])
    for r in seen.at("fast"):
        worst.add(
            seen.nets.first_receiver,
            r.ringback * swing,
            r.end_level * swing,
            (1 - r.end_level) * swing,
            r.condition,
            larger_is_better=True,
            error=ENGINE_ERROR * swing,
        )
    return [worst.table()]
