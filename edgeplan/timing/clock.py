r"""Clock: an edge is an event; its input transition, shape, duty and jitter count.

Noise turns into jitter by the slope at the threshold, :math:`J = V_n / SR`, with SR the
mean slope between the levels the transition is judged at (never above the largest slope).
"""

import numpy as np

from edgeplan import fidelity
from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Received, Seen
from edgeplan.timing import _settling, _stated, _transition


def checks(seen: Seen) -> list[CheckTable]:
    """Input transition, level within half a period, duty, pulse, jitter, plateau, ringback.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``transition``, ``settling``, ``jitter``, ``plateau``, ``ringback``, ``duty``,
        ``pulse width``. [s], [V], [-]
    """
    return [
        *_transition.checks(seen),
        *_settling.checks(seen),
        *event_checks(seen),
        _duty(seen),
        _pulse(seen),
    ]


def event_checks(seen: Seen) -> list[CheckTable]:
    """What every net whose edges are events must hold: jitter, plateau and ringback.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``jitter``, ``plateau``, ``ringback``. [s], [-], [V]
    """
    return [
        _jitter(seen),
        *fidelity.checks_of("plateau")(seen),
        *fidelity.checks_of("ringback")(seen),
    ]


def _jitter(seen: Seen) -> CheckTable:
    """Jitter from stated noise against a stated limit, slow corner."""
    worst = Worst("jitter", "faster", "s", seen.shape)
    facts = seen.nets.facts
    noise = _stated.per_net(facts, lambda f: f.interface.noise_v)
    limit = seen.per_receiver(_stated.per_net(facts, lambda f: f.interface.jitter_limit_s))
    per_swing = seen.per_receiver(noise / seen.nets.swing_v["slow"])
    span = (seen.nets.transition_high["slow"] - seen.nets.transition_low["slow"])[:, None]
    for r in seen.at("slow"):
        jitter = per_swing * r.transition_s / span
        judged = np.where(np.isfinite(per_swing), limit, np.nan)
        worst.add(
            seen.nets.first_receiver,
            jitter,
            judged,
            limit,
            r.condition,
            error=r.error_s * np.nan_to_num(per_swing) / span,
        )
    return worst.table()


def _pairs(seen: Seen) -> list[tuple[Received, Received]]:
    """Rising and falling readings of the same corner and state."""
    by = {(r.corner, r.state, r.edge): r for r in seen.received}
    return [(r, by[(r.corner, r.state, "falling")]) for r in seen.received if r.edge == "rising"]


def _duty(seen: Seen) -> CheckTable:
    """Difference of rising and falling delay over the period against a stated share."""
    worst = Worst("duty", "faster", "s", seen.shape)
    facts = seen.nets.facts
    period = _stated.per_net(facts, lambda f: 1 / f.net.clock_hz if f.net.clock_hz else None)
    limit = seen.per_receiver(
        period * _stated.per_net(facts, lambda f: f.interface.duty_distortion)
    )
    for rising, falling in _pairs(seen):
        distortion = np.abs(rising.last_s - falling.last_s)
        error = rising.error_s + falling.error_s
        worst.add(seen.nets.first_receiver, distortion, limit, limit, rising.condition, error=error)
    return worst.table()


def _pulse(seen: Seen) -> CheckTable:
    """High and low time at the thresholds against the shortest pulse the receiver takes."""
    worst = Worst("pulse width", "faster", "s", seen.shape)
    facts = seen.nets.facts
    half = seen.per_receiver(seen.nets.bit_s)
    shortest = _stated.per_net(facts, lambda f: f.interface.shortest_pulse_s)
    limit = seen.per_receiver(shortest)
    for rising, falling in _pairs(seen):
        for start, stop in ((rising, falling), (falling, rising)):
            width = half - start.last_s + stop.first_s
            worst.add(
                seen.nets.first_receiver,
                width,
                limit,
                limit,
                start.condition,
                larger_is_better=True,
                error=start.error_s + stop.error_s,
            )
    _stated.require_rate(worst, facts, shortest)
    return worst.table()
