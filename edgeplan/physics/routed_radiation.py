"""Far field of a routed net over a plane: vector sum over its segments, largest over directions.

Fields are given as distance times field, peak, in volts, per volt at the net's node 0.
"""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.air_lines import ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S
from edgeplan.physics.lines import decay
from edgeplan.physics.network import Trees
from edgeplan.physics.tree_currents import EndStates, end_states

Array = NDArray[Any]

# Directions by k times the net's extent: steps of sin(theta) and of phi, up to that number.
# Against grids of 41 x 144 for bends, U, Z and meanders: mean -0.03 dB, worst as below.
GRIDS = ((3.0, 5, 16), (8.0, 7, 24), (32.0, 13, 40), (np.inf, 25, 72))
SEARCH_DB = 0.6  # what the grid may miss, always low
HORIZON = 1 - 1e-6  # a bare wire's wave runs with the field along it: 0/0 at exactly 1
CHUNK = 32768  # net-frequency points whose line states are held
BLOCK = 4096  # of them searched at a time: the work arrays stay in the cache


class Layout(NamedTuple):
    """Where the segments of N trees lie, as flat lists beside those of `Trees`.

    Node 0 of each tree ``(N, 2)``, far end of each segment ``(S, 2)`` (it starts where
    its parent ends) [m]; height over the plane [m], 0 where planes on both sides
    leave nothing to radiate, and permittivity of the layer under it, ``(S,)``; distance of
    both planes from each other [m], 0 for a line over one plane, None if all are; width
    of the strips [m], needed between planes only: None leaves what leaks there unknown.
    """

    origin_m: Array
    end_m: Array
    height_m: Array
    permittivity: Array
    segment_offset: Array
    plane_gap_m: Array | None = None
    strip_width_m: Array | None = None

    def take(self, index: ArrayLike) -> "Layout":
        """Layouts of the trees of the given indices.

        >>> flat = Layout(np.zeros((2, 2)), np.ones((3, 2)), np.array([1., 2., 3.]), np.ones(3),
        ...               np.array([0, 1, 3]))
        >>> flat.take([1]).height_m.tolist()
        [2.0, 3.0]
        """
        index = np.asarray(index, dtype=np.intp)
        first, last = self.segment_offset[index], self.segment_offset[index + 1]
        rows = np.concatenate([np.arange(a, b) for a, b in zip(first, last, strict=True)])
        return Layout(
            self.origin_m[index],
            self.end_m[rows],
            self.height_m[rows],
            self.permittivity[rows],
            np.concatenate([[0], np.cumsum(last - first)]),
            None if self.plane_gap_m is None else self.plane_gap_m[rows],
            None if self.strip_width_m is None else self.strip_width_m[rows],
        )

    def known_height_m(self) -> Array:
        """Heights over the plane, NaN where it is not known whether there are two planes. [m]

        >>> empty = np.zeros((2, 2))
        >>> Layout(empty, empty, np.zeros(2), np.ones(2), np.arange(3),
        ...        np.array([1e-3, np.nan])).known_height_m().tolist()
        [0.0, nan]
        """
        gap_m = 0.0 if self.plane_gap_m is None else self.plane_gap_m
        return np.where(np.isnan(gap_m), np.nan, self.height_m)

    def nodes_m(self, parent: Array) -> tuple[Array, Array]:
        """Near and far end of each segment of G trees of one shape, ``(G, segments, 2)``. [m]

        >>> flat = Layout(np.zeros((1, 2)), np.array([[1., 0.], [1., 2.]]), np.ones(2),
        ...               np.ones(2), np.array([0, 2]))
        >>> flat.nodes_m(np.array([-1, 0]))[0].tolist()
        [[[0.0, 0.0], [1.0, 0.0]]]
        """
        end_m = self.end_m.reshape(len(self.origin_m), -1, 2)
        with_origin = np.concatenate([end_m, self.origin_m[:, None]], axis=1)
        return with_origin[:, parent], end_m


class _Segment(NamedTuple):
    """One segment of P net-frequency points: geometry, and what no direction changes."""

    start: int  # row of its near node among the nodes
    along_x: Array  # distance of its ends over its length
    along_y: Array
    height_m: Array
    inverse_permittivity: Array
    near_volt: Array  # gamma V/Zc
    near_ampere: Array
    far_volt: Array
    far_ampere: Array
    gamma_squared: Array


class _Points(NamedTuple):
    """P net-frequency points: wave number [1/m] and nodes (nodes, P) times it [rad]."""

    k: Array
    x: Array
    y: Array


def routed_field_per_volt(trees: Trees, layout: Layout, frequency_hz: ArrayLike) -> Array:
    r"""Largest distance times field of routed nets over a plane, per volt at node 0.

    With :math:`\vec u` the horizontal part of the direction, c = u . d along a segment and
    P = exp(jk u . p) at its ends, the transform of the segment's current is exactly

    .. math:: \tilde I = \frac{P_0(\gamma V_0/Z_c + jkc I_0) - P_1(\gamma V_1/Z_c + jkc I_1)}
       {\gamma^2 + k^2c^2}

    and the field is the sum over segments of

    .. math:: rE_\theta &= \frac{k\eta_0}{4\pi} 2h\Bigl[jk\,d_r\Bigl(1 -
       \frac{\sin^2\theta}{\varepsilon_r}\Bigr)\tilde I
       - \frac{\sin\theta}{\varepsilon_r}(P_0 I_0 - P_1 I_1)\Bigr] \\
       rE_\phi &= \frac{k\eta_0}{4\pi} 2h\,[jk\,d_\phi \cos\theta\,\tilde I]

    Parameters
    ----------
    trees : Trees
        N trees of any shapes. The line before the series resistor is no part of them.
    layout : Layout
        Their places, heights and permittivities.
    frequency_hz : array_like
        Frequencies, ``(F,)`` or ``(N, F)``. [Hz]

    Returns
    -------
    numpy.ndarray
        Distance times field, peak, the larger of both components, ``(N, F)``. A net with
        a NaN is NaN and stays alone. [V/V]

    Notes
    -----
    Infinite plane (see `radiation.finite_board_factor`), thin layer. The layer divides the
    part of the vertical currents (driver, receivers, changes of height) by er and leaves
    the loop part alone. Directions are a grid, finer for larger nets: up to `SEARCH_DB`
    low. A piece drawn with a length above the distance of its ends counts as a fine
    meander on the straight line between them.

    Examples
    --------
    Into a short circuit only the loop part is left, and half of the way turned by a right
    angle leaves 1/sqrt(2) of it: 3 dB.

    >>> from edgeplan.physics.network import LineConstants
    >>> line = LineConstants(*np.array([[50.0], [6e-9], [0.0], [0.0], [0.0]]) * np.ones(2))
    >>> chain = Trees(
    ...     segment_offset=np.array([0, 2]), parent=np.array([-1, 0]), length_m=np.full(2, 5e-3),
    ...     line=line, node_farad=np.zeros(2), node_siemens=np.array([0.0, 1e6]),
    ...     receiver_offset=np.array([0, 1]), receiver_segment=np.array([1]),
    ...     stub_length_m=np.zeros(1), stub_line=LineConstants(*np.ones((5, 1))))
    >>> def field(*ends_mm):
    ...     ends_m = np.array(ends_mm) * 1e-3
    ...     form = Layout(np.zeros((1, 2)), ends_m, np.full(2, 2e-4), np.ones(2), np.array([0, 2]))
    ...     return routed_field_per_volt(chain, form, [30e6])[0, 0]
    >>> print(f"{20 * np.log10(field((5, 0), (5, 5)) / field((5, 0), (10, 0))):.1f} dB")
    -3.0 dB

    References
    ----------
    .. [1] C. A. Balanis, "Antenna Theory", 3rd ed., Wiley, 2005, ch. 3 and 4; the layer's
       factors by reciprocity, as in `radiation.trace_field_per_ampere`.
    """
    frequency_hz = np.atleast_2d(np.asarray(frequency_hz, dtype=float))
    frequency_hz = np.broadcast_to(frequency_hz, (len(trees), frequency_hz.shape[1]))
    out = np.empty(frequency_hz.shape)
    rows = max(1, CHUNK // max(frequency_hz.shape[1], 1))
    for shape in trees.shapes():
        for start in range(0, shape.size, rows):
            chunk = shape[start : start + rows]
            out[chunk] = _field_of_shape(trees.take(chunk), layout.take(chunk), frequency_hz[chunk])
    return out


def _field_of_shape(trees: Trees, layout: Layout, frequency_hz: Array) -> Array:
    """Largest field of G trees of one shape (G, K)."""
    k = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT_M_PER_S
    segments = _segments(trees, layout, end_states(trees, 2j * np.pi * frequency_hz))
    points, extent = _points(layout, k)
    known = np.isfinite(extent)
    for segment in segments:
        known &= np.isfinite(sum(segment[1:]))
    best = np.full(extent.shape, np.nan)
    grid = np.searchsorted([limit for limit, *_ in GRIDS], extent)
    for number, (_, *steps) in enumerate(GRIDS):
        members = np.flatnonzero(known & (grid == number))
        for start in range(0, members.size, BLOCK):
            at = members[start : start + BLOCK]
            part = [_Segment(s.start, *(array[at] for array in s[1:])) for s in segments]
            here = _Points(points.k[at], points.x[:, at], points.y[:, at])
            best[at] = _largest(part, here, *steps)
    field = points.k * ETA_0_OHM / (2 * np.pi) * best
    return np.asarray(field.reshape(frequency_hz.shape))


def _points(layout: Layout, k: Array) -> tuple[_Points, Array]:
    """Nodes in radians about their middle, and the extent of each net in radians, (P,)."""
    far_m = layout.end_m.reshape(len(k), -1, 2)
    nodes_m = np.concatenate([far_m, layout.origin_m[:, None]], axis=1)
    low_m, high_m = nodes_m.min(axis=1, keepdims=True), nodes_m.max(axis=1, keepdims=True)
    nodes = (nodes_m - (low_m + high_m) / 2)[..., None] * k[:, None, None]
    x, y = (nodes[:, :, axis].transpose(1, 0, 2).reshape(nodes.shape[1], -1) for axis in (0, 1))
    extent = k * np.hypot(*(high_m - low_m)[:, 0].T)[:, None]
    return _Points(k.ravel(), x, y), extent.ravel()


def _segments(trees: Trees, layout: Layout, states: EndStates) -> list[_Segment]:
    """Segments of G trees at their K frequencies, points flattened to (P,)."""
    count, number, frequencies = states.gamma_per_m.shape
    parent = np.asarray(trees.parent)[:number]
    near_m, far_m = layout.nodes_m(parent)
    along = (far_m - near_m) / np.asarray(trees.length_m).reshape(count, -1, 1)
    places = (
        along[..., 0],
        along[..., 1],
        layout.known_height_m().reshape(count, -1),
        1 / layout.permittivity.reshape(count, -1),
    )
    per_volt = states.gamma_per_m / states.impedance_ohm
    waves = (
        per_volt * states.near_volt,
        states.near_ampere,
        per_volt * states.far_volt,
        states.far_ampere,
        states.gamma_per_m**2,
    )
    return [
        _Segment(
            int(start),
            *(np.repeat(place[:, i], frequencies) for place in places),
            *(wave[:, i].ravel() for wave in waves),
        )
        for i, start in enumerate(parent)
    ]


def _largest(segments: list[_Segment], points: _Points, thetas: int, phis: int) -> Array:
    """Largest component over a grid of directions of the upper half space, (P,)."""
    best = np.zeros(points.k.shape)
    for sine in np.linspace(0, HORIZON, thetas):
        for phi in np.arange(phis // 2) * 2 * np.pi / phis:
            best = np.maximum(best, _two_directions(segments, points, sine, phi))
    return best


def _two_directions(segments: list[_Segment], points: _Points, sine: float, phi: float) -> Array:
    """Larger component towards phi and phi + 180 degrees: their phases are conjugate. (P,)"""
    cosine_phi, sine_phi = np.cos(phi), np.sin(phi)
    phase = decay(-1j * sine * (points.x * cosine_phi + points.y * sine_phi))
    jk = 1j * points.k
    along, across = [0j, 0j], [0j, 0j]
    for i, segment in enumerate(segments):
        radial = cosine_phi * segment.along_x + sine_phi * segment.along_y
        azimuth = np.sqrt(1 - sine**2) * (cosine_phi * segment.along_y - sine_phi * segment.along_x)
        turn = sine * radial * jk
        scale = jk * segment.height_m / (segment.gamma_squared - turn * turn)
        upright = sine * segment.height_m * segment.inverse_permittivity
        radial = radial * (1 - sine**2 * segment.inverse_permittivity)
        near_turn, far_turn = turn * segment.near_ampere, turn * segment.far_ampere
        near, far = phase[segment.start], phase[i]
        for way, sign in enumerate((1, -1)):
            near_part = near * (segment.near_volt + sign * near_turn)
            far_part = far * (segment.far_volt + sign * far_turn)
            moment = sign * scale * (near_part - far_part)
            ends = near * segment.near_ampere - far * segment.far_ampere
            along[way] = along[way] + radial * moment - upright * ends
            across[way] = across[way] + azimuth * moment
            near, far = near.conj(), far.conj()
    return np.asarray(np.max(np.abs([*along, *across]), axis=0))
