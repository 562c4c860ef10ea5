r"""Reports: one module per format, each reading the results record and nothing else.

Every format module has ``render(results, *, width, colour) -> str``: the same record gives the
same bytes, lines end in ``\n``, and no clock, host or absolute path is in them.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from edgeplan.results import Results

FORMATS: dict[str, str] = {
    "table": "edgeplan.reports.table",
    "csv": "edgeplan.reports.csv",
    "json": "edgeplan.reports.json",
    "markdown": "edgeplan.reports.markdown",
}

# What ``explain`` can write: the text of one net beside the formats of a whole board.
ONE_NET_FORMATS: dict[str, str] = {"text": "edgeplan.reports.explain", **FORMATS}


def render(results: "Results", form: str, *, width: int | None = None, colour: bool = False) -> str:
    """Write a results record in one format.

    Parameters
    ----------
    results : Results
        The record of one run.
    form : str
        A key of ``ONE_NET_FORMATS``.
    width : int, optional
        Columns of the terminal; the formats that wrap take 150 without it. [-]
    colour : bool
        Whether words may be coloured as well.

    Returns
    -------
    str
        The whole report, ending in a line feed.

    Raises
    ------
    KeyError
        If no such format exists.
    """
    text: str = import_module(ONE_NET_FORMATS[form]).render(results, width=width, colour=colour)
    return text
