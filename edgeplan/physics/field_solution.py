"""Constants of printed lines and of pairs of them from the electrostatic field around them.

The charges on the copper and on the borders of the dielectrics are found on graded panels, with
and without the dielectrics, so that thick copper, coatings, several dielectrics and strips
anywhere between the planes need no formula of their own.
"""

from math import inf, isfinite, nan
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, MU_0_HENRY_PER_M, SPEED_OF_LIGHT_M_PER_S
from edgeplan.physics.charged_panels import Panels, mean_field, potential
from edgeplan.physics.line_losses import COPPER_OHM_M
from edgeplan.physics.outlines import CrossSection, Dielectric, Outline, outline

Array = NDArray[Any]

VERSION = 1  # raised whenever a number changes: solutions are remembered between runs
EVEN, ODD = 1.0, -1.0
COARSE, FINE = 1, 2
TRUSTED = 3e-3  # a solution that twice as many panels change by more is none
RECESSION_SHARE = 0.01  # of the smallest size, for the rule of incremental inductance
WIDEST_TO_HEIGHT = 300.0  # range in which solutions were compared with closed forms
NARROWEST_TO_HEIGHT = 1e-3


class Mode(NamedTuple):
    """Constants of a line or of one mode of a pair.

    ``impedance_error`` and ``permittivity_error`` are relative: what half as many panels change.
    """

    impedance_ohm: float
    permittivity_effective: float
    loss_tangent: float
    impedance_error: float
    permittivity_error: float

    @property
    def delay_s_per_m(self) -> float:
        """Delay per metre. [s/m]"""
        return float(self.permittivity_effective**0.5 / SPEED_OF_LIGHT_M_PER_S)

    @property
    def air_ohm(self) -> float:
        """Impedance of the same copper without the dielectrics. [ohm]"""
        return float(self.impedance_ohm * self.permittivity_effective**0.5)

    @property
    def capacitance_f_per_m(self) -> float:
        """Capacitance per metre. [F/m]"""
        return self.delay_s_per_m / self.impedance_ohm


class Pair(NamedTuple):
    """Constants of two equal strips side by side."""

    even: Mode
    odd: Mode

    @property
    def capacitance_f_per_m(self) -> Array:
        """Capacitance matrix; negative off the diagonal. (2, 2) [F/m]"""
        even, odd = self.even.capacitance_f_per_m, self.odd.capacitance_f_per_m
        own, mutual = (even + odd) / 2, (even - odd) / 2
        return np.array([[own, mutual], [mutual, own]])


UNKNOWN = Mode(nan, nan, nan, nan, nan)


def solve_line(section: CrossSection) -> Mode:
    r"""Constants of one printed line.

    .. math:: Z_0 = \frac{1}{c\sqrt{C\,C_{air}}}, \qquad \varepsilon_e = \frac{C}{C_{air}}, \qquad
       \tan\delta_e = -\frac{\operatorname{Im} C}{\operatorname{Re} C}

    Parameters
    ----------
    section : CrossSection
        The line; its ``spacing_m`` is infinite.

    Returns
    -------
    Mode
        Impedance [ohm], effective permittivity and loss tangent [-]; NaN where the sizes are no
        line, or where the solution has not settled to 0.3 %.

    Notes
    -----
    Quasi-static; smooth copper with upright flanks; planes without end. Charges are even over each
    panel, the potential is met in the middle of the copper's, the flux of D is the same on
    both sides of each border. Extrapolated from two divisions, the error falling with their square.
    Valid for 0.001 <= w/h <= 300.

    Examples
    --------
    The outer layer of `cross_section.microstrip`, 0.2 % from that closed form, and under 20 um
    of solder mask:

    >>> laminate, mask = Dielectric(0.11e-3, 4.2, 0.02), Dielectric(20e-6, 3.5, 0.03)
    >>> bare = CrossSection(0.18e-3, 35e-6, 0.11e-3, (laminate,))
    >>> print(f"{solve_line(bare).impedance_ohm:.1f} ohm")
    51.8 ohm
    >>> print(f"{solve_line(bare._replace(coating=mask)).impedance_ohm:.1f} ohm")
    49.4 ohm

    References
    ----------
    .. [1] C. Wei, R. F. Harrington, J. R. Mautz, T. K. Sarkar, "Multiconductor transmission lines
       in multilayered dielectric media", IEEE Trans. MTT-32, 1984, pp. 439-450.
    """
    return _solve(section, (EVEN,))[0]


def solve_pair(section: CrossSection) -> Pair:
    """Constants of the even and odd modes of two equal strips.

    Parameters
    ----------
    section : CrossSection
        The pair; ``spacing_m`` is the gap between the strips.

    Returns
    -------
    Pair
        Both modes, as `solve_line` returns them; per strip against the planes.

    Examples
    --------
    Two very thin strips midway between planes; exact: 78.5517 and 39.6416 ohm; copper couples more.

    >>> section = CrossSection(0.3, 1e-5, 0.5, (Dielectric(1.0, 4.5),), True, None, 0.1)
    >>> pair = solve_pair(section)
    >>> print(f"{pair.even.impedance_ohm:.2f} {pair.odd.impedance_ohm:.2f}")
    78.55 39.64
    """
    if not isfinite(section.spacing_m):
        return Pair(UNKNOWN, UNKNOWN)
    return Pair(*_solve(section, (EVEN, ODD)))


def skin_factor(section: CrossSection, resistivity_ohm_m: float = COPPER_OHM_M) -> float:
    """Skin factor of a line, strip and planes together, as `line_losses.skin_factor`.

    The rule of incremental inductance on the solution without dielectrics.

    Parameters
    ----------
    section : CrossSection
        The line.
    resistivity_ohm_m : float, optional
        Resistivity of strip and planes. [ohm m]

    Returns
    -------
    float
        Skin factor; NaN where the sizes are no line. [ohm/(m sqrt(Hz))]

    Examples
    --------
    8.25 mohm / 2 mm = 4.1 ohm/m at 1 GHz for a strip 2 mm wide between planes 0.418 mm
    apart, and a little for the crowding at its corners:

    >>> layer = Dielectric(0.418e-3, 4.2)
    >>> strip = CrossSection(2e-3, 18e-6, 0.2e-3, (layer,), upper_plane=True)
    >>> print(f"{skin_factor(strip) * 1e9**0.5:.1f}")
    4.2
    """
    if not _is_a_line(section):
        return nan
    above = _top_m(section) - section.height_m - section.thickness_m
    smallest = min(section.height_m, section.thickness_m, above if section.upper_plane else inf)
    d = RECESSION_SHARE * smallest
    slope = (_air_ohm(_receded(section, d)) - _air_ohm(_receded(section, -d))) / (2 * d)
    surface = np.sqrt(np.pi * resistivity_ohm_m / MU_0_HENRY_PER_M)
    return float(surface * slope / SPEED_OF_LIGHT_M_PER_S)


def _top_m(section: CrossSection) -> float:
    """Height of the topmost layer's surface. [m]"""
    return sum(layer.thickness_m for layer in section.layers)


def _is_a_line(section: CrossSection) -> bool:
    """Whether the sizes make sense together and lie in the range of the comparisons."""
    layers = (*section.layers, *([] if section.coating is None else [section.coating]))
    sizes = [section.width_m, section.thickness_m, section.height_m, section.spacing_m]
    if not section.layers or not min(*sizes, *(layer.thickness_m for layer in layers)) > 0:
        return False
    if not all(layer.permittivity >= 1 and layer.loss_tangent >= 0 for layer in layers):
        return False
    top = _top_m(section)
    share = section.width_m / section.height_m
    fits = not section.upper_plane or section.height_m + section.thickness_m < top
    laid = section.coating is None or abs(top - section.height_m) < 1e-9 * top
    bare = section.coating is None or not section.upper_plane
    return fits and laid and bare and NARROWEST_TO_HEIGHT <= share <= WIDEST_TO_HEIGHT


def _solve(section: CrossSection, modes: tuple[float, ...]) -> list[Mode]:
    """Modes of one cross-section from two divisions."""
    if not _is_a_line(section):
        return [UNKNOWN] * len(modes)
    coarse, fine = (_Charges(outline(section, fineness)) for fineness in (COARSE, FINE))
    strips = 1 if isfinite(section.spacing_m) else 2  # half a strip was solved
    return [_mode(coarse, fine, mode, strips) for mode in modes]


def _mode(coarse: "_Charges", fine: "_Charges", mode: float, strips: int) -> Mode:
    """Constants of one mode, extrapolated, with what the finer division changed."""
    pairs = [(found.filled(mode), found.air(mode)) for found in (coarse, fine)]
    (z_1, e_1), (z_2, e_2) = (
        (ETA_0_OHM / strips / np.sqrt(filled * air), filled / air) for filled, air in pairs
    )
    z, e = z_2 + (z_2 - z_1) / 3, max(e_2 + (e_2 - e_1) / 3, 1.0)
    errors = abs(z_2 - z_1) / z, abs(e_2 - e_1) / e
    if not max(errors) <= TRUSTED:
        return UNKNOWN
    lossy = coarse.lossy(mode)
    return Mode(float(z), float(e), -lossy.imag / lossy.real, *map(float, errors))


class _Charges:
    """Charge per volt on the copper of one outline, over the permittivity of vacuum."""

    def __init__(self, found: Outline) -> None:
        self.found = found
        self.copper = found.left == 0
        panels, gap = found.panels, found.plane_gap
        mirror = Panels(-panels.stop.conj(), -panels.start.conj())
        metal, border = (_take(panels, rows) for rows in (self.copper, ~self.copper))
        self.potential = [potential(metal.middle, p, gap) for p in (panels, mirror)]
        self.field = [mean_field(border, p, gap) for p in (panels, mirror)]

    def air(self, mode: float) -> float:
        """Without the dielectrics."""
        matrix = (self.potential[0] + mode * self.potential[1])[:, self.copper]
        charge = np.linalg.solve(matrix, np.ones(len(matrix)))
        return float(charge @ self.found.panels.length[self.copper])

    def filled(self, mode: float) -> float:
        """With the dielectrics, their losses apart."""
        return float(self._free(mode, self.found.left.real, self.found.right.real).real)

    def lossy(self, mode: float) -> complex:
        """With the dielectrics and their losses."""
        if not np.any(self.found.right.imag):
            return complex(1.0)
        return complex(self._free(mode, self.found.left, self.found.right))

    def _free(self, mode: float, left: Array, right: Array) -> Any:
        """Free charge of the copper: its whole charge times what surrounds it."""
        above, below = left[~self.copper], right[~self.copper]
        matrix = np.empty((len(left), len(left)), dtype=right.dtype)
        matrix[self.copper] = self.potential[0] + mode * self.potential[1]
        field = self.field[0] + mode * self.field[1]
        matrix[~self.copper] = (above - below)[:, None] * field
        rows = np.flatnonzero(~self.copper)
        matrix[rows, rows] += (above + below) / 2
        charge = np.linalg.solve(matrix, self.copper.astype(right.dtype))
        return np.sum((right * charge * self.found.panels.length)[self.copper])


def _take(panels: Panels, rows: Array) -> Panels:
    """Some of the panels."""
    return Panels(panels.start[rows], panels.stop[rows])


def _receded(section: CrossSection, d: float) -> CrossSection:
    """The same line with every metal surface withdrawn by d, without its dielectrics."""
    height = section.height_m + 2 * d
    top = _top_m(section) + 2 * d if section.upper_plane else height
    return section._replace(
        width_m=section.width_m - 2 * d,
        thickness_m=section.thickness_m - 2 * d,
        height_m=height,
        layers=(Dielectric(top, 1.0),),
        coating=None,
    )


def _air_ohm(section: CrossSection) -> float:
    """Impedance in air of a single strip on the finer division."""
    return ETA_0_OHM / 2 / _Charges(outline(section, FINE)).air(EVEN)
