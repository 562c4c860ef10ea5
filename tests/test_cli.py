"""Commands: streams, exit codes, files whole or not at all.  The judging itself is replaced."""

import os
import random
import runpy
import signal
import subprocess
import sys
import time
from pathlib import Path
from types import ModuleType

import pytest
from click.testing import CliRunner

from edgeplan import cli, outputs
from edgeplan.errors import InputError, Problem

SAMPLE = Path(__file__).parent / "reports" / "sample.py"
HEAVY = ("numpy", "scipy", "skrf", "matplotlib", "pydantic")

# Runs the real command line in a process of its own with a judge that does what ``how`` says.
DRIVER = """
import runpy, sys, time, types
sample, how, *rest = sys.argv[1:]
sys.path.insert(0, "")
def judge(*board, **options):
    if how == "slow":
        print("judging", file=sys.stderr, flush=True)
        time.sleep(60)
    record = runpy.run_path(sample)["record"]
    nets = record().nets
    return record(nets=nets * (50 if how == "long" else 1))
plan = types.ModuleType("edgeplan.plan")
plan.plan = plan.check = plan.explain = judge
verdicts = types.ModuleType("edgeplan.verdicts")
verdicts.exit_code = lambda results: 1 if how != "clean" else 0
import edgeplan
sys.modules.update({"edgeplan.plan": plan, "edgeplan.verdicts": verdicts})
edgeplan.verdicts = verdicts
sys.argv = ["edgeplan", *rest]
from edgeplan import cli
cli.run()
"""


def _command(how, *rest):
    return [sys.executable, "-c", DRIVER, str(SAMPLE), how, *map(str, rest)]


@pytest.fixture
def asked(monkeypatch):
    """Replace the judging; return what it was asked."""
    sample = runpy.run_path(str(SAMPLE))
    asked = {}

    def judge(*places, **options):
        asked.update(options, places=places)
        return asked.get("results") or sample["one_net" if len(places) > 1 else "record"]()

    plan, verdicts = ModuleType("edgeplan.plan"), ModuleType("edgeplan.verdicts")
    plan.plan = plan.check = plan.explain = judge
    verdicts.exit_code = lambda results: 1 if results.findings else 0
    monkeypatch.setitem(sys.modules, "edgeplan.plan", plan)
    monkeypatch.setitem(sys.modules, "edgeplan.verdicts", verdicts)
    monkeypatch.setattr("edgeplan.verdicts", verdicts, raising=False)
    asked["judge"] = plan
    return asked


@pytest.fixture
def run(monkeypatch, capfdbinary):
    """Return a function that runs the command line as a shell would see it."""

    def run(*arguments):
        monkeypatch.setattr(sys, "argv", ["edgeplan", *map(str, arguments)])
        with pytest.raises(SystemExit) as end:
            cli.run()
        out, err = capfdbinary.readouterr()
        return end.value.code, out.decode(), err.decode()

    return run


def test_help_loads_nothing_heavy():
    command = [sys.executable, "-X", "importtime", "-m", "edgeplan", "plan", "--help"]
    done = subprocess.run(command, capture_output=True, check=True, text=True)
    loaded = {
        line.rpartition("|")[2].strip().partition(".")[0] for line in done.stderr.splitlines()
    }
    assert "click" in loaded
    assert not loaded & set(HEAVY)


@pytest.mark.parametrize(
    "command", ["plan", "check", "explain", "drivers", "limits", "start", "schema"]
)
def test_every_command_tells_its_exit_codes(command):
    text = CliRunner().invoke(cli.main, [command, "--help"]).output
    assert "Exit: 0" in " ".join(text.split())


@pytest.mark.usefixtures("asked")
def test_the_result_alone_is_on_the_standard_output(run, tmp_path):
    code, out, err = run("plan", tmp_path)
    assert out.startswith("edgeplan ")
    assert out.endswith("not judged.\n")
    assert (code, err) == (1, "")


def test_options_reach_the_run(asked, run, tmp_path):
    run("check", tmp_path, "--undecided", "warn", "--jobs", "3")
    assert (asked["undecided"], asked["jobs"], asked["places"]) == ("warn", 3, (tmp_path,))


@pytest.mark.usefixtures("asked")
def test_an_environment_variable_is_a_default(run, tmp_path, monkeypatch):
    monkeypatch.setenv("EDGEPLAN_PLAN_FORMAT", "json")
    assert run("plan", tmp_path)[1].startswith("{")
    assert run("plan", tmp_path, "--format", "csv")[1].startswith("net,")


def test_explain_takes_a_net_and_writes_text_and_picture(asked, run, tmp_path):
    plot = tmp_path / "net.svg"
    code, out, err = run("explain", tmp_path, "SDR_CLK", "--plot", plot)
    assert asked["places"] == (tmp_path, "SDR_CLK")
    assert "Window now" in out
    assert plot.read_bytes().startswith(b"<?xml")
    assert (code, err) == (1, f"wrote {plot}\n")


@pytest.mark.usefixtures("asked")
def test_every_wanted_format_comes_from_one_run(run, tmp_path):
    csv, markdown, table = tmp_path / "a.csv", tmp_path / "a.md", tmp_path / "a.txt"
    code, out, err = run(
        "plan",
        tmp_path,
        "-q",
        "-o",
        table,
        "--write",
        f"csv={csv}",
        "--write",
        f"markdown={markdown}",
    )
    assert (code, out, err) == (1, "", "")
    assert csv.read_text().startswith("net,")
    assert markdown.read_text().startswith("## ")
    assert table.read_text().startswith("edgeplan ")
    assert sorted(tmp_path.iterdir()) == [csv, markdown, table]


@pytest.mark.usefixtures("asked")
def test_nothing_is_written_when_one_format_cannot_be_rendered(run, tmp_path, monkeypatch):
    monkeypatch.setattr("edgeplan.reports.markdown.render", lambda *_, **__: 1 / 0)
    arguments = ("--write", f"csv={tmp_path}/a.csv", "--write", f"markdown={tmp_path}/a.md")
    code, out, err = run("plan", tmp_path, *arguments)
    assert (code, out) == (2, "")
    assert "ZeroDivisionError" in err
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("--format", "pdf"), "'pdf' is not one of"),
        (("--write", "pdf=a.pdf"), "no format 'pdf'; there are table, csv"),
        (("--write", "csv"), "write csv=PATH"),
        (("-o", "no/such/folder/a.txt"), "there is no folder no/such/folder"),
        (("--write", "csv=no/such/a.csv"), "there is no folder no/such"),
        (("-o", "."), ". is a folder"),
        (("-o", "a.txt", "--write", "csv=./a.txt"), "would be written twice"),
        (("--write", "csv=-"), "the standard output would be written twice"),
        (("--jobs", "0"), "x>=1"),
        (("--colour",), "No such option"),
    ],
)
def test_a_wrong_command_is_refused_before_anything_is_judged(
    arguments, message, asked, run, tmp_path, monkeypatch
):
    monkeypatch.chdir(tmp_path)
    code, out, err = run("plan", tmp_path, *arguments)
    assert (code, out) == (2, "")
    assert message in err
    assert "places" not in asked


def test_a_picture_of_another_kind_is_refused_before_anything_is_judged(asked, run, tmp_path):
    code, _, err = run("explain", tmp_path, "A", "--plot", tmp_path / "a.pdf")
    assert code == 2
    assert "a picture ends in .svg or .png" in err
    assert "places" not in asked


def test_a_board_that_is_not_there_is_no_finding(run, tmp_path):
    code, out, err = run("plan", tmp_path / "none")
    assert (code, out) == (2, "")
    assert "does not exist" in err


def test_faults_of_the_input_are_printed_and_cannot_act(asked, run, tmp_path):
    def judge(*_, **__):
        raise InputError([Problem("'\x1b[2J' is no net", "nets.csv", 3, 1, hint="a\u202eb")])

    asked["judge"].check = judge
    code, out, err = run("check", tmp_path, "-o", tmp_path / "a.txt")
    assert (code, out) == (2, "")
    assert err == "nets.csv:3:1: error: '\\x1b[2J' is no net\n  hint: a\\u202eb\n"
    assert not list(tmp_path.iterdir())


def test_a_fault_of_ours_shows_a_traceback_and_is_no_finding(asked, run, tmp_path):
    asked["judge"].plan = lambda *_, **__: 1 / 0
    code, out, err = run("plan", tmp_path)
    assert (code, out) == (2, "")
    assert "Traceback" in err


def test_an_input_is_never_written_over(asked, run, tmp_path):
    import dataclasses
    import hashlib

    nets = tmp_path / "nets.csv"
    nets.write_text("net\nA\n")
    entry = runpy.run_path(str(SAMPLE))
    digest = hashlib.sha256(nets.read_bytes()).hexdigest()
    inputs = [entry["Input"](path="nets.csv", sha256=digest)]
    asked["results"] = dataclasses.replace(entry["record"](), inputs=inputs)
    code, _, err = run("plan", tmp_path, "-o", nets)
    assert code == 2
    assert "is an input of this run" in err
    assert nets.read_text() == "net\nA\n"


@pytest.mark.parametrize(
    ("option", "environment", "coloured"),
    [
        ("auto", {}, False),
        ("auto", {"FORCE_COLOR": "1"}, True),
        ("auto", {"FORCE_COLOR": "1", "NO_COLOR": "1"}, False),
        ("auto", {"FORCE_COLOR": "1", "NO_COLOR": ""}, True),
        ("always", {"NO_COLOR": "1"}, True),
        ("never", {"FORCE_COLOR": "1"}, False),
    ],
)
@pytest.mark.usefixtures("asked")
def test_colour_follows_the_option_then_the_environment(
    option, environment, coloured, run, tmp_path, monkeypatch
):
    for name in ("NO_COLOR", "FORCE_COLOR"):
        monkeypatch.delenv(name, raising=False)
    for name, value in environment.items():
        monkeypatch.setenv(name, value)
    assert ("\x1b[3" in run("plan", tmp_path, "--color", option)[1]) is coloured


def test_bytes_do_not_depend_on_the_encoding_of_the_terminal(tmp_path):
    first, second = (
        subprocess.run(
            _command("plain", "plan", tmp_path),
            capture_output=True,
            check=False,
            env={**os.environ, "PYTHONIOENCODING": encoding, "COLUMNS": columns},
        )
        for encoding, columns in (("ascii", "60"), ("utf-8", "200"))
    )
    assert (first.returncode, second.returncode) == (1, 1)
    assert first.stdout == second.stdout
    assert "Ω".encode() in first.stdout


@pytest.mark.parametrize(("how", "code"), [("long", 1), ("clean", 0)])
def test_a_closed_pipe_keeps_the_verdicts_code(how, code, tmp_path):
    command = _command(how, "plan", tmp_path, "--format", "json")
    first = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    head = subprocess.run(["head", "-1"], stdin=first.stdout, capture_output=True, check=True)
    first.stdout.close()
    assert head.stdout == b"{\n"
    assert first.wait() == code
    assert first.stderr.read() == b""
    first.stderr.close()


def test_a_full_disk_behind_the_standard_output_is_no_verdict(tmp_path):
    if not Path("/dev/full").exists():
        pytest.skip("needs a device that is always full")
    with open("/dev/full", "wb") as full:  # noqa: PTH123 - a device, no file
        done = subprocess.run(
            _command("plain", "plan", tmp_path), stdout=full, stderr=subprocess.PIPE, check=False
        )
    assert done.returncode == 2
    assert done.stderr == b"error: standard output: No space left on device\n"


def _hears_ctrl_c():
    """Undo what a shell does to the jobs it starts in the background: they ignore Ctrl-C."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)


def test_ctrl_c_ends_in_130_and_leaves_the_old_result(tmp_path):
    old = tmp_path / "a.csv"
    old.write_text("old")
    process = subprocess.Popen(
        _command("slow", "plan", tmp_path, "-o", old),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        preexec_fn=_hears_ctrl_c,
    )
    assert process.stderr.readline() == b"judging\n"
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=20)
    assert (process.returncode, out) == (130, b"")
    assert b"Traceback" not in err
    assert old.read_text() == "old"
    assert list(tmp_path.iterdir()) == [old]


def test_ctrl_c_while_writing_leaves_no_temporary_file(tmp_path, monkeypatch):
    old = tmp_path / "a.csv"
    old.write_text("old")

    def interrupt(_descriptor):
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "fsync", interrupt)
    with pytest.raises(KeyboardInterrupt):
        outputs.write_whole(old, b"new")
    assert old.read_text() == "old"
    assert list(tmp_path.iterdir()) == [old]


def test_a_kill_at_any_moment_leaves_the_old_file_or_the_new_one(tmp_path):
    """Write over one file again and again, and kill the writer at a random moment."""
    target = tmp_path / "a.bin"
    size = 200_000
    code = (
        "import sys; from pathlib import Path; from edgeplan.outputs import write_whole\n"
        "while True:\n"
        f" for letter in b'ab': write_whole(Path(sys.argv[1]), bytes([letter]) * {size})"
    )
    moments = random.Random(7)  # noqa: S311 - moments of a kill, seeded
    for _ in range(6):
        process = subprocess.Popen([sys.executable, "-c", code, str(target)])
        deadline = time.monotonic() + 20
        while not target.exists() and time.monotonic() < deadline:
            time.sleep(0.01)
        time.sleep(moments.uniform(0.0, 0.15))
        process.kill()
        process.wait()
        content = target.read_bytes()
        assert content in (b"a" * size, b"b" * size)
        target.write_bytes(b"a" * size)


def test_a_written_file_keeps_the_permissions_of_the_old_one(tmp_path):
    target = tmp_path / "a.txt"
    target.write_text("old")
    target.chmod(0o640)
    outputs.write_whole(target, b"new")
    assert (target.read_text(), target.stat().st_mode & 0o777) == ("new", 0o640)


def test_a_symbolic_link_keeps_pointing(tmp_path):
    target, link = tmp_path / "a.txt", tmp_path / "link"
    target.write_text("old")
    link.symlink_to(target)
    outputs.write_whole(link, b"new")
    assert link.is_symlink()
    assert target.read_text() == "new"


def test_a_device_is_written_and_stays_a_device():
    outputs.write_whole(Path(os.devnull), b"new")
    assert not Path(os.devnull).is_file()


def test_progress_waits_for_patience_and_never_with_quiet(monkeypatch, capsys):
    monkeypatch.setattr(sys.stderr, "isatty", lambda: True)
    moments = iter([0.0, 1.9, 2.1])
    monkeypatch.setattr(cli.time, "monotonic", lambda: next(moments))
    with cli._progress(quiet=False) as told:
        told("waveforms", 0.1)
        told("waveforms", 0.5)
    assert capsys.readouterr().err.startswith("\rwaveforms 50%")
    with cli._progress(quiet=True) as told:
        assert told is None


def test_limits_are_listed_and_one_is_printed(run):
    code, out, _ = run("limits")
    assert code == 0
    assert "cispr32-class-b-3m" in out
    assert "230" in run("limits", "cispr32-class-b-3m")[1]


def test_a_limit_line_nobody_knows_is_refused(run):
    code, out, err = run("limits", "cispr99")
    assert (code, out) == (2, "")
    assert "cispr99" in err


def test_schemas_are_printed_by_the_names_there_are(run):
    from edgeplan import schemas

    assert tuple(schemas.SCHEMAS) == cli.SCHEMAS
    for name in cli.SCHEMAS:
        code, out, err = run("schema", name)
        assert (code, out, err) == (0, schemas.text(name), "")
    assert run("schema")[1] == schemas.text()


def test_pictures_are_those_that_can_be_drawn():
    from edgeplan.reports import pictures

    assert cli.PICTURES == pictures.SUFFIXES


def test_a_starter_folder_is_written_and_never_over_anything(run, tmp_path):
    folder = tmp_path / "board"
    code, out, err = run("start", folder)
    assert (code, out) == (0, "")
    assert err == f"next: edgeplan plan {folder}\n"
    code, _, err = run("start", folder)
    assert code == 2
    assert "is not empty" in err
    assert "Traceback" not in err


def test_several_processes_without_the_package_for_them_are_refused(monkeypatch, capsys):
    import importlib.util

    from edgeplan import cli

    monkeypatch.setattr(importlib.util, "find_spec", lambda _: None)
    monkeypatch.setattr("sys.argv", ["edgeplan", "plan", ".", "--jobs", "2"])
    with pytest.raises(SystemExit) as stopped:
        cli.run()
    assert stopped.value.code == 2
    assert "edgeplan[parallel]" in capsys.readouterr().err
