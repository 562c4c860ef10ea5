"""One [Model] of a model file: its sections to a record, with what is wrong told at its line."""

from collections.abc import Callable
from dataclasses import dataclass, field
from math import isnan, nan

from edgeplan.ibis import MODEL_TYPES, Model, Ramp, Rows, Triple, Waveform
from edgeplan.readers import ibis_tables
from edgeplan.readers.ibis_lines import Line, Section, Tell
from edgeplan.readers.ibis_values import BadValueError, Named, named, numerical, one, triple

TABLES = ("pulldown", "pullup", "gnd clamp", "power clamp")
REFERENCES = (
    "voltage range",
    "pullup reference",
    "pulldown reference",
    "power clamp reference",
    "gnd clamp reference",
)
PARTS = ("c_comp_pullup", "c_comp_pulldown", "c_comp_power_clamp", "c_comp_gnd_clamp")
LEVELS = ("vinl", "vinh", "s_overshoot_low", "s_overshoot_high")
# they change what the tables mean, and are not read
BESIDE = {
    "add submodel": "its submodel is left out",
    "driver schedule": "it is put together from other models; its own tables are not the whole",
    "external model": "its external model is left out",
    "algorithmic model": "its algorithmic model is left out",
}
LOADS_OHM = (0.1, 1e6)  # of a fixture; anything else is a slip of the pen
DEFAULT_LOAD_OHM = 50.0  # of [Ramp] without R_load (EIA-656)


@dataclass
class _Found:
    """What the sections of one model hold."""

    kind: str = ""
    values: dict[str, Triple] = field(default_factory=dict)
    tables: dict[str, Rows] = field(default_factory=dict)
    ramp: Ramp | None = None
    waveforms: list[Waveform] = field(default_factory=list)


class ModelReader:
    """Reads the sections of one model; counts its errors."""

    def __init__(self, opening: Section, note: Tell, error: Tell) -> None:
        self.opening = opening
        self.name = opening.argument.split()[0] if opening.argument else ""
        self.note = note
        self._error = error
        self.failed = False
        self.found = _Found()

    def error(self, row: int, message: str, hint: str = "") -> None:
        """Tell what makes this model useless."""
        self.failed = True
        self._error(row, message, hint)

    def take(self, section: Section) -> None:
        """Read one section of the model."""
        keyword = section.keyword
        reader = _READERS.get(keyword)
        if reader:
            reader(self, section)
        elif keyword in BESIDE:
            self.note(section.row, f"model {self.name!r}: {BESIDE[keyword]}", "")

    def model(self) -> Model | None:
        """Return the record; None after an error."""
        self._subparameters(self.opening, _MODEL)
        found = self.found
        if not self.name:
            self.error(self.opening.row, "the model has no name")
        if not found.kind:
            hint = "add a line such as Model_type Output"
            self.error(self.opening.row, f"model {self.name!r} has no Model_type", hint)
        return None if self.failed else self._record()

    def _record(self) -> Model:
        """Put the record together."""
        values = self.found.values
        capacitance = values.get("c_comp")
        if capacitance is None:
            capacitance = _sum([values[part] for part in PARTS if part in values])
        return Model(
            name=self.name,
            row=self.opening.row,
            kind=self.found.kind,
            capacitance_f=numerical(capacitance),
            reference_v=_references(values),
            tables=self.found.tables,
            ramp=self.found.ramp,
            waveforms=tuple(self.found.waveforms),
            input_low_v=values.get("vinl", Triple()),
            input_high_v=values.get("vinh", Triple()),
            overshoot_low_v=values.get("s_overshoot_low", Triple()),
            overshoot_high_v=values.get("s_overshoot_high", Triple()),
        )

    def _kind(self, words: list[str], row: int) -> None:
        """Take the model's type."""
        kind = words[0].lower() if words else ""
        if kind not in MODEL_TYPES:
            self.error(row, f"no such Model_type {' '.join(words[:1])!r}", "such as Output or I/O")
        self.found.kind = kind or "?"

    def _subparameters(self, section: Section, known: dict[str, str]) -> None:
        """Read lines of the form ``Name = typ min max``; [Model Spec] wins over [Model]."""
        for line in section.lines:
            name, words = named(line.text)
            if name == "model_type":
                self._kind(words, line.row)
            elif name in known:
                value = self._triple(words, known[name], line.row)
                if value is not None:
                    self.found.values.setdefault(name, value)

    def _triple(self, words: list[str], unit: str, row: int) -> Triple | None:
        """Read up to three columns; None after telling what is wrong."""
        try:
            return triple(words, unit, row, self.note)
        except BadValueError as bad:
            self.error(row, bad.message, bad.hint)
            return None

    def _spec(self, section: Section) -> None:
        """Read [Model Spec]."""
        self._subparameters(section, _MODEL_SPEC)

    def _reference(self, section: Section) -> None:
        """Read a supply or a reference behind its keyword, or below it."""
        text = " ".join([section.argument, *(line.text for line in section.lines)])
        value = self._triple(named(f"v {text}").words, "V", section.row)
        if value is not None:
            self.found.values[section.keyword] = value

    def _table(self, section: Section) -> None:
        """Read a table of currents."""
        if section.keyword in self.found.tables:
            self.note(section.row, f"[{section.keyword}] is there twice; the first counts", "")
            return
        found = ibis_tables.read(section.lines, ("V", "A"), section.row, self.note, self.error)
        if found is not None:
            self.found.tables[section.keyword] = found

    def _waveform(self, section: Section) -> None:
        """Read a waveform and its fixture."""
        rows: list[Line] = []
        stated: dict[str, float] = {}
        for line in section.lines:
            name, words = named(line.text)
            if name in _FIXTURE:
                try:
                    stated[name] = one(words, _FIXTURE[name], line.row, self.note)
                except BadValueError as bad:
                    self.error(line.row, bad.message, bad.hint)
            else:
                rows.append(line)
        found = ibis_tables.read(rows, ("s", "V"), section.row, self.note, self.error)
        ohm, volt = stated.get("r_fixture", nan), stated.get("v_fixture", nan)
        if not LOADS_OHM[0] <= ohm <= LOADS_OHM[1] or isnan(volt):
            hint = "R_fixture lies between 0.1 ohm and 1 Mohm"
            self.error(section.row, "the waveform needs R_fixture and V_fixture", hint)
        elif found is not None:
            self.found.waveforms.append(
                Waveform(
                    rows=found,
                    rising=section.keyword.startswith("rising"),
                    resistance_ohm=ohm,
                    voltage_v=Triple(
                        volt, stated.get("v_fixture_min", volt), stated.get("v_fixture_max", volt)
                    ),
                    capacitance_f=stated.get("c_fixture", 0.0),
                    inductance_h=stated.get("l_fixture", 0.0),
                    beyond_package=any(stated.get(key) for key in ("r_dut", "l_dut", "c_dut")),
                )
            )

    def _ramp(self, section: Section) -> None:
        """Read [Ramp]: voltage over time in three columns for both edges, and its load."""
        load = DEFAULT_LOAD_OHM
        edges = {"dv/dt_r": (Triple(), Triple()), "dv/dt_f": (Triple(), Triple())}
        for line in section.lines:
            entry = _slopes(line.text)
            if entry.name in edges:
                edges[entry.name] = self._slope(entry.words, line.row)
            elif entry.name == "r_load":
                value = self._triple(entry.words, "ohm", line.row)
                load = value.typ if value is not None else load
        (rise_v, rise_s), (fall_v, fall_s) = edges.values()
        if not LOADS_OHM[0] <= load <= LOADS_OHM[1]:
            self.error(section.row, f"R_load of {load:g} ohm is no load", "")
        self.found.ramp = Ramp(
            rise_v=rise_v,
            rise_s=rise_s,
            fall_v=fall_v,
            fall_s=fall_s,
            load_ohm=load,
            row=section.row,
        )

    def _slope(self, words: list[str], row: int) -> tuple[Triple, Triple]:
        """Read volts over seconds in three columns."""
        parts = [word.partition("/") for word in words[:3]]
        if parts and parts[0][0].upper() == "NA":
            return Triple(), Triple()
        if any(not cut and volt.upper() != "NA" for volt, cut, _ in parts):
            self.error(row, "a slope is written volts/seconds", "write it like 1.2/0.4n")
            return Triple(), Triple()
        volts = self._triple([volt for volt, _, _ in parts], "V", row)
        seconds = self._triple([second or "NA" for _, _, second in parts], "s", row)
        if volts is None or seconds is None:
            return Triple(), Triple()
        if any(value <= 0 for value in (*volts, *seconds)):
            self.error(row, "a slope has a voltage and a time above 0", "")
        return volts, seconds


def _slopes(text: str) -> Named:
    """Split a line of [Ramp]; blanks around a slash do not count."""
    name, _, rest = text.replace("=", " ").strip().partition(" ")
    return Named(name.lower(), named("x " + "/".join(p.strip() for p in rest.split("/"))).words)


def _sum(parts: list[Triple]) -> Triple:
    """Add the parts of C_comp; NaN without any."""
    if not parts:
        return Triple()
    return Triple(*(sum(column) for column in zip(*(p.filled() for p in parts), strict=True)))


def _references(values: dict[str, Triple]) -> dict[str, Triple]:
    """Return what each table's voltage counts from: the supply and 0 V without a keyword."""
    supply = values.get("voltage range", Triple())
    ground = Triple(0.0, 0.0, 0.0)
    defaults = {"pullup": supply, "power clamp": supply, "pulldown": ground, "gnd clamp": ground}
    return {
        table: values.get(f"{table} reference", default).filled()
        for table, default in defaults.items()
    }


_MODEL = {
    "c_comp": "F",
    **dict.fromkeys(PARTS, "F"),
    "vinl": "V",
    "vinh": "V",
}
_MODEL_SPEC = dict.fromkeys(LEVELS, "V")
_FIXTURE = {
    "r_fixture": "ohm",
    "v_fixture": "V",
    "v_fixture_min": "V",
    "v_fixture_max": "V",
    "c_fixture": "F",
    "l_fixture": "H",
    "r_dut": "ohm",
    "l_dut": "H",
    "c_dut": "F",
}
_READERS: dict[str, Callable[[ModelReader, Section], None]] = {
    "model spec": ModelReader._spec,
    "ramp": ModelReader._ramp,
    "rising waveform": ModelReader._waveform,
    "falling waveform": ModelReader._waveform,
    **dict.fromkeys(REFERENCES, ModelReader._reference),
    **dict.fromkeys(TABLES, ModelReader._table),
}
KEYWORDS = frozenset({*_READERS, *BESIDE})
