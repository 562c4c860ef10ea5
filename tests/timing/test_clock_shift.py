"""A proposal that moves a clock moves the instant its data are sampled at."""

from dataclasses import replace

import pytest
from build import board, exactly, interface, net, seen_of

from edgeplan.timing import common_clock
from edgeplan.timing._clock_shift import part_of

DIRECTION = {
    "driver": "out",
    "clock_to_output": {"min": 1e-9, "max": 4e-9},
    "test_load": {"capacitance": 5e-12, "level": 1.5},
    "setup": 2e-9,
    "hold": 0.5e-9,
}
DRAWN = {("slow", "first"): 1.0e-9, ("slow", "last"): 1.2e-9}
DRAWN |= {("fast", "first"): 0.5e-9, ("fast", "last"): 0.6e-9}


def margins(shift_s, driver_of_clock, receivers_of_clock):
    """Setup and hold margin of a net that U1 drives, its clock moved by so much."""
    one = interface(
        "common-clock", clock_net="CLK", rate_hz=100e6, supply_v=exactly(3.3), direction=[DIRECTION]
    )
    seen = seen_of(board(net(driver_pin=("U1.1",)), interface=[one]))
    moved = replace(
        seen,
        strobe_drawn={"CLK": DRAWN},
        strobe={"CLK": {key: value + shift_s for key, value in DRAWN.items()}},
        clock_parts={"CLK": (driver_of_clock, frozenset(receivers_of_clock))},
    )
    tables = {t.check: t for t in common_clock.checks(moved)}
    return float(tables["setup"].margin[0, 0]), float(tables["hold"].margin[0, 0])


@pytest.mark.parametrize(
    ("shift_s", "driver", "receivers", "setup_s", "hold_s"),
    [
        (0.3e-9, "U1", {"U2"}, 0.0, 0.3e-9),  # leaves with the clock: later costs hold
        (-0.3e-9, "U1", {"U2"}, 0.3e-9, 0.0),  # and earlier setup
        (0.3e-9, "U2", {"U1"}, 0.3e-9, 0.0),  # comes back to it: the other way round
        (-0.3e-9, "U2", {"U1"}, 0.0, 0.3e-9),
        (0.3e-9, "X1", {"U2"}, 0.3e-9, 0.3e-9),  # somebody else's clock: both
        (0.0, "U1", {"U2"}, 0.0, 0.0),
    ],
)
def test_data_lose_what_their_clock_moves(shift_s, driver, receivers, setup_s, hold_s):
    setup, hold = margins(shift_s, driver, receivers)
    setup_still, hold_still = margins(0.0, driver, receivers)
    assert setup_still - setup == pytest.approx(setup_s, abs=1e-15)
    assert hold_still - hold == pytest.approx(hold_s, abs=1e-15)


def test_a_pin_names_its_part():
    assert (part_of("U1.K4"), part_of("J7")) == ("U1", "J7")
