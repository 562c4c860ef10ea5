"""The command that lists a model file: streams, exit codes, options."""

import json
import sys
from pathlib import Path

import pytest
from driver_files import REGULAR

from edgeplan import cli

EXAMPLE = Path(__file__).parents[1] / "examples" / "drivers" / "mr16.ibs"


@pytest.fixture
def run(monkeypatch, capfdbinary):
    """Return a function that runs the command line as a shell would see it."""

    def run(*arguments):
        monkeypatch.setattr(sys, "argv", ["edgeplan", "drivers", *map(str, arguments)])
        with pytest.raises(SystemExit) as end:
            cli.run()
        out, err = capfdbinary.readouterr()
        return end.value.code, out.decode(), err.decode()

    return run


@pytest.fixture
def strange(tmp_path):
    path = tmp_path / "qx1.ibs"
    path.write_text(REGULAR.replace("C_comp 3pF 2pF 4pF", "C_comp 3x"))
    return path


def test_a_regular_file_is_listed_without_a_word_beside(run):
    code, out, err = run(EXAMPLE)
    assert (code, err) == (0, "")
    assert "dq_half" in out


def test_errors_and_notes_stand_by_line_on_the_standard_error(run, strange):
    code, out, err = run(strange)
    assert code == 0
    assert "full" in out
    assert "qx1.ibs:14:1: note: selector 'dq': there is no model 'half'" in err
    assert "qx1.ibs:62:1: error: '3x' is too large for a capacitance" in err
    assert run(strange, "--quiet")[2] == ""


def test_strict_ends_with_2_and_prints_nothing(run, strange):
    code, out, err = run(strange, "--strict")
    assert (code, out) == (2, "")
    assert "qx1.ibs:14:1: note" in err


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (("--component", "MR-17"), "no component 'MR-17'"),
        (("--models", "dx_*"), "no driving model fits 'dx_*'"),
        (("--impedance", "0"), "0.0 is not in the range"),
    ],
)
def test_what_fits_nothing_ends_with_2(run, arguments, told):
    code, out, err = run(EXAMPLE, *arguments)
    assert (code, out) == (2, "")
    assert told in err


def test_the_impedance_moves_the_load_line(run):
    def typical(ohm):
        data = json.loads(run(EXAMPLE, "--format", "json", "--impedance", ohm)[1])
        return data["drivers"][0]["settings"][0]["resistance_up_ohm"]["typ"]

    assert typical(30) > typical(50) > typical(120)


def test_the_block_names_an_unusual_impedance(run):
    text = run(EXAMPLE, "--format", "toml", "--impedance", "90")[1]
    assert 'component = "MR-16", impedance = "90 ohm"}' in text


def test_the_listing_never_takes_the_place_of_its_file(run, strange):
    before = strange.read_bytes()
    code, _, err = run(strange, "--output", strange)
    assert (code, strange.read_bytes()) == (2, before)
    assert "is an input of this run" in err


@pytest.mark.parametrize("content", [b"", b"PK\x03\x04", bytes(range(256)) * 8])
def test_what_is_no_model_file_ends_with_2(run, tmp_path, content):
    path = tmp_path / "x.ibs"
    path.write_bytes(content)
    code, out, err = run(path)
    assert (code, out) == (2, "")
    assert "x.ibs:1:1: error" in err


def test_a_folder_is_refused(run, tmp_path):
    assert run(tmp_path)[0] == 2
