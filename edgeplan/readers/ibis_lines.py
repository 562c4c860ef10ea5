"""Lines of a model file: comments taken off, keywords found, every line with its row."""

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

from edgeplan.readers.files import LINE_END

Tell = Callable[[int, str, str], None]

DEFAULT_COMMENT = "|"
# characters the standard lets a file choose for comments (EIA-656, [Comment Char])
COMMENTS = "!\"#$%&'()*,:;<>?@\\^`{|}~"
FREE_TEXT = (
    "source",
    "notes",
    "disclaimer",
    "copyright",
    "manufacturer",
    "date",
    "file name",
    "file rev",
)
_KEYWORD = re.compile(r"\[([^\[\]]*)\](.*)")
_INDENTED = re.compile(r"\s+\[([^\[\]]+)\]")
_BLANKS = re.compile(r"[\s_]+")
_MARK = "\u00ef\u00bb\u00bf"  # byte order mark of UTF-8, read as Latin-1


@dataclass(frozen=True, slots=True)
class Line:
    """Text of a line without its comment, and its row from 1."""

    text: str
    row: int

    @property
    def words(self) -> list[str]:
        """Words of the line."""
        return self.text.split()


@dataclass(frozen=True, slots=True)
class Section:
    """A keyword in small letters with blanks, what stands behind it, and the lines below it."""

    keyword: str
    argument: str
    row: int
    lines: list[Line] = field(default_factory=list)


def keyword_of(name: str) -> str:
    """Return a keyword as all files are compared: case, blanks and underscores do not count.

    Examples
    --------
    >>> keyword_of("GND_clamp"), keyword_of(" Model  Spec ")
    ('gnd clamp', 'model spec')
    """
    return _BLANKS.sub(" ", name).strip().lower()


def sections(text: str, known: frozenset[str], tell: Tell) -> list[Section]:
    r"""Split a text at its keywords.

    Parameters
    ----------
    text : str
        The file, decoded as Latin-1; any line end, any length of line.
    known : frozenset of str
        Keywords that exist, to notice an indented one.
    tell : callable
        Called with row, message and hint for everything strange.

    Returns
    -------
    list of Section
        Up to ``[End]``; lines before the first keyword are left out.

    Examples
    --------
    >>> for section in sections("[IBIS_Ver] 3.2 | as printed\n[Notes]\n one\n[End]\n",
    ...                         frozenset(), print):
    ...     print(section)
    Section(keyword='ibis ver', argument='3.2', row=1, lines=[])
    Section(keyword='notes', argument='', row=2, lines=[Line(text=' one', row=3)])
    """
    found: list[Section] = []
    indented: list[tuple[int, str, str]] = []
    for row, line in _uncommented(text, tell):
        keyword = _KEYWORD.match(line)
        if keyword:
            name = keyword_of(keyword[1])
            if name == "end":
                _tell_indented(found, indented, tell)
                return found
            found.append(Section(name, keyword[2].strip(), row))
            continue
        if line.startswith("["):
            tell(row, "a keyword opens with [ and never closes", "write it like [Model] name")
        if found and line.strip():
            found[-1].lines.append(Line(line.rstrip(), row))
            inner = _INDENTED.match(line)
            if inner and keyword_of(inner[1]) in known:
                indented.append((row, keyword_of(inner[1]), found[-1].keyword))
    _tell_indented(found, indented, tell)
    tell(found[-1].row if found else 1, "[End] is missing", "is the file complete?")
    return found


def _uncommented(text: str, tell: Tell) -> Iterator[tuple[int, str]]:
    """Rows and lines without comments; tabs are blanks."""
    mark = DEFAULT_COMMENT
    for row, raw in enumerate(LINE_END.split(text.removeprefix(_MARK)), start=1):
        line = raw.replace("\t", " ").replace("\f", " ").replace("\v", " ")
        keyword = _KEYWORD.match(line)
        if keyword and keyword_of(keyword[1]) == "comment char":
            mark = _new_mark(keyword[2].strip(), row, mark, tell)
            continue
        yield row, line.partition(mark)[0].rstrip()


def _new_mark(argument: str, row: int, mark: str, tell: Tell) -> str:
    """Return the comment character a file asks for, such as ``!_char``."""
    if re.match(r".[_ ]?char", argument, re.IGNORECASE) and argument[0] in COMMENTS:
        return argument[0]
    tell(row, f"{argument[:20]!r} is no comment character", "write [Comment Char] !_char")
    return mark


def _tell_indented(found: list[Section], indented: list[tuple[int, str, str]], tell: Tell) -> None:
    """Keywords count in column 1 only; a known one that stands nowhere else may be meant."""
    outside = {section.keyword for section in found}
    for row, name, inside in indented:
        if name not in outside and inside not in FREE_TEXT:
            message = f"[{name}] is indented and was taken for text"
            tell(row, message, "a keyword starts in column 1")
