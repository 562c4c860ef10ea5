"""Documentation against what it describes: keys and columns, commands, and printed output."""

import re
import shlex
import subprocess
import sys
import tomllib
from dataclasses import fields
from pathlib import Path

import pytest

from edgeplan import schemas
from edgeplan.cli import main
from edgeplan.emission import MECHANISMS
from edgeplan.results import NetResult, Results
from edgeplan.timing import CLASSES
from edgeplan.units import QUANTITIES

ROOT = Path(__file__).parents[1]
DOCS = ROOT / "docs"
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md"]
PAGES += [p for p in sorted(DOCS.rglob("*.md")) if not {"_build", "_generated"} & {*p.parts}]
BOARD = schemas.board_schema()

OUTPUT = re.compile(r"<!-- output of: edgeplan (.+?) -->\n```text\n(.*?)```", re.DOTALL)
TOML = re.compile(r"```toml\n(.*?)```", re.DOTALL)
NUMBER = re.compile(r"\d+(?:\.\d+)?")
CLOSE = 0.05  # printed numbers may move so far before the page has to follow

PLAIN = {
    "string": "text",
    "boolean": "true or false",
    "number": "a number",
    "integer": "a whole number",
}


def takes(shape):
    """Say in words what a key takes."""
    if "enum" in shape:
        return ", ".join(f"`{word}`" for word in shape["enum"])
    if "$ref" in shape:
        return _named(shape["$ref"].rpartition("/")[2])
    if shape.get("format") == "date":
        return "a date"
    if shape.get("description"):
        return shape["description"].partition(":")[0]
    if "anyOf" in shape:
        return " or ".join(takes(each) for each in shape["anyOf"])
    if shape.get("type") == "array":
        return _list(shape)
    if shape.get("type") == "object":
        return "a table"
    return PLAIN[shape["type"]]


def _named(name):
    """Say in words what a named shape is."""
    quantity = name.removesuffix("Range")
    return "a table" if quantity == name else f"a {quantity.lower()} or its range"


def _list(shape):
    """Say in words what a list holds."""
    if "prefixItems" in shape:
        parts = [takes(each) for each in shape["prefixItems"]]
        pair = f"two {parts[0].removeprefix('a ')}s"
        return pair if parts[0] == parts[1] else " and ".join(parts)
    item = takes(shape["items"])
    return "a list of tables" if item == "a table" else f"a list of {item.removeprefix('a ')}"


def default_of(key, shape):
    """Write a key's default as the page does."""
    if key in shape.get("required", ()):
        return "needed"
    default = shape["properties"][key].get("default", "")
    if isinstance(default, bool):
        return f"`{str(default).lower()}`"
    return f"`{default}`" if default != "" else "–"


def rows_of(page):
    """Return the tables of a page: heading to rows of cells."""
    tables, heading = {}, ""
    for line in page.read_text("utf-8").splitlines():
        if line.startswith("#"):
            heading = line.lstrip("# ").strip("`")
        elif line.startswith("|") and not line.startswith(
            ("|---", "| key", "| header", "| field", "| quantity")
        ):
            cells = re.split(r"(?<!\\)\|", line)[1:-1]
            tables.setdefault(heading, []).append([cell.strip() for cell in cells])
    return tables


def described_shapes():
    """Return the shapes of the schema that have keys of their own."""
    shapes = {k: s for k, s in BOARD["$defs"].items() if "properties" in s}
    return [BOARD, *shapes.values()]


def test_every_key_of_the_board_file_is_described_with_what_it_takes_and_its_default():
    tables = rows_of(DOCS / "reference" / "board_toml.md").values()
    written = sorted(sorted(tuple(row[:3]) for row in rows) for rows in tables)
    known = sorted(
        sorted((f"`{key}`", takes(s), default_of(key, shape)) for key, s in keys.items())
        for shape in described_shapes()
        if (keys := shape["properties"])
    )
    assert written == known


def test_every_key_has_a_meaning():
    tables = rows_of(DOCS / "reference" / "board_toml.md")
    assert [row for rows in tables.values() for row in rows if not row[3]] == []


@pytest.mark.parametrize("table", ["nets.csv", "routes.csv"])
def test_every_column_is_described_with_its_headers_and_meaning(table):
    written = [tuple(row[:3]) for row in rows_of(DOCS / "reference" / "tables.md")[table]]
    known = [
        (", ".join(f"`{h}`" for h in c["headers"]), _holds(c), c["meaning"].replace("|", r"\|"))
        for c in schemas.net_list_schema()["tables"][table]
    ]
    assert written == known


def _holds(column):
    """Write what a cell holds as the page does."""
    words = ", ".join(f"`{word}`" for word in column.get("words", ()))
    return words or " ".join([column["holds"], column.get("bound", "")]).strip()


@pytest.mark.parametrize(("heading", "record"), [("Results", Results), ("nets", NetResult)])
def test_every_field_of_the_results_is_described(heading, record):
    written = [row[0] for row in rows_of(DOCS / "reference" / "results.md")[heading]]
    assert written == [f"`{field.name}`" for field in fields(record)]


def test_every_unit_is_described():
    page = rows_of(DOCS / "reference" / "units.md")["Units"]
    written = {row[0]: row[1].replace("`", "").split(", ") for row in page}
    known = {q.name.partition(" ")[2]: [u for u in q.units if u.isascii()] for q in QUANTITIES}
    assert written == known


def test_every_command_and_option_is_described():
    page = (DOCS / "reference" / "commands.md").read_text("utf-8")
    options = {o for c in main.commands.values() for p in c.params for o in p.opts if o[:2] == "--"}
    named = [f"edgeplan {name}" for name in main.commands] + sorted(options)
    assert [name for name in named if name not in page] == []


def test_every_timing_class_and_mechanism_has_its_place():
    timing = (DOCS / "explanation" / "timing.md").read_text("utf-8")
    assert [name for name in CLASSES if f"## {name}" not in timing] == []
    assert [name for name in MECHANISMS if not (DOCS / "models" / f"{name}.md").exists()] == []


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_toml_of_a_page_can_be_read(page):
    for text in TOML.findall(page.read_text("utf-8")):
        assert tomllib.loads(text)


def output_of(command):
    """Return the lines a command prints."""
    asked = [sys.executable, "-m", "edgeplan", *shlex.split(command)]
    done = subprocess.run(asked, cwd=ROOT, capture_output=True, text=True, timeout=120)
    return (done.stdout + done.stderr).splitlines()


def alike(shown, real):
    """Tell whether two lines have the same words and nearly the same numbers."""
    words = [NUMBER.sub("#", line).split() for line in (shown, real)]
    numbers = [[float(n) for n in NUMBER.findall(line)] for line in (shown, real)]
    return words[0] == words[1] and numbers[0] == pytest.approx(numbers[1], rel=CLOSE)


SHOWN = {}  # by command, so that each is run once
for _page in PAGES:
    for _command, _text in OUTPUT.findall(_page.read_text("utf-8")):
        SHOWN.setdefault(_command, []).append((_page.name, _text))


@pytest.mark.parametrize("command", SHOWN)
def test_output_in_the_documentation_is_what_the_command_prints(command):
    printed = output_of(command)
    for page, text in SHOWN[command]:
        real = iter(printed)
        shown = [line for line in text.splitlines() if line.strip() not in ("", "…")]
        lost = [line for line in shown if not any(alike(line, candidate) for candidate in real)]
        assert not lost, f"{page}: edgeplan {command} does not print, in this order:\n{lost[0]}"
