"""One net in full: inputs, line, windows, every check and candidate, spectrum, waveforms."""

from collections.abc import Iterator, Sequence
from itertools import zip_longest

from edgeplan.reports import at_line, curves, phrases, rows, summary
from edgeplan.reports.table import WIDTH, paint, section_lines
from edgeplan.results import (
    Candidate,
    CandidateSetting,
    Check,
    Corners,
    EmissionAtLine,
    NetResult,
    Results,
    Window,
    WindowEnd,
)

_WORST_LINES = 12
_AT_LINE_WIDTH = 98


def render(results: Results, *, width: int | None, colour: bool) -> str:
    """Write everything known about the nets of a record; ``explain`` makes one with one net.

    Parameters
    ----------
    results : Results
        The record of one run.
    width : int or None
        Columns of the terminal; 150 without it. [-]
    colour : bool
        Whether a verdict is coloured as well.

    Returns
    -------
    str
        The text, its last line ended.
    """
    width = max(60, min(width or WIDTH, WIDTH))
    lines = [line for text in summary.heading(results) for line in phrases.wrap(text, width)]
    for net in rows.in_order(results):
        lines += ["", *_net(net, results, width, colour=colour)]
    for section in summary.sections(results):
        if section.title in ("Models", "Unverified", "Caution"):
            lines += ["", *section_lines(section.title, section.lines, width)]
    return "\n".join(lines) + "\n"


def _net(net: NetResult, results: Results, width: int, *, colour: bool) -> Iterator[str]:
    """Yield the blocks of one net."""
    yield from _verdict(net, width, colour=colour)
    blocks = (
        ("Inputs", _inputs(net)),
        ("Line", _line(net)),
        ("Launched edge", _edges(net)),
        ("Window now", _window(net.window_now)),
        ("Window after", _window(net.window_after)),
        ("Checks as drawn", _checks(net, net.candidate_now)),
        ("Checks after", _checks(net, net.proposal) if _changes(net) else iter(())),
    )
    for title, cells in blocks:
        yield from _block(title, list(cells), width)
    said: set[str] = set()
    for entry in net.emission_at_line:
        yield from _at_line(entry, min(width, _AT_LINE_WIDTH), said)
    yield from _block("Candidates", list(_candidates(net)), width)
    yield from curves.spectra(net, results.emission_target.margin_db, _WORST_LINES)
    yield from curves.waveforms(net)
    sentences = (
        ("Missing", tuple(rows.missing(entry) for entry in net.missing)),
        ("Remedies", tuple(text for text in [rows.remedies(net.remedies)] if text)),
        ("Notes", tuple(net.notes)),
    )
    for title, texts in sentences:
        if texts:
            yield from ("", *section_lines(title, texts, width))


def _verdict(net: NetResult, width: int, *, colour: bool) -> Iterator[str]:
    """Yield name, place, verdict now and after, and what binds."""
    names = " = ".join([net.net, *net.aliases])
    place = f"{net.at.file} row {net.at.row}"
    yield from phrases.wrap(f"{names}   {net.interface}, {net.timing_class}   {place}", width)
    now = paint(net.verdict, colour=colour) + (", borderline" if net.borderline else "")
    after = paint(net.verdict_after, colour=colour)
    after += ", borderline" if net.borderline_after else ""
    yield from section_lines("binds", (net.what_binds or "nothing",), width)
    yield f"{'verdict':18}{now}"
    if _changes(net):
        yield from section_lines("proposal", (net.proposal_text,), width)
        yield f"{'after it':18}{after}"
    if net.undecided_because:
        yield from section_lines("undecided", tuple(net.undecided_because), width)


def _changes(net: NetResult) -> bool:
    """Whether the proposal is another candidate than the one drawn."""
    return net.proposal != net.candidate_now


def _block(title: str, cells: list[list[str]], width: int) -> Iterator[str]:
    """Yield a small table under its title; the last column wraps."""
    if not cells:
        return
    safe = [[phrases.inert(cell) for cell in line] for line in cells]
    columns = list(zip_longest(*safe, fillvalue=""))
    widths = [max(map(phrases.display_width, column)) for column in columns[:-1]]
    indent = sum(widths) + 2 * len(widths) + 2
    yield from ("", title)
    for line in safe:
        parts = [
            cell + " " * (size - phrases.display_width(cell))
            for cell, size in zip(line[:-1], widths, strict=True)
        ]
        start = "  ".join(["", *parts, ""])
        last = phrases.wrap(line[-1], max(20, width - indent))
        yield (start + last[0]).rstrip()
        yield from (" " * indent + rest for rest in last[1:])


def _inputs(net: NetResult) -> Iterator[list[str]]:
    """Yield what the verdict rests on, with its provenance."""
    for note in net.inputs:
        yield [note.name, note.value, note.provenance, note.source]


def _line(net: NetResult) -> Iterator[list[str]]:
    """Yield the line as computed."""
    if net.line is not None:
        line = net.line
        yield [
            line.layer,
            f"{line.length_m * 1e3:.4g} mm",
            f"{line.impedance_ohm:.1f} Ω",
            phrases.engineering(line.delay_s, "s"),
            line.provenance,
            line.text,
        ]


def _edges(net: NetResult) -> Iterator[list[str]]:
    """Yield the launched edge at the corners and the receiver's transition."""
    yield ["ns", "fast", "typical", "slow", "transition at the receiver"]
    yield ["now", *_corners(net.edge_now_s), _told(net.transition_now_s)]
    if _changes(net):
        yield ["after", *_corners(net.edge_after_s), _told(net.transition_after_s)]


def _corners(edge_s: Corners) -> list[str]:
    """Write an edge at its three corners."""
    return [phrases.nanoseconds(value) for value in (edge_s.fast, edge_s.typical, edge_s.slow)]


def _told(transition_s: float | None) -> str:
    """Write a transition where the record tells one."""
    return "" if transition_s is None else phrases.nanoseconds(transition_s)


def _window(window: Window) -> Iterator[list[str]]:
    """Yield both ends with what sets them."""
    yield ["fastest acceptable", _end(window.fastest_acceptable), _cause(window.fastest_acceptable)]
    yield ["slowest allowed", _end(window.slowest_allowed), _cause(window.slowest_allowed)]
    if phrases.closed(window):
        yield ["closed", "", "the fastest acceptable edge is slower than the slowest allowed one"]


def _end(end: WindowEnd) -> str:
    """Write an end with its unit."""
    word = phrases.window_end(end)
    return f"{word} ns" if word[0].isdigit() else word


def _cause(end: WindowEnd) -> str:
    """Write the check that sets an end, with its frequency, or why there is no edge."""
    if end.any:
        return "nothing fails in the range that was scanned"
    place = "" if end.frequency_hz is None else f" at {phrases.engineering(end.frequency_hz, 'Hz')}"
    cause = f"{end.cause}{place}" if end.cause else ""
    return "; ".join(text for text in (cause, end.why_none) if text)


def _checks(net: NetResult, candidate: int) -> Iterator[list[str]]:
    """Yield every check of one candidate, the tightest first."""
    checks = [check for check in net.checks if check.candidate == candidate]
    if checks:
        yield ["check", "value", "limit", "margin", "share", "holds to", "rests on", "where"]
    for check in sorted(checks, key=_tightness):
        yield [
            check.check + (" *" if check.binding else ""),
            phrases.engineering(check.value, _level_unit(check)),
            phrases.engineering(check.limit, _level_unit(check)),
            _margin(check),
            "?" if check.margin_share is None else f"{check.margin_share:+.2f}",
            _limit_edge(check),
            ", ".join(check.provenance),
            _where(check),
        ]


def _level_unit(check: Check) -> str:
    """Return the unit of value and limit: an emission level is a field, its margin a ratio."""
    return "dBµV/m" if check.unit == "dB" and check.frequency_hz is not None else check.unit


def _tightness(check: Check) -> float:
    """Sort key: undecided checks first, then the smallest share."""
    return float("-inf") if check.margin_share is None else check.margin_share


def _margin(check: Check) -> str:
    """Write a margin with its model's error on the low and the high side."""
    words = phrases.engineering(check.margin, check.unit, signed=True)
    if check.error is None or check.margin is None:
        return words if check.decided else "undecided"
    if check.error.low == -check.error.high:
        return f"{words} ±{phrases.engineering(check.error.high, check.unit)}"
    low = phrases.engineering(check.error.low, check.unit, signed=True)
    high = phrases.engineering(check.error.high, check.unit, signed=True)
    return f"{words} ({low}/{high})"


def _limit_edge(check: Check) -> str:
    """Write the launched edge at which a check alone would just hold."""
    if check.out_of_reach:
        return "no edge"
    return "" if check.limit_edge_s is None else phrases.engineering(check.limit_edge_s, "s")


def _where(check: Check) -> str:
    """Write the condition at which a check was worst, or what it waits for."""
    place = check.condition
    pins = " to ".join(pin for pin in (place.driver_pin, place.receiver_pin) if pin)
    at = phrases.frequency_and_order(check)
    words = (at, check.detector, pins, place.corner, place.edge, place.state, check.engine)
    waits = f"waits for {check.undecided_because}" if check.undecided_because else ""
    return ", ".join(word for word in (waits, *words) if word)


def _at_line(entry: EmissionAtLine, width: int, said: set[str]) -> Iterator[str]:
    """Yield the emission at one line: level, mechanisms, what single changes would do.

    A note is printed once per net: ``said`` holds those that were.
    """
    yield from ("", *phrases.wrap(at_line.title(entry), width))
    yield from phrases.wrap(f"  {at_line.level(entry)}", width, "  ")
    yield from _aligned([at_line.MECHANISM_HEAD, *at_line.mechanisms(entry)], width)
    yield from _aligned([at_line.WHAT_IF_HEAD, *at_line.what_if(entry)], width)
    for note in at_line.notes(entry):
        if note not in said:
            yield from phrases.wrap(f"  {note}", width, "  ")
        said.add(note)


def _aligned(cells: Sequence[Sequence[str]], width: int) -> Iterator[str]:
    """Yield a table whose first column wraps and whose others stand right."""
    safe = [[phrases.inert(cell) for cell in line] for line in cells]
    sizes = [max(map(phrases.display_width, column)) for column in zip(*safe, strict=True)]
    first = min(sizes[0], max(20, width - sum(sizes[1:]) - 2 * len(sizes)))
    for name, *numbers in safe:
        *above, last = phrases.wrap(name, first)
        yield from (f"  {text}" for text in above)
        parts = [" " * (size - phrases.display_width(number)) + number
                 for number, size in zip(numbers, sizes[1:], strict=True)]  # fmt: skip
        gap = " " * (first - phrases.display_width(last))
        yield "  ".join(["", last + gap, *parts]).rstrip()


def _candidates(net: NetResult) -> Iterator[list[str]]:
    """Yield every candidate with its cost and why it was not taken."""
    if net.candidates:
        yield ["no", "setting", "resistor", "changes", "share", "outcome"]
    for entry in net.candidates:
        yield [
            str(entry.candidate),
            ", ".join(map(_setting, entry.settings)),
            ", ".join(
                f"{phrases.engineering(part.value_ohm, 'ohm')} at {part.site}"
                for part in entry.resistors
            ),
            _cost(entry),
            "" if entry.smallest_share is None else f"{entry.smallest_share:+.2f}",
            _outcome(entry, net),
        ]


def _setting(entry: CandidateSetting) -> str:
    """Write a setting with its pin and, where it differs from running, its state."""
    state = "" if entry.state == "run" else f" ({entry.state})"
    return f"{entry.driver_pin} {entry.setting}{state}".strip()


def _cost(entry: Candidate) -> str:
    """Write the changes a candidate asks for."""
    cost = entry.cost
    counts = (
        (cost.setting, "setting"),
        (cost.value, "value"),
        (cost.link_to_value, "link to value"),
        (cost.new_site, "new site"),
    )
    return ", ".join(f"{count} {word}" for count, word in counts if count) or "none"


def _outcome(entry: Candidate, net: NetResult) -> str:
    """Tell whether a candidate is drawn or proposed, and why it was not taken."""
    words = [
        "as drawn" if entry.candidate == net.candidate_now else "",
        "proposed" if entry.candidate == net.proposal and _changes(net) else "",
        _passing(entry, net) if entry.passes else "",
        entry.why_rejected or ("" if entry.passes else _rejecting(entry, net)),
    ]
    return "; ".join(word for word in words if word)


def _passing(entry: Candidate, net: NetResult) -> str:
    """Tell why a candidate that passes was not taken: least change, then the largest share."""
    proposed = next((other for other in net.candidates if other.candidate == net.proposal), entry)
    if entry is proposed or entry.why_rejected:
        return "passes every check"
    if _dearness(entry) > _dearness(proposed):
        return "passes, dearer change"
    shares = (entry.smallest_share or 0.0, proposed.smallest_share or 0.0)
    if _dearness(entry) == _dearness(proposed) and shares[0] <= shares[1]:
        return "passes, smaller share"
    return "passes by itself, not with the other nets"


def _dearness(entry: Candidate) -> tuple[int, int, int, int]:
    """Return the changes of a candidate, the dearest kind first."""
    cost = entry.cost
    return cost.new_site, cost.link_to_value, cost.value, cost.setting


def _rejecting(entry: Candidate, net: NetResult) -> str:
    """Name the checks that reject a candidate without a sentence of its own."""
    known = [net.checks[index] for index in entry.rejected_by if 0 <= index < len(net.checks)]
    names = dict.fromkeys(check.check for check in known)
    return f"fails {', '.join(names)}" if names else "fails a check"
