"""Time of 20 cross-sections nobody has solved before, singles and pairs, without any cache.

    OPENBLAS_NUM_THREADS=1 .venv/bin/python tests/benchmarks/benchmark_cross_sections.py

The bar is 10 s on 2 cores. Each is solved with its error, losses and skin factor, one after the
other in one process. With ``--errors`` it prints the worst deviation from each published table and
draws all of them into docs/models.
"""

import sys
import time
from pathlib import Path

import numpy as np

from edgeplan.physics.field_solution import (
    CrossSection,
    Dielectric,
    skin_factor,
    solve_line,
    solve_pair,
)

RANDOM = np.random.default_rng(1)


def random_section(kind):
    """Build one line of a kind with sizes of common boards."""
    width, height = RANDOM.uniform(0.08e-3, 0.4e-3), RANDOM.uniform(0.07e-3, 0.3e-3)
    thick = RANDOM.choice([18e-6, 35e-6])
    below = Dielectric(height, RANDOM.uniform(3.2, 4.6), 0.02)
    if kind == "coated":
        mask = Dielectric(RANDOM.uniform(10e-6, 30e-6), 3.5, 0.03)
        return CrossSection(width, thick, height, (below,), coating=mask)
    above = Dielectric(thick + RANDOM.uniform(0.1e-3, 0.5e-3), RANDOM.uniform(3.2, 4.6), 0.02)
    return CrossSection(width, thick, height, (below, above), upper_plane=kind == "inner")


def main():
    """Print the time of each kind and of all."""
    total = 0.0
    for kind in ("coated", "inner", "covered"):
        for pair in (False, True):
            count, begin = (4, 3)[pair], time.perf_counter()
            count -= kind == "covered" and pair
            worst = 0.0
            for _ in range(count):
                section = random_section(kind)
                if pair:
                    spaced = section._replace(spacing_m=RANDOM.uniform(0.1e-3, 0.4e-3))
                    modes = tuple(solve_pair(spaced))
                else:
                    modes = (solve_line(section),)
                    skin_factor(section)
                worst = max(worst, *(mode.impedance_error for mode in modes))
            spent = time.perf_counter() - begin
            total += spent
            name = f"{kind} {'pairs' if pair else 'lines'}"
            print(f"{count} {name:14s} {spent:5.2f} s, impedance within {worst:.2%}")
    print(f"20 cross-sections  {total:.2f} s (bar: 10 s)")


def print_errors():
    """Print the worst deviations from each table, in per cent, and draw them."""
    sys.path.insert(0, str(Path(__file__).parents[1]))
    import line_errors

    compared = list(line_errors.compare_all())
    print("| against | rows | impedance | delay | coupling |\n|---|---|---|---|---|")
    for table in compared:
        columns = (table.impedance, table.delay, table.coupling)
        worst = ["–" if np.isnan(c).all() else f"{np.abs(c).max():.2f} %" for c in columns]
        print("|", " | ".join([table.name, str(len(table.delay)), *worst]), "|")
    docs = Path(__file__).parents[2] / "docs" / "models"
    line_errors.draw(compared, docs / "line_errors.svg")


if __name__ == "__main__":
    print_errors() if "--errors" in sys.argv else main()
