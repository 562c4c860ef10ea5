"""Edge of one direction of a driver model: which table of it counts, and what it says."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import isfinite, isnan, nan

from edgeplan.ibis import COLUMNS, Model, Ramp, Rows, Triple, Waveform
from edgeplan.physics.driver_edges import (
    RAISED_COSINE_SHARE,
    Crossings,
    read_transition,
    source_ramp_s,
)
from edgeplan.physics.driver_tables import Curve, curve_at_pin, load_line_ohm, settled_v

CLAMPS = ("power clamp", "gnd clamp")
FROM_ABOVE = ("pullup", "power clamp")
BEYOND_TABLE_V = 1000.0
NEAR_LOAD = 2.0  # a load within this factor of the impedance says the same of an edge
SAME_LOAD = 1.25  # loads within this factor may be compared
NEAR_RAIL = 0.1  # of the supply
# Beyond these [Ramp] is distrusted (common practice; IBIS Open Forum quality checks).
RAMP_TIME, RAMP_SWING = 0.10, 0.05
DISTRUSTED = "distrusted"
END_LEVEL = 0.05  # of the swing, between the end of a waveform and its load line


@dataclass(frozen=True, slots=True, kw_only=True)
class Corner:
    """What one column of a model's tables says about its pad, in both states."""

    curves: Mapping[bool, tuple[Curve, ...]]
    stated: Mapping[bool, bool]
    rails_v: tuple[float, float]
    package_ohm: float
    pad_f: float

    @classmethod
    def of(cls, model: Model, column: str, package_ohm: float) -> "Corner":
        """Gather a column; clamps conduct in either state.

        Parameters
        ----------
        model : Model
            With its tables and supplies.
        column : {"typ", "min", "max"}
            A clamp without this column counts with its typical one.
        package_ohm : float
            Between pad and pin. [ohm]

        Returns
        -------
        Corner
            ``stated`` tells for pulling up (True) and down whether the file has the column.
        """
        curves, stated = {}, {}
        for high, drive in ((True, "pullup"), (False, "pulldown")):
            names = [n for n in (drive, *CLAMPS) if n in model.tables]
            curves[high] = tuple(_curve(model, name, column) for name in names)
            stated[high] = drive in model.tables and model.tables[drive].has(column)
        low, high_v = (getattr(model.reference_v[t], column) for t in ("pulldown", "pullup"))
        return cls(
            curves=curves,
            stated=stated,
            rails_v=(low, high_v),
            package_ohm=package_ohm,
            # C_comp has no corners: minimum and maximum are numbers, the typical one is used
            pad_f=model.capacitance_f.typ,
        )

    def load_v(self, *, high: bool) -> float:
        """Voltage a line rests at before the edge: the opposite supply. [V]"""
        return self.rails_v[0] if high else self.rails_v[1]

    def ohm(self, load_ohm: float, *, high: bool, with_package: bool) -> float:
        """Resistance at a load line; NaN where the column is not stated. [ohm]"""
        if not self.stated[high] or any(isnan(v) for v in self.rails_v):
            return nan
        package = self.package_ohm if with_package else 0.0
        return load_line_ohm(
            self.curves[high], load_ohm, self.rails_v, high=high, package_ohm=package
        )

    def level_v(self, load_ohm: float, load_v: float, *, high: bool) -> float:
        """Where the pad settles into a fixture. [V]"""
        return settled_v(self.curves[high], load_ohm, load_v, self.rails_v, high=high).pin_v

    def pole_s(self, load_ohm: float, load_f: float, *, high: bool) -> float:
        """Time constant of pad and fixture on driver and load in parallel. [s]"""
        own = self.ohm(load_ohm, high=high, with_package=False)
        return (self.pad_f + load_f) * own * load_ohm / (own + load_ohm)


@dataclass(frozen=True, slots=True, kw_only=True)
class Side:
    """One direction of a driver: columns typical, minimum, maximum. [ohm], [s]

    ``edge_s`` is the 10-90 % duration of the source behind the resistance.
    """

    resistance_ohm: Triple
    edge_s: Triple
    source: str
    row: int
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Reading:
    """What one table says of an edge: source durations, shortest and longest, per column."""

    short_s: Triple
    middle_s: Triple
    long_s: Triple
    source: str
    row: int
    rank: tuple[int, float]
    notes: tuple[str, ...] = ()


def _curve(model: Model, name: str, column: str) -> Curve:
    """Return one table of a model over the voltage of the pin.

    A clamp is off beyond the end of its table, which may be the supply itself: its last current
    stays. The slope of its last rows would go on as a resistor that is not there.
    """
    reference = getattr(model.reference_v[name], column)
    at, current = model.tables[name].column(column)
    if name in CLAMPS:
        at, current = (*at, at[-1] + BEYOND_TABLE_V), (*current, current[-1])
    return curve_at_pin(at, current, reference, from_above=name in FROM_ABOVE)


def side(model: Model, corners: Mapping[str, Corner], impedance_ohm: float, *, high: bool) -> Side:
    """Evaluate one direction.

    Parameters
    ----------
    model : Model
        Drives in this direction.
    corners : mapping of str to Corner
        By column.
    impedance_ohm : float
        Of the line. [ohm]
    high : bool
        Whether it pulls up.

    Returns
    -------
    Side
        The waveform whose fixture is nearest to the line counts, then ``[Ramp]`` at a load
        within a factor of two of it, then anything else with a note.
    """
    at_line = [c.ohm(impedance_ohm, high=high, with_package=True) for c in corners.values()]
    notes = [*_extrapolated(corners, impedance_ohm, high=high)]
    readings = [
        _of_waveform(w, corners, impedance_ohm, high=high)
        for w in model.waveforms
        if w.rising == high
    ]
    ramp = model.ramp
    if ramp is not None and not isnan((ramp.rise_s if high else ramp.fall_s).typ):
        readings.append(_of_ramp(model, ramp, corners, impedance_ohm, high=high))
    if not readings:
        word = "rising" if high else "falling"
        notes.append(f"neither a {word} waveform nor [Ramp] states its {word} edge")
        return Side(
            resistance_ohm=Triple(*at_line),
            edge_s=Triple(),
            source="",
            row=model.row,
            notes=tuple(notes),
        )
    best = min(readings, key=lambda reading: reading.rank)
    distrusted = [note for r in readings for note in r.notes if DISTRUSTED in note]
    edge = Triple(best.middle_s.typ, best.long_s.min, best.short_s.max)
    if any(isnan(v) for v in edge):
        notes.append(_why_no_edge(best, edge, high=high))
    return Side(
        resistance_ohm=Triple(*at_line),
        edge_s=Triple(*(RAISED_COSINE_SHARE["10-90"] * v for v in edge)),
        source=best.source,
        row=best.row,
        notes=tuple(dict.fromkeys([*notes, *best.notes, *distrusted])),
    )


def _why_no_edge(best: _Reading, edge: Triple, *, high: bool) -> str:
    """Say which columns give no edge."""
    lost = [name for name, value in zip(COLUMNS, edge, strict=True) if isnan(value)]
    word = "rising" if high else "falling"
    return (
        f"{word} edge, {', '.join(lost)}: line {best.row} states none, or none that could be told "
        "from what the pad's capacitance does alone"
    )


def _extrapolated(
    corners: Mapping[str, Corner], impedance_ohm: float, *, high: bool
) -> Sequence[str]:
    """Say where the load line leaves the tables."""
    for column, corner in corners.items():
        if not corner.stated[high] or any(isnan(v) for v in corner.rails_v):
            continue
        load_v = corner.load_v(high=high)
        settled = settled_v(corner.curves[high], impedance_ohm, load_v, corner.rails_v, high=high)
        if not settled.covered:
            word = "high" if high else "low"
            return [f"driving {word}, {column}: a table ends before the load line meets it"]
    return []


def _of_waveform(
    wave: Waveform, corners: Mapping[str, Corner], impedance_ohm: float, *, high: bool
) -> _Reading:
    """Read a waveform: what the pad shows, less what its capacitance adds."""
    volts = dict(zip(COLUMNS, wave.voltage_v, strict=True))
    ohm, farad = wave.resistance_ohm, wave.capacitance_f
    short, middle, long = {}, {}, {}
    notes: list[str] = []
    where = f"waveform of line {wave.rows.row}"
    for column, corner in corners.items():
        seen = read_column(wave.rows, column)
        pole = corner.pole_s(ohm, farad, high=high)
        ten = float(source_ramp_s(seen.s_10_90, pole, "10-90"))
        twenty = float(source_ramp_s(seen.s_20_80, pole, "20-80"))
        middle[column] = ten
        short[column], long[column] = _span(ten, twenty)
        notes += _end_notes(seen, corner, wave, volts[column], f"{where}, {column}", high=high)
    typical = corners["typ"]
    supply = typical.rails_v[1] - typical.rails_v[0]
    far_rail = abs(wave.voltage_v.typ - typical.load_v(high=high)) > NEAR_RAIL * supply
    if wave.beyond_package:
        notes.append(f"{where} was taken behind R_dut, L_dut or C_dut, which are left out")
    if far_rail:
        notes.append(f"{where} drives away from its fixture's voltage: not what a line does")
    elif _apart(ohm, impedance_ohm) > NEAR_LOAD:
        notes.append(f"{where} has {ohm:g} ohm, the line {impedance_ohm:g} ohm")
    return _Reading(
        short_s=_triple(short),
        middle_s=_triple(middle),
        long_s=_triple(long),
        source=f"waveform, {ohm:g} ohm to {wave.voltage_v.typ:g} V",
        row=wave.rows.row,
        rank=(2 if far_rail else 0, _apart(ohm, impedance_ohm)),
        notes=tuple(notes),
    )


def read_column(rows: Rows, column: str) -> Crossings:
    """Read one column of a waveform; NaN where the file has none.

    Parameters
    ----------
    rows : Rows
        Voltage over time. [s], [V]
    column : {"typ", "min", "max"}
        Which.

    Returns
    -------
    Crossings
        Durations and end levels. [s], [V]
    """
    if not rows.has(column):
        return Crossings(nan, nan, nan, nan, settled=True)
    return read_transition(*rows.column(column))


def _end_notes(
    seen: Crossings, corner: Corner, wave: Waveform, load_v: float, where: str, *, high: bool
) -> list[str]:
    """Say where a waveform has not settled, or settles elsewhere than its load line."""
    if isnan(seen.last_v) or not corner.stated[high]:
        return []
    notes = [] if seen.settled else [f"{where}: has not settled at its end"]
    level_v = corner.level_v(wave.resistance_ohm, load_v, high=high)
    off = abs(seen.last_v - level_v) / max(abs(seen.last_v - seen.first_v), 1e-9)
    if not off <= END_LEVEL:
        notes.append(f"{where}: ends at {seen.last_v:.3g} V, its load line at {level_v:.3g} V")
    return notes


def _of_ramp(
    model: Model, ramp: Ramp, corners: Mapping[str, Corner], impedance_ohm: float, *, high: bool
) -> _Reading:
    """Read [Ramp]: its time counts; where its swing is wrong too, both readings bracket."""
    volts, times = (ramp.rise_v, ramp.rise_s) if high else (ramp.fall_v, ramp.fall_s)
    notes = [
        *_swing_notes(ramp, volts, corners, high=high),
        *_time_notes(model, ramp, times, high=high, rails_v=corners["typ"].rails_v),
    ]
    short, middle, long = {}, {}, {}
    for column, volt, time in zip(COLUMNS, volts, times, strict=True):
        corner = corners[column]
        pole = corner.pole_s(ramp.load_ohm, 0.0, high=high)
        by_slope = time
        if notes:
            by_slope = 0.6 * _swing_v(corner, ramp.load_ohm, high=high) * time / volt
        read = [float(source_ramp_s(t, pole, "20-80")) for t in (time, by_slope)]
        middle[column] = read[0]
        short[column], long[column] = _span(*read)
    far = _apart(ramp.load_ohm, impedance_ohm)
    if far > NEAR_LOAD:
        notes.append(
            f"[Ramp] of line {ramp.row} has R_load {ramp.load_ohm:g} ohm, the line "
            f"{impedance_ohm:g} ohm"
        )
    return _Reading(
        short_s=_triple(short),
        middle_s=_triple(middle),
        long_s=_triple(long),
        source=f"[Ramp], {ramp.load_ohm:g} ohm",
        row=ramp.row,
        rank=(1 if far <= NEAR_LOAD and not notes else 3, far),
        notes=tuple(notes),
    )


def _swing_v(corner: Corner, load_ohm: float, *, high: bool) -> float:
    """Swing into a resistor to the opposite supply, by the load lines of both states. [V]"""
    load_v = corner.load_v(high=high)
    reached = corner.level_v(load_ohm, load_v, high=high)
    return abs(reached - load_v)


def _swing_notes(
    ramp: Ramp, volts: Triple, corners: Mapping[str, Corner], *, high: bool
) -> list[str]:
    """Say where the voltage of [Ramp] is not 60 % of the swing of the load lines."""
    worst, words = 0.0, ""
    for (column, corner), volt in zip(corners.items(), volts, strict=True):
        if isnan(volt) or not corner.stated[high]:
            continue
        wanted = 0.6 * _swing_v(corner, ramp.load_ohm, high=high)
        off = abs(volt - wanted) / wanted if wanted > 0 else nan
        if isfinite(off) and off > max(worst, RAMP_SWING):
            worst, words = off, f"{column} {volt:.3g} V, 60 % of the load lines {wanted:.3g} V"
    if not words:
        return []
    return [f"[Ramp] of line {ramp.row} {DISTRUSTED}: {words}, more than 5 % apart"]


def _time_notes(
    model: Model, ramp: Ramp, times: Triple, *, high: bool, rails_v: tuple[float, float]
) -> list[str]:
    """Say where the time of [Ramp] is not that of the waveform at the same load."""
    load_v = rails_v[0] if high else rails_v[1]
    near = NEAR_RAIL * (rails_v[1] - rails_v[0])
    worst, words = 0.0, ""
    for wave in model.waveforms:
        same = _apart(wave.resistance_ohm, ramp.load_ohm) <= SAME_LOAD
        if wave.rising != high or not same or abs(wave.voltage_v.typ - load_v) > near:
            continue
        for column, time in zip(COLUMNS, times, strict=True):
            seen = read_column(wave.rows, column).s_20_80
            off = abs(time - seen) / seen if seen > 0 else nan
            if isfinite(off) and off > max(worst, RAMP_TIME):
                worst = off
                words = f"{column} {time * 1e9:.3g} ns, waveform of line {wave.rows.row} " + (
                    f"{seen * 1e9:.3g} ns between 20 and 80 %"
                )
    if not words:
        return []
    return [f"[Ramp] of line {ramp.row} {DISTRUSTED}: {words}, more than 10 % apart"]


def _apart(one: float, other: float) -> float:
    """Factor between two loads, 1 or more."""
    return max(one / other, other / one)


def _span(one: float, other: float) -> tuple[float, float]:
    """Return the shorter and the longer; both unknown if one is."""
    return (nan, nan) if isnan(one + other) else (min(one, other), max(one, other))


def _triple(values: Mapping[str, float]) -> Triple:
    """Put values by column into a record."""
    return Triple(values["typ"], values["min"], values["max"])
