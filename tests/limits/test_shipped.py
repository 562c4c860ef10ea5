"""Shipped limit lines against the printed tables."""

import csv
from pathlib import Path

import numpy as np
import pytest

from edgeplan import limits

REFERENCE = Path(__file__).parents[1] / "reference"


def cispr_32_rows():
    lines = (REFERENCE / "cispr32_radiated.csv").read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


@pytest.mark.parametrize(
    ("table", "limit_id"),
    [
        ("fcc_15_109_class_b.csv", "fcc-15-109-class-b-3m"),
        ("fcc_15_109_class_a.csv", "fcc-15-109-class-a-10m"),
    ],
)
def test_fcc_lines_are_the_printed_tables(table, limit_id):
    path = REFERENCE / table
    frequency_hz, printed_uv_per_m = np.loadtxt(path, delimiter=",", skiprows=3).T
    limit = limits.line(limit_id)
    np.testing.assert_allclose(limit.field_v_per_m(frequency_hz), printed_uv_per_m * 1e-6)


@pytest.mark.parametrize("row", cispr_32_rows(), ids=lambda row: "-".join(row.values()))
def test_cispr_32_lines_are_the_printed_tables(row):
    frequency_hz = float(row["frequency_hz"])
    above = "-above-1ghz" if frequency_hz > 1e9 else ""
    limit = limits.line(f"cispr32-class-{row['class']}-{row['distance_m']}m{above}")
    level = limit.level_dbuv_per_m(frequency_hz, row["detector"])
    assert level == float(row["limit_dbuv_per_m"])
    assert limit.distance_m == float(row["distance_m"])


@pytest.mark.parametrize(
    ("uv_per_m", "dbuv_per_m"),
    [
        (90, 39.08),
        (100, 40.00),
        (150, 43.52),
        (200, 46.02),
        (210, 46.44),
        (300, 49.54),
        (500, 53.98),
    ],
)
def test_microvolts_per_metre_are_these_decibels(uv_per_m, dbuv_per_m):
    """Conversions as laboratories print them beside 47 CFR 15.109."""
    levels = [
        level
        for limit_id in ("fcc-15-109-class-a-10m", "fcc-15-109-class-b-3m")
        for level in limits.line(limit_id).level_dbuv_per_m([50e6, 100e6, 500e6, 970e6])
    ]
    closest = min(levels, key=lambda level: abs(level - dbuv_per_m))
    assert closest == pytest.approx(20 * np.log10(uv_per_m), abs=1e-12)
    assert round(float(closest), 2) == dbuv_per_m


@pytest.mark.parametrize(
    ("limit_id", "frequency_hz", "tighter"),
    [
        ("fcc-15-109-class-b-3m", 88e6, 40.0),
        ("fcc-15-109-class-b-3m", 216e6, 43.52),
        ("fcc-15-109-class-b-3m", 960e6, 46.02),
        ("cispr32-class-b-3m", 230e6, 40.0),
        ("cispr32-class-a-10m", 230e6, 40.0),
    ],
)
def test_at_a_band_edge_the_tighter_limit_applies(limit_id, frequency_hz, tighter):
    """47 CFR 15.109(c) and the note to the CISPR tables."""
    level = limits.line(limit_id).level_dbuv_per_m(frequency_hz, "quasi-peak")
    assert level == pytest.approx(tighter, abs=5e-3)


def test_a_frequency_summed_from_parts_still_meets_the_band_edge():
    frequency_hz = sum([23e6 / 3] * 30)
    assert frequency_hz == pytest.approx(230e6)
    assert limits.line("cispr32-class-b-3m").level_dbuv_per_m(frequency_hz) == 40.0


def test_outside_its_bands_a_line_says_nothing():
    limit = limits.line("cispr32-class-b-3m")
    assert np.isnan(limit.level_dbuv_per_m([29e6, 1.1e9], "quasi-peak")).all()
    assert np.isnan(limit.level_dbuv_per_m([100e6], "average")).all()


def test_levels_keep_the_shape_of_the_frequencies():
    level = limits.line("fcc-15-109-class-b-3m").level_dbuv_per_m(np.full((2, 3, 4), 1e8))
    assert level.shape == (2, 3, 4)


def test_re102_rises_by_20_db_per_decade_from_100_mhz():
    limit = limits.line("mil-std-461g-re102-ground-fixed-1m")
    level = limit.level_dbuv_per_m([50e6, 100e6, 100e6 * 10**0.5, 1e9, 10e9], "peak")
    np.testing.assert_allclose(level, [44, 44, 54, 64, 84], atol=0.02)


def test_bandwidth_belongs_to_the_band():
    limit = limits.line("mil-std-461g-re102-ground-fixed-1m")
    np.testing.assert_array_equal(limit.bandwidth_hz([3e6, 50e6, 2e9], "peak"), [1e4, 1e5, 1e6])


def test_where_radio_services_overlap_the_lower_limit_holds():
    """At 70 MHz television asks for 52 dBuV/m peak, land mobile for 59."""
    limit = limits.line("cispr25-alse-class-1-1m")
    assert limit.level_dbuv_per_m(70e6, "peak") == 52.0
    assert limit.level_dbuv_per_m(70e6, "quasi-peak") == 46.0
    assert np.isnan(limit.level_dbuv_per_m(60e6, "quasi-peak"))


@pytest.mark.parametrize(("frequency_hz", "step_db"), [(0.2e6, 10), (1e6, 8), (100e6, 6)])
def test_each_cispr_25_class_is_a_step_lower(frequency_hz, step_db):
    levels = [
        limits.line(f"cispr25-alse-class-{n}-1m").level_dbuv_per_m(frequency_hz, "average")
        for n in range(1, 6)
    ]
    np.testing.assert_array_equal(np.diff(levels), -step_db)


def test_lines_from_memory_are_not_verified():
    assert not limits.line("cispr32-class-a-3m-above-1ghz").verified
    assert not limits.line("cispr25-alse-class-3-1m").verified
    assert not limits.line("fcc-15-109-class-a-3m-converted").verified
    assert limits.line("cispr32-class-b-3m").verified
    assert limits.line("fcc-15-109-class-a-10m").verified


def test_every_line_names_its_source_and_its_continuation_exists():
    for limit_id in limits.ids():
        limit = limits.line(limit_id)
        assert limit.source
        assert not limit.continues_as or limits.line(limit.continues_as).id == limit.continues_as
        assert limit.lowest_hz < limit.highest_hz


def test_no_line_of_an_unconfirmed_aircraft_standard_is_shipped():
    assert not [
        limit_id for limit_id in limits.ids() if "do-160" in limit_id or "do160" in limit_id
    ]


def test_class_b_is_answered_with_every_class_b_line():
    found = limits.matching("class B")
    assert "cispr32-class-b-3m" in found
    assert "fcc-15-109-class-b-3m" in found
    assert not [limit_id for limit_id in found if "class-b" not in limit_id]


@pytest.mark.parametrize(
    ("text", "first"),
    [
        ("cispr32-class-b", "cispr32-class-b-10m"),
        ("EN 55032 class a", "cispr32-class-a-10m"),
        ("part 15 class B", "fcc-15-109-class-b-3m"),
        ("fcc class a 10m", "fcc-15-109-class-a-10m"),
        ("RE102 ground", "mil-std-461g-re102-ground-mobile-1m"),
        ("cispr32-class-b-3n", "cispr32-class-b-3m"),
    ],
)
def test_half_an_id_is_answered_with_what_it_may_mean(text, first):
    assert limits.matching(text)[0] == first


def test_nothing_alike_is_an_empty_answer():
    assert limits.matching("") == []
    assert limits.matching("quorum") == []


def test_an_unknown_id_names_the_ids_it_may_mean():
    with pytest.raises(ValueError, match=r"did you mean .*cispr32-class-b-3m"):
        limits.line("class B")
    with pytest.raises(ValueError, match="edgeplan limits lists"):
        limits.line("quorum")


def test_a_word_that_is_no_detector_is_refused():
    with pytest.raises(ValueError, match="quasi-peak, average, peak"):
        limits.line("cispr32-class-b-3m").level_dbuv_per_m(1e8, "rms")
