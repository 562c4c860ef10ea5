"""Two-ports: what scikit-rf writes and reads, the text of the format, and the place of faults."""

import cmath
import random

import numpy as np
import pytest
import skrf

from edgeplan.readers import touchstone

OPTIONS = "# MHz S MA R 50\n"
ROW = " 0.1 10 0.5 -20 0.4 -30 0.2 40\n"
V2 = """[Version] 2.0
# MHz S RI R 50
[Number of Ports] 2
[Two-Port Data Order] {order}
[Number of Frequencies] 2
[Reference]
50 75
[Network Data]
100 0.1 0 0.5 0 0.4 0 0.2 0
200 0.1 0 0.6 0 0.4 0 0.2 0
"""


def read(text):
    problems = []
    return touchstone.read(text, "path.s2p", problems), problems


def told(text):
    two_port, problems = read(text)
    assert two_port is None
    return [(p.row, p.column, p.message) for p in problems]


@pytest.mark.parametrize("form", ["db", "ma", "ri"])
@pytest.mark.parametrize("unit", ["Hz", "kHz", "MHz", "GHz"])
def test_what_scikit_rf_writes_is_read_back(tmp_path, form, unit):
    rng = np.random.default_rng(41)
    s = (rng.normal(size=(7, 2, 2)) + 1j * rng.normal(size=(7, 2, 2))) / 3
    frequency = skrf.Frequency.from_f(np.linspace(30e6, 1e9, 7), unit="Hz")
    frequency.unit = unit
    network = skrf.Network(frequency=frequency, s=s, z0=50)
    network.write_touchstone("path", dir=str(tmp_path), form=form, skrf_comment=False)
    two_port, problems = read((tmp_path / "path.s2p").read_text())
    assert problems == []
    assert [p.frequency_hz for p in two_port.points] == pytest.approx(list(frequency.f), rel=1e-9)
    np.testing.assert_allclose([p.s11 for p in two_port.points], s[:, 0, 0], rtol=1e-6)
    np.testing.assert_allclose([p.s21 for p in two_port.points], s[:, 1, 0], rtol=1e-6)


def test_the_voltage_ratio_is_that_of_the_loaded_network():
    # scikit-rf's chain matrix: V1 = (A + B/R2) V2 behind the load R2
    rng = np.random.default_rng(42)
    s = (rng.normal(size=(4, 2, 2)) + 1j * rng.normal(size=(4, 2, 2))) / 4
    for reference in ((50.0, 50.0), (50.0, 75.0)):
        a = skrf.network.s2a(s, np.tile(reference, (4, 1)))
        ratio = 1 / (a[:, 0, 0] + a[:, 0, 1] / reference[1])
        points = [touchstone.Point(1e9, m[0, 0], m[1, 0], 1) for m in s]
        computed = touchstone.TwoPort(tuple(points), reference).voltage_ratio()
        np.testing.assert_allclose(computed, ratio, rtol=1e-9)


def test_version_one_has_s21_before_s12_whatever_a_comment_says():
    two_port, _ = read("! f S11 S12 S21 S22\n" + OPTIONS + "100" + ROW)
    assert two_port.points[0].s21 == pytest.approx(cmath.rect(0.5, np.radians(-20)))


def test_options_may_stand_in_any_order_and_case_and_default_to_gigahertz_and_magnitude():
    two_port, _ = read("#r 75 ri s KHZ\n100 0 0 1 0 1 0 0 0\n")
    assert two_port.points[0].frequency_hz == 100e3
    assert two_port.reference_ohm == (75.0, 75.0)
    two_port, _ = read("#\n1 0 0 0.5 90 0 0 0 0\n")
    assert two_port.points[0].frequency_hz == 1e9
    assert two_port.points[0].s21 == pytest.approx(0.5j)


def test_later_option_lines_are_ignored_and_comments_may_stand_anywhere():
    text = OPTIONS + "100" + ROW + "# GHz Y\n! between\n200" + ROW.replace("\n", " ! end\n")
    assert [p.frequency_hz for p in read(text)[0].points] == [100e6, 200e6]


def test_noise_data_behind_a_lower_frequency_are_left_out():
    text = OPTIONS + "100" + ROW + "200" + ROW + "50 1.2 0.3 40 0.5\n100 1.3 0.3 50 0.5\n"
    assert len(read(text)[0].points) == 2


@pytest.mark.parametrize(("order", "s21"), [("21_12", 0.5), ("12_21", 0.4)])
def test_version_two_says_its_order_and_both_references(order, s21):
    for end in ("", "[End]\n", "[Noise Data]\n50 1 1 1 1\n[End]\n"):
        two_port, problems = read(V2.format(order=order) + end)
        assert problems == []
        assert two_port.points[0].s21 == s21
        assert two_port.reference_ohm == (50.0, 75.0)


@pytest.mark.parametrize(
    ("form", "cells"), [("Lower", "0.1 0 0.5 0 0.2 0"), ("Upper", "0.1 0 0.5 0 0.2 0")]
)
def test_version_two_may_leave_half_of_a_reciprocal_matrix_out(form, cells):
    text = (
        V2.format(order="21_12")
        .partition("100 0.1")[0]
        .replace("[Network Data]", f"[Matrix Format] {form}\n[Network Data]")
    )
    two_port, problems = read(text + f"100 {cells}\n200 {cells}\n")
    assert problems == []
    assert two_port.points[1].s21 == 0.5


def test_information_of_version_two_is_skipped():
    text = V2.format(order="21_12").replace(
        "[Network Data]", "[Begin Information]\nbench 7\n[End Information]\n[Network Data]"
    )
    assert len(read(text)[0].points) == 2


def test_a_file_without_options_or_data_says_so():
    assert told("100" + ROW) == [(1, 1, "there is no option line")]
    assert told(OPTIONS) == [(1, 1, "there are no data")]


def test_a_line_with_too_few_numbers_is_named():
    assert told(OPTIONS + "100" + ROW + "200 1 2 3\n")[0][:2] == (3, 1)


def test_a_word_that_is_no_number_is_named_at_its_column():
    assert told(OPTIONS + "100 0.1 10 0,5 -20 0.4 -30 0.2 40\n") == [
        (2, 12, "'0,5' has a decimal comma")
    ]


@pytest.mark.parametrize("letter", ["Y", "Z", "H", "G"])
def test_other_parameters_are_refused(letter):
    assert told(f"# MHz {letter} RI R 50\n100" + ROW)[0] == (
        1,
        7,
        f"{letter} parameters are not read",
    )


def test_what_version_two_must_say_is_missed():
    text = V2.format(order="21_12")
    assert told(text.replace("[Two-Port Data Order] 21_12\n", ""))[0][2] == (
        "[Two-Port Data Order] is missing"
    )
    assert told(text.replace("Ports] 2", "Ports] 4"))[0][:2] == (3, 1)
    assert (
        "3 frequencies are stated, 2 are there"
        in told(text.replace("Frequencies] 2", "Frequencies] 3"))[0]
    )
    assert told(text.replace("50 75", "50 75 50"))[0][2] == (
        "a two-port has two reference impedances"
    )
    assert told(text.replace("2.0", "3.0"))[0][2] == "version '3.0' is not known"


def test_an_impedance_is_above_nothing():
    assert told("# MHz S RI R -50\n100" + ROW)[0] == (1, 14, "'-50' is no impedance")
    assert told("# MHz S RI R\n100" + ROW)[0][2] == "'R' is no impedance"


def test_spoilt_files_give_problems_and_never_a_traceback():
    chance = random.Random(43)  # noqa: S311 - reproducible, no secrets
    pieces = ["#", "[", "]", "!", "1e999", "nan", "-1", "\n", " ", "R", "[Version] 2.0\n", "dB"]
    for text in (OPTIONS + ("100" + ROW) + ("200" + ROW), V2.format(order="21_12")):
        for _ in range(300):
            spoilt = text
            for _ in range(chance.choice((1, 1, 3))):
                at = chance.randrange(len(spoilt))
                end = at + chance.choice((0, 0, 5, 20))
                spoilt = spoilt[:at] + chance.choice(pieces) + spoilt[end:]
            two_port, problems = read(spoilt)
            assert (two_port is None) == bool(problems)
            if two_port is not None:
                two_port.voltage_ratio()
