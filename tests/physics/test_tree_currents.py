"""tree_currents against chain matrices, Kirchhoff's law and the tree's own response."""

import numpy as np
import pytest

from edgeplan.physics import network
from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.tree_currents import end_states

SPEED = 299_792_458.0


def tree(parent, length_m, farad, siemens, impedance_ohm=50.0):
    """One lossy tree."""
    count = len(parent)
    fields = (impedance_ohm, 6e-9, 3.0, 2e-3, 0.02)
    return network.Trees(
        segment_offset=np.array([0, count]),
        parent=np.array(parent),
        length_m=np.array(length_m),
        line=LineConstants(*(np.broadcast_to(value, count).astype(float) for value in fields)),
        node_farad=np.array(farad),
        node_siemens=np.array(siemens),
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([count - 1]),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.ones((5, 1))),
    )


S = 2j * np.pi * np.geomspace(10e6, 6e9, 80)
FORK = tree([-1, 0, 0, 1], [0.03, 0.05, 0.02, 0.04], [0, 2e-12, 5e-12, 4e-12], [0, 0, 0.01, 1e-3])


def test_both_ends_of_a_segment_obey_its_chain_matrix():
    # any textbook on lines: V0 = V1 cosh + Z I1 sinh, I0 = I1 cosh + V1 sinh/Z
    state = end_states(FORK, S)
    for i, length_m in enumerate(FORK.length_m):
        gamma, z = propagation(S, LineConstants(*(field[i] for field in FORK.line)))
        ch, sh = np.cosh(gamma * length_m), np.sinh(gamma * length_m)
        far_v, far_i = state.far_volt[0, i], state.far_ampere[0, i]
        np.testing.assert_allclose(state.near_volt[0, i], far_v * ch + z * far_i * sh, rtol=1e-9)
        np.testing.assert_allclose(state.near_ampere[0, i], far_i * ch + far_v / z * sh, rtol=1e-9)


def test_currents_add_up_at_every_node():
    state = end_states(FORK, S)
    for node, onward in ((0, [1, 2]), (1, [3]), (2, []), (3, [])):
        load = S * FORK.node_farad[node] + FORK.node_siemens[node]
        leaving = state.near_ampere[0, onward].sum(axis=0) + load * state.far_volt[0, node]
        np.testing.assert_allclose(state.far_ampere[0, node], leaving, rtol=1e-9, atol=1e-15)
        for branch in onward:
            np.testing.assert_array_equal(state.near_volt[0, branch], state.far_volt[0, node])


def test_it_agrees_with_admittance_and_transfer_of_the_tree():
    state, whole = end_states(FORK, S), network.response(FORK, S)
    np.testing.assert_allclose(state.near_ampere[0, 0], whole.admittance[0], rtol=1e-9)
    np.testing.assert_allclose(state.far_volt[0, 3], whole.transfer[0, 0], rtol=1e-9)


def test_several_roots_are_a_star_at_one_volt():
    star = tree([-1, -1], [0.03, 0.06], [1e-12, 3e-12], [0.0, 0.02])
    both = end_states(star, S)
    alone = end_states(tree([-1], [0.06], [3e-12], [0.02]), S)
    np.testing.assert_allclose(both.far_ampere[0, 1], alone.far_ampere[0, 0], rtol=1e-12)


def test_each_tree_may_have_its_own_frequencies():
    pair = network.point_to_point([0.05, 0.1], receiver_farad=5e-12)
    s = np.array([[1e8j, 2e8j], [3e8j, 4e8j]])
    alone = end_states(pair.take([1]), s[1])
    np.testing.assert_allclose(end_states(pair, s).far_volt[1], alone.far_volt[0])


def test_power_that_enters_a_lossless_tree_leaves_at_its_loads():
    lossless = network.point_to_point([0.08], receiver_farad=5e-12, receiver_siemens=1 / 70)
    state = end_states(lossless, S)
    entering = (state.near_volt * state.near_ampere.conj()).real
    taken = np.abs(state.far_volt) ** 2 / 70
    assert entering == pytest.approx(taken, rel=1e-9)
