"""Window and candidate agree: 2,000 random nets, seeded, judged by both."""

from functools import cache

import numpy as np
import pytest
from random_boards import random_board

from edgeplan import plan
from edgeplan.candidates import Candidates, list_drawn
from edgeplan.evaluate import Bench, Evaluation, evaluate
from edgeplan.nets import Nets, resolve
from edgeplan.radiated import radiation_of, source_levels
from edgeplan.scoring import blocks_of
from edgeplan.verdicts import judge
from edgeplan.windows import StateWindow, solve

NETS = 2000  # about 40 s on an idle core
SEED = 20261201
NEAR = 2e-3  # windows are refined to two thousandths of an edge

Solved = tuple[Nets, Candidates, Evaluation, list[StateWindow], Bench]


def _solve(board) -> list[Solved]:
    facts, blocked = resolve(board)
    assert not blocked
    bench = Bench(tolerance=0.05, radiation=radiation_of(board), strobe={})
    found = []
    for block in blocks_of(facts, board, drawn_only=True):
        state = list_drawn(block.nets)
        found.append(
            (
                block.nets,
                state,
                evaluate(block.nets, state, bench),
                solve(block.nets, state, bench),
                bench,
            )
        )
    return found


@cache
def _solved() -> list[Solved]:
    return _solve(random_board(NETS, SEED))


def _factors(window: StateWindow, count: int) -> np.ndarray:
    """Ramps between both ends of an open window, a little inside; NaN where it is closed."""
    low, high = window.fastest.factor * (1 + NEAR), window.slowest.factor * (1 - NEAR)
    return np.geomspace(low, high, count) if low < high else np.full(count, np.nan)


def test_every_ramp_between_both_ends_of_a_window_passes_every_check():
    """Up to the stated error of each check: near an end, a finer grid may read it that much off."""
    swept = 0
    for nets, state, _, windows, bench in _solved():
        factors = np.stack([_factors(w, 60) for w in windows])
        ramps = state.with_ramps(factors)
        evaluation = evaluate(nets, ramps, bench)
        for t in evaluation.tables:
            beyond = (t.fails | t.open) & ramps.exists & ~(t.margin >= -2 * t.error_high)
            assert not beyond.any(), (
                t.check,
                [nets.facts[i].net.net for i in np.nonzero(beyond)[0]],
            )
        swept += int(ramps.exists.sum())
    assert swept > 30_000  # most windows are open, and each was swept at 60 ramps


def test_a_net_is_inside_exactly_when_its_checks_hold_and_its_edge_lies_in_its_window():
    inside = 0
    for nets, state, evaluation, windows, bench in _solved():
        for i, window in enumerate(windows):
            verdict = judge(evaluation, i, 0, window, can_pass=True).verdict
            holds = bool(evaluation.passes[i, 0])
            assert (verdict == "inside") == (holds and window.holds_present_edge)
            inside += verdict == "inside"
            if holds and not window.holds_present_edge:
                up_to = np.geomspace(1, window.slowest.factor, 300)[None, :]
                one = nets.take([i])
                ramps = state.take(np.array([i])).with_ramps(up_to)
                assert not evaluate(one, ramps, bench).passes.all()
    assert 200 < inside < NETS


def test_an_edge_outside_its_window_fails_a_check_or_has_a_failing_slower_one():
    outside = 0
    for _, _, evaluation, windows, _ in _solved():
        for i, window in enumerate(windows):
            if window.slowest.factor * (1 + NEAR) < 1:
                assert evaluation.failing("faster")[i, 0]
                outside += 1
    assert outside > 50


def test_a_longer_ramp_never_has_more_emission_at_any_harmonic():
    factors = np.geomspace(0.05, 50, 120)[None, :]
    for nets, state, _, _, bench in _solved()[:6]:
        few = nets.take(range(0, len(nets), 4))
        ramps = state.take(np.arange(0, len(nets), 4)).with_ramps(factors)
        levels = source_levels(few, ramps, bench.radiation.passive(few), bench.tolerance)
        rising = np.diff(levels, axis=1) > 1e-6 * levels[:, 1:]
        assert np.isfinite(levels).all()
        assert not rising.any()


def _ends(board, end: str) -> dict[str, float]:
    return {
        f.net.net: getattr(window, end).factor
        for nets, _, _, windows, _ in _solve(board)
        for f, window in zip(nets.facts, windows, strict=True)
    }


def test_more_available_time_never_shortens_the_slowest_allowed_edge():
    tight = random_board(
        100,
        5,
        receiver=[{"name": n, "capacitance_f": c} for n, c in (("in_a", 5e-12), ("in_b", 8e-12))],
    )
    interfaces = [
        i.model_copy(
            update={
                "direction": [
                    d.model_copy(update={"setup_s": 0.5 * d.setup_s}) for d in i.direction
                ]
            }
        )
        for i in tight.file.interface
    ]
    loose = tight.model_copy(
        update={"file": tight.file.model_copy(update={"interface": interfaces})}
    )
    before, after = _ends(tight, "slowest"), _ends(loose, "slowest")
    longer = [after[n] >= before[n] * (1 - NEAR) or np.isnan(before[n]) for n in before]
    assert all(longer)
    assert sum(after[n] > 1.01 * before[n] for n in before) > 5


def test_more_cable_attenuation_never_lengthens_the_fastest_acceptable_edge():
    loud = random_board(100, 6)
    quiet = random_board(100, 6, cable=[{"name": "mains", "length_m": 1.5, "attenuation_db": 14.0}])
    before, after = _ends(loud, "fastest"), _ends(quiet, "fastest")
    for name in before:
        if np.isfinite(before[name]):
            assert after[name] <= before[name] * (1 + NEAR)
    assert sum(after[n] < 0.99 * before[n] for n in before if np.isfinite(before[n])) > 5


@pytest.mark.parametrize("seed", [11, 12])
def test_the_proposed_edge_of_an_inside_net_lies_in_its_own_window(seed, monkeypatch):
    board = random_board(80, seed)
    monkeypatch.setattr(plan, "read_board", lambda _: board)
    found = plan.plan("any")
    inside = [n for n in found.nets if n.verdict_after == "inside"]
    assert len(inside) > 25
    for net in inside:
        own = net.window_after
        edge, slowest = net.edge_after_s.typical, own.slowest_allowed.edge_s
        fastest = own.fastest_acceptable.edge_s
        assert fastest <= edge * (1 + NEAR)
        assert edge <= slowest * (1 + NEAR)
        proposed = [c for c in net.checks if c.candidate == net.proposal]
        assert proposed
        assert all(c.decided and c.margin >= 0 for c in proposed)
