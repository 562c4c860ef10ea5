"""Voltage and current at both ends of every segment of a routed tree, per volt at its node 0."""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.network import Trees, root_first

Array = NDArray[Any]


class EndStates(NamedTuple):
    """Complex state of the lines of G trees of one shape, ``(G, segments, K)``.

    Voltage [V] and current [A] at the near end, towards the driver, and at the far end;
    currents count away from the driver. Propagation constant [1/m] and characteristic
    impedance [ohm] of each line.
    """

    near_volt: Array
    near_ampere: Array
    far_volt: Array
    far_ampere: Array
    gamma_per_m: Array
    impedance_ohm: Array


def end_states(trees: Trees, s: ArrayLike) -> EndStates:
    r"""States of all segments for 1 V at node 0 (behind the series resistor).

    With the load Y of what hangs at the far node, e = exp(-gamma l), u, v = Y_c +- Y:

    .. math::

        \frac{V_{far}}{V_{near}} = \frac{2 Y_c e}{u + v e^2}, \qquad
        I_{near} = Y_c\,\frac{u - v e^2}{u + v e^2}\,V_{near}, \qquad I_{far} = Y V_{far}

    Parameters
    ----------
    trees : Trees
        G trees of one shape.
    s : array_like
        Complex frequencies other than 0, ``(K,)`` or ``(G, K)``. [rad/s]

    Returns
    -------
    EndStates
        ``(G, segments, K)``. [V], [A], [1/m], [ohm]

    Notes
    -----
    Exact for uncoupled lines. The current that leaves at a node with a load is the
    far current less the near currents of the segments that go on from it.

    Examples
    --------
    A quarter of a wave, open at its end: no current there, and the near voltage is that
    of the far current's dual, ``|V_far| = |I_near| Z``.

    >>> from edgeplan.physics.network import point_to_point
    >>> state = end_states(point_to_point([0.1], receiver_siemens=1e-9), [0.5j * np.pi / 0.6e-9])
    >>> print(f"{abs(state.far_volt[0, 0, 0] / state.near_ampere[0, 0, 0]):.3f} ohm")
    50.000 ohm
    """
    count = len(trees)
    s = np.broadcast_to(np.atleast_2d(np.asarray(s, dtype=complex)), (count, np.shape(s)[-1]))
    segments = int(trees.segment_offset[1]) if count else 0
    parent = np.asarray(trees.parent).reshape(count, segments)[0] if count else np.zeros(0, int)
    line = LineConstants(*(_columns(field, count) for field in trees.line))
    gamma, impedance = propagation(s[:, None], line)
    admittance = 1 / impedance
    once = np.exp(-gamma * _columns(trees.length_m, count))
    load = s[:, None] * _columns(trees.node_farad, count) + _columns(trees.node_siemens, count)
    transfer, entry = np.empty_like(gamma), np.empty_like(gamma)
    for i in root_first(parent)[::-1]:
        own, twice = admittance[:, i], once[:, i] ** 2
        forward, back = own + load[:, i], (own - load[:, i]) * twice
        transfer[:, i] = 2 * own * once[:, i] / (forward + back)
        entry[:, i] = own * (forward - back) / (forward + back)
        if parent[i] >= 0:
            load[:, parent[i]] += entry[:, i]
    near, far = np.ones_like(gamma), transfer
    for i in root_first(parent):
        if parent[i] >= 0:
            near[:, i] = far[:, parent[i]]
        far[:, i] *= near[:, i]
    return EndStates(near, entry * near, far, load * far, gamma, impedance)


def _columns(values: Array, count: int) -> Array:
    """Values per segment as (G, segments, 1)."""
    return np.asarray(values, dtype=float).reshape(count, -1, 1)
