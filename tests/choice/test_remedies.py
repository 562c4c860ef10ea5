"""Remedies are sized: what is named opens the net, a little less does not."""

import pytest
from build import bench_of, board, clock, driver, net, nets_of, receiver, setting

from edgeplan.candidates import list_candidates, list_drawn
from edgeplan.choice import remedies
from edgeplan.evaluate import evaluate

NO_CABLES = {"cable": [], "facts": {"no_cables": True}}


def passes(b):
    nets = nets_of(b)
    return bool(evaluate(nets, list_drawn(nets), bench_of(b)).passes[0, 0])


def ringing(the_net=None, **changes):
    """Judge an open 50 mm line behind 15 ohm for overshoot alone."""
    plain = {
        "driver": [driver(setting(ohm=15.0, edge_s=0.4e-9))],
        "receiver": [receiver(overshoot="10 %")],
        **NO_CABLES,
    }
    return board(the_net or net(length_m=0.05, data_bps=1e6), **plain | changes)


def test_a_new_site_is_named_with_a_value_that_passes():
    b = ringing()
    assert not passes(b)
    (found,) = remedies.new_site(nets_of(b), bench_of(b), 200.0)
    assert (found.remedy, found.unit) == ("resistor site", "ohm")
    # 10 % above the swing: 2 x 50/(50 + Rs) = 1.1, Rs = 40.9 ohm in all.
    assert found.amount > 40.9 - 15
    assert found.text.startswith("a site near U1.1, about ")
    fitted = net(length_m=0.05, data_bps=1e6, site="fitted", resistor_ohm=found.amount)
    assert passes(ringing(fitted))


def test_a_new_site_with_another_setting_says_so():
    two = driver(
        setting("A", ohm=15.0, edge_s={"max": 0.4e-9}), setting("B", ohm=15.0, edge_s=0.4e-9)
    )
    b = ringing(net(length_m=0.05, data_bps=1e6, setting=("A",)), driver=[two])
    (found,) = remedies.new_site(nets_of(b), bench_of(b), 200.0)
    assert found.text.endswith("with setting B")


def test_no_value_at_all_is_no_remedy():
    limit = {"time": 0.2e-9, "levels": "10-90"}
    b = ringing(receiver=[receiver(overshoot="10 %", longest_transition=limit)])
    assert remedies.new_site(nets_of(b), bench_of(b), 200.0) == [None]


def loud(attenuation_db, **changes):
    """Judge a 50 MHz clock whose cable rules its emission."""
    plain = {
        "driver": [driver(setting(ohm=40.0, edge_s=1.5e-9))],
        "receiver": [receiver(capacitance_f=3e-12)],
        "cable": [{"name": "mains", "length_m": 1.5, "attenuation_db": attenuation_db}],
    }
    return board(clock(length_m=0.04), **plain | changes)


def filter_of(b):
    nets = nets_of(b)
    listed = list_candidates(nets, b.file.resistors)
    (found,) = remedies.cable_filter(nets, listed, bench_of(b))
    return found


@pytest.mark.parametrize("statistic", ["expected", "worst-case"])
def test_a_cable_filter_is_just_enough(statistic):
    target = {"limits": ["cispr32-class-b-3m"], "statistic": statistic}
    found = filter_of(loud(0.0, emission=target))
    assert (found.remedy, found.unit) == ("cable filter", "dB")
    assert found.amount > 1.0
    assert passes(loud(found.amount, emission=target))
    assert not passes(loud(found.amount - 0.2, emission=target))


def test_what_the_filter_closes_is_the_excess_it_was_sized_for():
    b = loud(0.0)
    nets = nets_of(b)
    table = evaluate(nets, list_drawn(nets), bench_of(b)).tables[-1]
    assert filter_of(b).closes_db == pytest.approx(-table.margin[0, 0], abs=0.01)


def test_where_the_trace_alone_is_too_loud_cables_and_enclosure_together_are_just_enough():
    def at(cable_db, enclosure_db):
        return loud(
            cable_db,
            driver=[driver(setting(ohm=40.0, edge_s=0.2e-9))],
            emission={"limits": ["cispr32-class-b-3m"], "margin": "40 dB"},
            facts={"enclosure_attenuation_db": enclosure_db},
        )

    found = filter_of(at(0.0, 0.0))
    assert found.remedy == "cable filter and enclosure"
    assert passes(at(found.amount, found.enclosure_db))
    assert not passes(at(found.amount - 0.2, found.enclosure_db))
    assert not passes(at(found.amount, found.enclosure_db - 3.2))  # half the power is the cables'


def test_where_another_check_fails_no_filter_is_enough():
    b = loud(0.0, receiver=[receiver(longest_transition={"time": 0.5e-9, "levels": "10-90"})])
    assert filter_of(b).amount is None


def test_the_change_that_goes_with_the_filter_is_named():
    # As drawn the line rings; only the other setting leaves emission alone over its limit.
    two = driver(setting("A", ohm=10.0, edge_s=0.3e-9), setting("B", ohm=40.0, edge_s=1.5e-9))
    b = loud(0.0, driver=[two], receiver=[receiver(overshoot="20 %")])
    b = b.model_copy(update={"nets": (clock(length_m=0.04, setting=("A",)),)})
    assert filter_of(b).text.endswith("together with: setting B")
