"""What the report says of activity: each sentence where it is true, none without a statement."""

import pytest
from build import board, clock, driver, exactly, facts_of, interface, net, setting

from edgeplan.activity_remarks import assumptions, remarks
from edgeplan.emission_target import target_of

SPREAD = {"width": 0.05, "rate_hz": 30e3, "profile": "triangle"}
SOURCE = [{"name": "osc", "nets": ["CLK"], "spread": SPREAD}]
UNEVEN = setting(edge_up_s=exactly(1e-9), edge_down_s=exactly(2e-9)) | {"edge_s": None}
SMOOTH = setting(edge_shape="raised-cosine", source="scope, 40 outputs", provenance="measured")


def said(row, **changes):
    b = board(row, **changes)
    return remarks(facts_of(b)[0], target_of(b))


def test_a_plain_clock_and_plain_data_need_no_sentence():
    assert said(clock()) == said(net()) == []
    assert assumptions(facts_of(board(clock(), net()))) == []


@pytest.mark.parametrize(
    ("row", "changes", "words"),
    [
        (
            net(activity="pattern", data_bps=100e6),
            {},
            "judged as a clock at half its bit rate, 50 MHz",
        ),
        # 100 Mbit/s over 127 bits; 10 lg 127
        (
            net(activity="pattern", data_bps=100e6, pattern_bits=127),
            {},
            "lines 787.4 kHz apart, 21.0 dB below a clock",
        ),
        (net(activity="pattern", data_bps=1e6, pattern_bits=511), {}, "read as random data"),
        (net(data_bps=100e6), {"driver": [driver(UNEVEN)]}, "multiples of 100 Mbit/s"),
        (net(), {"interface": [interface(edge_skew_s=2e-10)]}, "edges are skewed by 200 ps"),
        (
            clock(burst_length_s=1e-3, burst_period_s=1.0),
            {},
            "active 1.00 ms of every 1.00 s: credited 5.9 dB quasi-peak",
        ),
        # 50 MHz, 5 %: 10 lg(2.5/0.12 x 0.25) - 3.6 = 3.6 dB at the first harmonic
        (clock(), {"clock_source": SOURCE}, "credited 3.6 dB at 50 MHz"),
        (
            clock(),
            {"clock_source": SOURCE, "interface": [interface(may_spread=False)]},
            "interface bus may not be spread",
        ),
        (clock(), {"driver": [driver(SMOOTH)]}, "stated for setting A (scope, 40 outputs)"),
    ],
)
def test_what_acts_is_told_with_its_size(row, changes, words):
    (sentence,) = said(row, **changes)
    assert words in sentence


def test_a_spread_clock_lists_its_credit_over_the_judged_range_in_one_line():
    (sentence,) = said(clock(), clock_source=SOURCE)
    assert "\n" not in sentence
    assert sentence.count(" dB at ") >= 4
    assert "950 MHz" in sentence


def test_bursts_tell_each_detector_of_the_target():
    limits = {"limits": ["cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz"]}
    facts = {"highest_internal_frequency_hz": 300e6}
    row = clock(burst_length_s=1e-3, burst_period_s=0.1)
    (sentence,) = said(row, emission=limits, facts=facts)
    for words in ("quasi-peak", "average", "0.0 dB peak"):
        assert words in sentence


def test_the_run_names_the_nets_of_each_kind():
    rows = [net(f"N{i}", activity="pattern", pattern_bits=31) for i in range(5)]
    (sentence,) = assumptions(facts_of(board(*rows)))
    assert sentence.endswith("pseudo-random: N0, N1, N2 and 2 more")
