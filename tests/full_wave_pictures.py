"""Pictures of the emission models against the full-wave tables, for docs/models."""

from pathlib import Path
from typing import Any

import full_wave_errors as errors
import full_wave_models as models
import matplotlib as mpl
import numpy as np
from full_wave_models import Table
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from edgeplan.emission import cable

Array = NDArray[Any]
COLOURS = {"5 pF": "C0", "50 ohm": "C1", "1 kohm": "C2", "1 ohm": "C3", "matched": "C4"}
STEPS = 200  # of the models' lines


def draw_all(folder: Path) -> None:
    """Write all pictures into a folder."""
    mpl.rcParams["svg.hashsalt"] = "edgeplan"
    for name, draw in (("trace", _trace), ("cable", _cable), ("site", _site), ("filter", _filter)):
        figure = draw()
        place = folder / f"full_wave_{name}.svg"
        figure.savefig(place, metadata={"Date": None}, bbox_inches="tight")


def _dense(rows: Table) -> Table:
    """One net of a table at many frequencies; its load is one resistance or capacitance."""
    frequency_hz = np.geomspace(rows["frequency_hz"].min(), rows["frequency_hz"].max(), STEPS)
    line = {key: np.repeat(column[:1], STEPS) for key, column in rows.items()}
    farther = rows["frequency_hz"][0] / frequency_hz
    return line | {"frequency_hz": frequency_hz, "load_imag_ohm": line["load_imag_ohm"] * farther}


def _level(field_v: Array) -> Array:
    """Distance times field in decibels over one microvolt."""
    return np.asarray(20 * np.log10(field_v * 1e6))


def _axes(figure: Figure, panels: int) -> list[Axes]:
    """Panels side by side over one axis of levels and logarithmic frequency."""
    axes = list(np.atleast_1d(figure.subplots(1, panels, sharey=True)))
    for one in axes:
        one.set_xscale("log")
        one.set_xlabel("frequency in MHz")
        one.grid(visible=True, which="both", alpha=0.3)
    return axes


def _trace() -> Figure:
    """Traces over a plane: two lengths, all loads."""
    figure = Figure(figsize=(9, 4))
    table = models.read_table("trace")
    axes = _axes(figure, 2)
    for one, length_m in zip(axes, (0.04, 0.13), strict=True):
        for load in COLOURS:
            rows = (table["length_m"] == length_m) & (table["height_m"] == 2e-3)
            part = models.take(table, rows & (table["load"] == load))
            line = _dense(part)
            one.plot(line["frequency_hz"] / 1e6, _level(models.over_plane_v(line)), COLOURS[load])
            points = _level(part["field_v"])
            one.plot(part["frequency_hz"] / 1e6, points, "o", color=COLOURS[load], label=load)
        one.set_title(f"trace of {length_m * 1e3:.0f} mm, 2 mm over a plane")
    axes[0].set_ylabel("distance × field, dBµV, for 1 V")
    axes[0].legend(title="points: full wave,\nlines: model", fontsize=8)
    return figure


def _cable() -> Figure:
    """One cable: two boards."""
    figure = Figure(figsize=(9, 4))
    table = models.read_table("one_cable")
    axes = _axes(figure, 2)
    for one, board in zip(axes, ("middle", "wide"), strict=True):
        for load in ("5 pF", "50 ohm", "1 ohm"):
            part = models.take(table, (table["board"] == board) & (table["load"] == load))
            line = _dense(part)
            total = np.hypot(models.cable_at_known_end_v(line), models.trace_v(line))
            one.plot(line["frequency_hz"] / 1e6, _level(total), COLOURS[load])
            points = _level(part["field_v"])
            one.plot(part["frequency_hz"] / 1e6, points, "o", color=COLOURS[load], label=load)
        size = f"{part['board_length_m'][0] * 1e3:.0f} × {part['board_width_m'][0] * 1e3:.0f} mm"
        one.set_title(f"board {size}, one cable up to 2 m")
    axes[0].set_ylabel("distance × field, dBµV, for 1 V")
    axes[0].legend(title="points: full wave,\nlines: model", fontsize=8)
    return figure


def _site() -> Figure:
    """The measuring site: every layout, the highest, expected and up to."""
    figure = Figure(figsize=(9, 4))
    table = models.read_table("site")
    axes = _axes(figure, 2)
    for one, count in zip(axes, (1, 3), strict=True):
        rows = (table["board"] == "wide") & (table["load"] == "50 ohm")
        part = models.take(table, rows & (table["cables"] == count))
        megahertz = part["frequency_hz"] / 1e6
        layouts = np.array([part[key] for key in part if key.startswith("layout_")])
        one.plot(megahertz, _level(layouts).T, ".", color="0.6")
        one.plot(megahertz, _level(part["field_v_per_m"]), "ko", label="highest of 12 layouts")
        line = _dense(part)
        for cables_db, style, label in (
            (errors.offset_db(line), "C0-", "expected"),
            (errors.up_to_db(line), "C3--", "up to"),
        ):
            field_v = errors.field_v(line, errors.ON_FLOOR, cables_db)
            level = _level(models.on_site_v_per_m(line, field_v))
            one.plot(line["frequency_hz"] / 1e6, level, style, label=label)
        one.set_title(f"board 90 × 140 mm, {count} cable{'s' if count > 1 else ''}, 3 m")
    axes[0].set_ylabel("field, dBµV/m peak, for 1 V")
    axes[0].legend(fontsize=8, title="grey: single layouts")
    return figure


def _filter() -> Figure:
    """What a part in all cables is worth, and what is credited."""
    figure = Figure(figsize=(6, 4))
    table = models.read_table("filter")
    axes = _axes(figure, 1)[0]
    whole = (table["cables"] == 1) | (table["where"] == "all")
    part_ohm = np.hypot(table["filter_real_ohm"], table["filter_imag_ohm"])
    worth = models.excess_db(table["bare_v_per_m"], table["field_v_per_m"])
    for number, (impedance, label) in enumerate(
        (((250.0, 0.0), "250 Ω"), ((1000.0, 0.0), "1 kΩ"), ((500.0, 500.0), "500 + j500 Ω"))
    ):
        rows = whole & (table["filter_real_ohm"] == impedance[0])
        credit_db = cable.filter_credit_db(part_ohm[rows][0])
        shift = 0.96 + 0.04 * number  # side by side
        megahertz = table["frequency_hz"][rows] / 1e6 * shift
        axes.plot(megahertz, worth[rows], ".", color=f"C{number}", alpha=0.6)
        axes.axhline(float(credit_db), color=f"C{number}", label=f"{label}: credit")
    axes.set_ylabel("loss of the highest reading, dB")
    axes.legend(fontsize=8, title="points: full wave, all cables")
    return figure
