"""Retrograde seasons from a site: what can be seen of each at its middle, else at its start."""

from __future__ import annotations

import polars as pl

from wanderers import schema
from wanderers.ephemeris.store import TrackStore
from wanderers.site import columns
from wanderers.site.event_view import from_site
from wanderers.site.places import Site
from wanderers.site.rules import Rules


def seasons_from_site(
    store: TrackStore, site: Site, table: pl.DataFrame, rules: Rules | None = None
) -> pl.DataFrame:
    """Return a season table with ``columns.SITE_COLUMNS``: those of the evening nearest to the middle.

    Args:
        store: the tracks.
        site: from where.
        table: columns of ``schema.SEASON_COLUMNS``.
        rules: what counts as watchable.
    """
    middles = table.select(
        kind=pl.lit("opposition"),
        body="body",
        jd_tt=pl.coalesce("middle_jd_tt", "station_retrograde_jd_tt"),
    )
    absent = (
        pl.lit(None, dtype=kind).alias(name)
        for name, kind in schema.EVENT_COLUMNS.items()
        if name not in middles.columns
    )
    events = middles.with_columns(absent).select(list(schema.EVENT_COLUMNS))
    return table.hstack(from_site(store, site, events, rules).select(list(columns.SITE_COLUMNS)))
