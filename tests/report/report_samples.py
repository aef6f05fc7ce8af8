"""Contents of reports for tests: one made up with a row of every kind, and one of half a year, computed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import polars as pl

from tests.ephemeris.kernel_files import DE421
from tests.report.calendar_samples import KERNEL, ONE_OF_EVERY_KIND
from wanderers import schema
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.events.kinds import Kind
from wanderers.events.side_by_side import COLUMNS
from wanderers.report.contents import Contents, Request, gather

REQUEST = Request(
    float(jd_tt_from_utc(parse_date("2027"))),
    float(jd_tt_from_utc(parse_date("2029"))),
    "utc",
    BODIES,
    tuple(Kind),
    (Frame.ECLIPTIC,),
)
HALF_A_YEAR = replace(
    REQUEST,
    jd_to=float(jd_tt_from_utc(parse_date("2027-07"))),
    bodies=(Body.SUN, Body.MOON, Body.VENUS, Body.MARS, Body.JUPITER),
)

MARS_SEASON: dict[str, Any] = {
    "season_id": "mars-ecliptic-s7",
    "body": "mars",
    "frame": "ecliptic",
    "first_pass_start_utc": "2026-11-05T15:34:00.000Z",
    "station_retrograde_utc": "2027-01-10T12:59:03.000Z",
    "middle_kind": "opposition",
    "middle_utc": "2027-02-19T15:51:00.000Z",
    "station_direct_utc": "2027-04-01T14:08:00.000Z",
    "third_pass_end_utc": "2027-06-08T01:58:00.000Z",
    "arc_deg": 19.5,
    "retrograde_days": 81.05,
    "threefold_days": 214.4,
    "station_retrograde_longitude_deg": 160.4,
    "station_direct_longitude_deg": 140.9,
    "path_shape": "loop",
    "closest_au": 0.678,
    "peak_magnitude": -1.25,
    "peak_diameter_arcsec": 13.8,
    "constellations": "Leo+Cnc",
}


def with_instants(events: pl.DataFrame) -> pl.DataFrame:
    """Return events with TT filled in from their UTC, in order of time."""
    jd = [float(jd_tt_from_utc(parse_date(utc))) for utc in events["utc"]]
    return events.with_columns(jd_tt=pl.Series(jd, dtype=pl.Float64)).sort("jd_tt")


def seasons_table(*rows: dict[str, Any]) -> pl.DataFrame:
    """Return a season table; the instants in TT follow from those in UTC."""
    marks = {
        f"{mark}_jd_tt": [
            None if row[f"{mark}_utc"] is None else float(jd_tt_from_utc(parse_date(row[f"{mark}_utc"])))
            for row in rows
        ]
        for mark in schema.SEASON_MARKS
    }
    table = pl.DataFrame(list(rows), schema=schema.SEASON_COLUMNS)
    return table.with_columns(**{name: pl.Series(jd, dtype=pl.Float64) for name, jd in marks.items()})


def made_up(events: pl.DataFrame = ONE_OF_EVERY_KIND, seasons: Sequence[dict[str, Any]] = ()) -> Contents:
    """Return contents without tracks and pictures around made-up events and seasons."""
    table = seasons_table(*seasons)
    return Contents(
        REQUEST,
        KERNEL,
        with_instants(events),
        table,
        {},
        pl.DataFrame(schema=COLUMNS),
        table,
        {},
        {},
    )


def half_a_year(cache: Path) -> Contents:
    """Return the computed contents of the first half of 2027, on JPL's DE421."""
    return gather(TrackStore(inspect_kernel(DE421), cache), HALF_A_YEAR)
