"""The whole run in the order the data flows; the front door of the library."""

from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import record, scoring
from edgeplan.board import Board
from edgeplan.candidates import AS_DRAWN, Candidates, drawn_ohm
from edgeplan.choice import per_net
from edgeplan.draft import Draft, State
from edgeplan.evaluate import Bench, Evaluation, StrobeFlights, evaluate, strobe_flights
from edgeplan.nets import NetFacts, Nets, resolve
from edgeplan.radiated import radiation_of
from edgeplan.readers import read_board
from edgeplan.results import Results
from edgeplan.scoring import Block, Progress, Scores
from edgeplan.windows import StateWindow, solve

Array = NDArray[Any]

TIMED_BY_CLOCK = ("common-clock", "source-synchronous")
ROUNDS = 8  # of choosing again after an edge fell outside its own window


def plan(
    board: Path | str,
    *,
    undecided: str | None = None,
    jobs: int = 1,
    progress: Callable[[str, float], None] | None = None,
) -> Results:
    """Windows, proposals and verdicts of a board.

    Parameters
    ----------
    board : path
        The board's folder or its ``board.toml``.
    undecided : {"fail", "warn"}, optional
        Overrides the board's policy.
    jobs : int
        Processes to use; the result does not depend on it.
    progress : callable, optional
        Called with a word and the share done.

    Returns
    -------
    Results
        The record that every report reads.

    Raises
    ------
    edgeplan.errors.InputError
        With every problem of the input files.
    """
    return _run(read_board(Path(board)), "plan", undecided, jobs, progress)


def check(
    board: Path | str,
    *,
    undecided: str | None = None,
    jobs: int = 1,
    progress: Callable[[str, float], None] | None = None,
) -> Results:
    """Verdicts of a board as drawn, without proposals; see `plan`."""
    return _run(read_board(Path(board)), "check", undecided, jobs, progress)


def explain(
    board: Path | str,
    net: str,
    *,
    undecided: str | None = None,
    jobs: int = 1,
    progress: Callable[[str, float], None] | None = None,
) -> Results:
    """One net with every candidate, every check and its pictures; see `plan`.

    Raises
    ------
    edgeplan.errors.InputError
        Also when the board has no such net.
    """
    read = read_board(Path(board))
    name = record.find_net(read, net)
    return _run(read, "explain", undecided, jobs, progress, only=name)


def _run(
    board: Board,
    command: str,
    undecided: str | None,
    jobs: int,
    progress: Progress | None,
    only: str = "",
) -> Results:
    """Files to records to arrays to candidates to windows to choice to the record."""
    facts, blocked = resolve(board)
    bench = Bench(
        tolerance=board.file.resistors.tolerance, radiation=radiation_of(board), strobe={}
    )
    blocks = scoring.blocks_of(facts, board, drawn_only=command == "check")
    nothing = np.zeros(len(facts), dtype=int)
    flights = _flights(blocks, facts, nothing, bench)
    drawn_bench = replace(
        bench, strobe=flights, strobe_drawn=flights, clock_parts=_clock_parts(facts)
    )
    now = _state(blocks, nothing, drawn_bench, jobs, progress)
    if command == "check":
        scores = _gathered(blocks, facts, drawn_bench, jobs, progress)
        after, after_bench = now, drawn_bench
    else:
        scores, after, after_bench = _choose(blocks, facts, drawn_bench, now, jobs, progress)
    able = scoring.can_pass(facts, board, after_bench, scores)
    draft = Draft(
        board=board,
        command=command,
        facts=tuple(facts),
        blocked=tuple(blocked),
        blocks=tuple(blocks),
        scores=scores,
        now=now,
        after=after,
        bench_now=drawn_bench,
        bench_after=after_bench,
        can_pass=able,
        undecided=undecided or board.file.policy.undecided,
        only=only,
    )
    return record.results(draft)


def _gathered(
    blocks: list[Block], facts: list[NetFacts], bench: Bench, jobs: int, progress: Progress | None
) -> Scores:
    """Scores of all candidates in board order."""
    return scoring.gather(blocks, scoring.score_blocks(blocks, bench, jobs, progress), len(facts))


def _clocks(facts: list[NetFacts]) -> set[str]:
    """Clocks and strobes that data nets are timed against."""
    return {
        f.interface.clock_net for f in facts if f.timing in TIMED_BY_CLOCK and f.interface.clock_net
    }


def _clock_parts(facts: list[NetFacts]) -> dict[str, tuple[str, frozenset[str]]]:
    """Part that drives each clock, and the parts that receive it."""
    names = _clocks(facts)
    return {
        f.net.net: (
            f.net.driver_pin[0].partition(".")[0] if f.net.driver_pin else "",
            frozenset(pin.partition(".")[0] for pin in f.net.receiver_pin),
        )
        for f in facts
        if f.net.net in names
    }


def _flights(
    blocks: list[Block], facts: list[NetFacts], chosen: Array, bench: Bench
) -> StrobeFlights:
    """Flights of all clocks and strobes with their candidates, to a tenth of a picosecond."""
    names = _clocks(facts)
    flights: dict[str, dict[tuple[str, str], float]] = {}
    for block in blocks:
        own = [i for i, f in enumerate(block.nets.facts) if f.net.net in names]
        if own:
            nets = block.nets.take(own)
            state = block.candidates.take(own).state(chosen[block.index[own]])
            for name, found in strobe_flights(nets, state, bench.tolerance).items():
                flights[name] = {key: round(value, 13) for key, value in found.items()}
    return flights


def _same(one: StrobeFlights, other: StrobeFlights) -> bool:
    """Whether two sets of flights agree; what is not known agrees with itself."""
    return one.keys() == other.keys() and all(
        np.array_equal(list(one[n].values()), list(other[n].values()), equal_nan=True) for n in one
    )


def _choose(
    blocks: list[Block],
    facts: list[NetFacts],
    bench: Bench,
    drawn: State,
    jobs: int,
    progress: Progress | None,
) -> tuple[Scores, State, Bench]:
    """Choose, and choose again until clocks stand still and every edge lies in its own window."""
    scored = scoring.score_blocks(blocks, bench, jobs, progress)
    scores = scoring.gather(blocks, scored, len(facts))
    allowed = scores.candidates.exists.copy()
    common = Counter(v for v in (drawn_ohm(f) for f in facts) if v > 0)
    state, stale = drawn, False
    for _ in range(ROUNDS):
        chosen = _chosen(facts, scores, allowed, common)
        flights = _flights(blocks, facts, _fitted(scores, chosen), bench)
        if not _same(flights, bench.strobe):
            bench, stale = bench.with_strobe(flights), True
            scored = _rescored(blocks, scored, bench, jobs, progress)
            scores = scoring.gather(blocks, scored, len(facts))
            chosen = _chosen(facts, scores, allowed, common)
        state = _state(blocks, chosen, bench, jobs, progress, known=state, stale=stale)
        flights = _flights(blocks, facts, _fitted(scores, chosen), bench)
        stale = not _same(flights, bench.strobe)
        lucky = [
            i
            for i, k in enumerate(chosen)
            if scores.passes[i, k] and not state.window[i].holds_present_edge
        ]
        if not lucky and not stale:
            break
        allowed[lucky, chosen[lucky]] = False
        scores.passes[lucky, chosen[lucky]] = False
        allowed[lucky, AS_DRAWN] = True
    return scores, state, bench


def _fitted(scores: Scores, chosen: Array) -> Array:
    """Candidates that count as fitted: a least-excess proposal waits for its remedy. (N,)"""
    return np.where(scores.passes[np.arange(len(chosen)), chosen], chosen, AS_DRAWN)


def _rescored(
    blocks: list[Block], scored: list[Scores], bench: Bench, jobs: int, progress: Progress | None
) -> list[Scores]:
    """Scores again of the blocks that are timed against a clock; the others stay."""
    timed = [k for k, block in enumerate(blocks) if block.nets.facts[0].timing in TIMED_BY_CLOCK]
    again = scoring.score_blocks([blocks[k] for k in timed], bench, jobs, progress)
    fresh = dict(zip(timed, again, strict=True))
    return [fresh.get(k, old) for k, old in enumerate(scored)]


def _chosen(facts: list[NetFacts], scores: Scores, allowed: Array, common: Counter[float]) -> Array:
    """One candidate per net; a second look prefers the values that the first one used most.

    An undecided net keeps what is drawn, unless its bank or array moves it.
    """
    open_net = scores.undecided[:, :1]
    drawn = np.arange(scores.passes.shape[1])[None, :] == AS_DRAWN
    stay = np.where(open_net & ~scores.passes & drawn, -4 * per_net.FAIL, 0.0)

    def best(counted: Counter[float]) -> Array:
        cost = per_net.scores(
            scores.candidates,
            scores.passes,
            scores.works,
            scores.undecided,
            scores.share,
            allowed,
            counted,
        )
        return per_net.choose(facts, scores.candidates, cost + stay)

    used = scores.candidates.series_ohm[np.arange(len(facts)), best(common)]
    return best(common + Counter(float(v) for v in used if v > 0))


def _state(
    blocks: list[Block],
    chosen: Array,
    bench: Bench,
    jobs: int,
    progress: Progress | None,
    known: State | None = None,
    *,
    stale: bool = False,
) -> State:
    """Checks and windows of one candidate per net; what did not change is kept.

    ``stale`` says that clocks moved since: what is timed against one is solved again.
    """
    evaluations = dict(known.evaluation) if known else {}
    windows = dict(known.window) if known else {}
    work = []
    for block in blocks:
        timed = stale and block.nets.facts[0].timing in TIMED_BY_CLOCK
        changed = [known is None or timed or known.chosen[i] != chosen[i] for i in block.index]
        fresh = np.flatnonzero(changed)
        if fresh.size:
            state = block.candidates.take(fresh).state(chosen[block.index[fresh]])
            work.append((block.index[fresh], block.nets.take(fresh), state))
    solved = scoring.mapped(partial(_solved, bench=bench), work, jobs, progress, "solving windows")
    for (index, *_), (evaluation, found) in zip(work, solved, strict=True):
        for row, i in enumerate(map(int, index)):
            evaluations[i], windows[i] = (evaluation, row), found[row]
    return State(chosen=chosen, evaluation=evaluations, window=windows)


def _solved(
    work: tuple[Array, Nets, Candidates], bench: Bench
) -> tuple[Evaluation, list[StateWindow]]:
    """Checks and windows of one state of a block."""
    _, nets, state = work
    return evaluate(nets, state, bench), solve(nets, state, bench)
