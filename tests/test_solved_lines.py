"""From the layers around a strip to its solution."""

from math import isnan

import pytest

from edgeplan.board import Layer
from edgeplan.solved_lines import solved_line


def layer(thickness_m, permittivity, tangent=0.0):
    return Layer(
        layer="D",
        kind="dielectric",
        thickness_m=thickness_m,
        permittivity=permittivity,
        loss_tangent=tangent,
    )


def between_planes(below, above):
    return solved_line(0.15e-3, 18e-6, below, above, upper_plane=True, coated=False)


def test_the_copper_adds_to_the_gap_of_the_planes():
    """116.756 ohm in air between planes at 0.2 and 0.3 mm: tests/reference/stripline_solved.csv."""
    found = between_planes([layer(0.2e-3, 4.0)], [layer(0.3e-3, 4.0)])
    assert found.impedance_ohm == pytest.approx(116.756 / 2, rel=1e-4)
    assert found.permittivity_effective == pytest.approx(4.0)


def test_it_does_not_matter_which_side_is_called_above():
    low, high = [layer(0.1e-3, 3.0), layer(0.1e-3, 3.6)], [layer(0.3e-3, 4.5)]
    one, other = between_planes(low, high), between_planes(high, low)
    assert one.impedance_ohm == pytest.approx(other.impedance_ohm, rel=1e-3)
    assert one.permittivity_effective == pytest.approx(other.permittivity_effective, rel=1e-3)


def test_who_fills_the_flanks_counts_as_error_where_it_matters():
    alike = between_planes([layer(0.1e-3, 4.0)], [layer(0.3e-3, 4.0)])
    unlike = between_planes([layer(0.1e-3, 3.0)], [layer(0.3e-3, 5.0)])
    assert alike.error < 5e-4 < unlike.error < 0.02


def test_losses_are_those_of_the_layer_that_holds_the_field():
    lossy, clean = layer(0.1e-3, 4.0, 0.02), layer(0.3e-3, 4.0)
    assert between_planes([lossy], [lossy]).loss_tangent == pytest.approx(0.02)
    near = between_planes([lossy], [clean]).loss_tangent
    far = between_planes([layer(0.1e-3, 4.0)], [layer(0.3e-3, 4.0, 0.02)]).loss_tangent
    assert near > far > 0
    assert near + far == pytest.approx(0.02, rel=1e-2)


def test_sizes_that_are_no_line_are_unknown():
    found = solved_line(1.0, 18e-6, [layer(0.1e-3, 4.0)], [], upper_plane=False, coated=False)
    assert isnan(found.impedance_ohm)
    assert isnan(found.error)
