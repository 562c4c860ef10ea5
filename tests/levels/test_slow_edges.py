"""Slow-edge limits of logic families, as data sheets print them."""

import math

import pytest

from edgeplan import levels


@pytest.mark.parametrize(
    ("family_id", "supply_v", "ns_per_v", "verified"),
    [
        ("4000b", 5.0, 5000, True),
        ("hc", 3.3, 1000, True),
        ("hc", 5.0, 500, True),
        ("hct", 5.0, 500, True),
        ("ac", 5.0, 20, True),
        ("act", 5.0, 10, True),
        ("ahc", 3.3, 100, True),
        ("lvc", 3.3, 10, True),
        ("lvc", 1.8, 20, False),
        ("alvc", 3.3, 10, True),
        ("auc", 2.5, 20, False),
    ],
)
def test_limits_are_those_data_sheets_print(family_id, supply_v, ns_per_v, verified):
    limit, known = levels.slow_edge(family_id).longest_s_per_v(supply_v)
    assert limit == pytest.approx(ns_per_v * 1e-9)
    assert known is verified


def test_between_two_rows_the_stricter_one_holds():
    assert levels.slow_edge("hc").longest_s_per_v(4.5) == (pytest.approx(500e-9), True)


def test_a_supply_within_ten_percent_belongs_to_its_row():
    assert levels.slow_edge("lvc").longest_s_per_v(3.6) == (pytest.approx(10e-9), True)


def test_above_all_rows_there_is_no_limit_to_quote():
    limit, verified = levels.slow_edge("auc").longest_s_per_v(3.3)
    assert math.isnan(limit)
    assert not verified


def test_a_schmitt_input_takes_a_thousand_times_slower_edges():
    plain, _ = levels.slow_edge("vhc").longest_s_per_v(5.0)
    schmitt, _ = levels.slow_edge("vhc-schmitt").longest_s_per_v(5.0)
    assert schmitt / plain > 1000


def test_every_name_is_listed_and_answers():
    assert {"lcx", "avc", "hc"} <= set(levels.slow_edge_ids())
    assert all(levels.slow_edge(name).rows for name in levels.slow_edge_ids())


def test_an_unknown_family_is_answered_with_those_spelt_alike():
    with pytest.raises(ValueError, match=r"did you mean .*lvc"):
        levels.slow_edge("lvx")
