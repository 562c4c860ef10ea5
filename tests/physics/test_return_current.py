"""return_current against the printed table and the current under a line of images."""

from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import quad

from edgeplan.physics.return_current import return_current_share

TABLE = Path(__file__).parents[1] / "reference" / "return_current.csv"


def test_shares_are_those_of_the_printed_table():
    heights, share_percent, textbook_percent = np.loadtxt(TABLE, delimiter=",", skiprows=3).T
    share = 100 * return_current_share(heights, 1.0)
    np.testing.assert_allclose(share, share_percent, atol=6e-3)
    np.testing.assert_allclose(share, textbook_percent, atol=0.55)


@pytest.mark.parametrize("heights", [0.3, 1.0, 7.0])
def test_it_is_the_integral_of_the_plane_current_of_a_trace_and_its_image(heights):
    # tangential field at the plane of a line current I and its image: I h/(pi (x^2 + h^2))
    share = quad(lambda x: 1 / (np.pi * (x**2 + 1)), -heights, heights)[0]
    assert return_current_share(heights, 1.0) == pytest.approx(share, rel=1e-9)
