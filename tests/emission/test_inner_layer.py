"""inner_layer against its parts and the surface line it hides."""

import dataclasses

import numpy as np
import pytest

from edgeplan.emission import inner_layer
from edgeplan.emission.inner_layer import InnerInputs
from edgeplan.physics import imbalance, radiation, stripline_leakage

SPEED = 299_792_458.0
BAND_HZ = np.linspace(30e6, 1e9, 50)


def net(frequency_hz=BAND_HZ, **changes):
    """80 mm between planes 0.4 mm apart, 5 pF at its end, states per ampere of forward wave."""
    k = 2 * np.pi * np.atleast_2d(frequency_hz) / SPEED
    load_ohm = 1 / (1j * k * SPEED * 5e-12)
    reflection = (load_ohm - 50) / (load_ohm + 50)
    turn = np.exp(-1j * k * np.sqrt(4.3) * 0.08)
    values = {
        "near_volt": 50 * (1 + reflection * turn**2),
        "near_ampere": 1 - reflection * turn**2,
        "far_volt": 50 * turn * (1 + reflection),
        "far_ampere": turn * (1 - reflection),
        "surface_height_m": 0.2e-3,
        "surface_permittivity": 4.3,
        "surface_permittivity_effective": 3.2,
        "surface_ohm": 50.0,
        "strip_ohm": 50.0,
        "strip_permittivity": 4.3,
        "strip_width_m": 0.12e-3,
        "plane_gap_m": 0.4e-3,
        "side_distance_m": 0.02,
        "length_m": 0.08,
        "board_length_m": 0.15,
        "board_width_m": 0.1,
    }
    return InnerInputs(**(values | changes))


def test_surface_pieces_are_short_loops_with_the_current_at_their_ends():
    # Balanis, sec. 5.2: eta pi/c^2 f^2 A I; on a board this small the image adds nothing at 30 MHz
    frequency_hz = np.array([30e6])
    paths = net(frequency_hz, near_volt=0j * np.ones((1, 1)), far_volt=0j * np.ones((1, 1)))
    loops = sum(
        radiation.small_loop_field(30e6, 3e-3 * 0.2e-3, np.abs(ampere))
        for ampere in (paths.near_ampere, paths.far_ampere)
    )
    field = inner_layer.field_per_forward_ampere(paths, frequency_hz)
    np.testing.assert_allclose(field, loops, rtol=0.01)


def test_a_voltage_on_a_piece_radiates_by_its_charge():
    # short open piece: vertical current j w C V, (eta k/4 pi)(2h/er) I; the board leaves half
    frequency_hz = np.array([30e6])
    none = 0j * np.ones((1, 1))
    paths = net(frequency_hz, near_volt=1 + none, near_ampere=none, far_volt=none, far_ampere=none)
    k = 2 * np.pi * 30e6 / SPEED
    charging_a = k * np.sqrt(3.2) * 3e-3 / 50
    upright = 376.73 * k / (4 * np.pi) * 2 * 0.2e-3 / 4.3 * charging_a
    field = inner_layer.field_per_forward_ampere(paths, frequency_hz)
    assert field[0, 0] == pytest.approx(upright / 2, rel=0.01)


def test_an_inner_net_radiates_far_less_than_the_same_net_on_the_surface():
    k = 2 * np.pi * BAND_HZ / SPEED
    reflection = np.ones((1, BAND_HZ.size))
    surface = radiation.trace_field_per_ampere(BAND_HZ, 0.08, 2e-4, 4.3, 1.8j * k, reflection)
    surface = surface * radiation.finite_board_factor(BAND_HZ, 0.15)
    inner = inner_layer.field_per_forward_ampere(net(), BAND_HZ)
    assert np.mean(20 * np.log10(inner / surface)) < -10


def test_longer_surface_pieces_never_radiate_less():
    levels = [
        inner_layer.field_per_forward_ampere(net(breakout_m=(a, a)), BAND_HZ)
        for a in (0.0, 1e-3, 3e-3, 6e-3)
    ]
    assert np.all(levels[0] == 0)
    for more, less in zip(levels[1:], levels[:-1], strict=True):
        assert np.all(more > less)


def test_far_from_the_sides_only_the_pieces_drive_the_board():
    # shorted voltages apart: the piece at the driver alone, one electromotive force
    hidden = inner_layer.common_mode_per_forward_ampere(net(breakout_m=(0.0, 0.0)), BAND_HZ)
    np.testing.assert_array_equal(hidden.one, 0.0)
    np.testing.assert_array_equal(hidden.any_end, 0.0)
    shown = inner_layer.common_mode_per_forward_ampere(net(), BAND_HZ)
    assert np.all(shown.one > 0)


def test_at_a_side_the_whole_inner_line_leaks():
    paths = net(breakout_m=(0.0, 0.0), side_distance_m=0.2e-3)
    volts = inner_layer.common_mode_per_forward_ampere(paths, BAND_HZ)
    leak = stripline_leakage.edge_leakage(50 * np.sqrt(4.3), 0.4e-3, 0.1, 0.2e-3, 0.12e-3)
    ends = imbalance.Ends(
        *(imbalance.electrical_position_m(x, 0.15) for x in imbalance.centred_ends(0.08, 0.15))
    )
    direct = imbalance.effective_voltage_any(
        2 * np.pi * BAND_HZ / SPEED,
        ends,
        0.15,
        imbalance.impedance_ratio(0.15, 0.1),
        imbalance.ImbalanceHeight(leak, leak),
        (paths.near_volt, paths.far_volt),
    )
    np.testing.assert_allclose(volts.any_end, direct, rtol=1e-9)


def test_one_cable_may_leave_either_end_of_the_board():
    left, right = (
        inner_layer.common_mode_per_forward_ampere(
            net(start_m=np.array([[a]]), end_m=np.array([[b]])), BAND_HZ
        )
        for a, b in ((0.01, 0.09), (0.14, 0.06))
    )
    np.testing.assert_allclose(left.one, right.one, rtol=1e-9)


def test_the_assumed_piece_is_three_millimetres_at_each_end():
    assert net().breakout_m == (3e-3, 3e-3)


def test_inputs_are_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError):
        net().length_m = 1.0
