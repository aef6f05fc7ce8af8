"""Event tables as iCalendar files (RFC 5545 and RFC 7986).

Every entry stands for an instant in UTC or, from a site, for the time to watch by its clock. Calendar
programs show an entry without an end as they please, some as an hour, so an instant lasts a nominal quarter
of an hour and says so. The same table gives the same octets.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

import polars as pl
from icalendar import Alarm, Calendar, Event, Timezone, vDuration, vText

from wanderers import __version__
from wanderers.ephemeris.kernels import Kernel
from wanderers.errors import SpanError
from wanderers.report import site_words, words
from wanderers.report.calendar_entries import (
    INSTANT,
    PROVENANCE,
    UID_ENDING,
    Entry,
    escaped,
    instant_text,
    read_entry,
)
from wanderers.report.calendar_update import PRODID, Change, Published, UtcSpan, merged, read_calendar
from wanderers.report.calendar_zones import timezone
from wanderers.report.definitions import definition
from wanderers.report.phrases.language import Language
from wanderers.report.phrases.notes import notes
from wanderers.report.phrases.sentences import sentences
from wanderers.site.places import Site
from wanderers.site.summary import counted
from wanderers.site.zones import zone_named, zone_names

FIRST_STAMP: Final = dt.datetime(2000, 1, 1, 12, tzinfo=dt.UTC)
"""DTSTAMP of every entry that was never changed: a constant, so that equal tables give equal files."""
NOMINAL_LENGTH: Final = dt.timedelta(minutes=15)
NOMINAL: Final = (
    f"Lasts {NOMINAL_LENGTH.seconds // 60} minutes here only to be shown; the event is the beginning."
)
REFRESH: Final = dt.timedelta(days=1)
"""How often subscribers may look for a new issue: a hint."""
CHECKSUM_DIGITS: Final = 12
MANY_EVENTS: Final = 1000
"""Entries in one file above which calendar programs are known to give up. Common practice, no source."""
WIDELY_SHOWN_YEARS: Final = (1970, 2100)
"""Outside them many calendar programs fail. Common practice, no source."""


@dataclass(frozen=True, slots=True)
class Style:
    """How a calendar is made up.

    Attributes:
        name: its title.
        kernel: what its events were computed from.
        alarms_minutes: how long before each event an alarm is shown, as many as wanted.
        site: from where the events are seen; entries then stand at the time to watch.
        words: language of sentences that take the place of the usual headlines and figures; None for those.
    """

    name: str
    kernel: Kernel
    alarms_minutes: tuple[int, ...] = ()
    site: Site | None = None
    words: Language | None = None


@dataclass(frozen=True, slots=True)
class Issue:
    """A calendar file.

    Attributes:
        content: its octets.
        changes: what changed in it since the previous issue.
        unchanged: how many entries stayed as they were.
    """

    content: bytes
    changes: list[Change]
    unchanged: int


class ExactText(vText):
    """Text that is escaped exactly: the library turns a backslash before N into a line end."""

    def to_ical(self) -> bytes:
        """Return the raw value."""
        return escaped(str(self)).encode()


def calendar_bytes(
    events: pl.DataFrame, *, name: str, kernel: Kernel, previous: bytes | None = None
) -> bytes:
    """Return an event table as an iCalendar file.

    Args:
        events: columns of ``schema.EVENT_COLUMNS``.
        name: title of the calendar.
        kernel: what the events were computed from.
        previous: an earlier issue to bring up to date: see ``issue``. Published entries between the first
            and the last of the events that are no longer among them are cancelled.

    Raises:
        SpanError: an event outside the years 1 to 9999.
        CalendarFileError: ``previous`` is no calendar of this program.
    """
    published = None if previous is None else read_calendar(previous)
    return issue(events, Style(name, kernel), published=published).content


def issue(
    events: pl.DataFrame,
    style: Style,
    *,
    published: Published | None = None,
    span: UtcSpan | None = None,
    stamp: dt.datetime | None = None,
) -> Issue:
    """Return a calendar, or the next issue of one; where nothing changed, the same octets.

    Args:
        events: what holds now, all of it inside the span.
        style: title, kernel and alarms.
        published: the last issue; None for a new calendar.
        span: published entries in it that are no longer among the events are cancelled; None is the span from
            the first day of the events to the last.
        stamp: instant of this issue; None takes a second after the last one.

    Raises:
        SpanError: an event outside the years 1 to 9999.
    """
    known = published or Published(style.name, ())
    now = merged(known, entries(events, style), span or span_of(events), stamp)
    return Issue(
        calendar_file(style.name, now.entries, known.zones), now.changes, len(now.entries) - len(now.changes)
    )


def entries(events: pl.DataFrame, style: Style) -> list[Entry]:
    """Return the entry of every event, in the table's order.

    Raises:
        SpanError: an event outside the years 1 to 9999.
    """
    require_possible_years(events["utc"])
    return [_entry(event, style) for event in events.iter_rows(named=True)]


def require_possible_years(utc: Iterable[str]) -> None:
    """Make sure that instants can be written in a calendar: RFC 5545, 3.3.4, gives a year four digits.

    Raises:
        SpanError: one lies outside the years 1 to 9999.
    """
    for instant in utc:
        if not instant[:1].isdigit() or instant.startswith("0000"):
            raise SpanError(
                f"{instant.partition('T')[0]} cannot stand in a calendar, which holds the years 0001 to 9999 "
                "only: choose other dates, or write a table with wanderers almanac --format csv"
            )


def warnings_about(events: pl.DataFrame) -> list[str]:
    """Return what subscribers may meet with, one line each."""
    lines = []
    years = events["utc"].str.slice(0, 4).cast(pl.Int64)
    first, last = WIDELY_SHOWN_YEARS
    outside = int(((years < first) | (years > last)).sum())
    if outside:
        lines.append(
            f"{counted(outside, 'event')} outside the years {first} to {last}, where many calendar programs "
            "fail: a table (wanderers almanac --format csv) is safer"
        )
    if events.height > MANY_EVENTS:
        lines.append(
            f"{events.height} events in one calendar: above {MANY_EVENTS} many programs fail to import it; "
            "use --split year, or fewer kinds, bodies or stars"
        )
    if events.is_empty():
        lines.append("no event was found: the calendar is empty, and some programs refuse it")
    return lines


def span_of(events: pl.DataFrame) -> UtcSpan:
    """Return the span from the first day to the last of a table, whole days; empty for an empty table."""
    if events.is_empty():
        return FIRST_STAMP, FIRST_STAMP
    require_possible_years(events["utc"])
    first, last = (dt.datetime.fromisoformat(day[:10]).replace(tzinfo=dt.UTC) for day in _ends(events["utc"]))
    # The last day of the year 9999 has no next.
    return first, last + min(dt.timedelta(days=1), dt.datetime.max.replace(tzinfo=dt.UTC) - last)


def _ends(utc: pl.Series) -> tuple[str, str]:
    return str(utc.min()), str(utc.max())


def _entry(event: words.Event, style: Style) -> Entry:
    """Return the entry of one event."""
    shown = words.minute(event["utc"])
    component = Event()
    component.add("UID", f"{event['event_id']}{UID_ENDING}")
    component.add("DTSTAMP", FIRST_STAMP)
    component.add("SEQUENCE", 0)
    _add_times(component, event, style, shown)
    component.add("STATUS", "CONFIRMED")
    component.add("TRANSP", "TRANSPARENT")
    component.add("CATEGORIES", ExactText(words.category(event)))
    told = None if style.words is None else sentences(event, style.words)
    component.add("SUMMARY", ExactText(words.summary(event) if told is None else told.medium))
    lines = _description(event, shown, style.kernel)
    if told is not None and style.words is not None:
        lines = [told.long, *notes(event, style.words), lines[-1]]
    component.add("DESCRIPTION", ExactText("\n".join(lines)))
    if style.site is not None:
        component.add("LOCATION", ExactText(style.site.name))
        component.add("GEO", (style.site.latitude_deg, style.site.longitude_deg))
    for minutes in style.alarms_minutes:
        component.add_component(_alarm(words.summary(event), minutes))
    return read_entry(component.to_ical(sorted=False))


def _add_times(component: Event, event: words.Event, style: Style, shown: str) -> None:
    """Let an entry stand at the time to watch by the site's clock, else at the instant in UTC."""
    moment = dt.datetime.fromisoformat(f"{shown}:00+00:00")
    if style.site is None or not site_words.is_watchable(event):
        component.add("DTSTART", moment)
        component.add("DURATION", NOMINAL_LENGTH)
        return
    for name, time in zip(("DTSTART", "DTEND"), site_words.window(event), strict=True):
        component.add(name, by_clock(time, style.site))
    component.add(INSTANT, ExactText(instant_text(moment)))


def by_clock(time: dt.datetime, site: Site) -> dt.datetime:
    """Return a time by the site's clock, or in UTC where the clock would be misread.

    The second of two would mean the first (RFC 5545, 3.3.5); one rounded into a skipped hour is no time.
    """
    shown = time.astimezone(zone_named(site.zone).rules).replace(fold=0)
    same_clock = shown.replace(tzinfo=None) == time.replace(tzinfo=None)
    return shown if same_clock and shown.utcoffset() == time.utcoffset() else time.astimezone(dt.UTC)


def _description(event: words.Event, shown: str, kernel: Kernel) -> list[str]:
    """Return the lines of an entry's text."""
    doubt = words.uncertainty(event)
    return [
        definition(event),
        *words.figures(event),
        f"Time: {shown} UTC, the same instant for the whole Earth, seen from the Earth's centre.",
        *([_held_back(shown)] if words.is_held_back(event["utc"]) else []),
        *words.contacts(event),
        *([doubt] if doubt else []),
        *site_words.where_to_look(event),
        *(site_words.caution(event) or words.cautions(event)),
        *([] if site_words.is_watchable(event) else [NOMINAL]),
        f"{PROVENANCE}{kernel.name} (SHA-256 {kernel.sha256[:CHECKSUM_DIGITS]}) by wanderers {__version__}.",
    ]


def _held_back(shown: str) -> str:
    return f"Less than half a minute before midnight: given as {shown[11:]} so that the date stays right."


def _alarm(text: str, minutes: int) -> Alarm:
    """Return an alarm that is shown; other actions are not for a public calendar. RFC 5545, 3.6.6."""
    alarm = Alarm()
    alarm.add("ACTION", "DISPLAY")
    alarm.add("TRIGGER", dt.timedelta(minutes=-minutes))
    alarm.add("DESCRIPTION", ExactText(text))
    return alarm


def _zones(ordered: Sequence[Entry]) -> list[Timezone]:
    """Return the zones that entries use, with their real rules over the years from first to last.

    Source: RFC 5545, 3.6.5 and 3.2.19: each TZID must be defined in the file.
    """
    known = {name.lower() for name in zone_names()}
    used: dict[str, list[int]] = {}
    for entry in ordered:
        for zone in {entry.zone("DTSTART"), entry.zone("DTEND")}:
            # Entries of another hand may be in zones of their own making.
            if zone.lower() in known and entry.has_start:
                used.setdefault(zone, []).append(entry.start.year)
    return [timezone(zone, years) for zone, years in sorted(used.items())]


def calendar_file(name: str, ordered: Sequence[Entry], zones: Sequence[bytes] = ()) -> bytes:
    """Return a calendar file around its entries, with the rules of the zones that they use.

    Args:
        name: title of the calendar.
        ordered: the entries, in order of time.
        zones: definitions of other zones, as written.
    """
    title = ExactText(" ".join(name.split()))
    calendar = Calendar()
    calendar.add("PRODID", ExactText(PRODID))
    calendar.add("VERSION", "2.0")
    calendar.add("CALSCALE", "GREGORIAN")
    calendar.add("NAME", title)
    calendar.add("X-WR-CALNAME", title)
    calendar.add("REFRESH-INTERVAL", vDuration(REFRESH), parameters={"VALUE": "DURATION"})
    calendar.add("X-PUBLISHED-TTL", vDuration(REFRESH))
    for zone in _zones(ordered):
        calendar.add_component(zone)
    head, end, after = calendar.to_ical(sorted=False).partition(b"END:VCALENDAR")
    return b"".join([head, *zones, *(entry.octets for entry in ordered), end, after])
