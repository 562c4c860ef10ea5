"""What stands on either side of each border of a cross-section."""

import numpy as np
import pytest

from edgeplan.physics.outlines import CrossSection, Dielectric, outline

LAMINATE, COVER, MASK = Dielectric(1.0, 4.0), Dielectric(2.0, 3.0), Dielectric(0.1, 3.5)
SURFACE = CrossSection(2.0, 0.2, 1.0, (LAMINATE,))


def copper(found):
    return found.left == 0


def touching(found):
    """Length of copper that touches each permittivity."""
    rows = copper(found)
    values = np.unique(found.right[rows].real)
    return {float(v): found.panels.length[rows & (found.right == v)].sum() for v in values}


def test_a_bare_strip_lies_on_laminate_and_stands_in_air():
    assert touching(outline(SURFACE, 1)) == {4.0: pytest.approx(1.0), 1.0: pytest.approx(1.2)}


def test_a_coated_strip_stands_in_its_coating():
    found = outline(SURFACE._replace(coating=MASK), 1)
    assert touching(found) == {4.0: pytest.approx(1.0), 3.5: pytest.approx(1.2)}
    surface = (found.left == 1.0) & (found.right == 3.5)
    assert found.panels.start[surface][0] == pytest.approx(1.3j)
    assert found.panels.stop[surface].imag.min() == pytest.approx(1.1)
    assert found.panels.length[surface & (found.panels.along.real == 0)].sum() == pytest.approx(0.2)


def test_a_border_at_half_the_copper_divides_its_flank():
    section = SURFACE._replace(layers=(Dielectric(1.1, 4.0), COVER))
    assert touching(outline(section, 1)) == {4.0: pytest.approx(1.1), 3.0: pytest.approx(1.1)}


def test_a_pair_shows_both_flanks_and_both_faces_of_one_strip():
    found = outline(SURFACE._replace(spacing_m=0.5), 1)
    assert found.panels.length[copper(found)].sum() == pytest.approx(2 * (2.0 + 0.2))
    assert found.panels.start[copper(found)].real.min() == pytest.approx(0.25)


def test_a_narrow_gap_between_coated_strips_is_filled():
    wide, narrow = (outline(SURFACE._replace(coating=MASK, spacing_m=s), 1) for s in (0.5, 0.15))
    heights = [f.panels.start[f.left == 1.0][0].imag for f in (wide, narrow)]
    assert heights == pytest.approx([1.1, 1.3])


def test_equal_permittivities_have_no_border():
    layers = (LAMINATE, LAMINATE._replace(thickness_m=2.0))
    section = CrossSection(1.0, 0.1, 1.0, layers, upper_plane=True)
    assert copper(outline(section, 1)).all()


def test_twice_the_fineness_is_twice_the_panels():
    section = SURFACE._replace(coating=MASK, spacing_m=0.5)
    assert len(outline(section, 2).left) == 2 * len(outline(section, 1).left)
