"""spectra against printed harmonics, numerical Fourier sums and the definition of its bounds."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import spectra

TABLE = Path(__file__).parents[1] / "reference" / "trapezoid_spectrum.csv"
TRAPEZOID = {"swing_v": 3.3, "duty": 0.5, "ramp_s": 2e-9, "period_s": 40e-9}


def sampled_trapezoid(duty, rise_s, fall_s, period_s, samples):
    """One period of a 0-1 V trapezoid whose edges cross half at 0 and at the duty."""
    time_s = np.arange(samples) / samples * period_s
    corners_s = np.array(
        [
            -rise_s / 2,
            rise_s / 2,
            duty * period_s - fall_s / 2,
            duty * period_s + fall_s / 2,
            period_s - rise_s / 2,
            period_s + rise_s / 2,
        ]
    )
    return np.interp(time_s, corners_s, [0.0, 1.0, 1.0, 0.0, 0.0, 1.0])


def test_harmonics_are_those_of_the_printed_table():
    order, peak_v, _, _ = np.loadtxt(TABLE, delimiter=",", skiprows=4).T
    np.testing.assert_allclose(spectra.harmonic_amplitude(order, **TRAPEZOID), peak_v, rtol=1e-5)


def test_levels_of_harmonics_and_envelope_are_those_of_the_printed_table():
    order, _, rms_dbuv, envelope_dbuv = np.loadtxt(TABLE, delimiter=",", skiprows=4).T
    exact = spectra.harmonic_amplitude(order, **TRAPEZOID)
    bound = spectra.envelope(order * 25e6, **TRAPEZOID)
    for peak_v, printed in ((exact, rms_dbuv), (bound, envelope_dbuv)):
        np.testing.assert_allclose(20 * np.log10(peak_v / np.sqrt(2) * 1e6), printed, atol=1e-3)


def test_nulls_of_ten_megahertz_with_a_fifth_of_the_period_as_edge():
    # 1 V, 10 MHz, 50 %, 20 ns: closed form; the fifth and the fifteenth harmonic are nulls.
    printed_dbuv = [115.50, 100.59, 85.87, 77.33, 73.84, 75.12]
    peak_v = spectra.harmonic_amplitude([1, 3, 7, 9, 11, 13], 1.0, 0.5, 20e-9, 100e-9)
    np.testing.assert_allclose(20 * np.log10(peak_v * 1e6), printed_dbuv, atol=5e-3)
    nulls_v = spectra.harmonic_amplitude([5, 15], 1.0, 0.5, 20e-9, 100e-9)
    assert np.all(nulls_v < 1e-15)
    low_hz, high_hz = spectra.corner_frequencies_hz(0.5, 20e-9, 100e-9)
    assert (low_hz / 1e6, high_hz / 1e6) == pytest.approx((6.366, 15.916), abs=6e-4)


@pytest.mark.parametrize(
    ("duty", "second_over_first_db"), [(0.505, -36.08), (0.51, -30.06), (0.55, -16.11)]
)
def test_a_duty_error_makes_even_harmonics(duty, second_over_first_db):
    first, second = spectra.harmonic_amplitude([1, 2], 1.0, duty, 0.0, 1.0)
    assert 20 * np.log10(second / first) == pytest.approx(second_over_first_db, abs=0.01)


def test_unequal_edges_agree_with_a_fourier_sum():
    order = np.arange(1, 60)
    for duty, rise_s, fall_s in ((0.5, 2e-9, 2e-9), (0.43, 1.1e-9, 3.3e-9), (0.3, 4e-9, 0.7e-9)):
        wave = sampled_trapezoid(duty, rise_s, fall_s, 40e-9, 2**17)
        reference = 2 * np.abs(np.fft.rfft(wave))[1:60] / wave.size
        computed = spectra.unequal_edge_amplitude(order, 1.0, duty, rise_s, fall_s, 40e-9)
        np.testing.assert_allclose(computed, reference, atol=1e-8)


def test_equal_edges_are_the_limit_of_unequal_ones():
    order = np.arange(1, 40)
    one = spectra.unequal_edge_amplitude(order, 2.0, 0.37, 3e-9, 3e-9, 40e-9)
    other = spectra.harmonic_amplitude(order, 2.0, 0.37, 3e-9, 40e-9)
    np.testing.assert_allclose(one, other, atol=1e-15)


def test_a_ramp_longer_than_the_pulse_is_undecided_and_stops_nobody_else():
    amplitude = spectra.harmonic_amplitude(1, 1.0, 0.1, [1e-9, 5e-9], 40e-9)
    assert np.isfinite(amplitude[0])
    assert np.isnan(amplitude[1])
    assert np.isnan(spectra.unequal_edge_amplitude(1, 1.0, 0.1, 1e-9, 8e-9, 40e-9))


def test_arrays_broadcast_over_nets_candidates_and_harmonics():
    swing_v, ramp_s = np.ones((3, 1, 1)), np.full((3, 5, 1), 1e-9)
    amplitude = spectra.harmonic_amplitude(np.arange(1, 8), swing_v, 0.5, ramp_s, 40e-9)
    assert amplitude.shape == (3, 5, 7)


def test_no_harmonic_of_equal_edges_exceeds_the_envelope():
    rng = np.random.default_rng(7)
    duty, ramp = rng.uniform(0.05, 0.95, (500, 1)), rng.uniform(0, 0.05, (500, 1))
    order = np.arange(1, 200)
    exact = spectra.harmonic_amplitude(order, 1.0, duty, ramp, 1.0)
    assert np.all(exact <= spectra.envelope(order, 1.0, duty, ramp, 1.0) * (1 + 1e-9))


def test_the_duty_factor_is_the_largest_sine_over_the_tolerance():
    rng = np.random.default_rng(8)
    order = np.arange(1, 40)
    for duty, tolerance in zip(rng.uniform(0.1, 0.9, 20), rng.uniform(0, 0.08, 20), strict=True):
        duties = np.linspace(duty - tolerance, duty + tolerance, 4001)
        brute = np.abs(np.sin(np.pi * order[:, None] * duties)).max(axis=1)
        computed = spectra.duty_factor(order, duty, tolerance)
        np.testing.assert_allclose(computed, brute, atol=2e-5)
        assert np.all(computed >= brute - 1e-12)


def test_even_harmonics_of_a_square_wave_vanish_without_a_tolerance_only():
    assert spectra.duty_factor(2, 0.5) == 0.0
    assert spectra.duty_factor(2, 0.5, 0.01) == pytest.approx(np.sin(0.02 * np.pi))


def test_the_bound_for_unequal_edges_holds_for_the_edges_and_for_all_slower_ones():
    rng = np.random.default_rng(9)
    order, slower = np.arange(1, 60)[:, None], np.geomspace(1, 30, 300)
    for _ in range(60):
        duty, tolerance = rng.uniform(0.2, 0.8), rng.uniform(0, 0.03)
        rise, fall = rng.uniform(0.0005, 0.01), rng.uniform(0.0005, 0.01)
        bound = spectra.null_free_amplitude(order, 1.0, duty, tolerance, rise, fall, 1.0)
        actual_duty = duty + rng.uniform(-tolerance, tolerance)
        turn = np.exp(-2j * np.pi * order * actual_duty)
        exact = np.abs(np.sinc(order * rise * slower) - np.sinc(order * fall * slower) * turn)
        assert np.all(exact / (np.pi * order) <= bound * (1 + 1e-9))


def test_the_bound_for_equal_edges_is_the_tight_form():
    order = np.arange(1, 30)
    bound = spectra.null_free_amplitude(order, 1.0, 0.5, 0.0, 0.01, 0.01, 1.0)
    in_first_lobe = spectra.harmonic_amplitude(order, 1.0, 0.5, 0.01, 1.0)
    np.testing.assert_allclose(bound, in_first_lobe, atol=1e-15)


def test_the_mean_of_two_unequal_edges_would_be_unsafe():
    # C. R. Paul's formula with both edges against the one with their mean: up to 2.7 dB low.
    order = np.arange(1, 200)
    exact = spectra.unequal_edge_amplitude(order, 1.0, 0.5, 0.002, 0.02, 1.0)
    mean = spectra.envelope(order, 1.0, 0.5, 0.011, 1.0)
    bound = spectra.null_free_amplitude(order, 1.0, 0.5, 0.0, 0.002, 0.02, 1.0)
    assert np.any(exact > mean * 1.2)
    assert np.all(exact <= bound * (1 + 1e-9))


def test_the_raised_cosine_factor_is_the_transform_of_its_slope():
    time = (np.arange(20000) + 0.5) / 20000
    slope = np.pi / 2 * np.sin(np.pi * time)
    x = np.array([0.0, 0.3, 0.5, 1.0, 1.7, 4.25])
    transform = np.abs((slope * np.exp(-2j * np.pi * x[:, None] * time)).mean(axis=1))
    np.testing.assert_allclose(spectra.raised_cosine_factor(x), transform, atol=1e-7)


def test_emission_is_not_computed_with_the_softer_edge_of_the_waveforms():
    # the design's own number: for 1 ns from 10 to 90 % and 1 GHz the raised cosine is 9.7 dB lower
    slower = np.geomspace(1, 50, 20_000)
    ramp = np.abs(np.sinc(1.0 / 0.8 * slower)).max()
    soft = spectra.raised_cosine_factor(1.0 / 0.5903 * slower).max()
    assert 20 * np.log10(ramp / soft) == pytest.approx(9.7, abs=0.1)
