"""Solutions remembered between runs: by content, safe, and never a reason to fail."""

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from edgeplan import solution_cache, starter
from edgeplan.solution_cache import remembered

CONTENT = ["line", 1, [0.18e-3, 35e-6]]
RUN = """
from edgeplan.solution_cache import remembered
for n in range(200):
    assert remembered(["n", n % 10], lambda: [n % 10 + 1 / 3]) == (float(f"{n % 10 + 1 / 3:.9g}"),)
"""


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.setenv("EDGEPLAN_CACHE", "1")
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    return tmp_path / "edgeplan"


@pytest.fixture
def solve():
    """Count how often it is asked."""

    def asked():
        asked.times += 1
        return [1 / 3, 2e-9 / 3]

    asked.times = 0
    return asked


def only_entry(folder):
    (entry,) = folder.iterdir()
    return entry


def test_the_same_content_is_solved_once(folder, solve):
    assert remembered(CONTENT, solve) == remembered(CONTENT, solve)
    assert solve.times == 1
    assert only_entry(folder).suffix == ".json"


def test_another_content_is_another_solution(folder, solve):
    remembered(CONTENT, solve)
    remembered([*CONTENT, 2], solve)
    assert solve.times == 2
    assert len(list(folder.iterdir())) == 2


@pytest.mark.usefixtures("folder")
def test_numbers_are_the_same_without_a_cache_when_written_and_when_read(solve, monkeypatch):
    written, read = remembered(CONTENT, solve), remembered(CONTENT, solve)
    monkeypatch.setenv("EDGEPLAN_CACHE", "0")
    assert written == read == remembered(CONTENT, solve) == (0.333333333, 6.66666667e-10)


@pytest.mark.usefixtures("folder")
def test_what_is_not_known_is_remembered_as_such():
    for _ in range(2):
        assert str(remembered(CONTENT, lambda: [float("nan")])) == "(nan,)"


@pytest.mark.parametrize(
    "damage",
    [
        lambda _: "",
        lambda text: text[:-9],
        lambda _: "[]",
        lambda _: "{}",
        lambda text: text.replace("0.333", "0.334"),
        lambda text: text.replace("0.00018", "0.00019"),
        lambda text: json.dumps(json.loads(text) | {"values": "abc"}),
    ],
)
def test_a_damaged_entry_is_solved_again_and_mended(damage, folder, solve):
    right = remembered(CONTENT, solve)
    entry = only_entry(folder)
    whole = entry.read_text("utf-8")
    entry.write_text(damage(whole), "utf-8")
    assert remembered(CONTENT, solve) == right
    assert solve.times == 2
    assert entry.read_text("utf-8") == whole


def test_bytes_that_are_no_text_are_solved_again(folder, solve):
    remembered(CONTENT, solve)
    only_entry(folder).write_bytes(b"\xff\xfe\x00")
    remembered(CONTENT, solve)
    assert solve.times == 2


def test_a_folder_that_cannot_be_written_is_no_error(tmp_path, folder, solve):
    folder.write_text("a file where the folder should be", "utf-8")
    assert remembered(CONTENT, solve) == (0.333333333, 6.66666667e-10)
    assert [path.name for path in tmp_path.iterdir()] == ["edgeplan"]


@pytest.mark.parametrize("off", ["0", "no", "False", "off"])
def test_switched_off_it_neither_reads_nor_writes(off, folder, solve, monkeypatch):
    monkeypatch.setenv("EDGEPLAN_CACHE", off)
    remembered(CONTENT, solve)
    remembered(CONTENT, solve)
    assert solve.times == 2
    assert not folder.exists()


def test_runs_side_by_side_never_see_half_an_entry(folder):
    runs = [subprocess.Popen([sys.executable, "-c", RUN], env=dict(os.environ)) for _ in range(4)]
    assert [run.wait() for run in runs] == [0] * 4
    assert len(list(folder.iterdir())) == 10  # and no temporary file is left


@pytest.mark.parametrize(
    ("platform", "variables", "expected"),
    [
        ("linux", {}, "home/.cache/edgeplan"),
        ("linux", {"XDG_CACHE_HOME": "not/absolute"}, "home/.cache/edgeplan"),
        ("darwin", {}, "home/Library/Caches/edgeplan"),
        ("win32", {"LOCALAPPDATA": "local"}, "local/edgeplan/cache"),
        ("win32", {}, "home/AppData/Local/edgeplan/cache"),
    ],
)
def test_the_folder_is_the_one_of_the_system(platform, variables, expected, monkeypatch):
    monkeypatch.setenv("EDGEPLAN_CACHE", "1")
    for name in ("XDG_CACHE_HOME", "LOCALAPPDATA"):
        monkeypatch.delenv(name, raising=False)
    for name, value in variables.items():
        monkeypatch.setenv(name, value)
    monkeypatch.setattr(sys, "platform", platform)
    monkeypatch.setattr(solution_cache.Path, "home", lambda: Path("home"))
    assert solution_cache.folder() == Path(expected)


def test_without_a_home_there_is_no_cache(monkeypatch, solve):
    def nowhere():
        raise RuntimeError("no home")

    monkeypatch.setenv("EDGEPLAN_CACHE", "1")
    monkeypatch.delenv("XDG_CACHE_HOME", raising=False)
    monkeypatch.setattr(solution_cache.Path, "home", nowhere)
    assert remembered(CONTENT, solve)[0] == 0.333333333


TOP = '  {layer = "L1", kind = "signal", thickness = "35 um"},'
MASK = (
    '  {layer = "mask", kind = "dielectric", thickness = "20 um", er = 3.5, loss_tangent = 0.03},'
)


@pytest.fixture
def masked(tmp_path):
    """Put solder mask over the board that `edgeplan start` writes."""
    board = tmp_path / "board"
    starter.write(board)
    file = board / "board.toml"
    text = file.read_text("utf-8")
    assert TOP in text
    file.write_text(text.replace(TOP, f"{MASK}\n{TOP}"), "utf-8")
    return board


def judged(board, folder, *options):
    """Return standard output of the command, whatever its verdict."""
    command = [sys.executable, "-m", "edgeplan", *options[:1], str(board), *options[1:]]
    environment = os.environ | {"XDG_CACHE_HOME": str(folder.parent)}
    environment.pop("EDGEPLAN_CACHE", None)
    run = subprocess.run(command, capture_output=True, env=environment, check=False)
    assert (run.returncode in (0, 1), run.stderr) == (True, b"")
    return run.stdout


def test_a_run_prints_the_same_with_a_cache_from_it_and_without(masked, folder):
    without = judged(masked, folder, "check", "--no-cache", "--format", "json")
    assert not folder.exists()
    assert judged(masked, folder, "check", "--format", "json") == without
    assert only_entry(folder).stat().st_size > 0
    assert judged(masked, folder, "check", "--format", "json") == without


def test_the_environment_switches_it_off_as_the_option_does(masked, folder, monkeypatch):
    told = judged(masked, folder, "explain", "LAMP_CLK")
    assert "field solution" in told.decode()
    assert re.search(r"solved to 0\.0\d+ %", told.decode())
    assert "mask taken as" in told.decode()
    only_entry(folder).unlink()
    command = [sys.executable, "-m", "edgeplan", "check", str(masked), "-q"]
    monkeypatch.setenv("EDGEPLAN_CACHE", "0")
    subprocess.run(command, capture_output=True, check=False)
    assert not list(folder.iterdir())
