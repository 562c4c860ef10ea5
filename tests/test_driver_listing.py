"""Drivers of a model file: by selector, by pattern, alone; identical settings once."""

import csv
import json
import shutil
from pathlib import Path

import pytest
from driver_files import REGULAR

from edgeplan.driver_listing import listing
from edgeplan.driver_models import setting_fields
from edgeplan.driver_text import FORMATS, of_file
from edgeplan.errors import InputError
from edgeplan.readers import ibis, read_board

SMALL = Path(__file__).parent / "boards" / "small"
START, END = REGULAR.index("[Model] full"), REGULAR.index("[Model] in")
FULL = REGULAR[START:END]
HALF = (  # pull-down of 40 ohm
    FULL.replace("[Model] full", "[Model] half")
    .replace("-3.3  -165mA  -132mA  -206mA", "-3.3 -82.5mA -66mA -103mA")
    .replace(" 6.6   330mA   264mA   412mA", " 6.6 165mA 132mA 206mA")
)
TEXT = REGULAR.replace("[Model] in", f"{HALF}[Model] in")


def found(text=TEXT, pattern=None):
    file = ibis.read(text.encode(), "qx1.ibs").models
    return listing(file, file.components[0], 50.0, pattern)


def test_a_selector_is_a_driver_with_its_driving_models_as_settings():
    (driver,) = found().drivers
    assert (driver.driver, driver.pins) == ("dq", ("A1", "A2"))
    assert [(s.setting, s.about) for s in driver.settings] == [
        ("full", "all of it"),
        ("half", "one half of it"),
    ]


def test_a_model_outside_selectors_is_a_driver_of_its_own():
    drivers = found(TEXT.replace("half   one half of it\n", "")).drivers
    assert [(d.driver, len(d.settings)) for d in drivers] == [("dq", 1), ("half", 1)]


def test_a_pattern_puts_models_together_and_its_star_names_the_setting():
    text = TEXT.replace("[Model] full", "[Model] q_full").replace("[Model] half", "[Model] q_half")
    (driver,) = found(text, "q_*").drivers
    assert driver.driver == "q"
    assert [(s.setting, s.models) for s in driver.settings] == [
        ("full", ("q_full",)),
        ("half", ("q_half",)),
    ]


def test_models_that_say_the_same_are_one_setting_with_both_names():
    same = FULL.replace("[Model] full", "[Model] half")
    (driver,) = found(REGULAR.replace("[Model] in", f"{same}[Model] in")).drivers
    assert [s.models for s in driver.settings] == [("full", "half")]


def test_a_difference_in_one_corner_keeps_settings_apart():
    other = FULL.replace("[Model] full", "[Model] half").replace("6.0pF", "6.1pF")
    (driver,) = found(REGULAR.replace("[Model] in", f"{other}[Model] in")).drivers
    assert len(driver.settings) == 2


def test_inputs_and_what_is_left_out_are_listed():
    text = TEXT.replace("[Model] in", "[Model] coil\nModel_type Series\nC_comp 0\n[Model] in")
    row = text.splitlines().index("[Model] coil") + 1
    listed = found(text)
    assert [m.name for m in listed.inputs] == ["full", "half", "in"]
    assert listed.left_out == (("coil", row, "is of type series, which is not read"),)


def test_a_table_names_pins_selectors_settings_provenance_and_remarks():
    text = FORMATS["table"](found())
    rows = [line.split() for line in text.splitlines()]
    assert ["dq", "2", "A1", "A2"] in rows
    assert ["dq", "full", "all", "of", "it", "(default)"] in rows
    cells = next(row for row in rows if row[:2] == ["dq", "half"] and len(row) > 6)
    # 25 and 40 ohm with their package; slow 30 and 50, fast 20 and 32
    assert cells[2:4] == ["20/25.1/30.1", "32.1/40.1/50.1"]
    line = TEXT.splitlines().index("[Model] half") + 1
    assert cells[-2:] == ["model", f"qx1.ibs:{line}"]
    assert any("half: edge rising by waveform, 50 ohm to 0 V" in line for line in text.splitlines())


def board_with(tmp_path, block):
    """Copy the small board and give its nets the driver that was found."""
    shutil.copytree(SMALL, tmp_path, dirs_exist_ok=True)
    path = tmp_path / "board.toml"
    start = path.read_text().index("[[driver]]")
    end = path.read_text().index("[[receiver]]")
    path.write_text(path.read_text()[:start] + block + path.read_text()[end:])
    nets = tmp_path / "nets.csv"
    text = nets.read_text().replace("d1", "dq").replace("WEAK", "half").replace("STRONG", "full")
    nets.write_text(text)
    return tmp_path


def test_a_block_for_the_board_file_reads_back_with_the_same_numbers(tmp_path):
    listed = found()
    board = read_board(board_with(tmp_path, FORMATS["toml"](listed)))
    (driver,) = board.file.driver
    assert (driver.name, driver.programmable) == ("dq", True)
    for setting, wanted in zip(driver.settings, listed.drivers[0].settings, strict=True):
        assert (setting.setting, setting.provenance) == (wanted.setting, "model")
        assert setting.source == f"qx1.ibs:{wanted.values.model.row}"
        for field, value in setting_fields(wanted.values).items():
            read = getattr(setting, field)
            for end in ("min", "typ", "max"):
                assert getattr(read, end) == pytest.approx(getattr(value, end), rel=1e-3)


def test_the_comment_of_a_block_says_the_same_by_its_file(tmp_path):
    block = FORMATS["toml"](found())
    lines = block.splitlines()
    named = [line[2:] for line in lines if line.startswith(("# ibis", "# settings"))]
    inside = "\n".join(['[[driver]]\nname = "dq"\nprogrammable = true', *named]) + "\n"
    folder = board_with(tmp_path, inside)
    (folder / "qx1.ibs").write_text(TEXT)
    by_file = read_board(folder).file.driver[0]
    by_number = read_board(board_with(tmp_path / "other", block)).file.driver[0]
    for one, other in zip(by_file.settings, by_number.settings, strict=True):
        assert one.setting == other.setting
        assert one.edge_up_s.max == pytest.approx(other.edge_up_s.max, rel=1e-3)
        assert one.resistance_down_ohm.min == pytest.approx(other.resistance_down_ohm.min, rel=1e-3)


def test_strange_names_survive_the_way_through_a_block(tmp_path):
    name = 'a"\\\x7f\xb5'
    text = TEXT.replace("[Model] half", f"[Model] {name}").replace("half   one", f"{name} one")
    file = ibis.read(text.encode("latin-1"), "qx1.ibs").models
    block = FORMATS["toml"](listing(file, None, 50.0))
    folder = board_with(tmp_path, block)
    nets = folder / "nets.csv"
    nets.write_text(nets.read_text().replace("half", "full"))
    assert read_board(folder).file.driver[0].settings[1].setting == name


def test_json_holds_si_numbers_and_csv_a_row_per_setting():
    listed = found()
    data = json.loads(FORMATS["json"](listed))
    first = data["drivers"][0]["settings"][0]
    assert data["schema"] == "edgeplan/drivers/1"
    assert first["resistance_up_ohm"]["typ"] == pytest.approx(25.055)
    assert first["source"] == "qx1.ibs:17"
    assert data["inputs"][0]["vih_v"] == 2.0
    rows = list(csv.DictReader(FORMATS["csv"](listed).splitlines()))
    assert [row["setting"] for row in rows] == ["full", "half"]
    assert float(rows[0]["capacitance_max_pf"]) == pytest.approx(6.7)


def test_an_open_drain_has_no_upper_side_in_any_format():
    listed = found(TEXT.replace("Model_type  I/O", "Model_type Open_drain"))
    row = next(csv.DictReader(FORMATS["csv"](listed).splitlines()))
    assert row["resistance_up_typ_ohm"] == ""
    assert float(row["resistance_down_typ_ohm"]) == pytest.approx(20.055, abs=0.01)
    assert "resistance = {" in FORMATS["toml"](listed)


@pytest.mark.parametrize(
    ("component", "models", "told"),
    [("QX-2", None, 'did you mean "QX-1"?'), (None, "fall", 'did you mean "full"?')],
)
def test_names_that_fit_nothing_are_told_with_the_nearest(component, models, told):
    file = ibis.read(TEXT.encode(), "qx1.ibs").models
    with pytest.raises(InputError, match="no ") as refused:
        of_file(file, 50.0, component, models, "table")
    assert told in str(refused.value)
