"""When: instants as coarsely as they are known and as people print them.

Official almanac tables print stations, oppositions, conjunctions and elongations to the hour and Moon
phases to the minute: Planetary and Lunar Coordinates, HM Nautical Almanac Office. Venus's greatest brilliancy
is flat for weeks, and what depends on a slow body's small motion or on Saturn's pole is a day.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from typing import Any, Final

from wanderers.events.kinds import Kind
from wanderers.report.phrases.language import Language

Row = Mapping[str, Any]

NEAR_MIDNIGHT_S: Final = 1_800.0
"""A date this near to its change is marked: another rounding or definition may print the other one."""
DAY_S: Final = 86_400.0
TO_MINUTE: Final = frozenset({Kind.MOON_PHASE, Kind.SEASON_POINT, Kind.TRANSIT})
TO_DAY: Final = frozenset(
    {Kind.GREATEST_BRILLIANCY, Kind.PERIHELION, Kind.APHELION, Kind.RING_PLANE_CROSSING}
)
TO_DAY_UNLESS_MOON: Final = frozenset({Kind.CONSTELLATION_ENTRY})
SLOW: Final = frozenset({"uranus", "neptune", "pluto"})
"""Their latitudes pass zero so slowly that a tenth of an arcsecond is an hour."""
MINUTE_S, HALF_HOUR_S, HALF_DAY_S = 60.0, 1_800.0, 43_200.0
_INSTANT: Final = re.compile(r"([+-]?\d+)-(\d\d)-(\d\d)(?:T(\d\d):(\d\d):(\d\d(?:\.\d+)?))?.*")


class Precision(StrEnum):
    """The last unit of time that is printed."""

    MINUTE = "minute"
    HOUR = "hour"
    DAY = "day"


@dataclass(frozen=True, slots=True)
class Moment:
    """A date and a time of day by one clock.

    Attributes:
        year: astronomical, 0 is 1 BCE.
        month: 1 to 12.
        day: of the month.
        second: since midnight.
        is_local: by the clock of a site, else UTC.
    """

    year: int
    month: int
    day: int
    second: float
    is_local: bool = False

    @property
    def midnight_side(self) -> str:
        """Return whether midnight comes soon after it or was shortly before it."""
        return "after" if self.second < DAY_S / 2.0 else "before"

    @property
    def from_midnight_s(self) -> float:
        """Return how far it is from the nearest change of date."""
        return min(self.second, DAY_S - self.second)

    @property
    def clock(self) -> str:
        """Return the time to the minute, rounded but never into another day."""
        minutes = min(int((self.second + 30.0) // 60.0), 24 * 60 - 1)
        return f"{minutes // 60:02d}:{minutes % 60:02d}"

    @property
    def date(self) -> tuple[int, int, int]:
        """Return year, month and day."""
        return self.year, self.month, self.day


def read_moment(text: str, *, is_local: bool = False) -> Moment:
    """Return the moment that an ISO 8601 text names, in whatever calendar its date is."""
    match = _INSTANT.fullmatch(text)
    if match is None:
        raise ValueError(f"no ISO 8601 instant: {text}")
    year, month, day, hour, minute, second = match.groups(default="0")
    seconds = int(hour) * 3_600 + int(minute) * 60 + float(second)
    return Moment(int(year), int(month), int(day), seconds, is_local)


def moment_of(event: Row) -> Moment:
    """Return when an event happens: by the site's clock where it has one, else in UTC."""
    if event.get("local_date") and event.get("local_time"):
        return read_moment(f"{event['local_date']}T{event['local_time']}", is_local=True)
    return read_moment(event["utc"])


def precision(event: Row) -> Precision:
    """Return how finely the time of an event is printed."""
    kind, error_s = Kind(event["kind"]), event.get("utc_uncertainty_s") or 0.0
    if kind in TO_DAY or error_s > HALF_HOUR_S:
        return Precision.DAY
    if kind in TO_DAY_UNLESS_MOON and event["body"] != "moon":
        return Precision.DAY
    if kind is Kind.NODE and event["body"] in SLOW:
        return Precision.DAY
    return Precision.MINUTE if kind in TO_MINUTE and error_s <= MINUTE_S else Precision.HOUR


def is_near_midnight(event: Row) -> bool:
    """Return whether the date changes within half an hour, or within what the time is uncertain by."""
    if event["kind"] == Kind.GREATEST_BRILLIANCY:
        return False
    return moment_of(event).from_midnight_s <= max(NEAR_MIDNIGHT_S, event.get("utc_uncertainty_s") or 0.0)


def time_text(event: Row, words: Language, manner: str) -> str | None:
    """Return the time of day, None where only the day is printed.

    Args:
        event: a row of an event table.
        words: the language.
        manner: table of the language's file: ``time`` alone, or ``at`` within a sentence.
    """
    last = precision(event)
    if last is Precision.DAY:
        return None
    moment = moment_of(event)
    zone = words.phrase("clock", "local" if moment.is_local else "utc")
    form, clock = "minute", moment.clock
    if last is Precision.HOUR:
        form, clock = "hour", str(int(moment.second / 3_600.0 + 0.5))
        if moment.from_midnight_s <= NEAR_MIDNIGHT_S:
            form = moment.midnight_side
    text = words.phrase(manner, form).format(clock=clock, zone=zone)
    error = uncertainty_text(event, words)
    return text if error is None else f"{text} {error}"


def date_text(moment: Moment, words: Language, form: str) -> str:
    """Return a date in a form of the language: ``full``, ``day``, ``brief``, ``brief_day`` or ``month``."""
    months = words.table("dates")
    values = {
        "day": str(moment.day),
        "month": str(months["months"][moment.month - 1]),
        "brief_month": str(months["brief_months"][moment.month - 1]),
        "year": year_text(moment.year, words),
    }
    return words.phrase("dates", form).format(**values)


def event_date(event: Row, words: Language, form: str) -> str:
    """Return the date of an event, with its uncertainty where that reaches days."""
    text = date_text(moment_of(event), words, form)
    if (event.get("utc_uncertainty_s") or 0.0) < HALF_DAY_S:
        return text
    return f"{text} {uncertainty_text(event, words)}"


def year_text(year: int, words: Language) -> str:
    """Return an astronomical year as people count: no year 0."""
    return str(year) if year > 0 else words.phrase("dates", "before_christ").format(year=1 - year)


def range_text(start: Moment, end: Moment, words: Language, forms: tuple[str, str], joint: str) -> str:
    """Return two dates as a range; what both share, year or year and month, stands once.

    Args:
        start: first date.
        end: last date.
        words: the language.
        forms: the form of a date with its year, and of one without.
        joint: key of what stands between.
    """
    whole, bare = forms
    if start.date[:2] == end.date[:2]:
        bare, joint = "month_day", joint if joint == "range" else "month_range"
    first = date_text(start, words, bare if start.year == end.year else whole)
    return words.phrase("dates", joint).format(start=first, end=date_text(end, words, whole))


def uncertainty_text(event: Row, words: Language) -> str | None:
    """Return by how much the time may be off, as ±5 min; None up to one minute."""
    error_s = event.get("utc_uncertainty_s") or 0.0
    if error_s <= MINUTE_S:
        return None
    scale, unit = next((scale, unit) for most_s, scale, unit in _UNITS if error_s < most_s)
    rounded = f"{float(f'{error_s / scale:.2g}'):.0f}" if error_s / scale >= 10 else f"{error_s / scale:.0f}"
    return f"±{max(int(rounded), 1)} {words.phrase('clock', unit)}"


_UNITS: Final = (
    (2.0 * 3_600.0, 60.0, "minutes"),
    (2.0 * DAY_S, 3_600.0, "hours"),
    (float("inf"), DAY_S, "days"),
)
"""Below how many seconds a length of time is printed in which unit."""
