"""Emission of every candidate against the budget: limit less margin, at every judged line.

What does not depend on driver and resistor is worked out once per net and frequency;
a candidate costs one division and one multiplication per line.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import Board, Cable
from edgeplan.candidates import Candidates, setting_table
from edgeplan.checks import CheckTable, condition_code
from edgeplan.drives import DIRECTIONS
from edgeplan.emission import cable as cable_part
from edgeplan.emission import trace as trace_part
from edgeplan.emission.mechanism import Cable as RadiatingCable
from edgeplan.emission_lines import EmissionLines, lines_of
from edgeplan.emission_target import Target, target_of
from edgeplan.limits import DetectorLine
from edgeplan.net_fields import INNER, fields_per_volt, kind_of
from edgeplan.nets import Nets
from edgeplan.physics.floor_reflection import near_field_factor, site_factor
from edgeplan.physics.network import response
from edgeplan.physics.sources import source_terms, source_weights, stub_chain
from edgeplan.results import Missing
from edgeplan.source_edges import edge_shares
from edgeplan.transfers import Replaced, gaps, of_net, replaced

Array = NDArray[Any]

UNKNOWN, NONE, DECLARED = "unknown", "none", "declared"


@dataclass(frozen=True, slots=True, kw_only=True)
class Passive:
    """What N nets radiate per volt of source, at F lines, before the edge. (N, F)

    ``over_budget`` is level over budget per volt; ``filtered`` the same with a good
    filter on all cables (where nothing is declared about them). ``to_level`` turns a
    level over budget into a field; ``entry`` says which line and detector binds; ``unreached``
    whose stated table, per net, does not reach every judged line; ``measured`` what transfers
    replace, by part, and ``unmeasured`` why one of them leaves a net open.
    """

    lines: EmissionLines
    terms: Array
    over_budget: Array
    filtered: Array | None
    trace: Array
    cable_expected: Array
    cable_up_to: Array
    cable_judged: Array
    cable_error_db: Array
    budget_dbuv_per_m: Array
    entry: Array
    entries: tuple[tuple[str, str, float], ...]
    unreached: tuple[str, ...]
    measured: dict[str, Replaced]
    unmeasured: tuple[tuple[str, Missing] | None, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Radiation:
    """Emission target of a board and its cables; judges candidates.

    ``more_cable_db`` is taken off every cable beside what it states. [dB]
    """

    board: Board
    target: Target
    cables: tuple[Cable, ...]
    cable_state: str
    notes: tuple[str, ...] = ()
    more_cable_db: float = 0.0

    @property
    def cable_count(self) -> int | None:
        """Number of declared cables; None where nothing is declared."""
        return None if self.cable_state == UNKNOWN and not self.cables else len(self.cables)

    def passive(self, nets: Nets) -> Passive:
        """Passive quantities of a block, worked out once.

        Parameters
        ----------
        nets : Nets
            N nets; the result is kept with them.

        Returns
        -------
        Passive
            Fields per volt of source, limits and what binds. [V/A], [dBuV/m]
        """
        if "passive" not in nets.kept:
            nets.kept["passive"] = _passive(self, nets)
        found: Passive = nets.kept["passive"]
        return found

    def judge(
        self, nets: Nets, candidates: Candidates, tolerance: float, *, state: str = "run"
    ) -> CheckTable:
        """Check ``emission`` of every candidate, fast corner. Margin in dB.

        Parameters
        ----------
        nets, candidates : Nets, Candidates
            N nets, C candidates.
        tolerance : float
            Of the series resistor. [-]
        state : {"run", "boot"}
            Which state the candidates' settings belong to.

        Returns
        -------
        CheckTable
            One check, the worst line of every candidate; its parts are in ``extra``.
        """
        passive = self.passive(nets)
        excess = source_levels(nets, candidates, passive, tolerance)
        open_cables = None
        worst = _worst_line(passive.over_budget, excess)
        if passive.filtered is not None:
            open_cables = _worst_line(passive.filtered, excess)
        return _table(nets, passive, worst, open_cables, excess, state)


def radiation_of(board: Board) -> Radiation:
    """Emission target and cables of a board, with what was taken for granted.

    Parameters
    ----------
    board : Board
        As read.

    Returns
    -------
    Radiation
        ``cable_state`` says whether cables are declared, none, or unknown.
    """
    declared = board.file.cable
    notes = []
    if declared is None and board.file.board.no_cables:
        declared = []
    if declared == [] and not board.file.board.no_cables:
        declared = None
    state = DECLARED
    if declared is None:
        state = UNKNOWN
        notes.append("nothing is declared about cables: judged without and with a good filter")
    elif not declared:
        state = NONE
    elif all(_undeclared(c) for c in declared):
        state = UNKNOWN
        notes.append("no cable states a filter: judged without and with a good filter on all")
    else:
        notes += [
            f"cable {c.name}: no filter is stated, 0 dB is taken"
            for c in declared
            if _undeclared(c)
        ]
    notes += [_shield_note(c) for c in declared or () if c.shielded]
    if _all_measured(board):
        notes = []
    if board.file.board.enclosure_attenuation_db:  # a table, or a number that is not 0
        notes.append(_enclosure_note(board))
    return Radiation(
        board=board,
        target=target_of(board),
        cables=tuple(declared or ()),
        cable_state=state,
        notes=tuple(notes),
    )


def _shield_note(cable: Cable) -> str:
    """What a shield is credited: nothing, or what its cable states as attenuation."""
    if cable.attenuation_db is None:
        return f"cable {cable.name}: its shield is not credited"
    return (
        f"cable {cable.name}: shield and filter are credited by the stated attenuation alone "
        f"({cable.provenance}{': ' * bool(cable.source)}{cable.source})"
    )


def _enclosure_note(board: Board) -> str:
    """What the enclosure takes off, and how that is known."""
    facts = board.file.board
    stated = facts.enclosure_attenuation_db
    amount = "its table" if isinstance(stated, list) else f"{stated:g} dB"
    known = f"{facts.enclosure_provenance}{': ' * bool(facts.enclosure_source)}"
    return (
        f"the enclosure takes {amount} off the field of the traces and nothing off the cables "
        f"({known}{facts.enclosure_source})"
    )


def _all_measured(board: Board) -> bool:
    """Whether a measured transfer is in the place of the cables for every judged net."""
    judged = [n.net for n in board.nets if n.kind == "digital"]
    return bool(judged) and all(of_net(board, name, "cable") for name in judged)


def _undeclared(cable: Cable) -> bool:
    """Whether a cable says nothing about a filter; a short floating one needs none."""
    return (
        cable.attenuation_db is None
        and cable.series_impedance_ohm is None
        and not (cable.floating or False)
    )


def source_levels(nets: Nets, candidates: Candidates, passive: Passive, tolerance: float) -> Array:
    """Volts of source spectrum over D at every line, worse of both edges, fast corner. (N, C, F)

    Parameters
    ----------
    nets, candidates : Nets, Candidates
        N nets, C candidates.
    passive : Passive
        Of the same nets.
    tolerance : float
        Of the series resistor. [-]

    Returns
    -------
    numpy.ndarray
        Times a passive field per volt it is that field, (N, C, F). [V]
    """
    found: Array | None = None
    for direction in _edges(nets):
        levels = _one_direction(nets, candidates, passive, tolerance, direction)
        found = levels if found is None else np.maximum(found, levels)
    assert found is not None  # noqa: S101 - there is always an edge
    with np.errstate(invalid="ignore"):
        return np.asarray(found * edge_shares(nets, candidates, passive.lines))


def _edges(nets: Nets) -> Sequence[str]:
    """Output states to judge: one where driving high and low are alike."""
    if all(f.timing == "open-drain" for f in nets.facts):
        return ("falling",)
    alike = all(s.equal_resistance for f in nets.facts for s in f.settings)
    return DIRECTIONS[:1] if alike else DIRECTIONS


def _one_direction(
    nets: Nets, candidates: Candidates, passive: Passive, tolerance: float, direction: str
) -> Array:
    """Source amplitude with edges of no length over |D|. (N, C, F)"""
    at = np.arange(len(nets))[:, None], candidates.setting
    resistance = setting_table(nets, "resistance_ohm", "fast", direction)[at]
    pad = setting_table(nets, "pad_f", "fast", None)[at]
    series = candidates.series_ohm * (1 - tolerance)
    weights = source_weights(resistance, series, pad).astype(np.complex64)
    ratio = np.abs(weights @ passive.terms)
    swing = nets.swing_v["fast"][:, None, None]
    source = swing * passive.lines.per_swing[:, None, :]
    with np.errstate(invalid="ignore"):
        return np.asarray(source / ratio)


def _worst_line(per_volt: Array, levels: Array) -> tuple[Array, Array]:
    """Largest level over budget and its line. (N, C); NaN where a level is not known."""
    over = per_volt[:, None, :] * levels
    line = np.argmax(over, axis=2)
    return np.take_along_axis(over, line[..., None], axis=2)[..., 0], line


def _table(
    nets: Nets,
    passive: Passive,
    worst: tuple[Array, Array],
    filtered: tuple[Array, Array] | None,
    levels: Array,
    state: str,
) -> CheckTable:
    """The check table of the worst line of every candidate."""
    over, line = worst
    rows = np.arange(len(nets))[:, None]
    settled = open_cables = np.zeros(over.shape, dtype=bool)
    if filtered is not None:
        settled = filtered[0] > 1
        open_cables = (over > 1) & ~settled
        over = np.where(settled, filtered[0], over)
        line = np.where(settled, filtered[1], line)
    with np.errstate(divide="ignore"):
        excess_db = 20 * np.log10(over)
    margin = np.where(open_cables, np.nan, -excess_db)
    budget = passive.budget_dbuv_per_m[rows, line]
    at_line = np.take_along_axis(levels, line[..., None], axis=2)[..., 0]
    parts = {
        name: at_line * getattr(passive, name)[rows, line]
        for name in ("trace", "cable_expected", "cable_up_to")
    }
    filter_db = cable_part.undeclared_filter_db(passive.lines.frequency_hz[rows, line])
    credit = np.where(settled, 10 ** (-filter_db / 20), 1.0)  # judged with the filter: shown so
    parts |= {name: parts[name] * credit for name in ("cable_expected", "cable_up_to")}
    inner = np.array([kind_of(f) == INNER for f in nets.facts])[:, None]
    cable_error = passive.cable_error_db[rows, line]
    errors = {
        "trace_error_db": np.where(inner, cable_error, trace_part.MODEL.error_db),
        "cable_error_db": cable_error,
    }
    for name, part in passive.measured.items():
        errors[f"{name}_error_db"] = part.error_or(errors[f"{name}_error_db"])
    error = _error_db(parts["trace"], parts["cable_expected"], **errors)
    because, missing = _reasons(nets, passive, open_cables, levels)
    return CheckTable(
        check="emission",
        wants="slower",
        unit="dB",
        applies=passive.lines.exists.any(axis=1) | ~np.isfinite(passive.lines.toggle_hz),
        value=budget + excess_db,
        limit=budget,
        margin=margin,
        share=1 - 10 ** (-margin / 20),
        condition=np.full(over.shape, condition_code(0, "fast", "rising", state)),
        because=because,
        missing=missing,
        error_low=-error,
        error_high=error,
        extra={
            "frequency_hz": passive.lines.frequency_hz[rows, line],
            "order": passive.lines.number[rows, line],
            "entry": passive.entry[rows, line],
            **errors,
            **parts,
        },
    )


def _error_db(trace: Array, cable: Array, trace_error_db: Array, cable_error_db: Array) -> Array:
    """Stated error of the sum: that of each part by its share of the power. [dB]"""
    power = trace**2 + cable**2
    with np.errstate(invalid="ignore", divide="ignore"):
        mixed = (trace**2 * trace_error_db + cable**2 * cable_error_db) / power
    return np.where(np.isnan(mixed), np.maximum(trace_error_db, cable_error_db), mixed)


def _reasons(
    nets: Nets, passive: Passive, open_cables: Array, levels: Array
) -> tuple[tuple[str, ...], tuple[Missing | None, ...]]:
    """Why emission is undecided, per net: no rate, an inner layer, or cables not declared."""
    because = [""] * len(nets)
    missing: list[Missing | None] = [None] * len(nets)
    for i, f in enumerate(nets.facts):
        if not np.isfinite(passive.lines.toggle_hz[i]):
            because[i] = "neither clock_mhz nor data_mbps is given"
            missing[i] = Missing(value="clock_mhz or data_mbps", of=f"net {f.net.net}")
        elif (gap := passive.unmeasured[i]) is not None:
            because[i], missing[i] = gap
        elif np.isnan(passive.trace[i]).all():
            because[i] = (
                "what the net radiates is not known: no surface layer, or a line without height"
            )
        elif passive.unreached[i]:
            because[i] = f"the table of {passive.unreached[i]} does not reach every judged line"
            missing[i] = Missing(value="attenuation", of=passive.unreached[i])
        elif open_cables[i, 0]:
            needed, frequency_hz = _needed_db(passive, i, levels[i, 0])
            because[i] = f"needs {needed:.1f} dB on the cables at {frequency_hz / 1e6:.0f} MHz"
            missing[i] = Missing(value="cable filter", of="board.toml")
    return tuple(because), tuple(missing)


def _needed_db(passive: Passive, net: int, volts: Array) -> tuple[float, float]:
    """Attenuation on the cables that brings every line to its budget, and which asks most."""
    budget = 10 ** (passive.budget_dbuv_per_m[net] / 20) * 1e-6
    trace, cable = volts * passive.trace[net], volts * passive.cable_judged[net]
    with np.errstate(divide="ignore", invalid="ignore"):
        room = np.sqrt(np.maximum(budget**2 - trace**2, 0.0))
        needed = np.where(volts * passive.over_budget[net] > 1, 20 * np.log10(cable / room), 0.0)
    line = int(np.argmax(needed))
    return float(needed[line]), float(passive.lines.frequency_hz[net, line])


def _unreached(radiation: Radiation, lines: EmissionLines) -> tuple[str, ...]:
    """Whose table, per net, does not reach every judged line; empty where all do."""
    enclosure = 20 * np.log10(_enclosure(radiation.board, lines.frequency_hz))
    stated = [(f"cable {c.name}", _attenuation_db(c, lines.frequency_hz)) for c in radiation.cables]
    names = [""] * len(lines.exists)
    for name, attenuation_db in [*stated, ("the enclosure", enclosure)]:
        for i in np.flatnonzero((np.isnan(attenuation_db) & lines.exists).any(axis=1)):
            names[i] = names[i] or name
    return tuple(names)


def _passive(radiation: Radiation, nets: Nets) -> Passive:
    """Work out what a block of nets radiates per volt of source."""
    lines = lines_of(nets.facts, radiation.target)
    terms = _network(nets, lines.frequency_hz)
    cables = _cables(radiation, lines.frequency_hz)
    trace, envelope = fields_per_volt(radiation.board, cables, nets, lines.frequency_hz)
    trace = trace * _enclosure(radiation.board, lines.frequency_hz)
    offset_db = cable_part.expected_offset_db(lines.frequency_hz, radiation.cable_count)
    expected = envelope * 10 ** (offset_db / 20)
    up_to = envelope * 10 ** (cable_part.up_to_offset_db(radiation.cable_count) / 20)
    judged = up_to if radiation.target.statistic == "worst-case" else expected
    measured = replaced(radiation.board, nets.facts, lines.frequency_hz)
    fields = _Fields(trace=trace, judged=judged, expected=expected, up_to=up_to, measured=measured)
    return _against_budget(radiation, lines, terms, fields)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Fields:
    """Distance times field per volt at node 0's source, by part. (N, F) [V/V]"""

    trace: Array
    judged: Array
    expected: Array
    up_to: Array
    measured: dict[str, Replaced]


def _against_budget(
    radiation: Radiation, lines: EmissionLines, terms: Array, fields: _Fields
) -> Passive:
    """Each line and detector that holds at a frequency, and the one that binds."""
    target = radiation.target
    shape = lines.frequency_hz.shape
    best = np.zeros(shape)
    names = ("trace", "expected", "up_to", "judged", "filtered", "budget")
    found = {name: np.zeros(shape) for name in names}
    entry = np.zeros(shape, dtype=int)
    entries = target.at(lines.frequency_hz)
    for k, limit in enumerate(entries):
        stated = np.isfinite(limit.level_dbuv_per_m) & lines.exists
        budget_db = limit.level_dbuv_per_m - target.margin_db
        budget = 10 ** (budget_db / 20) * 1e-6
        level = _received(fields, lines, limit)
        over = np.hypot(level["trace"], level["judged"]) / budget
        take = stated & ~(over <= best) & ~np.isnan(best)  # what is not known stays so
        best = np.where(take, over, best)
        level["filtered"] = np.hypot(level["trace"], level["filtered"]) / budget
        for name, value in (level | {"budget": budget_db}).items():
            found[name] = np.where(take, value, found[name])
        entry = np.where(take, k, entry)
    return Passive(
        lines=lines,
        terms=terms,
        over_budget=best,
        filtered=found["filtered"] if radiation.cable_state == UNKNOWN else None,
        trace=found["trace"],
        cable_expected=found["expected"],
        cable_up_to=found["up_to"],
        cable_judged=found["judged"],
        cable_error_db=cable_part.error_db(lines.frequency_hz, radiation.cable_count),
        budget_dbuv_per_m=found["budget"],
        entry=entry,
        entries=tuple((e.limit_id, e.detector, e.distance_m) for e in entries),
        unreached=_unreached(radiation, lines),
        measured=fields.measured,
        unmeasured=tuple(gaps(fields.measured, lines, target)),
    )


def _received(fields: _Fields, lines: EmissionLines, limit: DetectorLine) -> dict[str, Array]:
    """What the receiver of a limit line shows of each part per volt of source, rms. (N, F)"""
    frequency_hz, distance_m = lines.frequency_hz, limit.distance_m
    read_db = lines.detector_db(limit.detector, limit.bandwidth_hz, limit.limit_id)
    detector = 10 ** (read_db / 20)
    shown = detector * site_factor(frequency_hz, distance_m) / (np.sqrt(2) * distance_m)
    credit = 10 ** (-cable_part.undeclared_filter_db(frequency_hz) / 20)
    trace = fields.trace * near_field_factor(frequency_hz, distance_m) * shown
    cable = {
        "expected": fields.expected * shown,
        "up_to": fields.up_to * shown,
        "judged": fields.judged * shown,
        "filtered": fields.judged * shown * credit,
    }
    measured = fields.measured
    return {"trace": measured["trace"].instead(trace, detector, distance_m)} | {
        name: measured["cable"].instead(level, detector, distance_m)
        for name, level in cable.items()
    }


def _network(nets: Nets, frequency_hz: Array) -> Array:
    """Terms of D at the judged lines, fast corner. (N, 6, F)"""
    trees = nets.trees["fast"]
    s = 2j * np.pi * frequency_hz
    terms = np.empty((len(nets), 6, frequency_hz.shape[1]), dtype=np.complex64)
    for index in trees.shapes():
        group = trees.take(index)
        rows = np.arange(len(index))
        admittance = response(group, s[index]).admittance
        chain = stub_chain(group, s[index], rows) if np.any(group.stub_length_m > 0) else None
        terms[index] = source_terms(admittance, s[index], chain=chain)
    return terms


def _cables(radiation: Radiation, frequency_hz: Array) -> tuple[RadiatingCable, ...]:
    """Cables with their attenuation at the judged lines; assumed ones if nothing is declared."""
    more_db = radiation.more_cable_db
    if radiation.cable_count is None:
        return tuple(replace(c, attenuation_db=more_db) for c in cable_part.UNDECLARED)
    return tuple(
        RadiatingCable(
            length_m=c.length_m,
            attenuation_db=_attenuation_db(c, frequency_hz) + more_db,
            floating=bool(c.floating),
        )
        for c in radiation.cables
    )


def _attenuation_db(cable: Cable, frequency_hz: Array) -> Array:
    """Stated attenuation, or the credit of the filter part; never extrapolated. [dB]"""
    if cable.attenuation_db is not None:
        return cable_part.table_at(frequency_hz, cable.attenuation_db)
    if cable.series_impedance_ohm is not None:
        table = cable.series_impedance_ohm
        return cable_part.filter_credit_db(cable_part.table_at(frequency_hz, table))
    return np.zeros(frequency_hz.shape)


def _enclosure(board: Board, frequency_hz: Array) -> Array:
    """Factor of the enclosure on the trace's own field; cables leave it and keep theirs."""
    stated = board.file.board.enclosure_attenuation_db
    return np.asarray(10 ** (-cable_part.table_at(frequency_hz, stated) / 20))
