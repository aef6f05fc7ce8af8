"""Standing: how an event compares with the nearest better ones of its kind, before and after it.

The whole kernel is searched, so "closest since 2003, not closer until 2287" is proven as far as it reaches;
where it ends first, the answer is null.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import timescales
from wanderers.ephemeris.appearance import magnitude
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.almanac import time_texts
from wanderers.events.catalogue import Found, Query, find_events, sky_of
from wanderers.events.kinds import Batch, Kind
from wanderers.events.ledger import Arrays, by_block, event_ids

SEPARATION: Final = "separation"
MEASURED: Final = "measured by the finder"
DISTANCE: Final = "distance"
FARNESS: Final = "farness"
MAGNITUDE: Final = "magnitude"
ELONGATION: Final = "elongation"

FIGURE_OF: Final[dict[Kind, str]] = {
    Kind.CONJUNCTION: SEPARATION,
    Kind.APPULSE: MEASURED,
    Kind.OCCULTATION: SEPARATION,
    Kind.TRANSIT: MEASURED,
    Kind.GATHERING: MEASURED,
    Kind.OPPOSITION: DISTANCE,
    Kind.PERIGEE: DISTANCE,
    Kind.APOGEE: FARNESS,
    Kind.GREATEST_ELONGATION: ELONGATION,
    Kind.GREATEST_BRILLIANCY: MAGNITUDE,
}
"""What makes an event of each kind better, always counted so that less is better."""

COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "better_before_utc": pl.String,
    "better_after_utc": pl.String,
    "searched_from_utc": pl.String,
    "searched_to_utc": pl.String,
    "searched_limits": pl.String,
}


@dataclass(frozen=True, slots=True)
class Neighbours:
    """The nearest better events of each event: TT Julian dates, NaN where there is none, shape (n,) each."""

    before_jd: Floats
    after_jd: Floats


def with_standing(store: TrackStore, query: Query, table: pl.DataFrame) -> pl.DataFrame:
    """Add the standing of every event that has a figure of merit to an event table of the same query."""
    whole = replace(query, jd_from=store.span_jd[0], jd_to=store.span_jd[1])
    whole = replace(whole, kinds=query.kinds & frozenset(FIGURE_OF))
    found = [one for one in find_events(store, whole) if one.batch.jd.size] if whole.kinds else []
    parts = [_ranked(store, one) for one in found]
    ranked = pl.concat(parts) if parts else pl.DataFrame(schema={"event_id": pl.String, **COLUMNS})
    low, high = (str(text) for text in time_texts(timescales.jd_utc_from_tt(np.array(store.span_jd)), "Z"))
    limits = _limits_in_words(query)
    joined = table.join(ranked, on="event_id", how="left", maintain_order="left")
    has_figure = pl.col("kind").is_in([kind.value for kind in FIGURE_OF])
    return joined.with_columns(
        searched_from_utc=pl.when(has_figure).then(pl.lit(low)),
        searched_to_utc=pl.when(has_figure).then(pl.lit(high)),
        searched_limits=pl.when(has_figure).then(pl.lit(limits)),
    ).select(*table.columns, *COLUMNS)


def _ranked(store: TrackStore, found: Found) -> pl.DataFrame:
    """Return the nearest better events of one batch by name."""
    nearest = nearest_better(_groups(found.batch), found.batch.jd, _figures(store, found.batch))
    return pl.DataFrame(
        {
            "event_id": event_ids(found),
            "better_before_utc": time_texts(timescales.jd_utc_from_tt(nearest.before_jd), "Z"),
            "better_after_utc": time_texts(timescales.jd_utc_from_tt(nearest.after_jd), "Z"),
        }
    )


def _groups(batch: Batch) -> Ints:
    """Number the series within which events are compared: those of the same bodies."""
    gathered = batch.detail if batch.kind is Kind.GATHERING else np.zeros_like(batch.detail)
    return np.asarray((batch.body * 1000 + batch.other + 1) * 1000 + gathered)


def nearest_better(group: Ints, jd: Floats, figure: Floats) -> Neighbours:
    """Find, for every event, the nearest earlier and later event of its group with a smaller figure.

    Args:
        group: shape (n,).
        jd: shape (n,).
        figure: shape (n,), less is better.
    """
    order = np.lexsort((jd, group))
    before, after = np.full(jd.size, np.nan), np.full(jd.size, np.nan)
    placed_group, placed_jd, placed = group[order], jd[order], figure[order]
    earlier = _previous_smaller(placed_group, placed)
    later = _previous_smaller(placed_group[::-1], placed[::-1])[::-1]
    later = np.where(later >= 0, jd.size - 1 - later, -1)
    before[order] = np.where(earlier >= 0, placed_jd[earlier], np.nan)
    after[order] = np.where(later >= 0, placed_jd[later], np.nan)
    return Neighbours(before, after)


def _previous_smaller(group: Ints, figure: Floats) -> Ints:
    """Return the place of the nearest smaller figure before each in its group, -1 if none, shape (n,).

    Each place first points at its predecessor; a pointer at a figure no smaller is moved on to where that
    one points. All in between are no smaller, so nothing is passed over.
    """
    pointer = np.arange(group.size) - 1
    pointer[1:][group[1:] != group[:-1]] = -1
    while True:
        stale: Bools = (pointer >= 0) & (figure[pointer] >= figure)
        if not stale.any():
            return pointer
        pointer[stale] = pointer[pointer[stale]]


def _figures(store: TrackStore, batch: Batch) -> Floats:
    """Return the figure of merit of every event of a batch, less is better."""
    figure = FIGURE_OF[batch.kind]
    if figure == MEASURED and batch.figure_deg is not None:
        return batch.figure_deg

    def measure(some: slice) -> Arrays:
        return {"figure": _measured(store, figure, batch.body[some], batch.other[some], batch.jd[some])}

    return by_block(store, batch.jd, measure)["figure"]


def _measured(store: TrackStore, figure: str, body: Ints, other: Ints, jd: Floats) -> Floats:
    if jd.size == 0:
        return np.empty(0)
    sky = sky_of(store, float(jd[0]), float(jd[-1]))
    if figure in (DISTANCE, FARNESS):
        distance = np.asarray(sky.earth_distance_au(body, jd)[0])
        return distance if figure == DISTANCE else -distance
    if figure == MAGNITUDE:
        return magnitude(sky, body, jd)
    if figure == ELONGATION:
        return -separation_deg(sky.apparent(body, jd)[0], sky.apparent(np.zeros_like(body), jd)[0])
    return separation_deg(sky.apparent(body, jd)[0], sky.apparent(other, jd)[0])


def _limits_in_words(query: Query) -> str:
    limits = query.choice.limits
    return (
        f"geocentric; appulses of planets under {limits.planets_deg:g} deg, of the Moon under "
        f"{limits.moon_deg:g}, of stars under {limits.stars_deg:g}; gatherings under {limits.gathering_deg:g}"
    )
