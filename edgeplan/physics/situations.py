"""Several situations of the same nets read in one run: corners and edges side by side."""

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveform_readings import Levels, Readings
from edgeplan.physics.waveforms import read

Array = NDArray[Any]


class Situation(NamedTuple):
    """Trees of N nets, their C candidates, levels of R receivers and one bit (N,), at one corner.

    The fields are the arguments of :func:`~edgeplan.physics.waveforms.read`.
    """

    trees: Trees
    drive: Drive
    levels: Levels
    observe_s: Array


def read_together(situations: Sequence[Situation]) -> list[Readings]:
    """Readings of every situation, worked out in one run.

    Few nets fill a block badly, so that two corners take hardly longer than one.

    Parameters
    ----------
    situations : sequence of Situation
        Of equal counts of candidates and ramps. [SI]

    Returns
    -------
    list of Readings
        In the order of the situations, (R, C) each. [s], [-]

    Examples
    --------
    The edge arrives 600 ps and 1,200 ps after its middle at 500 ps:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> from edgeplan.physics.waveform_readings import levels_of
    >>> both = read_together([
    ...     Situation(point_to_point([length_m]), drive_of([[50.0]], ramp_s=1e-9),
    ...               levels_of(0.3, 0.7, 1), np.array([10e-9]))
    ...     for length_m in (0.1, 0.2)])
    >>> print([f"{readings.half_s[0, 0] * 1e9:.2f} ns" for readings in both])
    ['1.10 ns', '1.70 ns']
    """
    trees = [s.trees for s in situations]
    readings = read(
        joined_trees(trees),
        _joined_fields(Drive, [s.drive for s in situations]),
        _joined_fields(Levels, [s.levels for s in situations]),
        np.concatenate([np.broadcast_to(s.observe_s, len(s.trees)) for s in situations]),
    )
    ends = np.cumsum([int(t.receiver_offset[-1]) for t in trees])
    parts = [np.split(getattr(readings, name), ends[:-1]) for name in Readings.__slots__]
    return [
        Readings(**dict(zip(Readings.__slots__, own, strict=True)))
        for own in zip(*parts, strict=True)
    ]


def joined_trees(trees: Sequence[Trees]) -> Trees:
    """All trees one after the other.

    Parameters
    ----------
    trees : sequence of Trees
        N trees in all. [-]

    Returns
    -------
    Trees
        N trees. [-]

    Examples
    --------
    >>> from edgeplan.physics.network import point_to_point
    >>> joined_trees([point_to_point([0.1]), point_to_point([0.2, 0.3])]).segment_offset.tolist()
    [0, 1, 2, 3]
    """
    flat = ("parent", "length_m", "node_farad", "node_siemens", "receiver_segment", "stub_length_m")
    return Trees(
        segment_offset=_joined_offsets([t.segment_offset for t in trees]),
        receiver_offset=_joined_offsets([t.receiver_offset for t in trees]),
        line=_joined_lines([t.line for t in trees]),
        stub_line=_joined_lines([t.stub_line for t in trees]),
        **{name: np.concatenate([getattr(t, name) for t in trees]) for name in flat},
    )


def _joined_offsets(offsets: Sequence[Array]) -> Array:
    """Offsets of lists that follow one another."""
    return np.concatenate([[0], np.cumsum(np.concatenate([np.diff(o) for o in offsets]))])


def _joined_lines(lines: Sequence[LineConstants]) -> LineConstants:
    """Line constants one after the other."""
    return LineConstants(*(np.concatenate(field) for field in zip(*lines, strict=True)))


def _joined_fields(kind: type[Any], parts: Sequence[Any]) -> Any:
    """Record whose arrays are those of the parts, one after the other."""
    names = kind.__slots__
    return kind(**{name: np.concatenate([getattr(p, name) for p in parts]) for name in names})
