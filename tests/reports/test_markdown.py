"""A merge request shows names as they stand; an independent Markdown reader is the judge."""

import dataclasses
import re

import pytest

from edgeplan import reports
from edgeplan.reports.markdown import escaped

NAMES = [
    "SDR_DQ0",
    "_A_ *B* ~C~",
    "a|b",
    "`x`",
    "<script>alert(1)</script>",
    "![i](http://x.example)",
    "https://x.example/y",
    "www.x.example",
    "@all #12 $y$",
    r"back\slash",
    "&lt;",
]


@pytest.fixture
def html():
    """Return a reader of tables, links and strike-through."""
    markdown_it = pytest.importorskip("markdown_it")
    return (
        markdown_it.MarkdownIt("commonmark", {"html": True})
        .enable(["table", "strikethrough"])
        .render
    )


@pytest.mark.parametrize("name", NAMES)
def test_a_name_is_shown_as_it_stands(name, html):
    shown = html(f"| a |\n|:--|\n| {escaped(name)} |\n")
    cell = re.search(r"<td[^>]*>(.*?)</td>", shown)[1]
    assert "<" not in cell
    plain = cell.replace("&lt;", "<").replace("&gt;", ">").replace("&quot;", '"')
    assert plain.replace("\u200b", "").replace("&amp;", "&") == name


@pytest.mark.parametrize("name", NAMES)
def test_nothing_mentions_links_or_opens_a_formula(name):
    text = escaped(name)
    assert not re.search(r"[@$`|<>\[\]]|://|www\.|(?<!&)#", text)


def test_every_row_of_a_table_has_the_cells_of_its_heading(results):
    net = dataclasses.replace(results.nets[0], net="a|b", proposal_text="x | y")
    text = reports.render(dataclasses.replace(results, nets=[net, *results.nets]), "markdown")
    for block in re.findall(r"(?:^\|.*\n)+", text, re.MULTILINE):
        assert len({line.count("|") for line in block.splitlines()}) == 1


def test_nets_to_change_come_before_those_inside(results):
    text = reports.render(results, "markdown")
    assert text.index("### Nets to change or to settle (9)") < text.index("SDR_CLK")
    assert text.index("### Nets inside as drawn (3)") < text.index("UART_TX | inside")
