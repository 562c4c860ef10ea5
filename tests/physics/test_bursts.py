"""bursts against an independent computation, a stepped receiver and the limits of the rules."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import detectors, quasi_peak
from edgeplan.physics.bursts import burst_reading_db
from edgeplan.physics.detectors import BANDS

TABLE = Path(__file__).parents[1] / "reference" / "quasi_peak_bursts.csv"
DETECTORS = ("peak", "quasi-peak", "average", "rms")


def test_quasi_peak_of_bursts_is_that_of_an_independent_computation():
    burst_s, repetition_hz, reading_db = np.loadtxt(TABLE, delimiter=",", skiprows=4).T
    computed_db = burst_reading_db("quasi-peak", BANDS["C/D"], burst_s, repetition_hz)
    np.testing.assert_allclose(computed_db, reading_db, atol=0.05)


@pytest.mark.parametrize(("busy_s", "repetition_hz"), [(2e-3, 40.0), (15e-3, 12.0)])
def test_quasi_peak_and_average_are_those_of_a_stepped_receiver(busy_s, repetition_hz):
    # the same chain in small equal steps, until it repeats
    band, step_s = BANDS["B"], 1e-5
    steps = round(1 / repetition_hz / step_s)
    busy = np.arange(steps) * step_s < busy_s
    charging_s = quasi_peak.charging_s(band)
    volt, lags = 0.0, {"quasi-peak": [0.0, 0.0], "average": [0.0, 0.0]}
    highest = dict.fromkeys(lags, 0.0)
    turns = round(2.0 * repetition_hz)
    for turn in range(turns):
        for on in busy:
            if on and volt < 1:
                current = (np.sqrt(1 - volt**2) - volt * np.arccos(volt)) / np.pi
                volt += current / charging_s * step_s
            volt -= volt / band.discharge_s * step_s
            for name, drive in (("quasi-peak", volt), ("average", float(on))):
                lag = lags[name]
                lag[0] += (drive - lag[0]) * step_s / band.meter_s
                lag[1] += (lag[0] - lag[1]) * step_s / band.meter_s
                if turn == turns - 1:
                    highest[name] = max(highest[name], lag[1])
    highest["quasi-peak"] /= quasi_peak.sine_share(band)
    for name, reading in highest.items():
        computed_db = burst_reading_db(name, band, busy_s, repetition_hz)
        assert computed_db == pytest.approx(20 * np.log10(reading), abs=0.05)


def test_very_short_bursts_follow_the_pulse_response():
    # a burst much shorter than the charge time acts by its product of level and length, as the
    # standard's pulses do: same change of reading from 100 Hz to 1 Hz
    band, repetition_hz = BANDS["C/D"], np.array([100.0, 10.0, 1.0])
    burst_db = burst_reading_db("quasi-peak", band, 20e-6, repetition_hz)
    pulse_db = 20 * np.log10(quasi_peak.pulse_reading_v(band, 1e-6, repetition_hz))
    np.testing.assert_allclose(burst_db - burst_db[0], pulse_db - pulse_db[0], atol=2.0)


def test_ten_milliseconds_once_a_second_read_as_the_rule_of_thumb_says():
    # a figure in use beside the rule that bursts of some milliseconds count as continuous
    assert burst_reading_db("quasi-peak", BANDS["C/D"], 10e-3, 1.0) == pytest.approx(-3.7, abs=0.05)


def test_the_peak_gets_no_relief():
    np.testing.assert_array_equal(burst_reading_db("peak", BANDS["C/D"], 1e-4, [1.0, 1e3]), 0.0)


def test_the_american_rule_gives_no_relief_at_twenty_hertz_and_below():
    # 47 CFR 15.35(a): pulse-modulated at 20 Hz or less: peak detector
    repetition_hz = np.array([1.0, 20.0, 21.0])
    fcc = burst_reading_db("quasi-peak", BANDS["C/D"], 1e-3, repetition_hz, "fcc")
    cispr = burst_reading_db("quasi-peak", BANDS["C/D"], 1e-3, repetition_hz)
    np.testing.assert_array_equal(fcc[:2], 0.0)
    assert np.all(cispr[:2] < -1)
    assert fcc[2] == cispr[2]


def test_fast_bursts_average_by_their_duty():
    duty = np.array([0.5, 0.1, 0.02])
    level_db = burst_reading_db("average", BANDS["C/D"], duty / 1e3, 1e3)
    np.testing.assert_allclose(level_db, 20 * np.log10(duty), atol=0.15)
    np.testing.assert_allclose(
        burst_reading_db("rms", BANDS["C/D"], duty / 1e3, 1e3), 10 * np.log10(duty)
    )


def test_a_meter_follows_slow_bursts():
    # half a second is five time constants of 100 ms: (1 + 5) e^-5 = 4 % from the full reading
    level = 10 ** (burst_reading_db("average", BANDS["E"], 0.5, 0.1) / 20)
    assert level == pytest.approx(1 - 6 * np.exp(-5), abs=1e-3)


@pytest.mark.parametrize("detector", DETECTORS)
def test_longer_and_more_frequent_bursts_never_read_less(detector):
    length_s, repetition_hz = np.geomspace(20e-6, 0.3, 25), np.geomspace(0.5, 2e3, 25)
    level_db = burst_reading_db(detector, BANDS["C/D"], length_s[:, None], repetition_hz)
    assert np.all(np.diff(level_db, axis=0) >= -1e-3)
    assert np.all(np.diff(level_db, axis=1) >= -1e-3)
    assert np.all(level_db <= 0)


@pytest.mark.parametrize("detector", DETECTORS)
def test_bursts_without_a_pause_are_the_steady_signal(detector):
    for length_s in (1e-3, 2e-3):
        assert burst_reading_db(detector, BANDS["C/D"], length_s, 1e3) == 0


def test_above_one_gigahertz_there_is_no_quasi_peak():
    assert np.isnan(burst_reading_db("quasi-peak", detectors.BANDS["E"], 1e-3, 10.0))


def test_the_order_of_detectors_is_kept():
    cases = {d: burst_reading_db(d, BANDS["C/D"], 1e-3, [5.0, 50.0]) for d in DETECTORS}
    assert np.all(cases["average"] <= cases["quasi-peak"])
    assert np.all(cases["quasi-peak"] <= cases["peak"])
