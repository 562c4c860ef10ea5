r"""Source synchronous: the driver sends a strobe along with the data.

Per corner, since data and strobe leave the same die:

.. math::

    t_{vb} - (F_{D,max} - F_{S,min}) - t_{su} - t_{isi} - t_{xt} - t_{jit} - t_{skew} \ge 0
    \qquad
    t_{va} - (F_{S,max} - F_{D,min}) - t_h - t_{skew} \ge 0

Each flight time counts from the crossing of the driver's own test load.
"""

from collections.abc import Mapping

import numpy as np

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Received, Seen
from edgeplan.results import Missing
from edgeplan.timing import _settling, _stated, _transition


def checks(seen: Seen) -> list[CheckTable]:
    """Setup and hold against the strobe, settling and input transition. Margins in s and V.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``setup``, ``hold``, ``settling``, ``transition``. [s], [V]
    """
    return [_setup(seen), _hold(seen), *_settling.checks(seen), *_transition.checks(seen)]


def _strobe_flight(seen: Seen, corner: str, which: str) -> np.ndarray:
    """Earliest or latest flight of each net's strobe, (R, 1); NaN where it is not known. [s]"""
    flights = [
        seen.strobe.get(f.interface.clock_net or "", {}).get((corner, which))
        for f in seen.nets.facts
    ]
    return seen.per_receiver(np.array([_stated.number(value) for value in flights]))


def _needs(worst: Worst, seen: Seen, valid: str, own: str) -> None:
    """Undecided without the driver's valid time, the receiver's time, a test load or a strobe."""
    facts = seen.nets.facts
    _stated.require(worst, facts, ("direction", valid, own, "test load"))
    for i, f in enumerate(facts):
        strobe = f.interface.clock_net or ""
        if strobe not in seen.strobe:
            missing = Missing(value="clock_net", of=f"interface {f.interface.name}")
            worst.cannot(i, f"the strobe of interface {f.interface.name} is not known", missing)
        elif not _known(seen.strobe[strobe]) and not f.settings[f.setting].missing:
            missing = Missing(value="flight time", of=f"net {strobe}")
            worst.cannot(i, f"the flight time of strobe {strobe} is not known", missing)


def _known(flights: Mapping[tuple[str, str], float]) -> bool:
    """Whether a strobe has a flight time at both corners."""
    return all(np.isfinite(value) for value in flights.values())


def _bit(seen: Seen) -> np.ndarray:
    """One bit per receiver, what shares are measured against. [s]"""
    return seen.per_receiver(seen.nets.bit_s)


def _setup(seen: Seen) -> CheckTable:
    """Latest data against the earliest strobe, each corner."""
    worst = Worst("setup", "faster", "s", seen.shape)
    facts = seen.nets.facts
    valid = seen.per_receiver(_stated.per_net(facts, _stated.valid_before_s))
    own = seen.per_receiver(
        _stated.per_net(facts, _stated.setup_s) + _stated.per_net(facts, _stated.allowance_s)
    )
    for r in seen.received:
        latest = r.last_s - r.reference_s + r.interference_s
        needed = latest - _strobe_flight(seen, r.corner, "first") + own
        _add(worst, seen, r, needed, valid)
    _needs(worst, seen, "valid before", "setup")
    return worst.table()


def _hold(seen: Seen) -> CheckTable:
    """Earliest data against the latest strobe, each corner."""
    worst = Worst("hold", "slower", "s", seen.shape)
    facts = seen.nets.facts
    valid = seen.per_receiver(_stated.per_net(facts, _stated.valid_after_s))
    own = seen.per_receiver(
        _stated.per_net(facts, _stated.hold_s)
        + _stated.per_net(facts, lambda f: f.interface.skew_s)
    )
    for r in seen.received:
        needed = _strobe_flight(seen, r.corner, "last") - (r.first_s - r.reference_s) + own
        _add(worst, seen, r, needed, valid)
    _needs(worst, seen, "valid after", "hold")
    return worst.table()


def _add(worst: Worst, seen: Seen, r: Received, needed: np.ndarray, valid: np.ndarray) -> None:
    """What is needed against what the driver gives."""
    worst.add(seen.nets.first_receiver, needed, valid, _bit(seen), r.condition, error=r.error_s)
