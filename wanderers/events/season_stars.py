"""The bright stars and clusters that a planet passes during a retrograde season."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import stars, timescales, vectors
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import time_texts
from wanderers.events.parabola import lowest

STAR_LIMIT_MAG: Final = 4.0
"""Faintest star that is listed: what the public finds without a chart. Common practice, no source."""
REACH_DEG: Final = 5.0
"""Greatest separation that is listed, about the field of binoculars."""
COARSE_MARGIN_DEG: Final = 1.0
"""What aberration, proper motion and the path between two samples may add to a rough separation."""
COARSE_SAMPLES: Final = 400
FINE_SAMPLES: Final = 41
CLUSTER_RADIUS_DEG: Final = 1.0
"""Stars so near to a listed cluster are its own, and it speaks for them."""
EDGE_DAYS: Final = 1e-6
"""Nearer to the end of a run than this a least separation is the end itself."""

STAR_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "star": pl.String,
    "designation": pl.String,
    "constellation": pl.String,
    "kind": pl.String,
    "v_mag": pl.Float64,
    "closest_jd_tt": pl.Float64,
    "closest_utc": pl.String,
    "separation_deg": pl.Float64,
    "planet_is": pl.String,
    "at_edge": pl.Boolean,
}
"""One row a star passed: least true separation within the season, and on which side of the star the planet
then is (north, east, south or west on the sky of J2000). ``at_edge``: still closing in where the season
begins or ends."""
SIDES: Final = ("north", "east", "south", "west")


def stars_passed(store: TrackStore, season_id: str, body: Body, run_jd: tuple[float, float]) -> pl.DataFrame:
    """Return the stars to STAR_LIMIT_MAG and the clusters that a planet passes within REACH_DEG.

    Args:
        store: the tracks.
        season_id: of the season.
        body: the planet.
        run_jd: first and last TT Julian date of the season's run.

    Returns:
        ``STAR_COLUMNS``, in order of time.
    """
    jd = np.linspace(*run_jd, COARSE_SAMPLES)
    catalogue = _nearby(store, body, jd)
    if len(catalogue) == 0:
        return pl.DataFrame(schema=STAR_COLUMNS)
    sky = Sky(store.tracks(*run_jd), catalogue)
    best = np.argmin(_separations(sky, body, np.broadcast_to(jd, (len(catalogue), jd.size))), axis=1)
    step = jd[1] - jd[0]
    around = np.clip(jd[best, np.newaxis] + np.linspace(-step, step, FINE_SAMPLES), *run_jd)
    closest = _least(around, _separations(sky, body, around))
    number = FIRST_STAR + np.arange(len(catalogue))
    planet, star = sky.pair(np.full(number.size, body.order), number, closest)
    separation = vectors.separation_deg(planet[0], star[0])
    table = _printed(season_id, catalogue, closest, separation, _sides(planet[0], star[0]))
    edge = ~pl.col("closest_jd_tt").is_between(run_jd[0] + EDGE_DAYS, run_jd[1] - EDGE_DAYS)
    near = table.filter(pl.col("separation_deg") <= REACH_DEG).with_columns(at_edge=edge)
    return near.sort("closest_jd_tt", "star").select(*STAR_COLUMNS)


def _nearby(store: TrackStore, body: Body, jd: Floats) -> StarCatalogue:
    """Return the stars and clusters that may come within reach."""
    bright, listed = stars.field_stars(), stars.ecliptic_stars()
    bright = bright.take(bright.v_mag <= STAR_LIMIT_MAG)
    clusters = listed.take(np.array([kind == "cluster" for kind in listed.kind]))
    apart = stars.barycentric_directions(bright, jd[:1])[..., 0] @ _centres(clusters, jd[:1])
    bright = bright.take((apart < np.cos(np.radians(CLUSTER_RADIUS_DEG))).all(axis=1))
    path = Sky(store.tracks(float(jd[0]), float(jd[-1]))).apparent(np.full(jd.size, body.order), jd)[0]
    kept = []
    for catalogue in (bright, clusters):
        places = stars.barycentric_directions(catalogue, jd[:1])[..., 0]
        near = (places @ path).max(axis=1) >= np.cos(np.radians(REACH_DEG + COARSE_MARGIN_DEG))
        kept.append(catalogue.take(near))
    return stars.joined(*kept)


def _centres(clusters: StarCatalogue, jd: Floats) -> Floats:
    """Return the directions of clusters, shape (3, n)."""
    return np.asarray(stars.barycentric_directions(clusters, jd)[..., 0].T)


def _separations(sky: Sky, body: Body, jd: Floats) -> Floats:
    """Return the planet's separation from each star, degrees; ``jd`` and result have shape (stars, n)."""
    star = FIRST_STAR + np.repeat(np.arange(jd.shape[0]), jd.shape[1])
    planet, seen = sky.pair(np.full(star.size, body.order), star, jd.ravel())
    return np.asarray(vectors.separation_deg(planet[0], seen[0]).reshape(jd.shape))


def _least(jd: Floats, separation: Floats) -> Floats:
    """Return when each row is least, shape (stars,): the vertex of a parabola in the squares."""
    row = np.arange(jd.shape[0])
    at = np.argmin(separation, axis=1)
    inner = np.clip(at, 1, jd.shape[1] - 2)
    y = np.stack([separation[row, inner + off] ** 2 for off in (-1, 0, 1)])
    x = np.stack([jd[row, inner + off] for off in (-1, 0, 1)])
    even = (at == inner) & np.isclose(x[1] - x[0], x[2] - x[1], atol=1e-9)
    return np.asarray(np.where(even, lowest(x, y, (x[0], x[2]))[0], jd[row, at]))


def _sides(planet: Floats, star: Floats) -> Ints:
    """Return on which side of each star, unit vectors (3, n), the planet is, as a place in SIDES."""
    pole = np.array([0.0, 0.0, 1.0])
    towards_north = planet[2] - star[2] * np.einsum("in,in->n", planet, star)
    towards_east = np.einsum("in,ni->n", planet, np.cross(pole, star.T))
    angle = np.degrees(np.arctan2(towards_east, towards_north))
    return np.asarray(np.round(angle / 90.0).astype(np.int64) % 4)


def _printed(
    season_id: str, catalogue: StarCatalogue, jd: Floats, separation: Floats, sides: Ints
) -> pl.DataFrame:
    return pl.DataFrame(
        {
            "season_id": pl.repeat(season_id, jd.size, eager=True),
            "star": pl.Series(catalogue.labels, dtype=pl.String),
            "designation": pl.Series(catalogue.bayer, dtype=pl.String),
            "constellation": pl.Series(catalogue.constellation, dtype=pl.String),
            "kind": pl.Series(catalogue.kind, dtype=pl.String),
            "v_mag": catalogue.v_mag,
            "closest_jd_tt": jd,
            "closest_utc": time_texts(timescales.jd_utc_from_tt(jd), "Z"),
            "separation_deg": separation,
            "planet_is": pl.Series(SIDES).gather(sides),
        }
    )
