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
from edgeplan.words import change_words

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
    rows = range(len(nets))
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


def cable_filter(nets: Nets, candidates: Candidates, bench: Bench) -> list[Remedy]:
    """More attenuation on every cable, so that some candidate passes every check.

    The trace's own part stays. Of all candidates that fail emission only, the one that needs
    least attenuation is named. Where the trace alone is over budget, cables and enclosure
    have to give the same amount together; where no candidate fails emission only, nothing
    on cables or enclosure will do and the amount is None.

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        N nets without a passing candidate, C candidates.
    bench : Bench
        Tolerance and target.

    Returns
    -------
    list of Remedy
        One per net, amount in dB at the line that needs most.
    """
    passive = bench.radiation.passive(nets)
    needed, line, excess_db = _needed_db(nets, candidates, passive, bench)
    found = evaluate(nets, candidates, bench)
    only_emission = found.exists.copy()
    for table in found.tables:
        if table.check != "emission":
            only_emission &= ~(table.fails | table.open)
    needed = np.where(only_emission, needed, np.inf)
    least = np.where(only_emission, excess_db, np.inf)
    found_remedies = []
    for i, k in enumerate(np.argmin(needed, axis=1)):
        if not np.isfinite(needed[i, k]):
            found_remedies.append(_both(nets, candidates, i, least[i]))
            continue
        hertz = float(passive.lines.frequency_hz[i, line[i, k]])
        found_remedies.append(
            _filter(nets, candidates, i, int(k), (needed[i, k], hertz, excess_db[i, k]))
        )
    return found_remedies


def _needed_db(
    nets: Nets, candidates: Candidates, passive: Passive, bench: Bench
) -> tuple[Array, Array, Array]:
    """Attenuation on the cables each candidate needs, at which line, and its excess now. (N, C)"""
    levels = source_levels(nets, candidates, passive, bench.tolerance)
    worst_case = bench.radiation.target.statistic == "worst-case"
    cable = levels * (passive.cable_up_to if worst_case else passive.cable_expected)[:, None, :]
    trace = levels * passive.trace[:, None, :]
    budget = (10 ** (passive.budget_dbuv_per_m / 20) * 1e-6)[:, None, :]
    over = np.where(passive.lines.exists[:, None, :], passive.over_budget[:, None, :] * levels, 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        room = np.sqrt(np.maximum(budget**2 - trace**2, 0.0))
        needed = np.where(over > 1, 20 * np.log10(cable / room), 0.0)
        excess_db = 20 * np.log10(over.max(axis=2))
    line = np.argmax(needed, axis=2)
    return needed.max(axis=2), line, excess_db


def _beside(nets: Nets, candidates: Candidates, net: int, k: int) -> str:
    """The change that goes with a remedy; empty where the net stays as drawn."""
    change, words_of_change = change_words(
        nets.facts[net], int(candidates.setting[net, k]), float(candidates.series_ohm[net, k])
    )
    return f" together with: {words_of_change}" if change != "none" else ""


def _rounded_up(amount_db: float) -> float:
    """Up to the next tenth of a decibel."""
    return float(np.ceil(amount_db * 10 + 1e-6) / 10)


def _filter(
    nets: Nets, candidates: Candidates, net: int, k: int, size: tuple[float, float, float]
) -> Remedy:
    """A filter on every cable: attenuation, the line that asks for it, and the excess now."""
    needed_db, frequency_hz, excess_db = size
    amount = _rounded_up(needed_db)
    beside = _beside(nets, candidates, net, k)
    return Remedy(
        remedy="cable filter",
        amount=amount,
        unit="dB",
        closes_db=round(float(excess_db), 2),
        text=f"{amount:.1f} dB more on every cable (set by {frequency_hz / 1e6:.0f} MHz){beside}",
    )


def _both(nets: Nets, candidates: Candidates, net: int, excess_db: Array) -> Remedy:
    """As much on every cable and on the enclosure, or nothing that would help."""
    k = int(np.argmin(excess_db))
    if not np.isfinite(excess_db[k]):
        return Remedy(
            remedy="cable filter",
            amount=None,
            unit="dB",
            text="nothing on the cables is enough: another check fails with every candidate",
        )
    amount = _rounded_up(float(excess_db[k]))
    beside = _beside(nets, candidates, net, k)
    return Remedy(
        remedy="cable filter and enclosure",
        amount=amount,
        unit="dB",
        closes_db=round(float(excess_db[k]), 2),
        text=(
            f"{amount:.1f} dB more on every cable and {amount:.1f} dB by the enclosure "
            f"(the trace alone is over budget){beside}"
        ),
    )
