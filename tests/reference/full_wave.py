"""Make a table of full-wave reference levels: ``python tests/reference/full_wave.py NAME``.

NAME is trace, one_cable, two_cables, filter, site or site_fit.  The reference is NEC-2 (PyNEC), a
general-purpose wire code.  Each table says in its header how it was made; a second run gives
the same numbers.  On one core: a minute for trace, about five for each of the others.
"""

import argparse
import csv
import datetime as dt
import importlib.metadata
import io
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import replace
from functools import lru_cache
from pathlib import Path
from typing import NamedTuple

import fit_cases as fit
import numpy as np
import wire_cases as cases
from full_wave_headers import ABOUT
from wire_boards import Board, Mesh, Model, Trace, board_model, trace_over_ground
from wire_cases import Row
from wire_code import SPEED_OF_LIGHT_M_PER_S, Array, Scan, Solution, far_field, scanned_field

FOLDER = Path(__file__).parent
PER_WAVELENGTH = 20  # cable segments
DISTANCE_M = 3.0
HEIGHTS_M = (1.0, 4.0, 16)
AZIMUTHS = ((150e6, 16), (400e6, 32), (np.inf, 64))  # up to that frequency
Cables = Sequence[Sequence[Array]]


def largest(solution: Solution, source_ohm: float, load: complex, in_cables: Array) -> float:
    """Largest field component for an EMF of 1 V, with an impedance in each cable's foot."""
    emf = np.zeros(2 + len(in_cables))
    emf[0] = 1.0
    return float(np.abs(solution.field(emf, [source_ohm, load, *in_cables])).max())


def trace_rows(per_height: int = 3) -> Iterator[Row]:
    """Traces over an infinite plane: the four loads, and both ends matched."""
    for height_m in cases.TRACE_HEIGHTS_M:
        for length_m in cases.TRACE_LENGTHS_M:
            trace = Trace(start_m=0.0, end_m=length_m, height_m=height_m)
            model = trace_over_ground(trace, per_height)
            place = {"length_m": length_m, "height_m": height_m, "line_ohm": trace.line_ohm()}
            for frequency_hz in cases.TRACE_HZ:
                yield from trace_points(model, place, float(frequency_hz))


def trace_points(model: Model, place: Row, frequency_hz: float) -> Iterator[Row]:
    """All loads of one trace at one frequency."""
    solved = far_field(model.wires, frequency_hz, model.ports, (46, 90), floor=True)
    for name in (*cases.LOADS, "matched"):
        source, load = place["line_ohm"], complex(place["line_ohm"])
        if name in cases.LOADS:
            source, load = cases.load_ohm(frequency_hz, name)
        field = {"field_v": largest(solved, source, load, np.zeros(0))}
        yield place | cases.end_columns(frequency_hz, name, source, load) | field


def free_solution(board: Board, cables: Cables, frequency_hz: float) -> Solution:
    """A board with cables in free space; ports in the trace only."""
    model = board_model(board, cables, SPEED_OF_LIGHT_M_PER_S / frequency_hz / PER_WAVELENGTH)
    return far_field(model.wires, frequency_hz, model.ports[:2], (37, 72), floor=False)


def site_solution(
    board: Board, cables: Cables, frequency_hz: float, *, bare: bool = False
) -> Solution:
    """A board with cables over a floor, at the receiver's places; ports in cables unless bare."""
    model = board_model(board, cables, SPEED_OF_LIGHT_M_PER_S / frequency_hz / PER_WAVELENGTH)
    scan = Scan(
        axis_m=(board.length_m / 2, board.width_m / 2),
        distance_m=DISTANCE_M,
        azimuths=next(count for limit, count in AZIMUTHS if frequency_hz <= limit),
        heights_m=HEIGHTS_M,
    )
    ports = model.ports[:2] if bare else model.ports
    return scanned_field(model.wires, frequency_hz, ports, scan)


def one_cable_rows() -> Iterator[Row]:
    """Largest field over the length of one straight cable in free space.

    The length is searched with the coarse mesh, the field computed with the fine one.
    """
    for name, whole in cases.BOARDS.items():
        coarse = replace(whole, exits_m=whole.exits_m[:1])
        board = cases.fine(coarse)
        for frequency_hz in cases.ONE_CABLE_HZ:
            lengths_m = cases.cable_lengths_m(frequency_hz)
            searched = [one_cable(coarse, length_m, frequency_hz) for length_m in lengths_m]
            for row, fields in _per_load(name, coarse, frequency_hz, searched):
                at_m = float(lengths_m[int(np.argmax(fields))])
                solved = [one_cable(board, at_m, frequency_hz)]
                better = _per_load(name, board, frequency_hz, solved)
                found = next(pair for pair in better if pair[0]["load"] == row["load"])
                levels = {"coarse_v_per_height": max(fields) / coarse.trace.height_m}
                levels |= {"field_v": found[1][0], "at_cable_m": at_m}
                yield found[0] | {"cables": 1} | levels


@lru_cache(maxsize=8)  # loads mostly share their longest field
def one_cable(board: Board, length_m: float, frequency_hz: float) -> Solution:
    """A board with its straight cable of that length."""
    return free_solution(board, [cases.straight_cable(board, length_m)], frequency_hz)


def _per_load(
    name: str,
    board: Board,
    frequency_hz: float,
    solved: Sequence[Solution],
    in_cables: Sequence[complex] = (),
    loads: cases.Loads = cases.LOADS,
) -> Iterator[tuple[Row, list[float]]]:
    """Columns of a board, its load and its cables, with the largest field of each solution."""
    for load_name in loads:
        source, load = cases.load_ohm(frequency_hz, load_name, loads)
        ends = cases.end_columns(frequency_hz, load_name, source, load)
        fields = [largest(one, source, load, np.asarray(in_cables)) for one in solved]
        yield cases.board_columns(name, board) | ends, fields


def several_cable_rows() -> Iterator[Row]:
    """Fields of two and of three cables in free space over random layouts."""
    for name in cases.SEVERAL:
        for count in (2, 3):
            board = replace(cases.BOARDS[name], exits_m=cases.BOARDS[name].exits_m[:count])
            for frequency_hz in cases.SEVERAL_CABLES_HZ:
                rng = np.random.default_rng(7)
                layouts = [cases.free_layout(board, rng) for _ in range(cases.FREE_LAYOUTS)]
                solved = [free_solution(board, layout, frequency_hz) for layout in layouts]
                for row, fields in _per_load(name, cases.BOARDS[name], frequency_hz, solved):
                    middle = {"median_v": float(np.median(fields))}
                    yield row | {"cables": count, "field_v": max(fields)} | middle


def site_solutions(
    frequencies_hz: Sequence[float], counts: Sequence[int]
) -> Iterator[tuple[str, int, float, list[Solution]]]:
    """All layouts of all boards and numbers of cables over a floor; layouts differ per case."""
    for board_index, name in enumerate(cases.SEVERAL):
        for count in counts:
            whole = cases.BOARDS[name]
            board = replace(whole, exits_m=whole.exits_m[:count], floor_m=cases.TABLE_M)
            rng = np.random.default_rng([11, board_index, count])
            layouts = [cases.site_layout(board, rng) for _ in range(cases.SITE_LAYOUTS)]
            for frequency_hz in frequencies_hz:
                solved = [site_solution(board, layout, frequency_hz) for layout in layouts]
                yield name, count, frequency_hz, solved


def site_rows() -> Iterator[Row]:
    """Highest reading of each layout on a measuring site, 1 to 3 cables."""
    for name, count, frequency_hz, solved in site_solutions(cases.SITE_HZ, (1, 2, 3)):
        for row, fields in _per_load(name, cases.BOARDS[name], frequency_hz, solved, [0j] * count):
            layouts = {f"layout_{i}_v_per_m": field for i, field in enumerate(fields, 1)}
            yield row | {"cables": count, "field_v_per_m": max(fields)} | layouts


def site_fit_rows() -> Iterator[Row]:
    """Highest reading over more layouts of other boards, 1 to 3 cables; two points at a time."""
    with ProcessPoolExecutor(2) as pool:
        for rows in pool.map(fit_point_rows, fit.points()):
            yield from rows


def fit_point_rows(point: tuple[str, int, float]) -> list[Row]:
    """All loads of one board with so many cables at one frequency, over layouts of its own."""
    name, count, frequency_hz = point
    whole = fit.BOARDS[name]
    board = replace(whole, exits_m=whole.exits_m[:count], floor_m=cases.TABLE_M)
    rng = np.random.default_rng([17, list(fit.BOARDS).index(name), count, int(frequency_hz / 1e6)])
    reaches_m = [cases.SITE_CABLE_M] * fit.LAYOUTS
    if frequency_hz < fit.LONG_BELOW_HZ:
        reaches_m += [fit.LONG_M] * fit.LONG_LAYOUTS
    solved = [layout_that_stands(board, frequency_hz, rng, reach_m) for reach_m in reaches_m]
    found = []
    for row, fields in _per_load(name, whole, frequency_hz, solved, loads=fit.LOADS):
        levels = {"field_v_per_m": max(fields), "short_v_per_m": max(fields[: fit.LAYOUTS])}
        levels |= {"half_v_per_m": max(fields[: fit.LAYOUTS // 2])}
        found.append(
            row | {"cables": count} | levels | {"median_v_per_m": float(np.median(fields))}
        )
    return found


def layout_that_stands(
    board: Board, frequency_hz: float, rng: np.random.Generator, reach_m: float
) -> Solution:
    """Next layout whose cables do not touch: the wire code refuses wires that cross."""
    while True:
        try:
            layout = cases.site_layout(board, rng, reach_m)
            return site_solution(board, layout, frequency_hz, bare=True)
        except RuntimeError:
            continue


def filter_rows() -> Iterator[Row]:
    """Highest reading over the layouts with an impedance in one cable's foot and in all."""
    for name, count, frequency_hz, solved in site_solutions(cases.FILTER_HZ, (1, 3)):
        fields = {}
        for where in ("none", "one", "all")[: count + 1]:
            for filter_ohm in cases.FILTERS_OHM if where != "none" else (0j,):
                feet = [filter_ohm] + [filter_ohm if where == "all" else 0j] * (count - 1)
                fields[where, filter_ohm] = list(
                    _per_load(name, cases.BOARDS[name], frequency_hz, solved, feet)
                )
        bare = [max(readings) for _, readings in fields.pop(("none", 0j))]
        for (where, filter_ohm), rows in fields.items():
            parts = {"cables": count, "where": where}
            parts |= {"filter_real_ohm": filter_ohm.real, "filter_imag_ohm": filter_ohm.imag}
            for (row, readings), without in zip(rows, bare, strict=True):
                levels = {"bare_v_per_m": without, "field_v_per_m": max(readings)}
                yield row | parts | levels


def trace_refined() -> list[float]:
    """Change of the level from 3 to 4 segments per height, in dB, first and last trace."""
    changes = []
    for length_m, height_m in ((0.02, 10e-3), (0.13, 5e-3)):
        trace = Trace(start_m=0.0, end_m=length_m, height_m=height_m)
        coarse, fine = (trace_over_ground(trace, per_height) for per_height in (3, 4))
        place = {"line_ohm": trace.line_ohm()}
        for frequency_hz in (50e6, 500e6, 1.5e9):
            pairs = zip(
                trace_points(coarse, place, frequency_hz),
                trace_points(fine, place, frequency_hz),
                strict=True,
            )
            changes += [_change_db(rough["field_v"], better["field_v"]) for rough, better in pairs]
    return changes


def one_cable_refined() -> list[float]:
    """Change of the level with one cable when the fine mesh's columns stand closer."""
    changes = []
    for name in ("small", "middle"):
        board = cases.fine(cases.BOARDS[name])
        closer = replace(board.mesh, columns_m=board.mesh.columns_m * 0.75)
        for frequency_hz in (110e6, 430e6):
            changes += _changes(board, closer, frequency_hz, _free_with_one)
    return changes


def free_refined() -> list[float]:
    """Change of the level with one cable when all segments of board and trace are halved."""
    changes = []
    for name in ("middle", "wide"):
        board = cases.BOARDS[name]
        for frequency_hz in (110e6, 430e6):
            changes += _changes(board, halved(board.mesh), frequency_hz, _free_with_one)
    return changes


def halved(mesh: Mesh) -> Mesh:
    """Twice as many lines over the same places; the trace's segments as short as it is thick."""
    return replace(
        mesh,
        rows_m=mesh.rows_m / 2,
        columns_m=mesh.columns_m / 2,
        beside_m=mesh.beside_m / 2,
        beside=2 * mesh.beside,
        ends_m=mesh.ends_m / 2,
        per_height=4,
    )


def site_refined() -> list[float]:
    """The same on the site, three cables, one layout."""
    board = replace(cases.BOARDS["middle"], floor_m=cases.TABLE_M)
    return [
        change
        for frequency_hz in (50e6, 200e6, 730e6)
        for change in _changes(board, halved(board.mesh), frequency_hz, _site_with_three)
    ]


def fit_refined() -> list[float]:
    """Change of the highest of eight layouts, three cables, with all segments halved.

    Single layouts say little: where the trace's two ends nearly cancel, 40 dB below the highest,
    a level moves by 10 dB.
    """
    board = replace(fit.BOARDS["80 x 80"], floor_m=cases.TABLE_M)
    finer = replace(board, mesh=halved(board.mesh))
    changes = []
    for frequency_hz in (50e6, 200e6, 730e6):
        rough, better = (_highest_of_eight(one, frequency_hz) for one in (board, finer))
        changes += [_change_db(*levels) for levels in zip(rough, better, strict=True)]
    return changes


def _highest_of_eight(board: Board, frequency_hz: float) -> list[float]:
    """Highest level of each load over the same eight layouts."""
    rng = np.random.default_rng(3)
    solved = [layout_that_stands(board, frequency_hz, rng, cases.SITE_CABLE_M) for _ in range(8)]
    return [
        max(fields) for _, fields in _per_load("", board, frequency_hz, solved, loads=fit.LOADS)
    ]


def _free_with_one(board: Board, frequency_hz: float) -> Solution:
    """Longest single cable."""
    return free_solution(board, [cases.straight_cable(board, cases.LONGEST_M)], frequency_hz)


def _site_with_three(board: Board, frequency_hz: float) -> Solution:
    """First layout of a fixed series."""
    layout = cases.site_layout(board, np.random.default_rng(3))
    return site_solution(board, layout, frequency_hz)


def _changes(
    board: Board, mesh: Mesh, frequency_hz: float, solve: Callable[[Board, float], Solution]
) -> list[float]:
    """Change of all loads' levels, in dB, from the board as it is to another mesh."""
    rough, better = (solve(one, frequency_hz) for one in (board, replace(board, mesh=mesh)))
    feet = np.zeros(len(rough.admittance_s) - 2)
    changes = []
    for name in cases.LOADS:
        source, load = cases.load_ohm(frequency_hz, name)
        levels = (largest(one, source, load, feet) for one in (rough, better))
        changes.append(_change_db(*levels))
    return changes


def _change_db(rough: float, better: float) -> float:
    """Level of the finer model over that of the rougher one."""
    return float(20 * np.log10(better / rough))


class Table(NamedTuple):
    """Makers of a table: its rows and its convergence."""

    rows: Callable[[], Iterator[Row]]
    refined: Callable[[], list[float]]


TABLES = {
    "trace": Table(trace_rows, trace_refined),
    "one_cable": Table(one_cable_rows, one_cable_refined),
    "two_cables": Table(several_cable_rows, free_refined),
    "filter": Table(filter_rows, site_refined),
    "site": Table(site_rows, site_refined),
    "site_fit": Table(site_fit_rows, fit_refined),
}


def header(name: str, changes: Sequence[float], points: int) -> str:
    """Comment lines of a table: how, how well and when."""
    version = importlib.metadata.version("pynec")
    text = f"""Full-wave reference by NEC-2 (PyNEC {version}): tests/reference/full_wave.py {name}.
{ABOUT[name]}
EMF of 1 V peak behind source_ohm at the trace's start; all fields peak. No dielectric.
Convergence: finer segments change {len(changes)} levels by {np.mean(changes):+.2f} dB in the mean,
{min(changes):+.2f} to {max(changes):+.2f} dB. {points} points, {dt.date.today().isoformat()}.
"""
    return "".join(f"# {line}\n" for line in text.splitlines())


def write(name: str) -> None:
    """Make a table and replace its file."""
    rows = list(TABLES[name].rows())
    text = io.StringIO()
    text.write(header(name, TABLES[name].refined(), len(rows)))
    writer = csv.DictWriter(text, list(rows[0]), lineterminator="\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({key: _short(value) for key, value in row.items()})
    (FOLDER / f"full_wave_{name}.csv").write_text(text.getvalue(), encoding="utf-8")


def _short(value: object) -> object:
    """A number with six digits."""
    return f"{value:.6g}" if isinstance(value, float) else value


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("name", choices=TABLES)
    write(parser.parse_args().name)
