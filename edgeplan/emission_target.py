"""What emission is judged against: limit lines, margin, and up to which frequency."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan import limits
from edgeplan.board import Board
from edgeplan.limits import DetectorLine, LimitLine

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Target:
    """Lines of a board's emission target.

    ``highest_hz`` is where the measurement ends by the first line's own rule;
    ``covered_to_hz`` where the chosen lines end: what lies between is not judged.
    """

    lines: tuple[LimitLine, ...]
    margin_db: float
    statistic: str
    lowest_hz: float
    highest_hz: float
    highest_rule: str
    covered_to_hz: float
    unverified: tuple[str, ...]

    def at(self, frequency_hz: Array) -> tuple[DetectorLine, ...]:
        """Each line and detector at frequencies, levels NaN where it says nothing."""
        return limits.detector_lines(self.lines, frequency_hz)

    @property
    def not_covered(self) -> str:
        """Which part of the measured range no chosen line reaches; empty if none."""
        if self.covered_to_hz >= self.highest_hz * (1 - 1e-9):
            return ""
        more = sorted({line.continues_as for line in self.lines if line.continues_as})
        hint = f"; add {' or '.join(more)}" if more else ""
        return (
            f"emission from {self.covered_to_hz / 1e9:g} to {self.highest_hz / 1e9:g} GHz is not "
            f"judged: no chosen limit reaches it{hint}"
        )


def target_of(board: Board) -> Target:
    """Emission target of a board; its limit ids are known to exist.

    Parameters
    ----------
    board : Board
        With ``emission.limits`` and the highest internal frequency.

    Returns
    -------
    Target
        Lines, margin [dB] and range [Hz].
    """
    emission = board.file.emission
    own = {line.id: line for line in board.user_limits}
    lines = tuple(own.get(name) or limits.line(name) for name in emission.limits)
    internal = board.file.board.highest_internal_frequency_hz
    judged = limits.judged_range(lines, own, internal)
    unverified = [f"limit line {line.id}" for line in lines if not line.verified]
    unverified += [f"rule {rule}" for rule in judged.unverified_rules]
    return Target(
        lines=lines,
        margin_db=emission.margin_db,
        statistic=emission.statistic,
        lowest_hz=judged.lowest_hz,
        highest_hz=judged.highest_hz,
        highest_rule=judged.rule,
        covered_to_hz=judged.covered_to_hz,
        unverified=tuple(unverified),
    )


def band_edges_hz(target: Target) -> Array:
    """Frequencies at which a line starts, ends or steps, inside the judged range. [Hz]

    Parameters
    ----------
    target : Target
        Lines and range.

    Returns
    -------
    numpy.ndarray
        Rising, each once. [Hz]
    """
    edges = np.unique(np.concatenate([b.frequency_hz for line in target.lines for b in line.bands]))
    return edges[(edges >= target.lowest_hz) & (edges <= target.covered_to_hz)]
