"""Ways a net radiates: a module each, by name; imported when asked for."""

from importlib import import_module
from types import ModuleType

MECHANISMS = {
    "trace": "edgeplan.emission.trace",
    "cable": "edgeplan.emission.cable",
    "inner_layer": "edgeplan.emission.inner_layer",
    "measured_transfer": "edgeplan.emission.measured_transfer",
}


def mechanism_of(name: str) -> ModuleType:
    """Look up the module of a mechanism: its ``MODEL`` and ``field_per_forward_ampere``.

    >>> mechanism_of("trace").MODEL.name
    'trace'
    """
    return import_module(MECHANISMS[name])
