"""Shipped limit lines as text."""

import pytest

from edgeplan import limits


def test_the_listing_has_a_row_for_every_line_and_marks_the_unverified():
    rows = limits.listing().splitlines()[1:]
    assert [row.split()[0] for row in rows] == list(limits.ids())
    unverified = {row.split()[0] for row in rows if "unverified" in row}
    assert unverified == {i for i in limits.ids() if not limits.line(i).verified}


def test_columns_of_the_listing_are_aligned():
    heading, *rows = limits.listing().splitlines()
    at = heading.index("distance")
    assert all(row[at - 1] == " " and row[at].isdigit() for row in rows)


def test_a_description_prints_figures_detector_bandwidth_and_source():
    text = limits.describe("fcc-15-109-class-b-3m")
    assert "source: 47 CFR 15.109(a)" in text
    assert "88          216  43.52          quasi-peak  120 kHz" in text
    assert "1000        40000  73.98          peak        1 MHz  quoted indirectly" in text


def test_a_description_from_memory_says_unverified():
    assert "(unverified)" in limits.describe("cispr11-g1-class-b-3m")


def test_a_slope_shows_both_ends():
    assert "24.00 to 44.00" in limits.describe("mil-std-461g-re102-ground-mobile-1m")


@pytest.mark.parametrize("limit_id", limits.ids())
def test_every_line_can_be_described_within_a_hundred_and_ten_columns(limit_id):
    assert all(len(row) <= 110 for row in limits.describe(limit_id).splitlines())


def test_describing_an_unknown_line_suggests_ids():
    with pytest.raises(ValueError, match="did you mean"):
        limits.describe("cispr32")
