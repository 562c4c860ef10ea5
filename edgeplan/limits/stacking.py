"""Several limit lines at the frequencies of a board, detector by detector."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.limits.lines import Detector, LimitLine
from edgeplan.limits.shipped import line

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DetectorLine:
    """One line and detector at given frequencies: arrays of their shape."""

    limit_id: str
    detector: Detector
    distance_m: float
    verified: bool
    level_dbuv_per_m: Array
    bandwidth_hz: Array


def detector_lines(
    lines: Sequence[str | LimitLine], frequency_hz: ArrayLike
) -> tuple[DetectorLine, ...]:
    """Lines at the frequencies of a board, one entry for each line and detector.

    Lines of different distances stay apart, since no distance is converted.

    Parameters
    ----------
    lines : sequence of str or LimitLine
        Lines of an emission target: shipped ids, or lines such as a user's own.
    frequency_hz : array_like
        Frequencies, any shape. [Hz]

    Returns
    -------
    tuple of DetectorLine
        In the order of the lines; an entry without any level is left out.

    Raises
    ------
    ValueError
        For an unknown id.

    Examples
    --------
    >>> target = ["cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz"]
    >>> for entry in detector_lines(target, [100e6, 1.2e9]):
    ...     print(entry.detector, entry.level_dbuv_per_m)
    quasi-peak [40. nan]
    average [nan 50.]
    peak [nan 70.]
    """
    frequency = np.asarray(frequency_hz, dtype=float)
    found = [entry if isinstance(entry, LimitLine) else line(entry) for entry in lines]
    entries = (_at(limit, d, frequency) for limit in found for d in limit.detectors)
    return tuple(entry for entry in entries if np.isfinite(entry.level_dbuv_per_m).any())


def _at(limit: LimitLine, detector: Detector, frequency_hz: Array) -> DetectorLine:
    """One line and detector at given frequencies."""
    return DetectorLine(
        limit_id=limit.id,
        detector=detector,
        distance_m=limit.distance_m,
        verified=limit.verified,
        level_dbuv_per_m=limit.level_dbuv_per_m(frequency_hz, detector),
        bandwidth_hz=limit.bandwidth_hz(frequency_hz, detector),
    )
