"""Logic levels of JEDEC and bus standards, and slow-edge limits of logic families."""

from edgeplan.levels.families import Level, LogicLevels, family, ids, stated
from edgeplan.levels.slow_edges import SlowEdge, slow_edge, slow_edge_ids

__all__ = [
    "Level",
    "LogicLevels",
    "SlowEdge",
    "family",
    "ids",
    "slow_edge",
    "slow_edge_ids",
    "stated",
]
