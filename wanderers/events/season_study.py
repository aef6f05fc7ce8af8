"""Everything a retrograde season's dossier is made of, as finished tables."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Final

import polars as pl

from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.season_marks import MARK_COLUMNS, marks_table, run_of
from wanderers.events.season_standing import STANDING_COLUMNS, standing_table
from wanderers.events.season_stars import STAR_COLUMNS, stars_passed
from wanderers.events.season_view import view_from_above
from wanderers.events.timeseries import circumstances

MET: Final = frozenset({Kind.CONJUNCTION, Kind.APPULSE, Kind.OCCULTATION, Kind.CONSTELLATION_ENTRY})
"""Kinds of events that are told with a season: meetings, and constellations entered."""

MEETING_COLUMNS: Final[dict[str, type[pl.DataType]]] = {"season_id": pl.String, **schema.EVENT_COLUMNS}
"""Rows of the event table that fall into a season and concern its planet."""


@dataclass(frozen=True, slots=True)
class Study:
    """The tables of all seasons studied; each row names its ``season_id``.

    Attributes:
        marks: ``season_marks.MARK_COLUMNS``.
        stars: ``season_stars.STAR_COLUMNS``.
        meetings: ``MEETING_COLUMNS``.
        standing: ``season_standing.STANDING_COLUMNS``.
        tracks: the planet through the season in the season's frame, ``schema.TRACK_COLUMNS``, by season_id.
        views: Earth and planet from above, ``season_view.VIEW_COLUMNS``, by season_id.
    """

    marks: pl.DataFrame = field(default_factory=lambda: pl.DataFrame(schema=MARK_COLUMNS))
    stars: pl.DataFrame = field(default_factory=lambda: pl.DataFrame(schema=STAR_COLUMNS))
    meetings: pl.DataFrame = field(default_factory=lambda: pl.DataFrame(schema=MEETING_COLUMNS))
    standing: pl.DataFrame = field(default_factory=lambda: pl.DataFrame(schema=STANDING_COLUMNS))
    tracks: dict[str, pl.DataFrame] = field(default_factory=dict)
    views: dict[str, pl.DataFrame] = field(default_factory=dict)

    def of(self, table: pl.DataFrame, season_id: str) -> pl.DataFrame:
        """Return the rows of one season."""
        return table.filter(pl.col("season_id") == season_id)


def study_seasons(
    store: TrackStore,
    wanted: pl.DataFrame,
    instants: Mapping[str, Floats],
    span_jd: tuple[float, float],
) -> Study:
    """Study seasons of one frame.

    Args:
        store: the tracks.
        wanted: the seasons, ``schema.SEASON_COLUMNS``.
        instants: TT instants through each of them and a little beyond, rising, by season_id.
        span_jd: the span about which other seasons are looked for; see ``standing_table``.
    """
    if wanted.is_empty():
        return Study()
    rows = list(wanted.iter_rows(named=True))
    tracks = {
        row["season_id"]: circumstances(
            store, Body(row["body"]), instants[row["season_id"]], Frame(row["frame"])
        )
        for row in rows
    }
    runs = {row["season_id"]: run_of(tracks[row["season_id"]], row) for row in rows}
    return Study(
        pl.concat(
            [marks_table(store, row, tracks[row["season_id"]], runs[row["season_id"]]) for row in rows]
        ),
        pl.concat(
            [stars_passed(store, row["season_id"], Body(row["body"]), runs[row["season_id"]]) for row in rows]
        ),
        meetings_table(store, rows, runs),
        standing_table(store, wanted, span_jd),
        tracks,
        {row["season_id"]: view_from_above(store, row, instants[row["season_id"]]) for row in rows},
    )


def meetings_table(
    store: TrackStore, rows: list[dict[str, Any]], runs: Mapping[str, tuple[float, float]]
) -> pl.DataFrame:
    """Return the meetings of each season's planet, and constellations it enters, ``MEETING_COLUMNS``.

    The whole run of every season is searched, also where it reaches beyond the span of a report.
    """
    frame = Frame(rows[0]["frame"])
    frames = frozenset({frame if frame is not Frame.J2000 else Frame.ECLIPTIC})
    ends = [end for run in runs.values() for end in run]
    query = Query(min(ends), max(ends) + 1.0, MET, frames, Choice(BODIES, stars_for=PLANETS))
    events = almanac(store, query)
    parts = [_of_season(events, row, runs[row["season_id"]]) for row in rows]
    return pl.concat(parts)


def _of_season(events: pl.DataFrame, row: dict[str, Any], run_jd: tuple[float, float]) -> pl.DataFrame:
    """Return the events of a season's planet within its run."""
    concerned = (pl.col("body") == row["body"]) | (pl.col("other") == row["body"])
    own = events.filter(concerned & pl.col("jd_tt").is_between(*run_jd))
    return own.select(pl.lit(row["season_id"]).alias("season_id"), pl.all())
