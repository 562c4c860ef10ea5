"""A list of 300 nets as another program exports it: foreign headers, a row per net and layer."""

import csv
import re
import shutil
from collections import Counter, defaultdict
from pathlib import Path

import pytest

from edgeplan.errors import InputError
from edgeplan.readers import read_board

FOREIGN = Path(__file__).parents[1] / "boards" / "foreign"


@pytest.fixture(scope="module")
def board():
    return read_board(FOREIGN)


@pytest.fixture(scope="module")
def lengths_mil():
    """Sum by an independent reading of the file."""
    found = defaultdict(dict)
    with (FOREIGN / "nets.csv").open(encoding="utf-8-sig", newline="") as file:
        for row in csv.DictReader(file):
            found[row["Net Name"]][row["Layer"]] = float(row["Routed Length (mil)"])
    return found


def test_all_300_nets_are_read(board):
    assert len(board.nets) == 300


def test_rows_are_summed_per_layer(board, lengths_mil):
    for net in board.nets:
        layers = {layer: length_m for layer, length_m, _ in net.layer_lengths_m}
        expected = {layer: mil * 25.4e-6 for layer, mil in lengths_mil[net.net].items()}
        assert layers == pytest.approx(expected, rel=1e-12)
        assert net.length_m == pytest.approx(sum(expected.values()), rel=1e-12)


def test_the_layer_of_a_net_is_that_of_most_of_its_copper(board, lengths_mil):
    for net in board.nets:
        assert net.layer == max(lengths_mil[net.net], key=lengths_mil[net.net].get)


def test_supplies_and_pairs_are_recognised(board):
    kinds = Counter(net.kind for net in board.nets)
    assert kinds == {"power": 6, "differential": 16, "digital": 278}


def test_wildcard_groups_give_interface_and_driver_and_the_later_one_wins(board):
    nets = {net.net: net for net in board.nets}
    assert nets["GPIO_3"].driver == ("soc",)
    assert nets["GPIO_3"].interface is None
    assert nets["MEM_DQ31"].setting == ("STRONG",)
    assert nets["MEM_DQ31"].data_bps == 100e6
    assert nets["HOST_AD9"].driver == ("host",)
    assert nets["HOST_AD9"].setting == ("FIX",)
    assert nets["DISP_D7"].interface is None  # DISP_D?? wants two digits
    assert nets["DISP_D17"].interface == "bus"


def test_pasting_the_hint_for_unknown_columns_makes_them_known(tmp_path):
    shutil.copytree(FOREIGN, tmp_path / "b")
    file = tmp_path / "b" / "board.toml"
    text = file.read_text()
    file.write_text(re.sub(r"\[columns\]\n.*\n.*\n", "", text))
    with pytest.raises(InputError) as caught:
        read_board(tmp_path / "b")
    (problem,) = caught.value.problems
    lines = problem.hint.partition("paste into board.toml:\n")[2]
    file.write_text(f"{file.read_text()}\n{lines}\n")
    assert read_board(tmp_path / "b").nets == read_board(FOREIGN).nets
