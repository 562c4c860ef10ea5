"""Records of a file of I/O buffer models (IBIS, EIA-656): SI inside, NaN where nothing stands.

The order of columns is that of the standard: typical, minimum, maximum.  For electrical data
minimum means weak and slow and maximum strong and fast; for C_comp they are numbers.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from math import isnan, nan

COLUMNS = ("typ", "min", "max")

# Model types by what can drive: both sides, the lower, the upper, none (EIA-656, [Model]).
TWO_SIDED = ("output", "i/o", "3-state")
PULLS_DOWN = ("open_drain", "open_sink", "i/o_open_drain", "i/o_open_sink")
PULLS_UP = ("open_source", "i/o_open_source")
RECEIVES = ("input", "i/o", "i/o_open_drain", "i/o_open_sink", "i/o_open_source")
NOT_READ = (
    "input_ecl",
    "output_ecl",
    "i/o_ecl",
    "3-state_ecl",
    "input_diff",
    "output_diff",
    "i/o_diff",
    "3-state_diff",
    "terminator",
    "series",
    "series_switch",
)
MODEL_TYPES = tuple(dict.fromkeys((*TWO_SIDED, *PULLS_DOWN, *PULLS_UP, *RECEIVES, *NOT_READ)))
NO_MODEL = ("power", "gnd", "nc")


@dataclass(frozen=True, slots=True)
class Triple:
    """One value in the three columns; NaN where a column has none."""

    typ: float = nan
    min: float = nan
    max: float = nan

    def __iter__(self) -> Iterator[float]:
        """Typical, minimum, maximum."""
        return iter((self.typ, self.min, self.max))

    def filled(self) -> "Triple":
        """The typical value stands in for a column that has none.

        Examples
        --------
        >>> Triple(3.3, 3.0).filled()
        Triple(typ=3.3, min=3.0, max=3.3)
        """
        typ, low, high = self
        return Triple(typ, typ if isnan(low) else low, typ if isnan(high) else high)


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """A table: its first column, three columns of values, and the line of its keyword."""

    at: tuple[float, ...]
    typ: tuple[float, ...]
    min: tuple[float, ...]
    max: tuple[float, ...]
    row: int

    def has(self, column: str) -> bool:
        """Tell whether a column states a curve: two values or more."""
        return len([value for value in getattr(self, column) if not isnan(value)]) > 1

    def column(self, column: str) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Places and values of a column; the typical one stands in for one without a curve.

        Cells without a value are passed over: their neighbours are joined.
        """
        values = getattr(self, column) if self.has(column) else self.typ
        pairs = [pair for pair in zip(self.at, values, strict=True) if not isnan(pair[1])]
        places, kept = zip(*pairs, strict=True)
        return places, kept


@dataclass(frozen=True, slots=True, kw_only=True)
class Waveform:
    """Voltage over time at a driver's pad while it switches into a fixture. [s], [V]"""

    rows: Rows
    rising: bool
    resistance_ohm: float
    voltage_v: Triple
    capacitance_f: float = 0.0
    inductance_h: float = 0.0
    beyond_package: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Ramp:
    """Change between 20 and 80 % of the swing into a resistor, and how long it takes."""

    rise_v: Triple
    rise_s: Triple
    fall_v: Triple
    fall_s: Triple
    load_ohm: float
    row: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """One buffer.  Tables by keyword in small letters: "pullup", "gnd clamp" and so on."""

    name: str
    row: int
    kind: str
    capacitance_f: Triple
    reference_v: Mapping[str, Triple]
    tables: Mapping[str, Rows] = field(default_factory=dict)
    ramp: Ramp | None = None
    waveforms: tuple[Waveform, ...] = ()
    input_low_v: Triple = Triple()
    input_high_v: Triple = Triple()
    overshoot_low_v: Triple = Triple()
    overshoot_high_v: Triple = Triple()

    @property
    def drives_high(self) -> bool:
        """Whether it can pull up."""
        return self.kind in TWO_SIDED + PULLS_UP and "pullup" in self.tables

    @property
    def drives_low(self) -> bool:
        """Whether it can pull down."""
        return self.kind in TWO_SIDED + PULLS_DOWN and "pulldown" in self.tables

    @property
    def drives(self) -> bool:
        """Whether it is an output that holds what its type promises."""
        high, low = self.drives_high, self.drives_low
        return (high and low) if self.kind in TWO_SIDED else (high or low)

    @property
    def receives(self) -> bool:
        """Whether it is an input."""
        return self.kind in RECEIVES


@dataclass(frozen=True, slots=True, kw_only=True)
class Pin:
    """One pin of a component: its signal, what it is modelled by, and its own package values."""

    pin: str
    signal: str
    model: str
    row: int
    resistance_ohm: float = nan
    inductance_h: float = nan
    capacitance_f: float = nan


@dataclass(frozen=True, slots=True, kw_only=True)
class Component:
    """One part, or one package of a part."""

    name: str
    row: int
    resistance_ohm: Triple = Triple()
    inductance_h: Triple = Triple()
    capacitance_f: Triple = Triple()
    pins: tuple[Pin, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Selector:
    """Models among which a pin can be switched, with what the file says of each."""

    name: str
    row: int
    entries: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class ModelFile:
    """A whole file; what could not be read is left out."""

    file: str
    sha256: str = ""
    version: str = ""
    components: tuple[Component, ...] = ()
    selectors: Mapping[str, Selector] = field(default_factory=dict)
    models: Mapping[str, Model] = field(default_factory=dict)
    spoilt: frozenset[str] = frozenset()

    def component(self, name: str | None) -> Component | None:
        """Return a component by its name; the only one where no name is given."""
        if name is None:
            return self.components[0] if len(self.components) == 1 else None
        return next((c for c in self.components if c.name.casefold() == name.casefold()), None)

    def models_of(self, pin: Pin) -> tuple[str, ...]:
        """Names of the models a pin may have: those of a selector first, else its own."""
        if pin.model.lower() in NO_MODEL:
            return ()
        if pin.model in self.selectors:
            return tuple(name for name, _ in self.selectors[pin.model].entries)
        return (pin.model,)
