"""Scattering parameters of a two-port in the Touchstone format, versions 1 and 2, with places."""

import cmath
import re
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from math import radians
from typing import NamedTuple

from edgeplan.errors import Problem
from edgeplan.readers import tables
from edgeplan.readers.files import LINE_END, Where
from edgeplan.units import UnitError

UNITS_HZ = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
PARAMETERS = ("s", "y", "z", "h", "g")
FORMATS = ("db", "ma", "ri")
MATRICES = ("full", "lower", "upper")
REQUIRED = {
    "number of ports": ("2",),
    "two-port data order": ("21_12", "12_21"),
    "network data": ("",),
}
NOISE_CELLS = 5
LARGEST = 1e6  # of a cell of data: a decibel, an angle or a part of a parameter
VERSIONS = ("2.0", "2.1")
_WORD = re.compile(r"\S+")


class Word(NamedTuple):
    """A word of a line and its place; rows and columns count from 1."""

    text: str
    row: int
    column: int


class Point(NamedTuple):
    """Reflection at the first port and transmission to the second, at one frequency. [Hz]"""

    frequency_hz: float
    s11: complex
    s21: complex
    row: int


@dataclass(frozen=True, slots=True)
class TwoPort:
    """Points by rising frequency and the reference impedances of both ports. [ohm]"""

    points: tuple[Point, ...]
    reference_ohm: tuple[float, float]

    def voltage_ratio(self) -> list[complex]:
        r"""Voltage at the second port over that at the first, the second matched.

        Equation: :math:`S_{21}/(1 + S_{11})\,\sqrt{R_2/R_1}`.

        >>> TwoPort((Point(1e9, 0j, 0.2 + 0j, 1),), (50.0, 50.0)).voltage_ratio()
        [(0.2+0j)]
        """
        scale = (self.reference_ohm[1] / self.reference_ohm[0]) ** 0.5
        return [scale * p.s21 / (1 + p.s11) if p.s11 != -1 else complex("nan") for p in self.points]


def read(text: str, file: str, problems: list[Problem]) -> TwoPort | None:
    r"""Read a two-port.

    Parameters
    ----------
    text : str
        The file's text.
    file : str
        Its name, for problems.
    problems : list of Problem
        Grows by everything that is wrong, at its word.

    Returns
    -------
    TwoPort or None
        None if anything is wrong. Noise data are left out.

    Notes
    -----
    Version 1 files hold S21 before S12 whatever their comments say; version 2 files say
    it. A first row at 0 Hz is kept; missing ``[End]`` is forgiven.

    Examples
    --------
    >>> two_port = read("# MHz S RI R 50\n100 0 0 0.1 0 0.1 0 0 0\n", "path.s2p", [])
    >>> two_port.points[0].frequency_hz, two_port.points[0].s21
    (100000000.0, (0.1+0j))

    References
    ----------
    .. [1] IBIS Open Forum, "Touchstone File Format Specification", versions 1.1 and 2.0.
    """
    before = len(problems)
    reader = _Reader(file, problems)
    for line in _lines(text):
        reader.take(line)
    rows = reader.rows()
    reader.check(len(rows))
    if len(problems) > before:
        return None
    points = tuple(point for row in rows if (point := reader.point(row)))
    references = (*reader.references, *reader.references)[:2]
    return TwoPort(points, (references[0], references[1])) if len(problems) == before else None


def _lines(text: str) -> Iterator[list[Word]]:
    """Words of every line that holds more than a comment; a keyword in brackets is one word."""
    for number, line in enumerate(LINE_END.split(text), start=1):
        found = _WORD.finditer(line.partition("!")[0])
        words = [Word(match[0], number, match.start() + 1) for match in found]
        if words:
            yield words


class _Reader:
    """Takes the lines of a file one by one; tells what is wrong with them."""

    def __init__(self, file: str, problems: list[Problem]) -> None:
        self.file = file
        self.problems = problems
        self.unit_hz, self.form = UNITS_HZ["ghz"], "ma"
        self.references: list[float] = []
        self.keywords: dict[str, Word] = {}
        self.data: list[list[Word]] = []
        self.has_options = self.skips = self.is_over = False

    def take(self, words: list[Word]) -> None:
        """Take one line."""
        first = words[0].text
        if self.is_over:
            return
        if first.startswith("["):
            self._take_keyword(words)
        elif self.skips:
            return
        elif first.startswith("#"):
            self._take_options(words)
        elif "version" in self.keywords and "network data" not in self.keywords:
            self.references += self._ohms(words)
        else:
            self.data.append(words)

    def rows(self) -> list[list[Word]]:
        """Words of each frequency; noise data of version 1 are left out."""
        size = 1 + 2 * (4 if self._matrix() == "full" else 3)
        lines = self.data[: _noise_from(self.data)]
        if "version" in self.keywords:
            words = [word for line in lines for word in line]
            lines = [words[start : start + size] for start in range(0, len(words), size)]
        for line in lines:
            if len(line) != size:
                message = f"{len(line)} numbers for a frequency, {size} are expected"
                self._tell(line[0], message, "f S11 S21 S12 S22, each a pair, on one line")
        return lines

    def check(self, count: int) -> None:
        """Tell what is missing as a whole."""
        if not self.has_options:
            hint = "the line before the data reads like # MHz S DB R 50"
            self._tell(Word("", 1, 1), "there is no option line", hint)
        if count == 0:
            self._tell(Word("", 1, 1), "there are no data")
        if "version" in self.keywords:
            self._check_keywords(count)

    def point(self, words: list[Word]) -> Point | None:
        """Return the numbers of one frequency; None after telling which is none."""
        values = []
        for index, word in enumerate(words):
            try:
                values.append(tables.number(word.text))
            except UnitError as error:
                self._tell(word, error.message, error.hint)
            else:
                if index and abs(values[-1]) > LARGEST:
                    values.pop()
                    self._tell(word, f"{word.text} is no part of a measurement")
        if len(values) != len(words):
            return None
        numbers = zip(values[1::2], values[2::2], strict=True)
        pairs = [_complex(a, b, self.form) for a, b in numbers]
        order = self.keywords.get("two-port data order")
        swapped = order is not None and order.text == "12_21" and self._matrix() == "full"
        return Point(values[0] * self.unit_hz, pairs[0], pairs[2 if swapped else 1], words[0].row)

    def _tell(self, word: Word, message: str, hint: str = "") -> None:
        """Note a problem at a word."""
        self.problems.append(Where(self.file, word.row, word.column).problem(message, hint))

    def _take_keyword(self, words: list[Word]) -> None:
        """Note a keyword of version 2 and what stands behind it."""
        inside, _, rest = " ".join(word.text for word in words)[1:].partition("]")
        name, value = inside.strip().lower(), Word(rest.strip().lower(), *words[0][1:])
        self.is_over = name in ("noise data", "end")
        self.skips = name == "begin information" or (self.skips and name != "end information")
        self.keywords[name] = value
        if name == "version" and value.text not in VERSIONS:
            self._tell(value, f"version {value.text!r} is not known", "write 2.0")
        elif name == "reference":
            self.references = self._ohms([Word(text, *value[1:]) for text in value.text.split()])
        elif name == "mixed-mode order":
            self._tell(value, "mixed modes are not read", "save it with single ports")

    def _take_options(self, words: list[Word]) -> None:
        """Read the first option line; later ones are ignored, as the format says."""
        if self.has_options:
            return
        self.has_options = True
        attached = words[0]._replace(text=words[0].text[1:], column=words[0].column + 1)
        cells = iter([attached, *words[1:]] if attached.text else words[1:])
        for word in cells:
            small = word.text.lower()
            if small in UNITS_HZ:
                self.unit_hz = UNITS_HZ[small]
            elif small in FORMATS:
                self.form = small
            elif small in PARAMETERS[1:]:
                hint = "save the measurement as S parameters"
                self._tell(word, f"{word.text} parameters are not read", hint)
            elif small == "r":
                self.references += self._ohms([next(cells, word)])
            elif small != PARAMETERS[0]:
                self._tell(word, f"{word.text!r} is no option", "write like # MHz S DB R 50")
        self.references = self.references or [50.0]

    def _ohms(self, words: list[Word]) -> list[float]:
        """Read reference impedances."""
        for word in words:
            if (_value(word) or 0.0) <= 0:
                self._tell(word, f"{word.text!r} is no impedance")
        return [_value(word) or 0.0 for word in words]

    def _matrix(self) -> str:
        """Matrix format, full if nothing is said."""
        stated = self.keywords.get("matrix format")
        return stated.text if stated else "full"

    def _check_keywords(self, count: int) -> None:
        """Tell what a version 2 file must say, and what it says wrong."""
        for name, allowed in REQUIRED.items():
            found = self.keywords.get(name, Word("", 1, 1))
            if name not in self.keywords:
                self._tell(found, f"[{name.title()}] is missing")
            elif found.text not in allowed:
                self._tell(found, f"{found.text!r} is none of {', '.join(allowed)}")
        stated = self.keywords.get("number of frequencies", Word(str(count), 1, 1))
        if stated.text != str(count):
            self._tell(stated, f"{stated.text} frequencies are stated, {count} are there")
        if self._matrix() not in MATRICES:
            self._tell(self.keywords["matrix format"], f"{self._matrix()!r} is no matrix format")
        if len(self.references) not in (1, 2):
            found = self.keywords.get("reference", Word("", 1, 1))
            self._tell(found, "a two-port has two reference impedances")


def _noise_from(lines: list[list[Word]]) -> int:
    """Index of the first line of noise data: five numbers at a frequency below the one before."""
    for index, (before, line) in enumerate(pairwise(lines), start=1):
        low, high = _value(line[0]), _value(before[0])
        if len(line) == NOISE_CELLS and low is not None and high is not None and low < high:
            return index
    return len(lines)


def _value(word: Word) -> float | None:
    """Return the number a word is, or None."""
    try:
        return tables.number(word.text)
    except UnitError:
        return None


def _complex(first: float, second: float, form: str) -> complex:
    """Return a pair of numbers as one complex number."""
    if form == "ri":
        return complex(first, second)
    return cmath.rect(10 ** (first / 20) if form == "db" else first, radians(second))
