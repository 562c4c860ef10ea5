"""Load lines against resistors worked out by hand and a root finder on a table's own formula."""

import numpy as np
import pytest
from scipy.optimize import brentq

from edgeplan.physics.driver_tables import curve_at_pin, load_line_ohm, settled_v

SUPPLY_V = 3.3
RAILS_V = (0.0, SUPPLY_V)
WIDE_V = np.array([-SUPPLY_V, 0.0, SUPPLY_V, 2 * SUPPLY_V])


def pull_up(ohm):
    """Resistor to the supply, as a [Pullup] table: negative current at positive voltage."""
    return curve_at_pin(WIDE_V, -WIDE_V / ohm, SUPPLY_V, from_above=True)


def pull_down(ohm):
    """Resistor to ground, as a [Pulldown] table."""
    return curve_at_pin(WIDE_V, WIDE_V / ohm, 0.0, from_above=False)


def square_law_a(volt, ohm=20.0, saturation_a=0.08):
    """Current of a square-law transistor over its voltage."""
    knee = 2 * saturation_a * ohm
    inside = volt / ohm * (1 - volt / (2 * knee))
    return np.where(volt < 0, volt / ohm, np.where(volt < knee, inside, saturation_a))


@pytest.mark.parametrize("load_ohm", [20.0, 50.0, 90.0])
def test_a_resistor_is_itself_at_any_load_in_both_directions(load_ohm):
    up = load_line_ohm([pull_up(25.0)], load_ohm, RAILS_V, high=True)
    down = load_line_ohm([pull_down(18.0)], load_ohm, RAILS_V, high=False)
    assert (up, down) == pytest.approx((25.0, 18.0))


def test_a_pad_settles_where_a_divider_does():
    # 25 ohm from 3.3 V into 50 ohm to ground: 3.3 V x 50/75
    settled = settled_v([pull_up(25.0)], 50.0, 0.0, RAILS_V, high=True)
    assert settled.pin_v == pytest.approx(2.2)


def test_a_clamp_that_conducts_counts_beside_the_driver():
    # 20 ohm to ground and 100 ohm to ground in the clamp table: 16.67 ohm
    termination = curve_at_pin(WIDE_V, WIDE_V / 100, 0.0, from_above=False)
    ohm = load_line_ohm([pull_down(20.0), termination], 50.0, RAILS_V, high=False)
    assert ohm == pytest.approx(20 * 100 / 120)


def test_a_clamp_that_works_against_the_driver_makes_it_weaker():
    # driving high through 25 ohm against 100 ohm to ground: 2.062 V, 41.25 mA into 50 ohm
    against = curve_at_pin(WIDE_V, WIDE_V / 100, 0.0, from_above=False)
    pin_v = 3.3 / 25 / (1 / 25 + 1 / 50 + 1 / 100)
    ohm = load_line_ohm([pull_up(25.0), against], 50.0, RAILS_V, high=True)
    assert ohm == pytest.approx((3.3 - pin_v) / (pin_v / 50))


@pytest.mark.parametrize("load_ohm", [25.0, 50.0, 83.0, 150.0])
def test_a_transistor_meets_the_load_line_where_a_root_finder_does(load_ohm):
    volt = np.linspace(-SUPPLY_V, 2 * SUPPLY_V, 100)
    table = curve_at_pin(volt, square_law_a(volt), 0.0, from_above=False)
    pin_v = brentq(lambda v: (v - SUPPLY_V) / load_ohm + float(square_law_a(v)), 0, SUPPLY_V)
    expected = pin_v / ((SUPPLY_V - pin_v) / load_ohm)
    ohm = load_line_ohm([table], load_ohm, RAILS_V, high=False)
    assert ohm == pytest.approx(expected, rel=0.002)
    assert ohm > 20.0  # the slope at the origin


def test_resistance_of_the_package_is_part_of_the_driver_and_of_the_load_line():
    plain = load_line_ohm([pull_down(20.0)], 50.0, RAILS_V, high=False)
    packed = load_line_ohm([pull_down(20.0)], 50.0, RAILS_V, high=False, package_ohm=0.5)
    assert packed == pytest.approx(plain + 0.5)


def test_a_load_line_beyond_the_last_row_says_so():
    short = curve_at_pin([0.0, 0.5], [0.0, 0.01], 0.0, from_above=False)
    settled = settled_v([short], 50.0, SUPPLY_V, RAILS_V, high=False)
    assert not settled.covered
    assert settled.pin_v == pytest.approx(SUPPLY_V / 2)  # 50 ohm go on


def test_a_pad_stops_at_the_first_of_several_crossings():
    # falling current between 1 and 2 V; 100 ohm from 3.3 V cross it three times
    table = curve_at_pin([0, 1, 2, 3], [0.0, 0.03, 0.005, 0.04], 0.0, from_above=False)
    low = settled_v([table], 100.0, 3.3, (0.0, 3.3), high=False).pin_v
    high = settled_v([table], 100.0, 3.3, (0.0, 3.3), high=True).pin_v
    assert low > 2.0
    assert high < 1.0


def test_a_driver_that_pulls_nowhere_has_no_resistance():
    nothing = curve_at_pin(WIDE_V, np.zeros(4), 0.0, from_above=False)
    wrong_way = curve_at_pin(WIDE_V, WIDE_V / 20, SUPPLY_V, from_above=True)
    assert np.isnan(load_line_ohm([nothing], 50.0, RAILS_V, high=False))
    assert np.isnan(load_line_ohm([wrong_way], 50.0, RAILS_V, high=True))
