"""Boards whose drivers and inputs stand in model files: filled, overridden, refused by place."""

import random
import shutil
from pathlib import Path

import pytest
from driver_files import REGULAR

from edgeplan.board import Setting
from edgeplan.drives import setting_corners
from edgeplan.errors import InputError
from edgeplan.plan import check
from edgeplan.readers import read_board

SMALL = Path(__file__).parents[1] / "boards" / "small"
DRIVER = """\
[[driver]]
name = "d1"
programmable = true
ibis = {file = "models/qx1.ibs"}
settings = [
  {setting = "WEAK", model = "full"},
  {setting = "STRONG", resistance = {min = "15 ohm", max = "25 ohm"}, edge = {max = "1.1 ns"}},
]
"""
RECEIVER = """\
[[receiver]]
name = "r1"
ibis = {file = "models/qx1.ibs", model = "in"}
"""


@pytest.fixture
def folder(tmp_path):
    """Copy the small board and let its weak setting and its input stand in a model file."""
    shutil.copytree(SMALL, tmp_path, dirs_exist_ok=True)
    (tmp_path / "models").mkdir()
    (tmp_path / "models" / "qx1.ibs").write_text(REGULAR)
    return tmp_path


def write(folder, driver=DRIVER, receiver='[[receiver]]\nname = "r1"\ncapacitance = "5 pF"\n'):
    path = folder / "board.toml"
    text = (SMALL / "board.toml").read_text()
    path.write_text(text[: text.index("[[driver]]")] + driver + receiver)


def board_of(folder, *pairs, receiver=None):
    driver = DRIVER
    for old, new in pairs:
        assert old in driver
        driver = driver.replace(old, new)
    write(folder, driver, *([receiver] if receiver else []))
    return read_board(folder)


def problems_of(folder, *pairs, receiver=None):
    with pytest.raises(InputError) as refused:
        board_of(folder, *pairs, receiver=receiver)
    return str(refused.value)


def test_a_setting_takes_what_its_model_says(folder):
    weak = board_of(folder).file.driver[0].settings[0]
    # 25 ohm up and 20 ohm down, 30 and 25 slow, 20 and 16 fast, and 55 mohm of package
    assert weak.resistance_up_ohm.typ == pytest.approx(25.055)
    assert weak.resistance_down_ohm.max == pytest.approx(25.06, abs=1e-3)
    assert weak.resistance_up_ohm.min == pytest.approx(20.04, abs=1e-3)
    assert weak.capacitance_f.max == pytest.approx(6.7e-12)
    assert weak.source == "models/qx1.ibs:17"
    corners = setting_corners(weak)
    assert corners.missing == ()
    assert corners.resistance_ohm["falling"].slow == pytest.approx(25.06, abs=1e-3)
    assert corners.ramp_s["rising"].provenance == "model"


def test_a_setting_without_a_model_stays_as_it_is_written(folder):
    strong = board_of(folder).file.driver[0].settings[1]
    assert type(strong) is Setting
    assert strong.provenance_of("edge_s") == "datasheet"


def test_own_values_win_and_keep_their_provenance(folder):
    own = 'model = "full", resistance_up = {min = "10 ohm", max = "12 ohm"}, capacitance = "9 pF"'
    weak = board_of(folder, ('model = "full"', own)).file.driver[0].settings[0]
    corners = setting_corners(weak)
    assert corners.resistance_ohm["rising"].slow == 12.0
    assert corners.resistance_ohm["rising"].provenance == "datasheet"
    assert corners.resistance_ohm["falling"].provenance == "model"
    assert corners.pad_f.slow == pytest.approx(9e-12)


def test_one_resistance_for_both_directions_wins_over_both_of_the_model(folder):
    own = 'model = "full", resistance = {min = "10 ohm", max = "12 ohm"}'
    corners = setting_corners(board_of(folder, ('model = "full"', own)).file.driver[0].settings[0])
    assert corners.resistance_ohm["falling"].slow == 12.0
    assert corners.ramp_s["falling"].provenance == "model"


def test_an_own_edge_between_other_levels_leaves_the_models_edges_out(folder):
    own = 'model = "full", edge_up = {min = "1 ns", max = "2 ns"}, edge_levels = "20-80"'
    corners = setting_corners(board_of(folder, ('model = "full"', own)).file.driver[0].settings[0])
    assert corners.ramp_s["rising"].slow == pytest.approx(2e-9 / 0.409666)
    assert "maximum edge" in corners.missing


def test_the_load_line_can_be_moved_and_is_printed(folder):
    board = board_of(folder, ('"models/qx1.ibs"', '"models/qx1.ibs", impedance = "90 ohm"'))
    assert any("hold at a load line of 90 ohm" in note for note in board.notes)


def test_the_file_is_an_input_with_its_hash(folder):
    assert "models/qx1.ibs" in [entry.path for entry in board_of(folder).inputs]


def test_remarks_about_a_used_model_are_printed_with_the_board(folder):
    path = folder / "models" / "qx1.ibs"
    path.write_text(REGULAR.replace("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 21pF"))
    assert any("driver d1, setting WEAK: C_comp above 20 pF" in n for n in board_of(folder).notes)


def test_a_run_names_the_model_as_the_origin_of_its_setting(folder):
    write(folder)
    results = check(folder)
    settings = [s for net in results.nets for c in net.candidates for s in c.settings]
    origins = {s.setting: (s.provenance, s.source) for s in settings}
    assert origins["WEAK"] == ("model", "models/qx1.ibs:17")
    assert not any("not used yet: model" in a.text for a in results.assumptions)


def test_an_input_takes_capacitance_thresholds_and_overshoot_of_its_model(folder):
    spec = "[Model Spec]\nVinl 0.8 0.7 0.9\nVinh 2.0 1.9 2.1\n"
    spec += "S_overshoot_high 3.8 3.5 4.1\nS_overshoot_low -0.6 -0.6 -0.6\n"
    path = folder / "models" / "qx1.ibs"
    supply = "[Voltage Range] 3.3 3.0 3.6\n"
    path.write_text(REGULAR.replace("C_comp 3pF 2pF 4pF\n", f"C_comp 3pF 2pF 4pF\n{supply}{spec}"))
    board = board_of(folder, receiver=RECEIVER)
    (receiver,) = board.file.receiver
    assert receiver.capacitance_f.typ == pytest.approx(3.5e-12)  # 0.5 pF of package
    assert receiver.overshoot.voltage_v == pytest.approx(0.5)
    (level,) = board.file.level
    assert (receiver.levels, level.vil_v, level.vih_v) == (level.name, 0.7, 2.1)


def test_own_values_of_an_input_win(folder):
    own = RECEIVER + 'capacitance = "7 pF"\novershoot = "10 %"\nlevels = "lvttl-3v3"\n'
    (receiver,) = board_of(folder, receiver=own).file.receiver
    assert receiver.capacitance_f == pytest.approx(7e-12)
    assert receiver.overshoot.share == 0.1
    assert receiver.levels == "lvttl-3v3"


def test_an_input_without_any_stated_threshold_keeps_those_of_its_interface(folder):
    board = board_of(folder, receiver=RECEIVER)
    assert board.file.receiver[0].levels is None
    assert board.file.level == []


def test_an_input_needs_its_capacitance_or_a_model(folder):
    told = problems_of(folder, receiver='[[receiver]]\nname = "r1"\n')
    assert 'for example capacitance = "4.5 pF"' in told


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ('"full"', '"fulll"', 'board.toml:27:22: error: driver.d1.settings.WEAK.model: '
         "models/qx1.ibs has no model 'fulll'\n  hint: did you mean \"full\"?"),
        ('"full"', '"in"', "model 'in' is an input and drives nothing"),
        ('ibs"}', 'ibs", component = "QX-2"}', "has no component 'QX-2'"),
        ('"models/qx1.ibs"', '"models/none.ibs"', "'models/none.ibs' is missing"),
        ('"models/qx1.ibs"', '"../qx1.ibs"', "is outside the board folder"),
        ('ibis = {file = "models/qx1.ibs"}\n', "", "driver 'd1' names no file of models"),
        ('model = "full"', 'resistance = "9 ohm"', "no setting of the driver names a model"),
    ],
)  # fmt: skip
def test_what_cannot_be_filled_is_told_at_its_key(folder, old, new, told):
    assert told in problems_of(folder, (old, new))


def test_faults_of_a_named_model_are_told_at_their_line_with_those_of_the_board(folder):
    path = folder / "models" / "qx1.ibs"
    path.write_text(REGULAR.replace("R_load = 50", "R_load = 0"))
    told = problems_of(folder, ("1.1 ns", "1,1 ns"))
    assert "models/qx1.ibs:42:1: error: R_load of 0 ohm is no load" in told
    assert "model 'full' cannot be read" in told
    assert "decimal comma" in told


def test_faults_of_models_nobody_names_do_not_stop_a_board(folder):
    path = folder / "models" / "qx1.ibs"
    path.write_text(REGULAR.replace("C_comp 3pF 2pF 4pF", "C_comp 3x"))
    assert board_of(folder).file.driver


def told_of(folder):
    """Return what is told about a board with this model file; nothing if it is read."""
    try:
        board_of(folder, receiver=RECEIVER)
    except InputError as error:
        return error.problems
    return ()


def test_a_spoilt_model_file_gives_problems_with_places_and_never_a_traceback(folder):
    chance = random.Random(5)  # noqa: S311 - reproducible, no secrets
    refused = 0
    for _ in range(60):
        text = bytearray(REGULAR.encode())
        for _ in range(chance.choice((1, 3, 10))):
            at = chance.randrange(len(text))
            text[at : at + chance.randrange(3)] = chance.choice((b"NA", b"[", b"\0", b"9", b"\n"))
        (folder / "models" / "qx1.ibs").write_bytes(bytes(text))
        told = told_of(folder)
        refused += bool(told)
        assert all(problem.row >= 1 for problem in told)
    assert 10 < refused < 60


def test_a_file_of_which_nothing_can_be_read_is_told_once(folder):
    (folder / "models" / "qx1.ibs").write_text("PK")
    told = problems_of(folder, receiver=RECEIVER)
    assert told.count("zip archive") == 1


def at_supply(folder, supply):
    """Let the model hold at another supply than 3.0 to 3.6 V."""
    text = REGULAR.replace("[Voltage Range]  3.3V  3.0V  3.6V", f"[Voltage Range] {supply}")
    (folder / "models" / "qx1.ibs").write_text(text)


# The interface of the small board has 3.15 to 3.45 V.
def test_a_model_of_another_supply_than_the_interface_is_refused(folder):
    at_supply(folder, "1.8 1.7 1.9")
    told = problems_of(folder)
    assert "model 'full' holds from 1.7 to 1.9 V" in told
    assert "interface 'bus' has another supply" in told


@pytest.mark.parametrize(("supply", "noted"), [("3.3 3.0 3.6", False), ("3.3 3.2 3.4", True)])
def test_an_interface_that_goes_beyond_a_models_supply_is_noted(folder, supply, noted):
    at_supply(folder, supply)
    told = [note for note in board_of(folder).notes if "interface bus goes beyond" in note]
    assert bool(told) == noted
