"""The whole run on the example board and on small changes of it."""

import json
import re
import shutil
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from edgeplan import plan
from edgeplan.emission import cable
from edgeplan.errors import InputError
from edgeplan.reports import render
from edgeplan.results import VERDICTS
from edgeplan.verdicts import exit_code

EXAMPLES = Path(__file__).parents[1] / "examples"


@pytest.fixture(scope="module")
def saltmarsh():
    return plan.plan(EXAMPLES / "saltmarsh")


@pytest.fixture(scope="module")
def starter():
    return plan.plan(EXAMPLES / "starter")


@pytest.fixture
def copy(tmp_path):
    """A copy of an example with some words of its files replaced."""

    def make(name, **changes):
        folder = tmp_path / name
        shutil.copytree(EXAMPLES / name, folder)
        for file, (old, new) in changes.items():
            path = folder / f"{file.replace('_', '.')}"
            text = path.read_text(encoding="utf-8")
            assert old in text
            path.write_text(text.replace(old, new), encoding="utf-8")
        return folder

    return make


def by_name(results):
    return {n.net: n for n in results.nets}


def test_every_net_of_the_list_has_a_row_and_the_totals_add_up(saltmarsh):
    assert len(saltmarsh.nets) + len(saltmarsh.not_judged) == 42
    for totals in (saltmarsh.totals, saltmarsh.totals_after):
        assert set(totals) == set(VERDICTS)
        assert sum(totals.values()) == 42


def test_the_example_board_has_every_kind_of_net(saltmarsh):
    totals = saltmarsh.totals
    assert totals["inside"] >= 15
    assert totals["too fast"] >= 10
    assert totals["too slow"] >= 3
    assert totals["no window"] >= 2
    assert totals["undecided"] == 4
    changes = {n.change for n in saltmarsh.nets if n.verdict_after == "inside"}
    assert {"none", "setting", "value", "new site"} <= changes
    assert any(n.borderline_after for n in saltmarsh.nets)


def test_every_judged_row_names_what_binds_and_what_to_do(saltmarsh):
    for net in saltmarsh.nets:
        assert net.what_binds
        assert net.proposal_text
        if net.verdict in ("too fast", "too slow"):
            assert net.verdict_after == "inside"
            assert net.change != "none"


def test_a_net_that_is_inside_keeps_what_is_drawn_unless_its_bank_moves(saltmarsh):
    for net in saltmarsh.nets:
        if net.verdict == "inside" and net.change != "none":
            assert "bank" in net.proposal_text


def test_a_bank_has_one_setting_and_an_array_one_value(saltmarsh):
    banks = {b.bank: b for b in saltmarsh.choice.banks}
    assert " " not in banks["sdr"].setting
    proposed = set()
    for net in saltmarsh.nets:
        for c in net.candidates:
            if c.candidate == net.proposal:
                proposed |= {s.setting for s in c.settings if s.bank == "sdr" and s.state == "run"}
    assert proposed == {banks["sdr"].setting}
    for array in saltmarsh.choice.arrays:
        values = {
            r.value_ohm
            for net in saltmarsh.nets
            for c in net.candidates
            if c.candidate == net.proposal
            for r in c.resistors
            if r.array == array.array
        }
        assert values == {array.value_ohm}


def test_unknown_edges_stay_undecided_and_say_from_which_value_on_they_are_inside(saltmarsh):
    nets = by_name(saltmarsh)
    for name in ("CAM_D0", "CAM_D7", "CAM_HS", "CAM_PCLK"):
        assert nets[name].verdict == nets[name].verdict_after == "undecided"
        assert nets[name].missing[0].value == "minimum edge"
    assert "inside if it is" in nets["CAM_HS"].missing[0].settles
    assert saltmarsh.fill_in[0].nets == ["CAM_D0", "CAM_D7", "CAM_HS", "CAM_PCLK"]


@pytest.mark.parametrize(("part", "verdict"), [(1.05, "inside"), (0.8, "too fast")])
def test_the_value_that_settles_a_net_does_settle_it(saltmarsh, copy, part, verdict):
    settles = by_name(saltmarsh)["CAM_HS"].missing[0].settles
    picoseconds = part * float(re.search(r"([\d.]+) ps", settles)[1])
    folder = copy("saltmarsh", board_toml=('edge = {max = "1.5 ns"}', _edge(picoseconds)))
    assert by_name(plan.check(folder))["CAM_HS"].verdict == verdict


def _edge(picoseconds):
    return f'edge = {{min = "{picoseconds:.1f} ps", max = "1.5 ns"}}'


def test_the_open_drain_pull_up_is_sized_by_the_bus_standard(saltmarsh):
    """0.8473 R C <= 300 ns at 180 pF and 5 %: at most 1.87 kohm; the E12 value below is 1.8."""
    scl = by_name(saltmarsh)["I2C_SCL"]
    assert scl.verdict == "too slow"
    assert "1.8 kΩ" in scl.proposal_text
    rise = next(
        c for c in scl.checks if c.check == "rise by pull-up" and c.candidate == scl.proposal
    )
    assert rise.value == pytest.approx(0.8473 * 1.8e3 * 1.05 * 180e-12, rel=1e-4)


def test_nets_without_a_window_carry_a_sized_remedy(saltmarsh):
    closed = [n for n in saltmarsh.nets if n.verdict_after == "no window"]
    assert {n.net for n in closed} == {"SD_CLK", "EXP_CLK"}
    for net in closed:
        assert any(r.remedy.startswith("cable filter") and r.amount for r in net.remedies)


def test_the_sized_cable_filter_opens_the_window(saltmarsh, copy):
    amount = next(r.amount for r in by_name(saltmarsh)["SD_CLK"].remedies)
    folder = copy("saltmarsh")
    path = folder / "board.toml"
    text = path.read_text(encoding="utf-8")
    text = re.sub(r"(series_impedance = )(\[\[.*?\]\])", lambda m: _more(m, amount), text)
    path.write_text(text.replace('attenuation = "0 dB"', f'attenuation = "{amount} dB"'))
    after = by_name(plan.plan(folder))["SD_CLK"]
    assert after.verdict_after == "inside"


def _more(match, amount_db):
    """The filter's credit as attenuation at many frequencies, with more added."""
    rows = [(_hz(f), float(z)) for f, z in re.findall(r'\["([^"]+)", "([\d.]+) ohm"\]', match[2])]
    frequency_hz = np.geomspace(30e6, 1e9, 300)
    credit_db = cable.filter_credit_db(cable.table_at(frequency_hz, rows)) + amount_db
    table = ", ".join(
        f'["{f / 1e6:.9g} MHz", "{db:.6f} dB"]'
        for f, db in zip(frequency_hz, credit_db, strict=True)
    )
    return f"attenuation = [{table}]"


def _hz(text):
    number, unit = text.split()
    return float(number) * {"MHz": 1e6, "GHz": 1e9}[unit]


def test_the_starter_plans_cleanly(starter):
    assert starter.totals_after["inside"] == len(starter.nets) == 6
    assert exit_code(starter) == 0
    assert exit_code(plan.check(EXAMPLES / "starter")) == 1


def test_the_policy_decides_what_an_undecided_net_does_to_the_exit_code(copy):
    folder = copy("starter", nets_csv=("UART_TX,serial,random", "UART_TX,serial,clock"))
    assert by_name(plan.plan(folder))["UART_TX"].verdict == "undecided"
    assert exit_code(plan.plan(folder)) == 1
    assert exit_code(plan.plan(folder, undecided="warn")) == 0


def test_check_proposes_nothing(saltmarsh):
    found = plan.check(EXAMPLES / "saltmarsh")
    assert all(n.change == "none" and n.proposal == n.candidate_now for n in found.nets)
    assert found.totals == found.totals_after == saltmarsh.totals


def test_explain_lists_every_candidate_with_what_refused_it():
    found = plan.explain(EXAMPLES / "saltmarsh", "DISP_CLK")
    (net,) = found.nets
    assert len(net.candidates) == 22  # a link or one of 21 E12 values from 10 to 470 ohm
    for c in net.candidates:
        assert c.passes or c.candidate == net.proposal or c.why_rejected
    assert net.pictures.waveforms
    assert net.pictures.spectra


def test_explain_answers_an_unknown_net_with_the_nearest():
    with pytest.raises(InputError, match="SDR_CLK"):
        plan.explain(EXAMPLES / "saltmarsh", "SDR_CLKK")


def test_the_same_inputs_give_the_same_bytes_for_any_jobs(saltmarsh):
    again = plan.plan(EXAMPLES / "saltmarsh", jobs=2)
    for form in ("json", "csv", "table", "markdown"):
        assert render(again, form) == render(saltmarsh, form)


def test_no_number_of_the_record_is_infinite_or_nan(saltmarsh):
    text = render(saltmarsh, "json")
    assert not re.search(r"\b(NaN|Infinity)\b", text)
    assert json.loads(text)["schema"] == "edgeplan/results/1"


def test_a_stated_margin_moves_the_budget_by_as_much(copy):
    folder = copy("saltmarsh", board_toml=('margin = "6 dB"', 'margin = "3 dB"'))
    first = plan.check(EXAMPLES / "saltmarsh")
    second = plan.check(folder)
    for before, after in zip(first.nets, second.nets, strict=True):
        a = next((c for c in before.checks if c.check == "emission" and c.decided), None)
        b = next((c for c in after.checks if c.check == "emission" and c.decided), None)
        if a and b:
            assert b.margin - a.margin == pytest.approx(3.0, abs=1e-6)


def test_more_setup_time_moves_the_setup_edge_only(copy):
    folder = copy(
        "saltmarsh",
        board_toml=('setup = "4 ns", hold = "1.5 ns"}', 'setup = "5 ns", hold = "1.5 ns"}'),
    )
    before = by_name(plan.check(EXAMPLES / "saltmarsh"))["RM_TXEN"]
    after = by_name(plan.check(folder))["RM_TXEN"]
    limits = [{c.check: c.limit_edge_s for c in net.checks} for net in (before, after)]
    assert limits[1]["setup"] < limits[0]["setup"]
    for check in limits[0]:
        if check != "setup":
            same = (limits[0][check] or 0.0, limits[1][check] or 0.0)
            assert same[1] == pytest.approx(same[0], rel=1e-3)


BROKEN = Path(__file__).parent / "boards" / "broken"


@pytest.mark.parametrize("name", ["all_at_once", "empty_file", "not_utf8", "wrong_toml"])
def test_a_broken_board_ends_in_2_with_every_fault_told_and_nothing_written(name, tmp_path):
    asked = [
        sys.executable,
        "-m",
        "edgeplan",
        "plan",
        BROKEN / name,
        "--write",
        f"csv={tmp_path / 'a.csv'}",
    ]
    run = subprocess.run(asked, capture_output=True, text=True, check=False)
    assert run.returncode == 2
    assert run.stdout == ""
    assert "error:" in run.stderr
    assert "Traceback" not in run.stderr
    assert not list(tmp_path.iterdir())


def test_what_a_proposal_changes_is_split_into_edge_and_current():
    """DISP_CLK gets a resistor: the same edge, so that all of the change is current."""
    (resistor,) = plan.explain(EXAMPLES / "saltmarsh", "DISP_CLK").nets
    now, after = resistor.pictures.spectra
    assert not now.change_by_edge_db
    assert set(after.change_by_edge_db) == {0.0}
    for i, change in enumerate(after.change_by_current_db):
        if now.trace_dbuv_per_m[i] > -90:
            moved = after.cable_dbuv_per_m[i] - now.cable_dbuv_per_m[i]
            assert change == pytest.approx(moved, abs=0.01)


def test_a_stated_sweep_of_the_clock_is_credited_and_told_with_its_net(copy, saltmarsh):
    source = '{name = "osq", nets = ["REF50*", "SD_CLK"]}'
    swept = source[:-1] + ', spread = {width = "5 %", rate = "30 kHz", profile = "triangle"}}'
    found = plan.check(copy("saltmarsh", board_toml=(source, swept)))
    before, after = (
        next(c for n in r.nets if n.net == "REF50" for c in n.checks if c.check == "emission")
        for r in (saltmarsh, found)
    )
    assert after.margin > before.margin
    (note,) = (t for n in found.nets if n.net == "REF50" for t in n.notes if "osq" in t)
    assert "sweeps by 5.0 % in all, 30 kHz triangle: credited" in note
    texts = [a.text for a in found.assumptions if a.subject == "activity"]
    assert texts == ["a stated triangular sweep of the clock is credited: REF50, REF50_PHY, SD_CLK"]
