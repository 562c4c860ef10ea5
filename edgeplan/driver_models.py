"""What a driver model says at a load line: resistance, edge and capacitance in every corner."""

from collections.abc import Iterable
from dataclasses import dataclass
from math import isfinite, isnan, nan
from statistics import median

import numpy as np

from edgeplan import driver_model_edges as edges
from edgeplan.board import Range
from edgeplan.driver_model_edges import Corner, Side
from edgeplan.ibis import (
    COLUMNS,
    PULLS_DOWN,
    PULLS_UP,
    TWO_SIDED,
    Component,
    Model,
    ModelFile,
    Pin,
    Rows,
    Triple,
)

DEFAULT_IMPEDANCE_OHM = 50.0
# What quality checks of such files ask for (common practice; IBIS Open Forum quality checks).
LARGEST_PACKAGE = {"R_pkg": 10.0, "L_pkg": 100e-9, "C_pkg": 100e-12}
LARGEST_C_COMP_F = 20e-12
NEAR_ORIGIN = 0.02  # of the largest current, at 0 V of a pull-up or pull-down
_TABLES_OF = {"pullup": TWO_SIDED + PULLS_UP, "pulldown": TWO_SIDED + PULLS_DOWN}
NOTHING = Triple(0.0, 0.0, 0.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Package:
    """Resistance and capacitance between pad and pin, over the pins of a model; 0 if unknown."""

    resistance_ohm: Triple = NOTHING
    capacitance_f: Triple = NOTHING
    known: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class DriverValues:
    """A driving model at one impedance: both directions, pad with package, and remarks.

    A model that drives one side only has no ``up`` or no ``down``.
    """

    model: Model
    impedance_ohm: float
    up: Side | None
    down: Side | None
    capacitance_f: Triple
    notes: tuple[str, ...]


def driver_values(
    file: ModelFile, model: Model, component: Component | None, impedance_ohm: float
) -> DriverValues:
    """Evaluate one driving model.

    Parameters
    ----------
    file : ModelFile
        The file it stands in.
    model : Model
        Its ``drives`` is true.
    component : Component or None
        Whose package counts; without one it is left out.
    impedance_ohm : float
        Of the line at the pin, with a series resistor. [ohm]

    Returns
    -------
    DriverValues
        Columns typical, minimum (weak and slow), maximum (strong and fast). NaN where the file
        states nothing: a typical value never stands for a corner.
    """
    package = package_of(file, component, model.name)
    corners = {
        column: Corner.of(model, column, ohm)
        for column, ohm in zip(COLUMNS, _package_ohm(package), strict=True)
    }
    sides = {
        high: edges.side(model, corners, impedance_ohm, high=high) if drives else None
        for high, drives in ((True, model.drives_high), (False, model.drives_low))
    }
    pad = Triple(*(a + b for a, b in zip(model.capacitance_f, package.capacitance_f, strict=True)))
    notes = [*_model_notes(model), *_package_notes(component)]
    if not package.known:
        notes.append("no package counts: name the component whose package it has")
    for side in sides.values():
        notes += side.notes if side else ()
    return DriverValues(
        model=model,
        impedance_ohm=impedance_ohm,
        up=sides[True],
        down=sides[False],
        capacitance_f=pad,
        notes=tuple(dict.fromkeys(notes)),
    )


def package_of(file: ModelFile, component: Component | None, name: str) -> Package:
    """Return what lies between pad and pin for the pins that may have a model.

    Parameters
    ----------
    file : ModelFile
        For its selectors.
    component : Component or None
        Its pins' own values win over those of its package.
    name : str
        Of the model.

    Returns
    -------
    Package
        Smallest, middle and largest over the pins. [ohm], [F]
    """
    if component is None:
        return Package()
    pins = [pin for pin in component.pins if name in file.models_of(pin)]
    return Package(
        resistance_ohm=_over_pins(component.resistance_ohm, pins, "resistance_ohm"),
        capacitance_f=_over_pins(component.capacitance_f, pins, "capacitance_f"),
        known=True,
    )


def _over_pins(package: Triple, pins: Iterable[Pin], name: str) -> Triple:
    """Return smallest, middle and largest of pins' own values, else those of the package."""
    shared = (0.0, 0.0, 0.0) if isnan(package.typ) else tuple(package.filled())
    each = [shared if isnan(getattr(pin, name)) else (getattr(pin, name),) * 3 for pin in pins] or [
        shared
    ]
    typ, low, high = zip(*each, strict=True)
    return Triple(median(typ), min(*low, *typ), max(*high, *typ))


def _package_ohm(package: Package) -> Triple:
    """Return the package's resistance by column: the largest belongs to the slow one."""
    typ, low, high = package.resistance_ohm
    return Triple(typ, high, low)


def fast_to_slow(values: Triple) -> Range[float]:
    """Return a quantity whose slow side is its maximum as a range.

    The maximum column is the fast corner. Where both corners are stated, smallest and largest
    count whatever the columns are called.

    Examples
    --------
    >>> fast_to_slow(Triple(20.0, 26.0, 15.0))
    Range[float](min=15.0, typ=20.0, max=26.0)
    >>> fast_to_slow(Triple(20.0)).max is None
    True
    """
    typ, slow, fast = (value if isfinite(value) else nan for value in values)
    known = [value for value in (typ, slow, fast) if not isnan(value)]
    return Range[float](
        min=None if isnan(fast) else min(known) if not isnan(slow) else min(fast, *known),
        typ=None if isnan(typ) else typ,
        max=None if isnan(slow) else max(known),
    )


def numbers_of(values: Triple) -> Range[float] | None:
    """Return three numbers as a range; None if there are none."""
    low, typ, high = (None if isnan(v) else v for v in (values.min, values.typ, values.max))
    return None if typ is None else Range[float](min=low, typ=typ, max=high)


def setting_fields(values: DriverValues) -> dict[str, Range[float] | None]:
    """Return what a model gives for the fields of a setting.

    Parameters
    ----------
    values : DriverValues
        Of one model.

    Returns
    -------
    dict
        By field of `Setting`: both directions where the model has both, else the one that
        drives as ``resistance_ohm`` and ``edge_s``. [ohm], [s], [F]
    """
    fields: dict[str, Range[float] | None] = {"capacitance_f": numbers_of(values.capacitance_f)}
    sides = {"_up": values.up, "_down": values.down}
    one_sided = values.up is None or values.down is None
    for word, side in sides.items():
        if side is not None:
            suffix = "" if one_sided else word
            fields[f"resistance{suffix}_ohm"] = fast_to_slow(side.resistance_ohm)
            fields[f"edge{suffix}_s"] = fast_to_slow(side.edge_s)
    return fields


def cannot_drive(model: Model) -> str:
    """Say why a model is no setting of a driver; empty if it is one.

    Examples
    --------
    >>> from edgeplan.ibis import Triple
    >>> cannot_drive(Model(name="in", row=1, kind="input", capacitance_f=Triple(5e-12),
    ...                    reference_v={}))
    'is an input and drives nothing'
    """
    needed = [t for t, kinds in _TABLES_OF.items() if model.kind in kinds]
    if needed:
        lost = [f"[{table}]" for table in needed if table not in model.tables]
        return f"holds no {' and no '.join(lost)}" if lost else ""
    if model.kind == "input":
        return "is an input and drives nothing"
    return f"is of type {model.kind}, which is not read"


def _model_notes(model: Model) -> list[str]:
    """Say what is strange about a model."""
    notes = []
    typ, low, high = model.reference_v["pullup"]
    if isnan(typ):
        notes.append("neither [Voltage Range] nor [Pullup Reference] states a supply")
    elif not low <= typ <= high:
        notes.append(f"supplies {low:g}, {typ:g}, {high:g} V are not in rising order")
    if isnan(model.capacitance_f.typ):
        notes.append("C_comp is missing: the source edge cannot be told from the tables")
    elif max(v for v in model.capacitance_f if not isnan(v)) > LARGEST_C_COMP_F:
        notes.append(f"C_comp above {LARGEST_C_COMP_F * 1e12:g} pF is unusual")
    return notes + [
        f"[{name}], line {rows.row}, does not pass through 0 V, 0 A"
        for name, rows in model.tables.items()
        if name in ("pullup", "pulldown") and not _through_origin(rows)
    ]


def _through_origin(rows: Rows) -> bool:
    """Tell whether a table carries next to nothing at 0 V."""
    at, current = rows.column("typ")
    largest = max(abs(value) for value in current)
    return abs(float(np.interp(0.0, at, current))) <= NEAR_ORIGIN * largest


def _package_notes(component: Component | None) -> list[str]:
    """Say which package values are past belief."""
    if component is None:
        return []
    values = (component.resistance_ohm, component.inductance_h, component.capacitance_f)
    return [
        f"{name} of component {component.name} is unusually large"
        for (name, largest), value in zip(LARGEST_PACKAGE.items(), values, strict=True)
        if any(v > largest for v in value)
    ]
