"""What has to hold between the values of a net, and between a net and board.toml."""

from collections.abc import Iterable, Iterator, Mapping

from edgeplan.errors import Problem
from edgeplan.names import instead
from edgeplan.readers.net_kinds import is_supply, partner
from edgeplan.readers.netlist import Entry, NetList
from edgeplan.readers.references import Names, or_add

ALIGNED = {
    "driver_pin": "driver",
    "setting": "driver",
    "setting_boot": "driver",
    "bank": "driver",
    "receiver_pin": "receiver",
}

LONGEST_PATTERN = 2**40  # a longer one is a slip of the pen


def complete(
    nets: NetList, names: Names, pairs: Iterable[str], owned: Mapping[str, set[str]]
) -> None:
    """Fill in what follows from other values: kind, site, the only setting of a driver.

    Parameters
    ----------
    nets : NetList
        Filled in place.
    names : Names
        Names of board.toml.
    pairs : iterable of str
        Nets of [[pair]] tables.
    owned : mapping
        Per net, the values its own row states (a group's driver does not make VDD a signal).
    """
    halves = set(pairs)
    for entry in nets.entries.values():
        _kind(entry, nets, halves, owned[entry.name])
        _site(entry)
        _only_setting(entry, names)


def _kind(entry: Entry, nets: NetList, halves: set[str], owned: set[str]) -> None:
    """Recognise supplies and pairs unless somebody says what the net is."""
    if "kind" in entry.values:
        return
    if entry.name in halves or partner(entry.name, nets.entries):
        entry.values["kind"] = "differential"
    elif is_supply(entry.name) and "driver" not in owned:
        entry.values["kind"] = "power"


def _site(entry: Entry) -> None:
    """Call a site with a value fitted, one with 0 ohm a link."""
    value_ohm = entry.values.get("resistor_ohm")
    if "site" not in entry.values and value_ohm is not None:
        entry.values["site"] = "fitted" if value_ohm > 0 else "link"


def _only_setting(entry: Entry, names: Names) -> None:
    """Take the setting of drivers that have one only."""
    settings = [names.drivers.get(driver, ()) for driver in entry.values.get("driver", ())]
    if "setting" not in entry.values and settings and all(len(one) == 1 for one in settings):
        entry.values["setting"] = tuple(one[0] for one in settings)


def problems(nets: NetList, names: Names) -> Iterator[Problem]:
    """Yield every contradiction and every name that nothing describes.

    Parameters
    ----------
    nets : NetList
        Complete entries.
    names : Names
        Names of board.toml.

    Yields
    ------
    Problem
        At the cell, or at the group the value came from.
    """
    for entry in nets.entries.values():
        yield from _far_net(entry, nets)
        yield from _counts(entry)
        yield from _site_value(entry)
        yield from _pattern(entry)
        yield from _burst(entry)
        yield from _names(entry, "interface", names.interfaces)
        yield from _names(entry, "driver", names.drivers)
        yield from _names(entry, "receiver", names.receivers)
        yield from _layers(entry, names)
        yield from _settings(entry, "setting", names)
        yield from _settings(entry, "setting_boot", names)


def _far_net(entry: Entry, nets: NetList) -> Iterator[Problem]:
    """Refuse a row of its own for the far side of a series part."""
    far = entry.values.get("far_net")
    if far in nets.entries:
        message = f"{far!r} has a row of its own, row {nets.entries[far].row}"
        hint = "both names are one path: give it one row with the sum of both lengths"
        yield entry.where("far_net").problem(message, hint)


def _counts(entry: Entry) -> Iterator[Problem]:
    """Aligned cells hold as many names as the cell they belong to; an empty cell is unknown."""
    for name, owner in ALIGNED.items():
        count = len(entry.values.get(name, ()))
        wanted = len(entry.values.get(owner, ()))
        if count != wanted and count and wanted:
            message = f"{count} for {wanted} in {owner}"
            hint = f"names are aligned with those in {owner}; - stands for none"
            yield entry.where(name).problem(message, hint)


def _site_value(entry: Entry) -> Iterator[Problem]:
    """Hold the value that is fitted against what the site says."""
    value_ohm = entry.values.get("resistor_ohm")
    site = entry.values.get("site")
    if value_ohm and site in ("link", "possible", "none"):
        message = f"site {site!r} has a resistor of {value_ohm:g} ohm"
        yield entry.where("site").problem(message, "a site with a value is fitted")
    if value_ohm == 0 and site == "fitted":
        yield entry.where("site").problem("0 ohm is fitted", "a site with 0 ohm is a link")


def _pattern(entry: Entry) -> Iterator[Problem]:
    """A pattern's length is a whole number of bits, of a net that carries a pattern."""
    bits = entry.values.get("pattern_bits")
    if bits is None:
        return
    where = entry.where("pattern_bits")
    if not 2 <= bits <= LONGEST_PATTERN or bits != int(bits):
        hint = "write how many bits pass until the pattern repeats, such as 127"
        yield where.problem(f"{bits:g} is not a whole number of bits, 2 or more", hint)
    activity = entry.values.get("activity")
    if activity != "pattern":
        stated = f"activity {activity!r}" if activity else "no activity"
        yield where.problem(f"a pattern's length with {stated}", 'write activity "pattern"')


def _burst(entry: Entry) -> Iterator[Problem]:
    """A burst has a length and a period that is no shorter."""
    length_s, period_s = (entry.values.get(f"burst_{name}_s") for name in ("length", "period"))
    for name, value, other in (("length", length_s, period_s), ("period", period_s, length_s)):
        if value is not None and other is None:
            lacking = "period" if name == "length" else "length"
            message = f"a burst's {name} without burst_{lacking}"
            hint = f"add burst_{lacking}, or leave out both: then the net is active all the time"
            yield entry.where(f"burst_{name}_s").problem(message, hint)
    if length_s is not None and period_s is not None and length_s > period_s:
        message = f"a burst of {length_s:g} s is longer than its period, {period_s:g} s"
        yield entry.where("burst_length_s").problem(message, "swap them, or check the units")


def _names(entry: Entry, what: str, known: Iterable[str]) -> Iterator[Problem]:
    """Names of things that board.toml describes."""
    value = entry.values.get(what, ())
    for name in (value,) if isinstance(value, str) else value:
        if name not in known:
            yield entry.where(what).problem(f"no {what} {name!r}", or_add(what, name, known))


def _layers(entry: Entry, names: Names) -> Iterator[Problem]:
    """Layers that carry copper."""
    for piece in entry.pieces:
        if piece.layer is not None and piece.layer not in names.layers:
            hint = instead(piece.layer, names.layers)
            yield entry.where("layer").problem(f"no signal layer {piece.layer!r}", hint)


def _settings(entry: Entry, name: str, names: Names) -> Iterator[Problem]:
    """Each setting is one of its driver's."""
    drivers = entry.values.get("driver", ())
    settings = entry.values.get(name, ())
    for driver, setting in zip(drivers, settings, strict=False):
        known = names.drivers.get(driver)
        if setting and known is not None and setting not in known:
            message = f"driver {driver!r} has no setting {setting!r}"
            yield entry.where(name).problem(message, instead(setting, known))
