"""floor_reflection against a near-field solution over a perfect floor."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import floor_reflection

REFERENCE = Path(__file__).parents[1] / "reference"
SITE = np.loadtxt(REFERENCE / "two_ray_site.csv", delimiter=",", skiprows=3).T


@pytest.mark.parametrize(
    ("column", "distance_m", "polarisation"),
    [(1, 3.0, "horizontal"), (2, 3.0, "vertical"), (3, 10.0, "horizontal"), (4, 10.0, "vertical")],
)
def test_the_height_scan_is_that_of_the_numerical_solution(column, distance_m, polarisation):
    factor = floor_reflection.two_ray_factor(SITE[0] * 1e6, distance_m, polarisation)
    np.testing.assert_allclose(20 * np.log10(factor), SITE[column], atol=0.1)


@pytest.mark.parametrize(("distance_m", "bound_db"), [(3.0, 5.37), (10.0, 5.95)])
def test_the_bound_is_the_largest_of_all(distance_m, bound_db):
    bound = floor_reflection.floor_bound(distance_m)
    assert 20 * np.log10(bound) == pytest.approx(bound_db, abs=0.01)
    # both rays in phase at the lowest receiver height
    ways_m = np.hypot(distance_m, [0.2, 1.8])
    assert bound == pytest.approx((distance_m / ways_m).sum(), rel=1e-3)


def test_the_floor_ends_at_one_gigahertz():
    factor = floor_reflection.site_factor(np.array([[30e6, 1e9], [1.001e9, 6e9]]), 3.0)
    bound = floor_reflection.floor_bound(3.0)
    np.testing.assert_array_equal(factor, [[bound, bound], [1, 1]])


def test_close_to_the_source_the_near_field_counts_in_the_bound():
    in_phase = (1 / np.hypot(1.0, [0.2, 1.8])).sum()
    assert floor_reflection.floor_bound(1.0) > 1.1 * in_phase


def test_the_near_field_of_a_loop_is_the_printed_one():
    frequency_mhz, distance_m, loop_db, _ = np.loadtxt(
        REFERENCE / "near_field.csv", delimiter=",", skiprows=3
    ).T
    factor = floor_reflection.near_field_factor(frequency_mhz * 1e6, distance_m)
    np.testing.assert_allclose(20 * np.log10(factor), loop_db, atol=6e-3)


def test_the_near_field_of_the_dipole_in_the_scan_is_the_printed_one():
    # the direct ray of the horizontal dipole at its own height, floor taken away
    frequency_mhz, distance_m, _, dipole_db = np.loadtxt(
        REFERENCE / "near_field.csv", delimiter=",", skiprows=3
    ).T
    for f_mhz, r_m, printed_db in zip(frequency_mhz, distance_m, dipole_db, strict=True):
        k = np.array(2 * np.pi * f_mhz * 1e6 / 299_792_458.0)
        ray = floor_reflection._horizontal_ray(k, r_m, np.array(0.0))
        assert 20 * np.log10(r_m * abs(ray)) == pytest.approx(printed_db, abs=6e-3)
