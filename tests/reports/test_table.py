"""The table fits, keeps every net, and says in words what colour repeats."""

import dataclasses
import re

import pytest

from edgeplan import reports
from edgeplan.reports import phrases, rows, table

ESCAPES = re.compile(r"\x1b\[[0-9;]*m")


@pytest.mark.parametrize("width", [150, 149, 120, 100, 80, 60, 48])
@pytest.mark.parametrize("record", ["record", "checked"])
def test_no_line_is_wider_than_the_terminal(width, record, sample):
    text = reports.render(getattr(sample, record)(), "table", width=width)
    assert max(map(phrases.display_width, text.splitlines())) <= width


def test_a_very_wide_terminal_still_gets_150_columns(results):
    assert reports.render(results, "table", width=400) == reports.render(results, "table")


@pytest.mark.parametrize("width", [150, 80, 48])
def test_every_net_has_its_row_with_verdict_whatever_the_width(width, results):
    text = reports.render(results, "table", width=width)
    for net in results.nets:
        name = "SHEET" if len(net.net) > 12 else f"{net.net} "
        found = [line for line in text.splitlines() if line.startswith(name)]
        assert [net.verdict in row for row in found] == [True]


def test_columns_leave_in_the_stated_order_and_are_named(results):
    wide = reports.render(results, "table", width=150)
    assert "no room for" not in wide
    left_out = re.search(r"no room for: (.*)", reports.render(results, "table", width=110))
    assert left_out
    assert left_out[1] in {"window after", "edge after, window after"}
    headings = {column.field: column.heading for column in table.PLAN_COLUMNS}
    narrow = " ".join(reports.render(results, "table", width=48).split())
    assert "no room for: edge now, window now, what binds, edge after, window after" in narrow
    assert set(table.DROP_ORDER) == set(headings) - {"net", "verdict", "proposal"}


def test_colour_only_repeats_the_words(results):
    plain = reports.render(results, "table")
    coloured = reports.render(results, "table", colour=True)
    assert ESCAPES.sub("", coloured) == plain
    assert len(ESCAPES.findall(coloured)) == 2 * len(results.nets)


def test_a_verdict_as_part_of_a_name_is_not_coloured(results):
    net = dataclasses.replace(results.nets[0], net="inside", verdict="inside", what_binds="inside")
    text = reports.render(dataclasses.replace(results, nets=[net]), "table", colour=True)
    row = next(line for line in text.splitlines() if line.startswith("inside "))
    assert row.count("\x1b[32m") == 1
    assert row.index("\x1b[32m") > len("inside  0.50–1.00")


def test_nets_stand_in_natural_order_under_their_interface(results):
    lines = reports.render(results, "table").splitlines()
    first = [line.split()[0] for line in lines if line and line[0] != " "]
    assert first.index("SDR_DQ2") < first.index("SDR_DQ10")
    assert first.index("cam:") < first.index("CAM_PCLK") < first.index("disp:")


def test_check_shows_no_proposal(sample):
    text = reports.render(sample.checked(), "table")
    assert "proposal" not in text
    assert "Parts list" not in text
    assert "after" not in text


def test_a_receiver_slower_than_one_and_a_half_edges_is_told(results):
    text = reports.render(results, "table")
    assert "transition at the receiver 8.40 ns now, 2.70 ns after" in text
    net = dataclasses.replace(
        results.nets[2], transition_now_s=1.5 * 4.9e-9, transition_after_s=None
    )
    calm = reports.render(dataclasses.replace(results, nets=[net]), "table")
    assert "transition at the receiver" not in calm


def test_a_net_that_stays_out_of_its_window_shows_a_remedy_with_its_size(results):
    text = reports.render(results, "table")
    assert "remedies: shorter route 73 mm (closes 2.2 dB); cable filter 6.2 dB" in text
    assert rows.row(results.nets[6]).margin == "no window; -6.2 dB emission"


def test_totals_add_up_to_every_net(results):
    text = reports.render(results, "table")
    now = next(line for line in text.splitlines() if line.startswith("now "))
    assert sum(map(int, now.split()[1:])) == len(results.nets) + len(results.not_judged)


def test_everything_a_reader_must_know_stands_below_the_rows(results):
    text = " ".join(reports.render(results, "table").split())
    for sentence in (
        "33 Ω: 2 now, 5 after (+3)",
        "bank sdr: setting D4F → D3F",
        "most from SDR_CLK 71 %, REF50_PHY 20 %, SDR_A0 6 %",
        "differential (2): USB_DN, USB_DP",
        "smallest edge of cm1 fixed: decides 2 nets (CAM_D0, CAM_PCLK)",
        "accepted, not used yet: [[pair]]; deadline of exp",
        "DEBUG_CLK: edge-too-fast: until 2027-03-31 by reviewer",
        "compared with the printed edition: cispr32-class-b-3m",
        "cable, version 1: ±3.4 dB",
        "evidence of conformity",
    ):
        assert sentence in text


def test_inputs_not_yet_used_are_all_named(results, sample):
    names = [f"key{number}" for number in range(30)]
    taken = [
        sample.Assumption(
            subject="not used", text=f"accepted but not used yet: {name}", provenance="assumed"
        )
        for name in names
    ]
    text = reports.render(dataclasses.replace(results, assumptions=taken), "table")
    assert all(name in text for name in names)
    assert text.count("not used yet") == 1


def test_a_board_without_nets_still_prints(sample):
    empty = dataclasses.replace(sample.record(nets=[]), fill_in=[])
    text = reports.render(empty, "table")
    assert "verdicts" in text
