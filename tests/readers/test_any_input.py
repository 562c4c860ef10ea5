"""Whatever stands in the files: a board or problems with places, and nothing else."""

import random
from pathlib import Path

from edgeplan.errors import InputError
from edgeplan.readers import read_board

SMALL = Path(__file__).parents[1] / "boards" / "small"
PIECES = (b",", b";", b'"', b"\n", b"[", b"]", b"{", b"=", b"nan", b"-", b"\xff", b"\0", b"1e999")


def spoil(content, chance):
    """Change a file in a few places."""
    spoilt = bytearray(content)
    for _ in range(chance.choice((0, 1, 1, 3))):
        at = chance.randrange(len(spoilt))
        kind = chance.randrange(3)
        if kind == 0:
            del spoilt[at : at + chance.randrange(1, 30)]
        elif kind == 1:
            spoilt[at:at] = chance.choice(PIECES)
        else:
            start = chance.randrange(len(spoilt))
            spoilt[at:at] = spoilt[start : start + 50]
    return bytes(spoilt)


def problems_of(path):
    """Return what is told about a folder; nothing if it is a board."""
    try:
        read_board(path)
    except InputError as error:
        return error.problems
    return ()


def test_spoilt_files_give_problems_with_places_and_never_a_traceback(tmp_path):
    chance = random.Random(11)  # noqa: S311 - reproducible, no secrets
    refused = 0
    for _ in range(250):
        for name in ("board.toml", "nets.csv", "routes.csv"):
            (tmp_path / name).write_bytes(spoil((SMALL / name).read_bytes(), chance))
        told = problems_of(tmp_path)
        refused += bool(told)
        assert all(problem.row >= 1 and problem.column >= 1 for problem in told)
    assert refused > 100
