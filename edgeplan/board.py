"""Records as the user describes a board: SI inside, the user's own keys outside.

Every record is frozen and refuses keys nobody knows.  Field names end in their
SI unit; the alias is the key a person writes in ``board.toml`` or the column of
``nets.csv`` without its unit.
"""

from datetime import date
from typing import Annotated, Any, Generic, Literal, TypeVar

from pydantic import AliasChoices, BaseModel, ConfigDict, Field, model_validator

from edgeplan.units import (
    Capacitance,
    Current,
    Decibel,
    Frequency,
    Length,
    Rate,
    Resistance,
    Share,
    Time,
    Voltage,
    VoltageOrShare,
)

Quantity = TypeVar("Quantity")
Duration = Annotated[Time, Field(gt=0)]
Output = Annotated[Resistance, Field(gt=0)]
Supply = Annotated[Voltage, Field(gt=0)]
BoardLength = Annotated[Length, Field(gt=0)]

Provenance = Literal["model", "datasheet", "measured", "bound", "assumed", "memory"]
TimingClass = Literal[
    "common-clock", "source-synchronous", "clock", "strobe", "asynchronous", "open-drain"
]
Activity = Literal["clock", "random", "pattern"]
SiteKind = Literal["fitted", "link", "possible", "none"]
Side = Literal["left", "right", "top", "bottom"]


class Record(BaseModel):
    """Never changes once read; a key nobody knows is an error."""

    model_config = ConfigDict(frozen=True, extra="forbid", validate_by_name=True)


class Range(Record, Generic[Quantity]):
    """Minimum, typical and maximum of one quantity; any of them may be missing.

    A single value is the typical one: it labels, it never decides a corner
    unless a spread is stated beside it.
    """

    min: Quantity | None = None
    typ: Quantity | None = None
    max: Quantity | None = None

    @model_validator(mode="before")
    @classmethod
    def _single_value_is_typical(cls, value: Any) -> Any:
        return value if isinstance(value, dict | Range) else {"typ": value}


class Layer(Record):
    """One layer of the stack, top first."""

    layer: str
    kind: Literal["signal", "plane", "dielectric"]
    thickness_m: Length = Field(alias="thickness", gt=0)
    permittivity: float | None = Field(alias="er", default=None, ge=1, le=128)
    loss_tangent: float = Field(default=0.02, ge=0, lt=1)
    z0_ohm: Resistance | None = Field(alias="z0", default=None, gt=0)
    z0_width_m: Length | None = Field(alias="z0_width", default=None, gt=0)

    @model_validator(mode="after")
    def _dielectric_needs_permittivity(self) -> "Layer":
        if self.kind == "dielectric" and self.permittivity is None:
            raise ValueError("a dielectric layer needs er, for example er = 4.2")
        return self


AttenuationTable = list[tuple[Frequency, Decibel]]
ImpedanceTable = list[tuple[Frequency, Resistance]]


class Cable(Record):
    """One cable on the board, with what its filter part is worth."""

    name: str
    side: Side | None = None
    length_m: Length = Field(alias="length", gt=0)
    shielded: bool = False
    attenuation_db: Decibel | AttenuationTable | None = Field(alias="attenuation", default=None)
    series_impedance_ohm: Resistance | ImpedanceTable | None = Field(
        alias="series_impedance", default=None
    )
    floating: bool | None = None
    source: str = ""
    provenance: Provenance = "datasheet"


class SpreadClock(Record):
    """A sweep of a clock's frequency on purpose; the width is the whole of it."""

    width: Share = Field(gt=0, le=0.1)
    rate_hz: Frequency = Field(alias="rate", gt=0)
    profile: Literal["triangle", "other"]


class ClockSource(Record):
    """Nets whose activity comes from one source and adds in amplitude."""

    name: str
    nets: list[str]
    spread: SpreadClock | None = None


class Transfer(Record):
    """A measured transfer in the place of a mechanism, and who measured it how."""

    file: str
    replaces: Literal["trace", "cable"]
    nets: list[str] = Field(default=["*"], min_length=1)
    distance_m: Length = Field(alias="distance", gt=0)
    antenna_factor: str | None = None
    error_db: Decibel = Field(alias="error", default=4.0, ge=0)
    source: str
    provenance: Provenance = "measured"


class MeasuredTransfer(Record):
    """A transfer with its tables as read: pairs of frequency [Hz] and level [dB]."""

    stated: Transfer
    rows: tuple[tuple[float, float], ...]
    antenna_factor: tuple[tuple[float, float], ...] = ()


class BoardFacts(Record):
    """What is true of the whole board."""

    name: str
    revision: str = ""
    size_m: tuple[BoardLength, BoardLength] = Field(alias="size")
    highest_internal_frequency_hz: Frequency | None = Field(
        alias="highest_internal_frequency", default=None, gt=0
    )
    enclosure_attenuation_db: Decibel | AttenuationTable = Field(
        alias="enclosure_attenuation", default=0.0
    )
    enclosure_source: str = ""
    enclosure_provenance: Provenance = "datasheet"
    no_cables: bool = False


class EmissionTarget(Record):
    """Limit lines, margin and the level that is judged."""

    limits: list[str] = Field(min_length=1)
    margin_db: Decibel = Field(alias="margin", default=6.0, ge=0)
    statistic: Literal["expected", "worst-case"] = "expected"
    limit_files: list[str] = Field(default_factory=list)


class Resistors(Record):
    """Values a series resistor may take."""

    series: Literal["E3", "E6", "E12", "E24", "E48", "E96", "E192"] = "E12"
    values_ohm: list[Resistance] | None = Field(alias="values", default=None)
    lowest_ohm: Resistance = Field(alias="lowest", default=10.0, gt=0)
    highest_ohm: Resistance = Field(alias="highest", default=470.0, gt=0)
    tolerance: Share = Field(default=0.05, ge=0, lt=1)

    @model_validator(mode="after")
    def _lowest_is_not_above_highest(self) -> "Resistors":
        if self.lowest_ohm > self.highest_ohm:
            raise ValueError("lowest is above highest: no value lies between them")
        return self


class Columns(Record):
    """How the headers of an exported list map to ours."""

    rename: dict[str, str] = Field(default_factory=dict)
    ignore: list[str] = Field(default_factory=list)


class Policy(Record):
    """What an undecided net does to the exit code."""

    undecided: Literal["fail", "warn"] = "fail"


class ClockToOutput(Record):
    """Clock-to-output delay of a driver and the setting it is stated for."""

    min_s: Time | None = Field(alias="min", default=None)
    max_s: Time | None = Field(alias="max", default=None)
    setting: str | None = None


class TestLoad(Record):
    """The load a clock-to-output delay is stated into."""

    __test__ = False

    capacitance_f: Capacitance = Field(alias="capacitance", ge=0)
    level_v: Voltage = Field(alias="level")
    resistance_ohm: Resistance | None = Field(alias="resistance", default=None, gt=0)
    to_v: Voltage | None = Field(alias="to", default=None)


class Direction(Record):
    """Timing of one driver of an interface; setup and hold are those of its receivers."""

    driver: str
    clock_to_output: ClockToOutput | None = None
    test_load: TestLoad | None = None
    setup_s: Time | None = Field(alias="setup", default=None)
    hold_s: Time | None = Field(alias="hold", default=None)
    valid_before_s: Time | None = Field(alias="valid_before", default=None)
    valid_after_s: Time | None = Field(alias="valid_after", default=None)


class Interface(Record):
    """A group of nets with one timing class, one level family and one supply."""

    name: str
    timing: TimingClass = Field(alias="class")
    clock_net: str | None = None
    rate_hz: Frequency | None = Field(alias="rate", default=None, gt=0)
    levels: str
    supply_v: Range[Supply] = Field(alias="supply")
    direction: list[Direction] = Field(default_factory=list)
    skew_s: Time = Field(alias="skew", default=0.0, ge=0)
    jitter_s: Time = Field(alias="jitter", default=0.0, ge=0)
    crosstalk_s: Time = Field(alias="crosstalk", default=0.0, ge=0)
    deadline_s: Time | None = Field(alias="deadline", default=None, gt=0)
    shortest_pulse_s: Time | None = Field(alias="shortest_pulse", default=None, gt=0)
    duty: Share = Field(default=0.5, gt=0, lt=1)
    duty_tolerance: Share = Field(default=0.0, ge=0, lt=0.5)
    edge_skew_s: Time = Field(alias="edge_skew", default=0.0, ge=0)
    may_spread: bool = True
    duty_distortion: Share | None = Field(default=None, gt=0, lt=0.5)
    noise_v: Voltage | None = Field(alias="noise", default=None, gt=0)
    jitter_limit_s: Time | None = Field(alias="jitter_limit", default=None, gt=0)
    sink_current_a: Current | None = Field(alias="sink_current", default=None, gt=0)
    output_low_v: Voltage | None = Field(alias="output_low", default=None, ge=0)


class Setting(Record):
    """One programmable output state of a driver: resistance and edge are two knobs."""

    setting: str
    resistance_ohm: Range[Output] | None = Field(alias="resistance", default=None)
    resistance_up_ohm: Range[Output] | None = Field(alias="resistance_up", default=None)
    resistance_down_ohm: Range[Output] | None = Field(alias="resistance_down", default=None)
    edge_s: Range[Duration] | None = Field(alias="edge", default=None)
    edge_up_s: Range[Duration] | None = Field(alias="edge_up", default=None)
    edge_down_s: Range[Duration] | None = Field(alias="edge_down", default=None)
    edge_levels: Literal["10-90", "20-80", "30-70", "0-100"] = "10-90"
    edge_shape: Literal["trapezoid", "raised-cosine"] = "trapezoid"
    capacitance_f: Capacitance | Range[Capacitance] | None = Field(
        alias="capacitance", default=None
    )
    spread: Share | None = Field(default=None, gt=0, lt=1)
    model: str | None = None
    source: str = ""
    provenance: Provenance = "datasheet"

    def provenance_of(self, field: str) -> Provenance:  # noqa: ARG002 - all fields share it
        """Where the value of one field comes from."""
        return self.provenance


class ModelledSetting(Setting):
    """A setting of which a model gave some fields; those are named in ``modelled``."""

    modelled: frozenset[str] = frozenset()

    def provenance_of(self, field: str) -> Provenance:
        """Where the value of one field comes from."""
        return "model" if field in self.modelled else self.provenance


class IbisFile(Record):
    """Where a driver's models stand, and the line their tables are read at."""

    file: str
    component: str | None = None
    impedance_ohm: Resistance = Field(alias="impedance", default=50.0, gt=0)


class IbisInput(Record):
    """Where an input's model stands."""

    file: str
    model: str
    component: str | None = None


class Driver(Record):
    """An output of a part, with every setting it can take."""

    name: str
    programmable: bool = False
    settings: list[Setting] = Field(min_length=1)
    ibis: IbisFile | None = None
    source: str = ""


class LongestTransition(Record):
    """Longest transition an input accepts, between stated levels."""

    time_s: Time = Field(alias="time", gt=0)
    levels: Literal["10-90", "20-80", "30-70", "vil-vih"] = "10-90"


class Receiver(Record):
    """An input of a part."""

    name: str
    capacitance_f: Capacitance | Range[Capacitance] | None = Field(
        alias="capacitance", default=None
    )
    ibis: IbisInput | None = None
    longest_transition: LongestTransition | None = None
    overshoot: VoltageOrShare | None = None
    levels: str | None = None
    source: str = ""

    @model_validator(mode="after")
    def _capacitance_or_model(self) -> "Receiver":
        if self.capacitance_f is None and self.ibis is None:
            raise ValueError('an input needs its capacitance, for example capacitance = "4.5 pF"')
        return self


class LevelFamily(Record):
    """Thresholds that no shipped level family has."""

    name: str
    vil_v: Voltage = Field(alias="vil")
    vih_v: Voltage = Field(alias="vih")
    source: str = ""


class Group(Record):
    """Values for every net whose name matches; a row's own cell wins."""

    nets: str
    interface: str | None = None
    driver: str | None = None
    receiver: str | None = None
    setting: str | None = None
    bank: str | None = None
    layer: str | None = None
    activity: Activity | None = None
    clock_hz: Frequency | None = Field(alias="clock", default=None, gt=0)
    data_bps: Rate | None = Field(alias="data", default=None, gt=0)
    pattern_bits: int | None = Field(default=None, ge=2)
    burst_length_s: Time | None = Field(alias="burst_length", default=None, gt=0)
    burst_period_s: Time | None = Field(alias="burst_period", default=None, gt=0)
    width_m: Length | None = Field(alias="width", default=None, gt=0)
    kind: Literal["digital", "differential", "analog", "power"] | None = None
    site: SiteKind | None = None


class Pair(Record):
    """Two nets that carry one differential signal."""

    nets: tuple[str, str]


class Waiver(Record):
    """A finding that somebody accepts until a day."""

    rule: str
    net: str
    until: date
    by: str
    reason: str
    evidence: str = ""


class Point(Record):
    """Where a record stands in an input file; rows count from 1."""

    file: str
    row: int


class Net(Record):
    """One row of the net list after groups and layers were put together."""

    net: str
    far_net: str | None = None
    at: Point
    kind: Literal["digital", "differential", "analog", "power"] = "digital"
    interface: str | None = None
    activity: Activity | None = None
    clock_hz: float | None = None
    data_bps: float | None = None
    pattern_bits: int | None = None
    burst_length_s: float | None = None
    burst_period_s: float | None = None
    driver: tuple[str, ...] = ()
    driver_pin: tuple[str, ...] = ()
    setting: tuple[str, ...] = ()
    setting_boot: tuple[str, ...] = ()
    setting_fixed: bool = False
    bank: tuple[str, ...] = ()
    resistor: str | None = None
    resistor_ohm: float | None = None
    site: SiteKind = "none"
    array: str | None = None
    site_distance_m: float | None = None
    receiver: tuple[str, ...] = ()
    receiver_pin: tuple[str, ...] = ()
    length_m: float | None = None
    layer: str | None = None
    layer_lengths_m: tuple[tuple[str, float, float | None], ...] = ()
    width_m: float | None = None
    side_distance_m: float | None = None
    pull_up: str | None = None
    pull_up_ohm: float | None = None
    bus_capacitance_f: float | None = None


class RouteSegment(Record):
    """One straight piece of a routed net."""

    net: str
    at: Point
    start: str = Field(validation_alias=AliasChoices("from", "start"))
    end: str = Field(validation_alias=AliasChoices("to", "end"))
    length_m: float
    layer: str
    width_m: float | None = None
    start_m: tuple[float, float] | None = None
    end_m: tuple[float, float] | None = None


class BoardFile(Record):
    """Everything ``board.toml`` may hold, as written (lists of tables by their singular name)."""

    stack: list[Layer] = Field(min_length=1)
    cable: list[Cable] | None = None
    transfer: list[Transfer] = Field(default_factory=list)
    clock_source: list[ClockSource] = Field(default_factory=list)
    board: BoardFacts
    emission: EmissionTarget
    resistors: Resistors = Field(default_factory=Resistors)
    columns: Columns = Field(default_factory=Columns)
    policy: Policy = Field(default_factory=Policy)
    interface: list[Interface] = Field(default_factory=list)
    driver: list[Driver] = Field(default_factory=list)
    receiver: list[Receiver] = Field(default_factory=list)
    level: list[LevelFamily] = Field(default_factory=list)
    group: list[Group] = Field(default_factory=list)
    pair: list[Pair] = Field(default_factory=list)
    impedance: dict[str, list[tuple[Length, Resistance]]] = Field(default_factory=dict)
    waiver: list[Waiver] = Field(default_factory=list)


class InputFile(Record):
    """An input as it was read: its path inside the board folder and its hash."""

    path: str
    sha256: str


class Board(Record):
    """A whole board folder, read and validated."""

    file: BoardFile
    nets: tuple[Net, ...]
    routes: tuple[RouteSegment, ...] = ()
    user_limits: tuple[Any, ...] = ()
    transfers: tuple[MeasuredTransfer, ...] = ()
    inputs: tuple[InputFile, ...] = ()
    notes: tuple[Annotated[str, Field(description="printed under assumptions")], ...] = ()
