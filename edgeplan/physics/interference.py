"""What earlier bits do to a bit: worst levels and the extra delay of a crossing."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.crossings import cubic_time, last_reach
from edgeplan.physics.grids import SAMPLES_PER_RAMP
from edgeplan.physics.network import Trees
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveform_readings import Levels
from edgeplan.physics.waveforms import step_rows

Array = NDArray[Any]

BITS = 24  # what is left after so many bits is reported as tail


class Distortion(NamedTuple):
    """Worst levels of a one and of a zero at every phase of the bit (M, n), and the difference."""

    worst_one: Array
    worst_zero: Array
    eye: Array


class BitInterference(NamedTuple):
    """Extra delay of the last crossing for both edges (R, C) [s], and what was left out [-]."""

    rise_s: Array
    fall_s: Array
    tail: Array


def pulse_cursors(step: ArrayLike, samples_per_bit: int) -> Array:
    """Response to a single bit, folded at the bit.

    Parameters
    ----------
    step : array_like
        Step responses (M, n) that start at 0. [-]
    samples_per_bit : int
        Samples of one bit.

    Returns
    -------
    numpy.ndarray
        Cursors (M, bits, samples_per_bit); samples beyond the last whole bit are left out. [-]

    Examples
    --------
    >>> pulse_cursors([[0.0, 0.8, 1.0]], 1).round(3).tolist()
    [[[0.0], [0.8], [0.2]]]
    """
    step = np.atleast_2d(np.asarray(step))
    bits = step.shape[1] // samples_per_bit
    folded = step[:, : bits * samples_per_bit].reshape(len(step), bits, samples_per_bit)
    return np.diff(folded, axis=1, prepend=0)


def peak_distortion(step: ArrayLike, samples_per_bit: int) -> Distortion:
    r"""Worst level of a one and of a zero over all patterns of the bits around it.

    .. math::

        v_1 = p_{k_0} + \sum_{k \ne k_0} \min(p_k, 0), \qquad
        v_0 = \sum_{k \ne k_0} \max(p_k, 0)

    with the cursors p of a single bit and the largest of them, k0, for the bit itself.

    Parameters
    ----------
    step : array_like
        Step responses (M, n), 0 to 1. [-]
    samples_per_bit : int
        Samples of one bit.

    Returns
    -------
    Distortion
        Worst one, worst zero, and their difference, each (M, samples_per_bit). [-]

    Notes
    -----
    Exact for a linear net with equal edges; bits beyond the end of ``step`` are left out,
    and change a level by at most the distance of its end from 1 (sum over what is left).

    Examples
    --------
    A bit that reaches 80 % and leaves 20 % behind:

    >>> result = peak_distortion([[0.0, 0.8, 1.0]], 1)
    >>> print(result.worst_one.item(), round(result.worst_zero.item(), 3))
    0.8 0.2

    References
    ----------
    .. [1] R. W. Lucky, J. Salz, E. J. Weldon, "Principles of Data Communication",
       McGraw-Hill, 1968, ch. 4 (peak distortion).
    """
    cursor = pulse_cursors(step, samples_per_bit)
    main = cursor.max(axis=1)
    # The main cursor is the largest and not negative: take it out of the positive sum.
    one = main + np.minimum(cursor, 0).sum(axis=1)
    zero = np.maximum(cursor, 0).sum(axis=1) - np.maximum(main, 0)
    return Distortion(one, zero, one - zero)


def worst_edge(step: ArrayLike, samples_per_bit: int) -> Array:
    r"""Lowest level at every time after a rising edge, over all patterns before it.

    .. math:: w(t) + \sum_{k \ge 2} \min(p(t + kT), 0)

    Parameters
    ----------
    step : array_like
        Step responses (M, n), 0 to 1. [-]
    samples_per_bit : int
        Samples of one bit T.

    Returns
    -------
    numpy.ndarray
        Level (M, n) of an edge from zero to one, the bit before it 0, the later ones 1. [-]

    Notes
    -----
    The pattern that gives the lowest level may change with time, so this is no waveform,
    but its last crossing is that of the worst pattern. The falling edge is the mirror.

    Examples
    --------
    Nothing to add when everything settles within two bits:

    >>> worst_edge([[0.0, 0.8, 1.0, 1.0]], 1).tolist()
    [[0.0, 0.8, 1.0, 1.0]]
    """
    step = np.array(np.atleast_2d(step), dtype=float)
    pulse = step.copy()
    pulse[:, samples_per_bit:] -= step[:, :-samples_per_bit]
    loss = np.minimum(pulse, 0)
    result = step.copy()
    for shift in range(2 * samples_per_bit, step.shape[1], samples_per_bit):
        result[:, :-shift] += loss[:, shift:]
    return result


def bit_interference_s(
    trees: Trees, drive: Drive, levels: Levels, bit_s: ArrayLike, *, bits: int = BITS
) -> BitInterference:
    """Extra delay of the last VIH (rising) or VIL (falling) crossing by the bits before.

    Parameters
    ----------
    trees, drive : Trees, Drive
        A selection of nets and candidates. [SI]
    levels : Levels
        Of the R receivers, fractions of the swing. [-]
    bit_s : array_like
        One bit of each net (N,). [s]
    bits : int
        Bits looked back. [-]

    Returns
    -------
    BitInterference
        Against the isolated edge (R, C), 0 or more; NaN where no candidate exists or the
        edge, worst or isolated, never stays beyond its threshold. Tail: the largest
        distance from 1 in the last two bits looked at. [s], [-]

    Notes
    -----
    Equal rising and falling edges. The worst pattern is found exactly.

    Examples
    --------
    A matched line has no memory:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> from edgeplan.physics.waveform_readings import levels_of
    >>> drive = drive_of([[50.0]], ramp_s=1e-9)
    >>> extra = bit_interference_s(point_to_point([0.1]), drive, levels_of(0.3, 0.7, 1), [5e-9])
    >>> print(f"{abs(extra.rise_s[0, 0]) * 1e12:.1f} ps")
    0.0 ps
    """
    shape = (int(trees.receiver_offset[-1]), drive.exists.shape[1])
    rise, fall, tail = (np.full(shape, np.nan) for _ in range(3))
    bit = np.broadcast_to(np.asarray(bit_s, dtype=float), len(trees))
    ramp = np.where(drive.exists, drive.candidate_ramp_s(), np.inf).min(axis=1)
    per_bit = np.ceil(np.maximum(bit / ramp, 1) * SAMPLES_PER_RAMP - 1e-9)
    for count in np.unique(per_bit[drive.exists.any(axis=1)]).astype(int):
        nets = np.flatnonzero(drive.exists.any(axis=1) & (per_bit == count))
        rows = step_rows(
            trees.take(nets),
            drive.take(nets),
            duration_s=bits * bit[nets],
            step_s=bit[nets] / count,
        )
        step = rows.level[:, : bits * count]
        net = nets[rows.net]
        receiver = rows.receiver - trees.take(nets).receiver_offset[rows.net]
        place = (trees.receiver_offset[net] + receiver, rows.candidate)
        own = levels.take(place[0])
        worst, sample = worst_edge(step, count), bit[net] / count
        rise[place] = sample * _later(step, worst, own.threshold_high)
        fall[place] = sample * _later(step, worst, 1 - own.threshold_low)
        tail[place] = np.abs(step[:, -2 * count :] - 1).max(axis=1)
    return BitInterference(rise, fall, tail)


def _later(step: Array, worst: Array, threshold: Array) -> Array:
    """Samples by which the last crossing of the worst edge follows that of the isolated one."""
    row = np.arange(len(step))
    times = [
        cubic_time(level, row, last_reach(level, threshold), threshold) for level in (step, worst)
    ]
    return np.asarray(np.maximum(times[1] - times[0], 0))
