"""Calendars of a site: local times, by a clock that the file itself defines.

Read back by ``vobject`` (which follows the VTIMEZONE of the file), ``ical`` (which follows the TZID) and
``icalendar`` with ``recurring_ical_events``; clocks are held against zoneinfo.
"""

from __future__ import annotations

import datetime as dt
import re
from importlib.resources import files
from typing import Any
from zoneinfo import ZoneInfo

import icalendar
import polars as pl
import pytest
from dateutil import tz

from tests.report.site_calendars.samples import (
    QUARTERS,
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
from wanderers.report.calendar_update import read_calendar
from wanderers.report.calendar_zones import changes, timezone
from wanderers.site.places import Site

ZONES = (
    "Europe/Berlin Europe/Dublin America/New_York Australia/Sydney Australia/Lord_Howe America/Sao_Paulo "
    "Pacific/Apia Asia/Tehran Africa/Casablanca Pacific/Fiji"
).split()
BERLIN = ";TZID=Europe/Berlin:"


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
