"""edge_factor against its definition: the largest |sinc| from here on."""

import numpy as np
import pytest

from edgeplan.physics import edge_factor


def test_it_is_the_largest_sinc_from_here_on():
    y = np.linspace(0, 60, 3_000_001)
    from_here_on = np.maximum.accumulate(np.abs(np.sinc(y))[::-1])[::-1]
    part = slice(0, 2_500_000, 97)
    np.testing.assert_allclose(
        edge_factor.null_free_edge_factor(y[part]), from_here_on[part], rtol=1e-8
    )


def test_the_first_side_lobe_is_that_of_every_book():
    # first side lobe of sin(x)/x: 0.21723 (-13.26 dB) at x = 4.4934
    assert edge_factor.HEIGHT[1] == pytest.approx(0.217234, abs=1e-6)
    assert edge_factor.PLACE[1] * np.pi == pytest.approx(4.493409, abs=1e-6)


def test_it_never_rises():
    x = np.concatenate([np.linspace(0, 30, 100_000), np.linspace(2040, 2060, 50_000), [1e6, 1e9]])
    assert np.all(np.diff(edge_factor.null_free_edge_factor(x)) <= 0)


def test_it_lies_between_sinc_and_the_corner_envelope():
    x = np.random.default_rng(1).uniform(0, 3000, 200_000)
    factor = edge_factor.null_free_edge_factor(x)
    assert np.all(factor >= np.abs(np.sinc(x)) * (1 - 1e-9))
    assert np.all(factor <= np.minimum(1, 1 / (np.pi * x)) * (1 + 1e-12))


def test_the_inverse_gives_the_level_back():
    level = 10 ** np.random.default_rng(2).uniform(-5, 0, 100_000)
    x = edge_factor.inverse_edge_factor(level)
    np.testing.assert_allclose(edge_factor.null_free_edge_factor(x), level, rtol=1e-8)


def test_the_inverse_is_the_shortest_such_x():
    level = 10 ** np.random.default_rng(3).uniform(-3, -0.01, 10_000)
    x = edge_factor.inverse_edge_factor(level)
    assert np.all(edge_factor.null_free_edge_factor(x * (1 - 1e-4)) > level)


def test_at_a_lobe_height_the_inverse_is_the_near_side_of_the_flat_part():
    x = edge_factor.inverse_edge_factor(edge_factor.HEIGHT[1])
    assert x < 1
    assert np.sinc(x) == pytest.approx(edge_factor.HEIGHT[1], rel=1e-9)


def test_levels_without_an_edge_and_without_a_hope():
    x = edge_factor.inverse_edge_factor([3.0, 1.0, 0.0, -1.0, np.nan])
    np.testing.assert_array_equal(x, [0.0, 0.0, np.inf, np.inf, np.nan])


def test_an_unknown_ramp_stays_unknown_and_single_precision_stays_single():
    factor = edge_factor.null_free_edge_factor(np.array([np.nan, 0.0, np.inf], dtype=np.float32))
    assert factor.dtype == np.float32
    np.testing.assert_array_equal(factor, [np.nan, 1.0, 0.0])
