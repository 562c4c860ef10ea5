"""Schemas: committed, deterministic, and true of what the readers accept and refuse."""

import json
import tomllib
from datetime import date
from pathlib import Path

import jsonschema
import pytest

from edgeplan import schemas
from edgeplan.readers.columns import NET_COLUMNS, known_headers

ROOT = Path(__file__).parents[1]
BOARDS = ("examples/saltmarsh", "examples/starter", "tests/boards/small", "tests/boards/foreign")


@pytest.fixture(scope="module")
def validator():
    schema = schemas.board_schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    return jsonschema.Draft202012Validator(schema)


def plain(value):
    """Dates as texts, as JSON has them."""
    if isinstance(value, dict):
        return {key: plain(inner) for key, inner in value.items()}
    if isinstance(value, list):
        return [plain(inner) for inner in value]
    return value.isoformat() if isinstance(value, date) else value


@pytest.mark.parametrize("name", sorted(schemas.SCHEMAS))
def test_the_committed_schema_is_the_program_s(name):
    committed = (ROOT / "docs" / "schema" / f"{name}.json").read_text(encoding="utf-8")
    assert committed == schemas.text(name), f"write schemas.text({name!r}) to docs/schema"


@pytest.mark.parametrize("folder", BOARDS)
def test_every_board_of_ours_fits_the_schema(folder, validator):
    data = tomllib.loads((ROOT / folder / "board.toml").read_text(encoding="utf-8"))
    assert [error.message for error in validator.iter_errors(plain(data))] == []


@pytest.mark.parametrize(
    ("folder", "path"),
    [
        ("unknown_unit", "$.stack[1].thickness"),
        ("unknown_key", "$.stack[1]"),
        ("missing_key", "$.board"),
        ("wrong_word", "$.interface[0].class"),
        ("decimal_comma", "$.driver[0].settings[0].edge"),
    ],
)
def test_the_schema_refuses_what_the_reader_refuses(folder, path, validator):
    text = (ROOT / "tests" / "boards" / "broken" / folder / "board.toml").read_text()
    assert path in [error.json_path for error in validator.iter_errors(plain(tomllib.loads(text)))]


def test_a_single_value_stands_for_a_range(validator):
    data = tomllib.loads((ROOT / "examples/starter/board.toml").read_text())
    data["interface"][0]["supply"] = "3.3 V"
    assert validator.is_valid(data)


def test_the_results_schema_is_a_valid_schema_with_every_field_of_the_record():
    schema = schemas.results_schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    assert schema["properties"]["schema"] == {"const": "edgeplan/results/1", "type": "string"}
    assert {"nets", "board_emission", "findings", "caution"} <= set(schema["required"])


def test_every_header_of_the_net_list_is_described():
    described = schemas.net_list_schema()["tables"]["nets.csv"]
    headers = [header for column in described for header in column["headers"]]
    assert sorted(headers) == sorted(known_headers(NET_COLUMNS))
    assert all(column["meaning"] for column in described)


def test_all_schemas_together_are_json():
    assert sorted(json.loads(schemas.text())) == sorted(schemas.SCHEMAS)
