"""Timing budgets and edge arithmetic in closed form: what a person checks by hand.

The closed-form received edges order candidates; they never sign one off, since above
a round trip of a fifth of the edge they can be unsafe.
"""

from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]
Shape = Literal["linear", "raised_cosine", "single_pole"]

SHAPES: tuple[Shape, ...] = ("linear", "raised_cosine", "single_pole")
LN_9 = float(np.log(9.0))  # 10 to 90 % of a single pole, in time constants
STATED_EDGE_S = 1e-9  # data-sheet timing of memories is tested with 1 ns edges


def common_clock_slack_s(
    period_s: ArrayLike,
    clock_to_output_s: ArrayLike,
    flight_s: ArrayLike,
    setup_s: ArrayLike,
    *,
    skew_s: ArrayLike = 0.0,
    jitter_s: ArrayLike = 0.0,
    crosstalk_s: ArrayLike = 0.0,
    bit_interference_s: ArrayLike = 0.0,
) -> Array:
    r"""Slack of the setup of a transfer clocked from one clock.

    .. math:: T - (t_{co,max} + F_{max} + t_{su} + t_{skew} + t_{jit} + t_{xt} + t_{isi})

    Parameters
    ----------
    period_s : array_like
        Clock period T. [s]
    clock_to_output_s : array_like
        Longest clock-to-output into the test load. [s]
    flight_s : array_like
        Longest flight, counted from the crossing into the test load; may be negative. [s]
    setup_s : array_like
        Setup of the receiver. [s]
    skew_s, jitter_s, crosstalk_s, bit_interference_s : array_like, optional
        Further parts of the budget. [s]

    Returns
    -------
    numpy.ndarray
        Slack, negative where the transfer is late. [s]

    Examples
    --------
    20 - 14 - 4 ns are left for flight and skew:

    >>> print(f"{common_clock_slack_s(20e-9, 14e-9, 0.0, 4e-9) * 1e9:.1f} ns")
    2.0 ns
    """
    taken = (clock_to_output_s, flight_s, setup_s, skew_s, jitter_s, crosstalk_s)
    return _less(period_s, *taken, bit_interference_s)


def hold_slack_s(
    clock_to_output_s: ArrayLike, flight_s: ArrayLike, hold_s: ArrayLike, skew_s: ArrayLike = 0.0
) -> Array:
    r"""Slack of the hold of a transfer clocked from one clock.

    .. math:: t_{co,min} + F_{min} - t_h - t_{skew}

    Parameters
    ----------
    clock_to_output_s : array_like
        Shortest clock-to-output into the test load. [s]
    flight_s : array_like
        Shortest flight. [s]
    hold_s : array_like
        Hold of the receiver. [s]
    skew_s : array_like, optional
        Skew between the clocks. [s]

    Returns
    -------
    numpy.ndarray
        Slack, negative where data change too early. [s]

    Examples
    --------
    >>> print(f"{hold_slack_s(1e-9, 0.5e-9, 0.8e-9) * 1e9:.1f} ns")
    0.7 ns
    """
    return np.asarray(clock_to_output_s) + _less(flight_s, hold_s, skew_s)


def source_synchronous_slack_s(
    valid_s: ArrayLike,
    late_flight_s: ArrayLike,
    early_flight_s: ArrayLike,
    needed_s: ArrayLike,
    *,
    crosstalk_s: ArrayLike = 0.0,
    bit_interference_s: ArrayLike = 0.0,
) -> Array:
    r"""Slack of a transfer that carries its own strobe, in one corner of one die.

    .. math:: t_v - (F_{late} - F_{early}) - t_{needed} - t_{xt} - t_{isi}

    Setup: data valid before the strobe, data late, strobe early, setup needed. Hold:
    data valid after it, strobe late, data early, hold needed.

    Parameters
    ----------
    valid_s : array_like
        Time the driver holds data valid before (or after) the strobe. [s]
    late_flight_s, early_flight_s : array_like
        Flights of the later and the earlier signal, same corner, each from its own test
        load. [s]
    needed_s : array_like
        Setup (or hold) of the receiver. [s]
    crosstalk_s, bit_interference_s : array_like, optional
        Further parts of the budget. [s]

    Returns
    -------
    numpy.ndarray
        Slack; the smallest over the corners counts. [s]

    Examples
    --------
    1.2 ns valid, 1.0 ns needed: the flights may differ by 0.2 ns.

    >>> print(f"{source_synchronous_slack_s(1.2e-9, 0.7e-9, 0.5e-9, 1e-9) * 1e12:.0f} ps")
    0 ps
    """
    spread = _less(late_flight_s, early_flight_s)
    return _less(valid_s, spread, needed_s, crosstalk_s, bit_interference_s)


def slow_edge_derating_s(rise_s: ArrayLike, fall_s: ArrayLike | None = None) -> Array:
    r"""Time a slow edge costs where data-sheet timing assumes 1 ns edges.

    For the access time, from the clock's rise alone: :math:`t_r/2 - 0.5` ns. For setup,
    hold and pulse widths, from both edges: :math:`(t_r + t_f)/2 - 1` ns.

    Parameters
    ----------
    rise_s : array_like
        Rise between VIL and VIH. [s]
    fall_s : array_like, optional
        Fall between VIH and VIL; left out for the access time. [s]

    Returns
    -------
    numpy.ndarray
        Time to add, never below 0. [s]

    Examples
    --------
    >>> print(f"{slow_edge_derating_s(3e-9) * 1e9:.1f} ns")
    1.0 ns
    >>> print(f"{slow_edge_derating_s(3e-9, 2e-9) * 1e9:.1f} ns")
    1.5 ns

    References
    ----------
    .. [1] Notes to the AC characteristics in data sheets of SDR memory modules.
    """
    rise = np.asarray(rise_s, dtype=float)
    if fall_s is None:
        return np.asarray(np.maximum(rise / 2 - STATED_EDGE_S / 2, 0.0))
    return np.asarray(np.maximum((rise + np.asarray(fall_s)) / 2 - STATED_EDGE_S, 0.0))


def pull_up_range_ohm(
    supply_v: ArrayLike,
    output_low_v: ArrayLike,
    sink_current_a: ArrayLike,
    rise_s: ArrayLike,
    bus_farad: ArrayLike,
    levels: tuple[float, float] = (0.3, 0.7),
) -> tuple[Array, Array]:
    r"""Lowest and highest pull-up of an open-drain line.

    .. math:: R_{min} = (V_{DD} - V_{OL})/I_{OL}, \quad
       R_{max} = t_r / \Bigl(C \ln\frac{1 - x_1}{1 - x_2}\Bigr)

    Parameters
    ----------
    supply_v, output_low_v : array_like
        Supply and highest low level. [V]
    sink_current_a : array_like
        Current the driver sinks at that level. [A]
    rise_s : array_like
        Longest rise between the levels. [s]
    bus_farad : array_like
        Capacitance of the line. [F]
    levels : tuple of float, optional
        Levels of the rise as shares of the supply.

    Returns
    -------
    lowest_ohm, highest_ohm : numpy.ndarray
        Bounds; no pull-up serves where the lowest is above the highest. [ohm]

    Examples
    --------
    I2C fast mode at 3.3 V with 400 pF has no pull-up at 3 mA:

    >>> low, high = pull_up_range_ohm(3.3, 0.4, 3e-3, 300e-9, 400e-12)
    >>> print(f"{low:.0f} to {high:.0f}")
    967 to 885

    References
    ----------
    .. [1] UM10204, "I2C-bus specification and user manual", clause 7.1.
    """
    lowest = _less(supply_v, output_low_v) / np.asarray(sink_current_a)
    constants = np.log((1 - levels[0]) / (1 - levels[1]))
    return lowest, np.asarray(rise_s, dtype=float) / (constants * np.asarray(bus_farad))


def rise_time_of_pull_up_s(
    pull_up_ohm: ArrayLike, bus_farad: ArrayLike, levels: tuple[float, float] = (0.3, 0.7)
) -> Array:
    r"""Rise of an open-drain line between two levels, :math:`R C \ln((1-x_1)/(1-x_2))`.

    Parameters
    ----------
    pull_up_ohm : array_like
        Pull-up. [ohm]
    bus_farad : array_like
        Capacitance of the line. [F]
    levels : tuple of float, optional
        Levels as shares of the supply, of a line that starts at 0.

    Returns
    -------
    numpy.ndarray
        Rise. [s]

    Examples
    --------
    1 kohm and 100 pF between 10 and 90 %: 2.197 time constants of 100 ns.

    >>> print(f"{rise_time_of_pull_up_s(1e3, 100e-12, (0.1, 0.9)) * 1e9:.1f} ns")
    219.7 ns
    """
    tau = np.asarray(pull_up_ohm, dtype=float) * np.asarray(bus_farad)
    return np.asarray(tau * np.log((1 - levels[0]) / (1 - levels[1])))


def transition_between_levels(
    edge_s: ArrayLike,
    from_levels: tuple[float, float],
    to_levels: tuple[float, float],
    shape: Shape = "linear",
) -> Array:
    """Duration of an edge between other levels than those it is stated for.

    Parameters
    ----------
    edge_s : array_like
        Duration between ``from_levels``. [s]
    from_levels, to_levels : tuple of float
        Low and high level as shares of the swing.
    shape : str, optional
        ``linear``, ``raised_cosine`` or ``single_pole``.

    Returns
    -------
    numpy.ndarray
        Duration between ``to_levels``. [s]

    Raises
    ------
    ValueError
        For levels that are not rising within 0 to 1 (a single pole never reaches 1), or
        an unknown shape.

    Examples
    --------
    >>> print(f"{transition_between_levels(0.75e-9, (0.2, 0.8), (0.1, 0.9)) * 1e9:.2f} ns")
    1.00 ns
    """
    span = _span(to_levels, shape) / _span(from_levels, shape)
    return np.asarray(edge_s, dtype=float) * span


def clock_jitter_s(
    noise_v: ArrayLike,
    swing_v: ArrayLike,
    edge_s: ArrayLike,
    level: float = 0.5,
    shape: Shape = "linear",
) -> Array:
    r"""Jitter that noise makes on an edge, :math:`J = V_n/SR`, with SR at the threshold.

    Parameters
    ----------
    noise_v : array_like
        Noise, peak to peak. [V]
    swing_v : array_like
        Swing of the edge. [V]
    edge_s : array_like
        10 to 90 % duration of the edge. [s]
    level : float, optional
        Threshold as a share of the swing.
    shape : str, optional
        ``linear``, ``raised_cosine`` or ``single_pole``.

    Returns
    -------
    numpy.ndarray
        Jitter, peak to peak. [s]

    Raises
    ------
    ValueError
        For an unknown shape or a level outside 0 to 1.

    Examples
    --------
    A straight edge of 1 ns over 0.8 of 2 V rises by 1.6 V/ns; 16 mV of noise are 10 ps.

    >>> print(f"{clock_jitter_s(16e-3, 2.0, 1e-9) * 1e12:.1f} ps")
    10.0 ps
    """
    slope_per_edge = _span((0.1, 0.9), shape) * _slope(level, shape)
    slew_v_per_s = slope_per_edge * np.asarray(swing_v, dtype=float) / np.asarray(edge_s)
    return np.asarray(np.asarray(noise_v, dtype=float) / slew_v_per_s)


def _less(first: ArrayLike, *others: ArrayLike) -> Array:
    """First value less all others, broadcast."""
    left = np.asarray(first, dtype=float)
    for other in others:
        left = left - np.asarray(other, dtype=float)
    return left


def _span(levels: tuple[float, float], shape: Shape) -> float:
    """Duration between two levels in units of the shape's own length."""
    low, high = levels
    if not (0 <= low < high <= 1):
        raise ValueError(f"levels rise from 0 to 1 at most, not {low} to {high}")
    return _instant(high, shape) - _instant(low, shape)


def _instant(level: float, shape: Shape) -> float:
    """Instant a rising edge of unit length, or time constant, reaches a level."""
    if shape == "linear":
        return level
    if shape == "raised_cosine":
        return float(np.arccos(1 - 2 * level) / np.pi)
    if shape == "single_pole":
        if level >= 1:
            raise ValueError("a single pole never reaches its final level")
        return float(-np.log1p(-level))
    raise ValueError(f"{shape!r} is no edge shape; one of {', '.join(SHAPES)}")


def _slope(level: float, shape: Shape) -> float:
    """Slope at a level, in swings per unit length or time constant."""
    if not 0 < level < 1:
        raise ValueError(f"a threshold lies between 0 and 1 of the swing, not at {level}")
    if shape == "linear":
        return 1.0
    if shape == "raised_cosine":
        return float(np.pi * np.sqrt(level * (1 - level)))
    if shape == "single_pole":
        return 1 - level
    raise ValueError(f"{shape!r} is no edge shape; one of {', '.join(SHAPES)}")
