r"""Asynchronous and slow nets: a deadline, an input transition, a pulse that must survive.

.. math:: t_{co} + F_{max} \le t_{deadline}
    \qquad T_{pulse} - (F_{max} - F_{min}) \ge t_{min}
"""

import numpy as np

from edgeplan import fidelity
from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen
from edgeplan.timing import _settling, _stated, _transition


def checks(seen: Seen) -> list[CheckTable]:
    """Deadline, pulse, settling, input transition and no second crossing.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``deadline``, ``pulse width``, ``settling``, ``transition``, ``ringback``. [s], [V]
    """
    return [
        _deadline(seen),
        _pulse(seen),
        *_settling.checks(seen),
        *_transition.checks(seen),
        *fidelity.checks_of("ringback")(seen),
    ]


def _deadline(seen: Seen) -> CheckTable:
    """Latest arrival against a stated deadline, slow corner; without output delay from the edge."""
    worst = Worst("deadline", "faster", "s", seen.shape)
    facts = seen.nets.facts
    limit = seen.per_receiver(_stated.per_net(facts, lambda f: f.interface.deadline_s))
    delay = np.nan_to_num(_stated.per_net(facts, _stated.latest_output_s))
    with_output = seen.per_receiver(
        np.array([_stated.latest_output_s(f) is not None for f in facts])
    )
    for r in seen.at("slow"):
        start = np.where(with_output, r.reference_s, 0.0)
        arrival = seen.per_receiver(delay) + r.last_s - start + r.interference_s
        worst.add(seen.nets.first_receiver, arrival, limit, limit, r.condition, error=r.error_s)
    for i, f in enumerate(facts):
        if f.interface.deadline_s is not None and _stated.latest_output_s(f) is not None:
            _stated.require_one(worst, i, f, "test load")
    return worst.table()


def _pulse(seen: Seen) -> CheckTable:
    """Shortest pulse left at the receiver, both corners."""
    worst = Worst("pulse width", "faster", "s", seen.shape)
    facts = seen.nets.facts
    shortest = _stated.per_net(facts, lambda f: f.interface.shortest_pulse_s)
    limit = seen.per_receiver(shortest)
    bit = seen.per_receiver(seen.nets.bit_s)
    for r in seen.received:
        width = bit - (r.last_s - r.first_s)
        worst.add(
            seen.nets.first_receiver,
            width,
            limit,
            limit,
            r.condition,
            larger_is_better=True,
            error=2 * r.error_s,
        )
    _stated.require_rate(worst, facts, shortest)
    return worst.table()
