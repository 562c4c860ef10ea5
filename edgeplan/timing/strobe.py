"""Strobe: an event like a clock, but not periodic: no steady state and no duty."""

from edgeplan.checks import CheckTable
from edgeplan.received import Seen
from edgeplan.timing import _settling, _transition, clock


def checks(seen: Seen) -> list[CheckTable]:
    """Input transition, level at the end of a pulse, jitter, plateau and ringback."""
    return [*_transition.checks(seen), *_settling.checks(seen), *clock.event_checks(seen)]
