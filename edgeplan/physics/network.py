"""The routed tree: admittance up, transfer down, current moments."""

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.lines import KnownLines, LineConstants, decay, reciprocal

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Trees:
    """Routed trees of N nets as flat lists of S segments and R receivers with offsets per net.

    ``parent`` and ``receiver_segment`` count within the tree; parent -1 starts at the
    source end (several roots are a star at the driver). Loads and receivers sit at the far
    node of their segment. The stub is the line between driver pad and series resistor;
    length 0 is none.
    """

    segment_offset: Array
    parent: Array
    length_m: Array
    line: LineConstants
    node_farad: Array
    node_siemens: Array
    receiver_offset: Array
    receiver_segment: Array
    stub_length_m: Array
    stub_line: LineConstants

    def __len__(self) -> int:
        """Count of trees."""
        return len(self.segment_offset) - 1

    def take(self, index: ArrayLike) -> "Trees":
        """Trees of the given indices, in their order; an index may come twice.

        Parameters
        ----------
        index : array_like
            Indices of nets, integers (M,). [-]

        Returns
        -------
        Trees
            M trees. [-]

        Examples
        --------
        See :func:`point_to_point`:

        >>> trees = point_to_point([0.05, 0.1], receiver_farad=5e-12)
        >>> trees.take([1, 1, 0]).length_m.tolist()
        [0.1, 0.1, 0.05]
        """
        index = np.asarray(index, dtype=np.intp)
        segment, segment_offset = _gather(self.segment_offset, index)
        receiver, receiver_offset = _gather(self.receiver_offset, index)
        return Trees(
            segment_offset=segment_offset,
            receiver_offset=receiver_offset,
            parent=self.parent[segment],
            length_m=self.length_m[segment],
            line=LineConstants(*(field[segment] for field in self.line)),
            node_farad=self.node_farad[segment],
            node_siemens=self.node_siemens[segment],
            receiver_segment=self.receiver_segment[receiver],
            stub_length_m=self.stub_length_m[index],
            stub_line=LineConstants(*(field[index] for field in self.stub_line)),
        )

    def shapes(self) -> list[Array]:
        """Index arrays of the nets of equal shape, in order of first appearance.

        Returns
        -------
        list of numpy.ndarray
            Nets with the same parents, receivers and presence of a stub. [-]

        Examples
        --------
        >>> [shape.tolist() for shape in point_to_point([0.05, 0.1]).shapes()]
        [[0, 1]]
        """
        parent = self.parent.astype(np.int64).tobytes()
        receiver = self.receiver_segment.astype(np.int64).tobytes()
        segment_at = (8 * np.asarray(self.segment_offset)).tolist()
        receiver_at = (8 * np.asarray(self.receiver_offset)).tolist()
        has_stub = (np.asarray(self.stub_length_m) > 0).tolist()
        groups: dict[tuple[bytes, bytes, bool], list[int]] = {}
        for net, stub in enumerate(has_stub):
            key = (
                parent[segment_at[net] : segment_at[net + 1]],
                receiver[receiver_at[net] : receiver_at[net + 1]],
                stub,
            )
            groups.setdefault(key, []).append(net)
        return [np.array(nets, dtype=np.intp) for nets in groups.values()]


class Response(NamedTuple):
    """Trees of one shape at K frequencies, seen from node 0 behind the series resistor.

    Admittance (G, K) [S]; voltage at the R receivers over that at node 0 (G, R, K) [-];
    on request the integral of the current along each segment for 1 V at node 0
    (G, segments, K) [A m/V].
    """

    admittance: Array
    transfer: Array
    moment_m: Array | None


def point_to_point(
    length_m: ArrayLike,
    *,
    receiver_farad: ArrayLike = 0.0,
    receiver_siemens: ArrayLike = 0.0,
    line: tuple[float, ...] = (50.0, 6e-9, 0.0, 0.0, 0.0),
    stub_length_m: ArrayLike = 0.0,
) -> Trees:
    """Trees of one segment and one receiver each, on lines of one kind.

    Parameters
    ----------
    length_m : array_like
        Length of the line of every net (N,). [m]
    receiver_farad, receiver_siemens : array_like
        Load at the far end. [F], [S]
    line : tuple of float
        The five constants of :class:`~edgeplan.physics.lines.LineConstants`. [SI]
    stub_length_m : array_like
        Length of the same line between driver pad and series resistor. [m]

    Returns
    -------
    Trees
        N trees. [-]

    Examples
    --------
    >>> len(point_to_point([0.05, 0.1, 0.2]))
    3
    """
    length = np.atleast_1d(np.asarray(length_m, dtype=float))
    full = np.ones_like(length)
    constants = LineConstants(*(value * full for value in line))
    return Trees(
        segment_offset=np.arange(len(length) + 1),
        parent=np.full(len(length), -1),
        length_m=length,
        line=constants,
        node_farad=np.asarray(receiver_farad) * full,
        node_siemens=np.asarray(receiver_siemens) * full,
        receiver_offset=np.arange(len(length) + 1),
        receiver_segment=np.zeros(len(length), dtype=np.intp),
        stub_length_m=np.asarray(stub_length_m) * full,
        stub_line=constants,
    )


def segment_net(trees: Trees) -> Array:
    """Net of every segment (S,).

    >>> segment_net(point_to_point([0.05, 0.1])).tolist()
    [0, 1]
    """
    return np.repeat(np.arange(len(trees)), np.diff(trees.segment_offset))


def root_impedance_ohm(trees: Trees) -> Array:
    """Impedance that the incident wave meets: the lines of all roots in parallel.

    Parameters
    ----------
    trees : Trees
        N trees of any shape. [-]

    Returns
    -------
    numpy.ndarray
        Impedance (N,). [ohm]

    Examples
    --------
    >>> root_impedance_ohm(point_to_point([0.1])).tolist()
    [50.0]
    """
    root = np.asarray(trees.parent) < 0
    conductance = np.bincount(
        segment_net(trees)[root], 1 / trees.line.impedance_ohm[root], minlength=len(trees)
    )
    return np.asarray(1 / conductance)


def response(
    trees: Trees,
    s: ArrayLike,
    *,
    s_row: ArrayLike | None = None,
    moments: bool = False,
    lines: KnownLines | None = None,
) -> Response:
    r"""Admittance at node 0 and transfer to the receivers of trees of one shape.

    For a segment with load Y_L at its far node, e = exp(-gamma l), u, v = Y_c +- Y_L:

    .. math::

        Y_{in} = Y_c\,\frac{u - v e^2}{u + v e^2}, \qquad
        \frac{V_{far}}{V_{near}} = \frac{2 Y_c e}{u + v e^2}, \qquad
        \int I\,dx = \frac{V_{near} - V_{far}}{\gamma Z_c}

    Parameters
    ----------
    trees : Trees
        G trees of one shape. [-]
    s : array_like
        Complex frequencies other than 0, (K,) for all trees, (G, K) one row a tree, or
        (U, K) with ``s_row``. Single precision in gives single precision out. [rad/s]
    s_row : array_like, optional
        Row of ``s`` that belongs to each tree (G,). [-]
    moments : bool
        Whether the current moments are wanted.
    lines : KnownLines, optional
        What is known of the lines from calls before.

    Returns
    -------
    Response
        Admittance [S], transfer [-] and current moments [A m/V] or None.

    Raises
    ------
    ValueError
        The trees differ in shape.

    Notes
    -----
    Valid for uncoupled lines with loads of conductance and capacitance.

    Examples
    --------
    Half a wavelength, open at its end, has the far voltage inverted:

    >>> result = response(point_to_point([0.1]), [2j * np.pi / 1.2e-9])
    >>> print(f"{result.transfer[0, 0, 0].real:.3f}")
    -1.000
    """
    s = np.atleast_2d(np.asarray(s))
    count = len(trees)
    row = _frequency_row(s, s_row, count)
    segments = _segments_per_tree(trees)
    index, gamma, admittance = (lines or KnownLines())(trees.line, s, np.repeat(row, segments))
    index = index.reshape(count, segments)
    load = _loads(trees, s[row], segments)
    parent = np.asarray(trees.parent).reshape(count, segments)[0]
    order = root_first(parent)
    length = _column(trees.length_m, segments, s.dtype)
    near_admittance, transfer = _up(parent, order, load, length, gamma, admittance, index)
    voltage = _down(parent, order, transfer)
    chosen = trees.receiver_segment[: trees.receiver_offset[1]]
    moment = None
    if moments:
        near = [np.ones_like(voltage[0]) if p < 0 else voltage[p] for p in parent]
        moment = np.stack(
            [
                (near[i] - voltage[i]) * admittance[index[:, i]] / gamma[index[:, i]]
                for i in range(segments)
            ],
            axis=1,
        )
    return Response(near_admittance, np.stack([voltage[i] for i in chosen], axis=1), moment)


def dc_response(trees: Trees) -> tuple[Array, Array]:
    """Conductance at node 0 and transfer to the receivers at rest, for trees of one shape.

    Parameters
    ----------
    trees : Trees
        G trees of one shape. [-]

    Returns
    -------
    conductance_siemens : numpy.ndarray
        Of the whole tree (G,). [S]
    transfer : numpy.ndarray
        Voltage of each receiver over that of node 0 (G, R). [-]

    Examples
    --------
    1 ohm of line in front of 99 ohm:

    >>> trees = point_to_point([0.1], receiver_siemens=1 / 99, line=(50, 6e-9, 10, 0, 0))
    >>> [round(float(value.item()), 4) for value in dc_response(trees)]
    [0.01, 0.99]
    """
    segments = _segments_per_tree(trees)
    parent = np.asarray(trees.parent).reshape(-1, segments)[0]
    order = root_first(parent)
    series = (trees.line.resistance_dc_ohm_per_m * trees.length_m).reshape(-1, segments)
    load = np.array(trees.node_siemens, dtype=float).reshape(-1, segments)
    total = np.zeros(len(trees))
    transfer: list[Array] = [total] * segments
    for i in order[::-1]:
        transfer[i] = 1 / (1 + series[:, i] * load[:, i])
        near = load[:, i] * transfer[i]
        if parent[i] < 0:
            total = total + near
        else:
            load[:, parent[i]] += near
    voltage = _down(parent, order, transfer)
    chosen = trees.receiver_segment[: trees.receiver_offset[1]]
    return total, np.stack([voltage[i] for i in chosen], axis=1)


def root_first(parent: Array) -> list[int]:
    """Order of the segments in which every parent comes before its children.

    >>> root_first(np.array([1, -1, 0]))
    [1, 0, 2]
    """
    depth = []
    for segment in range(len(parent)):
        steps, at = 0, segment
        while parent[at] >= 0 and steps <= len(parent):
            steps, at = steps + 1, parent[at]
        if steps > len(parent):
            raise ValueError("the parents of a tree run in a circle")
        depth.append(steps)
    return sorted(range(len(parent)), key=depth.__getitem__)


def _gather(offset: Array, index: Array) -> tuple[Array, Array]:
    """Flat positions and new offsets of the chosen pieces of a ragged list."""
    start = np.asarray(offset)[index]
    count = np.asarray(offset)[index + 1] - start
    after = np.concatenate([[0], np.cumsum(count)]).astype(np.intp)
    return np.repeat(start - after[:-1], count) + np.arange(after[-1]), after


def _frequency_row(s: Array, s_row: ArrayLike | None, count: int) -> Array:
    """Row of s for every tree."""
    if s_row is not None:
        return np.asarray(s_row, dtype=np.intp)
    return np.arange(count) if len(s) == count else np.zeros(count, dtype=np.intp)


def _segments_per_tree(trees: Trees) -> int:
    """Count of segments, the same for all trees."""
    counts = np.unique(np.diff(trees.segment_offset))
    if len(counts) != 1:
        raise ValueError("trees of one shape are wanted here")
    return int(counts[0])


def _column(values: Array, segments: int, precision: Any) -> list[Array]:
    """One (G, 1) column for each segment, real, in the precision of the computation."""
    real = np.zeros(0, dtype=precision).real.dtype
    table = np.asarray(values).reshape(-1, segments).astype(real)
    return [table[:, i, None] for i in range(segments)]


def _loads(trees: Trees, s: Array, segments: int) -> list[Array | None]:
    """Admittance of what hangs at each far node, None where nothing does."""
    farad = _column(trees.node_farad, segments, s.dtype)
    siemens = _column(trees.node_siemens, segments, s.dtype)
    loads: list[Array | None] = []
    for c, g in zip(farad, siemens, strict=True):
        loads.append(s * c + g if c.any() or g.any() else None)
    return loads


def _up(
    parent: Array,
    order: list[int],
    load: list[Array | None],
    length: list[Array],
    gamma: Array,
    admittance: Array,
    index: Array,
) -> tuple[Array, list[Array]]:
    """Leaves to root: admittance of the tree and transfer of every segment."""
    near: Array | None = None
    transfer: list[Any] = [None] * len(parent)
    for i in order[::-1]:
        own = admittance[index[:, i]]
        once = decay(gamma[index[:, i]] * length[i])
        twice = once * once
        far = load[i]
        forward, back = (own, own * twice) if far is None else (own + far, (own - far) * twice)
        shared = own * reciprocal(forward + back)
        transfer[i] = 2 * once * shared
        seen = shared * (forward - back)
        if parent[i] < 0:
            near = seen if near is None else near + seen
        else:
            above = load[parent[i]]
            load[parent[i]] = seen if above is None else above + seen
    if near is None:
        raise ValueError("a tree has no segment at the source end")
    return near, transfer


def _down(parent: Array, order: list[int], transfer: list[Array]) -> list[Array]:
    """Root to leaves: voltage at every far node for 1 V at node 0."""
    voltage: list[Any] = [None] * len(parent)
    for i in order:
        voltage[i] = transfer[i] if parent[i] < 0 else voltage[parent[i]] * transfer[i]
    return voltage
