"""Crosstalk of two equal coupled nets from two runs, one per mode, of the ordinary engine.

Where both nets end alike at either end, even and odd mode never mix: each is a net of its own.
Reflections at unmatched ends, which no closed form bounds well, come out exactly.
"""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.network import Trees
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveforms import dc_gain, step_rows

Array = NDArray[Any]


class CoupledRows(NamedTuple):
    """M waveforms of both nets over the aggressor's swing at the source; times and levels (M, n).

    ``net``, ``candidate`` and ``receiver`` (M,) count as in `waveforms.step_rows`.
    """

    time_s: Array
    aggressor: Array
    victim: Array
    net: Array
    candidate: Array
    receiver: Array


def coupled_rows(even: Trees, odd: Trees, drive: Drive, *, duration_s: ArrayLike) -> CoupledRows:
    r"""Waveforms at the receivers of an aggressor and of its quiet neighbour.

    .. math:: V_a = \frac{V_e + V_o}{2}, \qquad V_v = \frac{V_e - V_o}{2}

    Parameters
    ----------
    even, odd : Trees
        The aggressor's nets, N each and alike but for their lines: where they are coupled those of
        the mode, elsewhere their own. [SI]
    drive : Drive
        C candidates of the aggressor; the neighbour's driver holds its level through the
        same resistances. [SI]
    duration_s : array_like
        Shortest window of each net (N,). [s]

    Returns
    -------
    CoupledRows
        Of existing candidates. [s], [-]

    Raises
    ------
    ValueError
        No candidate exists, or the nets differ in more than their lines.

    Notes
    -----
    Both nets run the same way, with equal routes, drivers and loads; a neighbour that is
    driven from the other end is another case. Accurate as `waveforms.step_rows`.

    Examples
    --------
    Lines of one delay, matched in the middle of the modes' impedances: nothing at the far end.

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> even, odd = (
    ...     point_to_point([0.1], receiver_siemens=1 / 49.5, line=(ohm, 7e-9, 0.0, 0.0, 0.0))
    ...     for ohm in (50.0, 49.0)
    ... )
    >>> drive = drive_of([[49.5]], ramp_s=0.5e-9)
    >>> rows = coupled_rows(even, odd, drive, duration_s=4e-9)
    >>> print(f"{np.abs(rows.victim).max() * 1e3:.1f} mV/V")
    0.0 mV/V

    References
    ----------
    .. [1] C. R. Paul, "Analysis of multiconductor transmission lines", 2nd ed., Wiley, 2008,
       ch. 7 (decoupling by modes).
    """
    if not _alike(even, odd):
        raise ValueError("the modes differ in more than their lines")
    modes = []
    for trees in (even, odd):
        rows = step_rows(trees, drive, duration_s=duration_s)
        gain = dc_gain(trees, drive)[rows.receiver, rows.candidate]
        modes.append((rows, rows.level * gain[:, None]))
    (rows, in_even), (_, in_odd) = modes
    return CoupledRows(
        rows.time_s,
        (in_even + in_odd) / 2,
        (in_even - in_odd) / 2,
        rows.net,
        rows.candidate,
        rows.receiver,
    )


def _alike(one: Trees, other: Trees) -> bool:
    """Whether two sets of nets are the same but for the constants of their lines."""
    names = ("segment_offset", "parent", "length_m", "node_farad", "node_siemens",
             "receiver_offset", "receiver_segment", "stub_length_m")  # fmt: skip
    return all(np.array_equal(getattr(one, name), getattr(other, name)) for name in names)
