"""Random boards in code: seeded nets of every timing class that the engine can judge."""

import numpy as np

from edgeplan.board import Board, BoardFile, Net, Point

STACK = [
    {"layer": "L1", "kind": "signal", "thickness_m": 35e-6},
    {"layer": "D1", "kind": "dielectric", "thickness_m": 0.11e-3, "permittivity": 4.2},
    {"layer": "L2", "kind": "plane", "thickness_m": 18e-6},
]
CLASSES = ("common-clock", "clock", "strobe", "asynchronous")


def _interface(name: str, timing: str, rate_hz: float, rng: np.random.Generator) -> dict:
    """An interface with every value its checks may ask for."""
    period = 1 / rate_hz
    return {
        "name": name,
        "timing": timing,
        "rate_hz": rate_hz,
        "levels": "lvttl-3v3",
        "supply_v": {"min": 3.135, "typ": 3.3, "max": 3.465},
        "duty_tolerance": float(rng.choice([0.0, 0.02])),
        "direction": [
            {
                "driver": "out",
                "clock_to_output": {
                    "min": 0.08 * period,
                    "max": float(rng.uniform(0.3, 0.6)) * period,
                    "setting": "MID",
                },
                "test_load": {"capacitance": 30e-12, "level": 1.5},
                "setup": 0.12 * period,
                "hold": float(rng.uniform(0.0, 0.06)) * period,
            }
        ],
    }


def _settings(rng: np.random.Generator) -> list[dict]:
    """Three settings, from weak and slow to strong and fast."""
    found = []
    for name, ohm, edge in (("LOW", 60, 3e-9), ("MID", 30, 1.2e-9), ("HIGH", 17, 0.6e-9)):
        ohm, edge = ohm * rng.uniform(0.8, 1.2), edge * rng.uniform(0.8, 1.2)
        found.append(
            {
                "setting": name,
                "resistance_ohm": {"min": 0.75 * ohm, "typ": ohm, "max": 1.25 * ohm},
                "edge_s": {"min": 0.75 * edge, "typ": edge, "max": 1.3 * edge},
                "capacitance_f": 4e-12,
            }
        )
    return found


def _net(index: int, timing: str, rate_hz: float, rng: np.random.Generator) -> Net:
    """One net with a length, a load and a site drawn at random."""
    data = timing in ("common-clock", "asynchronous")
    site = str(rng.choice(["fitted", "link", "possible", "none"]))
    return Net(
        net=f"N{index}",
        at=Point(file="nets.csv", row=index + 2),
        interface=f"{timing} {rate_hz:g}",
        activity="random" if data else "clock",
        clock_hz=None if data else rate_hz,
        data_bps=rate_hz if data else None,
        driver=("out",),
        driver_pin=(f"U1.{index}",),
        setting=(str(rng.choice(["LOW", "MID", "HIGH"])),),
        resistor=f"R{index}" if site in ("fitted", "link") else None,
        resistor_ohm=float(rng.choice([22, 33, 68])) if site == "fitted" else 0.0,
        site=site,
        site_distance_m=float(rng.uniform(0.001, 0.006)),
        receiver=(str(rng.choice(["in_a", "in_b"])),),
        receiver_pin=("U2.1",),
        length_m=float(rng.uniform(0.015, 0.14)),
        layer="L1",
        width_m=0.18e-3,
        side_distance_m=float(rng.uniform(0.003, 0.035)),
    )


def random_board(count: int, seed: int, **changes: object) -> Board:
    """A board of so many nets; ``changes`` replace parts of the board file."""
    rng = np.random.default_rng(seed)
    rates = (20e6, 50e6, 100e6)
    interfaces = {(t, r): _interface(f"{t} {r:g}", t, r, rng) for t in CLASSES for r in rates}
    nets = [_net(i, str(rng.choice(CLASSES)), float(rng.choice(rates)), rng) for i in range(count)]
    file = {
        "stack": STACK,
        "cable": [{"name": "mains", "length_m": 1.5, "attenuation_db": 8.0}],
        "board": {"name": "random", "size_m": (0.1, 0.075), "highest_internal_frequency_hz": 1e8},
        "emission": {"limits": ["cispr32-class-b-3m"], "margin_db": 6.0},
        "resistors": {"series": "E6", "lowest_ohm": 10.0, "highest_ohm": 150.0},
        "interface": list(interfaces.values()),
        "driver": [{"name": "out", "programmable": True, "settings": _settings(rng)}],
        "receiver": [
            {
                "name": "in_a",
                "capacitance_f": 5e-12,
                "overshoot": "20 %",
                "longest_transition": {"time": 3e-9, "levels": "20-80"},
            },
            {
                "name": "in_b",
                "capacitance_f": 8e-12,
                "overshoot": "30 %",
                "longest_transition": {"time": 5e-9, "levels": "10-90"},
            },
        ],
    } | changes
    return Board(file=BoardFile.model_validate(file), nets=tuple(nets))
