"""Time zones of calendar files: the rules behind each TZID, change by change.

Source: RFC 5545, 3.6.5: a change begins at the time that the clock showed by the offset before it.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from typing import Final
from zoneinfo import ZoneInfo

from icalendar import Timezone, TimezoneDaylight, TimezoneStandard

from wanderers.site.zones import zone_named

DAY: Final = dt.timedelta(days=1)
SECOND: Final = dt.timedelta(seconds=1)
FIRST: Final = dt.datetime(1, 1, 2, tzinfo=dt.UTC)
LAST: Final = dt.datetime(9999, 12, 30, tzinfo=dt.UTC)
"""Instants that every clock can show in a year of four digits."""

Rule = tuple[dt.timedelta, dt.timedelta, str, bool]
"""Offset before and after a change, name of the time after it, whether that is summer time."""


def timezone(name: str, years: Iterable[int]) -> Timezone:
    """Return the definition of a zone, right from the year before the first to that after the last.

    Args:
        name: of the IANA database.
        years: those in which the clock is read.

    Raises:
        UnknownNameError: there is no such zone.
    """
    rules, chosen = zone_named(name).rules, sorted(years)
    start = dt.datetime(max(chosen[0] - 1, 1), 1, 1, tzinfo=dt.UTC)
    end = dt.datetime(min(chosen[-1] + 2, 9999), 1, 1, tzinfo=dt.UTC)
    start, end = max(start, FIRST), min(end, LAST)
    zone = Timezone()
    zone.add("TZID", name)
    onsets: dict[Rule, list[dt.datetime]] = {
        (*_offsets(rules, start, start), *_named(rules, start)): [_clock(rules, start, start)]
    }
    for instant in changes(rules, start, end):
        rule = (*_offsets(rules, instant - SECOND, instant), *_named(rules, instant))
        onsets.setdefault(rule, []).append(_clock(rules, instant - SECOND, instant))
    for rule, clocks in onsets.items():
        zone.add_component(_part(rule, clocks))
    return zone


def changes(rules: ZoneInfo, start: dt.datetime, end: dt.datetime) -> list[dt.datetime]:
    """Return the instants at which a clock changes its offset, UTC, to the second."""
    days = [start + step * DAY for step in range((end - start).days + 1)]
    offsets = [day.astimezone(rules).utcoffset() for day in days]
    pairs = zip(days, offsets, offsets[1:], strict=False)
    return [_change(rules, day) for day, before, after in pairs if before != after]


def _change(rules: ZoneInfo, day: dt.datetime) -> dt.datetime:
    """Return the first second at which the offset is no longer that at the beginning of a UTC day."""
    before = day.astimezone(rules).utcoffset()
    low, high = 0, int(DAY / SECOND)
    while high - low > 1:
        middle = (low + high) // 2
        same = (day + middle * SECOND).astimezone(rules).utcoffset() == before
        low, high = (middle, high) if same else (low, middle)
    return day + high * SECOND


def _offsets(rules: ZoneInfo, before: dt.datetime, after: dt.datetime) -> tuple[dt.timedelta, dt.timedelta]:
    first, second = (moment.astimezone(rules).utcoffset() for moment in (before, after))
    return first or dt.timedelta(), second or dt.timedelta()


def _named(rules: ZoneInfo, moment: dt.datetime) -> tuple[str, bool]:
    shown = moment.astimezone(rules)
    return shown.tzname() or "", bool(shown.dst())


def _clock(rules: ZoneInfo, before: dt.datetime, instant: dt.datetime) -> dt.datetime:
    """Return an instant as the clock shows it by the offset that held before."""
    return instant.replace(tzinfo=None) + _offsets(rules, before, before)[0]


def _part(rule: Rule, clocks: list[dt.datetime]) -> TimezoneStandard | TimezoneDaylight:
    before, after, name, is_summer = rule
    part = TimezoneDaylight() if is_summer else TimezoneStandard()
    part.add("TZOFFSETFROM", before)
    part.add("TZOFFSETTO", after)
    part.add("TZNAME", name)
    part.add("DTSTART", clocks[0])
    for clock in clocks[1:]:
        part.add("RDATE", clock)
    return part
