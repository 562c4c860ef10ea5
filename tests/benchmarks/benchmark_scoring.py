"""Speed and size of judging every candidate of a board: waveforms, all checks, emission.

Run ``OPENBLAS_NUM_THREADS=1 python tests/benchmarks/benchmark_scoring.py [--large]``.
It prints and never asserts. All ratios come from one process.

* judged: every check of every candidate at both corners (`edgeplan.scoring.score_blocks`);
* waveforms: the same candidates' readings alone (`edgeplan.received.receive`);
* emission: the emission check alone (`Radiation.judge`), all of it.
"""

import argparse
import resource
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from random_boards import random_board

from edgeplan.evaluate import Bench
from edgeplan.nets import resolve
from edgeplan.radiated import radiation_of
from edgeplan.received import receive
from edgeplan.scoring import Block, blocks_of, score_blocks

SEED = 7


def seconds(work: Callable[[], object]) -> float:
    """Processor seconds of one call."""
    start = time.process_time()
    work()
    return time.process_time() - start


def board_of(count: int) -> tuple[list[Block], Bench]:
    """A random board with E12 values: about 40 candidates on a net with a site and settings."""
    board = random_board(
        count, SEED, resistors={"series": "E12", "lowest_ohm": 10.0, "highest_ohm": 100.0}
    )
    facts, _ = resolve(board)
    bench = Bench(tolerance=0.05, radiation=radiation_of(board), strobe={})
    return blocks_of(facts, board, drawn_only=False), bench


def judged_seconds(count: int) -> float:
    """Judge a board and print what it took."""
    blocks, bench = board_of(count)
    evaluations = 2 * sum(int(b.candidates.exists.sum()) for b in blocks)
    spent = seconds(lambda: score_blocks(blocks, bench, 1, None))
    print(f"{count} nets, {evaluations} evaluations: {spent:.2f} s, {evaluations / spent:,.0f} /s")
    return spent


def main() -> None:
    """Print times, shares, growth and peak memory."""
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--nets", type=int, default=1000)
    options.add_argument("--large", action="store_true", help="ten times the nets as well")
    chosen = options.parse_args()
    judged = judged_seconds(chosen.nets)
    blocks, bench = board_of(chosen.nets)
    waves = seconds(lambda: [receive(b.nets, b.candidates, bench.tolerance) for b in blocks])
    blocks, bench = board_of(chosen.nets)
    levels = seconds(
        lambda: [bench.radiation.judge(b.nets, b.candidates, bench.tolerance) for b in blocks]
    )
    print(f"  waveforms {waves:.2f} s, emission {levels:.2f} s: {levels / waves:.0%} on top")
    if chosen.large:
        print(f"growth for ten times the nets: {judged_seconds(10 * chosen.nets) / judged:.1f}")
    print(f"peak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MiB")


if __name__ == "__main__":
    main()
