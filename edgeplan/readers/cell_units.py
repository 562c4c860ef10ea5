"""A unit written into a cell whose header states one: what to write instead."""

import re
import unicodedata
from collections.abc import Mapping
from decimal import Decimal

from edgeplan.units import QUANTITIES, Quantity

_WITH_UNIT = re.compile(
    r"([+-]?(?:\d+[.,]?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*([^\W\d_][^\d\s]*)", re.ASCII
)
WIDEST_RATIO = Decimal("1e6")  # millifarad in a picofarad column is a slip, not a conversion


def unit_problem(
    text: str, name: str, units: Mapping[str, str], header: str, *, decimal_comma: bool = False
) -> tuple[str, str] | None:
    """Say what to write for a number with a unit of its own.

    Parameters
    ----------
    text : str
        The cell.
    name : str
        The column without its unit, such as ``length``.
    units : mapping
        Units the column's header may end in, with their factors to SI.
    header : str
        The one it ends in.
    decimal_comma : bool
        Whether the table writes 12,5.

    Returns
    -------
    tuple of str or None
        Message and hint; None if the cell is no number with letters after it.

    Examples
    --------
    One inch is 25.4 mm:

    >>> unit_problem("1.8 inch", "length", {"mm": "1e-3", "inch": "25.4e-3"}, "mm")[1]
    'write 45.72 (mm), or name the column length_inch'
    >>> unit_problem("40 mF", "bus_capacitance", {"pf": "1e-12"}, "pf")[1]
    'the header holds pF: write the number of pF'
    """
    plain = unicodedata.normalize("NFKC", text)  # one micro sign
    found = _WITH_UNIT.fullmatch(plain.replace("\N{GREEK SMALL LETTER MU}", "u"))
    if found is None or ("," in found[1] and not decimal_comma):
        return None
    number, unit = found[1], found[2]
    message = f"{text!r} has a unit"
    quantity = _quantity(units)
    shown = _spelled(quantity, header)
    if unit.casefold() == header:
        return message, f"write {number}: the header holds the unit"
    ratio = Decimal(_factor(quantity, unit)) / Decimal(units[header])
    if not 1 / WIDEST_RATIO <= ratio <= WIDEST_RATIO:
        return message, f"the header holds {shown}: write the number of {shown}"
    value = f"{(Decimal(number.replace(',', '.')) * ratio).normalize():f}"
    value = value.replace(".", ",") if decimal_comma else value
    other = f", or name the column {name}_{unit.lower()}" if unit.lower() in units else ""
    return message, f"write {value} ({shown}){other}"


def _quantity(units: Mapping[str, str]) -> Quantity:
    """Return the quantity that knows all units of a column."""
    return next(
        quantity
        for quantity in QUANTITIES
        if set(units) <= {known.casefold() for known in quantity.units}
    )


def _spelled(quantity: Quantity, header: str) -> str:
    """Return the unit of a header as people write it: pF for pf."""
    return next(known for known in quantity.units if known.casefold() == header)


def _factor(quantity: Quantity, unit: str) -> str:
    """Return the factor of a unit to SI in decimal; zero if it is none of this quantity."""
    same = [known for known in quantity.units if known.casefold() == unit.casefold()]
    known = unit if unit in quantity.units else same[0] if len(same) == 1 else ""
    return repr(quantity.units[known]) if known else "0"
