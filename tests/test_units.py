"""Quantities: what is read, what is refused, and what a person is told."""

import contextlib
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pydantic import BaseModel, Field, ValidationError

from edgeplan.units import (
    CAPACITANCE,
    CURRENT,
    DECIBEL,
    FREQUENCY,
    LENGTH,
    QUANTITIES,
    RATE,
    RESISTANCE,
    SHARE,
    TIME,
    VOLTAGE,
    Length,
    Quantity,
    Time,
    UnitError,
    VoltageOrShare,
)


@pytest.mark.parametrize(
    ("quantity", "text", "value"),
    [
        (LENGTH, "120 mil", 120 * 25.4e-6),
        (LENGTH, "1 oz", 34.8e-6),
        (LENGTH, "0.5 inch", 12.7e-3),
        (LENGTH, "35µm", 35e-6),
        (LENGTH, "35 um", 35e-6),
        (TIME, "1.5ns", 1.5e-9),
        (TIME, " 2.4 ns ", 2.4e-9),
        (TIME, "-0.2 ns", -0.2e-9),
        (TIME, "1e3 ps", 1e-9),
        (RESISTANCE, "4k7", 4700.0),
        (RESISTANCE, "33 ohm", 33.0),
        (RESISTANCE, "33R", 33.0),
        (RESISTANCE, "2R2", 2.2),
        (RESISTANCE, "R47", 0.47),
        (RESISTANCE, "33 Ω", 33.0),
        (RESISTANCE, "33 \u2126", 33.0),
        (RESISTANCE, "4.7 kohm", 4700.0),
        (CAPACITANCE, "4.5 pF", 4.5e-12),
        (CAPACITANCE, "4p7", 4.7e-12),
        (VOLTAGE, "3V3", 3.3),
        (VOLTAGE, "-200 mV", -0.2),
        (CURRENT, "3 mA", 3e-3),
        (FREQUENCY, "100 MHz", 100e6),
        (RATE, "100 Mbps", 100e6),
        (RATE, "115.2 kbit/s", 115.2e3),
        (DECIBEL, "-3 dB", -3.0),
        (SHARE, "5 %", 0.05),
        (SHARE, 0.3, 0.3),
        (LENGTH, 0, 0.0),
        (TIME, "0", 0.0),
    ],
)
def test_a_quantity_is_read_to_the_float_a_person_expects(quantity, text, value):
    assert quantity.parse(text) == value


@pytest.mark.parametrize(
    ("quantity", "text", "told"),
    [
        (TIME, "1,5 ns", 'write "1.5 ns"'),
        (RESISTANCE, "4,7k", 'write "4.7k"'),
        (FREQUENCY, "100 MHZ", 'did you mean "MHz"?'),
        (LENGTH, "12 inches", "m, cm, mm, um, nm, mil, inch, in, oz"),
        (LENGTH, 12, '"12 mm"'),
        (LENGTH, "12", '"12 mm"'),
        (LENGTH, "12o mm", "a number and one of"),
        (LENGTH, "1.2.3 mm", "a number and one of"),
        (LENGTH, "", "a number and one of"),
        (LENGTH, True, "a number and one of"),
        (LENGTH, None, "a number and one of"),
        (TIME, "nan ns", "a number and one of"),
        (TIME, math.nan, "a number and one of"),
        (TIME, "1e999 s", "a number and one of"),
        (FREQUENCY, math.inf, "a number and one of"),
        (LENGTH, "-1 mm", "a number and one of"),
        (RESISTANCE, "4k7k", "a number and one of"),
        (TIME, "4k7", "a number and one of"),
    ],
)
def test_what_could_be_misread_is_refused_with_a_hint(quantity, text, told):
    with pytest.raises(UnitError) as caught:
        quantity.parse(text)
    assert told in caught.value.hint


@settings(derandomize=True)
@given(
    quantity=st.sampled_from(QUANTITIES),
    number=st.decimals(min_value=0, max_value=100000, places=3),
    data=st.data(),
)
def test_a_written_number_comes_back_from_every_unit(quantity: Quantity, number, data):
    unit = data.draw(st.sampled_from(list(quantity.units)))
    blank = data.draw(st.sampled_from(["", " ", "  "]))
    value = quantity.parse(f"{number}{blank}{unit}")
    assert value / quantity.units[unit] == pytest.approx(float(number), rel=1e-12)


@settings(derandomize=True)
@given(text=st.text(max_size=12), quantity=st.sampled_from(QUANTITIES))
def test_any_text_is_a_finite_number_or_a_unit_error(text, quantity):
    with contextlib.suppress(UnitError):
        assert math.isfinite(quantity.parse(text))


class Trace(BaseModel):
    """A record with two quantities."""

    length_m: Length = Field(alias="length", gt=0)
    delay_s: Time | None = Field(alias="delay", default=None)

    model_config = {"validate_by_name": True}


def test_a_record_made_in_code_takes_si_numbers():
    assert Trace(length_m=0.012).length_m == 0.012


def test_a_record_read_from_a_file_wants_units():
    assert Trace.model_validate({"length": "12 mm"}, context={"from_file": True}).length_m == 0.012
    with pytest.raises(ValidationError, match="has no unit"):
        Trace.model_validate({"length": 0.012}, context={"from_file": True})


def test_bounds_of_a_field_hold_after_the_unit():
    with pytest.raises(ValidationError, match="greater than 0"):
        Trace(length="0 mm")


def test_a_schema_accepts_what_is_parsed_and_no_bare_number():
    jsonschema = pytest.importorskip("jsonschema")
    for quantity in QUANTITIES:
        jsonschema.validate(quantity.example, quantity.json_schema())
    for text in ("33 ohm", "4k7", "33 Ω", "0", 0):
        jsonschema.validate(text, RESISTANCE.json_schema())
    for wrong in (33, "33", "33 V", "-33 ohm", "4,7k"):
        with pytest.raises(jsonschema.ValidationError):
            jsonschema.validate(wrong, RESISTANCE.json_schema())


@pytest.mark.parametrize(
    ("text", "volts"), [("0.3 V", 0.3), ("300 mV", 0.3), ("15 %", 0.495), (0.15, 0.495)]
)
def test_an_allowance_is_a_voltage_or_a_share_of_the_swing(text, volts):
    assert VoltageOrShare.parse(text).volts(3.3) == pytest.approx(volts, rel=1e-12)


@pytest.mark.parametrize("text", ["0,3 V", "-0.3 V", "0.3 A", "-5 %", "", None])
def test_an_allowance_that_is_neither_is_refused(text):
    with pytest.raises(UnitError, match=r".") as caught:
        VoltageOrShare.parse(text)
    assert "0.3 V" in caught.value.hint
