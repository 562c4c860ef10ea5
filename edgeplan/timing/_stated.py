"""Values an interface states for one driver, and which of them are missing."""

from collections.abc import Callable, Sequence
from math import nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.checks import Worst
from edgeplan.nets import NetFacts
from edgeplan.results import Missing

Array = NDArray[Any]


def number(value: float | None) -> float:
    """The number, NaN where none is stated."""
    return nan if value is None else float(value)


def per_net(facts: Sequence[NetFacts], value: Callable[[NetFacts], float | None]) -> Array:
    """One value per net; NaN where it is not stated. (N,)"""
    return np.array([number(value(f)) for f in facts], dtype=float)


def period_s(facts: NetFacts) -> float | None:
    """Sampling period of the interface. [s]"""
    return None if facts.interface.rate_hz is None else 1 / facts.interface.rate_hz


def setup_s(facts: NetFacts) -> float | None:
    """Setup time of what the net's driver drives. [s]"""
    return facts.direction.setup_s if facts.direction else None


def hold_s(facts: NetFacts) -> float | None:
    """Hold time of what the net's driver drives. [s]"""
    return facts.direction.hold_s if facts.direction else None


def valid_before_s(facts: NetFacts) -> float | None:
    """How long before the strobe data is valid at the output. [s]"""
    return facts.direction.valid_before_s if facts.direction else None


def valid_after_s(facts: NetFacts) -> float | None:
    """How long after the strobe data is valid at the output. [s]"""
    return facts.direction.valid_after_s if facts.direction else None


STATED: dict[str, Callable[[NetFacts], Any]] = {
    "rate": lambda f: f.interface.rate_hz,
    "direction": lambda f: f.direction,
    "setup": setup_s,
    "hold": hold_s,
    "maximum clock-to-output": lambda f: output(f) and output(f).max_s,
    "minimum clock-to-output": lambda f: output(f) and output(f).min_s,
    "test load": lambda f: f.direction and f.direction.test_load,
    "valid before": valid_before_s,
    "valid after": valid_after_s,
}


def output(facts: NetFacts) -> Any:
    """Clock-to-output of the net's driver, None where not stated."""
    return facts.direction.clock_to_output if facts.direction else None


def earliest_output_s(facts: NetFacts) -> float | None:
    """Smallest clock-to-output delay. [s]"""
    return output(facts).min_s if output(facts) else None


def latest_output_s(facts: NetFacts) -> float | None:
    """Largest clock-to-output delay. [s]"""
    return output(facts).max_s if output(facts) else None


def allowance_s(facts: NetFacts) -> float:
    """Skew, jitter and crosstalk of the interface together. [s]"""
    return facts.interface.skew_s + facts.interface.jitter_s + facts.interface.crosstalk_s


def require(worst: Worst, facts: Sequence[NetFacts], names: Sequence[str]) -> None:
    """Leave the check undecided on every net that lacks one of the named values."""
    for i, f in enumerate(facts):
        for name in names:
            require_one(worst, i, f, name)


def require_rate(worst: Worst, facts: Sequence[NetFacts], stated: Array) -> None:
    """Leave the check undecided where its limit is stated (N,) but no rate of the net is."""
    for i, f in enumerate(facts):
        if np.isfinite(stated[i]) and np.isnan(f.bit_s):
            missing = Missing(value="clock_mhz or data_mbps", of=f"net {f.net.net}")
            worst.cannot(i, "neither clock_mhz nor data_mbps is given", missing)


def require_one(worst: Worst, net: int, facts: NetFacts, name: str) -> None:
    """Leave the check undecided on one net if it lacks the named value."""
    if STATED[name](facts) is not None:
        return
    owner = f"interface {facts.interface.name}"
    if name != "rate":
        owner += f", driver {facts.driver.name}"
    worst.cannot(net, f"{owner} states no {name}", Missing(value=name, of=owner))
