"""The starter folder."""

from pathlib import Path

import pytest

from edgeplan import starter
from edgeplan.readers import read_board

EXAMPLE = Path(__file__).parents[1] / "examples" / "starter"


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def test_the_committed_example_is_what_start_writes(tmp_path):
    written = starter.write(tmp_path / "new" / "board")
    assert sorted(path.name for path in written) == names(EXAMPLE)
    for path in written:
        assert path.read_bytes() == (EXAMPLE / path.name).read_bytes()


def test_the_starter_reads_as_a_board_of_six_nets():
    board = read_board(EXAMPLE)
    assert len(board.nets) == 6
    assert board.notes == ()
    assert {interface.timing for interface in board.file.interface} == {
        "common-clock",
        "clock",
        "asynchronous",
    }
    assert sum(net.site == "possible" for net in board.nets) == 1


def test_an_empty_directory_is_filled(tmp_path):
    starter.write(tmp_path)
    assert names(tmp_path) == ["board.toml", "nets.csv"]


def test_a_directory_with_anything_in_it_is_left_alone(tmp_path):
    (tmp_path / "notes.txt").write_text("mine")
    with pytest.raises(FileExistsError, match="not empty"):
        starter.write(tmp_path)
    assert names(tmp_path) == ["notes.txt"]


def test_a_write_that_fails_leaves_nothing(tmp_path, monkeypatch):
    def full(*_args, **_options):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "rename", full)
    with pytest.raises(OSError, match="No space"):
        starter.write(tmp_path / "board")
    assert names(tmp_path) == []
