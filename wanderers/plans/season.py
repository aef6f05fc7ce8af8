"""Which season a campaign covers, from when to when, and the moments that must be in it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers import constants, schema
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import INNER, PLANETS, Body
from wanderers.ephemeris.dates import iso_strings, parse_date
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc, jd_utc_from_tt
from wanderers.errors import DateError, SpanError, UsageProblem
from wanderers.events.cycles import synodic_phase
from wanderers.events.seasons import seasons
from wanderers.plans.path import Path, crossing_jd, path_of

LEAD_DAYS: Final = 10.0
TAIL_DAYS: Final = 10.0
"""Days before the first pass and after the third, so that the loop has its entry and its exit."""
NEXT: Final = "next"
ACCEPTED: Final = "give next, a year as 2027, or a season_id as the seasons table prints it"
_YEAR: Final = re.compile(r"\d{4}|[+-]\d{4,6}")
_SEASON_ID: Final = re.compile(r"([a-z]+)-([a-z0-9]+)-s(-?\d+)")

FIRST_PASS_START: Final = "first_pass_start"
CROSSING_FIRST: Final = "crossing_first"
STATION_RETROGRADE: Final = "station_retrograde"
MIDDLE: Final = "middle"
STATION_DIRECT: Final = "station_direct"
CROSSING_SECOND: Final = "crossing_second"
THIRD_PASS_END: Final = "third_pass_end"
TURNS: Final = (STATION_RETROGRADE, STATION_DIRECT)


@dataclass(frozen=True, slots=True)
class Moment:
    """A dated moment of a season.

    Attributes:
        name: one of this module's names.
        words: what it is called in a sentence.
        jd_tt: when.
        must: whether a campaign wants a night at it above all; the others are wished for.
    """

    name: str
    words: str
    jd_tt: float
    must: bool


@dataclass(frozen=True, slots=True)
class CampaignSeason:
    """The season of a campaign.

    Attributes:
        body: the planet.
        row: its row of the seasons table.
        moments: in order of time.
        start_jd: TT at which the campaign begins.
        end_jd: TT at which it ends.
        path: the path among the stars, from two days before to two days after.
        notes: what the observer should know of the season.
    """

    body: Body
    row: dict[str, Any]
    moments: tuple[Moment, ...]
    start_jd: float
    end_jd: float
    path: Path
    notes: tuple[str, ...]

    @property
    def moment_jd(self) -> Floats:
        """When the moments are, TT, shape (m,)."""
        return np.array([moment.jd_tt for moment in self.moments])

    @property
    def moment_deg(self) -> Floats:
        """Where the moments lie: arc length along the path, degrees, shape (m,)."""
        return self.path.along_at(self.moment_jd)


def campaign_season(
    store: TrackStore,
    body: Body,
    which: str = NEXT,
    *,
    now_jd: float,
    lead_days: float = LEAD_DAYS,
    tail_days: float = TAIL_DAYS,
    under_way: bool = False,
) -> CampaignSeason:
    """Return the season asked for with its moments.

    Args:
        store: the tracks.
        body: a planet.
        which: ``next`` (the first whose turn back is still to come), a year (of its middle) or a season_id.
        now_jd: TT from which ``next`` counts.
        lead_days: days before the first pass.
        tail_days: days after the third.
        under_way: ``next`` is the first season whose third pass is not over, even if it has turned back.

    Raises:
        UsageProblem: no planet, no such season, or a lead or tail below zero.
        SpanError: the season reaches outside the kernel.
    """
    if body not in PLANETS:
        raise UsageProblem(f"{body.label} never turns back: choose from {', '.join(PLANETS)}")
    if not (lead_days >= 0.0 and tail_days >= 0.0):
        raise UsageProblem("the days before and after the season must be 0 or more")
    row, notes = _season_row(store, body, which.strip().lower(), now_jd, under_way=under_way)
    first, last = row["first_pass_start_jd_tt"], row["third_pass_end_jd_tt"]
    if first is None or last is None:
        raise SpanError(
            f"{row['season_id']} reaches outside the kernel {store.kernel.name}: use a longer one"
        )
    start, end = first - lead_days, last + tail_days
    low, high = store.span_jd
    if start - 2.0 < low or end + 2.0 > high:
        raise SpanError(
            f"a campaign of {row['season_id']} reaches outside the kernel {store.kernel.name}: "
            "use a longer one, or a shorter lead and tail"
        )
    path = path_of(store, body, start - 2.0, end + 2.0)
    moments = _moments(store, body, row, path)
    return CampaignSeason(body, row, moments, start, end, path, (*notes, *_season_notes(row, moments)))


def date_of(jd_tt: float) -> str:
    """Return the UTC calendar date of an instant."""
    return str(iso_strings(jd_utc_from_tt(np.array([jd_tt])))[0])[:-13]


def _season_row(
    store: TrackStore, body: Body, which: str, now_jd: float, *, under_way: bool
) -> tuple[dict[str, Any], list[str]]:
    """Return a season's row and what should be said of the choice."""
    if which == NEXT:
        return _next_row(store, body, now_jd, THIRD_PASS_END if under_way else STATION_RETROGRADE), []
    if _YEAR.fullmatch(which):
        return _row_of_year(store, body, which)
    match = _SEASON_ID.fullmatch(which)
    if match is None:
        raise UsageProblem(f"'{which}' names no season: {ACCEPTED}")
    return _row_of_id(store, body, which, match), []


def _next_row(store: TrackStore, body: Body, now_jd: float, mark: str) -> dict[str, Any]:
    """Return the first season of which a mark is still to come."""
    period = _synodic_days(body)
    table = _between(store, body, now_jd - 1.5 * period, now_jd + 2.5 * period)
    table = table.filter(pl.col(f"{mark}_jd_tt") > now_jd)
    if table.is_empty():
        raise SpanError(f"no season of {body.label} after {date_of(now_jd)} within {store.kernel.name}")
    return table.row(0, named=True)


def _row_of_year(store: TrackStore, body: Body, year: str) -> tuple[dict[str, Any], list[str]]:
    """Return the first season whose middle lies in a year, and a note of the others."""
    try:
        jd_from, jd_to = (float(jd_tt_from_utc(parse_date(_shifted(year, by)))) for by in (0, 1))
    except DateError as error:
        raise UsageProblem(f"'{year}' names no season: {ACCEPTED}") from error
    table = _between(store, body, jd_from, jd_to)
    if table.is_empty():
        period = _synodic_days(body)
        near = _between(store, body, jd_from - 1.2 * period, jd_to + 1.2 * period)
        dates = ", ".join(date_of(jd)[:-3] for jd in near["middle_jd_tt"].to_list())
        advice = f"the nearest have it in {dates}" if dates else f"{store.kernel.name} holds none near"
        raise UsageProblem(f"no season of {body.label} has its middle in {year}: {advice}")
    notes = []
    if table.height > 1:
        names = ", ".join(table["season_id"].to_list())
        notes.append(f"{year} holds {table.height} seasons of {body.label} ({names}); this is the first.")
    return table.row(0, named=True), notes


def _row_of_id(store: TrackStore, body: Body, which: str, match: re.Match[str]) -> dict[str, Any]:
    """Return the season of an id: its number is that of a synodic round, which tells about when it was."""
    name, frame, number = match.groups()
    if name != body.value:
        raise UsageProblem(f"{which} is a season of {name}, not of {body.value}: {ACCEPTED}")
    if frame not in list(Frame):
        raise UsageProblem(f"'{which}' names no season: {ACCEPTED}")
    period = _synodic_days(body)
    phase = synodic_phase(np.array([body.order]), np.array([constants.J2000_JD]))[0]
    about = constants.J2000_JD + (int(number) - phase) * period
    table = _between(store, body, about - period, about + period, Frame(frame))
    table = table.filter(pl.col("season_id") == which)
    if table.is_empty():
        raise UsageProblem(f"{store.kernel.name} holds no season {which}: {ACCEPTED}")
    return table.row(0, named=True)


def _between(
    store: TrackStore, body: Body, jd_from: float, jd_to: float, frame: Frame = Frame.ECLIPTIC
) -> pl.DataFrame:
    """Return the seasons whose middle lies in a span, as far as the kernel reaches."""
    low, high = store.span_jd
    jd_from, jd_to = max(jd_from, low), min(jd_to, high)
    if jd_from >= jd_to:
        return pl.DataFrame(schema=schema.SEASON_COLUMNS)
    return seasons(store, jd_from, jd_to, bodies=(body,), frames=(frame,))


def _synodic_days(body: Body) -> float:
    """Return how long a synodic round takes in the mean."""
    ends = np.array([constants.J2000_JD, constants.J2000_JD + constants.DAYS_PER_CENTURY])
    phase = synodic_phase(np.full(2, body.order), ends)
    return float(constants.DAYS_PER_CENTURY / (phase[1] - phase[0]))


def _shifted(year: str, by: int) -> str:
    number = int(year) + by
    return f"{number:04d}" if 0 <= number <= 9999 else f"{number:+05d}"


def _moments(store: TrackStore, body: Body, row: dict[str, Any], path: Path) -> tuple[Moment, ...]:
    """Return the moments of a season, the crossing of its own path included, in order of time."""
    outer = body not in INNER
    middle = str(row["middle_kind"]).replace("_", " ")
    found = [
        Moment(FIRST_PASS_START, "start of the first pass", row["first_pass_start_jd_tt"], False),
        Moment(STATION_RETROGRADE, "turn to backward motion", row["station_retrograde_jd_tt"], True),
        Moment(MIDDLE, middle, row["middle_jd_tt"], outer),
        Moment(STATION_DIRECT, "turn to forward motion", row["station_direct_jd_tt"], True),
        Moment(THIRD_PASS_END, "end of the third pass", row["third_pass_end_jd_tt"], False),
    ]
    crossed = crossing_jd(store, path)
    if crossed is not None:
        found += [
            Moment(CROSSING_FIRST, "first time at the crossing of the path", crossed[0], True),
            Moment(CROSSING_SECOND, "second time at the crossing of the path", crossed[1], True),
        ]
    return tuple(sorted(found, key=lambda moment: moment.jd_tt))


def _season_notes(row: dict[str, Any], moments: tuple[Moment, ...]) -> list[str]:
    notes = []
    body = Body(row["body"])
    if body in INNER:
        notes.append(
            f"The middle of {body.label}'s season is lost in the Sun: no whole loop can be had. "
            "What can be had lies on the evening side before it and on the morning side after it."
        )
    if all(moment.name != CROSSING_FIRST for moment in moments):
        notes.append("The path does not cross itself this time: a zigzag, not a loop.")
    elif row["path_shape"] == "zigzag":
        notes.append("The path crosses itself only beside the stretch covered three times: a very open loop.")
    return notes
