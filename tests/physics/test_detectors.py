"""detectors against the standard's figures and random noise."""

import numpy as np
import pytest
from scipy import signal

from edgeplan.physics import detectors


def test_bandwidths_are_those_of_the_standard():
    # CISPR 16-1-1: 200 Hz, 9 kHz, 120 kHz, 1 MHz
    frequency_hz = [9e3, 149e3, 151e3, 29e6, 31e6, 1e9, 1.1e9, 18e9]
    expected_hz = [200, 200, 9e3, 9e3, 120e3, 120e3, 1e6, 1e6]
    np.testing.assert_array_equal(detectors.bandwidth_hz(frequency_hz), expected_hz)
    assert np.isnan(detectors.bandwidth_hz([1e3, 20e9])).all()


def test_time_constants_are_those_of_the_standard():
    constants = {b.name: (b.charge_s, b.discharge_s, b.meter_s) for b in detectors.BANDS.values()}
    assert constants["A"] == (45e-3, 500e-3, 160e-3)
    assert constants["B"] == (1e-3, 160e-3, 160e-3)
    assert constants["C/D"] == (1e-3, 550e-3, 100e-3)


def test_the_noise_bandwidth_is_the_area_of_a_gaussian_of_six_decibels():
    frequency_hz = np.linspace(-500e3, 500e3, 200_001)
    power = 0.25 ** ((frequency_hz / 60e3) ** 2)  # amplitude 1/2 at 60 kHz off tune
    area_hz = power.sum() * (frequency_hz[1] - frequency_hz[0])
    assert detectors.noise_bandwidth_hz(120e3) == pytest.approx(area_hz, rel=1e-6)


def noise_envelope(rng, bandwidth_hz, observed_s):
    """Envelope of noise behind a Gaussian filter, rms 1, sampled eight times per 1/bandwidth."""
    samples = int(8 * bandwidth_hz * observed_s)
    frequency_hz = np.fft.fftfreq(samples, 1 / (8 * bandwidth_hz))
    noise = rng.normal(size=samples) + 1j * rng.normal(size=samples)
    envelope = np.abs(np.fft.ifft(noise * 0.5 ** ((2 * frequency_hz / bandwidth_hz) ** 2)))
    return envelope / np.sqrt(np.mean(envelope**2))


def test_average_and_peak_of_noise_are_those_of_a_simulated_receiver():
    rng = np.random.default_rng(5)
    runs = [noise_envelope(rng, 120e3, 0.1) for _ in range(40)]
    average_db = 20 * np.log10(np.mean(runs))
    assert detectors.noise_reading_db("average", 120e3) == pytest.approx(average_db, abs=0.01)
    peak_db = np.mean([20 * np.log10(run.max()) for run in runs])
    # the mean of 40 peaks spreads by 0.07 dB; the term's 0.6 dB belongs to about a second
    assert detectors.noise_reading_db("peak", 120e3, 0.1) == pytest.approx(peak_db, abs=0.3)


@pytest.mark.parametrize(
    ("detector", "bandwidth_hz", "term_db"), [("peak", 120e3, 11.3), ("peak", 1e6, 12.0)]
)
def test_peaks_of_a_second_are_the_design_figures(detector, bandwidth_hz, term_db):
    assert detectors.noise_reading_db(detector, bandwidth_hz) == pytest.approx(term_db, abs=0.05)


def test_terms_have_the_shape_of_the_bandwidths():
    for detector in ("peak", "quasi-peak", "average", "rms"):
        assert detectors.noise_reading_db(detector, np.full((4, 2), 120e3)).shape == (4, 2)


def test_impulse_over_six_decibel_bandwidth_is_that_of_the_double_tuned_stages():
    # two critically coupled double-tuned stages = two second-order Butterworth low-passes of
    # half the bandwidth (here 1 Hz): the peak of their impulse response
    corner = np.pi
    stage = np.array([1, np.sqrt(2) * corner, corner**2])
    _, response = signal.impulse((corner**4, np.polymul(stage, stage)), N=2001)
    assert response.max() == pytest.approx(detectors.IMPULSE_SHARE, abs=0.005)
