"""How far up a standard measures, against the printed rule."""

from pathlib import Path

import numpy as np
import pytest

from edgeplan import limits

TABLE = Path(__file__).parents[1] / "reference" / "fcc_15_33_highest_frequency.csv"


@pytest.mark.parametrize(
    ("internal_hz", "measured_to_hz"), np.loadtxt(TABLE, delimiter=",", skiprows=4).tolist()
)
def test_fcc_lines_end_by_the_printed_rows(internal_hz, measured_to_hz):
    found = limits.highest_frequency_hz("fcc-15-109-class-b-3m", internal_hz)
    assert found == (pytest.approx(measured_to_hz), "fcc-15-33-b-1", True)


@pytest.mark.parametrize(
    ("internal_hz", "measured_to_hz"),
    [(1e6, 1e9), (108e6, 1e9), (109e6, 2e9), (500e6, 2e9), (1e9, 5e9), (1.1e9, 5.5e9), (2e9, 6e9)],
)
@pytest.mark.parametrize("limit_id", ["cispr32-class-b-3m", "iec61000-6-4-10m"])
def test_cispr_lines_end_by_their_own_rows_unverified(limit_id, internal_hz, measured_to_hz):
    found = limits.highest_frequency_hz(limit_id, internal_hz)
    assert found == (pytest.approx(measured_to_hz), "cispr32-fx", False)


def test_an_unknown_internal_frequency_asks_for_the_most():
    assert limits.highest_frequency_hz("cispr32-class-b-3m", None).highest_hz == 6e9


def test_a_standard_without_a_rule_ends_with_its_line():
    found = limits.highest_frequency_hz("mil-std-461g-re102-ground-fixed-1m", 1e9)
    assert found == (18e9, "end-of-line", False)
    assert limits.rule_title(found.rule) == "the end of the line itself"


@pytest.mark.parametrize("bad", [0.0, -1e6, float("nan"), float("inf")])
def test_a_frequency_that_is_none_is_refused(bad):
    with pytest.raises(ValueError, match="highest internal frequency"):
        limits.highest_frequency_hz("cispr32-class-b-3m", bad)
