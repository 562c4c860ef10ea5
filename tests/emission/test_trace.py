"""The trace's own radiation as the rest of the tool asks for it."""

import numpy as np
import pytest

from edgeplan.emission import trace
from edgeplan.physics import floor_reflection, radiation, spectra


def test_it_is_the_pattern_over_a_board_of_finite_size(nets):
    frequency_hz = np.array([30e6, 2e9])
    field = trace.field_per_forward_ampere(nets(frequency_hz, [0.03, 0.1]), frequency_hz)
    one = nets(frequency_hz, 0.1)
    plane = radiation.trace_field_per_ampere(
        frequency_hz, 0.1, 2e-4, 4.3, one.propagation_per_m, one.load_reflection
    )
    assert field.shape == (2, 2)
    np.testing.assert_allclose(field[1], plane[0] * [0.5, 1.0])


def test_each_net_may_have_its_own_frequencies(nets):
    frequency_hz = np.array([[30e6, 90e6], [50e6, 250e6]])
    field = trace.field_per_forward_ampere(nets(frequency_hz, [0.1, 0.1]), frequency_hz)
    alone = trace.field_per_forward_ampere(nets(frequency_hz[1], 0.1), frequency_hz[1])
    np.testing.assert_allclose(field[1], alone[0], rtol=1e-12)


@pytest.mark.parametrize(
    ("megahertz", "level"), [(50, 20.6), (250, 38.4), (550, 41.8), (950, 14.3)]
)
def test_the_worked_example_over_an_infinite_plane(nets, megahertz, level):
    # the design's own worked numbers (no outside truth), without the board's finite size
    frequency_hz = np.array([megahertz * 1e6])
    net = nets(frequency_hz)
    turn = np.exp(-2 * net.propagation_per_m * 0.1)
    wave_a = 1 / 98 / (1 - (48 - 50) / 98 * net.load_reflection * turn)
    source_v = spectra.harmonic_amplitude(megahertz // 50, 3.3, 0.5, 1e-9, 20e-9)
    factor = trace.field_per_forward_ampere(net, frequency_hz)
    factor = factor / radiation.finite_board_factor(frequency_hz, 0.15)
    field = np.abs(wave_a) * source_v * factor * floor_reflection.site_factor(frequency_hz, 3.0)
    computed = radiation.level_dbuv_per_m(radiation.received_v_per_m(field, 3.0))
    assert computed[0, 0] == pytest.approx(level, abs=1.5)


def test_a_trace_closer_to_its_plane_radiates_less(nets):
    frequency_hz = np.linspace(30e6, 1e9, 40)
    low = trace.field_per_forward_ampere(
        nets(frequency_hz, height_m=np.array([[1e-4]])), frequency_hz
    )
    high = trace.field_per_forward_ampere(nets(frequency_hz), frequency_hz)
    np.testing.assert_allclose(low, high / 2)
