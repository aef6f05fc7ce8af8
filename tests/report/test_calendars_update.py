"""Reissued calendars: what changed is raised, what did not stays to the octet.

That a higher SEQUENCE is the newer entry, and at equal SEQUENCE a later DTSTAMP: RFC 5546, 2.1.5, and
RFC 5545, 3.8.7.4 (from memory). Files are read back by ``ical`` and ``vobject``, which had no part in them.
"""

from __future__ import annotations

import re
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from typing import Any

import polars as pl
import pytest
import vobject
from hypothesis import given
from hypothesis import strategies as st
from ical.calendar_stream import IcsCalendarStream

from tests.report.calendar_samples import CONJUNCTION, KERNEL, STATION, STYLE, TRANSIT, event, table
from wanderers.report.calendar_update import CalendarFileError, read_calendar
from wanderers.report.calendars import FIRST_STAMP, Issue, Style, calendar_bytes, issue

YEAR_2027 = (datetime(2027, 1, 1, tzinfo=UTC), datetime(2028, 1, 1, tzinfo=UTC))
NOW = datetime(2027, 3, 1, 8, 30, 5, tzinfo=UTC)
OPPOSITION = event("opposition", "2027-02-19T15:51:00.000Z", elongation_deg=175.5)
BEFORE = table(STATION, OPPOSITION, CONJUNCTION)


def first_issue(*rows: dict[str, Any], style: Style = STYLE) -> bytes:
    return issue(table(*rows), style).content


def next_issue(previous: bytes, *rows: dict[str, Any], style: Style = STYLE) -> Issue:
    return issue(table(*rows), style, published=read_calendar(previous), span=YEAR_2027, stamp=NOW)


def blocks(content: bytes) -> dict[str, bytes]:
    found = re.findall(rb"BEGIN:VEVENT\r\n.*?END:VEVENT\r\n", content, flags=re.DOTALL)
    return {re.search(rb"UID:(.*?)@", block)[1].decode(): block for block in found}


def read(content: bytes) -> dict[str, Any]:
    vobject.readOne(content.decode(), validate=True)
    calendar = IcsCalendarStream.calendar_from_ics(content.decode())
    return {entry.uid.removesuffix("@wanderers"): entry for entry in calendar.events}


def moved(row: dict[str, Any], minutes: int) -> dict[str, Any]:
    later = datetime.fromisoformat(row["utc"][:-1]) + timedelta(minutes=minutes)
    return row | {"utc": later.isoformat(timespec="milliseconds") + "Z"}


PREVIOUS = first_issue(STATION, OPPOSITION, CONJUNCTION)


def test_nothing_changed_gives_the_same_octets_and_no_changes() -> None:
    again = next_issue(PREVIOUS, CONJUNCTION, STATION, OPPOSITION)
    assert again.content == PREVIOUS
    assert (again.changes, again.unchanged) == ([], 3)


def test_a_new_kernel_or_version_alone_changes_nothing() -> None:
    style = Style(STYLE.name, replace(KERNEL, sha256="f" * 64, name="DE998"))
    assert first_issue(STATION, style=style) != first_issue(STATION)
    assert next_issue(PREVIOUS, STATION, OPPOSITION, CONJUNCTION, style=style).content == PREVIOUS


def test_an_added_event_joins_and_leaves_the_others_alone() -> None:
    now = next_issue(PREVIOUS, STATION, OPPOSITION, CONJUNCTION, TRANSIT)
    assert now.content == first_issue(STATION, OPPOSITION, CONJUNCTION, TRANSIT)
    assert [str(change) for change in now.changes] == [
        "added: 2032-11-13 08:54 UTC, Mercury crosses the Sun's disc (transit)"
    ]


@pytest.mark.parametrize("minutes", [1, -1, 2880])
def test_a_moved_event_is_raised_alone_and_says_by_how_much(minutes: int) -> None:
    now = next_issue(PREVIOUS, moved(STATION, minutes), OPPOSITION, CONJUNCTION)
    old, new = read(PREVIOUS), read(now.content)
    name = STATION["event_id"]
    assert new[name].dtstart - old[name].dtstart == timedelta(minutes=minutes)
    assert (new[name].sequence, new[name].dtstamp, new[name].last_modified) == (1, NOW, NOW)
    assert [change.minutes for change in now.changes] == [minutes]
    assert f"moved by {minutes:+d} min: 2027-01-" in str(now.changes[0])
    assert untouched(PREVIOUS, now.content) == {OPPOSITION["event_id"], CONJUNCTION["event_id"]}


def untouched(old: bytes, new: bytes) -> set[str]:
    before, after = blocks(old), blocks(new)
    return {name for name in before.keys() & after.keys() if before[name] == after[name]}


def test_changed_words_are_raised_without_a_move() -> None:
    now = next_issue(PREVIOUS, STATION, OPPOSITION, CONJUNCTION | {"separation_deg": 0.51})
    entry = read(now.content)[CONJUNCTION["event_id"]]
    assert (entry.sequence, entry.summary[:29]) == (1, "Venus and Saturn 0.5° apart, ")
    assert [change.what for change in now.changes] == ["changed"]


def test_a_withdrawn_event_is_cancelled_and_rings_no_more() -> None:
    ringing = Style(STYLE.name, KERNEL, (30,))
    previous = first_issue(STATION, OPPOSITION, style=ringing)
    now = next_issue(previous, STATION, style=ringing)
    entry = read(now.content)[OPPOSITION["event_id"]]
    assert (entry.status, entry.sequence, entry.dtstamp) == ("CANCELLED", 1, NOW)
    assert entry.dtstart == datetime(2027, 2, 19, 15, 51, tzinfo=UTC)
    assert entry.alarm == []
    assert [str(change) for change in now.changes] == [
        "withdrawn: 2027-02-19 15:51 UTC, Mars at opposition to the Sun"
    ]
    assert untouched(previous, now.content) == {STATION["event_id"]}


def test_a_cancelled_event_stays_as_it_is() -> None:
    once = next_issue(PREVIOUS, STATION, CONJUNCTION)
    twice = next_issue(once.content, STATION, CONJUNCTION)
    assert twice.content == once.content
    assert twice.changes == []


def test_a_cancelled_event_that_comes_back_is_restored_under_the_next_number() -> None:
    gone = next_issue(PREVIOUS, STATION, CONJUNCTION).content
    back = next_issue(gone, STATION, OPPOSITION, CONJUNCTION)
    entry = read(back.content)[OPPOSITION["event_id"]]
    assert (entry.status, entry.sequence) == ("CONFIRMED", 2)
    assert entry.dtstamp == NOW + timedelta(seconds=1)  # later than the last, issued at the same instant
    assert [change.what for change in back.changes] == ["restored"]


@pytest.mark.parametrize(
    ("utc", "withdrawn"),
    [
        ("2026-12-31T23:59:59.900Z", False),
        ("2027-01-01T00:00:00.000Z", True),
        ("2027-12-31T23:59:59.900Z", True),
        ("2028-01-01T00:00:00.000Z", False),
    ],
)
def test_only_events_of_the_span_are_withdrawn(utc: str, withdrawn: bool) -> None:
    previous = first_issue(STATION, OPPOSITION | {"utc": utc})
    now = next_issue(previous, STATION)
    assert ([change.what for change in now.changes] == ["withdrawn"]) is withdrawn
    assert (now.content == previous) is not withdrawn


def test_a_start_rounded_across_the_edge_of_a_span_is_not_taken_for_withdrawn() -> None:
    noon = datetime(2027, 1, 1, 12, tzinfo=UTC)
    previous = first_issue(OPPOSITION | {"utc": "2027-01-01T11:59:45.000Z"})  # stands at 12:00
    now = issue(table(), STYLE, published=read_calendar(previous), span=(noon, YEAR_2027[1]))
    assert now.content == previous


def test_without_a_stamp_the_result_depends_on_the_arguments_alone() -> None:
    changed = table(moved(STATION, 5), OPPOSITION, CONJUNCTION)
    content = calendar_bytes(changed, name=STYLE.name, kernel=KERNEL, previous=PREVIOUS)
    assert content == calendar_bytes(changed, name=STYLE.name, kernel=KERNEL, previous=PREVIOUS)
    assert read(content)[STATION["event_id"]].dtstamp == FIRST_STAMP + timedelta(seconds=1)


def test_without_a_span_events_within_the_days_of_the_table_are_withdrawn() -> None:
    content = calendar_bytes(table(STATION, CONJUNCTION), name=STYLE.name, kernel=KERNEL, previous=PREVIOUS)
    assert read(content)[OPPOSITION["event_id"]].status == "CANCELLED"
    content = calendar_bytes(table(OPPOSITION), name=STYLE.name, kernel=KERNEL, previous=PREVIOUS)
    assert content == PREVIOUS


def test_alarms_asked_for_later_count_as_a_change() -> None:
    now = next_issue(PREVIOUS, STATION, OPPOSITION, CONJUNCTION, style=Style(STYLE.name, KERNEL, (10,)))
    assert [change.what for change in now.changes] == ["changed"] * 3


def test_entries_of_another_hand_are_kept_as_they_are() -> None:
    meeting = (
        b"BEGIN:VEVENT\r\nUID:tea@lantern.example\r\nDTSTAMP:20270101T000000Z\r\n"
        b"DTSTART;VALUE=DATE:20270301\r\nSUMMARY:Tea\\, biscuits\r\nEND:VEVENT\r\n"
    )
    previous = PREVIOUS.replace(b"END:VCALENDAR", meeting + b"END:VCALENDAR")
    now = next_issue(previous, STATION, OPPOSITION, CONJUNCTION)
    assert meeting in now.content
    assert now.changes == []
    assert untouched(PREVIOUS, now.content) == set(blocks(PREVIOUS))


def test_a_file_that_lost_its_carriage_returns_and_gained_a_mark_is_mended() -> None:
    previous = b"\xef\xbb\xbf" + PREVIOUS.replace(b"\r\n", b"\n")
    assert next_issue(previous, STATION, OPPOSITION, CONJUNCTION).content == PREVIOUS


def test_the_title_is_read_back() -> None:
    content = issue(table(STATION), Style("Sky; by week, edition\\north", KERNEL)).content
    assert read_calendar(content).name == "Sky; by week, edition\\north"


NO_CALENDARS = {
    "empty": b"",
    "text": b"hello\n",
    "page": b"<!DOCTYPE html><html></html>",
    "bytes": bytes(range(256)),
    "cut short": PREVIOUS[: len(PREVIOUS) // 2],
    "without its end": PREVIOUS.removesuffix(b"END:VCALENDAR\r\n"),
    "without its beginning": PREVIOUS.removeprefix(b"BEGIN:VCALENDAR\r\n"),
    "one event": b"BEGIN:VEVENT\r\nUID:a\r\nDTSTAMP:20270101T000000Z\r\nEND:VEVENT\r\n",
    "address card": b"BEGIN:VCARD\r\nVERSION:4.0\r\nFN:A\r\nEND:VCARD\r\n",
    "two calendars": PREVIOUS * 2,
    "utf-16": PREVIOUS.decode().encode("utf-16"),
    "latin": PREVIOUS.replace("°".encode(), b"\xb0"),
}


@pytest.mark.parametrize("content", NO_CALENDARS.values(), ids=NO_CALENDARS.keys())
def test_what_is_no_calendar_is_refused(content: bytes) -> None:
    with pytest.raises(CalendarFileError, match=r"sky\.ics") as caught:
        read_calendar(content, "sky.ics")
    assert "--update" in str(caught.value)


@pytest.mark.parametrize("author", [b"PRODID:-//Another Company//Calendar 3.1//EN\r\n", b""])
def test_the_calendar_of_another_program_is_refused(author: bytes) -> None:
    other = re.sub(rb"PRODID:.*?\r\n", author, PREVIOUS)
    with pytest.raises(CalendarFileError, match="written by another program"):
        read_calendar(other)


@pytest.mark.parametrize(
    ("good", "bad"),
    [
        (rb"DTSTART:20270110T125900Z", b"DTSTART;TZID=Mars/Valles:20270110T125900"),
        (rb"DTSTART:20270110T125900Z", b"DTSTART:20271301T125900Z"),
        (rb"DTSTAMP:20000101T120000Z\r\nSEQUENCE:0", b"DTSTAMP:20000101T120000Z"),
        (rb"DTSTAMP:20000101T120000Z\r\nSEQUENCE:0", b"DTSTAMP:20000101T120000Z\r\nSEQUENCE:-1"),
        (rb"DTSTAMP:20000101T120000Z\r\n", b""),
    ],
)  # fmt: skip
def test_a_damaged_entry_is_named(good: bytes, bad: bytes) -> None:
    damaged, count = re.subn(good.replace(rb"\r\n", b"\r\n"), bad, PREVIOUS, count=1)
    assert count == 1
    with pytest.raises(CalendarFileError, match=f"damaged at the entry {STATION['event_id']}"):
        read_calendar(damaged)


def test_an_entry_given_twice_is_refused() -> None:
    block = blocks(PREVIOUS)[STATION["event_id"]]
    with pytest.raises(CalendarFileError, match="twice"):
        read_calendar(PREVIOUS.replace(block, block * 2))


@given(st.data())
def test_damage_of_any_kind_is_either_refused_or_harmless(data: st.DataObject) -> None:
    place = data.draw(st.integers(0, len(PREVIOUS) - 1))
    cut = data.draw(st.integers(0, 40))
    put = data.draw(st.binary(max_size=8))
    damaged = PREVIOUS[:place] + put + PREVIOUS[place + cut :]
    try:
        published = read_calendar(damaged)
    except CalendarFileError:
        return
    now = issue(BEFORE, STYLE, published=published, span=YEAR_2027)
    assert {row["event_id"] for row in BEFORE.iter_rows(named=True)} <= set(read_loosely(now.content))


def read_loosely(content: bytes) -> list[str]:
    return [uid.decode() for uid in re.findall(rb"^UID:(.*?)@wanderers\r$", content, flags=re.MULTILINE)]


@given(
    st.lists(st.integers(-3, 3), min_size=3, max_size=3),
    st.lists(st.booleans(), min_size=3, max_size=3),
)
def test_an_issue_taken_up_again_is_always_left_alone(shifts: list[int], kept: list[bool]) -> None:
    rows = [moved(row, shift) for row, shift in zip((STATION, OPPOSITION, CONJUNCTION), shifts, strict=True)]
    rows = [row for row, keep in zip(rows, kept, strict=True) if keep]
    now = next_issue(PREVIOUS, *rows)
    assert next_issue(now.content, *rows).content == now.content
    before, after = read(PREVIOUS), read(now.content)
    assert len(now.changes) + now.unchanged == len(after)
    for name, entry in after.items():
        changed = blocks(PREVIOUS)[name] != blocks(now.content)[name]
        assert entry.sequence == before[name].sequence + changed
        assert (entry.dtstamp > before[name].dtstamp) is changed
    assert pl.Series(entry.dtstart for entry in after.values()).is_sorted()


def test_a_stamp_of_an_early_year_keeps_its_four_digits() -> None:
    early = PREVIOUS.replace(b"DTSTAMP:20000101T120000Z", b"DTSTAMP:09990101T120000Z")
    now = issue(table(moved(STATION, 1)), STYLE, published=read_calendar(early))
    assert b"DTSTAMP:09990101T120001Z" in now.content
