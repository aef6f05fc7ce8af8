"""Comparison stars: which ones to set a planet's brightness against, night by night.

A good one is about as bright as the planet, stands as high (so that the air dims both alike), is of its
colour and near it. Two that hold the planet between them, one brighter and one fainter, are worth more than
two on one side. Stars that vary and stars that the eye runs together with a neighbour are left out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.constants import J2000_JD
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.stars import StarCatalogue, barycentric_directions, deep_stars, variable_hips
from wanderers.ephemeris.tracks import Tracks
from wanderers.ephemeris.vectors import separation_deg
from wanderers.plans.field_stars import star_names
from wanderers.site.airmass import airmass, extinction_mag
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.earth import vantage
from wanderers.site.places import Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.topocentric import horizontal, see_body, see_each

TOLERANCE_MAG: Final = 1.0
AIRMASS_TOLERANCE: Final = 0.5
"""At 0.25 magnitudes an air mass this is the error of a careful estimate. Common practice, no source."""
LOWEST_DEG: Final = 10.0
"""Lower stars are not offered: haze, which differs by direction, decides. Common practice, no source."""
STARS_A_NIGHT: Final = 3

PLANET_B_V: Final = {
    Body.MERCURY: 0.97,
    Body.VENUS: 0.81,
    Body.MARS: 1.43,
    Body.JUPITER: 0.87,
    Body.SATURN: 1.09,
    Body.URANUS: 0.50,
    Body.NEPTUNE: 0.39,
}
"""Colour indices. Mallama, Krobusek and Pavlov 2017, Icarus 282, 19; from memory."""
UNLIKE_COLOUR_MAG: Final = 0.6
"""From this difference in B-V on a table says so. Common practice, no source."""
NOTED_EXTINCTION_MAG: Final = 0.1

POOL: Final = 400
"""So many stars of about the right brightness, the nearest to the planet, are looked at."""
MERGED_DEG: Final = 5.0 / 60.0
MERGED_MAG: Final = 3.3
"""A neighbour that the bare eye does not split and that is so much fainter adds 0.05 magnitude to the light.
5 arcminutes: common practice, no source."""

EXTINCTION_WEIGHT: Final = 2.0
COLOUR_WEIGHT: Final = 0.3
DISTANCE_WEIGHT_PER_DEG: Final = 0.01
"""What a difference counts against a magnitude of difference in brightness. Common practice, no source."""


@dataclass(frozen=True, slots=True, eq=False)
class Comparisons:
    """Comparison stars of k nights.

    Attributes:
        table: up to three stars a night, best first; columns ``night`` (0 to k - 1), ``star, hip, v_mag,
            b_v, difference_mag`` (star less planet, outside the air), ``altitude_deg, azimuth_deg, compass,
            airmass, airmass_difference`` (star less planet), ``extinction_difference_mag`` (likewise: above
            zero if the air dims the star more), ``seen_difference_mag`` (the sum of both differences, what
            the eye meets), ``separation_deg, note``.
        messages: for each night why there is no star, else empty.
        magnitude: of the planet outside the air, shape (k,); NaN where unknown.
        altitude_deg: of the planet as seen, shape (k,).
        airmass: of the planet, shape (k,); NaN below the horizon.
    """

    table: pl.DataFrame
    messages: tuple[str, ...]
    magnitude: Floats
    altitude_deg: Floats
    airmass: Floats


@dataclass(frozen=True, slots=True)
class _Planet:
    """A planet seen from the site at k instants; ``direction`` is of shape (3, k), the rest (k,)."""

    body: Body
    jd: Floats
    magnitude: Floats
    direction: Floats
    altitude_deg: Floats
    airmass: Floats


def comparison_stars(
    tracks: Tracks,
    site: Site,
    body: Body,
    jd_tt: Floats,
    *,
    per_airmass_mag: float | None = None,
    tolerance_mag: float = TOLERANCE_MAG,
    airmass_tolerance: float = AIRMASS_TOLERANCE,
) -> Comparisons:
    """Choose comparison stars for the times when a planet is to be estimated.

    Args:
        tracks: over the instants.
        site: from where.
        body: the planet.
        jd_tt: one instant a night, TT, shape (k,).
        per_airmass_mag: extinction; None for the average clear night at the site's elevation.
        tolerance_mag: how much a star's V may differ from the planet's.
        airmass_tolerance: how much its air mass may.
    """
    per_airmass = extinction_mag(site.elevation_m) if per_airmass_mag is None else per_airmass_mag
    planet = _planet(tracks, site, body, jd_tt)
    alike, pool = _pool(planet, tolerance_mag)
    pairs = _pairs(tracks, site, planet, pool, per_airmass)
    alike_pairs = pairs.filter(pl.col("difference_mag").abs() <= tolerance_mag)
    high = alike_pairs.filter(pl.col("altitude_deg") >= LOWEST_DEG)
    fit = high.filter(pl.col("airmass_difference").abs() <= airmass_tolerance)
    table = _chosen(fit, body)
    served = set(table["night"].to_list())
    messages = tuple(
        "" if night in served else _why_none(planet, night, alike, high, tolerance_mag)
        for night in range(jd_tt.size)
    )
    return Comparisons(table, messages, planet.magnitude, planet.altitude_deg, planet.airmass)


def _planet(tracks: Tracks, site: Site, body: Body, jd: Floats) -> _Planet:
    sky = Sky(tracks)
    at = vantage(sky, site, jd)
    direction = see_body(sky, at, body.order).direction[0]
    altitude = refracted_deg(horizontal(at, direction).airless_altitude_deg, site.elevation_m)
    magnitude = appearance(sky, np.full(jd.size, body.order), jd).magnitude
    return _Planet(body, jd, magnitude, direction, altitude, airmass(altitude))


def usable_stars() -> StarCatalogue:
    """Return the stars whose brightness stands still enough to be compared with, brightest first."""
    stars = deep_stars()
    return stars.take(~np.isin(stars.hip, variable_hips()))


def _pool(planet: _Planet, tolerance_mag: float) -> tuple[StarCatalogue, StarCatalogue]:
    """Return the steady stars, and those of them as bright as the planet on some night, alone and near."""
    steady = usable_stars()
    known = planet.magnitude[np.isfinite(planet.magnitude)]
    if not known.size:
        return steady, steady.take(np.zeros(0, dtype=np.int64))
    bright = steady.v_mag >= known.min() - tolerance_mag
    pool = steady.take(bright & (steady.v_mag <= known.max() + tolerance_mag))
    places = _places(pool)
    middle = planet.direction.sum(axis=1)
    nearest = np.sort(np.argsort(-(places @ middle), kind="stable")[:POOL])
    return steady, pool.take(nearest[~_merged(pool.take(nearest))])


def _places(stars: StarCatalogue) -> Floats:
    return barycentric_directions(stars, np.array([J2000_JD]))[..., 0]


def _merged(stars: StarCatalogue) -> Bools:
    """Return which stars the bare eye runs together with a neighbour that counts, shape (n,)."""
    every = deep_stars()
    near = _places(stars) @ _places(every).T > np.cos(np.radians(MERGED_DEG))
    other = stars.hip[:, np.newaxis] != every.hip
    counts = every.v_mag <= stars.v_mag[:, np.newaxis] + MERGED_MAG
    return np.asarray(np.any(near & other & counts, axis=1))


def _pairs(
    tracks: Tracks, site: Site, planet: _Planet, pool: StarCatalogue, per_airmass_mag: float
) -> pl.DataFrame:
    """Return one row a night and star of the pool that is up with the planet, with its score."""
    night = np.repeat(np.arange(planet.jd.size), len(pool))
    star = np.tile(np.arange(len(pool)), planet.jd.size)
    sky = Sky(tracks, pool)
    at = vantage(sky, site, planet.jd[night])
    direction = see_each(sky, at, FIRST_STAR + star).direction[0]
    place = horizontal(at, direction)
    altitude = refracted_deg(place.airless_altitude_deg, site.elevation_m)
    path = airmass(altitude)
    more_air = path - planet.airmass[night]
    colour = np.nan_to_num(pool.b_v[star] - PLANET_B_V.get(planet.body, np.nan))
    apart = separation_deg(direction, planet.direction[:, night])
    difference = pool.v_mag[star] - planet.magnitude[night]
    extinction = per_airmass_mag * more_air
    score = np.abs(difference) + EXTINCTION_WEIGHT * np.abs(extinction) + COLOUR_WEIGHT * np.abs(colour)
    table = pl.DataFrame(
        {
            "night": night,
            "star": pl.Series(star_names(pool), dtype=pl.String).gather(star),
            "hip": pool.hip[star],
            "v_mag": pool.v_mag[star],
            "b_v": pl.Series(pool.b_v[star], nan_to_null=True),
            "difference_mag": difference,
            "altitude_deg": altitude,
            "azimuth_deg": place.azimuth_deg,
            "compass": pl.Series(POINTS).gather(compass_point(place.azimuth_deg)),
            "airmass": path,
            "airmass_difference": more_air,
            "extinction_difference_mag": extinction,
            "seen_difference_mag": difference + extinction,
            "separation_deg": apart,
            "colour_difference": colour,
            "score": score + DISTANCE_WEIGHT_PER_DEG * apart,
        }
    )
    return table.filter(pl.col("score").is_finite())


def _chosen(fit: pl.DataFrame, body: Body) -> pl.DataFrame:
    """Take each night's best brighter and best fainter star, then the next best, in order of their scores."""
    brighter = pl.col("difference_mag") <= 0.0
    first = pl.col("score").rank("ordinal").over("night", brighter) == 1
    ranked = fit.sort("night", "score", "hip").with_columns(spare=~first)
    by_night = ranked.sort("night", "spare", "score", "hip").group_by("night", maintain_order=True)
    taken = by_night.head(STARS_A_NIGHT)
    noted = taken.sort("night", "score", "hip").with_columns(note=_note(body))
    return noted.drop("spare", "score", "colour_difference")


def _note(body: Body) -> pl.Expr:
    """Return what to mind with a star, in words."""
    name = body.label
    colour = pl.col("colour_difference")
    redder = pl.when(colour >= UNLIKE_COLOUR_MAG).then(
        pl.lit(f"redder than {name}: in the dark it may look too faint")
    )
    hue = redder.when(colour <= -UNLIKE_COLOUR_MAG).then(pl.lit(f"bluer than {name}"))
    loss = pl.col("extinction_difference_mag")
    where = pl.when(loss > 0.0).then(pl.lit("lower")).otherwise(pl.lit("higher"))
    air = pl.when(loss.abs() >= NOTED_EXTINCTION_MAG).then(pl.format("stands {}: allow for the air", where))
    return pl.concat_str([air, hue], separator="; ", ignore_nulls=True)


def _why_none(
    planet: _Planet, night: int, steady: StarCatalogue, high: pl.DataFrame, tolerance_mag: float
) -> str:
    """Say why a night has no comparison star, and what comes nearest."""
    name, magnitude = planet.body.label, float(planet.magnitude[night])
    if not np.isfinite(planet.airmass[night]):
        return f"{name} is below the horizon"
    if not np.isfinite(magnitude):
        return f"the magnitude of {name} is not known"
    if magnitude < steady.v_mag[0] - tolerance_mag:
        gap = steady.v_mag[0] - magnitude
        return (
            f"no star matches: {name} at {magnitude:.1f} outshines {star_names(steady)[0]} "
            f"({steady.v_mag[0]:.1f}), the brightest, by {gap:.1f} magnitudes"
        )
    if magnitude > steady.v_mag[-1] + tolerance_mag:
        return f"no star matches: {name} at {magnitude:.1f} is fainter than every listed star"
    up = high.filter(pl.col("night") == night)
    if up.is_empty():
        return (
            f"no steady star within {tolerance_mag:g} magnitude of {name} ({magnitude:.1f}) stands above "
            f"{LOWEST_DEG:.0f} degrees"
        )
    nearest = up.sort(pl.col("airmass_difference").abs(), "hip").row(0, named=True)
    side = "lower" if nearest["airmass_difference"] > 0.0 else "higher"
    return (
        f"no steady star within {tolerance_mag:g} magnitude of {name} ({magnitude:.1f}) stands as high; "
        f"{nearest['star']} ({nearest['v_mag']:.1f}) comes nearest, {abs(nearest['airmass_difference']):.1f} "
        f"air masses {side}: allow {abs(nearest['extinction_difference_mag']):.1f} magnitude for the air"
    )
