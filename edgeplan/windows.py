"""Slowest allowed and fastest acceptable edge of one state of each net, with their causes.

One factor scales the ramp of the source at all corners; setting and resistor are held.
The window is read off the same checks that judge candidates, never off a formula.
"""

from dataclasses import dataclass
from math import inf, nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.candidates import Candidates, drive, setting_table
from edgeplan.checks import CheckTable
from edgeplan.drives import DIRECTIONS, RAISED_COSINE_SHARE
from edgeplan.evaluate import Bench, Evaluation, evaluate
from edgeplan.nets import Nets
from edgeplan.physics import waveforms

Array = NDArray[Any]

SCAN_POINTS = 40
REFINE_POINTS = 8
REFINE_PASSES = 2
SHORTEST_RAMP_S = 0.1e-9
LONGEST_OVER_LIMIT = 2.5


@dataclass(frozen=True, slots=True, kw_only=True)
class End:
    """One end of a window as a factor on the ramp; NaN where there is none.

    ``check`` is the one that sets it, empty where none does within the scan.
    """

    factor: float
    check: str = ""
    frequency_hz: float = nan
    any: bool = False
    why_none: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class StateWindow:
    """Window of one state of one net; factors on the ramp, edges of the typical corner. [s]"""

    slowest: End
    fastest: End
    slowest_edge_s: float
    fastest_edge_s: float
    edge_s: float
    limit_edge_s: dict[str, float]

    @property
    def known(self) -> bool:
        """Whether both ends could be decided."""
        return not (self.slowest.why_none == UNDECIDED or self.fastest.why_none == UNDECIDED)

    @property
    def holds_present_edge(self) -> bool:
        """Whether the state's own edge lies in its window."""
        return self.known and self.fastest.factor <= 1 <= self.slowest.factor


UNDECIDED = "undecided"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Scan:
    """Which scanned ramp fails what; one row per net."""

    factor: Array
    faster: Array
    slower: Array
    evaluation: Evaluation


def solve(nets: Nets, state: Candidates, bench: Bench) -> list[StateWindow]:
    """Windows of one state of every net of a block of one timing class.

    Parameters
    ----------
    nets : Nets
        N nets.
    state : Candidates
        One candidate per net, (N, 1).
    bench : Bench
        As for candidates.

    Returns
    -------
    list of StateWindow
        One per net.

    Notes
    -----
    Slowest allowed: the longest scanned ramp that passes every check that wants a faster
    edge. Fastest acceptable: from there downwards to the first failure of any check. Each end
    is then refined twice between its last passing and first failing ramp.
    """
    scan = _scan(nets, state, bench, _scan_factors(nets, state))
    slow, fast = _slow_brackets(scan), _fast_brackets(scan, _slow_brackets(scan))
    for _ in range(REFINE_PASSES):
        slow, fast = _refined(nets, state, bench, slow, fast)
    undecided = {w: _undecided(scan.evaluation, w) for w in ("faster", "slower")}
    ends = [
        (
            _slow_end(slow, i, scan, undecided["faster"][i]),
            _fast_end(fast, i, scan, undecided["slower"][i]),
        )
        for i in range(len(nets))
    ]
    return _with_edges(nets, state, scan, ends)


def _base_ramp_s(nets: Nets, state: Candidates) -> Array:
    """The ramp that labels each state: typical, else slow, else fast; the later edge. (N,) [s]"""
    found = np.full(len(nets), np.nan)
    for corner in ("fast", "slow", "typical"):
        for direction in ("falling", "rising"):
            table = setting_table(nets, "ramp_s", corner, direction)
            ramp = table[np.arange(len(nets)), state.setting[:, 0]]
            found = np.where(np.isfinite(ramp), ramp, found)
    return found


def _scan_factors(nets: Nets, state: Candidates) -> Array:
    """Ramp factors to try, (N, Q), rising; 1 is one of them."""
    base = _base_ramp_s(nets, state)
    share = RAISED_COSINE_SHARE["10-90"]
    longest = np.full(len(nets), inf)
    longest = np.fmin(longest, nets.bit_s)
    np.fmin.at(longest, nets.receiver_net, nets.longest_transition_s)
    longest = LONGEST_OVER_LIMIT * longest / share
    longest = np.where(np.isfinite(longest), longest, 30 * base)
    delay = np.array([_delay_s(nets, i) for i in range(len(nets))])
    shortest = np.maximum(SHORTEST_RAMP_S, delay / 20)
    low = np.minimum(shortest, 0.8 * base)
    high = np.maximum(longest, 1.25 * base)
    steps = np.linspace(0, 1, SCAN_POINTS)
    grid = low[:, None] * (high / low)[:, None] ** steps / base[:, None]
    return np.sort(np.concatenate([grid, np.ones((len(nets), 1))], axis=1), axis=1)


def _delay_s(nets: Nets, net: int) -> float:
    """Delay of the longest way of a net. [s]"""
    path = nets.facts[net].path
    return path.main_length_m * path.main_line.delay_s_per_m


def _scan(nets: Nets, state: Candidates, bench: Bench, factor: Array) -> _Scan:
    """Judge a state at many ramps; an engine without a number counts as failing."""
    ramps = state.with_ramps(factor)
    evaluation = evaluate(nets, ramps, bench)
    failing = {
        wants: evaluation.failing(wants) | _gaps(evaluation, wants) | ~ramps.exists
        for wants in ("faster", "slower")
    }
    return _Scan(
        factor=factor,
        faster=failing["faster"],
        slower=failing["slower"],
        evaluation=evaluation,
    )


def _gaps(evaluation: Evaluation, wants: str) -> Array:
    """Open checks at some ramps of a net whose other ramps are decided."""
    found = np.zeros(evaluation.exists.shape, dtype=bool)
    for table in evaluation.tables:
        if table.wants == wants:
            some = (table.decided & evaluation.exists).any(axis=1, keepdims=True)
            found |= table.open & some
    return found & evaluation.exists


def _undecided(evaluation: Evaluation, wants: str) -> list[str]:
    """Per net, why one side of the window cannot be decided; empty where it can."""
    found = [""] * evaluation.exists.shape[0]
    for table in evaluation.tables:
        never = table.applies & ~(table.decided & evaluation.exists).any(axis=1)
        if table.wants != wants:
            continue
        for i in np.flatnonzero(never):
            found[i] = found[i] or table.because[i] or table.check
    return found


@dataclass(frozen=True, slots=True, kw_only=True)
class _Brackets:
    """Per net the last passing and the first failing factor of an end.

    ``table`` and ``frequency_hz`` name the check at the failing side; a NaN passing factor
    means none passes, a NaN failing factor that nothing fails within the scan.
    """

    passing: Array
    failing: Array
    table: Array
    frequency_hz: Array


def _slow_brackets(scan: _Scan) -> _Brackets:
    """Longest ramp that passes every check that wants a faster edge, and its failing neighbour."""
    count, width = scan.factor.shape
    good = ~scan.faster
    last = np.where(good.any(axis=1), width - 1 - np.argmax(good[:, ::-1], axis=1), -1)
    rows = np.arange(count)
    beyond = np.minimum(last + 1, width - 1)
    passing = np.where(last >= 0, scan.factor[rows, last], nan)
    failing = np.where(last == width - 1, nan, scan.factor[rows, beyond])
    table, frequency = _binding(scan.evaluation, beyond, "faster")
    return _Brackets(passing=passing, failing=failing, table=table, frequency_hz=frequency)


def _fast_brackets(scan: _Scan, slow: _Brackets) -> _Brackets:
    """Shortest ramp from which on everything passes up to the slowest allowed one.

    Where even the slowest allowed edge fails a check that wants a slower one, the bracket
    lies above it: the window is closed by the distance between the two ends.
    """
    count, width = scan.factor.shape
    rows = np.arange(count)
    last = np.array(
        [
            width - 1 if np.isnan(p) else int(np.flatnonzero(scan.factor[i] == p)[-1])
            for i, p in enumerate(slow.passing)
        ],
        dtype=int,
    )
    closed = scan.slower[rows, last] | np.isnan(slow.passing)
    bad = np.where(closed[:, None], scan.slower, scan.slower | scan.faster)
    reach = np.where(closed, width - 1, last)
    below = np.arange(width)[None, :] <= reach[:, None]
    blocked = bad & below
    highest_bad = np.where(blocked.any(axis=1), width - 1 - np.argmax(blocked[:, ::-1], axis=1), -1)
    first = highest_bad + 1
    passing = np.where(first <= reach, scan.factor[rows, np.minimum(first, width - 1)], nan)
    failing = np.where(highest_bad >= 0, scan.factor[rows, np.maximum(highest_bad, 0)], nan)
    column = np.maximum(highest_bad, 0)
    table, frequency = _fast_cause(scan.evaluation, column, closed)
    return _Brackets(passing=passing, failing=failing, table=table, frequency_hz=frequency)


def _fast_cause(evaluation: Evaluation, column: Array, closed: Array) -> tuple[Array, Array]:
    """What sets the fast end: any check; in a closed window one that wants a slower edge."""
    either, slower = _binding(evaluation, column, None), _binding(evaluation, column, "slower")
    return np.where(closed, slower[0], either[0]), np.where(closed, slower[1], either[1])


def _binding(evaluation: Evaluation, column: Array, wants: str | None) -> tuple[Array, Array]:
    """Check with the smallest share at one column per net, and its frequency. (N,)"""
    rows = np.arange(len(column))
    best = np.full(len(column), inf)
    table = np.full(len(column), -1)
    frequency = np.full(len(column), nan)
    for k, t in enumerate(evaluation.tables):
        if wants not in (None, t.wants):
            continue
        share = np.where(t.applies & t.decided[rows, column], t.share[rows, column], inf)
        share = np.where(t.fails[rows, column], share, inf)
        smaller = share < best
        best = np.where(smaller, share, best)
        table = np.where(smaller, k, table)
        at = t.extra.get("frequency_hz")
        value = at[rows, column] if at is not None else np.full(len(column), nan)
        frequency = np.where(smaller, value, frequency)
    return table, frequency


def _between(brackets: _Brackets) -> Array:
    """Factors inside every bracket, in equal ratios from passing to failing; else NaN."""
    steps = np.arange(1, REFINE_POINTS + 1) / (REFINE_POINTS + 1)
    return brackets.passing[:, None] * (brackets.failing / brackets.passing)[:, None] ** steps


def _refined(
    nets: Nets, state: Candidates, bench: Bench, slow: _Brackets, fast: _Brackets
) -> tuple[_Brackets, _Brackets]:
    """Both brackets narrowed by one evaluation."""
    factor = np.concatenate([_between(slow), _between(fast)], axis=1)
    if not np.isfinite(factor).any():
        return slow, fast
    scan = _scan(nets, state, bench, factor)
    closed = fast.passing > slow.passing
    bad_fast = np.where(closed[:, None], scan.slower, scan.slower | scan.faster)
    closed = closed | np.isnan(slow.passing)
    return (
        _narrowed(slow, scan, scan.faster[:, :REFINE_POINTS], 0, None),
        _narrowed(fast, scan, bad_fast[:, REFINE_POINTS:], REFINE_POINTS, closed),
    )


def _narrowed(
    old: _Brackets, scan: _Scan, bad: Array, offset: int, closed: Array | None
) -> _Brackets:
    """A bracket between its last point before the first failing one and that one.

    ``closed`` belongs to the fast end; None is the slow end.
    """
    rows = np.arange(len(old.passing))
    factor = scan.factor[:, offset : offset + REFINE_POINTS]
    valid = np.isfinite(factor[:, 0])
    any_bad = bad.any(axis=1) & valid
    first = np.where(any_bad, np.argmax(bad, axis=1), REFINE_POINTS)
    before = np.maximum(first - 1, 0)
    passing = np.where(valid & (first > 0), factor[rows, before], old.passing)
    failing = np.where(any_bad, factor[rows, np.minimum(first, REFINE_POINTS - 1)], old.failing)
    column = np.minimum(first, REFINE_POINTS - 1) + offset
    table, frequency = (
        _binding(scan.evaluation, column, "faster")
        if closed is None
        else _fast_cause(scan.evaluation, column, closed)
    )
    keep = any_bad & (table >= 0)
    return _Brackets(
        passing=passing,
        failing=failing,
        table=np.where(keep, table, old.table),
        frequency_hz=np.where(keep, frequency, old.frequency_hz),
    )


def _slow_end(brackets: _Brackets, net: int, scan: _Scan, undecided: str) -> End:
    """Slowest allowed edge of one net."""
    if undecided:
        return End(factor=nan, why_none=UNDECIDED)
    passing = float(brackets.passing[net])
    if np.isnan(passing):
        table, _ = _binding(scan.evaluation, np.zeros(len(brackets.passing), dtype=int), "faster")
        return End(
            factor=nan, check=_name(scan, int(table[net])), why_none="no edge is fast enough"
        )
    return End(
        factor=passing,
        check=_name(scan, int(brackets.table[net])),
        frequency_hz=float(brackets.frequency_hz[net]),
        any=bool(np.isnan(brackets.failing[net])),
    )


def _fast_end(brackets: _Brackets, net: int, scan: _Scan, undecided: str) -> End:
    """Fastest acceptable edge of one net."""
    if undecided:
        return End(factor=nan, why_none=UNDECIDED)
    check = _name(scan, int(brackets.table[net]))
    frequency_hz = float(brackets.frequency_hz[net])
    passing = float(brackets.passing[net])
    if np.isnan(passing):
        return End(
            factor=nan, check=check, frequency_hz=frequency_hz, why_none="no edge is slow enough"
        )
    return End(
        factor=passing,
        check=check,
        frequency_hz=frequency_hz,
        any=bool(np.isnan(brackets.failing[net])),
    )


def _name(scan: _Scan, table: int) -> str:
    """Name of a check by the index of its table."""
    return scan.evaluation.tables[table].check if table >= 0 else ""


def _with_edges(
    nets: Nets, state: Candidates, scan: _Scan, ends: list[tuple[End, End]]
) -> list[StateWindow]:
    """Turn factors into launched edges of the typical corner."""
    limits = _limit_factors(scan)
    names = list(limits)
    columns = [
        np.ones(len(nets)),
        np.array([s.factor for s, _ in ends]),
        np.array([f.factor for _, f in ends]),
        *limits.values(),
    ]
    edges = launched_edge_s(nets, state.with_ramps(np.stack(columns, axis=1)))
    return [
        StateWindow(
            slowest=slow,
            fastest=fast,
            edge_s=float(edges[i, 0]),
            slowest_edge_s=float(edges[i, 1]),
            fastest_edge_s=float(edges[i, 2]),
            limit_edge_s={n: float(edges[i, 3 + k]) for k, n in enumerate(names)},
        )
        for i, (slow, fast) in enumerate(ends)
    ]


def _limit_factors(scan: _Scan) -> dict[str, Array]:
    """Per check the factor at which it alone just holds, from the scan by interpolation. (N,)"""
    return {t.check: _limit_factor(t, scan) for t in scan.evaluation.tables}


def _limit_factor(table: CheckTable, scan: _Scan) -> Array:
    """Outermost passing ramp of one check, interpolated to no margin; NaN if it never turns."""
    found = np.full(len(scan.factor), nan)
    good = ~(table.fails | table.open) & scan.evaluation.exists
    for i in np.flatnonzero(table.applies):
        if table.wants == "faster":
            passing = np.flatnonzero(good[i])
            a = int(passing[-1]) if len(passing) else -1
            b = a + 1
        else:
            failing = np.flatnonzero(~good[i])
            b = int(failing[-1]) if len(failing) else -1
            a = b + 1
        if min(a, b) < 0 or max(a, b) >= scan.factor.shape[1]:
            continue
        ma, mb = table.margin[i, a], table.margin[i, b]
        share = ma / (ma - mb) if np.isfinite(ma) and np.isfinite(mb) and ma != mb else 0.0
        found[i] = scan.factor[i, a] * (scan.factor[i, b] / scan.factor[i, a]) ** share
    return found


def launched_edge_s(nets: Nets, candidates: Candidates, corner: str = "typical") -> Array:
    """Launched edge of every candidate at one corner, 10-90 %, (N, C).

    The slower of rising and falling. Where the typical corner is not stated the slow
    one labels, then the fast one. [s]
    """
    found = np.full(candidates.setting.shape, np.nan)
    alike = all(s.symmetric for f in nets.facts for s in f.settings)
    directions = DIRECTIONS[:1] if alike else DIRECTIONS
    order = [corner] if corner != "typical" else ["typical", "slow", "fast"]
    for name in order:
        if not np.isnan(found).any():
            break
        edges = np.full(found.shape, np.nan)
        for direction in directions:
            source = drive(nets, candidates, name, direction, 0.0)
            edges = np.fmax(edges, waveforms.incident_edge_s(nets.trees[name], source))
        found = np.where(np.isnan(found), edges, found)
    return found
