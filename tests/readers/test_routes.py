"""Routes: one tree a net, that joins its pins, however its pieces are written."""

import pytest

from edgeplan.board import Columns
from edgeplan.readers import netlist, routes
from edgeplan.readers.references import Names

NAMES = Names(layers=["L1"], interfaces=[], drivers={}, receivers=[], levels=[])
HEADER = "net,from,to,length_mm,layer\n"


def read(rows, nets="net,far_net,driver_pin,receiver_pin\nA,A_R,U1.1,U2.1\n"):
    problems = []
    known = netlist.read(nets, Columns(), problems)
    segments = routes.read(HEADER + rows, known, NAMES, Columns(), problems)
    return segments, [str(problem) for problem in problems]


def test_pieces_keep_their_order_and_lengths():
    segments, problems = read("A,U1.1,site,2.5,L1\nA,site,U2.1,20,L1\n")
    assert problems == []
    assert [(s.start, s.end, s.length_m) for s in segments] == [
        ("U1.1", "site", 0.0025),
        ("site", "U2.1", 0.02),
    ]


def test_pieces_of_the_far_net_belong_to_the_net():
    segments, problems = read("A,U1.1,site,2.5,L1\nA_R,site,U2.1,20,L1\n")
    assert problems == []
    assert {segment.net for segment in segments} == {"A"}


def test_pieces_may_be_written_towards_the_driver():
    _, problems = read("A,U2.1,tee,3,L1\nA,tee,U1.1,4,L1\nA,stub,tee,1,L1\n")
    assert problems == []


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ("A,U1.1,U2.1,3,L1\nA,U2.1,U1.1,3,L1\n", "routes.csv:3:3: error: from: this piece of 'A'"),
        ("A,U1.1,U1.1,3,L1\n", "routes.csv:2:8: error: to: the piece starts and ends at 'U1.1'"),
        ("A,U1.1,b,3,L1\nA,c,U2.1,3,L1\n", "hangs together with no earlier one"),
        ("A,U1.1,b,3,L1\n", "does not touch 'U2.1'"),
        ("A,U1.1,U2.1,,L1\n", "routes.csv:2:1: error: length_mm: the cell is empty"),
        ("A,U1.1,U2.1,3,L2\n", "no signal layer 'L2'"),
        ("B,U1.1,U2.1,3,L1\n", "no net 'B' in nets.csv"),
    ],
)
def test_what_is_no_tree_is_told_at_its_piece(rows, words):
    _, problems = read(rows)
    assert any(words in problem for problem in problems)


def test_a_missing_column_is_told():
    problems = []
    routes.read("net,from,to,layer\nA,a,b,L1\n", None, None, Columns(), problems)
    assert [problem.message for problem in problems] == ["no column 'length_mm'"]


def test_parts_that_a_later_piece_joins_are_one():
    _, problems = read("A,U1.1,a,3,L1\nA,b,U2.1,3,L1\nA,a,b,3,L1\n")
    assert problems == []
