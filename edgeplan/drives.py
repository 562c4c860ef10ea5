"""Settings of a driver at the three corners, ready to become arrays."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import isclose, isnan, nan

from edgeplan.board import Driver, Range, Setting

CORNERS = ("slow", "typical", "fast")
DIRECTIONS = ("rising", "falling")
ALIKE = 1e-6  # relative: what the arithmetic on a model's tables leaves between equal edges

# 0-100 % of the waveform edge (raised cosine) and of the spectrum edge (straight ramp) for an
# edge stated between two levels; raised cosine: t = te (1 - 2 acos(1 - 2 p)/pi) for p to 1 - p.
RAISED_COSINE_SHARE = {"10-90": 0.590334, "20-80": 0.409666, "30-70": 0.261980, "0-100": 1.0}
STRAIGHT_SHARE = {"10-90": 0.8, "20-80": 0.6, "30-70": 0.4, "0-100": 1.0}


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """One quantity of a setting at the three corners; NaN where no value stands."""

    slow: float = nan
    typical: float = nan
    fast: float = nan
    provenance: str = "datasheet"

    def at(self, corner: str) -> float:
        """Value at one corner."""
        return float(getattr(self, corner))


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingCorners:
    """One setting: resistance, edges and pad capacitance at every corner and direction.

    ``ramp_s`` is the 0-100 % raised cosine of the waveforms, ``trapezoid_s`` the 0-100 %
    straight ramp of the spectrum; both come from the same stated edge. ``edge_shape`` says
    which of the two the spectrum is that of.
    """

    setting: str
    resistance_ohm: Mapping[str, Quantity]
    ramp_s: Mapping[str, Quantity]
    trapezoid_s: Mapping[str, Quantity]
    pad_f: Quantity
    edge_shape: str = "trapezoid"
    source: str = ""
    missing: tuple[str, ...] = field(default=())

    @property
    def equal_edges(self) -> bool:
        """Whether rising and falling take equally long."""
        return _alike(self.ramp_s["rising"], self.ramp_s["falling"])

    @property
    def equal_resistance(self) -> bool:
        """Whether the output drives high as strongly as low."""
        return _alike(self.resistance_ohm["rising"], self.resistance_ohm["falling"])

    @property
    def symmetric(self) -> bool:
        """Whether rising and falling are mirror images."""
        return self.equal_resistance and self.equal_edges


def _alike(first: Quantity, second: Quantity) -> bool:
    """Whether two quantities agree at every corner; values that nobody states agree."""
    pairs = [(first.at(corner), second.at(corner)) for corner in CORNERS]
    return all(isclose(a, b, rel_tol=ALIKE) or (isnan(a) and isnan(b)) for a, b in pairs)


def _corners(
    stated: Range[float] | float | None, spread: float | None, provenance: str
) -> Quantity:
    """Slow, typical and fast of a quantity whose maximum is the slow side."""
    if stated is None:
        return Quantity(provenance=provenance)
    if not isinstance(stated, Range):
        return Quantity(slow=stated, typical=stated, fast=stated, provenance=provenance)
    low, typical, high = (nan if v is None else float(v) for v in _three(stated))
    if spread is not None and not isnan(typical):
        bound = isnan(low) or isnan(high)
        low = typical * (1 - spread) if isnan(low) else low
        high = typical * (1 + spread) if isnan(high) else high
        provenance = "bound" if bound else provenance
    if isnan(typical) and not (isnan(low) or isnan(high)):
        typical = 0.5 * (low + high)
    return Quantity(slow=high, typical=typical, fast=low, provenance=provenance)


def _three(stated: Range[float]) -> tuple[float | None, float | None, float | None]:
    """Minimum, typical, maximum."""
    return stated.min, stated.typ, stated.max


def _scaled(quantity: Quantity, factor: float) -> Quantity:
    """The same quantity times a constant."""
    return Quantity(
        slow=quantity.slow * factor,
        typical=quantity.typical * factor,
        fast=quantity.fast * factor,
        provenance=quantity.provenance,
    )


def _missing(name: str, quantities: Mapping[str, Quantity]) -> list[str]:
    """Which of minimum and maximum a setting does not state."""
    found = []
    for corner, word in (("fast", "minimum"), ("slow", "maximum")):
        if any(isnan(q.at(corner)) for q in quantities.values()):
            found.append(f"{word} {name}")
    return found


def setting_corners(setting: Setting) -> SettingCorners:
    """Corner values of one setting.

    The slow corner takes the highest resistance, the longest edge and the largest
    capacitance; the fast corner the opposite.  A value that is not stated stays NaN:
    a maximum is never used as a minimum.

    Parameters
    ----------
    setting : Setting
        As the user wrote it, edges between ``edge_levels`` of the open-circuit voltage.

    Returns
    -------
    SettingCorners
        Resistance [ohm], edges [s] and pad capacitance [F].

    Examples
    --------
    >>> corners = setting_corners(
    ...     Setting(setting="A", resistance_ohm={"min": 20, "typ": 30, "max": 40},
    ...             edge_s={"max": 1.6e-9}))
    >>> corners.resistance_ohm["rising"].slow, corners.missing
    (40.0, ('minimum edge',))
    """
    spread, origin = setting.spread, setting.provenance_of
    resistance = {
        direction: _corners(stated, spread, origin(name))
        for direction, (name, stated) in _sides(setting, "resistance{}_ohm").items()
    }
    edge = {
        direction: _corners(stated, spread, origin(name))
        for direction, (name, stated) in _sides(setting, "edge{}_s").items()
    }
    raised = 1 / RAISED_COSINE_SHARE[setting.edge_levels]
    straight = 1 / STRAIGHT_SHARE[setting.edge_levels]
    pad = 0.0 if setting.capacitance_f is None else setting.capacitance_f
    pads = _pad_corners(pad, origin("capacitance_f"))
    return SettingCorners(
        setting=setting.setting,
        resistance_ohm=resistance,
        ramp_s={d: _scaled(q, raised) for d, q in edge.items()},
        trapezoid_s={d: _scaled(q, straight) for d, q in edge.items()},
        pad_f=pads,
        edge_shape=setting.edge_shape,
        source=setting.source,
        missing=(
            *_missing("resistance", resistance),
            *_missing("edge", edge),
            *_missing("capacitance", {"pad": pads}),
        ),
    )


def _sides(setting: Setting, field: str) -> dict[str, tuple[str, Range[float] | None]]:
    """Field and value of each direction: its own, else the one both share."""
    found = {}
    for direction, word in zip(DIRECTIONS, ("_up", "_down"), strict=True):
        own, shared = field.format(word), field.format("")
        name = own if getattr(setting, own) is not None else shared
        found[direction] = name, getattr(setting, name)
    return found


def _pad_corners(stated: Range[float] | float, provenance: str) -> Quantity:
    """Pad capacitance: its typical value stands in for an end that is not stated."""
    if isinstance(stated, Range) and stated.typ is not None:
        low = stated.typ if stated.min is None else stated.min
        high = stated.typ if stated.max is None else stated.max
        stated = Range[float](min=low, typ=stated.typ, max=high)
    return _corners(stated, None, provenance)


def driver_corners(driver: Driver) -> dict[str, SettingCorners]:
    """Every setting of a driver by its name.

    Parameters
    ----------
    driver : Driver
        As the user wrote it.

    Returns
    -------
    dict of str to SettingCorners
        In the driver's own order.

    Examples
    --------
    >>> plain = {"resistance_ohm": 30, "edge_s": 1e-9}
    >>> two = [Setting(setting=name, **plain) for name in ("HIGH", "LOW")]
    >>> list(driver_corners(Driver(name="out", settings=two)))
    ['HIGH', 'LOW']
    """
    return {s.setting: setting_corners(s) for s in driver.settings}
