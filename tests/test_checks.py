"""The worst case of a check over receivers, corners, edges and states."""

import numpy as np
import pytest

from edgeplan.checks import Worst, condition_code, condition_words
from edgeplan.results import Missing

SLOW, FAST = ("slow", "rising", "run"), ("fast", "falling", "boot")
# Three nets with 1, 2 and 1 receivers.
FIRST = np.array([0, 1, 3, 4])


def worst(shape=(3, 2), wants="faster"):
    return Worst("setup", wants, "s", shape)


def column(*values):
    return np.array(values, dtype=float)[:, None] * np.ones((1, 2))


@pytest.mark.parametrize("receiver", [0, 1, 7])
@pytest.mark.parametrize("corner", ["slow", "fast"])
@pytest.mark.parametrize("edge", ["rising", "falling"])
@pytest.mark.parametrize("state", ["run", "boot"])
def test_a_condition_survives_its_code(receiver, corner, edge, state):
    code = condition_code(receiver, corner, edge, state)
    assert condition_words(code) == (receiver, corner, edge, state)


def test_the_worst_receiver_counts_and_is_named():
    found = worst()
    found.add(FIRST, column(1, 2, 5, 3), 10.0, 10.0, SLOW)
    table = found.table()
    assert table.margin[:, 0].tolist() == [9, 5, 7]
    assert table.value[1, 0] == 5
    assert condition_words(int(table.condition[1, 0]))[0] == 1


def test_the_worse_of_two_conditions_counts_and_is_named():
    found = worst()
    found.add(FIRST, column(1, 1, 1, 1), 10.0, 10.0, SLOW)
    found.add(FIRST, column(4, 0, 0, 0), 10.0, 10.0, FAST)
    table = found.table()
    assert table.margin[:, 0].tolist() == [6, 9, 9]
    assert condition_words(int(table.condition[0, 0]))[1:] == FAST
    assert condition_words(int(table.condition[1, 0]))[1:] == SLOW


def test_a_larger_value_may_be_the_better_one():
    found = worst()
    found.add(FIRST, column(1, 2, 5, 3), 4.0, 2.0, SLOW, larger_is_better=True)
    assert found.table().margin[:, 0].tolist() == [-3, -2, -1]
    assert found.table().share[:, 0].tolist() == [-1.5, -1, -0.5]


def test_a_number_that_is_not_known_leaves_the_net_open_whatever_comes_later():
    found = worst()
    found.add(FIRST, column(np.nan, 1, 1, 1), 10.0, 10.0, SLOW)
    found.add(FIRST, column(50, 1, 1, 1), 10.0, 10.0, FAST)
    table = found.table()
    assert table.open[:, 0].tolist() == [True, False, False]
    assert table.fails[:, 0].tolist() == [False, False, False]


def test_one_unknown_receiver_leaves_its_net_open():
    found = worst()
    found.add(FIRST, column(1, 1, np.nan, 1), 10.0, 10.0, SLOW)
    assert found.table().open[:, 0].tolist() == [False, True, False]


def test_a_receiver_without_a_limit_is_not_judged_and_a_net_without_any_neither():
    found = worst()
    found.add(FIRST, column(1, 50, 1, 1), column(np.nan, np.nan, 10, 10), 10.0, SLOW)
    table = found.table()
    assert table.applies.tolist() == [False, True, True]
    assert table.margin[1, 0] == 9
    assert not table.open[0].any()
    assert not table.fails[0].any()


def test_a_value_missing_opens_the_check_with_its_first_reason():
    found = worst()
    found.add(FIRST, column(1, 1, 1, 1), 10.0, 10.0, SLOW)
    found.cannot(2, "no setup", Missing(value="setup", of="bus"))
    found.cannot(2, "no hold", Missing(value="hold", of="bus"))
    found.add(FIRST, column(50, 50, 50, 50), 10.0, 10.0, FAST)
    table = found.table()
    assert table.because == ("", "", "no setup")
    assert table.missing[2].value == "setup"
    assert table.open[:, 0].tolist() == [False, False, True]


def test_the_error_is_that_of_the_worst_case_on_both_sides():
    found = worst()
    found.add(FIRST, column(1, 1, 5, 1), 10.0, 10.0, SLOW, error=column(1, 2, 3, 4))
    table = found.table()
    assert table.error_high[:, 0].tolist() == [1, 3, 4]
    np.testing.assert_array_equal(table.error_low, -table.error_high)


def test_candidates_are_judged_one_by_one():
    found = worst((1, 2))
    found.add(np.array([0, 1]), np.array([[1.0, 12.0]]), 10.0, 10.0, SLOW)
    assert found.table().fails.tolist() == [[False, True]]
