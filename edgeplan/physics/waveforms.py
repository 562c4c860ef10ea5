"""Step responses of every net, candidate and receiver, and what is read from them."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import fft

from edgeplan.physics.crossings import cubic_time, first_reach
from edgeplan.physics.grids import (
    KEPT,
    SAMPLES_PER_RAMP,
    SHORTEST,
    Grids,
    Needs,
    choose_grids,
    needs,
    rounded_step_s,
)
from edgeplan.physics.lines import KnownLines, LineConstants
from edgeplan.physics.network import Trees, dc_response, root_impedance_ohm
from edgeplan.physics.row_blocks import blocks, solve, spectra
from edgeplan.physics.sources import Drive
from edgeplan.physics.waveform_readings import (
    DIRECTIONS,
    Levels,
    Readings,
    block_readings,
)

__all__ = [
    "Levels",
    "Readings",
    "StepRows",
    "dc_gain",
    "incident_edge_s",
    "periodic_rows",
    "read",
    "step_rows",
]

Array = NDArray[Any]

COUNTED_FROM_START = (
    "rise_first_s",
    "rise_first_high_s",
    "rise_last_s",
    "fall_first_s",
    "fall_first_low_s",
    "fall_last_s",
    "half_s",
)


class StepRows(NamedTuple):
    """M waveforms in the order of receiver, then candidate: times and levels (M, n)."""

    time_s: Array
    level: Array
    net: Array
    candidate: Array
    receiver: Array


def read(
    trees: Trees,
    drive: Drive,
    levels: Levels,
    observe_s: ArrayLike,
    *,
    directions: tuple[str, ...] = DIRECTIONS,
    shape: str = "raised cosine",
) -> Readings:
    """Readings of the step response of every candidate at every receiver.

    The response is normalised to end at 1. A falling edge is its mirror, so that one row
    serves both directions of a symmetrical driver.

    Parameters
    ----------
    trees : Trees
        N nets with R receivers in all. [-]
    drive : Drive
        C candidates of every net; ramps may differ by any factor. [SI]
    levels : Levels
        Of the R receivers, fractions of the swing. [-]
    observe_s : array_like
        One bit (N,), after which the level is read. [s]
    directions : tuple of str
        Of ``rise`` and ``fall``: whose thresholds are wanted.
    shape : str
        Shape of the source's edge, a key of ``EDGE_SHAPES``.

    Returns
    -------
    Readings
        Arrays (R, C). [s], [-]

    Notes
    -----
    Raised-cosine edges, linear driver: 1 mV/V, 0.1 % of the transition and 0.6 ps in
    999 of 1,000 rows, against steps four times finer. NaN where a candidate does not
    exist, where no grid of 4,096 samples holds what must be seen, and where a
    threshold is not reached in the window: NaN reads as undecided.

    Examples
    --------
    A matched line of 600 ps delays the middle of a 1 ns edge, at 500 ps, by 600 ps:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> from edgeplan.physics.waveform_readings import levels_of
    >>> drive = drive_of([[50.0]], ramp_s=1e-9)
    >>> result = read(point_to_point([0.1]), drive, levels_of(0.3, 0.7, 1), [10e-9])
    >>> print(f"{result.half_s[0, 0] * 1e9:.2f} ns, 10-90 {result.transition_s[0, 0] * 1e9:.2f} ns")
    1.10 ns, 10-90 0.59 ns

    References
    ----------
    .. [1] H. Dubner and J. Abate, J. ACM 15, 1968, pp. 115-123 (Fourier inversion with damping).
    """
    window = needs(trees, drive, observe_s)
    observe = np.broadcast_to(np.asarray(observe_s, dtype=float), len(trees))
    shape_out = (int(trees.receiver_offset[-1]), drive.exists.shape[1])
    out = {name: np.full(shape_out, np.nan, np.float32) for name in Readings.__slots__}
    out["guarded"] = np.zeros(shape_out, dtype=bool)
    for block in blocks(trees, drive, choose_grids(drive, window), shape=shape):
        values = block_readings(
            block.level,
            levels.take(block.receiver),
            observe[block.net] / block.step_s,
            4 * window.delay_s[block.net] / block.step_s,
            directions,
        )
        place = block.receiver * shape_out[1] + block.candidate
        for name, value in values.items():
            out[name].reshape(-1)[place] = _in_seconds(name, value, block.step_s, block.start_s)
    return Readings(**out)


def step_rows(
    trees: Trees,
    drive: Drive,
    *,
    duration_s: ArrayLike,
    step_s: ArrayLike | None = None,
    shape: str = "raised cosine",
) -> StepRows:
    """Step responses themselves, for pictures and for interference between bits.

    Parameters
    ----------
    trees, drive : Trees, Drive
        A small selection of nets and candidates. [SI]
    duration_s : array_like
        Shortest window of each net (N,). [s]
    step_s : array_like, optional
        Step of each net (N,), a tenth of its shortest ramp unless given. [s]
    shape : str
        Shape of the source's edge, a key of ``EDGE_SHAPES``.

    Returns
    -------
    StepRows
        Rows of existing candidates, normalised to end at 1, of equal count of samples. [s], [-]

    Raises
    ------
    ValueError
        No candidate exists.

    Notes
    -----
    Double precision; what has not settled at 4/3 of the window wraps around, damped by
    exp(-6). Steps longer than a tenth of the ramp lose accuracy (2 mV/V at an eighth).

    Examples
    --------
    Open line from its own impedance: nothing at 0.5 ns, everything at 1.7 ns.

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> rows = step_rows(point_to_point([0.1]), drive_of([[50.0]], ramp_s=1e-9), duration_s=4e-9)
    >>> print((1 + np.interp([0.5e-9, 1.7e-9], rows.time_s[0], rows.level[0])).round(3))
    [1. 2.]
    """
    ramp = np.where(drive.exists, drive.candidate_ramp_s(), np.inf)
    if not drive.exists.any():
        raise ValueError("no candidate exists")
    step = rounded_step_s(ramp.min(axis=1) / SAMPLES_PER_RAMP) if step_s is None else step_s
    step = np.broadcast_to(np.asarray(step, dtype=float), len(trees))
    wanted = float(np.max(np.asarray(duration_s) / step) / KEPT)
    length = max(SHORTEST, 2 ** int(np.ceil(np.log2(wanted))))
    grids = _one_grid(drive, step, length)
    parts = [
        (np.array(block.level), block.net, block.candidate, block.receiver)
        for block in blocks(trees, drive, grids, shape=shape, precision=np.complex128)
    ]
    level, net, candidate, receiver = (np.concatenate(part) for part in zip(*parts, strict=True))
    order = np.lexsort((candidate, receiver))
    time = np.arange(level.shape[1]) * step[net[order], None]
    return StepRows(time, level[order], net[order], candidate[order], receiver[order])


def periodic_rows(
    trees: Trees,
    drive: Drive,
    period_s: ArrayLike,
    duty: ArrayLike = 0.5,
    *,
    shape: str = "raised cosine",
) -> StepRows:
    r"""One period of the steady state under a periodic source, for clocks that never settle.

    .. math:: E_k = P(s_k t_e)\,\frac{1 - e^{-s_k d T}}{s_k}, \qquad s_k = 2\pi j k/T

    Parameters
    ----------
    trees, drive : Trees, Drive
        A small selection of nets and candidates. [SI]
    period_s : array_like
        Period T of each net (N,). [s]
    duty : array_like
        High time between the halves of the edges over the period, d (N,). [-]
    shape : str
        Shape of both edges, a key of ``EDGE_SHAPES``.

    Returns
    -------
    StepRows
        Rising edge at t = 0, levels 0 and 1 of a source at rest. [s], [-]

    Notes
    -----
    Exact on the harmonics up to half the sampling rate, at least 5 over the ramp.

    Examples
    --------
    A matched clock of 10 ns is high in the middle of its high time:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> clock = periodic_rows(point_to_point([0.1]), drive_of([[50.0]], ramp_s=1e-9), 10e-9)
    >>> print((1 + np.interp([3e-9, 8e-9], clock.time_s[0], clock.level[0])).round(3))
    [2. 1.]
    """
    period = np.broadcast_to(np.asarray(period_s, dtype=float), len(trees))
    share = np.broadcast_to(np.asarray(duty, dtype=float), len(trees))
    ramp = np.where(drive.exists, drive.candidate_ramp_s(), np.inf)
    wanted = float(np.max(period / ramp.min(axis=1)) * SAMPLES_PER_RAMP)
    length = max(SHORTEST, 2 ** int(np.ceil(np.log2(wanted))))
    grids = _one_grid(drive, period / length, length)
    harmonic = np.arange(length // 2 + 1)
    axis = 2j * np.pi * np.maximum(harmonic, 0.5) / length  # the mean is set by itself below
    tasks = range(len(grids.net))
    parts = [_period(trees, drive, grids, task, axis, shape, share) for task in tasks]
    level, net, candidate, receiver = (np.concatenate(part) for part in zip(*parts, strict=True))
    order = np.lexsort((candidate, receiver))
    time = np.arange(length) * (period / length)[net[order], None]
    return StepRows(time, level[order], net[order], candidate[order], receiver[order])


def incident_edge_s(
    trees: Trees, drive: Drive, transition: tuple[float, float] = (0.1, 0.9)
) -> Array:
    """Launched edge: transition of the wave that enters the lines before any reflection.

    The lines of all roots, in parallel, are put in as a resistance; pad, stub and
    series resistor stay as they are.

    Parameters
    ----------
    trees, drive : Trees, Drive
        N nets and their C candidates. [SI]
    transition : tuple of float
        Levels between which the edge is judged. [-]

    Returns
    -------
    numpy.ndarray
        Launched edge (N, C), NaN where no candidate exists. [s]

    Examples
    --------
    Without pad capacitance the wave has the source's own edge, 0.5903 te of 10-90 %:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> edge = incident_edge_s(point_to_point([0.1]), drive_of([[20.0]], ramp_s=1e-9))
    >>> print(f"{edge[0, 0] * 1e9:.2f} ns")
    0.59 ns
    """
    into = _into_resistance(trees)
    delay = np.asarray(trees.stub_length_m * trees.stub_line.delay_s_per_m)
    pole = np.asarray(drive.resistance_ohm * drive.pad_farad)
    need = 1.5 * drive.candidate_ramp_s() + 10 * delay[:, None] + 7 * pole
    window = Needs(full_s=need, least_s=need, pole_s=pole, delay_s=delay)
    result = np.full(drive.exists.shape, np.nan)
    for block in blocks(into, drive, choose_grids(drive, window)):
        row = np.arange(len(block.level))
        low, high = (
            cubic_time(block.level, row, first_reach(block.level, at), at)
            for at in (np.full(len(row), x, block.level.dtype) for x in transition)
        )
        result[block.net, block.candidate] = (high - low) * block.step_s
    return result


def dc_gain(trees: Trees, drive: Drive) -> Array:
    """Final level at each receiver over that of the source.

    Parameters
    ----------
    trees, drive : Trees, Drive
        N nets with R receivers, C candidates. [SI]

    Returns
    -------
    numpy.ndarray
        Gain (R, C). [-]

    Examples
    --------
    25 ohm into a load of 75 ohm:

    >>> from edgeplan.physics.network import point_to_point
    >>> from edgeplan.physics.sources import drive_of
    >>> trees = point_to_point([0.1], receiver_siemens=1 / 75)
    >>> print(dc_gain(trees, drive_of([[25.0]], ramp_s=1e-9)).round(4))
    [[0.75]]
    """
    gain = np.full((int(trees.receiver_offset[-1]), drive.exists.shape[1]), np.nan)
    total = drive.resistance_ohm + drive.series_ohm
    for nets in trees.shapes():
        siemens, transfer = dc_response(trees.take(nets))
        receiver = trees.receiver_offset[nets][:, None] + np.arange(transfer.shape[1])
        near = 1 / (1 + total[nets] * siemens[:, None])
        gain[receiver] = transfer[:, :, None] * near[:, None]
    return gain


def _in_seconds(name: str, value: Array, step_s: Array, start_s: Array) -> Array:
    """Reading in units of samples, as its name says."""
    if name in COUNTED_FROM_START:
        return np.asarray(value * step_s + start_s)
    if name == "transition_s":
        return np.asarray(value * step_s)
    return np.asarray(value / step_s) if name == "slope_min_per_s" else value


def _one_grid(drive: Drive, step_s: Array, length: int) -> Grids:
    """One task a net with the step given."""
    net, candidate = np.nonzero(drive.exists)
    first = np.flatnonzero(np.diff(net, prepend=-1))
    ramp = drive.candidate_ramp_s()
    return Grids(
        net=net[first],
        step_s=step_s[net[first]],
        length=np.full(len(first), length),
        offset=np.append(first, len(net)),
        candidate=candidate,
        ramp_s=ramp,
        start_s=np.zeros_like(ramp),
    )


def _period(
    trees: Trees, drive: Drive, grids: Grids, task: int, axis: Array, shape: str, duty: Array
) -> tuple[Array, Array, Array, Array]:
    """Periodic state of one net: levels, net, candidate, receiver."""
    chunk = solve(trees, drive, grids, np.array([task]), axis, shape, KnownLines())
    count, receivers = len(chunk.candidate), chunk.receivers.shape[1]
    spectrum = spectra(chunk, slice(0, count))
    length, net = 2 * (len(axis) - 1), int(chunk.net[0])
    spectrum *= 1 - np.exp(-axis * duty[net] * length)
    spectrum[:, 0] = duty[net] * length
    level = fft.irfft(spectrum, length, axis=1)
    receiver = np.tile(chunk.receivers[0], count)
    return level, np.full(len(level), net), np.repeat(chunk.candidate, receivers), receiver


def _into_resistance(trees: Trees) -> Trees:
    """Trees whose lines are replaced by the resistance that an incident wave meets."""
    impedance, count = root_impedance_ohm(trees), len(trees)
    nothing = np.zeros(count)
    return Trees(
        segment_offset=np.arange(count + 1),
        parent=np.full(count, -1),
        length_m=nothing,
        line=LineConstants(impedance, nothing + 1e-9, nothing, nothing, nothing),
        node_farad=nothing,
        node_siemens=1 / impedance,
        receiver_offset=np.arange(count + 1),
        receiver_segment=np.zeros(count, dtype=np.intp),
        stub_length_m=trees.stub_length_m,
        stub_line=trees.stub_line,
    )
