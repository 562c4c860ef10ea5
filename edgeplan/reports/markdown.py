"""The report for a merge request: what to change first, what is inside as drawn after it."""

import re
from collections.abc import Iterator

from edgeplan.reports import at_line, phrases, rows, summary
from edgeplan.results import EmissionAtLine, NetResult, Results

# What starts a link, a mention, an issue number, code, a formula or HTML, or ends a cell.
_ACTIVE = re.compile(
    r"[\\`*~|<>\[\]&@#$^]|(?<![^\W_])_|_(?![^\W_])|(?<=:)(?=//)|(?<=www)\.", re.IGNORECASE
)
_BREAK_LINK = "&#8203;"  # the empty match between ":" and "//"

_PLAN_CELLS = {
    "net": "net",
    "verdict": "verdict",
    "binds": "what binds",
    "proposal": "proposal",
    "edge_now": "edge now, ns",
    "window_now": "window now, ns",
    "edge_after": "edge after, ns",
    "window_after": "window after, ns",
    "margin": "tightest margin after",
}
_CHECK_CELLS = {
    "net": "net",
    "verdict": "verdict",
    "binds": "what binds",
    "edge_now": "edge, ns",
    "window_now": "window, ns",
    "margin": "tightest margin",
}


def render(results: Results, *, width: int | None, colour: bool) -> str:  # noqa: ARG001
    """Write the report of a whole board.

    Parameters
    ----------
    results : Results
        The record of one run.
    width, colour
        Have no meaning here.

    Returns
    -------
    str
        GitHub-flavoured Markdown, its last line ended.
    """
    first, second = summary.heading(results)
    calm, rest = _split(results)
    lines = [f"## {escaped(first)}", "", escaped(second), ""]
    lines += [*_totals(results), ""]
    lines += _nets("Nets to change or to settle", rest, results.command)
    lines += _nets("Nets inside as drawn", calm, results.command)
    lines += [
        line for net in results.nets for entry in net.emission_at_line for line in _emission(entry)
    ]
    for section in summary.sections(results):
        lines += [f"### {section.title}", "", *(f"- {escaped(line)}" for line in section.lines), ""]
    return "\n".join(lines).rstrip("\n") + "\n"


def escaped(text: str) -> str:
    """Return a text that Markdown shows as it stands.

    Examples
    --------
    >>> escaped("SDR_DQ0 | <b> @all")
    'SDR_DQ0 &#124; &lt;b&gt; &#64;all'
    """
    return _ACTIVE.sub(_entity, phrases.inert(text))


def _entity(match: re.Match[str]) -> str:
    """Return the entity of an active character."""
    letter = match.group()
    named = {"<": "&lt;", ">": "&gt;", "&": "&amp;", "": _BREAK_LINK}
    return named.get(letter) or f"&#{ord(letter)};"


def _split(results: Results) -> tuple[list[NetResult], list[NetResult]]:
    """Return the nets inside with nothing to do, and the others."""
    calm: list[NetResult] = []
    rest: list[NetResult] = []
    for net in rows.in_order(results):
        stays = net.verdict == net.verdict_after == "inside" and net.proposal == net.candidate_now
        (calm if stays else rest).append(net)
    return calm, rest


def _totals(results: Results) -> Iterator[str]:
    """Yield the totals as a table."""
    head, *counts = summary.totals(results)
    yield _line(head)
    yield "|:--|" + "--:|" * (len(head) - 1)
    yield from map(_line, counts)


def _nets(title: str, nets: list[NetResult], command: str) -> Iterator[str]:
    """Yield a table of nets under its title; nothing without nets."""
    if not nets:
        return
    cells = _CHECK_CELLS if command == "check" else _PLAN_CELLS
    yield from (f"### {title} ({len(nets)})", "", _line(["interface", *cells.values()]))
    yield "|:--" * (len(cells) + 1) + "|"
    for net in nets:
        words = rows.row(net)
        yield _line([net.interface, *(getattr(words, field) for field in cells)])
    yield from ("", "Launched edges, 10–90 %; (b): borderline.", "")
    remarks = [f"- {escaped(net.net)}: {escaped(text)}" for net in nets for text in rows.below(net)]
    yield from [*remarks, ""] if remarks else []


def _emission(entry: EmissionAtLine) -> Iterator[str]:
    """Yield a net's emission at one line: level, mechanisms, what single changes would do."""
    yield from (f"### {escaped(at_line.title(entry))}", "", escaped(at_line.level(entry)), "")
    for head, cells in (
        (at_line.MECHANISM_HEAD, at_line.mechanisms(entry)),
        (at_line.WHAT_IF_HEAD, at_line.what_if(entry)),
    ):
        yield _line(list(head))
        yield "|:--|" + "--:|" * (len(head) - 1)
        yield from (*map(_line, cells), "")
    notes = [f"- {escaped(note)}" for note in at_line.notes(entry)]
    yield from [*notes, ""] if notes else []


def _line(cells: list[str]) -> str:
    """Return one line of a table."""
    return "| " + " | ".join(map(escaped, cells)) + " |"
