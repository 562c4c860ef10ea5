"""Output resistance of a driver from its tables of current over voltage."""

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[Any]

BEYOND_RAIL_V = 1.0  # the pin is looked for so far beyond both supplies


class Curve(NamedTuple):
    """Current into the pin over the voltage of the pin, ascending. [V], [A]"""

    pin_v: Array
    current_a: Array


class Settled(NamedTuple):
    """Where a pin settles, and whether every table reaches that far. [V]"""

    pin_v: float
    covered: bool


def curve_at_pin(
    table_v: ArrayLike, current_a: ArrayLike, reference_v: float, *, from_above: bool
) -> Curve:
    r"""Return a table over the voltage of the pin.

    .. math:: V_{pin} = V_{ref} + V_{table} \quad\text{or}\quad V_{pin} = V_{ref} - V_{table}

    Parameters
    ----------
    table_v, current_a : array_like
        Rows of the table, ``(K,)``, ascending. Current counts into the pin. [V], [A]
    reference_v : float
        Supply the table counts from. [V]
    from_above : bool
        Whether the table counts downwards from its supply, as pull-up and power clamp do.

    Returns
    -------
    Curve
        Ascending in the voltage of the pin.

    Examples
    --------
    A pull-up of 25 ohm to 3.3 V: the pin at 0 V gives 132 mA.

    >>> curve = curve_at_pin([0, 3.3], [0, -0.132], 3.3, from_above=True)
    >>> curve.pin_v.tolist(), curve.current_a.tolist()
    ([0.0, 3.3], [-0.132, 0.0])

    References
    ----------
    .. [1] ANSI/EIA-656, [Pulldown], [Pullup], [GND Clamp], [POWER Clamp].
    """
    table, current = np.asarray(table_v, dtype=float), np.asarray(current_a, dtype=float)
    if from_above:
        return Curve((reference_v - table)[::-1], current[::-1])
    return Curve(reference_v + table, current)


def _current_a(curve: Curve, pin_v: Array) -> Array:
    """Current of one curve; beyond its ends the slope of its end goes on."""
    volt, current = curve
    inside = np.interp(pin_v, volt, current)
    slopes = np.diff(current)[[0, -1]] / np.diff(volt)[[0, -1]]
    below, above = np.minimum(pin_v - volt[0], 0), np.maximum(pin_v - volt[-1], 0)
    current_a: Array = inside + slopes[0] * below + slopes[1] * above
    return current_a


def settled_v(
    curves: Sequence[Curve],
    load_ohm: float,
    load_v: float,
    rails_v: tuple[float, float],
    *,
    high: bool,
) -> Settled:
    r"""Voltage at which a pin settles that drives a resistor.

    The currents into the pin and into the resistor vanish together,

    .. math:: \frac{V - V_{load}}{R} + \sum_k I_k(V) = 0

    Parameters
    ----------
    curves : sequence of Curve
        Everything that conducts in this state, clamps included.
    load_ohm, load_v : float
        The resistor and the voltage behind it. [ohm], [V]
    rails_v : tuple of float
        Lower and upper supply; the pin is looked for up to 1 V beyond. [V]
    high : bool
        Whether the pin comes from below: the first crossing on its way counts.

    Returns
    -------
    Settled
        NaN where the pin settles nowhere in that range.

    Notes
    -----
    Tables are straight between their rows, so the crossing is exact. Beyond the last row the
    slope goes on, and ``covered`` is False.

    Examples
    --------
    25 ohm to 3.3 V into 50 ohm: two thirds.

    >>> pull_up = curve_at_pin([0, 6.6], [0, -0.264], 3.3, from_above=True)
    >>> settled = settled_v([pull_up], 50.0, 0.0, (0.0, 3.3), high=True)
    >>> print(f"{settled.pin_v:.3f} V", settled.covered)
    2.200 V True
    """
    ends = np.array([rails_v[0] - BEYOND_RAIL_V, rails_v[1] + BEYOND_RAIL_V])
    rows = np.concatenate([ends, *(curve.pin_v for curve in curves)])
    volt = np.unique(rows[(rows >= ends[0]) & (rows <= ends[1])])
    total = (volt - load_v) / load_ohm + sum(_current_a(curve, volt) for curve in curves)
    pin_v = _first_crossing(volt, total) if high else -_first_crossing(-volt[::-1], -total[::-1])
    covered = all(curve.pin_v[0] <= pin_v <= curve.pin_v[-1] for curve in curves)
    return Settled(pin_v, bool(covered))


def _first_crossing(volt: Array, total: Array) -> float:
    """Voltage at which a current first rises through zero; NaN if it does not."""
    crossing = np.flatnonzero((total[:-1] <= 0) & (total[1:] > 0))
    if not crossing.size:
        return float("nan")
    k = int(crossing[0])
    share = -total[k] / (total[k + 1] - total[k])
    return float(volt[k] + share * (volt[k + 1] - volt[k]))


def load_line_ohm(
    curves: Sequence[Curve],
    load_ohm: float,
    rails_v: tuple[float, float],
    *,
    high: bool,
    package_ohm: float = 0.0,
) -> float:
    r"""Output resistance of a driver where its tables meet a load line.

    .. math::

        R_{up} = \frac{V_{up} - V}{(V - V_{down})/R} \qquad
        R_{down} = \frac{V - V_{down}}{(V_{up} - V)/R}

    with V the pin's voltage into R to the opposite supply: what a long line of impedance R looks
    like to the edge.

    Parameters
    ----------
    curves : sequence of Curve
        Everything that conducts in this state, clamps included.
    load_ohm : float
        Impedance of the line, with a series resistor. [ohm]
    rails_v : tuple of float
        Lower and upper supply of the driver. [V]
    high : bool
        Whether the driver pulls up.
    package_ohm : float
        Resistance between pad and pin; it counts as the driver's. [ohm]

    Returns
    -------
    float
        NaN where the driver pulls nowhere. [ohm]

    Notes
    -----
    Holds at this impedance. The slope at the origin of the table is lower: a transistor drives
    less than a resistor the further its voltage is from zero.

    Examples
    --------
    A pull-down of 20 ohm is 20 ohm at any load:

    >>> pull_down = curve_at_pin([0, 3.3], [0, 0.165], 0.0, from_above=False)
    >>> print(f"{load_line_ohm([pull_down], 50.0, (0.0, 3.3), high=False):.2f} ohm")
    20.00 ohm
    """
    low_v, high_v = rails_v
    total_ohm = load_ohm + package_ohm
    load_v, rail_v = (low_v, high_v) if high else (high_v, low_v)
    pin_v = settled_v(curves, total_ohm, load_v, rails_v, high=high).pin_v
    current_a = (pin_v - load_v) / total_ohm
    if not current_a * (rail_v - load_v) > 0:
        return float("nan")
    return (rail_v - pin_v) / current_a + package_ohm
