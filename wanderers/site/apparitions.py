"""Apparitions from a site: first and last sight of each planet as ranges of dates, and the best weeks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import kernels
from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, Body
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.site import clock, columns
from wanderers.site.apparition_words import caution, criterion, remark
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.cycles_of_sight import BOTH, EVENING, MORNING, Cycle, cycles
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.lineup_nights import Aid
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.sight_moments import MANNERS, Hours, Nights, air_at, nights_of, sight_moments

EVENINGS_AT_ONCE: Final = 400
DAY: Final = np.timedelta64(1, "D")
Span = tuple[np.datetime64, np.datetime64]
Row = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Habits:
    """How one looks.

    Attributes:
        rules: the criteria, and the least altitude of the weeks when it stands best.
        aid: with what.
        hours: at which hours people are up.
    """

    rules: Rules = field(default_factory=Rules)
    aid: Aid = Aid.NAKED_EYE
    hours: Hours = field(default_factory=Hours)


def apparitions(
    store: TrackStore,
    site: Site,
    span: Span,
    bodies: Sequence[Body] = NAKED_EYE_PLANETS,
    habits: Habits | None = None,
) -> pl.DataFrame:
    """Return one row an apparition that reaches into a span; columns: ``columns.APPARITION_COLUMNS``.

    Args:
        store: the tracks.
        site: from where.
        span: first local date, and the date after the last.
        bodies: planets.
        habits: how one looks.

    Raises:
        SpanError: an evening of the span outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    habits = habits or Habits()
    asked = evenings(site, *span)
    kernels.require_span(store.kernel, float(asked.start_jd[0]), float(asked.end_jd[-1]))
    found = cycles(store, float(asked.start_jd[0]), float(asked.end_jd[-1]), bodies)
    if not found:
        return pl.DataFrame(schema=columns.APPARITION_COLUMNS)
    whole = _around(store, site, found)
    moments = _moments(store, whole, found, habits)
    rows = [_row(cycle, moments[cycle.body], whole, habits) for cycle in found]
    rows = [row for row in rows if _reaches(row, span)]
    table = pl.DataFrame(rows, schema=columns.APPARITION_COLUMNS).with_columns(ease_rank=_ease(rows, span))
    return columns.arranged(table, columns.APPARITION_COLUMNS)


def _ease(rows: Sequence[Row], span: Span) -> pl.Series:
    """Return the place of each apparition among those of its body that stand best within the span."""
    days = [row.get("best_evening") for row in rows]
    within = [day is not None and span[0] <= np.datetime64(day) < span[1] for day in days]
    merit = [row["best_merit"] if inside else None for row, inside in zip(rows, within, strict=True)]
    table = pl.DataFrame({"body": [row["body"] for row in rows], "merit": pl.Series(merit, dtype=pl.Float64)})
    return table.select(pl.col("merit").rank("ordinal", descending=True).over("body")).to_series()


def _around(store: TrackStore, site: Site, found: Sequence[Cycle]) -> Evenings:
    """Return the evenings of all cycles, as far as the kernel goes."""
    low, high = store.span_jd
    ends = np.array([min(c.watched_from for c in found), max(c.watched_to for c in found)])
    first, last = datetime64_from_jd(ends.clip(low + 2.0, high - 2.0)).astype("datetime64[D]")
    return evenings(site, first, last + DAY)


@dataclass(frozen=True, slots=True)
class _Moments:
    """The moments at which one body shows, and sunset and sunrise of all evenings."""

    table: pl.DataFrame
    sunset_jd: Floats
    sunrise_jd: Floats


def _moments(
    store: TrackStore, whole: Evenings, found: Sequence[Cycle], habits: Habits
) -> dict[Body, _Moments]:
    """Return when each body shows, worked a handful of evenings at a time."""
    reach = {
        body: (
            min(c.watched_from for c in found if c.body is body),
            max(c.watched_to for c in found if c.body is body),
        )
        for body in dict.fromkeys(c.body for c in found)
    }
    tables: dict[Body, list[pl.DataFrame]] = {body: [] for body in reach}
    sunset, sunrise = [], []
    for first in range(0, whole.count, EVENINGS_AT_ONCE):
        some = whole.chosen(slice(first, first + EVENINGS_AT_ONCE))
        nights = nights_of(Sky(store.tracks(float(some.start_jd[0]), float(some.end_jd[-1]))), some)
        sunset.append(nights.sunset_jd)
        sunrise.append(nights.sunrise_jd)
        for body, (low, high) in reach.items():
            if low < some.end_jd[-1] and high > some.start_jd[0]:
                tables[body].append(_moments_of(nights, body, first, habits))
    ends = (np.concatenate(sunset), np.concatenate(sunrise))
    return {body: _Moments(pl.concat(parts), *ends) for body, parts in tables.items()}


def _moments_of(nights: Nights, body: Body, first: int, habits: Habits) -> pl.DataFrame:
    table = sight_moments(nights, body, habits.rules, habits.aid, habits.hours)
    return table.with_columns(evening=pl.col("evening") + first)


def _reaches(row: Row, span: Span) -> bool:
    """Return whether an apparition, or the middle of one that cannot be seen, lies in the span."""
    begins = row["first_sight_earliest"] or row["_begins"]
    ends = row["last_sight_latest"] or row["_ends"]
    return bool(np.datetime64(begins) < span[1] and np.datetime64(ends) >= span[0])


def _row(cycle: Cycle, moments: _Moments, whole: Evenings, habits: Habits) -> Row:
    """Describe one apparition."""
    own = _own(cycle, moments.table)
    site, zone = whole.site, whole.zone
    air = air_at(site.elevation_m, habits.rules.criteria)
    sights = _sights(cycle, own, whole)
    first, last = (_sight(cycle, own, which, moments, whole) for which in ("first", "last"))
    best = _best(cycle, own, moments, whole)
    row: Row = {
        "body": cycle.body.value,
        "kind": cycle.kind,
        "site": site.name,
        "zone": zone.name,
        **sights,
        **{name: value for name, value in (first | last | best).items() if not name.startswith("_")},
        **_event(cycle),
        "criterion": criterion(cycle.body, habits.rules.criteria, habits.aid),
        "extinction_mag": air.usual,
        "extinction_clear_mag": air.clear,
        "extinction_hazy_mag": air.hazy,
    }
    middle = cycle.event["jd_tt"] if cycle.event else (cycle.jd_from + cycle.jd_to) / 2.0
    # Where there is no sight: the middle counts, or the kernel's end where that cuts the cycle.
    marks = [middle if cycle.begins else cycle.jd_from, middle if cycle.ends else cycle.jd_to]
    row["_begins"], row["_ends"] = datetime64_from_jd(np.array(marks)).astype("datetime64[D]").astype(str)
    row["remark"] = remark(row, _gap(own, whole), begins=cycle.begins, ends=cycle.ends)
    row["caution"] = caution(
        {name: one["_caution"] for name, one in (("first", first), ("last", last), ("best", best)) if one}
    )
    return row


def _own(cycle: Cycle, table: pl.DataFrame) -> pl.DataFrame:
    """Return the moments of an apparition."""
    inside = pl.col("jd").is_between(cycle.watched_from, cycle.watched_to)
    if cycle.kind == BOTH:
        return table.filter(inside)
    return table.filter(inside & (pl.col("before_midnight") == (cycle.kind == EVENING)))


def _local_dates(whole: Evenings, jd: Floats) -> list[str | None]:
    return clock.local_dates_and_times(whole.zone, jd)[0].to_list()


def _sights(cycle: Cycle, own: pl.DataFrame, whole: Evenings) -> Row:
    """Return first and last sight as ranges of local dates, and what haze does to them."""
    ends = {}
    for manner in MANNERS:
        jd = own.filter(pl.col(manner))["jd"].to_numpy()
        ends[manner] = _local_dates(whole, np.array([jd.min(), jd.max()])) if jd.size else [None, None]
    row: Row = {}
    for index, (name, known, sign) in enumerate((("first", cycle.begins, 1), ("last", cycle.ends, -1))):
        dates = {manner: pair[index] if known else None for manner, pair in ends.items()}
        seen = [date for date in dates.values() if date is not None]
        likely, hazy = dates["likely"], dates["hazy"]
        # The range is open on the side of the night that may never come.
        open_end = hazy is None or likely is None
        earliest, latest = (choose(seen, key=np.datetime64, default=None) for choose in (min, max))
        row[f"{name}_sight_earliest"] = None if open_end and index == 1 else earliest
        row[f"{name}_sight_likely"] = likely
        row[f"{name}_sight_latest"] = None if open_end and index == 0 else latest
        row[f"{name}_sight_haze_days"] = _days_between(likely, hazy, sign)
        row[f"{name}_sight_clear_days"] = _days_between(dates["clear"], likely, sign)
    return row


def _days_between(one: str | None, two: str | None, sign: int) -> int | None:
    if one is None or two is None:
        return None
    return sign * int((np.datetime64(two) - np.datetime64(one)) // DAY)


def _sight(cycle: Cycle, own: pl.DataFrame, which: str, moments: _Moments, whole: Evenings) -> Row:
    """Return how the planet stands at the best moment of its likely first or last night.

    Where it likely does not show, no angles, but the caution of the night on which it at most does.
    """
    if own.is_empty() or not (cycle.begins if which == "first" else cycle.ends):
        return {}
    likely = own.filter(pl.col("likely"))
    shown = own if likely.is_empty() else likely
    evening = shown["evening"].min() if which == "first" else shown["evening"].max()
    at = shown.filter(pl.col("evening") == evening).sort("merit", descending=True).row(0, named=True)
    row: Row = {"_caution": _near_sun(at, moments, whole)}
    if likely.is_empty():
        return row
    return row | {f"{which}_sight_{name}": at[name] for name in columns.SIGHT_ANGLES}


def _near_sun(at: Row, moments: _Moments, whole: Evenings) -> tuple[float, str, str | None]:
    """Return elongation, local date, and the local sunset or sunrise nearest to a moment."""
    night = moments.sunset_jd if at["before_midnight"] else moments.sunrise_jd
    minute = clock.local_minutes(whole.zone, night[[at["evening"]]])[0]
    words = None if minute is None else f"{'sunset' if at['before_midnight'] else 'sunrise'} {minute}"
    return at["elongation_deg"], str(_local_dates(whole, np.array([at["jd"]]))[0]), words


def _best(cycle: Cycle, own: pl.DataFrame, moments: _Moments, whole: Evenings) -> Row:
    """Return the best moment, at a civil hour if there is one, and the weeks around it."""
    likely = own.filter(pl.col("likely"))
    if likely.is_empty():
        return {}
    at_hour = pl.col("civil") & (pl.col("before_midnight") == (cycle.kind != MORNING))
    unsought = likely.filter(at_hour & pl.col("unsought"))
    high = unsought.filter(pl.col("high"))
    choices = (high, unsought, likely.filter(at_hour), likely)
    chosen = next(some for some in choices if not some.is_empty())
    at = chosen.sort("merit", "jd", descending=[True, False]).row(0, named=True)
    jd = np.array([at["jd"]])
    easiest = next(some for some in choices[1:] if not some.is_empty())["merit"].max()
    weeks = _run(high["evening"].unique().sort().to_numpy(), at["evening"])
    row: Row = {
        "best_evening": str(whole.days[at["evening"]]),
        "best_utc": clock.utc_texts(jd)[0],
        "best_local": clock.local_texts(whole.zone, jd)[0],
        "best_at_civil_hour": chosen is not likely,
        "best_compass": POINTS[int(compass_point(np.array([at["azimuth_deg"]]))[0])],
        **{
            f"best_{name}": at[name]
            for name in (
                "altitude_deg",
                "azimuth_deg",
                "sun_altitude_deg",
                "elongation_deg",
                "magnitude",
            )
        },
        "best_merit": easiest,
        **_weeks("weeks", weeks, whole),
        "_caution": _near_sun(at, moments, whole),
    }
    if cycle.kind == BOTH:
        row |= _weeks("morning_weeks", _longest_morning(likely), whole)
    return row


def _longest_morning(likely: pl.DataFrame) -> Ints:
    """Return the evenings whose mornings show the planet high at a civil hour, the longest run of them."""
    up = pl.col("unsought") & pl.col("civil") & pl.col("high")
    mornings = likely.filter(up & ~pl.col("before_midnight"))
    evening = mornings["evening"].unique().sort().to_numpy()
    return max(_runs(evening), key=len) if evening.size else evening


def _runs(evening: Ints) -> list[Ints]:
    """Cut rising evenings where one is missing."""
    return np.split(evening, np.flatnonzero(np.diff(evening) > 1) + 1)


def _run(evening: Ints, around: int) -> Ints:
    """Return the run of consecutive evenings that holds one of them, empty where none does."""
    return next((run for run in _runs(evening) if run.size and run[0] <= around <= run[-1]), evening[:0])


def _weeks(name: str, run: Ints, whole: Evenings) -> Row:
    ends = [str(whole.days[run[index]]) if run.size else None for index in (0, -1)]
    return {f"{name}_from": ends[0], f"{name}_to": ends[1], f"{name}_nights": int(run.size)}


def _event(cycle: Cycle) -> Row:
    """Return the greatest elongation or the opposition inside."""
    event = cycle.event or {}
    return {
        "event_id": event.get("event_id"),
        "event_kind": event.get("kind"),
        "event_utc": event.get("utc"),
        "event_elongation_deg": event.get("elongation_deg"),
        "event_magnitude": event.get("magnitude"),
    }


def _gap(own: pl.DataFrame, whole: Evenings) -> tuple[str, str, int] | None:
    """Return the longest stretch of evenings inside on which it does not show: first, last, how many."""
    evening = own.filter(pl.col("likely"))["evening"].unique().sort().to_numpy()
    if evening.size < 2:
        return None
    missing = np.diff(evening) - 1
    longest = int(np.argmax(missing))
    days = whole.days[[evening[longest] + 1, evening[longest + 1] - 1]]
    return str(days[0]), str(days[1]), int(missing[longest])
