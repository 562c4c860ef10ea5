"""Numbers with three figures and their prefix; long names cut in the middle."""

import math

import pytest

from edgeplan.reports import phrases
from edgeplan.results import Corners, Window, WindowEnd


@pytest.mark.parametrize(
    ("value", "unit", "words"),
    [
        (9.996e-10, "s", "1.00 ns"),
        (9.99e-10, "s", "999 ps"),
        (1e-12, "s", "1.00 ps"),
        (0.0, "s", "0.00 s"),
        (-4.5e-8, "s", "-45.0 ns"),
        (66.666666e6, "Hz", "66.67 MHz"),
        (1e9, "Hz", "1 GHz"),
        (4700.0, "ohm", "4.7 kΩ"),
        (0.0, "ohm", "0 Ω"),
        (0.3, "V", "300 mV"),
        (-0.4949, "V", "-495 mV"),
        (-0.04, "dB", "-0.0 dB"),
        (41.25, "dBµV/m", "41.2 dBµV/m"),
        (0.155, "", "15.5 %"),
        (math.nan, "s", "?"),
        (math.inf, "dB", "?"),
    ],
)
def test_a_number_has_three_figures_and_a_prefix(value, unit, words):
    assert phrases.engineering(value, unit) == words


@pytest.mark.parametrize("name", ["A" * 60, "数据" * 20, "e\u0301" * 30, "BUS[10]", "x"])
@pytest.mark.parametrize("width", [3, 4, 12, 17])
def test_a_cut_name_never_takes_more_than_its_columns(name, width):
    cut = phrases.cut_middle(name, width)
    assert phrases.display_width(cut) <= width
    head, _, tail = cut.partition("…")
    assert name.startswith(head)
    assert name.endswith(tail)


def test_a_number_stays_with_its_unit_when_a_sentence_is_broken():
    lines = phrases.wrap("add a resistor of 33 Ω and lose 4.5 dB at 165 MHz, not 7 %", 18)
    assert all(not line.endswith(("33", "4.5", "165", "7")) for line in lines)
    assert " ".join(lines) == "add a resistor of 33 Ω and lose 4.5 dB at 165 MHz, not 7 %"


def test_ends_of_a_window_that_are_no_number_are_words():
    none, any_edge = WindowEnd(edge_s=None, why_none="too slow"), WindowEnd(edge_s=0.0, any=True)
    unknown, known = WindowEnd(edge_s=None), WindowEnd(edge_s=2e-9)
    spans = {
        (none, none): "none",
        (none, known): "none–2.00",
        (known, none): "2.00–none",
        (any_edge, any_edge): "any",
        (any_edge, known): "any–2.00",
        (unknown, unknown): "?",
        (unknown, known): "?–2.00",
    }
    for (fast, slow), words in spans.items():
        window = Window(fastest_acceptable=fast, slowest_allowed=slow)
        assert phrases.window_span(window) == words


def test_an_edge_with_one_corner_missing_says_so():
    assert phrases.edge_span(Corners(slow=1.5e-9)) == "?–1.50"


def test_one_name_more_than_shown_is_shown_as_well():
    assert phrases.listed(["A", "B", "C"], 2) == "A, B, C"
