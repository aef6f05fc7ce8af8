"""Six weeks of events as sites see them, and their calendars read back by other programs."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import replace
from typing import Any
from zoneinfo import ZoneInfo

import polars as pl
import vobject
from ical.calendar_stream import IcsCalendarStream

from tests.report.calendar_samples import STYLE
from tests.site.places import HILL, RIDGE
from wanderers.report.calendar_update import read_calendar
from wanderers.report.calendars import Issue, Style, issue
from wanderers.site.places import Site

UTC = dt.UTC
SPAN = (dt.datetime(2027, 3, 1, tzinfo=UTC), dt.datetime(2027, 4, 15, tzinfo=UTC))
NOW = dt.datetime(2027, 2, 1, 9, 0, 7, tzinfo=UTC)
IN_UTC = replace(HILL, name="lantern", zone="UTC")
QUARTERS = Site("terrace", 27.7, 85.3, 1_300.0, "Asia/Kathmandu")
BOG = Site("bog; by the mill, north", 53.0, -7.0, 60.0, "Europe/Dublin")
QUAY = Site("quay", 40.7, -74.0, 0.0, "America/New_York")
SITES = (HILL, RIDGE, QUARTERS, BOG, QUAY, IN_UTC)


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
