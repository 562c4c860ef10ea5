"""Activity simulated without any formula of the package: swept carriers and sampled bits."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]

BANDWIDTH_HZ = 120e3
SAMPLES = 64  # of one bit


def spread_relief_db(
    order: int, deviation_hz: float, modulation_hz: float, detector: str = "peak"
) -> float:
    """Relief of a detector by a triangular sweep, largest line over all tunings. [dB]

    One period of the swept carrier about its middle, its lines by an FFT, through a Gaussian
    filter of 120 kHz at 6 dB, peak (or mean) of the envelope; tuned in steps of a twentieth of
    the bandwidth near an end of the sweep, where the highest peak is, and through half of it.
    """
    spread_hz, period_s = order * deviation_hz, 1 / modulation_hz
    samples = 1 << int(np.ceil(np.log2(8 * period_s * (spread_hz + 4 * BANDWIDTH_HZ))))
    turn = (np.arange(samples) + 0.5) / samples
    sweep = (2 * np.abs(2 * turn - 1) - 1) * spread_hz / 2
    phase = 2 * np.pi * np.cumsum(sweep) * period_s / samples
    lines = np.fft.fft(np.exp(1j * phase)) / samples
    line_hz = np.fft.fftfreq(samples, period_s / samples)
    spread_6db = BANDWIDTH_HZ / 2 / np.sqrt(2 * np.log(2))
    highest = 0.0
    end_hz = max(spread_hz / 2 - 3 * BANDWIDTH_HZ, 0)
    near_end = np.arange(end_hz, spread_hz / 2 + BANDWIDTH_HZ, BANDWIDTH_HZ / 20)
    for tuned_hz in (*np.linspace(0, end_hz, 12), *near_end):
        passed = lines * np.exp(-(((line_hz - tuned_hz) / spread_6db) ** 2) / 2)
        envelope = np.abs(np.fft.ifft(passed) * samples)
        highest = max(highest, envelope.max() if detector == "peak" else envelope.mean())
    return float(-20 * np.log10(highest))


def sampled_bits(bits: Array, rise: float, fall: float, skew: float) -> tuple[Array, Array]:
    """Turns per bit and peak amplitude of every line of bits with straight ramps.

    Rise, fall and the delay of falling edges in samples, 64 to a bit; swing 1.
    """
    at = np.arange(SAMPLES)
    shapes = {
        (0, 0): np.zeros(SAMPLES),
        (1, 1): np.ones(SAMPLES),
        (0, 1): np.clip((at - 16 + rise / 2) / rise, 0, 1),
        (1, 0): 1 - np.clip((at - 16 - skew + fall / 2) / fall, 0, 1),
    }
    pairs = zip(np.roll(bits, 1), bits, strict=True)
    wave = np.concatenate([shapes[int(a), int(b)] for a, b in pairs])
    lines = 2 * np.abs(np.fft.rfft(wave)) / wave.size
    return np.arange(lines.size) / bits.size, lines


def step_lines(bits: Array) -> tuple[Array, Array]:
    """Turns per bit and peak amplitude of every line of a periodic pattern with ideal edges."""
    steps = np.diff(bits, prepend=bits[-1])
    turns = np.arange(1, bits.size * 2) / bits.size
    transform = np.resize(np.fft.fft(steps), bits.size * 2)[1:]
    return turns, 2 * np.abs(transform) / bits.size / (2 * np.pi * turns)
