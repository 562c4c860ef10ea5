"""spread_clock against a swept carrier in a simulated receiver."""

import numpy as np
import pytest
from simulated_activity import BANDWIDTH_HZ, spread_relief_db

from edgeplan.physics.spread_clock import spread_credit_db


@pytest.mark.parametrize(("order", "relief_db"), [(1, 4.6), (3, 8.9), (5, 10.6)])
def test_the_simulation_gives_the_published_style_of_figures(order, relief_db):
    # the design's own simulation (no outside truth): 40 MHz, +-2.5 %, 30 kHz triangle, 120 kHz
    assert spread_relief_db(order, 2e6, 30e3) == pytest.approx(relief_db, abs=0.6)


def test_the_credit_is_below_a_measured_clock():
    # a published measurement of that clock gave 9.5, 11.2 and 13.0 dB
    credit_db = spread_credit_db([1, 3, 5], 2e6, 30e3, BANDWIDTH_HZ)
    assert np.all(credit_db < [9.5, 11.2, 13.0])


@pytest.mark.parametrize("modulation_hz", [4e3, 30e3, 60e3, 120e3, 150e3, 400e3])
@pytest.mark.parametrize("deviation_hz", [0.1e6, 0.5e6, 2e6, 7e6])
def test_no_credit_exceeds_the_relief_of_a_simulated_sweep(deviation_hz, modulation_hz):
    for order in (1, 4):
        credit_db = spread_credit_db(order, deviation_hz, modulation_hz, BANDWIDTH_HZ)
        for detector in ("peak", "average"):
            relief_db = spread_relief_db(order, deviation_hz, modulation_hz, detector)
            assert credit_db <= relief_db + 0.05


def test_a_clock_that_may_not_spread_gets_nothing():
    credit_db = spread_credit_db([1, 5], 2e6, 30e3, BANDWIDTH_HZ, [[False], [True]])
    np.testing.assert_array_equal(credit_db[0], 0.0)
    assert np.all(credit_db[1] > 0)


def test_three_decibel_less_than_the_mean_crossing_would_not_be_safe():
    # near the ends of the sweep two crossings add: 10 lg(n df fm/B^2) - 3 promises too much
    simple_db = 10 * np.log10(4 * 5e6 * 30e3 / BANDWIDTH_HZ**2) - 3
    assert simple_db > spread_relief_db(4, 5e6, 30e3)


def test_no_sweep_no_credit():
    np.testing.assert_array_equal(
        spread_credit_db(3, [0.0, 2e6], [30e3, 0.0], BANDWIDTH_HZ), [0, 0]
    )


def test_a_small_sweep_is_not_charged():
    assert spread_credit_db(1, 100e3, 30e3, BANDWIDTH_HZ) == 0


def test_the_wider_receiver_above_a_gigahertz_gives_less_credit():
    narrow, wide = spread_credit_db(40, 2e6, 30e3, np.array([120e3, 1e6]))
    assert wide < narrow
