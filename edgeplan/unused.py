"""Values that are accepted but not used yet: named in every report, never dropped in silence."""

from collections.abc import Callable

from edgeplan.board import Board

_ACCEPTED: dict[str, Callable[[Board], bool]] = {
    "waivers": lambda b: bool(b.file.waiver),
    "clock sources as a sum (nets are judged one by one)": lambda b: bool(b.file.clock_source),
    "the side a cable leaves from (it counts for one cable and nets with positions)": lambda b: (
        any(c.side for c in b.file.cable or ())
        and not (len(b.file.cable or ()) == 1 and any(r.start_m is not None for r in b.routes))
    ),
}


def unused_values(board: Board) -> list[str]:
    """Names of inputs of this board that do not act yet.

    Parameters
    ----------
    board : Board
        As read.

    Returns
    -------
    list of str
        One entry per kind of input.
    """
    return [f"accepted but not used yet: {name}" for name, has in _ACCEPTED.items() if has(board)]
