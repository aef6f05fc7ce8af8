"""How a retrograde season compares with the planet's others: rank by arc, closeness and brightness."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats
from wanderers.constants import DAYS_PER_JULIAN_YEAR
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import time_texts
from wanderers.events.seasons import seasons
from wanderers.events.standing import nearest_better

SEARCHED_YEARS: Final = 50.0
"""How far beyond a span other seasons are looked for, within the kernel."""


@dataclass(frozen=True, slots=True)
class Figure:
    """What seasons are ranked by: a column, and whether less is better."""

    column: str
    less_is_better: bool


FIGURES: Final = (
    Figure("arc_deg", False),
    Figure("closest_au", True),
    Figure("peak_magnitude", True),
)

STANDING_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "figure": pl.String,
    "value": pl.Float64,
    "rank": pl.Int64,
    "of": pl.Int64,
    "better_before_utc": pl.String,
    "better_after_utc": pl.String,
    "searched_from_utc": pl.String,
    "searched_to_utc": pl.String,
}
"""One row a season and figure: its rank among ``of`` seasons whose middle lies in the span searched, and the
middles of the nearest better ones; null where there is none in that span."""


def standing_table(store: TrackStore, wanted: pl.DataFrame, span_jd: tuple[float, float]) -> pl.DataFrame:
    """Return the standing of seasons of one frame, ``STANDING_COLUMNS``.

    Args:
        store: the tracks.
        wanted: the seasons, ``schema.SEASON_COLUMNS``.
        span_jd: TT Julian dates; the search goes SEARCHED_YEARS beyond both, within the kernel.
    """
    if wanted.is_empty():
        return pl.DataFrame(schema=STANDING_COLUMNS)
    beyond = SEARCHED_YEARS * DAYS_PER_JULIAN_YEAR
    low, high = max(span_jd[0] - beyond, store.span_jd[0]), min(span_jd[1] + beyond, store.span_jd[1])
    bodies = tuple(Body(name) for name in wanted["body"].unique().sort())
    frame = Frame(wanted["frame"][0])
    found = seasons(store, low, high, bodies=bodies, frames=(frame,))
    everyone = pl.concat([found, wanted]).unique("season_id", maintain_order=True)
    ranked = pl.concat([_ranked(everyone, figure) for figure in FIGURES])
    ends = time_texts(timescales.jd_utc_from_tt(np.array([low, high])), "Z")
    return (
        ranked.filter(pl.col("season_id").is_in(wanted["season_id"].to_list()))
        .with_columns(searched_from_utc=pl.lit(ends[0]), searched_to_utc=pl.lit(ends[1]))
        .select(pl.col(name).cast(kind) for name, kind in STANDING_COLUMNS.items())
    )


def _ranked(table: pl.DataFrame, figure: Figure) -> pl.DataFrame:
    """Rank all seasons by one figure, each among its own planet's."""
    known = table.filter(pl.col(figure.column).is_not_null())
    value = known[figure.column].to_numpy()
    merit = value if figure.less_is_better else -value
    group = np.array([Body(name).order for name in known["body"]], dtype=np.int64)
    nearest = nearest_better(group, _middles(known), merit)
    return known.select(
        "season_id",
        figure=pl.lit(figure.column),
        value=pl.col(figure.column),
        rank=_ranks(known, merit),
        of=pl.len().over("body"),
        better_before_utc=time_texts(timescales.jd_utc_from_tt(nearest.before_jd), "Z"),
        better_after_utc=time_texts(timescales.jd_utc_from_tt(nearest.after_jd), "Z"),
    )


def _ranks(table: pl.DataFrame, merit: Floats) -> pl.Series:
    """Return the rank of each season among its planet's, 1 the best."""
    placed = table.select("body", merit=pl.Series(merit))
    return placed.select(pl.col("merit").rank("min").over("body").cast(pl.Int64)).to_series()


def _middles(table: pl.DataFrame) -> Floats:
    """Return when each season has its middle, or where it lacks one, the middle between its stations."""
    between = (pl.col("station_retrograde_jd_tt") + pl.col("station_direct_jd_tt")) / 2.0
    return table.select(pl.col("middle_jd_tt").fill_null(between)).to_series().to_numpy()
