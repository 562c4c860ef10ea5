"""Step responses of candidates in blocks of up to 4,096 rows of one length, whatever the shape."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import fft

from edgeplan.physics.grids import DAMPING, KEPT, Grids
from edgeplan.physics.lines import KnownLines, reciprocal
from edgeplan.physics.network import Trees, dc_response, response
from edgeplan.physics.sources import (
    EDGE_SHAPES,
    Drive,
    source_terms,
    source_weights,
    stub_chain,
)

Array = NDArray[Any]

ROWS = 4096
CACHED = 32_768  # spectral values at a time, so that they stay in the cache until transformed
CHUNK_MEMBERS = 40_000  # candidates whose trees are solved in one pass
LINES = KnownLines()  # corners, ramps and repeated calls meet the same lines on the same grids


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """M step responses of one length, each on its own step.

    ``level`` (M, n) is normalised to end at 1 and sampled at ``start_s + n step_s``;
    ``receiver`` counts over all nets. The next block overwrites ``level``.
    """

    level: Array
    step_s: Array
    start_s: Array
    net: Array
    candidate: Array
    receiver: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Chunk:
    """Trees of G tasks of one shape solved on one length, and their M candidates in a row.

    Candidates of task g are ``first[g]`` to ``first[g + 1]``. Weights (M, B), terms
    (G, B, 2K) real and imaginary in turn, transfer (G, R, K), edges (Q, K) with the row
    of each candidate, receivers (G, R).
    """

    first: Array
    task: Array
    net: Array
    candidate: Array
    weights: Array
    terms: Array
    transfer: Array
    edges: Array
    edge_row: Array
    receivers: Array
    step_s: Array
    start_s: Array


class _Rows:
    """Waveforms that wait to be read, with the labels of their rows."""

    def __init__(self, length: int, capacity: int, real: Any) -> None:
        self.length = length
        self.filled = 0
        self.growth = _growth(length, real)
        self.level = np.empty((capacity, len(self.growth)), dtype=real)
        self.label = np.empty((3, capacity), dtype=np.intp)
        self.time = np.empty((2, capacity))

    def room(self) -> int:
        """Rows that still fit."""
        return len(self.level) - self.filled

    def put(self, spectrum: Array) -> None:
        """Transform some spectra and undo the damping."""
        rows = slice(self.filled, self.filled + len(spectrum))
        wave = fft.irfft(spectrum, self.length, axis=1, overwrite_x=True)
        level = self.level[rows]
        np.multiply(wave[:, : level.shape[1]], self.growth, out=level)
        level -= level.dtype.type(1 / np.expm1(DAMPING))
        self.filled = rows.stop

    def take(self) -> Block:
        """Hand out what has come in and start again."""
        rows = slice(0, self.filled)
        net, candidate, receiver = self.label[:, rows].copy()
        step_s, start_s = self.time[:, rows].copy()
        self.filled = 0
        return Block(
            level=self.level[rows],
            step_s=step_s,
            start_s=start_s,
            net=net,
            candidate=candidate,
            receiver=receiver,
        )


def damped_axis(length: int) -> Array:
    """Complex frequency times the step, s dt = (a + 2 pi j k)/N for k = 0..N/2.

    >>> print(f"{damped_axis(256)[1]:.4f}")
    0.0234+0.0245j
    """
    return np.asarray((DAMPING + 2j * np.pi * np.arange(length // 2 + 1)) / length)


def blocks(
    trees: Trees,
    drive: Drive,
    grids: Grids,
    *,
    shape: str = "raised cosine",
    rows: int = ROWS,
    precision: Any = np.complex64,
) -> Iterator[Block]:
    """Step responses at every receiver for every candidate that has a grid.

    Parameters
    ----------
    trees, drive : Trees, Drive
        N nets and their candidates. [-]
    grids : Grids
        From :func:`~edgeplan.physics.grids.choose_grids`. [-]
    shape : str
        Shape of the source's edge, a key of ``EDGE_SHAPES``.
    rows : int
        Most rows of a block. [-]
    precision : numpy.dtype
        Complex type of the spectra.

    Yields
    ------
    Block
        Rows of one length, from nets of any shape. [-]

    Notes
    -----
    The wrapped-around steps before the window are all at their final level but for the
    share that has not settled after one period, damped by exp(-6); they are taken off.

    Examples
    --------
    A matched line passes half the source's level, normalised to 1:

    >>> from edgeplan.physics.grids import choose_grids, needs
    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> trees, drive = point_to_point([0.1]), drive_of([[50.0]], ramp_s=1e-9)
    >>> grids = choose_grids(drive, needs(trees, drive, [10e-9]))
    >>> print(f"{next(blocks(trees, drive, grids)).level[0, 100]:.3f}")
    1.000
    """
    net_shape = np.empty(len(trees), dtype=np.intp)
    for number, nets in enumerate(trees.shapes()):
        net_shape[nets] = number
    receivers = np.diff(trees.receiver_offset)
    members = np.diff(grids.offset)
    for length in np.unique(grids.length):
        tasks = np.flatnonzero(grids.length == length)
        tasks = tasks[np.argsort(net_shape[grids.net[tasks]], kind="stable")]
        axis = damped_axis(int(length)).astype(precision)
        waiting = _Rows(int(length), max(rows, int(receivers.max())), axis.real.dtype)
        for part in _chunks(tasks, net_shape[grids.net[tasks]], members[tasks]):
            yield from _fill(solve(trees, drive, grids, part, axis, shape, LINES), waiting)
        if waiting.filled:
            yield waiting.take()


def _growth(length: int, real: Any) -> Array:
    """Growing exponential over the kept part of the window."""
    sample = np.arange(int(KEPT * length))
    return np.exp(DAMPING * sample / length).astype(real)


def _chunks(tasks: Array, shape: Array, members: Array) -> Iterator[Array]:
    """Runs of tasks of one shape with a bounded count of candidates."""
    group = np.cumsum(members) // CHUNK_MEMBERS
    cuts = np.flatnonzero((np.diff(shape) != 0) | (np.diff(group) != 0)) + 1
    yield from np.split(tasks, cuts)


def solve(
    trees: Trees,
    drive: Drive,
    grids: Grids,
    tasks: Array,
    axis: Array,
    shape: str,
    lines: KnownLines,
) -> Chunk:
    """Everything of some tasks of one shape that candidates share, and their weights.

    ``axis`` (K,) is the complex frequency times the step; its precision is kept.
    """
    net = grids.net[tasks]
    own = trees.take(net)
    steps, s_row = np.unique(grids.step_s[tasks], return_inverse=True)
    s = (axis / steps[:, None]).astype(axis.dtype)
    task, candidate = _members(grids, tasks)
    chosen = (net[task], candidate)
    rest_siemens, rest_transfer = dc_response(own)
    weights, pad_farad = _weights(drive, chosen, task, rest_siemens)
    tree = response(own, s, s_row=s_row, lines=lines)
    has_stub = own.stub_length_m[0] > 0
    chain = stub_chain(own, s, s_row, lines=lines) if has_stub else None
    terms = source_terms(tree.admittance, s[s_row], chain=chain, pad_farad=pad_farad)
    ratio = grids.ramp_s[chosen] / grids.step_s[tasks][task]
    ratios, edge_row = np.unique(ratio, return_inverse=True)
    receivers = np.arange(tree.transfer.shape[1])
    return Chunk(
        first=np.searchsorted(task, np.arange(len(tasks) + 1)),
        task=task,
        net=chosen[0],
        candidate=candidate,
        weights=weights.astype(axis.real.dtype),
        terms=terms.view(axis.real.dtype),
        transfer=tree.transfer * (1 / rest_transfer[..., None]).astype(axis.real.dtype),
        edges=_edges(ratios, axis, shape),
        edge_row=edge_row,
        receivers=np.asarray(trees.receiver_offset)[net][:, None] + receivers,
        step_s=grids.step_s[tasks],
        start_s=grids.start_s[chosen],
    )


def _members(grids: Grids, tasks: Array) -> tuple[Array, Array]:
    """Place of the task and candidate (M,) of everything the tasks hold."""
    start = grids.offset[tasks]
    count = grids.offset[tasks + 1] - start
    task = np.repeat(np.arange(len(tasks)), count)
    within = np.arange(len(task)) - np.repeat(np.cumsum(count) - count, count)
    return task, grids.candidate[start[task] + within]


def _weights(
    drive: Drive, chosen: tuple[Array, Array], task: Array, rest_siemens: Array
) -> tuple[Array, Array | None]:
    """Weights of the terms, scaled to end at 1, and the pads where a task has only one."""
    resistance, series = drive.resistance_ohm[chosen], drive.series_ohm[chosen]
    pad = np.asarray(drive.pad_farad)[chosen]
    shared = np.zeros(len(rest_siemens))
    shared[task] = pad
    common = bool((shared[task] == pad).all())
    weights = source_weights(resistance, series, None if common else pad)
    weights /= (1 + (resistance + series) * rest_siemens[task])[:, None]
    return weights, shared if common else None


def _edges(ratios: Array, axis: Array, shape: str) -> Array:
    """Spectrum of each edge, of so many steps, over s dt."""
    scaled = (ratios[:, None] * axis).astype(axis.dtype)
    return np.asarray(EDGE_SHAPES[shape](scaled) * reciprocal(axis))


def _fill(chunk: Chunk, waiting: _Rows) -> Iterator[Block]:
    """Waveforms of the candidates of a chunk, passed on whenever the waiting rows are full."""
    at, receivers = 0, chunk.receivers.shape[1]
    few = max(1, CACHED // (chunk.edges.shape[1] * receivers))
    while at < len(chunk.candidate):
        fit = waiting.room() // receivers
        if not fit:
            yield waiting.take()
            continue
        stop = min(at + fit, len(chunk.candidate))
        _label(chunk, slice(at, stop), waiting)
        for start in range(at, stop, few):
            waiting.put(spectra(chunk, slice(start, min(start + few, stop))))
        at = stop


def spectra(chunk: Chunk, part: slice) -> Array:
    """Spectrum of every row, E H / D, in the order candidate, receiver."""
    task, edge = chunk.task[part], chunk.edge_row[part]
    opens = np.ones(len(task), dtype=bool)  # E H is shared by a run of one net and one edge
    opens[1:] = (task[1:] != task[:-1]) | (edge[1:] != edge[:-1])
    shared = chunk.edges[edge[opens]][:, None] * chunk.transfer[task[opens]]
    result = shared.take(np.cumsum(opens) - 1, axis=0)
    result *= reciprocal(_ratios(chunk, part))[:, None]
    return np.asarray(result.reshape(-1, result.shape[2]))


def _ratios(chunk: Chunk, own: slice) -> Array:
    """Source voltage over voltage at node 0, one matrix product for each task."""
    result = np.empty((own.stop - own.start, chunk.terms.shape[-1]), chunk.terms.dtype)
    for task in range(int(chunk.task[own.start]), int(chunk.task[own.stop - 1]) + 1):
        begin = max(int(chunk.first[task]), own.start)
        end = min(int(chunk.first[task + 1]), own.stop)
        to = result[begin - own.start : end - own.start]
        np.matmul(chunk.weights[begin:end], chunk.terms[task], out=to)
    return result.view(chunk.edges.dtype)


def _label(chunk: Chunk, part: slice, waiting: _Rows) -> None:
    """Write net, candidate and receiver, step and start of the next rows."""
    task, receivers = chunk.task[part], chunk.receivers.shape[1]
    rows = slice(waiting.filled, waiting.filled + len(task) * receivers)
    waiting.label[0, rows] = np.repeat(chunk.net[part], receivers)
    waiting.label[1, rows] = np.repeat(chunk.candidate[part], receivers)
    waiting.label[2, rows] = chunk.receivers[task].ravel()
    waiting.time[0, rows] = np.repeat(chunk.step_s[task], receivers)
    waiting.time[1, rows] = np.repeat(chunk.start_s[part], receivers)
