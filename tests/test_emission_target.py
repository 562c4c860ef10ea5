"""What emission is judged against: which lines, how far up, and what they do not reach."""

import numpy as np
import pytest
from build import board

from edgeplan import limits
from edgeplan.emission_target import band_edges_hz, target_of
from edgeplan.limits import user_line

BELOW, ABOVE = "cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz"


def target(*limits, internal_hz=1e8, user_limits=(), **emission):
    b = board(
        facts={"highest_internal_frequency_hz": internal_hz},
        emission={"limits": list(limits or [BELOW])} | emission,
    )
    return target_of(b.model_copy(update={"user_limits": tuple(user_limits)}))


# CISPR 32, clause 8: to 1 GHz up to 108 MHz, 2 GHz up to 500 MHz, 5 GHz up to 1 GHz, then 6 GHz.
@pytest.mark.parametrize(
    ("internal_hz", "highest_hz"), [(1e8, 1e9), (200e6, 2e9), (800e6, 5e9), (1.2e9, 6e9)]
)
def test_the_measurement_ends_where_the_standards_own_rule_says(internal_hz, highest_hz):
    found = target(BELOW, ABOVE, internal_hz=internal_hz)
    assert found.highest_hz == highest_hz
    assert found.covered_to_hz == highest_hz
    assert found.not_covered == ""


def test_what_no_chosen_line_reaches_is_said_with_the_line_to_add():
    found = target(BELOW, internal_hz=400e6)
    assert found.covered_to_hz == 1e9
    assert "from 1 to 2 GHz is not judged" in found.not_covered
    assert found.not_covered.endswith(f"add {ABOVE}")


def test_nothing_is_judged_beyond_the_end_of_the_measurement():
    assert target(BELOW, ABOVE, internal_hz=1e8).covered_to_hz == 1e9


def test_margin_and_statistic_are_those_of_the_board():
    found = target(margin_db=4.0, statistic="worst-case")
    assert (found.margin_db, found.statistic) == (4.0, "worst-case")
    assert target().margin_db == 6.0


# CISPR 32, table A.4: class B at 3 m, 40 dBuV/m to 230 MHz, 47 to 1 GHz; the lower at the step.
@pytest.mark.parametrize(("frequency_hz", "level"), [(100e6, 40), (230e6, 40), (231e6, 47)])
def test_a_step_takes_the_tighter_limit(frequency_hz, level):
    (entry,) = target().at(np.array([frequency_hz]))
    assert entry.level_dbuv_per_m.tolist() == [level]


def test_each_detector_above_1_ghz_stands_for_itself():
    entries = target(BELOW, ABOVE, internal_hz=400e6).at(np.array([500e6, 1.5e9]))
    found = {e.detector: e.level_dbuv_per_m.tolist() for e in entries}
    np.testing.assert_array_equal(found["quasi-peak"], [47, np.nan])
    np.testing.assert_array_equal(found["average"], [np.nan, 50])
    np.testing.assert_array_equal(found["peak"], [np.nan, 70])


def test_steps_inside_the_judged_range_are_looked_at_themselves():
    assert band_edges_hz(target()).tolist() == [30e6, 230e6, 1e9]


def test_a_users_own_line_is_judged_to_its_own_end():
    rows = [
        {"frequency_hz": 30e6, "level_dbuv_per_m": 30.0},
        {"frequency_hz": 300e6, "level_dbuv_per_m": 36.0},
    ]
    found = target("house", user_limits=[user_line(rows, limit_id="house")])
    assert (found.lowest_hz, found.covered_to_hz) == (30e6, 300e6)
    (entry,) = found.at(np.array([30e6, 300e6]))
    assert entry.level_dbuv_per_m.tolist() == [30, 36]


def test_a_line_from_memory_is_named_as_unverified():
    unverified = next(name for name in limits.ids() if not limits.line(name).verified)
    assert f"limit line {unverified}" in target(unverified).unverified
