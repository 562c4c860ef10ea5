"""What is read from a block of step responses: crossings, overshoot, ringback, levels."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.crossings import (
    GUARD,
    Edges,
    cubic_time,
    edges,
    first_readings,
    highest_after,
    last_readings,
    lowest_between,
    lowest_from,
    straight_time,
)

Array = NDArray[Any]

WHOLE_SPAN = 0.8  # of the levels that the allowed spread is a share of: 10 to 90 %
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
    ``rise_ringback``            lowest value after the first local maximum that follows the
                                 first reach of VIH, 1 where there is none
    ``fall_ringback``            the same for the mirrored edge, after 1 - VIL
    ``slope_min_per_s``          lowest slope within the transition, swings per second
    ``level_after``              level one observation time after the first 50 %; where that is
                                 after the window, 1 less the residual
    ``residual``                 largest distance from the final level after that time, or in
                                 the last period of ringing of the window
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
    rise_ringback: Array
    fall_ringback: Array
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
RINGBACK = {"rise": "rise_ringback", "fall": "fall_ringback"}
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
    kind, threshold = _thresholds(levels, directions, level.dtype)
    guard = level.dtype.type(GUARD)
    found = edges(level, threshold.min(axis=0) - guard, threshold.max(axis=0) + guard)
    first = first_readings(level, threshold, found)
    row = np.broadcast_to(np.arange(len(level)), threshold.shape)
    plain = cubic_time(level, row, first[1], threshold)
    transition = plain[kind["high"]] - plain[kind["low"]]
    span = np.asarray(levels.transition_high) - np.asarray(levels.transition_low)
    transition = transition * (WHOLE_SPAN / span).astype(level.dtype)
    early, late, flagged = _worse(level, row, first, threshold, plain, transition)
    result = {name: (early if name in EARLIER_IS_WORSE else late)[k] for name, k in kind.items()}
    result["transition_s"] = result.pop("high") - result.pop("low")
    low, high = first[1, kind["low"]], first[1, kind["high"]]
    result["slope_min_per_s"] = _lowest_step(level, found, low, high - 1)
    result["overshoot"] = overshoot(level)
    later = sorted({kind[FIRST[way][1]] for way in directions})
    end = _Ending(
        level=level,
        found=found,
        first=first[:, later],
        target=threshold[later],
        late=late[later],
        transition=transition,
        after=plain[kind["half_s"]] + observe,
        latest=level.shape[1] - settle_trip,
    )
    last, again, ringback = end.read(result)
    result["guarded"] = flagged.any(axis=0) | again
    for way in directions:
        own = later.index(kind[FIRST[way][1]])
        result[LAST[way]], result[RINGBACK[way]] = last[own], ringback[own]
    return result


@dataclass(frozen=True, slots=True, kw_only=True)
class _Ending:
    """What follows the first reach of the q later thresholds (3, q, M): dips, levels, residual."""

    level: Array
    found: Edges
    first: Array
    target: Array
    late: Array
    transition: Array
    after: Array
    latest: Array

    def read(self, result: dict[str, Array]) -> tuple[Array, Array, Array]:
        """Write level and residual; return last crossings, their guard (M,) and ringback (q, M)."""
        level, samples = self.level, self.level.shape[1]
        reached = self.first[1]
        falling = self._falls(reached)
        tail = np.fmin(self.after, np.minimum(self.latest, 0.95 * samples))
        tail = np.maximum(tail, 0).astype(np.intp)
        count = len(reached)
        lowest = lowest_from(level, np.concatenate([self.first[2], falling, tail[None]]))
        none = np.where(reached < samples, 1, np.nan)
        ringback = np.where(falling < samples, lowest[count : 2 * count], none)
        residual = np.maximum(1 - lowest[-1], highest_after(level, tail) - 1)
        result["residual"] = np.where(np.isnan(self.after), np.nan, residual)
        result["level_after"] = _level_at(level, self.after, residual)
        return (*self._last(lowest[:count]), ringback)

    def _falls(self, reached: Array) -> Array:
        """Where each row first falls after it reached each threshold (q, M)."""
        return np.stack([_first_fall(self.level, self.found, start) for start in reached])

    def _last(self, lowest: Array) -> tuple[Array, Array]:
        """Last crossings, the first ones where there is no other; NaN where more may follow."""
        last = last_readings(self.level, self.target, self.first, lowest)
        time, guarded = self.late.copy(), np.zeros(len(self.level), dtype=bool)
        which, row = np.nonzero((last != self.first).any(axis=0))
        index, own = last[:, which, row], self.target[which, row]
        guard = self.level.dtype.type(GUARD)
        plain, late = cubic_time(self.level, row, index[1:], np.stack([own, own + guard]))
        flagged = _uneven(self.level, row, index, own, self.transition[row])
        dips = index[1] != self.first[1, which, row]
        late = np.where(flagged, late, plain)
        time[which, row] = np.where(dips & (late > self.latest[row]), np.nan, late)
        guarded[row[flagged]] = True
        return time, guarded


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


def _lowest_step(level: Array, found: Edges, start: Array, stop: Array) -> Array:
    """Lowest difference between samples from start to before stop, at least the one at start."""
    begin, long = found.begin, found.long
    result = lowest_between(found.steps, np.maximum(start - begin, 0), stop - begin)
    rows = level[long]
    result[long] = lowest_between(rows[:, 1:] - rows[:, :-1], start[long], stop[long])
    return result


def _first_fall(level: Array, found: Edges, start: Array) -> Array:
    """Index of the first sample from start on that the next one falls short of, or n."""
    samples, local = level.shape[1], start - found.begin
    falls = (found.steps < FALLING) & (np.arange(found.steps.shape[1]) >= local[:, None])
    index = falls.argmax(axis=1)
    later = np.flatnonzero(~falls[np.arange(len(level)), index] & (start < samples))
    index += found.begin
    index[start >= samples] = samples
    rows, column = level[later], np.arange(samples - 1)
    falls = (rows[:, 1:] - rows[:, :-1] < FALLING) & (column >= start[later, None])
    index[later] = np.where(falls.any(axis=1), falls.argmax(axis=1), samples)
    return np.asarray(index)


def _thresholds(
    levels: Levels, directions: tuple[str, ...], precision: Any
) -> tuple[dict[str, int], Array]:
    """Distinct thresholds (k, M) of the first crossings wanted, and which is whose."""
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
    table = np.stack(list(wanted.values())).astype(precision)
    first = (table[:, None] == table).all(axis=2).argmax(axis=1)
    distinct = np.unique(first)
    return dict(zip(wanted, np.searchsorted(distinct, first), strict=True)), table[distinct]


def _worse(
    level: Array, row: Array, index: Array, target: Array, plain: Array, transition: Array
) -> tuple[Array, Array, Array]:
    """Times with the earlier and with the later of the readings at +-1 % where they differ."""
    flagged = _uneven(level, row, index, target, transition)
    early, late = plain.copy(), plain.copy()
    where, guard = np.nonzero(flagged), level.dtype.type(GUARD)
    outer = np.stack([target[where] - guard, target[where] + guard])
    crossed = np.stack([index[0][where], index[2][where]])
    early[where], late[where] = cubic_time(level, row[where], crossed, outer)
    return early, late, flagged


def _uneven(level: Array, row: Array, index: Array, target: Array, transition: Array) -> Array:
    """Whether the readings at +-1 % lie further apart than on a clean edge, or one is missing."""
    guard = level.dtype.type(GUARD)
    with np.errstate(invalid="ignore"):  # never reached: infinity less infinity
        spread = straight_time(level, row, index[2], target + guard)
        spread -= straight_time(level, row, index[0], target - guard)
        return np.asarray(~(spread <= allowed_spread(target) * transition))


def allowed_spread(threshold: Array) -> Array:
    """Spread between the readings at +-1 % that is still a clean edge, over the transition.

    0.06, or 1.25 times that of a single pole, which is smooth however slowly it closes in.

    >>> print(allowed_spread(np.array([0.5, 0.9])).round(3))
    [0.06  0.114]
    """
    rest = np.maximum(1 - threshold, 2 * GUARD)
    pole = np.log((rest + GUARD) / (rest - GUARD)) / np.log(9)
    return np.asarray(np.maximum(SPREAD, 1.25 * pole))


def _level_at(level: Array, time: Array, residual: Array) -> Array:
    """Level at a time, straight between samples; beyond the window what ringing may leave of 1."""
    rows, samples = level.shape
    place = np.fmin(time, samples - 1.0)
    at = np.minimum(place.astype(np.intp), samples - 2)
    part = (place - at).astype(level.dtype)
    flat, begin = level.ravel(), np.arange(rows) * samples + at
    value = (1 - part) * flat[begin] + part * flat[begin + 1]
    value = np.where(time > samples - 1, 1 - residual, value)
    return np.where(np.isnan(time), np.nan, value)
