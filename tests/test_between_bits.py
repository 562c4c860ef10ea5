"""What earlier edges do to later ones, against closed forms and exhaustive patterns."""

from itertools import product

import numpy as np
import pytest
from build import (
    RAMP_S,
    board,
    clock,
    delay_s,
    driver,
    interface,
    net,
    receiver,
    seen_of,
    setting,
)

VIL, VIH = 0.4, 0.6
SHORT_M = 1e-4


def reading(b, edge="rising", corner="slow"):
    return next(r for r in seen_of(b).received if (r.corner, r.edge) == (corner, edge))


def pole(tau_s, make=net, **changes):
    """Put 1 kohm and a capacitor at the two ends of hardly any line."""
    return board(
        make(length_m=SHORT_M, **changes),
        interface=[interface("clock" if make is clock else "common-clock")],
        driver=[driver(setting(ohm=1000.0, edge_s=0.1e-9))],
        receiver=[receiver(capacitance_f=tau_s / 1000.0)],
    )


def test_an_edge_that_settles_within_its_bit_is_left_alone():
    r = reading(board(net(data_bps=50e6)))
    assert r.interference_s[0, 0] == 0.0
    assert r.worst_level[0, 0] == pytest.approx(1.0, abs=2e-3)


# A single bit through one pole ends at 1 - exp(-T/tau); smooth tails delay no crossing.
@pytest.mark.parametrize("bits_per_tau", [0.7, 1.0, 2.0])
def test_a_single_bit_through_one_pole_ends_where_its_exponential_says(bits_per_tau):
    r = reading(pole(10e-9, data_bps=1e8 / bits_per_tau))
    assert r.worst_level[0, 0] == pytest.approx(1 - np.exp(-bits_per_tau), abs=0.01)
    assert r.interference_s[0, 0] == pytest.approx(0.0, abs=2e-12)


# 12 ohm into an open lossless 50 ohm line: the far end rings.
STRONG_OHM, BIT_S = 12.0, 3e-9


def ringing(data_bps=1 / BIT_S):
    return board(
        net(data_bps=data_bps),
        interface=[interface("common-clock")],
        driver=[driver(setting(ohm=STRONG_OHM))],
    )


def lattice(time_s, delay):
    """Sum the echoes at the open end of a lossless line."""
    echo = (STRONG_OHM - 50) / (STRONG_OHM + 50)
    level = np.zeros(np.shape(time_s))
    for k in range(60):
        along = np.clip((time_s - (2 * k + 1) * delay) / RAMP_S, 0, 1)
        level += 2 * 50 / (50 + STRONG_OHM) * echo**k * 0.5 * (1 - np.cos(np.pi * along))
    return level


def worst_of_all_patterns(delay, bits=7):
    """Superpose every pattern of earlier bits before a rising edge that stays up."""
    time = np.arange(0, 4 * BIT_S, 5e-12)
    steps = np.stack([lattice(time + k * BIT_S, delay) for k in range(bits + 2)])
    latest, alone = 0.0, time[np.flatnonzero(steps[0] < VIH)[-1]]
    for pattern in product([0, 1], repeat=bits):
        levels = [0, *pattern, 0, 1]  # an old zero, the pattern, the zero before the edge
        changes = np.diff(levels)[::-1]
        wave = sum(c * steps[k] for k, c in enumerate(changes) if c)
        latest = max(latest, time[np.flatnonzero(wave < VIH)[-1]])
    return latest - alone


def test_the_worst_pattern_delays_the_last_crossing_as_an_exhaustive_search_finds():
    seen = seen_of(ringing())
    expected = worst_of_all_patterns(delay_s(seen.nets), bits=6)
    assert expected > 100e-12
    r = next(r for r in seen.received if r.corner == "slow")
    assert r.interference_s[0, 0] == pytest.approx(expected, abs=6e-12)


def test_both_edges_of_a_symmetric_driver_between_symmetric_thresholds_are_delayed_alike():
    rising, falling = (reading(ringing(), edge) for edge in ("rising", "falling"))
    assert rising.interference_s[0, 0] == pytest.approx(falling.interference_s[0, 0], abs=1e-12)


def test_more_time_for_a_bit_never_leaves_a_lower_level():
    levels = [reading(pole(10e-9, data_bps=rate)).worst_level[0, 0] for rate in (2e8, 1e8, 5e7)]
    assert levels == sorted(levels)


# A clock of half a period T/2 through one pole swings between 1/(1 + e) and its mirror, e being
# exp(T/2/tau): from there the edge rises as 1 - (1 - low) exp(-t/tau).
def steady(half_over_tau):
    low = 1 / (1 + np.exp(half_over_tau))
    return low, 1 - low


@pytest.mark.parametrize("half_over_tau", [1.0, 1.5, 2.0])
def test_a_clock_through_one_pole_swings_as_its_steady_state_does(half_over_tau):
    hz = 0.5 / (half_over_tau * 10e-9)
    r = reading(pole(10e-9, clock, clock_hz=hz))
    assert r.worst_level[0, 0] == pytest.approx(steady(half_over_tau)[1], abs=0.01)


@pytest.mark.parametrize("half_over_tau", [1.5, 2.0, 2.5])
@pytest.mark.parametrize("levels", [(0.2, 0.8), (0.3, 0.7)])
def test_the_transition_of_a_steady_clock_is_that_of_its_exponential(half_over_tau, levels):
    low, high = steady(half_over_tau)
    start, stop = levels
    if not low < start < stop < high:
        start = max(start, low)
    expected = 10e-9 * np.log((1 - start) / (1 - stop))
    limit = {"time": 50e-9, "levels": f"{levels[0] * 100:.0f}-{levels[1] * 100:.0f}"}
    b = pole(10e-9, clock, clock_hz=0.5 / (half_over_tau * 10e-9))
    loaded = receiver(capacitance_f=10e-12, longest_transition=limit)
    file = b.file.model_copy(update={"receiver": board(receiver=[loaded]).file.receiver})
    r = reading(b.model_copy(update={"file": file}))
    assert r.transition_s[0, 0] == pytest.approx(expected, rel=0.02)


def test_a_clock_that_never_gets_to_a_level_has_no_shorter_transition_than_its_period():
    # It swings between 18 and 82 %; 10 to 90 % is out of its reach, alone it would take 22 ns.
    r = reading(pole(10e-9, clock, clock_hz=1 / 30e-9))
    assert r.transition_s[0, 0] == pytest.approx(30e-9)


def test_clocks_of_different_duty_are_read_each_within_its_own_pulse():
    # Read together and alone; the shorter pulse must not reach into the falling edge.
    interfaces = [interface("clock"), interface("clock", name="short", duty=0.35)]
    nets = [
        clock("A", clock_hz=25e6, length_m=SHORT_M),
        clock("B", clock_hz=25e6, length_m=SHORT_M, interface="short"),
    ]
    parts = {
        "interface": interfaces,
        "driver": [driver(setting(ohm=1000.0, edge_s=0.1e-9))],
        "receiver": [receiver(capacitance_f=10e-12)],
    }
    together = reading(board(*nets, **parts))
    for i, one in enumerate(nets):
        alone = reading(board(one, **parts))
        for name in ("transition_s", "worst_level", "interference_s"):
            pair = getattr(together, name)[i, 0], getattr(alone, name)[0, 0]
            assert pair[0] == pytest.approx(pair[1], rel=1e-3, abs=1e-13)


def test_a_long_line_does_not_move_where_a_clock_is_read():
    # Half a metre of matched line: the same edge, 3 ns later, of a 100 MHz clock.
    near, far = (
        reading(
            board(
                clock(clock_hz=1e8, length_m=x),
                interface=[interface("clock")],
                receiver=[receiver(capacitance_f=20e-12)],
            )
        )
        for x in (0.01, 0.5)
    )
    assert far.transition_s[0, 0] == pytest.approx(near.transition_s[0, 0], rel=2e-2)
    assert far.worst_level[0, 0] == pytest.approx(near.worst_level[0, 0], abs=5e-3)
