"""What stands on which day: entries, phases of the Moon and retrograde stretches, by the edition's clock."""

from __future__ import annotations

import datetime as dt
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from enum import IntEnum
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.events.kinds import Kind
from wanderers.report import words
from wanderers.report.wall import importance, names, phrases
from wanderers.site.clock import local_texts
from wanderers.site.zones import UNIX_EPOCH_JD, UNIX_EPOCH_ORDINAL, Zone

MEETINGS: Final = (Kind.OCCULTATION, Kind.APPULSE, Kind.CONJUNCTION)
"""Kinds that tell of one approach; the first found stands for all."""
FRAMES: Final = (None, "ecliptic", "equator", "j2000")
"""Where several definitions of one thing were asked for, the first stands on the wall."""
SAME_THING_DAYS: Final = 3.0
"""Within this time two such rows are one thing: definitions differ by up to 55 hours in 95 of 100 cases."""
TO_THE_MINUTE: Final = frozenset({Kind.OCCULTATION, Kind.TRANSIT, Kind.SEASON_POINT, Kind.MOON_PHASE})
"""Quick enough for a minute to mean something, as are meetings of the Moon; the rest is printed to the hour,
as almanacs do."""
NO_SIGHTS: Final = frozenset({Kind.PERIGEE, Kind.APOGEE, Kind.MOON_PHASE})
"""Told at their instant; nobody sees a distance, and the Moon's phase is drawn."""
TIMELESS: Final = frozenset({Kind.GREATEST_BRILLIANCY})
"""So slow that an hour says nothing."""
NEAR_MIDNIGHT_MINUTES: Final = 30
MINUTES_PER_DAY: Final = 1_440
PHASES: Final = ("new", "first_quarter", "full", "last_quarter")


class State(IntEnum):
    """What can be done with an entry, best first."""

    WATCHED = 0
    FACT = 1
    HIDDEN = 2


@dataclass(frozen=True, slots=True)
class Entry:
    """One thing on one day.

    Attributes:
        day: by the clock, at the time printed.
        minute: of the day, for the order.
        clock: the time as printed; empty where none is.
        wordings: what happens and where to look, the longest first.
        plain: what happens, the longest first.
        rank: what gives way in a box too small, 0 last.
        state: whether it can be watched.
        near_sun: whether optics need a caution.
        at_the_sun: whether it is the Sun that is looked at.
        near_midnight: whether the date changes within half an hour of the instant.
    """

    day: dt.date
    minute: int
    clock: str
    wordings: tuple[str, ...]
    plain: tuple[str, ...]
    rank: int
    state: State
    near_sun: bool = False
    at_the_sun: bool = False
    near_midnight: bool = False


@dataclass(frozen=True, slots=True)
class Phase:
    """A phase of the Moon at its instant; ``index`` 0 new, 1 first quarter, 2 full, 3 last quarter."""

    day: dt.date
    clock: str
    index: int
    near_midnight: bool


@dataclass(frozen=True, slots=True)
class Stretch:
    """A planet's retrograde stretch.

    Attributes:
        body: the planet.
        start: local time of the retrograde station, days since 0001-01-01 plus one as ``date.toordinal``
            counts, with the fraction of the day; minus infinity where not known.
        end: likewise of the direct station; infinity where not known.
        middle: likewise of opposition or inferior conjunction; NaN where not known.
    """

    body: Body
    start: float
    end: float
    middle: float


@dataclass(frozen=True, slots=True)
class Wall:
    """Everything that a span of days shows.

    Attributes:
        entries: by day, best first.
        phases: by day.
        stretches: in the order of the planets, then of time.
        unprinted: by first day of a month, how many events of the table stand on no page of it.
        sees: whether the table tells what can be seen from a site.
    """

    entries: Mapping[dt.date, Sequence[Entry]]
    phases: Mapping[dt.date, Phase]
    stretches: Sequence[Stretch]
    unprinted: Mapping[dt.date, int]
    sees: bool


def wall_of(
    events: pl.DataFrame, seasons: pl.DataFrame, first_day: dt.date, end_day: dt.date, zone: Zone
) -> Wall:
    """Return what days of a half-open range show.

    Args:
        events: columns of ``schema.EVENT_COLUMNS``, and those of a site where there is one.
        seasons: columns of ``schema.SEASON_COLUMNS``.
        first_day: first local date.
        end_day: the date after the last.
        zone: the clock.
    """
    sees = "verdict" in events.columns
    rows = list(_timed(events, zone, first_day, end_day))
    phases = {row["day"]: _phase(row) for row in rows if row["kind"] == Kind.MOON_PHASE}
    ranked = [(row, importance.rank(row)) for row in rows if row["kind"] != Kind.MOON_PHASE]
    found = _one_of_each([(row, rank) for row, rank in ranked if rank is not None])
    unprinted: dict[dt.date, int] = defaultdict(int)
    for row in rows:
        unprinted[row["day"].replace(day=1)] += 1
    for day in [*(row["day"] for row, _ in found), *phases]:
        unprinted[day.replace(day=1)] -= 1
    entries = [*clock_changes(zone, first_day, end_day), *(_entry(row, rank) for row, rank in found)]
    return Wall(_by_day(entries), phases, stretches(seasons, zone), unprinted, sees)


def _timed(
    events: pl.DataFrame, zone: Zone, first_day: dt.date, end_day: dt.date
) -> Iterable[dict[str, Any]]:
    """Yield rows of the days, with the day, the minute and the state that the wall gives them."""
    clocks = local_texts(zone, events["jd_tt"].to_numpy())
    for row, instant in zip(events.iter_rows(named=True), clocks, strict=True):
        state = _state(row)
        day, clock = phrases.day_and_clock(row["best_local"] if state is State.WATCHED else instant)
        # Compared as texts: years that ``date`` does not know carry a sign, which sorts before digits.
        if not first_day.isoformat() <= day < end_day.isoformat():
            continue
        happens, _ = phrases.day_and_clock(instant)
        yield row | {
            "day": dt.date.fromisoformat(day),
            "minute": 60 * int(clock[:2]) + int(clock[3:]),
            "clock": clock,
            "state": state,
            "happens": "" if happens == day or row["kind"] in MEETINGS else happens,
        }


def _state(row: words.Event) -> State:
    """Return whether an event can be watched; without a site only what the Sun drowns is hidden."""
    if row["body"] == Body.SUN or row["kind"] in NO_SIGHTS:
        return State.FACT
    if phrases.watched(row):
        return State.WATCHED
    if row["kind"] == Kind.TRANSIT and "verdict" not in row:
        return State.FACT
    if "verdict" in row:
        return State.HIDDEN if row["verdict"] == "not_visible" else State.FACT
    elongation = row["elongation_deg"]
    return State.HIDDEN if elongation is not None and elongation < words.GLARE_DEG else State.FACT


def _one_of_each(rows: Sequence[tuple[dict[str, Any], int]]) -> list[tuple[dict[str, Any], int]]:
    """Keep one of the rows that tell of one approach, or of one station in several frames."""
    kept: list[tuple[dict[str, Any], int]] = []
    times: dict[tuple[Any, ...], list[float]] = defaultdict(list)
    for row, rank in sorted(rows, key=lambda pair: _preference(pair[0])):
        known = times[_sameness(row)]
        if all(abs(row["jd_tt"] - jd) > SAME_THING_DAYS for jd in known):
            kept.append((row, rank))
            known.append(row["jd_tt"])
    return kept


def _sameness(row: words.Event) -> tuple[Any, ...]:
    if row["kind"] in MEETINGS:
        return row["body"], row["other"]
    return row["kind"], row["body"], row["detail"]


def _preference(row: words.Event) -> tuple[Any, ...]:
    kind = row["kind"]
    order = MEETINGS.index(kind) if kind in MEETINGS else 0
    return row["state"], order, FRAMES.index(row["frame"]), row["jd_tt"], row["event_id"]


def _entry(row: words.Event, rank: int) -> Entry:
    state, minute = row["state"], row["minute"]
    is_target = row["body"] != Body.SUN and row["kind"] not in NO_SIGHTS
    at_the_sun = row["kind"] == Kind.TRANSIT
    said = phrases.wordings(row, date=_short_date(row["happens"]))
    risky = row.get("caution") is not None or words.near_the_sun(row)
    return Entry(
        day=row["day"],
        minute=minute,
        clock=row["clock"] if state is State.WATCHED else _coarse(row),
        wordings=phrases.with_look(row, said) if state is State.WATCHED else said,
        plain=said,
        rank=rank,
        state=state,
        near_sun=is_target and (at_the_sun or risky),
        at_the_sun=at_the_sun,
        near_midnight=state is not State.WATCHED and row["kind"] not in TIMELESS and _near_midnight(minute),
    )


def _short_date(day: str) -> str:
    """Return an ISO 8601 date as ``10 Jan``; empty for none, or for a year without a place on a wall."""
    if not day or not day[0].isdigit():
        return ""
    return f"{int(day[8:10])}\N{NO-BREAK SPACE}{names.MONTHS[int(day[5:7]) - 1][:3]}"


def _coarse(row: words.Event) -> str:
    """Return an instant as coarsely as its kind deserves, but within its day."""
    kind, clock = row["kind"], str(row["clock"])
    if kind in TIMELESS:
        return ""
    if kind in TO_THE_MINUTE or (kind in MEETINGS and row["body"] == Body.MOON):
        return clock
    return f"{min(int(clock[:2]) + (clock[3:] >= '30'), 23)}\N{NO-BREAK SPACE}h"


def _near_midnight(minute: int) -> bool:
    return min(minute, MINUTES_PER_DAY - minute) <= NEAR_MIDNIGHT_MINUTES


def _phase(row: words.Event) -> Phase:
    return Phase(row["day"], row["clock"], PHASES.index(row["detail"]), _near_midnight(row["minute"]))


def _by_day(entries: Iterable[Entry]) -> dict[dt.date, list[Entry]]:
    by_day: dict[dt.date, list[Entry]] = defaultdict(list)
    for entry in sorted(entries, key=lambda e: (e.day, e.state, e.minute, e.rank, e.wordings)):
        by_day[entry.day].append(entry)
    return dict(by_day)


def clock_changes(zone: Zone, first_day: dt.date, end_day: dt.date) -> list[Entry]:
    """Return the days on which the clock is moved, told from the time between two noons."""
    days = np.arange(np.datetime64(first_day) - 1, np.datetime64(end_day))
    gained_h = 24.0 * (1.0 - np.diff(zone.noon_jd_utc(days)))
    moved = np.flatnonzero(np.abs(gained_h) > 1.0 / 60.0)
    return [_clock_change(days[index + 1].item(), float(gained_h[index])) for index in moved.tolist()]


def _clock_change(day: dt.date, gained_h: float) -> Entry:
    way = "forward" if gained_h > 0 else "back"
    text = f"Clocks go {way} {round(abs(gained_h), 2):g} h"
    return Entry(day, 0, "", (text,), (text,), importance.FOREMOST, State.FACT)


def stretches(seasons: pl.DataFrame, zone: Zone) -> list[Stretch]:
    """Return the retrograde stretches of a season table in one frame, by the clock."""
    if seasons.is_empty():
        return []
    frame = min(seasons["frame"].unique().to_list(), key=FRAMES.index)
    table = seasons.filter(pl.col("frame") == frame)
    starts, middles, ends = (
        _local_days(table[f"{mark}_jd_tt"], zone)
        for mark in ("station_retrograde", "middle", "station_direct")
    )
    found = [
        Stretch(
            Body(body),
            -np.inf if np.isnan(start) else start,
            np.inf if np.isnan(end) else end,
            middle,
        )
        for body, start, middle, end in zip(table["body"].to_list(), starts, middles, ends, strict=True)
    ]
    return sorted(found, key=lambda stretch: (stretch.body.order, stretch.start))


def _local_days(jd_tt: pl.Series, zone: Zone) -> list[float]:
    """Return instants as local days, counted as ``date.toordinal`` does, NaN where unknown."""
    jd = jd_utc_from_tt(jd_tt.fill_null(np.nan).to_numpy())
    days = jd - UNIX_EPOCH_JD + UNIX_EPOCH_ORDINAL + zone.offset_s(jd) / 86_400.0
    return [float(day) for day in days]
