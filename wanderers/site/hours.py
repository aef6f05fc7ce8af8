"""When there is anybody to watch: weekdays, and hours of the evening by the local clock."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site.evenings import Evenings
from wanderers.site.windows import Stretches
from wanderers.site.zones import UNIX_EPOCH_JD, Days

NOON: Final = dt.time(12)
EPOCH_WEEKDAY: Final = 3
"""1970-01-01 was a Thursday, counted from Monday as 0."""
WEEKDAYS: Final = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")


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
        weekday = (days.astype("datetime64[D]").astype(np.int64) + EPOCH_WEEKDAY) % 7
        return np.isin(weekday, list(self.weekdays))

    def stretches(self, some: Evenings) -> Stretches | None:
        """Return one stretch of hours an evening; None where all hours are allowed."""
        if self.after is None and self.by is None:
            return None
        start = some.start_jd if self.after is None else _clock_jd(some, self.after)
        end = some.end_jd if self.by is None else _clock_jd(some, self.by)
        return Stretches(np.arange(some.count), start, np.maximum(end, start))


def _clock_jd(some: Evenings, time: dt.time) -> Floats:
    """Return when the clock of each evening shows a time, TT, shape (n,); the first where it comes twice."""
    days = some.days.astype("datetime64[D]").astype(np.int64)
    days = days if time >= NOON else days + 1
    fraction = (time.hour * 3_600 + time.minute * 60 + time.second) / SECONDS_PER_DAY
    shown = UNIX_EPOCH_JD + days + fraction
    guess = shown - some.zone.offset_s(np.asarray(shown)) / SECONDS_PER_DAY
    return jd_tt_from_utc(shown - some.zone.offset_s(np.asarray(guess)) / SECONDS_PER_DAY)
