"""Borders of copper and dielectrics in the cross-section of a printed line, cut into panels.

Only the right half is drawn, x of 0 or more: one strip stands across x = 0, a pair of equal
strips on both sides of it.
"""

from itertools import pairwise
from math import ceil, inf, isfinite
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from edgeplan.physics.charged_panels import Panels

Array = NDArray[Any]

PANELS_PER_SCALE = 12  # of a side that is as long as the smallest distance near it, undivided
GRADING = 4  # power of the spacing: the charge at a corner is singular
PANELS_PER_GAP = 2  # at least, between two planes: their farther images are taken as lines
REACH = 100.0  # a border above one plane ends after so many of its sizes: its field falls as 1/x^2
REACH_GAPS = 8.0  # between two planes it falls as exp(-pi x/b)


class Dielectric(NamedTuple):
    """One layer: thickness [m], relative permittivity [-] and loss tangent [-]."""

    thickness_m: float
    permittivity: float
    loss_tangent: float = 0.0


class CrossSection(NamedTuple):
    """One printed line, or a pair of equal ones, between the plane y = 0 and what is above.

    ``layers`` lie upon the plane in this order. Above the last one is air, or, where
    ``upper_plane`` holds, a second plane. ``height_m`` is from the plane to the strip's underside.
    ``coating`` follows the copper and the topmost layer, equally thick on both; a strip
    under it lies on that layer. ``spacing_m`` is the gap of a pair, infinite for a single strip.
    """

    width_m: float
    thickness_m: float
    height_m: float
    layers: tuple[Dielectric, ...]
    upper_plane: bool = False
    coating: Dielectric | None = None
    spacing_m: float = inf


class Outline(NamedTuple):
    """Panels of the right half, and the complex permittivities beside each.

    ``left`` and ``right`` as seen along the panel; copper has 0 on its left. (P,)
    """

    panels: Panels
    left: Array
    right: Array
    plane_gap: float


class _Side(NamedTuple):
    """One straight piece of a border; ``sharp`` names its ends at which the charge is singular."""

    start: complex
    stop: complex
    left: complex
    right: complex
    sharp: tuple[bool, bool] = (True, True)


def outline(section: CrossSection, fineness: int) -> Outline:
    """Borders of a cross-section as panels, all lengths as shares of the height of the strip.

    Parameters
    ----------
    section : CrossSection
        The line.
    fineness : int
        1 for the coarsest division, 2 for twice as many panels. [-]

    Returns
    -------
    Outline
        Panels with what lies on either side.

    Examples
    --------
    A strip in one dielectric between planes: its right half, a face, a flank and a face.

    >>> layer = Dielectric(1e-3, 4.0)
    >>> line = CrossSection(0.5e-3, 0.1e-3, 0.45e-3, (layer,), upper_plane=True)
    >>> found = outline(line, 1)
    >>> print(f"{found.panels.length.sum():.4f}")  # (0.25 + 0.1 + 0.25)/0.45
    1.3333
    """
    scale = section.height_m
    sides = _copper(section) + _layer_borders(section) + _coat(section)
    gap = _top_m(section) if section.upper_plane else inf
    near = _smallest_m(section)
    cut = [_cut(side, near, gap, fineness) for side in sides]
    start = np.concatenate([points[:-1] for points in cut]) / scale
    stop = np.concatenate([points[1:] for points in cut]) / scale
    counts = [len(points) - 1 for points in cut]
    left = np.repeat(np.array([side.left for side in sides], dtype=complex), counts)
    right = np.repeat(np.array([side.right for side in sides], dtype=complex), counts)
    return Outline(Panels(start, stop), left, right, gap / scale)


def _complex(layer: Dielectric) -> complex:
    """Relative permittivity with its loss."""
    return layer.permittivity * (1 - 1j * layer.loss_tangent)


def _top_m(section: CrossSection) -> float:
    """Height of the topmost layer's surface. [m]"""
    return sum(layer.thickness_m for layer in section.layers)


def _smallest_m(section: CrossSection) -> float:
    """Smallest distance that shapes the field, thickness of copper and coating apart. [m]"""
    sizes = [section.height_m, *(layer.thickness_m for layer in section.layers)]
    if section.upper_plane:
        sizes.append(_top_m(section) - section.height_m - section.thickness_m)
    return min(*sizes, section.width_m, section.spacing_m)


def _levels(section: CrossSection) -> list[tuple[float, complex, complex]]:
    """Borders between layers: height [m], permittivity below and above."""
    fill = [_complex(layer) for layer in section.layers]
    heights = np.cumsum([layer.thickness_m for layer in section.layers])
    if section.upper_plane:
        heights = heights[:-1]
    else:
        fill.append(1.0 if section.coating is None else _complex(section.coating))
    beside = zip(heights, pairwise(fill), strict=True)
    return [(float(y), below, above) for y, (below, above) in beside]


def _strip_m(section: CrossSection) -> tuple[float, float]:
    """Left and right end of the strip's right half. [m]"""
    if isfinite(section.spacing_m):
        return section.spacing_m / 2, section.spacing_m / 2 + section.width_m
    return 0.0, section.width_m / 2


def _copper(section: CrossSection) -> list[_Side]:
    """Sides of the strip with what touches them; copper on their left."""
    x_0, x_1 = _strip_m(section)
    y_0, y_1 = section.height_m, section.height_m + section.thickness_m
    cuts = [y_0, *(y for y, _, _ in _levels(section) if y_0 < y < y_1), y_1]
    pair = x_0 > 0  # otherwise the left end is the middle of the strip
    under, over = _filling(section, y_0, above=False), _filling(section, y_1, above=True)
    sides = [
        _Side(x_0 + 1j * y_0, x_1 + 1j * y_0, 0, under, (pair, True)),
        _Side(x_1 + 1j * y_1, x_0 + 1j * y_1, 0, over, (True, pair)),
    ]
    for low, high in pairwise(cuts):
        fill = _filling(section, (low + high) / 2, above=True)
        sides.append(_Side(x_1 + 1j * low, x_1 + 1j * high, 0, fill))
        if pair:
            sides.append(_Side(x_0 + 1j * high, x_0 + 1j * low, 0, fill))
    return sides


def _filling(section: CrossSection, y: float, *, above: bool) -> complex:
    """Permittivity just above or just below a height."""
    levels = _levels(section)
    passed = [level for level in levels if level[0] < y or (above and level[0] == y)]
    if passed:
        return passed[-1][2]
    return levels[0][1] if levels else _complex(section.layers[0])


def _reach_m(section: CrossSection) -> float:
    """Where a border is cut off. [m]"""
    end = _strip_m(section)[1]
    if section.upper_plane:
        return end + REACH_GAPS * _top_m(section)
    high = max(_top_m(section), section.height_m + section.thickness_m)
    return 10 * end + REACH * high


def _layer_borders(section: CrossSection) -> list[_Side]:
    """Borders between layers, beside the strip and where they pass over or under it."""
    x_0, x_1 = _strip_m(section)
    y_0, y_1 = section.height_m, section.height_m + section.thickness_m
    sides = []
    for y, below, above in _levels(section):
        if below != above:
            ends = [(x_1, _reach_m(section), (True, False))]
            ends += [(0.0, x_0, (False, True))] if x_0 > 0 else []
            ends += [(x_0, x_1, (x_0 > 0, True))] if not y_0 <= y <= y_1 else []
            sides += [_Side(a + 1j * y, b + 1j * y, above, below, sharp) for a, b, sharp in ends]
    return sides


def _coat(section: CrossSection) -> list[_Side]:
    """Surface of the coating, from x = 0 outwards over the strip and down to the layer."""
    if section.coating is None or _complex(section.coating) == 1:
        return []
    thick = section.coating.thickness_m
    x_0, x_1 = _strip_m(section)
    low = _top_m(section) + thick
    high = low + section.thickness_m
    corners = [x_1 + thick + 1j * high, x_1 + thick + 1j * low, _reach_m(section) + 1j * low]
    if x_0 > thick:
        corners = [1j * low, x_0 - thick + 1j * low, x_0 - thick + 1j * high, *corners]
    else:  # a narrow gap is filled
        corners = [1j * high, *corners]
    fill = _complex(section.coating)
    last = len(corners) - 2
    return [_Side(a, b, 1.0, fill, (i > 0, i < last)) for i, (a, b) in enumerate(pairwise(corners))]


def _cut(side: _Side, near_m: float, gap_m: float, fineness: int) -> Array:
    """Ends of the panels along a side, crowded at its sharp ends."""
    arms = max(1, sum(side.sharp))
    length = abs(side.stop - side.start) / arms
    count = PANELS_PER_SCALE * max(1.0, length / near_m) ** (1 / GRADING)
    count = fineness * ceil(max(count, GRADING * PANELS_PER_GAP * length / gap_m))
    arm = np.linspace(0, 1, count + 1) ** GRADING
    if arms == 2:
        share = np.concatenate([arm / 2, 1 - arm[-2::-1] / 2])
    else:
        share = arm if side.sharp[0] else 1 - arm[::-1]
    return np.asarray(side.start + (side.stop - side.start) * share)
