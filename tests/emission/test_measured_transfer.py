"""measured_transfer: what was measured and nothing more."""

import numpy as np
import pytest

from edgeplan.emission import measured_transfer
from edgeplan.emission.measured_transfer import MeasuredInputs

ROWS = [(30e6, -50.0), (300e6, -30.0), (1e9, -40.0)]


def field(frequency_hz, port_volt=1.0, **changes):
    values = {"rows": ROWS, "distance_m": 3.0}
    paths = MeasuredInputs(port_volt=np.full((1, 1), port_volt), **(values | changes))
    return measured_transfer.field_per_forward_ampere(paths, np.asarray(frequency_hz))[0]


def test_rows_are_read_as_field_over_voltage():
    # 0.5 V, -30 dB(1/m) at 3 m: 15.8 mV/m, 84 dBuV/m
    volts_per_m = field([300e6], 0.5) / 3.0
    assert 20 * np.log10(volts_per_m * 1e6) == pytest.approx(20 * np.log10(0.5e6) - 30, abs=1e-9)


def test_between_rows_it_is_straight_in_the_logarithm():
    assert field([np.sqrt(30e6 * 300e6)]) == pytest.approx(3 * 10 ** (-40 / 20), rel=1e-9)


def test_outside_its_rows_the_level_is_unknown():
    np.testing.assert_array_equal(np.isnan(field([29e6, 30e6, 1e9, 1.01e9])), [1, 0, 0, 1])


def test_an_antenna_factor_turns_receiver_volts_into_field():
    factor = [(30e6, 12.0), (1e9, 12.0)]
    np.testing.assert_allclose(
        field([300e6], antenna_factor=factor), field([300e6]) * 10 ** (12 / 20)
    )


def test_a_decibel_of_transfer_is_a_decibel_of_level():
    lower = [(f, level - 1.0) for f, level in ROWS]
    ratio = field([50e6, 700e6], rows=lower) / field([50e6, 700e6])
    np.testing.assert_allclose(20 * np.log10(ratio), -1.0)
