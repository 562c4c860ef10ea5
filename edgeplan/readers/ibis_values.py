"""Numbers of a model file: scale letters, units glued or apart, NA, and what is past belief."""

import math
import re
from collections.abc import Iterable
from typing import NamedTuple

from edgeplan.ibis import Triple
from edgeplan.readers.ibis_lines import Tell

# One scale letter, case-sensitive, without a blank (EIA-656, general syntax rules).
SCALES = {"T": 12, "G": 9, "M": 6, "k": 3, "m": -3, "u": -6, "n": -9, "p": -12, "f": -15}
_NUMBER = re.compile(r"([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)([^\W\d_]*%?)", re.ASCII)
_UNIT = re.compile(r"([TGMkmunpf]?)(?:V|A|s|S|sec|F|H|[Oo]hms?|OHMS?|Hz)", re.ASCII)
_WRONG_CASE = re.compile(r"[KNPU][A-Za-z]*", re.ASCII)
_COMMA = re.compile(r"[+-]?\d+,\d+\S*", re.ASCII)

LONGEST_EXPONENT = 6  # letters; 1e+0012 is the longest anybody writes
# Beyond these a scale letter was left out or has the wrong case; no buffer has such values.
LARGEST = {"V": 100.0, "A": 100.0, "F": 1e-9, "H": 1e-5, "s": 1e-3, "ohm": 1e9}
NAMES = {
    "V": "a voltage",
    "A": "a current",
    "F": "a capacitance",
    "H": "an inductance",
    "s": "a time",
    "ohm": "a resistance",
}


class BadValueError(ValueError):
    """A word that is no number of its quantity; message and hint for the person."""

    def __init__(self, message: str, hint: str = "") -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint


class Named(NamedTuple):
    """A subparameter in small letters and the words of its value."""

    name: str
    words: list[str]


def number(word: str, unit: str) -> float:
    """Return the number a word holds; NaN for ``NA``.

    Parameters
    ----------
    word : str
        Decimal or with an exponent, then one scale letter at most, then a unit that is ignored.
    unit : {"V", "A", "F", "H", "s", "ohm"}
        What it has to be, for the check of plausibility.

    Returns
    -------
    float
        In the unit without a prefix.

    Raises
    ------
    BadValueError
        No number, a decimal comma, or far beyond what a buffer can have.

    Examples
    --------
    >>> number("0.058k", "ohm"), number("1.2nS", "s"), number("3.3V", "V"), number("1.0Meg", "ohm")
    (58.0, 1.2e-09, 3.3, 1000000.0)
    """
    if word.upper() == "NA":
        return math.nan
    value = _plain(word) if word[-1:].isdigit() else _with_letters(word)
    if not abs(value) <= LARGEST[unit]:
        hint = "scale letters are case-sensitive: m is 1e-3, M is 1e6, p, n, u, k stand small"
        raise BadValueError(f"{word[:40]!r} is too large for {NAMES[unit]}", hint)
    return value


def _plain(word: str) -> float:
    """Return a number without letters behind it; most words of a file are that."""
    try:
        if word.isascii() and "_" not in word:
            return float(word)
    except ValueError:
        pass
    return _with_letters(word)


def _with_letters(word: str) -> float:
    """Return a number with a scale letter or a unit, or say why it is none."""
    found = _NUMBER.fullmatch(word)
    if found:
        return _scaled(found[1], SCALES.get(found[2][:1], 0))
    if _COMMA.fullmatch(word):
        raise BadValueError(f"{word!r} has a decimal comma", f"write {word.replace(',', '.')}")
    raise BadValueError(f"{word[:40]!r} is not a number")


def _scaled(digits: str, power: int) -> float:
    """Shift the exponent in the text, so that 1.2n is the float 1.2e-9 and not its neighbour."""
    mantissa, _, exponent = digits.lower().partition("e")
    if len(exponent) > LONGEST_EXPONENT:
        raise BadValueError(f"{digits[:40]!r} is not a number a buffer can have")
    return float(f"{mantissa}e{int(exponent or 0) + power}")


def joined(words: list[str]) -> list[str]:
    """Glue units that stand apart from their number.

    Examples
    --------
    >>> joined(["50", "ohms"]), joined(["2", "mA", "3"])
    (['50ohms'], ['2mA', '3'])
    """
    found: list[str] = []
    if not any(word[0].isalpha() for word in words):
        return words
    for word in words:
        bare = found and _NUMBER.fullmatch(found[-1])
        if bare and not bare[2] and _UNIT.fullmatch(word):
            found[-1] += word
        else:
            found.append(word)
    return found


def named(text: str) -> Named:
    """Split ``Name = value``, ``Name value`` or ``Name=value``.

    Examples
    --------
    >>> named("R_load=500")
    Named(name='r_load', words=['500'])
    >>> named("Vmeas = 1.5V at the pad")
    Named(name='vmeas', words=['1.5V', 'at', 'the', 'pad'])
    """
    words = text.replace("=", " ").split()
    return Named(words[0].lower(), joined(words[1:])) if words else Named("", [])


def one(words: list[str], unit: str, row: int, tell: Tell) -> float:
    """Return the first word as a number; words behind it are remarks.

    Raises
    ------
    BadValueError
        Nothing stands there, or it is no number.
    """
    if not words:
        raise BadValueError("the value is missing")
    _tell_case(words[:1], row, tell)
    return number(words[0], unit)


def triple(words: list[str], unit: str, row: int, tell: Tell) -> Triple:
    """Return up to three columns; the first word that is no number ends them.

    Raises
    ------
    BadValueError
        There is no typical value.
    """
    typ = one(words, unit, row, tell)
    if math.isnan(typ):
        raise BadValueError("the typical value is NA", "only minimum and maximum may be missing")
    rest = []
    for word in words[1:3]:
        if not (_NUMBER.match(word) or word.upper() == "NA" or _COMMA.match(word)):
            break
        _tell_case([word], row, tell)
        rest.append(number(word, unit))
    return Triple(typ, *rest)


def numerical(value: Triple) -> Triple:
    """Order minimum and maximum as numbers, as C_comp has them.

    Examples
    --------
    >>> numerical(Triple(5e-12, 6e-12, 4e-12))
    Triple(typ=5e-12, min=4e-12, max=6e-12)
    """
    if value.min > value.max:
        return Triple(value.typ, value.max, value.min)
    return value


def _tell_case(words: Iterable[str], row: int, tell: Tell) -> None:
    """Note a large letter where a small one would be a scale."""
    for word in words:
        found = _NUMBER.fullmatch(word)
        if found and _WRONG_CASE.fullmatch(found[2]):
            hint = f"scale letters are case-sensitive: write {found[2][0].lower()} if it is one"
            tell(row, f"{word!r} was read as {found[1]}", hint)
