"""Closed-form received edges against a raised-cosine edge through a numerical pole."""

import numpy as np
import pytest

from edgeplan.physics import received_edges

RAMP_S = 1.0
STEP_S = 2e-3


def wave_through_pole(tau_s):
    """Answer of one pole to a raised cosine of unit length, stepped by its exponential."""
    from scipy.signal import lfilter

    time = np.arange(0, 30 * max(tau_s, 0.2) + 2, STEP_S)
    source = (1 - np.cos(np.pi * np.clip(time / RAMP_S, 0, 1))) / 2
    keep = np.exp(-STEP_S / tau_s)
    return time, lfilter([(1 - keep) / 2, (1 - keep) / 2], [1, -keep], source)


def crossing(tau_s, level):
    time, wave = wave_through_pole(tau_s)
    return np.interp(level, wave, time)


LEVELS = [0.5, 0.61, 0.7]
OWN_EDGE_S = received_edges.RAISED_COSINE_10_90 * RAMP_S


def true_edge_and_budget(tau_s, level):
    return crossing(tau_s, 0.9) - crossing(tau_s, 0.1), crossing(tau_s, level)


@pytest.mark.parametrize("level", LEVELS)
@pytest.mark.parametrize("tau_s", [0.1, 0.3, 1.0, 3.0])
def test_the_delay_form_is_safe_for_any_single_pole(tau_s, level):
    true_edge, budget = true_edge_and_budget(tau_s, level)
    found = received_edges.slowest_edge_by_delay_s(budget, RAMP_S, OWN_EDGE_S, level)
    assert 0.69 < found / true_edge < 1.0


@pytest.mark.parametrize("level", LEVELS)
@pytest.mark.parametrize(("tau_s", "high_by"), [(1.0, 0.03), (3.0, 0.008), (6.0, 0.003)])
def test_the_pole_form_is_right_once_the_pole_is_slower_than_the_source(tau_s, high_by, level):
    true_edge, budget = true_edge_and_budget(tau_s, level)
    found = received_edges.slowest_edge_of_single_pole_s(budget, RAMP_S, level)
    assert 1.0 <= found / true_edge < 1 + high_by


def test_the_pole_form_is_unsafe_where_the_source_is_slower_than_the_pole():
    """A ramp passes a fast pole one time constant late, not 0.69: 13 % too long here."""
    true_edge, budget = true_edge_and_budget(0.3, 0.61)
    found = received_edges.slowest_edge_of_single_pole_s(budget, RAMP_S, 0.61)
    assert found / true_edge == pytest.approx(1.13, abs=0.01)


@pytest.mark.parametrize("level", LEVELS)
def test_the_ramp_form_is_safe_only_where_the_pole_is_slower_than_the_source(level):
    slow_edge, slow_budget = true_edge_and_budget(2.0, level)
    fast_edge, fast_budget = true_edge_and_budget(0.3, level)
    assert received_edges.slowest_edge_of_ramp_s(slow_budget, level) < slow_edge
    assert received_edges.slowest_edge_of_ramp_s(fast_budget, level) > fast_edge


def test_the_delay_form_meets_its_own_equation():
    budget, ramp, own, level = 3.0, 1.0, 0.59, 0.61
    t = received_edges.slowest_edge_by_delay_s(budget, ramp, own, level)
    spent = ramp / 2 + np.sqrt(t**2 - own**2) / np.log(9) + (level - 0.5) * t / 0.8
    assert spent == pytest.approx(budget, rel=1e-9)


def test_the_delay_form_also_holds_where_its_square_vanishes():
    """At a threshold of 0.5 + 0.8/ln 9 the quadratic term drops out."""
    level = 0.5 + 0.8 / np.log(9)
    t = received_edges.slowest_edge_by_delay_s(3.0, 1.0, 0.59, level)
    spent = 0.5 + np.sqrt(t**2 - 0.59**2) / np.log(9) + (level - 0.5) * t / 0.8
    assert spent == pytest.approx(3.0, rel=1e-6)


def test_a_spent_budget_has_no_edge():
    assert received_edges.slowest_edge_of_ramp_s(-1.0, 0.6) == 0.0
    assert np.isnan(received_edges.slowest_edge_of_single_pole_s(0.4, 1.0, 0.6))
    assert np.isnan(received_edges.slowest_edge_by_delay_s(0.4, 1.0, 0.59, 0.6))


def test_a_raised_cosine_takes_0_5903_of_its_length_from_10_to_90_percent():
    assert pytest.approx(0.5903, abs=5e-5) == received_edges.RAISED_COSINE_10_90
