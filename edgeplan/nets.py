"""From board records to arrays: one entry per judged net, one row per receiver."""

from collections import defaultdict
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from math import nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import levels
from edgeplan.board import (
    Board,
    ClockSource,
    Direction,
    Driver,
    Interface,
    Net,
    Range,
    Receiver,
)
from edgeplan.drives import CORNERS, SettingCorners, driver_corners
from edgeplan.names import matches
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees
from edgeplan.results import Missing
from edgeplan.routing import CannotRoute, Path, path_of
from edgeplan.stack import Line, printed_line

Array = NDArray[Any]

CLOCK_LIKE = ("clock", "strobe")
TRANSITION_LEVELS = {"10-90": (0.1, 0.9), "20-80": (0.2, 0.8), "30-70": (0.3, 0.7)}


@dataclass(frozen=True, slots=True, kw_only=True)
class Blocked:
    """A net that cannot be simulated, why, and the value that would help."""

    net: Net
    reason: str
    missing: Missing | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class NetFacts:
    """One net with every record it refers to, resolved."""

    net: Net
    interface: Interface
    timing: str
    activity: str | None
    driver: Driver
    settings: tuple[SettingCorners, ...]
    setting: int
    setting_boot: int
    receivers: tuple[Receiver, ...]
    direction: Direction | None
    path: Path
    sources: tuple[ClockSource, ...] = ()

    @property
    def clock_like(self) -> bool:
        """Whether a second crossing of a threshold would count as an event."""
        return self.timing in CLOCK_LIKE or self.activity == "clock"

    @property
    def bit_s(self) -> float:
        """Shortest time between two edges: half a clock period or one bit; NaN if not given."""
        if self.activity == "clock" and self.net.clock_hz:
            duty, tolerance = self.interface.duty, self.interface.duty_tolerance
            return (min(duty, 1 - duty) - tolerance) / self.net.clock_hz
        if self.net.data_bps:
            return 1 / self.net.data_bps
        return 0.5 / self.net.clock_hz if self.net.clock_hz else nan


@dataclass(frozen=True, slots=True, kw_only=True)
class Nets:
    """Struct of arrays over N nets and R receivers; ``facts`` keeps the records.

    ``trees`` and the level arrays exist per corner.  ``receiver_net`` maps receivers
    to nets; ``first_receiver`` are the offsets of each net's receivers. ``kept`` holds what
    was worked out once for exactly these nets and does not depend on any candidate; arrays in
    it have an entry per net.
    """

    facts: tuple[NetFacts, ...]
    trees: Mapping[str, Trees]
    swing_v: Mapping[str, Array]
    receiver_net: Array
    first_receiver: Array
    threshold_low: Mapping[str, Array]
    threshold_high: Mapping[str, Array]
    transition_low: Mapping[str, Array]
    transition_high: Mapping[str, Array]
    longest_transition_s: Array
    overshoot_limit: Mapping[str, Array]
    bit_s: Array
    kept: dict[Any, Any] = field(default_factory=dict, repr=False, compare=False)

    def __len__(self) -> int:
        """Count of nets."""
        return len(self.facts)

    def take(self, index: Sequence[int] | Array) -> "Nets":
        """The chosen nets, in the order given."""
        index = np.asarray(index, dtype=int)
        rows = np.concatenate(
            [np.arange(self.first_receiver[i], self.first_receiver[i + 1]) for i in index]
            or [np.zeros(0, dtype=int)]
        )
        counts = np.diff(self.first_receiver)[index]
        return Nets(
            facts=tuple(self.facts[i] for i in index),
            trees={c: t.take(index) for c, t in self.trees.items()},
            swing_v={c: v[index] for c, v in self.swing_v.items()},
            receiver_net=np.repeat(np.arange(len(index)), counts),
            first_receiver=np.concatenate([[0], np.cumsum(counts)]),
            threshold_low={c: v[rows] for c, v in self.threshold_low.items()},
            threshold_high={c: v[rows] for c, v in self.threshold_high.items()},
            transition_low={c: v[rows] for c, v in self.transition_low.items()},
            transition_high={c: v[rows] for c, v in self.transition_high.items()},
            longest_transition_s=self.longest_transition_s[rows],
            overshoot_limit={c: v[rows] for c, v in self.overshoot_limit.items()},
            bit_s=self.bit_s[index],
            kept={k: v[index] for k, v in self.kept.items() if isinstance(v, np.ndarray)},
        )


def resolve(board: Board) -> tuple[list[NetFacts], list[Blocked]]:
    """Resolve every digital net of a board.

    Parameters
    ----------
    board : Board
        A board as read; its references are known to be good.

    Returns
    -------
    list of NetFacts, list of Blocked
        Nets that can be simulated, and those that cannot with the reason.
    """
    routes: dict[str, list[Any]] = defaultdict(list)
    for segment in board.routes:
        routes[segment.net].append(segment)
    look_up = _LookUp(board)
    resolved, blocked = [], []
    for net in board.nets:
        if net.kind != "digital":
            continue
        try:
            resolved.append(_facts(net, routes, look_up))
        except CannotRoute as lack:
            of = lack.of or f"net {net.net}"
            missing = Missing(value=lack.value, of=of) if lack.value else None
            blocked.append(Blocked(net=net, reason=str(lack), missing=missing))
    return resolved, blocked


class _LookUp:
    """Records of a board by name."""

    def __init__(self, board: Board) -> None:
        """Index the board once."""
        self.interface = {i.name: i for i in board.file.interface}
        self.driver = {d.name: d for d in board.file.driver}
        self.receiver = {r.name: r for r in board.file.receiver}
        self.corners = {d.name: driver_corners(d) for d in board.file.driver}
        self.sources = board.file.clock_source
        self.line: Callable[[str, float], Line] = lambda layer, width: printed_line(
            board.file.stack, layer, width, board.file.impedance
        )


def _timing_class(net: Net, interface: Interface) -> str:
    """Timing class of one net: the clock of a synchronous interface is judged as a clock."""
    is_clock = net.net == interface.clock_net or net.activity == "clock"
    if interface.timing in ("common-clock", "source-synchronous") and is_clock:
        return "clock"
    if interface.timing == "clock" and not is_clock:
        return "asynchronous"
    return interface.timing


def _required(value: Any, name: str) -> Any:
    """The value, or which one is missing."""
    if value is None or value == ():
        article = "an" if name[0] in "aeiou" else "a"
        raise CannotRoute(f"the list names no {name}; give {article} {name}", value=name)
    return value


def _facts(net: Net, routes: Mapping[str, list[Any]], look_up: _LookUp) -> NetFacts:
    """Resolve one net or say why it cannot be simulated."""
    interface = look_up.interface[_required(net.interface, "interface")]
    drivers = _required(net.driver, "driver")
    if len(drivers) > 1:
        raise CannotRoute(
            f"{len(drivers)} drivers: nets driven from several sides are not judged yet"
        )
    driver = look_up.driver[drivers[0]]
    receivers = tuple(
        _with_both_capacitances(look_up.receiver[name])
        for name in _required(net.receiver, "receiver")
    )
    if interface.supply_v.min is None or interface.supply_v.max is None:
        owner = f"interface {interface.name}"
        raise CannotRoute(f"{owner} states no minimum and maximum supply", value="supply", of=owner)
    timing = _timing_class(net, interface)
    activity = net.activity or ("clock" if net.net == interface.clock_net else None)
    settings = look_up.corners[driver.name]
    drawn = net.setting[0] if net.setting else _only(settings, driver.name)
    boot = net.setting_boot[0] if net.setting_boot else drawn
    names = list(settings)
    clock_like = timing in CLOCK_LIKE or activity == "clock"
    return NetFacts(
        net=net,
        interface=interface,
        timing=timing,
        activity=activity,
        driver=driver,
        settings=tuple(settings.values()),
        setting=names.index(drawn),
        setting_boot=names.index(boot),
        receivers=receivers,
        direction=next((d for d in interface.direction if d.driver == driver.name), None),
        path=path_of(net, routes.get(net.net, ()), look_up.line, clock_like=clock_like),
        sources=tuple(
            source
            for source in look_up.sources
            if any(matches(p, name) for p in source.nets for name in (net.net, net.far_net or ""))
        ),
    )


def _only(settings: Mapping[str, SettingCorners], driver: str) -> str:
    """The setting of a driver that has one only."""
    if len(settings) == 1:
        return next(iter(settings))
    raise CannotRoute(f"driver {driver} has several settings and none is given", value="setting")


def _constants(lines: Sequence[Line]) -> LineConstants:
    """Line records as arrays."""

    def column(name: str) -> Array:
        return np.array([getattr(line, name) for line in lines], dtype=float)

    return LineConstants(
        impedance_ohm=column("impedance_ohm"),
        delay_s_per_m=column("delay_s_per_m"),
        resistance_dc_ohm_per_m=column("resistance_dc_ohm_per_m"),
        skin_ohm_per_m_rthz=column("skin_ohm_per_m_rthz"),
        loss_tangent=column("loss_tangent"),
    )


def _capacitance(receiver: Receiver, corner: str) -> float:
    """Input capacitance at a corner: largest when slow, smallest when fast; else the typical."""
    stated = receiver.capacitance_f
    if not isinstance(stated, Range):
        return nan if stated is None else float(stated)
    at = {"slow": stated.max, "typical": None, "fast": stated.min}[corner]
    if at is not None:
        return float(at)
    if stated.typ is not None:
        return float(stated.typ)
    return 0.5 * (float(stated.min or nan) + float(stated.max or nan))


def _with_both_capacitances(receiver: Receiver) -> Receiver:
    """The receiver, or which end of its capacitance is missing: a maximum is no minimum."""
    stated = receiver.capacitance_f
    if stated is None:
        owner = f"receiver {receiver.name}"
        raise CannotRoute(f"{owner} states no capacitance", value="capacitance", of=owner)
    if isinstance(stated, Range) and stated.typ is None:
        for word, value in (("minimum", stated.min), ("maximum", stated.max)):
            if value is None:
                name, owner = f"{word} capacitance", f"receiver {receiver.name}"
                raise CannotRoute(f"{owner} states no {name}", value=name, of=owner)
    return receiver


def _trees(facts: Sequence[NetFacts], corner: str) -> Trees:
    """Paths of all nets as flat lists with the loads of one corner."""
    pieces = [piece for f in facts for piece in f.path.pieces]
    counts = [len(f.path.pieces) for f in facts]
    loads = [np.zeros(count) for count in counts]
    leaks = [np.zeros(count) for count in counts]
    for load, leak, f in zip(loads, leaks, facts, strict=True):
        for piece, receiver in zip(f.path.receiver_piece, f.receivers, strict=True):
            load[piece] += _capacitance(receiver, corner)
        last = f.path.receiver_piece[-1]
        load[last] += f.net.bus_capacitance_f or 0.0
        if f.timing == "open-drain" and f.net.pull_up_ohm:
            leak[last] += 1 / f.net.pull_up_ohm
    return Trees(
        segment_offset=np.concatenate([[0], np.cumsum(counts)]).astype(int),
        parent=np.array([piece.parent for piece in pieces], dtype=int),
        length_m=np.array([piece.length_m for piece in pieces], dtype=float),
        line=_constants([piece.line for piece in pieces]),
        node_farad=np.concatenate(loads),
        node_siemens=np.concatenate(leaks),
        receiver_offset=np.concatenate([[0], np.cumsum([len(f.receivers) for f in facts])]).astype(
            int
        ),
        receiver_segment=np.array([p for f in facts for p in f.path.receiver_piece], dtype=int),
        stub_length_m=np.array([f.path.stub_m for f in facts], dtype=float),
        stub_line=_constants([f.path.stub_line for f in facts]),
    )


def supply_v(interface: Interface, corner: str) -> float:
    """Supply at a corner: lowest when slow, highest when fast. [V]

    Parameters
    ----------
    interface : Interface
        Its minimum and maximum supply are stated.
    corner : {"slow", "typical", "fast"}
        Typical without a typical value: the middle.

    Returns
    -------
    float
        Supply, which is the swing too. [V]

    Examples
    --------
    >>> bus = Interface(name="bus", timing="clock", levels="lvttl-3v3",
    ...                 supply_v={"min": 3.0, "max": 3.6})
    >>> [round(supply_v(bus, corner), 3) for corner in CORNERS]
    [3.0, 3.3, 3.6]
    """
    stated = interface.supply_v
    low, high = float(stated.min or nan), float(stated.max or nan)
    typical = 0.5 * (low + high) if stated.typ is None else float(stated.typ)
    return {"slow": low, "typical": typical, "fast": high}[corner]


def _thresholds(
    facts: NetFacts, receiver: Receiver, corner: str, own: Mapping[str, Any]
) -> tuple[float, float]:
    """VIL and VIH as fractions of the swing at a corner."""
    supply = supply_v(facts.interface, corner)
    name = receiver.levels or facts.interface.levels
    if name in own:
        low, high = own[name].vil_v, own[name].vih_v
    else:
        low, high = levels.family(name).thresholds_v(supply)
    return low / supply, high / supply


def _transition_levels(receiver: Receiver, thresholds: tuple[float, float]) -> tuple[float, float]:
    """Levels the receiver's transition is judged between, as fractions of the swing."""
    if receiver.longest_transition is None:
        return TRANSITION_LEVELS["10-90"]
    stated = receiver.longest_transition.levels
    return thresholds if stated == "vil-vih" else TRANSITION_LEVELS[stated]


def build(facts: Sequence[NetFacts], board: Board) -> Nets:
    """Arrays of the nets that can be simulated.

    Parameters
    ----------
    facts : sequence of NetFacts
        Resolved nets.
    board : Board
        For the level families of its own.

    Returns
    -------
    Nets
        Arrays of N nets and R receivers; voltages as fractions of the swing.
    """
    own = {family.name: family for family in board.file.level}
    receivers = [(f, r) for f in facts for r in f.receivers]
    counts = [len(f.receivers) for f in facts]
    thresholds = {
        c: np.array([_thresholds(f, r, c, own) for f, r in receivers]).reshape(-1, 2)
        for c in CORNERS
    }
    transition = {
        c: np.array(
            [_transition_levels(r, tuple(t)) for (_, r), t in zip(receivers, rows, strict=True)]
        ).reshape(-1, 2)
        for c, rows in thresholds.items()
    }
    swing = {c: np.array([supply_v(f.interface, c) for f in facts]) for c in CORNERS}
    return Nets(
        facts=tuple(facts),
        trees={c: _trees(facts, c) for c in CORNERS} if facts else {},
        swing_v=swing,
        receiver_net=np.repeat(np.arange(len(facts)), counts),
        first_receiver=np.concatenate([[0], np.cumsum(counts)]).astype(int),
        threshold_low={c: rows[:, 0] for c, rows in thresholds.items()},
        threshold_high={c: rows[:, 1] for c, rows in thresholds.items()},
        transition_low={c: rows[:, 0] for c, rows in transition.items()},
        transition_high={c: rows[:, 1] for c, rows in transition.items()},
        longest_transition_s=np.array(
            [
                nan if r.longest_transition is None else r.longest_transition.time_s
                for _, r in receivers
            ]
        ),
        overshoot_limit={c: _overshoot_limits(receivers, c) for c in CORNERS},
        bit_s=np.array([f.bit_s for f in facts]),
    )


def _overshoot_limits(receivers: Sequence[tuple[NetFacts, Receiver]], corner: str) -> Array:
    """Overshoot each receiver accepts, as a fraction of the swing; NaN where none is stated."""
    return np.array(
        [
            nan
            if r.overshoot is None
            else r.overshoot.volts(supply_v(f.interface, corner)) / supply_v(f.interface, corner)
            for f, r in receivers
        ]
    )
