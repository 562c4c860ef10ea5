"""The room's name table."""

import inspect
from pathlib import Path

import pytest

from edgeplan import emission
from edgeplan.emission.mechanism import Mechanism

NO_MECHANISM = {"__init__", "edge_limit", "mechanism"}


def test_table_and_folder_agree():
    folder = Path(inspect.getfile(emission)).parent
    assert set(emission.MECHANISMS) == {p.stem for p in folder.glob("*.py")} - NO_MECHANISM
    for name, path in emission.MECHANISMS.items():
        assert path == f"edgeplan.emission.{name}"


@pytest.mark.parametrize("name", sorted(emission.MECHANISMS))
def test_every_mechanism_says_what_it_is_and_can_be_asked(name):
    module = emission.mechanism_of(name)
    assert isinstance(module.MODEL, Mechanism)
    assert module.MODEL.name == name
    assert module.MODEL.error_db > 0
    assert list(inspect.signature(module.field_per_forward_ampere).parameters) == [
        "paths",
        "frequency_hz",
    ]


def test_an_unknown_name_is_refused():
    with pytest.raises(KeyError):
        emission.mechanism_of("telepathy")
