"""Errors of the emission models against the full-wave tables, as a table.

Run ``python tests/benchmarks/benchmark_emission_error.py``; with ``--draw`` it also redraws the
pictures of docs/models. It prints and never asserts. Model over reference in dB, so that a
positive number is on the safe side.
"""

import argparse
import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))

import full_wave_errors


def main() -> None:
    """Print all sets; draw on request."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--draw", action="store_true", help="redraw the pictures of the docs")
    arguments = parser.parse_args()
    print(f"{'set':52} {'n':>5} {'mean':>6} {'sd':>5} {'lowest':>7} {'highest':>7}")
    for name, excess in full_wave_errors.all_sets().items():
        print(
            f"{name:52} {excess.size:5d} {np.mean(excess):+6.2f} {np.std(excess):5.2f}"
            f" {np.min(excess):+7.2f} {np.max(excess):+7.2f}"
        )
    print("\npercent that read above a limit which expected plus margin just meets")
    print(f"{'site':12} {'6 dB: before':>13} {'now':>5} {'0 dB: before':>13} {'now':>5}")
    for name, shares in full_wave_errors.site_risks().items():
        print("{:12} {:13.1f} {:5.1f} {:13.1f} {:5.1f}".format(name, *shares))
    if arguments.draw:
        import full_wave_pictures
        import model_pictures

        for pictures in (full_wave_pictures, model_pictures):
            pictures.draw_all(Path(__file__).parents[2] / "docs" / "models")


if __name__ == "__main__":
    main()
