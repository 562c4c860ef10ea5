"""driver_stub: a stub in front of its net is the net drawn as one."""

import numpy as np
import pytest

from edgeplan.physics import network
from edgeplan.physics.driver_stub import StubPlaces, site_transfer, with_stub
from edgeplan.physics.routed_imbalance import common_mode_per_volt
from edgeplan.physics.routed_radiation import SEARCH_DB, Layout, routed_field_per_volt

BAND_HZ = np.geomspace(30e6, 1e9, 20)
SIZE_M = (0.15, 0.1)
LINE = (50.0, 6e-9, 2.0, 1e-3, 0.02)


def layout(start_m, end_m, count=1):
    offset = np.arange(count + 1)
    ends = np.array([end_m] * count)
    return Layout(
        np.array([start_m] * count), ends, np.full(count, 2e-4), np.full(count, 4.3), offset
    )


def nets():
    """80 mm drawn as one, and as a stub of 20 mm in front of 60 mm; two of each."""
    load = {"receiver_farad": 5e-12, "line": LINE}
    whole = network.point_to_point([0.08, 0.08], **load)
    rest = network.point_to_point([0.06, 0.06], stub_length_m=0.02, **load)
    places = StubPlaces(np.array([[0.02, 0.03]] * 2), np.full(2, 2e-4), np.full(2, 4.3))
    parts = with_stub(rest, layout((0.04, 0.03), (0.1, 0.03), 2), places)
    return (whole, layout((0.02, 0.03), (0.1, 0.03), 2)), parts


def test_stub_and_rest_radiate_as_the_whole():
    whole, parts = nets()
    np.testing.assert_allclose(
        routed_field_per_volt(*parts, BAND_HZ), routed_field_per_volt(*whole, BAND_HZ), rtol=1e-6
    )


def test_stub_and_rest_drive_the_board_as_the_whole():
    whole, parts = nets()
    one = common_mode_per_volt(*whole, BAND_HZ, SIZE_M).right
    cut = common_mode_per_volt(*parts, BAND_HZ, SIZE_M).right
    # the sum over two pieces follows the antenna's current a little better than over one
    np.testing.assert_allclose(20 * np.log10(cut / one), 0, atol=0.5)


def test_receivers_stay_at_their_ends():
    _, (trees, _) = nets()
    ratio = network.response(trees, 2j * np.pi * BAND_HZ).transfer[:, 0]
    rest = network.point_to_point([0.06], receiver_farad=5e-12, line=LINE)
    behind = network.response(rest, 2j * np.pi * BAND_HZ).transfer[:, 0]
    np.testing.assert_allclose(ratio[:1], site_transfer(trees, BAND_HZ)[:1] * behind, rtol=1e-9)


SPEED, ETA = 299_792_458.0, 376.730
LOSSLESS = (50.0, 6e-9, 0.0, 0.0, 0.0)
PAD_M, SITE_M, LOAD_M = (0.02, 0.01), (0.02, 0.03), (0.08, 0.03)  # 20 mm up, then 60 mm right


def dipoles(frequency_hz, load_siemens):
    """Field of pad, bend and load per volt at the bend, of 150 short dipoles a segment.

    Balanis, "Antenna Theory", ch. 4, over a plane (moments double into loops of height 2h) and
    under a thin layer (the vertical part over er). Waves of a lossless line by hand; nothing of
    the package is used.
    """
    w, h, er, z = 2 * np.pi * frequency_hz, 2e-4, 4.3, 50.0
    k, beta = w / SPEED, w * 6e-9
    sine = np.sin(np.radians(np.linspace(0, 90, 46)))[:, None]
    phi = np.radians(np.arange(0, 360, 4))[None, :]
    along, across = np.zeros((2, 46, 90), dtype=complex)
    volt, ampere, at_site = 1.0 + 0j, load_siemens + 0j, 1.0 + 0j
    for start_m, end_m, length_m in ((SITE_M, LOAD_M, 0.06), (PAD_M, SITE_M, 0.02)):
        step = np.subtract(end_m, start_m)
        share = (np.arange(150) + 0.5) / 150
        back = beta * length_m * (1 - share)
        current = ampere * np.cos(back) + 1j * volt / z * np.sin(back)
        whole = beta * length_m
        near_ampere = ampere * np.cos(whole) + 1j * volt / z * np.sin(whole)
        near_volt = volt * np.cos(whole) + 1j * z * ampere * np.sin(whole)
        for part, x in [*zip(current, share, strict=True), (near_ampere, None), (ampere, None)]:
            vertical = x is None
            at_end = vertical and part is ampere
            place = np.add(start_m, step * (float(at_end) if vertical else x))
            turn = np.exp(1j * k * sine * (place[0] * np.cos(phi) + place[1] * np.sin(phi)))
            if vertical:
                along += (1 if at_end else -1) * sine * h / er * part * turn
                continue
            moment = 1j * k * h * part * turn / 150
            along += moment * (step @ [np.cos(phi[0]), np.sin(phi[0])]) * (1 - sine**2 / er)
            turned = step[1] * np.cos(phi) - step[0] * np.sin(phi)
            across += moment * np.sqrt(1 - sine**2) * turned
        volt, ampere = near_volt, near_ampere
        at_site = volt if end_m == LOAD_M else at_site
    return k * ETA / (2 * np.pi) * max(np.abs(along).max(), np.abs(across).max()) / abs(at_site)


@pytest.mark.parametrize("load_siemens", [1 / 50, 1 / 5, 1e-4])
def test_a_stub_at_a_right_angle_is_what_short_dipoles_add_up_to(load_siemens):
    frequency_hz = np.array([30e6, 300e6, 900e6])
    rest = network.point_to_point(
        [0.06], stub_length_m=0.02, line=LOSSLESS, receiver_siemens=load_siemens
    )
    places = StubPlaces(np.array([PAD_M]), np.full(1, 2e-4), np.full(1, 4.3))
    trees, drawn = with_stub(rest, layout(SITE_M, LOAD_M), places)
    field = routed_field_per_volt(trees, drawn, frequency_hz)
    field = field[0] / np.abs(site_transfer(trees, frequency_hz)[0])
    summed = np.array([dipoles(f, load_siemens) for f in frequency_hz])
    difference_db = 20 * np.log10(field / summed)
    assert np.all(difference_db > -SEARCH_DB)
    assert np.all(difference_db < 0.15)


def test_a_stub_between_planes_does_not_radiate_by_itself():
    rest = network.point_to_point([0.06], stub_length_m=0.02, receiver_siemens=0.02)
    between = StubPlaces(
        np.array([PAD_M]), np.zeros(1), np.full(1, 4.3), np.full(1, 4e-4), np.full(1, 1e-4)
    )
    _, drawn = with_stub(rest, layout(SITE_M, LOAD_M), between)
    assert drawn.plane_gap_m.tolist() == [4e-4, 0.0]
    np.testing.assert_array_equal(drawn.strip_width_m, [1e-4, np.nan])
    inner = with_stub(rest, layout(SITE_M, LOAD_M), between)
    field = routed_field_per_volt(*inner, BAND_HZ) / np.abs(site_transfer(inner[0], BAND_HZ))
    alone = routed_field_per_volt(rest, layout(SITE_M, LOAD_M), BAND_HZ)
    # the grid of directions is finer for the longer net: up to the error of the search
    np.testing.assert_allclose(20 * np.log10(field / alone), 0, atol=SEARCH_DB)
