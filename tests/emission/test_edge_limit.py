"""edge_limit against brute force over exact harmonics."""

import numpy as np
import pytest

from edgeplan.emission import edge_limit
from edgeplan.physics import spectra
from edgeplan.physics.edge_factor import null_free_edge_factor

ORDER = np.arange(1, 31)
LONGEST_S = 60e-9


def random_cases(count, seed):
    """Excess of 30 harmonics and their frequencies for random clocks, transfers and limits."""
    rng = np.random.default_rng(seed)
    clock_hz = 10 ** rng.uniform(6.7, 8.3, (count, 1))
    duty = rng.uniform(0.4, 0.6, (count, 1))
    transfer_over_limit = 10 ** (
        rng.uniform(-0.3, 1.3, (count, 1)) + rng.normal(0, 0.3, (count, 30))
    )
    amplitude = 2 / (np.pi * ORDER) * np.abs(np.sin(np.pi * ORDER * duty))
    return amplitude * transfer_over_limit, clock_hz * ORDER


def test_a_thousand_random_limits_never_allow_what_exact_harmonics_refuse():
    excess, frequency_hz = random_cases(1000, 11)
    ramp_s, _ = edge_limit.shortest_ramp(excess, frequency_hz)
    slower = np.concatenate([np.linspace(1, 4, 150), np.geomspace(4, 100, 60)])
    tried_s = np.maximum(ramp_s[:, None], 1e-12) * slower
    for start in range(0, 1000, 100):
        case = slice(start, start + 100)
        x = frequency_hz[case, None, :] * tried_s[case, :, None]
        level = excess[case, None, :] * np.abs(np.sinc(x))
        allowed = (ramp_s[case] > 0)[:, None, None]
        assert np.all(np.where(allowed, level, 0) <= 1 + 1e-8)


def test_a_limit_is_no_longer_than_brute_force_asks():
    excess, frequency_hz = random_cases(100, 12)
    ramp_s, _ = edge_limit.shortest_ramp(excess, frequency_hz)
    tried_s = np.geomspace(1e-11, 1e-5, 12_000)
    for case in np.flatnonzero(ramp_s > 0):
        fails = np.zeros(tried_s.size, dtype=bool)
        for n in np.flatnonzero(excess[case] > 1):
            fails |= excess[case, n] * np.abs(np.sinc(frequency_hz[case, n] * tried_s)) > 1
        last_failing_s = tried_s[np.flatnonzero(fails)[-1]]
        assert last_failing_s <= ramp_s[case] <= last_failing_s * 1.03


def test_the_binding_line_is_exactly_at_its_budget():
    excess, frequency_hz = random_cases(200, 13)
    ramp_s, line = edge_limit.shortest_ramp(excess, frequency_hz)
    bound = np.flatnonzero(ramp_s > 0)
    level = null_free_edge_factor(frequency_hz[bound, line[bound]] * ramp_s[bound])
    np.testing.assert_allclose(excess[bound, line[bound]] * level, 1, rtol=1e-7)


def test_where_nothing_is_over_budget_any_edge_will_do():
    ramp_s, line = edge_limit.shortest_ramp([[0.99, 0.2], [1.0, 0.0]], [1e8, 2e8])
    np.testing.assert_array_equal(ramp_s, [0, 0])
    np.testing.assert_array_equal(line, [-1, -1])


def test_an_unknown_line_makes_the_limit_unknown_and_is_named():
    ramp_s, line = edge_limit.shortest_ramp([[3.0, np.nan, 0.1]], [1e8, 2e8, 3e8])
    assert np.isnan(ramp_s[0])
    assert line[0] == 1


def test_less_radiation_never_lengthens_the_limit():
    excess, frequency_hz = random_cases(300, 14)
    before_s = edge_limit.shortest_ramp(excess, frequency_hz).ramp_s
    for attenuation_db in (0.1, 1.0, 6.0, 20.0):
        after_s = edge_limit.shortest_ramp(
            excess * 10 ** (-attenuation_db / 20), frequency_hz
        ).ramp_s
        assert np.all(after_s <= before_s)


def test_root_search_on_the_exact_spectrum_would_stop_in_a_null():
    # One line over budget by 6: the exact spectrum passes in its first null, and fails again.
    ramp_s = edge_limit.shortest_ramp([6.0], [1e8]).ramp_s
    assert 6 * abs(np.sinc(1e8 * 10e-9)) < 1
    assert 6 * abs(np.sinc(1e8 * 14.3e-9)) > 1
    assert ramp_s > 14.3e-9


def test_the_envelope_never_asks_for_less_than_the_tight_form():
    excess, frequency_hz = random_cases(500, 15)
    tight_s = edge_limit.shortest_ramp(excess, frequency_hz).ramp_s
    envelope_s = edge_limit.envelope_ramp(excess, frequency_hz).ramp_s
    assert np.all(envelope_s >= tight_s * (1 - 1e-9))
    assert np.median(envelope_s[tight_s > 0] / tight_s[tight_s > 0]) < 4


def test_reach_is_what_the_longest_ramp_can_do():
    excess, frequency_hz = random_cases(300, 16)
    beyond = edge_limit.out_of_reach(excess, frequency_hz, LONGEST_S)
    ramp_s = edge_limit.shortest_ramp(excess[..., None], frequency_hz[..., None]).ramp_s
    np.testing.assert_array_equal(beyond, ramp_s > LONGEST_S)
    assert 0 < beyond.sum() < beyond.size


def test_unequal_edges_are_held_by_both_edges_exact_harmonics():
    rng = np.random.default_rng(17)
    duty, ratio = rng.uniform(0.4, 0.6, (200, 1)), 10 ** rng.uniform(-0.7, 0.7, (200, 1))
    transfer = 10 ** rng.uniform(-0.3, 1.3, (200, 1))
    excess, frequency_hz = transfer * 2 / (np.pi * ORDER), 2e7 * ORDER
    odd, even = spectra.duty_factor(ORDER, duty), np.abs(np.cos(np.pi * ORDER * duty))
    rise_s, _ = edge_limit.shortest_ramp_unequal(excess, frequency_hz, odd, even, ratio)
    turn = np.exp(-2j * np.pi * ORDER * duty)
    for slower in np.geomspace(1, 20, 80):
        x = frequency_hz * rise_s[:, None] * slower
        level = excess / 2 * np.abs(np.sinc(x) - np.sinc(x * ratio) * turn)
        assert np.all(level[rise_s > 0] <= 1 + 1e-8)


def test_unequal_edges_of_ratio_one_have_the_equal_limit():
    excess, frequency_hz = random_cases(100, 18)
    equal_s = edge_limit.shortest_ramp(excess, frequency_hz).ramp_s
    general_s = edge_limit.shortest_ramp_unequal(excess, frequency_hz, 1.0, 0.0, 1.0).ramp_s
    np.testing.assert_allclose(general_s, equal_s, rtol=1e-6)


def test_unequal_edges_with_an_unknown_line_are_unknown():
    rise_s = edge_limit.shortest_ramp_unequal([2.0, np.nan], [1e8, 2e8], 1.0, 0.0, 1.5).ramp_s
    assert np.isnan(rise_s)


def test_one_line_by_hand():
    # 20 lg(pi/2) over budget at 100 MHz: sinc(1/2) = 2/pi, so 5 ns
    assert edge_limit.shortest_ramp([np.pi / 2], [1e8]).ramp_s == pytest.approx(5e-9)
