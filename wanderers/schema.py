"""Names, types and meaning of every column the program writes. Nowhere else is a column spelled out.

A null means "does not apply" or "not known", never zero.
"""

from __future__ import annotations

from typing import Final

import polars as pl

EVENT_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "event_id": pl.String,
    "kind": pl.String,
    "detail": pl.String,
    "body": pl.String,
    "other": pl.String,
    "frame": pl.String,
    "jd_tt": pl.Float64,
    "tt": pl.String,
    "utc": pl.String,
    "longitude_deg": pl.Float64,
    "latitude_deg": pl.Float64,
    "ra_deg": pl.Float64,
    "dec_deg": pl.Float64,
    "separation_deg": pl.Float64,
    "elongation_deg": pl.Float64,
    "distance_au": pl.Float64,
    "magnitude": pl.Float64,
    "diameter_arcsec": pl.Float64,
    "constellation": pl.String,
    "meeting_id": pl.String,
    "meeting_part": pl.String,
    "delta_t_s": pl.Float64,
    "utc_uncertainty_s": pl.Float64,
    "contact1_utc": pl.String,
    "contact2_utc": pl.String,
    "contact3_utc": pl.String,
    "contact4_utc": pl.String,
}
"""The event table. Positions are of ``body``; angles in degrees of date; times TT and UTC."""

SEASON_MARKS: Final = (
    "first_pass_start",
    "station_retrograde",
    "middle",
    "station_direct",
    "third_pass_end",
)

SEASON_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "body": pl.String,
    "frame": pl.String,
    "first_pass_start_utc": pl.String,
    "station_retrograde_utc": pl.String,
    "middle_kind": pl.String,
    "middle_utc": pl.String,
    "station_direct_utc": pl.String,
    "third_pass_end_utc": pl.String,
    "arc_deg": pl.Float64,
    "retrograde_days": pl.Float64,
    "threefold_days": pl.Float64,
    "station_retrograde_longitude_deg": pl.Float64,
    "station_direct_longitude_deg": pl.Float64,
    "path_shape": pl.String,
    "closest_au": pl.Float64,
    "peak_magnitude": pl.Float64,
    "peak_diameter_arcsec": pl.Float64,
    "constellations": pl.String,
    "first_pass_start_jd_tt": pl.Float64,
    "station_retrograde_jd_tt": pl.Float64,
    "middle_jd_tt": pl.Float64,
    "station_direct_jd_tt": pl.Float64,
    "third_pass_end_jd_tt": pl.Float64,
}
"""One row a retrograde season and frame."""

TRACK_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "jd_tt": pl.Float64,
    "tt": pl.String,
    "utc": pl.String,
    "longitude_deg": pl.Float64,
    "latitude_deg": pl.Float64,
    "ra_deg": pl.Float64,
    "dec_deg": pl.Float64,
    "longitude_rate_deg_per_day": pl.Float64,
    "distance_au": pl.Float64,
    "elongation_deg": pl.Float64,
    "magnitude": pl.Float64,
    "diameter_arcsec": pl.Float64,
    "illuminated_fraction": pl.Float64,
    "constellation": pl.String,
}
"""The time series of one body."""


def conforms(table: pl.DataFrame, columns: dict[str, type[pl.DataType]]) -> bool:
    """Return whether a table begins with these columns, in this order and of these types."""
    head = table.columns[: len(columns)]
    return head == list(columns) and all(table.schema[name] == kind for name, kind in columns.items())
