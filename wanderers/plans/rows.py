"""Rows of a plan: nights of a campaign with role, spares and reasons, times printed."""

from __future__ import annotations

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.vectors import separation_deg, unit_vectors
from wanderers.plans import wording
from wanderers.plans.columns import PLAN_COLUMNS, arranged
from wanderers.plans.draft import Draft
from wanderers.plans.replan import Status
from wanderers.plans.season import CampaignSeason
from wanderers.plans.usable import WEEKDAY_NAME
from wanderers.site import clock
from wanderers.site.places import Site
from wanderers.site.zones import zone_named

MUST = "must"
GOOD = "good"
SPARE = "spare"
TIMES = ("window_start", "best", "window_end", "recommended")


def plan_rows(site: Site, season: CampaignSeason, nights: pl.DataFrame, draft: Draft) -> pl.DataFrame:
    """Return the planned nights, past ones included, in order of date; columns ``PLAN_COLUMNS``."""
    places = np.union1d(draft.new.nights, draft.lost_past).astype(np.int64)
    dates = nights["evening_date"].to_list()
    musts = {moment.name for moment in season.moments if moment.must}
    own = [draft.moments_of(night) for night in places.tolist()]
    table = _described(site, season, nights, places, draft.new.nights).with_columns(
        night=pl.int_range(1, pl.len() + 1),
        status=_texts([draft.status_of(night).value for night in places.tolist()]),
        role=_texts([MUST if musts & set(names) else GOOD for names in own]),
        moment=_texts(["+".join(names) or None for names in own]),
        spares=_texts(
            [
                " ".join(dates[spare] for spare in draft.spares.get(night, [])) or None
                for night in places.tolist()
            ]
        ),
        spare_for=pl.lit(None, dtype=pl.String),
        reasons=_texts([wording.reasons(season, nights, draft, night) for night in places.tolist()]),
    )
    return arranged(table, PLAN_COLUMNS)


def spare_rows(site: Site, season: CampaignSeason, nights: pl.DataFrame, draft: Draft) -> pl.DataFrame:
    """Return the nights that stand in, in order of date; columns ``PLAN_COLUMNS``."""
    pairs = sorted((spare, night) for night, own in draft.spares.items() for spare in own)
    places = np.array([spare for spare, _ in pairs], dtype=np.int64)
    dates = nights["evening_date"].to_list()
    table = _described(site, season, nights, places, draft.new.nights).with_columns(
        night=pl.lit(None, dtype=pl.Int64),
        status=pl.lit(Status.PLANNED.value),
        role=pl.lit(SPARE),
        moment=_texts(["+".join(draft.moments_of(night)) or None for _, night in pairs]),
        spares=pl.lit(None, dtype=pl.String),
        spare_for=_texts([dates[night] for _, night in pairs]),
        reasons=_texts([wording.spare_reasons(nights, spare, night) for spare, night in pairs]),
    )
    return arranged(table, PLAN_COLUMNS)


def directions(nights: pl.DataFrame) -> Floats:
    """Return where the planet stands on some nights, unit vectors in ICRS axes, shape (3, n)."""
    return unit_vectors(nights["ra_j2000_deg"].to_numpy(), nights["dec_j2000_deg"].to_numpy())


def _described(
    site: Site, season: CampaignSeason, nights: pl.DataFrame, places: Ints, planned: Ints
) -> pl.DataFrame:
    """Return some nights with times printed and the way since the planned night before."""
    table = nights[places]
    zone = zone_named(site.zone)
    times: dict[str, pl.Series] = {}
    for name in TIMES:
        jd = table[f"{name}_jd"].fill_null(np.nan).to_numpy()
        times |= {f"{name}_utc": clock.utc_texts(jd), f"{name}_local": clock.local_texts(zone, jd)}
    return table.with_columns(
        **times,
        weekday=WEEKDAY_NAME,
        site=pl.lit(site.name),
        zone=pl.lit(zone.name),
        recommended_jd_tt=pl.col("recommended_jd"),
        move_deg=pl.Series(_moves(nights, places, planned), nan_to_null=True),
        path_deg=pl.col("path_deg") - season.path.reached_deg(season.start_jd),
        score=pl.col("score").round(0),
    )


def _moves(nights: pl.DataFrame, places: Ints, planned: Ints) -> Floats:
    """Return how far nights lie from the planned night before each, degrees, NaN for the first."""
    direction = directions(nights)
    before = np.searchsorted(planned, places) - 1
    if planned.size == 0:
        return np.full(places.size, np.nan)
    apart = separation_deg(direction[:, places], direction[:, planned[np.maximum(before, 0)]])
    return np.where(before >= 0, apart, np.nan)


def _texts(values: list[str | None] | list[str]) -> pl.Series:
    return pl.Series(values, dtype=pl.String)
