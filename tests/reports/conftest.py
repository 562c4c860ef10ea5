"""The invented record as fixtures."""

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest


@pytest.fixture(scope="session")
def sample() -> ModuleType:
    """Return the module that builds records: tests are no package, so it is loaded by its path."""
    spec = importlib.util.spec_from_file_location("sample", Path(__file__).with_name("sample.py"))
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def results(sample: ModuleType):
    """Return a record of twelve nets with every verdict."""
    return sample.record()
