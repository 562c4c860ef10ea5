"""Files of I/O buffer models (IBIS, EIA-656), text of versions 1.1 to 7: records and remarks."""

import hashlib
import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import chain
from math import isnan, nan
from pathlib import Path

from edgeplan.errors import InputError, Problem
from edgeplan.ibis import NO_MODEL, Component, Model, ModelFile, Pin, Selector, Triple
from edgeplan.readers import ibis_lines, ibis_models
from edgeplan.readers.files import Folder, Where
from edgeplan.readers.ibis_lines import Line, Section
from edgeplan.readers.ibis_models import ModelReader
from edgeplan.readers.ibis_values import BadValueError, joined, named, number, triple

# each opens something of its own; what follows belongs to it and to nothing before it
OPENING = ("component", "model")
SELECTOR = "model selector"
FOREIGN = (
    "submodel",
    "define package model",
    "test load",
    "test data",
    "external circuit",
    "circuit call",
    "interconnect model",
    "interconnect model set",
    "interconnect model group",
    "begin board description",
    "begin emd",
    "end package model",
    "end external circuit",
    "end model",
)
HEADER = ("ibis ver", "comment char", *ibis_lines.FREE_TEXT)
OF_COMPONENT = ("package", "pin")
PACKAGE = {"r_pkg": "ohm", "l_pkg": "H", "c_pkg": "F"}
PIN_COLUMNS = {"r_pin": "ohm", "l_pin": "H", "c_pin": "F"}
PLAIN_PIN = ("r_pin", "l_pin", "c_pin")
NEWEST = 7
KNOWN = frozenset({*OPENING, SELECTOR, *OF_COMPONENT, *ibis_models.KEYWORDS})
# read by nobody here and without effect on what is read
SILENT = frozenset(
    {
        *FOREIGN, *HEADER,
        "si location", "timing location", "package model", "alternate package models",
        "end alternate package models", "pin mapping", "bus label", "die supply pads",
        "diff pin", "series pin mapping", "series switch groups", "node declarations",
        "end node declarations", "end circuit call", "begin emi component", "pin emi",
        "pin domain emi", "end emi component", "receiver thresholds", "temperature range",
        "external reference", "ttgnd", "ttpower", "rgnd", "rpower", "rac", "cac", "on", "off",
        "r series", "l series", "rl series", "c series", "lc series", "rc series",
        "series current", "series mosfet", "composite current", "isso pu", "isso pd",
        "initial delay", "clock pins", "repeater pin",
    }
)  # fmt: skip


@dataclass
class Reading:
    """A file as read: what stands in it, what made a part of it useless, and what is strange."""

    models: ModelFile
    errors: list[Problem] = field(default_factory=list)
    notes: list[Problem] = field(default_factory=list)


class _Told:
    """Collects errors and notes of one file."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.errors: list[Problem] = []
        self.notes: list[Problem] = []

    def error(self, row: int, message: str, hint: str = "") -> None:
        """Take what makes a part of the file useless."""
        self.errors.append(Where(self.file, row).problem(message, hint))

    def note(self, row: int, message: str, hint: str = "") -> None:
        """Take what is strange and was read all the same."""
        self.notes.append(Problem(message, self.file, row, 1, "", hint, "note"))


def read(content: bytes, file: str) -> Reading:
    r"""Read a model file.

    Parameters
    ----------
    content : bytes
        Of the file; any byte is a letter (Latin-1).
    file : str
        Its name, for problems.

    Returns
    -------
    Reading
        Records of everything that can be read. A model with an error is left out and named in
        ``spoilt``; nothing in the file raises.

    Notes
    -----
    Keywords count in column 1, in any case, with blanks or underscores. What a file may hold
    beside components, pins, selectors and models is passed over; a keyword nobody knows leaves
    a note.

    Examples
    --------
    >>> text = b"[IBIS Ver] 3.2\n[Model] dq\nModel_type Input\nC_comp 5pF NA NA\n[End]\n"
    >>> reading = read(text, "part.ibs")
    >>> reading.models.models["dq"].capacitance_f.typ, reading.errors
    (5e-12, [])

    References
    ----------
    .. [1] ANSI/EIA-656 (IEC 62014-1), "I/O Buffer Information Specification"; later revisions
       by the IBIS Open Forum.
    """
    told = _Told(file)
    if content[:2] == b"PK":
        told.error(1, "the file is a zip archive", "unpack it and name the .ibs file in it")
        return Reading(ModelFile(file=file), told.errors)
    text = content.decode("latin-1")
    found = ibis_lines.sections(text, KNOWN, told.note)
    builder = _Builder(file, hashlib.sha256(content).hexdigest(), told)
    for group in _groups(found):
        builder.take(group)
    builder.check(found)
    return Reading(builder.file(), told.errors, told.notes)


def read_file(path: Path) -> Reading:
    """Read a model file from disk.

    Parameters
    ----------
    path : Path
        Of the file.

    Returns
    -------
    Reading
        See `read`.

    Raises
    ------
    InputError
        If it cannot be read, or nothing in it can.
    """
    place = path.resolve()
    folder = Folder(place.parent)
    content = folder.read(place.name)
    if content is None:
        raise InputError(folder.problems)
    reading = read(content, path.name)
    if not reading.models.models:
        raise InputError(reading.errors or [Where(path.name).problem("the file has no [Model]")])
    return reading


def _groups(found: list[Section]) -> Iterator[list[Section]]:
    """Sections that belong together, the first of each opens it; a selector stands anywhere."""
    group: list[Section] = []
    for section in found:
        if section.keyword == SELECTOR:
            yield [section]
            continue
        if section.keyword in OPENING + FOREIGN and group:
            yield group
            group = []
        group.append(section)
    if group:
        yield group


class _Builder:
    """Puts the records of a file together."""

    def __init__(self, file: str, sha256: str, told: _Told) -> None:
        self.name = file
        self.sha256 = sha256
        self.told = told
        self.version = ""
        self.components: list[Component] = []
        self.selectors: dict[str, Selector] = {}
        self.models: dict[str, Model] = {}
        self.rows: dict[str, int] = {}
        self.spoilt: set[str] = set()

    def file(self) -> ModelFile:
        """Return the record of the file."""
        return ModelFile(
            file=self.name,
            sha256=self.sha256,
            version=self.version,
            components=tuple(self.components),
            selectors=self.selectors,
            models=self.models,
            spoilt=frozenset(self.spoilt - self.models.keys()),
        )

    def take(self, group: list[Section]) -> None:
        """Read sections that belong together."""
        first = group[0]
        if first.keyword == "component":
            self._component(group)
        elif first.keyword == SELECTOR:
            self._selector(first)
        elif first.keyword == "model":
            self._model(group)
        elif first.keyword in FOREIGN:
            return
        elif first.keyword == "ibis ver":
            self.version = first.argument.split()[0] if first.argument else ""
        for section in group:
            if section.keyword not in KNOWN | SILENT:
                self.told.note(section.row, f"[{section.keyword}] is not known and was passed over")

    def check(self, found: list[Section]) -> None:
        """Tell what is strange about the file as a whole."""
        if not found:
            self.told.error(1, "no keyword starts a line", "is it a file of I/O buffer models?")
            return
        if found[0].keyword != "ibis ver":
            self.told.note(found[0].row, "the first keyword is not [IBIS Ver]")
        known = re.fullmatch(r"([1-9]\d?)\.\d+", self.version)
        if self.version and (not known or int(known[1]) > NEWEST):
            self.told.note(found[0].row, f"version {self.version[:20]!r} is not known")
        if not self.rows:
            self.told.error(found[-1].row, "the file has no [Model]")
        self._check_names()

    def _check_names(self) -> None:
        """Pins and selectors name models that exist."""
        for selector in self.selectors.values():
            for name, _ in selector.entries:
                if name not in self.rows and name.lower() not in NO_MODEL:
                    message = f"selector {selector.name!r}: there is no model {name!r}"
                    self.told.note(selector.row, message)
        lost = {
            pin.model: pin.row
            for component in self.components
            for pin in reversed(component.pins)
            if pin.model not in self.rows
            and pin.model not in self.selectors
            and pin.model.lower() not in NO_MODEL
        }
        for name, row in sorted(lost.items(), key=lambda each: each[1]):
            self.told.note(row, f"there is no model and no selector {name!r}")

    def _model(self, group: list[Section]) -> None:
        """Read one model; the first of a name counts."""
        reader = ModelReader(group[0], self.told.note, self.told.error)
        if reader.name in self.rows:
            row = self.rows[reader.name]
            self.told.note(group[0].row, f"model {reader.name!r} is there twice; row {row} counts")
            return
        for section in group[1:]:
            reader.take(section)
        model = reader.model()
        self.rows[reader.name] = group[0].row
        if model is None:
            self.spoilt.add(reader.name)
        else:
            self.models[reader.name] = model

    def _selector(self, section: Section) -> None:
        """Read one selector."""
        name = section.argument.split()[0] if section.argument else ""
        if not name:
            self.told.error(section.row, "the selector has no name")
            return
        entries = []
        for line in section.lines:
            model, _, text = line.text.strip().partition(" ")
            entries.append((model, " ".join(text.split())))
        self.selectors.setdefault(
            name, Selector(name=name, row=section.row, entries=tuple(entries))
        )

    def _component(self, group: list[Section]) -> None:
        """Read one component: package and pins."""
        opening = group[0]
        values: dict[str, Triple] = {}
        pins: list[Pin] = []
        for section in group[1:]:
            if section.keyword == "package":
                values |= self._package(section)
            elif section.keyword == "pin":
                pins += self._pins(section)
        empty = Triple()
        self.components.append(
            Component(
                name=" ".join(opening.argument.split()),
                row=opening.row,
                resistance_ohm=values.get("r_pkg", empty),
                inductance_h=values.get("l_pkg", empty),
                capacitance_f=values.get("c_pkg", empty),
                pins=tuple(pins),
            )
        )

    def _package(self, section: Section) -> dict[str, Triple]:
        """Read the values of a package; one that cannot be read is unknown."""
        values = {}
        for line in section.lines:
            name, words = named(line.text)
            if name not in PACKAGE:
                continue
            try:
                values[name] = triple(words, PACKAGE[name], line.row, self.told.note)
            except BadValueError as bad:
                self.told.error(line.row, f"{name}: {bad.message}", bad.hint)
        return values

    def _pins(self, section: Section) -> Iterator[Pin]:
        """Read the rows of [Pin]; a row that cannot be read is left out."""
        header = [word.lower() for word in section.argument.split()]
        order = [word for word in header if word in PIN_COLUMNS] or list(PLAIN_PIN)
        for line in section.lines:
            words = line.words
            if len(words) < 3:
                hint = "write pin, signal and model"
                self.told.error(line.row, f"pin {words[0]!r} has {len(words)} columns", hint)
                continue
            values = dict(self._pin_values(line, order, joined(words[3:])))
            yield Pin(
                pin=words[0],
                signal=words[1],
                model=words[2],
                row=line.row,
                resistance_ohm=values.get("r_pin", nan),
                inductance_h=values.get("l_pin", nan),
                capacitance_f=values.get("c_pin", nan),
            )

    def _pin_values(
        self, line: Line, order: list[str], words: list[str]
    ) -> Iterator[tuple[str, float]]:
        """Read a pin's own package values; remarks behind the columns end them."""
        for name, word in zip(chain(order), words, strict=False):
            try:
                value = number(word, PIN_COLUMNS[name])
            except BadValueError as bad:
                self.told.note(line.row, f"{name}: {bad.message}; it is left out", bad.hint)
                return
            if not isnan(value):
                yield name, value
