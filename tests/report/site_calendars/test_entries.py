"""Calendars of a site: entries stand at the time to watch, and say where to look.

Read back by ``vobject`` (which follows the VTIMEZONE of the file), ``ical`` (which follows the TZID) and
``icalendar`` with ``recurring_ical_events``; clocks are held against zoneinfo.
"""

from __future__ import annotations

import datetime as dt
import re
from zoneinfo import ZoneInfo

import icalendar
import numpy as np
import polars as pl
import recurring_ical_events

from tests.report.site_calendars.samples import (
    UTC,
    blocks,
    by_ical,
    by_vobject,
    issued,
    to_minute,
    watchable,
    window,
)
from tests.site.places import HILL, RIDGE
from wanderers.ephemeris.store import TrackStore
from wanderers.site.almanac import seen_from_site
from wanderers.site.places import Site

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
