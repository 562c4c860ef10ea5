"""A user's own limit table."""

import numpy as np
import pytest

from edgeplan import limits


def row(mhz, level, **other):
    return {"frequency_mhz": str(mhz), "level_dbuv_per_m": str(level), **other}


def test_two_rows_at_one_frequency_are_a_step_and_the_lower_level_holds_on_it():
    own = limits.user_line(
        [row(30, 40), row(230, 40), row(230, 47), row(1000, 47)], limit_id="house", distance_m=3
    )
    level = own.level_dbuv_per_m([30e6, 230e6, 231e6, 1e9], "quasi-peak")
    np.testing.assert_array_equal(level, [40, 40, 47, 47])
    assert own.basis == "user"
    assert own.verified


def test_between_rows_the_line_is_straight_over_log_frequency():
    own = limits.user_line([row(100, 40), row(1000, 60)], limit_id="house")
    assert own.level_dbuv_per_m(100e6 * 10**0.25) == pytest.approx(45.0)


def test_frequencies_and_bandwidths_may_be_in_hertz():
    rows = [
        {"frequency_hz": 30e6, "level_dbuv_per_m": 40.0, "bandwidth_khz": "100"},
        {"frequency_hz": 200e6, "level_dbuv_per_m": 40.0, "bandwidth_hz": 1e5},
    ]
    own = limits.user_line(rows, limit_id="house")
    assert own.bandwidth_hz(100e6) == 100e3


def test_without_a_bandwidth_that_of_the_cispr_band_is_taken():
    rows = [row(0.15, 60, detector="peak"), row(30, 60, detector="peak")]
    rows += [row(1000, 60, detector="peak"), row(6000, 60, detector="peak")]
    own = limits.user_line(rows, limit_id="house")
    np.testing.assert_array_equal(own.bandwidth_hz([1e6, 1e8, 2e9], "peak"), [9e3, 120e3, 1e6])


def test_short_words_for_detectors_are_understood():
    rows = [row(1000, 50, detector="AV"), row(3000, 50, detector="avg")]
    assert limits.user_line(rows, limit_id="house").detectors == ("average",)


def test_every_fault_is_listed_in_one_pass():
    rows = [
        row("3o", 40),
        row(100, ""),
        row(200, 40, detector="rms"),
        row(-5, 40),
        row(300, 40),
        row(250, 40),
    ]
    with pytest.raises(limits.UserLineError) as caught:
        limits.user_line(rows, limit_id="house")
    assert [(f.row, f.column) for f in caught.value.faults] == [
        (1, "frequency_mhz"),
        (2, "level_dbuv_per_m"),
        (3, "detector"),
        (4, "frequency_mhz"),
        (6, "frequency_hz"),
    ]
    assert "row 1: frequency_mhz: '3o' is not a number" in str(caught.value)
    assert isinstance(caught.value, ValueError)


def test_a_stretch_across_1_ghz_without_a_bandwidth_asks_for_a_row_there():
    with pytest.raises(limits.UserLineError, match="add a row at 1000 MHz"):
        limits.user_line([row(500, 40), row(2000, 40)], limit_id="house")


@pytest.mark.parametrize(
    ("rows", "distance_m", "part"),
    [
        ([], 3.0, "no rows"),
        ([row(30, 40)], 3.0, "no line"),
        ([row(30, 40), row(100, 40)], 0.0, "distance"),
    ],
)
def test_a_table_that_is_no_line_is_refused(rows, distance_m, part):
    with pytest.raises(limits.UserLineError, match=part):
        limits.user_line(rows, limit_id="house", distance_m=distance_m)
