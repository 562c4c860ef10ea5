"""Longest transition a plain input of a logic family should see: common practice."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType
from typing import Any

import numpy as np

from edgeplan.levels.families import no_such, shipped_data

NANOSECOND_S = 1e-9
SAME_SUPPLY = 0.1  # a supply within 10 % is the one the row was stated at


@dataclass(frozen=True, slots=True, kw_only=True)
class SlowEdge:
    """Limit of one family: rows of supply [V], limit [s/V] and whether it is confirmed."""

    id: str
    rows: tuple[tuple[float, float, bool], ...]
    note: str = ""

    def longest_s_per_v(self, supply_v: float) -> tuple[float, bool]:
        """Longest transition per volt of input swing at a supply.

        Parameters
        ----------
        supply_v : float
            Supply of the receiver. [V]

        Returns
        -------
        limit_s_per_v : float
            Limit of the row within 10 % of the supply, else of the next higher one, which
            is stricter; NaN above all rows. [s/V]
        verified : bool
            False where the row is from memory, or there is none.

        Examples
        --------
        500 ns/V:

        >>> limit, verified = slow_edge("hc").longest_s_per_v(5.0)
        >>> round(limit * 1e9), verified
        (500, True)
        """
        for row_supply_v, limit_s_per_v, verified in self.rows:
            if supply_v <= row_supply_v * (1 + SAME_SUPPLY):
                return limit_s_per_v, verified
        return np.nan, False


def slow_edge_ids() -> tuple[str, ...]:
    """Families with a slow-edge limit, other names of one limit included.

    Returns
    -------
    tuple of str
        Ids in the order of the data file.

    Examples
    --------
    >>> slow_edge_ids()[:3]
    ('4000b', 'hc', 'hct')
    """
    return tuple(_shipped())


def slow_edge(family_id: str) -> SlowEdge:
    """Slow-edge limit of a family.

    Parameters
    ----------
    family_id : str
        Family in either case, such as ``lvc``.

    Returns
    -------
    SlowEdge
        The limit over the supply.

    Raises
    ------
    ValueError
        For an unknown family, with those spelt alike.

    Examples
    --------
    >>> slow_edge("LCX").id
    'lvc'
    """
    shipped = _shipped()
    if family_id.lower() not in shipped:
        raise ValueError(no_such("slow-edge limit", family_id, tuple(shipped)))
    return shipped[family_id.lower()]


@cache
def _shipped() -> Mapping[str, SlowEdge]:
    """All limits by every name they have."""
    by_name = {}
    for entry in shipped_data()["slow_edge"]:
        for name in (entry["id"], *entry.get("also", ())):
            by_name[name] = _limit(entry)
    return MappingProxyType(by_name)


def _limit(entry: dict[str, Any]) -> SlowEdge:
    """One limit of the data file."""
    rows = tuple(
        (float(supply), ns_per_v * NANOSECOND_S, basis == "printed")
        for supply, ns_per_v, basis in entry["row"]
    )
    return SlowEdge(id=entry["id"], rows=rows, note=entry.get("note", ""))
