"""Settling of one bit: the worst level that any pattern of earlier bits leaves at its end."""

import numpy as np

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen

ENGINE_ERROR = 1e-3  # of the swing, signal engine against an independent solution


def checks(seen: Seen) -> list[CheckTable]:
    """Worst level at the end of a bit against the threshold. Margin in V of the slow corner."""
    worst = Worst("settling", "faster", "V", seen.shape)
    swing = seen.per_receiver(seen.nets.swing_v["slow"])
    applies = seen.per_receiver(np.isfinite(seen.nets.bit_s))
    for r in seen.at("slow"):
        limit = np.where(applies, r.end_level, np.nan)
        worst.add(
            seen.nets.first_receiver,
            r.worst_level * swing,
            limit * swing,
            (1 - r.end_level) * swing,
            r.condition,
            larger_is_better=True,
            error=ENGINE_ERROR * swing,
        )
    return [worst.table()]
