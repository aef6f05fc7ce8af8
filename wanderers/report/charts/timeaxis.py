"""Time along an axis: UTC as Julian Day numbers, with ticks where calendar days, months and years begin.

matplotlib's own dates end at year 1; these go as far as the tracks do.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
import numpy.typing as npt
from matplotlib.axes import Axes

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.report import facts
from wanderers.site.zones import UNIX_EPOCH_JD

MONTHS: Final = tuple(name[:3] for name in facts.MONTHS)
GREGORIAN_FROM_JD: Final = 2_299_160.5
"""1582-10-15: dates before it are usually given in the Julian calendar, here never."""

Unit = Literal["day", "month", "year"]


@dataclass(frozen=True, slots=True)
class Division:
    """Where ticks stand: every so many days of a month, months or years."""

    unit: Unit
    every: int
    days: float


DIVISIONS: Final = (
    Division("day", 1, 1.0),
    Division("day", 2, 2.0),
    Division("day", 5, 5.0),
    Division("day", 10, 10.0),
    Division("month", 1, 30.4),
    Division("month", 2, 60.9),
    Division("month", 3, 91.3),
    Division("month", 6, 182.6),
    *(Division("year", every, 365.2425 * every) for every in (1, 2, 5, 10, 20, 50, 100, 200, 500, 1000)),
)


@dataclass(frozen=True, slots=True)
class CalendarDays:
    """Calendar dates, shape (n,) each: astronomical years, months and days from 1."""

    year: Ints
    month: Ints
    day: Ints


def utc_days(jd_tt: npt.ArrayLike) -> Floats:
    """Return the place on a time axis of TT Julian dates, any shape: UTC as Julian Day numbers."""
    return jd_utc_from_tt(np.asarray(jd_tt, dtype=np.float64))


def calendar_days(jd_utc: npt.ArrayLike) -> CalendarDays:
    """Return the calendar dates of instants on a time axis, shape (n,); the day holds the instant."""
    day = datetime64_from_jd(np.atleast_1d(jd_utc)).astype("datetime64[D]")
    month = day.astype("datetime64[M]")
    number = month.astype(np.int64)
    return CalendarDays(1970 + number // 12, number % 12 + 1, (day - month).astype(np.int64) + 1)


def day_text(jd_utc: float, *, year: bool = True) -> str:
    """Return a date in short: ``3 Mar 2027``."""
    date = calendar_days(jd_utc)
    text = f"{date.day[0]} {MONTHS[date.month[0] - 1]}"
    return f"{text} {year_text(int(date.year[0]))}" if year else text


def long_day_text(jd_utc: float) -> str:
    """Return a date as prose has it: ``3 March 2027``."""
    date = calendar_days(jd_utc)
    return f"{date.day[0]} {facts.MONTHS[date.month[0] - 1]} {year_text(int(date.year[0]))}"


def month_text(jd_utc: float) -> str:
    """Return month and year in full: ``March 2027``."""
    date = calendar_days(jd_utc)
    return f"{facts.MONTHS[date.month[0] - 1]} {year_text(int(date.year[0]))}"


def span_text(low: float, high: float) -> str:
    """Return two dates in short: ``1 Jan 2027 to 1 Jan 2029``."""
    return f"{day_text(low)} to {day_text(high)}"


def long_span_text(low: float, high: float) -> str:
    """Return two dates as prose has them."""
    return f"{long_day_text(low)} to {long_day_text(high)}"


def month_span_text(low: float, high: float) -> str:
    """Return two months as a title has them: ``November 2026 to June 2027``; a year named once."""
    first, last = calendar_days(low), calendar_days(high)
    if first.year[0] != last.year[0]:
        return f"{month_text(low)} to {month_text(high)}"
    if first.month[0] == last.month[0]:
        return month_text(low)
    return f"{facts.MONTHS[first.month[0] - 1]} to {month_text(high)}"


def year_text(year: int) -> str:
    """Return an astronomical year, with a minus sign below zero."""
    return str(year).replace("-", "\N{MINUS SIGN}")


def division_for(low: float, high: float, most: float) -> Division:
    """Return the closest division that puts at most so many ticks between two instants."""
    fitting = (division for division in DIVISIONS if (high - low) / division.days <= most)
    return next(fitting, DIVISIONS[-1])


def ticks(low: float, high: float, division: Division) -> Floats:
    """Return where a division's ticks fall between two instants, shape (n,)."""
    edges = datetime64_from_jd(np.array([low, high]))
    if division.unit == "day":
        days = np.arange(edges[0].astype("datetime64[D]"), edges[1].astype("datetime64[D]") + 2)
        of_month = (days - days.astype("datetime64[M]")).astype(np.int64)
        # the 31st is left out beside the 1st: ticks of 5 and 10 days start anew with each month
        kept = (of_month % division.every == 0) & ((of_month < 30) | (division.every == 1))
        chosen = days[kept]
    else:
        unit = "M" if division.unit == "month" else "Y"
        first, last = edges.astype(f"datetime64[{unit}]").astype(np.int64)
        number = np.arange(first, last + 2)
        count = number if division.unit == "month" else number + 1970
        chosen = number[count % division.every == 0].astype(f"datetime64[{unit}]").astype("datetime64[D]")
    jd = chosen.astype(np.int64) + UNIX_EPOCH_JD
    return np.asarray(jd[(jd >= low) & (jd <= high)])


def tick_texts(jd_utc: Floats, division: Division) -> list[str]:
    """Return what to write at ticks: the larger unit stands below, where it changes."""
    date = calendar_days(jd_utc) if jd_utc.size else CalendarDays(*(np.zeros(0, np.int64),) * 3)
    texts = []
    shown = None
    for year, month, day in zip(date.year.tolist(), date.month.tolist(), date.day.tolist(), strict=True):
        below = year_text(year)
        if division.unit == "day":
            upper = f"{day} {MONTHS[month - 1]}"
        else:
            upper = MONTHS[month - 1] if division.unit == "month" else below
        texts.append(upper if below in (shown, upper) else f"{upper}\n{below}")
        shown = below
    return texts


def set_time_axis(
    ax: Axes, low: float, high: float, *, labelled: bool = True, least_pt: float = 34.0
) -> None:
    """Make the horizontal axis one of time: limits, ticks, and that dates are UTC.

    Args:
        ax: the axes.
        low: first instant, UTC as a Julian Day number.
        high: last one.
        labelled: whether dates are written; not where panels share them with the one below.
        least_pt: least room for a date, points.
    """
    width_pt = ax.get_window_extent().width / ax.figure.dpi * 72.0
    division = division_for(low, high, width_pt / least_pt)
    if division.unit == "day":
        division = division_for(low, high, width_pt / (least_pt * 1.5))
    at = ticks(low, high, division)
    ax.set_xlim(low, high)
    ax.set_xticks(at, tick_texts(at, division) if labelled else [""] * at.size)
    minor = _minor(division)
    if minor is not None:
        ax.set_xticks(ticks(low, high, minor), minor=True)
    if labelled:
        ax.set_xlabel(axis_text(low))


def axis_text(low: float) -> str:
    """Return the words under a time axis."""
    return "date (UTC)" if low >= GREGORIAN_FROM_JD else "date (UTC, Gregorian calendar throughout)"


def _minor(division: Division) -> Division | None:
    """Return the division of the small ticks, if the next finer one is even."""
    finer = {
        ("month", 2): 4,
        ("month", 3): 4,
        ("month", 6): 4,
        ("year", 1): 6,
        ("year", 2): 8,
        ("year", 5): 8,
        ("year", 10): 8,
        ("day", 5): 0,
        ("day", 10): 2,
    }
    number = finer.get((division.unit, division.every))
    return None if number is None else DIVISIONS[number]
