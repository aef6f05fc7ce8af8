"""The clocks people keep: offsets from UTC by the IANA time zone database.

The database is the one packaged with ``tzdata``, not the machine's, so that its version can be printed and a
table does not change from machine to machine. Rules more than about two years ahead are a guess: governments
move their clocks.
"""

from __future__ import annotations

import datetime as dt
import difflib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np
import numpy.typing as npt

from wanderers.arrays import Floats, Ints
from wanderers.constants import SECONDS_PER_DAY
from wanderers.errors import UnknownNameError

UNIX_EPOCH_JD: Final = 2_440_587.5
"""1970-01-01T00:00."""
CYCLE_DAYS: Final = 146_097
"""400 Gregorian years, whole weeks, so that rules repeat: stands for years that Python does not know."""
FIRST_DAY: Final = dt.date(1, 1, 3).toordinal()
LAST_DAY: Final = dt.date(9999, 12, 29).toordinal()
UNIX_EPOCH_ORDINAL: Final = dt.date(1970, 1, 1).toordinal()

Days = npt.NDArray[np.datetime64]


@dataclass(frozen=True, slots=True)
class Zone:
    """A time zone.

    Attributes:
        name: its name in the IANA database.
        rules: what the database says of it.
    """

    name: str
    rules: ZoneInfo

    def offset_s(self, jd_utc: Floats) -> Ints:
        """Return how far the clock is ahead of UTC at instants, seconds, shape (n,).

        Whole minutes, as ISO 8601 writes them: local mean time before standard time is rounded. Looked up
        once for each day that occurs, and once for each instant of a day on which clocks change.

        Args:
            jd_utc: shape (n,); NaN counts as 1970.
        """
        days = np.floor(np.nan_to_num(jd_utc, nan=UNIX_EPOCH_JD) - UNIX_EPOCH_JD).astype(np.int64)
        distinct, place = np.unique(days, return_inverse=True)
        at_start = np.array(
            [self._offset_of_instant(day * 86_400) for day in distinct.tolist()], dtype=np.int64
        )
        at_end = np.array(
            [self._offset_of_instant((day + 1) * 86_400) for day in distinct.tolist()], dtype=np.int64
        )
        offsets = at_start[place]
        (changing,) = np.nonzero((at_start != at_end)[place])
        seconds = np.floor(
            (np.nan_to_num(jd_utc, nan=UNIX_EPOCH_JD) - UNIX_EPOCH_JD) * SECONDS_PER_DAY + 1e-4
        )
        for index in changing.tolist():
            offsets[index] = self._offset_of_instant(int(seconds[index]))
        return offsets

    def noon_jd_utc(self, days: Days) -> Floats:
        """Return when the clock shows 12:00 on calendar days, UTC Julian dates, shape (n,)."""
        numbers = days.astype("datetime64[D]").astype(np.int64)
        offsets = [self._offset_of_clock(number, dt.time(12)) for number in numbers.tolist()]
        return np.asarray(UNIX_EPOCH_JD + numbers + 0.5 - np.array(offsets) / SECONDS_PER_DAY)

    def instants_jd_utc(self, clock: dt.datetime) -> tuple[float, ...]:
        """Return the UTC Julian dates at which the clock shows a date and time: none, one or two.

        None in the hour skipped when clocks are put forward, two in the one repeated when they go back.
        """
        day, time = clock.toordinal() - UNIX_EPOCH_ORDINAL, clock.time()
        midnight = dt.datetime.combine(clock.date(), dt.time())
        seconds = (clock.replace(tzinfo=None) - midnight).total_seconds()
        offsets = {self._offset_of_clock(day, time.replace(fold=fold)) for fold in (0, 1)}
        shown = {UNIX_EPOCH_JD + day + (seconds - offset) / SECONDS_PER_DAY: offset for offset in offsets}
        return tuple(sorted(jd for jd, offset in shown.items() if self.offset_s(np.array([jd]))[0] == offset))

    def _offset_of_instant(self, unix_s: int) -> int:
        day, second = divmod(unix_s, 86_400)
        ordinal = _within_calendar(day + UNIX_EPOCH_ORDINAL)
        unix = (ordinal - UNIX_EPOCH_ORDINAL) * 86_400 + second
        return _in_minutes(dt.datetime.fromtimestamp(unix, tz=self.rules).utcoffset())

    def _offset_of_clock(self, day: int, time: dt.time) -> int:
        date = dt.date.fromordinal(_within_calendar(day + UNIX_EPOCH_ORDINAL))
        return _in_minutes(dt.datetime.combine(date, time, tzinfo=self.rules).utcoffset())


def zone_named(name: str) -> Zone:
    """Return the zone of an IANA name, in any case.

    Raises:
        UnknownNameError: with the nearest names.
    """
    by_lower = {known.lower(): known for known in zone_names()}
    known = by_lower.get(name.strip().lower().replace(" ", "_"))
    if known is None:
        raise UnknownNameError("zone", name, zone_names(), advice=_advice(name))
    return Zone(known, _rules(known))


@cache
def zone_names() -> tuple[str, ...]:
    """Return every name in the packaged database."""
    return tuple((files("tzdata") / "zones").read_text(encoding="utf-8").split())


def zone_data_version() -> str:
    """Return the version of the database, as 2026f, for a footnote wherever local time is printed."""
    text = (files("tzdata") / "zoneinfo" / "tzdata.zi").read_text(encoding="utf-8")
    return text.splitlines()[0].removeprefix("# version ")


def nautical_zone_name(longitude_deg: float) -> str:
    """Return the zone of whole hours that a ship keeps at a longitude; its sign is turned in the database."""
    hours = round(longitude_deg / 15.0)
    return "Etc/GMT" if hours == 0 else f"Etc/GMT{-hours:+d}"


@cache
def _rules(name: str) -> ZoneInfo:
    with (files("tzdata") / "zoneinfo").joinpath(*name.split("/")).open("rb") as file:
        return ZoneInfo.from_file(file, key=name)


def _advice(name: str) -> str:
    """Return the hint for a name that nothing resembles: 598 names are no help."""
    by_lower = {known.lower(): known for known in zone_names()}
    wanted = name.strip().lower()
    ending = [
        known for lower, known in by_lower.items() if lower.rsplit("/", 1)[-1] == wanted.rsplit("/", 1)[-1]
    ]
    near = ending or [by_lower[hit] for hit in difflib.get_close_matches(wanted, by_lower, n=3, cutoff=0.6)]
    if near:
        return f"did you mean {' or '.join(near)}?"
    return "give a name of the IANA database, as Europe/Berlin, America/New_York or Etc/GMT+3"


def _within_calendar(ordinal: int) -> int:
    """Bring a day into the years 1 to 9999 by whole cycles of the calendar."""
    if ordinal < FIRST_DAY:
        return ordinal + CYCLE_DAYS * -(-(FIRST_DAY - ordinal) // CYCLE_DAYS)
    if ordinal > LAST_DAY:
        return ordinal - CYCLE_DAYS * -(-(ordinal - LAST_DAY) // CYCLE_DAYS)
    return ordinal


def _in_minutes(offset: dt.timedelta | None) -> int:
    seconds = 0.0 if offset is None else offset.total_seconds()
    return 60 * round(seconds / 60.0)
