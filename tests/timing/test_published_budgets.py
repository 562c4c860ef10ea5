"""Timing of published interfaces, by arithmetic alone."""

import csv
import math
from pathlib import Path

import pytest

from edgeplan.physics import budgets

REFERENCE = Path(__file__).parents[1] / "reference"


def rows(name):
    lines = (REFERENCE / name).read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def numbers(row, *names):
    return [float(row[name]) for name in names]


@pytest.mark.parametrize("row", rows("published_budgets.csv"), ids=lambda row: row["name"])
def test_common_clock_budgets_leave_what_is_published(row):
    period, out, flight, setup, skew, slack = numbers(
        row,
        "period_ns",
        "clock_to_output_ns",
        "flight_ns",
        "setup_ns",
        "skew_ns",
        "slack_ns",
    )
    left_ns = budgets.common_clock_slack_s(period, out, flight, setup, skew_s=skew)
    assert left_ns == pytest.approx(slack, abs=1e-9)


def test_pc133_write_hold_needs_more_than_0_8_ns_from_the_driver():
    assert budgets.hold_slack_s(0.8e-9, 0.0, 0.8e-9) == pytest.approx(0.0, abs=1e-15)
    assert budgets.hold_slack_s(2.7e-9, 0.2e-9, 0.8e-9, 0.1e-9) == pytest.approx(2.0e-9)


def test_rgmii_with_internal_delay_leaves_0_2_ns_between_data_and_strobe():
    """1.2 ns at the driver, 1.0 ns at the receiver."""
    slack = budgets.source_synchronous_slack_s(1.2e-9, 0.9e-9, 0.7e-9, 1.0e-9)
    assert slack == pytest.approx(0.0, abs=1e-15)


def test_rgmii_without_internal_delay_wants_1_5_to_2_1_ns_of_clock_delay():
    """Skew of 0.5 ns at the driver; 1.0 to 2.6 ns at the receiver."""
    lowest_ns = -budgets.source_synchronous_slack_s(-0.5, 0.0, 0.0, 1.0)
    assert lowest_ns == pytest.approx(1.5)
    assert budgets.source_synchronous_slack_s(2.6, 2.1, 0.0, 0.5) == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize("row", rows("i2c_pull_up.csv"), ids=lambda row: row["mode"])
def test_i2c_pull_ups_are_the_published_ones(row):
    supply, sink, rise, bus = numbers(row, "supply_v", "sink_ma", "rise_ns", "bus_pf")
    low, high = budgets.pull_up_range_ohm(supply, 0.4, sink * 1e-3, rise * 1e-9, bus * 1e-12)
    assert low == pytest.approx(float(row["lowest_ohm"]), rel=5e-4)
    assert high == pytest.approx(float(row["highest_ohm"]), rel=5e-4)


def test_i2c_fast_mode_at_400_pf_and_3_ma_has_no_pull_up():
    low, high = budgets.pull_up_range_ohm(3.3, 0.4, 3e-3, 300e-9, 400e-12)
    assert low > high


def test_highest_pull_up_gives_exactly_the_longest_rise():
    _, high = budgets.pull_up_range_ohm(3.3, 0.4, 3e-3, 300e-9, 200e-12)
    assert budgets.rise_time_of_pull_up_s(high, 200e-12) == pytest.approx(300e-9)


@pytest.mark.parametrize("row", rows("edge_conversions.csv"), ids=lambda row: row["name"])
def test_stated_edges_convert_as_straight_ramps(row):
    edge, low, high = numbers(row, "edge_ns", "low", "high")
    full_ns = budgets.transition_between_levels(edge, (low, high), (0.0, 1.0))
    assert full_ns == pytest.approx(float(row["full_ns"]), rel=1e-4)
    shorter_ns = budgets.transition_between_levels(edge, (low, high), (0.1, 0.9))
    assert shorter_ns == pytest.approx(float(row["edge_10_90_ns"]), rel=1e-4)
    assert 1e3 / (math.pi * full_ns) == pytest.approx(float(row["corner_mhz"]), rel=1e-3)


@pytest.mark.parametrize(
    ("levels", "constants"), [((0.1, 0.9), 2.1972), ((0.2, 0.8), 1.3863), ((0.3, 0.7), 0.8473)]
)
def test_an_exponential_edge_takes_these_time_constants(levels, constants):
    assert budgets.rise_time_of_pull_up_s(1e3, 1e-9, levels) == pytest.approx(
        constants * 1e-6, rel=1e-4
    )


@pytest.mark.parametrize(
    ("rise_ns", "fall_ns", "added_ns"),
    [(1.0, None, 0.0), (3.0, None, 1.0), (0.5, None, 0.0), (1.0, 1.0, 0.0), (2.0, 3.0, 1.5)],
)
def test_slow_edges_cost_what_memory_data_sheets_print(rise_ns, fall_ns, added_ns):
    fall_s = None if fall_ns is None else fall_ns * 1e-9
    added = budgets.slow_edge_derating_s(rise_ns * 1e-9, fall_s)
    assert added == pytest.approx(added_ns * 1e-9, abs=1e-18)
