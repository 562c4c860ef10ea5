"""Time grids: which step and how many samples each net and candidate needs."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.network import Trees, root_first, root_impedance_ohm, segment_net
from edgeplan.physics.sources import Drive

Array = NDArray[Any]

SAMPLES_PER_RAMP = 10  # raised cosine: 1 mV/V and 0.07 % of the edge with cubic crossings
DAMPING = 6.0  # sigma T; more raises the noise late in the window, less the wrap-around
KEPT = 0.75  # share of the period that is read; the rest drowns in the growing exponential
SHORTEST = 128
SPLIT_ABOVE = 1024
LONGEST = 4096
LEAST_OBSERVED_S = 2e-9
SETTLED = 1e-3
TASK_ROWS = 20  # what one more tree pass costs, in waveform rows of 256 samples


@dataclass(frozen=True, slots=True, kw_only=True)
class Needs:
    """What every candidate asks of its window, (N, C), and delays (N,).

    ``full_s`` is the window wanted, ``least_s`` the one without which nothing can be read;
    ``pole_s`` the time constant of driver and capacitance.
    """

    full_s: Array
    least_s: Array
    pole_s: Array
    delay_s: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Grids:
    """T pieces of work: a net, a step, a length and the candidates that share them.

    Candidates of piece t are ``candidate[offset[t]:offset[t + 1]]``. ``ramp_s`` and
    ``start_s`` (N, C) are the ramp computed with and the time at which it starts: other than
    the candidate's own only where a slow pole lets it be stretched about its middle.
    """

    net: Array
    step_s: Array
    length: Array
    offset: Array
    candidate: Array
    ramp_s: Array
    start_s: Array


def rounded_step_s(step_s: ArrayLike) -> Array:
    """Step rounded down to 1 ps times a power of the fourth root of 2.

    Parameters
    ----------
    step_s : array_like
        Longest step that will do. [s]

    Returns
    -------
    numpy.ndarray
        Step shared with other nets. [s]

    Examples
    --------
    >>> print(f"{rounded_step_s(55e-12) * 1e12:.3f} ps")
    53.817 ps
    """
    quarter_octave = np.floor(4 * np.log2(np.asarray(step_s) / 1e-12) + 1e-6)
    return np.asarray(1e-12 * 2 ** (quarter_octave / 4))


def longest_delay_s(trees: Trees) -> Array:
    """Delay of the longest way from the driver's pad to a leaf, bare lines.

    Parameters
    ----------
    trees : Trees
        N trees. [-]

    Returns
    -------
    numpy.ndarray
        Delay with the stub (N,). [s]

    Examples
    --------
    >>> from edgeplan.physics.network import point_to_point
    >>> print(f"{longest_delay_s(point_to_point([0.1]))[0] * 1e12:.0f} ps")
    600 ps
    """
    own = np.asarray(trees.length_m * trees.line.delay_s_per_m)
    longest = np.zeros(len(trees))
    for nets in trees.shapes():
        segment = np.asarray(trees.segment_offset)[nets][:, None]
        count = int(np.diff(trees.segment_offset)[nets[0]])
        arrival = own[segment + np.arange(count)]
        parent = np.asarray(trees.parent)[segment[0, 0] : segment[0, 0] + count]
        for i in root_first(parent):
            if parent[i] >= 0:
                arrival[:, i] += arrival[:, parent[i]]
        longest[nets] = arrival.max(axis=1)
    return np.asarray(longest + trees.stub_length_m * trees.stub_line.delay_s_per_m)


def needs(trees: Trees, drive: Drive, observe_s: ArrayLike) -> Needs:
    r"""Window of every candidate: delay, ramp, five round trips or the slow pole, observation.

    Ringing falls by :math:`|\Gamma_s \Gamma_l|` each loaded round trip; the pole is the
    driver's whole resistance with the lumped capacitance, and with that of the lines
    when the resistance exceeds the line's impedance.

    Parameters
    ----------
    trees : Trees
        N trees. [-]
    drive : Drive
        (N, C). [-]
    observe_s : array_like
        One bit, after which the level is read (N,). [s]

    Returns
    -------
    Needs
        All [s].

    Notes
    -----
    Settling is bounded for 1 mV/V of the swing. The observation is one bit or the
    settling, whichever is shorter, and 2 ns at least.

    Examples
    --------
    0.6 ns of line, matched: 0.6 + 1 + 10 x 0.6 + 2 ns.

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> window = needs(point_to_point([0.1]), drive_of([[50.0]], ramp_s=1e-9), [10e-9])
    >>> print(f"{window.full_s[0, 0] * 1e9:.2f} ns")
    9.60 ns
    """
    delay = longest_delay_s(trees)
    pole, loading = _slow_pole(trees, drive)
    trip, fall = 2 * delay[:, None] * loading, _ringing_loss(trees, drive)
    observe = np.broadcast_to(np.asarray(observe_s, dtype=float), delay.shape)[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        trips = [np.where(fall > 0, np.log(1 / share) / fall, np.inf) for share in (SETTLED, 0.1)]
    settle = np.maximum(trips[0] * trip, np.log(1 / SETTLED) * pole)
    begin = delay[:, None] + drive.candidate_ramp_s()
    hold = np.maximum(np.maximum(10 * delay[:, None], trips[1] * trip), 4 * pole)
    watched = np.maximum(np.minimum(observe, settle), LEAST_OBSERVED_S)
    return Needs(
        full_s=begin + hold + watched,
        least_s=begin + np.maximum(5 * delay[:, None], 4 * pole),
        pole_s=pole,
        delay_s=delay,
    )


def _slow_pole(trees: Trees, drive: Drive) -> tuple[Array, Array]:
    """Time constant of driver and capacitance (N, C), and slowing of the lines by loads (N, 1)."""
    net, count = segment_net(trees), len(trees)
    own = trees.line.delay_s_per_m / trees.line.impedance_ohm * trees.length_m
    of_lines = np.bincount(net, own, minlength=count)[:, None]
    lumped = np.bincount(net, trees.node_farad, minlength=count)[:, None]
    siemens = np.bincount(net, trees.node_siemens, minlength=count)[:, None]
    total, impedance = drive.resistance_ohm + drive.series_ohm, root_impedance_ohm(trees)[:, None]
    slow = total > impedance
    seen = np.where(slow, total, impedance)
    pole = seen / (1 + seen * siemens) * (lumped + np.where(slow, of_lines, 0))
    with np.errstate(divide="ignore", invalid="ignore"):
        loading = np.where(of_lines > 0, np.sqrt(1 + lumped / of_lines), 1.0)
    return pole + drive.resistance_ohm * drive.pad_farad, loading


def _ringing_loss(trees: Trees, drive: Drive) -> Array:
    """Least loss of a round trip (N, C), in nepers: what an arm sees at its two ends.

    At its near end an arm meets the lines beside it and the one it comes from, or the
    driver; arms of a star ring against each other even where the driver matches them.
    """
    net, count = segment_net(trees), len(trees)
    admittance = 1 / np.asarray(trees.line.impedance_ohm)
    above = np.asarray(trees.parent) + np.asarray(trees.segment_offset)[net]
    root, inner = np.flatnonzero(trees.parent < 0), np.flatnonzero(trees.parent >= 0)
    below = np.bincount(above[inner], admittance[inner], minlength=len(net))
    of_roots = np.bincount(net[root], admittance[root], minlength=count)
    beside = below[above[inner]] - admittance[inner] + admittance[above[inner]]
    strongest = np.zeros(drive.exists.shape)
    np.maximum.at(strongest, net[inner], _mismatch(admittance[inner], beside)[:, None])
    with np.errstate(divide="ignore", invalid="ignore"):
        of_driver = 1 / (drive.resistance_ohm + drive.series_ohm)[net[root]]
        others = (of_roots[net[root]] - admittance[root])[:, None] + of_driver
        near = np.where(np.isinf(others), 1.0, _mismatch(admittance[root, None], others))
        np.maximum.at(strongest, net[root], near)
        leaf = np.flatnonzero(below == 0)
        far = np.zeros(count)
        load = np.asarray(trees.node_siemens)[leaf]
        np.maximum.at(far, net[leaf], _mismatch(admittance[leaf], load))
        return np.asarray(-np.log(strongest * far[:, None]))


def _mismatch(admittance: Array, beyond: Array) -> Array:
    """Size of the reflection of a line at what lies beyond its end."""
    return np.asarray(np.abs((admittance - beyond) / (admittance + beyond)))


def choose_grids(drive: Drive, window: Needs) -> Grids:
    """Split the candidates of every net into pieces of work with one grid each.

    Parameters
    ----------
    drive : Drive
        (N, C). [-]
    window : Needs
        From :func:`needs`. [s]

    Returns
    -------
    Grids
        Candidates that no grid can hold are in no piece, and read as NaN.

    Notes
    -----
    A piece opens with the shortest ramp left, takes a tenth of it as step, and
    takes along whatever fits its length. The allowed length is the cheapest per net.

    Examples
    --------
    A ramp of 1 ns and one of 1 us need a grid each:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> drive = drive_of([[50.0, 50.0]], ramp_s=[[1e-9, 1e-6]])
    >>> grids = choose_grids(drive, needs(point_to_point([0.1]), drive, [10e-9]))
    >>> grids.length.tolist(), grids.candidate.tolist()
    ([192, 128], [0, 1])
    """
    ramp, need, possible = _feasible(drive, window)
    steps = rounded_step_s(ramp / SAMPLES_PER_RAMP)
    caps = [SHORTEST, 2 * SHORTEST, 4 * SHORTEST, SPLIT_ABOVE]
    plans = [_rounds(steps, need, possible, np.full(len(ramp), cap)) for cap in caps]
    costs = np.stack([_cost(plan, possible) for plan in plans])
    cap = np.array(caps)[costs.argmin(axis=0)]
    piece, step, length = _rounds(steps, need, possible, cap)
    net, candidate = np.nonzero(possible)
    key = net * (piece.max(initial=0) + 1) + piece[net, candidate]
    order = np.argsort(key, kind="stable")
    first = np.flatnonzero(np.diff(key[order], prepend=-1))
    which = (piece[net, candidate][order][first], net[order][first])
    return Grids(
        net=which[1],
        step_s=step[which],
        length=length[which],
        offset=np.append(first, len(order)),
        candidate=candidate[order],
        ramp_s=ramp,
        start_s=(drive.candidate_ramp_s() - ramp) / 2,
    )


def _feasible(drive: Drive, window: Needs) -> tuple[Array, Array, Array]:
    """Ramp to compute with, window to hold and whether that can be, each (N, C)."""
    ramp = np.array(drive.candidate_ramp_s(), dtype=float)
    possible = np.asarray(drive.exists) & np.isfinite(window.least_s) & (ramp > 0)
    ramp = np.where(possible, ramp, 1.0)
    kept = KEPT * rounded_step_s(ramp / SAMPLES_PER_RAMP)
    need = np.where(window.full_s <= LONGEST * kept, window.full_s, window.least_s)
    need = np.where(possible, np.maximum(need, np.minimum(window.full_s, LONGEST * kept)), 0.0)
    # A slow pole hides the shape of a fast edge: only its middle counts. From 25 round trips
    # on the stretched ramp stays below one round trip, beyond 100 the steps of the line vanish.
    with np.errstate(divide="ignore", invalid="ignore"):
        trips = window.pole_s / (2 * window.delay_s[:, None])
    length = np.where(trips > 100, SPLIT_ABOVE, LONGEST)
    wide = np.where(np.isfinite(window.full_s), window.full_s, window.least_s)
    stretched = wide * (SAMPLES_PER_RAMP / (KEPT * length) * 1.25)
    hidden = (trips > 25) & (stretched < window.pole_s / 5)
    change = possible & hidden & (wide > length * kept)
    ramp = np.where(change, stretched, ramp)
    need = np.where(change, wide + stretched, need)
    return ramp, need, possible & ((need <= LONGEST * kept) | change)


def _rounds(steps: Array, need: Array, possible: Array, cap: Array) -> tuple[Array, Array, Array]:
    """Piece of every candidate (N, C), step and length of every piece (pieces, N)."""
    open_, piece = possible.copy(), np.zeros(steps.shape, dtype=np.intp)
    everyone, need = np.arange(len(steps)), need / KEPT
    of_piece, lengths = [np.ones(len(steps))], [np.full(len(steps), SHORTEST)]
    for round_ in range(steps.shape[1]):
        if not open_.any():
            break
        opener = np.where(open_, steps, np.inf).argmin(axis=1)
        step = steps[everyone, opener]
        most = np.maximum(cap, _length(need[everyone, opener] / step))
        members = open_ & (need <= (most * step)[:, None])
        piece[members] = round_
        open_ &= ~members
        of_piece[round_:] = [step]
        lengths[round_:] = [_length(np.where(members, need, 0).max(axis=1) / step)]
    return piece, np.stack(of_piece), np.stack(lengths)


def _length(samples: Array) -> Array:
    """Length that holds so many samples: 128 times 1, 1.5, 2, 3, 4 and so on."""
    times = np.maximum(samples, SHORTEST) / SHORTEST
    octave = np.floor(np.log2(times) + 1e-9)
    within = times / 2**octave
    step = np.where(within > 1.5 + 1e-9, 2, np.where(within > 1 + 1e-9, 1.5, 1))
    return np.asarray(SHORTEST * step * 2**octave, dtype=np.intp)


def _cost(plan: tuple[Array, Array, Array], possible: Array) -> Array:
    """Work of each net (N,) under a plan, in samples."""
    piece, _, length = plan
    everyone = np.arange(len(piece))[:, None]
    samples = np.where(possible, length[piece, everyone], 0).sum(axis=1)
    used = np.zeros(length.shape, dtype=bool)
    used[piece, everyone] |= possible
    return np.asarray(samples + TASK_ROWS * (length * used).sum(axis=0))
