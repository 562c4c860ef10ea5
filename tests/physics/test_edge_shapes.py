"""edge_shapes against sampled edges and against search."""

import numpy as np
import pytest

from edgeplan.physics.edge_shapes import (
    largest_difference,
    null_free_raised_cosine,
    shape_factor,
)
from edgeplan.physics.spectra import raised_cosine_factor


def step_spectrum(shape, duration, turns, samples=1 << 16):
    """Spectrum of an edge over that of an ideal step: transform of its sampled slope."""
    t = (np.arange(samples) + 0.5) / samples
    wave = {"trapezoid": t, "raised-cosine": (1 - np.cos(np.pi * t)) / 2}[shape]
    steps = np.diff(wave, prepend=0.0, append=1.0)
    at = np.arange(samples + 1) / samples * duration
    return np.abs(np.exp(-2j * np.pi * np.outer(turns, at)) @ steps)


@pytest.mark.parametrize("shape", ["trapezoid", "raised-cosine"])
def test_each_shape_is_the_largest_of_its_sampled_edges_from_here_on(shape):
    x = np.linspace(0.01, 6, 700)
    sampled = step_spectrum(shape, 1.0, x)
    from_here_on = np.maximum.accumulate(sampled[::-1])[::-1]
    # the last lobe of the search is cut, so the end is left out
    computed = shape_factor(x, shape == "raised-cosine")
    np.testing.assert_allclose(computed[:580], from_here_on[:580], atol=2e-4)
    assert np.all(computed >= sampled - 1e-4)


def test_the_raised_cosine_holds_the_height_of_the_next_lobe_in_every_null():
    y = np.linspace(0, 40, 2_000_001)
    exact = raised_cosine_factor(y)
    from_here_on = np.maximum.accumulate(exact[::-1])[::-1]
    part = slice(0, 1_900_000, 61)
    np.testing.assert_allclose(
        null_free_raised_cosine(y[part]), from_here_on[part], rtol=1e-6, atol=1e-12
    )


def test_the_raised_cosine_never_rises_and_knows_what_it_does_not_know():
    x = np.concatenate([np.linspace(0, 30, 50_000), np.linspace(1020, 1030, 9_000), [1e6, np.inf]])
    factor = null_free_raised_cosine(x)
    assert np.all(np.diff(factor) <= 0)
    assert factor[-1] == 0
    assert np.isnan(null_free_raised_cosine(np.nan))


def test_a_raised_cosine_of_the_same_length_is_louder_at_first_and_far_quieter_later():
    # 20 dB per decade against 40: at x = 10 the envelopes are 1/(10 pi) and 1/399
    ramp, smooth = shape_factor([[0.5, 10.0]], [[False], [True]])
    assert smooth[0] > ramp[0]
    assert 20 * np.log10(ramp[1] / smooth[1]) == pytest.approx(22.0, abs=0.6)


@pytest.mark.parametrize("smooth", [False, True])
def test_no_two_edges_up_to_a_length_differ_by_more(smooth):
    rng = np.random.default_rng(61)
    short = 10 ** rng.uniform(-2.5, 0.6, 20_000)
    ratio = 10 ** rng.uniform(0, 0.7, 20_000)
    factor = (lambda x: np.cos(np.pi * x) / (1 - 4 * x**2)) if smooth else np.sinc
    slower = rng.uniform(1, 3, 20_000)
    exact = np.abs(factor(short * slower) - factor(short * slower * ratio))
    bound = largest_difference(np.log(ratio), short * slower * ratio, smooth)
    assert np.all(exact <= bound + 1e-9)


def test_equal_edges_do_not_differ_and_an_unknown_length_takes_the_steepest_slope():
    assert largest_difference(0.0, 0.3) == 0
    assert largest_difference(0.1, np.nan) == pytest.approx(0.1063, abs=1e-4)
    assert largest_difference(np.inf, 0.3) == np.inf
