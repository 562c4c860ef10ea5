"""Edge spectra against quadrature, and the closed form of the source against matrices."""

import numpy as np
import pytest

from edgeplan.physics.lines import LineConstants, propagation
from edgeplan.physics.network import point_to_point
from edgeplan.physics.sources import (
    linear_spectrum,
    raised_cosine_spectrum,
    source_terms,
    source_weights,
    stub_chain,
)

POINTS, WEIGHTS = np.polynomial.legendre.leggauss(60)
X = np.array([1e-6, 0.3 + 2j, 1.0 + 3.1j, 2.0 + 9j, 0.5 - 4j])


def laplace_of_slope(slope, x):
    """Integral of slope(u) exp(-x u) over the edge, u = 0..1."""
    u = (1 + POINTS) / 2
    return (WEIGHTS / 2 * slope(u) * np.exp(-np.outer(x, u))).sum(axis=1)


def test_raised_cosine_spectrum_is_the_transform_of_its_slope():
    expected = laplace_of_slope(lambda u: np.pi / 2 * np.sin(np.pi * u), X)
    np.testing.assert_allclose(raised_cosine_spectrum(X), expected, rtol=1e-12)


def test_linear_spectrum_is_the_transform_of_its_slope():
    expected = laplace_of_slope(np.ones_like, X)
    np.testing.assert_allclose(linear_spectrum(X), expected, rtol=1e-9)


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("away", [0, 1e-7, 3e-6j, 1e-5 + 1e-5j, 1e-3])
def test_raised_cosine_spectrum_is_smooth_where_both_factors_vanish(sign, away):
    x = np.array([sign * 1j * np.pi + away])
    expected = laplace_of_slope(lambda u: np.pi / 2 * np.sin(np.pi * u), x)
    np.testing.assert_allclose(raised_cosine_spectrum(x), expected, rtol=1e-9)


def test_single_precision_spectrum_is_good_to_seven_digits_on_a_damped_axis():
    x = (10 * (6 + 2j * np.pi * np.arange(129)) / 256).astype(np.complex64)
    np.testing.assert_allclose(
        raised_cosine_spectrum(x), raised_cosine_spectrum(x.astype(complex)), atol=3e-6
    )


def matrix_ratio(s, driver, series, pad, stub_length, load):
    """Source voltage over voltage at the load by multiplying 2 x 2 matrices."""
    gamma, impedance = propagation(s, LineConstants(*np.array([50, 6e-9, 5, 1e-3, 0.02])))
    angle = gamma * stub_length
    parts = [
        np.array([[1, driver], [0, 1]]),
        np.array([[1, 0], [s * pad, 1]]),
        np.array(
            [
                [np.cosh(angle), impedance * np.sinh(angle)],
                [np.sinh(angle) / impedance, np.cosh(angle)],
            ]
        ),
        np.array([[1, series], [0, 1]]),
    ]
    chain = np.linalg.multi_dot(parts)
    return chain[0, 0] + chain[0, 1] * load


@pytest.mark.parametrize("own_pads", [False, True])
def test_closed_form_of_the_source_is_the_product_of_the_matrices(own_pads):
    rng = np.random.default_rng(3)
    s = rng.normal(size=5) * 2e9j + 4e8
    load = rng.normal(size=(1, 5)) * 0.02j + 0.01
    trees = point_to_point([0.1], line=(50, 6e-9, 5, 1e-3, 0.02), stub_length_m=0.004)
    chain = stub_chain(trees, s[None], np.array([0]))
    pad = np.array([3e-12])
    terms = source_terms(load, s, chain=chain, pad_farad=None if own_pads else pad)
    driver, series = np.array([12.0, 40.0]), np.array([22.0, 0.0])
    weights = source_weights(driver, series, np.full(2, 3e-12) if own_pads else None)
    expected = [
        [matrix_ratio(s[k], driver[c], series[c], 3e-12, 0.004, load[0, k]) for k in range(5)]
        for c in range(2)
    ]
    np.testing.assert_allclose(weights @ terms[0], expected, rtol=1e-12)


def test_without_a_stub_the_source_is_a_divider():
    terms = source_terms(np.array([[0.02 + 0j]]), np.array([1e9j]), pad_farad=np.zeros(1))
    weights = source_weights(np.array([30.0]), np.array([20.0]))
    assert (weights @ terms[0]).real.item() == pytest.approx(2.0)
