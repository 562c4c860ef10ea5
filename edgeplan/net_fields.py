"""Field of each net per volt behind its series resistor: as routed, straight, or between planes."""

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import Board
from edgeplan.emission import cable as cable_part
from edgeplan.emission import inner_layer
from edgeplan.emission import trace as trace_part
from edgeplan.emission.mechanism import Cable, RadiationInputs
from edgeplan.nets import NetFacts, Nets
from edgeplan.physics.driver_stub import StubPlaces, site_transfer, with_stub
from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.network import Trees, response
from edgeplan.physics.radiation import finite_board_factor
from edgeplan.physics.routed_imbalance import CommonModeVolts, common_mode_per_volt
from edgeplan.physics.routed_radiation import Layout, routed_field_per_volt
from edgeplan.physics.tree_currents import end_states
from edgeplan.stack import Line, surface_line

Array = NDArray[Any]

ROUTED, STRAIGHT, INNER = "routed", "straight", "inner"
FROM_PAD = "routed from the pad"  # a routed net whose line before its resistor has a place
SIDES = ("left", "right", "bottom", "top")


def kind_of(facts: NetFacts) -> str:
    """How the field of a net is worked out.

    A net whose route has positions is summed as drawn; without them it counts as one straight
    trace on its main layer, or as two surface pieces where that layer lies between planes.
    """
    if facts.path.is_placed:
        return ROUTED
    return STRAIGHT if facts.path.main_line.surface else INNER


def remarks(facts: NetFacts) -> list[str]:
    """What was assumed about where a net runs.

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    list of str
        Sentences for the report; empty for a surface net.
    """
    found = []
    if kind_of(facts) == INNER:
        piece = inner_layer.BREAKOUT_M * 1e3
        found.append(f"runs between planes: {piece:g} mm of surface at each end is assumed")
    pairs = {" and ".join(p.line.planes) for p in facts.path.pieces if len(p.line.planes) > 1}
    if pairs:
        found.append(
            f"planes {', '.join(sorted(pairs))} count as joined all along the net; what a cavity "
            "between them radiates is not judged"
        )
    if facts.path.is_placed and facts.path.stub_m > 0 and not has_placed_stub(facts):
        found.append(
            "the line before its resistor has no position in routes.csv and counts for timing only"
        )
    return found


def fields_per_volt(
    board: Board, cables: tuple[Cable, ...] | None, nets: Nets, frequency_hz: Array
) -> tuple[Array, Array]:
    """Distance times field of trace and of cables, per volt behind the series resistor.

    Parameters
    ----------
    board : Board
        Size, stack and the sides its cables leave from.
    cables : tuple of Cable or None
        With their attenuation at the frequencies, ``(N, F)``; None where nothing is declared.
    nets : Nets
        N nets, fast corner.
    frequency_hz : numpy.ndarray
        Judged frequencies, ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray, numpy.ndarray
        Trace, and cables as the envelope over their layouts, ``(N, F)``; NaN where a net's
        surroundings are not known. [V/V]
    """
    trace, cable = np.full((2, *frequency_hz.shape), np.nan)
    ways = {
        ROUTED: _routed,
        FROM_PAD: _routed_from_pad,
        STRAIGHT: _straight,
        INNER: _between_planes,
    }
    kinds = np.array([FROM_PAD if has_placed_stub(f) else kind_of(f) for f in nets.facts])
    for kind, way in ways.items():
        index = np.flatnonzero(kinds == kind)
        if not index.size:
            continue
        own = None if cables is None else tuple(_rows_of(c, index) for c in cables)
        trace[index], cable[index] = way(board, own, nets.take(index), frequency_hz[index])
    return trace, cable


def _rows_of(cable: Cable, index: Array) -> Cable:
    """A cable with its attenuation at the lines of some nets."""
    attenuation = np.asarray(cable.attenuation_db)
    return replace(
        cable, attenuation_db=attenuation[index] if attenuation.ndim == 2 else attenuation
    )


def _column(values: Sequence[float]) -> Array:
    """Values per net as (N, 1)."""
    return np.array(values, dtype=float)[:, None]


def _straight(
    board: Board, cables: tuple[Cable, ...] | None, nets: Nets, frequency_hz: Array
) -> tuple[Array, Array]:
    """Nets as straight traces along the board, with the load at their last receiver."""
    inputs = _straight_inputs(board, nets, frequency_hz)
    forward = _forward_per_volt(nets, frequency_hz)
    trace = trace_part.field_per_forward_ampere(inputs, frequency_hz)
    cable = cable_part.field_per_forward_ampere(replace(inputs, cables=cables), frequency_hz)
    return trace * forward, cable * forward


def _forward_per_volt(nets: Nets, frequency_hz: Array) -> Array:
    """Forward wave of the first segment per volt at node 0. (N, F) [A/V]"""
    trees = nets.trees["fast"]
    s = 2j * np.pi * frequency_hz
    forward = np.empty(frequency_hz.shape)
    for index in trees.shapes():
        group = trees.take(index)
        line = LineConstants(*(c[group.segment_offset[:-1], None] for c in group.line))
        _, characteristic = propagation(s[index], line)
        admittance = response(group, s[index]).admittance
        forward[index] = np.abs(1 / characteristic + admittance) / 2
    return forward


def _straight_inputs(board: Board, nets: Nets, frequency_hz: Array) -> RadiationInputs:
    """Geometry of the nets as straight traces."""
    facts = nets.facts
    size = board.file.board.size_m
    main = [f.path.main_line for f in facts]
    line = LineConstants(
        *(_column([getattr(m, name) for m in main]) for name in LineConstants._fields)
    )
    s = 2j * np.pi * frequency_hz
    gamma, characteristic = propagation(s, line)
    trees = nets.trees["fast"]
    last = trees.segment_offset[:-1] + np.array([f.path.receiver_piece[-1] for f in facts])
    load = s * trees.node_farad[last][:, None] + trees.node_siemens[last][:, None]
    own = 1 / characteristic
    return RadiationInputs(
        length_m=_column([f.path.main_length_m for f in facts]),
        height_m=_column([m.height_m for m in main]),
        permittivity=_column([m.permittivity for m in main]),
        permittivity_effective=_column([m.permittivity_effective for m in main]),
        impedance_ohm=_column([m.impedance_ohm for m in main]),
        side_offset_m=_column([_offset_m(f, 0.5 * min(size)) for f in facts]),
        board_length_m=np.array(max(size)),
        board_width_m=np.array(min(size)),
        load_reflection=(own - load) / (own + load),
        propagation_per_m=gamma,
    )


def _offset_m(facts: NetFacts, half_width_m: float) -> float:
    """Distance of the trace from the board's centre line; centred where nothing is stated."""
    side = facts.net.side_distance_m
    return 0.0 if side is None else max(half_width_m - side, 0.0)


def has_placed_stub(facts: NetFacts) -> bool:
    """Whether the line between driver and series resistor is known and has a place.

    Parameters
    ----------
    facts : NetFacts
        One net.

    Returns
    -------
    bool
        True for routed nets whose stub radiates with them.
    """
    path = facts.path
    return path.is_placed and path.stub_m > 0 and path.pad_m is not None


def _routed(
    board: Board, cables: tuple[Cable, ...] | None, nets: Nets, frequency_hz: Array
) -> tuple[Array, Array]:
    """Nets summed over their segments, where they lie and which way they run."""
    return _summed(board, cables, nets, (nets.trees["fast"], _layout(nets)), frequency_hz)


def _routed_from_pad(
    board: Board, cables: tuple[Cable, ...] | None, nets: Nets, frequency_hz: Array
) -> tuple[Array, Array]:
    """Nets summed from the driver's pad on: the line before the resistor radiates with them."""
    lines = [f.path.stub_line for f in nets.facts]
    gap_m = np.nan_to_num([line.plane_gap_m for line in lines])
    places = StubPlaces(
        pad_m=np.array([f.path.pad_m for f in nets.facts], dtype=float),
        height_m=np.where(gap_m > 0, 0.0, [line.height_m for line in lines]),
        permittivity=np.array([line.permittivity for line in lines]),
        plane_gap_m=gap_m,
        strip_width_m=np.array([line.width_m for line in lines]),
    )
    from_pad = with_stub(nets.trees["fast"], _layout(nets), places)
    behind = np.abs(site_transfer(from_pad[0], frequency_hz))
    trace, cable = _summed(board, cables, nets, from_pad, frequency_hz)
    return trace / behind, cable / behind


def _summed(
    board: Board,
    cables: tuple[Cable, ...] | None,
    nets: Nets,
    drawn: tuple[Trees, Layout],
    frequency_hz: Array,
) -> tuple[Array, Array]:
    """Fields per volt at node 0 of nets as drawn."""
    size = board.file.board.size_m
    trees, layout = drawn
    field = routed_field_per_volt(trees, layout, frequency_hz)
    trace = field * finite_board_factor(frequency_hz, max(size))
    if cables == ():
        return trace, np.zeros(frequency_hz.shape)
    volts = common_mode_per_volt(trees, layout, frequency_hz, size)
    antenna = cable_part.strongest_antenna(
        _straight_inputs(board, nets, frequency_hz),
        cable_part.UNDECLARED if cables is None else cables,
        frequency_hz,
    )
    return trace, _effective_volts(board, cables, volts) * antenna


def _effective_volts(
    board: Board, cables: tuple[Cable, ...] | None, volts: CommonModeVolts
) -> Array:
    """Common mode of the one cable's side, else of the worst way to leave the board."""
    declared = board.file.cable or []
    if cables is None or len(cables) > 1:
        return np.maximum(volts.any_along_x, volts.any_along_y)
    side = declared[0].side if declared else None
    sides = SIDES if side is None else (side,)
    return np.asarray(np.max([getattr(volts, name) for name in sides], axis=0))


def _layout(nets: Nets) -> Layout:
    """Positions, heights and permittivities of all segments."""
    pieces = [piece for f in nets.facts for piece in f.path.pieces]
    height = np.array([p.line.height_m for p in pieces])
    gap = np.nan_to_num([p.line.plane_gap_m for p in pieces])  # a covered strip over one plane: 0
    return Layout(
        origin_m=np.array([f.path.origin_m for f in nets.facts], dtype=float),
        end_m=np.array([p.end_m for p in pieces], dtype=float),
        height_m=np.where(gap > 0, 0.0, height),
        permittivity=np.array([p.line.permittivity for p in pieces]),
        segment_offset=np.asarray(nets.trees["fast"].segment_offset),
        plane_gap_m=gap,
        strip_width_m=np.array([p.line.width_m for p in pieces]),
    )


def _between_planes(
    board: Board, cables: tuple[Cable, ...] | None, nets: Nets, frequency_hz: Array
) -> tuple[Array, Array]:
    """Nets on inner layers: a surface piece at both ends, and what leaks at a side."""
    size = board.file.board.size_m
    top = [surface_line(board.file.stack, f.path.main_line.width_m) for f in nets.facts]
    known = [line for line in top if line is not None]
    if len(known) < len(top):
        nothing = np.full(frequency_hz.shape, np.nan)
        return nothing, nothing
    inputs = _inner_inputs(nets, known, size, frequency_hz)
    trace = inner_layer.field_per_forward_ampere(inputs, frequency_hz)
    if cables == ():
        return trace, np.zeros(frequency_hz.shape)
    volts = inner_layer.common_mode_per_forward_ampere(inputs, frequency_hz)
    one = cables is not None and len(cables) == 1
    antenna = cable_part.strongest_antenna(
        _straight_inputs(board, nets, frequency_hz),
        cable_part.UNDECLARED if cables is None else cables,
        frequency_hz,
    )
    return trace, (volts.one if one else volts.any_end) * antenna


def _inner_inputs(
    nets: Nets, surface: Sequence[Line], size: tuple[float, float], frequency_hz: Array
) -> inner_layer.InnerInputs:
    """States at both ends per volt at node 0, and the lines around them."""
    facts = nets.facts
    main = [f.path.main_line for f in facts]
    near_volt, near_ampere, far_volt, far_ampere = _ends(nets, frequency_hz)
    sides = [f.net.side_distance_m for f in facts]
    return inner_layer.InnerInputs(
        near_volt=near_volt,
        near_ampere=near_ampere,
        far_volt=far_volt,
        far_ampere=far_ampere,
        surface_height_m=_column([line.height_m for line in surface]),
        surface_permittivity=_column([line.permittivity for line in surface]),
        surface_permittivity_effective=_column([line.permittivity_effective for line in surface]),
        surface_ohm=_column([line.impedance_ohm for line in surface]),
        strip_ohm=_column([m.impedance_ohm for m in main]),
        strip_permittivity=_column([m.permittivity_effective for m in main]),
        strip_width_m=_column([m.width_m for m in main]),
        plane_gap_m=_column([m.plane_gap_m for m in main]),
        side_distance_m=_column([0.5 * min(size) if s is None else s for s in sides]),
        length_m=_column([f.path.main_length_m for f in facts]),
        board_length_m=np.array(max(size)),
        board_width_m=np.array(min(size)),
    )


def _ends(nets: Nets, frequency_hz: Array) -> tuple[Array, Array, Array, Array]:
    """Voltage and current at the driver's end and at the last receiver, per volt at node 0."""
    trees = nets.trees["fast"]
    found = np.empty((4, *frequency_hz.shape), dtype=complex)
    for index in trees.shapes():
        states = end_states(trees.take(index), 2j * np.pi * frequency_hz[index])
        rows = np.arange(len(index))
        last = np.array([nets.facts[i].path.receiver_piece[-1] for i in index])
        roots = np.asarray(trees.take(index).parent).reshape(len(index), -1)[0] < 0
        found[0][index] = states.near_volt[:, 0]
        found[1][index] = states.near_ampere[:, roots].sum(axis=1)
        found[2][index] = states.far_volt[rows, last]
        found[3][index] = states.far_ampere[rows, last]
    return found[0], found[1], found[2], found[3]
