"""A board folder as one record, or every problem of every file in one pass."""

from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from edgeplan import levels
from edgeplan.board import (
    Board,
    BoardFile,
    Columns,
    Driver,
    Group,
    Interface,
    Receiver,
    RouteSegment,
)
from edgeplan.errors import InputError, Problem
from edgeplan.readers import (
    frequency_tables,
    limit_table,
    measured,
    models,
    net_checks,
    netlist,
    references,
    routes,
    toml,
    wording,
)
from edgeplan.readers.files import Folder
from edgeplan.readers.models import Filled, ModelFiles
from edgeplan.readers.references import EACH, Names

BOARD_FILE = "board.toml"
FROM_FILE = {"from_file": True}  # numbers without a unit are refused


def read_board(path: Path) -> Board:
    """Read a board folder.

    Parameters
    ----------
    path : Path
        The folder, or the board.toml in it.

    Returns
    -------
    Board
        SI inside, with the hash of every file read.

    Raises
    ------
    InputError
        Every problem of every file, sorted by file, row and column.

    Notes
    -----
    A missing value is no problem here: it stays None and leaves its net undecided.
    """
    path = Path(path)
    folder = Folder(path if path.is_dir() else path.parent)
    document = _document(folder, BOARD_FILE if path.is_dir() else path.name)
    file = _validated(BoardFile, document, folder.problems) if document else None
    nets, notes = _nets(folder, document)
    segments = _routes(folder, document, nets)
    limits = _limits(folder, document) if document else []
    transfers = []
    filled = Filled()
    if document:
        folder.problems += frequency_tables.problems(document)
        own = {line.id: line for line in limits}
        transfers = measured.read(folder, document, file, own)
        filled = _models(folder, document, nets)
    if folder.problems or file is None or nets is None:
        raise InputError(folder.problems)
    return Board(
        file=filled.into(file),
        nets=tuple(entry.net(nets.file) for entry in nets.entries.values()),
        routes=tuple(segments),
        user_limits=tuple(limits),
        transfers=tuple(transfers),
        inputs=tuple(folder.inputs[name] for name in sorted(folder.inputs)),
        notes=(*notes, *filled.notes),
    )


def _document(folder: Folder, name: str) -> toml.Document | None:
    """Parse board.toml."""
    text = folder.text(name)
    if text is None:
        return None
    document = toml.read(text, name)
    if isinstance(document, Problem):
        folder.problems.append(document)
        return None
    return document


def _validated(
    model: type[BoardFile], document: toml.Document, problems: list[Problem]
) -> BoardFile | None:
    """Validate the whole file."""
    try:
        return model.model_validate(document.data, context=FROM_FILE)
    except ValidationError as error:
        problems += wording.problems(error, document, model)
        return None


def _part(model: type[BaseModel], data: Any) -> Any:
    """Validate a part of the file alone; None if it is not in order (told elsewhere)."""
    try:
        return model.model_validate(data, context=FROM_FILE)
    except ValidationError:
        return None


def _nets(
    folder: Folder, document: toml.Document | None
) -> tuple[netlist.NetList | None, list[str]]:
    """Read nets.csv with what board.toml says about its columns and groups."""
    problems = folder.problems
    text = folder.text(netlist.FILE)
    data = document.data if document else {}
    if text is None:
        names = Names.of(data, levels.ids())
        problems += references.problems(document, names, None) if document else ()
        return None, []
    columns = (_part(Columns, data.get("columns", {})) or Columns()) if document else None
    nets = netlist.read(text, columns, problems)
    if document is None:
        return nets, []
    owned = {name: set(entry.values) for name, entry in nets.entries.items()}
    notes = netlist.apply_groups(nets, _parts(Group, document, "group"), document)
    names = Names.of(data, levels.ids())
    pairs = [str(net) for _, net in references.found(data, ("pair", EACH, "nets", EACH))]
    net_checks.complete(nets, names, pairs, owned)
    problems += net_checks.problems(nets, names)
    problems += references.problems(document, names, nets.names() if nets.entries else None)
    return nets, notes


def _routes(
    folder: Folder, document: toml.Document | None, nets: netlist.NetList | None
) -> list[RouteSegment]:
    """Read routes.csv if there is one."""
    if not folder.has(routes.FILE):
        return []
    text = folder.text(routes.FILE)
    if text is None:
        return []
    names = Names.of(document.data, ()) if document else None
    columns = _part(Columns, document.data.get("columns", {})) if document else None
    return routes.read(text, nets, names, columns, folder.problems)


def _limits(folder: Folder, document: toml.Document) -> list[Any]:
    """Read the user's limit tables and hold the ids of the target against what there is."""
    lines = []
    own = []
    for path, name in references.found(document.data, ("emission", "limit_files", EACH)):
        if not isinstance(name, str):
            continue
        own.append(limit_table.limit_id(name))
        text = folder.text(name, document.where(path))
        line = limit_table.line(text, name, folder.problems) if text is not None else None
        lines += [line] if line is not None else []
    folder.problems += references.limit_problems(document, own)
    return lines


def _models(folder: Folder, document: toml.Document, nets: netlist.NetList | None) -> Filled:
    """Fill drivers and inputs from their model files."""
    drivers = {**_bare_drivers(document), **_parts(Driver, document, "driver")}
    filled = ModelFiles(folder, document).fill(drivers, _parts(Receiver, document, "receiver"))
    interfaces = _parts(Interface, document, "interface").values()
    entries = nets.entries.values() if nets else ()
    uses = [
        (str(entry.values.get("interface")), str(name))
        for entry in entries
        for name in entry.values.get("driver", ())
    ]
    supplied = models.supplied(filled, interfaces, uses)
    folder.problems += models.supply_problems(document, supplied)
    filled.notes += models.supply_notes(supplied)
    return filled


def _bare_drivers(document: toml.Document) -> dict[int, Any]:
    """Return drivers with their models alone, so that a fault beside a model does not hide it."""
    found = {}
    for path, value in references.found(document.data, ("driver", EACH)):
        named = references.found(value, ("settings", EACH))
        bare = [_only(s, "setting", "model") for _, s in named if isinstance(s, dict)]
        if isinstance(value, dict) and "ibis" in value:
            found[int(path[-1])] = _part(Driver, {**_only(value, "name", "ibis"), "settings": bare})
    return {index: driver for index, driver in found.items() if driver is not None}


def _only(table: dict[str, Any], *keys: str) -> dict[str, Any]:
    """Return a part of a table."""
    return {key: table[key] for key in keys if key in table}


def _parts(model: type[Any], document: toml.Document, key: str) -> dict[int, Any]:
    """Return the tables of a list that are in order, by their place."""
    found = references.found(document.data, (key, EACH))
    parts = ((int(path[-1]), _part(model, value)) for path, value in found)
    return {index: part for index, part in parts if part is not None}
