"""When there is anybody to watch: weekdays, and hours of the evening by the local clock."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site.evenings import Evenings
from wanderers.site.windows import Stretches
from wanderers.site.zones import UNIX_EPOCH_JD, Days, Zone

DAYS_TRIED: Final = (-1, 0, 1, 2)
"""Calendar days from an evening's date on which its clock may show a time."""
NEAR_CHANGE_DAYS: Final = 1.0
"""So long before and after a reading the offsets are those that may hold at it: clocks change once then."""
HALF_SECOND_DAYS: Final = 0.5 / SECONDS_PER_DAY
EPOCH_WEEKDAY: Final = 3
"""1970-01-01 was a Thursday, counted from Monday as 0."""
WEEKDAY_NAMES: Final = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")
WEEKDAYS: Final = tuple(name[:3].lower() for name in WEEKDAY_NAMES)


def weekdays_of(days: Days) -> Ints:
    """Return the weekday of each date, Monday is 0, shape (n,)."""
    return np.asarray((days.astype("datetime64[D]").astype(np.int64) + EPOCH_WEEKDAY) % 7)


@dataclass(frozen=True, slots=True)
class Opening:
    """When people watch.

    Attributes:
        weekdays: evenings of these days, Monday is 0; empty for any. The night after Friday is Friday's.
        after: not before this time by the local clock; None for no limit. Hours before noon are those of the
            morning that follows.
        by: not later than this; likewise.
    """

    weekdays: frozenset[int] = frozenset()
    after: dt.time | None = None
    by: dt.time | None = None

    @property
    def is_always(self) -> bool:
        """Whether nothing is limited."""
        return not self.weekdays and self.after is None and self.by is None

    def allows(self, days: Days) -> Bools:
        """Return whether evenings of these dates come into question, shape (n,)."""
        if not self.weekdays:
            return np.ones(days.size, dtype=np.bool_)
        return np.isin(weekdays_of(days), list(self.weekdays))

    def stretches(self, some: Evenings) -> Stretches | None:
        """Return one stretch of hours an evening; None where all hours are allowed."""
        if self.after is None and self.by is None:
            return None
        start = some.start_jd if self.after is None else _clock_jd(some, self.after)
        end = some.end_jd if self.by is None else _clock_jd(some, self.by)
        return Stretches(np.arange(some.count), start, np.maximum(end, start))


def _clock_jd(some: Evenings, time: dt.time) -> Floats:
    """Return when the clock of each evening first shows a time, TT, shape (n,).

    Evenings of a clock far off the Sun begin at any hour of it, hence the days tried.
    """
    numbers = some.days.astype("datetime64[D]").astype(np.int64)
    fraction = (time.hour * 3_600 + time.minute * 60 + time.second) / SECONDS_PER_DAY
    days = numbers[:, None] + np.array(DAYS_TRIED)
    jd = jd_tt_from_utc(_shown_at(some.zone, UNIX_EPOCH_JD + days.ravel() + fraction)).reshape(days.shape)
    inside = jd >= some.start_jd[:, None] - HALF_SECOND_DAYS
    return np.asarray(np.take_along_axis(jd, np.argmax(inside, axis=1)[:, None], axis=1)[:, 0])


def _shown_at(zone: Zone, clock_jd: Floats) -> Floats:
    """Return when a clock shows readings, UTC, shape (n,).

    The first of two where clocks go back; in the hour they skip, the instant meant by the clock before.
    """
    before, after = (
        clock_jd - zone.offset_s(clock_jd + days) / SECONDS_PER_DAY
        for days in (-NEAR_CHANGE_DAYS, NEAR_CHANGE_DAYS)
    )
    holds = [
        np.abs(jd + zone.offset_s(jd) / SECONDS_PER_DAY - clock_jd) < HALF_SECOND_DAYS
        for jd in (before, after)
    ]
    return np.where(~holds[0] & holds[1], after, before)
