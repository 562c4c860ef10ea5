"""A listing of a model file as a table, as [[driver]] blocks, as JSON or as CSV."""

import csv
import io
import json
from collections.abc import Callable, Iterable, Iterator, Mapping
from typing import Any

from edgeplan.board import Range
from edgeplan.driver_listing import (
    DriverFound,
    Listing,
    SettingFound,
    input_values,
)
from edgeplan.driver_listing import (
    listing as list_drivers,
)
from edgeplan.driver_models import DEFAULT_IMPEDANCE_OHM, setting_fields
from edgeplan.errors import InputError, Problem
from edgeplan.ibis import Model, ModelFile
from edgeplan.names import instead

SCHEMA = "edgeplan/drivers/1"
# field of a setting: its key in board.toml, the unit there, how many of it are one of SI
_FIELDS = {
    "resistance_ohm": ("resistance", "ohm", 1.0),
    "resistance_up_ohm": ("resistance_up", "ohm", 1.0),
    "resistance_down_ohm": ("resistance_down", "ohm", 1.0),
    "edge_s": ("edge", "ns", 1e9),
    "edge_up_s": ("edge_up", "ns", 1e9),
    "edge_down_s": ("edge_down", "ns", 1e9),
    "capacitance_f": ("capacitance", "pF", 1e12),
}
_HEADINGS = ("driver", "setting", "up Ω", "down Ω", "rising ns", "falling ns", "pad pF", "source")
_INPUT_HEADINGS = ("input", "pF", "low V", "high V", "source")
_WIDTH = 110
_ENDS = ("min", "typ", "max")


def table(listing: Listing) -> str:
    """Everything a person wants to know of a file, as aligned text.

    Parameters
    ----------
    listing : Listing
        Of one file.

    Returns
    -------
    str
        Several tables, with a last line break.
    """
    parts = [_head(listing), _pins(listing), _selectors(listing), _settings(listing)]
    parts += [_inputs(listing), _left_out(listing), _remarks(listing)]
    return "\n\n".join("\n".join(lines) for lines in parts if lines) + "\n"


def toml(listing: Listing) -> str:
    """Return drivers as tables that can be pasted into board.toml.

    Parameters
    ----------
    listing : Listing
        Of one file.

    Returns
    -------
    str
        A ``[[driver]]`` per driver, its numbers with provenance ``model`` and file and line.
    """
    lines = [f"# {_comment(line)}" for line in _head(listing)]
    for driver in listing.drivers:
        lines += ["", *_block(driver, listing)]
    return "\n".join(lines) + "\n"


def as_json(listing: Listing) -> str:
    """Return everything as JSON, SI inside; null where the file states nothing."""
    file, component = listing.file, listing.component
    data: dict[str, Any] = {
        "schema": SCHEMA,
        "file": file.file,
        "sha256": file.sha256,
        "version": file.version,
        "component": component.name if component else None,
        "components": [c.name for c in file.components],
        "impedance_ohm": listing.impedance_ohm,
        "pins": [
            {"pin": p.pin, "signal": p.signal, "model": p.model}
            for p in (component.pins if component else ())
        ],
        "selectors": [
            {"selector": s.name, "models": [{"model": n, "text": t} for n, t in s.entries]}
            for s in file.selectors.values()
        ],
        "drivers": [
            {
                "driver": driver.driver,
                "found_by": driver.found_by,
                "pins": list(driver.pins),
                "settings": [_record(s, listing) for s in driver.settings],
            }
            for driver in listing.drivers
        ],
        "inputs": [
            {"model": m.name, "source": _source(listing, m), **_plain(input_values(m))}
            for m in listing.inputs
        ],
        "left_out": [{"model": n, "row": row, "why": why} for n, row, why in listing.left_out],
    }
    return json.dumps(data, indent=1, ensure_ascii=False) + "\n"


def as_csv(listing: Listing) -> str:
    """Return a row per setting, units in the headers; an empty cell where nothing is stated."""
    sides = [field for field in _FIELDS if field not in ("resistance_ohm", "edge_s")]
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    columns = [f"{_FIELDS[f][0]}_{end}_{_FIELDS[f][1].lower()}" for f in sides for end in _ENDS]
    writer.writerow(["driver", "setting", "models", *columns, "pins", "provenance", "source"])
    for driver in listing.drivers:
        for found in driver.settings:
            given = _both_sides(found)
            cells = [_cell(given.get(f), end, _FIELDS[f][2]) for f in sides for end in _ENDS]
            first = driver.driver, found.setting, " ".join(found.models)
            source = _source(listing, found.values.model)
            writer.writerow([*first, *cells, " ".join(driver.pins), "model", source])
    return text.getvalue()


FORMATS: dict[str, Callable[[Listing], str]] = {
    "table": table,
    "toml": toml,
    "json": as_json,
    "csv": as_csv,
}


def of_file(
    file: ModelFile, impedance: float, component: str | None, models: str | None, form: str
) -> str:
    """Return the listing of a file in one format.

    Parameters
    ----------
    file : ModelFile
        As read.
    impedance : float
        Of the line. [ohm]
    component : str or None
        Name of a component; the only one without it.
    models : str or None
        Pattern of names that are the settings of one driver.
    form : {"table", "toml", "json", "csv"}
        How it is written.

    Returns
    -------
    str
        With a last line break.

    Raises
    ------
    InputError
        If the file has no such component, or no model fits the pattern.
    """
    part = file.component(component)
    if component is not None and part is None:
        hint = instead(component, [c.name for c in file.components])
        raise InputError([Problem(f"no component {component!r}", file.file, 1, 1, "", hint)])
    found = list_drivers(file, part, impedance, models)
    if models is not None and not found.drivers:
        hint = instead(models, [name for name, model in file.models.items() if model.drives])
        raise InputError([Problem(f"no driving model fits {models!r}", file.file, 1, 1, "", hint)])
    return FORMATS[form](found)


def _head(listing: Listing) -> list[str]:
    """Say which file, which component, and what the numbers mean."""
    file = listing.file
    component = f"component {listing.component.name}" if listing.component else "no component"
    lines = [
        f"{file.file}, version {file.version or 'not stated'}, {component}",
        f"load line {listing.impedance_ohm:g} Ω; edges: 10–90 % of the open output",
    ]
    if listing.component is None and file.components:
        names = ", ".join(c.name for c in file.components)
        lines.append(f"components: {names}; name one for its pins and package")
    return lines


def _pins(listing: Listing) -> list[str]:
    """List what each model or selector is used for."""
    if listing.component is None:
        return []
    used: dict[str, list[str]] = {}
    for pin in listing.component.pins:
        used.setdefault(pin.model, []).append(pin.pin)
    rows = [(name, str(len(pins)), _few(pins)) for name, pins in used.items()]
    return _aligned([("model of pins", "count", "pins"), *rows])


def _few(words: Iterable[str]) -> str:
    """Return as many words as fit a line."""
    words = list(words)
    text = " ".join(words)
    while len(text) > _WIDTH // 2 and len(words) > 1:
        words = words[: len(words) // 2]
        text = " ".join([*words, "…"])
    return text


def _selectors(listing: Listing) -> list[str]:
    """List the models of each selector; the first is the default."""
    rows = [
        (selector.name, name, text + (" (default)" if k == 0 else ""))
        for selector in listing.file.selectors.values()
        for k, (name, text) in enumerate(selector.entries)
    ]
    return _aligned([("selector", "model", "what the file says"), *rows]) if rows else []


def _settings(listing: Listing) -> list[str]:
    """List drivers and settings at all corners."""
    rows = []
    for driver in listing.drivers:
        for found in driver.settings:
            given = _both_sides(found)
            cells = [_three(given.get(f), _FIELDS[f][2]) for f in _FIELDS if f in _SHOWN]
            others = f", also {', '.join(found.models[1:])}" if found.models[1:] else ""
            source = f"model {_source(listing, found.values.model)}{others}"
            rows.append((driver.driver, found.setting, *cells, source))
    if not rows:
        return ["no model drives"]
    first = "settings, fast/typical/slow; ? is not stated by the file"
    return [first, *_aligned([_HEADINGS, *rows])]


_SHOWN = ("resistance_up_ohm", "resistance_down_ohm", "edge_up_s", "edge_down_s", "capacitance_f")


def _inputs(listing: Listing) -> list[str]:
    """List inputs with their thresholds."""
    rows = []
    for model in listing.inputs:
        values = input_values(model)
        cells = [_three(values["capacitance_f"], 1e12)]
        cells += ["?" if values[k] is None else f"{values[k]:g}" for k in ("vil_v", "vih_v")]
        rows.append((model.name, *cells, f"model {_source(listing, model)}"))
    return _aligned([_INPUT_HEADINGS, *rows]) if rows else []


def _left_out(listing: Listing) -> list[str]:
    """List models that are neither setting nor input."""
    return [f"left out: {name}, line {row}: {why}" for name, row, why in listing.left_out]


def _remarks(listing: Listing) -> list[str]:
    """List where each edge comes from and what is strange about the models."""
    lines = []
    for driver in listing.drivers:
        for found in driver.settings:
            values = found.values
            sides = {"rising": values.up, "falling": values.down}
            edges = [f"{word} by {s.source}" for word, s in sides.items() if s and s.source]
            remarks = [f"edge {', '.join(edges)}"] if edges else []
            lines += [f"{found.setting}: {text}" for text in (*remarks, *values.notes)]
    return ["remarks", *dict.fromkeys(lines)] if lines else []


def _block(driver: DriverFound, listing: Listing) -> Iterator[str]:
    """Write one driver for board.toml."""
    file, component = listing.file.file, listing.component
    models = ", ".join(
        f"{{setting = {_quoted(s.setting)}, model = {_quoted(s.models[0])}}}"
        for s in driver.settings
    )
    named = f", component = {_quoted(component.name)}" if component else ""
    if listing.impedance_ohm != DEFAULT_IMPEDANCE_OHM:
        named += f', impedance = "{listing.impedance_ohm:g} ohm"'
    yield "# with the file in the board folder the same is said by"
    yield f"# ibis = {{file = {_quoted(file)}{named}}}"
    yield f"# settings = [{models}]"
    yield "[[driver]]"
    yield f"name = {_quoted(driver.driver)}"
    yield f"programmable = {str(len(driver.settings) > 1).lower()}"
    yield f"source = {_quoted(file)}"
    yield "settings = ["
    for found in driver.settings:
        yield from (f"  # {_comment(note)}" for note in found.values.notes)
        yield f"  {{{', '.join(_pairs(found, listing))}}},"
    yield "]"


def _pairs(found: SettingFound, listing: Listing) -> Iterator[str]:
    """Write keys and values of one setting; what the file does not state is left out."""
    yield f"setting = {_quoted(found.setting)}"
    for field, given in setting_fields(found.values).items():
        key, unit, scale = _FIELDS[field]
        ends = [(e, getattr(given, e)) for e in _ENDS if given and getattr(given, e) is not None]
        if ends:
            inner = ", ".join(f'{end} = "{value * scale:.4g} {unit}"' for end, value in ends)
            yield f"{key} = {{{inner}}}"
    yield 'provenance = "model"'
    yield f"source = {_quoted(_source(listing, found.values.model))}"


def _record(found: SettingFound, listing: Listing) -> dict[str, Any]:
    """Return one setting for JSON."""
    values = found.values
    return {
        "setting": found.setting,
        "models": list(found.models),
        "text": found.about,
        **_plain(setting_fields(values)),
        "edge_from": {
            word: side.source for word, side in (("up", values.up), ("down", values.down)) if side
        },
        "provenance": "model",
        "source": _source(listing, values.model),
        "notes": list(values.notes),
    }


def _plain(fields: Mapping[str, Any]) -> dict[str, Any]:
    """Turn ranges into plain tables."""
    return {k: v.model_dump() if isinstance(v, Range) else v for k, v in fields.items()}


def _both_sides(found: SettingFound) -> dict[str, Range[float] | None]:
    """Return the fields of a setting with the one side of a one-sided driver at its place."""
    given = setting_fields(found.values)
    word = "_up" if found.values.up is not None else "_down"
    for plain, side in (("resistance_ohm", "resistance{}_ohm"), ("edge_s", "edge{}_s")):
        if plain in given:
            given[side.format(word)] = given.pop(plain)
    return given


def _source(listing: Listing, model: Model) -> str:
    """Return where a model stands."""
    return f"{listing.file.file}:{model.row}"


def _three(given: Any, scale: float) -> str:
    """Write fast, typical and slow, or smallest to largest."""
    if given is None:
        return "–"
    values = [getattr(given, end) for end in _ENDS]
    return "/".join("?" if v is None else f"{v * scale:.3g}" for v in values)


def _cell(given: Range[float] | None, end: str, scale: float) -> str:
    """Write one number of a CSV row."""
    value = getattr(given, end) if given else None
    return "" if value is None else f"{value * scale:.4g}"


def _aligned(rows: list[tuple[str, ...]]) -> list[str]:
    """Put rows into columns."""
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    return [
        "  ".join(c.ljust(w) for c, w in zip(row, widths, strict=True)).rstrip() for row in rows
    ]


def _quoted(text: str) -> str:
    """Write a text for TOML: the escapes of JSON are a part of those of TOML."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _comment(text: str) -> str:
    """Write a text into a comment of one line."""
    return "".join(letter if letter.isprintable() else "?" for letter in text)
