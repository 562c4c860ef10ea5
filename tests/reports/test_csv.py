"""Rows that a spreadsheet shows and never runs."""

import csv
import dataclasses
import io

from edgeplan import reports


def _read(results):
    return list(csv.DictReader(io.StringIO(reports.render(results, "csv"), newline="")))


def test_every_net_has_one_row_judged_or_not(results):
    rows = _read(results)
    judged = [row["net"] for row in rows if row["verdict"] != "not judged"]
    assert sorted(judged) == sorted(net.net for net in results.nets)
    assert len(rows) == len(results.nets) + len(results.not_judged)


def test_numbers_are_numbers_in_the_unit_of_the_header(results):
    row = next(row for row in _read(results) if row["net"] == "SDR_CLK")
    assert float(row["edge_now_fast_ns"]) == 0.5
    assert float(row["window_after_slowest_ns"]) == 2.0
    assert (float(row["tightest_margin_now"]), row["tightest_margin_now_unit"]) == (-7.3, "dB")


def test_an_end_that_is_no_number_is_a_word_in_a_column_of_its_own(results):
    rows = {row["net"]: row for row in _read(results)}
    assert rows["EXP_CLK"]["window_now_fastest_ns"] == ""
    assert rows["EXP_CLK"]["window_now_fastest_word"] == "none"
    assert rows["UART_TX"]["window_now_slowest_word"] == "any"
    assert rows["CAM_D0"]["window_now_fastest_word"] == "undecided"


def test_no_text_starts_a_formula(results):
    names = ["=1+1", "+3V3", "-12V", "@SUM(A1)", " =1", "\t=1"]
    nets = [dataclasses.replace(results.nets[0], net=name) for name in names]
    rows = _read(dataclasses.replace(results, nets=nets))
    cells = [
        cell for row in rows for name, cell in row.items() if not name.startswith("tightest_m")
    ]
    assert not [cell for cell in cells if cell.lstrip().startswith(("=", "+", "-", "@"))]
    assert {"'=1+1", "'+3V3", "'-12V", "'@SUM(A1)"} <= {row["net"] for row in rows}


def test_commas_quotes_and_line_breaks_come_back(results):
    net = dataclasses.replace(results.nets[0], net='A,"B"\nC')
    rows = _read(dataclasses.replace(results, nets=[net]))
    assert rows[0]["net"] == 'A,"B"\\nC'
