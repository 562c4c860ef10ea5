"""Measured levels over frequency: what is read, and the place of what is wrong."""

import numpy as np
import pytest

from edgeplan.readers import transfer


def read(text, file="cable.csv", **choices):
    problems = []
    return transfer.read(text, file, problems, **choices), problems


def told(text, file="cable.csv", **choices):
    found, problems = read(text, file, **choices)
    assert found is None
    return [(p.row, p.column, p.message) for p in problems]


def steps(first_mhz, last_mhz, level="-40"):
    """Rows a quarter of an octave apart."""
    count = int(np.ceil(4 * np.log2(last_mhz / first_mhz))) + 1
    return "".join(f"{f:.4f},{level}\n" for f in np.geomspace(first_mhz, last_mhz, count))


def test_a_table_of_field_over_voltage_is_read_in_si():
    found, problems = read("frequency_mhz,transfer_db_per_m\n" + steps(30, 1000))
    assert problems == []
    assert found.rows[0] == (30e6, -40.0)
    assert found.rows[-1] == (1000e6, -40.0)
    assert not found.needs_antenna_factor


def test_a_table_of_receiver_over_port_needs_an_antenna_factor():
    found, _ = read("transfer_db;frequency_ghz\n-40,5;0,3\n-41;0,35\n")
    assert found.rows == ((300e6, -40.5), (350e6, -41.0))
    assert found.needs_antenna_factor


def test_rows_that_do_not_rise_are_named():
    text = "frequency_mhz,transfer_db\n100,-40\n110,-41\n105,-40\n105,-39\n"
    assert [row[:2] for row in told(text)] == [(4, 1), (5, 1)]


def test_a_gap_inside_the_judged_range_is_named_and_outside_it_is_not():
    text = "frequency_mhz,transfer_db\n1,0\n20,0\n30,0\n37,0\n60,0\n70,0\n"
    assert told(text) == [(6, 1, "nothing between 37 and 60 MHz")]
    assert [row[0] for row in told(text, judged_hz=(1e6, 1e9))] == [3, 4, 6]
    found, problems = read(text, judged_hz=(30e6, 36e6))
    assert found is not None
    assert problems == []


def test_a_third_of_an_octave_is_no_gap():
    rows = "".join(f"{100 * 2 ** (n / 3):.6f},0\n" for n in range(6))
    assert read("frequency_mhz,transfer_db\n" + rows)[1] == []


def test_a_negative_attenuation_is_named_with_what_to_write():
    text = "frequency_mhz,attenuation_db\n100,3\n110,-2.5\n"
    _, problems = read(text, quantity="attenuation")
    assert [(p.row, p.column) for p in problems] == [(3, 5)]
    assert "write 2.5" in problems[0].hint
    assert read(text.replace("attenuation", "transfer"))[0] is not None


def test_a_column_of_another_quantity_is_refused():
    assert told("frequency_mhz,attenuation_db\n100,3\n110,3\n")[0][:2] == (1, 15)


@pytest.mark.parametrize("header", ["transfer_db", "frequency_mhz", "frequency_mhz,frequency_hz"])
def test_missing_columns_are_told(header):
    assert told(header + "\n1,2\n") != []


def test_cells_that_are_empty_or_no_numbers_are_named():
    text = "frequency_mhz,transfer_db\n100,\nx,-40\n110,-41 dB\n"
    assert [row[:2] for row in told(text)] == [(2, 5), (3, 1), (4, 5)]


@pytest.mark.parametrize("cells", ["0,-40", "-5,-40", "1e9,-40", "110,900", "1e400,-40"])
def test_values_nobody_measures_are_refused(cells):
    assert told(f"frequency_mhz,transfer_db\n{cells}\n120,-40\n") != []


def test_one_row_is_no_table():
    assert told("frequency_mhz,transfer_db\n100,-40\n")[0][:2] == (1, 1)


def test_a_two_port_is_read_by_its_ending_as_a_voltage_ratio():
    text = "# MHz S RI R 50\n100 0 0 0.1 0 0.1 0 0 0\n120 1 0 0.1 0 0.1 0 0 0\n"
    for name in ("path.s2p", "PATH.S2P", "path.ts"):
        found, problems = read(text, name)
        assert problems == []
        # an open port carries twice the voltage of a matched one
        assert found.rows[0] == pytest.approx((100e6, -20.0))
        assert found.rows[1] == pytest.approx((120e6, -26.0206), rel=1e-5)
        assert found.needs_antenna_factor


def test_a_first_row_at_zero_hertz_of_a_two_port_is_left_out():
    text = "# MHz S RI R 50\n0 0 0 1 0 1 0 0 0\n100 0 0 0.1 0 0.1 0 0 0\n120 0 0 0.1 0 0.1 0 0 0\n"
    found, _ = read(text, "path.s2p")
    assert [row[0] for row in found.rows] == [100e6, 120e6]


def test_a_two_port_may_state_an_attenuation_but_not_amplify():
    text = "# MHz S RI R 50\n100 0 0 0.1 0 0.1 0 0 0\n120 0 0 {} 0 0.1 0 0 0\n"
    found, _ = read(text.format("0.5"), "filter.s2p", quantity="attenuation")
    assert found.rows[1][1] == pytest.approx(6.0206, rel=1e-5)
    assert told(text.format("2"), "filter.s2p", quantity="attenuation")[0][0] == 3


def test_a_two_port_that_lets_nothing_through_is_named():
    text = "# MHz S RI R 50\n100 0 0 0 0 0 0 0 0\n120 -1 0 0.1 0 0.1 0 0 0\n"
    assert [row[0] for row in told(text, "path.s2p")] == [2, 3]
