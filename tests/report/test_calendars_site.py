"""Calendars of a site: entries stand at the time to watch, by a clock that the file itself defines.

Read back by ``vobject`` (which follows the VTIMEZONE of the file), ``ical`` (which follows the TZID) and
``icalendar`` with ``recurring_ical_events``; clocks are held against zoneinfo.
"""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import replace
from importlib.resources import files
from typing import Any
from zoneinfo import ZoneInfo

import icalendar
import numpy as np
import polars as pl
import pytest
import recurring_ical_events
import vobject
from dateutil import tz
from ical.calendar_stream import IcsCalendarStream

from tests.report.calendar_samples import STYLE
from tests.site.places import HILL, RIDGE
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.scene import Choice
from wanderers.report.calendar_update import read_calendar
from wanderers.report.calendar_zones import changes, timezone
from wanderers.report.calendars import Issue, Style, issue
from wanderers.site.almanac import seen_from_site
from wanderers.site.places import Site

UTC = dt.UTC
SPAN = (dt.datetime(2027, 3, 1, tzinfo=UTC), dt.datetime(2027, 4, 15, tzinfo=UTC))
NOW = dt.datetime(2027, 2, 1, 9, 0, 7, tzinfo=UTC)
IN_UTC = replace(HILL, name="lantern", zone="UTC")
QUARTERS = Site("terrace", 27.7, 85.3, 1_300.0, "Asia/Kathmandu")
BOG = Site("bog; by the mill, north", 53.0, -7.0, 60.0, "Europe/Dublin")
QUAY = Site("quay", 40.7, -74.0, 0.0, "America/New_York")
ZONES = (
    "Europe/Berlin Europe/Dublin America/New_York Australia/Sydney Australia/Lord_Howe America/Sao_Paulo "
    "Pacific/Apia Asia/Tehran Africa/Casablanca Pacific/Fiji"
).split()
BERLIN = ";TZID=Europe/Berlin:"
SITES = (HILL, RIDGE, QUARTERS, BOG, QUAY, IN_UTC)


@pytest.fixture(scope="module")
def events(store: TrackStore) -> pl.DataFrame:
    """Six weeks over which clocks change in the north and in the south."""
    return almanac(
        store, Query(parse_date("2027-03-01"), parse_date("2027-04-15"), choice=Choice(stars_for=()))
    )


@pytest.fixture(scope="module", params=SITES, ids=lambda site: site.zone)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def seen(store: TrackStore, events: pl.DataFrame, site: Site) -> pl.DataFrame:
    return seen_from_site(store, site, events)


@pytest.fixture(scope="module")
def content(seen: pl.DataFrame, site: Site) -> bytes:
    return issued(seen, site).content


@pytest.fixture(scope="module")
def from_hill(store: TrackStore, events: pl.DataFrame) -> pl.DataFrame:
    return seen_from_site(store, HILL, events)


def issued(seen: pl.DataFrame, site: Site | None, previous: bytes | None = None, span: Any = SPAN) -> Issue:
    style = Style(STYLE.name, STYLE.kernel, site=site)
    published = None if previous is None else read_calendar(previous)
    return issue(seen, style, published=published, span=span, stamp=NOW)


def by_ical(content: bytes) -> dict[str, Any]:
    calendar = IcsCalendarStream.calendar_from_ics(content.decode())
    return {entry.uid.removesuffix("@wanderers"): entry for entry in calendar.events}


def by_vobject(content: bytes) -> dict[str, Any]:
    calendar = vobject.readOne(content.decode(), validate=True)
    return {entry.uid.value.removesuffix("@wanderers"): entry for entry in calendar.vevent_list}


def blocks(content: bytes) -> dict[str, bytes]:
    found = re.findall(rb"BEGIN:VEVENT\r\n.*?END:VEVENT\r\n", content, flags=re.DOTALL)
    return {re.search(rb"UID:(.*?)@", block.replace(b"\r\n ", b""))[1].decode(): block for block in found}  # type: ignore[index]


def watchable(seen: pl.DataFrame) -> pl.DataFrame:
    return seen.filter(pl.col("verdict") != "not_visible")


def to_minute(utc: str) -> dt.datetime:
    exact = dt.datetime.fromisoformat(utc) + dt.timedelta(seconds=30)
    return exact.replace(second=0, microsecond=0)


def window(row: dict[str, Any]) -> tuple[dt.datetime, dt.datetime]:
    start, end = to_minute(row["window_start_utc"]), to_minute(row["window_end_utc"])
    return start, max(end, start + dt.timedelta(minutes=1))


# ---- where entries stand


def test_what_can_be_seen_stands_at_its_window_in_the_eyes_of_two_readers(
    seen: pl.DataFrame, content: bytes
) -> None:
    ical, vobj = by_ical(content), by_vobject(content)
    assert len(ical) == len(vobj) == seen.height
    some = watchable(seen)
    assert some.height > 15
    for row in some.iter_rows(named=True):
        start, end = window(row)
        name = row["event_id"]
        assert ical[name].dtstart.astimezone(UTC) == start
        assert ical[name].dtend.astimezone(UTC) == end
        assert vobj[name].dtstart.value.astimezone(UTC) == start
        assert vobj[name].dtend.value.astimezone(UTC) == end


def test_what_cannot_be_seen_stands_at_its_instant(seen: pl.DataFrame, content: bytes) -> None:
    entries = by_ical(content)
    unseen = seen.filter(pl.col("verdict") == "not_visible")
    assert unseen.height > 15
    for row in unseen.iter_rows(named=True):
        entry = entries[row["event_id"]]
        assert abs(entry.dtstart - dt.datetime.fromisoformat(row["utc"])) <= dt.timedelta(seconds=60)
        assert entry.dtend is None and entry.duration == dt.timedelta(minutes=15)
        assert f"Not to be seen from {row['site']}" in entry.description


def test_the_instant_stays_beside_the_window(seen: pl.DataFrame, content: bytes) -> None:
    parts = blocks(content)
    for row in watchable(seen).iter_rows(named=True):
        told = re.search(rb"\r\nX-WANDERERS-INSTANT:(\d{8}T\d{6}Z)\r\n", parts[row["event_id"]])
        assert told is not None
        instant = dt.datetime.strptime(told[1].decode(), "%Y%m%dT%H%M%SZ").replace(tzinfo=UTC)
        exact = dt.datetime.fromisoformat(row["utc"])
        # rounded to the minute, but within its day
        assert abs(instant - exact) <= dt.timedelta(seconds=30 if exact.time() < dt.time(23, 59) else 60)
        assert instant.date() == exact.date() and instant.second == 0
    unseen = seen.filter(pl.col("verdict") == "not_visible")["event_id"]
    assert not any(b"X-WANDERERS-INSTANT" in parts[name] for name in unseen)


def test_place_and_name_of_the_site_stand_in_every_entry(content: bytes, site: Site) -> None:
    for entry in by_ical(content).values():
        assert entry.location == site.name
        assert (entry.geo.lat, entry.geo.lng) == (site.latitude_deg, site.longitude_deg)


def test_without_a_site_there_is_no_place_and_no_zone(events: pl.DataFrame) -> None:
    content = issued(events, None).content
    for name in (b"LOCATION", b"GEO:", b"TZID", b"VTIMEZONE", b"X-WANDERERS-INSTANT"):
        assert name not in content
    entries = by_ical(content)
    assert len(entries) == events.height
    assert all(
        entry.dtstart.tzinfo is UTC or entry.dtstart.utcoffset() == dt.timedelta()
        for entry in entries.values()
    )


# ---- zones


def test_local_times_bear_the_sites_zone_and_utc_bears_none(
    seen: pl.DataFrame, content: bytes, site: Site
) -> None:
    parts = blocks(content)
    zones = [
        re.findall(rb"\r\nDT(?:START|END)(?:;TZID=([^:]+))?:\d{8}T\d{6}(Z?)(?=\r\n)", parts[name])
        for name in watchable(seen)["event_id"]
    ]
    expected = (b"", b"Z") if site.zone == "UTC" else (site.zone.encode(), b"")
    assert all(pair == [expected, expected] for pair in zones)
    assert content.count(b"BEGIN:VTIMEZONE") == (site.zone != "UTC")


def test_the_files_own_rules_give_the_offsets_of_zoneinfo_at_every_entry(
    seen: pl.DataFrame, content: bytes, site: Site, tmp_path: Any
) -> None:
    if site.zone == "UTC":
        assert b"TZID" not in content
        return
    file = tmp_path / "site.ics"
    file.write_bytes(content)
    rules = tz.tzical(str(file)).get(site.zone)
    offsets = set()
    for row in watchable(seen).iter_rows(named=True):
        for moment in window(row):
            expected = moment.astimezone(ZoneInfo(site.zone))
            assert expected.replace(tzinfo=rules).utcoffset() == expected.utcoffset(), expected
            offsets.add(expected.utcoffset())
    assert len(offsets) == (1 if site is QUARTERS else 2)


@pytest.mark.parametrize("zone", ZONES)
@pytest.mark.parametrize("years", [(2011, 2012), (1985, 1987), (2027, 2027)])
def test_a_definition_holds_to_the_hour_around_every_change(
    zone: str, years: tuple[int, int], tmp_path: Any
) -> None:
    # RFC 5545, 3.6.5: an onset is told by the clock that held before it.
    first, last = years
    with (files("tzdata") / "zoneinfo").joinpath(*zone.split("/")).open("rb") as file:
        theirs = ZoneInfo.from_file(file, key=zone)
    calendar = icalendar.Calendar()
    calendar.add_component(timezone(zone, range(first, last + 1)))
    path = tmp_path / "zone.ics"
    path.write_bytes(calendar.to_ical())
    ours = tz.tzical(str(path)).get(zone)
    start, end = dt.datetime(first, 1, 1, tzinfo=UTC), dt.datetime(last + 1, 1, 1, tzinfo=UTC)
    steps = [start + dt.timedelta(hours=hour) for hour in range(int((end - start) / dt.timedelta(hours=1)))]
    shown = [moment.astimezone(theirs) for moment in steps]
    plain = [
        clock for clock in shown if clock.fold == 0 and clock.replace(fold=1).utcoffset() == clock.utcoffset()
    ]
    assert len(plain) > 8_000
    wrong = [clock for clock in plain if clock.replace(tzinfo=ours).utcoffset() != clock.utcoffset()]
    assert wrong == []


def test_changes_of_the_clock_are_found_to_the_second() -> None:
    # European Union, directive 2000/84/EC: at 01:00 UTC on the last Sundays of March and October.
    found = changes(
        ZoneInfo("Europe/Berlin"), dt.datetime(2027, 1, 1, tzinfo=UTC), dt.datetime(2028, 1, 1, tzinfo=UTC)
    )
    assert found == [dt.datetime(2027, 3, 28, 1, tzinfo=UTC), dt.datetime(2027, 10, 31, 1, tzinfo=UTC)]


@pytest.mark.parametrize("year", [1, 9998, 9999])
def test_the_first_and_last_years_of_calendars_are_no_failure(year: int) -> None:
    text = timezone("Europe/Berlin", [year]).to_ical().decode()
    assert text.count("BEGIN:STANDARD") >= 1


# ---- clock changes


def shifted(row: dict[str, Any], start: dt.datetime, end: dt.datetime, zone: str) -> dict[str, Any]:
    """Return a row watched from when to when."""
    best = start + (end - start) / 2
    times = {"window_start": start, "best": best, "window_end": end}
    return row | {
        **{
            f"{name}_utc": f"{time.replace(tzinfo=None).isoformat(timespec='milliseconds')}Z"
            for name, time in times.items()
        },
        **{
            f"{name}_local": time.astimezone(ZoneInfo(zone)).isoformat(timespec="milliseconds")
            for name, time in times.items()
        },
    }


def one_row(seen: pl.DataFrame, start: dt.datetime, end: dt.datetime, zone: str = HILL.zone) -> pl.DataFrame:
    row = watchable(seen).row(0, named=True)
    return pl.DataFrame([shifted(row, start, end, zone)], schema=seen.schema)


@pytest.mark.parametrize(
    ("start", "end", "written"),
    [
        # clocks go back from 03:00 to 02:00 at 01:00 UTC: the first 02:30, then the second
        ("10-31T00:30:00", "10-31T00:45:00", (BERLIN + "20271031T023000", BERLIN + "20271031T024500")),
        ("10-31T00:30:00", "10-31T01:45:00", (BERLIN + "20271031T023000", ":20271031T014500Z")),
        ("10-31T01:10:00", "10-31T01:50:00", (":20271031T011000Z", ":20271031T015000Z")),
        ("10-31T01:10:00", "10-31T04:00:00", (":20271031T011000Z", BERLIN + "20271031T050000")),
        ("10-31T00:59:40", "10-31T04:00:00", (":20271031T010000Z", BERLIN + "20271031T050000")),
        # clocks go ahead from 02:00 to 03:00: rounding may not write an hour that there is none of
        ("03-28T00:10:00", "03-28T00:59:40", (BERLIN + "20270328T011000", ":20270328T010000Z")),
        ("03-28T00:10:00", "03-28T01:20:00", (BERLIN + "20270328T011000", BERLIN + "20270328T032000")),
    ],
)  # fmt: skip
def test_windows_over_a_change_of_the_clock_stay_where_they_are(
    from_hill: pl.DataFrame, start: str, end: str, written: tuple[str, str]
) -> None:
    first, last = (dt.datetime.fromisoformat(f"2027-{text}+00:00") for text in (start, end))
    table = one_row(from_hill, first, last)
    content = issued(table, HILL, span=(SPAN[0], dt.datetime(2028, 1, 1, tzinfo=UTC))).content
    text = content.decode()
    assert f"\r\nDTSTART{written[0]}\r\n" in text
    assert f"\r\nDTEND{written[1]}\r\n" in text
    expected = tuple(to_minute(time.isoformat()) for time in (first, last))
    name = table["event_id"][0]
    ical, vobj = by_ical(content)[name], by_vobject(content)[name]
    assert (ical.dtstart.astimezone(UTC), ical.dtend.astimezone(UTC)) == expected
    assert (vobj.dtstart.value.astimezone(UTC), vobj.dtend.value.astimezone(UTC)) == expected
    assert read_calendar(content).entries[0].start == expected[0]
    assert issued(table, HILL, content).content == content


# ---- a week as a program shows it


def test_a_program_that_unfolds_a_week_finds_what_is_watched_in_it(
    seen: pl.DataFrame, content: bytes, site: Site
) -> None:
    first = dt.datetime(2027, 3, 25, 12, tzinfo=UTC)
    last = first + dt.timedelta(days=7)
    found = recurring_ical_events.of(icalendar.Calendar.from_ical(content)).between(first, last)
    names = {str(entry["UID"]).removesuffix("@wanderers") for entry in found}
    some = {
        row["event_id"]
        for row in watchable(seen).iter_rows(named=True)
        if window(row)[0] < last and window(row)[1] > first
    }
    others = seen.filter(pl.col("verdict") == "not_visible")
    instants = {
        row["event_id"]
        for row in others.iter_rows(named=True)
        if first - dt.timedelta(minutes=14)
        <= dt.datetime.fromisoformat(row["utc"])
        < last - dt.timedelta(minutes=1)
    }
    assert len(some) >= 3
    assert some | instants <= names
    assert len(names - some - instants) <= 1  # on the edge


# ---- reissues


def test_nothing_changed_gives_the_same_octets(seen: pl.DataFrame, content: bytes, site: Site) -> None:
    again = issued(seen.sample(fraction=1.0, shuffle=True, seed=1), site, content)
    assert again.content == content
    assert (again.changes, again.unchanged) == ([], seen.height)


@pytest.mark.parametrize(("name", "what"), [("window_start", "moved"), ("window_end", "changed")])
def test_a_changed_window_raises_its_entry_alone(from_hill: pl.DataFrame, name: str, what: str) -> None:
    content = issued(from_hill, HILL).content
    row = watchable(from_hill).row(4, named=True)
    start, end = (dt.datetime.fromisoformat(row[f"{end}_utc"]) for end in ("window_start", "window_end"))
    later = dt.timedelta(minutes=7)
    start, end = (start - later, end) if name == "window_start" else (start, end + later)
    new = pl.DataFrame(
        [
            shifted(row, start, end, HILL.zone)
            | {"best_utc": row["best_utc"], "best_local": row["best_local"]}
        ],
        schema=from_hill.schema,
    )
    table = pl.concat([from_hill.filter(pl.col("event_id") != row["event_id"]), new])
    now = issued(table, HILL, content)
    assert [(change.what, change.minutes) for change in now.changes] == [(what, -7 if what == "moved" else 0)]
    entry = by_ical(now.content)[row["event_id"]]
    assert (entry.sequence, entry.dtstamp) == (1, NOW)
    assert entry.dtstart.astimezone(UTC) == to_minute(start.isoformat())
    assert entry.dtend.astimezone(UTC) == to_minute(end.isoformat())
    before, after = blocks(content), blocks(now.content)
    assert {uid for uid in before if before[uid] != after[uid]} == {row["event_id"]}
    assert issued(table, HILL, now.content).content == now.content


def test_a_span_counts_instants_not_windows(from_hill: pl.DataFrame) -> None:
    # Watched before or after its instant: whether it belongs to a span depends on the instant.
    content = issued(from_hill, HILL).content
    for row in watchable(from_hill).iter_rows(named=True):
        instant, start = dt.datetime.fromisoformat(row["utc"]), window(row)[0]
        if abs(instant - start) < dt.timedelta(hours=3):
            continue
        middle = instant + (start - instant) / 2
        first, last = (middle, SPAN[1]) if start > instant else (SPAN[0], middle)
        rest = from_hill.filter(pl.col("event_id") != row["event_id"])
        kept = issued(rest, HILL, content, span=(first, last)).content
        assert blocks(kept)[row["event_id"]] == blocks(content)[row["event_id"]]
        whole = issued(rest, HILL, content, span=SPAN)
        assert [change.what for change in whole.changes] == ["withdrawn"]
        return
    pytest.fail("no event is watched long before or after its instant")


def test_a_withdrawn_entry_of_a_site_keeps_its_window_and_place(from_hill: pl.DataFrame) -> None:
    content = issued(from_hill, HILL).content
    row = watchable(from_hill).row(2, named=True)
    now = issued(from_hill.filter(pl.col("event_id") != row["event_id"]), HILL, content)
    entry = by_ical(now.content)[row["event_id"]]
    assert (entry.status, entry.sequence, entry.location) == ("CANCELLED", 1, HILL.name)
    assert entry.dtstart.astimezone(UTC) == window(row)[0]
    assert b"BEGIN:VTIMEZONE" in now.content


def test_a_calendar_of_the_whole_earth_moves_to_a_site(events: pl.DataFrame, from_hill: pl.DataFrame) -> None:
    content = issued(events, None).content
    now = issued(from_hill, HILL, content)
    entries = by_ical(now.content)
    row = watchable(from_hill).row(0, named=True)
    assert entries[row["event_id"]].dtstart.astimezone(UTC) == window(row)[0]
    assert {entry.sequence for entry in entries.values()} == {1}
    assert by_vobject(now.content).keys() == entries.keys()


@pytest.mark.parametrize("zone", ["Europe/Berlin", "America/New_York", "Mill Time", '"Mill: Time"'])
def test_entries_of_another_hand_keep_their_zone(from_hill: pl.DataFrame, zone: str) -> None:
    own = (
        f"BEGIN:VTIMEZONE\r\nTZID:{zone.strip(chr(34))}\r\nBEGIN:STANDARD\r\nDTSTART:20000101T000000\r\n"
        "TZOFFSETFROM:+0045\r\nTZOFFSETTO:+0045\r\nEND:STANDARD\r\nEND:VTIMEZONE\r\n"
    ).encode()
    tea = (
        "BEGIN:VEVENT\r\nUID:tea@lantern.example\r\nDTSTAMP:20270101T000000Z\r\n"
        f"DTSTART;TZID={zone}:20270701T150000\r\nSUMMARY:Tea\r\nEND:VEVENT\r\n"
    ).encode()
    content = issued(from_hill, HILL).content
    is_own = "Mill" in zone
    previous = content.replace(b"BEGIN:VEVENT", own * is_own + tea + b"BEGIN:VEVENT", 1)
    now = issued(from_hill, HILL, previous)
    assert now.changes == []
    assert tea in now.content and (own in now.content) is is_own
    calendar = icalendar.Calendar.from_ical(now.content)
    names = sorted(str(part["TZID"]) for part in calendar.walk("VTIMEZONE"))
    assert names == sorted({HILL.zone, zone.strip('"')})
    assert issued(from_hill, HILL, now.content).content == now.content


# ---- what is said


def test_a_southern_site_is_told_its_own_evenings_and_directions(
    store: TrackStore, events: pl.DataFrame
) -> None:
    seen = seen_from_site(store, RIDGE, events)
    entries = by_ical(issued(seen, RIDGE).content)
    north = 0
    for row in watchable(seen).iter_rows(named=True):
        text = entries[row["event_id"]].description
        start = window(row)[0].astimezone(ZoneInfo(RIDGE.zone))
        assert f"{start:%H:%M} to " in text
        assert f"{row['altitude_deg']:.0f} degrees high in the {row['compass']}" in text
        north += row["compass"].startswith("north")
    assert north > 5  # the ecliptic culminates in the north there: common practice


def test_the_words_name_the_evening_or_the_morning(from_hill: pl.DataFrame) -> None:
    entries = by_ical(issued(from_hill, HILL).content)
    told = set()
    for row in watchable(from_hill).iter_rows(named=True):
        best = to_minute(row["best_utc"]).astimezone(ZoneInfo(HILL.zone))
        part = (
            "morning"
            if best.date().isoformat() != row["evening_date"] and best.hour >= 3
            else "evening"
            if best.hour >= 12
            else "night"
        )
        assert f" {part} " in entries[row["event_id"]].description
        assert f"{best:%A}" in entries[row["event_id"]].description or part == "night"
        told.add(part)
    assert {"morning", "evening"} <= told


def test_stamps_in_the_table_and_the_file_agree(seen: pl.DataFrame, site: Site) -> None:
    # the local twins themselves: an offset that zoneinfo knows
    for row in watchable(seen).iter_rows(named=True):
        local, utc = (dt.datetime.fromisoformat(row[f"best_{name}"]) for name in ("local", "utc"))
        assert local == utc
        assert local.utcoffset() == utc.astimezone(ZoneInfo(site.zone)).utcoffset()
    assert np.isfinite(watchable(seen)["altitude_deg"].to_numpy()).all()
