"""The whole run in the order the data flows; the front door of the library."""

from collections import Counter
from collections.abc import Callable
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
from edgeplan.evaluate import Bench, Evaluation, evaluate, strobe_flights
from edgeplan.nets import NetFacts, Nets, resolve
from edgeplan.radiated import radiation_of
from edgeplan.readers import read_board
from edgeplan.results import Results
from edgeplan.scoring import Block, Progress, Scores
from edgeplan.windows import StateWindow, solve

Array = NDArray[Any]

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
    drawn_bench = bench.with_strobe(_flights(blocks, facts, nothing, bench))
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


def _strobes(facts: list[NetFacts]) -> set[str]:
    """Clock nets that source-synchronous data are timed against."""
    return {
        f.interface.clock_net
        for f in facts
        if f.timing == "source-synchronous" and f.interface.clock_net
    }


def _flights(
    blocks: list[Block], facts: list[NetFacts], chosen: Array, bench: Bench
) -> dict[str, Any]:
    """Flights of all strobes with their chosen candidates."""
    names = _strobes(facts)
    flights: dict[str, Any] = {}
    for block in blocks:
        own = [i for i, f in enumerate(block.nets.facts) if f.net.net in names]
        if own:
            nets = block.nets.take(own)
            state = block.candidates.take(own).state(chosen[block.index[own]])
            flights.update(strobe_flights(nets, state, bench.tolerance))
    return flights


def _choose(
    blocks: list[Block],
    facts: list[NetFacts],
    bench: Bench,
    drawn: State,
    jobs: int,
    progress: Progress | None,
) -> tuple[Scores, State, Bench]:
    """Choose, and choose again until strobes stand still and every edge lies in its own window."""
    scores = _gathered(blocks, facts, bench, jobs, progress)
    allowed = scores.candidates.exists.copy()
    common = Counter(v for v in (drawn_ohm(f) for f in facts) if v > 0)
    state: State | None = drawn
    for _ in range(ROUNDS):
        chosen = _chosen(facts, scores, allowed, common)
        flights = _flights(blocks, facts, chosen, bench)
        if flights != bench.strobe:
            bench = bench.with_strobe(flights)
            scores = _gathered(blocks, facts, bench, jobs, progress)
            chosen = _chosen(facts, scores, allowed, common)
            state = None
        state = _state(blocks, chosen, bench, jobs, progress, known=state)
        lucky = [
            i
            for i, k in enumerate(chosen)
            if scores.passes[i, k] and not state.window[i].holds_present_edge
        ]
        if not lucky:
            break
        allowed[lucky, chosen[lucky]] = False
        scores.passes[lucky, chosen[lucky]] = False
        allowed[lucky, 0] = True
    assert state is not None  # noqa: S101 - at least one round ran
    return scores, state, bench


def _chosen(facts: list[NetFacts], scores: Scores, allowed: Array, common: Counter[float]) -> Array:
    """One candidate per net; a second look prefers the values that the first one used most.

    An undecided net keeps what is drawn, unless its bank or array moves it.
    """
    open_net = scores.undecided[:, :1]
    usable = allowed & (scores.passes | ~scores.undecided | open_net)
    drawn = np.arange(scores.passes.shape[1])[None, :] == AS_DRAWN
    stay = np.where(open_net & ~scores.passes & drawn, -per_net.FAIL, 0.0)

    def best(counted: Counter[float]) -> Array:
        cost = per_net.scores(
            scores.candidates, scores.passes, scores.works, scores.share, usable, counted
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
) -> State:
    """Checks and windows of one candidate per net; what did not change is kept."""
    evaluations = dict(known.evaluation) if known else {}
    windows = dict(known.window) if known else {}
    work = []
    for block in blocks:
        changed = [known is None or known.chosen[i] != chosen[i] for i in block.index]
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
