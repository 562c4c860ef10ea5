"""Remedies beyond settings and resistors, sized by solving for what opens the window."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, list_continuous
from edgeplan.evaluate import Bench, evaluate
from edgeplan.nets import Nets
from edgeplan.radiated import source_levels
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
    least attenuation is named. Where the trace alone is over budget, an enclosure first brings
    it to half of the budgeted power; where no candidate fails emission only, nothing on cables
    or enclosure will do and the amount is None.

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
    parts = _parts(nets, candidates, bench)
    found = evaluate(nets, candidates, bench)
    only_emission = found.exists.copy()
    for table in found.tables:
        if table.check != "emission":
            only_emission &= ~(table.fails | table.open)
    enclosure_db = _enclosure_db(parts)
    needed, line = _needed_db(parts, enclosure_db)
    chosen = np.argmin(np.where(only_emission, needed + enclosure_db, np.inf), axis=1)
    passive = bench.radiation.passive(nets)
    frequency_hz, measured = passive.lines.frequency_hz, passive.measured["cable"].is_measured
    return [
        _filter(
            _beside(nets, candidates, i, int(k)),
            _Size(
                cable_db=float(needed[i, k]),
                enclosure_db=float(enclosure_db[i, k]),
                frequency_hz=float(frequency_hz[i, line[i, k]]),
                closes_db=float(20 * np.log10(parts.over[i, k].max())),
                measured=bool(measured[i]),
            ),
        )
        if only_emission[i, k]
        else NOTHING
        for i, k in enumerate(chosen)
    ]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Parts:
    """Trace, cables and both together over the budget, at every line. (N, C, F) [-]"""

    trace: Array
    cable: Array
    over: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class _Size:
    """What cables and enclosure have to give, where it is set, and what it closes.

    Where the part of the cables is ``measured``, their filters are in the measurement.
    """

    cable_db: float
    enclosure_db: float
    frequency_hz: float
    closes_db: float
    measured: bool


NOTHING = Remedy(
    remedy="cable filter",
    amount=None,
    unit="dB",
    text="nothing on the cables is enough: another check fails with every candidate",
)


def _parts(nets: Nets, candidates: Candidates, bench: Bench) -> _Parts:
    """Both mechanisms of every candidate over the budget."""
    passive = bench.radiation.passive(nets)
    levels = source_levels(nets, candidates, passive, bench.tolerance)
    worst_case = bench.radiation.target.statistic == "worst-case"
    cable = passive.cable_up_to if worst_case else passive.cable_expected
    budget = 10 ** (passive.budget_dbuv_per_m / 20) * 1e-6
    trace, cables, over = (
        np.where(passive.lines.exists[:, None, :], part[:, None, :] * levels, 0.0)
        for part in (passive.trace / budget, cable / budget, passive.over_budget)
    )
    return _Parts(trace=trace, cable=cables, over=over)


def _enclosure_db(parts: _Parts) -> Array:
    """What brings the trace to half the budgeted power, 0 where it is within alone. (N, C)"""
    worst = parts.trace.max(axis=2)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(worst >= 1, 10 * np.log10(2 * worst**2), 0.0)


def _needed_db(parts: _Parts, enclosure_db: Array) -> tuple[Array, Array]:
    """Attenuation on the cables each candidate needs beside an enclosure, and at which line."""
    inside = (10 ** (-np.ceil(10 * enclosure_db) / 200))[:, :, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        room = np.sqrt(np.maximum(1 - (parts.trace * inside) ** 2, 0.0))
        needed = np.where(parts.over > 1, 20 * np.log10(parts.cable / room), 0.0)
    return np.maximum(needed.max(axis=2), 0.0), np.argmax(needed, axis=2)


def _beside(nets: Nets, candidates: Candidates, net: int, k: int) -> str:
    """The change that goes with a remedy; empty where the net stays as drawn."""
    change, words_of_change = change_words(
        nets.facts[net], int(candidates.setting[net, k]), float(candidates.series_ohm[net, k])
    )
    return f" together with: {words_of_change}" if change != "none" else ""


def _rounded_up(amount_db: float) -> float:
    """Up to the next tenth of a decibel, 0 for nothing."""
    return float(np.ceil(amount_db * 10 + 1e-6) / 10) if amount_db > 0 else 0.0


def _filter(beside: str, size: _Size) -> Remedy:
    """A filter on every cable, with an enclosure where the trace alone is over budget."""
    amount, enclosure_db = _rounded_up(size.cable_db), _rounded_up(size.enclosure_db)
    where = (
        "less in the measured transfer of its cables" if size.measured else "more on every cable"
    )
    own = f"{amount:.1f} dB {where} (set by {size.frequency_hz / 1e6:.0f} MHz)"
    with_enclosure = size.enclosure_db > 0
    if with_enclosure:
        own += f" and {enclosure_db:.1f} dB by the enclosure (the trace alone is over budget)"
    return Remedy(
        remedy="cable filter and enclosure" if with_enclosure else "cable filter",
        amount=amount,
        unit="dB",
        enclosure_db=enclosure_db if with_enclosure else None,
        closes_db=round(size.closes_db, 2),
        text=own + beside,
    )
