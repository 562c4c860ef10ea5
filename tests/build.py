"""Boards in code: records without files, and what the rooms make of them.

The plain net is a matched line: 50 ohm driver, 50 ohm line, open end without a load. Its
received edge is the source's own, one delay later, so that crossings are known in closed form.
"""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from edgeplan import timing
from edgeplan.board import Board, BoardFile, Net, Point, RouteSegment
from edgeplan.candidates import Candidates, list_candidates, list_drawn
from edgeplan.checks import CheckTable
from edgeplan.evaluate import Bench
from edgeplan.nets import NetFacts, Nets, build, resolve
from edgeplan.radiated import radiation_of
from edgeplan.received import Seen, receive

Fields = dict[str, Any]

# The stack of a four-layer board, top first.
STACK = [
    {"layer": "L1", "kind": "signal", "thickness_m": 35e-6},
    {"layer": "D1", "kind": "dielectric", "thickness_m": 0.11e-3, "permittivity": 4.2},
    {"layer": "L2", "kind": "plane", "thickness_m": 18e-6},
    {"layer": "D2", "kind": "dielectric", "thickness_m": 1.24e-3, "permittivity": 4.4},
    {"layer": "L3", "kind": "plane", "thickness_m": 18e-6},
    {"layer": "D3", "kind": "dielectric", "thickness_m": 0.11e-3, "permittivity": 4.2},
    {"layer": "L4", "kind": "signal", "thickness_m": 35e-6},
]
WIDTH_M = 0.18e-3
EDGE_S = 1e-9  # 10-90 % of the plain driver
RAISED_COSINE_10_90 = 2 * np.arcsin(0.8) / np.pi  # of the 0-100 % time, 0.5903
RAMP_S = EDGE_S / RAISED_COSINE_10_90


def exactly(value: float | Fields) -> Fields:
    """State a quantity without any spread; a range stays as it is."""
    return value if isinstance(value, dict) else {"min": value, "typ": value, "max": value}


def setting(
    name: str = "A", ohm: float | Fields = 50.0, edge_s: float | Fields = EDGE_S, **changes: Any
) -> Fields:
    """Make a setting that is the same at every corner."""
    plain = {"setting": name, "resistance_ohm": exactly(ohm), "edge_s": exactly(edge_s)}
    return plain | {"capacitance_f": 0.0} | changes


def driver(*settings: Fields, **changes: Any) -> Fields:
    """Make a driver, programmable where it has several settings."""
    settings = settings or (setting(),)
    return {"name": "out", "programmable": len(settings) > 1, "settings": list(settings)} | changes


def receiver(name: str = "in", **changes: Any) -> Fields:
    """Make an input without capacitance or limits of its own."""
    return {"name": name, "capacitance_f": 0.0} | changes


def interface(timing: str = "asynchronous", **changes: Any) -> Fields:
    """Make an interface at 3.3 V with thresholds at 40 and 60 % of it."""
    plain = {"name": "bus", "timing": timing, "levels": "plain", "supply_v": exactly(3.3)}
    return plain | changes


def net(name: str = "N1", **changes: Any) -> Net:
    """Draw 100 mm on the top layer, from ``out`` to ``in``."""
    plain: Fields = {
        "net": name,
        "at": Point(file="nets.csv", row=2),
        "interface": "bus",
        "activity": "random",
        "data_bps": 10e6,
        "driver": ("out",),
        "driver_pin": ("U1.1",),
        "receiver": ("in",),
        "receiver_pin": ("U2.1",),
        "length_m": 0.1,
        "layer": "L1",
        "width_m": WIDTH_M,
    }
    return Net(**plain | changes)


def clock(name: str = "CLK", clock_hz: float = 50e6, **changes: Any) -> Net:
    """Draw the plain net as a clock."""
    return net(name, **{"activity": "clock", "clock_hz": clock_hz, "data_bps": None} | changes)


def segment(
    start: str, end: str, length_m: float, name: str = "N1", **changes: Any
) -> RouteSegment:
    """Draw one straight piece of a route on the top layer."""
    plain = {"net": name, "at": Point(file="routes.csv", row=2), "layer": "L1", "width_m": WIDTH_M}
    return RouteSegment(start=start, end=end, length_m=length_m, **plain | changes)


def stack(z0_ohm: float | None = 50.0) -> list[Fields]:
    """State the impedance of both surface layers of the stack (None: computed)."""
    return [
        layer | ({"z0_ohm": z0_ohm} if layer["kind"] == "signal" and z0_ohm else {})
        for layer in STACK
    ]


def board(
    *nets: Net, routes: Sequence[RouteSegment] = (), notes: Sequence[str] = (), **changes: Any
) -> Board:
    """Put nets on a board; ``changes`` replace tables of the board file."""
    plain: Fields = {
        "stack": stack(),
        "board": {"name": "b", "size_m": (0.1, 0.08), "highest_internal_frequency_hz": 1e8},
        "emission": {"limits": ["cispr32-class-b-3m"]},
        "resistors": {"series": "E6", "tolerance": 0.0},
        "interface": [interface()],
        "driver": [driver()],
        "receiver": [receiver()],
        "level": [{"name": "plain", "vil_v": 1.32, "vih_v": 1.98}],
    }
    facts = changes.pop("facts", {})
    file = plain | changes
    file["board"] = file["board"] | facts
    return Board(
        file=BoardFile.model_validate(file),
        nets=nets or (net(),),
        routes=tuple(routes),
        notes=tuple(notes),
    )


def facts_of(board: Board) -> list[NetFacts]:
    """Resolve every net; a blocked one is a fault of the test."""
    facts, blocked = resolve(board)
    assert not blocked, [b.reason for b in blocked]
    return facts


def nets_of(board: Board) -> Nets:
    """Turn every net of a board into arrays."""
    return build(facts_of(board), board)


def lossless(nets: Nets) -> Nets:
    """Take the loss off all lines."""

    def without_loss(line: Any) -> Any:
        zero = np.zeros_like(line.impedance_ohm)
        return line._replace(
            resistance_dc_ohm_per_m=zero, skin_ohm_per_m_rthz=zero, loss_tangent=zero
        )

    trees = {
        corner: replace(t, line=without_loss(t.line), stub_line=without_loss(t.stub_line))
        for corner, t in nets.trees.items()
    }
    return replace(nets, trees=trees, kept={})


def seen_of(
    board: Board,
    *,
    candidates: Candidates | None = None,
    strobe: Mapping[str, Mapping[tuple[str, str], float]] | None = None,
    drawn: bool = True,
) -> Seen:
    """Read the receivers of nets of one timing class, on lossless lines."""
    nets = lossless(nets_of(board))
    if candidates is None:
        candidates = list_drawn(nets) if drawn else list_candidates(nets, board.file.resistors)
    tolerance = board.file.resistors.tolerance
    received = receive(nets, candidates, tolerance)
    return Seen(
        nets=nets,
        candidates=candidates,
        received=received,
        strobe=strobe or {},
        tolerance=tolerance,
    )


def checks_of(board: Board, **changes: Any) -> dict[str, CheckTable]:
    """Run the timing checks of a board; tables by name."""
    seen = seen_of(board, **changes)
    tables = timing.checks_of(seen.nets.facts[0].timing)(seen)
    return {table.check: table for table in tables}


def bench_of(board: Board) -> Bench:
    """Make what evaluations of a board share, without strobes."""
    return Bench(tolerance=board.file.resistors.tolerance, radiation=radiation_of(board), strobe={})


def delay_s(nets: Nets, net: int = 0) -> float:
    """Multiply out the delay of the longest way of a net."""
    path = nets.facts[net].path
    return path.main_length_m * path.main_line.delay_s_per_m


def raised_cosine_crossing_s(level: float, ramp_s: float = RAMP_S) -> float:
    """Invert (1 - cos(pi t/te))/2."""
    return ramp_s * np.arccos(1 - 2 * level) / np.pi


def pole_crossing_s(level: float, tau_s: float, ramp_s: float = RAMP_S) -> float:
    """Cross a level with one pole behind a raised cosine, whose response is a closed form."""
    w = np.pi / ramp_s
    share = 1 / (1 + (w * tau_s) ** 2)

    def during(t: float) -> float:
        wave = np.cos(w * t) + w * tau_s * np.sin(w * t)
        return 0.5 * (1 - np.exp(-t / tau_s) - share * (wave - np.exp(-t / tau_s)))

    if during(ramp_s) < level:
        return ramp_s + tau_s * np.log((1 - during(ramp_s)) / (1 - level))
    low, high = 0.0, ramp_s
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if during(middle) < level else (low, middle)
    return low
