"""Step responses of candidates in blocks of about 1,500 rows of one length, whatever the shape."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import fft

from edgeplan.physics.grids import DAMPING, KEPT, Grids
from edgeplan.physics.network import Trees, dc_response, response
from edgeplan.physics.sources import (
    EDGE_SHAPES,
    Drive,
    source_terms,
    source_weights,
    stub_chain,
)

Array = NDArray[Any]

ROWS = 1536
CHUNK_MEMBERS = 20_000  # candidates whose trees are solved in one pass


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """M step responses of one length, each on its own step.

    ``level`` (M, n) is normalised to end at 1 and sampled at ``start_s + n step_s``;
    ``receiver`` counts over all nets. A row may come twice.
    """

    level: Array
    step_s: Array
    start_s: Array
    net: Array
    candidate: Array
    receiver: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Chunk:
    """Trees of one shape solved on one length: terms (G, B, 2K), transfer (G, R, K)."""

    weights: Array
    terms: Array
    transfer: Array
    edges: Array
    edge_row: Array
    member: Array


class _Rows:
    """Spectra that wait for their transform, with the labels of their rows."""

    def __init__(self, length: int, capacity: int, precision: Any) -> None:
        self.length = length
        self.filled = 0
        self.spectrum = np.empty((capacity, length // 2 + 1), dtype=precision)
        self.label = np.empty((3, capacity), dtype=np.intp)
        self.time = np.empty((2, capacity))
        self.growth = _growth(length, self.spectrum.real.dtype)

    def room(self) -> int:
        """Rows that still fit."""
        return len(self.spectrum) - self.filled

    def take(self) -> Block:
        """Transform what has come in and start again."""
        rows = slice(0, self.filled)
        wave = fft.irfft(self.spectrum[rows], self.length, axis=1, overwrite_x=True)
        kept = len(self.growth)
        level = np.multiply(
            wave[:, :kept], self.growth, out=np.empty((self.filled, kept), wave.dtype)
        )
        level -= level.dtype.type(1 / np.expm1(DAMPING))
        net, candidate, receiver = self.label[:, rows].copy()
        step_s, start_s = self.time[:, rows].copy()
        self.filled = 0
        return Block(
            level=level,
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
        Rows of a block; a net with more candidates times receivers makes a longer one. [-]
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
        tasks = tasks[np.lexsort((members[tasks], net_shape[grids.net[tasks]]))]
        largest = int((members[tasks] * receivers[grids.net[tasks]]).max())
        waiting = _Rows(int(length), max(rows, largest), precision)
        for part in _chunks(tasks, net_shape[grids.net[tasks]], members[tasks]):
            axis = damped_axis(int(length)).astype(precision)
            chunk = solve(trees, drive, grids, part, axis, shape)
            yield from _fill(chunk, grids, part, trees, waiting)
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


def solve(trees: Trees, drive: Drive, grids: Grids, tasks: Array, axis: Array, shape: str) -> Chunk:
    """Everything of some tasks of one shape that does not depend on a candidate, and the weights.

    ``axis`` (K,) is the complex frequency times the step; its precision is kept.
    """
    real = axis.real.dtype
    net = grids.net[tasks]
    own = trees.take(net)
    steps, s_row = np.unique(grids.step_s[tasks], return_inverse=True)
    s = (axis / steps[:, None]).astype(axis.dtype)
    tree = response(own, s, s_row=s_row)
    rest_siemens, rest_transfer = dc_response(own)
    member = _padded_members(grids, tasks)
    chosen = (net[:, None], member)
    resistance, series = drive.resistance_ohm[chosen], drive.series_ohm[chosen]
    pad = np.asarray(drive.pad_farad)[chosen]
    common = bool((pad == pad[:, :1]).all())
    chain = stub_chain(own, s, s_row) if own.stub_length_m[0] > 0 else None
    terms = source_terms(
        tree.admittance, s[s_row], chain=chain, pad_farad=pad[:, 0] if common else None
    )
    weights = source_weights(resistance, series, None if common else pad)
    weights /= (1 + (resistance + series) * rest_siemens[:, None])[..., None]
    ratio = grids.ramp_s[chosen] / grids.step_s[tasks, None]
    ratios, edge_row = np.unique(ratio, return_inverse=True)
    return Chunk(
        weights=weights.astype(real),
        terms=terms.view(real),
        transfer=tree.transfer / rest_transfer[..., None].astype(real),
        edges=_edges(ratios, axis, shape),
        edge_row=edge_row.reshape(ratio.shape),
        member=member,
    )


def _padded_members(grids: Grids, tasks: Array) -> Array:
    """Candidates of each task (G, C), the last one repeated where a task has fewer."""
    first = grids.offset[tasks][:, None]
    count = grids.offset[tasks + 1][:, None] - first
    return np.asarray(grids.candidate[first + np.minimum(np.arange(count.max()), count - 1)])


def _edges(ratios: Array, axis: Array, shape: str) -> Array:
    """Spectrum of each edge, of so many steps, over s dt."""
    scaled = (ratios[:, None] * axis).astype(axis.dtype)
    return np.asarray(EDGE_SHAPES[shape](scaled) / axis)


def _fill(
    chunk: Chunk, grids: Grids, tasks: Array, trees: Trees, waiting: _Rows
) -> Iterator[Block]:
    """Spectra of the candidates of a chunk, passed on whenever the waiting rows are full."""
    receivers = chunk.transfer.shape[1]
    at = 0
    while at < len(tasks):
        each = chunk.member.shape[1] * receivers
        fit = waiting.room() // each
        if not fit:
            yield waiting.take()
            continue
        part = slice(at, min(at + fit, len(tasks)))
        rows = slice(waiting.filled, waiting.filled + (part.stop - at) * each)
        spectra(chunk, part, waiting.spectrum[rows])
        _label(chunk, part, grids, tasks, trees, waiting, rows)
        waiting.filled, at = rows.stop, part.stop


def spectra(chunk: Chunk, part: slice, out: Array) -> None:
    """Write the spectrum of every row, E H / D, in the order task, candidate, receiver."""
    ratio = np.matmul(chunk.weights[part], chunk.terms[part]).view(out.dtype)
    source = chunk.edges[chunk.edge_row[part]] / ratio
    receivers = chunk.transfer.shape[1]
    shaped = out.reshape(*source.shape[:2], receivers, out.shape[-1])
    np.multiply(source[:, :, None], chunk.transfer[part, None], out=shaped)


def _label(
    chunk: Chunk,
    part: slice,
    grids: Grids,
    tasks: Array,
    trees: Trees,
    waiting: _Rows,
    rows: slice,
) -> None:
    """Write net, candidate and receiver, step and start of the rows."""
    own = tasks[part][:, None, None]
    member = chunk.member[part][:, :, None]
    receivers = np.arange(chunk.transfer.shape[1])
    shape = (len(own), member.shape[1], len(receivers))
    net = grids.net[own]
    receiver = np.asarray(trees.receiver_offset)[net] + receivers
    for of_row, index in zip(waiting.label, (net, member, receiver), strict=True):
        of_row[rows] = np.broadcast_to(index, shape).ravel()
    times = (grids.step_s[own], grids.start_s[net, member])
    for at_row, time in zip(waiting.time, times, strict=True):
        at_row[rows] = np.broadcast_to(time, shape).ravel()
