"""Names of classes and shapes lead to the files of their rooms, and no file is left over."""

from importlib import import_module
from pathlib import Path

import pytest

from edgeplan import fidelity, timing


@pytest.mark.parametrize(("room", "table"), [(timing, timing.CLASSES), (fidelity, fidelity.SHAPES)])
def test_table_and_folder_agree(room, table):
    folder = Path(room.__file__).parent
    files = {f.stem for f in folder.glob("*.py") if not f.stem.startswith("_")}
    assert {path.rsplit(".", 1)[1] for path in table.values()} == files
    for name, path in table.items():
        assert room.checks_of(name) is import_module(path).checks


def test_every_timing_class_a_board_may_name_has_a_file():
    from typing import get_args

    from edgeplan.board import TimingClass

    assert set(timing.CLASSES) == set(get_args(TimingClass))


def test_an_unknown_class_is_no_class():
    with pytest.raises(KeyError):
        timing.checks_of("guessed")
