"""Edges taken off tables, and a source found again behind a pole that scipy integrated."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from edgeplan.physics.driver_edges import (
    LEAST_RATIO,
    pole_duration_s,
    read_transition,
    source_ramp_s,
)


def behind_a_pole(ramp_s, pole_s):
    """Raised cosine behind one pole, by integration. (K,), (K,)"""
    end = ramp_s + 12 * pole_s
    time = np.linspace(0, end, 4000)

    def slope(t, v):
        return (0.5 * (1 - np.cos(np.pi * min(max(t / ramp_s, 0), 1))) - v) / pole_s

    found = solve_ivp(
        slope, (0, end), [0.0], t_eval=time, rtol=1e-9, atol=1e-12, max_step=ramp_s / 50
    )
    return time, found.y[0]


@pytest.mark.parametrize("pole_s", [0.02e-9, 0.1e-9, 0.3e-9])
@pytest.mark.parametrize("levels", ["10-90", "20-80"])
def test_the_source_is_found_again_behind_the_pole_of_the_pad(pole_s, levels):
    seen = read_transition(*behind_a_pole(1e-9, pole_s))
    observed = {"10-90": seen.s_10_90, "20-80": seen.s_20_80}[levels]
    assert float(source_ramp_s(observed, pole_s, levels)) == pytest.approx(1e-9, rel=2e-3)


def test_a_source_that_the_pole_hides_is_unknown():
    alone = float(pole_duration_s(0.3e-9, "10-90"))
    assert np.isnan(source_ramp_s(0.99 * LEAST_RATIO * alone, 0.3e-9, "10-90"))
    assert np.isfinite(source_ramp_s(1.01 * LEAST_RATIO * alone, 0.3e-9, "10-90"))


@pytest.mark.parametrize("observed", [np.nan, 0.0, -1e-9])
def test_no_duration_gives_no_source(observed):
    assert np.isnan(source_ramp_s(observed, 0.0, "20-80"))


# A straight ramp has 0.8 and 0.6 of its time between the levels.
@pytest.mark.parametrize(("first", "last"), [(0.0, 2.2), (3.3, 1.1)])
def test_a_straight_ramp_is_read_up_and_down_without_its_dead_time(first, last):
    seen = read_transition([0, 2e-9, 3e-9, 9e-9], [first, first, last, last])
    assert (seen.s_10_90, seen.s_20_80) == pytest.approx((0.8e-9, 0.6e-9))
    assert (seen.first_v, seen.last_v, seen.settled) == (first, last, True)


def test_a_dip_before_the_edge_and_ringing_after_it_do_not_count():
    seen = read_transition([0, 1, 2, 3, 4, 5, 9], [0, -0.2, 0, 1.2, 0.9, 1, 1])
    # 0 to 1.2 within one unit: 10 to 90 % take 0.8/1.2
    assert seen.s_10_90 == pytest.approx(0.8 / 1.2)


def test_a_table_that_ends_in_the_middle_of_its_edge_has_not_settled():
    assert not read_transition([0, 1], [0, 1]).settled


def test_a_flat_table_has_no_edge():
    assert np.isnan(read_transition([0, 1, 2], [1.0, 1.0, 1.0]).s_10_90)
