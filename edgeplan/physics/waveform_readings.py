"""What is read from a block of step responses: crossings, overshoot, ringback, levels."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.crossings import (
    GUARD,
    cubic_time,
    first_readings,
    highest_after,
    last_readings,
    lowest_after,
    lowest_between,
    straight_time,
)

Array = NDArray[Any]

SPREAD = 0.06  # of the transition; a straight edge has 0.025 between the two readings
FALLING = -5e-4  # slope per sample from which a row counts as falling


@dataclass(frozen=True, slots=True, kw_only=True)
class Levels:
    """Levels of every receiver row (R,), fractions 0..1 of the swing of a rising step.

    The transition is judged between ``transition_low`` and ``transition_high``; the
    receiver's own thresholds are ``threshold_low`` (VIL) and ``threshold_high`` (VIH).
    """

    transition_low: Array
    transition_high: Array
    threshold_low: Array
    threshold_high: Array

    def take(self, index: ArrayLike) -> "Levels":
        """Levels of the given receivers.

        Parameters
        ----------
        index : array_like
            Indices of receivers (M,). [-]

        Returns
        -------
        Levels
            Of M rows. [-]

        Examples
        --------
        >>> levels_of(0.3, 0.7, 2).take([1]).threshold_high.tolist()
        [0.7]
        """
        index = np.asarray(index, dtype=np.intp)
        return Levels(
            transition_low=np.asarray(self.transition_low)[index],
            transition_high=np.asarray(self.transition_high)[index],
            threshold_low=np.asarray(self.threshold_low)[index],
            threshold_high=np.asarray(self.threshold_high)[index],
        )


def levels_of(
    threshold_low: ArrayLike,
    threshold_high: ArrayLike,
    receivers: int,
    transition: tuple[float, float] = (0.1, 0.9),
) -> Levels:
    """Levels of so many receivers; everything broadcasts to (R,).

    Parameters
    ----------
    threshold_low, threshold_high : array_like
        VIL and VIH as fractions of the swing. [-]
    receivers : int
        R. [-]
    transition : tuple of float
        Levels between which the transition is judged. [-]

    Returns
    -------
    Levels
        Of R rows. [-]

    Examples
    --------
    >>> levels_of(0.3, 0.7, 2).transition_high.tolist()
    [0.9, 0.9]
    """
    full = np.ones(receivers)
    return Levels(
        transition_low=transition[0] * full,
        transition_high=transition[1] * full,
        threshold_low=np.asarray(threshold_low) * full,
        threshold_high=np.asarray(threshold_high) * full,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Readings:
    """Readings of every receiver and candidate (R, C), float32; NaN where there is none.

    Times count from the 0 % point of the source's own edge. [s]

    ============================ ==========================================================
    ``rise_first_s``             rising edge leaves VIL for the first time
    ``rise_first_high_s``        reaches VIH for the first time
    ``rise_last_s``              reaches VIH for the last time
    ``fall_first_s``             falling edge leaves VIH for the first time
    ``fall_first_low_s``         reaches VIL for the first time
    ``fall_last_s``              reaches VIL for the last time
    ``half_s``                   first 50 %
    ``transition_s``             first low to first high level of the transition
    ``overshoot``                peak over the final level, fraction of the swing
    ``ringback``                 lowest value after the first local maximum that follows the
                                 first reach of VIH, 1 where there is none
    ``slope_min_per_s``          lowest slope within the transition, swings per second
    ``level_after``              level one observation time after the first 50 %
    ``residual``                 largest distance from the final level after that time
    ``guarded``                  a threshold lies within 1 % of a plateau or bump; the worse
                                 of the readings at +-1 % is then stored
    ============================ ==========================================================
    """

    rise_first_s: Array
    rise_first_high_s: Array
    rise_last_s: Array
    fall_first_s: Array
    fall_first_low_s: Array
    fall_last_s: Array
    half_s: Array
    transition_s: Array
    overshoot: Array
    ringback: Array
    slope_min_per_s: Array
    level_after: Array
    residual: Array
    guarded: Array


DIRECTIONS = ("rise", "fall")
FIRST = {
    "rise": ("rise_first_s", "rise_first_high_s"),
    "fall": ("fall_first_s", "fall_first_low_s"),
}
LAST = {"rise": "rise_last_s", "fall": "fall_last_s"}
EARLIER_IS_WORSE = ("rise_first_s", "fall_first_s", "low")


def block_readings(
    level: Array,
    levels: Levels,
    observe: Array,
    settle_trip: Array,
    directions: tuple[str, ...] = DIRECTIONS,
) -> dict[str, Array]:
    """Readings of one block in units of its samples.

    Parameters
    ----------
    level : numpy.ndarray
        Step responses that end at 1 (M, n). [-]
    levels : Levels
        Of the M rows. [-]
    observe : numpy.ndarray
        Time after the first 50 % at which the level is read (M,). [samples]
    settle_trip : numpy.ndarray
        A period of ringing (M,); a dip that ends later than this before the end of
        the window may be followed by another. [samples]
    directions : tuple of str
        Of rise and fall.

    Returns
    -------
    dict of numpy.ndarray
        The fields of :class:`Readings` without their unit of time (M,). [samples], [-]

    Examples
    --------
    >>> ramp = np.clip(np.arange(40.0) / 20, 0, 1)[None].astype(np.float32)
    >>> read = block_readings(ramp, levels_of(0.3, 0.7, 1), np.array([10.0]), np.array([1.0]))
    >>> print(f"{read['half_s'][0]:.2f} {read['transition_s'][0]:.2f}")
    10.00 16.00
    """
    name, threshold = _thresholds(levels, directions, level.dtype)
    first = first_readings(level, threshold)
    later = [name.index(FIRST[way][1]) for way in directions]
    last = last_readings(level, threshold[later], first[:, later])
    names = name + [LAST[way] for way in directions]
    index = np.concatenate([first, last], axis=1)
    target = np.concatenate([threshold, threshold[later]])
    time, guarded, nominal_half = _guarded_times(level, names, index, target)
    _drop_endless(time, names, index, level.shape[1] - settle_trip)
    result = {key: time[row] for row, key in enumerate(names) if key not in ("low", "high")}
    low, high = names.index("low"), names.index("high")
    result["transition_s"] = time[high] - time[low]
    result["guarded"] = guarded
    result["overshoot"] = overshoot(level)
    start = first[1, later].min(axis=0)
    step = level[:, 1:] - level[:, :-1]
    result["ringback"] = _ringback(level, step, start)
    result["slope_min_per_s"] = lowest_between(step, first[1, low], first[1, high] - 1)
    result["level_after"], result["residual"] = _after(level, nominal_half + observe)
    return result


def overshoot(level: Array) -> Array:
    """Peak of each row over 1 by a parabola through three samples, not below 0.

    Parameters
    ----------
    level : numpy.ndarray
        Step responses that end at 1 (M, n). [-]

    Returns
    -------
    numpy.ndarray
        Overshoot (M,). [-]

    Examples
    --------
    >>> print(overshoot(np.array([[0.0, 1.1, 1.2, 1.1, 1.0]])).round(3))
    [0.2]
    """
    samples = level.shape[1]
    peak = np.clip(level.argmax(axis=1), 1, samples - 2) + np.arange(len(level)) * samples
    before, at, after = (level.ravel()[peak + offset] for offset in (-1, 0, 1))
    bend = np.minimum(before - 2 * at + after, -np.finfo(level.dtype).tiny)
    rise = np.clip(
        (before - after) ** 2 / (-8 * bend), 0, np.maximum(at - np.minimum(before, after), 0)
    )
    return np.asarray(np.maximum(np.maximum(at + rise, np.maximum(before, after)) - 1, 0))


def _thresholds(
    levels: Levels, directions: tuple[str, ...], precision: Any
) -> tuple[list[str], Array]:
    """Names and thresholds (k, M) of the first crossings wanted."""
    low, high = np.asarray(levels.threshold_low), np.asarray(levels.threshold_high)
    wanted = {
        "low": np.asarray(levels.transition_low),
        "high": np.asarray(levels.transition_high),
        "half_s": np.full_like(low, 0.5),
    }
    if "rise" in directions:
        wanted |= dict(zip(FIRST["rise"], (low, high), strict=True))
    if "fall" in directions:
        wanted |= dict(zip(FIRST["fall"], (1 - high, 1 - low), strict=True))
    return list(wanted), np.stack(list(wanted.values())).astype(precision)


def _guarded_times(
    level: Array, names: list[str], index: Array, target: Array
) -> tuple[Array, Array, Array]:
    """Times (k, M), the worse where the readings at +-1 % differ; which rows; plain 50 %."""
    guard = level.dtype.type(GUARD)
    row = np.broadcast_to(np.arange(len(level)), target.shape)
    time = cubic_time(level, row, index[1], target)
    low, high = names.index("low"), names.index("high")
    transition = time[high] - time[low]
    with np.errstate(invalid="ignore"):  # never reached: infinity less infinity, flagged
        spread = straight_time(level, row, index[2], target + guard)
        spread -= straight_time(level, row, index[0], target - guard)
        flagged = ~(spread <= allowed_spread(target) * transition)
    half = time[names.index("half_s")].copy()
    for kind, name in enumerate(names):
        rows = np.flatnonzero(flagged[kind])
        reading, shift = (0, -guard) if name in EARLIER_IS_WORSE else (2, guard)
        time[kind, rows] = cubic_time(
            level, rows, index[reading, kind, rows], target[kind, rows] + shift
        )
    return time, flagged.any(axis=0), half


def allowed_spread(threshold: Array) -> Array:
    """Spread between the readings at +-1 % that is still a clean edge, over the transition.

    0.06, or 1.25 times that of a single pole, which is smooth however slowly it closes in.

    >>> print(allowed_spread(np.array([0.5, 0.9])).round(3))
    [0.06  0.114]
    """
    rest = np.maximum(1 - threshold, 2 * GUARD)
    pole = np.log((rest + GUARD) / (rest - GUARD)) / np.log(9)
    return np.asarray(np.maximum(SPREAD, 1.25 * pole))


def _drop_endless(time: Array, names: list[str], index: Array, latest: Array) -> None:
    """Forget last crossings after a dip so near the end of the window that more may follow."""
    for way, last in LAST.items():
        if last in names:
            again = index[1, names.index(last)] != index[1, names.index(FIRST[way][1])]
            row = names.index(last)
            time[row] = np.where(again & (time[row] > latest), np.nan, time[row])


def _ringback(level: Array, step: Array, start: Array) -> Array:
    """Lowest sample after the first fall that follows the first reach of VIH."""
    falling = step < FALLING
    first = falling.argmax(axis=1)
    early = np.flatnonzero(first < start)
    column = np.arange(step.shape[1])
    first[early] = (falling[early] & (column >= start[early, None])).argmax(axis=1)
    none = ~falling[np.arange(len(level)), first] | (start >= step.shape[1])
    return np.where(none, np.where(start < level.shape[1], 1, np.nan), lowest_after(level, first))


def _after(level: Array, time: Array) -> tuple[Array, Array]:
    """Level at a time, straight between samples, and largest distance from 1 from then on."""
    rows, samples = level.shape
    known = ~np.isnan(time)
    place = np.minimum(np.where(known, time, 0), samples - 1.0)
    at = np.minimum(place.astype(np.intp), samples - 2)
    part = (place - at).astype(level.dtype)
    flat, begin = level.ravel(), np.arange(rows) * samples + at
    value = (1 - part) * flat[begin] + part * flat[begin + 1]
    tail = np.minimum(at, int(0.95 * samples))
    lowest = lowest_after(level, tail)
    residual = np.maximum(1 - lowest, highest_after(level, tail) - 1)
    beyond = time > samples - 1
    value = np.where(beyond, np.where(residual < GUARD, 1, np.nan), value)
    return np.where(known, value, np.nan), np.where(known, residual, np.nan)
