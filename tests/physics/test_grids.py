"""Grids: every candidate finds one that holds what must be seen, or none."""

import numpy as np
import pytest

from edgeplan.physics.grids import (
    KEPT,
    LONGEST,
    choose_grids,
    longest_delay_s,
    needs,
    rounded_step_s,
)
from edgeplan.physics.lines import LineConstants
from edgeplan.physics.network import Trees, point_to_point
from edgeplan.physics.sources import drive_of


def scan(resistance_ohm, count=40, nets=3):
    """Ramps from 30 ps to 3 us on the candidate axis."""
    shape = (nets, count)
    return drive_of(
        np.full(shape, float(resistance_ohm)), ramp_s=np.geomspace(30e-12, 3e-6, count)[None]
    )


def test_steps_are_shared_and_at_most_a_sixth_shorter_than_asked():
    asked = np.geomspace(1e-12, 1e-7, 500)
    step = rounded_step_s(asked)
    assert (step <= asked * (1 + 1e-6)).all()
    assert (step > asked / 2**0.2501).all()
    assert len(np.unique(step)) <= 4 * np.log2(1e5) + 2


@pytest.mark.parametrize("resistance_ohm", [8.0, 50.0, 300.0])
def test_every_candidate_is_in_one_piece_that_is_fine_and_long_enough(resistance_ohm):
    trees = point_to_point([0.02, 0.08, 0.15], receiver_farad=5e-12)
    drive = scan(resistance_ohm)
    window = needs(trees, drive, [10e-9])
    grids = choose_grids(drive, window)
    net = np.repeat(grids.net, np.diff(grids.offset))
    key = net * 40 + grids.candidate
    assert len(np.unique(key)) == len(key)
    step, length = (
        np.repeat(values, np.diff(grids.offset)) for values in (grids.step_s, grids.length)
    )
    ramp = grids.ramp_s[net, grids.candidate]
    assert (step <= ramp / 10 * (1 + 1e-6)).all()
    held = KEPT * step * length
    assert (held >= window.least_s[net, grids.candidate] * (1 - 1e-9)).all()
    assert (length <= LONGEST).all()
    assert len(key) >= 0.9 * 120


def test_a_ramp_far_too_short_for_its_line_has_no_grid():
    drive = drive_of([[50.0, 50.0]], ramp_s=[[1e-12, 1e-9]])
    grids = choose_grids(drive, needs(point_to_point([1.0]), drive, [1e-9]))
    assert grids.candidate.tolist() == [1]


def test_only_a_slow_pole_stretches_a_ramp_about_its_middle():
    trees = point_to_point([0.03, 0.03], receiver_farad=[200e-12, 5e-12])
    drive = drive_of([[1e4], [50.0]], ramp_s=1e-9)
    grids = choose_grids(drive, needs(trees, drive, [1e-6]))
    assert grids.ramp_s[1, 0] == 1e-9
    assert grids.ramp_s[0, 0] > 10e-9
    np.testing.assert_allclose(grids.start_s + grids.ramp_s / 2, 0.5e-9, rtol=1e-9)


def test_candidates_that_do_not_exist_take_no_part():
    drive = scan(50.0)
    drive.exists[1] = False
    grids = choose_grids(drive, needs(point_to_point([0.1] * 3), drive, [10e-9]))
    assert set(grids.net.tolist()) == {0, 2}


def test_ringing_of_a_line_is_bounded_by_its_two_reflections():
    # 12 ohm into 55 ohm, open: 0.642 a round trip; 1 mV/V after 15.6 of them, 1.2 ns each.
    trees = point_to_point([0.1], line=(55.0, 6e-9, 0, 0, 0))
    drive = drive_of([[12.0]], ramp_s=1e-9)
    window = needs(trees, drive, [np.inf])
    trips = np.log(1000) / np.log(67 / 43)
    ring = np.log(10) / np.log(67 / 43)
    expected = 0.6e-9 + 1e-9 + max(6e-9, ring * 1.2e-9) + trips * 1.2e-9
    assert window.full_s[0, 0] == pytest.approx(expected)


def test_matched_end_stops_the_ringing_of_any_driver():
    trees = point_to_point([0.1], receiver_siemens=1 / 50)
    drive = drive_of([[2.0]], ramp_s=1e-9)
    window = needs(trees, drive, [np.inf])
    assert window.full_s[0, 0] == pytest.approx(0.6e-9 + 1e-9 + 6e-9 + 2e-9)


def test_arms_of_a_star_ring_even_where_the_driver_matches_them_all():
    def star(arms):
        return Trees(
            segment_offset=np.array([0, arms]),
            parent=np.full(arms, -1),
            length_m=np.full(arms, 0.1),
            line=LineConstants(*(np.full(arms, x) for x in (50.0, 6e-9, 0.0, 0.0, 0.0))),
            node_farad=np.zeros(arms),
            node_siemens=np.zeros(arms),
            receiver_offset=np.array([0, 1]),
            receiver_segment=np.array([0]),
            stub_length_m=np.zeros(1),
            stub_line=LineConstants(*np.ones((5, 1))),
        )

    one = needs(star(1), drive_of([[50.0]], ramp_s=1e-9), [np.inf]).full_s[0, 0]
    four = needs(star(4), drive_of([[12.5]], ramp_s=1e-9), [np.inf]).full_s[0, 0]
    assert four > one + 5e-9


def test_longest_way_is_counted_from_the_pad():
    trees = Trees(
        segment_offset=np.array([0, 3]),
        parent=np.array([-1, 0, 0]),
        length_m=np.array([0.1, 0.05, 0.2]),
        line=LineConstants(*(np.full(3, x) for x in (50.0, 6e-9, 0.0, 0.0, 0.0))),
        node_farad=np.zeros(3),
        node_siemens=np.zeros(3),
        receiver_offset=np.array([0, 1]),
        receiver_segment=np.array([2]),
        stub_length_m=np.array([0.01]),
        stub_line=LineConstants(*np.array([[50.0], [5e-9], [0], [0], [0]])),
    )
    assert longest_delay_s(trees)[0] == pytest.approx(0.3 * 6e-9 + 0.01 * 5e-9)
