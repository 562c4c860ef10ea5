"""Sentences about nets: what binds, what to change, what a missing value would settle."""

from math import isnan

from edgeplan.board import Net
from edgeplan.candidates import drawn_ohm
from edgeplan.nets import NetFacts
from edgeplan.results import Check, Verdict
from edgeplan.texts import text_frequency_hz, text_ordinal, text_resistance_ohm


def resistor_place(net: Net) -> str:
    """Where a series resistor sits or would sit.

    Parameters
    ----------
    net : Net
        One row of the list.

    Returns
    -------
    str
        By its name, else by the driver's pin.

    Examples
    --------
    >>> from edgeplan.board import Point
    >>> here = Point(file="nets.csv", row=2)
    >>> resistor_place(Net(net="A", at=here, resistor="R7"))
    'at R7'
    >>> resistor_place(Net(net="A", at=here, driver_pin=("U1.4",)))
    'near U1.4'
    """
    if net.resistor:
        return f"at {net.resistor}"
    pin = net.driver_pin[0] if net.driver_pin else "the driver"
    return f"near {pin}"


def change_words(facts: NetFacts, setting: int, value_ohm: float) -> tuple[str, str]:
    """Kind of change and the proposal in words; ("none", "no change") where nothing changes.

    Parameters
    ----------
    facts : NetFacts
        The net as drawn.
    setting : int
        Index of the proposed setting.
    value_ohm : float
        Proposed series resistor, or pull-up of an open-drain net. [ohm]

    Returns
    -------
    tuple of str
        Kind, for example "setting and value"; words for the table.
    """
    kinds, words = [], []
    if setting != facts.setting:
        kinds.append("setting")
        bank = f" (bank {facts.net.bank[0]})" if facts.net.bank and facts.net.bank[0] else ""
        words.append(f"setting {facts.settings[setting].setting}{bank}")
    drawn = drawn_ohm(facts)
    if value_ohm != drawn and not isnan(value_ohm):
        kind, word = _value_words(facts, drawn, value_ohm)
        kinds.append(kind)
        words.append(word)
    if not words:
        return "none", "no change"
    return " and ".join(kinds), ", ".join(words)


def _value_words(facts: NetFacts, drawn: float, value_ohm: float) -> tuple[str, str]:
    """Kind and words of a changed resistor."""
    net, value = facts.net, text_resistance_ohm(value_ohm)
    if facts.timing == "open-drain":
        return "value", f"{value} at {net.pull_up} (pull-up, was {text_resistance_ohm(drawn)})"
    place = resistor_place(net)
    if net.site in ("possible", "none"):
        return "new site", f"add {value} {place}"
    if net.site == "link":
        return "value", f"fit {value} {place} (was a link)"
    if value_ohm == 0:
        return "value", f"link {place} (was {text_resistance_ohm(drawn)})"
    return "value", f"fit {value} {place} (was {text_resistance_ohm(drawn)})"


def check_words(check: Check) -> str:
    """A check as a cause: its name, with frequency and harmonic number for emission.

    Parameters
    ----------
    check : Check
        Of a net's record.

    Returns
    -------
    str
        For the column that says what binds.
    """
    early = " before firmware" if check.condition.state == "boot" else ""
    if check.check != "emission" or check.frequency_hz is None:
        return f"{check.check}{early}"
    number = check.order
    harmonic = f" ({text_ordinal(number)})" if number else ""
    worst = f"emission {text_frequency_hz(check.frequency_hz)}{harmonic}{early}"
    if check.out_of_reach:
        return f"{worst}, out of reach"
    if check.out_of_reach_hz:
        return f"{worst}, {text_frequency_hz(check.out_of_reach_hz[0])} out of reach"
    return worst


def binds_words(verdict: Verdict, failing: list[Check], tightest: Check | None) -> str:
    """What binds: every failing kind once, worst first; of an inside net the tightest check.

    Parameters
    ----------
    verdict : str
        The net's verdict.
    failing : list of Check
        What fails, in any order.
    tightest : Check or None
        Smallest share of an inside net.

    Returns
    -------
    str
        At most three causes.
    """
    if failing:
        ordered = sorted(failing, key=lambda c: c.margin_share if c.margin_share is not None else 0)
        return "; ".join(dict.fromkeys(check_words(c) for c in ordered[:3]))
    if verdict == "too fast":
        return "edge below its fastest acceptable one"
    return check_words(tightest) if tightest else ""
