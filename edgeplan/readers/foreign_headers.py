"""One message for every header nobody knows, with the lines to paste into board.toml."""

import json
import re
from collections.abc import Mapping, Sequence

from edgeplan.names import nearest
from edgeplan.readers.columns import Column, known_headers

_UNIT_WORDS = {
    "mil": "mil",
    "mils": "mil",
    "mm": "mm",
    "um": "um",
    "micron": "um",
    "microns": "um",
    "inch": "inch",
    "inches": "inch",
    "in": "inch",
    "ohm": "ohm",
    "ohms": "ohm",
    "kohm": "kohm",
    "mhz": "mhz",
    "khz": "khz",
    "hz": "hz",
    "mbps": "mbps",
    "kbps": "kbps",
    "pf": "pf",
    "nf": "nf",
}
# words other programs put above a column of ours, without the unit
_SYNONYMS = {
    "net": "net",
    "net name": "net",
    "netname": "net",
    "signal": "net",
    "signal name": "net",
    "bus": "interface",
    "length": "length",
    "routed length": "length",
    "route length": "length",
    "etch length": "length",
    "track length": "length",
    "trace length": "length",
    "total length": "length",
    "layer": "layer",
    "layer name": "layer",
    "routing layer": "layer",
    "width": "width",
    "track width": "width",
    "trace width": "width",
    "line width": "width",
    "driver": "driver",
    "driver pin": "driver_pin",
    "source pin": "driver_pin",
    "receiver": "receiver",
    "receiver pin": "receiver_pin",
    "load pin": "receiver_pin",
    "series resistor": "resistor",
    "resistor": "resistor",
    "resistor value": "resistor",
    "clock": "clock",
    "clock frequency": "clock",
    "frequency": "clock",
    "data rate": "data",
    "bit rate": "data",
    "drive setting": "setting",
    "from pin": "from",
    "to pin": "to",
}


def guess(header: str, columns: tuple[Column, ...]) -> str | None:
    """Return the header of ours that another program's header means, if one does.

    Parameters
    ----------
    header : str
        As the file has it.
    columns : tuple of Column
        Our columns.

    Returns
    -------
    str or None
        A header of ours with its unit; None where the words say nothing or the unit is missing.

    Examples
    --------
    >>> from edgeplan.readers.columns import NET_COLUMNS
    >>> guess("Routed Length (mil)", NET_COLUMNS), guess("Via Count", NET_COLUMNS)
    ('length_mil', None)
    """
    known = known_headers(columns)
    words = re.findall(r"[a-z]+", header.lower())
    units = [_UNIT_WORDS[word] for word in words if word in _UNIT_WORDS]
    plain = " ".join(word for word in words if word not in _UNIT_WORDS)
    name = _SYNONYMS.get(plain, plain.replace(" ", "_"))
    candidates = [f"{name}_{unit}" for unit in units] + [name]
    exact = next((candidate for candidate in candidates if candidate in known), None)
    if exact or any(name == column.name for column in columns):
        return exact
    return nearest(header.strip().replace(" ", "_"), known) if "_" in header else None


def lines_to_paste(
    unknown: Sequence[str],
    columns: tuple[Column, ...],
    rename: Mapping[str, str],
    ignore: Sequence[str],
    taken: Sequence[str],
) -> str:
    """Return the [columns] table that makes every unknown header known.

    Parameters
    ----------
    unknown : sequence of str
        Headers nobody knows.
    columns : tuple of Column
        Our columns.
    rename, ignore
        What [columns] of board.toml holds already.
    taken : sequence of str
        Headers of ours that the file has.

    Returns
    -------
    str
        Words and the lines, ready to paste.

    Examples
    --------
    >>> from edgeplan.readers.columns import NET_COLUMNS
    >>> print(lines_to_paste(["Net Name", "Via Count"], NET_COLUMNS, {}, [], []))
    paste into board.toml:
        [columns]
        rename = {"Net Name" = "net"}
        ignore = ["Via Count"]
    """
    renamed = dict(rename)
    ignored = list(ignore)
    for header in unknown:
        ours = guess(header, columns)
        if ours is None or ours in renamed.values() or ours in taken:
            ignored.append(header)
        else:
            renamed[header] = ours
    pairs = ", ".join(f"{_quoted(old)} = {_quoted(new)}" for old, new in renamed.items())
    lines = [f"rename = {{{pairs}}}"] if renamed else []
    lines += [f"ignore = [{', '.join(_quoted(name) for name in ignored)}]"] if ignored else []
    there = bool(rename or ignore)
    head = ["put in place of those lines of [columns]:"] if there else ["paste into board.toml:"]
    return "\n    ".join(
        head + ([] if there else ["[columns]"]) + lines + _missing_units(unknown, columns)
    )


def _missing_units(unknown: Sequence[str], columns: tuple[Column, ...]) -> list[str]:
    """Say which ignored headers only lack their unit."""
    notes = []
    for header in unknown:
        plain = " ".join(re.findall(r"[a-z]+", header.lower()))
        name = _SYNONYMS.get(plain, plain.replace(" ", "_"))
        for column in columns:
            if column.units and column.name == name and guess(header, columns) is None:
                choices = " or ".join(list(column.headers())[:4])
                notes.append(f"# {header!r} has no unit: rename it to {choices}")
    return notes


def _quoted(text: str) -> str:
    """Write a TOML text."""
    return json.dumps(text, ensure_ascii=False)
