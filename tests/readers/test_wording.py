"""Wrong values of board.toml in words of the trade."""

from pathlib import Path

import pytest

from edgeplan.errors import InputError
from edgeplan.readers import read_board

SMALL = Path(__file__).parents[1] / "boards" / "small"


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ('"35 um"', '"0 um"', ["stack.L1.thickness: '0 um' has to be above 0"]),
        ("er = 4.2", "er = 0.5", ["stack.D1.er: 0.5 has to be at least 1"]),
        ("er = 4.2", "loss_tangent = 0.02", ["stack.D1: a dielectric layer needs er"]),
        ("[board]", "[[board]]", ["board: there is one board only"]),
        ('"5 pF"', '"5 pG"', ["receiver.r1.capacitance: '5 pG': 'pG' is no unit"]),
        (
            '"5 pF"',
            '{typ = "5 pG", most = 3}',
            [
                "receiver.r1.capacitance.most: no such key 'most'",
                "receiver.r1.capacitance.typ: '5 pG': 'pG' is no unit of a capacitance",
            ],
        ),
        ('"5 pF"', '"5 pF"\novershoot = "0.3 A"', ["receiver.r1.overshoot: '0.3 A': 'A' is no"]),
        (
            "[board]",
            'cable = [{name = "c", length = "1 m", attenuation = [["30 MHz", 3]]}]\n[board]',
            ["cable.c.attenuation.1.2: 3 has no unit"],
        ),
        ('name = "T-1"', 'name = "T"\nno_cables = 3', ["board.no_cables: 3 is not true or false"]),
        ('["cispr32-class-b-3m"]', "[]", ["emission.limits: the list has too few entries"]),
        ('["cispr32-class-b-3m"]', '"x"', ["emission.limits: 'x' is not a list"]),
        ('"80 mm", "60 mm"', '"80 mm"', ["board.size: the list has too few entries"]),
        ('"80 mm", ', '"8 mm", "1 mm", ', ["board.size: the list has too many entries"]),
        (
            "[emission]",
            "[resistors]\ntolerance = 5\n[emission]",
            ["resistors.tolerance: 5 has to be below 1"],
        ),
    ],
)
def test_a_wrong_value_is_told_once_in_plain_words(tmp_path, old, new, told):
    text = (SMALL / "board.toml").read_text()
    assert old in text
    (tmp_path / "board.toml").write_text(text.replace(old, new, 1))
    (tmp_path / "nets.csv").write_bytes((SMALL / "nets.csv").read_bytes())
    with pytest.raises(InputError) as caught:
        read_board(tmp_path)
    found = [f"{problem.field}: {problem.message}" for problem in caught.value.problems]
    assert len(found) == len(told)
    for line, start in zip(sorted(found), told, strict=True):
        assert line.startswith(start)


def test_a_share_that_looks_like_per_cent_is_told_how_to_write_it(tmp_path):
    text = (SMALL / "board.toml").read_text()
    (tmp_path / "board.toml").write_text(f"{text}\n[resistors]\ntolerance = 5\n")
    (tmp_path / "nets.csv").write_bytes((SMALL / "nets.csv").read_bytes())
    with pytest.raises(InputError, match='write "30 %"'):
        read_board(tmp_path)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('limits = ["cispr32-class-b-3m"]', "limits = []"),
        ('limits = ["cispr32-class-b-3m"]', ""),
        ('[emission]\nlimits = ["cispr32-class-b-3m"]', ""),
    ],
)
def test_where_no_limit_is_named_the_hint_tells_where_the_ids_are(tmp_path, old, new):
    text = (SMALL / "board.toml").read_text()
    assert old in text
    (tmp_path / "board.toml").write_text(text.replace(old, new, 1))
    (tmp_path / "nets.csv").write_bytes((SMALL / "nets.csv").read_bytes())
    with pytest.raises(InputError) as caught:
        read_board(tmp_path)
    (problem,) = caught.value.problems
    assert problem.hint.endswith('limits = ["..."]; edgeplan limits prints all ids')
