"""The outlook: each retrograde season beside those of the years around it, as one site will see them."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats
from wanderers.constants import DAYS_PER_JULIAN_YEAR
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.events.seasons import seasons
from wanderers.plans.frame import smallest_frame
from wanderers.plans.path import path_of
from wanderers.site.evenings import evenings
from wanderers.site.places import Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.rules import Rules
from wanderers.site.windows import body_hours

HIGH_DEG: Final = 30.0
"""Least useful altitude for detail on a disc. Common practice, no source."""
DARK_DEG: Final = -12.0
HOURS: Final = Rules(min_altitude_deg=HIGH_DEG, sun_below_deg=DARK_DEG)
STRETCHES: Final = {
    "dark_hours_before": ("first_pass_start", "station_retrograde"),
    "dark_hours_backward": ("station_retrograde", "station_direct"),
    "dark_hours_after": ("station_direct", "third_pass_end"),
}
OUTLOOK_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "body": pl.String,
    "middle_utc": pl.String,
    "station_retrograde_utc": pl.String,
    "station_direct_utc": pl.String,
    "site": pl.String,
    "culmination_altitude_deg": pl.Float64,
    **{name: pl.Float64 for name in STRETCHES},
    "dark_hours": pl.Float64,
    "peak_diameter_arcsec": pl.Float64,
    "peak_magnitude": pl.Float64,
    "arc_deg": pl.Float64,
    "path_width_deg": pl.Float64,
    "path_height_deg": pl.Float64,
    "path_shape": pl.String,
    "altitude_rank": pl.Int64,
    "dark_hours_rank": pl.Int64,
    "diameter_rank": pl.Int64,
    "magnitude_rank": pl.Int64,
    "arc_rank": pl.Int64,
    "ranked_among": pl.Int64,
    "years_with_more_dark_hours": pl.String,
    "asked_for": pl.Boolean,
}
"""One row a season. ``culmination_altitude_deg`` at the middle, as seen; ``dark_hours``: above 30 degrees
with the Sun below -12, over the threefold span and its three parts; ``path_width_deg`` and
``path_height_deg``: the smallest box around the path. Ranks: 1 is the best among the planet's seasons listed;
null where unknown."""
RANKS: Final = (
    ("altitude_rank", "culmination_altitude_deg", True),
    ("dark_hours_rank", "dark_hours", True),
    ("diameter_rank", "peak_diameter_arcsec", True),
    ("magnitude_rank", "peak_magnitude", False),
    ("arc_rank", "arc_deg", True),
)


def outlook(
    store: TrackStore,
    site: Site,
    span: tuple[float, float],
    years: float,
    bodies: tuple[Body, ...] = PLANETS,
) -> pl.DataFrame:
    """Return the seasons of a span beside those before and after it, ranked.

    Args:
        store: the tracks.
        site: from where.
        span: first TT Julian date and end; seasons with their middle in it are those asked for.
        years: how far before and after the span seasons are compared; the kernel may end first.
        bodies: planets wanted.

    Returns:
        table with ``OUTLOOK_COLUMNS``, by planet in order of time.
    """
    low, high = store.span_jd
    reach = years * DAYS_PER_JULIAN_YEAR
    start, end = max(span[0] - reach, low), min(span[1] + reach, high)
    table = seasons(store, start, end, bodies=bodies, frames=(Frame.ECLIPTIC,))
    if table.is_empty():
        return pl.DataFrame(schema=OUTLOOK_COLUMNS)
    rows = pl.DataFrame([_seen(store, site, row) for row in table.iter_rows(named=True)])
    asked = pl.col("middle_jd_tt").is_between(*span, closed="left").fill_null(value=False)
    whole = table.hstack(rows).with_columns(site=pl.lit(site.name), asked_for=asked)
    order = {body.value: body.order for body in PLANETS}
    ranked = whole.with_columns(_ranks()).with_columns(years_with_more_dark_hours=_better_years(whole))
    arranged = ranked.sort(pl.col("body").replace_strict(order), "station_retrograde_jd_tt")
    return arranged.select(pl.col(name).cast(kind) for name, kind in OUTLOOK_COLUMNS.items())


def _seen(store: TrackStore, site: Site, row: dict[str, object]) -> dict[str, float | None]:
    """Return what a site sees of one season; nothing of what lies outside the kernel."""
    body = Body(str(row["body"]))
    marks = {name: row[f"{name}_jd_tt"] for name in {mark for pair in STRETCHES.values() for mark in pair}}
    hours = {
        name: _hours(store, site, body, marks[first], marks[last])
        for name, (first, last) in STRETCHES.items()
    }
    known = [value for value in hours.values() if value is not None]
    total = sum(known) if len(known) == len(hours) else None
    width, height = _box(store, body, marks["first_pass_start"], marks["third_pass_end"])
    return {
        "culmination_altitude_deg": _culmination_deg(store, site, body, row["middle_jd_tt"]),
        **hours,
        "dark_hours": total,
        "path_width_deg": width,
        "path_height_deg": height,
    }


def _hours(store: TrackStore, site: Site, body: Body, start: object, end: object) -> float | None:
    """Return for how long a body stands high in the dark between two instants."""
    if not (isinstance(start, float) and isinstance(end, float)):
        return None
    dates = datetime64_from_jd(jd_utc_from_tt(np.array([start, end]))).astype("datetime64[D]")
    some = evenings(site, dates[0], dates[1])
    low, high = store.span_jd
    some = some.chosen((some.start_jd > low) & (some.end_jd < high))
    if some.count == 0:
        return 0.0
    sky = Sky(store.tracks(float(some.start_jd[0]), float(some.end_jd[-1])))
    return float(body_hours(sky, some, body.order, HOURS).sum())


def _culmination_deg(store: TrackStore, site: Site, body: Body, jd: object) -> float | None:
    """Return how high a body culminates at an instant's declination, as seen."""
    if not isinstance(jd, float):
        return None
    sky = Sky(store.tracks(jd, jd))
    at = np.array([jd])
    declination: Floats = sky.latitude_deg(np.array([body.order]), at, Frame.EQUATOR)
    return float(refracted_deg(90.0 - np.abs(site.latitude_deg - declination), site.elevation_m)[0])


def _box(store: TrackStore, body: Body, start: object, end: object) -> tuple[float | None, float | None]:
    """Return width and height of the smallest box around a path."""
    if not (isinstance(start, float) and isinstance(end, float)):
        return None, None
    frame = smallest_frame(path_of(store, body, start, end).direction, aspect=None, margin=0.0)
    width, height = sorted((frame.width_deg, frame.height_deg), reverse=True)
    return width, height


def _ranks() -> list[pl.Expr]:
    ranks = [
        pl.col(figure).rank("min", descending=most).over("body").alias(name) for name, figure, most in RANKS
    ]
    return [*ranks, pl.len().over("body").alias("ranked_among")]


def _better_years(table: pl.DataFrame) -> pl.Series:
    """Return the years of the same planet's seasons that offer more dark hours, best first."""
    texts = []
    for body, hours in table.select("body", "dark_hours").iter_rows():
        better = (
            table.filter(pl.col("body") == body, pl.col("dark_hours") > hours)
            if hours is not None
            else table.clear()
        )
        years = better.sort("dark_hours", descending=True)["middle_utc"].str.slice(0, 4)
        texts.append(", ".join(years.drop_nulls()))
    return pl.Series(texts, dtype=pl.String)
