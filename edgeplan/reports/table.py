"""The table a board designer reads: a row per net, then what to change and what to mind."""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import groupby, zip_longest

import click

from edgeplan.reports import phrases, rows, summary
from edgeplan.reports.rows import Row
from edgeplan.results import NetResult, Results

WIDTH = 150
_NARROWEST = 48
_GAP = "  "
_TITLE = 16
_COLOURS = {
    "inside": "green",
    "too fast": "red",
    "too slow": "yellow",
    "no window": "magenta",
    "undecided": "cyan",
}
_LEGEND = (
    "launched edges in ns, 10–90 %: edge from fast to slow corner; window from fastest acceptable "
    "to slowest allowed, a > b is closed; (b) borderline"
)


@dataclass(frozen=True, slots=True)
class Column:
    """A column: its field in the row, its words, the least width, and how its cells behave."""

    field: str
    heading: str
    least: int
    behaviour: str = "whole"  # whole, cut in the middle, or wrapped at blanks


PLAN_COLUMNS = (
    Column("net", "net", 12, "cut"),
    Column("edge_now", "edge now", 9),
    Column("window_now", "window now", 9),
    Column("verdict", "verdict", 9),
    Column("binds", "what binds", 14, "wrapped"),
    Column("proposal", "proposal", 18, "wrapped"),
    Column("edge_after", "edge after", 9),
    Column("window_after", "window after", 9),
    Column("margin", "tightest margin after", 14, "wrapped"),
)
CHECK_COLUMNS = (
    Column("net", "net", 12, "cut"),
    Column("edge_now", "edge", 9),
    Column("window_now", "window", 9),
    Column("verdict", "verdict", 9),
    Column("binds", "what binds", 14, "wrapped"),
    Column("margin", "tightest margin", 14, "wrapped"),
)
# A narrow terminal loses first what can be read off the others: net, verdict and proposal stay.
DROP_ORDER = ("window_after", "edge_after", "window_now", "edge_now", "binds", "margin")


def render(results: Results, *, width: int | None, colour: bool) -> str:
    """Write the table of a whole board.

    Parameters
    ----------
    results : Results
        The record of one run.
    width : int or None
        Columns of the terminal, at most 150 are used; 150 without it. [-]
    colour : bool
        Whether a verdict is coloured as well.

    Returns
    -------
    str
        The text, its last line ended.
    """
    width = max(_NARROWEST, min(width or WIDTH, WIDTH))
    lines = [line for text in summary.heading(results) for line in phrases.wrap(text, width)]
    lines += [*phrases.wrap(_LEGEND, width), ""]
    lines += [*_body(results, width, colour=colour), ""]
    lines += [*_totals(summary.totals(results), width), ""]
    for section in summary.sections(results):
        lines += section_lines(section.title, section.lines, width)
    return "\n".join(lines) + "\n"


def _body(results: Results, width: int, *, colour: bool) -> Iterator[str]:
    """Yield the heading and the rows, a line of its own where the interface changes."""
    nets = rows.in_order(results)
    words = [rows.row(net) for net in nets]
    columns, widths = _fitted(results, words, width)
    yield from _cells([column.heading for column in columns], columns, widths)
    yield _GAP.join("-" * each for each in widths)
    pairs = zip(nets, words, strict=True)
    for interface, members in groupby(pairs, lambda pair: pair[0].interface):
        group = list(members)
        yield from ("", *phrases.wrap(_group(interface, [net for net, _ in group]), width))
        for _, row in group:
            yield from _row(row, columns, widths, colour=colour)
            for sentence in row.below:
                yield from phrases.wrap("    " + sentence, width, "      ")
    yield from _left_out(results, columns, width)


def _group(interface: str, nets: list[NetResult]) -> str:
    """Return the heading line of an interface."""
    classes = sorted({net.timing_class for net in nets if net.timing_class})
    count = f"{len(nets)} net{'s' if len(nets) != 1 else ''}"
    return f"{interface or 'no interface'}: {', '.join([count, *classes])}"


def _fitted(results: Results, words: list[Row], width: int) -> tuple[list[Column], list[int]]:
    """Return the columns that fit, with their widths: drop in the stated order, then shrink."""
    columns = list(CHECK_COLUMNS if results.command == "check" else PLAN_COLUMNS)
    natural = {column.field: _natural(column, words) for column in columns}
    for field in DROP_ORDER:
        if _total([_least(column, natural) for column in columns]) <= width:
            break
        columns = [column for column in columns if column.field != field]
    widths = [natural[column.field] for column in columns]
    least = [_least(column, natural) for column in columns]
    while _total(widths) > width and widths != least:
        spare = [have - need for have, need in zip(widths, least, strict=True)]
        widths[spare.index(max(spare))] -= 1
    return columns, widths


def _natural(column: Column, words: list[Row]) -> int:
    """Width of the longest cell of a column."""
    cells = (phrases.inert(getattr(row, column.field)) for row in words)
    return max(map(phrases.display_width, (column.heading, *cells)))


def _least(column: Column, natural: dict[str, int]) -> int:
    """Width below which a column is of no use."""
    if column.behaviour == "whole":
        return natural[column.field]
    return min(column.least, natural[column.field])


def _total(widths: list[int]) -> int:
    """Width of a line."""
    return sum(widths) + len(_GAP) * (len(widths) - 1)


def _row(row: Row, columns: list[Column], widths: list[int], *, colour: bool) -> Iterator[str]:
    """Yield the lines of one row; colour repeats the verdict's word."""
    lines = list(_cells([getattr(row, column.field) for column in columns], columns, widths))
    if colour:
        word = row.verdict.removesuffix(rows.BORDERLINE)
        lines[0] = _coloured(lines[0], word, columns, widths)
    yield from lines


def _coloured(line: str, word: str, columns: list[Column], widths: list[int]) -> str:
    """Colour the verdict in its column and nowhere else."""
    before = columns.index(next(column for column in columns if column.field == "verdict"))
    columns_before = _total(widths[:before]) + len(_GAP)
    start = 0
    while phrases.display_width(line[:start]) < columns_before:
        start += 1
    styled = paint(word, colour=True)
    return line[:start] + line[start:].replace(word, styled, 1)


def paint(word: str, *, colour: bool) -> str:
    """Return a verdict, coloured where wanted; the word itself stays."""
    return click.style(word, fg=_COLOURS.get(word)) if colour else word


def _cells(texts: list[str], columns: list[Column], widths: list[int]) -> Iterator[str]:
    """Yield the lines of one row of cells."""
    cells = [
        _lines(text, column, width)
        for text, column, width in zip(texts, columns, widths, strict=True)
    ]
    for parts in zip_longest(*cells, fillvalue=""):
        padded = (_padded(part, width) for part, width in zip(parts, widths, strict=True))
        yield _GAP.join(padded).rstrip()


def _lines(text: str, column: Column, width: int) -> list[str]:
    """Return a cell as lines that fit its column."""
    if column.behaviour == "wrapped":
        return phrases.wrap(text, width)
    return [phrases.cut_middle(phrases.inert(text), width)]


def _padded(text: str, width: int) -> str:
    """Fill a cell with blanks on its right."""
    return text + " " * (width - phrases.display_width(text))


def _left_out(results: Results, columns: list[Column], width: int) -> Iterator[str]:
    """Say which columns the terminal has no room for."""
    wanted = CHECK_COLUMNS if results.command == "check" else PLAN_COLUMNS
    names = [column.heading for column in wanted if column not in columns]
    if names:
        yield ""
        yield from phrases.wrap(f"no room for: {phrases.listed(names)}", width)


def _totals(cells: list[list[str]], width: int) -> list[str]:
    """Return the totals as a grid; a verdict per line where the terminal is narrow."""
    wide = list(_grid(cells))
    fits = max(map(len, wide)) <= width
    return wide if fits else list(_grid([list(column) for column in zip(*cells, strict=True)]))


def _grid(cells: list[list[str]]) -> Iterator[str]:
    """Yield lines of counts: first column to the left, the others to the right."""
    widths = [max(map(len, column)) for column in zip(*cells, strict=True)]
    for line in cells:
        numbers = [text.rjust(size) for text, size in zip(line[1:], widths[1:], strict=True)]
        yield _GAP.join([line[0].ljust(_TITLE), *numbers])


def section_lines(title: str, sentences: tuple[str, ...], width: int) -> list[str]:
    """Return a section with its title beside its sentences.

    Examples
    --------
    >>> section_lines("Parts list", ("33 Ω: 2 now, 5 after (+3)", "chosen per board"), 60)
    ['Parts list        33 Ω: 2 now, 5 after (+3)', '                  chosen per board']
    """
    margin = " " * _TITLE + _GAP
    lines: list[str] = []
    for sentence in sentences:
        lines += phrases.wrap(sentence, width - len(margin), "  ")
    first = _padded(title, _TITLE) + _GAP
    return [first + lines[0], *(margin + line for line in lines[1:])]
