"""JSON schemas of what goes in (board.toml, the tables) and of what comes out (results)."""

import json
from collections.abc import Callable, Iterator
from typing import Any

from pydantic import TypeAdapter

from edgeplan.board import BoardFile
from edgeplan.readers import columns, limit_table
from edgeplan.results import SCHEMA, Results

DIALECT = "https://json-schema.org/draft/2020-12/schema"
_BOUNDS = {"gt": "above", "ge": "at least", "lt": "below", "le": "at most"}


def board_schema() -> dict[str, Any]:
    """Return the JSON schema of board.toml.

    Returns
    -------
    dict
        Draft 2020-12.  Quantities are texts with their unit.

    Notes
    -----
    Bounds of quantities are told in words: a schema cannot compare "35 um" with 0.

    Examples
    --------
    >>> board_schema()["properties"]["stack"]["items"]
    {'$ref': '#/$defs/Layer'}
    """
    schema = BoardFile.model_json_schema(by_alias=True)
    names = {key: _range_name(shape) for key, shape in schema["$defs"].items() if _is_range(shape)}
    schema["$defs"] = {names.get(key, key): shape for key, shape in schema["$defs"].items()}
    schema = _plain(schema, names)
    return {"$schema": DIALECT, "$id": "edgeplan/board/1", **schema, "title": "board.toml"}


def _is_range(shape: dict[str, Any]) -> bool:
    """Tell whether a shape is a minimum, typical and maximum."""
    return set(shape.get("properties", {})) == {"min", "typ", "max"}


def _range_name(shape: dict[str, Any]) -> str:
    """Name a range by its quantity: "a voltage" gives "VoltageRange"."""
    described = str(shape["properties"]["typ"]["anyOf"][0]["description"])
    return f"{described.split(':')[0].split()[-1].capitalize()}Range"


def _plain(shape: Any, names: dict[str, str]) -> Any:
    """Rewrite a shape for TOML: no null, no program's bounds, a single value for a range."""
    if isinstance(shape, list):
        return [_plain(element, names) for element in shape if element != {"type": "null"}]
    if not isinstance(shape, dict):
        return shape
    if "$ref" in shape:
        name = shape["$ref"].rpartition("/")[2]
        return {**shape, "$ref": f"#/$defs/{names.get(name, name)}"}
    kept = {key: _plain(value, names) for key, value in shape.items() if key not in _BOUNDS}
    bounds = [f"{_BOUNDS[key]} {shape[key]:g}" for key in _BOUNDS if key in shape]
    if bounds:
        kept["description"] = f"{kept.get('description', '')}; {' and '.join(bounds)}"
    if len(kept.get("anyOf", ())) == 1:
        kept = {**kept.pop("anyOf")[0], **kept}
    return _single_value_too(_with_default(kept))


def _single_value_too(shape: dict[str, Any]) -> dict[str, Any]:
    """Let a range be a single value, its typical one."""
    if not _is_range(shape):
        return shape
    typical = {key: value for key, value in shape["properties"]["typ"].items() if key != "title"}
    return {"anyOf": [shape, typical], "description": shape.get("description", "")}


def _with_default(shape: dict[str, Any]) -> dict[str, Any]:
    """Write the default of a quantity as a person would, "470 ohm"; no default is no key."""
    default, examples = shape.get("default"), shape.get("examples")
    if default is None:
        return {key: value for key, value in shape.items() if key != "default"}
    if {"type": "number"} in shape.get("anyOf", ()) or not examples:
        return shape
    unit = examples[0].split()[-1]  # ohm and dB; other defaults are 0, which needs no unit
    return {**shape, "default": f"{default:g} {unit}" if default else 0}


def _columns(table: tuple[columns.Column, ...]) -> Iterator[dict[str, Any]]:
    """Describe the columns of a table."""
    for column in table:
        described: dict[str, Any] = {
            "headers": list(column.headers()),
            "holds": column.kind,
            "meaning": column.meaning,
        }
        if column.words:
            described["words"] = list(column.words)
        if column.kind == "switch":
            described["words"] = list(columns.SWITCH)
        if column.kind == "number" and column.lowest is not None:
            described["bound"] = "0 or more" if column.zero else "above 0"
        yield described


def net_list_schema() -> dict[str, Any]:
    """Return the columns of nets.csv, routes.csv and limit tables.

    Returns
    -------
    dict
        Per table a list of columns: the headers each may have (the unit is in the header), what
        a cell holds, and what it means.

    Examples
    --------
    >>> net_list_schema()["tables"]["nets.csv"][0]
    {'headers': ['net'], 'holds': 'name', 'meaning': "name of the net at the driver's end"}
    """
    limit_columns = [
        {"headers": [name], "holds": "name" if name == "detector" else "number"}
        for name in limit_table.COLUMNS
    ]
    return {
        "$id": "edgeplan/net-list/1",
        "format": "UTF-8, a header row, columns separated by , or ; (decimal comma with ; only)",
        "tables": {
            "nets.csv": list(_columns(columns.NET_COLUMNS)),
            "routes.csv": list(_columns(columns.ROUTE_COLUMNS)),
            "limit files": limit_columns,
        },
    }


def results_schema() -> dict[str, Any]:
    """Return the JSON schema of a results file.

    Returns
    -------
    dict
        Draft 2020-12.

    Examples
    --------
    >>> results_schema()["$id"]
    'edgeplan/results/1'
    """
    schema = TypeAdapter(Results).json_schema(mode="serialization")
    schema["properties"]["schema"] = {"const": SCHEMA, "type": "string"}
    return {"$schema": DIALECT, "$id": SCHEMA, **schema, "title": "results"}


SCHEMAS: dict[str, Callable[[], dict[str, Any]]] = {
    "board": board_schema,
    "net-list": net_list_schema,
    "results": results_schema,
}


def text(name: str | None = None) -> str:
    """Return one schema, or all of them by name, as JSON.

    Parameters
    ----------
    name : str, optional
        board, net-list or results.

    Returns
    -------
    str
        Equal bytes for equal versions; ends with a line break.

    Raises
    ------
    KeyError
        For another name.

    Examples
    --------
    >>> list(json.loads(text()))
    ['board', 'net-list', 'results']
    """
    chosen = SCHEMAS[name]() if name else {key: schema() for key, schema in SCHEMAS.items()}
    return json.dumps(chosen, indent=1, ensure_ascii=False) + "\n"
