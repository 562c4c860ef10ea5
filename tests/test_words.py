"""Sentences a person acts on: what binds and what to change."""

import pytest
from build import board, clock, driver, facts_of, interface, net, setting

from edgeplan.results import Check, Condition
from edgeplan.words import binds_words, change_words, check_words, resistor_place

TWO = driver(setting("D3F"), setting("D4F"))


def facts(the_net, **changes):
    return facts_of(board(the_net, **{"driver": [TWO]} | changes))[0]


def drawn(**changes):
    return net(**{"setting": ("D4F",), "driver_pin": ("U1.5",)} | changes)


def test_nothing_changed_is_no_change():
    assert change_words(facts(drawn()), 1, 0.0) == ("none", "no change")


def test_a_setting_is_named_with_its_bank():
    assert change_words(facts(drawn()), 0, 0.0) == ("setting", "setting D3F")
    banked = facts(drawn(bank=("sdr",)))
    assert change_words(banked, 0, 0.0) == ("setting", "setting D3F (bank sdr)")


@pytest.mark.parametrize(
    ("site", "was", "value", "kind", "words"),
    [
        ("fitted", 22.0, 33.0, "value", "fit 33 Ω at R7 (was 22 Ω)"),
        ("fitted", 22.0, 0.0, "value", "link at R7 (was 22 Ω)"),
        ("link", 0.0, 33.0, "value", "fit 33 Ω at R7 (was a link)"),
    ],
)
def test_a_resistor_is_named_with_its_place_and_what_it_was(site, was, value, kind, words):
    one = facts(drawn(site=site, resistor="R7", resistor_ohm=was))
    assert change_words(one, 1, value) == (kind, words)


def test_a_new_resistor_is_added_near_the_pin():
    assert change_words(facts(drawn(site="possible")), 1, 33.0) == (
        "new site",
        "add 33 Ω near U1.5",
    )


def test_both_changes_stand_side_by_side():
    kind, words = change_words(
        facts(drawn(site="fitted", resistor="R7", resistor_ohm=22.0)), 0, 33.0
    )
    assert kind == "setting and value"
    assert words == "setting D3F, fit 33 Ω at R7 (was 22 Ω)"


def test_a_pull_up_is_named_as_one():
    bus = facts(drawn(pull_up="R9", pull_up_ohm=4700.0), interface=[interface("open-drain")])
    kind, words = change_words(bus, 1, 1800.0)
    assert (kind, words) == ("value", "1.8 kΩ at R9 (pull-up, was 4.7 kΩ)")
    assert change_words(bus, 1, float("nan")) == ("none", "no change")


def test_a_place_without_names_is_the_driver():
    assert resistor_place(net(resistor="R7")) == "at R7"
    assert resistor_place(net()) == "near U1.1"
    assert resistor_place(clock(driver_pin=())) == "near the driver"


def check(name="setup", share=-0.1, state="run", **changes):
    return Check(
        check=name,
        candidate=0,
        condition=Condition(state=state),
        value=1.0,
        limit=1.0,
        margin=share,
        unit="s",
        margin_share=share,
        decided=True,
        wants="slower",
        **changes,
    )


def test_an_emission_is_named_with_its_frequency_and_harmonic():
    first = check("emission", frequency_hz=50e6, order=1)
    assert check_words(first) == "emission 50 MHz (1st)"
    assert check_words(check("emission", frequency_hz=550e6, order=11)) == "emission 550 MHz (11th)"
    assert check_words(check("emission", frequency_hz=230e6)) == "emission 230 MHz"
    assert check_words(check()) == "setup"


def test_what_no_edge_reaches_and_what_happens_before_firmware_is_said():
    beyond = check("emission", frequency_hz=50e6, order=1, out_of_reach=True)
    assert check_words(beyond) == "emission 50 MHz (1st), out of reach"
    assert check_words(check("overshoot", state="boot")) == "overshoot before firmware"


def test_failing_checks_bind_worst_first_and_each_once():
    found = [check("hold", -0.1), check("overshoot", -0.5), check("hold", -0.3), check("x", -0.05)]
    assert binds_words("too fast", found, None) == "overshoot; hold"


def test_an_inside_net_is_bound_by_its_tightest_check():
    assert binds_words("inside", [], check("setup", 0.2)) == "setup"
    assert binds_words("inside", [], None) == ""


def test_luck_is_named():
    words = binds_words("too fast", [], check("setup", 0.2))
    assert words == "edge below its fastest acceptable one"
