"""The timeline in a real browser: what it draws, tells and keeps in the address.

What it shows is held against the tables beside the page, read with polars, and against its own axis.
"""

from __future__ import annotations

import datetime as dt
import itertools
import json
import re
from pathlib import Path
from typing import Any

import polars as pl
import pytest

from tests.report.conftest import Open
from tests.report.timeline_reading import (
    PLANETS,
    address,
    fact,
    first_of_months,
    focus,
    marks,
    press,
    show,
    span,
    stamp,
)
from wanderers.report.folder import PAGE

pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning")  # the driver's own sockets


@pytest.fixture(scope="module")
def events(half_year_report: Path) -> pl.DataFrame:
    return pl.read_parquet(half_year_report / "events.parquet")


def drawn(events: pl.DataFrame) -> pl.DataFrame:
    """Return the rows that the timeline has a mark for."""
    of_planets = pl.col("body").is_in(PLANETS)
    alone = (pl.col("kind") == "station") | (pl.col("kind") == "opposition")
    inferior = (pl.col("kind") == "solar_conjunction") & (pl.col("detail") == "inferior")
    quasi = (pl.col("kind") == "appulse") & (pl.col("detail") == "quasi").fill_null(False)
    meeting = ((pl.col("kind") == "conjunction") | quasi) & pl.col("other").is_in(PLANETS)
    return events.filter(of_planets & (alone | inferior | meeting))


@pytest.mark.parametrize(
    ("report", "planets", "kinds"),
    [
        ("half_year_report", ["Venus", "Mars", "Jupiter"], {"station", "opposition", "appulse"}),
        (
            "site_report",
            ["Mercury", "Venus", "Mars", "Saturn"],
            {"station", "solar_conjunction", "conjunction"},
        ),
    ],
)
def test_there_is_a_lane_a_planet_and_a_mark_an_event(
    open_file: Open, request: pytest.FixtureRequest, report: str, planets: list[str], kinds: set[str]
) -> None:
    folder = request.getfixturevalue(report)
    page = open_file(folder / PAGE, "#when=2027-01..2027-07")
    names = page.execute_script(
        "return [...document.querySelectorAll('#timeline .name')].map((t) => t.textContent)"
    )
    assert names == planets
    seasons = pl.read_parquet(folder / "seasons.parquet")
    wanted = drawn(pl.read_parquet(folder / "events.parquet"))
    assert seasons.height >= 2
    assert kinds <= set(wanted["kind"])
    told = marks(page)
    assert sum("runs backwards" in label for label in told) == seasons.height
    assert len(told) == seasons.height + wanted.height


def test_marks_stand_where_the_axis_has_their_day(page: Any, events: pl.DataFrame) -> None:
    first, last = first_of_months(page)[1], first_of_months(page)[5]
    days = (dt.date(2027, 6, 1) - dt.date(2027, 2, 1)).days
    opposition = events.filter((pl.col("kind") == "opposition") & (pl.col("body") == "mars"))["utc"][0]
    since = dt.datetime.fromisoformat(opposition) - dt.datetime(2027, 2, 1, tzinfo=dt.UTC)
    wanted = first + (last - first) * since / dt.timedelta(days=days)
    focus(page, "Mars at opposition")
    box = page.execute_script(
        "return document.activeElement.querySelector('.shape').getBoundingClientRect().toJSON()"
    )
    assert box["left"] + box["width"] / 2.0 == pytest.approx(wanted, abs=1.5)


def test_focusing_a_mark_tells_its_fact_and_leads_to_its_row(page: Any, events: pl.DataFrame) -> None:
    row = events.filter((pl.col("kind") == "opposition") & (pl.col("body") == "mars")).row(0, named=True)
    focus(page, "Mars at opposition")
    assert "Mars at opposition" in fact(page)
    assert abs(dt.datetime.fromisoformat(row["utc"]) - stamp(fact(page))) <= dt.timedelta(seconds=30)
    assert page.find_element("css selector", "#timeline .fact").get_attribute("role") == "status"
    press(page, "enter")
    assert page.switch_to.active_element.text == "Its row in the table"
    press(page, "enter")
    shown = page.execute_script("return [document.activeElement.tagName, document.activeElement.dataset.id]")
    assert shown == ["TR", row["event_id"]]
    assert f"row={row['event_id']}" in address(page)


def test_an_address_with_a_row_opens_the_page_at_it(
    open_file: Open, half_year_report: Path, events: pl.DataFrame
) -> None:
    wanted = events["event_id"][-1]
    page = open_file(half_year_report / PAGE, f"#kind=station&row={wanted}")
    assert (
        page.execute_script("return document.activeElement.dataset.id") == wanted
    )  # and the filter is cleared


def test_from_a_site_the_local_time_is_told(open_file: Open, site_report: Path) -> None:
    page = open_file(site_report / PAGE)
    focus(page, "Mars at opposition")
    told = fact(page)
    local = re.search(r"(\d{4}-\d\d-\d\d \d\d:\d\d) local", told)
    assert local, told
    # Central European Time is an hour ahead of UTC in winter (Directive 2000/84/EC).
    assert dt.datetime.fromisoformat(f"{local[1]}+01:00") == stamp(told)
    focus(page, "Mars runs backwards")
    assert fact(page).count("2027-01-10") == 2


def test_the_address_keeps_the_span_and_opens_it_again(open_file: Open, half_year_report: Path) -> None:
    page = open_file(half_year_report / PAGE, "#body=mars&when=2027-02..2027-04")
    assert span(page) == (dt.date(2027, 2, 1), dt.date(2027, 4, 1))
    show(page, "in")
    kept = address(page)
    assert "when=2027-02-" in kept
    assert "body=mars" in kept
    before = span(page)
    page = open_file(half_year_report / PAGE, kept)
    assert span(page) == before
    show(page, "whole")
    assert "when" not in address(page)


@pytest.mark.parametrize("when", ["soon", "2027-05..2027-02", "1800..1900", "..", "%3Cb%3E..2027"])
def test_an_address_with_nonsense_shows_the_whole_span(
    open_file: Open, half_year_report: Path, when: str
) -> None:
    page = open_file(half_year_report / PAGE, f"#when={when}")
    assert span(page) == (dt.date(2027, 1, 1), dt.date(2027, 7, 1))


def test_a_stretch_can_be_shown_in_the_table(page: Any, half_year_report: Path, events: pl.DataFrame) -> None:
    season = pl.read_parquet(half_year_report / "seasons.parquet").filter(pl.col("body") == "mars")
    start, end = (season[f"station_{way}_utc"][0] for way in ("retrograde", "direct"))
    focus(page, "Mars runs backwards")
    page.find_element("css selector", "#timeline .to-table").click()
    assert page.execute_script("return document.activeElement.id") == "events"
    day_after = dt.date.fromisoformat(end[:10]) + dt.timedelta(days=1)
    within = events.filter((pl.col("utc") >= start[:10]) & (pl.col("utc") < f"{day_after}"))
    gathered = (pl.col("kind") == "gathering") & pl.col("detail").str.contains("mars")
    wanted = within.filter((pl.col("body") == "mars") | (pl.col("other") == "mars") | gathered)
    assert wanted.height > 5
    count = page.find_element("css selector", "#count").text
    assert count.startswith(f"{wanted.height} of ")
    assert f"from={start[:10]}" in address(page)


def test_the_span_in_view_can_be_shown_in_the_table(
    open_file: Open, half_year_report: Path, events: pl.DataFrame
) -> None:
    page = open_file(half_year_report / PAGE, "#when=2027-03..2027-05")
    show(page, "table")
    wanted = events.filter((pl.col("utc") >= "2027-03-01") & (pl.col("utc") < "2027-05-01")).height
    assert page.find_element("css selector", "#count").text.startswith(f"{wanted} of ")


def test_the_look_travels_to_the_dossiers_and_a_link_keeps_look_and_span(
    open_file: Open, half_year_report: Path
) -> None:
    page = open_file(half_year_report / PAGE, "#look=night&when=2027-02..2027-04")
    links = (
        "return [...document.querySelectorAll('a[href^=\"seasons/\"]')].map((a) => a.getAttribute('href'))"
        ".filter((address) => !address.endsWith('.csv'))"
    )
    found = page.execute_script(links)
    assert found
    assert all(re.fullmatch(r"seasons/[\w-]+\.html#look=night", link) for link in found)
    page.execute_script("document.querySelector('input[name=look][value=auto]').click()")
    assert all(link.endswith(".html") for link in page.execute_script(links))
    page.execute_script("document.querySelector('input[name=look][value=dark]').click()")
    focus(page, "Mars runs backwards")
    page.find_element("css selector", "#timeline .to-row").click()
    assert page.execute_script("return document.documentElement.dataset.look") == "dark"
    assert "/seasons/mars-" in page.current_url
    page.back()
    page.execute_script("document.querySelector('a[href^=\"#body=mars\"]').click()")
    kept = address(page)
    for part in ("body=mars", "look=dark", "when=2027-02..2027-04"):
        assert part in kept


def test_the_timeline_asks_for_nothing_outside_the_page(open_file: Open, half_year_report: Path) -> None:
    page = open_file(half_year_report / PAGE)
    page.get_log("performance")
    show(page, "in")
    focus(page, "Mars")
    messages = [json.loads(entry["message"])["message"] for entry in page.get_log("performance")]
    asked = [m["params"]["request"]["url"] for m in messages if m["method"] == "Network.requestWillBeSent"]
    assert [url for url in asked if not url.startswith("data:")] == []


@pytest.mark.parametrize("width", [1440, 768, 390, 320])
def test_nothing_sticks_out_and_controls_can_be_hit(
    open_file: Open, half_year_report: Path, width: int
) -> None:
    # WCAG 2.2: 1.4.10 (down to 320 dots) and 2.5.8 (24 by 24 dots).
    page = open_file(half_year_report / PAGE, "", width)
    focus(page, "Mars runs backwards")
    assert page.execute_script("return document.documentElement.scrollWidth") <= width
    outside = page.execute_script(
        "const frame = document.querySelector('#timeline .lanes').getBoundingClientRect();"
        "return [...document.querySelectorAll('#timeline text')].filter((t) => {"
        " const box = t.getBoundingClientRect();"
        " return box.left < frame.left - 1 || box.right > frame.right + 1; }).map((t) => t.textContent)"
    )
    assert outside == []
    small = page.execute_script(
        "return [...document.querySelectorAll('#timeline :is(button, .to-row, .mark)')].filter((c) => {"
        " const box = c.getBoundingClientRect();"
        " const narrow = box.width < 24 && !c.querySelector('.stretch');"
        " return c.checkVisibility() && (box.height < 24 || narrow);"
        "}).map((c) => c.outerHTML.slice(0, 80))"
    )
    assert small == []


@pytest.mark.parametrize("when", ["", "2027-02..2027-05", "2027-03-01..2027-03-20"])
def test_names_on_the_axis_do_not_run_into_each_other(
    open_file: Open, half_year_report: Path, when: str
) -> None:
    for width in (1440, 768, 390):
        page = open_file(half_year_report / PAGE, f"#when={when}", width)
        for sort in ("small", "large"):
            boxes = page.execute_script(
                f"return [...document.querySelectorAll('#timeline .{sort}')]"
                ".map((t) => t.getBoundingClientRect()).map((b) => [b.left, b.right])"
            )
            boxes.sort()
            assert boxes or sort == "large"
            for (_, end), (start, _) in itertools.pairwise(boxes):
                assert end < start


def test_by_night_it_is_red_and_black_and_on_paper_the_picture_stands_for_it(
    open_file: Open, half_year_report: Path
) -> None:
    page = open_file(half_year_report / PAGE, "#look=night")
    focus(page, "Mars at opposition")
    paints = page.execute_script(
        "const seen = new Set(); for (const part of document.querySelectorAll('#timeline svg *')) {"
        " const style = getComputedStyle(part); seen.add(style.fill); seen.add(style.stroke); }"
        "return [...seen].filter((c) => c.startsWith('rgb')).map((c) => c.match(/[\\d.]+/g).map(Number));"
    )
    assert len(paints) >= 4
    for _, green, blue, *_ in paints:
        assert max(green, blue) <= 0x20
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    visible = "return document.querySelector(arguments[0]).checkVisibility()"
    assert not page.execute_script(visible, "#timeline")
    assert page.execute_script(visible, "#overview img")


def test_nothing_moves_by_itself(page: Any) -> None:
    # WCAG 2.2, 2.3.3: no animation at all, so none that a wish for less motion would have to stop.
    show(page, "in")
    assert page.execute_script("return document.getAnimations().length") == 0
