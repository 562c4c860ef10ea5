"""Preferred resistor values of IEC 60063, E3 to E192."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]

SERIES = {"E3": 3, "E6": 6, "E12": 12, "E24": 24, "E48": 48, "E96": 96, "E192": 192}

# The printed tables keep values older than the rule 10^(k/n): (rounded rule, printed).
EXCEPTIONS = {
    "E24": {26: 27, 29: 30, 32: 33, 35: 36, 38: 39, 42: 43, 46: 47, 83: 82},
    "E192": {919: 920},
}


def decade(series: str) -> Array:
    """One decade of a series as whole numbers: 10 to 91, or 100 to 988 from E48 on.

    Parameters
    ----------
    series : str
        One of E3, E6, E12, E24, E48, E96, E192.

    Returns
    -------
    numpy.ndarray
        Values in ascending order, as many as the series' number. [-]

    Raises
    ------
    ValueError
        For an unknown series.

    Notes
    -----
    E3 to E12 are every eighth, fourth and second value of E24; E48 and E96 those of
    E192. E24 is not a part of E96.

    Examples
    --------
    >>> decade("E6").tolist()
    [10, 15, 22, 33, 47, 68]

    References
    ----------
    .. [1] IEC 60063:2015, "Preferred number series for resistors and capacitors",
       tables 1 and 2.
    """
    if series not in SERIES:
        raise ValueError(f"{series!r} is not a series of preferred values; it is one of {_names()}")
    count = SERIES[series]
    parent, digits = ("E24", 1) if count <= 24 else ("E192", 2)
    full = SERIES[parent]
    rule = np.rint(10.0 ** (digits + np.arange(full) / full)).astype(int)
    for rounded, printed in EXCEPTIONS[parent].items():
        rule[rule == rounded] = printed
    return rule[:: full // count]


def preferred_values(series: str, low_ohm: float, high_ohm: float) -> Array:
    """Every preferred value from low to high, both included.

    Parameters
    ----------
    series : str
        One of E3, E6, E12, E24, E48, E96, E192.
    low_ohm, high_ohm : float
        Bounds, positive. [ohm]

    Returns
    -------
    numpy.ndarray
        Values in ascending order; empty where none lies between. [ohm]

    Raises
    ------
    ValueError
        For an unknown series, a bound that is not positive and finite.

    Examples
    --------
    >>> preferred_values("E12", 10, 47).tolist()
    [10.0, 12.0, 15.0, 18.0, 22.0, 27.0, 33.0, 39.0, 47.0]
    """
    if not (0 < low_ohm < np.inf and 0 < high_ohm < np.inf):
        raise ValueError(f"bounds of preferred values are positive: {low_ohm!r} to {high_ohm!r}")
    whole = decade(series)
    lowest = int(np.floor(np.log10(low_ohm))) - 1
    highest = int(np.floor(np.log10(high_ohm))) + 1
    powers = np.arange(lowest, highest + 1) - (1 if whole[0] == 10 else 2)
    values = np.concatenate([_scaled(whole, int(power)) for power in powers])
    rounding = 1e-9  # a bound computed as 4.7 * 10 must not lose 47
    keep = (values >= low_ohm * (1 - rounding)) & (values <= high_ohm * (1 + rounding))
    return values[keep]


def nearest(series: str, resistance_ohm: float) -> float:
    """Preferred value nearest in ratio; of two at equal ratio, the lower.

    Parameters
    ----------
    series : str
        One of E3, E6, E12, E24, E48, E96, E192.
    resistance_ohm : float
        Wanted value, positive. [ohm]

    Returns
    -------
    float
        Preferred value. [ohm]

    Raises
    ------
    ValueError
        For an unknown series, a value that is not positive and finite.

    Examples
    --------
    >>> nearest("E24", 34.0), nearest("E96", 34.0)
    (33.0, 34.0)
    """
    if not 0 < resistance_ohm < np.inf:
        raise ValueError(f"a preferred value needs a positive resistance, not {resistance_ohm!r}")
    values = preferred_values(series, resistance_ohm / 10, resistance_ohm * 10)
    return float(values[np.argmin(np.abs(np.log(values / resistance_ohm)))])


def _scaled(whole: Array, power: int) -> Array:
    """Whole numbers times a power of ten; division keeps 4.7 the nearest double to 4.7."""
    return whole / 10.0**-power if power < 0 else whole * 10.0**power


def _names() -> str:
    """Series as a list for a message."""
    return ", ".join(SERIES)
