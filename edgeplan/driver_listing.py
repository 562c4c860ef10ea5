"""What a model file offers: pins, selectors, inputs, and drivers with their settings."""

import re
from collections import defaultdict
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from edgeplan.driver_models import (
    DriverValues,
    cannot_drive,
    driver_values,
    numbers_of,
    setting_fields,
)
from edgeplan.ibis import Component, Model, ModelFile
from edgeplan.names import matches

SAME_DIGITS = 4  # settings that agree so far in every number are one


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingFound:
    """One setting: its name, every model that says the same, and the values."""

    setting: str
    models: tuple[str, ...]
    about: str
    values: DriverValues


@dataclass(frozen=True, slots=True, kw_only=True)
class DriverFound:
    """Settings among which one output can be switched, and the pins that can."""

    driver: str
    found_by: str
    settings: tuple[SettingFound, ...]
    pins: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Listing:
    """Everything a model file offers at one impedance."""

    file: ModelFile
    component: Component | None
    impedance_ohm: float
    drivers: tuple[DriverFound, ...]
    inputs: tuple[Model, ...]
    left_out: tuple[tuple[str, int, str], ...]


def listing(
    file: ModelFile, component: Component | None, impedance_ohm: float, pattern: str | None = None
) -> Listing:
    """Evaluate every driving model of a file.

    Parameters
    ----------
    file : ModelFile
        As read.
    component : Component or None
        Whose pins and package count.
    impedance_ohm : float
        Of the line. [ohm]
    pattern : str, optional
        Models whose name fits, ``*`` and ``?`` standing for anything, are the settings of one
        driver; without it every ``[Model Selector]`` is a driver, and every other model.

    Returns
    -------
    Listing
        Identical settings of a driver are one.
    """
    found = _by_pattern(file, pattern) if pattern else _by_selector(file)
    drivers = [
        DriverFound(
            driver=name,
            found_by=how,
            settings=tuple(_settings(file, component, impedance_ohm, models)),
            pins=_pins(file, component, [model for model, _, _ in models]),
        )
        for name, how, models in found
    ]
    return Listing(
        file=file,
        component=component,
        impedance_ohm=impedance_ohm,
        drivers=tuple(drivers),
        inputs=tuple(m for m in file.models.values() if m.receives),
        left_out=tuple(_left_out(file)),
    )


Group = tuple[str, str, list[tuple[str, str, str]]]


def _by_selector(file: ModelFile) -> Iterator[Group]:
    """One driver for each selector, then one for each model of its own: model, setting, text."""
    taken = set()
    for selector in file.selectors.values():
        entries = [(n, n, text) for n, text in selector.entries if _drives(file, n)]
        if entries:
            taken |= {name for name, _, _ in entries}
            yield selector.name, f"[Model Selector], line {selector.row}", entries
    for name in file.models:
        if name not in taken and _drives(file, name):
            yield name, "a model of its own", [(name, name, "")]


def _by_pattern(file: ModelFile, pattern: str) -> Iterator[Group]:
    """One driver of all models that fit; what stands for the first star names the setting."""
    entries = [(n, _starred(pattern, n), "") for n in file.models if matches(pattern, n)]
    entries = [entry for entry in entries if _drives(file, entry[0])]
    if entries:
        name = re.sub(r"[*?]+", "", pattern).strip("_-. ") or "driver"
        yield name, f"names that fit {pattern}", entries


def _starred(pattern: str, name: str) -> str:
    """Return what stands for the stars of a pattern; the whole name where that is nothing.

    >>> _starred("dq_*", "dq_half"), _starred("dq", "dq")
    ('half', 'dq')
    """
    text = re.escape(pattern).replace(r"\*", "(.*)").replace(r"\?", "(.)")
    found = re.fullmatch(text, name, re.DOTALL)
    return "".join(found.groups()) or name if found else name


def _drives(file: ModelFile, name: str) -> bool:
    """Tell whether the file holds a driving model of this name."""
    return name in file.models and not cannot_drive(file.models[name])


def _settings(
    file: ModelFile,
    component: Component | None,
    impedance_ohm: float,
    models: Iterable[tuple[str, str, str]],
) -> Iterator[SettingFound]:
    """Settings of one driver; those that say the same are one."""
    same: dict[object, list[tuple[str, str, str, DriverValues]]] = defaultdict(list)
    for name, setting, about in models:
        values = driver_values(file, file.models[name], component, impedance_ohm)
        same[_print(values)].append((name, setting, about, values))
    for alike in same.values():
        _, setting, about, values = alike[0]
        names = tuple(name for name, *_ in alike)
        yield SettingFound(setting=setting, models=names, about=about, values=values)


def _print(values: DriverValues) -> tuple[object, ...]:
    """Return the numbers of a setting to four digits: equal ones are the same setting."""
    ranges = sorted((key, value) for key, value in setting_fields(values).items() if value)
    return tuple(
        (key, *(None if v is None else f"{v:.{SAME_DIGITS}g}" for v in (r.min, r.typ, r.max)))
        for key, r in ranges
    )


def _pins(file: ModelFile, component: Component | None, models: list[str]) -> tuple[str, ...]:
    """Names of the pins that may have one of the models."""
    if component is None:
        return ()
    wanted = set(models)
    return tuple(pin.pin for pin in component.pins if wanted.intersection(file.models_of(pin)))


def _left_out(file: ModelFile) -> Iterator[tuple[str, int, str]]:
    """Models that are neither a setting nor an input alone: name, line, why."""
    for name, model in file.models.items():
        why = cannot_drive(model)
        if why and model.kind != "input":
            yield name, model.row, why


def input_values(model: Model) -> dict[str, object]:
    """Return what a model says as an input.

    Parameters
    ----------
    model : Model
        Its ``receives`` is true.

    Returns
    -------
    dict
        ``capacitance_f`` and the typical ``vil_v``, ``vih_v``; None where nothing stands.
        [F], [V]
    """
    capacitance = numbers_of(model.capacitance_f)
    low, high = numbers_of(model.input_low_v), numbers_of(model.input_high_v)
    return {
        "capacitance_f": capacitance,
        "vil_v": low.typ if low else None,
        "vih_v": high.typ if high else None,
    }
