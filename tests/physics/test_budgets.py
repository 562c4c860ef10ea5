"""Edge arithmetic against a numerical edge."""

import numpy as np
import pytest

from edgeplan.physics import budgets


def crossing(time, wave, level):
    return np.interp(level, wave, time)


def edge_of(shape):
    time = np.linspace(0, 1, 200_001)
    if shape == "single_pole":
        return 12 * time, 1 - np.exp(-12 * time)
    return time, time if shape == "linear" else (1 - np.cos(np.pi * time)) / 2


@pytest.mark.parametrize("shape", budgets.SHAPES)
@pytest.mark.parametrize("to_levels", [(0.1, 0.9), (0.3, 0.7), (0.25, 0.625)])
def test_durations_between_levels_are_those_of_the_drawn_edge(shape, to_levels):
    time, wave = edge_of(shape)
    stated = crossing(time, wave, 0.8) - crossing(time, wave, 0.2)
    wanted = crossing(time, wave, to_levels[1]) - crossing(time, wave, to_levels[0])
    found = budgets.transition_between_levels(stated, (0.2, 0.8), to_levels, shape)
    assert found == pytest.approx(wanted, rel=1e-6)


@pytest.mark.parametrize(
    ("shape", "per_edge"), [("linear", 0.8), ("raised_cosine", 0.927), ("single_pole", 1.0986)]
)
def test_slew_at_the_middle_is_the_known_share_of_swing_over_edge(shape, per_edge):
    """0.8, 0.927 and 2.197 * (1 - 0.5) swings per 10-90 % edge."""
    jitter = budgets.clock_jitter_s(1.0, 1.0, 1.0, 0.5, shape)
    assert jitter == pytest.approx(1 / per_edge, rel=1e-3)


@pytest.mark.parametrize("shape", budgets.SHAPES)
@pytest.mark.parametrize("level", [0.3, 0.6])
def test_jitter_is_noise_over_the_slope_of_the_drawn_edge(shape, level):
    time, wave = edge_of(shape)
    edge = crossing(time, wave, 0.9) - crossing(time, wave, 0.1)
    slope = 1e-4 / (crossing(time, wave, level + 5e-5) - crossing(time, wave, level - 5e-5))
    jitter = budgets.clock_jitter_s(0.02, 1.0, edge, level, shape)
    assert jitter == pytest.approx(0.02 / slope, rel=1e-4)


def test_budgets_broadcast_over_nets_and_candidates():
    slack = budgets.common_clock_slack_s(10e-9, 4e-9, np.zeros((3, 1)), np.full(5, 2e-9))
    assert slack.shape == (3, 5)


def test_every_part_of_a_budget_is_taken_from_the_period():
    parts = {"skew_s": 1.0, "jitter_s": 2.0, "crosstalk_s": 4.0, "bit_interference_s": 8.0}
    assert budgets.common_clock_slack_s(100.0, 16.0, 32.0, 0.5, **parts) == pytest.approx(36.5)


@pytest.mark.parametrize("levels", [(0.9, 0.1), (-0.1, 0.9), (0.1, 1.1), (0.5, 0.5)])
def test_levels_that_do_not_rise_are_refused(levels):
    with pytest.raises(ValueError, match="levels rise"):
        budgets.transition_between_levels(1e-9, levels, (0.1, 0.9))


def test_a_single_pole_never_ends():
    with pytest.raises(ValueError, match="never reaches"):
        budgets.transition_between_levels(1e-9, (0.1, 0.9), (0.0, 1.0), "single_pole")


@pytest.mark.parametrize("level", [0.0, 1.0])
def test_a_threshold_at_a_rail_has_no_jitter(level):
    with pytest.raises(ValueError, match="between 0 and 1"):
        budgets.clock_jitter_s(0.01, 1.0, 1e-9, level)


def test_an_unknown_shape_names_the_known_ones():
    with pytest.raises(ValueError, match="linear, raised_cosine, single_pole"):
        budgets.transition_between_levels(1e-9, (0.1, 0.9), (0.2, 0.8), "gaussian")
    with pytest.raises(ValueError, match="linear, raised_cosine, single_pole"):
        budgets.clock_jitter_s(0.01, 1.0, 1e-9, 0.5, "gaussian")
