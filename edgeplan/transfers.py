"""Measured transfers in the place of the model of a mechanism, net by net.

The port is node 0 of the net: the pad at which its line begins, behind the series resistor, or
the driver's pin where there is none. All emission is worked out per volt at that node.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from edgeplan.board import Board, MeasuredTransfer
from edgeplan.emission import measured_transfer
from edgeplan.emission_lines import EmissionLines
from edgeplan.emission_target import Target
from edgeplan.names import matches
from edgeplan.nets import NetFacts
from edgeplan.results import Missing

Array = NDArray[Any]

PARTS = ("trace", "cable")
SAME_DISTANCE = 1e-3  # relative: 3 m and 3.00 m are one distance


def of_net(board: Board, net: str, part: str) -> MeasuredTransfer | None:
    """Transfer that replaces a part of one net; of several that fit the last one.

    Parameters
    ----------
    board : Board
        As read.
    net : str
        Name of the net.
    part : {"trace", "cable"}
        Part of its emission.

    Returns
    -------
    MeasuredTransfer or None
        None where the model stays.
    """
    fit = [
        t
        for t in board.transfers
        if t.stated.replaces == part and any(matches(name, net) for name in t.stated.nets)
    ]
    return fit[-1] if fit else None


@dataclass(frozen=True, slots=True, kw_only=True)
class Replaced:
    """Transfers of N nets for one part, and distance times field per volt at node 0, (N, F).

    NaN outside the rows of a table, and where the model stays. [V/V]
    """

    transfers: tuple[MeasuredTransfer | None, ...]
    field: Array

    @property
    def is_measured(self) -> Array:
        """Whether a transfer is in the place of the model, (N,)."""
        return np.array([t is not None for t in self.transfers], dtype=bool)

    @property
    def error_db(self) -> Array:
        """Stated error, NaN where the model stays, (N,). [dB]"""
        return np.array([np.nan if t is None else t.stated.error_db for t in self.transfers])

    def error_or(self, model_db: Array) -> Array:
        """Stated error of the transfer, or the model's where there is none, (N, C). [dB]"""
        return np.where(self.is_measured[:, None], self.error_db[:, None], model_db)

    def at_distance(self, distance_m: float) -> Array:
        """Whether each net's transfer was measured at a distance, (N,)."""
        own = np.array([np.nan if t is None else t.stated.distance_m for t in self.transfers])
        return np.asarray(np.abs(own - distance_m) <= SAME_DISTANCE * distance_m)

    def instead(self, level: Array, detector: Array, distance_m: float) -> Array:
        """Levels of the model, or those of the transfer where there is one.

        Parameters
        ----------
        level : numpy.ndarray
            Field of the model at the receiver per volt at node 0, rms, (N, F). [V/m per V]
        detector : numpy.ndarray
            Factor of the detector, (N, F). [-]
        distance_m : float
            Of the limit line. [m]

        Returns
        -------
        numpy.ndarray
            (N, F); unknown at another distance than the measured one. [V/m per V]
        """
        if not self.is_measured.any():
            return level
        received = self.field * detector / (np.sqrt(2) * distance_m)
        known = np.where(self.at_distance(distance_m)[:, None], received, np.nan)
        return np.where(self.is_measured[:, None], known, level)


def replaced(board: Board, facts: Sequence[NetFacts], frequency_hz: Array) -> dict[str, Replaced]:
    """What measured transfers say of N nets, by part.

    Parameters
    ----------
    board : Board
        With the transfers as read.
    facts : sequence of NetFacts
        N nets.
    frequency_hz : numpy.ndarray
        Judged frequencies, (N, F). [Hz]

    Returns
    -------
    dict
        "trace" and "cable".
    """
    return {part: _of_part(board, facts, frequency_hz, part) for part in PARTS}


def _of_part(board: Board, facts: Sequence[NetFacts], frequency_hz: Array, part: str) -> Replaced:
    """Transfers and fields of one part."""
    own = tuple(of_net(board, f.net.net, part) for f in facts)
    field = np.full(frequency_hz.shape, np.nan)
    for t in board.transfers:
        index = [i for i, other in enumerate(own) if other is t]
        if index:
            inputs = measured_transfer.MeasuredInputs(
                port_volt=np.ones((len(index), 1)),
                rows=t.rows,
                distance_m=t.stated.distance_m,
                antenna_factor=t.antenna_factor,
            )
            field[index] = measured_transfer.field_per_forward_ampere(inputs, frequency_hz[index])
    return Replaced(transfers=own, field=field)


def gaps(
    found: dict[str, Replaced], lines: EmissionLines, target: Target
) -> list[tuple[str, Missing] | None]:
    """Why a transfer leaves a net open, and what would decide it; None where it does not.

    Parameters
    ----------
    found : dict
        From `replaced`.
    lines : EmissionLines
        Of the same N nets.
    target : Target
        Limit lines of the board.

    Returns
    -------
    list
        Per net a reason and the missing value, or None.
    """
    reasons: list[tuple[str, Missing] | None] = [None] * len(lines.exists)
    for part in found.values():
        outside = (np.isnan(part.field) & lines.exists).any(axis=1) & part.is_measured
        for i in np.flatnonzero(outside):
            reasons[i] = reasons[i] or _outside(part.transfers[i], target)
        for limit in target.at(lines.frequency_hz):
            stated = (np.isfinite(limit.level_dbuv_per_m) & lines.exists).any(axis=1)
            far = stated & part.is_measured & ~part.at_distance(limit.distance_m)
            for i in np.flatnonzero(far):
                reasons[i] = reasons[i] or _elsewhere(part.transfers[i], limit.distance_m)
    return reasons


def _outside(measured: MeasuredTransfer | None, target: Target) -> tuple[str, Missing] | None:
    """The reason of a table that ends before the judged range does."""
    if measured is None:
        return None
    tables = [table for table in (measured.rows, measured.antenna_factor) if table]
    low, high = max(t[0][0] for t in tables) / 1e6, min(t[-1][0] for t in tables) / 1e6
    wanted = f"rows from {target.lowest_hz / 1e6:g} to {target.covered_to_hz / 1e6:g} MHz"
    name = f"transfer {measured.stated.file}"
    because = f"the {name} holds from {low:g} to {high:g} MHz and does not reach every judged line"
    return because, Missing(value=wanted, of=name)


def _elsewhere(measured: MeasuredTransfer | None, distance_m: float) -> tuple[str, Missing] | None:
    """The reason of a transfer that was measured at another distance."""
    if measured is None:
        return None
    own = f"transfer {measured.stated.file}"
    because = (
        f"the {own} was measured at {measured.stated.distance_m:g} m and is never converted to "
        f"the {distance_m:g} m of the limit"
    )
    return because, Missing(value=f"measurement at {distance_m:g} m", of=own)
