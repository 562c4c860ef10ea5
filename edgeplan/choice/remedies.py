"""Remedies beyond settings and resistors, sized by solving for what opens the window."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, list_continuous
from edgeplan.evaluate import Bench, evaluate
from edgeplan.nets import Nets
from edgeplan.radiated import Passive, source_levels
from edgeplan.results import Remedy
from edgeplan.texts import text_resistance_ohm

Array = NDArray[Any]


def new_site(nets: Nets, bench: Bench, highest_ohm: float) -> list[Remedy | None]:
    """For nets without a site: the value that a new one next to the driver would need.

    Parameters
    ----------
    nets : Nets
        N nets of one timing class without a passing candidate.
    bench : Bench
        As for candidates.
    highest_ohm : float
        Largest value tried. [ohm]

    Returns
    -------
    list of Remedy or None
        None where no value passes every check.
    """
    ladder = list_continuous(nets, highest_ohm)
    found = evaluate(nets, ladder, bench)
    share = np.where(found.passes, found.smallest_share, -np.inf)
    best = np.argmax(share, axis=1)
    rows = np.arange(len(nets))
    return [
        _site(nets, ladder, i, int(k)) if np.isfinite(share[i, k]) else None
        for i, k in zip(rows, best, strict=True)
    ]


def _site(nets: Nets, ladder: Candidates, net: int, k: int) -> Remedy:
    """A new site with the value that leaves the largest smallest share."""
    value = float(ladder.series_ohm[net, k])
    facts = nets.facts[net]
    pin = facts.net.driver_pin[0] if facts.net.driver_pin else "the driver"
    setting = int(ladder.setting[net, k])
    with_setting = (
        f" with setting {facts.settings[setting].setting}" if setting != facts.setting else ""
    )
    return Remedy(
        remedy="resistor site",
        amount=round(value, 1),
        unit="ohm",
        text=f"a site near {pin}, about {text_resistance_ohm(round(value))}{with_setting}",
    )


def cable_filter(nets: Nets, state: Candidates, passive: Passive, bench: Bench) -> list[Remedy]:
    """More attenuation on every cable that brings one state's emission to its budget.

    The trace's own part stays; where it alone is over budget no filter will do and the
    amount is None.

    Parameters
    ----------
    nets, state : Nets, Candidates
        N nets and one candidate each.
    passive : Passive
        Their passive quantities.
    bench : Bench
        Tolerance and target.

    Returns
    -------
    list of Remedy
        One per net, amount in dB at the line that needs most.
    """
    levels = source_levels(nets, state, passive, bench.tolerance)[:, 0]
    budget = 10 ** (passive.budget_dbuv_per_m / 20) * 1e-6
    judged = passive.cable_up_to if bench.radiation.target.statistic == "worst-case" else None
    cable = levels * (passive.cable_expected if judged is None else judged)
    trace = levels * passive.trace
    over = np.where(passive.lines.exists, passive.over_budget * levels, 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        room = np.sqrt(np.maximum(budget**2 - trace**2, 0.0))
        needed = np.where(over > 1, 20 * np.log10(cable / room), 0.0)
    return [_filter(passive, over, needed, i) for i in range(len(nets))]


def _filter(passive: Passive, over: Array, needed: Array, net: int) -> Remedy:
    """The line that needs most attenuation on the cables."""
    line = int(np.argmax(needed[net]))
    amount = float(needed[net, line])
    megahertz = passive.lines.frequency_hz[net, line] / 1e6
    excess = float(20 * np.log10(np.max(over[net]))) if np.max(over[net]) > 0 else 0.0
    if not np.isfinite(amount):
        return Remedy(
            remedy="cable filter",
            amount=None,
            unit="dB",
            closes_db=None,
            text=f"no cable filter is enough: the trace alone is over budget at {megahertz:.0f} MHz",
        )
    rounded = float(np.ceil(amount * 10) / 10)
    return Remedy(
        remedy="cable filter",
        amount=rounded,
        unit="dB",
        closes_db=round(excess, 2),
        text=f"{rounded:.1f} dB more on every cable (set by {megahertz:.0f} MHz)",
    )
