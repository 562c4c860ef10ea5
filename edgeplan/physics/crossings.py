"""Where sampled rows cross their thresholds: first, last, and between the samples."""

from typing import Any, NamedTuple

import numpy as np
from numpy.lib.stride_tricks import sliding_window_view
from numpy.typing import NDArray

Array = NDArray[Any]

GUARD = 0.01  # a threshold is read at -1 %, 0 and +1 % of the swing
NEAR = 4  # samples in which a clean edge passes the three readings
EARLY = 3  # part of a window in which most edges arrive
WINDOW = 64  # samples in which a clean edge passes all thresholds


class Edges(NamedTuple):
    """Stretch of every row in which its edge is expected, and the rows where it is longer.

    ``near`` (M, L) begins at sample ``begin`` (M,), before which the row is below all
    thresholds; ``steps`` (M, L - 1) are its differences. Rows ``long`` are not above all
    thresholds by the end of the stretch.
    """

    near: Array
    steps: Array
    begin: Array
    long: Array


def edges(level: Array, lowest: Array, highest: Array) -> Edges:
    """Cut out the stretch from the lowest threshold on.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    lowest, highest : numpy.ndarray
        Extreme thresholds of every row (M,). [-]

    Returns
    -------
    Edges
        Stretches of up to ``WINDOW`` samples.

    Examples
    --------
    >>> found = edges(np.arange(200.0)[None] / 100, np.array([0.2]), np.array([0.9]))
    >>> found.begin.tolist(), found.near.shape, found.long.tolist()
    ([18], (1, 64), [0])
    """
    rows, samples = level.shape
    width = min(WINDOW, samples)
    begin = np.clip(_early_reach(level, lowest) - 2, 0, samples - width)
    every = sliding_window_view(level.ravel(), width)
    near = np.asarray(every[np.arange(rows) * samples + begin])
    long = np.flatnonzero((first_reach(near, highest) == width) & (begin + width < samples))
    return Edges(near, near[:, 1:] - near[:, :-1], begin, long)


def first_reach(level: Array, threshold: Array) -> Array:
    """Index of the first sample at or above the threshold of its row, n where there is none.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    threshold : numpy.ndarray
        One a row (M,). [-]

    Returns
    -------
    numpy.ndarray
        Indices (M,). [-]

    Examples
    --------
    >>> first_reach(np.array([[0.0, 0.6, 0.4, 1.0]]), np.array([0.5])).tolist()
    [1]
    """
    above = level >= threshold[:, None]
    index = above.argmax(axis=1)
    index[(index == 0) & ~above[:, 0]] = level.shape[1]
    return np.asarray(index)


def last_reach(level: Array, threshold: Array) -> Array:
    """Index of the sample from which a row stays at or above its threshold, n if it does not.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    threshold : numpy.ndarray
        One a row (M,). [-]

    Returns
    -------
    numpy.ndarray
        Indices (M,). [-]

    Examples
    --------
    >>> last_reach(np.array([[0.0, 0.6, 0.4, 1.0]]), np.array([0.5])).tolist()
    [3]
    """
    below = (level < threshold[:, None])[:, ::-1]
    back = below.argmax(axis=1)
    never = (back == 0) & ~below[:, 0]
    return np.where(never, 0, level.shape[1] - back)


def first_readings(level: Array, threshold: Array, found: Edges) -> Array:
    """First reach of k thresholds, each read at -1 %, 0 and +1 % of the swing.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    threshold : numpy.ndarray
        Thresholds (k, M). [-]
    found : Edges
        From :func:`edges` with the thresholds less and plus 1 %.

    Returns
    -------
    numpy.ndarray
        Indices (3, k, M), n where never reached. [-]

    Examples
    --------
    >>> wave = np.array([[0.0, 0.495, 0.4, 1.0]])
    >>> found = edges(wave, np.array([0.49]), np.array([0.51]))
    >>> first_readings(wave, np.array([[0.5]]), found).ravel().tolist()
    [1, 3, 3]
    """
    rows, samples = level.shape
    width = found.near.shape[1]
    long = level[found.long]
    guard = level.dtype.type(GUARD)
    index = np.empty((3, *threshold.shape), dtype=np.intp)
    for kind, own in enumerate(threshold - guard):
        local = first_reach(found.near, own)
        index[0, kind] = np.where(local < width, found.begin + local, samples)
        index[0, kind, found.long] = first_reach(long, own[found.long])
    after = level.ravel().take(_positions(rows, samples, index[0]))
    for reading, wanted in ((1, threshold), (2, threshold + guard)):
        steps = _leading(after < wanted)
        index[reading] = index[0] + steps
        which, row = np.nonzero((steps > NEAR) & (index[0] < samples))
        index[reading, which, row] = first_reach(level[row], wanted[which, row])
    return np.minimum(index, samples)


def last_readings(level: Array, threshold: Array, first: Array, lowest: Array) -> Array:
    """Last reach of q thresholds, each read at -1 %, 0 and +1 % of the swing.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    threshold : numpy.ndarray
        Thresholds (q, M). [-]
    first : numpy.ndarray
        Indices (3, q, M) of :func:`first_readings`. [-]
    lowest : numpy.ndarray
        Lowest sample from the first reach of +1 % on (q, M): where it stays clear of the
        threshold the last reach is the first one. [-]

    Returns
    -------
    numpy.ndarray
        Indices (3, q, M), n where the row does not stay above. [-]

    Examples
    --------
    >>> wave, threshold = np.array([[0.0, 0.6, 0.495, 1.0]]), np.array([[0.5]])
    >>> first = np.array([[[1]], [[1]], [[1]]])
    >>> last_readings(wave, threshold, first, np.array([[0.495]])).ravel().tolist()
    [1, 3, 3]
    """
    index = first.copy()
    guard = level.dtype.type(GUARD)
    for kind, own in enumerate(threshold):
        row = np.flatnonzero(lowest[kind] < own + guard)
        again = level[row]
        for reading, shift in enumerate((-guard, 0, guard)):
            index[reading, kind, row] = last_reach(again, own[row] + shift)
    return index


def lowest_from(level: Array, start: Array) -> Array:
    """Lowest sample of each row from each of q indices on, in one pass over the samples.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    start : numpy.ndarray
        Indices (q, M); beyond the row the last sample counts. [-]

    Returns
    -------
    numpy.ndarray
        Lowest samples (q, M). [-]

    Examples
    --------
    >>> lowest_from(np.array([[0.0, 1.0, 0.5, 0.8]]), np.array([[3], [1], [0]])).ravel().tolist()
    [0.8, 0.5, 0.0]
    """
    rows, samples = level.shape
    places = np.minimum(start, samples - 1).T
    cuts = np.full((rows, len(start) + 1), samples)
    cuts[:, :-1] = np.sort(places, axis=1)
    begin = np.arange(rows)[:, None] * samples
    pieces = np.append(np.minimum.reduceat(level.ravel(), (cuts + begin).ravel()[:-1]), 0)
    lowest = pieces.reshape(cuts.shape)[:, -2]
    result = np.repeat(lowest[None], len(start), axis=0)
    for rank in range(len(start) - 2, -1, -1):
        lowest = np.minimum(lowest, pieces.reshape(cuts.shape)[:, rank])
        result = np.where(cuts[:, rank] >= places.T, lowest, result)
    return result


def highest_after(level: Array, start: Array) -> Array:
    """Highest sample of each row from an index on; that of the last sample beyond the row.

    >>> highest_after(np.array([[0.0, 1.0, 0.8], [0.0, 0.5, 1.0]]), np.array([2, 1])).tolist()
    [0.8, 1.0]
    """
    rows, samples = level.shape
    begin = np.arange(rows) * samples
    cuts = np.stack([begin + np.minimum(start, samples - 1), begin + samples], axis=1)
    return np.asarray(np.maximum.reduceat(level.ravel(), cuts.ravel()[:-1])[::2])


def lowest_between(level: Array, start: Array, stop: Array) -> Array:
    """Lowest sample of each row from start to before stop, at least the one at start.

    >>> lowest_between(np.array([[3.0, 1.0, 0.0]]), np.array([0]), np.array([2])).tolist()
    [1.0]
    """
    rows, samples = level.shape
    begin = np.arange(rows) * samples
    start = np.minimum(start, samples - 2)
    cuts = np.stack([start, np.clip(stop, start + 1, samples - 1)], axis=1) + begin[:, None]
    return np.asarray(np.minimum.reduceat(level.ravel(), cuts.ravel())[::2])


def cubic_time(level: Array, row: Array, index: Array, threshold: Array) -> Array:
    """Crossing between two samples by a cubic through four, in samples.

    Parameters
    ----------
    level : numpy.ndarray
        Samples (M, n). [-]
    row, index : numpy.ndarray
        Row and index of the first sample at or above the threshold, any shape. [-]
    threshold : numpy.ndarray
        Threshold of each crossing. [-]

    Returns
    -------
    numpy.ndarray
        Times [samples]; 0 for index 0 and NaN for an index beyond the row.

    Notes
    -----
    Four-point Lagrange polynomial and two Newton steps from the straight line: at ten
    samples a raised-cosine edge 0.07 % of the edge, where the straight line has 2 %.

    Examples
    --------
    >>> wave = np.arange(8.0)[None] ** 3 / 343
    >>> print(f"{cubic_time(wave, np.array([0]), np.array([4]), np.array([0.125]))[0]:.3f}")
    3.500
    """
    samples = level.shape[1]
    inner = np.minimum(np.maximum(index, 2), samples - 2)
    flat, at = level.ravel(), row * samples + (inner - 2)
    y0, y1, y2, y3 = (flat[offset:].take(at) for offset in range(4))
    cubic = (y3 - y0) / 6 + (y1 - y2) / 2
    square = (y0 + y2) / 2 - y1
    slope = y2 - y0 / 3 - y1 / 2 - y3 / 6
    rest = y1 - threshold
    cubic_3, square_2 = 3 * cubic, 2 * square
    with np.errstate(divide="ignore", invalid="ignore"):
        u = _unit(rest / (y1 - y2))
        for _ in range(2):
            value = ((cubic * u + square) * u + slope) * u + rest
            u = _unit(u - value / ((cubic_3 * u + square_2) * u + slope))
    time = np.where(index < 1, 0, inner - 1 + u)
    return np.where(index < samples, time, np.nan)


def straight_time(level: Array, row: Array, index: Array, threshold: Array) -> Array:
    """Crossing between two samples by a straight line, in samples; as cubic_time in shape.

    >>> print(straight_time(np.array([[0.0, 1.0]]), np.array([0]), np.array([1]), np.array([0.5])))
    [0.5]
    """
    samples = level.shape[1]
    inner = np.minimum(np.maximum(index, 1), samples - 1)
    flat, at = level.ravel(), row * samples + inner
    after, before = flat.take(at), flat.take(at - 1)
    with np.errstate(divide="ignore", invalid="ignore"):
        time = inner - (after - threshold) / (after - before)
    time = np.where(index < 1, 0, time)
    return np.where(index < samples, time, np.inf)


def _unit(share: Array) -> Array:
    """Shares held between 0 and 1."""
    return np.asarray(np.minimum(np.maximum(share, 0, out=share), 1, out=share))


def _early_reach(level: Array, threshold: Array) -> Array:
    """First reach, sought in the first part of the rows first: most windows begin with the edge."""
    samples = level.shape[1]
    part = max(samples // EARLY, 1)
    index = first_reach(level[:, :part], threshold)
    rest = np.flatnonzero(index == part)
    index[rest] = part + first_reach(level[rest, part:], threshold[rest])
    return index


def _positions(rows: int, samples: int, index: Array) -> Array:
    """Flat places of the samples from each index on (NEAR + 1, k, M), none beyond its row."""
    begin = np.arange(rows) * samples
    places = np.arange(NEAR + 1)[:, None, None] + (index + begin)
    return np.minimum(places, begin + (samples - 1), out=places)


def _leading(mask: Array) -> Array:
    """Count of true values along the first axis before the first false one."""
    going = np.array(mask[0])
    count = going.astype(np.intp)
    for more in mask[1:]:
        going &= more
        count += going
    return np.asarray(count)
