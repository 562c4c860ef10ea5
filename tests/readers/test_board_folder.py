"""Whole board folders, good and faulty: every fault at its place, all in one pass."""

import hashlib
import shutil
from pathlib import Path

import pytest

from edgeplan.errors import InputError
from edgeplan.readers import read_board

BOARDS = Path(__file__).parents[1] / "boards"
SMALL = BOARDS / "small"
BROKEN = BOARDS / "broken"

# folder: (file, row, column, words of the message or its hint) of every problem in it
FAULTS = {
    "activity": [
        ("board.toml", 37, 11, "'0 %' has to be above 0"),
        ("board.toml", 37, 43, "'sine' is none of triangle, other"),
        ("board.toml", 42, 1, 'add profile = "triangle"'),
        ("board.toml", 42, 11, "'30 %' has to be at most 0.1"),
        ("board.toml", 46, 1, "1 has to be at least 2"),
        ("board.toml", 47, 1, "'-2 ms' has to be above 0"),
        ("board.toml", 52, 1, "a pattern's length with activity 'clock'"),
        ("nets.csv", 2, 20, "0 has to be above 0"),
        ("nets.csv", 2, 22, "add burst_length, or leave out both"),
        ("nets.csv", 3, 20, "a burst of 0.03 s is longer than its period, 0.02 s"),
        ("nets.csv", 4, 20, "7.5 is not a whole number of bits, 2 or more"),
        ("nets.csv", 4, 24, "add burst_period, or leave out both"),
    ],
    "column_without_unit": [("nets.csv", 1, 108, "rename it to width_mm or width_um")],
    "dangling": [
        ("board.toml", 17, 1, "no net 'CLX'"),
        ("board.toml", 19, 1, "no level family 'lvttl-33'"),
        ("nets.csv", 2, 5, 'did you mean "bus"?'),
        ("nets.csv", 3, 19, "no driver 'd2'"),
        ("nets.csv", 4, 27, "driver 'd1' has no setting 'WAEK'"),
        ("nets.csv", 4, 32, "no receiver 'r2'"),
        ("nets.csv", 4, 43, "no signal layer 'L7'"),
        ("routes.csv", 2, 18, "no signal layer 'L9'"),
        ("routes.csv", 3, 1, "no net 'CLJ'"),
    ],
    "decimal_comma": [
        ("board.toml", 26, 93, 'write "5.2 ns"'),
        ("nets.csv", 2, 50, "decimal comma"),
        ("nets.csv", 4, 40, "write 44.5"),
    ],
    "duplicated_net": [("nets.csv", 4, 1, "first in row 3")],
    "empty_cell_for_net": [("nets.csv", 3, 1, "names no net")],
    "empty_file": [("nets.csv", 1, 1, "the file is empty")],
    "loop_and_island": [
        ("routes.csv", 4, 5, "closes a loop"),
        ("routes.csv", 5, 5, "hangs together with no earlier one"),
    ],
    "missing_key": [
        ("board.toml", 7, 2, "'size' is missing"),
        ("board.toml", 13, 3, 'add class = "common-clock"'),
    ],
    "missing_unit": [
        ("board.toml", 18, 1, '"25 MHz"'),
        ("board.toml", 32, 1, '"5 pF"'),
    ],
    "named_twice": [("board.toml", 27, 4, "first in row 26")],
    "names_out_of_line": [("nets.csv", 3, 22, "2 for 1 in driver")],
    "nan": [("nets.csv", 3, 42, "'NaN' is not a number")],
    "negative_length": [("nets.csv", 2, 42, "-38 has to be above 0")],
    "no_net_list": [("nets.csv", 1, 1, "missing in the board folder")],
    "not_utf8": [("nets.csv", 4, 2, "byte 0xE9 (byte 222 of the file)")],
    "open_quote": [("nets.csv", 3, 1, "a quote opens and never closes")],
    "path_out_of_folder": [
        ("board.toml", 13, 16, "'../small/nets.csv' is outside the board folder"),
        ("board.toml", 13, 37, "'/etc/passwd' is outside the board folder"),
        ("board.toml", 13, 52, "'house.csv' is missing"),
    ],
    "range_upside_down": [("board.toml", 26, 52, "max '45 ohm' is below min '75 ohm'")],
    "renamed_to_nothing": [("board.toml", 8, 11, 'did you mean "width_mm"?')],
    "route_misses_pin": [("routes.csv", 2, 1, "does not touch 'U2.1'")],
    "route_too_short": [("routes.csv", 2, 15, "shorter than its ends are apart, 20.0 mm")],
    "rows_that_disagree": [
        ("nets.csv", 4, 16, "another value in row 3"),
        ("nets.csv", 4, 27, "another value in row 3"),
    ],
    "site_and_value": [
        ("nets.csv", 2, 56, "site 'link' has a resistor of 33 ohm"),
        ("nets.csv", 2, 61, "'D1' has a row of its own"),
        ("nets.csv", 3, 55, "a site with 0 ohm is a link"),
        ("nets.csv", 4, 51, "-1 has to be 0 or more"),
        ("nets.csv", 4, 54, "'maybe' is none of fitted, link, possible, none"),
    ],
    "transfers_that_contradict": [
        ("board.toml", 36, 1, "add antenna_factor ="),
        ("board.toml", 37, 1, "the board declares no cables"),
        ("board.toml", 44, 1, "holds field over port voltage already"),
        ("gap.csv", 6, 1, "nothing between 35 and 50 MHz"),
        ("gap.csv", 7, 1, "nothing between 50 and 1000 MHz"),
    ],
    "unit_in_a_cell": [("nets.csv", 4, 40, "write 44: the header holds the unit")],
    "unknown_column": [("nets.csv", 1, 79, 'rename = {"Routed Length (mil)" = "length_mil"}')],
    "unknown_key": [
        ("board.toml", 3, 62, 'did you mean "er"?'),
        ("board.toml", 17, 1, 'did you mean "clock_net"?'),
    ],
    "unknown_limit": [
        ("board.toml", 12, 11, "cispr32-class-b-3m or"),
        ("board.toml", 12, 22, "did you mean cispr32-class-b-3m"),
    ],
    "unknown_unit": [
        ("board.toml", 3, 39, "'mn' is no unit of a length"),
        ("board.toml", 20, 42, "'W' is no unit of a voltage"),
    ],
    "wrong_limit_table": [
        ("house.csv", 1, 32, 'did you mean "detector"?'),
        ("house.csv", 3, 4, "'x' is not a number"),
    ],
    "wrong_toml": [("board.toml", 8, 8, "not TOML")],
    "wrong_transfers": [
        ("antenna.csv", 3, 1, "nothing between 30 and 60 MHz"),
        ("board.toml", 8, 3, "'length' is missing"),
        ("board.toml", 8, 47, "an attenuation of '-3 dB' amplifies"),
        ("board.toml", 8, 79, "'100 MHz' does not lie above '300 MHz'"),
        ("board.toml", 9, 82, "'30 MHz' does not lie above '300 MHz'"),
        ("board.toml", 10, 36, 'write "6 dB" if it is gain'),
        ("board.toml", 16, 27, "a frequency lies above 0"),
        ("board.toml", 16, 54, "an attenuation of '-2 dB' amplifies"),
        ("board.toml", 49, 1, 'did you mean "cable"?'),
        ("board.toml", 50, 9, "no net fits 'CLQ'"),
        ("board.toml", 51, 1, "has to be above 0"),
        ("board.toml", 52, 1, "has to be at least 0"),
        ("board.toml", 55, 3, "'source' is missing"),
        ("board.toml", 68, 1, "outside the board folder"),
        ("board.toml", 70, 1, "'none.csv' is missing"),
        ("board.toml", 77, 1, "'dB' is no unit of a length"),
        ("empty.csv", 1, 1, "the file is empty"),
        ("falling.csv", 4, 1, "33 MHz does not lie above 35 MHz"),
        ("gap.csv", 1, 1, "a column like transfer_db_per_m is missing"),
        ("gap.csv", 1, 15, 'did you mean "transfer_db"?'),
        ("latin.csv", 2, 8, "byte 0xE9 (byte 40 of the file)"),
        ("path.s2p", 5, 8, "'x' is not a number"),
    ],
    "wrong_type": [
        ("board.toml", 3, 62, "decimal comma"),
        ("board.toml", 8, 1, "1 is not a text"),
        ("board.toml", 24, 1, "'perhaps' is not true or false"),
        ("board.toml", 30, 2, "write [[receiver]] in double brackets"),
    ],
    "wrong_word": [
        ("board.toml", 16, 1, 'did you mean "common-clock"?'),
        ("nets.csv", 2, 9, "'clok' is none of clock, random, pattern"),
    ],
    "zero_length": [("nets.csv", 3, 42, "0 has to be above 0")],
    "all_at_once": [
        ("board.toml", 2, 35, "'mu' is no unit"),
        ("board.toml", 3, 39, "decimal comma"),
        ("board.toml", 4, 34, "18 has no unit"),
        ("board.toml", 7, 2, "'name' is missing"),
        ("board.toml", 8, 1, "no such key 'naem'"),
        ("board.toml", 13, 16, "outside the board folder"),
        ("board.toml", 17, 1, "'comon-clock' is none of"),
        ("board.toml", 18, 1, "no net 'CLX'"),
        ("board.toml", 20, 1, "no level family"),
        ("board.toml", 27, 52, "is below min"),
        ("nets.csv", 1, 79, "no such column: 'Load Pin'"),
        ("nets.csv", 2, 42, "has to be above 0"),
        ("nets.csv", 3, 42, "'NaN'"),
        ("nets.csv", 3, 46, "no signal layer 'L3'"),
        ("nets.csv", 4, 4, "no interface 'buss'"),
        ("nets.csv", 4, 9, "'randum' is none of"),
        ("nets.csv", 4, 41, "decimal comma"),
        ("nets.csv", 5, 1, "'D1' is here twice"),
        ("nets.csv", 6, 53, "14 cells under 13 columns"),
        ("nets.csv", 7, 27, "no setting 'STRNG'"),
        ("routes.csv", 2, 15, "has to be above 0"),
        ("routes.csv", 3, 1, "no net 'CLJ'"),
    ],
}


def problems_of(path):
    with pytest.raises(InputError) as caught:
        read_board(path)
    return caught.value.problems


@pytest.mark.parametrize("name", sorted(FAULTS))
def test_every_fault_is_told_at_its_place_in_one_pass(name):
    found = problems_of(BROKEN / name)
    assert [(p.file, p.row, p.column) for p in found] == [fault[:3] for fault in FAULTS[name]]
    for problem, (*_, words) in zip(found, FAULTS[name], strict=True):
        assert words in str(problem)


def test_every_broken_folder_is_tested():
    assert sorted(path.name for path in BROKEN.iterdir()) == sorted(FAULTS)


def test_a_folder_and_its_board_file_are_the_same_board():
    assert read_board(SMALL) == read_board(SMALL / "board.toml")


def test_inputs_carry_the_hash_of_every_file():
    found = {file.path: file.sha256 for file in read_board(SMALL).inputs}
    assert found == {
        name: hashlib.sha256((SMALL / name).read_bytes()).hexdigest()
        for name in ("board.toml", "nets.csv", "routes.csv")
    }


def test_a_line_of_50_mb_is_refused(tmp_path):
    shutil.copytree(SMALL, tmp_path / "b")
    (tmp_path / "b" / "nets.csv").write_bytes(b"net,length_mm\n" + b"A" * 50_000_000 + b",1\n")
    (problem,) = problems_of(tmp_path / "b")
    assert (problem.file, problem.row) == ("nets.csv", 2)
    assert "longer than 1,000,000 bytes" in problem.message


def test_a_link_out_of_the_folder_is_refused(tmp_path):
    shutil.copytree(SMALL, tmp_path / "b")
    (tmp_path / "b" / "nets.csv").rename(tmp_path / "nets.csv")
    (tmp_path / "b" / "nets.csv").symlink_to(tmp_path / "nets.csv")
    (problem,) = problems_of(tmp_path / "b")
    assert "outside the board folder" in problem.message


def test_a_folder_that_is_not_there_is_a_problem_and_no_traceback(tmp_path):
    found = problems_of(tmp_path / "none")
    assert "missing" in found[0].message


def test_numbers_that_are_none_are_refused_in_toml_too(tmp_path):
    shutil.copytree(SMALL, tmp_path / "b")
    board = tmp_path / "b" / "board.toml"
    board.write_text(board.read_text().replace("er = 4.2", "er = nan").replace('"5 pF"', "inf"))
    found = problems_of(tmp_path / "b")
    assert [problem.row for problem in found] == [3, 32]


def test_a_missing_value_is_not_a_problem(tmp_path):
    shutil.copy(SMALL / "board.toml", tmp_path)
    (tmp_path / "nets.csv").write_text("net\nCLK\n")
    (net,) = read_board(tmp_path).nets
    assert net.interface is None
    assert net.length_m is None
    assert net.setting == ()


def test_a_board_file_on_lines_that_end_like_windows_reads_the_same(tmp_path):
    for name in ("board.toml", "nets.csv", "routes.csv"):
        text = (SMALL / name).read_text().replace("\n", "\r\n")
        (tmp_path / name).write_bytes(b"\xef\xbb\xbf" + text.encode())
    read = read_board(tmp_path)
    assert read.nets == read_board(SMALL).nets
    assert read.file == read_board(SMALL).file


def test_a_users_limit_table_becomes_a_line_that_the_target_may_name(tmp_path):
    shutil.copytree(SMALL, tmp_path / "b")
    board = tmp_path / "b" / "board.toml"
    with_file = 'limits = ["house"]\nlimit_files = ["limits/house.csv"]'
    board.write_text(board.read_text().replace('limits = ["cispr32-class-b-3m"]', with_file))
    (tmp_path / "b" / "limits").mkdir()
    table = "frequency_mhz;level_dbuv_per_m;distance_m\n30;40,5;10\n1000;47;10\n"
    (tmp_path / "b" / "limits" / "house.csv").write_text(table)
    (line,) = read_board(tmp_path / "b").user_limits
    assert line.id == "house"
    assert line.distance_m == 10
    assert line.bands[0].level_dbuv_per_m[0] == 40.5


@pytest.mark.parametrize(
    ("was", "now", "told"),
    [
        ('edge = {min = "', 'edge = {min = "-', "has to be above 0"),
        ('size = ["80 mm"', 'size = ["0 mm"', "has to be above 0"),
        ("[emission]", '[emission]\nmargin = "-6 dB"', "has to be at least 0"),
    ],
)
def test_a_value_no_board_can_have_is_refused_at_its_place(tmp_path, was, now, told):
    shutil.copytree(SMALL, tmp_path / "b")
    toml = tmp_path / "b" / "board.toml"
    text = toml.read_text(encoding="utf-8")
    assert was in text
    toml.write_text(text.replace(was, now, 1), encoding="utf-8")
    found = problems_of(tmp_path / "b")
    assert any(told in problem.message for problem in found)
    assert {problem.file for problem in found} == {"board.toml"}
