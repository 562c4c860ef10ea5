"""Quantities as people write them ("120 mil", "1.5ns", "4k7") to and from SI numbers.

Each field type of the records (``Length``, ``Time`` ...) is a float in SI that reads such a
text, refuses whatever could be misread, and describes itself in a JSON schema.
"""

import math
import re
import unicodedata
from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Decimal
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import core_schema

COPPER_OUNCE_M = 34.8e-6  # one ounce of copper rolled over one square foot, as fabricators round it

_NUMBER = r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?"
_DECIMAL_COMMA = re.compile(r"^\s*[+-]?\d+,\d+\s*\D*$")


class UnitError(ValueError):
    """A text that is no quantity of the wanted kind, and what to write instead."""

    def __init__(self, message: str, hint: str) -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Quantity:
    """What may be written for one kind of quantity, and how it becomes an SI number.

    ``letters`` may stand for the decimal point (4k7); ``signed`` allows values below zero;
    ``bare`` allows a number without a unit.  An instance is also the mark that makes
    ``Annotated[float, LENGTH]`` a field type.
    """

    name: str
    units: Mapping[str, float]
    example: str
    letters: Mapping[str, float] = field(default_factory=dict)
    signed: bool = False
    bare: bool = False

    def parse(self, value: object) -> float:
        """Return ``value`` in the SI unit of this quantity.

        Parameters
        ----------
        value : str, int or float
            A number with its unit; a number alone only where it is 0 or needs no unit.

        Returns
        -------
        float
            The value. [SI unit of the quantity]

        Raises
        ------
        UnitError
            Decimal comma, unknown unit, missing unit, NaN, infinity, wrong sign.

        Examples
        --------
        120 mil are 120 x 25.4 um:

        >>> f"{LENGTH.parse('120 mil') * 1e3:.3f} mm"
        '3.048 mm'
        >>> RESISTANCE.parse("4k7")
        4700.0
        >>> TIME.parse("1,5 ns")
        Traceback (most recent call last):
        ...
        edgeplan.units.UnitError: '1,5 ns' has a decimal comma
        """
        if isinstance(value, str):
            number = self._text(value)
        elif isinstance(value, int | float) and not isinstance(value, bool):
            number = self._bare(float(value))
        else:
            raise UnitError(f"{value!r} is not {self.name}", self.takes())
        return self._checked(number, value)

    def takes(self) -> str:
        """Return the words that tell a person what to write.

        Examples
        --------
        >>> TIME.takes()
        'write a number and one of s, ms, us, ns, ps, for example "1.5 ns"'
        """
        units = ", ".join(unit for unit in self.units if unit.isascii())
        alone = " or a number alone" if self.bare else ""
        return f'write a number and one of {units}{alone}, for example "{self.example}"'

    def _text(self, text: str) -> float:
        """Read a number with its unit."""
        if _DECIMAL_COMMA.match(text):
            point = text.strip().replace(",", ".")
            raise UnitError(f"{text!r} has a decimal comma", f'write "{point}"')
        plain = unicodedata.normalize("NFKC", text).strip()  # one micro sign, one ohm sign
        found = re.fullmatch(r"([+-]?\d*)([A-Za-z])(\d+)", plain, re.ASCII)
        if found and found[2] in self.letters:
            return _scaled(f"{found[1]}.{found[3]}", self.letters[found[2]])
        found = re.fullmatch(rf"({_NUMBER})\s*(\S*)", plain, re.ASCII)
        if found and not found[2]:
            return self._bare(float(found[1]))
        if found and found[2] in self.units:
            return _scaled(found[1], self.units[found[2]])
        if found:
            message = f"{text!r}: {found[2]!r} is no unit of {self.name}"
            raise UnitError(message, self._near(found[2]))
        raise UnitError(f"{text!r} is not {self.name}", self.takes())

    def _near(self, unit: str) -> str:
        """Name the unit that differs in case only, or all of them."""
        same = [known for known in self.units if known.lower() == unit.lower()]
        return f'did you mean "{same[0]}"?' if len(same) == 1 else self.takes()

    def _bare(self, number: float) -> float:
        """Accept a number without a unit where nothing can be misread."""
        if self.bare or number == 0 or not math.isfinite(number):
            return number
        first = self.example.split()[-1]
        hint = f'{self.takes()}; if {first} is meant: "{number:g} {first}"'
        raise UnitError(f"{number:g} has no unit", hint)

    def _checked(self, number: float, value: object) -> float:
        """Refuse what no part of a board can be."""
        if not math.isfinite(number):
            raise UnitError(f"{value} is not a number a board can have", self.takes())
        if number < 0 and not self.signed:
            raise UnitError(f"{value} is below zero: {self.name} cannot be", self.takes())
        return number

    def __get_pydantic_core_schema__(
        self, source: type[Any], handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.with_info_before_validator_function(self._validate, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: core_schema.CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        handler(schema)
        return self.json_schema()

    def _validate(self, value: object, info: core_schema.ValidationInfo) -> object:
        """Read texts always; take SI numbers as they are unless they come from a file."""
        from_file = isinstance(info.context, dict) and info.context.get("from_file", False)
        if isinstance(value, str) or from_file:
            return self.parse(value)
        return value

    def json_schema(self) -> dict[str, Any]:
        """Return the JSON schema of what a file may hold here.

        Examples
        --------
        >>> TIME.json_schema()["description"]
        'a time: a number and one of s, ms, us, ns, ps'
        """
        units = "|".join(re.escape(unit) for unit in self.units)
        units = units.replace("μ", "[uµμ]").replace("Ω", "[\u2126\u03a9]")
        sign = "[+-]?" if self.signed else "[+]?"
        number = _NUMBER.replace("[+-]?", sign, 1)
        forms = [rf"{number}\s*(?:{units})"]
        if self.letters:
            forms.append(rf"{sign}\d*[{''.join(self.letters)}]\d+")
        description = f"{self.name}: {self.takes()}".replace("write ", "").partition(", for")[0]
        text = {
            "type": "string",
            "pattern": rf"^\s*(?:{'|'.join(forms)}|{number if self.bare else '0'})\s*$",
        }
        alone = {"type": "number"} if self.bare else {"const": 0}
        return {"anyOf": [text, alone], "description": description, "examples": [self.example]}


def _scaled(number: str, factor: float) -> float:
    """Multiply in decimal, so that "2.4 ns" is the float 2.4e-9 and not its neighbour."""
    return float(Decimal(number) * Decimal(repr(factor)))


def _micro(units: Mapping[str, float]) -> dict[str, float]:
    """Add the Greek letter beside each ``u``."""
    greek = {unit.replace("u", "μ", 1): units[unit] for unit in units if unit[0] == "u"}
    return {**units, **greek}


LENGTH = Quantity(
    name="a length",
    units=_micro(
        {
            "m": 1.0,
            "cm": 1e-2,
            "mm": 1e-3,
            "um": 1e-6,
            "nm": 1e-9,
            "mil": 25.4e-6,
            "inch": 25.4e-3,
            "in": 25.4e-3,
            "oz": COPPER_OUNCE_M,
        }
    ),
    example="12 mm",
)
TIME = Quantity(
    name="a time",
    units=_micro({"s": 1.0, "ms": 1e-3, "us": 1e-6, "ns": 1e-9, "ps": 1e-12}),
    example="1.5 ns",
    signed=True,
)
RESISTANCE = Quantity(
    name="a resistance",
    units={
        "ohm": 1.0,
        "mohm": 1e-3,
        "kohm": 1e3,
        "Mohm": 1e6,
        "R": 1.0,
        "k": 1e3,
        "M": 1e6,
        "Ω": 1.0,
        "mΩ": 1e-3,
        "kΩ": 1e3,
        "MΩ": 1e6,
    },
    example="33 ohm",
    letters={"R": 1.0, "k": 1e3, "K": 1e3, "M": 1e6},
)
CAPACITANCE = Quantity(
    name="a capacitance",
    units=_micro({"F": 1.0, "mF": 1e-3, "uF": 1e-6, "nF": 1e-9, "pF": 1e-12, "fF": 1e-15}),
    example="4.5 pF",
    letters={"p": 1e-12, "n": 1e-9, "u": 1e-6},
)
VOLTAGE = Quantity(
    name="a voltage",
    units=_micro({"V": 1.0, "kV": 1e3, "mV": 1e-3, "uV": 1e-6}),
    example="3.3 V",
    letters={"V": 1.0},
    signed=True,
)
CURRENT = Quantity(
    name="a current",
    units=_micro({"A": 1.0, "mA": 1e-3, "uA": 1e-6, "nA": 1e-9}),
    example="3 mA",
    signed=True,
)
FREQUENCY = Quantity(
    name="a frequency",
    units={"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9},
    example="100 MHz",
)
RATE = Quantity(
    name="a bit rate",
    units={
        "bit/s": 1.0,
        "kbit/s": 1e3,
        "Mbit/s": 1e6,
        "Gbit/s": 1e9,
        "bps": 1.0,
        "kbps": 1e3,
        "Mbps": 1e6,
        "Gbps": 1e9,
    },
    example="100 Mbps",
)
DECIBEL = Quantity(name="a level in dB", units={"dB": 1.0}, example="6 dB", signed=True)
SHARE = Quantity(name="a share", units={"%": 1e-2}, example="30 %", bare=True)
QUANTITIES = (
    LENGTH,
    TIME,
    RESISTANCE,
    CAPACITANCE,
    VOLTAGE,
    CURRENT,
    FREQUENCY,
    RATE,
    DECIBEL,
    SHARE,
)

Length = Annotated[float, LENGTH]
Time = Annotated[float, TIME]
Resistance = Annotated[float, RESISTANCE]
Capacitance = Annotated[float, CAPACITANCE]
Voltage = Annotated[float, VOLTAGE]
Current = Annotated[float, CURRENT]
Frequency = Annotated[float, FREQUENCY]
Rate = Annotated[float, RATE]
Decibel = Annotated[float, DECIBEL]
Share = Annotated[float, SHARE]


@dataclass(frozen=True, slots=True)
class VoltageOrShare:
    """A voltage, stated as such or as a share of the swing; exactly one of the two is set."""

    voltage_v: float | None = None
    share: float | None = None

    def volts(self, swing_v: float) -> float:
        """Return the voltage at a swing.

        Parameters
        ----------
        swing_v : float
            High level minus low level. [V]

        Returns
        -------
        float
            The voltage. [V]

        Examples
        --------
        15 % of 3.3 V:

        >>> round(VoltageOrShare.parse("15 %").volts(3.3), 3)
        0.495
        >>> VoltageOrShare.parse("0.3 V").volts(3.3)
        0.3
        """
        return self.voltage_v if self.voltage_v is not None else (self.share or 0.0) * swing_v

    @classmethod
    def parse(cls, value: object) -> "VoltageOrShare":
        """Read "0.3 V", "15 %" or 0.15.

        Parameters
        ----------
        value : str, float or VoltageOrShare
            What a person wrote.

        Returns
        -------
        VoltageOrShare
            Never below zero.

        Raises
        ------
        UnitError
            Neither a voltage nor a share.

        Examples
        --------
        >>> VoltageOrShare.parse("300 mV")
        VoltageOrShare(voltage_v=0.3, share=None)
        """
        if isinstance(value, VoltageOrShare):
            return value
        try:
            return cls(share=SHARE.parse(value))
        except UnitError:
            return cls(voltage_v=_allowance(value))

    @classmethod
    def __get_pydantic_core_schema__(
        cls, source: type[Any], handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.no_info_plain_validator_function(
            cls.parse, json_schema_input_schema=core_schema.any_schema()
        )

    @classmethod
    def __get_pydantic_json_schema__(
        cls, schema: core_schema.CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        described = "a voltage or a share of the swing"
        return {
            "anyOf": [VOLTAGE.json_schema()["anyOf"][0], *SHARE.json_schema()["anyOf"]],
            "description": described,
            "examples": ["0.3 V", "15 %"],
        }


def _allowance(value: object) -> float:
    """Read a voltage that is not below zero, with words that name both forms."""
    try:
        voltage_v = VOLTAGE.parse(value)
    except UnitError as error:
        hint = error.hint if "," in str(value) else 'write "0.3 V" or "15 %"'
        raise UnitError(error.message.replace("a voltage", "a voltage or share"), hint) from None
    if voltage_v < 0:
        raise UnitError(f"{value} is below zero", 'write "0.3 V" or "15 %"')
    return voltage_v
