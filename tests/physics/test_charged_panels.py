"""Closed forms of charged panels against sums of line charges and the law of Gauss."""

import numpy as np
import pytest

from edgeplan.physics.charged_panels import Panels, mean_field, potential

LEVEL = Panels(np.array([0.3 + 0.4j]), np.array([0.7 + 0.4j]))
UPRIGHT = Panels(np.array([0.5 + 0.2j]), np.array([0.5 + 0.6j]))
POINTS = np.array([0.1 + 0.1j, 0.9 + 0.8j, 0.5 + 0.9j, 1.5 + 0.4j])


def by_images(points, panel, gap, count=200, planes=3000):
    """Potential by summing line charges and their images one by one."""
    shift = 2j * gap * np.arange(-planes, planes + 1) if np.isfinite(gap) else np.zeros(1)
    total = 0.0
    for share in (np.arange(count) + 0.5) / count:
        line = panel.start + (panel.stop - panel.start) * share
        apart = points[:, None] - line - shift
        image = points[:, None] - line.conj() - shift
        total += np.log(np.abs(image / apart)).sum(axis=1)
    return total * panel.length[0] / count / (2 * np.pi)


@pytest.mark.parametrize("panel", [LEVEL, UPRIGHT], ids=["level", "upright"])
@pytest.mark.parametrize("gap", [np.inf, 1.0])
def test_the_potential_is_the_sum_of_lines_and_images(panel, gap):
    ends = panel.start + (panel.stop - panel.start) * np.linspace(0, 1, 9)  # short against the gap
    found = potential(POINTS, Panels(ends[:-1], ends[1:]), gap).sum(axis=1)
    assert found == pytest.approx(by_images(POINTS, panel, gap), rel=2e-3)


def test_the_potential_vanishes_on_the_planes():
    on_planes = np.array([0.2 + 0j, 1.0 + 0j, 0.2 + 1j, 1.0 + 1j])
    assert potential(on_planes, LEVEL, 1.0) == pytest.approx(0.0, abs=3e-3)
    assert potential(on_planes[:2], LEVEL, np.inf) == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize("gap", [np.inf, 1.0])
@pytest.mark.parametrize("step", [0.01, 0.01j])
def test_the_field_is_the_slope_of_the_potential(gap, step):
    middle = POINTS
    target = Panels(middle - 1j * step / 2, middle + 1j * step / 2)  # its left is minus the step
    field = mean_field(target, UPRIGHT, gap)
    slope = (potential(middle + step, UPRIGHT, gap) - potential(middle - step, UPRIGHT, gap)) / 0.02
    assert field == pytest.approx(slope, rel=2e-2, abs=1e-3)


@pytest.mark.parametrize("size", [0.01, 0.45, 5.0])
def test_what_leaves_a_closed_outline_is_the_charge_within(size):
    centre = 10j
    corners = centre + size * np.array([-1 - 1j, 1 - 1j, 1 + 1j, -1 + 1j, -1 - 1j])
    outline = Panels(corners[:-1], corners[1:])
    charge = Panels(np.array([centre - 0.003]), np.array([centre + 0.003]))
    out = -mean_field(outline, charge, np.inf)[:, 0] @ outline.length
    assert out == pytest.approx(charge.length[0], rel=1e-9)


def test_a_panel_sends_as_much_to_its_left_as_to_its_right():
    high = Panels(LEVEL.start + 1e6j, LEVEL.stop + 1e6j)  # its image is too far to count
    assert mean_field(high, high, np.inf)[0, 0] == pytest.approx(0.0, abs=1e-6)
