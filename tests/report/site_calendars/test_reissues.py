"""Calendars of a site that are issued again: what moves, what stays, entries of another hand.

Read back by ``vobject`` (which follows the VTIMEZONE of the file), ``ical`` (which follows the TZID) and
``icalendar`` with ``recurring_ical_events``; clocks are held against zoneinfo.
"""

from __future__ import annotations

import datetime as dt

import icalendar
import polars as pl
import pytest

from tests.report.site_calendars.samples import (
    NOW,
    SPAN,
    UTC,
    blocks,
    by_ical,
    by_vobject,
    issued,
    shifted,
    to_minute,
    watchable,
    window,
)
from tests.site.places import HILL
from wanderers.site.places import Site


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
