"""What a changed clock does to the data it samples: the stated skew covers the board as drawn.

A proposal that slows or delays a clock moves the instant at which its receivers sample. Data
that leave with the clock (same part drives both) then have less hold and, if the clock comes
earlier, less setup; data that come back to it the other way round. Nothing is credited.
"""

from math import isnan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.nets import NetFacts
from edgeplan.received import Seen

Array = NDArray[Any]


def penalties_s(seen: Seen, corner: str) -> tuple[Array, Array]:
    """Time that setup and hold lose by the change of the net's clock, (R, 1) each. [s]

    Parameters
    ----------
    seen : Seen
        Nets with the flights of their clocks as drawn and as chosen.
    corner : {"slow", "fast"}
        Where.

    Returns
    -------
    numpy.ndarray, numpy.ndarray
        0 where the clock stays as drawn or is not a net of the board.
    """
    pairs = [_net_penalties_s(seen, f, corner) for f in seen.nets.facts]
    setup, hold = np.array(pairs, dtype=float).reshape(-1, 2).T
    return seen.per_receiver(setup), seen.per_receiver(hold)


def _net_penalties_s(seen: Seen, facts: NetFacts, corner: str) -> tuple[float, float]:
    """Setup and hold penalty of one net. [s]"""
    name = facts.interface.clock_net or ""
    drawn, chosen = seen.strobe_drawn.get(name, {}), seen.strobe.get(name, {})
    shifts = [
        chosen[corner, which] - drawn[corner, which]
        for which in ("first", "last")
        if (corner, which) in drawn and (corner, which) in chosen
    ]
    shifts = [shift for shift in shifts if not isnan(shift)]
    later, earlier = max([0.0, *shifts]), max([0.0, *(-shift for shift in shifts)])
    source, targets = seen.clock_parts.get(name, ("", frozenset()))
    own = part_of(facts.net.driver_pin[0]) if facts.net.driver_pin else ""
    if own and own == source:
        return earlier, later
    if own and own in targets:
        return later, earlier
    either = max(later, earlier)
    return either, either


def part_of(pin: str) -> str:
    """Part of a pin.

    >>> part_of("U1.K4")
    'U1'
    """
    return pin.partition(".")[0]
