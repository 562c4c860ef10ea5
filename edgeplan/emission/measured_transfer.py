"""A measured transfer from a port of the board to the receiver, in the place of a mechanism."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from edgeplan.emission.mechanism import Array, Mechanism

MODEL = Mechanism(
    name="measured_transfer",
    version=1,
    error_db=4.0,
    source="a transfer the user measured, straight in the logarithm of frequency between its"
    " rows; the error is that of one place of the cables, one orientation and one receiver",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredInputs:
    """N nets and the transfer that replaces a mechanism.

    ``port_volt`` is the voltage at the measured port, peak, per ampere of forward wave (or per
    any other unit: the result is per that unit), ``(N, F)``. The port is the pad at which the
    line of a net begins, behind its series resistor. ``rows`` are pairs of frequency [Hz] and
    level by rising frequency: field at ``distance_m`` over port voltage [dB(1/m)] or, with
    rows of an ``antenna_factor`` [Hz], [dB(1/m)], receiver over port voltage [dB].
    """

    port_volt: Array
    rows: Sequence[tuple[float, float]]
    distance_m: float
    antenna_factor: Sequence[tuple[float, float]] = ()


def field_per_forward_ampere(paths: MeasuredInputs, frequency_hz: ArrayLike) -> Array:
    r"""Distance times field of each net by the measured transfer, peak.

    .. math:: r\,|V|\,10^{(T + AF)/20}

    Parameters
    ----------
    paths : MeasuredInputs
        N nets.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        ``(N, F)``; NaN outside the rows: nothing is extrapolated. [V/A]

    Notes
    -----
    Site, near field, shields, filters and cables are in the measurement: none of their
    factors may be applied again, and it holds at its own distance only.

    Examples
    --------
    1 V at the port, -40 dB(1/m) at 3 m: 10 mV/m.

    >>> net = MeasuredInputs(port_volt=np.ones((1, 1)), rows=[(30e6, -40.0), (1e9, -40.0)],
    ...                      distance_m=3.0)
    >>> print(f"{field_per_forward_ampere(net, np.array([1e8]))[0, 0] / 3:.3f} V/m")
    0.010 V/m
    """
    frequency_hz = np.asarray(frequency_hz, dtype=float)
    transfer_db = _between(frequency_hz, paths.rows)
    if paths.antenna_factor:
        transfer_db = transfer_db + _between(frequency_hz, paths.antenna_factor)
    return np.asarray(paths.distance_m * np.abs(paths.port_volt) * 10 ** (transfer_db / 20))


def _between(frequency_hz: Array, rows: Sequence[tuple[float, float]]) -> Array:
    """Level between rows, straight in the logarithm of frequency; NaN outside."""
    rows_hz, level_db = np.asarray(rows, dtype=float).T
    inside = (frequency_hz >= rows_hz[0]) & (frequency_hz <= rows_hz[-1])
    level = np.interp(np.log(frequency_hz), np.log(rows_hz), level_db)
    return np.where(inside, level, np.nan)
