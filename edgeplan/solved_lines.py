"""Lines outside every closed form: from the layers around a strip to its field solution."""

from collections.abc import Sequence
from math import nan
from typing import NamedTuple

from edgeplan.board import Layer
from edgeplan.physics import field_solution
from edgeplan.physics.outlines import CrossSection, Dielectric
from edgeplan.solution_cache import remembered


class Solution(NamedTuple):
    """Constants of one line; ``error`` is relative, of impedance and of delay whichever is more."""

    impedance_ohm: float
    permittivity_effective: float
    loss_tangent: float
    skin_ohm_per_m_rthz: float
    error: float


UNSOLVED = Solution(nan, nan, nan, nan, nan)


def solved_line(
    width_m: float,
    thickness_m: float,
    below: Sequence[Layer],
    above: Sequence[Layer],
    *,
    upper_plane: bool,
    coated: bool,
) -> Solution:
    """Constants of a strip over its plane, under dielectrics, a coating or a second plane.

    Parameters
    ----------
    width_m, thickness_m : float
        Of the copper. [m]
    below, above : sequence of Layer
        Dielectrics on either side, the one beside the strip first; ``below`` ends on a plane.
    upper_plane : bool
        Whether ``above`` ends on a plane too.
    coated : bool
        Whether ``above`` follows copper and laminate, else it lies flat.

    Returns
    -------
    Solution
        NaN where there is none. Where the dielectrics beside the strip differ, either of them
        may fill its flanks: the mean of both, half their difference added to the error.

    Examples
    --------
    Under 20 um of solder mask the line of `cross_section.microstrip` loses 5 % of its 51.7 ohm:

    >>> laminate = Layer(layer="D1", kind="dielectric", thickness_m=0.11e-3, permittivity=4.2)
    >>> mask = Layer(layer="M", kind="dielectric", thickness_m=20e-6, permittivity=3.5)
    >>> found = solved_line(0.18e-3, 35e-6, [laminate], [mask], upper_plane=False, coated=True)
    >>> print(f"{found.impedance_ohm:.1f} ohm")
    49.4 ohm
    """
    height = sum(layer.thickness_m for layer in below)
    under = tuple(_dielectric(layer) for layer in reversed(below))
    over = tuple(_dielectric(layer) for layer in above)
    strip = CrossSection(width_m, thickness_m, height, under, upper_plane)
    if coated or not over:
        return _solved(strip._replace(coating=over[0] if over else None))
    fills = {over[0][1:]: (*under, _thicker(over[0], thickness_m), *over[1:])}
    fills[under[-1][1:]] = (*under[:-1], _thicker(under[-1], thickness_m), *over)
    return _mean([_solved(strip._replace(layers=layers)) for layers in fills.values()])


def _dielectric(layer: Layer) -> Dielectric:
    """A layer as the solver takes it."""
    return Dielectric(layer.thickness_m, layer.permittivity or nan, layer.loss_tangent)


def _thicker(layer: Dielectric, more_m: float) -> Dielectric:
    """The layer that also fills the flanks of the strip."""
    return layer._replace(thickness_m=layer.thickness_m + more_m)


def _solved(section: CrossSection) -> Solution:
    """Solve one cross-section, or remember it."""
    return Solution(*remembered(["line", field_solution.VERSION, section], lambda: _found(section)))


def _found(section: CrossSection) -> Solution:
    """Solve one cross-section."""
    mode = field_solution.solve_line(section)
    return Solution(
        mode.impedance_ohm,
        mode.permittivity_effective,
        mode.loss_tangent,
        field_solution.skin_factor(section),
        max(mode.impedance_error, mode.permittivity_error / 2),
    )


def _mean(found: Sequence[Solution]) -> Solution:
    """Middle of all that may be."""
    ohm, effective, tangent, skin, error = (
        [float(value) for value in each] for each in zip(*found, strict=True)
    )
    spread = max(_half_spread(ohm), _half_spread([value**0.5 for value in effective]))
    middles = _middle(ohm), _middle(effective), _middle(tangent), _middle(skin)
    return Solution(*middles, max(error) + spread)


def _middle(values: Sequence[float]) -> float:
    """Mean of the least and the most."""
    return (min(values) + max(values)) / 2


def _half_spread(values: Sequence[float]) -> float:
    """Half of what lies between the least and the most, as a share of their mean."""
    return (max(values) - min(values)) / 2 / _middle(values)
