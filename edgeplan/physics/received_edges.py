"""Closed-form slowest received edge for a time budget: to order candidates by.

Three forms with one meaning of the budget: the time from the 0 % point of the source's
edge to the last allowed crossing of the threshold, less the delay of the line. They hold
for a round trip up to a fifth of the edge; beyond, all may be unsafe. For one pole behind
a raised cosine, found over true edge (tests/physics/test_received_edges.py):

=====================  ==================  ==================
form                   pole 0.3 of source  pole 3 of source
=====================  ==================  ==================
straight ramp          1.20 to 1.36        0.63 to 0.71
single pole            1.11 to 1.13        1.005 to 1.007
delay                  0.89 to 0.92        0.70 to 0.78
=====================  ==================  ==================

Only the delay form is safe for both.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.budgets import LN_9

Array = NDArray[Any]

RAISED_COSINE_10_90 = float(1 - 2 * np.arccos(0.8) / np.pi)  # 0.5903 of its length


def slowest_edge_of_ramp_s(budget_s: ArrayLike, level: ArrayLike) -> Array:
    r"""Slowest 10-90 % edge if a straight ramp starts on arrival, :math:`0.8\,S/x`.

    Parameters
    ----------
    budget_s : array_like
        Time to the last allowed crossing, less the delay. [s]
    level : array_like
        Threshold as a share of the swing. [-]

    Returns
    -------
    numpy.ndarray
        Edge, 0 where the budget is spent. [s]

    Examples
    --------
    A ramp of 10 ns crosses 60 % after 6 ns; its 10-90 % is 8 ns.

    >>> print(f"{slowest_edge_of_ramp_s(6e-9, 0.6) * 1e9:.1f} ns")
    8.0 ns
    """
    left_s = np.maximum(np.asarray(budget_s, dtype=float), 0.0)
    return np.asarray(0.8 * left_s / np.asarray(level))


def slowest_edge_of_single_pole_s(
    budget_s: ArrayLike, ramp_s: ArrayLike, level: ArrayLike
) -> Array:
    r"""Slowest 10-90 % edge if a single pole starts at the middle of the source's edge.

    .. math:: \tau = \frac{S - t_e/2}{\ln(1/(1-x))}, \quad
       t_r = \sqrt{(0.5903\,t_e)^2 + (2.197\,\tau)^2}

    Parameters
    ----------
    budget_s : array_like
        Time to the last allowed crossing, less the delay. [s]
    ramp_s : array_like
        0 to 100 % of the source's own raised-cosine edge. [s]
    level : array_like
        Threshold as a share of the swing. [-]

    Returns
    -------
    numpy.ndarray
        Edge, NaN where the source alone takes longer than the budget. [s]

    Examples
    --------
    A step into a pole crosses 50 % after 0.693 time constants, and 10-90 % takes 2.197:

    >>> print(f"{slowest_edge_of_single_pole_s(0.6931e-9, 0.0, 0.5) * 1e9:.3f} ns")
    2.197 ns
    """
    ramp = np.asarray(ramp_s, dtype=float)
    left_s = np.asarray(budget_s, dtype=float) - ramp / 2
    tau = np.where(left_s >= 0, left_s, np.nan) / -np.log1p(-np.asarray(level))
    return np.asarray(np.hypot(RAISED_COSINE_10_90 * ramp, LN_9 * tau))


def slowest_edge_by_delay_s(
    budget_s: ArrayLike, ramp_s: ArrayLike, edge_at_driver_s: ArrayLike, level: ArrayLike
) -> Array:
    r"""Slowest 10-90 % edge if its middle comes by the Elmore delay and it runs straight.

    The largest t for which

    .. math:: t_e/2 + \sqrt{t^2 - t_d^2}/2.197 + (x - 0.5)\,t/0.8 \le S

    Parameters
    ----------
    budget_s : array_like
        Time to the last allowed crossing, less the delay of the line. [s]
    ramp_s : array_like
        0 to 100 % of the source's own edge. [s]
    edge_at_driver_s : array_like
        10 to 90 % of the source's own edge, td. [s]
    level : array_like
        Threshold as a share of the swing, 0.5 or more. [-]

    Returns
    -------
    numpy.ndarray
        Edge, NaN where not even the source's own edge is in time. [s]

    Examples
    --------
    At a threshold of 50 % and a step, the budget is 1/2.197 of the edge:

    >>> print(f"{slowest_edge_by_delay_s(1e-9, 0.0, 0.0, 0.5) * 1e9:.3f} ns")
    2.197 ns

    References
    ----------
    .. [1] W. C. Elmore, "The transient response of damped linear networks", J. Appl.
       Phys. 19, 1948, pp. 55-63.
    """
    left_s = np.asarray(budget_s, dtype=float) - np.asarray(ramp_s, dtype=float) / 2
    own_s = np.asarray(edge_at_driver_s, dtype=float)
    slope = (np.asarray(level, dtype=float) - 0.5) / 0.8
    square = 1 / LN_9**2  # sqrt(t^2 - own^2)/ln 9 = left - slope t, squared and sorted by t
    a, b, c = square - slope**2, left_s * slope, -(square * own_s**2 + left_s**2)
    with np.errstate(invalid="ignore", divide="ignore"):
        root = np.sqrt(b**2 - a * c)
        edge = np.where(np.abs(a) < 1e-12, -c / (2 * b), (root - b) / a)
        in_time = (left_s >= slope * own_s) & (edge >= own_s)
    return np.where(in_time, edge, np.nan)
