"""How far up a standard measures, from the highest frequency inside the device."""

import tomllib
from functools import cache
from importlib.resources import files
from typing import Any, NamedTuple

import numpy as np

from edgeplan.limits.shipped import line

MEGAHERTZ_HZ = 1e6
END_OF_LINE = "end-of-line"


class HighestFrequency(NamedTuple):
    """Where the measurement ends, by which rule, and whether that rule is confirmed."""

    highest_hz: float
    rule: str
    verified: bool


def highest_frequency_hz(limit_id: str, highest_internal_hz: float | None) -> HighestFrequency:
    """Highest frequency to be judged, by the standard's own rule.

    Parameters
    ----------
    limit_id : str
        Id of a shipped limit line.
    highest_internal_hz : float or None
        Highest frequency generated or used inside the device; None when unknown, which
        asks for the most the rule can ask for. [Hz]

    Returns
    -------
    HighestFrequency
        Frequency [Hz], the rule's id (``end-of-line`` where the standard has no rule: then
        the line's own end) and whether the rule is confirmed.

    Raises
    ------
    ValueError
        For an unknown id or a frequency that is not positive.

    Notes
    -----
    The answer may lie above the end of the line: that part is judged by the line it
    continues as, or not at all.

    Examples
    --------
    >>> highest_frequency_hz("fcc-15-109-class-b-3m", 100e6)
    HighestFrequency(highest_hz=1000000000.0, rule='fcc-15-33-b-1', verified=True)

    References
    ----------
    .. [1] 47 CFR 15.33(b)(1).
    .. [2] CISPR 32:2015, clause on the highest internal frequency.
    """
    limit = line(limit_id)
    if highest_internal_hz is not None and not 0 < highest_internal_hz < np.inf:
        raise ValueError(f"the highest internal frequency is positive, not {highest_internal_hz!r}")
    for rule in _rules():
        if limit_id.startswith(tuple(rule["prefix"])):
            highest = _measured_to_mhz(rule, highest_internal_hz) * MEGAHERTZ_HZ
            return HighestFrequency(highest, rule["id"], rule["basis"] != "memory")
    return HighestFrequency(limit.highest_hz, END_OF_LINE, limit.verified)


def rule_title(rule_id: str) -> str:
    """Rule in words.

    Parameters
    ----------
    rule_id : str
        Id that `highest_frequency_hz` returned.

    Returns
    -------
    str
        Name of the clause.

    Examples
    --------
    >>> rule_title("fcc-15-33-b-1")
    '47 CFR 15.33(b)(1), unintentional radiators'
    """
    titles = {rule["id"]: rule["title"] for rule in _rules()}
    return str(titles.get(rule_id, "the end of the line itself"))


def _measured_to_mhz(rule: dict[str, Any], highest_internal_hz: float | None) -> float:
    """Row of a rule for a highest internal frequency."""
    if highest_internal_hz is None:
        return float(rule["cap_mhz"])
    internal_mhz = highest_internal_hz / MEGAHERTZ_HZ
    for up_to_mhz, measure_to_mhz in rule["row"]:
        if internal_mhz <= up_to_mhz:
            return float(measure_to_mhz)
    return float(min(rule["multiple"] * internal_mhz, rule["cap_mhz"]))


@cache
def _rules() -> list[dict[str, Any]]:
    """Rules of the package data."""
    path = files("edgeplan.limits") / "highest_frequencies.toml"
    rules: list[dict[str, Any]] = tomllib.loads(path.read_text(encoding="utf-8"))["rule"]
    return rules
