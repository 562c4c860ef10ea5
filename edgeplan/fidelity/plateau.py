"""Plateau: between the thresholds an event must go on in one direction."""

import numpy as np

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen

ENGINE_ERROR = 0.01  # of the mean slope: a dip no larger may be the engine's own ripple


def checks(seen: Seen) -> list[CheckTable]:
    """Lowest slope within the edge over its mean slope, both corners; below zero it turns back.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``plateau``, relative to the mean slope. [-]
    """
    worst = Worst("plateau", "slower", "1", seen.shape)
    for r in seen.received:
        span = seen.nets.transition_high[r.corner] - seen.nets.transition_low[r.corner]
        mean_slope = span[:, None] / r.transition_s
        relative = r.slope_min / mean_slope
        worst.add(
            seen.nets.first_receiver,
            relative,
            np.full_like(relative, -ENGINE_ERROR),
            np.ones_like(relative),
            r.condition,
            larger_is_better=True,
            error=ENGINE_ERROR,
        )
    return [worst.table()]
