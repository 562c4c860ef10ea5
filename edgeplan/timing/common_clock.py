r"""Common clock: driver and receiver share one clock.

.. math::

    t_{co,max} + F_{max} + t_{su} + t_{isi} + t_{xt} + t_{jit} + t_{skew} \le T
    \qquad
    t_{co,min} + F_{min} \ge t_h + t_{skew}

F is the flight time: the crossing at the receiver less the crossing of the driver's own
test load, same driver and corner, at the setting that the clock-to-output is stated for.
The skew covers the clock as drawn; a proposal that moves the clock counts on top.
"""

from edgeplan.checks import CheckTable, Worst
from edgeplan.received import Seen
from edgeplan.timing import _clock_shift, _settling, _stated, _transition


def checks(seen: Seen) -> list[CheckTable]:
    """Setup, hold, settling between bits and input transition. Margins in s and V.

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


def _setup(seen: Seen) -> CheckTable:
    """Latest arrival and setup time against the period, slow corner."""
    worst = Worst("setup", "faster", "s", seen.shape)
    facts = seen.nets.facts
    period = seen.per_receiver(_stated.per_net(facts, _stated.period_s))
    outside = seen.per_receiver(
        _stated.per_net(facts, _stated.latest_output_s)
        + _stated.per_net(facts, _stated.setup_s)
        + _stated.per_net(facts, _stated.allowance_s)
    )
    for r in seen.at("slow"):
        later = _clock_shift.penalties_s(seen, r.corner)[0]
        needed = outside + later + r.last_s - r.reference_s + r.interference_s
        worst.add(seen.nets.first_receiver, needed, period, period, r.condition, error=r.error_s)
    _stated.require(
        worst, facts, ("rate", "direction", "setup", "maximum clock-to-output", "test load")
    )
    return worst.table()


def _hold(seen: Seen) -> CheckTable:
    """Earliest change against the hold time, fast corner."""
    worst = Worst("hold", "slower", "s", seen.shape)
    facts = seen.nets.facts
    period = seen.per_receiver(_stated.per_net(facts, _stated.period_s))
    earliest = seen.per_receiver(_stated.per_net(facts, _stated.earliest_output_s))
    needed = seen.per_receiver(
        _stated.per_net(facts, _stated.hold_s)
        + _stated.per_net(facts, lambda f: f.interface.skew_s)
    )
    for r in seen.at("fast"):
        worst.add(
            seen.nets.first_receiver,
            earliest + r.first_s - r.reference_s,
            needed + _clock_shift.penalties_s(seen, r.corner)[1],
            period,
            r.condition,
            larger_is_better=True,
            error=r.error_s,
        )
    _stated.require(
        worst, facts, ("rate", "direction", "hold", "minimum clock-to-output", "test load")
    )
    return worst.table()
