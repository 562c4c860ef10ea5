"""Skin loss against surface currents of field solutions and published attenuations."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan.physics import line_losses
from edgeplan.physics.cross_section import microstrip

REFERENCE = Path(__file__).parents[1] / "reference"
MU_0 = 4e-7 * np.pi


def table(name):
    lines = (REFERENCE / name).read_text(encoding="utf-8").splitlines()
    rows = [line for line in lines if not line.startswith("#")]
    return np.loadtxt(rows[1:], delimiter=",", ndmin=2).T


def test_microstrip_skin_factor_is_that_of_the_surface_currents():
    width, height, thickness, _, per_rs = table("microstrip_skin_loss.csv")
    surface = np.sqrt(np.pi * MU_0 * line_losses.COPPER_OHM_M)
    k = line_losses.skin_factor(width, height, thickness)
    np.testing.assert_allclose(k / surface, per_rs, rtol=1e-2)


def test_stripline_skin_factor_is_that_of_the_field_solution():
    width, h_1, h_2, thickness, _, per_rs = table("stripline_solved.csv")
    surface = np.sqrt(np.pi * MU_0 * line_losses.COPPER_OHM_M)
    k = line_losses.skin_factor_stripline(width, h_1, h_2, thickness)
    np.testing.assert_allclose(k / surface, per_rs, rtol=1.5e-2)


def test_stripline_loss_is_near_the_published_design():
    """Pozar, Microwave Engineering, example 3.5: 0.122 Np/m at 10 GHz in 50 ohm."""
    k = line_losses.skin_factor_stripline(2.66e-3, 1.595e-3, 1.595e-3, 10e-6, 1 / 5.813e7)
    assert k * np.sqrt(10e9) / (2 * 50) == pytest.approx(0.122, rel=0.04)


def test_skin_factor_grows_with_the_root_of_resistivity():
    one = line_losses.skin_factor(0.2e-3, 0.1e-3, 18e-6, 1e-8)
    four = line_losses.skin_factor(0.2e-3, 0.1e-3, 18e-6, 4e-8)
    assert four / one == pytest.approx(2.0, rel=1e-12)


def test_skin_factor_without_thickness_is_nan():
    assert np.isnan(line_losses.skin_factor(0.2e-3, 0.1e-3, 0.0))
    assert np.isnan(line_losses.skin_factor_stripline(0.2e-3, 0.1e-3, 0.2e-3, 18e-6))


def test_dc_resistance_of_a_0_18_mm_trace_of_one_ounce():
    """1.7241e-8 / (0.18e-3 * 35e-6) by hand."""
    assert line_losses.dc_resistance(0.18e-3, 35e-6) == pytest.approx(2.7367, rel=1e-4)
    assert np.isnan(line_losses.dc_resistance(0.18e-3, 0.0))


def test_effective_loss_tangent_gives_the_dielectric_loss_of_scikit_rf():
    import skrf

    frequency = skrf.Frequency(1, 1, 1, unit="GHz")
    line = skrf.media.MLine(
        frequency,
        w=0.18e-3,
        h=0.11e-3,
        t=35e-6,
        ep_r=4.2,
        tand=0.02,
        rho=1.7e-8,
        model="hammerstadjensen",
        disp="none",
        diel="frequencyinvariant",
    )
    _, ee = microstrip(0.18e-3, 0.11e-3, 35e-6, 4.2)
    tangent = line_losses.effective_loss_tangent(4.2, ee, 0.02)
    nepers_per_m = np.pi * 1e9 * np.sqrt(ee) / 299_792_458.0 * tangent
    assert nepers_per_m == pytest.approx(float(line.alpha_dielectric[0]), rel=1e-5)


def test_filled_line_has_the_loss_tangent_of_its_dielectric():
    assert line_losses.effective_loss_tangent(4.2, 4.2, 0.02) == pytest.approx(0.02)
    assert line_losses.effective_loss_tangent(1.0, 1.0, 0.02) == pytest.approx(0.02)
