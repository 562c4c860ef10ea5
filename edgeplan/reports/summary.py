"""What stands around the rows: what was judged, totals, changes, and what to mind."""

from collections.abc import Iterator
from dataclasses import dataclass

from edgeplan.names import natural_key
from edgeplan.reports import phrases
from edgeplan.results import BEYOND_MODEL, VERDICTS, BoardLine, Results

NOT_USED = "not used"  # the subject of an input that was accepted and has no effect yet
_NAMES_SHOWN = 6
_CONTRIBUTORS = 3


@dataclass(frozen=True, slots=True)
class Section:
    """A title and its sentences."""

    title: str
    lines: tuple[str, ...]


def heading(results: Results) -> tuple[str, str]:
    """Return two lines: the run, and what it was judged against."""
    target = results.emission_target
    limits = phrases.listed(target.limits) or "no limit line"
    first = f"edgeplan {results.tool.version} {results.command}: {results.board}"
    second = (
        f"emission: {limits}, margin {phrases.engineering(target.margin_db, 'dB')}, "
        f"{target.statistic} level, to {phrases.engineering(target.highest_hz, 'Hz')}; "
        f"corners {phrases.listed(results.conditions.corners)}; "
        f"states {phrases.listed(results.conditions.states)}"
    )
    return first, second


def totals(results: Results) -> list[list[str]]:
    """Return the counts per verdict: a heading, a row now and, unless for ``check``, one after."""
    rows = [["verdicts", *VERDICTS], ["now", *_counts(results.totals)]]
    if results.command != "check":
        rows.append(["after", *_counts(results.totals_after)])
    return rows


def _counts(counted: dict[str, int]) -> list[str]:
    """Write one count per verdict."""
    return [str(counted.get(verdict, 0)) for verdict in VERDICTS]


def sections(results: Results) -> list[Section]:
    """Return the sections below the rows, in the order a reader wants them.

    Parameters
    ----------
    results : Results
        The record of one run.

    Returns
    -------
    list of Section
        Sections without a sentence are left out; the caution comes last.
    """
    changes = (
        []
        if results.command == "check"
        else [
            ("Parts list", _values(results)),
            ("Banks and arrays", _common(results)),
        ]
    )
    parts = [
        *changes,
        ("Board emission", _board(results)),
        ("Findings waived", _waived(results)),
        ("Beyond the model", _beyond(results)),
        ("Not judged", _not_judged(results)),
        ("Fill in first", _fill_in(results)),
        ("Assumptions", _assumptions(results)),
        ("Models", _models(results)),
        ("Unverified", _unverified(results)),
        ("Caution", iter([results.caution])),
    ]
    found = [Section(title, tuple(lines)) for title, lines in parts]
    return [section for section in found if section.lines]


def _values(results: Results) -> Iterator[str]:
    """Tell how often each resistor value is fitted, now and after."""
    values = sorted(results.choice.values, key=lambda entry: entry.value_ohm)
    for entry in values:
        step = entry.count - entry.count_now
        change = f"{entry.count_now} now, {entry.count} after ({step:+d})" if step else "no change"
        count = "" if step else f"{entry.count} fitted, "
        yield f"{phrases.engineering(entry.value_ohm, 'ohm')}: {count}{change}"
    if values:
        yield _how_chosen(results)


def _how_chosen(results: Results) -> str:
    """Tell whether the choice is proved least, or how far it may be from it."""
    choice = results.choice
    gap = f", at most {phrases.engineering(choice.gap, '')} from the least" if choice.gap else ""
    return f"chosen per {choice.scope}: {choice.status}{gap}"


def _common(results: Results) -> Iterator[str]:
    """Tell the one setting of each bank and the one value of each array."""
    for bank in sorted(results.choice.banks, key=lambda entry: natural_key(entry.bank)):
        change = _change(bank.setting_now, bank.setting)
        yield f"bank {bank.bank}: setting {change}{_members(bank.members, bank.text)}"
    for array in sorted(results.choice.arrays, key=lambda entry: natural_key(entry.array)):
        now = phrases.engineering(array.value_now_ohm, "ohm")
        change = _change(now, phrases.engineering(array.value_ohm, "ohm"))
        yield f"array {array.array}: {change}{_members(array.members, array.text)}"


def _change(now: str, after: str) -> str:
    """Write a step, or that there is none."""
    return f"{after}, no change" if now == after else f"{now} → {after}"


def _members(members: list[str], text: str) -> str:
    """Write the members of a bank or an array with a reason."""
    named = f" ({phrases.listed(members, _NAMES_SHOWN)})" if members else ""
    return f"{named}; {text}" if text else named


def _board(results: Results) -> Iterator[str]:
    """Tell the worst frequency of the board, as drawn and as proposed."""
    emission = results.board_emission
    after = results.command != "check"
    if after and emission.lines_now:
        yield f"now: {_board_line(emission.lines_now[0])}"
    if emission.lines:
        yield f"{'after: ' if after else ''}{_board_line(emission.lines[0])}"


def _board_line(line: BoardLine) -> str:
    """Write one frequency with its three largest contributors."""
    excess = line.level_dbuv_per_m - line.budget_dbuv_per_m
    side = "over" if excess > 0 else "below"
    largest = sorted(line.contributors, key=lambda entry: -entry.share)[:_CONTRIBUTORS]
    names = [f"{entry.net} {phrases.engineering(entry.share, '')}" for entry in largest]
    return (
        f"worst at {phrases.engineering(line.frequency_hz, 'Hz')}, {line.detector}: "
        f"{line.level_dbuv_per_m:.1f} dBµV/m, {abs(excess):.1f} dB {side} the budget of "
        f"{line.budget_dbuv_per_m:.1f} ({line.sum} sum); most from {phrases.listed(names)}"
    )


def _waived(results: Results) -> Iterator[str]:
    """Tell findings that somebody accepted."""
    for finding in results.findings:
        if finding.waived is not None:
            yield f"{finding.net}: {finding.rule}: {finding.waived}"


def _beyond(results: Results) -> Iterator[str]:
    """Tell findings about what no model holds for, after their count."""
    found = [f for f in results.findings if f.rule in BEYOND_MODEL and f.waived is None]
    if found:
        count = f"{len(found)} finding{'s' if len(found) != 1 else ''}"
        yield f"{count} without a level; the exit code does not count them"
    for finding in found:
        yield f"{finding.message} ({finding.rule})"


def _grouped(pairs: list[tuple[str, str]]) -> dict[str, list[str]]:
    """Collect names under the words they share, words in order of their first name."""
    groups: dict[str, list[str]] = {}
    for words, name in pairs:
        groups.setdefault(words, []).append(name)
    return {words: sorted(dict.fromkeys(names), key=natural_key) for words, names in groups.items()}


def _not_judged(results: Results) -> Iterator[str]:
    """Tell every net outside the question, by reason: none is dropped."""
    groups = _grouped([(entry.reason, entry.net) for entry in results.not_judged])
    for reason, nets in groups.items():
        yield f"{reason} ({len(nets)}): {phrases.listed(nets)}"


def _fill_in(results: Results) -> Iterator[str]:
    """Tell missing values, the one that decides most nets first."""
    for entry in sorted(results.fill_in, key=lambda entry: -len(entry.nets)):
        count = f"{len(entry.nets)} net{'s' if len(entry.nets) != 1 else ''}"
        nets = phrases.listed(sorted(entry.nets, key=natural_key), _NAMES_SHOWN)
        yield f"{entry.value} of {entry.of}: decides {count} ({nets})"


def _assumptions(results: Results) -> Iterator[str]:
    """Tell inputs not yet used, all by name and first, then what was taken for granted."""
    unused = [entry.text for entry in results.assumptions if entry.subject == NOT_USED]
    named = [text.partition(": ")[2] or text for text in unused]
    if named:
        yield f"accepted, not used yet: {'; '.join(named)}"
    groups = _grouped(
        [(entry.text, entry.subject) for entry in results.assumptions if entry.subject != NOT_USED]
    )
    for text, subjects in groups.items():
        one = len(subjects) == 1
        yield (
            f"{subjects[0]}: {text}" if one else f"{text}: {phrases.listed(subjects, _NAMES_SHOWN)}"
        )


def _models(results: Results) -> Iterator[str]:
    """Tell the models levels rest on, each with its stated error."""
    for model in results.models:
        low, high = model.error_db.low, model.error_db.high
        error = f"±{high:.1f} dB" if high == -low else f"{low:+.1f} to {high:+.1f} dB"
        source = f" ({model.source})" if model.source else ""
        yield f"{model.model}, version {model.version}: {error}{source}"


def _unverified(results: Results) -> Iterator[str]:
    """Tell the tables that come from memory."""
    names = results.emission_target.unverified
    if names:
        yield f"from memory, to be compared with the printed edition: {phrases.listed(names)}"
