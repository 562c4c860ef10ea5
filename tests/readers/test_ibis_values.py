"""Numbers of model files by ANSI/EIA-656: one scale letter, then letters that do not count."""

from math import isnan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from edgeplan.readers.ibis_values import SCALES, BadValueError, joined, number


@pytest.mark.parametrize(
    ("word", "unit", "value"),
    [
        ("50.00Ohm", "ohm", 50.0),
        ("3.3V", "V", 3.3),
        ("1.2nS", "s", 1.2e-9),
        ("10pf", "F", 10e-12),
        ("1.0Meg", "ohm", 1e6),
        ("0.058k", "ohm", 58.0),
        ("-20.0m", "A", -0.02),
        ("5e-12", "F", 5e-12),
        ("5E-3n", "s", 5e-12),
        (".5", "V", 0.5),
        ("5.", "V", 5.0),
        ("+1e+0001", "V", 10.0),
    ],
)
def test_numbers_are_read_with_their_scale(word, unit, value):
    assert number(word, unit) == value


def test_na_is_no_number_but_allowed():
    assert isnan(number("NA", "V"))
    assert isnan(number("na", "V"))


@given(st.decimals(-90, 90, places=4), st.sampled_from(sorted(SCALES)), st.sampled_from("VAs"))
def test_a_scale_letter_is_a_power_of_ten(digits, scale, unit):
    # against decimal arithmetic, rounded once
    wanted = float(digits.scaleb(SCALES[scale]))
    try:
        assert number(f"{digits}{scale}{unit}", unit) == wanted
    except BadValueError:
        assert abs(wanted) > 1e-3


@pytest.mark.parametrize(
    "word", ["", "V", "1.2.3", "1-2", "0x10", "inf", "nan", "1,2", "12_3", "1e9999999", "٣"]
)
def test_anything_else_is_refused(word):
    with pytest.raises(BadValueError):
        number(word, "V")


def test_units_that_stand_apart_are_glued_and_remarks_are_not():
    assert joined(["1.5", "V", "at", "50", "ohms"]) == ["1.5V", "at", "50ohms"]
    assert joined(["5pF", "V", "3", "m"]) == ["5pF", "V", "3", "m"]
