"""One candidate per net: least change, then the largest smallest share, then the common value.

Nets that share a setting field (a bank) or a resistor array are chosen together, exactly, by
going through the settings of their banks and the values of their arrays.
"""

from collections import Counter, defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates
from edgeplan.nets import NetFacts

Array = NDArray[Any]

# Shares in one of these steps count as equal, so that the common value can decide: next to
# nothing, little, and then fifths. Failing candidates are told apart in fiftieths.
SHARE_STEPS = np.array([0.0, 0.015, 0.2, 0.4, 0.6, 0.8])
EXCESS_STEP = 0.02
WORST_SHARE = -99.0  # 40 dB over a limit; what is worse still counts as this
# Weights keep the order of preference: a failing net outweighs every cost, a dearer kind of
# change outweighs any number of cheaper ones on one net, and a share outweighs the value's rank.
FAIL = 1e13
WAITS = 1e11
COST = np.array([1e9, 1e8, 1e7, 1e6])
SHARE = 1e3


@dataclass(frozen=True, slots=True, kw_only=True)
class Tied:
    """Nets that must be chosen together, and by what: bank or array name to its nets."""

    nets: tuple[int, ...]
    banks: dict[str, tuple[int, ...]]
    arrays: dict[str, tuple[int, ...]]


def tied_groups(facts: Sequence[NetFacts]) -> list[Tied]:
    """Connected groups of nets that share banks or arrays; nets without either are left out.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.

    Returns
    -------
    list of Tied
        In the order of their first nets.

    Examples
    --------
    >>> from types import SimpleNamespace as Some
    >>> nets = [Some(net=Some(bank=(b,), array=a)) for b, a in (("x", None), ("x", "R"), ("", "R"))]
    >>> tied_groups(nets)
    [Tied(nets=(0, 1, 2), banks={'x': (0, 1)}, arrays={'R': (1, 2)})]
    """
    banks: dict[str, list[int]] = defaultdict(list)
    arrays: dict[str, list[int]] = defaultdict(list)
    for i, f in enumerate(facts):
        if f.net.bank and f.net.bank[0]:
            banks[f.net.bank[0]].append(i)
        if f.net.array:
            arrays[f.net.array].append(i)
    groups: list[set[int]] = []
    for members in [*banks.values(), *arrays.values()]:
        joined = set(members)
        apart = []
        for group in groups:
            if group & joined:
                joined |= group
            else:
                apart.append(group)
        groups = [*apart, joined]
    return [
        Tied(
            nets=tuple(sorted(group)),
            banks={name: tuple(m) for name, m in banks.items() if m[0] in group},
            arrays={name: tuple(m) for name, m in arrays.items() if m[0] in group},
        )
        for group in sorted(groups, key=min)
    ]


def scores(
    candidates: Candidates,
    passes: Array,
    works: Array,
    undecided: Array,
    share: Array,
    allowed: Array,
    common: Counter[float],
) -> Array:
    """What each candidate costs a net; lower is better, infinite where it may not be chosen.

    Parameters
    ----------
    candidates : Candidates
        Tables (N, C).
    passes, works, allowed : numpy.ndarray
        Whether a candidate passes every check, whether it holds every check that wants a
        faster edge, and whether it may be chosen. (N, C)
    undecided : numpy.ndarray
        Whether nothing fails but a check is open. (N, C)
    share : numpy.ndarray
        Smallest share of its checks; -inf counts as the worst. (N, C)
    common : Counter
        How often a value stands on the board; the commoner wins a tie.

    Returns
    -------
    numpy.ndarray
        (N, C). A passing candidate is ranked by cost, then share; so is one that only waits
        for a value, behind every passing one. Of failing ones those that
        still meet their timing come first, then share, then cost: the least excess of a
        board that works, since a level can still be mended elsewhere and a missed setup not.
    """
    change = candidates.cost @ COST
    share = np.clip(np.nan_to_num(share, nan=WORST_SHARE), WORST_SHARE, 1.0)
    steps = np.searchsorted(SHARE_STEPS, share, side="right")
    excess = np.round(share / EXCESS_STEP)
    rank = np.array(
        [common.get(v, 0) for v in np.nan_to_num(candidates.series_ohm).ravel().tolist()]
    ).reshape(candidates.series_ohm.shape)
    tie = _smaller_part(candidates) - np.minimum(rank, 400)
    passing = change - SHARE * steps + tie
    failing = FAIL * np.where(works, 2, 4) - 1e9 * excess + 1e-3 * change + 1e-3 * tie
    waiting = WAITS + passing
    score = np.where(passes, passing, np.where(undecided, waiting, failing))
    return np.where(candidates.exists & allowed, score, np.inf)


def _smaller_part(candidates: Candidates) -> Array:
    """Last tie-break, 0 to 1/2: the smaller series resistor, the larger pull-up. (N, C)"""
    series = candidates.series_ohm / (1 + candidates.series_ohm.max(initial=1.0))
    pull_up = 100.0 / (100.0 + candidates.pull_up_ohm)
    return np.asarray(0.5 * np.where(np.isnan(pull_up), series, pull_up))


def choose(facts: Sequence[NetFacts], candidates: Candidates, score: Array) -> Array:
    """Index of the chosen candidate per net, (N,), with every bank and array agreeing.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.
    candidates : Candidates
        Tables (N, C).
    score : numpy.ndarray
        (N, C) from :func:`scores`.

    Returns
    -------
    numpy.ndarray
        Indices; a net of a group in which no common choice exists keeps candidate 0.
    """
    chosen = np.argmin(score, axis=1)
    chosen = np.where(np.isfinite(score[np.arange(len(chosen)), chosen]), chosen, 0)
    for group in tied_groups(facts):
        best = _choose_together(facts, candidates, score, group)
        for net, index in best.items():
            chosen[net] = index
    return chosen


def _setting_name(facts: NetFacts, candidates: Candidates, net: int) -> list[str]:
    """Setting name of every candidate of one net."""
    names = [s.setting for s in facts.settings]
    return [names[k] for k in candidates.setting[net]]


def _choose_together(
    facts: Sequence[NetFacts], candidates: Candidates, score: Array, group: Tied
) -> dict[int, int]:
    """Cheapest common choice of one group, by going through its banks' settings."""
    names = {i: np.array(_setting_name(facts[i], candidates, i)) for i in group.nets}
    options = [
        sorted({str(n) for n in np.unique(np.concatenate([names[i] for i in members]))})
        for members in group.banks.values()
    ]
    best: tuple[float, dict[int, int]] = (np.inf, dict.fromkeys(group.nets, 0))
    for settings in product(*options):
        masked = {i: score[i].copy() for i in group.nets}
        for setting, members in zip(settings, group.banks.values(), strict=True):
            for i in members:
                masked[i][names[i] != setting] = np.inf
        total, picked = _arrays_agree(candidates, masked, group)
        if total < best[0]:
            best = (total, picked)
    return best[1]


def _arrays_agree(
    candidates: Candidates, masked: dict[int, Array], group: Tied
) -> tuple[float, dict[int, int]]:
    """Cheapest candidates with one value per array, for fixed settings."""
    total, picked = 0.0, {}
    tied = {i for members in group.arrays.values() for i in members}
    for i, score in masked.items():
        if i not in tied:
            picked[i] = int(np.argmin(score))
            total += float(score[picked[i]])
    for members in group.arrays.values():
        cost, choice = _one_value(candidates, masked, members)
        total += cost
        picked.update(choice)
    return total, picked


def _one_value(
    candidates: Candidates, masked: dict[int, Array], members: Iterable[int]
) -> tuple[float, dict[int, int]]:
    """Cheapest single value that every member of an array can take."""
    members = list(members)
    best: tuple[float, dict[int, int]] = (np.inf, {})
    for value in np.unique(candidates.series_ohm[members]):
        cost, choice = 0.0, {}
        for i in members:
            score = np.where(candidates.series_ohm[i] == value, masked[i], np.inf)
            choice[i] = int(np.argmin(score))
            cost += float(score[choice[i]])
        if cost < best[0]:
            best = (cost, choice)
    return best
