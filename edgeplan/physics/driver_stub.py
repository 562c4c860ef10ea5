"""The line between a driver and its series resistor as the first segment of its tree."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees
from edgeplan.physics.routed_radiation import Layout
from edgeplan.physics.tree_currents import end_states

Array = NDArray[Any]


class StubPlaces(NamedTuple):
    """Where the stubs of N trees start, and what they run over, all ``(N, ...)``.

    Position of the pad [m], height [m], permittivity [-], distance of both planes [m] and width
    of the strip [m] as in `Layout`; None for stubs that all run over one plane.
    """

    pad_m: Array
    height_m: Array
    permittivity: Array
    plane_gap_m: Array | None = None
    strip_width_m: Array | None = None


def with_stub(trees: Trees, layout: Layout, places: StubPlaces) -> tuple[Trees, Layout]:
    """Trees from the driver's pad on: the stub is segment 0 and node 0 is the pad.

    Parameters
    ----------
    trees, layout : Trees, Layout
        N nets, each with a stub of some length, from the series resistor on.
    places : StubPlaces
        Position of the driver's pad ``(N, 2)``, the rest ``(N,)``.

    Returns
    -------
    tuple of Trees and Layout
        The same nets with one segment more. The series resistor is left out: its current
        is right on both sides, the voltage of the stub is that behind the resistor.

    Notes
    -----
    What is worked out of them is per volt at the pad; divided by `site_transfer` it is
    per volt behind the series resistor, as of the trees without their stubs.

    Examples
    --------
    >>> from edgeplan.physics.network import point_to_point
    >>> trees = point_to_point([0.06], stub_length_m=0.02)
    >>> flat = Layout(np.array([[0.02, 0.0]]), np.array([[0.08, 0.0]]), np.array([2e-4]),
    ...               np.array([4.3]), np.array([0, 1]))
    >>> longer, _ = with_stub(trees, flat, StubPlaces(np.zeros((1, 2)), np.array([2e-4]),
    ...                                               np.array([4.3])))
    >>> longer.length_m.tolist(), longer.parent.tolist()
    ([0.02, 0.06], [-1, 0])
    """
    offset = np.asarray(trees.segment_offset)
    before = offset[:-1]
    longer = offset + np.arange(len(offset))
    gap_m = np.zeros(offset[-1]) if layout.plane_gap_m is None else layout.plane_gap_m
    strip_m = np.full(offset[-1], np.nan) if layout.strip_width_m is None else layout.strip_width_m
    extended = Trees(
        segment_offset=longer,
        parent=np.insert(np.asarray(trees.parent) + 1, before, -1),
        length_m=np.insert(trees.length_m, before, trees.stub_length_m),
        line=LineConstants(
            *(
                np.insert(own, before, stub)
                for own, stub in zip(trees.line, trees.stub_line, strict=True)
            )
        ),
        node_farad=np.insert(trees.node_farad, before, 0.0),
        node_siemens=np.insert(trees.node_siemens, before, 0.0),
        receiver_offset=trees.receiver_offset,
        receiver_segment=np.asarray(trees.receiver_segment) + 1,
        stub_length_m=np.zeros(len(trees)),
        stub_line=trees.stub_line,
    )
    return extended, Layout(
        np.asarray(places.pad_m, dtype=float),
        np.insert(layout.end_m, before, layout.origin_m, axis=0),
        np.insert(layout.height_m, before, places.height_m),
        np.insert(layout.permittivity, before, places.permittivity),
        longer,
        np.insert(gap_m, before, 0.0 if places.plane_gap_m is None else places.plane_gap_m),
        np.insert(
            strip_m, before, np.nan if places.strip_width_m is None else places.strip_width_m
        ),
    )


def site_transfer(trees: Trees, frequency_hz: ArrayLike) -> Array:
    """Voltage behind the stub over that at the pad, of trees made by `with_stub`.

    Parameters
    ----------
    trees : Trees
        N trees of any shapes, the stub as segment 0.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        Complex ratio, ``(N, F)``. [-]

    Examples
    --------
    See `with_stub`; a matched line turns the phase only.

    >>> from edgeplan.physics.network import point_to_point
    >>> matched = point_to_point([0.1], receiver_siemens=0.02)
    >>> print(f"{abs(site_transfer(matched, [1e9])[0, 0]):.3f}")
    1.000
    """
    frequency_hz = np.atleast_2d(np.asarray(frequency_hz, dtype=float))
    frequency_hz = np.broadcast_to(frequency_hz, (len(trees), frequency_hz.shape[1]))
    out = np.empty(frequency_hz.shape, dtype=complex)
    for index in trees.shapes():
        out[index] = end_states(trees.take(index), 2j * np.pi * frequency_hz[index]).far_volt[:, 0]
    return out
