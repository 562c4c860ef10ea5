"""What a missing minimum edge would have to be for the net to be inside."""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import replace

from edgeplan.board import Board
from edgeplan.candidates import list_drawn
from edgeplan.drives import RAISED_COSINE_SHARE, Quantity, SettingCorners
from edgeplan.evaluate import Bench, Evaluation, evaluate, strobe_flights
from edgeplan.nets import NetFacts, build
from edgeplan.texts import text_time_s
from edgeplan.windows import StateWindow, solve


def minimum_edges(facts: Sequence[NetFacts], board: Board, bench: Bench) -> list[str]:
    """For nets whose setting states no minimum edge, from which minimum on each is inside.

    Parameters
    ----------
    facts : sequence of NetFacts
        N nets.
    board, bench : Board, Bench
        As for candidates.

    Returns
    -------
    list of str
        A sentence per net; empty where the minimum edge is not what is missing.

    Notes
    -----
    The maximum edge stands in for the minimum and is then scaled down: the fastest acceptable
    factor times the maximum is the smallest minimum that will do.
    """
    found = [""] * len(facts)
    groups: dict[str, list[int]] = defaultdict(list)
    for i, f in enumerate(facts):
        if f.settings[f.setting].missing == ("minimum edge",):
            groups[f.timing].append(i)
    assumed = {i: _assumed(facts[i]) for members in groups.values() for i in members}
    bench = _with_assumed_strobes(list(assumed.values()), board, bench)
    for members in groups.values():
        nets = build([assumed[i] for i in members], board)
        windows = solve(nets, list_drawn(nets), bench)
        drawn = evaluate(nets, list_drawn(nets), bench)
        for row, (i, window) in enumerate(zip(members, windows, strict=True)):
            longest = facts[i].settings[facts[i].setting].ramp_s["rising"].slow
            found[i] = _sentence(
                window, longest * RAISED_COSINE_SHARE["10-90"], _failing(drawn, row)
            )
    return found


def _with_assumed_strobes(assumed: Sequence[NetFacts], board: Board, bench: Bench) -> Bench:
    """Flights of strobes that wait for the same value, with the assumed one."""
    names = {f.interface.clock_net for f in assumed if f.timing == "source-synchronous"}
    strobes = [f for f in assumed if f.net.net in names]
    if not strobes:
        return bench
    nets = build(strobes, board)
    flights = strobe_flights(nets, list_drawn(nets), bench.tolerance)
    return bench.with_strobe({**bench.strobe, **flights})


def _assumed(facts: NetFacts) -> NetFacts:
    """The net with its maximum edge at every corner."""
    chosen = facts.settings[facts.setting]
    flat = {
        name: {d: _flat(q) for d, q in getattr(chosen, name).items()}
        for name in ("ramp_s", "trapezoid_s")
    }
    setting: SettingCorners = replace(
        chosen, ramp_s=flat["ramp_s"], trapezoid_s=flat["trapezoid_s"], missing=()
    )
    settings = tuple(setting if s is chosen else s for s in facts.settings)
    return replace(facts, settings=settings)


def _flat(quantity: Quantity) -> Quantity:
    """The slow value at every corner."""
    return replace(quantity, typical=quantity.slow, fast=quantity.slow)


def _failing(drawn: Evaluation, row: int) -> str:
    """Checks that fail even with the maximum edge, in words."""
    names = [table.check for table in drawn.tables if table.fails[row, 0]]
    return f": with the maximum edge it fails {', '.join(names)}" if names else ""


def _sentence(window: StateWindow, longest_s: float, failing: str) -> str:
    """From which minimum edge on the net is inside."""
    if not window.known or not window.slowest.factor >= 1 or not window.fastest.factor <= 1:
        return f"no minimum edge would bring it inside as drawn{failing}"
    if window.fastest.any:
        return "inside for any minimum edge"
    edge_s = window.fastest.factor * longest_s
    return f"inside if it is {text_time_s(edge_s)} or more (10-90 %)"
