"""stripline_leakage against the levels of static field solutions."""

import numpy as np
import pytest
from static_planes import leakage_by_field

from edgeplan.physics import cross_section, imbalance, stripline_leakage


@pytest.mark.parametrize(("gaps", "relief_db"), [(0.25, -12), (1.0, -29), (2.0, -54)])
def test_an_inner_line_leaks_less_than_a_surface_line_at_the_same_place(gaps, relief_db):
    # the design's static field solutions (no outside truth) of a strip 0.3 gaps wide: relative to
    # a microstrip whose edge is as far from the side, half the plane spacing high
    gap_m, width_m = 1e-3, 60e-3
    strip_m, side_m = 0.3 * gap_m, gaps * gap_m
    inner_ohm = cross_section.stripline_zero_thickness(strip_m, gap_m, 1.0)
    surface_ohm, _ = cross_section.microstrip(strip_m, gap_m / 2, 0.0, 1.0)
    leak = stripline_leakage.edge_leakage(inner_ohm, gap_m, width_m, side_m)
    offset_m = width_m / 2 - side_m - strip_m / 2
    surface = imbalance.imbalance_height(surface_ohm, 1.0, 1.0, gap_m / 2, offset_m, width_m)
    assert 20 * np.log10(leak / surface.magnetic) == pytest.approx(relief_db, abs=1.5)


def over_field_db(gap_m, width_m, strip_m, side_m):
    """Model over an independent static field solution (moments, planes of finite width)."""
    air_ohm = float(cross_section.stripline_zero_thickness(strip_m, gap_m, 1.0))
    model = float(stripline_leakage.edge_leakage(air_ohm, gap_m, width_m, side_m))
    return 20 * np.log10(model / leakage_by_field(gap_m, width_m, strip_m, side_m, air_ohm))


@pytest.mark.parametrize("gap_m", [0.4e-3, 1e-3])
@pytest.mark.parametrize("width_m", [0.03, 0.12])
def test_leakage_is_that_of_a_static_field_solution(gap_m, width_m):
    strip_m = 0.3 * gap_m
    found = [over_field_db(gap_m, width_m, strip_m, d * gap_m) for d in (0.25, 1.0, 2.0, 2.5)]
    np.testing.assert_allclose(found, 0.0, atol=0.4)


def test_a_narrow_strip_leaks_more_than_the_fit_says_and_a_wide_one_less():
    """The fit is of strips 0.3 plane distances wide; the page on inner layers says how far off."""
    narrow, wide = (over_field_db(0.4e-3, 0.06, w * 0.4e-3, 0.4e-3) for w in (0.1, 1.0))
    assert -2.6 < narrow < -2.0
    assert 3.5 < wide < 5.5


def test_leakage_falls_by_the_mode_below_cutoff_between_planes():
    # the lowest odd mode of parallel planes falls as exp(-pi d/b), 27.3 dB for one spacing
    near, far = stripline_leakage.edge_leakage(100.0, 1e-3, 0.1, np.array([1e-3, 2e-3]))
    assert 20 * np.log10(near / far) == pytest.approx(20 * np.log10(np.exp(np.pi)), abs=1e-9)


def test_beyond_three_spacings_nothing_is_left_and_outside_the_side_it_stays():
    leak = stripline_leakage.edge_leakage(100.0, 1e-3, 0.1, np.array([-1e-3, 0.0, 2.9e-3, 3.1e-3]))
    assert leak[0] == leak[1]
    assert leak[2] > 0
    assert leak[3] == 0


def test_a_twentieth_of_a_wave_in_laminate():
    # 299.79 mm in air at 1 GHz; er 4: half of it; a twentieth of that
    assert stripline_leakage.stitching_distance_m(1e9, 4.0) == pytest.approx(7.495e-3, rel=1e-3)


def test_a_plane_change_without_a_joint_near_is_a_finding():
    changes = [True, True, True, False]
    joint_m = [7e-3, 8e-3, np.nan, np.nan]
    found = stripline_leakage.unstitched(changes, joint_m, 1e9, 4.0)
    np.testing.assert_array_equal(found, [False, True, True, False])
