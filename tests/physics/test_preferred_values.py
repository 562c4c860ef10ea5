"""Preferred values against the printed tables of IEC 60063."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from edgeplan.physics.preferred_values import SERIES, decade, nearest, preferred_values

REFERENCE = Path(__file__).parents[1] / "reference"


@pytest.mark.parametrize("series", SERIES)
def test_a_decade_has_as_many_values_as_its_name_says(series):
    values = decade(series)
    assert len(set(values.tolist())) == int(series[1:])
    assert (np.diff(values) > 0).all()


def test_e24_is_the_printed_table():
    printed = np.loadtxt(REFERENCE / "iec_60063_e24.csv", skiprows=2)
    np.testing.assert_array_equal(decade("E24"), printed)


@pytest.mark.parametrize(
    ("series", "values"),
    [
        ("E3", [10, 22, 47]),
        ("E6", [10, 15, 22, 33, 47, 68]),
        ("E12", [10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82]),
    ],
)
def test_short_series_are_parts_of_e24(series, values):
    assert decade(series).tolist() == values
    assert set(values) <= set(decade("E24").tolist())


def test_e192_prints_920_where_the_rule_gives_919():
    values = decade("E192").tolist()
    assert 920 in values
    assert 919 not in values


@pytest.mark.parametrize("series", ["E48", "E96"])
def test_e48_and_e96_follow_the_rule_without_exception(series):
    count = int(series[1:])
    rule = [round(10 ** (2 + k / count)) for k in range(count)]
    assert decade(series).tolist() == rule


def test_e24_shares_only_six_values_with_e96():
    common = set((10 * decade("E24")).tolist()) & set(decade("E96").tolist())
    assert common == {100, 110, 130, 150, 200, 750}


@pytest.mark.parametrize(
    ("series", "low", "high"), [("E12", 12, 15), ("E24", 13, 15), ("E96", 133, 137)]
)
def test_widest_gap_between_neighbours(series, low, high):
    values = decade(series)
    ratio = np.append(values, values[0] * 10)[1:] / values
    widest = int(np.argmax(ratio))
    assert (values[widest], values[widest + 1]) == (low, high)


def test_values_span_decades_and_include_both_bounds():
    values = preferred_values("E3", 4.7, 470)
    assert values.tolist() == [4.7, 10.0, 22.0, 47.0, 100.0, 220.0, 470.0]


def test_no_value_between_the_bounds_is_an_empty_answer():
    assert preferred_values("E3", 23, 46).size == 0
    assert preferred_values("E3", 46, 23).size == 0


def test_34_ohm_is_33_in_e24():
    assert nearest("E24", 34.0) == 33.0


def test_nearest_looks_into_the_next_decade():
    assert nearest("E3", 95.0) == 100.0


@settings(max_examples=60, deadline=None)
@given(st.floats(1e-2, 1e7), st.sampled_from(list(SERIES)))
def test_nearest_is_never_farther_than_half_the_widest_gap(ohm, series):
    values = decade(series)
    gap = (np.append(values, values[0] * 10)[1:] / values).max()
    assert abs(np.log(nearest(series, ohm) / ohm)) <= np.log(gap) / 2 + 1e-9


def test_unknown_series_names_the_known_ones():
    with pytest.raises(ValueError, match="E3, E6, E12"):
        decade("E13")


@pytest.mark.parametrize("bad", [0.0, -1.0, float("nan"), float("inf")])
def test_bounds_that_are_no_resistance_are_refused(bad):
    with pytest.raises(ValueError, match="positive"):
        preferred_values("E12", bad, 100.0)
    with pytest.raises(ValueError, match="positive resistance"):
        nearest("E12", bad)
