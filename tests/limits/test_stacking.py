"""Several lines at the frequencies of a board."""

import numpy as np

from edgeplan import limits


def test_each_line_and_detector_is_one_entry_with_its_distance():
    entries = limits.detector_lines(["cispr32-class-b-10m", "fcc-15-109-class-b-3m"], [1e8, 2e9])
    assert [(e.limit_id, e.detector, e.distance_m) for e in entries] == [
        ("cispr32-class-b-10m", "quasi-peak", 10.0),
        ("fcc-15-109-class-b-3m", "quasi-peak", 3.0),
        ("fcc-15-109-class-b-3m", "average", 3.0),
        ("fcc-15-109-class-b-3m", "peak", 3.0),
    ]


def test_entries_carry_level_and_bandwidth_at_every_frequency():
    (entry,) = limits.detector_lines(["cispr32-class-b-3m"], [100e6, 300e6, 2e9])
    np.testing.assert_array_equal(entry.level_dbuv_per_m, [40.0, 47.0, np.nan])
    np.testing.assert_array_equal(entry.bandwidth_hz, [120e3, 120e3, np.nan])


def test_an_entry_without_any_level_is_left_out():
    entries = limits.detector_lines(["cispr32-class-b-3m-above-1ghz"], [100e6])
    assert entries == ()


def test_a_line_of_the_users_own_stands_beside_shipped_ones():
    rows = [
        {"frequency_mhz": 30, "level_dbuv_per_m": 30},
        {"frequency_mhz": 1000, "level_dbuv_per_m": 30},
    ]
    own = limits.user_line(rows, limit_id="house", distance_m=1.0)
    entries = limits.detector_lines(["cispr32-class-b-3m", own], [100e6])
    assert [e.distance_m for e in entries] == [3.0, 1.0]
