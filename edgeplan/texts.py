"""SI numbers as texts for people: a fixed number of digits, so equal inputs give equal bytes."""

import math

_PREFIXES = {
    -15: "f",
    -12: "p",
    -9: "n",
    -6: "µ",
    -3: "m",
    0: "",
    3: "k",
    6: "M",
    9: "G",
}
UNKNOWN = "unknown"


def engineering(value: float | None, unit: str, *, digits: int = 3, trim: bool = False) -> str:
    """Return a number with the prefix that leaves one to three digits before the point.

    Parameters
    ----------
    value : float or None
        A number in ``unit``; None and NaN read "unknown".
    unit : str
        Unit without a prefix.
    digits : int
        Significant digits. [-]
    trim : bool
        Drop zeros at the end of the fraction.

    Returns
    -------
    str
        Number, blank, prefix and unit.

    Notes
    -----
    From femto to giga; beyond them the number grows or shrinks.

    Examples
    --------
    >>> engineering(1.2e-9, "s"), engineering(999.96e-12, "s"), engineering(4700, "Ω", trim=True)
    ('1.20 ns', '1.00 ns', '4.7 kΩ')
    """
    if value is None or math.isnan(value):
        return UNKNOWN
    if math.isinf(value) or value == 0:
        return f"{value:g} {unit}".replace("-0 ", "0 ")
    # the exponent is read after rounding: 999.96 ps are 1.00 ns, not 1000 ps
    rounded, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    power = min(max(3 * (int(exponent) // 3), min(_PREFIXES)), max(_PREFIXES))
    left = int(exponent) - power
    number = f"{float(rounded) * 10.0**left:.{max(digits - 1 - left, 0)}f}"
    if trim and "." in number:
        number = number.rstrip("0").rstrip(".")
    return f"{number} {_PREFIXES[power]}{unit}"


def text_time_s(time_s: float | None) -> str:
    """Return a time with three digits.

    Examples
    --------
    >>> text_time_s(1.2e-9), text_time_s(0.75e-9), text_time_s(None)
    ('1.20 ns', '750 ps', 'unknown')
    """
    return engineering(time_s, "s")


def text_resistance_ohm(resistance_ohm: float | None) -> str:
    """Return a resistance as it is marked in a parts list.

    Examples
    --------
    >>> text_resistance_ohm(33.0), text_resistance_ohm(4.7e3), text_resistance_ohm(0.0)
    ('33 Ω', '4.7 kΩ', '0 Ω')
    """
    return engineering(resistance_ohm, "Ω", trim=True)


def text_frequency_hz(frequency_hz: float | None) -> str:
    """Return a frequency with up to four digits.

    Examples
    --------
    >>> text_frequency_hz(100e6), text_frequency_hz(12.288e6), text_frequency_hz(20e3)
    ('100 MHz', '12.29 MHz', '20 kHz')
    """
    return engineering(frequency_hz, "Hz", digits=4, trim=True)


def text_rate_bps(rate_bps: float | None) -> str:
    """Return a bit rate with up to four digits.

    Examples
    --------
    >>> text_rate_bps(921e3)
    '921 kbit/s'
    """
    return engineering(rate_bps, "bit/s", digits=4, trim=True)


def text_capacitance_f(capacitance_f: float | None) -> str:
    """Return a capacitance with up to three digits.

    Examples
    --------
    >>> text_capacitance_f(4.5e-12)
    '4.5 pF'
    """
    return engineering(capacitance_f, "F", trim=True)


def text_voltage_v(voltage_v: float | None) -> str:
    """Return a voltage with up to three digits.

    Examples
    --------
    >>> text_voltage_v(3.3), text_voltage_v(0.495)
    ('3.3 V', '495 mV')
    """
    return engineering(voltage_v, "V", trim=True)


def text_length_m(length_m: float | None) -> str:
    """Return a length in millimetres: to a tenth, below 1 mm to a hundredth.

    Examples
    --------
    >>> text_length_m(31e-3), text_length_m(0.18e-3), text_length_m(10.0)
    ('31.0 mm', '0.18 mm', '10000.0 mm')
    """
    if length_m is None or math.isnan(length_m):
        return UNKNOWN
    places = 1 if abs(length_m) >= 1e-3 or length_m == 0 else 2
    return f"{length_m * 1e3:.{places}f} mm"


def text_db(level_db: float | None, unit: str = "dB") -> str:
    """Return a level to a tenth of a decibel.

    Examples
    --------
    >>> text_db(-3.04), text_db(-0.04), text_db(34.0, "dBuV/m")
    ('-3.0 dB', '0.0 dB', '34.0 dBuV/m')
    """
    if level_db is None or math.isnan(level_db):
        return UNKNOWN
    return f"{round(level_db, 1) + 0.0:.1f} {unit}"


def text_share(share: float | None) -> str:
    """Return a share in per cent, without a fraction from 10 % on.

    Examples
    --------
    >>> text_share(0.15), text_share(0.034)
    ('15 %', '3.4 %')
    """
    if share is None or math.isnan(share):
        return UNKNOWN
    percent = round(share * 100, 1) + 0.0
    return f"{percent:.0f} %" if abs(percent) >= 10 or percent == 0 else f"{percent:.1f} %"


def text_ordinal(number: int) -> str:
    """Write the place of a harmonic in its row.

    Parameters
    ----------
    number : int
        1 or more.

    Returns
    -------
    str
        Digits with their ending.

    Examples
    --------
    >>> [text_ordinal(n) for n in (1, 2, 3, 4, 11, 12, 13, 21, 102)]
    ['1st', '2nd', '3rd', '4th', '11th', '12th', '13th', '21st', '102nd']
    """
    teen = number % 100 in (11, 12, 13)
    return f"{number}{'th' if teen else {1: 'st', 2: 'nd', 3: 'rd'}.get(number % 10, 'th')}"
