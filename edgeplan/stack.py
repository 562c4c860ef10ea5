"""From the stack as drawn to the constants of one printed line."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from math import isnan, nan

import numpy as np

from edgeplan import solved_lines
from edgeplan.board import Layer
from edgeplan.physics import cross_section, line_losses

CENTRED_WITHIN = 1.02  # height ratio below which a strip counts as centred
SLIGHTLY_OFF = 1.5  # height ratio to which the parallel rule is within 0.5 % of field solutions
STATED = "stated"
COMPUTED = "closed form"
SOLVED = "field solution"
MASK_SHAPE = "mask taken as equally thick on copper and laminate"


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """Constants of one printed line, per metre, with where they came from.

    ``error`` is the relative error that a field solution found of itself, ``assumed`` what
    it takes for granted and no input states. ``problem`` is
    empty when the line is known; otherwise it says why not and what to give instead, and
    the numbers are NaN.
    """

    layer: str
    width_m: float
    surface: bool = True
    height_m: float = nan
    plane_gap_m: float = nan
    permittivity: float = nan
    permittivity_effective: float = nan
    impedance_ohm: float = nan
    delay_s_per_m: float = nan
    resistance_dc_ohm_per_m: float = nan
    skin_ohm_per_m_rthz: float = nan
    loss_tangent: float = nan
    planes: tuple[str, ...] = ()
    provenance: str = COMPUTED
    error: float = nan
    assumed: str = ""
    problem: str = ""


@dataclass(frozen=True, slots=True)
class _Surroundings:
    """What lies above and below a signal layer, up to the next plane. [m], relative."""

    above_m: float
    below_m: float
    above_permittivity: float
    below_permittivity: float
    loss_tangent: float
    planes: tuple[str, ...]
    covered: bool = False
    coated: bool = False

    @property
    def nearest_permittivity(self) -> float:
        """Permittivity towards the one plane of a line that has but one."""
        return self.above_permittivity if isnan(self.below_m) else self.below_permittivity


def _series_permittivity(dielectrics: Sequence[Layer]) -> float:
    """Permittivity of dielectrics that lie one upon the other (capacitors in series)."""
    total = sum(d.thickness_m for d in dielectrics)
    return total / sum(d.thickness_m / (d.permittivity or nan) for d in dielectrics)


def _towards(stack: Sequence[Layer], start: int, step: int) -> tuple[list[Layer], str]:
    """Dielectrics up to the next plane in one direction, and its name; empty where none lies."""
    found: list[Layer] = []
    index = start + step
    while 0 <= index < len(stack):
        if stack[index].kind == "plane":
            return found, stack[index].layer
        if stack[index].kind == "dielectric":
            found.append(stack[index])
        index += step
    return found, ""


def _surroundings(stack: Sequence[Layer], index: int) -> _Surroundings:
    """Heights and permittivities around one signal layer; NaN height where no plane lies."""
    above, plane_above = _towards(stack, index, -1)
    below, plane_below = _towards(stack, index, +1)
    nearest = above if plane_above and not plane_below else below
    other = below if nearest is above else above
    tangents = [d.loss_tangent for d in nearest] or [0.0]
    outermost = len(other) == 1 and other[0] in (stack[0], stack[-1])
    return _Surroundings(
        above_m=sum(d.thickness_m for d in above) if plane_above else nan,
        below_m=sum(d.thickness_m for d in below) if plane_below else nan,
        above_permittivity=_series_permittivity(above) if plane_above and above else nan,
        below_permittivity=_series_permittivity(below) if plane_below and below else nan,
        loss_tangent=max(tangents),
        planes=tuple(name for name in (plane_above, plane_below) if name),
        covered=bool(other),
        coated=outermost and not (plane_above and plane_below),
    )


def _surface_line(line: Line, thickness_m: float, around: _Surroundings, height_m: float) -> Line:
    """Microstrip by Hammerstad and Jensen with finite thickness."""
    permittivity = around.nearest_permittivity
    impedance, effective = cross_section.microstrip(
        line.width_m, height_m, thickness_m, permittivity
    )
    return replace(
        line,
        surface=True,
        height_m=height_m,
        permittivity=permittivity,
        permittivity_effective=float(effective),
        impedance_ohm=float(impedance),
        loss_tangent=float(
            line_losses.effective_loss_tangent(permittivity, effective, around.loss_tangent)
        ),
    )


def _inner_line(line: Line, thickness_m: float, around: _Surroundings) -> Line:
    """Stripline between two planes: Wheeler if centred, the parallel rule near it, else unknown."""
    low, high = sorted((around.above_m, around.below_m))
    permittivity = max(around.above_permittivity, around.below_permittivity)
    alike = abs(around.above_permittivity - around.below_permittivity) <= 0.1 * permittivity
    mean = (
        around.above_m * around.above_permittivity + around.below_m * around.below_permittivity
    ) / (around.above_m + around.below_m)
    impedance = nan
    if alike and high <= CENTRED_WITHIN * low:
        gap = low + high + thickness_m
        impedance = float(cross_section.stripline_centred(line.width_m, gap, thickness_m, mean))
    elif alike and high <= SLIGHTLY_OFF * low:
        impedance = float(
            cross_section.stripline_offset(line.width_m, low, high, thickness_m, mean)
        )
    return replace(
        line,
        surface=False,
        height_m=low,
        plane_gap_m=low + high + thickness_m,
        permittivity=mean,
        permittivity_effective=mean,
        impedance_ohm=impedance,
        loss_tangent=around.loss_tangent,
    )


def _covered_line(line: Line, around: _Surroundings, height_m: float) -> Line:
    """A covered strip over one plane, for which there is no closed form."""
    return replace(
        line, surface=around.coated, height_m=height_m, permittivity=around.nearest_permittivity
    )


def _solved(line: Line, stack: Sequence[Layer], index: int, around: _Surroundings) -> Line:
    """The line by field solution, from the layers themselves."""
    (above, plane_above), (below, plane_below) = (_towards(stack, index, k) for k in (-1, +1))
    if plane_above and not plane_below:
        above, below = below, above
    found = solved_lines.solved_line(
        line.width_m,
        stack[index].thickness_m,
        below,
        above,
        upper_plane=bool(plane_above and plane_below),
        coated=around.coated,
    )
    sizes = f"{line.width_m * 1e3:g} mm wide and {line.height_m * 1e3:g} mm from its plane"
    unknown = f"layer {line.layer}: no field solution for a line {sizes}; check both"
    return replace(
        line,
        impedance_ohm=found.impedance_ohm,
        permittivity_effective=found.permittivity_effective,
        loss_tangent=found.loss_tangent,
        skin_ohm_per_m_rthz=found.skin_ohm_per_m_rthz,
        provenance=SOLVED,
        error=found.error,
        assumed=MASK_SHAPE if around.coated else "",
        problem=unknown if isnan(found.impedance_ohm) else "",
    )


def _computed(stack: Sequence[Layer], index: int, width_m: float) -> Line:
    """A line from the stack alone, without any stated impedance."""
    layer = stack[index]
    around = _surroundings(stack, index)
    line = Line(layer=layer.layer, width_m=width_m, planes=around.planes)
    heights = [h for h in (around.above_m, around.below_m) if not isnan(h)]
    if not heights or min(heights) <= 0:
        return replace(line, problem=f"layer {layer.layer} has no plane beside it to return on")
    if len(heights) == 2:
        line = _inner_line(line, layer.thickness_m, around)
    elif around.covered:
        line = _covered_line(line, around, heights[0])
    else:
        line = _surface_line(line, layer.thickness_m, around, heights[0])
    if isnan(line.impedance_ohm):
        line = _solved(line, stack, index, around)
    else:
        skin = _skin_factor(line, layer.thickness_m, heights)
        line = replace(line, skin_ohm_per_m_rthz=skin)
    return replace(
        line,
        delay_s_per_m=float(cross_section.delay_s_per_m(line.permittivity_effective)),
        resistance_dc_ohm_per_m=float(line_losses.dc_resistance(width_m, layer.thickness_m)),
    )


def _skin_factor(line: Line, thickness_m: float, heights_m: Sequence[float]) -> float:
    """Resistance over the root of frequency, strip and return. [ohm/m/sqrt(Hz)]"""
    if len(heights_m) == 2:
        low, high = heights_m
        return float(line_losses.skin_factor_stripline(line.width_m, low, high, thickness_m))
    return float(line_losses.skin_factor(line.width_m, line.height_m, thickness_m))


def _from_table(line: Line, table: Sequence[tuple[float, float]]) -> Line:
    """The fabricator's impedance for this width; never extrapolated."""
    widths, ohms = np.array(sorted(table)).T
    if not widths[0] <= line.width_m <= widths[-1]:
        return replace(
            line,
            impedance_ohm=nan,
            problem=(
                f"layer {line.layer}: the impedance table does not reach {line.width_m * 1e3:g} mm"
            ),
        )
    return replace(
        line,
        impedance_ohm=float(np.interp(line.width_m, widths, ohms)),
        provenance=STATED,
        problem="",
    )


def _with_stated_impedance(line: Line, stack: Sequence[Layer], index: int) -> Line:
    """A stated impedance overrides; at another width the computed ratio carries it over."""
    layer = stack[index]
    stated = layer.z0_ohm
    if stated is None:
        return line
    if layer.z0_width_m is None or abs(layer.z0_width_m - line.width_m) < 1e-9:
        return replace(line, impedance_ohm=stated, provenance=STATED, problem="")
    at_stated_width = _computed(stack, index, layer.z0_width_m).impedance_ohm
    if isnan(at_stated_width) or isnan(line.impedance_ohm):
        return replace(
            line,
            impedance_ohm=nan,
            problem=f"layer {line.layer}: z0 is stated for another width; add an impedance table",
        )
    scaled = line.impedance_ohm * stated / at_stated_width
    return replace(line, impedance_ohm=scaled, provenance=STATED, problem="")


def printed_line(
    stack: Sequence[Layer],
    layer: str,
    width_m: float,
    impedance: Mapping[str, Sequence[tuple[float, float]]] | None = None,
) -> Line:
    """Constants of a line of one width on one signal layer.

    Parameters
    ----------
    stack : sequence of Layer
        The stack, top first.
    layer : str
        Name of the signal layer.
    width_m : float
        Finished width of the trace. [m]
    impedance : mapping, optional
        A fabricator's table per layer: pairs of width [m] and impedance [ohm].
        It comes before a stated ``z0``, which comes before what is computed.

    Returns
    -------
    Line
        Impedance [ohm], delay [s/m], losses, and where they came from: a closed form
        in its range, else a field solution. A line without either has NaN numbers and
        says what to give instead.

    Examples
    --------
    A 0.18 mm trace 0.11 mm above its plane, permittivity 4.2, is near 52 ohm.

    >>> stack = (
    ...     Layer(layer="L1", kind="signal", thickness_m=35e-6),
    ...     Layer(layer="D1", kind="dielectric", thickness_m=0.11e-3, permittivity=4.2),
    ...     Layer(layer="L2", kind="plane", thickness_m=18e-6),
    ... )
    >>> line = printed_line(stack, "L1", 0.18e-3)
    >>> print(f"{line.impedance_ohm:.1f} ohm, {line.delay_s_per_m * 1e9:.2f} ns/m")
    51.7 ohm, 5.75 ns/m
    """
    return _cached(tuple(stack), layer, width_m, tuple((impedance or {}).get(layer, ())))


@lru_cache(maxsize=4096)
def _cached(
    stack: tuple[Layer, ...], layer: str, width_m: float, table: tuple[tuple[float, float], ...]
) -> Line:
    """One line per stack, layer and width."""
    index = next(i for i, entry in enumerate(stack) if entry.layer == layer)
    line = _computed(stack, index, width_m)
    if isnan(line.delay_s_per_m):  # no plane: an impedance alone is not a line
        return line
    if table:
        return _from_table(line, table)
    return _with_stated_impedance(line, stack, index)


def surface_line(stack: Sequence[Layer], width_m: float) -> Line | None:
    """The line of one width on the first surface layer whose constants are known.

    Parameters
    ----------
    stack : sequence of Layer
        The stack, top first.
    width_m : float
        Width of the trace. [m]

    Returns
    -------
    Line or None
        None where no signal layer lies at the surface, bare or coated, over a plane.

    Examples
    --------
    >>> stack = (
    ...     Layer(layer="L1", kind="signal", thickness_m=35e-6),
    ...     Layer(layer="D1", kind="dielectric", thickness_m=0.11e-3, permittivity=4.2),
    ...     Layer(layer="L2", kind="plane", thickness_m=18e-6),
    ... )
    >>> surface_line(stack, 0.18e-3).layer
    'L1'
    """
    signals = [layer.layer for layer in stack if layer.kind == "signal"]
    for name in (signals[0], signals[-1]) if signals else ():
        line = printed_line(stack, name, width_m)
        if line.surface and not line.problem:
            return line
    return None
