"""Time of routed radiation and common mode: python tests/benchmarks/benchmark_routed_emission.py.

10,000 nets of four segments at 60 frequencies on one core have to take less than 60 s.
"""

import time

import numpy as np

from edgeplan.physics import network
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.routed_imbalance import common_mode_per_volt
from edgeplan.physics.routed_radiation import Layout, routed_field_per_volt

NETS, SEGMENTS = 10_000, 4
SIZE_M = (0.15, 0.1)
FREQUENCY_HZ = np.linspace(30e6, 1e9, 60)


def staircases(nets: int) -> tuple[network.Trees, Layout]:
    """Nets of right angles, 40 to 160 mm long, somewhere on the board."""
    rng = np.random.default_rng(7)
    steps = np.zeros((nets, SEGMENTS, 2))
    steps[:, 0::2, 0] = rng.uniform(0.01, 0.04, (nets, SEGMENTS // 2))
    steps[:, 1::2, 1] = rng.uniform(0.01, 0.04, (nets, SEGMENTS // 2))
    origin_m = rng.uniform(0.01, 0.05, (nets, 2))
    end_m = origin_m[:, None] + np.cumsum(steps, axis=1)
    count = nets * SEGMENTS
    offset = np.arange(nets + 1) * SEGMENTS
    last = np.tile(np.arange(SEGMENTS) == SEGMENTS - 1, nets)
    trees = network.Trees(
        segment_offset=offset,
        parent=np.tile(np.arange(SEGMENTS) - 1, nets),
        length_m=np.abs(steps).sum(axis=2).ravel(),
        line=LineConstants(*(np.full(count, v) for v in (50.0, 6e-9, 2.0, 1e-3, 0.02))),
        node_farad=last * 5e-12,
        node_siemens=np.zeros(count),
        receiver_offset=np.arange(nets + 1),
        receiver_segment=np.full(nets, SEGMENTS - 1),
        stub_length_m=np.zeros(nets),
        stub_line=LineConstants(*np.ones((5, nets))),
    )
    height_m, permittivity = np.full(count, 2e-4), np.full(count, 4.3)
    return trees, Layout(origin_m, end_m.reshape(-1, 2), height_m, permittivity, offset)


def main() -> None:
    """Print seconds, and microseconds per segment and frequency."""
    trees, layout = staircases(NETS)
    points = NETS * SEGMENTS * FREQUENCY_HZ.size
    start = time.process_time()
    routed_field_per_volt(trees, layout, FREQUENCY_HZ)
    middle = time.process_time()
    common_mode_per_volt(trees, layout, FREQUENCY_HZ, SIZE_M)
    end = time.process_time()
    print(f"routed polylines of {NETS:,} nets x {SEGMENTS} segments: {end - start:.1f} s, bar 60 s")
    for name, taken_s in (("trace", middle - start), ("cable", end - middle)):
        print(f"{name}: {taken_s:.1f} s, {taken_s / points * 1e6:.2f} us per segment and frequency")


if __name__ == "__main__":
    main()
