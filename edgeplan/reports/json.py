"""The whole record for scripts: exact names, ``schema`` first, nine figures, never NaN."""

import json
import math
from dataclasses import fields, is_dataclass
from functools import cache
from typing import Any

from edgeplan.results import Results


def render(results: Results, *, width: int | None, colour: bool) -> str:  # noqa: ARG001
    """Write the record.

    Letters beyond ASCII are escaped, so that a name with a direction mark or half a surrogate
    pair is inert on a terminal and comes back exactly.

    Parameters
    ----------
    results : Results
        The record of one run.
    width, colour
        Have no meaning here.

    Returns
    -------
    str
        One JSON object, its last line ended.
    """
    record = {"schema": results.schema, **_plain(results)}
    text = json.dumps(record, indent=1, allow_nan=False)
    return text.replace("\x7f", "\\u007f") + "\n"


def _plain(value: Any) -> Any:
    """Turn records into dictionaries and round numbers; what is no number becomes null.

    >>> _plain([1.0000000001, float("nan"), 3, "a"])
    [1.0, None, 3, 'a']
    """
    if isinstance(value, float):
        return float(f"{value:.9g}") + 0.0 if math.isfinite(value) else None
    if isinstance(value, list | tuple):
        return [_plain(entry) for entry in value]
    if isinstance(value, dict):
        return {key: _plain(entry) for key, entry in value.items()}
    if is_dataclass(value):
        return {name: _plain(getattr(value, name)) for name in _names(value.__class__)}
    return value


@cache
def _names(record: Any) -> tuple[str, ...]:
    """Names of a record's fields, in their order."""
    return tuple(field.name for field in fields(record))
