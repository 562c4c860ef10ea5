"""Two mode runs against a ladder of both lines integrated in time, and against the bounds."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.sparse import bmat, diags, eye, kron

from edgeplan.physics import crosstalk_closed_forms as closed
from edgeplan.physics.crosstalk import coupled_rows
from edgeplan.physics.network import point_to_point
from edgeplan.physics.sources import drive_of

SPEED = 299_792_458.0
LENGTH_M, RAMP_S, SECTIONS = 0.08, 0.4e-9, 100
# Even and odd mode of masked surface lines: ohm and effective permittivity,
# tests/reference/lines_by_finite_differences.csv.
MODES = {"surface": ((61.139, 3.4446), (45.469, 2.9662)), "buried": ((68.949, 4.2), (43.150, 4.2))}


def constants(ohm, permittivity):
    return (ohm, permittivity**0.5 / SPEED, 0.0, 0.0, 0.0)


def by_modes(kind, source_ohm, load_farad=0.0, load_siemens=0.0):
    even, odd = (
        point_to_point(
            [LENGTH_M],
            receiver_farad=load_farad,
            receiver_siemens=load_siemens,
            line=constants(*mode),
        )
        for mode in MODES[kind]
    )
    drive = drive_of([[source_ohm]], ramp_s=RAMP_S)
    rows = coupled_rows(even, odd, drive, duration_s=6e-9)
    return rows.time_s[0], rows.aggressor[0], rows.victim[0]


def by_ladder(kind, source_ohm, load_farad, load_siemens, times_s):
    """Both lines as one ladder of matrices L and C; no mode is ever formed."""
    turn = np.array([[1, 1], [1, -1]]) / 2
    values = [constants(*mode)[:2] for mode in MODES[kind]]
    inductance, capacitance = (
        turn @ np.diag([ohm ** (1 - 2 * k) * delay for ohm, delay in values]) @ (2 * turn)
        for k in (0, 1)
    )
    step = LENGTH_M / SECTIONS
    nodes = SECTIONS + 1
    share = np.full(nodes, 1.0)
    share[[0, -1]] = 0.5
    own = kron(diags(share * step), capacitance).toarray()
    own[-2:, -2:] += load_farad * np.eye(2)
    leak = np.zeros(2 * nodes)
    leak[:2] = 1 / source_ohm
    leak[-2:] = load_siemens
    across = kron(diags([-1.0, 1.0], [0, 1], (SECTIONS, nodes)), eye(2))
    per_l = kron(eye(SECTIONS), np.linalg.inv(inductance * step))
    per_c = np.linalg.inv(own)
    system = bmat([[per_c @ -np.diag(leak), per_c @ across.T], [-per_l @ across, None]]).tocsr()
    push = np.zeros(2 * nodes)
    push[0] = 1 / source_ohm
    push = np.concatenate([per_c @ push, np.zeros(2 * SECTIONS)])

    def slope(time, state):
        edge = (1 - np.cos(np.pi * np.clip(time / RAMP_S, 0, 1))) / 2
        return system @ state + push * edge

    found = solve_ivp(
        slope, (0, times_s[-1]), np.zeros(len(push)), "DOP853", times_s, rtol=1e-6, atol=1e-8
    )
    return found.y[2 * nodes - 2], found.y[2 * nodes - 1]


@pytest.mark.parametrize("kind", MODES)
@pytest.mark.parametrize(
    ("source_ohm", "load_farad", "load_siemens"), [(15.0, 4e-12, 0.0), (15.0, 0.0, 1 / 75)]
)
def test_two_mode_runs_are_the_ladder_of_both_lines(kind, source_ohm, load_farad, load_siemens):
    time_s, aggressor, victim = by_modes(kind, source_ohm, load_farad, load_siemens)
    times = np.linspace(0.05e-9, 5e-9, 150)
    expected = by_ladder(kind, source_ohm, load_farad, load_siemens, times)
    # The ladder rings behind the aggressor's edge; the noise itself is a few times better.
    for level, truth, limit in zip((aggressor, victim), expected, (5e-3, 3e-3), strict=True):
        np.testing.assert_allclose(np.interp(times, time_s, level), truth, atol=limit)
    assert np.abs(expected[1]).max() > 0.02  # there is something to agree about


def test_the_far_end_of_matched_surface_lines_stays_within_its_bound_and_near_it():
    (even, e_even), (odd, e_odd) = MODES["surface"]
    ohm = (even * odd) ** 0.5
    _, _, victim = by_modes("surface", ohm, load_siemens=1 / ohm)
    apart = float(closed.mode_delay_difference_s_per_m(e_even, e_odd)) * LENGTH_M
    bound = 0.5 * closed.far_end_share(RAMP_S * 0.5903, apart)  # half the swing is launched
    assert 0.8 * bound < np.abs(victim).max() < 1.05 * bound


def test_matched_striplines_have_no_far_end_noise():
    """Cm/C = Lm/L between planes, so the forward coupling is 0 (worked examples of the books)."""
    ohm = (MODES["buried"][0][0] * MODES["buried"][1][0]) ** 0.5
    _, _, victim = by_modes("buried", ohm, load_siemens=1 / ohm)
    assert np.abs(victim).max() < 1e-9


def test_nets_that_differ_in_more_than_their_lines_are_refused():
    with pytest.raises(ValueError, match="more than their lines"):
        coupled_rows(
            point_to_point([0.1]), point_to_point([0.2]), drive_of([[50.0]], ramp_s=1e-9),
            duration_s=1e-9,
        )  # fmt: skip
