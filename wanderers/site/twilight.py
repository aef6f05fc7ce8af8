"""When bodies cross an altitude or the meridian: rise, set, twilight, culmination, at many evenings at once.

Altitudes are of the centre, without refraction; each level allows for it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import EQUATORIAL_RADIUS_KM, Body
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.events.search import Roots, find_roots
from wanderers.site.earth import Vantage, vantage
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.refraction import airless_deg
from wanderers.site.topocentric import Sight, horizontal, see_body, see_each

SUN_RISE_DEG: Final = -50.0 / 60.0
"""34 arcminutes of refraction and 16 of the Sun's radius: USNO, definitions of rise, set and twilight."""
RISE_DEG: Final = -34.0 / 60.0
"""34 arcminutes of refraction; the Moon's own radius comes on top. USNO, as above; Meeus, chapter 15."""
CIVIL_DEG: Final = -6.0
NAUTICAL_DEG: Final = -12.0
ASTRONOMICAL_DEG: Final = -18.0
"""Altitude of the Sun's centre: USNO, as above."""

MOON_RADIUS_AU: Final = EQUATORIAL_RADIUS_KM[Body.MOON] / constants.AU_KM
STEPS_A_DAY: Final = 12
"""Altitude turns twice a day, at the two culminations, so two hours never hold two turns."""
STEPS_A_DAY_OVER_HILLS: Final = 144
"""Every ten minutes where the horizon has a profile: what shows for less between two hills is left out."""


@dataclass(frozen=True, slots=True)
class Level:
    """An altitude that a body may cross.

    Attributes:
        body: its number.
        airless_altitude_deg: of the centre, without refraction.
        by_limb: whether the body's own radius is taken off that: its upper limb counts.
        horizon: hills that raise the level where they stand higher (given as seen).
    """

    body: int
    airless_altitude_deg: float
    by_limb: bool = False
    horizon: HorizonProfile = field(default_factory=HorizonProfile)


def rise_level(body: int) -> Level:
    """Return the level at which a body or star rises and sets by the almanacs' convention."""
    if body == SUN:
        return Level(body, SUN_RISE_DEG)
    return Level(body, RISE_DEG, by_limb=body == Body.MOON.order)


def steps_for(levels: Sequence[Level]) -> int:
    """Return into how many steps to cut an evening so that no crossing is lost."""
    return STEPS_A_DAY if all(level.horizon.is_level for level in levels) else STEPS_A_DAY_OVER_HILLS


def find_crossings(sky: Sky, site: Site, jd: Floats, levels: Sequence[Level]) -> Roots:
    """Find when bodies pass through levels.

    Args:
        sky: the tracks.
        site: where.
        jd: TT, a rising grid; see :func:`steps_for`.
        levels: what is crossed.

    Returns:
        the crossings between the first and the last instant; ``function`` is the place in ``levels``,
        ``rising`` whether the body goes up through it.
    """
    at = vantage(sky, site, jd)
    sights = {body: see_body(sky, at, body) for body in {level.body for level in levels}}
    samples = [
        _heights(levels, np.full(jd.size, k), at, sights[level.body]) for k, level in enumerate(levels)
    ]
    values, slopes = (np.stack(parts) for parts in zip(*samples, strict=True))
    hilly = np.array([not level.horizon.is_level for level in levels])
    if hilly.any():  # the slope known does not follow the hills
        slopes[hilly] = np.gradient(values[hilly], jd, axis=1)
    bodies = np.array([level.body for level in levels], dtype=np.int64)

    def evaluate(number: Ints, instants: Floats) -> tuple[Floats, Floats]:
        here = vantage(sky, site, instants)
        return _heights(levels, number, here, see_each(sky, here, bodies[number]))

    return find_roots(evaluate, jd, values, slopes)


def find_culminations(sky: Sky, site: Site, jd: Floats, bodies: Sequence[int]) -> Roots:
    """Find when bodies pass the meridian above the pole: topocentric hour angle zero.

    Args:
        sky: the tracks.
        site: where.
        jd: TT, a rising grid with steps of a few hours.
        bodies: their numbers.

    Returns:
        the culminations; ``function`` is the place in ``bodies``.
    """
    at = vantage(sky, site, jd)
    samples = [_hour_angle(at, see_body(sky, at, body)) for body in bodies]
    targets = np.array(bodies, dtype=np.int64)

    def evaluate(number: Ints, instants: Floats) -> tuple[Floats, Floats]:
        here = vantage(sky, site, instants)
        return _hour_angle(here, see_each(sky, here, targets[number]))

    values, slopes = (np.stack(parts) for parts in zip(*samples, strict=True))
    return find_roots(evaluate, jd, values, slopes, period=360.0)


def _heights(levels: Sequence[Level], number: Ints, at: Vantage, sight: Sight) -> tuple[Floats, Floats]:
    """Return sine of altitude less sine of the level, and its rate per day, shape (n,) each.

    The rate leaves out how the level itself changes: it steers and is no result.

    Args:
        levels: all levels.
        number: which of them is meant at each instant, shape (n,).
        at: the site.
        sight: its body at each instant.
    """
    up, up_rate = _component(at, sight, 2)
    altitude_deg = np.array([level.airless_altitude_deg for level in levels])[number]
    for index, level in enumerate(levels):
        if not level.horizon.is_level:
            own = number == index
            hills = _hills_deg(level.horizon, at.chosen(own), sight.direction[0][:, own])
            altitude_deg[own] = np.maximum(altitude_deg[own], hills)
    by_limb = np.array([level.by_limb for level in levels])[number]
    radius_deg = np.degrees(MOON_RADIUS_AU / sight.distance_au)
    altitude_deg = altitude_deg - np.where(by_limb, radius_deg, 0.0)
    return up - np.sin(np.radians(altitude_deg)), up_rate


def _hills_deg(horizon: HorizonProfile, at: Vantage, direction: Floats) -> Floats:
    """Return how high the hills stand in directions, without refraction, shape (n,)."""
    hills = horizon.altitude_deg(horizontal(at, direction).azimuth_deg)
    return airless_deg(hills, at.site.elevation_m)


def _hour_angle(at: Vantage, sight: Sight) -> tuple[Floats, Floats]:
    """Return hour angle in (-180, 180] and its rate in degrees a day, shape (n,) each."""
    latitude = np.radians(at.site.latitude_deg)
    (north, north_rate), (east, east_rate), (up, up_rate) = (_component(at, sight, row) for row in range(3))
    x, x_rate = (np.cos(latitude) * u - np.sin(latitude) * n for u, n in ((up, north), (up_rate, north_rate)))
    y, y_rate = -east, -east_rate
    rate = (x * y_rate - y * x_rate) / (x**2 + y**2)
    return np.degrees(np.arctan2(y, x)), np.degrees(rate)


def _component(at: Vantage, sight: Sight, row: int) -> tuple[Floats, Floats]:
    """Return the part of a direction toward north, east or up (row 0, 1, 2), and its rate."""
    axis, turning = at.to_horizon[:, row]
    value = np.einsum("jn,jn->n", axis, sight.direction[0])
    rate = np.einsum("jn,jn->n", turning, sight.direction[0]) + np.einsum(
        "jn,jn->n", axis, sight.direction[1]
    )
    return value, rate
