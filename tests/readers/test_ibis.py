"""Model files written for these checks by the rules of ANSI/EIA-656, regular and malformed."""

from math import isnan
from pathlib import Path

import pytest
from driver_files import REGULAR

from edgeplan.driver_models import cannot_drive
from edgeplan.errors import InputError
from edgeplan.ibis import Triple
from edgeplan.readers import ibis


def read(text):
    return ibis.read(text.encode("latin-1"), "qx1.ibs")


def changed(*pairs):
    """Read the regular file with lines replaced."""
    text = REGULAR
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new, 1)
    return read(text)


def words(problems):
    return "\n".join(f"{p.row}: {p.message} {p.hint}" for p in problems)


@pytest.fixture(scope="module")
def regular():
    return read(REGULAR).models


def test_a_regular_file_leaves_nothing_to_say_but_one_lost_model():
    reading = read(REGULAR)
    assert reading.errors == []
    assert words(reading.notes) == "14: selector 'dq': there is no model 'half' "


def test_the_component_has_its_package_and_pins(regular):
    (part,) = regular.components
    assert part.name == "QX-1"
    assert part.resistance_ohm == Triple(0.05, 0.04, 0.06)
    assert part.inductance_h == Triple(2e-9, 1e-9, 3e-9)
    assert part.capacitance_f == Triple(0.5e-12, 0.4e-12, 0.6e-12)
    assert [(pin.pin, pin.signal, pin.model) for pin in part.pins] == [
        ("A1", "DQ0", "dq"),
        ("A2", "DQ1", "dq"),
        ("A3", "CLK", "in"),
        ("A4", "VDD", "POWER"),
    ]
    assert (part.pins[0].resistance_ohm, part.pins[0].capacitance_f) == (0.06, 0.7e-12)
    assert isnan(part.pins[1].inductance_h)
    assert isnan(part.pins[2].resistance_ohm)


def test_a_selector_keeps_its_order_and_texts_and_wins_over_a_model_of_its_name(regular):
    assert regular.selectors["dq"].entries == (("full", "all of it"), ("half", "one half of it"))
    pin = regular.components[0].pins[0]
    assert regular.models_of(pin) == ("full", "half")
    assert regular.models_of(regular.components[0].pins[3]) == ()


def test_a_model_has_its_values_and_line(regular):
    full = regular.models["full"]
    assert (full.row, full.kind, full.drives, full.receives) == (17, "i/o", True, True)
    assert full.capacitance_f == Triple(5e-12, 4e-12, 6e-12)
    assert (full.input_low_v.typ, full.input_high_v.typ) == (0.8, 2.0)
    assert full.ramp.rise_v == Triple(1.32, 1.12, 1.54)
    assert full.ramp.fall_s == Triple(0.6e-9, 0.61e-9, 0.59e-9)
    assert full.ramp.load_ohm == 50.0
    rising, falling = full.waveforms
    assert (rising.rising, falling.rising) == (True, False)
    assert falling.voltage_v == Triple(3.3, 3.0, 3.6)
    assert rising.rows.min == (0.0, 1.88, 1.88)


def test_references_default_to_the_supply_and_ground(regular):
    reference = regular.models["full"].reference_v
    assert reference["pullup"] == reference["power clamp"] == Triple(3.3, 3.0, 3.6)
    assert reference["pulldown"] == reference["gnd clamp"] == Triple(0.0, 0.0, 0.0)


def test_stated_references_do_without_a_supply():
    reading = changed(
        ("[Voltage Range]  3.3V  3.0V  3.6V", "[Pullup Reference] 1.8 1.7 1.9"),
    )
    assert reading.errors == []
    assert reading.models.models["full"].reference_v["pullup"] == Triple(1.8, 1.7, 1.9)


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_any_end_of_line_gives_the_same_file(end, regular):
    assert repr(read(REGULAR.replace("\n", end)).models.models) == repr(regular.models)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("[GND Clamp]", "[gnd_CLAMP]"),
        ("[Voltage Range]  3.3V  3.0V  3.6V", "[voltage_range]\t3.3V\t3.0V\t3.6V"),
        ("C_comp  5.0pF  4.0pF  6.0pF", "c_comp=5.0pF 4.0pF 6.0pF"),
        ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp = 5.0e-12 4.0 pF 6000fF"),
        ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp  5.0pF  6.0pF  4.0pF"),
        ("R_load = 50", "R_load=0.05k"),
        ("R_load = 50", "R_load = 50 ohms"),
        ("R_load = 50", "R_load 50.00Ohm"),
        ("R_load = 50\n", ""),
        ("dV/dt_r  1.32/0.60n", "dV/dt_r = 1.32 / 600ps"),
        ("Vinl = 0.8V", "Vinl 0.8V measured at the pad"),
        (" 0.0    0mA     0mA     0mA", "\t0.0\t0mA\t0mA\t0mA|glued remark"),
        ("Model_type  I/O", "Model_type i/O"),
        (
            "-3.3  -165mA  -132mA  -206mA\n 0.0    0mA     0mA     0mA\n"
            " 6.6   330mA   264mA   412mA\n",
            " 6.6   330mA   264mA   412mA\n 0.0    0mA     0mA     0mA\n"
            " 0.0    0mA     0mA     0mA\n-3.3  -165mA  -132mA  -206mA\n",
        ),
        ("[Pulldown]\n", "[Pulldown]\nVoltage I(typ) I(min) I(max)\n"),
        ("Polarity", "|" + "x" * 300 + "\nPolarity"),
        (
            "[Manufacturer] invented",
            "[Manufacturer] invented\n [Model] of prose\n\xe9\x00\x80 text",
        ),
        ("[End]\n", "[End]\n[Model] after\nModel_type Nothing\n"),
        ("[File Name]    qx1.ibs", "[File Name] another_name_that_is_too_long_for_old_files.ibs"),
        ("[IBIS Ver]     3.2", "\xef\xbb\xbf[IBIS Ver] 3.2"),
        ("[Component]", "[Comment Char] |_char\n[Component]"),
        ("[Component]", "[Comment Char] !_char\n! | [\n[Comment Char] |_char\n[Component]"),
    ],
)
def test_spellings_that_mean_the_same_are_read_the_same(old, new, regular):
    reading = changed((old, new))
    assert reading.errors == []
    models = reading.models.models
    assert _without_rows(models["full"]) == _without_rows(regular.models["full"])
    assert set(models) == {"full", "in"}


def _without_rows(model):
    """Return the numbers of a model, whatever lines they stand in."""
    return (
        model.kind,
        tuple(model.capacitance_f),
        {k: (r.at, r.typ, tuple(map(str, r.min))) for k, r in model.tables.items()},
        (model.ramp.rise_s, model.ramp.rise_v, model.ramp.load_ohm),
        [(w.rows.at, w.rows.max, w.resistance_ohm) for w in model.waveforms],
        (model.input_low_v.typ, model.input_high_v.typ),
    )


def test_a_file_without_its_end_or_last_line_break_is_told_and_read(regular):
    reading = read(REGULAR.removesuffix("[End]\n").rstrip("\n"))
    assert "[End] is missing" in words(reading.notes)
    assert repr(reading.models.models) == repr(regular.models)


def test_another_comment_character_leaves_the_usual_one_alone():
    reading = changed(
        ("[Component]    QX-1", "[Comment Char] !_char\n[Component] QX|1 ! remark"),
    )
    assert reading.models.components[0].name == "QX|1"


@pytest.mark.parametrize("argument", ["x_char", "", "|", "[_char"])
def test_a_comment_character_that_is_none_is_told_and_changes_nothing(argument):
    reading = changed(("[Component]", f"[Comment Char] {argument}\n[Component]"))
    assert "is no comment character" in words(reading.notes)
    assert reading.errors == []


def test_na_leaves_a_column_without_a_value(regular):
    clamp = regular.models["full"].tables["gnd clamp"]
    assert not clamp.has("min")
    assert clamp.column("min") == ((-3.3, 0.0), (-1e-3, 0.0))


def test_a_cell_without_a_value_joins_its_neighbours():
    reading = changed((" 0.0    0mA     0mA     0mA", " 0.0    0mA     NA     0mA"))
    assert reading.models.models["full"].tables["pulldown"].column("min") == (
        (-3.3, 6.6),
        (-0.132, 0.264),
    )


def test_a_row_of_three_columns_has_no_maximum_and_is_told():
    reading = changed((" 6.6   330mA   264mA   412mA", " 6.6   330mA   264mA"))
    assert "31: 3 columns; what is missing counts as NA" in words(reading.notes)
    assert isnan(reading.models.models["full"].tables["pulldown"].max[-1])


def test_two_currents_at_one_voltage_are_told_and_count_with_their_mean():
    reading = changed(
        (" 6.6   330mA   264mA   412mA", " 6.6   330mA   264mA   412mA\n 6.6 350mA 264mA 412mA")
    )
    assert "rows at one place differ" in words(reading.notes)
    assert reading.models.models["full"].tables["pulldown"].typ[-1] == pytest.approx(0.34)


def test_parts_of_the_capacitance_are_summed_where_the_whole_is_missing():
    parts = "C_comp_pullup 2pF 1pF 3pF\nC_comp_pulldown 2pF NA NA\nC_comp_gnd_clamp 1pF 1pF 1pF"
    reading = changed(("C_comp  5.0pF  4.0pF  6.0pF", parts))
    assert tuple(reading.models.models["full"].capacitance_f) == pytest.approx(
        (5e-12, 4e-12, 6e-12)
    )


def test_a_model_specification_wins_over_the_model():
    reading = changed(
        ("[Temperature Range]", "[Model Spec]\nVinl 0.9 0.8 1.0\nS_overshoot_high 4.6\n[Temp]"),
    )
    full = reading.models.models["full"]
    assert full.input_low_v == Triple(0.9, 0.8, 1.0)
    assert full.overshoot_high_v.typ == 4.6


def test_tables_of_a_submodel_do_not_become_those_of_the_model_before_it():
    reading = changed(("[Model] in", "[Submodel] bus\n[GND Clamp]\n0 0\n1 1\n[Model] in"))
    assert len(reading.models.models["full"].tables["gnd clamp"].at) == 2
    assert reading.models.models["full"].tables["gnd clamp"].at[0] == -3.3


def test_a_selector_may_stand_between_the_parts_of_a_component_or_of_a_model(regular):
    selector = "[Model Selector] dq\nfull   all of it\nhalf   one half of it\n"
    plain = REGULAR.replace(selector, "")
    for keyword in ("[Pin]", "[Ramp]", "[End]"):
        models = read(plain.replace(keyword, selector + keyword)).models
        assert len(models.components[0].pins) == 4
        assert models.selectors["dq"].entries == regular.selectors["dq"].entries
        assert models.models["full"].ramp.load_ohm == 50.0


def test_an_unknown_keyword_is_passed_over_with_a_note():
    reading = changed(("[Ramp]", "[Novelty] 5\n1 2 3\n[Ramp]"))
    assert "[novelty] is not known and was passed over" in words(reading.notes)
    assert reading.errors == []


@pytest.mark.parametrize("keyword", ["Driver Schedule", "Add Submodel", "External Model"])
def test_what_a_model_has_beside_its_tables_is_told(keyword):
    reading = changed(("[Ramp]", f"[{keyword}]\nx\n[Ramp]"))
    assert "model 'full': its" in words(reading.notes).replace("it is put", "its put")


def test_an_indented_keyword_that_stands_nowhere_else_is_told():
    reading = changed(("[Ramp]", " [Ramp]"))
    assert "[ramp] is indented and was taken for text" in words(reading.notes)


def test_the_first_of_two_models_of_a_name_counts():
    reading = changed(("[Model] in", "[Model] full\nModel_type Input\nC_comp 1pF\n[Model] in"))
    assert "model 'full' is there twice; row 17 counts" in words(reading.notes)
    assert reading.models.models["full"].kind == "i/o"


def test_a_pin_without_a_model_is_told():
    reading = changed(("A3     CLK          in", "A3 CLK lost"))
    assert "12: there is no model and no selector 'lost'" in words(reading.notes)


def test_package_columns_follow_their_headings():
    reading = changed(
        ("R_pin  L_pin  C_pin", "C_pin R_pin L_pin"),
        ("60m    2.2nH  0.7pF", "0.7pF 60m 2.2nH"),
    )
    pin = reading.models.components[0].pins[0]
    assert (pin.resistance_ohm, pin.inductance_h, pin.capacitance_f) == (0.06, 2.2e-9, 0.7e-12)


# What makes a model useless: the line replaced, and the row and words told.
FAULTS = [
    ("Model_type  I/O", "Model_type  IO", 18, "no such Model_type 'IO'"),
    ("Model_type  I/O", "", 17, "model 'full' has no Model_type"),
    ("[Voltage Range]  3.3V  3.0V  3.6V", "[Voltage Range] NA", 27, "the typical value is NA"),
    ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 5.0", 25, "'5.0' is too large for a capacitance"),
    ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp", 25, "the value is missing"),
    ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 5,0pF", 25, "decimal comma"),
    (" 6.6   330mA   264mA   412mA", " 6.6   330MA 264mA 412mA", 31, "'330MA' is too large"),
    (" 6.6   330mA   264mA   412mA", " 6.6   33x0 264mA 412mA", 31, "'33x0' is not a number"),
    (" 6.6   330mA   264mA   412mA", " 6.6   nan 264mA 412mA", 31, "'nan' is not a number"),
    (" 6.6   330mA   264mA   412mA", " 6.6", 31, "a row needs its place"),
    (" 6.6   330mA   264mA   412mA", " 6.6  1e999 1 1", 31, "'1e999' is too large"),
    ("dV/dt_r  1.32/0.60n", "dV/dt_r  1.32", 43, "a slope is written volts/seconds"),
    ("dV/dt_r  1.32/0.60n", "dV/dt_r  -1.32/0.60n", 43, "above 0"),
    ("R_load = 50", "R_load = 0", 42, "R_load of 0 ohm is no load"),
    ("R_fixture = 50\nV_fixture = 0.0", "V_fixture = 0.0", 46, "needs R_fixture and V_fixture"),
    ("0.0n  0.0  0.0  0.0\n1.0n  2.2  1.88 2.57\n9.0n  2.2  1.88 2.57", "", 46, "no rows"),
]


@pytest.mark.parametrize(("old", "new", "row", "told"), FAULTS)
def test_a_fault_is_told_at_its_line_and_costs_its_model_only(old, new, row, told):
    reading = changed((old, new))
    assert any(p.row == row and told in p.message for p in reading.errors), words(reading.errors)
    assert "full" not in reading.models.models
    assert reading.models.spoilt == {"full"}
    assert "in" in reading.models.models


def test_all_faults_of_a_model_are_told_at_once():
    reading = changed(("C_comp  5.0pF", "C_comp 5x"), ("R_load = 50", "R_load = 0"))
    assert len(reading.errors) == 2


def test_a_large_letter_that_would_be_a_scale_if_small_is_told():
    reading = changed(("R_load = 50", "R_load = 1K"))
    assert "'1K' was read as 1 scale letters are case-sensitive: write k" in words(reading.notes)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("", "no keyword starts a line"),
        ("just words\n", "no keyword starts a line"),
        ("PK\x03\x04 zip", "zip archive"),
        ("[IBIS Ver] 3.2\n[End]\n", "the file has no [Model]"),
    ],
)
def test_what_is_no_model_file_is_told(text, told):
    assert told in words(read(text).errors)


@pytest.mark.parametrize(
    ("version", "known"), [("1.1", True), ("2.1", True), ("7.2", True), ("8.0", False)]
)
def test_versions_up_to_seven_are_known(version, known):
    reading = changed(("[IBIS Ver]     3.2", f"[IBIS Ver] {version}"))
    assert ("is not known" in words(reading.notes)) != known


@pytest.mark.parametrize("kind", ["Series", "Output_ECL", "Terminator", "Output_diff"])
def test_types_that_are_not_read_say_so(kind):
    reading = changed(("Model_type  I/O", f"Model_type {kind}"))
    assert "is not read" in cannot_drive(reading.models.models["full"])


def test_a_driver_without_a_table_says_which():
    reading = changed(("[Pullup]\n-3.3   132mA", "[Notes]\n-3.3 132mA"))
    full = reading.models.models["full"]
    assert not full.drives
    assert cannot_drive(full) == "holds no [pullup]"


def test_a_file_on_disk_is_read_and_hashed(tmp_path):
    path = tmp_path / "qx1.ibs"
    path.write_bytes(REGULAR.encode())
    assert len(ibis.read_file(path).models.sha256) == 64


@pytest.mark.parametrize("content", [b"", b"[IBIS Ver] 3.2\n[Model] a\nModel_type No\n[End]\n"])
def test_a_file_of_which_nothing_can_be_read_is_refused(tmp_path, content):
    path = tmp_path / "bad.ibs"
    path.write_bytes(content)
    with pytest.raises(InputError):
        ibis.read_file(path)


def test_a_missing_file_is_refused():
    with pytest.raises(InputError):
        ibis.read_file(Path("/nowhere/at/all.ibs"))
