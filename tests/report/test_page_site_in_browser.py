"""The page of a site in a real browser: its list, the filter by verdict, sorting, saving, small screens.

What the page shows is held against the files beside it, read with polars and icalendar.
"""

from __future__ import annotations

import datetime as dt
import json
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import polars as pl
import pytest
from icalendar import Calendar

from tests.report.browsing import SHOWN, all_ids, count, saved, tick
from tests.report.conftest import Open, written
from tests.site.places import HILL
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.report.folder import PAGE
from wanderers.site import columns

pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning")  # the driver's own sockets

SITE = replace(HILL, name="lantern hill & mill")
LONG_AGO = "-0500-03-01T18:00:45.000+01:00"
VERDICTS = ["naked_eye", "binoculars", "telescope", "not_visible"]


@pytest.fixture(scope="module")
def report(tmp_path_factory: pytest.TempPathFactory, cache_folder: Path) -> Path:
    bodies = (Body.SUN, Body.MOON, Body.VENUS, Body.JUPITER)
    folder = tmp_path_factory.mktemp("reports") / "site"
    return written(folder, cache_folder, bodies=bodies, site=SITE)


@pytest.fixture(scope="module")
def events(report: Path) -> pl.DataFrame:
    return pl.read_parquet(report / "events.parquet")


@pytest.fixture
def opened(open_file: Open, report: Path) -> Open:
    return partial(open_file, report / PAGE)


def test_it_opens_with_the_sites_list_and_asks_for_nothing_else(
    opened: Open, report: Path, events: pl.DataFrame
) -> None:
    opened().get_log("performance")
    page = opened()
    heading = page.find_element("css selector", "#sights h2")
    assert heading.text == f"To watch from {SITE.name}"
    lines = page.execute_script(
        "return [...document.querySelectorAll('#sights tr[data-id]')]"
        ".map((r) => [r.dataset.id, r.textContent])"
    )
    rows = {row["event_id"]: row for row in events.iter_rows(named=True)}
    assert len(lines) == len({name for name, _ in lines}) > 10
    for name, text in lines:
        reason = rows[name]["verdict_reason"]
        assert f"{reason[0].upper()}{reason[1:]}." in text
        assert "None" not in text and "nan" not in text.lower().split()
    first = page.find_element("css selector", "#sights details")
    assert first.get_attribute("open") is not None and first.text.startswith("With the naked eye")
    page.execute_script("window.scrollTo(0, document.body.scrollHeight)")
    messages = [json.loads(entry["message"])["message"] for entry in page.get_log("performance")]
    asked = [m["params"]["request"]["url"] for m in messages if m["method"] == "Network.requestWillBeSent"]
    outside = {url for url in asked if not url.startswith(("data:", "about:", "chrome"))}
    assert outside == {(report / PAGE).as_uri()}


@pytest.mark.parametrize("wanted", [["naked_eye"], ["binoculars", "telescope"], ["not_visible"]])
def test_verdicts_are_filtered_told_and_kept_in_the_address(
    opened: Open, events: pl.DataFrame, wanted: list[str]
) -> None:
    page = opened()
    for verdict in wanted:
        tick(page, "verdict", verdict)
    rows = events.filter(pl.col("verdict").is_in(wanted))
    assert 0 < rows.height < events.height
    assert count(page) == rows.height
    kept = page.execute_script("return location.hash")
    assert f"verdict={','.join(wanted)}" in kept
    told = page.find_element("css selector", "#removed").text
    assert told.endswith(f": {events.height - rows.height}.")
    assert all_ids(page) == rows["event_id"].to_list()
    again = opened(kept)
    assert count(again) == rows.height
    ticked = "return [...document.querySelectorAll('input[name=verdict]:checked')].map((b) => b.value)"
    assert sorted(again.execute_script(ticked)) == sorted(wanted)


def test_every_verdict_can_be_ticked(opened: Open) -> None:
    page = opened()
    boxes = "return [...document.querySelectorAll('input[name=verdict]')].map((b) => b.value)"
    assert page.execute_script(boxes) == VERDICTS


def test_an_address_with_a_verdict_that_is_none_breaks_nothing(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#verdict=maybe,%3Cb%3E,telescope&sort=watch")
    telescope = events.filter(pl.col("verdict") == "telescope").height
    assert count(page) == telescope
    page.find_element("css selector", "#clear").click()
    assert count(page) == events.height


@pytest.mark.parametrize("key", ["watch", "verdict"])
def test_the_table_sorts_by_watch_and_verdict(opened: Open, events: pl.DataFrame, key: str) -> None:
    page = opened()
    rank = pl.col("verdict").replace_strict(
        {name: place for place, name in enumerate(VERDICTS)}, return_dtype=pl.Int64
    )
    seen = pl.col("verdict") != "not_visible"
    ordered = {"watch": pl.when(seen).then(pl.col("best_utc")), "verdict": rank}[key]
    heading = page.find_element("css selector", f'#table th[data-key="{key}"]')
    for falling, word in ((False, "ascending"), (True, "descending")):
        page.execute_script("arguments[0].click()", heading.find_element("tag name", "button"))
        assert heading.get_attribute("aria-sort") == word
        wanted = events.sort(ordered, descending=falling, nulls_last=True, maintain_order=True)
        assert all_ids(page) == wanted["event_id"].to_list()
        page.execute_script(
            "arguments[0].click()", page.find_element("css selector", '.pager button[data-go="first"]')
        )


def test_rows_tell_the_local_time_and_the_watch(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#verdict=naked_eye,binoculars")
    cells = page.execute_script(
        f"return [...document.querySelectorAll('{SHOWN}')].map((r) => [r.dataset.id,"
        " r.cells[0].textContent, r.querySelector('[data-label=Watch]').textContent])"
    )
    rows = {row["event_id"]: row for row in events.iter_rows(named=True)}
    assert len(cells) == 100
    for name, instant, text in cells:
        watch = text.replace("\u00a0", " ")
        exact = dt.datetime.fromisoformat(rows[name]["utc"]).astimezone(ZoneInfo(SITE.zone))
        told = dt.datetime.fromisoformat(instant).replace(tzinfo=exact.tzinfo, fold=exact.fold)
        assert abs((told - exact).total_seconds()) <= 60.0 and told.date() == exact.date()
        if f"{exact:%H:%M}" != "23:59":
            assert abs((told - exact).total_seconds()) <= 30.5
        clocks = [
            nearest_minute(rows[name][f"{part}_utc"]) for part in ("window_start", "window_end", "best")
        ]
        assert watch.endswith("{} {:%H:%M}–{:%H:%M}, best {:%H:%M}".format(f"{clocks[0].date()}", *clocks))
        assert watch.startswith("night after ") == (clocks[0].date() != clocks[1].date())


def test_local_instants_before_the_common_era_keep_weekday_and_minute(opened: Open) -> None:
    # The Gregorian calendar repeats after 400 years, which are 20 871 whole weeks.
    told = opened().execute_script("return [dated(arguments[0]), clock(arguments[0])]", LONG_AGO)
    assert told == [f"{dt.date(1900, 3, 1):%a} -0500-03-01", "18:01"]


def nearest_minute(utc: str) -> dt.datetime:
    later = dt.datetime.fromisoformat(utc) + dt.timedelta(seconds=30)
    return later.astimezone(ZoneInfo(SITE.zone))


def test_the_selection_is_saved_as_csv_with_the_sites_columns(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#verdict=naked_eye&body=venus&sort=watch")
    table = pl.read_csv(saved(page, "#save-csv").encode(), infer_schema_length=None)
    wanted = events.filter(
        pl.col("verdict") == "naked_eye", (pl.col("body") == "venus") | (pl.col("other") == "venus")
    ).sort("best_utc", maintain_order=True)
    assert table["event_id"].to_list() == wanted["event_id"].to_list()
    assert table.height > 5
    assert set(schema.EVENT_COLUMNS) <= set(table.columns)
    site_columns = {name for name in columns.SITE_COLUMNS if not name.endswith("_utc")}
    assert site_columns <= set(table.columns)
    for name in (
        "site",
        "zone",
        "local_date",
        "local_time",
        "evening_date",
        "window_start_local",
        "best_local",
        "compass",
        "verdict",
        "verdict_reason",
        "caution",
    ):
        assert table[name].cast(pl.String).to_list() == wanted[name].cast(pl.String).to_list(), name
    for name in ("altitude_deg", "azimuth_deg", "moon_illuminated", "seen_separation_deg"):
        gap = (table[name].cast(pl.Float64) - wanted[name]).abs().max()
        assert gap is not None and gap <= 0.0051, name  # type: ignore[operator]


def test_the_selection_is_saved_as_a_calendar_that_others_read(
    opened: Open, report: Path, events: pl.DataFrame
) -> None:
    page = opened("#verdict=binoculars")
    text = saved(page, "#save-ics")
    wanted = events.filter(pl.col("verdict") == "binoculars")
    calendar = Calendar.from_ical(text)
    entries = calendar.walk("VEVENT")
    assert {str(entry["UID"]).partition("@")[0] for entry in entries} == set(wanted["event_id"])
    assert [str(zone["TZID"]) for zone in calendar.walk("VTIMEZONE")] == [SITE.zone]
    by_id = {str(entry["UID"]).partition("@")[0]: entry for entry in entries}
    for row in wanted.iter_rows(named=True):
        entry: Any = by_id[row["event_id"]]
        start = nearest_minute(row["window_start_utc"]).replace(second=0, microsecond=0)
        assert entry["DTSTART"].dt.astimezone(dt.UTC) == start.astimezone(dt.UTC)
        assert str(entry["LOCATION"]) == SITE.name
    assert text.split("BEGIN:VEVENT")[0] in (report / "events.ics").read_bytes().decode()


def test_links_lead_to_the_list(opened: Open) -> None:
    page = opened()
    page.find_element("css selector", 'nav.contents a[href="#sights"]').click()
    assert page.execute_script("return document.activeElement.id") == "sights"


@pytest.mark.parametrize("width", [1440, 390, 320])
def test_nothing_sticks_out_sideways(opened: Open, width: int) -> None:
    # WCAG 2.2, 1.4.10: down to 320 dots no scrolling in two directions.
    page = opened("#verdict=naked_eye", width, 844)
    page.execute_script("for (const one of document.querySelectorAll('#sights details')) one.open = true")
    assert page.execute_script("return document.documentElement.scrollWidth") <= width
    cut = page.execute_script(
        "return [...document.querySelectorAll('#sights td, #table td')]"
        ".filter((c) => c.scrollWidth > c.clientWidth + 1).map((c) => c.textContent)"
    )
    assert cut == []


def test_the_files_beside_the_page_hold_the_site(report: Path, events: pl.DataFrame) -> None:
    assert set(columns.EVENT_VIEW_COLUMNS) <= set(events.columns)
    assert set(events["site"]) == {SITE.name} and set(events["zone"]) == {SITE.zone}
    written = pl.read_csv(report / "events.csv", infer_schema_length=None)
    assert written["verdict_reason"].to_list() == events["verdict_reason"].to_list()
