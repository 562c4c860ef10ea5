"""What every mechanism is given, and what it says about itself."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Mechanism:
    """A model, its version, its stated error and where that comes from.

    ``error_db`` is one standard deviation of the expected level, the largest where it depends
    on frequency.
    """

    name: str
    version: int
    error_db: float
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Cable:
    """A cable: its length, what is taken off its common mode, and whether its end is free.

    ``attenuation_db`` broadcasts against the frequencies; NaN makes the cable's part
    unknown. ``floating`` means that it reaches no floor, mains or other unit. [m], [dB]
    """

    length_m: float
    attenuation_db: float | Array = 0.0
    floating: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class RadiationInputs:
    """N nets as straight traces on one board.

    Arrays are ``(N, 1)``, or scalars where all nets agree; ``load_reflection`` and
    ``propagation_per_m`` are complex ``(N, F)``. ``board_length_m`` is the size of
    the board along the trace, ``board_width_m`` across it. ``start_m`` and ``end_m`` are the
    positions of driver and receiver along the board; without them the trace is taken
    as centred. ``cables`` is None where nothing is declared, empty where there are none.
    """

    length_m: Array
    height_m: Array
    permittivity: Array
    permittivity_effective: Array
    impedance_ohm: Array
    side_offset_m: Array
    board_length_m: Array
    board_width_m: Array
    load_reflection: Array
    propagation_per_m: Array
    cables: tuple[Cable, ...] | None = None
    start_m: Array | None = None
    end_m: Array | None = None

    def end_volts(self) -> tuple[Array, Array]:
        """Complex voltages at driver and load end per ampere of forward wave, ``(N, F)`` [V/A].

        >>> one = np.ones((1, 1))
        >>> line = RadiationInputs(
        ...     length_m=one, height_m=one, permittivity=one, permittivity_effective=one,
        ...     impedance_ohm=50 * one, side_offset_m=0 * one, board_length_m=one,
        ...     board_width_m=one, load_reflection=0 * one, propagation_per_m=0 * one)
        >>> [float(volt[0, 0]) for volt in line.end_volts()]
        [50.0, 50.0]
        """
        decay = np.exp(-self.propagation_per_m * self.length_m)
        at_source = self.impedance_ohm * (1 + self.load_reflection * decay**2)
        return at_source, self.impedance_ohm * decay * (1 + self.load_reflection)
