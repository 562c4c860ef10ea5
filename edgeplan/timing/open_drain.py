r"""Open drain: the driver pulls down, a resistor pulls up; the resistor is what changes.

The rise between the fractions x1 and x2 of the supply is that of one pole,

.. math:: t = R_p C \ln\frac{1 - x_1}{1 - x_2}, \qquad R_p \ge \frac{V_{DD} - V_{OL}}{I_{OL}}

(0.8473 R C between 30 and 70 %).  The falling edge is the driver's, judged as on any net.
"""

import numpy as np

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen
from edgeplan.results import Missing
from edgeplan.timing import _stated, _transition


def checks(seen: Seen) -> list[CheckTable]:
    """Rise by the pull-up, sink current, and the falling edge's own transition.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``rise by pull-up``, ``sink current``, ``transition``. [s], [A]
    """
    return [_rise(seen), _sink(seen), *_transition.checks(seen)]


def bus_capacitance_f(seen: Seen) -> np.ndarray:
    """Capacitance that the pull-up has to charge, (N,): stated bus, or receivers alone. [F]

    Parameters
    ----------
    seen : Seen
        Open-drain nets.

    Returns
    -------
    numpy.ndarray
        Of the slow corner. [F]
    """
    trees = seen.nets.trees["slow"]
    return np.add.reduceat(trees.node_farad, trees.segment_offset[:-1])


def _rise(seen: Seen) -> CheckTable:
    """Rise through the pull-up against the receiver's longest transition, slow corner."""
    worst = Worst("rise by pull-up", "faster", "s", seen.shape)
    nets = seen.nets
    low, high = nets.transition_low["slow"], nets.transition_high["slow"]
    factor = np.log((1 - low) / (1 - high))[:, None]
    constant = seen.candidates.pull_up_ohm * bus_capacitance_f(seen)[:, None]
    rise = factor * (constant * (1 + seen.tolerance))[nets.receiver_net]
    limit = nets.longest_transition_s[:, None]
    worst.add(nets.first_receiver, rise, limit, limit, ("slow", "rising", "run"))
    for i, f in enumerate(nets.facts):
        if f.net.pull_up_ohm is None:
            missing = Missing(value="pull_up_ohm", of=f"net {f.net.net}")
            worst.cannot(i, "no pull-up is given", missing)
        elif not np.isfinite(nets.longest_transition_s[nets.first_receiver[i]]):
            missing = Missing(value="longest_transition", of=f"receiver {f.receivers[0].name}")
            worst.cannot(i, "no longest transition is given", missing)
    return worst.table()


def _sink(seen: Seen) -> CheckTable:
    """Current the driver must sink at the highest supply against what it can."""
    worst = Worst("sink current", "slower", "A", seen.shape)
    nets = seen.nets
    limit = _stated.per_net(nets.facts, lambda f: f.interface.sink_current_a)
    low = np.nan_to_num(_stated.per_net(nets.facts, lambda f: f.interface.output_low_v))
    across = seen.per_receiver(nets.swing_v["fast"] - low)
    current = across / (seen.candidates.pull_up_ohm[nets.receiver_net] * (1 - seen.tolerance))
    judged = seen.per_receiver(limit)
    worst.add(nets.first_receiver, current, judged, judged, ("fast", "falling", "run"))
    return worst.table()
