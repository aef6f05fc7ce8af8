"""Kinds where discs meet as seen from the geocentre: transits of the Sun, and occultations.

The apparent radius of a disc is the arcsine of its radius over its light-time distance.
"""

from __future__ import annotations

import numpy as np
import polars as pl
from numpy.typing import NDArray

from tests.oracle.angles import separation
from tests.oracle.kinds_pair import least_separations
from tests.oracle.places import AU_KM, Sky
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import Direct, refine

Floats = NDArray[np.float64]

REACH_DEG = 1.0  # discs never touch at a larger separation of centres
LONGEST_HALF_DAYS = 1.0  # from the first contact to the least separation, at most


def transit(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find transits of an inner planet: the instant of least separation, and the contacts."""
    body, sun = subject
    jd, angle = least_separations(sky, grid, (body, sun), REACH_DEG)
    before_sun = sky.distance_au(body, jd) < sky.distance_au(sun, jd)
    return _meetings(sky, (body, sun), jd[before_sun], angle[before_sun], "transit", body)


def occultation(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find overlapping discs of two bodies: the instant of least separation, and the contacts."""
    jd, angle = least_separations(sky, grid, subject, REACH_DEG)
    return _meetings(sky, subject, jd, angle, "occultation", "moon" if "moon" in subject else "planet")


def _meetings(
    sky: Sky, subject: tuple[str, ...], jd: Floats, angle: Floats, kind: str, detail: str
) -> pl.DataFrame:
    """Keep the least separations at which the discs overlap, and add the contacts."""
    body, other = subject
    outer = _radius_sum_deg(sky, subject, 1.0)(jd, np.zeros_like(jd))
    jd, angle = jd[angle < outer], angle[angle < outer]
    first, last = _contacts(sky, subject, jd, 1.0)
    second, third = _contacts(sky, subject, jd, -1.0)
    return events(
        kind,
        jd,
        body=body,
        other=None if other == "sun" else other,
        detail=detail,
        separation_deg=angle,
        contact_1_jd_tt=first,
        contact_2_jd_tt=second,
        contact_3_jd_tt=third,
        contact_4_jd_tt=last,
    )


def _contacts(sky: Sky, subject: tuple[str, ...], jd: Floats, sign: float) -> tuple[Floats, Floats]:
    """Give the instants before and after least separation when the discs touch.

    Args:
        sky: an open kernel.
        subject: the two bodies.
        jd: shape (k,), of least separation.
        sign: +1 for touching from outside, -1 from inside; nan where the discs do not get so close.
    """
    angle, radii = separation(sky, *subject), _radius_sum_deg(sky, subject, sign)

    def gap(at: Floats, offset: Floats) -> Floats:
        return angle(at, offset) - radii(at, offset)

    before, after = np.full(jd.shape, np.nan), np.full(jd.shape, np.nan)
    reached = gap(jd, np.zeros_like(jd)) < 0.0
    inside = jd[reached]
    reach, zero = np.full(inside.shape, LONGEST_HALF_DAYS), np.zeros(inside.shape)
    before[reached] = refine(gap, inside, -reach, zero)
    after[reached] = refine(gap, inside, zero, reach)
    return before, after


def _radius_sum_deg(sky: Sky, subject: tuple[str, ...], sign: float) -> Direct:
    """Give the sum (or the size of the difference) of two apparent radii as a function of time."""

    def total(jd: Floats, offset: Floats) -> Floats:
        distances = (sky.light_time_distance_au(body, jd, offset) for body in subject)
        radii = (sky.radii_km[body] / AU_KM for body in subject)
        first, second = (
            np.arcsin(radius / distance) for radius, distance in zip(radii, distances, strict=True)
        )
        return np.degrees(np.abs(first + sign * second))

    return total
