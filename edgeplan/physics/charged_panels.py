"""Potential and field of charged panels over one plane or between two.

A panel is a straight strip of even charge, horizontal or vertical, seen in the cross-section of a
line. What it does at a point is known in closed form, its images in the planes included, so
only conductors and borders of dielectrics have to be divided into panels.
"""

from math import isfinite
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]


class Panels(NamedTuple):
    """Both ends of every panel as complex numbers x + jy, in one unit of length. (P,)"""

    start: Array
    stop: Array

    @property
    def length(self) -> Array:
        """Length of every panel. (P,)"""
        return np.asarray(np.abs(self.stop - self.start))

    @property
    def middle(self) -> Array:
        """Middle of every panel. (P,)"""
        return np.asarray((self.start + self.stop) / 2)

    @property
    def along(self) -> Array:
        """Unit vector along every panel. (P,)"""
        return np.asarray((self.stop - self.start) / self.length)


def potential(points: Array, panels: Panels, plane_gap: float) -> Array:
    r"""Potential at points from panels of unit charge density and from their images in the planes.

    With z the point, z' the charge and b the distance of the planes y = 0 and y = b,

    .. math:: \phi = \frac{1}{2\pi}\ln\left|\frac{\sinh(\pi (z - \bar z')/2b)}
       {\sinh(\pi (z - z')/2b)}\right|, \qquad b \to \infty:\;
       \frac{1}{2\pi}\ln\left|\frac{z - \bar z'}{z - z'}\right|

    integrated over the panel.

    Parameters
    ----------
    points : numpy.ndarray
        Where to look, x + jy, between the planes. (Q,)
    panels : Panels
        The panels, horizontal or vertical, between the planes. (P,)
    plane_gap : float
        Distance of the planes; infinite for the lower one alone.

    Returns
    -------
    numpy.ndarray
        Potential per charge density over the permittivity of vacuum. (Q, P)

    Notes
    -----
    Exact for one plane. Between two, the images beyond the nearest are taken as lines of charge
    in the middle of the panel, so panels should be short against the gap.

    Examples
    --------
    A short panel at height 1, seen from height 2: 1 away, and 3 from its image.

    >>> panel = Panels(np.array([-0.001 + 1j]), np.array([0.001 + 1j]))
    >>> seen = potential(np.array([2j]), panel, np.inf)
    >>> print(f"{seen[0, 0] * 2 * np.pi / 0.002:.4f} {np.log(3):.4f}")
    1.0986 1.0986

    References
    ----------
    .. [1] W. R. Smythe, "Static and dynamic electricity", 3rd ed., McGraw-Hill, 1968, ch. 4.
    """
    found = _potential_alone(points, panels)
    for image in _images(panels, plane_gap):
        found -= _potential_alone(points, image)
    if isfinite(plane_gap):
        found += _far_potential(points, panels.middle, plane_gap) * panels.length
    return found


def mean_field(targets: Panels, panels: Panels, plane_gap: float) -> Array:
    r"""Mean field across each target, towards its left, from what `potential` describes.

    The flux through a target is the difference of the stream function at its ends, so that what
    leaves one medium enters the next whole, however coarse the panels.

    Parameters
    ----------
    targets, panels : Panels
        Panels that the field crosses (Q,) and charged ones (P,).
    plane_gap : float
        As in `potential`.

    Returns
    -------
    numpy.ndarray
        Field per charge density over the permittivity of vacuum; of a panel through itself the
        mean of both sides, 0, apart from its images. (Q, P)

    Examples
    --------
    A closed square around a panel, counter-clockwise with its left inside: all the flux leaves.

    >>> corners = np.array([1 + 1j, 3 + 1j, 3 + 3j, 1 + 3j, 1 + 1j])
    >>> square = Panels(corners[:-1], corners[1:])
    >>> panel = Panels(np.array([2 + 2j]), np.array([2.5 + 2j]))
    >>> flux = mean_field(square, panel, np.inf)[:, 0] @ square.length
    >>> print(f"{flux:.4f}")
    -0.5000
    """
    flux = _flux_alone(targets, panels)
    for image in _images(panels, plane_gap):
        flux -= _flux_alone(targets, image)
    found = flux / targets.length[:, None]
    if isfinite(plane_gap):
        normal = (1j * targets.along)[:, None]
        far = _far_field(targets.middle, panels.middle, plane_gap) * panels.length
        found += (far * normal.conj()).real
    return found


def _images(panels: Panels, plane_gap: float) -> list[Panels]:
    """Negative images in the lower and the upper plane."""
    tops = [2j * plane_gap] if isfinite(plane_gap) else []
    return [Panels(panels.start.conj() + y, panels.stop.conj() + y) for y in (0j, *tops)]


def _seen(points: Array, panels: Panels) -> tuple[Array, Array]:
    """Where points lie, along each panel from its start and aside to its left."""
    seen = (points[:, None] - panels.start) / panels.along
    return seen.real, seen.imag


def _log(s: Array, d: Array) -> Array:
    """Logarithm of a distance; finite where there is none, it counts times 0 there."""
    return np.asarray(np.log(np.maximum(s * s + d * d, np.finfo(float).tiny)) / 2)


def _angle(s: Array, other: Array, aside: Array) -> Array:
    """Angle between two points of a panel's line, seen from aside; 0 on the line itself."""
    angle = np.arctan2(aside * (s - other), aside * aside + s * other)
    return np.asarray(angle * (aside > 0))


def _potential_alone(points: Array, panels: Panels) -> Array:
    """Panels without any plane: minus the integral of ln(distance) over each."""
    p, d = _seen(points, panels)
    q, aside = p - panels.length, np.abs(d)
    beside = aside * _angle(p, q, aside)
    return np.asarray((panels.length - p * _log(p, d) + q * _log(q, d) - beside) / (2 * np.pi))


def _flux_alone(targets: Panels, panels: Panels) -> Array:
    """Flux through each target towards its left, without any plane."""
    ends, back = np.unique(np.concatenate([targets.start, targets.stop]), return_inverse=True)
    first, last = back[: len(targets.start)], back[len(targets.start) :]
    p, d = _seen(ends, panels)
    q, m, aside = p - panels.length, p - panels.length / 2, np.abs(d)
    turned = p * _angle(m, p, aside) - q * _angle(m, q, aside)
    stream = np.sign(d) * turned + d * (_log(p, d) - _log(q, d))
    around = np.arctan2(d, m)
    turn = around[last] - around[first]
    turn -= 2 * np.pi * np.round(turn / (2 * np.pi))  # a target turns less than half around it
    flux = stream[first] - stream[last] - panels.length * turn
    own = (targets.start[:, None] == panels.start) & (targets.stop[:, None] == panels.stop)
    return np.where(own, 0.0, flux / (2 * np.pi))


def _far_potential(points: Array, lines: Array, gap: float) -> Array:
    """What lines of charge have between two planes beyond themselves and their nearest images."""
    k = np.pi / (2 * gap)
    own, image = points[:, None] - lines, points[:, None] - lines.conj()
    apart = np.where(own == 0, 1.0, np.abs(own))
    log_own = np.where(own == 0, np.log(k), _log_sinh(k * own) - np.log(apart))
    nearest = np.log(np.abs(image) * np.abs(image - 2j * gap))
    return np.asarray((_log_sinh(k * image) - nearest - log_own) / (2 * np.pi))


def _far_field(points: Array, lines: Array, gap: float) -> Array:
    """Field of `_far_potential`, as a complex number Ex + jEy."""
    k = np.pi / (2 * gap)
    own, image = points[:, None] - lines, points[:, None] - lines.conj()
    safe = np.where(own == 0, gap, own)
    slope = np.where(own == 0, 0.0, k / np.tanh(k * safe) - 1 / safe)
    slope = slope - k / np.tanh(k * image) + 1 / image + 1 / (image - 2j * gap)
    return np.asarray(slope.conj() / (2 * np.pi))


def _log_sinh(z: Array) -> Array:
    """Logarithm of the size of the hyperbolic sine, without overflow; far down at 0."""
    x = np.abs(z.real)
    small = np.exp(-2 * x)
    square = (1 - small) ** 2 / 4 + small * np.sin(z.imag) ** 2
    return np.asarray(x + np.log(np.maximum(square, np.finfo(float).tiny)) / 2)
