"""Clocks: transition, settling, duty, pulse, jitter, plateau and ringback."""

import numpy as np
import pytest
from build import (
    RAMP_S,
    board,
    checks_of,
    clock,
    driver,
    interface,
    raised_cosine_crossing_s,
    receiver,
    setting,
)

ERROR_S = 3e-12
LIMIT = {"time": 1.5e-9, "levels": "10-90"}


def clock_board(the_interface=None, the_driver=None, the_clock=None, the_receiver=None):
    return board(
        the_clock or clock(),
        interface=[the_interface or interface("clock")],
        driver=[the_driver or driver()],
        receiver=[the_receiver or receiver()],
    )


def test_a_transition_is_judged_between_the_stated_levels():
    found = checks_of(clock_board(the_receiver=receiver(longest_transition=LIMIT)))["transition"]
    assert found.value[0, 0] == pytest.approx(1e-9, rel=1e-3)
    assert found.margin[0, 0] == pytest.approx(0.5e-9, abs=ERROR_S)


def test_a_symmetric_driver_between_symmetric_thresholds_keeps_the_duty():
    found = checks_of(clock_board(interface("clock", duty_distortion=0.05)))["duty"]
    assert found.value[0, 0] == pytest.approx(0.0, abs=ERROR_S)
    assert found.limit[0, 0] == pytest.approx(0.05 * 20e-9)


def test_unequal_edges_distort_the_duty_by_the_difference_of_their_crossings():
    own = setting(edge_up_s={"min": 1e-9, "max": 1e-9}, edge_down_s={"min": 2e-9, "max": 2e-9})
    uneven = driver(own | {"edge_s": None})
    found = checks_of(clock_board(interface("clock", duty_distortion=0.05), uneven))["duty"]
    expected = raised_cosine_crossing_s(0.6, 2 * RAMP_S) - raised_cosine_crossing_s(0.6)
    assert found.value[0, 0] == pytest.approx(expected, abs=ERROR_S)
    assert found.margin[0, 0] == pytest.approx(1e-9 - expected, abs=ERROR_S)


def test_duty_is_judged_only_where_a_share_is_stated():
    assert not checks_of(clock_board())["duty"].applies[0]


def test_the_high_time_is_half_a_period_less_the_way_between_the_thresholds():
    found = checks_of(clock_board(interface("clock", shortest_pulse_s=8e-9)))["pulse width"]
    between = raised_cosine_crossing_s(0.6) - raised_cosine_crossing_s(0.4)
    assert found.value[0, 0] == pytest.approx(10e-9 - between, abs=ERROR_S)
    assert found.margin[0, 0] == pytest.approx(2e-9 - between, abs=ERROR_S)


def test_an_uneven_duty_shortens_the_shorter_pulse():
    plain, uneven = (
        checks_of(clock_board(interface("clock", shortest_pulse_s=5e-9, duty=d)))["pulse width"]
        for d in (0.5, 0.4)
    )
    assert plain.value[0, 0] - uneven.value[0, 0] == pytest.approx(2e-9, abs=ERROR_S)


def test_jitter_is_noise_over_the_slope_between_the_judged_levels():
    # 50 mV on 0.8 x 3.3 V in 1 ns.
    stated = interface("clock", noise_v=0.05, jitter_limit_s=30e-12)
    found = checks_of(clock_board(stated))["jitter"]
    assert found.value[0, 0] == pytest.approx(0.05 / (0.8 * 3.3 / 1e-9), rel=2e-3)
    assert found.margin[0, 0] == pytest.approx(30e-12 - found.value[0, 0])


@pytest.mark.parametrize("stated", [{"noise_v": 0.05}, {"jitter_limit_s": 30e-12}])
def test_jitter_needs_both_a_noise_and_a_limit(stated):
    assert not checks_of(clock_board(interface("clock", **stated)))["jitter"].applies[0]


def test_a_matched_clock_has_neither_plateau_nor_ringback():
    found = checks_of(clock_board())
    assert found["plateau"].margin[0, 0] > 0.5
    assert found["ringback"].margin[0, 0] == pytest.approx(0.4 * 3.3, rel=1e-2)


def test_a_settled_clock_ends_each_half_at_its_full_level():
    found = checks_of(clock_board())["settling"]
    assert found.value[0, 0] == pytest.approx(3.3, rel=2e-3)
    assert found.limit[0, 0] == pytest.approx(1.98)


# 1 kohm into 10 pF at 50 MHz: half a period is one time constant. In the steady state the
# half ends at 1/(1 + 1/e) of the swing; from the lower to the upper level it never gets to 90 %.
RC = {"the_driver": driver(setting(ohm=1000.0, edge_s=0.1e-9)), "the_clock": clock(length_m=1e-4)}


def test_a_clock_that_never_settles_is_read_in_its_steady_state():
    found = checks_of(clock_board(**RC, the_receiver=receiver(capacitance_f=10e-12)))["settling"]
    assert found.value[0, 0] == pytest.approx(3.3 / (1 + np.exp(-1)), rel=5e-3)


def test_a_clock_that_never_reaches_the_judged_level_fails_its_transition():
    slow = receiver(capacitance_f=10e-12, longest_transition=LIMIT)
    found = checks_of(clock_board(**RC, the_receiver=slow))["transition"]
    assert found.fails[0, 0]


def test_the_transition_of_a_steady_clock_is_between_the_levels_of_its_exponential():
    # From 1 - e/(1+e) = 0.269 the edge rises as 1 - 0.731 exp(-t/tau): 30 to 70 % in 0.847 tau.
    limit = {"time": 20e-9, "levels": "30-70"}
    slow = receiver(capacitance_f=10e-12, longest_transition=limit)
    found = checks_of(clock_board(**RC, the_receiver=slow))["transition"]
    assert found.value[0, 0] == pytest.approx(np.log(0.7 / 0.3) * 10e-9, rel=2e-2)
