"""The table of gatherings, and what each limit left out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.catalogue import Query, sky_of
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Kind
from wanderers.events.ledger import Arrays, by_block
from wanderers.events.scene import Choice, Limits
from wanderers.events.standing import with_standing

WIDER: Final = 1.5
"""Gatherings are searched this much wider than asked, so that the limit's effect can be told."""

COLUMNS: Final = schema.EVENT_COLUMNS | {
    "bodies": pl.Int64,
    "longitude_arc_deg": pl.Float64,
    "largest_separation_deg": pl.Float64,
    "least_elongation_deg": pl.Float64,
}
"""Event columns, ``separation_deg`` being the circle's diameter, and four more."""


@dataclass(frozen=True, slots=True)
class FewestAndWidest:
    """What counts as a gathering.

    Attributes:
        bodies: who may take part.
        at_least: fewest bodies.
        within_deg: largest diameter of the circle.
        least_elongation_deg: least distance of every body from the Sun.
    """

    bodies: tuple[Body, ...]
    at_least: int
    within_deg: float
    least_elongation_deg: float


@dataclass(frozen=True, slots=True)
class Removals:
    """How many gatherings were found within the searched diameter, and how many each limit left out."""

    searched_deg: float
    found: int
    too_wide: int
    too_near_the_sun: int


def gatherings(
    store: TrackStore, jd_from: float, jd_to: float, wanted: FewestAndWidest, *, standing: bool = False
) -> tuple[pl.DataFrame, Removals]:
    """Return the gatherings of a span in order of time, and what the limits left out."""
    searched = min(WIDER * wanted.within_deg, 90.0)
    choice = Choice(
        wanted.bodies, stars_for=(), limits=Limits(gathering_deg=searched), fewest_gathered=wanted.at_least
    )
    query = Query(jd_from, jd_to, frozenset({Kind.GATHERING}), choice=choice)
    table = kept_almanac(store, query)
    table = table.with_columns(**_measures(store, table))
    wide = table["separation_deg"] >= wanted.within_deg
    glaring = table["least_elongation_deg"] < wanted.least_elongation_deg
    removals = Removals(searched, table.height, int(wide.sum()), int((glaring & ~wide).sum()))
    table = table.filter(~wide & ~glaring).select(pl.col(name).cast(kind) for name, kind in COLUMNS.items())
    return (with_standing(store, query, table) if standing else table), removals


def removals_in_words(removals: Removals) -> str:
    """Say what each limit left out."""
    return (
        f"{removals.found} gatherings found within {removals.searched_deg:g} degrees; "
        f"--within left out {removals.too_wide}, --least-elongation {removals.too_near_the_sun}"
    )


def _measures(store: TrackStore, table: pl.DataFrame) -> dict[str, pl.Series]:
    """Measure every gathering: how many bodies, how far they spread, how near the Sun they come."""
    members = [tuple(Body(name) for name in detail.split("+")) for detail in table["detail"]]
    jd = table["jd_tt"].to_numpy()

    def measure(some: slice) -> Arrays:
        rows = [_spread(store, members[row], jd[row : row + 1]) for row in range(jd.size)[some]]
        columns = np.array(rows).reshape(-1, 3).T
        return dict(
            zip(("longitude_arc_deg", "largest_separation_deg", "least_elongation_deg"), columns, strict=True)
        )

    measured = {name: pl.Series(values) for name, values in by_block(store, jd, measure).items()}
    return {"bodies": pl.Series([len(some) for some in members], dtype=pl.Int64)} | measured


def _spread(store: TrackStore, members: tuple[Body, ...], jd: Floats) -> tuple[float, float, float]:
    """Return the arc in longitude, the largest separation and the least elongation of one gathering."""
    sky = sky_of(store, float(jd[0]), float(jd[0]))
    at = np.repeat(jd, len(members))
    target = np.array([body.order for body in members])
    place = sky.apparent(target, at)[0]
    longitude = np.sort(sky.longitude_deg(target, at, Frame.ECLIPTIC)[0])
    gaps = np.append(np.diff(longitude), 360.0 - longitude[-1] + longitude[0])
    pairs = [separation_deg(place, np.roll(place, shift, axis=1)).max() for shift in range(1, len(members))]
    return 360.0 - float(gaps.max()), float(max(pairs)), _least_elongation(sky, place, at, target)


def _least_elongation(sky: Sky, place: Floats, jd: Floats, target: np.ndarray) -> float:
    sun = sky.apparent(np.full(jd.size, SUN), jd)[0]
    elongation = separation_deg(place, sun)[target != SUN]
    return float(elongation.min())
