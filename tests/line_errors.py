"""Field solutions of printed lines against the tables of tests/reference, and a picture of it."""

from collections.abc import Iterator
from math import inf
from pathlib import Path
from typing import Any, NamedTuple

import matplotlib as mpl
import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from edgeplan.physics import cross_section
from edgeplan.physics.crosstalk_closed_forms import backward_coupling
from edgeplan.physics.field_solution import solve_line, solve_pair
from edgeplan.physics.outlines import CrossSection, Dielectric

REFERENCE = Path(__file__).parent / "reference"
THIN = 1e-5  # of the height


class Compared(NamedTuple):
    """Deviations of one table in per cent: impedance, delay, coupling. One entry per row."""

    name: str
    impedance: NDArray[Any]
    delay: NDArray[Any]
    coupling: NDArray[Any]


def read_table(name: str) -> NDArray[Any]:
    """Rows of a table, its comments and header left out."""
    lines = (REFERENCE / f"{name}.csv").read_text("utf-8").splitlines()
    rows = [line for line in lines if not line.startswith("#")]
    return np.asarray(np.loadtxt(rows[1:], delimiter=",", ndmin=2))


def compare_all() -> Iterator[Compared]:
    """Yield what the solver deviates from each table."""
    yield _compared("thin microstrip, table", list(_thin_microstrips()))
    yield _compared("thin stripline, exact", list(_thin_striplines()))
    yield _compared("thin coupled stripline, exact", list(_thin_pairs()))
    yield _compared("thick stripline, boundary elements", list(_thick_striplines()))
    yield _compared("masked, covered, mixed, coupled, finite differences", list(_by_differences()))
    yield _compared("microstrip with thickness, Hammerstad and Jensen", list(_thick_microstrips()))


def _compared(name: str, rows: list[tuple[float, float, float]]) -> Compared:
    """Ratios as per cent."""
    return Compared(name, *(100 * (np.array(column) - 1) for column in zip(*rows, strict=True)))


def _thin_microstrips() -> Iterator[tuple[float, float, float]]:
    """Ratios over an integral-equation solution."""
    for width, permittivity, ohm, effective in read_table("microstrip_zero_thickness"):
        found = solve_line(CrossSection(width, THIN, 1.0, (Dielectric(1.0, permittivity),)))
        delay = (found.permittivity_effective / effective) ** 0.5
        yield found.impedance_ohm / ohm, delay, np.nan


def _thin_striplines() -> Iterator[tuple[float, float, float]]:
    """Ratios over elliptic integrals."""
    for width, permittivity, ohm in read_table("stripline_zero_thickness"):
        layers = (Dielectric(1.0, permittivity),)
        section = CrossSection(width, THIN, 0.5 - THIN / 2, layers, upper_plane=True)
        found = solve_line(section)
        delay = (found.permittivity_effective / permittivity) ** 0.5
        yield found.impedance_ohm / ohm, delay, np.nan


def _thin_pairs() -> Iterator[tuple[float, float, float]]:
    """Ratios over elliptic integrals, both modes."""
    for width, spacing, even, odd, _, coupling in read_table("coupled_stripline"):
        layers = (Dielectric(1.0, 4.5),)
        section = CrossSection(width, THIN, 0.5 - THIN / 2, layers, upper_plane=True)
        pair = solve_pair(section._replace(spacing_m=spacing))
        found = float(backward_coupling(pair.even.impedance_ohm, pair.odd.impedance_ohm))
        for mode, ohm in ((pair.even, even), (pair.odd, odd)):
            delay = (mode.permittivity_effective / 4.5) ** 0.5
            yield mode.impedance_ohm / ohm, delay, found / coupling


def _thick_striplines() -> Iterator[tuple[float, float, float]]:
    """Ratios over another boundary-element solution."""
    for width, low, high, thick, ohm, _ in read_table("stripline_solved"):
        layers = (Dielectric(low + high + thick, 1.0),)
        found = solve_line(CrossSection(width, thick, low, layers, upper_plane=True))
        yield found.impedance_ohm / ohm, found.permittivity_effective**0.5, np.nan


def _by_differences() -> Iterator[tuple[float, float, float]]:
    """Ratios over finite differences."""
    for w, t, h, er, cover, over, coat, er_coat, gap, spacing, mode, ohm, effective in read_table(
        "lines_by_finite_differences"
    ):
        layers = (Dielectric(h, er), *([Dielectric(cover, over)] if cover else []))
        coating = Dielectric(coat, er_coat) if coat else None
        section = CrossSection(w, t, h, layers, bool(gap), coating, spacing or inf)
        found = solve_pair(section)[0 if mode > 0 else 1] if spacing else solve_line(section)
        delay = (found.permittivity_effective / effective) ** 0.5
        yield found.impedance_ohm / ohm, delay, np.nan


def _thick_microstrips() -> Iterator[tuple[float, float, float]]:
    """Ratios over the closed form with thickness, common sizes."""
    for width in (0.1e-3, 0.18e-3, 0.3e-3, 1e-3):
        for thick in (18e-6, 35e-6):
            for permittivity in (3.5, 4.2):
                layers = (Dielectric(0.11e-3, permittivity),)
                found = solve_line(CrossSection(width, thick, 0.11e-3, layers))
                ohm, effective = cross_section.microstrip(width, 0.11e-3, thick, permittivity)
                delay = (found.permittivity_effective / effective) ** 0.5
                yield float(found.impedance_ohm / ohm), float(delay), np.nan


def draw(compared: list[Compared], path: Path) -> None:
    """Draw every deviation, a row per table."""
    mpl.rcParams["svg.hashsalt"] = "edgeplan"
    figure = Figure(figsize=(9, 3.6))
    axes = figure.subplots()
    for row, table in enumerate(compared):
        for offset, name, colour in ((0.12, "impedance", "C0"), (-0.12, "delay", "C1")):
            values = getattr(table, name)
            label = name if row == 0 else None
            axes.plot(values, np.full(len(values), offset - row), "o", color=colour, label=label)
    for bar in (-0.3, 0.3):
        axes.axvline(bar, color="0.5", linestyle="--", linewidth=1)
    axes.set_yticks(-np.arange(len(compared)), [table.name for table in compared])
    axes.set_xlabel("field solution over the table, less 1, in per cent; dashed: 0.3 %")
    axes.grid(visible=True, axis="x", alpha=0.3)
    axes.legend()
    figure.savefig(path, metadata={"Date": None}, bbox_inches="tight")
