"""stripline_leakage against the levels of static field solutions."""

import numpy as np
import pytest
from scipy.special import ellipkm1
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
    leak = stripline_leakage.edge_leakage(inner_ohm, gap_m, width_m, side_m, strip_m)
    offset_m = width_m / 2 - side_m - strip_m / 2
    surface = imbalance.imbalance_height(surface_ohm, 1.0, 1.0, gap_m / 2, offset_m, width_m)
    assert 20 * np.log10(leak / surface.magnetic) == pytest.approx(relief_db, abs=1.5)


def over_field_db(gap_m, width_m, strip_m, side_m):
    """Model over an independent static field solution (moments, planes of finite width)."""
    air_ohm = float(cross_section.stripline_zero_thickness(strip_m, gap_m, 1.0))
    model = float(stripline_leakage.edge_leakage(air_ohm, gap_m, width_m, side_m, strip_m))
    return 20 * np.log10(model / leakage_by_field(gap_m, width_m, strip_m, side_m, air_ohm))


@pytest.mark.parametrize(("gap_m", "width_m"), [(0.4e-3, 0.12), (1.6e-3, 0.03)])
@pytest.mark.parametrize("strip", [0.05, 0.1, 0.3, 0.6, 1.0, 2.0])
def test_leakage_is_that_of_a_static_field_solution_and_never_below_it(strip, gap_m, width_m):
    """Both ends of the stated range of planes and of strips over their distance."""
    found = [over_field_db(gap_m, width_m, strip * gap_m, d * gap_m) for d in (0.25, 1.0, 2.5)]
    assert min(found) > 0
    assert max(found) < 0.7
    assert max(found[1:]) < 0.45


def test_a_strip_nearer_to_one_plane_leaks_less_by_the_sine_of_its_height():
    """The lowest mode goes as sin(pi y/b) across; the formula says what leaks midway."""
    gap_m = 1e-3
    midway, off = (leakage_by_field(gap_m, 0.06, 3e-4, gap_m, 100.0, rise=y) for y in (0.5, 0.2))
    assert off / midway == pytest.approx(np.sin(0.2 * np.pi), rel=0.02)
    assert stripline_leakage.edge_leakage(100.0, gap_m, 0.06, gap_m, 3e-4) > midway


def test_the_share_of_the_width_is_a_complete_elliptic_integral():
    """Mean of exp(pi x/b) over the exact charge of a strip between planes, from its near edge."""
    strip = np.array([1e-3, 0.05, 0.3, 1.0, 2.0, 5.0])
    thin, wide = (
        stripline_leakage.edge_leakage(100.0, 1e-3, 0.06, 0.0, w * 1e-3) for w in (0.0, strip)
    )
    exact = np.pi / 2 / ellipkm1(np.exp(-2 * np.pi * strip))
    np.testing.assert_allclose(wide / thin, exact, rtol=1e-7)


def test_leakage_falls_by_the_mode_below_cutoff_between_planes():
    # the lowest odd mode of parallel planes falls as exp(-pi d/b), 27.3 dB for one spacing
    near, far = stripline_leakage.edge_leakage(100.0, 1e-3, 0.1, np.array([1e-3, 2e-3]), 3e-4)
    assert 20 * np.log10(near / far) == pytest.approx(20 * np.log10(np.exp(np.pi)), abs=1e-9)


def test_beyond_three_spacings_nothing_is_left_and_outside_the_side_it_stays():
    side_m = np.array([-1e-3, 0.0, 2.9e-3, 3.1e-3])
    leak = stripline_leakage.edge_leakage(100.0, 1e-3, 0.1, side_m, 3e-4)
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
