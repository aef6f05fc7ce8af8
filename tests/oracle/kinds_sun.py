"""Kinds that compare a body with the Sun: oppositions, conjunctions, quadratures, elongations, phases."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import polars as pl

from tests.oracle.angles import CIRCLE, longitude, longitude_difference, separation, squared_chord
from tests.oracle.places import Sky, norm
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import Crossings, crossings, rate, sampled_rate, wrapped

STEP_DAYS = 0.1  # of the difference stencil; truncation and rounding are both far below a millisecond
SMALLEST_ELONGATION_DEG = 10.0  # Mercury's greatest elongations are 17.9 degrees and more
SEASON_POINTS = {
    0.0: "equinox_march",
    90.0: "solstice_june",
    180.0: "equinox_september",
    270.0: "solstice_december",
}
MOON_PHASES = {0.0: "new", 90.0: "first_quarter", 180.0: "full", 270.0: "last_quarter"}


def _from_sun(sky: Sky, grid: Grid, body: str, target_deg: float) -> Crossings:
    """Find when a body's ecliptic longitude of date exceeds the Sun's by a given angle."""
    sampled = grid.longitude_deg("ecliptic", body) - grid.longitude_deg("ecliptic", "sun") - target_deg
    direct = longitude_difference(sky, "ecliptic", body, "sun", target_deg)
    return crossings(direct, grid.jd_tt, wrapped(sampled, CIRCLE), period=CIRCLE)


def _phases(sky: Sky, grid: Grid, body: str, kind: str, targets_deg: Mapping[float, str]) -> pl.DataFrame:
    """Find several differences from the Sun's longitude, each with its detail."""
    return pl.concat(
        events(kind, _from_sun(sky, grid, body, target).jd_tt, body=body, frame="ecliptic", detail=detail)
        for target, detail in targets_deg.items()
    )


def opposition(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find oppositions: longitude 180 degrees from the Sun's."""
    (body,) = subject
    found = _from_sun(sky, grid, body, 180.0)
    return events("opposition", found.jd_tt, body=body, frame="ecliptic")


def solar_conjunction(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find conjunctions with the Sun; an inner planet nearer than the Sun is at inferior conjunction."""
    (body,) = subject
    found = _from_sun(sky, grid, body, 0.0)
    detail = None
    if body in ("mercury", "venus"):
        nearer = sky.distance_au(body, found.jd_tt) < sky.distance_au("sun", found.jd_tt)
        detail = np.where(nearer, "inferior", "superior")
    return events("solar_conjunction", found.jd_tt, body=body, frame="ecliptic", detail=detail)


def quadrature(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find quadratures: longitude 90 degrees east or west of the Sun's."""
    (body,) = subject
    return _phases(sky, grid, body, "quadrature", {90.0: "east", 270.0: "west"})


def greatest_elongation(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find the greatest apparent angles from the Sun, east or west of it.

    Close behind the Sun's centre deflection makes a spurious maximum of arcseconds: it is left out.
    """
    (body,) = subject
    sampled = norm(grid.direction[body] - grid.direction["sun"]) ** 2
    slope = sampled_rate(sampled, grid.step_days)
    found = crossings(rate(squared_chord(sky, body, "sun"), STEP_DAYS), grid.jd_tt[3:-3], slope)
    jd = found.jd_tt[~found.rising]
    angle = separation(sky, body, "sun")(jd, np.zeros_like(jd))
    jd, angle = jd[angle > SMALLEST_ELONGATION_DEG], angle[angle > SMALLEST_ELONGATION_DEG]
    ahead = longitude_difference(sky, "ecliptic", body, "sun")(jd, np.zeros_like(jd))
    detail = np.where(ahead > 0.0, "east", "west")
    return events("greatest_elongation", jd, body=body, detail=detail, separation_deg=angle)


def moon_phase(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find new Moons, quarters and full Moons by the longitude difference from the Sun."""
    (body,) = subject
    return _phases(sky, grid, body, "moon_phase", MOON_PHASES)


def season_point(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find equinoxes and solstices by the Sun's apparent longitude of date."""
    (body,) = subject
    sampled, direct = grid.longitude_deg("ecliptic", body), longitude(sky, "ecliptic", body)
    parts = []
    for target, detail in SEASON_POINTS.items():
        found = crossings(
            lambda jd, offset, target=target: wrapped(direct(jd, offset) - target, CIRCLE),  # type: ignore[misc]
            grid.jd_tt,
            wrapped(sampled - target, CIRCLE),
            period=CIRCLE,
        )
        parts.append(events("season_point", found.jd_tt, body=body, frame="ecliptic", detail=detail))
    return pl.concat(parts)
