"""Settings of the documentation; the picture of the tutorial is drawn by the tool itself."""

import re
from pathlib import Path
from typing import Any

from sphinx.application import Sphinx

from edgeplan import __version__

project = "edgeplan"
author = "the edgeplan developers"
copyright = author  # noqa: A001 - the name is Sphinx's; no year, so that equal trees build equally
release = version = __version__

extensions = [
    "myst_parser",
    "sphinx.ext.autodoc",
    "sphinx.ext.mathjax",
    "sphinx.ext.napoleon",
]
myst_enable_extensions = ["colon_fence", "dollarmath"]
myst_heading_anchors = 3
exclude_patterns = ["_build"]
nitpicky = False

autodoc_default_options = {"exclude-members": "model_config"}
autodoc_member_order = "bysource"
autodoc_typehints = "none"  # docstrings say shapes and units, which types cannot
napoleon_google_docstring = False
napoleon_use_rtype = False

html_theme = "furo"
html_title = "edgeplan"
html_copy_source = False
default_role = "py:obj"
suppress_warnings = ["ref.python"]  # "Band" is a word of two rooms; their pages say which

REFERENCE = re.compile(r"^(\s*)\.\. \[(\d+)\] ")
HERE = Path(__file__).parent
GENERATED = HERE / "_generated"
PACKAGE = HERE.parent / "edgeplan"
ROOMS = {
    "formulas": ("Formulas", "Arrays in, arrays out; nothing of a board.", ["physics"]),
    "checks": ("Emission, timing and shape", "A module each.", ["emission", "timing", "fidelity"]),
    "tables": ("Limits and levels", "Shipped tables and their look-up.", ["limits", "levels"]),
}
MODULE = """
## {name}

```{{eval-rst}}
.. automodule:: edgeplan.{name}
   :members:
```
"""


def draw(_app: Sphinx) -> None:
    """Draw the tutorial's picture from the example it talks about."""
    from edgeplan.plan import explain
    from edgeplan.reports import pictures

    picture = GENERATED / "lamp_clk.svg"
    GENERATED.mkdir(exist_ok=True)
    results = explain(HERE.parent / "examples" / "starter", "LAMP_CLK")
    picture.write_bytes(pictures.draw(results, ".svg"))


def list_modules(_app: Sphinx) -> None:
    """Write a page per room with all of its modules, so that a new file needs no entry."""
    GENERATED.mkdir(exist_ok=True)
    for page, (title, text, rooms) in ROOMS.items():
        files = [p for room in rooms for p in sorted((PACKAGE / room).glob("[!_]*.py"))]
        names = [f"{path.parent.name}.{path.stem}" for path in files]
        modules = "".join(MODULE.format(name=name) for name in names)
        (GENERATED / f"{page}.md").write_text(f"# {title}\n\n{text}\n{modules}", "utf-8")


def list_references(
    _app: Sphinx, _what: str, _name: str, _obj: Any, _options: Any, lines: list[str]
) -> None:
    """Write numbered references as a list: their numbers are unique in a docstring, not a page."""
    lines[:] = [REFERENCE.sub(r"\1*  ", line).replace("]_", "]") for line in lines]


def setup(app: Sphinx) -> None:
    """Draw and list before the pages are read; go over docstrings before they are parsed."""
    app.connect("builder-inited", draw)
    app.connect("builder-inited", list_modules)
    app.connect("autodoc-process-docstring", list_references, priority=400)
