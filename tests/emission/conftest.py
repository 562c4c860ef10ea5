"""A net like the design's worked example, to be varied."""

import numpy as np
import pytest

from edgeplan.emission.mechanism import Cable, RadiationInputs

SPEED = 299_792_458.0


@pytest.fixture
def nets():
    """Make nets: 50 ohm, er 4.3, 0.2 mm over a board of 150 x 100 mm, 5 pF at the end."""

    def make(frequency_hz, length_m=0.1, load_farad=5e-12, **changes):
        one = np.ones_like(np.atleast_2d(length_m), dtype=float).reshape(-1, 1)
        load_ohm = 1 / (2j * np.pi * frequency_hz * load_farad)
        reflection = one * (load_ohm - 50) / (load_ohm + 50)
        values = {
            "length_m": np.asarray(length_m, dtype=float).reshape(-1, 1),
            "height_m": 0.2e-3 * one,
            "permittivity": 4.3 * one,
            "permittivity_effective": 3.2 * one,
            "impedance_ohm": 50 * one,
            "side_offset_m": 0 * one,
            "board_length_m": 0.15 * one,
            "board_width_m": 0.1 * one,
            "load_reflection": reflection,
            "propagation_per_m": one * 2j * np.pi * frequency_hz / SPEED * np.sqrt(3.2),
            "cables": (Cable(length_m=1.5),),
        }
        return RadiationInputs(**(values | changes))

    return make
