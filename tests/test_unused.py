"""Whatever is accepted without acting yet says so by name."""

import pytest
from build import board, net, segment

from edgeplan.unused import unused_values

CABLE = {"name": "mains", "length_m": 1.5, "attenuation_db": 0.0}


def test_a_plain_board_leaves_nothing_unused():
    assert unused_values(board(cable=[CABLE])) == []


@pytest.mark.parametrize(
    ("changes", "word"),
    [
        (
            {
                "waiver": [
                    {"rule": "r", "net": "N", "until": "2030-01-01", "by": "b", "reason": "x"}
                ]
            },
            "waivers",
        ),
        ({"clock_source": [{"name": "osc", "nets": ["N*"]}]}, "clock sources"),
        ({"cable": [CABLE | {"side": "left"}]}, "the side a cable leaves from"),
    ],
)
def test_each_kind_of_input_is_named_once(changes, word):
    found = unused_values(board(**changes))
    assert len(found) == 1
    assert found[0].startswith("accepted but not used yet: ")
    assert word in found[0]


def test_the_side_of_one_cable_counts_for_nets_with_positions():
    plain = segment("U1.1", "U2.1", 0.04)
    placed = segment("U1.1", "U2.1", 0.04, start_m=(0.0, 0.0), end_m=(0.04, 0.0))
    one = {"cable": [CABLE | {"side": "left"}]}
    assert unused_values(board(net(), routes=[placed], **one)) == []
    assert unused_values(board(net(), routes=[plain], **one))
    assert unused_values(board(net(), routes=[placed], cable=[*one["cable"], CABLE]))
