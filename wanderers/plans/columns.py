"""Names and types of a plan's columns. Angles are topocentric and those at ``recommended_utc``."""

from __future__ import annotations

from typing import Final

import polars as pl

Columns = dict[str, type[pl.DataType]]

PLAN_COLUMNS: Final[Columns] = {
    "night": pl.Int64,
    "evening_date": pl.String,
    "weekday": pl.String,
    "status": pl.String,
    "role": pl.String,
    "moment": pl.String,
    "body": pl.String,
    "site": pl.String,
    "zone": pl.String,
    "window_start_local": pl.String,
    "best_local": pl.String,
    "window_end_local": pl.String,
    "recommended_local": pl.String,
    "window_start_utc": pl.String,
    "best_utc": pl.String,
    "window_end_utc": pl.String,
    "recommended_utc": pl.String,
    "recommended_jd_tt": pl.Float64,
    "altitude_deg": pl.Float64,
    "azimuth_deg": pl.Float64,
    "compass": pl.String,
    "hour_angle_deg": pl.Float64,
    "parallactic_angle_deg": pl.Float64,
    "airmass": pl.Float64,
    "sun_altitude_deg": pl.Float64,
    "elongation_deg": pl.Float64,
    "magnitude": pl.Float64,
    "dimmed_magnitude": pl.Float64,
    "diameter_arcsec": pl.Float64,
    "illuminated_fraction": pl.Float64,
    "ra_j2000_deg": pl.Float64,
    "dec_j2000_deg": pl.Float64,
    "constellation": pl.String,
    "move_deg": pl.Float64,
    "path_deg": pl.Float64,
    "moon_illuminated": pl.Float64,
    "moon_altitude_deg": pl.Float64,
    "moon_separation_deg": pl.Float64,
    "verdict": pl.String,
    "score": pl.Float64,
    "spares": pl.String,
    "spare_for": pl.String,
    "reasons": pl.String,
    "caution": pl.String,
}
"""One row a planned night. ``role`` is ``must``, ``good`` or ``spare``; ``moment`` names what it serves,
joined by ``+``; ``move_deg`` is the straight way since the planned night before, ``path_deg`` the way along
the path since the campaign's beginning; ``spares`` lists evening dates in the order in which to try them;
``spare_for`` is the evening a spare stands in for. The J2000 place is geocentric and apparent."""

CHANGE_COLUMNS: Final[Columns] = {
    "evening_date": pl.String,
    "change": pl.String,
    "role": pl.String,
    "reason": pl.String,
}
"""What replanning changed: ``added``, ``dropped``, ``kept``; one row a night of the old plan or the new."""


def arranged(table: pl.DataFrame, columns: Columns) -> pl.DataFrame:
    """Return a table with exactly these columns, in this order and of these types."""
    return table.select(pl.col(name).cast(kind) for name, kind in columns.items())
