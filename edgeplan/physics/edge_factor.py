r"""Edge factor without nulls: what every edge of at least one length takes off a spectrum.

The spectrum of a ramp has nulls, and a slightly slower edge leaves them again.
:math:`g(x) = \sup_{y \ge x} |\mathrm{sinc}\,y|` is what every edge of this length
*or longer* stays below; it never rises with x, so it can be inverted.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

LOBES = 2048  # past this many lobes g is 1/(pi x), at most 0.002 dB above the exact value
NEWTON_STEPS = 14  # bracketed; the worst start (next to a lobe's maximum) needs 11
SMALLEST = 1e-30  # stands for 0 in a quotient that tends to 1


def _lobe_maxima() -> tuple[Array, Array]:
    """Place and height of the maximum of |sinc| in each lobe; the first is x = 0, height 1."""
    guess = (np.arange(1, LOBES + 1) + 0.5) * np.pi
    z = guess - 1 / guess
    for _ in range(6):
        z = z - (np.sin(z) - z * np.cos(z)) / (z * np.sin(z))  # tan z = z
    place, height = z / np.pi, 1 / np.sqrt(1 + z**2)
    return np.concatenate(([0.0], place)), np.concatenate(([1.0], height))


PLACE, HEIGHT = _lobe_maxima()


def null_free_edge_factor(x: ArrayLike) -> Array:
    r"""Largest :math:`|\mathrm{sinc}\,y|` over all :math:`y \ge x`.

    Parameters
    ----------
    x : array_like
        Frequency times the 0-100 % ramp, 0 or more; any shape. [-]

    Returns
    -------
    numpy.ndarray
        Factor on the spectrum of an ideal step, 1 down to 0. [-]

    Notes
    -----
    Exact (rounding apart) to x = 2048; above it the bound 1/(pi x). At most
    1.9 dB below the two-corner envelope min(1, 1/(pi x)) past the first null.

    Examples
    --------
    In the null at x = 1 it holds the height of the next lobe, 0.2172 (-13.26 dB).

    >>> print(np.round(null_free_edge_factor([0.0, 0.5, 1.0, 1.4]), 4))
    [1.     0.6366 0.2172 0.2172]
    """
    x = np.asarray(x)
    x = x.astype(np.result_type(x, np.float32), copy=False)
    inside = np.clip(x, SMALLEST, LOBES)
    first = np.fmin(np.floor(inside), LOBES - 1)  # fmin: NaN must not reach the cast
    falling = np.sin(np.pi * (inside - first)) / (np.pi * inside)
    lobe, height = first.astype(np.intp), HEIGHT.astype(x.dtype)
    factor = np.maximum(falling, height[lobe + 1])
    factor = np.where(x <= PLACE.astype(x.dtype)[lobe], height[lobe], factor)
    beyond = np.minimum(1 / (np.pi * np.maximum(x, LOBES)), height[LOBES])
    return np.asarray(np.where(x >= LOBES, beyond, factor))


def inverse_edge_factor(level: ArrayLike) -> Array:
    """Shortest x from which on the edge factor stays at or below a level.

    Parameters
    ----------
    level : array_like
        Wanted edge factor; 1 or more needs no edge at all. [-]

    Returns
    -------
    numpy.ndarray
        Frequency times the 0-100 % ramp; infinite for a level of 0 or less. [-]

    Notes
    -----
    The inverse of `null_free_edge_factor`. Where that is flat (a lobe's height)
    the shortest x is returned: every longer ramp holds the level too.

    Examples
    --------
    sinc(1/2) is 2/pi.

    >>> print(np.round(inverse_edge_factor([2.0, 2 / np.pi, 0.25]), 4))
    [0.     0.5    0.7877]
    """
    level = np.asarray(level, dtype=float)
    higher_lobes = np.searchsorted(-HEIGHT, -level, side="left")
    lobe = np.clip(higher_lobes - 1, 0, LOBES - 1)
    root = _falling_flank(lobe, np.clip(level, HEIGHT[LOBES], 1.0))
    with np.errstate(divide="ignore"):
        beyond = 1 / (np.pi * np.maximum(level, 0))
    return np.where(level >= 1, 0.0, np.where(level < HEIGHT[LOBES], beyond, root))


def _falling_flank(lobe: Array, level: Array) -> Array:
    """Where |sinc| falls through a level behind the maximum of a lobe (bracketed Newton)."""
    low, high = PLACE[lobe], lobe + 1.0
    x = (low + high) / 2
    for _ in range(NEWTON_STEPS):
        angle = np.pi * (x - lobe)
        value = np.sin(angle) / (np.pi * x)
        too_high = value > level
        low, high = np.where(too_high, x, low), np.where(too_high, high, x)
        slope = (np.cos(angle) - value) / x
        with np.errstate(divide="ignore", invalid="ignore"):
            step = x - (value - level) / slope
        x = np.where((step >= low) & (step <= high), step, (low + high) / 2)
    return np.where(np.isnan(level), np.nan, x)
