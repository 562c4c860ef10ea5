"""Errors of the activity models against simulation in dB: model over it, or credit under it."""

from pathlib import Path
from typing import Any

import numpy as np
from build import board, clock, driver, exactly, interface, net, nets_of, setting
from numpy.typing import NDArray
from simulated_activity import SAMPLES, sampled_bits, spread_relief_db, step_lines

from edgeplan.activity import BURST_ALLOWANCE_DB
from edgeplan.candidates import list_drawn
from edgeplan.emission_lines import lines_of
from edgeplan.emission_target import target_of
from edgeplan.physics.data_spectra import random_data_db
from edgeplan.physics.detectors import BANDS
from edgeplan.physics.quasi_peak import pulse_reading_v
from edgeplan.physics.spectra import unequal_edge_amplitude
from edgeplan.physics.spread_clock import spread_credit_db
from edgeplan.source_edges import edge_shares

Array = NDArray[Any]

RATE_BPS = 100e6
PULSES = Path(__file__).parent / "reference" / "quasi_peak_pulses.csv"


def model_lines(row: Any, rise_s: float, fall_s: float, **facts: Any) -> tuple[Array, Array, Array]:
    """Frequencies, peak amplitude per volt of every judged line, and which are single ones."""
    both = {"edge_up_s": exactly(rise_s), "edge_down_s": exactly(fall_s), "edge_levels": "0-100"}
    own = driver(setting(**both) | {"edge_s": None})
    the_board = board(row, driver=[own], interface=[interface(**facts)])
    nets = nets_of(the_board)
    lines = lines_of(nets.facts, target_of(the_board))
    share = edge_shares(nets, list_drawn(nets), lines)[0, 0]
    return lines.frequency_hz[0], lines.per_swing[0] * share, lines.discrete[0]


def random_data() -> Array:
    """Noise of random bits at odd multiples of half the rate, edges equal and unequal."""
    found = []
    for seed, (rise, fall) in enumerate([(8, 8), (16, 16), (8, 20), (24, 12), (6, 30)]):
        bits = np.random.default_rng(seed).integers(0, 2, 2**16)
        turns, lines = sampled_bits(bits, rise, fall, 0)
        second = 1 / RATE_BPS / SAMPLES
        frequency, level, single = model_lines(net(data_bps=RATE_BPS), rise * second, fall * second)
        for middle in (0.5, 1.5, 2.5):
            inside = np.abs(turns - middle) < 0.05
            share = inside.sum() / bits.size
            noise = np.interp(middle * RATE_BPS, frequency[~single], level[~single])
            found.append(20 * np.log10(noise) - 10 * np.log10(np.sum(lines[inside] ** 2) / share))
    return np.array(found)


def single_lines() -> Array:
    """Single lines of random bits at multiples of the rate, edges and skew drawn at random."""
    rng, found = np.random.default_rng(81), []
    for _ in range(25):
        rise, fall, skew = rng.uniform(6, 24), rng.uniform(6, 24), rng.uniform(0, 6)
        bits = rng.integers(0, 2, 2**14)
        _, lines = sampled_bits(bits, rise, fall, skew)
        second = 1 / RATE_BPS / SAMPLES
        _, level, single = model_lines(
            net(data_bps=RATE_BPS), rise * second, fall * second, edge_skew_s=skew * second
        )
        simulated = lines[np.arange(1, 4) * bits.size]
        found.append(20 * np.log10(level[single][:3] / simulated))
    return np.concatenate(found)


def unequal_clocks() -> Array:
    """Harmonics of clocks whose edges differ, over the exact spectrum: the worst of each clock.

    Per clock the smallest excess of any harmonic, these edges and slower ones in proportion.
    """
    rng, found = np.random.default_rng(82), []
    for _ in range(300):
        clock_hz, duty = rng.uniform(20e6, 100e6), rng.uniform(0.45, 0.55)
        rise_s, fall_s = 10 ** rng.uniform(-9.6, -8.8, 2)
        frequency, level, _ = model_lines(clock(clock_hz=clock_hz), rise_s, fall_s, duty=duty)
        order = np.round(frequency / clock_hz)
        exact = [
            unequal_edge_amplitude(order, 1.0, duty, k * rise_s, k * fall_s, 1 / clock_hz)
            for k in np.geomspace(1, 3, 60)
        ]
        found.append(np.min(20 * np.log10(level / np.nanmax(exact, axis=0))))
    return np.array(found)


def shift_register(length: int, tap: int) -> Array:
    """Maximum-length sequence."""
    state, bits = [1] * length, []
    for _ in range(2**length - 1):
        bits.append(state[-1])
        state = [state[-1] ^ state[tap - 1], *state[:-1]]
    return np.array(bits, dtype=float)


def _pattern_excess(bits: Array) -> Array:
    """Model over the lines of one pattern below twice its rate."""
    turns, lines = step_lines(bits)
    envelope = 2 / (np.pi * 2 * turns)
    model_db = float(random_data_db(1e9, 120e3, "peak", bits.size))
    part = np.abs(np.sin(np.pi * turns)) > 0.97
    return np.asarray(model_db - 20 * np.log10(lines[part] / envelope[part]))


def patterns() -> Array:
    """Lines of maximum-length sequences where their sine is near 1."""
    registers = ((7, 6), (9, 5), (10, 7), (11, 9))
    return np.concatenate([_pattern_excess(shift_register(*register)) for register in registers])


def other_patterns() -> Array:
    """The strongest line of random patterns of 127 bits: what the model does not promise."""
    rng = np.random.default_rng(83)
    drawn = rng.integers(0, 2, (200, 127)).astype(float)
    return np.array([_pattern_excess(bits).min() for bits in drawn])


def spread_clocks() -> Array:
    """Simulated relief of the peak over the credit."""
    return np.array(
        [
            spread_relief_db(order, deviation_hz, rate_hz)
            - float(spread_credit_db(order, deviation_hz, rate_hz, 120e3))
            for order in (1, 3, 8)
            for deviation_hz in (0.2e6, 0.5e6, 1e6, 2e6, 5e6)
            for rate_hz in (20e3, 30e3, 60e3, 120e3)
        ]
    )


def rare_pulses() -> Array:
    """Quasi-peak of rare pulses over the printed pulse response, with the allowance."""
    table = np.loadtxt(PULSES, delimiter=",", skiprows=5)
    found = []
    for number, name in ((2, "B"), (3, "C/D")):
        _, hertz, printed_db, *_ = table[(table[:, 0] == number) & (table[:, 1] < 100)].T
        reading, reference = (pulse_reading_v(BANDS[name], 1e-6, f) for f in (hertz, [100.0]))
        relief_db = 20 * np.log10(reference / reading)
        found.append(printed_db - (relief_db - BURST_ALLOWANCE_DB["quasi-peak"]))
    return np.concatenate(found)


def all_sets() -> dict[str, Array]:
    """Every comparison by its name; above 0 is on the safe side."""
    return {
        "random data over simulated bits": random_data(),
        "single lines of data over simulated bits": single_lines(),
        "unequal edges over exact harmonics, closest": unequal_clocks(),
        "patterns of maximum length over their lines": patterns(),
        "random patterns of 127 bits, strongest line": other_patterns(),
        "spread clocks, simulated relief over credit": spread_clocks(),
        "rare pulses, printed response over credit": rare_pulses(),
    }
