"""Measured transfers in the place of a mechanism, from the table to the verdict."""

import shutil
from pathlib import Path

import numpy as np
import pytest
from build import bench_of, board, clock, driver, nets_of, receiver, setting

from edgeplan import plan, transfers, verdicts
from edgeplan.board import MeasuredTransfer, Transfer
from edgeplan.candidates import list_drawn
from edgeplan.choice import remedies
from edgeplan.emission import cable as cable_part
from edgeplan.evaluate import evaluate
from edgeplan.net_fields import fields_per_volt
from edgeplan.nets import build, resolve
from edgeplan.physics.floor_reflection import near_field_factor, site_factor
from edgeplan.radiated import radiation_of
from edgeplan.readers import read_board
from edgeplan.windows import solve

STARTER = Path(__file__).parents[1] / "examples" / "starter"
FLAT = ((30e6, -40.0), (1e9, -40.0))
CABLE = [{"name": "mains", "length_m": 1.5, "attenuation_db": 30.0}]


def measured(replaces="cable", rows=FLAT, **changes):
    """State a transfer of -40 dB(1/m) at 3 m."""
    plain = {"file": "scan.csv", "replaces": replaces, "distance_m": 3.0, "source": "own chamber"}
    return MeasuredTransfer(stated=Transfer(**plain | changes), rows=rows)


def the_board(*found, **changes):
    """Put a 50 MHz clock of 1 mm into an open end behind 50 ohm; some transfers are measured."""
    plain = {
        "driver": [driver(setting(ohm=50.0, edge_s=1.2e-9))],
        "receiver": [receiver()],
        "cable": CABLE,
        "facts": {"enclosure_attenuation_db": 100.0},
    }
    made = board(clock(length_m=0.001, **changes.pop("net", {})), **plain | changes)
    return made.model_copy(update={"transfers": found})


def judge(b):
    nets = nets_of(b)
    return radiation_of(b).judge(nets, list_drawn(nets), 0.0)


def passive_of(b):
    return radiation_of(b).passive(nets_of(b))


def test_a_flat_transfer_gives_the_level_worked_out_by_hand():
    """An open end of no length has the source's own voltage at its port.

    Peak 2 x 3.3 V/pi = 2.101 V at 50 MHz, of which an edge of 1.2 ns (10-90 %, 1.5 ns whole)
    leaves sinc(0.075) = 0.9908: 1.472 V rms, 123.4 dBuV. Less 40 dB(1/m): 83.4 dBuV/m. No
    site, enclosure or filter is taken again.
    """
    found = judge(the_board(measured()))
    assert found.extra["frequency_hz"][0, 0] == 50e6
    assert found.value[0, 0] == pytest.approx(83.36, abs=0.02)
    assert found.margin[0, 0] == pytest.approx(40.0 - 6.0 - 83.36, abs=0.02)


def test_the_stated_error_is_that_of_the_part_it_stands_for():
    found = judge(the_board(measured(error_db=2.0)))
    assert found.error_high[0, 0] == pytest.approx(2.0, abs=1e-6)
    assert judge(the_board()).error_high[0, 0] != pytest.approx(2.0, abs=0.1)


@pytest.mark.parametrize("part", ["trace", "cable"])
def test_six_decibels_more_in_the_table_are_six_more_in_that_part_alone(part):
    louder = tuple((f, level + 6.0) for f, level in FLAT)
    before, after = (passive_of(the_board(measured(part, rows))) for rows in (FLAT, louder))
    other = {"trace": "cable_expected", "cable": "trace"}[part]
    own = {"trace": "trace", "cable": "cable_expected"}[part]
    np.testing.assert_allclose(20 * np.log10(getattr(after, own) / getattr(before, own)), 6.0)
    np.testing.assert_array_equal(getattr(after, other), getattr(before, other))
    if part == "cable":
        np.testing.assert_array_equal(after.cable_up_to, after.cable_expected)


def test_enclosure_and_filters_do_not_act_on_what_was_measured():
    shut = {"enclosure_attenuation_db": 0.0}
    bare = [CABLE[0] | {"attenuation_db": 0.0}]
    for part, name in (("trace", "trace"), ("cable", "cable_expected")):
        one = passive_of(the_board(measured(part)))
        other = passive_of(the_board(measured(part), facts=shut, cable=bare))
        np.testing.assert_array_equal(getattr(one, name), getattr(other, name))


def test_where_the_table_ends_the_net_is_open_and_asks_for_rows():
    found = judge(the_board(measured(rows=((30e6, -90.0), (500e6, -90.0)))))
    assert found.open[0, 0]
    assert "30 to 500 MHz" in found.because[0]
    assert found.missing[0].value == "rows from 30 to 1000 MHz"
    assert found.missing[0].of == "transfer scan.csv"


@pytest.mark.parametrize(
    "limits",
    [
        ["cispr32-class-b-3m"],
        ["cispr32-class-b-3m", "cispr32-class-b-10m"],
        ["cispr32-class-b-10m", "cispr32-class-b-3m"],
    ],
)
@pytest.mark.parametrize("distance_m", [10.0, 3.0])
def test_another_distance_is_never_converted(limits, distance_m):
    """A line at the transfer's own distance does not hide one at another."""
    found = judge(the_board(measured(distance_m=distance_m), emission={"limits": limits}))
    other = {f"cispr32-class-b-{d:g}m" for d in (3.0, 10.0) if d != distance_m} & {*limits}
    assert found.open[0, 0] == bool(other)
    if other:
        wanted_m = 13.0 - distance_m
        assert f"measured at {distance_m:g} m" in found.because[0]
        assert found.missing[0].value == f"measurement at {wanted_m:g} m"


def test_a_transfer_serves_the_nets_it_names_and_the_last_one_wins():
    first, last = measured(nets=["CL*"]), measured(nets=["*K"])
    assert transfers.of_net(the_board(first, last), "CLK", "cable") is last
    assert transfers.of_net(the_board(first, last), "CLX", "cable") is first
    assert transfers.of_net(the_board(first, last), "CLK", "trace") is None
    assert transfers.of_net(the_board(first, last), "D0", "cable") is None


def test_measured_cables_leave_nothing_undeclared():
    quiet = tuple((f, -90.0) for f, _ in FLAT)
    b = the_board(measured(rows=quiet), cable=None)
    assert not any("filter" in note or "cables:" in note for note in radiation_of(b).notes)
    assert judge(b).decided[0, 0]


def test_an_antenna_factor_is_added_to_receiver_volts():
    """-52 dB at the receiver and 12 dB(1/m) of antenna are -40 dB(1/m)."""
    volts = measured(rows=tuple((f, -52.0) for f, _ in FLAT))
    both = volts.model_copy(update={"antenna_factor": ((20e6, 12.0), (2e9, 12.0))})
    assert judge(the_board(both)).value[0, 0] == pytest.approx(83.36, abs=0.02)


@pytest.mark.parametrize(
    ("margin_db", "error_db", "borderline"),
    [
        (1.5, 2.0, True),
        (1.5, 1.0, False),
        (-1.5, 2.0, True),
        (-1.5, 1.0, False),
    ],
)
def test_the_stated_error_decides_what_is_borderline(margin_db, error_db, borderline):
    level = -40.0 + 40.0 - 6.0 - 83.36 - margin_db
    rows = tuple((f, level) for f, _ in FLAT)
    b = the_board(measured(rows=rows, error_db=error_db))
    nets, bench = nets_of(b), bench_of(b)
    listed = list_drawn(nets)
    (window,) = solve(nets, listed, bench)
    found = evaluate(nets, listed, bench)
    emission = next(t for t in found.tables if t.check == "emission")
    assert emission.margin[0, 0] == pytest.approx(margin_db, abs=0.05)
    judged = verdicts.judge(found, 0, 0, window, can_pass=True)
    assert judged.verdict == ("inside" if margin_db > 0 else "too fast")
    assert judged.borderline == borderline


def model_tables(folder):
    """Work out field over node voltage of every net by the model, at the antenna. [dB(1/m)]"""
    read = read_board(folder)
    facts, _ = resolve(read)
    radiation = radiation_of(read)
    frequency = np.geomspace(29e6, 1.02e9, 700)
    for f in facts:
        nets = build([f], read)
        cables = tuple(
            cable_part.Cable(
                length_m=c.length_m,
                attenuation_db=cable_part.filter_credit_db(
                    cable_part.table_at(np.clip(frequency, 30e6, 1e9), c.series_impedance_ohm)
                ),
            )
            for c in radiation.cables
        )
        trace, up_to = fields_per_volt(read, cables, nets, frequency[None])
        site = site_factor(frequency, 3.0) / 3.0
        expected = 10 ** (cable_part.expected_offset_db(frequency, len(cables)) / 20)
        yield f.net.net, "trace", frequency, trace[0] * near_field_factor(frequency, 3.0) * site
        yield f.net.net, "cable", frequency, up_to[0] * expected * site


def with_tables(folder, more_db=0.0):
    """Add the model's own transfers to a board, as somebody would who measured them."""
    blocks = []
    for net, part, frequency, ratio in list(model_tables(folder)):
        name = f"{net}_{part}.csv"
        rows = [
            f"{f:.6e},{20 * np.log10(r) + more_db * (part == 'cable'):.6f}"
            for f, r in zip(frequency, ratio, strict=True)
        ]
        text = "\n".join(["frequency_hz,transfer_db_per_m", *rows])
        (folder / name).write_text(f"{text}\n", encoding="utf-8")
        blocks.append(
            f'[[transfer]]\nfile = "{name}"\nreplaces = "{part}"\nnets = ["{net}"]\n'
            f'distance = "3 m"\nerror = "2 dB"\nsource = "worked out"\n'
        )
    toml = folder / "board.toml"
    toml.write_text(toml.read_text(encoding="utf-8") + "\n" + "\n".join(blocks), encoding="utf-8")
    return folder


def emission_of(net):
    return next(c for c in net.checks if c.check == "emission" and c.candidate == net.candidate_now)


@pytest.fixture(scope="module")
def runs(tmp_path_factory):
    """Run the starter board by its models, by the same as measured, and 6 dB louder."""
    found = {}
    for name, more_db in (("model", None), ("measured", 0.0), ("louder", 6.0)):
        folder = tmp_path_factory.mktemp(name) / "board"
        shutil.copytree(STARTER, folder)
        if more_db is not None:
            with_tables(folder, more_db)
        found[name] = plan.plan(folder)
    return found


def test_a_transfer_worked_out_by_the_model_gives_the_models_verdicts(runs):
    model, own = runs["model"], runs["measured"]
    assert len(model.nets) == len(own.nets) > 4
    for one, other in zip(model.nets, own.nets, strict=True):
        assert (one.net, one.verdict, one.proposal_text) == (
            other.net,
            other.verdict,
            other.proposal_text,
        )
        a, b = emission_of(one), emission_of(other)
        assert a.margin == pytest.approx(b.margin, abs=0.1)


def test_six_decibels_in_the_cables_table_are_six_in_its_part(runs):
    for one, other in zip(runs["measured"].nets, runs["louder"].nets, strict=True):
        a, b = emission_of(one), emission_of(other)
        if a.frequency_hz == b.frequency_hz:
            levels = [{p.mechanism: p.expected_dbuv_per_m for p in c.parts} for c in (a, b)]
            assert levels[1]["cable"] - levels[0]["cable"] == pytest.approx(6.0, abs=1e-6)
            assert levels[1]["trace"] == pytest.approx(levels[0]["trace"], abs=1e-6)


def test_the_record_names_the_transfer_its_error_its_provenance_and_its_hash(runs):
    own = runs["measured"]
    assert {m.model for m in own.models} == {"measured transfer"}
    assert all("measured: worked out" in m.source and m.error_db.high == 2.0 for m in own.models)
    check = emission_of(own.nets[0])
    assert {p.model for p in check.parts} == {"measured transfer"}
    assert {p.error_db.high for p in check.parts} == {2.0}
    assert check.error.high == pytest.approx(2.0)
    assert "measured" in check.provenance
    assert {"LAMP_CLK_cable.csv", "LAMP_CLK_trace.csv"} <= {i.path for i in own.inputs}


def test_a_remedy_asks_less_of_the_transfer_as_filters_are_in_it():
    def listed(level_db):
        b = the_board(measured(rows=tuple((f, level_db) for f, _ in FLAT)))
        nets = nets_of(b)
        return nets, list_drawn(nets), bench_of(b)

    (found,) = remedies.cable_filter(*listed(-20.0))
    assert "dB less in the measured transfer of its cables" in found.text
    for less_db, passes in ((found.amount, True), (found.amount - 0.2, False)):
        assert evaluate(*listed(-20.0 - less_db)).passes[0, 0] == passes
