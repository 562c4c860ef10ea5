"""What a person can change on each net: every setting times every value a site can take."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import isnan, nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import Resistors
from edgeplan.nets import NetFacts, Nets
from edgeplan.physics.preferred_values import preferred_values
from edgeplan.physics.sources import Drive

Array = NDArray[Any]

AS_DRAWN = 0
PULL_UP_OHM = (470.0, 10e3)  # values tried on open-drain nets
# Order of preference among changes, dearest first; costs are compared in this order.
COST_NAMES = ("new_site", "link_to_value", "value", "setting")


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidates:
    """Candidates of N nets, padded to C; candidate 0 is the net as drawn.

    ``cost`` has the four counts of ``COST_NAMES`` on its last axis.  ``ramp_factor``
    scales the source's ramp of every candidate (1 except in window scans).
    ``pull_up_ohm`` is NaN except on open-drain nets, where it is what can be changed.
    """

    setting: Array
    series_ohm: Array
    pull_up_ohm: Array
    exists: Array
    cost: Array
    ramp_factor: Array

    @property
    def count(self) -> int:
        """Padded number of candidates."""
        return int(self.setting.shape[1])

    def take(self, nets: Sequence[int] | Array) -> "Candidates":
        """Candidates of the chosen nets."""
        return Candidates(
            setting=self.setting[nets],
            series_ohm=self.series_ohm[nets],
            pull_up_ohm=self.pull_up_ohm[nets],
            exists=self.exists[nets],
            cost=self.cost[nets],
            ramp_factor=self.ramp_factor[nets],
        )

    def state(self, chosen: Array) -> "Candidates":
        """One candidate per net, as tables of one column."""
        rows = np.arange(len(chosen))
        pick = (rows, chosen)
        return Candidates(
            setting=self.setting[pick][:, None],
            series_ohm=self.series_ohm[pick][:, None],
            pull_up_ohm=self.pull_up_ohm[pick][:, None],
            exists=self.exists[pick][:, None],
            cost=self.cost[pick][:, None],
            ramp_factor=self.ramp_factor[pick][:, None],
        )

    def with_ramps(self, factor: Array) -> "Candidates":
        """A state of one column, repeated for every ramp factor (N, Q)."""
        factor = np.broadcast_to(factor, (self.setting.shape[0], np.shape(factor)[-1]))
        shape = factor.shape
        return replace(
            self,
            setting=np.broadcast_to(self.setting, shape),
            series_ohm=np.broadcast_to(self.series_ohm, shape),
            pull_up_ohm=np.broadcast_to(self.pull_up_ohm, shape),
            exists=np.broadcast_to(self.exists, shape) & np.isfinite(factor),
            cost=np.broadcast_to(self.cost, (*shape, len(COST_NAMES))),
            ramp_factor=factor,
        )


def allowed_values(resistors: Resistors) -> Array:
    """Values a site may take, 0 ohm first. [ohm]

    Parameters
    ----------
    resistors : Resistors
        A series of preferred values between two ends, or the values themselves.

    Returns
    -------
    numpy.ndarray
        Rising, each once; 0 ohm stands for a link. [ohm]

    Examples
    --------
    >>> allowed_values(Resistors(series="E3", lowest_ohm=10, highest_ohm=100)).tolist()
    [0.0, 10.0, 22.0, 47.0, 100.0]
    """
    if resistors.values_ohm is not None:
        values = np.array(sorted(set(resistors.values_ohm)), dtype=float)
    else:
        values = preferred_values(resistors.series, resistors.lowest_ohm, resistors.highest_ohm)
    return np.unique(np.concatenate([[0.0], values]))


def _settings_of(facts: NetFacts) -> list[int]:
    """Settings a person may choose: the one as drawn first."""
    if not facts.driver.programmable or facts.net.setting_fixed:
        return [facts.setting]
    others = [i for i in range(len(facts.settings)) if i != facts.setting]
    return [facts.setting, *others]


def drawn_ohm(facts: NetFacts) -> float:
    """What is drawn: the pull-up of an open-drain net, else the series resistor. [ohm]

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    float
        0 where no series resistor is drawn, NaN where no pull-up is given. [ohm]
    """
    if facts.timing == "open-drain":
        return nan if facts.net.pull_up_ohm is None else facts.net.pull_up_ohm
    return facts.net.resistor_ohm or 0.0


def _values_of(facts: NetFacts, resistors: Resistors) -> list[float]:
    """Values of the site: the one as drawn first."""
    drawn = drawn_ohm(facts)
    if facts.timing == "open-drain":
        can_change = facts.net.pull_up is not None and drawn > 0
        others = preferred_values(resistors.series, *PULL_UP_OHM) if can_change else ()
    elif facts.net.site == "none":
        others = ()
    else:
        others = allowed_values(resistors)
    return [drawn, *(float(v) for v in others if v != drawn)]


def _cost(facts: NetFacts, setting: int, value_ohm: float) -> tuple[int, int, int, int]:
    """Counts of change in the order of COST_NAMES."""
    drawn = drawn_ohm(facts)
    changed = value_ohm != drawn and not isnan(drawn)
    site = "fitted" if facts.timing == "open-drain" else facts.net.site
    return (
        int(changed and site in ("possible", "none")),
        int(changed and site == "link"),
        int(changed and site == "fitted"),
        int(setting != facts.setting),
    )


def list_candidates(nets: Nets, resistors: Resistors) -> Candidates:
    """Every candidate of every net.

    Parameters
    ----------
    nets : Nets
        N nets.
    resistors : Resistors
        Which values a site may take.

    Returns
    -------
    Candidates
        Tables (N, C), candidate 0 as drawn, padded where ``exists`` is False.
    """
    ladders = [
        [(s, v) for s in _settings_of(f) for v in _values_of(f, resistors)] for f in nets.facts
    ]
    return _tables(nets.facts, ladders)


def list_drawn(nets: Nets) -> Candidates:
    """The nets as drawn, one candidate each.

    Parameters
    ----------
    nets : Nets
        N nets.

    Returns
    -------
    Candidates
        Tables (N, 1).
    """
    return _tables(nets.facts, [[(f.setting, drawn_ohm(f))] for f in nets.facts])


def list_continuous(nets: Nets, highest_ohm: float, count: int = 24) -> Candidates:
    """Settings times a dense ladder of values, whether or not a site exists.

    Tells a closed window from a missing site: 0 ohm, then ``count`` values in
    equal ratios up to ``highest_ohm``.

    Parameters
    ----------
    nets : Nets
        N nets without open-drain ones: their pull-ups are not series resistors.
    highest_ohm : float
        Last value of the ladder. [ohm]
    count : int
        Values beside 0 ohm, from 4 ohm on.

    Returns
    -------
    Candidates
        Tables (N, settings x (count + 1)).
    """
    ladder = [0.0, *np.geomspace(4.0, highest_ohm, count)]
    return _tables(
        nets.facts,
        [[(s, float(v)) for s in _settings_of(f) for v in ladder] for f in nets.facts],
    )


def _tables(
    facts: Sequence[NetFacts], ladders: Sequence[Sequence[tuple[int, float]]]
) -> Candidates:
    """Ragged ladders as padded tables."""
    width = max((len(ladder) for ladder in ladders), default=0)
    shape = (len(ladders), width)
    setting = np.zeros(shape, dtype=int)
    series = np.zeros(shape)
    pull_up = np.full(shape, np.nan)
    exists = np.zeros(shape, dtype=bool)
    cost = np.zeros((*shape, len(COST_NAMES)), dtype=int)
    for i, (f, ladder) in enumerate(zip(facts, ladders, strict=True)):
        n = len(ladder)
        setting[i, :n] = [s for s, _ in ladder]
        setting[i, n:] = f.setting
        values = pull_up if f.timing == "open-drain" else series
        values[i, :n] = [v for _, v in ladder]
        exists[i, :n] = True
        cost[i, :n] = [_cost(f, s, v) for s, v in ladder]
    return Candidates(
        setting=setting,
        series_ohm=series,
        pull_up_ohm=pull_up,
        exists=exists,
        cost=cost,
        ramp_factor=np.ones(shape),
    )


def setting_table(nets: Nets, quantity: str, corner: str, direction: str | None) -> Array:
    """One quantity of all settings, padded to (N, S). NaN where a setting does not state it.

    Parameters
    ----------
    nets : Nets
        N nets, of which the one with most settings has S.
    quantity : {"resistance_ohm", "ramp_s", "trapezoid_s", "pad_f"}
        Field of `SettingCorners`.
    corner : {"slow", "typical", "fast"}
        Which corner.
    direction : {"rising", "falling"} or None
        None for a quantity that both edges share.

    Returns
    -------
    numpy.ndarray
        (N, S), in the quantity's own unit. [SI]
    """
    width = max((len(f.settings) for f in nets.facts), default=1)
    table = np.full((len(nets), width), np.nan)
    for i, f in enumerate(nets.facts):
        for k, setting in enumerate(f.settings):
            value = getattr(setting, quantity)
            table[i, k] = (value if direction is None else value[direction]).at(corner)
    return table


def drive(
    nets: Nets, candidates: Candidates, corner: str, direction: str, tolerance: float
) -> Drive:
    """Sources of all candidates at one corner and direction.

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        N nets, C candidates.
    corner : {"slow", "typical", "fast"}
        Highest or lowest resistance, ramp, capacitance and resistor.
    direction : {"rising", "falling"}
        Which of the two output transistors drives.
    tolerance : float
        Of the series resistor. [-]

    Returns
    -------
    Drive
        Arrays (N, C); a candidate whose setting lacks a value at this corner does
        not exist in it.
    """
    at = np.arange(len(nets))[:, None], candidates.setting
    resistance = setting_table(nets, "resistance_ohm", corner, direction)[at]
    pad = setting_table(nets, "pad_f", corner, None)[at]
    ramp = setting_table(nets, "ramp_s", corner, direction)
    scale = {"slow": 1 + tolerance, "typical": 1.0, "fast": 1 - tolerance}[corner]
    if np.all(candidates.ramp_factor == 1):
        ramp_s, index = ramp, candidates.setting
    else:
        ramp_s = ramp[at] * candidates.ramp_factor
        index = np.broadcast_to(np.arange(candidates.count), candidates.setting.shape)
    stated = np.isfinite(resistance) & np.isfinite(ramp[at]) & np.isfinite(pad)
    return Drive(
        resistance_ohm=resistance,
        series_ohm=candidates.series_ohm * scale,
        pad_farad=pad,
        ramp_s=ramp_s,
        ramp_index=index,
        exists=candidates.exists & stated,
    )
