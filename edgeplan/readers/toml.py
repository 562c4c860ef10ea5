"""TOML with the row and column of every key, for problems told at their place."""

import re
import tomllib
from collections.abc import Sequence
from functools import cached_property
from typing import Any

import tree_sitter_toml
from tree_sitter import Language, Node, Parser

from edgeplan.errors import Problem
from edgeplan.readers.files import LINE_END, Where

Path = tuple[str | int, ...]
_AT = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_LABELS = ("name", "layer", "setting", "driver", "nets", "rule")


class Document:
    """A parsed TOML file that knows where each key stands."""

    def __init__(self, text: str, file: str) -> None:
        self.file = file
        self.text = text
        self.data: dict[str, Any] = tomllib.loads(text)

    def where(self, path: Sequence[str | int]) -> Where:
        """Return the place of a key, or of the nearest table around it.

        Parameters
        ----------
        path : sequence of str or int
            Keys and list indices from the top.

        Returns
        -------
        Where
            Rows and columns count from 1; the field reads "driver.smc9_a.settings.D3F.edge".
        """
        for depth in range(len(path), 0, -1):
            if place := self._places.get(tuple(path[:depth])):
                return Where(self.file, *place, self.label(path))
        return Where(self.file, 1, 1, self.label(path))

    def value(self, path: Sequence[str | int]) -> Any:
        """Return what stands at a path that exists."""
        found: Any = self.data
        for part in path:
            found = found[part]
        return found

    def label(self, path: Sequence[str | int]) -> str:
        """Return a path with names of tables in place of their numbers."""
        words = []
        for depth, part in enumerate(path):
            words.append(str(part) if isinstance(part, str) else self._name(path[: depth + 1]))
        return ".".join(words)

    def _name(self, path: Sequence[str | int]) -> str:
        """Name an element of a list by its own name, else by its number from 1."""
        element = self.value(path)
        if isinstance(element, dict):
            for key in _LABELS:
                if isinstance(element.get(key), str):
                    return str(element[key])
        return str(int(path[-1]) + 1)

    @cached_property
    def _places(self) -> dict[Path, tuple[int, int]]:
        """Row and column of every key; built on the first problem only."""
        content = self.text.encode()
        root = Parser(Language(tree_sitter_toml.language())).parse(content).root_node
        places = _Places(content)
        places.document(root)
        return places.found


class _Places:
    """Walks a syntax tree and notes where keys stand."""

    def __init__(self, content: bytes) -> None:
        self.lines = content.split(b"\n")
        self.found: dict[Path, tuple[int, int]] = {}
        self.tables: dict[Path, int] = {}

    def document(self, root: Node) -> None:
        """Visit top-level pairs and every table."""
        for node in root.named_children:
            if node.type == "pair":
                self.pair(node, ())
            elif node.type in ("table", "table_array_element"):
                self.table(node)

    def table(self, node: Node) -> None:
        """Visit one [table] or [[table]] and the pairs below it."""
        header, *pairs = (child for child in node.named_children if child.type != "comment")
        keys = _keys(header)
        path: Path = ()
        for key in keys[:-1]:
            path = self._last(self.note((*path, key), header))
        path = self.note((*path, keys[-1]), header)
        if node.type == "table_array_element":
            self.tables[path] = self.tables.get(path, -1) + 1
            path = self.note((*path, self.tables[path]), header)
        for pair in pairs:
            if pair.type == "pair":
                self.pair(pair, path)

    def _last(self, path: Path) -> Path:
        """Enter the newest element where the path is a list of tables."""
        return (*path, self.tables[path]) if path in self.tables else path

    def pair(self, node: Node, path: Path) -> None:
        """Note a key and visit its value."""
        key, *rest = (child for child in node.named_children if child.type != "comment")
        for part in _keys(key):
            path = self.note((*path, part), key)
        if rest:
            self.inside(rest[0], path)

    def inside(self, node: Node, path: Path) -> None:
        """Visit what an inline table or an array holds."""
        if node.type == "inline_table":
            for pair in node.named_children:
                if pair.type == "pair":
                    self.pair(pair, path)
        elif node.type == "array":
            elements = [child for child in node.named_children if child.type != "comment"]
            for index, element in enumerate(elements):
                self.inside(element, self.note((*path, index), element))

    def note(self, path: Path, node: Node) -> Path:
        """Keep the first place of a path; columns count characters, not bytes."""
        if path not in self.found:
            row, column = node.start_point
            before = self.lines[row][:column].decode("utf-8", "replace")
            self.found[path] = (row + 1, len(before) + 1)
        return path


def _keys(node: Node) -> list[str]:
    """Return the parts of a bare, quoted or dotted key."""
    if node.type == "dotted_key":
        return [part for child in node.named_children for part in _keys(child)]
    text = (node.text or b"").decode()
    return [text] if node.type == "bare_key" else list(tomllib.loads(f"{text} = 0"))


def read(text: str, file: str) -> Document | Problem:
    r"""Parse TOML.

    Parameters
    ----------
    text : str
        The file's text.
    file : str
        Its name, for problems.

    Returns
    -------
    Document or Problem
        The first syntax error stops the parser, so there is one problem at most.

    Examples
    --------
    >>> print(read("[board]\nname = SM-2", "board.toml"))
    board.toml:2:8: error: not TOML: Invalid value
      hint: texts stand in quotes, lists in [ ], tables in { } on one line
    >>> document = read('[[driver]]\nname = "d1"\nedge = 3', "board.toml")
    >>> document.where(("driver", 0, "edge"))
    Where(file='board.toml', row=3, column=1, field='driver.d1.edge')
    """
    # TOML knows no lone carriage return, but a spreadsheet on an old machine writes them
    text = "\n".join(LINE_END.split(text))
    try:
        return Document(text, file)
    except tomllib.TOMLDecodeError as error:
        return _syntax_problem(str(error), text, file)
    except RecursionError:
        return Where(file).problem("lists are nested too deeply")


def _syntax_problem(message: str, text: str, file: str) -> Problem:
    """Turn the parser's words into a problem with row and column."""
    at = _AT.search(message)
    words = message[: at.start()] if at else message
    lines = text.split("\n")
    row, column = len(lines), len(lines[-1]) + 1
    if at and at[1]:
        row, column = int(at[1]), int(at[2])
    hint = "texts stand in quotes, lists in [ ], tables in { } on one line"
    return Where(file, row, column).problem(f"not TOML: {words}", hint)
