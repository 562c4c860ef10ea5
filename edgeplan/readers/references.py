"""Names that board.toml gives, and names in it that nothing answers to."""

from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from edgeplan import limits
from edgeplan.errors import Problem
from edgeplan.names import instead, matches
from edgeplan.readers.columns import NET_COLUMNS, ROUTE_COLUMNS, known_headers
from edgeplan.readers.toml import Document, Path
from edgeplan.units import QUANTITIES, UnitError

EACH = "*"  # every element of a list
# tables whose elements have a name of their own
_NAMED = {
    ("stack", EACH): "layer",
    ("cable", EACH): "name",
    ("clock_source", EACH): "name",
    ("interface", EACH): "name",
    ("driver", EACH): "name",
    ("driver", EACH, "settings", EACH): "setting",
    ("receiver", EACH): "name",
    ("level", EACH): "name",
}


@dataclass(frozen=True, slots=True)
class Names:
    """What other parts of the input may refer to; drivers with their settings."""

    layers: Collection[str]
    interfaces: Collection[str]
    drivers: Mapping[str, tuple[str, ...]]
    receivers: Collection[str]
    levels: Collection[str]

    @classmethod
    def of(cls, data: Mapping[str, Any], shipped_levels: Iterable[str]) -> "Names":
        """Collect the names of a board file, whether or not the rest of it is in order.

        Parameters
        ----------
        data : mapping
            board.toml as parsed.
        shipped_levels : iterable of str
            Level families that need no [[level]] table.

        Returns
        -------
        Names
            Layers are those that carry copper.

        Examples
        --------
        >>> data = {"driver": [{"name": "d1", "settings": [{"setting": "FIX"}]}]}
        >>> Names.of(data, ["lvttl-3v3"]).drivers
        {'d1': ('FIX',)}
        """
        # a table in single brackets is told about elsewhere; its name is a name all the same
        data = {key: [value] if isinstance(value, dict) else value for key, value in data.items()}
        signals = [
            layer
            for _, layer in found(data, ("stack", EACH))
            if isinstance(layer, dict) and layer.get("kind") not in ("dielectric", "plane")
        ]
        drivers = {}
        for path, name in found(data, ("driver", EACH, "name")):
            settings = found(data, (*path[:-1], "settings", EACH, "setting"))
            drivers[str(name)] = tuple(str(setting) for _, setting in settings)
        return cls(
            layers=[str(layer.get("layer")) for layer in signals],
            interfaces=_texts(data, ("interface", EACH, "name")),
            drivers=drivers,
            receivers=_texts(data, ("receiver", EACH, "name")),
            levels=[*shipped_levels, *_texts(data, ("level", EACH, "name"))],
        )


def found(data: Any, pattern: Path) -> Iterator[tuple[Path, Any]]:
    """Yield path and value of everything a pattern of keys leads to.

    Examples
    --------
    >>> list(found({"pair": [{"nets": ["A", "B"]}]}, ("pair", EACH, "nets", EACH)))
    [(('pair', 0, 'nets', 0), 'A'), (('pair', 0, 'nets', 1), 'B')]
    """
    if not pattern:
        yield (), data
        return
    first, *rest = pattern
    for key in _steps(data, first):
        for path, value in found(data[key], tuple(rest)):
            yield (key, *path), value


def _steps(data: Any, key: str | int) -> Iterable[Any]:
    """Return the keys one step of a pattern leads to."""
    if key == EACH and isinstance(data, list):
        return range(len(data))
    if isinstance(data, dict) and key in data:
        return [key]
    if isinstance(data, list) and isinstance(key, int) and key < len(data):
        return [key]
    return []


def _texts(data: Mapping[str, Any], pattern: Path) -> list[str]:
    """Return the texts a pattern leads to."""
    return [value for _, value in found(data, pattern) if isinstance(value, str)]


def problems(document: Document, names: Names, nets: Collection[str] | None) -> Iterator[Problem]:
    """Yield names given twice, names nothing answers to, and ranges in the wrong order.

    Parameters
    ----------
    document : Document
        board.toml.
    names : Names
        What it names.
    nets : collection of str or None
        Names of nets; None if the net list cannot be read.

    Yields
    ------
    Problem
        At the key.
    """
    yield from _named_twice(document)
    yield from _dangling(document, ("interface", EACH, "levels"), "level family", names.levels)
    yield from _dangling(document, ("receiver", EACH, "levels"), "level family", names.levels)
    direction = ("interface", EACH, "direction", EACH)
    yield from _dangling(document, (*direction, "driver"), "driver", names.drivers)
    yield from _group_names(document, names)
    yield from _stated_settings(document, names)
    for layer in document.data.get("impedance", {}):
        if layer not in names.layers:
            where = document.where(("impedance", layer))
            yield where.problem(f"no signal layer {layer!r}", instead(layer, names.layers))
    yield from _ranges(document, document.data, ())
    yield from _renamed_to_nothing(document)
    if nets is not None:
        yield from _dangling(document, ("interface", EACH, "clock_net"), "net", nets)
        yield from _dangling(document, ("pair", EACH, "nets", EACH), "net", nets)
        yield from _patterns(document, ("clock_source", EACH, "nets", EACH), nets)
        yield from _patterns(document, ("transfer", EACH, "nets", EACH), nets)


def _named_twice(document: Document) -> Iterator[Problem]:
    """Elements of one list have different names."""
    for pattern, key in _NAMED.items():
        first: dict[tuple[Path, str], Path] = {}
        for path, name in found(document.data, (*pattern, key)):
            seen = first.setdefault((path[:-2], str(name)), path)
            if seen != path:
                message = f"{name!r} is named twice, first in row {document.where(seen).row}"
                yield document.where(path).problem(message)


def _dangling(
    document: Document, pattern: Path, what: str, known: Collection[str]
) -> Iterator[Problem]:
    """Names at a pattern that are not known."""
    for path, name in found(document.data, pattern):
        if isinstance(name, str) and name not in known:
            yield document.where(path).problem(f"no {what} {name!r}", instead(name, known))


def _group_names(document: Document, names: Names) -> Iterator[Problem]:
    """Yield what groups refer to in vain; settings are judged with the driver of each net."""
    for key, known in (
        ("interface", names.interfaces),
        ("driver", names.drivers),
        ("receiver", names.receivers),
        ("layer", names.layers),
    ):
        for path, value in found(document.data, ("group", EACH, key)):
            for name in value.split() if isinstance(value, str) else ():
                if name not in known:
                    hint = instead(name, known) if key == "layer" else or_add(key, name, known)
                    what = "signal layer" if key == "layer" else key
                    yield document.where(path).problem(f"no {what} {name!r}", hint)


def or_add(what: str, name: str, known: Iterable[str]) -> str:
    """Return the hint for a name that may be misspelled or not described yet.

    Examples
    --------
    >>> or_add("driver", "d3", ["d3f", "d4f"])
    'did you mean "d3f"? Or add a [[driver]] named "d3" to board.toml'
    """
    hint = instead(name, known)
    start = f"{hint} Or" if hint.endswith("?") else f"{hint}; or"
    article = "an" if what[0] in "aeiou" else "a"
    return f'{start} add {article} [[{what}]] named "{name}" to board.toml'


def _stated_settings(document: Document, names: Names) -> Iterator[Problem]:
    """Yield settings of clock-to-output delays that their driver does not have."""
    direction = ("interface", EACH, "direction", EACH)
    for path, setting in found(document.data, (*direction, "clock_to_output", "setting")):
        driver = document.value(path[:-2]).get("driver")
        known = names.drivers.get(str(driver))
        if known is not None and setting not in known:
            message = f"driver {driver!r} has no setting {setting!r}"
            yield document.where(path).problem(message, instead(str(setting), known))


def _patterns(document: Document, where: Path, nets: Collection[str]) -> Iterator[Problem]:
    """Each pattern at a place fits a net."""
    for path, pattern in found(document.data, where):
        if isinstance(pattern, str) and not any(matches(pattern, net) for net in nets):
            yield document.where(path).problem(f"no net fits {pattern!r}", instead(pattern, nets))


def _renamed_to_nothing(document: Document) -> Iterator[Problem]:
    """Yield renamed columns whose new name no table has."""
    known = {**known_headers(NET_COLUMNS), **known_headers(ROUTE_COLUMNS)}
    for path, renames in found(document.data, ("columns", "rename")):
        for old, new in renames.items() if isinstance(renames, dict) else ():
            if isinstance(new, str) and new not in known:
                where = document.where((*path, old))
                yield where.problem(f"no such column {new!r}", instead(new, known))


def limit_problems(document: Document, own: Collection[str]) -> Iterator[Problem]:
    """Yield limit lines that are neither shipped nor the user's own.

    Parameters
    ----------
    document : Document
        board.toml.
    own : collection of str
        Ids of the user's own lines.

    Yields
    ------
    Problem
        At the id; half an id or "class B" is answered with the ids it may mean.
    """
    for path, name in found(document.data, ("emission", "limits", EACH)):
        if isinstance(name, str) and name not in limits.ids() and name not in own:
            likely = limits.matching(name)
            few = f"did you mean {' or '.join(likely)}?" if likely else ""
            hint = few or "edgeplan limits prints all ids"
            yield document.where(path).problem(f"no limit line {name!r}", hint)


def _ranges(document: Document, data: Any, path: Path) -> Iterator[Problem]:
    """Minimum, typical and maximum come in this order."""
    if isinstance(data, list):
        for index, element in enumerate(data):
            yield from _ranges(document, element, (*path, index))
    if not isinstance(data, dict):
        return
    for key, element in data.items():
        yield from _ranges(document, element, (*path, key))
    stated = [key for key in ("min", "typ", "max") if isinstance(data.get(key), str)]
    values = _same_quantity([data[key] for key in stated])
    for index, key in enumerate(stated[1:], 1):
        if values and values[index] < values[index - 1]:
            before = stated[index - 1]
            message = f"{key} {data[key]!r} is below {before} {data[before]!r}"
            yield document.where((*path, key)).problem(message, "swap them, or check the units")


def _same_quantity(texts: list[str]) -> list[float]:
    """Return texts as numbers of the first quantity that takes all of them."""
    for quantity in QUANTITIES:
        try:
            return [quantity.parse(text) for text in texts]
        except UnitError:
            continue
    return []
