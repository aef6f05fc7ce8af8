"""Kinds of one body: stations, nodes, and the extremes of its distance from the Earth and the Sun."""

from __future__ import annotations

import numpy as np
import polars as pl

from tests.oracle.angles import CIRCLE, latitude, longitude
from tests.oracle.places import AU_KM, Sky
from tests.oracle.rows import SCHEMA, events
from tests.oracle.sampling import FRAMES, Grid
from tests.oracle.search import Direct, crossings, rate, sampled_rate

STEP_DAYS = 0.1
APSIS_STEP_DAYS = 0.5  # heliocentric distances bend over months at least

# Periods (days) and mean distances (au), rough on purpose: they only part one orbit from the next.
ORBITS = {
    "jupiter": (4333.0, 5.20),
    "saturn": (10759.0, 9.55),
    "uranus": (30688.0, 19.2),
    "neptune": (60182.0, 30.07),
    "pluto": (90560.0, 39.5),
}


def station(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find stations in each frame: the rate of apparent longitude (right ascension) passes zero."""
    (body,) = subject
    parts = []
    for frame in FRAMES:
        slope = sampled_rate(grid.longitude_deg(frame, body), grid.step_days, period=CIRCLE)
        direct = rate(longitude(sky, frame, body), STEP_DAYS, period=CIRCLE)
        found = crossings(direct, grid.jd_tt[3:-3], slope)
        detail = np.where(found.rising, "direct", "retrograde")
        parts.append(events("station", found.jd_tt, body=body, frame=frame, detail=detail))
    return pl.concat(parts)


def node(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find passages through the true ecliptic of date: apparent latitude zero."""
    (body,) = subject
    found = crossings(latitude(sky, "ecliptic", body), grid.jd_tt, grid.latitude_deg("ecliptic", body))
    detail = np.where(found.rising, "ascending", "descending")
    return events("node", found.jd_tt, body=body, frame="ecliptic", detail=detail)


def perigee(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find least geometric distances from the Earth."""
    return _geocentric_extreme(sky, grid, subject[0], "perigee", rising=True)


def apogee(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find greatest geometric distances from the Earth."""
    return _geocentric_extreme(sky, grid, subject[0], "apogee", rising=False)


def _geocentric_extreme(sky: Sky, grid: Grid, body: str, kind: str, *, rising: bool) -> pl.DataFrame:
    """Find where the rate of the geocentric distance passes zero in the given sense."""

    def direct(jd: np.ndarray, offset: np.ndarray) -> np.ndarray:
        return sky.distance_au(body, jd, offset)

    slope = sampled_rate(sky.distance_au(body, grid.jd_tt), grid.step_days)
    found = crossings(rate(direct, STEP_DAYS), grid.jd_tt[3:-3], slope)
    jd = found.jd_tt[found.rising == rising]
    return events(kind, jd, body=body, distance_au=sky.distance_au(body, jd))


def perihelion(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find every local minimum of the distance from the Sun, wobbles included."""
    return _heliocentric_extreme(sky, grid, subject[0], "perihelion", rising=True)


def aphelion(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find every local maximum of the distance from the Sun, wobbles included."""
    return _heliocentric_extreme(sky, grid, subject[0], "aphelion", rising=False)


def _heliocentric_extreme(sky: Sky, grid: Grid, body: str, kind: str, *, rising: bool) -> pl.DataFrame:
    """Find where the rate of the heliocentric distance passes zero in the given sense.

    The tolerance in time is the span over which the distance keeps within one kilometre.
    """

    def direct(jd: np.ndarray, offset: np.ndarray) -> np.ndarray:
        return sky.heliocentric_au(body, jd, offset)

    slope = sampled_rate(direct(grid.jd_tt, np.zeros_like(grid.jd_tt)), grid.step_days)
    distance_rate: Direct = rate(direct, APSIS_STEP_DAYS)
    found = crossings(distance_rate, grid.jd_tt[3:-3], slope)
    jd = found.jd_tt[found.rising == rising]
    bend = np.abs(rate(distance_rate, APSIS_STEP_DAYS)(jd, np.zeros_like(jd)))
    tolerance_s = 86400.0 * np.sqrt(2.0 / AU_KM / bend)
    return events(kind, jd, body=body, heliocentric_au=sky.heliocentric_au(body, jd), tolerance_s=tolerance_s)


def one_per_orbit(apsides: pl.DataFrame) -> pl.DataFrame:
    """Keep of each cluster of apsides of the outer planets the most extreme one.

    The Sun's wobble about the barycentre makes small extremes of the wrong kind near an apsis: those
    on the wrong side of the mean distance are dropped, and of several in half a period one is kept.
    """
    kept = [SCHEMA.to_frame()]
    for (kind, body), rows in apsides.sort("jd_tt").group_by("kind", "body", maintain_order=True):
        period_days, mean_au = ORBITS.get(str(body), (0.0, None))
        if mean_au is not None:
            inside = pl.col("heliocentric_au") < mean_au
            rows = rows.filter(inside if kind == "perihelion" else ~inside)
        cluster = (rows["jd_tt"].diff().fill_null(0.0) > period_days / 2.0).cum_sum()
        ranked = rows.with_columns(cluster.alias("cluster"))
        ranked = ranked.sort("heliocentric_au", descending=kind == "aphelion")
        kept.append(ranked.unique("cluster", keep="first", maintain_order=True).drop("cluster"))
    return pl.concat(kept).sort("jd_tt")
