"""Drivers and inputs of a board whose values stand in model files."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from math import inf, isnan
from typing import Any

from edgeplan.board import (
    BoardFile,
    Driver,
    IbisFile,
    Interface,
    LevelFamily,
    ModelledSetting,
    Receiver,
    Setting,
)
from edgeplan.driver_models import (
    DriverValues,
    cannot_drive,
    driver_values,
    numbers_of,
    package_of,
    setting_fields,
)
from edgeplan.errors import Problem
from edgeplan.ibis import Component, Model, Triple
from edgeplan.names import instead
from edgeplan.readers import ibis
from edgeplan.readers.files import Folder
from edgeplan.readers.toml import Document, Path
from edgeplan.units import VoltageOrShare

_EDGES = ("edge_s", "edge_up_s", "edge_down_s")
_ONE_EDGE = "10-90"


@dataclass
class Filled:
    """Records with the values of their models, by place in the board file, and remarks."""

    drivers: dict[int, Driver] = field(default_factory=dict)
    receivers: dict[int, Receiver] = field(default_factory=dict)
    levels: list[LevelFamily] = field(default_factory=list)
    values: dict[tuple[int, int], DriverValues] = field(default_factory=dict)
    notes: list[str] = field(default_factory=list)

    def into(self, file: BoardFile) -> BoardFile:
        """Return the board file with these records in place of those that were written."""
        return file.model_copy(
            update={
                "driver": [self.drivers.get(k, d) for k, d in enumerate(file.driver)],
                "receiver": [self.receivers.get(k, r) for k, r in enumerate(file.receiver)],
                "level": [*file.level, *self.levels],
            }
        )


class ModelFiles:
    """Model files of a board folder, each read once; problems are told in the folder's list."""

    def __init__(self, folder: Folder, document: Document) -> None:
        self.folder = folder
        self.document = document
        self.read: dict[str, ibis.Reading | None] = {}
        self.told: set[Problem] = set()

    def fill(self, drivers: Mapping[int, Driver], receivers: Mapping[int, Receiver]) -> Filled:
        """Fill what the board file leaves to models.

        Parameters
        ----------
        drivers, receivers : mapping of int
            Records that are in order, by their place in the board file.

        Returns
        -------
        Filled
            A value the board file states wins over the model's.
        """
        filled = Filled()
        for index, driver in drivers.items():
            self._driver(index, driver, filled)
        for index, receiver in receivers.items():
            if receiver.ibis is not None:
                self._receiver(index, receiver, filled)
        return filled

    def _driver(self, index: int, driver: Driver, filled: Filled) -> None:
        """Fill the settings of one driver."""
        named = [k for k, setting in enumerate(driver.settings) if setting.model is not None]
        if driver.ibis is None:
            for k in named:
                message = f"names a model, but driver {driver.name!r} names no file of models"
                hint = 'add ibis = {file = "models/..."} to the driver'
                self._tell(("driver", index, "settings", k, "model"), message, hint)
            return
        at = ("driver", index, "ibis")
        reading = self._reading(driver.ibis.file, (*at, "file"))
        if not named:
            hint = f"edgeplan drivers {driver.ibis.file} lists its models"
            self._tell((*at, "file"), "no setting of the driver names a model", hint)
        if reading is None:
            return
        component, known = self._component(reading, driver.ibis.component, (*at, "component"))
        settings: list[Setting] = list(driver.settings)
        for k in named:
            path = ("driver", index, "settings", k, "model")
            model = self._model(reading, str(driver.settings[k].model), path)
            if model is None or not known:
                continue
            if reason := cannot_drive(model):
                self._tell(path, f"model {model.name!r} {reason}", _listing(reading))
                continue
            values = driver_values(reading.models, model, component, driver.ibis.impedance_ohm)
            filled.values[index, k] = values
            settings[k] = with_values(driver.settings[k], values, reading.models.file)
            owner = f"driver {driver.name}, setting {settings[k].setting}"
            filled.notes += [f"{owner}: {note}" for note in values.notes]
        filled.drivers[index] = driver.model_copy(update={"settings": settings})
        filled.notes.append(_load_line(driver, driver.ibis))

    def _receiver(self, index: int, receiver: Receiver, filled: Filled) -> None:
        """Fill one input."""
        assert receiver.ibis is not None  # noqa: S101 - the caller looked
        at = ("receiver", index, "ibis")
        reading = self._reading(receiver.ibis.file, (*at, "file"))
        if reading is None:
            return
        component, known = self._component(reading, receiver.ibis.component, (*at, "component"))
        model = self._model(reading, receiver.ibis.model, (*at, "model"))
        if model is None or not known:
            return
        if not model.receives:
            message = f"model {model.name!r} is of type {model.kind} and no input"
            self._tell((*at, "model"), message, _listing(reading))
            return
        place = f"{reading.models.file}:{model.row}"
        own, levels = input_fields(receiver, model, reading, component, place)
        filled.receivers[index] = receiver.model_copy(update=own)
        filled.levels += [levels] if levels and levels not in filled.levels else []

    def _reading(self, name: str, path: Path) -> ibis.Reading | None:
        """Read a file once; None after telling why it cannot be."""
        if name not in self.read:
            content = self.folder.read(name, self.document.where(path))
            self.read[name] = None if content is None else ibis.read(content, name)
        reading = self.read[name]
        if reading is not None and not reading.models.models:
            self.folder.problems += [p for p in reading.errors if p not in self.told]
            self.told |= set(reading.errors)
        return reading

    def _component(
        self, reading: ibis.Reading, name: str | None, path: Path
    ) -> tuple[Component | None, bool]:
        """Return a component, and whether there is one of the name that is given."""
        component = reading.models.component(name)
        if name is not None and component is None:
            known = [c.name for c in reading.models.components]
            message = f"{reading.models.file} has no component {name!r}"
            self._tell(path, message, instead(name, known))
            return None, False
        return component, True

    def _model(self, reading: ibis.Reading, name: str, path: Path) -> Model | None:
        """Return a model; None after telling that there is none, or what is wrong with it."""
        model = reading.models.models.get(name)
        if model is not None:
            return model
        if name in reading.models.spoilt:
            self._tell(path, f"model {name!r} cannot be read", "see the problems of its file")
            fresh = [p for p in reading.errors if p not in self.told]
            self.folder.problems += fresh
            self.told |= set(fresh)
        elif reading.models.models:
            known = reading.models.models
            message = f"{reading.models.file} has no model {name!r}"
            self._tell(path, message, instead(name, known))
        return None

    def _tell(self, path: Path, message: str, hint: str) -> None:
        """Note a problem at a key of the board file."""
        self.folder.problems.append(self.document.where(path).problem(message, hint))


def with_values(setting: Setting, values: DriverValues, file: str) -> ModelledSetting:
    """Return a setting with what its model gives where the setting states nothing.

    Parameters
    ----------
    setting : Setting
        As written.
    values : DriverValues
        Of its model.
    file : str
        Name of the file, for the source.

    Returns
    -------
    ModelledSetting
        Own values win; edges of the model are left out where the setting states one between
        other levels than 10 and 90 %.
    """
    given = {name: value for name, value in setting_fields(values).items() if value is not None}
    stated = {name for name in given if getattr(setting, name) is not None}
    if setting.resistance_ohm is not None:
        stated |= {name for name in given if name.startswith("resistance")}
    has_edge = any(getattr(setting, name) is not None for name in _EDGES)
    if setting.edge_s is not None or (has_edge and setting.edge_levels != _ONE_EDGE):
        stated |= set(_EDGES)
    taken = {name: value for name, value in given.items() if name not in stated}
    levels = setting.edge_levels if has_edge else _ONE_EDGE
    place = f"{file}:{values.model.row}"
    fields = {name: getattr(setting, name) for name in type(setting).model_fields}
    fields |= {**taken, "edge_levels": levels}
    fields["source"] = f"{setting.source}, {place}" if setting.source else place
    return ModelledSetting.model_construct(**fields, modelled=frozenset(taken))


def input_fields(
    receiver: Receiver,
    model: Model,
    reading: ibis.Reading,
    component: Component | None,
    place: str,
) -> tuple[dict[str, Any], LevelFamily | None]:
    """Return what a model gives for the fields of an input, and its thresholds if it has both.

    Parameters
    ----------
    receiver : Receiver
        As written; its own values win.
    model : Model
        An input.
    reading : Reading
        The file it stands in.
    component : Component or None
        Whose package counts.
    place : str
        File and line.

    Returns
    -------
    tuple
        Fields to change, and a level family named after the place.
    """
    own: dict[str, Any] = {"source": receiver.source or place}
    if receiver.capacitance_f is None:
        package = package_of(reading.models, component, model.name).capacitance_f
        pad = (a + b for a, b in zip(model.capacitance_f, package, strict=True))
        own["capacitance_f"] = numbers_of(Triple(*pad))
    limit_v = overshoot_v(model)
    if receiver.overshoot is None and limit_v is not None:
        own["overshoot"] = VoltageOrShare(voltage_v=limit_v)
    low, high = model.input_low_v, model.input_high_v
    levels = None
    if receiver.levels is None and not (isnan(low.typ) or isnan(high.typ)):
        vil, vih = (min(v for v in low if not isnan(v)), max(v for v in high if not isnan(v)))
        levels = LevelFamily(name=place, vil_v=vil, vih_v=vih, source=place)
        own["levels"] = place
    return own, levels


def overshoot_v(model: Model) -> float | None:
    """Return how far beyond its supplies an input may be driven for ever.

    Parameters
    ----------
    model : Model
        With S_overshoot_high and S_overshoot_low, which are levels of the pin.

    Returns
    -------
    float or None
        The smaller of both distances, in the column where it is smallest; None unless the model
        states both. [V]

    Examples
    --------
    >>> overshoot_v(Model(name="in", row=1, kind="input", capacitance_f=Triple(),
    ...                   reference_v={"pullup": Triple(3.3, 3.0, 3.6)},
    ...                   overshoot_high_v=Triple(4.0), overshoot_low_v=Triple(-0.5)))
    0.4
    """
    supply = model.reference_v["pullup"]
    above = [
        round(level - volt, 9)
        for level, volt in zip(model.overshoot_high_v.filled(), supply.filled(), strict=True)
    ]
    below = [-level for level in model.overshoot_low_v.filled()]
    if any(isnan(v) for v in (*above, *below)):
        return None
    return max(min(*above, *below), 0.0)


@dataclass(frozen=True)
class Supplied:
    """A model of a driver's setting, with the supply of an interface whose nets it drives."""

    interface: Interface
    values: DriverValues
    path: Path

    @property
    def own_v(self) -> tuple[float, float]:
        """Lowest and highest supply of the model; without any stated, everything."""
        own = [v for v in self.values.model.reference_v["pullup"] if not isnan(v)]
        return (min(own), max(own)) if own else (-inf, inf)

    @property
    def asked_v(self) -> tuple[float, float] | None:
        """Lowest and highest supply of the interface."""
        supply = self.interface.supply_v
        stated = [v for v in (supply.min, supply.typ, supply.max) if v is not None]
        return (min(stated), max(stated)) if stated else None

    def words(self) -> str:
        """Say at which supply the model holds."""
        low, high = self.own_v
        return f"model {self.values.model.name!r} holds from {low:g} to {high:g} V"


def supplied(
    filled: Filled, interfaces: Iterable[Interface], uses: Iterable[tuple[str, str]]
) -> list[Supplied]:
    """Return every model with every interface whose nets it may drive.

    Parameters
    ----------
    filled : Filled
        Drivers with their models.
    interfaces : iterable of Interface
        Those that are in order.
    uses : iterable of tuple of str
        Interface and driver of every net.
    """
    by_name = {interface.name: interface for interface in interfaces}
    indices = {driver.name: index for index, driver in filled.drivers.items()}
    return [
        Supplied(by_name[interface], values, ("driver", index, "settings", k, "model"))
        for interface, driver in sorted(set(uses))
        for (index, k), values in filled.values.items()
        if interface in by_name and indices.get(driver) == index
    ]


def supply_problems(document: Document, found: Iterable[Supplied]) -> list[Problem]:
    """Return models whose supply has nothing in common with that of their interface.

    Parameters
    ----------
    document : Document
        board.toml.
    found : iterable of Supplied
        From `supplied`.

    Returns
    -------
    list of Problem
        At the setting's model.
    """
    hint = "interface {!r} has another supply; name the model for it"
    return [
        document.where(each.path).problem(each.words(), hint.format(each.interface.name))
        for each in found
        if each.asked_v and (each.asked_v[0] > each.own_v[1] or each.own_v[0] > each.asked_v[1])
    ]


def supply_notes(found: Iterable[Supplied]) -> list[str]:
    """Return a note for each model whose interface goes beyond its supply.

    Parameters
    ----------
    found : iterable of Supplied
        From `supplied`.
    """
    return [
        f"{each.words()}, interface {each.interface.name} goes beyond"
        for each in found
        if each.asked_v and (each.asked_v[0] < each.own_v[0] or each.asked_v[1] > each.own_v[1])
    ]


def _load_line(driver: Driver, named: IbisFile) -> str:
    """Say at which impedance a driver's models were read."""
    return (
        f"driver {driver.name}: output resistances of its models hold at a load line of "
        f"{named.impedance_ohm:g} ohm"
    )


def _listing(reading: ibis.Reading) -> str:
    """Say where to look what a file offers."""
    return f"edgeplan drivers {reading.models.file} lists what its models are"
