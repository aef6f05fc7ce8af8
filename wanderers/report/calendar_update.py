"""Reissuing a calendar: what was published is read back, and only what changed is raised.

A calendar program takes an entry for a newer one only if its SEQUENCE is higher and its stamps are later
(RFC 5545, 3.8.7.4 and 3.8.7.2; RFC 5546, 2.1.5). So entries that did not change stay as they were, octet by
octet, and entries withdrawn are cancelled instead of left out: leaving out removes them from subscriptions
only, not from imported calendars.
"""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from icalendar import Calendar

from wanderers.errors import WanderersError
from wanderers.report.calendar_entries import (
    Entry,
    entry_of,
    in_order,
    instant,
    instant_text,
    outside_components,
    read_entry,
    unescaped,
    unfolded,
)
from wanderers.site.zones import zone_names

PRODID: Final = "-//wanderers//events of the planets//EN"
"""Tells this program's calendars; carries no version, so that a new one changes no file."""
ADVICE: Final = "give a calendar that this program wrote, or write a new one without --update"
_HALF_MINUTE: Final = dt.timedelta(seconds=30)

UtcSpan = tuple[dt.datetime, dt.datetime]
"""First instant and end of a half-open span, UTC."""


class CalendarFileError(WanderersError):
    """A previous calendar that cannot be updated."""


@dataclass(frozen=True, slots=True)
class Published:
    """A calendar read back.

    Attributes:
        name: its title.
        entries: its entries, in their order.
        zones: definitions of zones that the IANA database does not hold, as written.
    """

    name: str
    entries: tuple[Entry, ...]
    zones: tuple[bytes, ...] = ()


@dataclass(frozen=True, slots=True)
class Change:
    """What became of one entry.

    Attributes:
        what: ``added``, ``moved``, ``changed``, ``restored`` or ``withdrawn``.
        start: of the entry now, UTC.
        title: its summary now.
        minutes: for an entry that moved, by how many; later is positive.
    """

    what: str
    start: dt.datetime
    title: str
    minutes: int = 0

    def __str__(self) -> str:
        """Return one line for people."""
        by = f" by {self.minutes:+d} min" if self.what == "moved" else ""
        return f"{self.what}{by}: {self.start.isoformat(' ')[:16]} UTC, {self.title}"


@dataclass(frozen=True, slots=True)
class Merged:
    """The entries of a reissued calendar, and what became of them."""

    entries: list[Entry]
    changes: list[Change]


def read_calendar(content: bytes, source: str = "the previous calendar") -> Published:
    """Read a calendar that this program wrote.

    Args:
        content: the file.
        source: what messages call it.

    Raises:
        CalendarFileError: no calendar, cut short, damaged, or written by another program.
    """
    text = _calendar_text(content, source)
    header = (line.partition(":") for line in outside_components(unfolded(text)[1:-1]))
    top = {name: value for name, _, value in header}
    if top.get("PRODID") != PRODID:
        author = unescaped(top.get("PRODID", "which leaves no PRODID"))
        raise CalendarFileError(f"{source} was written by another program ({author}): {ADVICE}")
    # Lines that lost their carriage return on the way get it back.
    whole = re.sub(r"\r?\n", "\r\n", text)
    blocks = re.findall(r"^BEGIN:VEVENT\r\n.*?^END:VEVENT\r\n", whole, flags=re.MULTILINE | re.DOTALL)
    entries = tuple(read_entry(block.encode()) for block in blocks)
    _require_sound(entries, source)
    return Published(unescaped(top.get("NAME", "")), entries, _foreign_zones(whole))


def _foreign_zones(whole: str) -> tuple[bytes, ...]:
    """Return the definitions of zones that another hand made, as written."""
    blocks = re.findall(r"^BEGIN:VTIMEZONE\r\n.*?^END:VTIMEZONE\r\n", whole, flags=re.MULTILINE | re.DOTALL)
    named = {block: re.search(r"^TZID:(.*)\r$", block, flags=re.MULTILINE) for block in blocks}
    known = {name.lower() for name in zone_names()}
    return tuple(block.encode() for block, tzid in named.items() if tzid and tzid[1].lower() not in known)


def _calendar_text(content: bytes, source: str) -> str:
    """Return the text of a file that a calendar library accepts as one whole calendar."""
    try:
        text = content.decode("utf-8-sig")
        name = Calendar.from_ical(text).name
    except (ValueError, LookupError, TypeError, AttributeError, AssertionError) as error:
        raise CalendarFileError(f"{source} is no iCalendar file, or is cut short: {ADVICE}") from error
    if name != "VCALENDAR":
        raise CalendarFileError(f"{source} holds a {name}, not a calendar: {ADVICE}")
    return text


def _require_sound(entries: Sequence[Entry], source: str) -> None:
    """Make sure that what reissuing compares can be read, and that names are unique.

    Raises:
        CalendarFileError: names the entry at fault.
    """
    seen: set[str] = set()
    for entry in entries:
        if entry.is_ours and not entry.is_sound():
            raise CalendarFileError(f"{source} is damaged at the entry {entry.uid}: {ADVICE}")
        if entry.is_ours and entry.uid in seen:
            raise CalendarFileError(f"{source} holds the entry {entry.uid} twice: {ADVICE}")
        seen.add(entry.uid)


def merged(
    published: Published, entries: Sequence[Entry], span: UtcSpan, stamp: dt.datetime | None = None
) -> Merged:
    """Bring published entries up to date.

    Entries that another hand added stay as they are.

    Args:
        published: what was issued before.
        entries: what holds now, inside the span.
        span: published entries outside it stay.
        stamp: put on what changed, or a second after its old one if that is later. None is always the
            latter: the result then depends on nothing but the arguments.
    """
    old = {entry.uid: entry for entry in published.entries if entry.is_ours}
    new = {entry.uid: entry for entry in entries}
    settled = [_settled(old[uid], new.get(uid), span, stamp) for uid in old]
    added = [entry for uid, entry in new.items() if uid not in old]
    foreign = [entry for entry in published.entries if not entry.is_ours]
    changes = [change for _, change in settled if change]
    changes += [Change("added", entry.start, entry.title) for entry in added]
    return Merged(
        in_order([*(entry for entry, _ in settled), *added, *foreign]),
        sorted(changes, key=lambda change: (change.start, change.title)),
    )


def _settled(
    old: Entry, new: Entry | None, span: UtcSpan, stamp: dt.datetime | None
) -> tuple[Entry, Change | None]:
    """Decide what becomes of a published entry, given what it is now."""
    if new is None:
        if old.is_cancelled or not _surely_inside(old.moment, span):
            return old, None
        return _cancelled(old, stamp), Change("withdrawn", old.start, old.title)
    if new.content() == old.content():
        return old, None
    minutes = round((new.start - old.start).total_seconds() / 60.0)
    what = "restored" if old.is_cancelled else "moved" if minutes else "changed"
    next_issue = entry_of(_with_values(new.lines, _next_issue(old, stamp)))
    return next_issue, Change(what, new.start, new.title, minutes)


def _surely_inside(start: dt.datetime, span: UtcSpan) -> bool:
    """Tell whether the instant behind a start lies in a span: starts are rounded, but within their day."""
    clock = (start.hour, start.minute)
    before = dt.timedelta() if clock == (0, 0) else _HALF_MINUTE
    after = 2 * _HALF_MINUTE if clock == (23, 59) else _HALF_MINUTE
    return start - span[0] >= before and span[1] - start >= after


def _cancelled(old: Entry, stamp: dt.datetime | None) -> Entry:
    """Return an entry withdrawn: nothing may ring for it any more."""
    lines = [old.lines[0], *outside_components(old.lines[1:-1]), old.lines[-1]]
    return entry_of(_with_values(lines, _next_issue(old, stamp) | {"STATUS": "CANCELLED"}))


def _next_issue(old: Entry, stamp: dt.datetime | None) -> dict[str, str]:
    """Return the properties that tell the next issue of an entry from its last."""
    later = instant(old.value("DTSTAMP")) + dt.timedelta(seconds=1)
    text = instant_text(later if stamp is None else max(stamp, later))
    return {"SEQUENCE": str(old.sequence + 1), "DTSTAMP": text, "LAST-MODIFIED": text}


def _with_values(lines: Sequence[str], values: Mapping[str, str]) -> list[str]:
    """Return an entry's lines with properties set; one it lacks comes first."""
    names = [line.partition(":")[0] for line in lines]
    lacking = [f"{name}:{value}" for name, value in values.items() if name not in names]
    first, *rest = (
        f"{name}:{values[name]}" if name in values else line for name, line in zip(names, lines, strict=True)
    )
    return [first, *lacking, *rest]
