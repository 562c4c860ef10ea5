"""A printed line: from the stack, from a stated impedance, or from a fabricator's table."""

from math import isnan

import numpy as np
import pytest
from build import STACK, WIDTH_M, stack

from edgeplan.board import Layer
from edgeplan.stack import COMPUTED, SOLVED, STATED, printed_line, surface_line

SPEED = 299_792_458.0


def layers(*rows):
    return [Layer(**row) for row in rows or STACK]


def thin_strip(er=4.2, height_m=0.2e-3):
    """Put copper without thickness over a plane."""
    return layers(
        {"layer": "L1", "kind": "signal", "thickness_m": 1e-10},
        {"layer": "D1", "kind": "dielectric", "thickness_m": height_m, "permittivity": er},
        {"layer": "L2", "kind": "plane", "thickness_m": 18e-6},
    )


def inner_strip(above_m=0.2e-3, below_m=0.2e-3, er_below=4.2, er_above=4.2, **signal):
    """Put a signal layer between two planes."""
    copper = {"layer": "L2", "kind": "signal", "thickness_m": 1e-10} | signal
    plane = {"kind": "plane", "thickness_m": 18e-6}
    laminate = {"kind": "dielectric"}
    return layers(
        plane | {"layer": "P1"},
        laminate | {"layer": "D1", "thickness_m": above_m, "permittivity": er_above},
        copper,
        laminate | {"layer": "D2", "thickness_m": below_m, "permittivity": er_below},
        plane | {"layer": "P2"},
    )


# Zero thickness, er 4.2: own integral-equation solution with image series, converged to 1e-8.
@pytest.mark.parametrize(
    ("width_over_height", "ohm", "effective"),
    [(0.5, 97.3406, 2.93280), (1, 72.4748, 3.04288), (2, 49.7065, 3.20799)],
)
def test_a_surface_line_has_the_impedance_and_delay_of_its_cross_section(
    width_over_height, ohm, effective
):
    line = printed_line(thin_strip(), "L1", width_over_height * 0.2e-3)
    assert line.impedance_ohm == pytest.approx(ohm, rel=2e-3)
    assert line.delay_s_per_m == pytest.approx(effective**0.5 / SPEED, rel=2e-3)
    assert line.surface
    assert line.provenance == COMPUTED


# Zero thickness between planes: K(k)/K(k') of the exact conformal map, er 4.2.
@pytest.mark.parametrize(("width_over_gap", "ohm"), [(0.35, 58.7662), (0.5, 49.0060), (1, 31.8893)])
def test_a_centred_inner_line_has_the_exact_impedance_and_is_wholly_filled(width_over_gap, ohm):
    line = printed_line(inner_strip(), "L2", width_over_gap * 0.4e-3)
    assert line.impedance_ohm == pytest.approx(ohm, rel=5e-3)
    assert line.delay_s_per_m == pytest.approx(4.2**0.5 / SPEED, rel=1e-3)
    assert not line.surface


def test_the_surface_lines_of_a_common_stack_are_near_52_ohm_on_both_sides():
    # A 0.18 mm trace of 35 um copper, 0.11 mm over its plane, er 4.2: Hammerstad and Jensen with
    # finite thickness as scikit-rf has it.
    from skrf import Frequency
    from skrf.media import MLine

    media = MLine(  # copper without resistance: only its thickness counts
        Frequency(0.01, 0.01, 1, "GHz"),
        w=WIDTH_M,
        h=0.11e-3,
        t=35e-6,
        ep_r=4.2,
        model="hammerstadjensen",
        disp="none",
        diel="frequencyinvariant",
        tand=0.0,
        rho=1e-12,
    )
    expected = float(np.ravel(media.zl_eff)[0].real)
    top, bottom = (printed_line(layers(), name, WIDTH_M) for name in ("L1", "L4"))
    assert top.impedance_ohm == pytest.approx(expected, rel=2e-3)
    assert bottom.impedance_ohm == pytest.approx(top.impedance_ohm)
    assert bottom.delay_s_per_m == pytest.approx(top.delay_s_per_m)


def test_a_stated_impedance_holds_for_every_width_where_none_is_stated_with_it():
    with_z0 = layers(*stack(47.0))
    for width_m in (0.1e-3, 0.3e-3):
        line = printed_line(with_z0, "L1", width_m)
        assert (line.impedance_ohm, line.provenance, line.problem) == (47.0, STATED, "")


def test_a_stated_impedance_keeps_the_delay_and_losses_of_the_stack():
    stated, computed = (printed_line(layers(*stack(z0)), "L1", WIDTH_M) for z0 in (47.0, None))
    for name in ("delay_s_per_m", "resistance_dc_ohm_per_m", "skin_ohm_per_m_rthz", "loss_tangent"):
        assert getattr(stated, name) == getattr(computed, name)


def test_a_stated_impedance_is_carried_to_another_width_by_the_computed_ratio():
    rows = [dict(row) for row in STACK]
    rows[0] |= {"z0_ohm": 55.0, "z0_width_m": 0.18e-3}
    at_stated, wider = (printed_line(layers(*rows), "L1", w) for w in (0.18e-3, 0.3e-3))
    ratio = (
        printed_line(layers(), "L1", 0.3e-3).impedance_ohm
        / printed_line(layers(), "L1", 0.18e-3).impedance_ohm
    )
    assert at_stated.impedance_ohm == 55.0
    assert wider.impedance_ohm == pytest.approx(55.0 * ratio)


def test_a_table_is_read_between_its_rows_and_comes_before_a_stated_impedance():
    table = {"L1": [(0.20e-3, 50.0), (0.10e-3, 60.0)]}
    line = printed_line(layers(*stack(47.0)), "L1", 0.15e-3, table)
    assert line.impedance_ohm == pytest.approx(55.0)
    assert line.provenance == STATED


@pytest.mark.parametrize("width_m", [0.09e-3, 0.21e-3])
def test_a_table_is_never_extrapolated(width_m):
    line = printed_line(layers(), "L1", width_m, {"L1": [(0.10e-3, 60.0), (0.20e-3, 50.0)]})
    assert isnan(line.impedance_ohm)
    assert "does not reach" in line.problem


def test_a_table_of_another_layer_does_not_count():
    line = printed_line(layers(), "L1", WIDTH_M, {"L4": [(0.1e-3, 60.0), (0.2e-3, 50.0)]})
    assert line.provenance == COMPUTED


def test_an_offset_strip_within_the_closed_form_lies_below_the_centred_one():
    centred = printed_line(inner_strip(0.2e-3, 0.2e-3), "L2", WIDTH_M)
    offset = printed_line(inner_strip(0.15e-3, 0.25e-3), "L2", WIDTH_M)
    assert 0.8 * centred.impedance_ohm < offset.impedance_ohm < centred.impedance_ohm


def test_a_strip_far_off_centre_is_solved():
    """121.477 ohm in air: a boundary-element solution, tests/reference/stripline_solved.csv."""
    line = printed_line(inner_strip(0.2e-3, 0.39e-3, thickness_m=18e-6), "L2", 0.15e-3)
    assert line.provenance == SOLVED
    assert line.impedance_ohm == pytest.approx(121.477 / 4.2**0.5, rel=2e-3)


def test_a_strip_between_unequal_permittivities_lies_between_those_of_either():
    three, both, four = (
        printed_line(inner_strip(er_below=er, thickness_m=18e-6, er_above=above), "L2", WIDTH_M)
        for er, above in ((3.0, 3.0), (3.0, 4.2), (4.2, 4.2))
    )
    assert both.provenance == SOLVED
    assert four.impedance_ohm < both.impedance_ohm < three.impedance_ohm
    assert three.delay_s_per_m < both.delay_s_per_m < four.delay_s_per_m
    assert 1e-3 < both.error < 1e-2  # either dielectric may fill the flanks


def test_a_stated_impedance_mends_a_strip_outside_every_closed_form():
    line = printed_line(inner_strip(0.1e-3, 0.9e-3, z0_ohm=49.0), "L2", WIDTH_M)
    assert (line.impedance_ohm, line.problem) == (49.0, "")
    assert line.delay_s_per_m == pytest.approx(4.2**0.5 / SPEED, rel=1e-3)


def test_a_surface_line_outside_its_formula_is_solved():
    """Copper thicker than its height; within 2 % of the formula just inside of its range."""
    thick = layers(*STACK)
    thick[0] = thick[0].model_copy(update={"thickness_m": 0.115e-3})
    inside = [thick[0].model_copy(update={"thickness_m": 0.11e-3}), *thick[1:]]
    line, formula = (printed_line(rows, "L1", WIDTH_M) for rows in (thick, inside))
    assert (line.provenance, formula.provenance) == (SOLVED, COMPUTED)
    assert line.impedance_ohm == pytest.approx(formula.impedance_ohm, rel=2e-2)
    assert line.delay_s_per_m == pytest.approx(formula.delay_s_per_m, rel=2e-2)


def test_a_width_that_no_solution_was_tried_for_is_named():
    line = printed_line(thin_strip(height_m=1e-6), "L1", 1e-3)
    assert isnan(line.impedance_ohm)
    assert line.problem == (
        "layer L1: no field solution for a line 1 mm wide and 0.001 mm from its plane; check both"
    )


MASK = {"layer": "M", "kind": "dielectric", "thickness_m": 20e-6, "permittivity": 3.5}


def test_a_line_under_solder_mask_is_a_solved_surface_line():
    """49.365 ohm, effective permittivity 3.2726: lines_by_finite_differences.csv."""
    rows = layers(MASK, *STACK, MASK | {"layer": "N"})
    top, bottom = (printed_line(rows, name, WIDTH_M) for name in ("L1", "L4"))
    for line in (top, bottom):
        assert (line.provenance, line.surface, line.problem) == (SOLVED, True, "")
        assert line.assumed.startswith("mask taken as")
        assert line.impedance_ohm == pytest.approx(49.365, rel=3e-3)
        assert line.delay_s_per_m == pytest.approx(3.2726**0.5 / SPEED, rel=2e-3)
    assert surface_line(rows, WIDTH_M).layer == "L1"


def test_a_covered_line_over_one_plane_is_solved_and_no_surface_line():
    """54.360 ohm, effective permittivity 3.7905: lines_by_finite_differences.csv."""
    cover = {"layer": "D0", "kind": "dielectric", "thickness_m": 82e-6, "permittivity": 4.2}
    rows = layers(
        {"layer": "L1", "kind": "signal", "thickness_m": 18e-6},
        cover,
        {"layer": "L2", "kind": "signal", "thickness_m": 18e-6},
        cover | {"layer": "D1", "thickness_m": 0.12e-3},
        {"layer": "L3", "kind": "plane", "thickness_m": 18e-6},
    )
    line = printed_line(rows, "L2", 0.15e-3)
    assert (line.provenance, line.surface) == (SOLVED, False)
    assert line.impedance_ohm == pytest.approx(54.360, rel=3e-3)
    assert line.delay_s_per_m == pytest.approx(3.7905**0.5 / SPEED, rel=2e-3)


def test_mask_under_a_stated_impedance_still_slows_the_line():
    stated = printed_line(layers(MASK, *stack(47.0)), "L1", WIDTH_M)
    assert (stated.impedance_ohm, stated.provenance) == (47.0, STATED)
    assert stated.delay_s_per_m > printed_line(layers(), "L1", WIDTH_M).delay_s_per_m


def test_a_layer_without_a_plane_has_no_line_even_with_a_stated_impedance():
    lonely = layers(
        {"layer": "L1", "kind": "signal", "thickness_m": 35e-6, "z0_ohm": 50.0},
        {"layer": "D1", "kind": "dielectric", "thickness_m": 1e-3, "permittivity": 4.2},
        {"layer": "L2", "kind": "signal", "thickness_m": 35e-6},
    )
    for table in ({}, {"L1": [(0.1e-3, 60.0), (0.2e-3, 50.0)]}):
        line = printed_line(lonely, "L1", WIDTH_M, table)
        assert "no plane" in line.problem
