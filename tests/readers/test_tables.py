"""Tables: separators, decimal signs, quotes and the place of a cell."""

import csv
import io

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from edgeplan.readers import tables
from edgeplan.units import UnitError


def read(text):
    problems = []
    return tables.read(text, "t.csv", problems), problems


def test_the_separator_is_the_commoner_one_of_the_header():
    table, problems = read("net;length_mm\nA;1,5\n")
    assert table.separator == ";"
    assert table.number("1,5") == 1.5
    assert problems == []


def test_a_decimal_comma_is_taken_in_semicolon_files_only():
    with pytest.raises(UnitError) as caught:
        tables.number("1,5")
    assert caught.value.hint.startswith("write 1.5")


def test_a_decimal_point_among_decimal_commas_is_refused():
    table, _ = read("net;length_mm\nA;1,5\nB;1.234\n")
    with pytest.raises(UnitError) as caught:
        table.number("1.234")
    assert "write 1,234" in caught.value.hint


@pytest.mark.parametrize("text", ["", "1e", "0x10", "1_000", "1 000", "--1", "٣"])
def test_what_only_a_program_reads_as_a_number_is_refused(text):
    with pytest.raises(UnitError):
        tables.number(text)


@pytest.mark.parametrize("text", ["nan", "NaN", "inf", "-Infinity", "#N/A", "#VALUE!"])
def test_no_number_at_all_says_to_leave_the_cell_empty(text):
    with pytest.raises(UnitError) as caught:
        tables.number(text)
    assert caught.value.hint == "leave the cell empty if unknown"


def test_empty_rows_are_left_out_and_rows_keep_their_numbers():
    table, _ = read("\n a , b \n\n,,\n1, 2\n")
    assert table.header.cells == ["a", "b"]
    assert [(row.number, row.cells) for row in table.rows] == [(5, ["1", "2"])]


def test_an_open_quote_spoils_its_row_only():
    table, problems = read('net,x\n"A,1\nB,2\n')
    assert [row.cells[0] for row in table.rows] == ["B"]
    assert [(problem.row, problem.column) for problem in problems] == [(2, 1)]


def test_tabs_between_columns_are_told():
    table, (problem,) = read("net\tlength_mm\nA\t1\n")
    assert table is None
    assert "tabs" in problem.message


CELL = st.text(alphabet='ab ",;é', max_size=5)


@settings(derandomize=True)
@given(cells=st.lists(CELL, min_size=2, max_size=5), separator=st.sampled_from(",;"))
def test_the_column_of_a_cell_is_where_its_text_stands(cells, separator):
    marked = [f"x{cell}" for cell in cells]
    line = io.StringIO()
    csv.writer(line, delimiter=separator, lineterminator="").writerow(marked)
    row = tables.Row(1, line.getvalue(), [cell.strip() for cell in marked])
    table = tables.Table("t.csv", separator, row, [row], [], decimal_comma=False)
    for index in range(len(marked)):
        column = table.where(row, index).column
        assert row.line[column - 1 :].lstrip('"').startswith("x")
        assert column == 1 or row.line[column - 2] == separator
