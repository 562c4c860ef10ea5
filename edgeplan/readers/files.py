"""Files of a board folder as text: inside the folder, of sane size, in UTF-8, with their hash."""

import hashlib
import re
from pathlib import Path
from typing import NamedTuple

from edgeplan.board import InputFile
from edgeplan.errors import Problem

LARGEST_FILE_BYTES = 64 * 1024 * 1024
LONGEST_LINE_BYTES = 1_000_000
LINE_END = re.compile(r"\r\n|\n|\r")
_LINE_END_BYTES = re.compile(rb"\r\n|\n|\r")


class Where(NamedTuple):
    """A place in an input file, and the field a person finds there."""

    file: str
    row: int = 1
    column: int = 1
    field: str = ""

    def problem(self, message: str, hint: str = "") -> Problem:
        """Return a problem at this place."""
        return Problem(message, self.file, self.row, self.column, self.field, hint)


class Folder:
    """Reads files of one board folder; collects their hashes and what is wrong with them."""

    def __init__(self, root: Path) -> None:
        self.root = root
        self.problems: list[Problem] = []
        self.inputs: dict[str, InputFile] = {}

    def has(self, name: str) -> bool:
        """Tell whether the folder holds something of this name, readable or not."""
        path = self.root / name
        return path.exists() or path.is_symlink()

    def read(self, name: str, named_at: Where | None = None) -> bytes | None:
        """Return the bytes of a file, or None after noting why not.

        Parameters
        ----------
        name : str
            Path relative to the folder.
        named_at : Where, optional
            Where an input names this file; problems of the path are told there.

        Returns
        -------
        bytes or None
            None if the file must not or cannot be read.
        """
        at = named_at or Where(name)
        try:
            path = self._inside(name)
            if path is None:
                hint = f"keep it in the board folder and name it like {Path(name).name}"
                self.problems.append(at.problem(f"{name!r} is outside the board folder", hint))
                return None
            content = self._bytes(path, name, at)
        except (OSError, ValueError) as error:  # ValueError: a NUL in the name
            reason = error.strerror if isinstance(error, OSError) else "no such file name"
            self.problems.append(at.problem(f"cannot read {name!r}: {reason}"))
            return None
        if content is not None:
            digest = hashlib.sha256(content).hexdigest()
            self.inputs[name] = InputFile(path=Path(name).as_posix(), sha256=digest)
        return content

    def text(self, name: str, named_at: Where | None = None) -> str | None:
        """Return a file as text without byte order mark, or None after noting why not."""
        content = self.read(name, named_at)
        if content is None:
            return None
        problem = _longest_line(content, name) or _encoding(content, name)
        if problem is None and not content.strip():
            problem = Where(name).problem("the file is empty")
        if problem is not None:
            self.problems.append(problem)
            return None
        return content.decode("utf-8-sig")

    def _inside(self, name: str) -> Path | None:
        """Resolve a relative name; None if it leads out of the folder, links followed."""
        path = (self.root / name).resolve()
        leaves = Path(name).is_absolute() or not path.is_relative_to(self.root.resolve())
        return None if leaves else path

    def _bytes(self, path: Path, name: str, at: Where) -> bytes | None:
        """Read a regular file of sane size."""
        if not path.exists():
            self.problems.append(at.problem(f"{name!r} is missing in the board folder"))
            return None
        if not path.is_file():
            self.problems.append(at.problem(f"{name!r} is not a file"))
            return None
        with path.open("rb") as file:
            content = file.read(LARGEST_FILE_BYTES + 1)
        if len(content) > LARGEST_FILE_BYTES:
            hint = "remove columns or nets that are not judged"
            self.problems.append(Where(name).problem("the file is larger than 64 MiB", hint))
            return None
        return content


def _longest_line(content: bytes, name: str) -> Problem | None:
    """Refuse a line no person and no export writes, before anything parses it."""
    start = 0
    row = 1
    for end in _LINE_END_BYTES.finditer(content):
        if end.start() - start > LONGEST_LINE_BYTES:
            break
        start, row = end.end(), row + 1
    else:
        if len(content) - start <= LONGEST_LINE_BYTES:
            return None
    hint = "is it the right file? A row ends with a line break"
    return Where(name, row).problem("the line is longer than 1,000,000 bytes", hint)


def _encoding(content: bytes, name: str) -> Problem | None:
    """Name the first byte that is not UTF-8, by row and column."""
    try:
        content.decode("utf-8")
    except UnicodeDecodeError as error:
        before = LINE_END.split(content[: error.start].decode("utf-8"))
        where = Where(name, len(before), len(before[-1]) + 1)
        byte = content[error.start]
        message = f"byte 0x{byte:02X} (byte {error.start + 1} of the file) is not UTF-8"
        return where.problem(message, 'save the file as "UTF-8" or "CSV UTF-8"')
    return None
