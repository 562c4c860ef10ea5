"""Open drain: the pull-up between the bus's rise time and the driver's current."""

import csv
from pathlib import Path

import pytest
from build import board, checks_of, driver, exactly, interface, net, receiver, setting

ROWS = Path(__file__).parents[1] / "reference" / "i2c_pull_up.csv"


def modes():
    lines = ROWS.read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def bus(ohm, rise_s=300e-9, farad=400e-12, supply_v=3.3, sink_a=3e-3, **changes):
    """Judge a bus of short lines with one pull-up."""
    plain = {"pull_up": "R1", "pull_up_ohm": ohm, "bus_capacitance_f": farad}
    limit = {"time": rise_s, "levels": "30-70"} if rise_s else None
    one = interface(
        "open-drain", supply_v=exactly(supply_v), sink_current_a=sink_a, output_low_v=0.4
    )
    return checks_of(
        board(
            net(length_m=0.01, **plain | changes),
            interface=[one],
            driver=[driver(setting(ohm=20.0, edge_s=5e-9))],
            receiver=[receiver(longest_transition=limit)],
            level=[{"name": "plain", "vil_v": 0.3 * supply_v, "vih_v": 0.7 * supply_v}],
        )
    )


@pytest.mark.parametrize("row", modes(), ids=lambda row: row["mode"])
def test_the_published_largest_pull_up_is_where_the_rise_just_holds(row):
    # UM10204, 7.1: t/(0.8473 C), the resistor without tolerance.
    ohm = float(row["highest_ohm"])
    found = bus(ohm, float(row["rise_ns"]) * 1e-9, float(row["bus_pf"]) * 1e-12)["rise by pull-up"]
    assert found.share[0, 0] == pytest.approx(0.0, abs=1e-3)


@pytest.mark.parametrize("row", modes(), ids=lambda row: row["mode"])
def test_the_published_smallest_pull_up_is_where_the_current_just_holds(row):
    ohm = float(row["lowest_ohm"])
    found = bus(ohm, supply_v=float(row["supply_v"]), sink_a=float(row["sink_ma"]) * 1e-3)
    assert found["sink current"].share[0, 0] == pytest.approx(0.0, abs=1e-3)


def test_fast_mode_at_400_pf_has_no_pull_up_at_all():
    # Largest 885 ohm, smallest 967 ohm: published, and empty.
    for ohm in (470, 680, 820, 884, 926, 968, 1000, 1500):
        found = bus(float(ohm))
        rise, sink = found["rise by pull-up"], found["sink current"]
        assert rise.fails[0, 0] or sink.fails[0, 0], ohm


def test_rise_wants_a_faster_and_current_a_slower_edge():
    found = bus(2000.0)
    assert (found["rise by pull-up"].wants, found["sink current"].wants) == ("faster", "slower")


def test_the_pull_up_of_each_candidate_counts():
    b = board(
        net(length_m=0.01, pull_up="R1", pull_up_ohm=4700.0, bus_capacitance_f=180e-12),
        interface=[interface("open-drain")],
        receiver=[receiver(longest_transition={"time": 300e-9, "levels": "30-70"})],
        resistors={"series": "E12"},
    )
    found = checks_of(b, drawn=False)["rise by pull-up"]
    # 0.8473 x 4.7 kohm x 180 pF; to be inside, 300 ns/(0.8473 x 180 pF x 1.05) = 1873 ohm or less.
    assert found.value[0, 0] == pytest.approx(0.8473 * 4700 * 180e-12 * 1.05, rel=1e-4)
    assert (~found.fails[0]).sum() == sum(
        ohm <= 1873 for ohm in (470, 560, 680, 820, 1000, 1200, 1500, 1800, 2200)
    )


def test_receivers_load_the_bus_where_no_bus_capacitance_is_stated():
    both = {"receiver": ("in", "in"), "receiver_pin": ("U2.1", "U3.1")}
    b = board(
        net(length_m=0.01, pull_up="R1", pull_up_ohm=1000.0, **both),
        interface=[interface("open-drain")],
        receiver=[
            receiver(capacitance_f=10e-12, longest_transition={"time": 300e-9, "levels": "30-70"})
        ],
    )
    found = checks_of(b)["rise by pull-up"]
    assert found.value[0, 0] == pytest.approx(0.8473 * 1000 * 20e-12, rel=1e-4)


def test_a_bus_without_a_pull_up_or_a_longest_transition_is_open_and_says_so():
    no_pull_up = bus(None)["rise by pull-up"]
    assert no_pull_up.open[0, 0]
    assert (no_pull_up.missing[0].value, no_pull_up.missing[0].of) == ("pull_up_ohm", "net N1")
    no_limit = bus(1000.0, rise_s=None)["rise by pull-up"]
    assert no_limit.open[0, 0]
    assert no_limit.missing[0].of == "receiver in"


def test_a_current_is_judged_where_one_is_stated():
    assert not bus(1000.0, sink_a=None)["sink current"].applies[0]


def test_the_falling_edge_is_the_drivers_own():
    # 20 ohm into 400 pF: 30 to 70 % of one pole of 8 ns, under an edge of 5 ns.
    found = bus(2000.0)["transition"]
    assert found.value[0, 0] == pytest.approx(0.8473 * 8e-9, rel=0.1)
