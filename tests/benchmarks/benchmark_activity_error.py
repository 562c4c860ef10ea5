"""Errors of the activity models against simulation, as a table.

Run ``python tests/benchmarks/benchmark_activity_error.py``; with ``--draw`` it also redraws the
picture of docs/models. It prints and never asserts. In dB; above 0 is on the safe side.
"""

import argparse
import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))

import activity_errors


def main() -> None:
    """Print all sets; draw on request."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--draw", action="store_true", help="redraw the picture of the docs")
    arguments = parser.parse_args()
    print(f"{'set':46} {'n':>5} {'mean':>6} {'sd':>5} {'lowest':>7} {'highest':>7}")
    for name, excess in activity_errors.all_sets().items():
        print(
            f"{name:46} {excess.size:5d} {np.mean(excess):+6.2f} {np.std(excess):5.2f}"
            f" {np.min(excess):+7.2f} {np.max(excess):+7.2f}"
        )
    if arguments.draw:
        import activity_pictures

        activity_pictures.draw_all(Path(__file__).parents[2] / "docs" / "models")


if __name__ == "__main__":
    main()
