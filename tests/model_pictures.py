"""Pictures of site, detectors, routes and inner layer against their references, for docs/models."""

from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray
from routed_models import ROUTES_MM, model_errors_db
from static_planes import leakage_by_field

from edgeplan.physics import cross_section, quasi_peak, stripline_leakage
from edgeplan.physics.detectors import BANDS
from edgeplan.physics.floor_reflection import floor_bound, near_field_factor, two_ray_factor

Array = NDArray[Any]
REFERENCE = Path(__file__).parent / "reference"
WIDTH_M = 0.06  # of the planes
PULSE_AREAS_VS = {"A": 13.5e-6, "B": 0.316e-6, "C/D": 0.044e-6}  # reference pulses of CISPR 16-1-1
REFERENCE_RATES_HZ = {"A": 25.0, "B": 100.0, "C/D": 100.0}


def draw_all(folder: Path) -> None:
    """Write all pictures into a folder."""
    mpl.rcParams["svg.hashsalt"] = "edgeplan"
    drawn = {"site": _site, "detectors": _detectors, "routes": _routes, "inner_layer": _inner}
    for name, draw in drawn.items():
        place = folder / f"{name}.svg"
        draw().savefig(place, metadata={"Date": None}, bbox_inches="tight")


def _table(name: str, skip: int) -> Array:
    """Columns of a table."""
    return np.loadtxt(REFERENCE / name, delimiter=",", skiprows=skip).T


def _grid(one: Axes, title: str) -> None:
    """Title and grid of one panel."""
    one.set_title(title)
    one.grid(visible=True, which="both", alpha=0.3)


def _decibels(ratio: Any) -> Array:
    """Ratio of fields in decibels."""
    return np.asarray(20 * np.log10(ratio))


def _site() -> Figure:
    """Height scan at 3 and 10 m, and the near field of a loop."""
    figure = Figure(figsize=(11, 4), layout="constrained")
    axes = figure.subplots(1, 3)
    rows = _table("two_ray_site.csv", 3)
    frequency_hz = np.geomspace(30e6, 1e9, 300)
    for one, distance_m, first in zip(axes, (3.0, 10.0), (1, 3), strict=False):
        for number, way in enumerate(("horizontal", "vertical")):
            level = _decibels(two_ray_factor(frequency_hz, distance_m, way))
            one.semilogx(frequency_hz / 1e6, level, f"C{number}", label=f"{way}, model")
            one.plot(rows[0], rows[first + number], f"C{number}o", label=f"{way}, field solution")
        one.axhline(float(_decibels(floor_bound(distance_m))), color="k", ls="--", label="used")
        _grid(one, f"floor, 1 to 4 m, at {distance_m:g} m")
        one.set_xlabel("frequency in MHz")
        one.set_ylim(-11, 7)
    axes[0].set_ylabel("field over free space, dB")
    axes[1].legend(fontsize=8, loc="lower right")
    megahertz, away_m, loop_db, _ = _table("near_field.csv", 3)
    distance_m = np.linspace(1, 10, 100)
    for number, f in enumerate((30.0, 100.0)):
        level = _decibels(near_field_factor(f * 1e6, distance_m))
        axes[2].plot(distance_m, level, f"C{number}", label=f"{f:g} MHz, model")
        rows_of = megahertz == f
        label = f"{f:g} MHz, exact loop"
        axes[2].plot(away_m[rows_of], loop_db[rows_of], f"C{number}o", label=label)
    _grid(axes[2], "near field of the trace")
    axes[2].set_xlabel("distance in m")
    axes[2].set_ylabel("field over far field, dB")
    axes[2].legend(fontsize=8)
    return figure


def _detectors() -> Figure:
    """Quasi-peak: the pulse that reads the same, over the repetition rate."""
    figure = Figure(figsize=(7, 4), layout="constrained")
    one = figure.subplots()
    columns = _table("quasi_peak_pulses.csv", 5)
    for number, (name, area_vs) in enumerate(PULSE_AREAS_VS.items()):
        _, rate_hz, printed_db, tolerance_db, _ = columns[
            :, (columns[0] == number + 1) & (columns[1] > 0)
        ]
        rates_hz = np.geomspace(1, rate_hz.max(), 60)
        reading_v = quasi_peak.pulse_reading_v(BANDS[name], area_vs, rates_hz)
        reference_hz = REFERENCE_RATES_HZ[name]
        at_reference_v = quasi_peak.pulse_reading_v(BANDS[name], area_vs, [reference_hz])[0]
        one.semilogx(rates_hz, _decibels(at_reference_v / reading_v), f"C{number}")
        label = f"band {name}"
        style = {"fmt": "o", "color": f"C{number}", "capsize": 3}
        one.errorbar(rate_hz, printed_db, tolerance_db, label=label, **style)
    _grid(one, "pulses that read alike")
    one.set_xlabel("repetitions per second")
    one.set_ylabel("pulse over that at the reference rate, dB")
    one.legend(fontsize=8, title="points: printed, with tolerance\nlines: model")
    return figure


def _routes() -> Figure:
    """Full-wave field of routed traces against the model, and the error over frequency."""
    figure = Figure(figsize=(10, 4.2), layout="constrained")
    left, right = figure.subplots(1, 2)
    rows, errors = model_errors_db()
    error_db = errors["one"]
    reference_db = _decibels(np.array([row[-1] for row in rows]) * 1e6)
    for number, load in enumerate(dict.fromkeys(row[1] for row in rows)):
        own = np.array([row[1] == load for row in rows])
        level = reference_db[own] + error_db[own]
        left.plot(reference_db[own], level, f"C{number}.", label=load.replace("ohm", "Ω"))
    ends = [reference_db.min() - 3, reference_db.max() + 3]
    left.plot(ends, ends, "k-", lw=1)
    left.set_xlabel("full wave: distance × field, dBµV, for 1 V")
    left.set_ylabel("model, dBµV")
    left.legend(fontsize=8, title="load", loc="lower right")
    _grid(left, "180 points, one cable")
    for number, route in enumerate(ROUTES_MM):
        own = np.array([row[0] == route for row in rows])
        megahertz = np.array([row[3] for row in rows])[own] / 1e6
        shift = 0.92 + 0.03 * number  # side by side
        right.semilogx(megahertz * shift, error_db[own], f"C{number}.", label=route)
    right.axhline(0, color="k", lw=1)
    right.set_xlabel("frequency in MHz")
    right.set_ylabel("model over full wave, dB")
    right.set_ylim(-10, 14)
    right.legend(fontsize=8, ncols=2, loc="upper center")
    _grid(right, "error by route")
    return figure


def _inner() -> Figure:
    """Leakage of an inner line against static fields: over its distance and over its width."""
    figure = Figure(figsize=(10, 4.2), layout="constrained")
    one, other = figure.subplots(1, 2)
    for number, gap_m in enumerate((0.4e-3, 1e-3)):
        strip_m = 0.3 * gap_m
        air_ohm = float(cross_section.stripline_zero_thickness(strip_m, gap_m, 1.0))
        away = np.linspace(0.1, 3.2, 300)
        model = stripline_leakage.edge_leakage(air_ohm, gap_m, WIDTH_M, away * gap_m, strip_m)
        label = f"planes {gap_m * 1e3:g} mm apart"
        with np.errstate(divide="ignore"):
            one.plot(away, _decibels(model), f"C{number}", label=label)
        points = np.array([0.25, 0.5, 1.0, 1.5, 2.0, 2.5])
        field = [leakage_by_field(gap_m, WIDTH_M, strip_m, d * gap_m, air_ohm) for d in points]
        one.plot(points, _decibels(field), f"C{number}o")
    one.axvline(stripline_leakage.FAR_GAPS, color="k", ls="--", lw=1)
    one.text(stripline_leakage.FAR_GAPS - 0.05, -45, "beyond: zero", ha="right")
    one.set_xlabel("distance of the strip to the side over the distance of the planes")
    one.set_ylabel("share of the voltage along the planes, dB")
    one.legend(fontsize=8, title="points: static field solution\nlines: model")
    _grid(one, "planes 60 mm wide, strip 0.3 of their distance")
    shares = np.array([0.05, 0.1, 0.2, 0.3, 0.6, 1.0, 1.5, 2.0])
    other.plot(shares, [_over_field_db(0.4e-3, w * 0.4e-3, 0.4e-3) for w in shares], "C0o-")
    other.set_xlabel("width of the strip over the distance of the planes")
    other.set_ylabel("model over static field solution, dB")
    other.set_ylim(-3, 3)
    _grid(other, "as far from the side as the planes are apart")
    return figure


def _over_field_db(gap_m: float, strip_m: float, side_m: float) -> float:
    """Leakage of the model over that of the field solution. [dB]"""
    air_ohm = float(cross_section.stripline_zero_thickness(strip_m, gap_m, 1.0))
    model = stripline_leakage.edge_leakage(air_ohm, gap_m, WIDTH_M, side_m, strip_m)
    return float(_decibels(model / leakage_by_field(gap_m, WIDTH_M, strip_m, side_m, air_ohm)))


if __name__ == "__main__":
    draw_all(Path(__file__).parents[1] / "docs" / "models")
