"""Overshoot of an open lossless line, whose first peak is a closed form."""

import pytest
from build import bench_of, board, driver, net, nets_of, receiver, seen_of, setting

from edgeplan import fidelity
from edgeplan.candidates import list_candidates, list_drawn
from edgeplan.checks import condition_words
from edgeplan.evaluate import evaluate


def overshoot_of(b, **changes):
    (table,) = fidelity.checks_of("overshoot")(seen_of(b, **changes))
    return table


def mismatched(ohm, limit="30 %", **changes):
    # An edge far shorter than the 1.15 ns round trip of 100 mm: the plateau is reached.
    fast = driver(setting(ohm=ohm, edge_s=0.3e-9))
    plain = {"driver": [fast], "receiver": [receiver(overshoot=limit)]}
    return board(**plain | changes)


# The lattice of an open line: the first arrival is 2 Z0/(Z0 + Rs) of the swing.
@pytest.mark.parametrize("ohm", [10.0, 15.0, 25.0, 40.0])
def test_the_peak_is_that_of_the_lattice(ohm):
    found = overshoot_of(mismatched(ohm))
    assert found.value[0, 0] / 3.3 == pytest.approx(2 * 50 / (50 + ohm) - 1, abs=4e-3)


def test_3_3_volts_behind_15_ohm_peak_at_5_08_volts():
    # Worked lattice: far-end plateau 5.07692 V.
    assert overshoot_of(mismatched(15.0)).value[0, 0] == pytest.approx(5.07692 - 3.3, abs=0.01)


def test_a_series_resistor_that_fills_the_gap_takes_the_overshoot_away():
    b = mismatched(15.0, resistors={"values_ohm": [35.0], "tolerance": 0.0})
    b = b.model_copy(update={"nets": (net(site="possible"),)})
    found = overshoot_of(b, drawn=False)
    assert found.value[0, 1] == pytest.approx(0.0, abs=0.02)
    assert found.fails[0].tolist() == [True, False]


@pytest.mark.parametrize(("limit", "volts"), [("0.5 V", 0.5), ("20 %", 0.66)])
def test_a_limit_in_volts_or_as_a_share_is_met_in_volts(limit, volts):
    found = overshoot_of(mismatched(15.0, limit))
    assert found.limit[0, 0] == pytest.approx(volts)
    assert found.margin[0, 0] == pytest.approx(volts - found.value[0, 0])
    assert found.share[0, 0] == pytest.approx(found.margin[0, 0] / volts)
    assert found.wants == "slower"


def test_without_a_limit_nothing_is_judged():
    b = mismatched(15.0, receiver=[receiver()])
    assert not overshoot_of(b).applies[0]


def test_the_strong_and_fast_corner_decides():
    wide = driver(setting(ohm={"min": 15, "typ": 30, "max": 45}, edge_s=0.3e-9))
    found = overshoot_of(mismatched(0.0, driver=[wide]))
    assert found.value[0, 0] / 3.3 == pytest.approx(2 * 50 / 65 - 1, abs=4e-3)
    assert condition_words(int(found.condition[0, 0]))[1] == "fast"


def test_the_stronger_of_both_output_transistors_decides():
    uneven = setting(edge_s=0.3e-9, resistance_up_ohm={"min": 40, "max": 40})
    uneven |= {"resistance_ohm": None, "resistance_down_ohm": {"min": 15, "max": 15}}
    found = overshoot_of(mismatched(0.0, driver=[driver(uneven)]))
    assert found.value[0, 0] / 3.3 == pytest.approx(2 * 50 / 65 - 1, abs=4e-3)
    assert condition_words(int(found.condition[0, 0]))[2] == "falling"


def test_before_and_after_firmware_are_both_judged_and_the_worse_is_named():
    settings = setting("LATER", 50.0, 0.3e-9), setting("BOOT", 15.0, 0.3e-9)
    one = net(setting=("LATER",), setting_boot=("BOOT",))
    b = mismatched(0.0, driver=[driver(*settings)])
    for nets, state, peak in (
        ((one,), "boot", 2 * 50 / 65 - 1),
        ((net(setting=("LATER",)),), "run", 0),
    ):
        nets = nets_of(b.model_copy(update={"nets": nets}))
        tables = evaluate(nets, list_drawn(nets), bench_of(b)).tables
        (found,) = (t for t in tables if t.check == "overshoot")
        assert condition_words(int(found.condition[0, 0]))[3] == state
        assert found.value[0, 0] / 3.3 == pytest.approx(peak, abs=0.02)


def test_a_resistor_acts_before_firmware_too_and_a_new_setting_does_not():
    settings = setting("LATER", 50.0, 0.3e-9), setting("BOOT", 15.0, 0.3e-9)
    one = net(setting=("LATER",), setting_boot=("BOOT",), site="possible")
    b = mismatched(0.0, driver=[driver(*settings)], resistors={"values_ohm": [35.0]})
    nets = nets_of(b.model_copy(update={"nets": (one,)}))
    listed = list_candidates(nets, b.file.resistors)
    found = next(t for t in evaluate(nets, listed, bench_of(b)).tables if t.check == "overshoot")
    assert found.fails[0].tolist() == [ohm == 0 for ohm in listed.series_ohm[0]]


def test_a_setting_before_firmware_that_lacks_a_value_is_named_as_what_is_missing():
    half = setting("BOOT", 15.0, {"max": 0.3e-9})
    one = net(setting=("LATER",), setting_boot=("BOOT",))
    b = mismatched(0.0, driver=[driver(setting("LATER"), half)])
    nets = nets_of(b.model_copy(update={"nets": (one,)}))
    found = next(
        t for t in evaluate(nets, list_drawn(nets), bench_of(b)).tables if t.check == "overshoot"
    )
    assert found.open[0, 0]
    assert found.missing[0].value == "minimum edge"
    assert found.missing[0].of == "driver out, setting BOOT"
