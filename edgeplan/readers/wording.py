"""What pydantic finds wrong, at its place in the TOML file and in words of the trade."""

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from edgeplan.errors import Problem
from edgeplan.names import instead, nearest
from edgeplan.readers.toml import Document, Path
from edgeplan.units import UnitError

_BOUNDS = {
    "greater_than": "has to be above",
    "greater_than_equal": "has to be at least",
    "less_than": "has to be below",
    "less_than_equal": "has to be at most",
}
_BOUND_KEYS = {"greater_than": "gt", "greater_than_equal": "ge", "less_than": "lt"}
_COUNTS = {"too_short": "few", "too_long": "many"}
_WANTED = {
    "string_type": ("a text", 'write it in quotes: "..."'),
    "float_type": ("a number", "write digits with a decimal point and no quotes"),
    "float_parsing": ("a number", "write digits with a decimal point and no quotes"),
    "int_type": ("a whole number", "write digits without a point and without quotes"),
    "int_parsing": ("a whole number", "write digits without a point and without quotes"),
    "int_from_float": ("a whole number", "write digits without a point and without quotes"),
    "finite_number": ("a number a board can have", ""),
    "bool_type": ("true or false", "write true or false without quotes"),
    "bool_parsing": ("true or false", "write true or false without quotes"),
    "list_type": ("a list", "write it in brackets: [..., ...]"),
    "tuple_type": ("a list", "write it in brackets: [..., ...]"),
    "dict_type": ("a table", "write it in braces: {name = value}"),
    "model_type": ("a table", "write it in braces: {name = value}"),
    "date_type": ("a date", "write it without quotes: 2027-03-31"),
    "date_parsing": ("a date", "write it without quotes: 2027-03-31"),
    "date_from_datetime_parsing": ("a date", "write it without quotes: 2027-03-31"),
}
_LIMIT_IDS = 'limits = ["..."]; edgeplan limits prints all ids'
_ASKED_FOR: dict[tuple[str | int, ...], str] = {  # by path: what to write where nothing stands
    ("emission",): f"add a table [emission] with {_LIMIT_IDS}",
    ("emission", "limits"): f"write {_LIMIT_IDS}",
}


def problems(error: ValidationError, document: Document, model: type[BaseModel]) -> list[Problem]:
    """Return every finding of a validation as problems of the TOML file.

    Parameters
    ----------
    error : ValidationError
        What pydantic found.
    document : Document
        The file it validated.
    model : type of BaseModel
        The record it should have become.

    Returns
    -------
    list of Problem
        One for each wrong value, even where it could have had one of several forms.
    """
    schema = model.model_json_schema()
    findings = [_Finding(detail, document) for detail in error.errors(include_url=False)]
    return [finding.problem(schema) for finding in _one_form_each(findings, document)]


class _Finding:
    """One error with its path in the file; parts of the path that name a form are taken out."""

    def __init__(self, detail: ErrorDetails, document: Document) -> None:
        self.detail = detail
        self.document = document
        self.path: Path = ()
        self.form: tuple[Path, str] | None = None
        parts = detail["loc"]
        for part in parts[:-1] if detail["type"] == "missing" else parts:
            if _has(document, self.path, part):
                self.path = (*self.path, part)
            elif self.form is None:
                self.form = (self.path, str(part))

    def problem(self, schema: Mapping[str, Any]) -> Problem:
        """Word the error."""
        kind = self.detail["type"]
        where = self.document.where(self.path)
        if kind in _COUNTS or (kind == "missing" and isinstance(self.detail["loc"][-1], int)):
            hint = "" if self.document.value(self.path) else _ASKED_FOR.get(self.path, "")
            return where.problem(f"the list has too {_COUNTS.get(kind, 'few')} entries", hint)
        if kind == "missing":
            key = str(self.detail["loc"][-1])
            hint = _ASKED_FOR.get((*self.path, key), f"add {key} = {_example(schema, self, key)}")
            return where.problem(f"{key!r} is missing", hint)
        if kind == "extra_forbidden":
            keys = _properties(schema, self.path[:-1])
            return where.problem(
                f"no such key {self.path[-1]!r}", instead(str(self.path[-1]), keys)
            )
        return where.problem(*self._words(kind))

    def _words(self, kind: str) -> tuple[str, str]:
        """Return message and hint for a wrong value."""
        context = self.detail.get("ctx", {})
        value = self.document.value(self.path)
        if kind == "value_error":
            reason = context["error"]
            if isinstance(reason, UnitError):
                return reason.message, reason.hint
            return str(reason), ""
        if kind in _BOUNDS:
            bound = context[kind_key(kind)]
            percent = 'for per cent write "30 %"' if bound in (1, 1.0, 0.5) else ""
            return f"{value!r} {_BOUNDS[kind]} {bound:g}", percent
        if kind == "literal_error":
            return _none_of(value, context)
        return self._wrong_type(kind, value)

    def _wrong_type(self, kind: str, value: object) -> tuple[str, str]:
        """Return message and hint for a value of the wrong type."""
        wanted, hint = _WANTED.get(kind, ("", ""))
        if not wanted:
            message = self.detail["msg"]
            return f"{message[0].lower()}{message[1:]}", ""
        if isinstance(value, dict) and wanted == "a list":
            name = self.document.label(self.path)
            return f"there may be several {name}", f"write [[{name}]] in double brackets"
        if isinstance(value, list) and wanted == "a table":
            name = self.document.label(self.path)
            return f"there is one {name} only", f"write [{name}] in single brackets"
        if isinstance(value, str) and wanted == "a number" and "," in value:
            return f"{value!r} has a decimal comma", f"write {value.replace(',', '.')}"
        return f"{value!r} is not {wanted}", hint


def kind_key(kind: str) -> str:
    """Return the name under which pydantic states a bound."""
    return _BOUND_KEYS.get(kind, "le")


def _none_of(value: object, context: Mapping[str, Any]) -> tuple[str, str]:
    """Word a text that is none of those allowed."""
    words = str(context["expected"]).replace(" or ", ", ").replace("'", "").split(", ")
    near = nearest(str(value), words)
    return f"{value!r} is none of {', '.join(words)}", f'did you mean "{near}"?' if near else ""


def _has(document: Document, path: Path, part: str | int) -> bool:
    """Tell whether the file has this key or element below a path."""
    holder = document.value(path)
    if isinstance(holder, dict):
        return part in holder
    return isinstance(holder, list) and isinstance(part, int) and part < len(holder)


def _one_form_each(findings: Sequence[_Finding], document: Document) -> Iterator[_Finding]:
    """Where a value may have several forms, keep the findings of the form it was written in."""
    forms: dict[Path, list[str]] = {}
    for finding in findings:
        if finding.form:
            forms.setdefault(finding.form[0], []).append(finding.form[1])
    for finding in findings:
        if finding.form is None:
            yield finding
            continue
        path, form = finding.form
        if form == _written_form(document.value(path), forms[path]):
            yield finding


def _written_form(value: object, forms: Sequence[str]) -> str:
    """Return the form a person had in mind."""
    prefix = "list[" if isinstance(value, list) else "Range[" if isinstance(value, dict) else ""
    return next((form for form in forms if prefix and form.startswith(prefix)), forms[0])


def _example(schema: Mapping[str, Any], finding: _Finding, key: str) -> str:
    """Return what could be written for a missing key."""
    shape = _properties(schema, finding.path).get(key, {})
    for form in (shape, *shape.get("anyOf", ())):
        if form.get("examples"):
            return f'"{form["examples"][0]}"'
        if form.get("enum"):
            return f'"{form["enum"][0]}"'
        if form.get("type") == "array":
            return "[...]"
        if "$ref" in form:
            return "{...}"
    return '"..."' if shape.get("type") == "string" else "..."


def _properties(schema: Mapping[str, Any], path: Path) -> Mapping[str, Any]:
    """Return the keys a table at a path may have, with their shapes."""
    shapes: list[Mapping[str, Any]] = [schema]
    for part in path:
        shapes = [inner for shape in _resolved(shapes, schema) for inner in _below(shape, part)]
    keys: dict[str, Any] = {}
    for shape in _resolved(shapes, schema):
        keys |= shape.get("properties", {})
    return keys


def _resolved(
    shapes: Sequence[Mapping[str, Any]], schema: Mapping[str, Any]
) -> list[Mapping[str, Any]]:
    """Follow references and alternatives."""
    found: list[Mapping[str, Any]] = []
    for shape in shapes:
        if "$ref" in shape:
            name = shape["$ref"].rpartition("/")[2]
            found += _resolved([schema["$defs"][name]], schema)
        elif "anyOf" in shape:
            found += _resolved(shape["anyOf"], schema)
        else:
            found.append(shape)
    return found


def _below(shape: Mapping[str, Any], part: str | int) -> list[Mapping[str, Any]]:
    """Return the shapes one step down."""
    if isinstance(part, str):
        inner = shape.get("properties", {}).get(part) or shape.get("additionalProperties")
        return [inner] if isinstance(inner, dict) else []
    return [shape["items"]] if isinstance(shape.get("items"), dict) else []
