"""driver_stub: a stub in front of its net is the net drawn as one."""

import numpy as np

from edgeplan.physics import network
from edgeplan.physics.driver_stub import StubPlaces, site_transfer, with_stub
from edgeplan.physics.routed_imbalance import common_mode_per_volt
from edgeplan.physics.routed_radiation import Layout, routed_field_per_volt

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
