"""Which frequencies of a net are judged, and how strong they are before the edge."""

import numpy as np
import pytest
from build import board, clock, driver, exactly, facts_of, interface, net, setting

from edgeplan.activity import is_data, toggle_hz
from edgeplan.emission_lines import MOST_LINES, lines_of
from edgeplan.emission_target import target_of


def lines(*nets, **changes):
    b = board(*nets, **changes)
    return lines_of(facts_of(b), target_of(b))


def orders(found, net=0):
    return found.order[net, found.exists[net]]


def test_a_clock_is_judged_at_every_harmonic_of_the_measured_range():
    # 30 MHz to 1 GHz.
    found = lines(clock(clock_hz=50e6))
    np.testing.assert_array_equal(orders(found), np.arange(1, 21))
    np.testing.assert_allclose(found.frequency_hz[0, :3], [50e6, 100e6, 150e6])


def test_a_slow_clock_starts_at_its_first_harmonic_of_the_range():
    found = lines(clock(clock_hz=8e6))
    assert orders(found)[[0, -1]].tolist() == [4, 125]


def test_very_many_harmonics_are_thinned_to_odd_ones_and_every_step_of_the_limit():
    found = lines(clock(clock_hz=100e3))
    n = orders(found)
    assert len(n) <= MOST_LINES + 3
    assert (n % 2 == 1).all()
    frequency = found.frequency_hz[0, found.exists[0]]
    assert (frequency[0], frequency[-1]) == pytest.approx((30e6, 1e9), rel=0.01)
    assert np.abs(frequency - 230e6).min() <= 100e3


# 2 V/(pi n) of a square wave: C. R. Paul, ch. 3.
def test_even_harmonics_of_an_even_square_wave_are_absent():
    found = lines(clock())
    n = np.arange(1, 21)
    expected = np.where(n % 2 == 1, 2 / (np.pi * n), 0.0)
    np.testing.assert_allclose(found.per_swing[0], expected, atol=1e-12)


def test_a_clock_on_an_open_drain_output_keeps_its_even_harmonics():
    # Only one of its edges is fast: 1/(pi n) at every n, and never more than twice that counts.
    pulled = clock(pull_up_ohm=1000.0, pull_up="R1", bus_capacitance_f=50e-12)
    found = lines(pulled, interface=[interface("open-drain", sink_current_a=3e-3)])
    np.testing.assert_allclose(found.per_swing[0], 2 / (np.pi * np.arange(1, 21)))


@pytest.mark.parametrize(("tolerance", "down_db"), [(0.005, 36.08), (0.01, 30.06), (0.05, 16.11)])
def test_a_duty_tolerance_brings_the_second_harmonic_back(tolerance, down_db):
    # Second over first of a duty of 50.5, 51 and 55 %: -36.08, -30.06, -16.11 dB; the first of
    # the even wave itself is up to 0.11 dB larger.
    found = lines(clock(), interface=[interface(duty_tolerance=tolerance)])
    ratio = found.per_swing[0, 1] / found.per_swing[0, 0]
    assert 20 * np.log10(ratio) == pytest.approx(-down_db, abs=0.12)


def test_an_uneven_duty_has_the_harmonics_of_its_pulse():
    # |sin(pi n/4)|: every fourth is absent, the second at its largest.
    found = lines(clock(), interface=[interface(duty=0.25)])
    share = found.per_swing[0] * np.pi * np.arange(1, 21) / 2
    np.testing.assert_allclose(share[:4], [0.5**0.5, 1.0, 0.5**0.5, 0.0], atol=1e-12)


def test_a_driver_with_unequal_edges_is_not_credited_with_its_duty():
    own = setting(edge_up_s=exactly(1e-9), edge_down_s=exactly(2e-9)) | {"edge_s": None}
    found = lines(clock(), driver=[driver(own)])
    np.testing.assert_allclose(found.per_swing[0], 2 / (np.pi * np.arange(1, 21)))


def test_a_missing_minimum_edge_does_not_bring_even_harmonics_back():
    found = lines(clock(), driver=[driver(setting(edge_s={"max": 1e-9}))])
    assert found.per_swing[0, 1] == 0


def test_data_are_judged_over_the_whole_range_and_at_every_step_of_the_limit():
    found = lines(net(data_bps=100e6))
    frequency = found.frequency_hz[0, found.exists[0]]
    assert (frequency[0], frequency[-1]) == (30e6, 1e9)
    assert 230e6 in frequency
    np.testing.assert_allclose(found.per_swing[0], 2 / (np.pi * frequency / 50e6))


# Quasi-peak of 100 Mb/s in 120 kHz: 10 lg(0.0903/100) + 5.6 = -24.8 dB.
def test_random_data_read_24_8_db_below_the_clock_of_their_envelope():
    found = lines(net(data_bps=100e6), clock(clock_hz=50e6))
    read_db = found.detector_db("quasi-peak", np.full(found.frequency_hz.shape, 120e3))
    assert read_db[0, 0] == pytest.approx(-24.84, abs=0.02)
    assert read_db[1, 0] == 0.0


def test_a_clock_slower_than_the_bandwidth_reads_as_impulses():
    # 20 kHz in 120 kHz: 1.05 x 120 over 40 edges a millisecond, 9.97 dB.
    found = lines(clock(clock_hz=20e3))
    read_db = found.detector_db("quasi-peak", np.full(found.frequency_hz.shape, 120e3))
    assert read_db[0, 0] == pytest.approx(9.97, abs=0.01)


@pytest.mark.parametrize(
    ("the_net", "data", "hz"),
    [
        (net(data_bps=100e6), True, 50e6),
        (net(activity=None, data_bps=100e6), True, 50e6),
        (net(activity="pattern", data_bps=100e6), False, 50e6),
        (clock(clock_hz=25e6), False, 25e6),
        (net(activity=None, data_bps=None, clock_hz=3e6), False, 3e6),
        (net(activity=None, data_bps=None), False, np.nan),
    ],
)
def test_what_a_net_toggles_at(the_net, data, hz):
    facts = facts_of(board(the_net))[0]
    assert is_data(facts) == data
    np.testing.assert_array_equal(toggle_hz(facts), hz)


def test_a_net_without_a_rate_has_no_lines():
    found = lines(net(activity=None, data_bps=None), clock())
    assert not found.exists[0].any()
    assert found.exists[1].all()


def test_a_clock_above_the_measured_range_has_no_lines():
    assert not lines(clock(clock_hz=1.2e9)).exists.any()
