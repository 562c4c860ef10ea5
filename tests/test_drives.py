"""Corners of a setting: what is stated decides, what is not stated stays unknown."""

from math import asin, isnan, pi

import pytest

from edgeplan.board import Driver, Setting
from edgeplan.drives import driver_corners, setting_corners

OHMS = {"min": 20.0, "typ": 30.0, "max": 40.0}


def corners_of(**fields):
    plain = {"setting": "A", "resistance_ohm": OHMS, "edge_s": {"min": 1e-9, "max": 2e-9}}
    return setting_corners(Setting(**plain | fields))


def test_the_slow_corner_has_the_highest_resistance_and_the_longest_edge():
    corners = corners_of()
    assert corners.resistance_ohm["rising"].slow == 40.0
    assert corners.resistance_ohm["falling"].fast == 20.0
    assert corners.ramp_s["rising"].slow == pytest.approx(2 * corners.ramp_s["rising"].fast)
    assert corners.missing == ()


def test_a_maximum_is_never_used_as_a_minimum():
    corners = corners_of(edge_s={"max": 2e-9})
    assert isnan(corners.ramp_s["rising"].fast)
    assert isnan(corners.ramp_s["rising"].typical)
    assert corners.missing == ("minimum edge",)


def test_a_minimum_is_never_used_as_a_maximum():
    corners = corners_of(resistance_ohm={"min": 20.0})
    assert isnan(corners.resistance_ohm["rising"].slow)
    assert corners.missing == ("maximum resistance",)


def test_a_typical_value_alone_decides_no_corner():
    corners = corners_of(edge_s=1.2e-9)
    assert isnan(corners.ramp_s["rising"].fast)
    assert isnan(corners.ramp_s["rising"].slow)
    assert corners.missing == ("minimum edge", "maximum edge")


def test_a_stated_spread_bounds_a_typical_value_and_is_the_users():
    corners = corners_of(resistance_ohm=30.0, edge_s=1e-9, edge_levels="0-100", spread=0.3)
    edge = corners.ramp_s["rising"]
    assert (edge.fast, edge.typical, edge.slow) == pytest.approx((0.7e-9, 1e-9, 1.3e-9))
    assert edge.provenance == "bound"
    assert corners.resistance_ohm["falling"].slow == pytest.approx(39.0)


def test_a_spread_fills_only_what_is_not_stated():
    corners = corners_of(resistance_ohm={"typ": 30.0, "max": 33.0}, spread=0.3)
    ohms = corners.resistance_ohm["rising"]
    assert (ohms.fast, ohms.slow) == pytest.approx((21.0, 33.0))


def test_without_a_typical_value_the_middle_labels():
    assert corners_of(resistance_ohm={"min": 20, "max": 40}).resistance_ohm["rising"].typical == 30


# A raised cosine rises from x to 1 - x in 2 asin(1 - 2x)/pi of its whole time, a ramp in 1 - 2x.
@pytest.mark.parametrize(
    ("levels", "span"), [("10-90", 0.8), ("20-80", 0.6), ("30-70", 0.4), ("0-100", 1.0)]
)
def test_edges_stated_between_other_levels_are_converted_for_both_shapes(levels, span):
    corners = corners_of(edge_s={"min": 1e-9, "max": 1e-9}, edge_levels=levels)
    assert corners.ramp_s["rising"].slow == pytest.approx(1e-9 * pi / (2 * asin(span)), rel=1e-5)
    assert corners.trapezoid_s["rising"].slow == pytest.approx(1e-9 / span)


def test_rising_and_falling_have_their_own_values():
    corners = corners_of(
        resistance_ohm=None,
        resistance_up_ohm={"min": 14, "max": 26},
        resistance_down_ohm={"min": 11, "max": 21},
        edge_s=None,
        edge_up_s={"min": 1e-9, "max": 2e-9},
        edge_down_s={"min": 0.5e-9, "max": 1e-9},
    )
    assert corners.resistance_ohm["rising"].slow == 26
    assert corners.resistance_ohm["falling"].slow == 21
    assert corners.ramp_s["falling"].slow == pytest.approx(corners.ramp_s["rising"].fast)
    assert not corners.symmetric


def test_a_setting_that_rises_and_falls_alike_is_symmetric_even_where_a_value_is_missing():
    assert corners_of().symmetric
    assert corners_of(edge_s={"max": 2e-9}).symmetric


def test_a_resistance_of_one_edge_only_leaves_the_other_unknown():
    corners = corners_of(resistance_ohm=None, resistance_up_ohm=OHMS)
    assert "maximum resistance" in corners.missing


def test_the_pad_takes_one_value_at_all_corners_or_a_range():
    one = corners_of(capacitance_f=4e-12).pad_f
    assert (one.fast, one.slow) == (4e-12, 4e-12)
    three = corners_of(capacitance_f={"min": 3e-12, "typ": 4e-12, "max": 5e-12}).pad_f
    assert (three.fast, three.typical, three.slow) == (3e-12, 4e-12, 5e-12)
    assert corners_of().pad_f.slow == 0.0


def test_a_pad_with_a_maximum_alone_misses_its_minimum():
    assert corners_of(capacitance_f={"max": 5e-12}).missing == ("minimum capacitance",)


def test_a_typical_pad_stands_in_for_an_end_that_is_not_stated():
    pad = corners_of(capacitance_f={"typ": 4e-12, "max": 5e-12}).pad_f
    assert (pad.fast, pad.slow) == (4e-12, 5e-12)


def test_a_driver_gives_its_settings_by_name_and_in_order():
    driver = Driver(
        name="d",
        settings=[Setting(setting=n, resistance_ohm=OHMS, edge_s=1e-9) for n in ("B", "A")],
    )
    assert list(driver_corners(driver)) == ["B", "A"]


def test_edges_that_differ_by_the_noise_of_arithmetic_are_alike():
    plain = {"setting": "A", "resistance_ohm": 30}
    near, apart = (
        setting_corners(Setting(**plain, edge_up_s=1e-9, edge_down_s=1e-9 * (1 + share)))
        for share in (1e-9, 1e-3)
    )
    assert near.equal_edges
    assert not apart.equal_edges
