"""Tables over frequency inside board.toml: their order and their sign."""

from collections.abc import Iterator
from itertools import pairwise
from typing import Any

from edgeplan.errors import Problem
from edgeplan.readers.references import EACH, found
from edgeplan.readers.toml import Document, Path
from edgeplan.units import DECIBEL, FREQUENCY, Quantity, UnitError

ATTENUATIONS: tuple[Path, ...] = (
    ("cable", EACH, "attenuation"),
    ("board", "enclosure_attenuation"),
)
IMPEDANCES: tuple[Path, ...] = (("cable", EACH, "series_impedance"),)


def problems(document: Document) -> Iterator[Problem]:
    """Yield attenuations that amplify, and rows of a table that do not rise in frequency.

    Parameters
    ----------
    document : Document
        board.toml; what is no quantity at all is told elsewhere.

    Yields
    ------
    Problem
        At the value.
    """
    for pattern in ATTENUATIONS:
        for path, value in found(document.data, pattern):
            yield from _order(document, path, value)
            for place, level in _levels(path, value):
                db = _number(DECIBEL, level)
                if db is not None and db < 0:
                    message = f"an attenuation of {level!r} amplifies"
                    hint = f'write "{-db:g} dB" if it is gain; "0 dB" if nothing is known'
                    yield document.where(place).problem(message, hint)
    for pattern in IMPEDANCES:
        for path, value in found(document.data, pattern):
            yield from _order(document, path, value)


def _levels(path: Path, value: Any) -> Iterator[tuple[Path, Any]]:
    """Yield the single value, or the second one of every row, with its place."""
    if not isinstance(value, list):
        yield path, value
        return
    for index, row in enumerate(value):
        if isinstance(row, list) and len(row) > 1:
            yield (*path, index, 1), row[1]


def _order(document: Document, path: Path, value: Any) -> Iterator[Problem]:
    """Yield a table without rows, and every row that does not lie above the one before."""
    if not isinstance(value, list):
        return
    if not value:
        yield document.where(path).problem("the table has no rows")
    rows = [(i, row[0]) for i, row in enumerate(value) if isinstance(row, list) and row]
    for index, text in rows:
        if _number(FREQUENCY, text) == 0:
            yield document.where((*path, index, 0)).problem("a frequency lies above 0")
    for (_, low), (index, high) in pairwise(rows):
        before, here = _number(FREQUENCY, low), _number(FREQUENCY, high)
        if before is not None and here is not None and here <= before:
            message = f"{high!r} does not lie above {low!r} of the row before"
            where = document.where((*path, index, 0))
            yield where.problem(message, "sort the rows by frequency")


def _number(quantity: Quantity, value: Any) -> float | None:
    """Return a text as a number in SI; None where it is none."""
    try:
        return quantity.parse(value)
    except UnitError:
        return None
