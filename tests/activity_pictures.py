"""Picture of the activity models against simulation, for docs/models."""

from pathlib import Path

import activity_errors as errors
import matplotlib as mpl
import numpy as np
from build import net
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from simulated_activity import SAMPLES, sampled_bits, spread_relief_db

from edgeplan.activity import BURST_ALLOWANCE_DB
from edgeplan.physics.bursts import burst_reading_db
from edgeplan.physics.detectors import BANDS
from edgeplan.physics.spread_clock import spread_credit_db

BURSTS = Path(__file__).parent / "reference" / "quasi_peak_bursts.csv"


def draw_all(folder: Path) -> None:
    """Write the picture into a folder."""
    mpl.rcParams["svg.hashsalt"] = "edgeplan"
    figure = Figure(figsize=(11, 4), layout="constrained")
    data, spread, bursts = figure.subplots(1, 3)
    _data(data)
    _spread(spread)
    _bursts(bursts)
    for one in (data, spread, bursts):
        one.grid(visible=True, alpha=0.3)
        one.legend(fontsize=7)
    figure.savefig(folder / "activity.svg", metadata={"Date": None})


def _data(axes: Axes) -> None:
    """Random bits of 100 Mbit/s with unequal edges: power in bands, and single lines."""
    rise, fall, skew = 9.0, 16.0, 1.5
    bits = np.random.default_rng(91).integers(0, 2, 2**16)
    turns, lines = sampled_bits(bits, rise, fall, skew)
    second = 1 / errors.RATE_BPS / SAMPLES
    frequency, level, single = errors.model_lines(
        net(data_bps=errors.RATE_BPS), rise * second, fall * second, edge_skew_s=skew * second
    )
    middles = np.arange(0.325, 10, 0.05)
    share = 0.0903e6 / errors.RATE_BPS  # noise bandwidth of 120 kHz over the rate
    at = np.abs(turns[:, None] - middles) < 0.02
    at &= (np.abs(turns - np.round(turns)) > 1e-9)[:, None]
    mean = np.sqrt((lines[:, None] ** 2 * at).sum(axis=0) / at.sum(axis=0))
    rms = mean * np.sqrt(share * bits.size)
    axes.plot(middles * 100, 20 * np.log10(rms), ".", color="0.5", ms=3, label="simulated bits")
    multiples = np.arange(1, 11) * bits.size
    axes.plot(turns[multiples] * 100, 20 * np.log10(lines[multiples]), "kx", label="their lines")
    noise_db = 20 * np.log10(level * np.sqrt(share))
    axes.plot(frequency[~single] / 1e6, noise_db[~single], "C0", label="model, rms in 120 kHz")
    axes.plot(frequency[single] / 1e6, 20 * np.log10(level[single]), "C3+", label="model, lines")
    axes.set(ylim=(-110, -30))
    axes.set_title("100 Mbit/s, edges 1.4 and 2.5 ns, skew 0.23 ns", fontsize=9)
    axes.set(xlabel="frequency in MHz", ylabel="peak amplitude, dB over 1 V of swing")


def _spread(axes: Axes) -> None:
    """40 MHz, 5 %: simulated relief and credit over the harmonic."""
    orders = np.arange(1, 21)
    for colour, rate_hz in (("C0", 30e3), ("C1", 60e3)):
        relief = [spread_relief_db(int(n), 2e6, rate_hz) for n in orders]
        credit = spread_credit_db(orders, 2e6, rate_hz, 120e3)
        axes.plot(orders, relief, colour + "o", ms=3, label=f"simulated, {rate_hz / 1e3:.0f} kHz")
        axes.plot(orders, credit, colour, label="credit")
    axes.set_title("clock of 40 MHz, swept by 2 MHz", fontsize=9)
    axes.set(xlabel="harmonic", ylabel="less peak, dB")


def _bursts(axes: Axes) -> None:
    """Quasi-peak of bursts: an independent computation and what is credited."""
    burst_s, repetition_hz, reading_db = np.loadtxt(BURSTS, delimiter=",", skiprows=4).T
    for colour, hertz in (("C0", 1.0), ("C1", 10.0), ("C2", 100.0)):
        rows = repetition_hz == hertz
        label = f"{hertz:g} per second"
        axes.semilogx(burst_s[rows] * 1e3, reading_db[rows], colour + "o", ms=3, label=label)
        length_s = np.geomspace(2e-5, 0.9 / hertz, 40)
        read_db = burst_reading_db("quasi-peak", BANDS["C/D"], length_s, hertz)
        credit_db = np.minimum(read_db + BURST_ALLOWANCE_DB["quasi-peak"], 0)
        axes.semilogx(length_s * 1e3, credit_db, colour)
    axes.set_title("bursts; points: computed apart, lines: credited", fontsize=9)
    axes.set(xlabel="length in ms", ylabel="quasi-peak, dB")
