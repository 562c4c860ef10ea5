"""Numbers and names as a person reads them: units, spans, and names that cannot act."""

import math
import re
import textwrap
import unicodedata

from edgeplan.results import Check, Corners, Window, WindowEnd

UNKNOWN = "?"
SHARE = ("", "1")  # units of a number relative to something
_PREFIXES = (
    (1e9, "G"),
    (1e6, "M"),
    (1e3, "k"),
    (1.0, ""),
    (1e-3, "m"),
    (1e-6, "µ"),
    (1e-9, "n"),
    (1e-12, "p"),
)
_UNITS = {"ohm": "Ω", "Ohm": "Ω"}
# Controls, format and direction marks, surrogates, private and unassigned codes, line separators.
_NUMBER_AND_UNIT = re.compile(r"(?<=\d) (?=(?:[numpkMG]?(?:s|V|Ω|Hz|m|F|A)|µ[smA]|dB|%)(?!\w))")
_ACTIVE = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})


def inert(text: str) -> str:
    r"""Return a text in which no character can act on a terminal or turn the reading order.

    Parameters
    ----------
    text : str
        A name or a sentence from outside.

    Returns
    -------
    str
        The same text, each acting character written as its escape.

    Examples
    --------
    >>> print(inert("A\x1b[31m" + chr(0x202e) + "B"))
    A\x1b[31m\u202eB
    >>> print(inert("µ-Ω 数"))
    µ-Ω 数
    """
    if text.isascii() and text.isprintable():
        return text
    return "".join(_escaped(letter) for letter in text)


def _escaped(letter: str) -> str:
    """Return the letter, or its escape when it could act."""
    if unicodedata.category(letter) not in _ACTIVE:
        return letter
    code = ord(letter)
    if code < 0x100:
        return {9: r"\t", 10: r"\n", 13: r"\r"}.get(code, f"\\x{code:02x}")
    return f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def display_width(text: str) -> int:
    """Return the columns a text takes: wide letters two, combining marks none.

    Examples
    --------
    >>> display_width("33 Ω"), display_width("数_0")
    (4, 4)
    """
    if text.isascii():
        return len(text)
    return sum(_letter_width(letter) for letter in text)


def _letter_width(letter: str) -> int:
    """Columns of one letter."""
    if unicodedata.category(letter) in {"Mn", "Me"}:
        return 0
    return 2 if unicodedata.east_asian_width(letter) in "WF" else 1


def cut_middle(text: str, width: int) -> str:
    """Shorten a long name in its middle: buses differ at the end, sheets at the start.

    Parameters
    ----------
    text : str
        The name.
    width : int
        Columns it may take, 3 or more. [-]

    Returns
    -------
    str
        The name itself, or its two ends around an ellipsis.

    Examples
    --------
    >>> cut_middle("CPU/SDRAM/SDR_DQ10", 12)
    'CPU/S…R_DQ10'
    """
    if display_width(text) <= width:
        return text
    head, tail = (width - 1) // 2, width // 2
    start, end = text[:head], text[-tail:]
    while display_width(start) > head:
        start = start[:-1]
    while display_width(end) > tail:
        end = end[1:]
    return f"{start}…{end}"


def wrap(text: str, width: int, indent: str = "") -> list[str]:
    """Break a sentence into lines; a number keeps its unit, a word too long is broken.

    Parameters
    ----------
    text : str
        The sentence; letters that could act are escaped.
    width : int
        Columns of a line. [-]
    indent : str
        What the second and later lines start with.

    Returns
    -------
    list of str
        One entry or more.

    Examples
    --------
    >>> wrap("fit 33 Ω at R17", 8)
    ['fit 33 Ω', 'at R17']
    """
    glued = _NUMBER_AND_UNIT.sub("\u00a0", inert(text))
    lines = textwrap.wrap(
        glued, max(width, len(indent) + 4), subsequent_indent=indent, break_on_hyphens=False
    )
    return [line.replace("\u00a0", " ") for line in lines] or [""]


def engineering(value: float | None, unit: str, *, signed: bool = False) -> str:
    """Write a number with three figures and its unit.

    Parameters
    ----------
    value : float or None
        In the unit named, SI. [unit]
    unit : str
        ``s``, ``V``, ``Hz``, ``ohm`` and the like take a prefix; decibels one decimal; an empty
        unit or ``1`` is a share and is written in percent.
    signed : bool
        Write a plus as well.

    Returns
    -------
    str
        Number and unit; ``?`` for no number.

    Examples
    --------
    >>> engineering(1.8e-9, "s", signed=True), engineering(2e8, "Hz"), engineering(33, "ohm")
    ('+1.80 ns', '200 MHz', '33 Ω')
    >>> engineering(-11.1, "dB"), engineering(0.12, ""), engineering(None, "s")
    ('-11.1 dB', '12 %', '?')
    """
    if value is None or not math.isfinite(value):
        return UNKNOWN
    sign = "+" if signed and value >= 0 else ""
    if unit.startswith("dB"):
        return f"{sign}{value + 0.0:.1f} {unit}"
    if unit in SHARE:
        return f"{sign}{_short(value * 100, 3)} %"
    factor, prefix = _prefix(value)
    figures = 4 if unit == "Hz" else 3
    number = _figures(value / factor) if unit == "s" else _short(value / factor, figures)
    return f"{sign}{number} {prefix}{_UNITS.get(unit, unit)}"


def _prefix(value: float) -> tuple[float, str]:
    """Return the prefix that leaves one to three digits before the point."""
    if value == 0:
        return 1.0, ""
    size = abs(value) * 1.0005  # 999.9 rounds to the next prefix
    return next((entry for entry in _PREFIXES if size >= entry[0]), _PREFIXES[-1])


def _figures(number: float) -> str:
    """Three figures with their zeros, so that columns compare: 0.50, 4.52, 12.3, 720."""
    size = abs(number)
    decimals = 3 if 0 < size < 0.0995 else 2 if size < 9.995 else 1 if size < 99.95 else 0
    return f"{number:.{decimals}f}"


def _short(number: float, figures: int) -> str:
    """Write some figures at most, without zeros at the end: 33, 66.67, 4.7."""
    return f"{float(f'{number:.{figures}g}'):.10g}"


def nanoseconds(duration_s: float | None) -> str:
    """Write a duration in nanoseconds without its unit, for columns that name it.

    Examples
    --------
    >>> nanoseconds(0.5e-9), nanoseconds(0.72e-6), nanoseconds(None)
    ('0.50', '720', '?')
    """
    if duration_s is None or not math.isfinite(duration_s):
        return UNKNOWN
    return _figures(duration_s * 1e9)


def edge_span(edge_s: Corners) -> str:
    """Write an edge from its fast to its slow corner, in nanoseconds.

    Examples
    --------
    >>> edge_span(Corners(slow=1e-9, typical=0.7e-9, fast=0.5e-9)), edge_span(Corners())
    ('0.50–1.00', '?')
    """
    fast, slow = nanoseconds(edge_s.fast), nanoseconds(edge_s.slow)
    return fast if fast == slow else f"{fast}–{slow}"


def window_end(end: WindowEnd) -> str:
    """Write one end of a window in nanoseconds: an edge, ``any``, ``none``; ``?`` if undecided.

    Examples
    --------
    >>> window_end(WindowEnd(edge_s=None, why_none="fundamental over budget"))
    'none'
    >>> window_end(WindowEnd(edge_s=0.0, any=True)), window_end(WindowEnd(edge_s=None))
    ('any', '?')
    """
    if end.any:
        return "any"
    if end.edge_s is None:
        return "none" if end.why_none else UNKNOWN
    return nanoseconds(end.edge_s)


def window_span(window: Window) -> str:
    """Write a window from its fastest acceptable to its slowest allowed edge, in nanoseconds.

    A window whose fastest acceptable edge is the longer one is closed and shows ``>``.

    Examples
    --------
    >>> end = WindowEnd
    >>> window_span(Window(fastest_acceptable=end(edge_s=1.2e-9), slowest_allowed=end(edge_s=4e-9)))
    '1.20–4.00'
    >>> window_span(Window(fastest_acceptable=end(edge_s=4e-9), slowest_allowed=end(edge_s=2e-9)))
    '4.00 > 2.00'
    """
    fast, slow = window_end(window.fastest_acceptable), window_end(window.slowest_allowed)
    if fast == slow and fast in ("any", "none", UNKNOWN):
        return fast
    return f"{fast} > {slow}" if closed(window) else f"{fast}–{slow}"


def closed(window: Window) -> bool:
    """Tell whether both ends are known and no edge lies between them."""
    fast, slow = window.fastest_acceptable.edge_s, window.slowest_allowed.edge_s
    return fast is not None and slow is not None and fast > slow


def margin(check: Check) -> str:
    """Write a check's margin in its own unit with the name of the check.

    Examples
    --------
    >>> from edgeplan.results import Condition
    >>> margin(Check(check="setup", candidate=0, condition=Condition(), value=8.1e-9,
    ...     limit=9.9e-9, margin=1.8e-9, unit="s", margin_share=0.18, decided=True, wants="faster"))
    '+1.80 ns setup'
    """
    return f"{engineering(check.margin, check.unit, signed=True)} {check.check}"


def frequency_and_order(check: Check) -> str:
    """Write where an emission check was worst: frequency and harmonic; empty for other checks."""
    if check.frequency_hz is None:
        return ""
    order = "" if check.order is None else f", harmonic {check.order}"
    return f"{engineering(check.frequency_hz, 'Hz')}{order}"


def listed(names: list[str], most: int | None = None) -> str:
    """Join names; beyond ``most`` only their number is told.

    Examples
    --------
    >>> listed(["A", "B", "C", "D"], 2)
    'A, B and 2 more'
    """
    if most is None or len(names) <= most + 1:
        return ", ".join(names)
    return f"{', '.join(names[:most])} and {len(names) - most} more"
