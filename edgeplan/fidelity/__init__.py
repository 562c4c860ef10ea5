"""Checks of the shape of a received edge, one file each."""

from collections.abc import Callable, Sequence
from importlib import import_module
from typing import Any

SHAPES = {
    "overshoot": "edgeplan.fidelity.overshoot",
    "ringback": "edgeplan.fidelity.ringback",
    "plateau": "edgeplan.fidelity.plateau",
}


def checks_of(name: str) -> Callable[[Any], Sequence[Any]]:
    """Function ``checks(seen)`` of one fidelity check, imported on first use.

    Parameters
    ----------
    name : str
        A key of ``SHAPES``.

    Returns
    -------
    callable
        From what receivers see to a list of check tables.

    Examples
    --------
    >>> checks_of("overshoot").__module__
    'edgeplan.fidelity.overshoot'
    """
    found: Callable[[Any], Sequence[Any]] = import_module(SHAPES[name]).checks
    return found
