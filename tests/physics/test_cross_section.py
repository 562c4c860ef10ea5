"""Closed forms against exact solutions, published designs and scikit-rf."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import cross_section

REFERENCE = Path(__file__).parents[1] / "reference"
INCH_M = 0.0254


def table(name):
    lines = (REFERENCE / name).read_text(encoding="utf-8").splitlines()
    rows = [line for line in lines if not line.startswith("#")]
    return np.loadtxt(rows[1:], delimiter=",", ndmin=2).T


def test_thin_microstrip_is_within_the_authors_error_of_the_exact_solution():
    width, permittivity, ohm, effective = table("microstrip_zero_thickness.csv")
    z, ee = cross_section.microstrip(width * 1e-3, 1e-3, 0.0, permittivity)
    np.testing.assert_allclose(z, ohm, rtol=1.1e-3)
    np.testing.assert_allclose(ee, effective, rtol=2.1e-3)


def test_thick_microstrip_in_air_is_within_half_a_percent_of_a_field_solution():
    width, height, thickness, ohm, _ = table("microstrip_skin_loss.csv")
    z, ee = cross_section.microstrip(width, height, thickness, 1.0)
    np.testing.assert_allclose(z, ohm, rtol=5e-3)
    np.testing.assert_allclose(ee, 1.0, rtol=1e-12)


@pytest.mark.parametrize("thickness_m", [7e-6, 18e-6, 35e-6])
@pytest.mark.parametrize("width_m", [0.05e-3, 0.18e-3, 1e-3])
def test_thick_microstrip_is_the_same_model_in_scikit_rf(width_m, thickness_m):
    import skrf

    frequency = skrf.Frequency(1, 1, 1, unit="GHz")
    line = skrf.media.MLine(
        frequency,
        w=width_m,
        h=0.11e-3,
        t=thickness_m,
        ep_r=4.2,
        rho=1.7e-8,
        model="hammerstadjensen",
        disp="none",
        diel="frequencyinvariant",
    )
    z, ee = cross_section.microstrip(width_m, 0.11e-3, thickness_m, 4.2)
    assert z == pytest.approx(float(np.real(line.zl_eff)), rel=1e-6)
    assert ee == pytest.approx(float(np.real(line.ep_reff)), rel=1e-6)


def test_outer_layer_of_the_example_board_is_51_7_ohm_and_5_75_ns_per_metre():
    z, ee = cross_section.microstrip(0.18e-3, 0.11e-3, 35e-6, 4.2)
    assert round(float(z), 1) == 51.7
    assert round(float(cross_section.delay_s_per_m(ee)) * 1e9, 2) == 5.75


def test_log_form_of_ipc_2141_leaves_microstrip_above_twice_the_height():
    """87/sqrt(er + 1.41) ln(5.98 h/(0.8 w + t)): 2 % at w = h, 27 % at 3 h in air."""
    ipc_ohm = 87 / np.sqrt(1 + 1.41) * np.log(5.98 / (0.8 * 3))
    z, _ = cross_section.microstrip(3e-3, 1e-3, 0.0, 1.0)
    assert ipc_ohm / z == pytest.approx(51.16 / 69.78, rel=1e-3)


def test_microstrip_outside_its_validity_is_nan():
    width = np.array([0.009e-3, 0.5e-3, 0.5e-3, 0.5e-3, 101e-3, -1e-3])
    thickness = np.array([0.0, 1.1e-3, -1e-6, 0.0, 0.0, 0.0])
    permittivity = np.array([4.2, 4.2, 4.2, 129.0, 4.2, 4.2])
    z, ee = cross_section.microstrip(width, 1e-3, thickness, permittivity)
    assert np.isnan(z).all()
    assert np.isnan(ee).all()


def test_microstrip_broadcasts_widths_against_layers():
    width = np.array([[0.1e-3], [0.2e-3], [0.3e-3]])
    z, ee = cross_section.microstrip(width, np.array([0.1e-3, 0.2e-3]), 18e-6, 4.2)
    assert z.shape == ee.shape == (3, 2)
    assert z[1, 0] == cross_section.microstrip(0.2e-3, 0.1e-3, 18e-6, 4.2)[0]


def test_microstrip_delay_of_er_4_5_is_152_ps_per_inch_where_the_old_fit_says_142():
    """Exact: 84.725 sqrt(3.23247) = 152.3 ps/in; the fit is 85 sqrt(0.475 er + 0.67)."""
    _, ee = cross_section.microstrip(1e-3, 1e-3, 0.0, 4.5)
    ps_per_inch = float(cross_section.delay_s_per_m(ee)) * INCH_M * 1e12
    assert ps_per_inch == pytest.approx(152.3, rel=1e-3)
    assert 85 * np.sqrt(0.475 * 4.5 + 0.67) / ps_per_inch == pytest.approx(0.935, abs=2e-3)


def test_thin_stripline_is_the_exact_table():
    width, permittivity, ohm = table("stripline_zero_thickness.csv")
    z = cross_section.stripline_zero_thickness(width, 1.0, permittivity)
    np.testing.assert_allclose(z, ohm, rtol=2e-5)


def test_wheeler_without_thickness_is_within_half_a_percent_of_the_exact_table():
    width, permittivity, ohm = table("stripline_zero_thickness.csv")
    z = cross_section.stripline_centred(width, 1.0, 0.0, permittivity)
    np.testing.assert_allclose(z, ohm, rtol=5e-3)


def test_log_form_of_ipc_2141_leaves_stripline_above_a_third_of_the_gap():
    """60/sqrt(er) ln(4 b/(0.67 pi 0.8 w)): 4.6 % low at 0.35, 21 % low at w = b."""
    width = np.array([0.35, 1.0])
    ipc_ohm = 60 / np.sqrt(4.5) * np.log(4 / (0.67 * np.pi * 0.8 * width))
    exact_ohm = cross_section.stripline_zero_thickness(width, 1.0, 4.5)
    np.testing.assert_allclose(ipc_ohm / exact_ohm - 1, [-0.046, -0.206], atol=1e-3)


def test_thick_stripline_is_close_to_a_field_solution():
    width, h_1, h_2, thickness, ohm, _ = table("stripline_solved.csv")
    z = cross_section.stripline_offset(width, h_1, h_2, thickness, 1.0)
    centred = h_1 == h_2
    np.testing.assert_allclose(z[centred], ohm[centred], rtol=1.5e-3)
    np.testing.assert_allclose(z, ohm, rtol=1.4e-2)


def test_offset_stripline_at_twice_the_height_is_nan_in_either_order():
    z = cross_section.stripline_offset(
        0.15e-3, np.array([0.1e-3, 0.2e-3]), np.array([0.2e-3, 0.1e-3]), 18e-6, 4.2
    )
    assert np.isnan(z).all()


def test_stripline_outside_its_validity_is_nan():
    z = cross_section.stripline_centred(
        np.array([11e-3, 0.1e-3, 0.1e-3]), 1e-3, np.array([0.0, 0.3e-3, 0.0]), [4.2, 4.2, 0.5]
    )
    assert np.isnan(z).all()


def test_loaded_lines_are_the_published_examples():
    ohm, ps, line_pf, load_pf, loaded_ohm, loaded_ps = table("loaded_lines.csv")
    per_m = 1e-12 / INCH_M
    z, delay = cross_section.loaded_line(ohm, ps * per_m, line_pf * per_m, load_pf * per_m)
    np.testing.assert_allclose(z, loaded_ohm, rtol=2e-3)
    np.testing.assert_allclose(delay / per_m, loaded_ps, rtol=3e-3)


def test_unloaded_line_is_unchanged():
    z, delay = cross_section.loaded_line(50.0, 6e-9, 120e-12, 0.0)
    assert (float(z), float(delay)) == (50.0, 6e-9)
