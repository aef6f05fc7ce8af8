"""Where and how a planet stands at the dated moments of a retrograde season."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.parabola import least_within
from wanderers.events.timeseries import circumstances

CLOSEST: Final = "closest"
BRIGHTEST: Final = "brightest"
EXTREMES: Final[dict[str, str]] = {CLOSEST: "distance_au", BRIGHTEST: "magnitude"}
"""Moments that are found on the track, and the column that is least there."""

MARK_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "mark": pl.String,
    **schema.TRACK_COLUMNS,
}
"""One row a dated moment of a season: its five marks, least distance and greatest brightness."""

NEIGHBOUR_SLACK: Final = 0.05
"""Part of the retrograde stretch by which a change of direction may miss a station on a coarse track."""


def run_of(track: pl.DataFrame, season: dict[str, Any]) -> tuple[float, float]:
    """Return the TT Julian dates between which a season's path is its own.

    From first mark to last or, where that lies outside the track or a neighbouring season begins earlier, to
    there.

    Args:
        track: through the season and its marks, ``schema.TRACK_COLUMNS``, in the season's frame.
        season: its row, ``schema.SEASON_COLUMNS``.
    """
    jd = track["jd_tt"].to_numpy()
    back, on = season["station_retrograde_jd_tt"], season["station_direct_jd_tt"]
    turns = jd[1:][np.diff((track["longitude_rate_deg_per_day"].to_numpy() < 0.0).astype(np.int8)) != 0]
    slack = NEIGHBOUR_SLACK * (on - back)
    start, end = season["first_pass_start_jd_tt"], season["third_pass_end_jd_tt"]
    before, after = turns[turns < back - slack], turns[turns > on + slack]
    low = [jd[0] if start is None else start, *before[-1:].tolist()]
    high = [jd[-1] if end is None else end, *after[:1].tolist()]
    return float(max(low)), float(min(high))


def marks_table(
    store: TrackStore, season: dict[str, Any], track: pl.DataFrame, run_jd: tuple[float, float]
) -> pl.DataFrame:
    """Return a planet's circumstances at the dated moments of a season, ``MARK_COLUMNS``, in order of time.

    Moments outside the kernel are left out; greatest brightness too where no magnitude is known.
    """
    instants = {mark: season[f"{mark}_jd_tt"] for mark in schema.SEASON_MARKS}
    for name, column in EXTREMES.items():
        values = track[column].cast(pl.Float64).fill_null(float("nan")).to_numpy()
        least = least_within(track["jd_tt"].to_numpy(), values, run_jd)
        instants[name] = None if least is None else least[0]
    known = sorted((jd, name) for name, jd in instants.items() if jd is not None)
    jd = np.array([at for at, _ in known])
    rows = circumstances(store, Body(season["body"]), jd, Frame(season["frame"]))
    named = rows.with_columns(
        season_id=pl.lit(season["season_id"]), mark=pl.Series([name for _, name in known], dtype=pl.String)
    )
    return named.select(*MARK_COLUMNS)
