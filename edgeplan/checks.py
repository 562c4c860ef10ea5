"""Checks as tables: value, limit and signed margin of every net and candidate."""

from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from edgeplan.results import Missing

Array = NDArray[Any]
Wants = Literal["faster", "slower"]

CONDITION_CORNERS = ("slow", "fast")
CONDITION_EDGES = ("rising", "falling")
CONDITION_STATES = ("run", "boot")


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckTable:
    """One check of N nets and C candidates.

    ``margin`` is signed, in ``unit``; ``share`` is the margin relative to what it is
    measured against.  NaN in ``margin`` where the check applies means undecided;
    ``because`` then says why, per net.  ``condition`` encodes receiver, corner, edge
    and state of the worst case.
    """

    check: str
    wants: Wants
    unit: str
    applies: Array
    value: Array
    limit: Array
    margin: Array
    share: Array
    condition: Array
    because: tuple[str, ...]
    missing: tuple[Missing | None, ...]
    error_low: Array
    error_high: Array
    extra: dict[str, Array] = field(default_factory=dict)

    @property
    def decided(self) -> Array:
        """Where the check gave a number. (N, C)"""
        return np.isfinite(self.margin)

    @property
    def fails(self) -> Array:
        """Where the check is decided, applies and does not hold. (N, C)"""
        with np.errstate(invalid="ignore"):
            return self.applies[:, None] & (self.margin < 0)

    @property
    def open(self) -> Array:
        """Where the check applies but could not be decided. (N, C)"""
        return self.applies[:, None] & ~self.decided


def condition_code(receiver: int, corner: str, edge: str, state: str) -> int:
    """Where and when, in one number.

    Parameters
    ----------
    receiver : int
        Place among the receivers of its net.
    corner : {"slow", "fast"}
        Corner.
    edge : {"rising", "falling"}
        Edge.
    state : {"run", "boot"}
        State.

    Returns
    -------
    int
        `condition_words` turns it back.

    Examples
    --------
    >>> condition_code(1, "fast", "rising", "boot")
    13
    """
    return (
        receiver * 8
        + CONDITION_CORNERS.index(corner) * 4
        + CONDITION_EDGES.index(edge) * 2
        + CONDITION_STATES.index(state)
    )


def condition_words(code: int) -> tuple[int, str, str, str]:
    """Receiver, corner, edge and state of a code.

    >>> condition_words(condition_code(2, "fast", "falling", "run"))
    (2, 'fast', 'falling', 'run')

    Parameters
    ----------
    code : int
        From `condition_code`.

    Returns
    -------
    tuple of int and str
        Receiver, corner, edge, state.
    """
    return (
        code // 8,
        CONDITION_CORNERS[code // 4 % 2],
        CONDITION_EDGES[code // 2 % 2],
        CONDITION_STATES[code % 2],
    )


class Worst:
    """Gathers the worst of one check over receivers, corners, edges and states."""

    def __init__(self, check: str, wants: Wants, unit: str, shape: tuple[int, int]) -> None:
        """Start with nothing seen for (N, C)."""
        self.check, self.wants, self.unit = check, wants, unit
        self.margin = np.full(shape, np.inf)
        self.value = np.full(shape, np.nan)
        self.limit = np.full(shape, np.nan)
        self.share = np.full(shape, np.inf)
        self.condition = np.zeros(shape, dtype=int)
        self.applies = np.zeros(shape[0], dtype=bool)
        self.because = [""] * shape[0]
        self.missing: list[Missing | None] = [None] * shape[0]
        self.error = np.zeros(shape)

    def cannot(self, net: int, because: str, missing: Missing | None = None) -> None:
        """The check applies to a net but a value is missing.

        Parameters
        ----------
        net : int
            Which net; all its candidates become undecided, whatever is added later.
        because : str
            Why; the first reason given stays.
        missing : Missing, optional
            The value that would help.
        """
        self.applies[net] = True
        self.margin[net] = np.nan
        self.share[net] = np.nan
        self.because[net] = self.because[net] or because
        self.missing[net] = self.missing[net] or missing

    def add(
        self,
        first_receiver: Array,
        value: Array,
        limit: Array,
        scale: Array,
        condition: tuple[str, str, str],
        *,
        larger_is_better: bool = False,
        error: Array | float = 0.0,
    ) -> None:
        """Take in values (R, C) against limits that broadcast with them.

        ``scale`` turns a margin into its share.  Rows of nets with several receivers are
        reduced to the worst one; NaN stays NaN.  A NaN limit means the check does not
        apply to that receiver.

        Parameters
        ----------
        first_receiver : numpy.ndarray
            Offsets of each net's receivers, (N+1,).
        value, limit, scale, error : array_like
            Broadcast to (R, C), in the check's own unit.
        condition : tuple of str
            Corner, edge and state of these values.
        larger_is_better : bool
            Whether the value must be above its limit.

        Examples
        --------
        9 ns needed of 10 ns leave 1 ns, a tenth:

        >>> worst = Worst("setup", "faster", "s", (1, 1))
        >>> now = ("slow", "rising", "run")
        >>> worst.add(np.array([0, 1]), np.array([[9e-9]]), 10e-9, 10e-9, now)
        >>> table = worst.table()
        >>> print(f"{table.margin[0, 0] * 1e9:.1f} ns, {table.share[0, 0]:.2f}")
        1.0 ns, 0.10
        """
        value, limit, scale, error = np.broadcast_arrays(value, limit, scale, error)
        margin = value - limit if larger_is_better else limit - value
        stated = np.isfinite(limit)
        counts = np.diff(first_receiver)
        for k in range(int(counts.max(initial=0))):
            nets = np.flatnonzero(counts > k)
            rows = first_receiver[nets] + k
            self._keep(nets, rows, k, margin, value, limit, scale, error, stated, condition)

    def _keep(
        self,
        nets: Array,
        rows: Array,
        receiver: int,
        margin: Array,
        value: Array,
        limit: Array,
        scale: Array,
        error: Array,
        stated: Array,
        condition: tuple[str, str, str],
    ) -> None:
        """Keep the rows of one receiver per net where they are worse than what was seen."""
        self.applies[nets] |= stated[rows].any(axis=1)
        new = margin[rows]
        with np.errstate(invalid="ignore"):
            worse = stated[rows] & ~(new >= self.margin[nets]) & ~np.isnan(self.margin[nets])
        code = condition_code(receiver, *condition)
        for table, source in (
            (self.margin, new),
            (self.value, value[rows]),
            (self.limit, limit[rows]),
            (self.share, new / scale[rows]),
            (self.error, error[rows]),
        ):
            table[nets] = np.where(worse, source, table[nets])
        self.condition[nets] = np.where(worse, code, self.condition[nets])

    def table(self, extra: dict[str, Array] | None = None) -> CheckTable:
        """The finished table; a check that never applied stays out of every count."""
        return CheckTable(
            check=self.check,
            wants=self.wants,
            unit=self.unit,
            applies=self.applies,
            value=self.value,
            limit=self.limit,
            margin=self.margin,
            share=self.share,
            condition=self.condition,
            because=tuple(self.because),
            missing=tuple(self.missing),
            error_low=-self.error,
            error_high=self.error,
            extra=extra or {},
        )
