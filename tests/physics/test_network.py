"""The tree pass against scikit-rf networks, a chain of matrices and a quadrature."""

import numpy as np
import pytest
import skrf
from skrf.media import DistributedCircuit

from edgeplan.physics.lines import LineConstants, dielectric_factor, propagation
from edgeplan.physics.network import (
    Trees,
    dc_response,
    point_to_point,
    response,
    root_first,
    root_impedance_ohm,
)

TRUNK, ARM, TAIL = (
    (50.0, 6.2e-9, 5.0, 1.2e-3, 0.02),
    (65.0, 6.8e-9, 8.0, 1.6e-3, 0.015),
    (40.0, 5.9e-9, 3.0, 0.8e-3, 0.01),
)
FREQUENCY = skrf.Frequency(5e6, 5e9, 101, "hz")


def tree(parent, lengths, lines, farad, siemens, receivers) -> Trees:
    """One tree from lists, without a stub."""
    return Trees(
        segment_offset=np.array([0, len(parent)]),
        parent=np.array(parent),
        length_m=np.array(lengths),
        line=LineConstants(*np.array(lines).T),
        node_farad=np.array(farad),
        node_siemens=np.array(siemens),
        receiver_offset=np.array([0, len(receivers)]),
        receiver_segment=np.array(receivers),
        stub_length_m=np.zeros(1),
        stub_line=LineConstants(*np.array([TRUNK]).T),
    )


def branch() -> Trees:
    """Give a trunk with a T of two loaded arms."""
    return tree(
        [-1, 0, 0],
        [0.08, 0.05, 0.03],
        [TRUNK, ARM, TAIL],
        [1e-12, 4e-12, 6e-12],
        [0.0, 1e-3, 0.0],
        [1, 2],
    )


def media(line) -> DistributedCircuit:
    """Put the same line into scikit-rf."""
    impedance, delay, resistance, skin, loss = line
    omega = 2 * np.pi * FREQUENCY.f
    series = 1j * omega * impedance * delay + np.sqrt(resistance**2 + 1j * omega * skin**2 / np.pi)
    shunt = 1j * omega * delay / impedance * dielectric_factor(1j * omega, loss)
    return DistributedCircuit(
        FREQUENCY,
        z0_port=50,
        L=series.imag / omega,
        R=series.real,
        C=shunt.imag / omega,
        G=shunt.real,
    )


def chain(line, length):
    """ABCD matrices (K, 2, 2) of a line."""
    return media(line).line(length, unit="m").a


def loaded(abcd, load):
    """Admittance in front and voltage transfer of a loaded two-port."""
    a, b, c, d = abcd[:, 0, 0], abcd[:, 0, 1], abcd[:, 1, 0], abcd[:, 1, 1]
    return (c + d * load) / (a + b * load), 1 / (a + b * load)


def test_lossy_t_branch_is_that_of_scikit_rf():
    s = 2j * np.pi * FREQUENCY.f
    arm, arm_transfer = loaded(chain(ARM, 0.05), s * 4e-12 + 1e-3)
    tail, tail_transfer = loaded(chain(TAIL, 0.03), s * 6e-12)
    near, transfer = loaded(chain(TRUNK, 0.08), arm + tail + s * 1e-12)
    result = response(branch(), s)
    np.testing.assert_allclose(result.admittance[0], near, rtol=1e-9)
    np.testing.assert_allclose(result.transfer[0, 0], transfer * arm_transfer, rtol=1e-9)
    np.testing.assert_allclose(result.transfer[0, 1], transfer * tail_transfer, rtol=1e-9)


def test_star_at_the_driver_adds_the_admittances():
    s = 2j * np.pi * FREQUENCY.f
    star = tree([-1, -1], [0.05, 0.03], [ARM, TAIL], [4e-12, 6e-12], [0.0, 0.0], [0, 1])
    arm, arm_transfer = loaded(chain(ARM, 0.05), s * 4e-12)
    tail, tail_transfer = loaded(chain(TAIL, 0.03), s * 6e-12)
    result = response(star, s)
    np.testing.assert_allclose(result.admittance[0], arm + tail, rtol=1e-9)
    np.testing.assert_allclose(result.transfer[0], [arm_transfer, tail_transfer], rtol=1e-9)
    assert root_impedance_ohm(star)[0] == pytest.approx(65 * 40 / 105)


def test_order_of_the_segments_does_not_matter():
    s = np.array([1e9 + 2e9j])
    turned = tree(
        [2, 2, -1],
        [0.03, 0.05, 0.08],
        [TAIL, ARM, TRUNK],
        [6e-12, 4e-12, 1e-12],
        [0.0, 1e-3, 0.0],
        [1, 0],
    )
    one, other = response(branch(), s), response(turned, s)
    np.testing.assert_allclose(one.admittance, other.admittance, rtol=1e-13)
    np.testing.assert_allclose(one.transfer, other.transfer, rtol=1e-13)


def test_current_moment_is_the_integral_of_the_current():
    s = 2j * np.pi * np.array([50e6, 400e6, 1.3e9])
    result = response(branch(), s, moments=True)
    points, weights = np.polynomial.legendre.leggauss(40)
    from_start = 0.08 * (1 + points) / 2
    gamma, impedance = propagation(s[:, None], LineConstants(*np.array(TRUNK)))
    current = (
        result.admittance[0][:, None] * np.cosh(gamma * from_start)
        - np.sinh(gamma * from_start) / impedance
    )
    np.testing.assert_allclose(
        result.moment_m[0, 0], (current * weights).sum(axis=1) * 0.04, rtol=1e-9
    )


def test_single_precision_in_gives_single_precision_out():
    s = (1e8 + 2j * np.pi * FREQUENCY.f).astype(np.complex64)
    single, double = response(branch(), s), response(branch(), s.astype(complex))
    assert single.transfer.dtype == np.complex64
    np.testing.assert_allclose(single.transfer, double.transfer, atol=2e-5)


def test_every_tree_may_have_its_own_frequencies():
    trees = point_to_point([0.05, 0.1, 0.2], receiver_farad=4e-12)
    s = np.array([[1e9 + 1e9j, 1e9 + 5e9j], [2e9 + 1e9j, 2e9 + 3e9j]])
    together = response(trees, s, s_row=[0, 1, 0])
    for net, row in enumerate([0, 1, 0]):
        alone = response(trees.take([net]), s[row])
        np.testing.assert_allclose(together.admittance[net], alone.admittance[0], rtol=1e-13)
        np.testing.assert_allclose(together.transfer[net], alone.transfer[0], rtol=1e-13)


def test_response_at_low_frequency_is_the_one_at_rest():
    trees = branch()
    siemens, transfer = dc_response(trees)
    slow = response(trees, np.array([1e-3 + 0j]))
    np.testing.assert_allclose(slow.admittance[:, 0].real, siemens, rtol=1e-9)
    np.testing.assert_allclose(slow.transfer[..., 0].real, transfer, rtol=1e-9)


def test_shapes_separate_parents_receivers_and_stubs():
    plain = point_to_point([0.1, 0.2], stub_length_m=[0.0, 0.004])
    assert [nets.tolist() for nets in plain.shapes()] == [[0], [1]]
    assert [nets.tolist() for nets in plain.take([0, 0, 1, 0]).shapes()] == [[0, 1, 3], [2]]


def test_trees_of_different_shape_are_refused():
    mixed = Trees(
        segment_offset=np.array([0, 1, 3]),
        parent=np.array([-1, -1, 0]),
        length_m=np.ones(3),
        line=LineConstants(*np.ones((5, 3))),
        node_farad=np.zeros(3),
        node_siemens=np.zeros(3),
        receiver_offset=np.array([0, 1, 2]),
        receiver_segment=np.array([0, 1]),
        stub_length_m=np.zeros(2),
        stub_line=LineConstants(*np.ones((5, 2))),
    )
    with pytest.raises(ValueError, match="one shape"):
        response(mixed, [1e9j])


def test_parents_in_a_circle_are_refused():
    with pytest.raises(ValueError, match="circle"):
        root_first(np.array([1, 0]))
