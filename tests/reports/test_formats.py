"""What holds for every format: its place, its bytes, and names that cannot act."""

import dataclasses
import subprocess
import sys
from importlib import import_module
from pathlib import Path

import pytest

from edgeplan import reports

FOLDER = Path(reports.__file__).parent
GOLDEN = Path(__file__).parents[1] / "golden"
# Modules that formats share, and the picture, which is no text.
SHARED = {"__init__", "at_line", "curves", "phrases", "pictures", "rows", "summary"}
EVIL = "A\x1b[31m\x07B" + chr(0x202E) + "C" + chr(0x85) + chr(0xD800) + "\nD"
VIEWS = {
    "plan.txt": ("table", "record", 150),
    "plan_80.txt": ("table", "record", 80),
    "check.txt": ("table", "checked", 150),
    "plan.csv": ("csv", "record", None),
    "explain.json": ("json", "one_net", None),
    "plan.md": ("markdown", "record", None),
    "check.md": ("markdown", "checked", None),
    "explain.txt": ("text", "one_net", 150),
}


def test_table_of_formats_and_folder_agree():
    files = {path.stem for path in FOLDER.glob("*.py")} - SHARED
    assert {path.rpartition(".")[2] for path in reports.ONE_NET_FORMATS.values()} == files
    assert set(reports.FORMATS) < set(reports.ONE_NET_FORMATS)


@pytest.mark.parametrize("form", reports.ONE_NET_FORMATS)
def test_every_format_renders_by_its_name(form, results):
    module = import_module(reports.ONE_NET_FORMATS[form])
    text = module.render(results, width=None, colour=False)
    assert reports.render(results, form) == text
    assert "SDR_CLK" in text


def test_a_format_nobody_knows_is_a_key_error(results):
    with pytest.raises(KeyError, match="html"):
        reports.render(results, "html")


@pytest.mark.parametrize("form", reports.ONE_NET_FORMATS)
def test_lines_end_in_a_line_feed_and_nothing_else(form, results):
    text = reports.render(results, form)
    assert text.endswith("\n")
    assert not text.endswith("\n\n")
    assert "\r" not in text


@pytest.mark.parametrize("name", VIEWS)
def test_layout_is_the_one_agreed_on(name, sample):
    """Golden files hold the layout, not the numbers: read the difference, then accept it."""
    form, record, width = VIEWS[name]
    text = reports.render(getattr(sample, record)(), form, width=width)
    assert text.encode() == (GOLDEN / name).read_bytes()


def test_bytes_do_not_depend_on_the_process():
    code = (
        "import sys, runpy; from edgeplan import reports;"
        "record = runpy.run_path(sys.argv[1])['record']();"
        "print(''.join(reports.render(record, form) for form in reports.ONE_NET_FORMATS))"
    )
    command = [sys.executable, "-X", "utf8", "-c", code, str(Path(__file__).with_name("sample.py"))]
    first, second = (
        subprocess.run(
            command, capture_output=True, check=True, env={"PYTHONHASHSEED": seed}
        ).stdout
        for seed in ("1", "2")
    )
    assert first == second
    assert len(first) > 10_000


@pytest.mark.parametrize("form", reports.ONE_NET_FORMATS)
def test_a_name_cannot_act_on_a_terminal_or_turn_the_reading_order(form, sample):
    clean = sample.record()
    net = dataclasses.replace(
        clean.nets[0],
        net=EVIL,
        interface=EVIL,
        aliases=[EVIL],
        timing_class=EVIL,
        what_binds=EVIL,
        proposal_text=EVIL,
        notes=[EVIL],
        pictures=sample.pictures(),
    )
    names = [sample.NotJudged(net=EVIL, reason=EVIL)]
    taken = [sample.Assumption(subject=EVIL, text=EVIL, provenance="assumed")]
    evil = dataclasses.replace(
        clean, nets=[net], not_judged=names, assumptions=taken, board=EVIL, fill_in=[]
    )
    text = reports.render(evil, form)
    assert not [letter for letter in text if not letter.isprintable() and letter != "\n"]
    assert text.encode("utf-8")
    assert "u202e" in text
