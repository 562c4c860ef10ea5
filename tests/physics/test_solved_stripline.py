"""Solved striplines against exact and published closed forms."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import cross_section, line_losses, solved_stripline

REFERENCE = Path(__file__).parents[1] / "reference"


def reference_rows():
    lines = (REFERENCE / "stripline_solved.csv").read_text(encoding="utf-8").splitlines()
    rows = [line for line in lines if not line.startswith("#")]
    return np.loadtxt(rows[1:], delimiter=",", ndmin=2).T


@pytest.mark.parametrize("width_to_gap", [0.1, 0.35, 1.0, 2.0])
def test_a_very_thin_strip_has_the_exact_elliptic_impedance(width_to_gap):
    exact = cross_section.stripline_zero_thickness(width_to_gap, 1.0, 4.2)
    solved = solved_stripline.stripline_solved(width_to_gap, 0.49999, 0.49999, 2e-5, 4.2)
    assert solved == pytest.approx(exact, rel=5e-4)


def test_a_centred_thick_strip_is_within_wheelers_error():
    width = np.array([0.05e-3, 0.1e-3, 0.2e-3, 0.5e-3])
    wheeler = cross_section.stripline_centred(width, 0.4e-3, 35e-6, 4.2)
    solved = solved_stripline.stripline_solved(width, 182.5e-6, 182.5e-6, 35e-6, 4.2)
    np.testing.assert_allclose(solved, wheeler, rtol=5e-3)


def test_solution_is_that_of_another_program_on_four_times_the_panels():
    w, h_1, h_2, t, ohm, per_rs = reference_rows()
    np.testing.assert_allclose(
        solved_stripline.stripline_solved(w, h_1, h_2, t, 1.0), ohm, rtol=2e-4
    )
    surface = np.sqrt(np.pi * 4e-7 * np.pi * line_losses.COPPER_OHM_M)
    found = solved_stripline.skin_factor_solved(w, h_1, h_2, t) / surface
    np.testing.assert_allclose(found, per_rs, rtol=5e-3)


def test_a_far_second_plane_leaves_a_microstrip_in_air():
    microstrip, _ = cross_section.microstrip(0.2e-3, 0.1e-3, 18e-6, 1.0)
    solved = solved_stripline.stripline_solved(0.2e-3, 0.1e-3, 20e-3, 18e-6, 1.0)
    assert solved == pytest.approx(microstrip, rel=5e-3)
    strip = line_losses.skin_factor(0.2e-3, 0.1e-3, 18e-6)
    assert solved_stripline.skin_factor_solved(0.2e-3, 0.1e-3, 20e-3, 18e-6) == pytest.approx(
        strip, rel=2e-2
    )


def test_the_parallel_rule_is_5_to_10_percent_high_at_4_to_10_times_the_height():
    """Published accuracy of the rule beyond its validity."""
    ratio = np.array([4.0, 10.0])
    z_a = cross_section.stripline_centred(0.2e-3, 0.218e-3, 18e-6, 4.2)
    z_b = cross_section.stripline_centred(0.2e-3, 0.2e-3 * ratio + 18e-6, 18e-6, 4.2)
    rule = 2 * z_a * z_b / (z_a + z_b)
    solved = solved_stripline.stripline_solved(0.2e-3, 0.1e-3, 0.1e-3 * ratio, 18e-6, 4.2)
    assert ((rule / solved > 1.03) & (rule / solved < 1.12)).all()


def test_planes_may_be_exchanged():
    one = solved_stripline.stripline_solved(0.2e-3, 0.1e-3, 0.5e-3, 18e-6, 4.2)
    other = solved_stripline.stripline_solved(0.2e-3, 0.5e-3, 0.1e-3, 18e-6, 4.2)
    assert one == pytest.approx(other, rel=1e-9)


def test_sizes_that_are_no_strip_are_nan():
    width = np.array([0.0, 0.2e-3, 0.2e-3, 1.0])
    height = np.array([0.1e-3, -0.1e-3, 0.1e-3, 0.1e-3])
    thickness = np.array([18e-6, 18e-6, 0.0, 18e-6])
    z = solved_stripline.stripline_solved(width, height, 0.3e-3, thickness, 4.2)
    assert np.isnan(z).all()
    assert np.isnan(solved_stripline.stripline_solved(0.2e-3, 0.1e-3, 0.3e-3, 18e-6, 0.9))
