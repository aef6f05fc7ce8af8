"""Definitions side by side: why two almanacs print different days for one station or one meeting."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import polars as pl

from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import utc_texts
from wanderers.events.catalogue import Query, find_events
from wanderers.events.kinds import Kind
from wanderers.events.ledger import ledger
from wanderers.events.scene import Limits

COMPARED: Final = frozenset({Kind.STATION, Kind.CONJUNCTION, Kind.APPULSE})
WIDEST_DEG: Final = 180.0
EDGE_DAYS: Final = 40.0
"""How far beyond the span counterparts are looked for: definitions differ by days, rarely by weeks."""

COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "kind": pl.String,
    "detail": pl.String,
    "body": pl.String,
    "other": pl.String,
    "meeting_id": pl.String,
    "longitude_utc": pl.String,
    "right_ascension_utc": pl.String,
    "j2000_utc": pl.String,
    "least_separation_utc": pl.String,
    "right_ascension_minus_longitude_hours": pl.Float64,
    "j2000_minus_longitude_hours": pl.Float64,
    "least_separation_minus_longitude_hours": pl.Float64,
    "longitude_separation_deg": pl.Float64,
    "right_ascension_separation_deg": pl.Float64,
    "least_separation_deg": pl.Float64,
}
"""One row a station (its three frames) or an approach of two bodies (two conjunctions and the appulse)."""

_KEY: Final = ("group", "detail", "body", "other", "meeting_id", "match")


def side_by_side(store: TrackStore, query: Query) -> pl.DataFrame:
    """Return stations and meetings of a span, a row each, their definitions' instants next to each other.

    A row belongs to the span if any of its instants does. Columns: :data:`COLUMNS`.
    """
    wide = replace(
        query,
        jd_from=max(query.jd_from - EDGE_DAYS, store.span_jd[0]),
        jd_to=min(query.jd_to + EDGE_DAYS, store.span_jd[1]),
        kinds=query.kinds & COMPARED,
        frames=frozenset(Frame),
        choice=replace(query.choice, limits=Limits(WIDEST_DEG, WIDEST_DEG, WIDEST_DEG)),
    )
    found = find_events(store, wide)
    if not found:
        return pl.DataFrame(schema=COLUMNS)
    entries = _keyed(ledger(store, found))
    rows = _joined(entries)
    inside = pl.any_horizontal(
        pl.col(f"{name}_jd").is_between(query.jd_from, query.jd_to, closed="left") for name in _DEFINITIONS
    )
    near = (
        pl.col("other").is_null()
        | pl.col("longitude_jd").is_not_null()
        | pl.col("right_ascension_jd").is_not_null()
    )
    close = pl.col("least_separation_separation") < query.choice.limits.planets_deg
    return _printed(rows.filter(inside & (near | close)).sort(pl.min_horizontal(pl.col("^.*_jd$"))))


_DEFINITIONS: Final = {
    "longitude": pl.col("frame") == Frame.ECLIPTIC.value,
    "right_ascension": pl.col("frame") == Frame.EQUATOR.value,
    "j2000": pl.col("frame") == Frame.J2000.value,
    "least_separation": pl.col("frame").is_null(),
}


def _keyed(entries: pl.DataFrame) -> pl.DataFrame:
    """Give all definitions of one thing one key: a station's round, an approach and the place within it."""
    station = pl.col("kind") == Kind.STATION.value
    keyed = entries.with_columns(
        group=pl.when(station).then(pl.col("kind")).otherwise(pl.lit("meeting")),
        detail=pl.when(station).then(pl.col("detail")),
    )
    within = pl.int_range(pl.len()).over("kind", "frame", "body", "other", "approach")
    match = (
        pl.when(station)
        .then(pl.col("round") * 100 + pl.col("ordinal"))
        .otherwise(pl.col("approach") * 10 + within)
    )
    return keyed.with_columns(match=match)


def _joined(entries: pl.DataFrame) -> pl.DataFrame:
    rows: pl.DataFrame | None = None
    for name, chosen in _DEFINITIONS.items():
        part = entries.filter(chosen).select(
            *_KEY,
            pl.col("jd_tt").alias(f"{name}_jd"),
            pl.col("separation_deg").alias(f"{name}_separation"),
        )
        if rows is None:
            rows = part
        else:
            rows = rows.join(part, on=_KEY, how="full", coalesce=True, nulls_equal=True)
    assert rows is not None  # there are four definitions
    return rows


def _printed(rows: pl.DataFrame) -> pl.DataFrame:
    hours = {
        f"{name}_minus_longitude_hours": 24.0 * (pl.col(f"{name}_jd") - pl.col("longitude_jd"))
        for name in ("right_ascension", "j2000", "least_separation")
    }
    texts = {f"{name}_utc": utc_texts(rows[f"{name}_jd"]) for name in _DEFINITIONS}
    table = rows.with_columns(
        kind="group",
        longitude_separation_deg="longitude_separation",
        right_ascension_separation_deg="right_ascension_separation",
        least_separation_deg="least_separation_separation",
        **hours,
    ).with_columns(**texts)
    return table.select(pl.col(name).cast(kind) for name, kind in COLUMNS.items())
