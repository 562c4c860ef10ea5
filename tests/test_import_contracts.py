"""Import habits the layer contracts of pyproject.toml cannot see, and the name tables of rooms."""

import ast
from collections.abc import Iterator
from importlib import import_module
from pathlib import Path

import pytest

from edgeplan import emission, fidelity, reports, timing

PACKAGE = Path(__file__).parents[1] / "edgeplan"
MODULES = sorted(PACKAGE.rglob("*.py"))

# Each costs a run that does not need it a tenth of a second or more.
SLOW = ("joblib", "matplotlib", "scipy.constants", "scipy.interpolate", "scipy.optimize",
        "scipy.stats", "skrf")  # fmt: skip
CACHE = "solution_cache"  # its own folder of the user, never an input or a result
READS_FILES = {"readers", "outputs", CACHE}  # outputs: only to refuse writing over an input
READS_PACKAGE_DATA = {"limits", "levels", "starter"}
WRITES_FILES = {"outputs", "starter", CACHE}

READING = {"open", "read_bytes", "read_text", "loadtxt", "genfromtxt"}
WRITING = {"write_bytes", "write_text", "mkdir", "mkstemp", "savetxt"}

ROOMS = {
    timing: timing.CLASSES,
    fidelity: fidelity.SHAPES,
    emission: emission.MECHANISMS,
    reports: reports.ONE_NET_FORMATS,
}
NOT_IN_A_TABLE = {
    "edgeplan.emission.mechanism",  # what every mechanism is given
    "edgeplan.emission.edge_limit",  # inverts them all
    "edgeplan.reports.pictures",  # of --plot, not of --format
    "edgeplan.reports.at_line",  # parts shared by formats
    "edgeplan.reports.curves",
    "edgeplan.reports.phrases",
    "edgeplan.reports.rows",
    "edgeplan.reports.summary",
}


def room(path: Path) -> str:
    """Name of the room a file stands in."""
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def loaded_with(path: Path) -> Iterator[str]:
    """Modules that are imported when the file is, not when one of its functions runs."""
    for node in ast.parse(path.read_text(encoding="utf-8")).body:
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield node.module
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


def called_in(path: Path, names: set[str]) -> set[str]:
    """Return which of the functions and methods of these names a file calls."""
    calls = (n.func for n in ast.walk(ast.parse(path.read_text("utf-8"))) if type(n) is ast.Call)
    called = (c.id if type(c) is ast.Name else getattr(c, "attr", "") for c in calls)
    return names.intersection(called)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_slow_libraries_are_imported_inside_the_functions_that_need_them(path):
    slow = [m for m in loaded_with(path) if any(f"{m}.".startswith(f"{s}.") for s in SLOW)]
    assert slow == []


def test_only_readers_open_the_inputs_of_a_user():
    reading = {room(path) for path in MODULES if called_in(path, READING - {"open"})}
    assert reading <= READS_FILES | READS_PACKAGE_DATA
    opening = {room(p) for p in MODULES if '.open("' in p.read_text("utf-8")}
    assert opening <= READS_FILES


def test_only_the_command_line_writes():
    assert {room(path) for path in MODULES if called_in(path, WRITING)} <= WRITES_FILES


@pytest.mark.parametrize("head", ROOMS, ids=lambda head: head.__name__)
def test_every_file_of_a_room_stands_in_its_table_and_the_reverse(head):
    folder = Path(head.__file__).parent
    files = {f"{head.__name__}.{p.stem}" for p in folder.glob("*.py") if p.stem[0] != "_"}
    assert files - NOT_IN_A_TABLE == set(ROOMS[head].values())


@pytest.mark.parametrize("head", ROOMS, ids=lambda head: head.__name__)
def test_every_entry_of_a_table_offers_what_its_room_asks_for(head):
    asked = {timing: "checks", fidelity: "checks", emission: "MODEL", reports: "render"}[head]
    assert all(hasattr(import_module(module), asked) for module in ROOMS[head].values())
