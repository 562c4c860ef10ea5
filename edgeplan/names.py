"""Names of nets, parts and settings: their order, their wildcards and the nearest known one."""

import difflib
import re
from collections.abc import Iterable
from functools import lru_cache

_DIGITS = re.compile(r"(\d+)")


def natural_key(name: str) -> tuple[tuple[int, int, str], ...]:
    """Return a sort key that puts D2 before D10.

    Parameters
    ----------
    name : str
        Any name.

    Returns
    -------
    tuple
        Compares with the key of every other name; runs of digits count as numbers.

    Examples
    --------
    >>> sorted(["D10", "D2", "CLK"], key=natural_key)
    ['CLK', 'D2', 'D10']
    """
    parts = _DIGITS.split(name)
    numbers = [(0, int(part), part) if part.isdigit() else (1, 0, part) for part in parts if part]
    return (*numbers, (-1, 0, name))


@lru_cache(maxsize=1024)
def _pattern(pattern: str) -> re.Pattern[str]:
    """Compile a pattern in which only * and ? are special: nets are named D[3] too."""
    text = re.escape(pattern).replace(r"\*", ".*").replace(r"\?", ".")
    return re.compile(text, re.DOTALL)


def matches(pattern: str, name: str) -> bool:
    """Tell whether a name fits a pattern with ``*`` (any run) and ``?`` (any one letter).

    Parameters
    ----------
    pattern : str
        Brackets are plain letters here.
    name : str
        The whole name has to fit; case counts.

    Returns
    -------
    bool
        True if it fits.

    Examples
    --------
    >>> matches("DISP_*", "DISP_CLK"), matches("D[?]", "D[3]"), matches("D*", "ID0")
    (True, True, False)
    """
    return _pattern(pattern).fullmatch(name) is not None


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Return the known name that looks most like this one, if any does.

    Parameters
    ----------
    name : str
        A name nobody knows.
    known : iterable of str
        Names that exist.

    Returns
    -------
    str or None
        Equal but for case first, then the closest by ``difflib``.

    Examples
    --------
    >>> nearest("sdr_a", ["rmii", "SDR_A"])
    'SDR_A'
    >>> nearest("xyz", ["rmii"]) is None
    True
    """
    by_case = {other.casefold(): other for other in known}
    close = difflib.get_close_matches(name.casefold(), by_case, n=1, cutoff=0.6)
    return by_case[close[0]] if close else None


def instead(name: str, known: Iterable[str]) -> str:
    """Return the hint for a name nobody knows: the nearest one, or those there are.

    Examples
    --------
    >>> instead("D3", ["D3F", "D4F"])
    'did you mean "D3F"?'
    >>> instead("xyz", ["b", "a"])
    'known here: a, b'
    >>> instead("xyz", [])
    'none is described yet'
    """
    names = sorted(set(known), key=natural_key)
    if near := nearest(name, names):
        return f'did you mean "{near}"?'
    if not names:
        return "none is described yet"
    more = f" and {len(names) - 12} more" if len(names) > 12 else ""
    return f"known here: {', '.join(names[:12])}{more}"
