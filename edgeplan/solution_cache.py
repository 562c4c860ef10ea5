"""Solutions remembered between runs, in the user's cache folder, by what they were solved from.

A remembered solution is the one that would be found again, to the last digit. The folder may be
deleted at any time and shared by any number of runs.
"""

import hashlib
import json
import os
import sys
import uuid
from collections.abc import Callable, Sequence
from contextlib import suppress
from pathlib import Path

SWITCH = "EDGEPLAN_CACHE"
OFF = {"0", "n", "no", "f", "false", "off"}
DIGITS = 9  # far inside a solution's error, far outside what another processor rounds differently


def remembered(content: object, solve: Callable[[], Sequence[float]]) -> tuple[float, ...]:
    """A solution from the cache, or else solved and put there.

    Parameters
    ----------
    content : object
        All that decides the solution, the version of its solver included; lists, tuples,
        texts and numbers.
    solve : callable
        Finds the numbers.

    Returns
    -------
    tuple of float
        The numbers to nine significant digits, the same with a cache, without and from it.

    Notes
    -----
    ``EDGEPLAN_CACHE=0`` neither reads nor writes. An entry that is damaged or of another content
    is solved again; a folder that cannot be written is no error.

    Examples
    --------
    >>> from unittest.mock import patch
    >>> with patch.dict(os.environ, EDGEPLAN_CACHE="0"):
    ...     remembered(["third", 1], lambda: [1 / 3])
    (0.333333333,)
    """
    text = json.dumps(content)
    path = _place(text)
    found = None if path is None else _read(path, text)
    if found is None:
        found = tuple(float(f"{value:.{DIGITS}g}") for value in solve())
        if path is not None:
            with suppress(OSError):
                _write(path, text, found)
    return found


def folder() -> Path | None:
    """Folder of the cache, which need not exist; None where it is switched off or has no home.

    Returns
    -------
    Path or None
        ``edgeplan`` in ``XDG_CACHE_HOME``, else in the place of the system.

    Examples
    --------
    >>> from unittest.mock import patch
    >>> with patch.dict(os.environ, EDGEPLAN_CACHE="1", XDG_CACHE_HOME="/home/ann/cache"):
    ...     folder().as_posix()
    '/home/ann/cache/edgeplan'
    >>> with patch.dict(os.environ, EDGEPLAN_CACHE="0"):
    ...     print(folder())
    None
    """
    if os.environ.get(SWITCH, "").lower() in OFF:
        return None
    stated = Path(os.environ.get("XDG_CACHE_HOME", ""))
    if stated.is_absolute():
        return stated / "edgeplan"
    try:
        home = Path.home()
    except RuntimeError:
        return None
    local = os.environ.get("LOCALAPPDATA")
    if sys.platform == "win32":
        return (Path(local) if local else home / "AppData" / "Local") / "edgeplan" / "cache"
    return home / ("Library/Caches" if sys.platform == "darwin" else ".cache") / "edgeplan"


def _place(text: str) -> Path | None:
    """File of one solution."""
    base = folder()
    return None if base is None else base / f"{_digest(text)}.json"


def _digest(text: str) -> str:
    """Fingerprint of a text."""
    return hashlib.sha256(text.encode()).hexdigest()


def _read(path: Path, content: str) -> tuple[float, ...] | None:
    """Numbers of an entry, or None where it is missing, damaged or of another content."""
    try:
        entry = json.loads(path.read_text("utf-8"))
        values = entry["values"]
        if entry["content"] != content or entry["sha256"] != _digest(json.dumps(values)):
            return None
        return tuple(float(value) for value in values)
    except (OSError, ValueError, TypeError, KeyError):
        return None


def _write(path: Path, content: str, values: tuple[float, ...]) -> None:
    """Put an entry in its place in one step: another run sees all of it or nothing."""
    path.parent.mkdir(parents=True, exist_ok=True)
    entry = {"content": content, "values": values, "sha256": _digest(json.dumps(values))}
    part = path.with_name(f".{path.stem}.{uuid.uuid4().hex}")
    try:
        part.write_text(json.dumps(entry), "utf-8")
        part.replace(path)
    finally:
        part.unlink(missing_ok=True)
