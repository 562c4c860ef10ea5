"""Emission of one net at its binding line, and what one change would do there, as cells."""

from edgeplan.reports import phrases
from edgeplan.results import EmissionAtLine, WhatIf
from edgeplan.texts import text_ordinal

MECHANISM_HEAD = ("mechanism", "expected", "up to", "with its error", "share of the power")
WHAT_IF_HEAD = ("what if", "level", "change", "at this line", "then binds")
_STATES = {"now": "as drawn", "after": "after the proposal"}


def title(entry: EmissionAtLine) -> str:
    """Name the state and the line: frequency, harmonic and its parity, detector.

    Parameters
    ----------
    entry : EmissionAtLine
        Of the net as drawn or with its proposal.

    Returns
    -------
    str
        A heading.
    """
    harmonic = entry.parity if entry.order is None else f"harmonic {entry.order} ({entry.parity})"
    early = ", before firmware" if entry.driver_state == "boot" else ""
    at = phrases.engineering(entry.frequency_hz, "Hz")
    state = _STATES[entry.state]
    return f"Emission {state} where it binds: {at}, {harmonic}, {entry.detector}{early}"


def level(entry: EmissionAtLine) -> str:
    """Tell the level with its error band against limit and budget, in dBµV/m.

    Parameters
    ----------
    entry : EmissionAtLine
        Of the net as drawn or with its proposal.

    Returns
    -------
    str
        A sentence.
    """
    low, high = entry.low_dbuv_per_m, entry.high_dbuv_per_m
    known = low is not None and high is not None
    band = f", {_decibels(low or 0)} to {_decibels(high or 0)} with its error" if known else ""
    excess = entry.level_dbuv_per_m - entry.budget_dbuv_per_m
    return (
        f"level {_decibels(entry.level_dbuv_per_m)} dBµV/m{band}; "
        f"budget {_decibels(entry.budget_dbuv_per_m)}, limit {_decibels(entry.limit_dbuv_per_m)}: "
        f"{_against_budget(-excess)}"
    )


def mechanisms(entry: EmissionAtLine) -> list[list[str]]:
    """Return a row per mechanism under ``MECHANISM_HEAD``; levels in dBµV/m.

    Parameters
    ----------
    entry : EmissionAtLine
        Of the net as drawn or with its proposal.

    Returns
    -------
    list of list of str
        Cells.
    """
    return [
        [
            part.mechanism,
            _decibels(part.expected_dbuv_per_m),
            _decibels(part.up_to_dbuv_per_m),
            f"{_decibels(part.low_dbuv_per_m)} to {_decibels(part.high_dbuv_per_m)}",
            f"{part.power_share * 100:.0f} %",
        ]
        for part in entry.mechanisms
    ]


def what_if(entry: EmissionAtLine) -> list[list[str]]:
    """Return a row per change under ``WHAT_IF_HEAD``; levels in dBµV/m, changes in dB.

    Parameters
    ----------
    entry : EmissionAtLine
        Of the net as drawn or with its proposal.

    Returns
    -------
    list of list of str
        Cells.
    """
    return [_row(change, entry) for change in entry.what_if]


def notes(entry: EmissionAtLine) -> list[str]:
    """Return what was assumed for single changes, and which changes there are not.

    Parameters
    ----------
    entry : EmissionAtLine
        Of the net as drawn or with its proposal.

    Returns
    -------
    list of str
        Sentences, each once.
    """
    assumed = (f"{c.kind}: {c.assumption}" for c in entry.what_if if c.assumption)
    return list(dict.fromkeys([*assumed, *entry.notes]))


def _row(change: WhatIf, entry: EmissionAtLine) -> list[str]:
    """Put one change in cells."""
    after, moved = change.level_dbuv_per_m, change.change_db
    if after is None or moved is None:
        return [change.text, phrases.UNKNOWN, phrases.UNKNOWN, "not known", ""]
    return [
        change.text,
        _decibels(after),
        f"{round(moved, 1):+.1f}" if abs(moved) >= 0.05 else "0.0",
        _against_budget(entry.budget_dbuv_per_m - after),
        _binds(change, entry),
    ]


def _decibels(level: float) -> str:
    """Write a level to a tenth, without a sign before zero.

    >>> _decibels(-0.04), _decibels(-5.46)
    ('0.0', '-5.5')
    """
    return f"{round(level, 1) + 0.0:.1f}"


def _against_budget(margin_db: float) -> str:
    """Tell how far a level is from its budget.

    >>> _against_budget(-11.94), _against_budget(0.46), _against_budget(-0.02)
    ('over by 11.9', 'under by 0.5', 'over by < 0.1')
    """
    size = f"{abs(margin_db):.1f}" if abs(margin_db) >= 0.05 else "< 0.1"
    return f"{'over' if margin_db < 0 else 'under'} by {size}"


def _binds(change: WhatIf, entry: EmissionAtLine) -> str:
    """Tell which line binds with a change, and how far it is from its budget."""
    if change.binds_hz is None or change.binds_margin_db is None:
        return ""
    if change.binds_hz == entry.frequency_hz:
        return "the same line"
    number = "" if change.binds_order is None else f" ({text_ordinal(change.binds_order)})"
    at = phrases.engineering(change.binds_hz, "Hz")
    return f"{at}{number}, {_against_budget(change.binds_margin_db)}"
