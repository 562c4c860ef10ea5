"""Radiation of the trace itself: its current over a plane of finite size, straight traces."""

import numpy as np
from numpy.typing import ArrayLike

from edgeplan.emission.mechanism import Array, Mechanism, RadiationInputs
from edgeplan.physics.radiation import finite_board_factor, trace_field_per_ampere

MODEL = Mechanism(
    name="trace",
    version=1,
    error_db=1.8,
    source="current pattern over a plane, largest over all directions; 975 full-wave points over a"
    " plane without sides: -0.1 dB, standard deviation 0.2 dB; 600 of boards of finite size"
    " without cables: +2.8 dB, standard deviation 1.8 dB, which is the stated error",
)


def field_per_forward_ampere(paths: RadiationInputs, frequency_hz: ArrayLike) -> Array:
    """Largest distance times field of each trace per ampere of forward wave, peak.

    Parameters
    ----------
    paths : RadiationInputs
        N nets.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        ``(N, F)``. [V/A]

    Notes
    -----
    Once per net and frequency: drivers and resistors only change the forward wave.
    Bent traces longer than a wavelength over 2 pi radiate more than this says.

    Examples
    --------
    10 mm into an open end on air, 30 MHz: the current of 2 sin(k L) up at the driver's
    end radiates (eta0 k/4 pi) 2h I, of which a small board leaves half.

    >>> one, k = np.ones((1, 1)), 2 * np.pi * 30e6 / 299792458
    >>> net = RadiationInputs(
    ...     length_m=0.01 * one, height_m=1e-3 * one, permittivity=one,
    ...     permittivity_effective=one, impedance_ohm=50 * one, side_offset_m=0 * one,
    ...     board_length_m=0.1 * one, board_width_m=0.1 * one, load_reflection=one,
    ...     propagation_per_m=1j * k * one)
    >>> print(f"{field_per_forward_ampere(net, np.array([30e6]))[0, 0] * 1e6:.0f} uV")
    237 uV
    """
    largest_m = np.maximum(paths.board_length_m, paths.board_width_m)
    infinite_plane = trace_field_per_ampere(
        frequency_hz,
        paths.length_m,
        paths.height_m,
        paths.permittivity,
        paths.propagation_per_m,
        paths.load_reflection,
    )
    return finite_board_factor(frequency_hz, largest_m) * infinite_plane
