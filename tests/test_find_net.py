"""A net asked for by name: itself, the far side of its resistor, or what comes close."""

from pathlib import Path

import pytest

from edgeplan.errors import InputError
from edgeplan.readers import read_board
from edgeplan.record import find_net

STARTER = Path(__file__).parents[1] / "examples" / "starter"


@pytest.fixture(scope="module")
def board():
    return read_board(STARTER)


@pytest.mark.parametrize(
    ("asked", "hint"),
    [
        ("LAMP_CKL", "did you mean LAMP_CLK"),
        ("nosuch", "edgeplan plan BOARD lists all 6 nets"),
    ],
)
def test_only_names_that_come_close_are_offered(board, asked, hint):
    with pytest.raises(InputError) as caught:
        find_net(board, asked)
    assert caught.value.problems[0].hint.startswith(hint)


def test_case_does_not_count(board):
    assert find_net(board, "lamp_clk") == "LAMP_CLK"
