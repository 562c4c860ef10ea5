"""All candidates of a board, block by block, reduced to what choosing needs."""

from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import Board
from edgeplan.candidates import Candidates, list_candidates, list_continuous, list_drawn
from edgeplan.evaluate import Bench, Evaluation, evaluate
from edgeplan.nets import NetFacts, Nets, build

Array = NDArray[Any]

Progress = Callable[[str, float], None]
Item = TypeVar("Item")
Found = TypeVar("Found")
BLOCK_NETS = 128


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """Nets of one timing class, evaluated together; ``index`` are their places on the board."""

    index: Array
    nets: Nets
    candidates: Candidates


@dataclass(frozen=True, slots=True, kw_only=True)
class Scores:
    """Every candidate of N nets in a few tables (N, C)."""

    candidates: Candidates
    passes: Array
    works: Array
    undecided: Array
    share: Array


def blocks_of(facts: Sequence[NetFacts], board: Board, *, drawn_only: bool) -> list[Block]:
    """Nets in blocks of one timing class; sizes depend on the input only.

    Nets with another setting before firmware runs stand in blocks of their own, since
    they are judged twice.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets in the order of the board.
    board : Board
        For levels and resistors.
    drawn_only : bool
        Whether only the nets as drawn are wanted.

    Returns
    -------
    list of Block
        Every net in one of them.
    """
    groups: dict[tuple[str, bool], list[int]] = defaultdict(list)
    for i, f in enumerate(facts):
        groups[f.timing, f.setting_boot != f.setting].append(i)
    found = []
    for members in groups.values():
        for start in range(0, len(members), BLOCK_NETS):
            index = members[start : start + BLOCK_NETS]
            nets = build([facts[i] for i in index], board)
            candidates = (
                list_drawn(nets) if drawn_only else list_candidates(nets, board.file.resistors)
            )
            found.append(Block(index=np.array(index), nets=nets, candidates=candidates))
    return found


def score_block(block: Block, bench: Bench) -> Scores:
    """Evaluate one block and keep what choosing needs.

    Parameters
    ----------
    block : Block
        Nets and candidates.
    bench : Bench
        What every evaluation shares.

    Returns
    -------
    Scores
        Of this block, in its own order.
    """
    return summarise(block.candidates, evaluate(block.nets, block.candidates, bench))


def summarise(candidates: Candidates, evaluation: Evaluation) -> Scores:
    """Pass, undecided and smallest share of every candidate.

    Parameters
    ----------
    candidates : Candidates
        Tables (N, C).
    evaluation : Evaluation
        Their checks.

    Returns
    -------
    Scores
        Undecided only where nothing fails.
    """
    failing = evaluation.failing("faster") | evaluation.failing("slower")
    return Scores(
        candidates=candidates,
        passes=evaluation.passes,
        works=~evaluation.failing("faster"),
        undecided=evaluation.open() & ~failing,
        share=evaluation.smallest_share,
    )


def mapped(
    function: Callable[[Item], Found],
    items: Sequence[Item],
    jobs: int,
    progress: Progress | None,
    word: str,
) -> list[Found]:
    """Apply a function to every item, over several processes if asked; the order is kept.

    Parameters
    ----------
    function : callable
        Of one item; importable, since processes look it up by name.
    items : sequence
        Blocks of work whose sizes depend on the input only.
    jobs : int
        Processes.
    progress : callable or None
        Told the word and the share done, in this process only.
    word : str
        What is being done.

    Returns
    -------
    list
        One result per item.

    Examples
    --------
    >>> mapped(abs, [-1, 2], 1, None, "counting")
    [1, 2]
    """
    if jobs > 1 and len(items) > 1:
        from joblib import Parallel, delayed

        found: list[Found] = Parallel(n_jobs=jobs)(delayed(function)(item) for item in items)
        return found
    results = []
    for done, item in enumerate(items):
        if progress is not None:
            progress(word, done / len(items))
        results.append(function(item))
    return results


def score_blocks(
    blocks: Sequence[Block], bench: Bench, jobs: int, progress: Progress | None
) -> list[Scores]:
    """Evaluate all blocks, over several processes if asked.

    Parameters
    ----------
    blocks : sequence of Block
        All of a board.
    bench : Bench
        What every evaluation shares.
    jobs : int
        Processes; the result does not depend on it.
    progress : callable, optional
        Called with a word and the share done, in one process only.

    Returns
    -------
    list of Scores
        In the order of the blocks.
    """
    function = partial(score_block, bench=bench)
    return mapped(function, blocks, jobs, progress, "judging candidates")


def gather(blocks: Sequence[Block], scores: Sequence[Scores], count: int) -> Scores:
    """Scores of all blocks in the order of the board, padded to one width.

    Parameters
    ----------
    blocks, scores : sequence of Block, sequence of Scores
        Of a whole board, in one order.
    count : int
        Nets N on the board.

    Returns
    -------
    Scores
        (N, C); what a narrower block does not have does not exist.
    """
    width = max((s.candidates.count for s in scores), default=1)
    whole = Candidates(
        setting=np.zeros((count, width), dtype=int),
        series_ohm=np.zeros((count, width)),
        pull_up_ohm=np.full((count, width), np.nan),
        exists=np.zeros((count, width), dtype=bool),
        cost=np.zeros((count, width, 4), dtype=int),
        ramp_factor=np.ones((count, width)),
    )
    passes, works, undecided = np.zeros((3, count, width), dtype=bool)
    share = np.full((count, width), -np.inf)
    for block, found in zip(blocks, scores, strict=True):
        own = found.candidates.count
        at = np.ix_(block.index, np.arange(own))
        for name in ("setting", "series_ohm", "pull_up_ohm", "exists", "cost", "ramp_factor"):
            getattr(whole, name)[at] = getattr(found.candidates, name)
        passes[at], works[at], undecided[at] = found.passes, found.works, found.undecided
        share[at] = found.share
    return Scores(candidates=whole, passes=passes, works=works, undecided=undecided, share=share)


def can_pass(facts: Sequence[NetFacts], board: Board, bench: Bench, scores: Scores) -> Array:
    """Whether any setting with any resistor passes (or is undecided), site or not. (N,)

    Only nets without a passing candidate are looked at again, over a dense ladder of values.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.
    board, bench : Board, Bench
        As for candidates.
    scores : Scores
        Of the candidates that sites allow, (N, C).

    Returns
    -------
    numpy.ndarray
        Booleans (N,); open-drain nets count as able, since another resistor decides them.
    """
    found = (scores.passes | scores.undecided).any(axis=1)
    found |= np.array([f.timing == "open-drain" for f in facts], dtype=bool)
    again = [i for i in range(len(facts)) if not found[i]]
    for block in blocks_of([facts[i] for i in again], board, drawn_only=True):
        ladder = list_continuous(block.nets, board.file.resistors.highest_ohm)
        dense = summarise(ladder, evaluate(block.nets, ladder, bench))
        can = np.any(dense.passes | dense.undecided, axis=1)
        for i, able in zip(block.index, can, strict=True):
            found[again[i]] = able
    return found


def states(block: Block, chosen: Array) -> tuple[Nets, Candidates]:
    """One chosen candidate per net of a block, (N, 1)."""
    return block.nets, block.candidates.state(chosen[block.index])


def with_strobe(bench: Bench, flights: dict[str, Any]) -> Bench:
    """A bench that knows the flights of strobes."""
    return replace(bench, strobe=flights)
