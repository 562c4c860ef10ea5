"""Site and near field act at the real distance of each limit line, and not above 1 GHz."""

import numpy as np
import pytest
from build import board, clock, driver, nets_of, receiver, setting

from edgeplan.candidates import list_drawn
from edgeplan.emission.mechanism import Cable
from edgeplan.net_fields import fields_per_volt
from edgeplan.radiated import radiation_of

CABLES = [{"name": "mains", "length_m": 1.5, "attenuation_db": 4.0}]
SPEED = 299_792_458.0
# Largest two-ray gain over a perfect floor, 30 MHz to 1 GHz, heights of 1 to 4 m, both
# polarisations, source at 0.8 m: as full-wave runs of short dipoles over that floor (design
# of this tool; 0.03 dB from them).
FLOOR_DB = {3.0: 5.37, 10.0: 5.95}


def the_board(*limits, clock_hz=30e6, internal_hz=108e6, **changes):
    return board(
        clock(clock_hz=clock_hz, length_m=0.06),
        driver=[driver(setting(ohm=20.0, edge_s=1e-9))],
        receiver=[receiver(capacitance_f=5e-12)],
        cable=CABLES,
        emission={"limits": list(limits)},
        facts={"highest_internal_frequency_hz": internal_hz},
        **changes,
    )


def passive_of(made):
    return radiation_of(made).passive(nets_of(made))


def free_space(made, passive):
    """Distance times field per volt of trace and cables, before any site."""
    frequency_hz = passive.lines.frequency_hz
    own = (Cable(length_m=1.5, attenuation_db=4.0),)
    return fields_per_volt(made, own, nets_of(made), frequency_hz)


@pytest.mark.parametrize("distance_m", [3.0, 10.0])
def test_each_distance_has_its_own_floor_and_its_own_near_field(distance_m):
    made = the_board(f"cispr32-class-b-{distance_m:g}m")
    passive = passive_of(made)
    trace, cable = free_space(made, passive)
    f = passive.lines.frequency_hz
    floor = 10 ** (FLOOR_DB[distance_m] / 20)
    received = floor / (np.sqrt(2) * distance_m)
    near = np.sqrt(1 + (SPEED / (2 * np.pi * f * distance_m)) ** 2)
    apart_db = 20 * np.log10(passive.cable_up_to / (cable * received))
    np.testing.assert_allclose(apart_db, 0, atol=0.01)
    np.testing.assert_allclose(
        20 * np.log10(passive.trace / (trace * near * received)), 0, atol=0.01
    )


def test_three_and_ten_metres_differ_by_no_constant():
    """Cables by 20 lg(10/3) less the difference of the floors, 9.88 dB; traces by up to 1 dB more.

    The near field of 30 MHz is 1.08 dB at 3 m and 0.11 dB at 10 m: sqrt(1 + 1/(kr)^2).
    """
    near, far = (passive_of(the_board(f"cispr32-class-b-{d}m")) for d in (3, 10))
    cable_db = 20 * np.log10(near.cable_expected / far.cable_expected)[0]
    trace_db = 20 * np.log10(near.trace / far.trace)[0]
    np.testing.assert_allclose(cable_db, 20 * np.log10(10 / 3) + 5.37 - 5.95, atol=0.02)
    assert trace_db[0] - cable_db[0] == pytest.approx(1.08 - 0.11, abs=0.02)
    assert trace_db[-1] - cable_db[-1] == pytest.approx(0.0, abs=0.01)


def test_of_two_lines_at_two_distances_each_is_judged_at_its_own():
    """10 dB between the limits and 9.88 dB between the levels: 10 m binds, by 0.12 dB."""
    both = the_board("cispr32-class-b-3m", "cispr32-class-b-10m")
    alone = the_board("cispr32-class-b-10m")
    nets = nets_of(both)
    found = radiation_of(both).judge(nets, list_drawn(nets), 0.0)
    nets = nets_of(alone)
    ten = radiation_of(alone).judge(nets, list_drawn(nets), 0.0)
    passive = passive_of(both)
    assert passive.entries[int(found.extra["entry"][0, 0])][2] == 10.0
    assert found.margin[0, 0] == pytest.approx(ten.margin[0, 0], abs=1e-9)


def test_above_1_ghz_nothing_is_added_for_the_floor():
    limits = ("cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz")
    made = the_board(*limits, clock_hz=250e6, internal_hz=400e6)
    passive = passive_of(made)
    _, cable = free_space(made, passive)
    f = passive.lines.frequency_hz[0]
    gain_db = 20 * np.log10(passive.cable_up_to / cable * np.sqrt(2) * 3.0)[0]
    assert (f <= 1e9).sum() == 4
    assert (f > 1e9).sum() > 3
    np.testing.assert_allclose(gain_db, np.where(f <= 1e9, FLOOR_DB[3.0], 0.0), atol=0.01)
