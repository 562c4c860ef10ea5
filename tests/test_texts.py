"""Texts of SI numbers."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from edgeplan import texts
from edgeplan.units import RESISTANCE, TIME


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (1.2e-9, "1.20 ns"),
        (0.70e-9, "700 ps"),
        (9.996e-9, "10.0 ns"),
        (999.6e-12, "1.00 ns"),
        (0.0, "0 s"),
        (-0.0, "0 s"),
        (-0.25e-9, "-250 ps"),
        (2.0, "2.00 s"),
        (None, "unknown"),
        (float("nan"), "unknown"),
        (float("inf"), "inf s"),
    ],
)
def test_a_time_has_three_digits_and_one_to_three_before_the_point(value, text):
    assert texts.text_time_s(value) == text


@settings(derandomize=True)
@given(st.floats(min_value=1e-12, max_value=900))
def test_a_printed_time_is_read_back_within_its_digits(time_s):
    assert TIME.parse(texts.text_time_s(time_s)) == pytest.approx(time_s, rel=5.1e-3)


@pytest.mark.parametrize("value", [0.0, 10.0, 22.0, 33.0, 68.0, 470.0, 4.7e3, 1e6, 4.99e3])
def test_a_printed_resistor_is_read_back_exactly(value):
    assert RESISTANCE.parse(texts.text_resistance_ohm(value)) == value


def test_levels_never_print_a_negative_zero():
    assert texts.text_db(-0.01) == "0.0 dB"
    assert texts.text_share(-0.0001) == "0 %"
