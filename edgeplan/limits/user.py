"""A user's own limit line, from the rows of a table somebody else has read."""

from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import NamedTuple

import numpy as np

from edgeplan.limits.lines import DETECTORS, Band, Detector, LimitLine

COLUMNS = {
    "frequency_hz": ("frequency_hz", 1.0),
    "frequency_mhz": ("frequency_hz", 1e6),
    "level_dbuv_per_m": ("level_dbuv_per_m", 1.0),
    "bandwidth_hz": ("bandwidth_hz", 1.0),
    "bandwidth_khz": ("bandwidth_hz", 1e3),
}
DETECTOR_WORDS: dict[str, Detector] = {"qp": "quasi-peak", "av": "average", "avg": "average"}

# Receiver bandwidths of CISPR 16-1-1 (bands A to E): used where the table states none.
BAND_ENDS_HZ = (150e3, 30e6, 1e9)
BANDWIDTHS_HZ = (200.0, 9e3, 120e3, 1e6)


class Fault(NamedTuple):
    """One wrong value of a user's table; rows count from 1."""

    row: int
    column: str
    message: str


class UserLineError(ValueError):
    """Every fault of a user's limit table, found in one pass."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(f"row {f.row}: {f.column}: {f.message}" for f in self.faults))


class _Point(NamedTuple):
    """One point of a line, SI."""

    row: int
    detector: Detector
    frequency_hz: float
    level_dbuv_per_m: float
    bandwidth_hz: float  # NaN: by frequency


def user_line(
    rows: Sequence[Mapping[str, object]],
    *,
    limit_id: str,
    distance_m: float = 3.0,
    title: str = "",
    source: str = "",
) -> LimitLine:
    """Limit line from the rows of a user's table.

    Each row is a point: ``frequency_hz`` or ``frequency_mhz``, ``level_dbuv_per_m``,
    ``detector`` (quasi-peak, average, peak; quasi-peak when blank) and, if not that of
    CISPR 16-1-1, ``bandwidth_hz`` or ``bandwidth_khz``. The points of one detector stand
    in rising order; between them the line is straight over log frequency, and two
    points at one frequency are a step.

    Parameters
    ----------
    rows : sequence of mapping
        Column name to text or number.
    limit_id : str
        What the line is called from now on.
    distance_m : float, optional
        Measuring distance. [m]
    title, source : str, optional
        What it is and where it comes from.

    Returns
    -------
    LimitLine
        The line, with basis ``user``.

    Raises
    ------
    UserLineError
        A ValueError with every fault of the table.

    Examples
    --------
    >>> rows = [{"frequency_mhz": "30", "level_dbuv_per_m": "40"},
    ...         {"frequency_mhz": "300", "level_dbuv_per_m": "50"}]
    >>> line = user_line(rows, limit_id="house")
    >>> float(line.level_dbuv_per_m(30e6 * 10**0.5))
    45.0
    """
    faults: list[Fault] = []
    points = [point for n, row in enumerate(rows, 1) if (point := _point(n, row, faults))]
    bands = [
        band
        for detector in DETECTORS
        for band in _bands([p for p in points if p.detector == detector], faults)
    ]
    if not 0 < distance_m < np.inf:
        faults.append(Fault(1, "distance", f"{distance_m!r} m is not a measuring distance"))
    if not rows:
        faults.append(Fault(1, "frequency_hz", "the table has no rows"))
    if faults:
        raise UserLineError(sorted(faults))
    return LimitLine(
        id=limit_id,
        title=title or f"{limit_id}, the user's own line",
        source=source or "user",
        distance_m=float(distance_m),
        basis="user",
        bands=tuple(bands),
    )


def _point(number: int, row: Mapping[str, object], faults: list[Fault]) -> _Point | None:
    """One row in SI, or its faults."""
    before = len(faults)
    values = _numbers(number, row, faults)
    word = str(row.get("detector") or "quasi-peak").strip().lower().replace(" ", "-")
    detector = next((d for d in DETECTORS if d == word), DETECTOR_WORDS.get(word))
    if detector is None:
        known = ", ".join(DETECTORS)
        faults.append(Fault(number, "detector", f"{word!r} is no detector; write one of {known}"))
    for column in ("frequency_hz", "level_dbuv_per_m"):
        if column not in values and not any(f.row == number for f in faults[before:]):
            faults.append(Fault(number, column, "is missing"))
    if len(faults) > before or detector is None:
        return None
    bandwidth_hz = values.get("bandwidth_hz", np.nan)
    return _Point(
        number, detector, values["frequency_hz"], values["level_dbuv_per_m"], bandwidth_hz
    )


def _numbers(number: int, row: Mapping[str, object], faults: list[Fault]) -> dict[str, float]:
    """Numbers of a row by SI name."""
    values: dict[str, float] = {}
    for column, (name, factor) in COLUMNS.items():
        text = str(row.get(column, "") if row.get(column) is not None else "").strip()
        if not text:
            continue
        try:
            values[name] = float(text) * factor
        except ValueError:
            faults.append(Fault(number, column, f"{text!r} is not a number"))
            continue
        if not np.isfinite(values[name]) or (name.endswith("_hz") and values[name] <= 0):
            faults.append(Fault(number, column, f"{text!r} is not possible here"))
    return values


def _bands(points: Sequence[_Point], faults: list[Fault]) -> list[Band]:
    """Bands of one detector: a new one wherever the receiver's bandwidth changes."""
    if len(points) == 1:
        faults.append(Fault(points[0].row, "detector", f"one row of {points[0].detector}: no line"))
    bands: list[Band] = []
    for first, last in pairwise(points):
        if last.frequency_hz < first.frequency_hz:
            faults.append(Fault(last.row, "frequency_hz", "is lower than the row before it"))
        elif last.frequency_hz > first.frequency_hz:
            bands.append(_stretch(first, last, faults))
    return bands


def _stretch(first: _Point, last: _Point, faults: list[Fault]) -> Band:
    """Straight piece between two points, with the bandwidth it is measured in."""
    bandwidth_hz = first.bandwidth_hz
    if np.isnan(bandwidth_hz):
        bandwidth_hz = BANDWIDTHS_HZ[np.searchsorted(BAND_ENDS_HZ, first.frequency_hz, "right")]
        inside = [f for f in BAND_ENDS_HZ if first.frequency_hz < f < last.frequency_hz]
        if inside:
            advice = f"add a row at {inside[0] / 1e6:g} MHz or state bandwidth_khz"
            faults.append(Fault(last.row, "bandwidth_hz", f"changes on the way here: {advice}"))
    return Band(
        detector=first.detector,
        bandwidth_hz=bandwidth_hz,
        frequency_hz=np.array([first.frequency_hz, last.frequency_hz]),
        level_dbuv_per_m=np.array([first.level_dbuv_per_m, last.level_dbuv_per_m]),
        basis="user",
    )
