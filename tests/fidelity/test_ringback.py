"""Ringback of an open lossless line: the second plateau of its lattice."""

import pytest
from build import board, driver, seen_of, setting

from edgeplan import fidelity


def ringback_of(b):
    (table,) = fidelity.checks_of("ringback")(seen_of(b))
    return table


def behind(ohm):
    # 3.3 V behind a resistance into 100 mm of open 50 ohm line, an edge shorter than the trip.
    return board(driver=[driver(setting(ohm=ohm, edge_s=0.3e-9))])


def second_plateau_v(ohm):
    """Follow the echo twice: 1 - g + ... of the swing, g = (Rs - Z0)/(Rs + Z0)."""
    first = 2 * 50 / (50 + ohm)
    return 3.3 * first * (1 + (ohm - 50) / (ohm + 50))


def test_3_3_volts_behind_15_ohm_fall_back_to_2_34_volts():
    # Worked lattice: far-end plateaus 5.07692, 2.34320 V.
    assert second_plateau_v(15.0) == pytest.approx(2.34320, abs=1e-5)
    assert ringback_of(behind(15.0)).value[0, 0] == pytest.approx(2.34320, abs=0.01)


@pytest.mark.parametrize("ohm", [5.0, 10.0, 25.0])
def test_the_lowest_level_is_the_second_plateau(ohm):
    found = ringback_of(behind(ohm))
    assert found.value[0, 0] == pytest.approx(second_plateau_v(ohm), abs=0.015)
    assert found.margin[0, 0] == pytest.approx(found.value[0, 0] - 1.98)
    assert found.fails[0, 0] == (second_plateau_v(ohm) < 1.98)


def test_a_matched_line_has_no_ringback():
    found = ringback_of(behind(50.0))
    assert found.value[0, 0] == pytest.approx(3.3, rel=1e-2)
    assert found.wants == "slower"


def test_a_weak_driver_climbs_in_steps_and_never_falls_back():
    assert ringback_of(behind(120.0)).value[0, 0] == pytest.approx(3.3, rel=1e-2)
