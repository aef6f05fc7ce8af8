"""Kinds set by sunlight: the greatest brilliancy of Venus, and Saturn's ring seen or lit edge on."""

from __future__ import annotations

import numpy as np
import polars as pl
from numpy.typing import NDArray

from tests.oracle.places import Sky, broadcast, norm, tdb_minus_tt_days, unit
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import crossings, rate, sampled_rate

Floats = NDArray[np.float64]

STEP_DAYS = 0.1
CRESCENT_DEG = (80.0, 160.0)  # phase angles between greatest elongation (90) and inferior conjunction


def venus_magnitude(from_sun_au: Floats, from_earth_au: Floats, phase_angle_deg: Floats) -> Floats:
    """Give the V magnitude of Venus from its distances and phase angle.

    Source: Mallama & Hilton, Computing apparent planetary magnitudes for The Astronomical Almanac,
    Astronomy and Computing 25, 10 (2018), equations for Venus; from memory, and the same as in
    Skyfield's magnitudelib.
    """
    angle = phase_angle_deg
    full = -4.384 - 1.044e-3 * angle + 3.687e-4 * angle**2 - 2.814e-6 * angle**3 + 8.938e-9 * angle**4
    thin = 236.05828 - 2.81914 * angle + 8.39034e-3 * angle**2
    return 5.0 * np.log10(from_sun_au * from_earth_au) + np.where(angle < 163.7, full, thin)


def venus_phase(sky: Sky, jd_tt: Floats, offset_days: Floats) -> tuple[Floats, Floats]:
    """Give magnitude and phase angle (degrees) of Venus as seen from the geocentre.

    The planet and the Sun are taken at the instant the light left the planet.
    """
    jd_tt, offset_days = broadcast(jd_tt, offset_days)
    tdb_offset = offset_days + tdb_minus_tt_days(jd_tt, offset_days)
    seen = sky.astrometric("venus", jd_tt, tdb_offset)
    from_sun = seen.body_au - sky.position("sun", jd_tt, tdb_offset - seen.light_time_days)
    cosine = np.sum(unit(from_sun) * unit(seen.vector_au), axis=-1)
    angle = np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))
    return venus_magnitude(norm(from_sun), norm(seen.vector_au), angle), angle


def greatest_brilliancy(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find the brightness maxima of Venus as a crescent."""
    (body,) = subject
    magnitude, angle = venus_phase(sky, grid.jd_tt, np.zeros_like(grid.jd_tt))
    crescent = (angle > CRESCENT_DEG[0]) & (angle < CRESCENT_DEG[1])
    found = crossings(
        rate(lambda jd, offset: venus_phase(sky, jd, offset)[0], STEP_DAYS),
        grid.jd_tt[3:-3],
        sampled_rate(magnitude, grid.step_days),
        where=crescent[3:-3],
    )
    return events("greatest_brilliancy", found.jd_tt[found.rising], body=body)


def ring_latitude_deg(sky: Sky, viewer: str, jd_tt: Floats, offset_days: Floats) -> Floats:
    """Give the height of the Earth or the Sun over Saturn's ring plane, degrees, north positive.

    From the Earth the direction is corrected for light-time, and the pole taken when the light left
    Saturn; from the Sun both bodies are taken at the instant.

    Source: pole of Saturn, alpha = 40.589 - 0.036 T, delta = 83.537 - 0.004 T degrees (T in Julian
    centuries of TDB from J2000, ICRF): Archinal et al., Report of the IAU Working Group on
    Cartographic Coordinates and Rotational Elements: 2015, Celest. Mech. Dyn. Astron. 130:22 (2018),
    table 1; from memory.
    """
    jd_tt, offset_days = broadcast(jd_tt, offset_days)
    tdb_offset = offset_days + tdb_minus_tt_days(jd_tt, offset_days)
    if viewer == "earth":
        seen = sky.astrometric("saturn", jd_tt, tdb_offset)
        vector, ago = seen.vector_au, seen.light_time_days
    else:
        vector, ago = sky.geometric("saturn", viewer, jd_tt, offset_days), np.zeros_like(jd_tt)
    centuries = (jd_tt - 2451545.0 + tdb_offset - ago) / 36525.0
    alpha, delta = np.radians(40.589 - 0.036 * centuries), np.radians(83.537 - 0.004 * centuries)
    pole = np.stack([np.cos(delta) * np.cos(alpha), np.cos(delta) * np.sin(alpha), np.sin(delta)], axis=-1)
    return np.asarray(np.degrees(np.arcsin(-np.sum(pole * unit(vector), axis=-1))))


def ring_plane_crossing(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find passages of Saturn's ring plane through the Earth and through the Sun."""
    (body,) = subject
    parts = []
    for viewer in ("earth", "sun"):
        sampled = ring_latitude_deg(sky, viewer, grid.jd_tt, np.zeros_like(grid.jd_tt))
        found = crossings(
            lambda jd, offset, viewer=viewer: ring_latitude_deg(sky, viewer, jd, offset),  # type: ignore[misc]
            grid.jd_tt,
            sampled,
        )
        parts.append(events("ring_plane_crossing", found.jd_tt, body=body, detail=viewer))
    return pl.concat(parts)
