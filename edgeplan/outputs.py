"""Where results go: refused before anything is computed, or written whole."""

import hashlib
import os
import sys
import uuid
from collections.abc import Iterable, Mapping
from pathlib import Path

import click

STDOUT = Path("-")


def writable(path: Path) -> Path:
    """Return a path that can be written; refuse it before anything is computed otherwise.

    Parameters
    ----------
    path : Path
        Where a result shall stand; ``-`` is the standard output.

    Returns
    -------
    Path
        The same path.

    Raises
    ------
    click.BadParameter
        If it is a folder, its folder does not exist, or either may not be written.
    """
    folder = path.resolve().parent
    if path == STDOUT:
        return path
    if path.is_dir():
        raise click.BadParameter(f"{path} is a folder; name a file")
    if not folder.is_dir():
        raise click.BadParameter(f"{path}: there is no folder {path.parent}")
    if not os.access(path if path.exists() else folder, os.W_OK):
        raise click.BadParameter(f"{path} cannot be written")
    return path


def refuse_clashes(paths: Iterable[Path]) -> None:
    """Refuse two results for one place.

    Raises
    ------
    click.UsageError
        Naming the place.
    """
    seen: set[Path] = set()
    for path in paths:
        place = path if path == STDOUT else path.resolve()
        if place in seen:
            where = "the standard output" if path == STDOUT else path
            raise click.UsageError(f"{where} would be written twice; name another file")
        seen.add(place)


def refuse_inputs(hashes: set[str], contents: Mapping[Path, bytes]) -> None:
    """Refuse to write over a file the run has read.

    Parameters
    ----------
    hashes : set of str
        SHA-256 of every input.
    contents : mapping
        What goes where.

    Raises
    ------
    click.UsageError
        Naming the input.
    """
    for path in contents:
        if path.is_file() and hashlib.sha256(path.read_bytes()).hexdigest() in hashes:
            raise click.UsageError(f"{path} is an input of this run; name another file")


def write_whole(path: Path, content: bytes) -> None:
    """Write a file completely or not at all.

    The content goes to a temporary file beside it, reaches the disk, and takes the name in one
    step: whoever looks sees the old file or the new one, even after a kill.

    Parameters
    ----------
    path : Path
        File to write; a symbolic link keeps pointing, a device or a pipe is written directly.
    content : bytes
        All of it.
    """
    if path.exists() and not path.is_file():
        path.write_bytes(content)
        return
    target = path.resolve()
    part = target.with_name(f".{target.name[:80]}.{uuid.uuid4().hex}")
    try:
        with part.open("xb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        if target.exists():
            part.chmod(target.stat().st_mode)
        part.replace(target)
    finally:  # Ctrl-C comes here too
        part.unlink(missing_ok=True)


def print_whole(content: bytes) -> None:
    """Write the standard output; a reader that left early changes nothing.

    Parameters
    ----------
    content : bytes
        All of the result.

    Raises
    ------
    click.ClickException
        If it is closed, or its disk is full.
    """
    if sys.stdout is None:
        raise click.ClickException("the standard output is closed")
    try:
        sys.stdout.flush()
        sys.stdout.buffer.write(content)
        sys.stdout.buffer.flush()
    except OSError as error:
        # What is left in the buffer would fail once more when Python ends.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        if not isinstance(error, BrokenPipeError):
            raise click.ClickException(f"standard output: {error.strerror}") from error
