"""Logic levels against data sheets that quote the standards."""

import csv
from pathlib import Path

import numpy as np
import pytest

from edgeplan import levels

TABLE = Path(__file__).parents[1] / "reference" / "jedec_levels.csv"


def printed_rows():
    lines = TABLE.read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


@pytest.mark.parametrize(
    "row", printed_rows(), ids=lambda row: f"{row['family']}-{row['supply_v']}"
)
def test_thresholds_are_those_data_sheets_print(row):
    vil_v, vih_v = levels.family(row["family"]).thresholds_v(float(row["supply_v"]))
    assert vil_v == pytest.approx(float(row["vil_v"]), abs=1e-9)
    assert vih_v == pytest.approx(float(row["vih_v"]), abs=1e-9)


def test_thresholds_take_many_supplies_at_once():
    vil_v, vih_v = levels.family("lvttl-3v3").thresholds_v(np.full((2, 3), 3.3))
    assert vil_v.shape == vih_v.shape == (2, 3)


def test_a_stated_reference_moves_both_thresholds():
    vil_v, vih_v = levels.family("sstl-2").thresholds_v(2.5, reference_v=1.13)
    assert (vil_v, vih_v) == (pytest.approx(0.98), pytest.approx(1.28))


def test_ac_thresholds_lie_outside_the_dc_ones_and_are_unverified():
    sstl = levels.family("sstl-15")
    low, high = sstl.ac_thresholds_v(1.5)
    vil_v, vih_v = sstl.thresholds_v(1.5)
    assert low < vil_v < vih_v < high
    assert "ac thresholds" in sstl.unverified
    assert np.isnan(levels.family("lvttl-3v3").ac_thresholds_v(3.3)).all()


def test_a_family_judged_by_an_eye_mask_has_no_thresholds():
    assert np.isnan(levels.family("pod-12").thresholds_v(1.2)).all()


@pytest.mark.parametrize(
    ("family_id", "supply_v", "vol_v", "voh_v"),
    [
        ("lvttl-3v3", 3.3, 0.4, 2.4),
        ("lvcmos-3v3", 3.0, 0.2, 2.8),
        ("lvcmos-1v8", 1.65, 0.45, 1.2),
        ("pci-3v3", 3.3, 0.33, 2.97),
        ("sd-3v3", 3.3, 0.4125, 2.475),
        ("hstl-15", 1.5, 0.4, 1.1),
    ],
)
def test_output_levels_are_those_of_the_standard(family_id, supply_v, vol_v, voh_v):
    low, high = levels.family(family_id).outputs_v(supply_v)
    assert (low, high) == (pytest.approx(vol_v), pytest.approx(voh_v))


def test_output_current_is_kept_with_the_level():
    assert levels.family("i2c").output_low.current_a == pytest.approx(3e-3)


def test_only_the_open_drain_family_has_no_high_output():
    assert [i for i in levels.ids() if levels.family(i).open_drain] == ["i2c"]
    assert np.isnan(levels.family("i2c").outputs_v(3.3)[1])


def test_families_from_memory_are_not_verified():
    unverified = {i for i in levels.ids() if not levels.family(i).verified}
    assert unverified == {"lvcmos-1v0", "cmos-5v-hc", "ttl-5v-hct", "pod-12"}


def test_every_family_has_ordered_supplies_and_thresholds():
    for family_id in levels.ids():
        found = levels.family(family_id)
        assert found.supply_v[0] < found.supply_v[1] < found.supply_v[2]
        vil_v, vih_v = found.thresholds_v(found.supply_v[1])
        assert np.isnan(vil_v) or 0 < vil_v < vih_v < found.supply_v[1]
        assert found.takes_supply(found.supply_v).all()


@pytest.mark.parametrize(
    ("text", "meant"), [("lvttl", "lvttl-3v3"), ("LVCMOS-18", "lvcmos-1v8"), ("i2s", "i2c")]
)
def test_an_unknown_family_is_answered_with_those_spelt_alike(text, meant):
    with pytest.raises(ValueError, match=meant):
        levels.family(text)


def test_a_name_like_no_other_is_answered_with_all_families():
    with pytest.raises(ValueError, match=r"there are lvttl-3v3, .*pod-12"):
        levels.family("quorum")


def test_a_users_own_thresholds_must_be_in_order():
    with pytest.raises(ValueError, match=r"sensor.*not below"):
        levels.stated("sensor", 1.2, 0.5)
