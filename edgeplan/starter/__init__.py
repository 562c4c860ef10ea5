"""A small commented board folder to start from, as ``edgeplan start`` writes it."""

import os
import tempfile
from importlib.resources import files
from pathlib import Path

FILES = ("nets.csv", "board.toml")  # board.toml last: a folder without it is no board yet


def texts() -> dict[str, str]:
    """Return the starter's files by name.

    Returns
    -------
    dict of str to str
        Names relative to the folder, in the order in which they are written.

    Examples
    --------
    >>> list(texts())
    ['nets.csv', 'board.toml']
    """
    folder = files("edgeplan.starter")
    return {name: (folder / name).read_text(encoding="utf-8") for name in FILES}


def write(directory: Path) -> list[Path]:
    """Write the starter into a new or empty directory.

    Parameters
    ----------
    directory : Path
        Is made if it does not exist, with the directories above it.

    Returns
    -------
    list of Path
        The files written.

    Raises
    ------
    FileExistsError
        If the directory holds anything; nothing is written then.
    NotADirectoryError
        If a file has its name.

    Notes
    -----
    A new directory appears whole or not at all.  An empty one is filled file by file, each
    whole, so that a shell that stands in it keeps its place.
    """
    directory = Path(directory)
    if directory.exists() and any(directory.iterdir()):
        raise FileExistsError(f"{directory} is not empty: give a new or an empty directory")
    if directory.exists():
        for name, text in texts().items():
            _write_whole(directory / name, text)
    else:
        directory.parent.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory(dir=directory.parent, prefix=".starter-") as beside:
            made = Path(beside) / directory.name
            made.mkdir()
            for name, text in texts().items():
                (made / name).write_text(text, encoding="utf-8", newline="\n")
            made.rename(directory)
    return [directory / name for name in FILES]


def _write_whole(path: Path, text: str) -> None:
    """Write a file so that it is there whole or not at all."""
    handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=".starter-")
    try:
        with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
            file.write(text)
        Path(temporary).chmod(0o644)
        Path(temporary).replace(path)
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise
