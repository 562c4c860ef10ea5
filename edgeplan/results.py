"""The results record: everything a report, a script or a later comparison may read.

Names are those of the JSON file.  All numbers are SI except decibels, which say so.
"""

from dataclasses import dataclass, field
from typing import Literal

Verdict = Literal["inside", "too fast", "too slow", "no window", "undecided", "not judged"]
Corner = Literal["slow", "typical", "fast"]

SCHEMA = "edgeplan/results/1"
# Rules whose findings are listed and do not make the exit code 1: what they name is not judged.
PLANE_CHANGES = "return-plane-changes"
INNER_OUT_OF_RANGE = "inner-layer-out-of-range"
BEYOND_MODEL = (PLANE_CHANGES, INNER_OUT_OF_RANGE)
VERDICTS: tuple[Verdict, ...] = (
    "inside",
    "too fast",
    "too slow",
    "no window",
    "undecided",
    "not judged",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Tool:
    """The program that made the record."""

    version: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Input:
    """An input file by its path inside the board folder."""

    path: str
    sha256: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """File and row of an input; rows count from 1."""

    file: str
    row: int


@dataclass(frozen=True, slots=True, kw_only=True)
class TargetSummary:
    """What emission is judged against."""

    limits: list[str]
    margin_db: float
    statistic: str
    highest_hz: float
    highest_rule: str
    verified: bool
    unverified: list[str] = field(default_factory=list)


@dataclass(frozen=True, slots=True, kw_only=True)
class Conditions:
    """Corners and states that were judged."""

    corners: list[str]
    states: list[str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """Error of a model on its low and its high side, in the unit of its name's owner."""

    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ModelNote:
    """A model that levels rest on, with its stated error."""

    model: str
    version: int
    error_db: Spread
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Assumption:
    """Something the run took for granted."""

    subject: str
    text: str
    provenance: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Corners:
    """One quantity at the three corners; what is not known is null. [s]"""

    slow: float | None = None
    typical: float | None = None
    fast: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class WindowEnd:
    """One end of a window: an edge of the typical corner, and the check that sets it.

    ``check`` indexes the net's checks.  ``any`` says that nothing was found to
    fail at this end within the scanned range; ``why_none`` says why no edge passes.
    """

    edge_s: float | None
    check: int | None = None
    cause: str = ""
    frequency_hz: float | None = None
    any: bool = False
    why_none: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Window:
    """The span between the two ends, for one state of the net."""

    slowest_allowed: WindowEnd
    fastest_acceptable: WindowEnd


@dataclass(frozen=True, slots=True, kw_only=True)
class CandidateSetting:
    """The setting of one driver pin in one state."""

    driver_pin: str
    state: str
    setting: str
    bank: str = ""
    provenance: str = "datasheet"
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class CandidateResistor:
    """The value at one site."""

    site: str
    value_ohm: float
    array: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Cost:
    """Steps of change, dearest last."""

    setting: int = 0
    value: int = 0
    link_to_value: int = 0
    new_site: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """What a person can change on one net, and how it fared."""

    candidate: int
    settings: list[CandidateSetting]
    resistors: list[CandidateResistor]
    passes: bool
    rejected_by: list[int]
    cost: Cost
    smallest_share: float | None = None
    why_rejected: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """Where and when a check was worst."""

    driver_pin: str = ""
    receiver_pin: str = ""
    state: str = "run"
    corner: str = ""
    edge: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class EmissionPart:
    """One mechanism of an emission level."""

    mechanism: str
    model: str
    expected_dbuv_per_m: float
    up_to_dbuv_per_m: float
    error_db: Spread


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One check of one candidate: value against limit, signed margin, its share and its error.

    ``limit_edge_s`` is the launched edge (typical corner, 10-90 %) at which this check alone
    would just hold; ``wants`` is the side the edge must move to when it fails.
    ``out_of_reach_hz`` are the lines over budget that no edge up to the slowest allowed one
    brings in; ``out_of_reach`` says that the worst line is one of them.
    """

    check: str
    candidate: int
    condition: Condition
    value: float | None
    limit: float | None
    margin: float | None
    unit: str
    margin_share: float | None
    decided: bool
    wants: Literal["faster", "slower"]
    engine: str = "linear"
    binding: bool = False
    error: Spread | None = None
    provenance: list[str] = field(default_factory=list)
    undecided_because: str = ""
    limit_edge_s: float | None = None
    frequency_hz: float | None = None
    order: int | None = None
    detector: str = ""
    out_of_reach: bool = False
    out_of_reach_hz: list[float] = field(default_factory=list)
    parts: list[EmissionPart] = field(default_factory=list)


@dataclass(frozen=True, slots=True, kw_only=True)
class Remedy:
    """A change beyond settings and resistors and how much it closes.

    ``enclosure_db`` is what the enclosure has to give beside the cables.
    """

    remedy: str
    amount: float | None
    unit: str
    enclosure_db: float | None = None
    closes_db: float | None = None
    closes_s: float | None = None
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Missing:
    """A value the verdict waits for; ``settles`` says from which one on the net would be inside."""

    value: str
    of: str
    settles: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class LineNote:
    """The line of a net as computed: impedance, delay, length and where they came from."""

    impedance_ohm: float
    delay_s: float
    length_m: float
    layer: str
    provenance: str
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class InputNote:
    """An input a verdict rests on, with its provenance (shown by explain)."""

    name: str
    value: str
    provenance: str
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """A received waveform at one corner; both lists have one entry per sample. [s], [V]"""

    receiver_pin: str
    corner: str
    edge: str
    state: Literal["now", "after"]
    time_s: list[float]
    volt: list[float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Spectrum:
    """Emission of one net over frequency; a list entry per judged line. [Hz], [dBuV/m]

    The changes belong to the proposal: what its edge and what its current does to each line
    against the net as drawn; empty where nothing changes. [dB]
    """

    state: Literal["now", "after"]
    detector: str
    frequency_hz: list[float]
    order: list[int]
    expected_dbuv_per_m: list[float]
    up_to_dbuv_per_m: list[float]
    trace_dbuv_per_m: list[float]
    cable_dbuv_per_m: list[float]
    limit_dbuv_per_m: list[float]
    change_by_edge_db: list[float] = field(default_factory=list)
    change_by_current_db: list[float] = field(default_factory=list)
    limit_line_hz: list[float] = field(default_factory=list)
    limit_line_dbuv_per_m: list[float] = field(default_factory=list)
    corner_low_hz: float | None = None
    corner_high_hz: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Pictures:
    """What a plot of one net needs; filled by explain, empty elsewhere."""

    waveforms: list[Trace] = field(default_factory=list)
    spectra: list[Spectrum] = field(default_factory=list)
    thresholds_v: dict[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True, kw_only=True)
class MechanismAtLine:
    """One mechanism at one line: its levels, the expected one less and plus the stated error.

    ``power_share`` is its part of the judged power, 0 to 1.
    """

    mechanism: str
    expected_dbuv_per_m: float
    up_to_dbuv_per_m: float
    low_dbuv_per_m: float
    high_dbuv_per_m: float
    power_share: float


@dataclass(frozen=True, slots=True, kw_only=True)
class WhatIf:
    """What one change alone would do to a net's emission, by the models that judge it.

    Level, change and ``under_budget`` are those of the line that binds without the change;
    ``binds_*`` is the worst line with it, its margin negative where it is over the budget.
    Null where the models give no number.
    """

    kind: Literal["proposal", "resistor", "setting", "cable filter", "inner layer"]
    text: str
    level_dbuv_per_m: float | None
    change_db: float | None
    under_budget: bool | None
    binds_hz: float | None = None
    binds_order: int | None = None
    binds_margin_db: float | None = None
    assumption: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class EmissionAtLine:
    """A net's emission at the line that binds, as drawn or with its proposal.

    ``parity`` is odd or even for a harmonic; data have no harmonics but ``in-band power``.
    ``driver_state`` says whether the setting that decides is that of run or of boot. The band
    ``low`` to ``high`` is the level with the stated error, null while the check is undecided.
    """

    state: Literal["now", "after"]
    frequency_hz: float
    order: int | None
    parity: Literal["odd", "even", "in-band power"]
    detector: str
    driver_state: str
    limit_dbuv_per_m: float
    budget_dbuv_per_m: float
    level_dbuv_per_m: float
    low_dbuv_per_m: float | None
    high_dbuv_per_m: float | None
    mechanisms: list[MechanismAtLine]
    what_if: list[WhatIf] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)


@dataclass(frozen=True, slots=True, kw_only=True)
class NetResult:
    """Everything known about one judged net."""

    net: str
    aliases: list[str]
    interface: str
    timing_class: str
    at: Place
    verdict: Verdict
    verdict_after: Verdict
    borderline: bool
    borderline_after: bool
    undecided_because: list[str]
    edge_levels: str
    edge_now_s: Corners
    edge_after_s: Corners
    window_now: Window
    window_after: Window
    candidate_now: int
    proposal: int
    change: str
    proposal_text: str
    what_binds: str
    transition_now_s: float | None = None
    transition_after_s: float | None = None
    missing: list[Missing] = field(default_factory=list)
    line: LineNote | None = None
    inputs: list[InputNote] = field(default_factory=list)
    candidates: list[Candidate] = field(default_factory=list)
    checks: list[Check] = field(default_factory=list)
    remedies: list[Remedy] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    emission_at_line: list[EmissionAtLine] = field(default_factory=list)
    pictures: Pictures | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class NotJudged:
    """A net outside the question, and why."""

    net: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Contributor:
    """A net's share of one frequency of the board."""

    net: str
    share: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardLine:
    """The sum of all nets at one frequency."""

    frequency_hz: float
    detector: str
    level_dbuv_per_m: float
    budget_dbuv_per_m: float
    sum: str
    contributors: list[Contributor]


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardEmission:
    """Sums of the board as proposed, worst first."""

    lines: list[BoardLine] = field(default_factory=list)
    lines_now: list[BoardLine] = field(default_factory=list)


@dataclass(frozen=True, slots=True, kw_only=True)
class ValueCount:
    """How often a resistor value is fitted after the proposals, and now."""

    value_ohm: float
    count: int
    count_now: int


@dataclass(frozen=True, slots=True, kw_only=True)
class BankChoice:
    """A bank's one setting."""

    bank: str
    setting_now: str
    setting: str
    members: list[str]
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class ArrayChoice:
    """An array's one value."""

    array: str
    value_now_ohm: float | None
    value_ohm: float
    members: list[str]
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """How the proposals were chosen together."""

    scope: str
    status: str
    gap: float
    values: list[ValueCount]
    banks: list[BankChoice]
    arrays: list[ArrayChoice]


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One violated rule on one net; those of `BEYOND_MODEL` do not change the exit code."""

    rule: str
    net: str
    message: str
    fingerprint: str
    waived: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class FillIn:
    """A missing value and the nets it would decide."""

    value: str
    of: str
    nets: list[str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Results:
    """One run."""

    command: str
    tool: Tool
    caution: str
    board: str
    inputs: list[Input]
    emission_target: TargetSummary
    conditions: Conditions
    models: list[ModelNote]
    assumptions: list[Assumption]
    nets: list[NetResult]
    not_judged: list[NotJudged]
    board_emission: BoardEmission
    choice: Choice
    findings: list[Finding]
    totals: dict[str, int]
    totals_after: dict[str, int]
    fill_in: list[FillIn] = field(default_factory=list)
    undecided_policy: str = "fail"
    schema: str = SCHEMA
