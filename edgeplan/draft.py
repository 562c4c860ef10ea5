"""What a run found, before it is written down."""

from dataclasses import dataclass
from typing import Any

from numpy.typing import NDArray

from edgeplan.board import Board
from edgeplan.evaluate import Bench, Evaluation
from edgeplan.nets import Blocked, NetFacts
from edgeplan.scoring import Block, Scores
from edgeplan.windows import StateWindow

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """One candidate per net: its checks (one column) and its window, in board order."""

    chosen: Array
    evaluation: dict[int, tuple[Evaluation, int]]
    window: dict[int, StateWindow]


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """Everything a run found, before it is written down."""

    board: Board
    command: str
    facts: tuple[NetFacts, ...]
    blocked: tuple[Blocked, ...]
    blocks: tuple[Block, ...]
    scores: Scores
    now: State
    after: State
    bench_now: Bench
    bench_after: Bench
    can_pass: Array
    undecided: str
    only: str
