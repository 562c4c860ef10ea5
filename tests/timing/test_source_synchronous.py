"""Source synchronous: data and strobe from one die, each against its own test load."""

import pytest
from build import (
    RAMP_S,
    board,
    checks_of,
    clock,
    delay_s,
    driver,
    interface,
    lossless,
    net,
    nets_of,
    pole_crossing_s,
    raised_cosine_crossing_s,
    setting,
)

from edgeplan.candidates import list_drawn
from edgeplan.evaluate import strobe_flights

ERROR_S = 3e-12
LIGHT = {"capacitance": 10e-12, "level": 1.65}
HEAVY = {"capacitance": 30e-12, "level": 1.65}


def bus(data_load=LIGHT, strobe_load=LIGHT, **data):
    stated = {"valid_before": 3e-9, "valid_after": 3e-9, "setup": 1e-9, "hold": 0.7e-9}
    plain = {
        "rate_hz": 125e6,
        "clock_net": "STB",
        "skew_s": 0.1e-9,
        "jitter_s": 0.05e-9,
        "direction": [
            {"driver": "out", "test_load": data_load} | stated | data,
            {"driver": "stb", "test_load": strobe_load},
        ],
    }
    return interface("source-synchronous", **plain)


def strobe_of(b):
    """Fly the strobe of the board on its lossless line."""
    one = b.model_copy(update={"nets": tuple(n for n in b.nets if n.net == "STB")})
    nets = lossless(nets_of(one))
    return strobe_flights(nets, list_drawn(nets), 0.0)


def judged(data_m=0.12, strobe_m=0.1, data_setting=None, strobe_setting=None, **changes):
    """Timing of one data net against its strobe."""
    b = board(
        net(length_m=data_m),
        clock("STB", driver=("stb",), length_m=strobe_m),
        interface=[bus(**changes)],
        driver=[
            driver(data_setting or setting()),
            driver(strobe_setting or setting(), name="stb"),
        ],
    )
    strobe = strobe_of(b)
    data = b.model_copy(update={"nets": b.nets[:1]})
    return data, checks_of(data, strobe=strobe)


def per_m():
    return delay_s(nets_of(board(net(length_m=1.0))))


def span_s():
    """Time from the first threshold to the second on the plain edge."""
    return raised_cosine_crossing_s(0.6) - raised_cosine_crossing_s(0.4)


def test_setup_is_what_the_driver_gives_before_less_late_data_on_an_early_strobe():
    _, found = judged()
    expected = 3e-9 - (0.02 * per_m() + span_s()) - 1e-9 - 0.15e-9
    assert found["setup"].margin[0, 0] == pytest.approx(expected, abs=ERROR_S)


def test_hold_is_what_the_driver_gives_after_less_early_data_on_a_late_strobe():
    _, found = judged()
    expected = 3e-9 - (span_s() - 0.02 * per_m()) - 0.7e-9 - 0.1e-9
    assert found["hold"].margin[0, 0] == pytest.approx(expected, abs=ERROR_S)


def test_a_share_is_of_one_bit():
    _, found = judged()
    share = found["setup"].margin[0, 0] / 100e-9  # 10 Mb/s
    assert found["setup"].share[0, 0] == pytest.approx(share, rel=1e-6)


def test_each_flight_counts_from_the_test_load_of_its_own_driver():
    _, alike = judged()
    _, heavier = judged(data_load=HEAVY)
    later = pole_crossing_s(0.5, 50 * 30e-12) - pole_crossing_s(0.5, 50 * 10e-12)
    gained = heavier["setup"].margin[0, 0] - alike["setup"].margin[0, 0]
    lost = heavier["hold"].margin[0, 0] - alike["hold"].margin[0, 0]
    assert gained == pytest.approx(later, abs=ERROR_S)
    assert lost == pytest.approx(-later, abs=ERROR_S)


def test_data_and_strobe_share_a_corner():
    # Both edges spread four to one; slow data on a fast strobe would cost the difference too.
    wide = setting(edge_s={"min": 0.5e-9, "typ": 1e-9, "max": 2e-9})
    _, found = judged(data_setting=wide, strobe_setting=wide)
    slow = 2 * RAMP_S
    own = raised_cosine_crossing_s(0.6, slow) - raised_cosine_crossing_s(0.4, slow)
    expected = 3e-9 - (0.02 * per_m() + own) - 1.15e-9
    assert found["setup"].margin[0, 0] == pytest.approx(expected, abs=ERROR_S)
    mixed = expected - (raised_cosine_crossing_s(0.4, slow - 0.5 * RAMP_S))
    assert found["setup"].margin[0, 0] > mixed + 0.3e-9


@pytest.mark.parametrize(
    ("lack", "check", "value"),
    [
        ({"valid_before": None}, "setup", "valid before"),
        ({"valid_after": None}, "hold", "valid after"),
        ({"setup": None}, "setup", "setup"),
        ({"hold": None}, "hold", "hold"),
        ({"data_load": None}, "setup", "test load"),
    ],
)
def test_a_value_that_is_not_stated_leaves_its_check_open_and_is_named(lack, check, value):
    _, found = judged(**lack)
    assert found[check].open[0, 0]
    assert found[check].missing[0].value == value
    assert found[check].missing[0].of == "interface bus, driver out"


def test_without_its_strobe_data_is_open_and_asks_for_it():
    data, _ = judged()
    found = checks_of(data)
    for name in ("setup", "hold"):
        assert found[name].open[0, 0]
        assert found[name].missing[0].value == "clock_net"


def test_a_strobe_whose_flight_is_not_known_is_named_as_what_is_missing():
    half = setting(edge_s={"max": 2e-9})
    _, found = judged(strobe_setting=half)
    for name in ("setup", "hold"):
        assert found[name].open[0, 0]
        assert "STB" in found[name].because[0]
        assert found[name].missing[0].of == "net STB"
