"""Pages for everybody: markup as the HTML standard wants it, structure as WCAG 2.2 wants it.

The structure is read by html5lib, which parses as the HTML standard prescribes and reports every parse error.
Where WANDERERS_AXE names a copy of axe.min.js (the package axe-core of npm), its rules are run as well.
"""

from __future__ import annotations

import itertools
import os
from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import Any
from xml.etree.ElementTree import Element

import pytest

from tests.report.conftest import Open
from wanderers.report.folder import PAGE

html5lib = pytest.importorskip("html5lib", reason="needs html5lib to read pages as the standard wants")
pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning")  # the browser driver's own sockets

AXE = os.environ.get("WANDERERS_AXE", "")
AXE_RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]
KINDS = ("page", "page from a site", "dossier")


@pytest.fixture(params=KINDS)
def path(request: pytest.FixtureRequest) -> Path:
    folder: Path = request.getfixturevalue(
        "site_report" if request.param == "page from a site" else "half_year_report"
    )
    return min(folder.glob("seasons/mars*.html")) if request.param == "dossier" else folder / PAGE


@pytest.fixture
def tree(path: Path) -> Element:
    return parser_of(path)[1]


def parser_of(path: Path) -> tuple[Any, Element]:
    parser = html5lib.HTMLParser(namespaceHTMLElements=False)
    return parser, parser.parse(path.read_text(encoding="utf-8"))


def text_of(element: Element) -> str:
    return " ".join("".join(element.itertext()).split())


def elements(tree: Element, *tags: str) -> Iterator[Element]:
    return (element for element in tree.iter() if element.tag in tags)


def test_the_markup_has_no_parse_error(path: Path) -> None:
    # HTML Living Standard, 13.2.2 "Parse errors".
    assert parser_of(path)[0].errors == []


def test_language_title_and_landmarks_are_there(tree: Element) -> None:
    # WCAG 2.2: 3.1.1 language of page, 2.4.2 page titled, 2.4.1 bypass blocks.
    assert tree.get("lang") == "en"
    assert [text_of(title) for title in elements(tree, "title")] != [""]
    assert sum(1 for _ in elements(tree, "main")) == 1
    (skip,) = (link for link in elements(tree, "a") if link.get("class") == "skip")
    assert skip.get("href", "")[1:] in {element.get("id") for element in tree.iter()}


def test_headings_go_down_one_level_at_a_time(tree: Element) -> None:
    # WCAG 2.2: 1.3.1 info and relationships.
    levels = [int(heading.tag[1]) for heading in elements(tree, "h1", "h2", "h3", "h4", "h5", "h6")]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(below <= above + 1 for above, below in itertools.pairwise(levels))
    assert all(text_of(heading) for heading in elements(tree, "h1", "h2", "h3", "h4"))


def test_ids_are_unique_and_references_resolve(tree: Element) -> None:
    ids = Counter(element.get("id") for element in tree.iter() if element.get("id"))
    assert [name for name, count in ids.items() if count > 1] == []
    for name in ("aria-labelledby", "aria-describedby", "aria-controls", "for"):
        referred = {part for element in tree.iter() for part in element.get(name, "").split()}
        assert referred <= set(ids)


def test_every_control_picture_link_and_table_has_its_name(tree: Element) -> None:
    # WCAG 2.2: 4.1.2 name, role, value; 1.1.1 non-text content; 2.4.4 link purpose.
    labelled = {
        control for label in elements(tree, "label") if text_of(label) for control in elements(label, "input")
    }
    controls = [*elements(tree, "input")]
    assert controls
    assert [control.attrib for control in controls if control not in labelled] == []
    assert [group.attrib for group in elements(tree, "fieldset") if group.find("legend") is None] == []
    for named in elements(tree, "button", "a", "summary"):
        assert text_of(named) or named.get("aria-label"), named.attrib
    assert all(picture.get("alt") for picture in elements(tree, "img"))
    assert all(table.find("caption") is not None for table in elements(tree, "table"))
    assert all(head.get("scope") in {"col", "row"} for head in elements(tree, "th"))
    for scrolling in (element for element in tree.iter() if element.get("tabindex") == "0"):
        assert scrolling.get("role"), scrolling.attrib
        assert scrolling.get("aria-label"), scrolling.attrib


def test_parts_of_tables_have_no_roles_but_their_own(tree: Element) -> None:
    # ARIA in HTML (W3C), "Document conformance requirements": none is allowed on cells and rows of a table.
    parts = elements(tree, "table", "thead", "tbody", "tr", "th", "td")
    assert [part.attrib for part in parts if "role" in part.attrib] == []


def test_tables_stay_tables_where_rows_are_laid_out_as_cards(open_file: Open, half_year_report: Path) -> None:
    page = open_file(half_year_report / PAGE, "", 390)
    roles = {"#table": "table", "#table tbody tr": "row", "#table tbody td": "cell", ".seasons": "table"}
    assert (
        page.execute_script("return getComputedStyle(document.querySelector('#table tbody tr')).display")
        == "flex"
    )
    for selector, role in roles.items():
        assert page.find_element("css selector", selector).aria_role == role


@pytest.mark.skipif(not AXE, reason="runs where WANDERERS_AXE names a copy of axe.min.js")
@pytest.mark.parametrize("look", ["light", "dark", "night"])
@pytest.mark.parametrize("width", [1440, 390])
def test_axe_finds_no_violation(open_file: Open, path: Path, look: str, width: int) -> None:
    page = open_file(path, f"#look={look}", width)
    page.set_script_timeout(300)
    page.execute_script(Path(AXE).read_text(encoding="utf-8"))
    page.execute_script("for (const part of document.querySelectorAll('details')) part.open = true")
    found = page.execute_async_script(
        "const done = arguments[1]; axe.run({ runOnly: { type: 'tag', values: arguments[0] } }).then((r) =>"
        " done([r.passes.length, r.violations.map((v) => [v.id, v.help, v.nodes.map((n) => n.html)])]));",
        AXE_RULES,
    )
    assert found[0] > 20
    assert found[1] == []
