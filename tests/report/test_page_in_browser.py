"""The page in a real browser, opened from disk: filters, sorting, saving, address, looks, keyboard.

What the page shows is held against the files beside it, read with polars and icalendar.
"""

from __future__ import annotations

import json
from functools import partial
from pathlib import Path
from typing import Any

import polars as pl
import pytest
from icalendar import Calendar
from polars.testing import assert_frame_equal

from tests.report.browsing import SHOWN, count, saved, shown_ids, tick, write
from tests.report.conftest import Open
from wanderers import schema
from wanderers.report.folder import PAGE
from wanderers.report.page_data import DECIMALS

pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning")  # the driver's own sockets


@pytest.fixture(scope="module")
def report(half_year_report: Path) -> Path:
    return half_year_report


@pytest.fixture(scope="module")
def events(report: Path) -> pl.DataFrame:
    return pl.read_parquet(report / "events.parquet")


@pytest.fixture
def opened(open_file: Open, report: Path) -> Open:
    return partial(open_file, report / PAGE)


def test_it_opens_from_disk_and_asks_for_nothing_else(opened: Open, report: Path) -> None:
    opened().get_log("performance")
    page = opened()
    page.execute_script("window.scrollTo(0, document.body.scrollHeight)")
    messages = [json.loads(entry["message"])["message"] for entry in page.get_log("performance")]
    asked = [m["params"]["request"]["url"] for m in messages if m["method"] == "Network.requestWillBeSent"]
    outside = [url for url in asked if not url.startswith(("data:", "about:", "chrome"))]
    assert set(outside) == {(report / PAGE).as_uri()}


def test_every_picture_can_be_drawn(opened: Open) -> None:
    page = opened()
    broken = page.execute_async_script(
        "const done = arguments[0]; const all = [...document.images];"
        "all.forEach((i) => { i.loading = 'eager'; });"
        "Promise.all(all.map((i) => i.decode().then(() => null, () => i.alt)))"
        ".then((r) => done([all.length, r.filter(Boolean)]));"
    )
    assert broken[0] >= 7
    assert broken[1] == []


def test_a_slice_at_a_time_is_shown_and_all_can_be_turned_to(opened: Open, events: pl.DataFrame) -> None:
    page = opened()
    assert count(page) == events.height > 200
    found = shown_ids(page)
    assert len(found) == 100
    following = page.find_element("css selector", '.pager button[data-go="next"]')
    while following.is_enabled():
        page.execute_script("arguments[0].click()", following)
        found += shown_ids(page)
    assert found == events["event_id"].to_list()


def test_bodies_and_kinds_are_filtered(opened: Open, events: pl.DataFrame) -> None:
    page = opened()
    tick(page, "body", "mars")
    tick(page, "body", "jupiter")
    tick(page, "kind", "conjunction")
    tick(page, "without", "stars")
    wanted = events.filter(
        (pl.col("kind") == "conjunction")
        & (pl.col("body").is_in(["mars", "jupiter"]) | pl.col("other").is_in(["mars", "jupiter"]))
        & pl.col("other").is_in(["moon", "mercury", "venus", "mars", "jupiter", "saturn"])
    )
    assert wanted.height > 5
    assert shown_ids(page) == wanted["event_id"].to_list()


def test_dates_words_and_limits_are_filtered_and_what_each_left_out_is_told(
    opened: Open, events: pl.DataFrame
) -> None:
    page = opened()
    write(page, "from", "2027-02")
    write(page, "to", "2027-03-15")
    write(page, "text", "venus")
    write(page, "elongation", "30")
    write(page, "separation", "4")
    begun = events.filter(pl.col("utc") >= "2027-02-01")
    ended = begun.filter(pl.col("utc") < "2027-03-15")
    venus = ended.filter((pl.col("body") == "venus") | (pl.col("other") == "venus"))
    close = venus.filter(pl.col("separation_deg") <= 4.0)
    dark = close.filter(pl.col("elongation_deg") >= 30.0)
    assert dark.height > 1
    assert shown_ids(page) == dark["event_id"].to_list()
    left_out = [events.height - begun.height, begun.height - ended.height, ended.height - venus.height]
    left_out += [venus.height - close.height, close.height - dark.height]
    told = page.find_element("css selector", "#removed").text
    assert [int(part.rsplit(": ", 1)[1].rstrip(".")) for part in told.split("; ")] == left_out


def test_a_field_that_is_no_date_is_marked_and_filters_nothing(opened: Open, events: pl.DataFrame) -> None:
    page = opened()
    write(page, "from", "2027-02-30")
    field = page.find_element("css selector", 'input[name="from"]')
    assert field.get_attribute("aria-invalid") == "true"
    assert count(page) == events.height


def test_columns_sort_both_ways_with_gaps_last(opened: Open, events: pl.DataFrame) -> None:
    page = opened()
    heading = page.find_element("css selector", '#table th[data-key="separation"]')
    button = heading.find_element("tag name", "button")
    for falling, word in ((False, "ascending"), (True, "descending")):
        button.click()
        assert heading.get_attribute("aria-sort") == word
        ordered = events.sort("separation_deg", descending=falling, nulls_last=True, maintain_order=True)
        assert shown_ids(page) == ordered["event_id"].head(100).to_list()


def test_the_address_keeps_the_selection(opened: Open) -> None:
    page = opened()
    tick(page, "body", "mars")
    write(page, "separation", "3")
    page.find_element("css selector", '#table th[data-key="separation"] button').click()
    kept = page.execute_script("return location.hash")
    ids = shown_ids(page)
    assert shown_ids(opened(kept)) == ids
    assert page.find_element("css selector", 'input[name="separation"]').get_attribute("value") == "3"
    page.find_element("css selector", 'nav.contents a[href="#mars"]').click()
    assert page.execute_script("return location.hash") == f"{kept}&at=mars"
    assert page.execute_script("return document.activeElement.id") == "mars"
    assert shown_ids(page) == ids


def test_an_address_made_by_hand_cannot_break_the_page(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#body=nobody&kind=&sort=constructor&slice=-7&look=plaid&at=<b>&text=%3Cscript%3E")
    assert count(page) == 0
    page.find_element("css selector", "#clear").click()
    assert count(page) == events.height


def test_the_selection_is_saved_as_csv_with_the_columns_of_the_file(
    opened: Open, events: pl.DataFrame
) -> None:
    page = opened("#body=venus&sort=-separation")
    text = saved(page, "#save-csv")
    table = pl.read_csv(text.encode(), schema_overrides=schema.EVENT_COLUMNS)
    wanted = events.filter((pl.col("body") == "venus") | (pl.col("other") == "venus"))
    wanted = wanted.sort("separation_deg", descending=True, nulls_last=True, maintain_order=True)
    assert table.height == wanted.height > 40
    rounded = wanted.with_columns(pl.col(name).round(places) for name, places in DECIMALS.items())
    assert_frame_equal(table.drop("jd_tt"), rounded.drop("jd_tt"), abs_tol=1e-9, rel_tol=0.0)
    assert (table["jd_tt"] - wanted["jd_tt"]).abs().max() < 1.2e-8  # a millisecond


def test_the_selection_is_saved_as_the_very_entries_of_the_calendar(
    opened: Open, report: Path, events: pl.DataFrame
) -> None:
    page = opened("#kind=station,opposition")
    text = saved(page, "#save-ics")
    wanted = events.filter(pl.col("kind").is_in(["station", "opposition"]))
    entries = Calendar.from_ical(text).walk("VEVENT")
    assert {str(entry["UID"]).partition("@")[0] for entry in entries} == set(wanted["event_id"])
    whole = (report / "events.ics").read_bytes().decode()
    for part in text.split("BEGIN:VEVENT")[1:]:
        assert f"BEGIN:VEVENT{part.removesuffix('END:VCALENDAR' + chr(13) + chr(10))}" in whole


def test_every_row_near_the_sun_carries_the_caution(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#sort=elongation")
    near = events.filter(pl.col("elongation_deg") < 20.0).height
    assert near > 20
    rows = page.execute_script(
        f"return [...document.querySelectorAll('{SHOWN}')]"
        ".map((r) => [r.querySelector('.note')?.textContent ?? '', r.textContent])"
    )
    for note, text in rows[: min(near, 100)]:
        assert "local rules" in note, text


def colours(page: Any) -> list[list[int]]:
    script = """
    const seen = new Set();
    for (const part of document.querySelectorAll('body *')) {
      const style = getComputedStyle(part);
      if (part.checkVisibility() && part.tagName !== 'IMG')
        for (const c of [style.color, style.backgroundColor, style.borderTopColor]) seen.add(c);
    }
    return [...seen].map((c) => c.match(/[\\d.]+/g).map(Number)).filter((c) => c.length < 4 || c[3] > 0);
    """
    found: list[list[int]] = page.execute_script(script)
    return found


def test_by_night_nothing_is_shown_but_red_and_black(opened: Open) -> None:
    page = opened("#look=night&body=mars")
    assert page.execute_script("return getComputedStyle(document.body).backgroundColor") == "rgb(0, 0, 0)"
    for red, green, blue, *_ in colours(page):
        assert green <= 0x20, (red, green, blue)
        assert blue <= 0x20, (red, green, blue)


@pytest.mark.parametrize(("look", "is_dark"), [("light", False), ("dark", True)])
def test_a_look_is_chosen_and_kept_in_the_address(opened: Open, look: str, is_dark: bool) -> None:
    page = opened()
    tick(page, "look", look)
    paper = "return getComputedStyle(document.body).backgroundColor.match(/\\d+/g).map(Number)"
    assert (max(page.execute_script(paper)) < 64) == is_dark
    assert f"look={look}" in page.execute_script("return location.hash")


def test_the_look_follows_the_system_unless_chosen(opened: Open) -> None:
    page = opened()
    features = [{"name": "prefers-color-scheme", "value": "dark"}]
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "screen", "features": features})
    paper = page.execute_script(
        "return getComputedStyle(document.body).backgroundColor.match(/\\d+/g).map(Number)"
    )
    assert max(paper) < 64


@pytest.mark.parametrize("width", [1440, 768, 390, 320])
def test_nothing_sticks_out_sideways(opened: Open, width: int) -> None:
    # WCAG 2.2, 1.4.10: down to 320 dots no scrolling in two directions, pictures in their frames excepted.
    page = opened("", width, 900)
    assert page.execute_script("return document.documentElement.scrollWidth") <= width


def test_controls_are_large_enough_to_hit(opened: Open) -> None:
    # WCAG 2.2, 2.5.8: 24 by 24 dots.
    page = opened("", 390, 844)
    small = page.execute_script(
        "return [...document.querySelectorAll('button, label.pill, .fields input, nav.contents a, summary')]"
        ".filter((c) => c.checkVisibility()).map((c) => [c.textContent, c.getBoundingClientRect()])"
        ".filter(([, box]) => box.width < 24 || box.height < 24).map(([text]) => text)"
    )
    assert small == []


def test_the_keyboard_reaches_the_filters_and_works_them(opened: Open, events: pl.DataFrame) -> None:
    page = opened()
    from selenium.webdriver import ActionChains

    keys = ActionChains(page)
    keys.send_keys("\ue004").perform()  # tab
    assert page.execute_script("return document.activeElement.className") == "skip"
    keys.send_keys("\ue007").perform()  # enter
    assert page.execute_script("return document.activeElement.id") == "events"
    keys.send_keys("\ue004").perform()
    focused = page.execute_script("return [document.activeElement.name, document.activeElement.value]")
    assert focused[0] == "body"
    keys.send_keys(" ").perform()
    wanted = events.filter((pl.col("body") == focused[1]) | (pl.col("other") == focused[1]))
    assert count(page) == wanted.height < events.height


def test_on_paper_the_controls_go_and_the_whole_selection_stands(opened: Open, events: pl.DataFrame) -> None:
    page = opened("#body=moon&look=night")
    moon = events.filter((pl.col("body") == "moon") | (pl.col("other") == "moon")).height
    assert moon > 100
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    page.execute_script("dispatchEvent(new Event('beforeprint'))")
    assert len(shown_ids(page)) == moon
    hidden = (
        "return [...document.querySelectorAll('nav, form, .looks, .pager')]"
        ".every((c) => !c.checkVisibility())"
    )
    assert page.execute_script(hidden)
    assert page.execute_script("return [...document.querySelectorAll('details')].every((d) => d.open)")
    for red, green, blue, *_ in colours(page):
        assert max(red, green, blue) - min(red, green, blue) < 16
    page.execute_script("dispatchEvent(new Event('afterprint'))")
    assert len(shown_ids(page)) == 100


def test_without_its_program_the_page_still_shows_seasons_events_and_pictures(opened: Open) -> None:
    page = opened()
    page.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        page.refresh()
        text = page.find_element("tag name", "main").text
        assert "events.csv" in text
        assert "Retrograde seasons of Mars" in text
        assert "Save selection" not in text
    finally:
        page.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})
