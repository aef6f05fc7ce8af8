"""Calendar dates read into Julian Day numbers, and printed from them.

Nothing here knows a time scale: a date in TT becomes a Julian Day number in TT, one in UTC one in UTC.
Years are astronomical: 0000 is 1 BCE, -0500 is 501 BCE. The calendar is the proleptic Gregorian one, as
ISO 8601 prescribes, unless the Julian calendar is asked for by name.
"""

from __future__ import annotations

import math
import re
from typing import Any, Final

import numpy as np
import numpy.typing as npt
from skyfield import timelib

from wanderers.constants import SECONDS_PER_DAY
from wanderers.errors import DateError, UnknownNameError

Texts = npt.NDArray[np.str_]
Instants = npt.NDArray[np.datetime64]

CALENDARS: Final = ("gregorian", "julian")
ACCEPTED_FORMS: Final = (
    "write YYYY, YYYY-MM, YYYY-MM-DD or YYYY-MM-DDThh:mm[:ss[.sss]][Z], with a sign before a year of more "
    "than four digits or before 0000 (-0500 is 501 BCE)"
)
_DATE: Final = re.compile(
    r"(?P<year>[0-9]{4}|[+-][0-9]{4,6})"
    r"(?:-(?P<month>[0-9]{2})(?:-(?P<day>[0-9]{2})"
    r"(?:[Tt ](?P<hour>[0-9]{2}):(?P<minute>[0-9]{2})(?::(?P<second>[0-9]{2}(?:[.,][0-9]+)?))?[Zz]?)?)?)?"
)
_MS_PER_DAY: Final = 86_400_000
_UNIX_EPOCH_JDN: Final = 2_440_588
"""Julian Day number at noon of 1970-01-01."""
_LEAP_YEAR_START: Final = np.datetime64("2000-01", "M")
_YEAR_DIGITS: Final = 4


def parse_date(text: str, *, calendar: str = "gregorian") -> float:
    """Read an ISO 8601 date or date-time as a Julian Day number of the scale the date was meant in.

    A bare year is its 1 January, a bare month its first day, a bare day its first instant (00:00). A
    trailing Z is accepted and says nothing: the caller knows the scale. Second 60 is refused, because a
    Julian Day number has no room for a leap second.

    Args:
        text: ``2027``, ``-0500``, ``2027-01``, ``2027-01-10``, ``2027-01-10T12:59:03.12Z``, ``+12027``.
        calendar: ``gregorian`` (proleptic) or ``julian``.

    Returns:
        Days, good to 40 microseconds near the present.

    Raises:
        DateError: the text is no date, or there is no such day or time of day.
        UnknownNameError: there is no such calendar.

    Source: ISO 8601-1:2019, 5.2 and 5.4; expanded years 5.2.2.3 (from memory).
    """
    if calendar not in CALENDARS:
        raise UnknownNameError("calendar", calendar, CALENDARS)
    match = _DATE.fullmatch(text.strip().replace("\N{MINUS SIGN}", "-"))
    if match is None or match["year"].startswith("-0000"):
        raise DateError(f"'{text}' is not a date: {ACCEPTED_FORMS}")
    year, month, day = int(match["year"]), int(match["month"] or 1), int(match["day"] or 1)
    hour, minute = int(match["hour"] or 0), int(match["minute"] or 0)
    second = float((match["second"] or "0").replace(",", "."))
    if hour >= 24 or minute >= 60 or second >= 60.0:
        raise DateError(f"'{text}' has no such time of day (00:00 to 23:59:59.999): {ACCEPTED_FORMS}")
    jdn = int(timelib.julian_day(year, month, day, _julian_before(calendar)))
    # Counting the day back is the whole calendar check: an impossible day comes back as another one.
    if timelib.compute_calendar_date(jdn, _julian_before(calendar)) != (year, month, day):
        raise DateError(f"'{text}' does not exist in the {calendar.capitalize()} calendar: {ACCEPTED_FORMS}")
    return jdn - 0.5 + (hour * 3_600 + minute * 60 + second) / SECONDS_PER_DAY


def datetime64_from_jd(jd: npt.ArrayLike) -> Instants:
    """Return Julian Day numbers as numpy instants, rounded to the nearest millisecond.

    Args:
        jd: any shape, days of any scale; NaN becomes NaT.

    Returns:
        datetime64[ms] of the same shape, proleptic Gregorian, astronomical years.

    Accuracy: the day is exact integer arithmetic; the fraction carries what float64 holds of a Julian Day
        number, 40 microseconds near the present and 80 at the ends of DE441.
    """
    jd = np.asarray(jd, dtype=np.float64)
    known = np.isfinite(jd)
    whole = np.floor(np.where(known, jd, 0.0))
    ms_of_day = np.rint((np.where(known, jd, 0.0) - whole) * _MS_PER_DAY).astype(np.int64)
    # A Julian Day begins at noon, a calendar day half a day earlier.
    ms = (whole.astype(np.int64) - _UNIX_EPOCH_JDN) * _MS_PER_DAY + _MS_PER_DAY // 2 + ms_of_day
    return np.where(known, ms.astype("datetime64[ms]"), np.datetime64("NaT", "ms"))


def iso_strings(jd: npt.ArrayLike, *, suffix: str = "") -> Texts:
    """Print Julian Day numbers as ISO 8601 date-times to the millisecond, proleptic Gregorian.

    Args:
        jd: any shape, days of any scale.
        suffix: what follows each, ``Z`` for UTC.

    Returns:
        Text of the same shape, ``2027-01-10T12:59:03.120``; years outside 0000 to 9999 carry a sign
        (``-0500``, ``+12027``), as ISO 8601 expanded years do. NaN gives empty text.
    """
    return _printed(jd, "gregorian", suffix)


def julian_calendar_iso(jd: npt.ArrayLike, *, suffix: str = "") -> Texts:
    """Print Julian Day numbers in the form of iso_strings, but in the Julian calendar.

    ISO 8601 knows only the Gregorian calendar: say "Julian calendar" where this is shown. Historical
    sources before 1582-10-15 date in it.
    """
    return _printed(jd, "julian", suffix)


def _julian_before(calendar: str) -> float | None:
    """Return the Julian Day up to which skyfield's calendar routines should count in the Julian calendar."""
    return math.inf if calendar == "julian" else None


def _printed(jd: npt.ArrayLike, calendar: str, suffix: str) -> Texts:
    """Print instants of any shape; the year apart, because numpy prints no signs and no Julian calendar."""
    instants = datetime64_from_jd(jd)
    known = ~np.isnat(instants)
    texts = np.zeros(instants.shape, dtype=f"U{len('+123456-01-01T00:00:00.000') + len(suffix)}")
    if not known.any():
        return texts
    days, ms_of_day = np.divmod(instants[known].astype(np.int64), _MS_PER_DAY)
    year, month, day = timelib.compute_calendar_date(days + _UNIX_EPOCH_JDN, _julian_before(calendar))
    # 2000 is a leap year in both calendars, so it holds every month and day that can occur.
    in_leap_year = (_LEAP_YEAR_START + (month - 1)).astype("datetime64[D]") + (day - 1)
    stamps = np.datetime_as_string(in_leap_year.astype("datetime64[ms]") + ms_of_day)
    texts[known] = np.strings.add(_year_labels(year), _after_year(stamps, suffix))
    return texts


def _after_year(stamps: Texts, suffix: str) -> Texts:
    """Cut the four digits of the year off stamps of equal length, shape (n,), and add the suffix.

    Letter by letter in a matrix: three times as fast as numpy's own string functions.
    """
    letters = np.ascontiguousarray(stamps).view("U1").reshape(stamps.size, -1)
    kept = len("-01-01T00:00:00.000")
    tails = np.empty((stamps.size, kept + len(suffix)), dtype="U1")
    tails[:, :kept] = letters[:, _YEAR_DIGITS : _YEAR_DIGITS + kept]
    tails[:, kept:] = list(suffix)
    return tails.view(f"U{kept + len(suffix)}")[:, 0]


def _year_labels(year: npt.NDArray[Any]) -> Texts:
    """Print years, shape (n,): four digits, with a sign where ISO 8601 wants one."""
    distinct, place = np.unique(year, return_inverse=True)
    labels = [f"{y:04d}" if 0 <= y <= 9999 else f"{y:+05d}" for y in distinct.tolist()]
    return np.array(labels)[place]
