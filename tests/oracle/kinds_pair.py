"""Kinds of two bodies: conjunctions in two frames and appulses."""

from __future__ import annotations

import numpy as np
import polars as pl

from tests.oracle.angles import CIRCLE, longitude_difference, separation, squared_chord
from tests.oracle.places import Sky, norm, separation_deg
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import crossings, rate, sampled_rate, wrapped

# Short: the Sun's deflection bends the separation of bodies close behind it within hours.
STEP_DAYS = 0.02
APPULSE_LIMIT_DEG = 10.0
MOON_APPULSE_LIMIT_DEG = 6.0


def conjunction(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find equal apparent longitudes and equal apparent right ascensions of two bodies."""
    body, other = subject
    parts = []
    for frame in ("ecliptic", "equator"):
        sampled = grid.longitude_deg(frame, body) - grid.longitude_deg(frame, other)
        direct = longitude_difference(sky, frame, body, other)
        jd = crossings(direct, grid.jd_tt, wrapped(sampled, CIRCLE), period=CIRCLE).jd_tt
        angle = separation(sky, body, other)(jd, np.zeros_like(jd))
        parts.append(events("conjunction", jd, body=body, other=other, frame=frame, separation_deg=angle))
    return pl.concat(parts)


def appulse(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find local minima of the apparent separation below the limit (less for the Moon)."""
    limit = MOON_APPULSE_LIMIT_DEG if "moon" in subject else APPULSE_LIMIT_DEG
    jd, angle = least_separations(sky, grid, subject, limit)
    return events("appulse", jd, body=subject[0], other=subject[1], separation_deg=angle)


def least_separations(
    sky: Sky, grid: Grid, subject: tuple[str, ...], limit_deg: float
) -> tuple[np.ndarray, np.ndarray]:
    """Give times and angles (degrees) of all local minima of the separation below a limit."""
    body, other = subject
    first, second = grid.direction[body], grid.direction[other]
    slope = sampled_rate(norm(first - second) ** 2, grid.step_days)
    near = separation_deg(first, second)[3:-3] < limit_deg + 2.0
    found = crossings(rate(squared_chord(sky, body, other), STEP_DAYS), grid.jd_tt[3:-3], slope, where=near)
    jd = found.jd_tt[found.rising]
    angle = separation(sky, body, other)(jd, np.zeros_like(jd))
    return jd[angle < limit_deg], angle[angle < limit_deg]
