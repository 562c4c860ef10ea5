"""Edge of a driver's own source from what is seen at its pad while it switches into a resistor."""

from functools import lru_cache
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

LEVELS = {"10-90": (0.1, 0.9), "20-80": (0.2, 0.8)}
# shares of the 0-100 % time of a raised cosine: 1 - 2 acos(1 - 2 p)/pi for p to 1 - p
RAISED_COSINE_SHARE = {"10-90": 0.590334, "20-80": 0.409666}
# Below this multiple of what the capacitance alone would show, nothing can be said of the source:
# the rule for oscilloscopes, whose own rise is taken off in the same way (common practice).
LEAST_RATIO = 1.2
LEAST_SWING_V = 1e-6  # less is no transition
_BISECTIONS = 60


class Crossings(NamedTuple):
    """Durations of one transition and its two levels. [s], [V]"""

    s_10_90: float
    s_20_80: float
    first_v: float
    last_v: float
    settled: bool


def read_transition(time_s: ArrayLike, volt: ArrayLike) -> Crossings:
    """Durations of a transition between its first and its last value.

    Parameters
    ----------
    time_s, volt : array_like
        Rows of the table, ``(K,)``, ascending in time. [s], [V]

    Returns
    -------
    Crossings
        From the first crossing of the lower level to the next one of the upper; dead time in
        front does not count. NaN where nothing happens. ``settled`` is False where the last
        tenth of the time still sees more than a twentieth of the swing.

    Examples
    --------
    A straight ramp of 1 ns after 2 ns of dead time:

    >>> found = read_transition([0, 2e-9, 3e-9, 5e-9], [0, 0, 2.2, 2.2])
    >>> print(f"{found.s_10_90 * 1e9:.3f} ns, {found.s_20_80 * 1e9:.3f} ns")
    0.800 ns, 0.600 ns

    References
    ----------
    .. [1] IEEE Std 181, transition duration between reference levels.
    """
    time, value = np.asarray(time_s, dtype=float), np.asarray(volt, dtype=float)
    first, last = float(value[0]), float(value[-1])
    if abs(last - first) < LEAST_SWING_V:
        return Crossings(np.nan, np.nan, first, last, settled=True)
    share = (value - first) / (last - first)
    durations = [_duration(time, share, *LEVELS[levels]) for levels in ("10-90", "20-80")]
    late = float(np.interp(time[0] + 0.9 * (time[-1] - time[0]), time, share))
    return Crossings(durations[0], durations[1], first, last, settled=abs(late - 1) <= 0.05)


def _duration(time: Array, share: Array, low: float, high: float) -> float:
    """Time from the first crossing of one level to the next crossing of the other."""
    start = _crossing(time, share, low)
    after = time >= start
    if np.isnan(start) or not after.any():
        return float("nan")
    later = np.concatenate([[start], time[after]])
    return _crossing(later, np.concatenate([[low], share[after]]), high) - start


def _crossing(time: Array, share: Array, level: float) -> float:
    """First time at which a level is reached from below."""
    k = int(np.argmax(share >= level))
    if share[k] < level:
        return float("nan")
    if k == 0:
        return float(time[0])
    part = (level - share[k - 1]) / (share[k] - share[k - 1])
    return float(time[k - 1] + part * (time[k] - time[k - 1]))


def _response(u: Array, pole: Array) -> Array:
    """Raised cosine of duration 1 behind one pole of time constant ``pole``, at time u."""
    w = np.pi
    inside = np.minimum(u, 1.0)
    share = 1 / (1 + (w * pole) ** 2)
    decay = np.exp(-inside / pole)
    wave = np.cos(w * inside) + w * pole * np.sin(w * inside)
    during = 0.5 * (1 - decay - share * (wave - decay))
    reached: Array = 1 - (1 - during) * np.exp(-(u - inside) / pole)
    return reached


def _time_at(level: float, pole: Array) -> Array:
    """Time at which the response crosses a level, by bisection."""
    low, high = np.zeros_like(pole), 1 + 6 * pole
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        under = _response(middle, pole) < level
        low, high = np.where(under, middle, low), np.where(under, high, middle)
    time: Array = 0.5 * (low + high)
    return time


@lru_cache(maxsize=len(LEVELS))
def _shares(levels: str) -> tuple[Array, Array]:
    """Pole over observed duration, ascending, and source's 0-100 % over observed duration."""
    pole = np.concatenate([[1e-4], np.geomspace(1e-3, 30.0, 1200)])
    low, high = LEVELS[levels]
    observed = _time_at(high, pole) - _time_at(low, pole)
    plain = 1 / RAISED_COSINE_SHARE[levels]
    return np.append(0.0, pole / observed), np.append(plain, 1 / observed)


def pole_duration_s(pole_s: ArrayLike, levels: str) -> Array:
    r"""Duration that one pole alone shows: :math:`\tau \ln\frac{1-a}{1-b}` between a and b.

    Parameters
    ----------
    pole_s : array_like
        Time constant. [s]
    levels : {"10-90", "20-80"}
        Reference levels.

    Returns
    -------
    numpy.ndarray
        2.197 or 1.386 time constants. [s]

    Examples
    --------
    >>> print(f"{pole_duration_s(1e-9, '10-90') * 1e9:.3f} ns")
    2.197 ns
    """
    low, high = LEVELS[levels]
    pole: Array = np.asarray(pole_s, dtype=float)
    return pole * float(np.log((1 - low) / (1 - high)))


def source_ramp_s(observed_s: ArrayLike, pole_s: ArrayLike, levels: str) -> Array:
    r"""Duration of the source that one pole slowed to what is observed.

    The source is a raised cosine, as everywhere in this program; the pole is the pad's
    capacitance on driver and load in parallel.

    Parameters
    ----------
    observed_s : array_like
        Duration at the pad. [s]
    pole_s : array_like
        :math:`\tau = C (R_{out} \parallel R_{load})`; broadcasts. [s]
    levels : {"10-90", "20-80"}
        Between which the duration was read.

    Returns
    -------
    numpy.ndarray
        0-100 % duration of the source; NaN where the pole alone would show more than
        1/1.2 of what is observed: the source cannot be told then. [s]

    Notes
    -----
    Exact for a linear driver, by a table of 1,200 poles (1e-5). Driver resistance and
    capacitance that change during the edge are left out.

    Examples
    --------
    Without capacitance it is the raised cosine alone, 1 ns / 0.5903:

    >>> print(f"{source_ramp_s(1e-9, 0.0, '10-90') * 1e9:.3f} ns")
    1.694 ns
    """
    observed, pole = np.broadcast_arrays(
        np.asarray(observed_s, dtype=float), np.asarray(pole_s, dtype=float)
    )
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = pole / observed
    share = np.interp(ratio, *_shares(levels))
    told = observed >= LEAST_RATIO * pole_duration_s(pole, levels)
    return np.where(told & (observed > 0), share * observed, np.nan)
