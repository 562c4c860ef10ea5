"""Emission models against a general-purpose wire code: a few runs here, larger tables beside."""

import full_wave
import full_wave_models as models
import numpy as np
import pytest
from wire_boards import Trace, trace_over_ground
from wire_code import Solution, Wires, far_field

from edgeplan.physics import radiation


@pytest.fixture(scope="module")
def traces():
    """Table of traces over an infinite plane."""
    return models.read_table("trace")


def wave_height(table):
    """Wave number times height of each row."""
    return 2 * np.pi * table["frequency_hz"] / models.SPEED_M_PER_S * table["height_m"]


@pytest.fixture(scope="module")
def run_trace():
    """One trace of the table, run now at two frequencies."""
    trace = Trace(start_m=0.0, end_m=0.075, height_m=5e-3)
    place = {"length_m": 0.075, "height_m": 5e-3, "line_ohm": trace.line_ohm()}
    model = trace_over_ground(trace, per_height=3)
    rows = [
        row
        for frequency_hz in full_wave.cases.TRACE_HZ[[0, 7]]
        for row in full_wave.trace_points(model, place, float(frequency_hz))
    ]
    return {key: np.array([row[key] for row in rows]) for key in rows[0]}


def test_the_wire_code_radiates_as_a_short_dipole_does():
    # largest r E of a short dipole: (eta0 k / 4 pi) I l, Balanis sec. 4.2; 11 segments of 2 mm
    wires = Wires()
    points_m = np.zeros((12, 3))
    points_m[:, 2] = np.linspace(0, 0.022, 12)
    ports = wires.chain(points_m, 1e-5)
    solved = far_field(wires, 100e6, ports, (19, 4), floor=False)
    moment = 2e-3 * np.abs(solved.admittance_s[:, 5].sum())
    field_v = np.abs(solved.fields[5]).max()
    assert field_v == pytest.approx(float(radiation.short_wire_field(1e8, 1.0, moment)), rel=5e-3)


def test_terminations_follow_from_the_ports_admittances():
    # two ports as a voltage divider: 1 V behind 50 ohm into 1/50 S leaves half a volt
    solved = Solution(admittance_s=np.diag([1 / 50, 1 / 20]), fields=np.eye(2)[:, None, :])
    np.testing.assert_allclose(solved.field([1.0, 0.0], [50.0, 30.0]), [[0.5, 0.0]])


def test_a_trace_run_now_is_the_one_in_the_table(run_trace, traces):
    here = (traces["length_m"] == 0.075) & (traces["height_m"] == 5e-3)
    for row in range(run_trace["field_v"].size):
        same = here & np.isclose(traces["frequency_hz"], run_trace["frequency_hz"][row], rtol=1e-4)
        same &= traces["load"] == run_trace["load"][row]
        assert traces["field_v"][same] == pytest.approx([run_trace["field_v"][row]], rel=2e-3)


def test_a_trace_over_ground_is_within_a_decibel_of_the_wire_code(run_trace):
    excess_db = models.excess_db(models.over_plane_v(run_trace), run_trace["field_v"])
    assert np.abs(excess_db).max() < 1.0


def test_traces_low_over_ground_hold_half_a_decibel(traces):
    low = models.take(traces, wave_height(traces) < 0.2)
    excess_db = models.excess_db(models.over_plane_v(low), low["field_v"])
    assert excess_db.size == 975
    assert abs(excess_db.mean()) < 0.2
    assert excess_db.std() < 0.5
    assert np.abs(excess_db).max() < 2.0


@pytest.mark.parametrize("load", ["5 pF", "50 ohm", "1 kohm", "1 ohm", "matched"])
def test_no_kind_of_load_is_off_by_more_than_half_a_decibel_in_the_mean(traces, load):
    low = models.take(traces, (wave_height(traces) < 0.2) & (traces["load"] == load))
    excess_db = models.excess_db(models.over_plane_v(low), low["field_v"])
    assert abs(excess_db.mean()) < 0.5
    assert excess_db.std() < 0.5


def test_an_open_end_radiates_far_more_than_its_load_current_says(traces):
    # the field of the loop with the load's current alone: the trap of emission estimates
    rows = (traces["load"] == "5 pF") & (traces["frequency_hz"] == 30e6)
    table = models.take(traces, rows & (traces["height_m"] == 2e-3))
    current_a = 1 / np.abs(table["source_ohm"] + 1j * table["load_imag_ohm"])
    area_m2 = models.length_m(table) * table["height_m"]
    naive_v = radiation.small_loop_field(30e6, area_m2, current_a)
    assert models.excess_db(naive_v, table["field_v"]).max() < -15
