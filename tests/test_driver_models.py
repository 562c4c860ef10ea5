"""Drivers from their tables: against resistors by hand and a circuit that scipy integrates."""

from math import isnan

import numpy as np
import pytest
from driver_files import COLUMNS, CORNERS, REGULAR, file_text, model_text
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from edgeplan.driver_models import driver_values, setting_fields
from edgeplan.physics.driver_edges import read_transition
from edgeplan.readers import ibis

IMPEDANCE_OHM = 50.0


def values_of(text, name="full", component=0, impedance_ohm=IMPEDANCE_OHM):
    reading = ibis.read(text.encode(), "qx1.ibs")
    assert reading.errors == []
    file = reading.models
    part = file.components[component] if component is not None else None
    return driver_values(file, file.models[name], part, impedance_ohm)


@pytest.fixture(scope="module")
def transistor():
    return values_of(file_text(model_text("dq"), pins=["1 DQ0 dq"]), "dq")


# 3.3 V over 132, 110 and 165 mA; the clamps conduct outside the supplies only, so they add nothing;
# package 60 and 50 mOhm of the two pins: middle 55, 40 to 60 with the component's own range.
def test_resistors_of_a_regular_file_come_out_with_their_package():
    values = values_of(REGULAR)
    assert tuple(values.up.resistance_ohm) == pytest.approx((25.055, 30.06, 20.04), abs=1e-3)
    assert tuple(values.down.resistance_ohm) == pytest.approx((20.055, 25.06, 16.04), abs=0.02)


def test_the_pad_is_the_die_and_the_package_of_its_pins():
    # C_comp 5/4/6 pF; the first pin says 0.7 pF, the second leaves it to the package, 0.5/0.4/0.6
    pad = values_of(REGULAR).capacitance_f
    assert tuple(pad) == pytest.approx((5.6e-12, 4.4e-12, 6.7e-12))


def test_without_a_component_there_is_no_package_and_a_note_says_so():
    values = values_of(REGULAR, component=None)
    assert values.up.resistance_ohm.typ == pytest.approx(25.0)
    assert values.capacitance_f.typ == 5e-12
    assert "name the component" in values.notes[-1]


def test_slow_is_the_minimum_column_and_fast_the_maximum():
    fields = setting_fields(values_of(REGULAR))
    up = fields["resistance_up_ohm"]
    assert (up.min, up.typ, up.max) == pytest.approx((20.04, 25.055, 30.06), abs=1e-3)


# A straight ramp of 1 ns into 50 ohm: 0.8 ns between 10 and 90 %, less what the pad adds.
def test_an_edge_is_taken_from_the_waveform_and_its_pad_is_taken_off():
    side = values_of(REGULAR).up
    assert side.source == "waveform, 50 ohm to 0 V"
    pole_s = 5e-12 * 25 * 50 / 75
    by_squares = np.sqrt(0.8e-9**2 - (2.197 * pole_s) ** 2)  # variances add (common practice)
    assert side.edge_s.typ == pytest.approx(by_squares, rel=0.02)


def test_a_typical_column_alone_states_no_corner():
    text = REGULAR
    for old, new in (
        (" 6.6   330mA   264mA   412mA", " 6.6 330mA NA NA"),
        (" 0.0    0mA     0mA     0mA\n 6.6   330", " 0.0 0 NA NA\n 6.6   330"),
        ("-3.3  -165mA  -132mA  -206mA", "-3.3 -165mA NA NA"),
    ):
        text = text.replace(old, new)
    text = text.replace(" 0.0    0mA     0mA     0mA\n 6.6 330", " 0.0 0 NA NA\n 6.6 330")
    values = values_of(text)
    assert values.down.resistance_ohm.typ == pytest.approx(20.055, abs=0.02)
    assert isnan(values.down.resistance_ohm.min)
    fields = setting_fields(values)
    assert fields["resistance_down_ohm"].min is None
    assert fields["resistance_down_ohm"].max is None
    assert fields["resistance_up_ohm"].max is not None


@pytest.mark.parametrize("column", COLUMNS)
def test_a_transistor_is_read_within_two_percent_of_a_root_finder(transistor, column):
    corner = CORNERS[column]

    def excess_a(volt):
        return (volt - corner.supply_v) / IMPEDANCE_OHM + float(corner.transistor_a(volt))

    pin_v = brentq(excess_a, 0, corner.supply_v)
    expected = pin_v / ((corner.supply_v - pin_v) / IMPEDANCE_OHM)
    assert getattr(transistor.down.resistance_ohm, column) == pytest.approx(expected, rel=0.02)
    assert getattr(transistor.up.resistance_ohm, column) == pytest.approx(expected, rel=0.02)


def linear(corner, ohm, edge_s, load_ohm, load_f):
    """Source, resistance and pad as this program has them, into a load. (K,), (K,)"""
    ramp_s = edge_s / 0.590334
    farad = corner.pad_f + load_f

    def slope(t, v):
        source = corner.supply_v * 0.5 * (1 - np.cos(np.pi * min(max(t / ramp_s, 0), 1)))
        return ((source - v) / ohm - v / load_ohm) / farad

    end = 4 * ramp_s + 20 * farad * ohm * load_ohm / (ohm + load_ohm)
    time = np.linspace(0, end, 800)
    found = solve_ivp(slope, (0, end), [0.0], t_eval=time, rtol=1e-8, max_step=ramp_s / 50)
    return time, found.y[0]


def circuit(corner, load_ohm, load_f):
    """Read the transistors themselves into the same load. (K,), (K,)"""
    farad = corner.pad_f + load_f

    def slope(t, v):
        return -(corner.pad_a(v, t, rising=True) + v / load_ohm) / farad

    end = 4 * corner.handover_s + 20 * farad * load_ohm * corner.ohm / (load_ohm + corner.ohm)
    time = np.linspace(0, end, 800)
    found = solve_ivp(
        slope, (0, end), [0.0], t_eval=time, rtol=1e-8, max_step=corner.handover_s / 50
    )
    return time, found.y[0]


# What docs/models/driver_files.md states as the error of the linear driver.
@pytest.mark.parametrize("column", COLUMNS)
@pytest.mark.parametrize(
    ("load_ohm", "load_f", "level", "edge"),
    [
        (50.0, 0.0, 0.002, (-0.045, 0.005)),
        (35.0, 0.0, 0.035, (-0.07, -0.01)),
        (83.0, 0.0, 0.025, (-0.015, 0.03)),
        (150.0, 0.0, 0.025, (0.01, 0.06)),
        (50.0, 5e-12, 0.002, (-0.14, -0.05)),
    ],
)
def test_the_linear_driver_meets_the_circuit_it_was_taken_from(
    transistor, column, load_ohm, load_f, level, edge
):
    side = transistor.up
    corner = CORNERS[column]
    ohm, edge_s = getattr(side.resistance_ohm, column), getattr(side.edge_s, column)
    own = read_transition(*linear(corner, ohm, edge_s, load_ohm, load_f))
    real = read_transition(*circuit(corner, load_ohm, load_f))
    assert own.last_v == pytest.approx(real.last_v, rel=level)
    assert edge[0] < own.s_10_90 / real.s_10_90 - 1 < edge[1]


# The clamp's last rows are 500 mV and 10 mA apart, 50 ohm if they went on between the supplies.
def test_a_clamp_that_is_off_does_not_go_on_as_a_resistor():
    coarse = "[POWER Clamp]\n-1.0 60mA NA NA\n-0.5 10mA NA NA\n0 0 NA NA\n"
    start = REGULAR.index("[POWER Clamp]")
    text = REGULAR[:start] + coarse + REGULAR[REGULAR.index("[Ramp]") :]
    values = values_of(text)
    assert values.down.resistance_ohm.typ == pytest.approx(20.055)
    assert not any("a table ends" in note for note in values.notes)


def test_a_resistance_holds_at_its_own_impedance_only(transistor):
    text = file_text(model_text("dq"), pins=["1 DQ0 dq"])
    at_35 = values_of(text, "dq", impedance_ohm=35.0).up.resistance_ohm.typ
    at_150 = values_of(text, "dq", impedance_ohm=150.0).up.resistance_ohm.typ
    assert at_150 < transistor.up.resistance_ohm.typ < at_35


def notes_of(*pairs, text=REGULAR, **wanted):
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new, 1)
    return values_of(text, **wanted)


def without_waveforms(text):
    start, end = text.index("[Rising Waveform]"), text.index("[Model] in")
    return text[:start] + text[end:]


# 20 to 80 % of a straight ramp of 1 ns are 0.6 ns; 11 % more is beyond the ten allowed.
@pytest.mark.parametrize(("time", "distrusted"), [("0.65n", False), ("0.67n", True)])
def test_a_ramp_is_held_against_the_waveform(time, distrusted):
    values = notes_of(
        ("dV/dt_r  1.32/0.60n  1.12/0.61n  1.54/0.59n", f"dV/dt_r  1.32/{time} NA NA")
    )
    told = [n for n in values.notes if "distrusted" in n and "20 and 80 %" in n and "0.6 ns" in n]
    assert bool(told) == distrusted


# 60 % of 2.2 V are 1.32 V; 1.40 V is 6 % more.
@pytest.mark.parametrize(("volt", "distrusted"), [("1.37", False), ("1.40", True)])
def test_a_ramp_is_held_against_the_swing_of_its_load_line(volt, distrusted):
    values = notes_of(
        ("dV/dt_r  1.32/0.60n  1.12/0.61n  1.54/0.59n", f"dV/dt_r  {volt}/0.60n NA NA"),
        text=without_waveforms(REGULAR),
    )
    told = [n for n in values.notes if "distrusted" in n and "60 % of the load lines" in n]
    assert any("1.32 V" in n for n in told) == distrusted


def test_a_ramp_alone_states_the_edge_between_20_and_80():
    values = notes_of(("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 0"), text=without_waveforms(REGULAR))
    # a raised cosine takes 0.4097 of its time between 20 and 80 %, 0.5903 between 10 and 90 %
    assert values.up.source == "[Ramp], 50 ohm"
    assert values.up.edge_s.typ == pytest.approx(0.60e-9 * 0.590334 / 0.409666)


def test_a_ramp_with_the_wrong_swing_gives_both_readings_as_fast_and_slow():
    values = notes_of(
        ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 0"),
        ("1.32/0.60n  1.12/0.61n  1.54/0.59n", "1.32/0.60n  0.56/0.90n  0.8/0.40n"),
        text=without_waveforms(REGULAR),
    )
    scale = 0.590334 / 0.409666
    # slow column: 3.0 V, 30 ohm: 0.6 x 1.875 V at 0.56 V per 0.9 ns; fast: 0.4 ns as stated
    slow_s = 0.6 * 3.0 * 50 / (50 + 3.0 / 0.11 * 1.1) * 0.9e-9 / 0.56
    assert values.up.edge_s.min == pytest.approx(slow_s * scale, rel=0.05)
    assert values.up.edge_s.max == pytest.approx(0.4e-9 * scale)


@pytest.mark.parametrize("load", ["20", "500"])
def test_a_ramp_at_another_load_counts_with_a_note(load):
    values = notes_of(("R_load = 50", f"R_load = {load}"), text=without_waveforms(REGULAR))
    assert any(f"has R_load {load} ohm, the line 50 ohm" in note for note in values.notes)


def test_the_waveform_whose_fixture_is_nearest_to_the_line_counts():
    far = "[Rising Waveform]\nR_fixture = 500\nV_fixture = 0\n0 0 0 0\n3n 3 2.7 3.3\n9n 3 2.7 3.3\n"
    text = REGULAR.replace("[Rising Waveform]", f"{far}[Rising Waveform]", 1)
    assert values_of(text).up.source == "waveform, 50 ohm to 0 V"
    assert values_of(text, impedance_ohm=400.0).up.source == "waveform, 500 ohm to 0 V"


def test_a_waveform_to_the_rail_it_drives_to_gives_way_to_a_good_ramp():
    values = notes_of(("V_fixture = 0.0", "V_fixture = 3.3"))
    assert values.up.source == "[Ramp], 50 ohm"


def test_an_edge_that_the_pad_alone_would_show_is_unknown():
    # 20 pF on 16.7 ohm show 0.73 ns between 10 and 90 %; 1.2 times that is more than 0.8 ns
    values = notes_of(("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 20pF"))
    assert isnan(values.up.edge_s.typ)
    assert any("what the pad's capacitance does alone" in note for note in values.notes)


def test_a_model_without_capacitance_states_no_edge():
    values = notes_of(("C_comp  5.0pF  4.0pF  6.0pF", ""))
    assert isnan(values.up.edge_s.typ)
    assert setting_fields(values)["capacitance_f"] is None


def test_an_open_drain_drives_one_side_and_says_it_as_both():
    values = notes_of(("Model_type  I/O", "Model_type Open_drain"))
    assert values.up is None
    fields = setting_fields(values)
    assert fields["resistance_ohm"].typ == pytest.approx(20.055, abs=0.02)
    assert "resistance_up_ohm" not in fields


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("[Voltage Range]  3.3V  3.0V  3.6V", "[Voltage Range] 3.3 3.6 3.0", "rising order"),
        ("C_comp  5.0pF  4.0pF  6.0pF", "C_comp 30pF", "C_comp above 20 pF"),
        (" 0.0    0mA     0mA     0mA\n 6.6   330", " 0.0 9mA 9mA 9mA\n 6.6   330", "0 V, 0 A"),
        ("R_pkg  50m    40m    60m", "R_pkg  50 40 60", "R_pkg of component QX-1"),
        (" 6.6   330mA   264mA   412mA", " 0.2 10mA 8mA 12.5mA", "a table ends before"),
        (
            "1.0n  2.2  1.88 2.57\n9.0n  2.2",
            "1.0n 2.0 1.9 2.6\n9.0n 2.0",
            "its load line at 2.2",
        ),
        ("9.0n  2.2  1.88 2.57\n", "", "has not settled"),
        ("R_fixture = 50", "R_fixture = 50\nL_dut = 5nH", "behind R_dut, L_dut or C_dut"),
        ("R_fixture = 50", "R_fixture = 500", "has 500 ohm, the line 50 ohm"),
    ],
)
def test_what_is_strange_about_a_model_is_told(old, new, told):
    values = notes_of((old, new))
    assert any(told in note for note in values.notes), values.notes


def test_no_supply_at_all_leaves_a_driver_without_resistance():
    values = notes_of(("[Voltage Range]  3.3V  3.0V  3.6V", ""))
    assert isnan(values.up.resistance_ohm.typ)
    assert any("states a supply" in note for note in values.notes)
