"""Shipped limit lines as plain text, the unconfirmed ones marked."""

import textwrap
from itertools import pairwise

import numpy as np

from edgeplan.limits.highest_frequency import END_OF_LINE, highest_frequency_hz, rule_title
from edgeplan.limits.lines import Band, LimitLine
from edgeplan.limits.shipped import ids, line

STANDING = {
    "printed": "",
    "indirect": "quoted indirectly",
    "derived": "derived",
    "memory": "unverified",
    "user": "user",
}
HEADINGS = ("id", "distance", "MHz", "detectors", "standing")


def listing() -> str:
    """Every shipped line in an aligned table.

    Returns
    -------
    str
        A heading and a row per line, without a last line break.

    Examples
    --------
    >>> for row in listing().splitlines()[3:5]:
    ...     print(row.split())
    ['fcc-15-109-class-a-3m-converted', '3', 'm', '30-40000', ...'unverified']
    ['cispr32-class-a-10m', '10', 'm', '30-1000', 'quasi-peak']
    """
    rows = [HEADINGS, *(_row(line(limit_id)) for limit_id in ids())]
    widths = [max(len(row[column]) for row in rows) for column in range(len(HEADINGS))]
    return "\n".join(_aligned(row, widths) for row in rows)


def describe(limit_id: str) -> str:
    """One shipped line in words and figures.

    Parameters
    ----------
    limit_id : str
        Id of a shipped line.

    Returns
    -------
    str
        Several lines of text, without a last line break.

    Raises
    ------
    ValueError
        For an unknown id, with the ids it may have meant.

    Examples
    --------
    >>> print(describe("cispr32-class-b-3m"))
    cispr32-class-b-3m
    CISPR 32 class B, 30 MHz to 1 GHz, 3 m
    source: CISPR 32, table A.4
    distance: 3 m
    continues as: cispr32-class-b-3m-above-1ghz
    measured up to: by cispr32-fx, unverified (CISPR 32, highest internal frequency; the same rows
      in IEC 61000-6-3 and 61000-6-4)
    note: One distance is chosen for the whole range, never the better of both.
    where bands touch, the lower level holds
        from MHz       to MHz  dBuV/m         detector    bandwidth
              30          230  40.00          quasi-peak  120 kHz
             230         1000  47.00          quasi-peak  120 kHz
    """
    limit = line(limit_id)
    standing = STANDING[limit.basis]
    head = [
        limit.id,
        limit.title,
        f"source: {limit.source}" + (f" ({standing})" if standing else ""),
        f"distance: {limit.distance_m:g} m",
        f"continues as: {limit.continues_as}" if limit.continues_as else "",
        _wrapped(f"measured up to: {_rule(limit_id)}"),
        _wrapped(f"note: {limit.note}") if limit.note else "",
        "where bands touch, the lower level holds",
        f"{'from MHz':>12} {'to MHz':>12}  {'dBuV/m':<14} {'detector':<11} bandwidth",
    ]
    body = [text for band in limit.bands for text in _pieces(band, limit)]
    return "\n".join([*(text for text in head if text), *body])


def _row(limit: LimitLine) -> tuple[str, ...]:
    """Cells of one line in the listing."""
    bases = {limit.basis, *(band.basis for band in limit.bands)}
    standing = ", ".join(text for basis, text in STANDING.items() if text and basis in bases)
    span = f"{limit.lowest_hz / 1e6:g}-{limit.highest_hz / 1e6:.0f}"
    return limit.id, f"{limit.distance_m:g} m", span, ", ".join(limit.detectors), standing


def _aligned(row: tuple[str, ...], widths: list[int]) -> str:
    """One row of the listing."""
    cells = (cell.ljust(width) for cell, width in zip(row, widths, strict=True))
    return "  ".join(cells).rstrip()


def _rule(limit_id: str) -> str:
    """Rule for the highest frequency in words."""
    _, rule, verified = highest_frequency_hz(limit_id, None)
    if rule == END_OF_LINE:
        return rule_title(rule)
    return f"by {rule}{'' if verified else ', unverified'} ({rule_title(rule)})"


def _pieces(band: Band, limit: LimitLine) -> list[str]:
    """One text row for each straight piece of a band."""
    remark = STANDING[band.basis] if band.basis != limit.basis else ""
    tail = "  ".join(text for text in (band.service, remark) if text)
    points = list(zip(band.frequency_hz / 1e6, band.level_dbuv_per_m, strict=True))
    return [
        f"{start:12g} {stop:12g}  {_level(first, last):<14} {band.detector:<11} "
        f"{_bandwidth(band.bandwidth_hz)}  {tail}".rstrip()
        for (start, first), (stop, last) in pairwise(points)
        if stop > start
    ]


def _level(first: float, last: float) -> str:
    """Level of a piece, both ends where it slopes."""
    return f"{first:.2f}" if np.isclose(first, last) else f"{first:.2f} to {last:.2f}"


def _bandwidth(hz: float) -> str:
    """Bandwidth of the receiver."""
    return f"{hz / 1e6:g} MHz" if hz >= 1e6 else f"{hz / 1e3:g} kHz"


def _wrapped(text: str) -> str:
    """Long text over several lines."""
    return textwrap.fill(text, width=96, subsequent_indent="  ")
