"""All checks of all candidates of a block of nets; the one place that calls the engines."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import fidelity, timing
from edgeplan.candidates import Candidates
from edgeplan.checks import CheckTable
from edgeplan.nets import Nets
from edgeplan.radiated import Radiation
from edgeplan.received import Received, Seen, receive

Array = NDArray[Any]

StrobeFlights = Mapping[str, Mapping[tuple[str, str], float]]
ClockParts = Mapping[str, tuple[str, frozenset[str]]]


@dataclass(frozen=True, slots=True, kw_only=True)
class Bench:
    """What every evaluation of one run shares.

    ``strobe`` holds the flights of clocks and strobes as chosen, ``strobe_drawn`` as drawn;
    ``clock_parts`` the part that drives each of them and those that receive it.
    """

    tolerance: float
    radiation: Radiation
    strobe: StrobeFlights
    strobe_drawn: StrobeFlights = field(default_factory=dict)
    clock_parts: ClockParts = field(default_factory=dict)

    def with_strobe(self, strobe: StrobeFlights) -> "Bench":
        """The same bench with other strobe flights."""
        return replace(self, strobe=strobe)


@dataclass(frozen=True, slots=True, kw_only=True)
class Evaluation:
    """Checks of N nets and C candidates.

    ``passes`` is True where every check that applies is decided and holds;
    ``undecided`` where none fails but one is open.
    """

    tables: tuple[CheckTable, ...]
    exists: Array

    def failing(self, wants: str) -> Array:
        """Where a check that wants an edge ``faster`` or ``slower`` fails. (N, C)"""
        return self._any([t.fails for t in self.tables if t.wants == wants])

    def open(self, wants: str | None = None) -> Array:
        """Where a check applies but is undecided. (N, C)"""
        return self._any([t.open for t in self.tables if wants in (None, t.wants)])

    @property
    def passes(self) -> Array:
        """Where every check that applies is decided and holds. (N, C)"""
        bad = self.failing("faster") | self.failing("slower") | self.open()
        return self.exists & ~bad

    @property
    def smallest_share(self) -> Array:
        """Smallest share of all decided checks, inf where none applies. (N, C)"""
        found = np.full(self.exists.shape, np.inf)
        for t in self.tables:
            found = np.minimum(found, np.where(t.applies[:, None] & t.decided, t.share, np.inf))
        return found

    def _any(self, masks: list[Array]) -> Array:
        """Logical or of masks of one shape."""
        found = np.zeros(self.exists.shape, dtype=bool)
        for mask in masks:
            found |= mask
        return found & self.exists


def evaluate(nets: Nets, candidates: Candidates, bench: Bench) -> Evaluation:
    """Judge every candidate of a block of nets of one timing class.

    Parameters
    ----------
    nets : Nets
        N nets of one timing class.
    candidates : Candidates
        Tables (N, C).
    bench : Bench
        Tolerance, emission target and strobe flights.

    Returns
    -------
    Evaluation
        One table per check.
    """
    received = receive(nets, candidates, bench.tolerance)
    radiated = [bench.radiation.judge(nets, candidates, bench.tolerance)]
    boot = boot_candidates(nets, candidates)
    if boot is not None:
        received += receive(nets, boot, bench.tolerance, state="boot")
        radiated.append(bench.radiation.judge(nets, boot, bench.tolerance, state="boot"))
    seen = Seen(
        nets=nets,
        candidates=candidates,
        received=received,
        strobe=bench.strobe,
        strobe_drawn=bench.strobe_drawn,
        clock_parts=bench.clock_parts,
        tolerance=bench.tolerance,
    )
    tables = [
        *timing.checks_of(nets.facts[0].timing)(seen),
        *fidelity.checks_of("overshoot")(seen),
        *radiated,
    ]
    named = [_explained(t, nets) for t in tables if t.applies.any()]
    return Evaluation(tables=tuple(named), exists=candidates.exists)


def boot_candidates(nets: Nets, candidates: Candidates) -> Candidates | None:
    """The same resistors with the settings before firmware runs; None where they are no other."""
    boot = np.array([f.setting_boot for f in nets.facts])
    drawn = np.array([f.setting for f in nets.facts])
    if np.array_equal(boot, drawn) or np.any(candidates.ramp_factor != 1):
        return None
    return replace(candidates, setting=np.broadcast_to(boot[:, None], candidates.setting.shape))


def _explained(table: CheckTable, nets: Nets) -> CheckTable:
    """Fill in why an undecided check is open: a driver value that nobody states."""
    because = list(table.because)
    missing = list(table.missing)
    for i in np.flatnonzero(table.open[:, 0]):
        if because[i]:
            continue
        because[i], missing[i] = driver_lack(nets, int(i), table)
    return replace(table, because=tuple(because), missing=tuple(missing))


def driver_lack(nets: Nets, net: int, table: CheckTable) -> tuple[str, Any]:
    """Which value of the settings as drawn, after or before firmware, keeps a check open."""
    from edgeplan.results import Missing

    facts = nets.facts[net]
    side = "maximum" if table.wants == "faster" else "minimum"
    for index in (facts.setting, facts.setting_boot):
        setting = facts.settings[index]
        lacking = [m for m in setting.missing if m.startswith(side)] or list(setting.missing)
        if lacking:
            of = f"driver {facts.driver.name}, setting {setting.setting}"
            return f"{of} states no {lacking[0]}", Missing(value=lacking[0], of=of)
    return "the engine gave no number", None


def strobe_flights(nets: Nets, candidates: Candidates, tolerance: float) -> StrobeFlights:
    """First and last flight of clocks (one candidate each) per corner, rising edge. [s]

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        Clock nets and their one chosen candidate, (N, 1).
    tolerance : float
        Of the series resistor. [-]

    Returns
    -------
    mapping
        Net name to (corner, "first" | "last") to flight time against the own test load.
    """
    flights: dict[str, dict[tuple[str, str], float]] = {f.net.net: {} for f in nets.facts}
    for r in receive(nets, candidates, tolerance):
        if r.edge != "rising":
            continue
        for i, f in enumerate(nets.facts):
            rows = slice(nets.first_receiver[i], nets.first_receiver[i + 1])
            flights[f.net.net][r.corner, "first"] = float(_flight(r, rows, r.first_s, np.min))
            flights[f.net.net][r.corner, "last"] = float(_flight(r, rows, r.last_s, np.max))
    return flights


def _flight(r: Received, rows: slice, crossing_s: Array, reduce: Callable[[Array], Any]) -> Any:
    """Crossing of one net's receivers less that of its test load."""
    return reduce(crossing_s[rows, 0] - r.reference_s[rows, 0])
