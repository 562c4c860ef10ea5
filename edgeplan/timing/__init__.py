"""Timing checks, one file per timing class; each gives the slowest edge its nets allow."""

from collections.abc import Callable, Sequence
from importlib import import_module
from typing import Any

CLASSES = {
    "common-clock": "edgeplan.timing.common_clock",
    "source-synchronous": "edgeplan.timing.source_synchronous",
    "clock": "edgeplan.timing.clock",
    "strobe": "edgeplan.timing.strobe",
    "asynchronous": "edgeplan.timing.asynchronous",
    "open-drain": "edgeplan.timing.open_drain",
}


def checks_of(timing: str) -> Callable[[Any], Sequence[Any]]:
    """Function ``checks(seen)`` of one timing class, imported on first use.

    Parameters
    ----------
    timing : str
        A key of ``CLASSES``.

    Returns
    -------
    callable
        From what receivers see to a list of check tables.

    Examples
    --------
    >>> checks_of("strobe").__module__
    'edgeplan.timing.strobe'
    """
    found: Callable[[Any], Sequence[Any]] = import_module(CLASSES[timing]).checks
    return found
