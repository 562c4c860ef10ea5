"""Rows to nets: units, layers, groups, names in one cell."""

import pytest

from edgeplan.board import Columns, Group
from edgeplan.readers import net_checks, netlist, toml
from edgeplan.readers.references import Names

NAMES = Names(
    layers=["L1", "L4"],
    interfaces=["bus"],
    drivers={"d1": ("A", "B"), "d2": ("FIX",)},
    receivers=["r1"],
    levels=[],
)


def read(text, columns=None):
    problems = []
    nets = netlist.read(text, columns or Columns(), problems)
    return nets, problems


def complete(text):
    nets, problems = read(text)
    owned = {name: set(entry.values) for name, entry in nets.entries.items()}
    net_checks.complete(nets, NAMES, (), owned)
    problems += net_checks.problems(nets, NAMES)
    return [entry.net("nets.csv") for entry in nets.entries.values()], problems


@pytest.mark.parametrize(
    ("header", "cell", "name", "value"),
    [
        ("length_mil", "1000", "length_m", 25.4e-3),
        ("length_inch", "1", "length_m", 25.4e-3),
        ("width_um", "180", "width_m", 180e-6),
        ("clock_khz", "20", "clock_hz", 20e3),
        ("data_kbps", "115.2", "data_bps", 115.2e3),
        ("resistor_ohm", "4k7", "resistor_ohm", 4700.0),
        ("resistor_ohm", "33R", "resistor_ohm", 33.0),
        ("resistor_kohm", "4.7", "resistor_ohm", 4700.0),
        ("bus_capacitance_pf", "180", "bus_capacitance_f", 180e-12),
        ("setting_fixed", "Yes", "setting_fixed", True),
        ("kind", "analog", "kind", "analog"),
    ],
)
def test_the_header_holds_the_unit(header, cell, name, value):
    (net,), problems = complete(f"net,layer,{header}\nA,L1,{cell}\n")
    assert problems == []
    assert getattr(net, name) == value


def test_activity_of_a_row_and_of_a_group():
    nets, problems = read(
        "net,activity,pattern_bits,burst_length_us,burst_period_ms\nA,pattern,127,500,20\nB,,,,\n"
    )
    document = toml.read("[[group]]\nnets = 'B'\nburst_length = '1 ms'", "board.toml")
    group = Group(
        nets="B", activity="pattern", pattern_bits=31, burst_length_s=1e-3, burst_period_s=0.1
    )
    netlist.apply_groups(nets, {0: group}, document)
    problems += net_checks.problems(nets, NAMES)
    row, grouped = (entry.net("nets.csv") for entry in nets.entries.values())
    assert problems == []
    assert (row.pattern_bits, row.burst_length_s, row.burst_period_s) == (127, 5e-4, 0.02)
    assert (grouped.pattern_bits, grouped.burst_length_s, grouped.burst_period_s) == (31, 1e-3, 0.1)
    assert nets.entries["B"].where("burst_length_s").row == 3


def test_two_widths_on_one_layer_are_two_pieces():
    (net,), problems = complete("net,layer,length_mm,width_mm\nA,L1,5,0.2\nA,L1,7,0.1\n")
    assert problems == []
    assert net.layer_lengths_m == (("L1", 0.005, 0.0002), ("L1", 0.007, 0.0001))
    assert net.width_m == 0.0001


def test_a_layer_without_its_length_leaves_the_sum_unknown():
    (net,), problems = complete("net,layer,length_mm\nA,L1,5\nA,L4,\n")
    assert problems == []
    assert net.length_m is None
    assert net.layer_lengths_m == ()


def test_cells_with_several_names_are_aligned():
    (net,), problems = complete("net,driver,driver_pin,setting,bank\nA,d1 d2,U1.1 U2.1,B FIX,x -\n")
    assert problems == []
    assert net.driver == ("d1", "d2")
    assert net.setting == ("B", "FIX")
    assert net.bank == ("x", "")


def test_the_only_setting_of_a_driver_needs_no_cell():
    nets, problems = complete("net,driver\nA,d2\nB,d1\n")
    assert problems == []
    assert [net.setting for net in nets] == [("FIX",), ()]


@pytest.mark.parametrize(("value", "site"), [("33", "fitted"), ("0", "link"), ("", "none")])
def test_a_resistor_tells_its_site(value, site):
    (net,), _ = complete(f"net,resistor,resistor_ohm\nA,R1,{value}\n")
    assert net.site == site


def test_a_supply_name_with_a_driver_of_its_own_is_a_signal():
    nets, _ = complete("net,driver\nVDD_EN,d1\nVDD_IO,\nRESET_N,\n")
    assert [net.kind for net in nets] == ["digital", "power", "digital"]


def test_a_cell_wins_over_a_group_and_a_later_group_over_an_earlier_one():
    nets, _ = read("net,setting\nA1,B\nA2,\n")
    document = toml.read('[[group]]\nnets = "A*"\n[[group]]\nnets = "A2"\n', "board.toml")
    groups = {
        0: Group(nets="A*", driver="d1", setting="A", layer="L1"),
        1: Group(nets="A2", layer="L4"),
        2: Group(nets="X*", layer="L4"),
    }
    notes = netlist.apply_groups(nets, groups, document)
    first, second = (entry.net("nets.csv") for entry in nets.entries.values())
    assert (first.setting, first.driver) == (("B",), ("d1",))
    assert second.setting == ("A",)
    assert [entry.pieces[0].layer for entry in nets.entries.values()] == ["L1", "L4"]
    assert notes == ["[[group]] nets = 'X*' fits no net"]


def test_known_columns_of_board_toml_are_kept_in_the_lines_to_paste():
    columns = Columns(rename={"Signal": "net"}, ignore=["Class"])
    _, (problem,) = read("Signal,Class,Etch Length (mm),Vias\nA,x,1,2\n", columns)
    assert problem.hint.splitlines() == [
        "put in place of those lines of [columns]:",
        '    rename = {"Signal" = "net", "Etch Length (mm)" = "length_mm"}',
        '    ignore = ["Class", "Vias"]',
    ]


def test_one_column_twice_is_told():
    _, (problem,) = read("net,length_mm,length_mil\nA,1,2\n")
    assert "'length_mil' and 'length_mm' are the same column" in problem.message


def test_a_list_without_net_names_is_told():
    _, (problem,) = read("length_mm\n1\n")
    assert "there is no column 'net'" in problem.message


@pytest.mark.parametrize(
    ("header", "cell", "hint"),
    [
        # 1 inch is 25.4 mm, 1 mil is 25.4 um
        ("length_mm", "1.8 inch", "write 45.72 (mm), or name the column length_inch"),
        ("length_mil", "2.54mm", "write 100 (mil), or name the column length_mm"),
        ("length_mm", "12 cm", "write 120 (mm)"),
        ("width_mm", "180 µm", "write 0.18 (mm), or name the column width_um"),
        ("length_mm", "30 mm", "write 30: the header holds the unit"),
        ("clock_mhz", "0.1 GHz", "write 100 (MHz), or name the column clock_ghz"),
        ("bus_capacitance_pf", "40 mF", "the header holds pF: write the number of pF"),
        ("length_mm", "3 furlongs", "the header holds mm: write the number of mm"),
    ],
)
def test_a_unit_in_the_cell_is_converted_to_that_of_the_header(header, cell, hint):
    _, (problem,) = read(f"net,{header}\nA,{cell}\n")
    assert problem.message == f"{cell!r} has a unit"
    assert problem.hint == hint


def test_a_converted_number_keeps_the_decimal_comma_of_the_file():
    _, (problem,) = read("net;length_mm\nA;12,5\nB;1,8 inch\n")
    assert problem.hint.startswith("write 45,72 (mm)")


@pytest.mark.parametrize(
    "row",
    ["driver_pin,setting,bank\nA,1,B,x\n", "driver,driver_pin,setting,bank\nA,,1,B,x\n"],
)
def test_a_pin_without_its_driver_is_a_missing_driver_and_no_contradiction(row):
    (net,), problems = complete(f"net,{row}")
    assert problems == []
    assert net.driver == ()


def test_an_unknown_driver_may_be_misspelled_or_not_described_yet():
    _, (problem,) = complete("net,driver\nA,d1x\n")
    assert problem.message == "no driver 'd1x'"
    assert problem.hint == 'did you mean "d1"? Or add a [[driver]] named "d1x" to board.toml'
