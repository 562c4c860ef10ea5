"""A strobe is an event like a clock, but it has no period: no steady state, no duty."""

import pytest
from build import board, checks_of, clock, driver, interface, net, receiver, setting

STATED = {
    "duty_distortion": 0.05,
    "noise_v": 0.05,
    "jitter_limit_s": 30e-12,
    "shortest_pulse_s": 2e-9,
}
ALL = receiver(longest_transition={"time": 2e-9, "levels": "10-90"})


def checks(timing, **changes):
    plain = {"interface": [interface(timing, **STATED)], "receiver": [ALL]}
    return checks_of(board(clock(), **plain | changes))


def test_a_strobe_has_the_checks_of_a_clock_without_duty_and_pulse():
    assert set(checks("clock")) - set(checks("strobe")) == {"duty", "pulse width"}
    assert set(checks("strobe")) < set(checks("clock"))


@pytest.mark.parametrize("name", ["transition", "settling", "jitter", "plateau", "ringback"])
def test_what_both_have_in_common_reads_the_same_on_a_settled_edge(name):
    strobe, periodic = checks("strobe")[name], checks("clock")[name]
    assert strobe.margin[0, 0] == pytest.approx(periodic.margin[0, 0], rel=1e-6)


def test_a_strobe_that_does_not_settle_is_read_by_its_worst_pattern_not_a_steady_state():
    # One time constant per bit: a single bit reaches 1 - 1/e, a steady clock 1/(1 + 1/e).
    weak = [driver(setting(ohm=1000.0, edge_s=0.4e-9))]
    slow = [receiver(capacitance_f=10e-12)]
    one = clock(length_m=1e-3)
    value = checks_of(board(one, interface=[interface("strobe")], driver=weak, receiver=slow))[
        "settling"
    ].value[0, 0]
    assert value == pytest.approx((1 - 0.3679) * 3.3, rel=2e-2)


def test_a_strobe_without_any_rate_is_judged_by_its_shape_alone():
    found = checks_of(board(net(data_bps=None, activity=None), interface=[interface("strobe")]))
    assert not found["settling"].applies[0]
    assert found["ringback"].decided[0, 0]
