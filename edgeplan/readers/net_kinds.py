"""Nets outside the question, recognised by name: supplies and the halves of pairs."""

import re
from collections.abc import Collection

_SUPPLY = re.compile(
    r"[ADPS]?GND(?:[_A-Z]?\d*)?(?:[_-]\w+)?"
    r"|(?:[AD]?V(?:CC|DD|SS|EE|BAT|IN|BUS|REF|TT|PP|SYS))(?:[_-]?\w+)?"
    r"|[+-]?\d+V\d*(?:[_-]\w+)?"
    r"|[+-]\d+(?:\.\d+)?V(?:[_-]\w+)?"
    r"|[VP]\d+V\d+(?:[_-]\w+)?|V?BAT[+-]?|EARTH|CHASSIS|SHIELD",
    re.IGNORECASE,
)
_HALVES = (("_P", "_N"), ("_DP", "_DM"), ("+", "-"), ("_p", "_n"))


def is_supply(name: str) -> bool:
    """Tell whether a name is that of a supply or a ground.

    Examples
    --------
    >>> [is_supply(name) for name in ("GND", "AGND", "+3V3", "VDD_IO", "VCC1V8", "SDR_DQ0")]
    [True, True, True, True, True, False]
    """
    return _SUPPLY.fullmatch(name.rpartition("/")[2]) is not None


def partner(name: str, nets: Collection[str]) -> str | None:
    """Return the other half of a differential pair, if the net list holds it.

    Examples
    --------
    >>> nets = {"USB_P", "USB_N", "RESET_N"}
    >>> partner("USB_P", nets), partner("USB_N", nets), partner("RESET_N", nets)
    ('USB_N', 'USB_P', None)
    """
    for first, second in _HALVES:
        for mine, other in ((first, second), (second, first)):
            if name.endswith(mine) and (found := name.removesuffix(mine) + other) in nets:
                return found
    return None
