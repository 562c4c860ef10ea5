r"""Spectra of edges by their shape: straight ramp or raised cosine, and how far two of them differ.

Both factors are free of nulls, like `edge_factor`: what every edge of this length or longer
stays below.
"""

from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.edge_factor import SMALLEST, null_free_edge_factor
from edgeplan.physics.spectra import raised_cosine_factor

Array = NDArray[Any]
EdgeShape = Literal["trapezoid", "raised-cosine"]

LOBES = 1024  # past this many lobes the envelope 1/(4 x^2 - 1) stands for the raised cosine
GRID = np.linspace(0, 2, 4001)  # both slopes are largest below x = 1.1
ROUND_UP = 1.0001  # straight lines between points of the grid


def _lobe_maxima() -> tuple[Array, Array]:
    """Place and height of each lobe of |cos pi x|/|1 - 4 x^2|; the first is x = 0, height 1."""
    x = np.arange(2, LOBES + 2) - 0.01
    for _ in range(8):  # tan(pi x) = 8 x/(pi (1 - 4 x^2)), one root next to each whole number
        whole = np.round(x)
        x = whole + np.arctan(8 * x / (np.pi * (1 - 4 * x**2))) / np.pi
    return np.concatenate(([0.0], x)), np.concatenate(([1.0], raised_cosine_factor(x)))


PLACE, HEIGHT = _lobe_maxima()


def null_free_raised_cosine(x: ArrayLike) -> Array:
    r"""Largest :math:`|\cos \pi y|/|1 - 4 y^2|` over all :math:`y \ge x`.

    Parameters
    ----------
    x : array_like
        Frequency times the 0-100 % duration of a raised-cosine edge, 0 or more. [-]

    Returns
    -------
    numpy.ndarray
        Factor on the spectrum of an ideal step, 1 down to 0. [-]

    Notes
    -----
    Exact to x = 1024, above it the envelope 1/(4 x^2 - 1). It falls by 40 dB per decade where
    a ramp's falls by 20 dB: to be used only where somebody vouches for so smooth an edge.

    Examples
    --------
    Half the edge's length is the removable 0/0, pi/4; in the first null, x = 3/2, it holds
    the height of the next lobe.

    >>> print(np.round(null_free_raised_cosine([0.0, 0.5, 1.5]), 4))
    [1.     0.7854 0.0708]
    """
    x = np.asarray(x, dtype=float)
    inside = np.clip(x, SMALLEST, LOBES)
    lobe = np.fmin(np.fmax(np.floor(inside - 0.5), 0), LOBES - 1).astype(np.intp)
    factor = np.maximum(raised_cosine_factor(inside), HEIGHT[lobe + 1])
    factor = np.where(x <= PLACE[lobe], HEIGHT[lobe], factor)
    beyond = np.minimum(1 / (4 * np.maximum(x, LOBES) ** 2 - 1), HEIGHT[LOBES])
    factor = np.where(x >= LOBES, beyond, factor)
    return np.where(np.isnan(x), np.nan, factor)


def shape_factor(x: ArrayLike, raised_cosine: ArrayLike) -> Array:
    """Null-free factor of each edge by its own shape.

    Parameters
    ----------
    x : array_like
        Frequency times 0-100 % duration. [-]
    raised_cosine : array_like of bool
        True where the edge is a raised cosine, else a straight ramp; broadcasts with x.

    Returns
    -------
    numpy.ndarray
        Factor on the spectrum of an ideal step. [-]

    Examples
    --------
    >>> print(np.round(shape_factor(0.5, [False, True]), 4))
    [0.6366 0.7854]
    """
    smooth = np.asarray(raised_cosine, dtype=bool)
    if not smooth.any():
        return null_free_edge_factor(x)
    return np.where(smooth, null_free_raised_cosine(x), null_free_edge_factor(x))


def _ramp_slope(y: Array) -> Array:
    r"""|d sinc(y)/d ln y|."""
    return np.asarray(np.abs(np.cos(np.pi * y) - np.sinc(y)))


def _raised_cosine_slope(y: Array) -> Array:
    """The same of the raised cosine, which is pi/4 (sinc(y - 1/2) + sinc(y + 1/2))."""

    def derivative(u: Array) -> Array:
        """Derivative of sinc, its limit at 0."""
        safe = np.where(np.abs(u) < 1e-6, 1.0, u)
        found = (np.cos(np.pi * safe) - np.sinc(safe)) / safe
        return np.where(np.abs(u) < 1e-6, -(np.pi**2) * u / 3, found)

    return np.asarray(np.abs(np.pi / 4 * y * (derivative(y - 0.5) + derivative(y + 0.5))))


_STEEPEST = {
    False: ROUND_UP * np.maximum.accumulate(_ramp_slope(GRID)),
    True: ROUND_UP * np.maximum.accumulate(_raised_cosine_slope(GRID)),
}


def largest_difference(
    log_ratio: ArrayLike, slowest_x: ArrayLike, raised_cosine: ArrayLike = False
) -> Array:
    r"""How far the factors of two edges of one shape may differ, while neither is slower than x.

    .. math:: |s(a) - s(b)| \le |\ln(a/b)| \max_{y \le x} \Bigl|\frac{ds}{d\ln y}\Bigr|,
       \quad a, b \le x

    Parameters
    ----------
    log_ratio : array_like
        Logarithm of one duration over the other, either sign; infinite where one is 0. [-]
    slowest_x : array_like
        Frequency times the longest duration either may have, infinite where unknown. [-]
    raised_cosine : array_like of bool
        Shape of both.

    Returns
    -------
    numpy.ndarray
        Bound of the difference of sinc (ramp) or of the raised cosine's factor. [-]

    Notes
    -----
    The mean value theorem over the logarithm. The steepest slopes are 1.063 (ramp, at
    x = 0.87) and 0.903 (raised cosine, at 1.08).

    Examples
    --------
    Ramps of 1 and 2 ns at 100 MHz: sinc(0.1) - sinc(0.2) is 0.048; ln 2 times the slope at 0.2.

    >>> print(f"{largest_difference(np.log(2), 0.2):.3f}")
    0.088
    """
    slow = np.where(np.isnan(slowest_x), np.inf, slowest_x)
    slope = np.interp(slow, GRID, _STEEPEST[False])
    smooth = np.asarray(raised_cosine, dtype=bool)
    if smooth.any():
        slope = np.where(smooth, np.interp(slow, GRID, _STEEPEST[True]), slope)
    with np.errstate(invalid="ignore"):
        return np.asarray(np.nan_to_num(np.abs(log_ratio) * slope, nan=0.0, posinf=np.inf))
