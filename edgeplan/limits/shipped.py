"""Shipped limit lines, read from the package data when first asked for."""

import difflib
import re
import tomllib
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any

import numpy as np

from edgeplan.limits.lines import DETECTORS, Band, LimitLine

MEGAHERTZ_HZ = 1e6
KILOHERTZ_HZ = 1e3

# European and United States names of the same tables, as people write them.
ALSO_KNOWN_AS = {
    "en55032": "cispr32",
    "en55011": "cispr11",
    "en55025": "cispr25",
    "en61000": "iec61000",
    "47cfr15109": "fcc15109",
    "fccpart15": "fcc15109",
    "part15": "fcc15109",
    "re102": "milstd461gre102",
}


def ids() -> tuple[str, ...]:
    """Ids of all shipped limit lines, in the order of the data file.

    Returns
    -------
    tuple of str
        Ids.

    Examples
    --------
    >>> ids()[0]
    'fcc-15-109-class-b-3m'
    """
    return tuple(_shipped())


def line(limit_id: str) -> LimitLine:
    """Shipped limit line of an id.

    Parameters
    ----------
    limit_id : str
        Id, such as ``cispr32-class-b-3m``.

    Returns
    -------
    LimitLine
        The line.

    Raises
    ------
    ValueError
        For an unknown id, with the ids it may have meant.

    Examples
    --------
    >>> line("fcc-15-109-class-a-10m").distance_m
    10.0
    """
    shipped = _shipped()
    if limit_id not in shipped:
        likely = matching(limit_id)
        hint = f"did you mean {', '.join(likely)}?" if likely else "edgeplan limits lists them all"
        raise ValueError(f"no limit line is called {limit_id!r}; {hint}")
    return shipped[limit_id]


def matching(text: str) -> list[str]:
    """Ids that a half-written id or a phrase such as "class B" may mean.

    Parameters
    ----------
    text : str
        What somebody wrote.

    Returns
    -------
    list of str
        Ids in the order of the data file; those spelt alike when none holds the words.

    Examples
    --------
    >>> matching("EN 55032 class B")
    ['cispr32-class-b-10m', 'cispr32-class-b-3m', 'cispr32-class-b-3m-above-1ghz']
    """
    words = re.findall(r"[a-z0-9]+", text.lower())
    if not words:
        return []
    wanted = _known_name("".join(words))
    close = [limit_id for limit_id in ids() if wanted in limit_id.replace("-", "")]
    if not close:
        close = [limit_id for limit_id in ids() if all(_has(limit_id, word) for word in words)]
    return close or difflib.get_close_matches(text.lower(), ids(), n=5, cutoff=0.6)


def _known_name(squeezed: str) -> str:
    """Phrase without blanks, its standard by the name used in the ids."""
    for name, own in ALSO_KNOWN_AS.items():
        if squeezed.startswith(name):
            return own + squeezed.removeprefix(name)
    return squeezed


def _has(limit_id: str, word: str) -> bool:
    """Whether an id holds a word: a short one whole, a long one anywhere."""
    if len(word) <= 2:
        return word in limit_id.split("-")
    return ALSO_KNOWN_AS.get(word, word) in limit_id.replace("-", "")


@cache
def _shipped() -> Mapping[str, LimitLine]:
    """All lines by id."""
    data = tomllib.loads((files("edgeplan.limits") / "lines.toml").read_text(encoding="utf-8"))
    lines = [_line(entry) for entry in data["line"]]
    services = data["services"]
    lines += [_service_line(services, number) for number in range(1, services["classes"] + 1)]
    return MappingProxyType({entry.id: entry for entry in lines})


def _line(entry: dict[str, Any]) -> LimitLine:
    """One line of the data file."""
    return LimitLine(
        id=entry["id"],
        title=entry["title"],
        source=entry["source"],
        distance_m=float(entry["distance_m"]),
        basis=entry["basis"],
        bands=tuple(_band(band, entry["basis"]) for band in entry["band"]),
        continues_as=entry.get("continues_as", ""),
        note=entry.get("note", ""),
    )


def _band(band: dict[str, Any], basis: str) -> Band:
    """One band of the data file: rows become points, a step where levels differ."""
    in_microvolts = "uv_per_m" in band
    rows = band["uv_per_m"] if in_microvolts else band["dbuv_per_m"]
    points = [(edge, row[at]) for row in rows for edge, at in ((row[0], 2), (row[1], -1))]
    frequency_mhz, level = np.array(points, dtype=float).T
    return Band(
        detector=band["detector"],
        bandwidth_hz=band["bandwidth_khz"] * KILOHERTZ_HZ,
        frequency_hz=frequency_mhz * MEGAHERTZ_HZ,
        level_dbuv_per_m=20 * np.log10(level) if in_microvolts else level,
        basis=band.get("basis", basis),
    )


def _service_line(services: dict[str, Any], number: int) -> LimitLine:
    """Line of one class of the limits by radio service."""
    bands = []
    for service, start_mhz, stop_mhz, bandwidth_khz, step_db, peak, quasi_peak, average in services[
        "row"
    ]:
        levels = {"peak": peak, "quasi-peak": quasi_peak, "average": average}
        bands += [
            Band(
                detector=detector,
                bandwidth_hz=bandwidth_khz * KILOHERTZ_HZ,
                frequency_hz=np.array([start_mhz, stop_mhz]) * MEGAHERTZ_HZ,
                level_dbuv_per_m=np.full(2, levels[detector] - (number - 1) * step_db, dtype=float),
                basis=services["basis"],
                service=service,
            )
            for detector in DETECTORS
            if not np.isnan(levels[detector])
        ]
    return LimitLine(
        id=services["id"].format_map({"class": number}),
        title=services["title"].format_map({"class": number}),
        source=services["source"],
        distance_m=float(services["distance_m"]),
        basis=services["basis"],
        bands=tuple(bands),
        note=services["note"],
    )
