"""The page as HTML: read back with the standard library's parser, without a browser."""

from __future__ import annotations

import json
import re
from collections import Counter
from html.parser import HTMLParser
from typing import Any

import numpy as np
import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.report.calendar_samples import CHECKSUM, ONE_OF_EVERY_KIND, event, table
from tests.report.report_samples import MARS_SEASON, made_up, with_instants
from wanderers import __version__, schema
from wanderers.ephemeris.bodies import Body
from wanderers.report import facts, page_data, words
from wanderers.report.page import page_of
from wanderers.report.page_data import DECIMALS, INSTANTS, NUMBER_OF_ID, packed, steps, table_data, worded
from wanderers.report.pictures import Picture, lean
from wanderers.report.render import rendered

VOID = {"meta", "link", "img", "input", "br"}


class Reader(HTMLParser):
    """Collects elements with their attributes, and the text of scripts and of everything else."""

    def __init__(self, html: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.text = ""
        self.scripts: list[str] = []
        self.open: list[str] = []
        self.feed(html)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {name: value or "" for name, value in attrs}))
        if tag not in VOID:
            self.open.append(tag)
        if tag == "script":
            self.scripts.append("")

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] == "script":
            self.scripts[-1] += data
        elif not self.open or self.open[-1] != "style":
            self.text += data

    def attributes(self, tag: str) -> list[dict[str, str]]:
        return [attributes for name, attributes in self.elements if name == tag]


def page_with(events: pl.DataFrame = ONE_OF_EVERY_KIND, **more: Any) -> Reader:
    contents = made_up(events, more.get("seasons", ()))
    page = page_of(contents, more.get("pictures", ()), "sample", [("events.csv", "every event")])
    return Reader(rendered(page, table_data(contents.events), packed(b"BEGIN:VCALENDAR")))


def test_the_page_is_well_formed() -> None:
    reader = page_with()
    assert reader.open == []
    ids = Counter(attributes["id"] for _, attributes in reader.elements if "id" in attributes)
    assert [name for name, count in ids.items() if count > 1] == []


def test_every_link_inside_the_page_has_its_target() -> None:
    reader = page_with()
    ids = {attributes["id"] for _, attributes in reader.elements if "id" in attributes}
    inner = [a["href"][1:] for a in reader.attributes("a") if a["href"].startswith("#")]
    assert inner
    assert {place for place in inner if "=" not in place} <= ids


def test_every_label_and_heading_reference_resolves() -> None:
    reader = page_with(seasons=[MARS_SEASON])
    ids = {attributes["id"] for _, attributes in reader.elements if "id" in attributes}
    for name in ("aria-labelledby", "aria-describedby"):
        assert {attributes[name] for _, attributes in reader.elements if name in attributes} <= ids


def test_the_page_asks_for_nothing_outside_itself() -> None:
    reader = page_with()
    for tag in ("script", "img", "link", "iframe", "source"):
        for attributes in reader.attributes(tag):
            assert attributes.get("src", "data:").startswith("data:")
            assert tag == "script" or attributes.get("href", "data:").startswith("data:")
    policy = next(
        m["content"] for m in reader.attributes("meta") if m.get("http-equiv") == "Content-Security-Policy"
    )
    assert policy.startswith("default-src 'none'")


def test_the_page_names_kernel_checksum_version_frame_scale_and_span() -> None:
    text = page_with().text
    for fact in (
        "DE999",
        CHECKSUM,
        f"wanderers {__version__}",
        "true ecliptic and equinox of date",
        "UTC",
        "TT",
    ):
        assert fact in text
    assert "2027-01-01 to 2029-01-01" in text
    assert "Earth rotation data" in text


def test_names_are_escaped_in_markup_and_in_data() -> None:
    evil = '</script><script>alert(1)</script><b title="x">&amp;'
    star = event("conjunction", "2027-05-01T10:00:00.000Z", body="venus", other=evil, frame="ecliptic",
                 separation_deg=0.5, elongation_deg=40.0)  # fmt: skip
    reader = page_with(table(star))
    assert evil in reader.text  # the list at a glance prints it as text
    assert len(reader.scripts) == len(page_with().scripts)
    assert evil in json.loads(reader.scripts[0])["columns"]["other"]["all"]


def test_every_picture_has_its_alternative_text_and_keeps_room_for_itself() -> None:
    drawing = '<svg width="576pt" viewBox="0 0 576 432"><text>"Mars" &amp; Co.</text></svg>'
    picture = Picture("overview", "All", 'Lines of "all" planets & the Sun.', svg=drawing)
    reader = page_with(pictures=[picture])
    (image,) = reader.attributes("img")
    assert image["alt"] == 'Lines of "all" planets & the Sun.'
    assert (image["width"], image["height"]) == ("576", "432")
    assert image["src"].startswith("data:image/svg+xml,")


def test_a_picture_left_out_for_its_weight_is_linked_and_told_in_words() -> None:
    reader = page_with(pictures=[Picture("overview", "All", "Lines of all planets.")])
    assert reader.attributes("img") == []
    assert {"pictures/overview.svg", "pictures/overview.png"} <= {a["href"] for a in reader.attributes("a")}
    assert "Lines of all planets." in reader.text


def test_a_lean_drawing_keeps_its_text_and_loses_what_nobody_sees() -> None:
    drawing = (
        "<?xml version='1.0'?><!-- made --><svg><metadata>x</metadata>\n\n <path d='M 1.23456 -7.899'/></svg>"
    )
    assert lean(drawing) == "<svg>\n<path d='M 1.23 -7.89'/></svg>\n"
    told = "<svg><text x='1.23456'>0.678 au, <tspan y='0.125'>−0.025</tspan></text></svg>\n"
    assert lean(told) == told.replace("1.23456", "1.23").replace("0.125", "0.12")


def test_the_pages_program_reads_the_table_back(events: pl.DataFrame) -> None:
    data = json.loads(json.dumps(table_data(events), allow_nan=False))
    assert data["names"] == list(schema.EVENT_COLUMNS)
    assert set(data["columns"]) == set(schema.EVENT_COLUMNS) - set(INSTANTS)
    for name, column in data["columns"].items():
        expected = events[name].to_list()
        got = [value_of(column, row) for row in range(data["count"])]
        if name in DECIMALS:
            assert [value is None for value in got] == [value is None for value in expected]
            known = [(a, b) for a, b in zip(got, expected, strict=True) if b is not None]
            for a, b in known:
                assert a == pytest.approx(b, abs=0.51 * 10.0 ** -DECIMALS[name])
        else:
            assert got == expected, name


def test_instants_come_back_to_the_millisecond(events: pl.DataFrame) -> None:
    data = table_data(events)
    utc = np.cumsum([data["utc"]["start"], *data["utc"]["steps"]])
    printed = np.datetime_as_string(utc.astype("datetime64[ms]"))
    given = [text.removesuffix("Z") for text in events["utc"]]
    off = np.abs((np.array(printed, "datetime64[ms]") - np.array(given, "datetime64[ms]")).astype(int))
    assert off.max() <= 1  # made-up UTC went through a Julian date, good to 40 microseconds, and back


def test_what_is_said_of_each_event_comes_back(events: pl.DataFrame) -> None:
    data = table_data(events)
    for row, told in enumerate(events.iter_rows(named=True)):
        assert value_of(data["what"], row) == words.summary(told)
        assert value_of(data["note"], row) == facts.note(told)


@pytest.fixture(scope="module")
def events() -> pl.DataFrame:
    ids = [f"{kind}-mars-c{number}-1" for number, kind in enumerate(ONE_OF_EVERY_KIND["kind"])]
    return with_instants(ONE_OF_EVERY_KIND.with_columns(event_id=pl.Series(ids)))


def value_of(column: Any, row: int) -> Any:
    """Read a column as the page's program does."""
    if isinstance(column, list):
        return column[row]
    if "all" in column:
        return column["all"]
    word = column["words"][column["at"][row]]
    return word if word is None or "fill" not in column else word.replace("{}", column["fill"][row], 1)


ids_or_words = st.one_of(
    st.none(), st.from_regex(r"[a-z_]{1,8}-c-?[0-9]{1,4}-[0-9]", fullmatch=True), st.text("ab 1.", max_size=6)
)


@given(st.lists(ids_or_words, max_size=20))
def test_words_come_back_whatever_they_are(values: list[str | None]) -> None:
    for gap in (None, NUMBER_OF_ID, page_data.LAST_NUMBER):
        column = worded(values, gap)
        assert [value_of(column, row) for row in range(len(values))] == values


@given(st.lists(st.integers(-(10**15), 10**15), max_size=20))
def test_steps_add_up_to_the_instants(instants: list[int]) -> None:
    column = steps(instants)
    rebuilt = np.cumsum([column["start"], *column["steps"]]).tolist()
    assert rebuilt[: len(instants)] == instants


def test_the_page_is_the_same_each_time() -> None:
    contents = made_up(seasons=[MARS_SEASON])
    one, two = (
        rendered(page_of(contents, (), "sample"), table_data(contents.events), packed(b"calendar"))
        for _ in range(2)
    )
    assert one == two
    assert packed(b"calendar") == packed(b"calendar")


def test_nothing_found_makes_a_page_all_the_same() -> None:
    reader = page_with(table())
    assert "none in this span" in reader.text
    assert json.loads(reader.scripts[0])["count"] == 0
    assert reader.attributes("img") == []


def test_the_body_filter_lists_only_bodies_that_occur() -> None:
    reader = page_with()
    offered = [box["value"] for box in reader.attributes("input") if box.get("name") == "body"]
    present = {*ONE_OF_EVERY_KIND["body"], *ONE_OF_EVERY_KIND["other"]}
    assert offered == [body.value for body in Body if body.value in present]


# Looks: contrast by the formulas of WCAG 2.2, "relative luminance", "contrast ratio"; 1.4.3 asks 4.5 of text,
# 1.4.11 asks 3 of the edges of controls.
PAIRS = [
    ("ink", "paper", 4.5),
    ("ink", "raised", 4.5),
    ("ink", "warn-paper", 4.5),
    ("quiet", "paper", 4.5),
    ("quiet", "raised", 4.5),
    ("accent", "paper", 4.5),
    ("accent", "raised", 4.5),
    ("warn", "paper", 4.5),
    ("warn", "raised", 4.5),
    ("on-accent", "accent-paper", 4.5),
    ("edge", "paper", 3.0),
]


def luminance(colour: str) -> float:
    parts = [int(colour[place : place + 2], 16) / 255.0 for place in (1, 3, 5)]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def looks() -> dict[str, dict[str, str]]:
    style = "\n".join(re.findall(r"<style>(.*?)</style>", _html(), re.DOTALL))
    blocks = re.findall(r"(:root[^{]*)\{([^}]*)\}", style)
    return {
        f"{number} {selector.strip()}": dict(re.findall(r"--([a-z-]+): (#[0-9a-f]{6})", body))
        for number, (selector, body) in enumerate(blocks)
        if "--paper" in body
    }


def _html() -> str:
    contents = made_up()
    return rendered(page_of(contents, (), "sample"), table_data(contents.events), packed(b""))


@pytest.mark.parametrize("look", looks().values(), ids=looks().keys())
def test_every_look_has_the_contrast_that_readers_need(look: dict[str, str]) -> None:
    for one, other, least in PAIRS:
        light, dark = sorted((luminance(look[one]), luminance(look[other])), reverse=True)
        assert (light + 0.05) / (dark + 0.05) >= least, (one, other)


def test_there_are_five_looks_and_night_is_red_on_black() -> None:
    found = looks()
    assert len(found) == 5  # light, dark, dark by the system's wish, night, paper
    night = next(colours for selector, colours in found.items() if "night" in selector)
    assert night["paper"] == "#000000"
    for colour in night.values():
        assert int(colour[3:5], 16) <= 0x20
        assert int(colour[5:7], 16) <= 0x20
