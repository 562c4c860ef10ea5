"""Crosstalk closed forms against exact coupled striplines."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import crosstalk_closed_forms as crosstalk

TABLE = Path(__file__).parents[1] / "reference" / "coupled_stripline.csv"


def rows():
    return np.loadtxt(TABLE, delimiter=",", skiprows=3).T


def test_even_and_odd_impedances_are_the_exact_ones():
    width, spacing, even, odd, _, _ = rows()
    found = crosstalk.coupled_stripline_zero_thickness(width, spacing, 1.0, 4.5)
    np.testing.assert_allclose(found, [even, odd], rtol=2e-6)


def test_coupling_is_exact_and_a_little_above_its_weak_form():
    _, _, even, odd, weak, coupling = rows()
    found = crosstalk.backward_coupling(even, odd)
    np.testing.assert_allclose(found, coupling, atol=6e-6)
    np.testing.assert_allclose((even - odd) / (2 * (even + odd)), weak, atol=6e-6)
    assert (found > weak).all()


def test_strips_far_apart_do_not_couple():
    even, odd = crosstalk.coupled_stripline_zero_thickness(0.3, 5.0, 1.0, 4.5)
    assert crosstalk.backward_coupling(even, odd) == pytest.approx(0.0, abs=1e-6)


@pytest.mark.parametrize("noise_v", [0.02, 0.1, 0.2, 0.5])
@pytest.mark.parametrize("mode_delay_s", [0.0, 20e-12, 200e-12])
def test_the_fastest_edge_makes_just_the_noise_allowed(noise_v, mode_delay_s):
    case = (0.8e-9, 0.05, mode_delay_s)
    edge = crosstalk.fastest_edge_beside_a_neighbour_s(3.3, noise_v, *case)
    if edge == 0:
        assert crosstalk.noise_on_a_neighbour_v(3.3, 1e-15, *case) <= noise_v
    else:
        noise = crosstalk.noise_on_a_neighbour_v(3.3, edge, *case)
        assert noise == pytest.approx(noise_v, rel=1e-9)


def test_noise_falls_as_the_edge_slows():
    edges = np.geomspace(0.1e-9, 10e-9, 50)
    noise = crosstalk.noise_on_a_neighbour_v(3.3, edges, 0.5e-9, 0.05, 30e-12)
    assert (np.diff(noise) < 0).all()


def test_matched_ends_see_the_bounds_and_never_more_than_their_limits():
    """Near: Kb min(1, 1.854 Td/tr); far: min(1/2, 0.927 dtau/(2 tr))."""
    edges = np.geomspace(1e-12, 100e-9, 60)
    near, far = crosstalk.near_end_share(edges, 1e-9, 0.08), crosstalk.far_end_share(edges, -50e-12)
    assert (near.max(), far.max()) == (0.08, 0.5)
    assert (np.diff(near) <= 0).all()
    assert (np.diff(far) <= 0).all()
    assert near[-1] == pytest.approx(0.08 * 1.854e-9 / 100e-9)
    assert far[-1] == pytest.approx(0.927 * 50e-12 / 200e-9)
