"""The choice per net: order of preference, banks and arrays, exact against going through all."""

from collections import Counter
from itertools import product
from types import SimpleNamespace

import numpy as np
import pytest

from edgeplan.candidates import COST_NAMES, Candidates
from edgeplan.choice import per_net

NAMES = ("A", "B", "C")


def tables(rows):
    """Make candidate tables of rows of (setting, value, cost name or None)."""
    width = max(map(len, rows))
    shape = (len(rows), width)
    setting, series = np.zeros(shape, dtype=int), np.zeros(shape)
    exists, cost = np.zeros(shape, dtype=bool), np.zeros((*shape, len(COST_NAMES)), dtype=int)
    for i, row in enumerate(rows):
        for k, (name, value, changes) in enumerate(row):
            setting[i, k], series[i, k], exists[i, k] = NAMES.index(name), value, True
            for change in changes:
                cost[i, k, COST_NAMES.index(change)] += 1
    return Candidates(
        setting=setting,
        series_ohm=series,
        pull_up_ohm=np.full(shape, np.nan),
        exists=exists,
        cost=cost,
        ramp_factor=np.ones(shape),
    )


def facts(banks=(), arrays=(), count=None):
    """Make nets that know their bank, array and settings."""
    count = count or max(len(banks), len(arrays))
    banks, arrays = (list(x) + [None] * (count - len(x)) for x in (banks, arrays))
    settings = [SimpleNamespace(setting=name) for name in NAMES]
    return [
        SimpleNamespace(net=SimpleNamespace(bank=(b,) if b else (), array=a), settings=settings)
        for b, a in zip(banks, arrays, strict=True)
    ]


def choose_one(row, passes=None, works=None, share=None, common=None):
    """Choose among the candidates of one net."""
    listed = tables([row])
    shape = listed.exists.shape
    yes = np.ones(shape, dtype=bool)
    passes = yes if passes is None else np.array([passes])
    works = yes if works is None else np.array([works])
    share = np.full(shape, 0.5) if share is None else np.array([share])
    score = per_net.scores(listed, passes, works, ~yes, share, yes, Counter(common or {}))
    return int(per_net.choose(facts(count=1), listed, score)[0])


# The order of preference among changes, cheapest first.
ORDER = ([], ["setting"], ["value"], ["link_to_value"], ["new_site"])


@pytest.mark.parametrize("cheaper", range(4))
def test_a_cheaper_kind_of_change_wins_whatever_its_share(cheaper):
    dear, cheap = ("A", 33.0, ORDER[cheaper + 1]), ("A", 22.0, ORDER[cheaper])
    assert choose_one([dear, cheap], share=[0.95, 0.01]) == 1


def test_a_setting_beside_a_value_costs_more_than_the_value_alone():
    both, value = ("B", 33.0, ["setting", "value"]), ("A", 33.0, ["value"])
    assert choose_one([both, value], share=[0.9, 0.1]) == 1


def test_a_value_costs_more_than_a_setting_however_it_is_counted():
    value, setting = ("A", 33.0, ["value"]), ("B", 22.0, ["setting"])
    assert choose_one([value, setting], share=[0.9, 0.1]) == 1


def test_among_equal_changes_the_larger_smallest_share_wins():
    row = [("A", ohm, ["value"]) for ohm in (22.0, 33.0, 47.0)]
    assert choose_one(row, share=[0.1, 0.7, 0.3]) == 1


def test_among_like_shares_the_commoner_value_wins_then_the_smaller():
    row = [("A", ohm, ["value"]) for ohm in (47.0, 33.0, 22.0)]
    assert choose_one(row, share=[0.5, 0.5, 0.5], common={33.0: 7, 47.0: 2}) == 1
    assert choose_one(row, share=[0.5, 0.5, 0.5]) == 2


def test_a_passing_candidate_beats_every_failing_one():
    row = [("A", 0.0, []), ("A", 33.0, ["new_site"])]
    assert choose_one(row, passes=[False, True], share=[-0.01, 0.01]) == 1


def test_of_failing_ones_what_still_works_comes_before_what_is_quiet():
    # The second fails by less, but misses its timing.
    row = [("A", 0.0, []), ("B", 0.0, ["setting"])]
    both = [False, False]
    assert choose_one(row, passes=both, works=[True, False], share=[-2.0, -0.1]) == 0
    assert choose_one(row, passes=both, works=[True, True], share=[-2.0, -0.1]) == 1


def test_what_does_not_exist_or_is_not_allowed_is_never_chosen():
    listed = tables([[("A", 0.0, []), ("B", 0.0, ["setting"])]])
    yes, share = np.ones((1, 2), dtype=bool), np.full((1, 2), 0.5)
    allowed = np.array([[False, True]])
    score = per_net.scores(listed, yes, yes, ~yes, share, allowed, Counter())
    assert np.isinf(score[0, 0])
    assert per_net.choose(facts(count=1), listed, score).tolist() == [1]
    none = per_net.scores(listed, yes, yes, ~yes, share, ~yes, Counter())
    assert per_net.choose(facts(count=1), listed, none).tolist() == [0]


def test_groups_join_nets_over_banks_and_arrays():
    nets = facts(banks=["x", "x", None, None, "y", None], arrays=[None, "R", "R", None, None, "S"])
    groups = per_net.tied_groups(nets)
    assert [g.nets for g in groups] == [(0, 1, 2), (4,), (5,)]
    assert groups[0].banks == {"x": (0, 1)}
    assert groups[0].arrays == {"R": (1, 2)}


def test_a_bank_takes_the_setting_that_is_best_for_all_of_it():
    listed = tables([[(n, 0.0, []) for n in "ABC"]] * 3)
    score = np.array([[0.0, 5, 2], [9, 0, 1], [9, 5, 1]])
    assert per_net.choose(facts(banks="xxx"), listed, score).tolist() == [2, 2, 2]
    assert per_net.choose(facts(banks=["x", None, "x"]), listed, score).tolist() == [2, 1, 2]


def test_a_group_in_which_nothing_agrees_keeps_what_is_drawn():
    listed = tables([[("A", 0.0, []), ("A", 22.0, [])], [("A", 33.0, []), ("A", 47.0, [])]])
    score = np.array([[5.0, 1.0], [5.0, 1.0]])
    assert per_net.choose(facts(arrays="RR"), listed, score).tolist() == [0, 0]


def brute_force(nets, listed, score):
    """Go through every combination of candidates of a whole board."""
    best = np.inf
    finite = [np.flatnonzero(np.isfinite(row)) for row in score]
    for picked in product(*finite):
        agreed: dict[tuple[str, str], object] = {}
        names = [NAMES[listed.setting[i, k]] for i, k in enumerate(picked)]
        values = [listed.series_ohm[i, k] for i, k in enumerate(picked)]
        for i, f in enumerate(nets):
            for kind, key, own in (
                ("bank", f.net.bank[0] if f.net.bank else None, names[i]),
                ("array", f.net.array, values[i]),
            ):
                if key and agreed.setdefault((kind, key), own) != own:
                    break
            else:
                continue
            break
        else:
            best = min(best, sum(score[i, k] for i, k in enumerate(picked)))
    return best


def random_board(rng):
    """Draw up to five nets with banks, arrays, and scores in a few steps, some infinite."""
    count = int(rng.integers(2, 6))
    rows = []
    for _ in range(count):
        every = [(n, v, []) for n in NAMES[: rng.integers(1, 4)] for v in (0.0, 22.0, 33.0)]
        keep = rng.permutation(len(every))[: rng.integers(2, 6)]
        rows.append([every[k] for k in keep])
    listed = tables(rows)
    score = rng.integers(0, 30, listed.exists.shape).astype(float)
    score[~listed.exists | (rng.random(score.shape) < 0.1)] = np.inf
    banks = [rng.choice([None, "x", "y"]) for _ in range(count)]
    arrays = [rng.choice([None, "R", "S"]) for _ in range(count)]
    return facts(banks, arrays), listed, score


def test_the_choice_is_as_good_as_going_through_every_combination():
    rng = np.random.default_rng(20)
    compared = 0
    while compared < 200:
        nets, listed, score = random_board(rng)
        best = brute_force(nets, listed, score)
        if not np.isfinite(best):
            continue
        chosen = per_net.choose(nets, listed, score)
        assert score[np.arange(len(nets)), chosen].sum() == best
        compared += 1


def test_a_candidate_that_only_waits_stands_between_passing_and_failing_ones():
    listed = tables([[("A", 0.0, []), ("B", 0.0, ["setting"]), ("C", 0.0, ["setting"])]])
    yes = np.ones((1, 3), dtype=bool)
    passes, waits = np.array([[False, False, True]]), np.array([[False, True, False]])
    score = per_net.scores(listed, passes, yes, waits, np.zeros((1, 3)), yes, Counter())
    assert score[0, 2] < score[0, 1] < score[0, 0]
