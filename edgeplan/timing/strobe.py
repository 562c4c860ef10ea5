"""Strobe: an event like a clock, but not periodic: no steady state and no duty."""

from edgeplan.checks import CheckTable
from edgeplan.received import Seen
from edgeplan.timing import _settling, _transition, clock


def checks(seen: Seen) -> list[CheckTable]:
    """Input transition, level at the end of a pulse, jitter, plateau and ringback.

    Parameters
    ----------
    seen : Seen
        Nets of one timing class with their candidates and readings.

    Returns
    -------
    list of CheckTable
        ``transition``, ``settling``, ``jitter``, ``plateau``, ``ringback``. [s], [V], [-]
    """
    return [*_transition.checks(seen), *_settling.checks(seen), *clock.event_checks(seen)]
