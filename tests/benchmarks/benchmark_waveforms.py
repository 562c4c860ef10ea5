"""Speed of the step responses against a scikit-rf script and against the bare arithmetic.

Run ``OPENBLAS_NUM_THREADS=1 python tests/benchmarks/benchmark_waveforms.py [--mix] [--large]``.
It prints and never asserts. All ratios come from one process; engine and kernel take turns,
and the median of the pairs counts, so that what else the machine does hardly matters.

* engine: all readings at two corners, which are read together;
* script: what a competent user of scikit-rf writes: the line networks of a net once, then per
  candidate a source cascade, and per receiver an inverse transform and the same readings;
* kernel in blocks: the matrix products and inverse transforms of the engine alone, as many rows
  at once as the engine reads at once: the plain arithmetic on the same sizes;
* kernel in strips: the engine's very calls replayed on warm buffers. The engine cuts a block into
  strips that stay in the cache, so this is what its own arithmetic takes at best.
"""

import argparse
import functools
import resource
import time
from collections.abc import Callable, Sequence
from typing import Any
from unittest import mock

import numpy as np
import skrf
from numpy.typing import NDArray
from scipy import fft
from skrf.media import DistributedCircuit

from edgeplan.physics.lines import LineConstants, dielectric_factor
from edgeplan.physics.network import Trees
from edgeplan.physics.row_blocks import LINES, ROWS
from edgeplan.physics.situations import Situation, read_together
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveform_readings import Levels, levels_of

Array = NDArray[Any]

CANDIDATES = 40
E12 = np.array([0, 10, 15, 22, 27, 33, 47, 68.0])
CORNERS = ((0.8, 0.85), (1.25, 1.2))  # driver resistance and ramp over typical


def board(nets: int, *, mix: bool, seed: int = 1) -> Trees:
    """Synthetic nets: point to point, or 60 % of them, 25 % daisy chains and 15 % stars."""
    rng = np.random.default_rng(seed)
    classes = np.array(
        [(z, t, 6.0, 1.1e-3, 0.018) for z in (45, 50, 55, 60) for t in (6e-9, 6.8e-9)]
    )
    parents, receivers = [], []
    for kind in rng.choice(3, nets, p=(0.6, 0.25, 0.15) if mix else (1.0, 0, 0)):
        count = int(rng.integers(2, 5)) if kind else int(rng.integers(1, 4))
        star = kind == 2
        parents.append(np.full(count, -1) if star else np.arange(count) - 1)
        receivers.append(np.arange(count) if kind else np.array([count - 1]))
    segment = np.concatenate([[0], np.cumsum([len(p) for p in parents])])
    line = classes[rng.integers(0, len(classes), segment[-1])].T
    stub = classes[rng.integers(0, len(classes), nets)].T
    total = rng.uniform(0.02, 0.16, nets) / np.diff(segment)
    return Trees(
        segment_offset=segment,
        parent=np.concatenate(parents),
        length_m=np.repeat(total, np.diff(segment)) * rng.uniform(0.6, 1.4, segment[-1]),
        line=LineConstants(*line),
        node_farad=rng.uniform(0.3e-12, 6e-12, segment[-1]),
        node_siemens=np.zeros(segment[-1]),
        receiver_offset=np.concatenate([[0], np.cumsum([len(r) for r in receivers])]),
        receiver_segment=np.concatenate(receivers),
        stub_length_m=rng.uniform(0.5e-3, 8e-3, nets),
        stub_line=LineConstants(*stub),
    )


def drives(nets: int, seed: int = 2) -> list[Drive]:
    """Five settings of one of 16 drivers times eight resistors for every net, at two corners."""
    rng = np.random.default_rng(seed)
    kind = rng.integers(0, 16, nets)
    strength = rng.uniform(0.8, 1.25, (16, 1))[kind] * np.array([14.0, 20.0, 28.0, 40.0, 55.0])
    ramp = rng.uniform(0.6, 1.6, (16, 1))[kind] * 1e-9 * np.array([0.7, 0.9, 1.2, 1.6, 2.2])
    setting, resistor = np.divmod(np.arange(CANDIDATES), len(E12))
    return [
        Drive(
            resistance_ohm=resistance * strength[:, setting],
            series_ohm=np.broadcast_to(E12[resistor], (nets, CANDIDATES)),
            pad_farad=np.full((nets, CANDIDATES), 3e-12),
            ramp_s=speed * ramp,
            ramp_index=np.broadcast_to(setting, (nets, CANDIDATES)),
            exists=np.ones((nets, CANDIDATES), dtype=bool),
        )
        for resistance, speed in CORNERS
    ]


def engine(trees: Trees, corners: list[Drive], levels: Levels, bit_s: np.ndarray) -> None:
    """Everything that is read, at both corners."""
    LINES.rows.clear()
    read_together([Situation(trees, drive, levels, bit_s) for drive in corners])


def recorded(work: Callable[[], object]) -> list[tuple[Any, ...]]:
    """Matrix products (two shapes) and inverse transforms (shape, length) of some work, typed."""
    calls: list[tuple[Any, ...]] = []
    matmul, irfft = np.matmul, fft.irfft

    def product(weights: Array, terms: Array, out: Array) -> Array:
        calls.append((weights.shape, terms.shape, weights.dtype))
        return matmul(weights, terms, out=out)

    def transform(spectrum: Array, length: int, **options: Any) -> Array:
        calls.append((spectrum.shape, length, spectrum.dtype))
        return irfft(spectrum, length, **options)

    with mock.patch.object(np, "matmul", product), mock.patch.object(fft, "irfft", transform):
        work()
    return calls


def in_strips(calls: list[tuple[Any, ...]]) -> Callable[[], None]:
    """Recorded products and transforms one after the other, bare.

    Shapes, types, lengths and order are those of the calls. Operands are views of few
    buffers, so that they are at least as warm as those of the engine.
    """
    size = max(2 * int(np.prod(call[0])) for call in calls) + 2**20
    numbers = np.random.default_rng(0).random(size)
    buffers: dict[Any, Array] = {kind: numbers.astype(kind) for kind in {c[2] for c in calls}}
    buffers["out"] = numbers.astype(np.float32)

    def shaped(shape: tuple[int, ...], kind: Any) -> Array:
        return buffers[kind][: int(np.prod(shape))].reshape(shape)

    jobs: list[tuple[Any, ...]] = []
    for shape, other, kind in calls:
        if isinstance(other, tuple):
            out = shaped((shape[0], other[1]), "out")
            jobs.append((shaped(shape, kind), shaped(other, kind), out))
        else:
            jobs.append((shaped(shape, kind), other))

    def run() -> None:
        for first, second, *out in jobs:
            if out:
                np.matmul(first, second, out=out[0])
            else:
                fft.irfft(first, second, axis=1)

    return run


def in_blocks(calls: list[tuple[Any, ...]]) -> Callable[[], None]:
    """Recorded products and transforms, bare, up to a block of the engine's rows at a time.

    The products of a block go into its spectra one below the other; the block is transformed
    as a whole. Candidates with several receivers have more spectra than products.
    """
    blocks: list[tuple[list[tuple[Array, Array]], int, int]] = []
    numbers = np.random.default_rng(0).random(2**22).astype(np.float32)
    products: list[tuple[Array, Array]] = []
    for shape, other, _ in calls:
        if isinstance(other, tuple):
            pair = (numbers[: int(np.prod(own))].reshape(own) for own in (shape, other))
            products.append(tuple(pair))
        elif blocks and blocks[-1][2] == other and blocks[-1][1] + shape[0] <= ROWS:
            blocks[-1] = (blocks[-1][0] + products, blocks[-1][1] + shape[0], other)
            products = []
        else:
            blocks.append((products, shape[0], other))
            products = []
    most = max(rows * (samples + 2) for _, rows, samples in blocks)
    spectra = np.random.default_rng(0).random(most).astype(np.float32)

    def run() -> None:
        for pairs, rows, samples in blocks:
            level = spectra[: rows * (samples + 2)].reshape(rows, samples + 2)
            at = 0
            for weights, terms in pairs:
                np.matmul(weights, terms, out=level[at : at + len(weights)])
                at += len(weights)
            fft.irfft(level.view(np.complex64), samples, axis=1)

    return run


def paired(
    whole: Callable[[], object], bare: Callable[[], object], pairs: int, repeats: int = 5
) -> dict[str, Array]:
    """Seconds (pairs, 2) of the two in turn, by the wall's clock and by the processor's.

    The bare work is the shorter one and is repeated, so that both see the same machine.
    """
    taken = np.empty((2, pairs, 2))
    for pair in range(pairs):
        for which, (work, times) in enumerate(((whole, 1), (bare, repeats))):
            start = np.array([time.perf_counter(), time.process_time()])
            for _ in range(times):
                work()
            now = np.array([time.perf_counter(), time.process_time()])
            taken[:, pair, which] = (now - start) / times
    return {"wall": taken[0], "processor": taken[1]}


def script(
    trees: Trees, drive: Drive, levels: Levels, bit_s: np.ndarray, nets: Sequence[int]
) -> int:
    """Do the same with scikit-rf, one candidate after the other; return the count of them."""
    points, done = 512, 0
    for net in nets:
        step = drive.ramp_s[net].min() / 10
        frequency = skrf.Frequency.from_f(
            np.arange(1, points // 2 + 1) / (points * step), unit="hz"
        )
        stub, receivers = _script_networks(trees, net, frequency)
        for candidate in range(CANDIDATES):
            media = stub.media
            source = (
                media.resistor(drive.resistance_ohm[net, candidate])
                ** media.shunt_capacitor(drive.pad_farad[net, candidate])
                ** stub.network
                ** media.resistor(drive.series_ohm[net, candidate])
            )
            ramp = drive.ramp_s[net, drive.ramp_index[net, candidate]]
            for line, load in receivers:
                network = source**line
                transfer = 1 / (network.a[:, 0, 0] + network.a[:, 0, 1] * load)
                _script_readings(transfer, frequency.f, ramp, step, points, bit_s[net], levels)
            done += 1
    return done


class _Stub:
    """Stub of a net in scikit-rf and the medium its lumped parts are made of."""

    def __init__(self, media: DistributedCircuit, length_m: float) -> None:
        self.media = media
        self.network = media.line(length_m, unit="m")


def _script_media(line: list[float], frequency: skrf.Frequency) -> DistributedCircuit:
    """One line as a distributed circuit."""
    impedance, delay, resistance, skin, loss = line
    s = 2j * np.pi * frequency.f
    series = s * impedance * delay + np.sqrt(resistance**2 + s * skin**2 / np.pi)
    shunt = s * delay / impedance * dielectric_factor(s, loss)
    w = s.imag
    return DistributedCircuit(
        frequency, z0_port=50, L=series.imag / w, R=series.real, C=shunt.imag / w, G=shunt.real
    )


def _script_networks(
    trees: Trees, net: int, frequency: skrf.Frequency
) -> tuple[_Stub, list[tuple[skrf.Network, np.ndarray]]]:
    """Stub, and for each receiver the cascade up to it and the load at its end; once a net."""
    own = trees.take([net])
    stub = _Stub(
        _script_media([float(f[0]) for f in own.stub_line], frequency), float(own.stub_length_m[0])
    )
    parts = [
        _script_media([float(f[i]) for f in own.line], frequency).line(float(length), unit="m")
        for i, length in enumerate(own.length_m)
    ]

    def hanging(node: int, without: int = -1) -> np.ndarray:
        own_load = 2j * np.pi * frequency.f * (own.node_farad[node] if node >= 0 else 0)
        branches = [i for i in np.flatnonzero(own.parent == node) if i != without]
        return own_load + sum(looking_into(i) for i in branches)

    def looking_into(segment: int) -> np.ndarray:
        a, load = parts[segment].a, hanging(segment)
        return (a[:, 1, 0] + a[:, 1, 1] * load) / (a[:, 0, 0] + a[:, 0, 1] * load)

    def up_to(segment: int) -> skrf.Network:
        above = int(own.parent[segment])
        a = np.tile(np.eye(2, dtype=complex), (len(frequency), 1, 1))
        a[:, 1, 0] = hanging(above, without=segment)
        joined = skrf.Network(frequency=frequency, s=skrf.network.a2s(a)) ** parts[segment]
        return joined if above < 0 else up_to(above) ** joined

    return stub, [(up_to(int(i)), hanging(int(i))) for i in own.receiver_segment]


def _script_readings(
    transfer: np.ndarray,
    frequency_hz: np.ndarray,
    ramp_s: float,
    step_s: float,
    points: int,
    bit_s: float,
    levels: Levels,
) -> dict[str, float]:
    """Square wave, inverse transform, and the readings of one waveform."""
    x = 2j * np.pi * frequency_hz * ramp_s
    edge = (1 + np.exp(-x)) / 2 * np.pi**2 / (x**2 + np.pi**2)
    odd = np.arange(1, points // 2 + 1) % 2 == 1
    spectrum = np.where(odd, transfer * edge * 2 / (2j * np.pi * frequency_hz * step_s), 0)
    wave = 0.5 + np.fft.irfft(np.concatenate([[0], spectrum]), points)
    wave = wave[: points // 2]
    times = {}
    thresholds = {"low": 0.1, "half": 0.5, "high": 0.9}
    thresholds |= {"vil": levels.threshold_low[0], "vih": levels.threshold_high[0]}
    thresholds |= {"nvil": 1 - levels.threshold_low[0], "nvih": 1 - levels.threshold_high[0]}
    for name, threshold in thresholds.items():
        for shift in (-0.01, 0, 0.01):
            above = np.flatnonzero(wave >= threshold + shift)
            below = np.flatnonzero(wave < threshold + shift)
            first = max(int(above[0]) if len(above) else len(wave) - 1, 1)
            last = min(int(below[-1]) if len(below) else 1, len(wave) - 2)
            rise = wave[first] - wave[first - 1] or 1.0
            times[name, shift] = first - (wave[first] - threshold) / rise
            times[name, shift, "last"] = float(last)
    start = int(times["vih", 0])
    falling = np.flatnonzero(np.diff(wave[start:]) < -5e-4)
    after = start + int(falling[0]) if len(falling) else len(wave) - 1
    low = int(np.clip(times["low", 0], 0, len(wave) - 2))
    high = int(np.clip(times["high", 0], low, len(wave) - 2)) + 1
    return {
        "transition": (times["high", 0] - times["low", 0]) * step_s,
        "overshoot": float(wave.max() - 1),
        "ringback": float(wave[after:].min()),
        "slope": float(np.diff(wave[low : high + 1]).min()),
        "level": float(np.interp(times["half", 0] + bit_s / step_s, np.arange(len(wave)), wave)),
    }


def main() -> None:
    """Print times and ratios."""
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--mix", action="store_true", help="daisy chains and stars as well")
    options.add_argument("--large", action="store_true", help="10,000 nets as well")
    options.add_argument("--nets", type=int, default=1000)
    options.add_argument("--pairs", type=int, default=7)
    options.add_argument("--sample", type=int, default=8, help="nets given to the script")
    chosen = options.parse_args()
    sizes = [chosen.nets, 10 * chosen.nets] if chosen.large else [chosen.nets]
    taken = []
    for size in sizes:
        trees, corners = board(size, mix=chosen.mix), drives(size)
        levels = levels_of(0.3, 0.7, int(trees.receiver_offset[-1]))
        bit_s = np.random.default_rng(3).uniform(4e-9, 20e-9, size)
        work = functools.partial(engine, trees, corners, levels, bit_s)
        calls = recorded(work)
        turns = chosen.pairs if size == chosen.nets else 1
        found = {
            name: paired(work, bare(calls), turns)
            for name, bare in (("blocks", in_blocks), ("strips", in_strips))
        }
        own = float(np.median([pairs["wall"][:, 0] for pairs in found.values()]))
        taken.append(own)
        evaluations = 2 * size * CANDIDATES
        print(f"{size} nets, {evaluations} evaluations, {len(levels.threshold_low)} receivers")
        print(f"  engine {own:.2f} s, {evaluations / own:,.0f} evaluations/s")
        for name, pairs in found.items():
            both = pairs["processor"]
            ratio = both[:, 0] / both[:, 1]
            print(
                f"  kernel in {name} {np.median(both[:, 1]):.2f} s, engine takes"
                f" {np.median(ratio):.2f} times as long ({ratio.min():.2f} to {ratio.max():.2f})"
            )
        if size == chosen.nets:
            nets = np.linspace(0, size - 1, min(chosen.sample, size)).astype(int).tolist()
            start = time.process_time()
            count = script(trees, corners[0], levels, bit_s, nets)
            each = (time.process_time() - start) / count
            times = each * evaluations / np.median(found["blocks"]["processor"][:, 0])
            print(f"  script {each * 1e3:.2f} ms an evaluation: {times:,.0f} times")
    if chosen.large:
        print(f"growth for ten times the nets: {taken[1] / taken[0]:.1f}")
    print(f"peak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MiB")


if __name__ == "__main__":
    main()
