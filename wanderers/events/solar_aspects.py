"""Angles to the Sun in longitude: conjunctions, oppositions, quadratures, Moon phases, season points."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import INNER, OUTER, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import SUN
from wanderers.ephemeris.vectors import wrapped_deg
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import Roots, find_roots

ECLIPTIC = Frame.ECLIPTIC
SOLAR_CONJUNCTION_DETAILS = ("", "superior", "inferior")
QUADRATURE_DETAILS = ("east", "west")
PHASE_DETAILS = ("new", "first_quarter", "full", "last_quarter")
SEASON_DETAILS = ("equinox_march", "solstice_june", "equinox_september", "solstice_december")


def find_solar_conjunctions(scene: Scene) -> list[Batch]:
    """Find where a planet has the Sun's longitude; an inner planet nearer than the Sun is inferior."""
    planets = scene.planets()
    roots = _at_angles(scene, planets, [0.0])
    body = planets[roots.function]
    nearer = scene.sky.earth_distance_au(body, roots.jd)[0]
    nearer = nearer < scene.sky.earth_distance_au(np.full(body.size, SUN), roots.jd)[0]
    inner = np.isin(body, [planet.order for planet in INNER])
    detail = np.where(inner, np.where(nearer, 2, 1), 0)
    return [
        batch(
            Kind.SOLAR_CONJUNCTION,
            ECLIPTIC,
            roots.jd,
            body,
            detail=detail,
            details=SOLAR_CONJUNCTION_DETAILS,
        )
    ]


def find_oppositions(scene: Scene) -> list[Batch]:
    """Find where an outer planet stands 180 degrees from the Sun in longitude."""
    planets = scene.held(scene.choice.among(OUTER))
    roots = _at_angles(scene, planets, [180.0])
    return [batch(Kind.OPPOSITION, ECLIPTIC, roots.jd, planets[roots.function])]


def find_quadratures(scene: Scene) -> list[Batch]:
    """Find where an outer planet stands 90 degrees east or west of the Sun in longitude."""
    planets = scene.held(scene.choice.among(OUTER))
    roots = _at_angles(scene, planets, [90.0, -90.0])
    body, west = planets[roots.function // 2], roots.function % 2
    return [batch(Kind.QUADRATURE, ECLIPTIC, roots.jd, body, detail=west, details=QUADRATURE_DETAILS)]


def find_moon_phases(scene: Scene) -> list[Batch]:
    """Find where the Moon stands 0, 90, 180 and 270 degrees east of the Sun in longitude."""
    moon = scene.held(scene.choice.among([Body.MOON]))
    roots = _at_angles(scene, moon, [0.0, 90.0, 180.0, -90.0])
    body, phase = moon[roots.function // 4], roots.function % 4
    return [batch(Kind.MOON_PHASE, ECLIPTIC, roots.jd, body, detail=phase, details=PHASE_DETAILS)]


def find_season_points(scene: Scene) -> list[Batch]:
    """Find where the Sun's longitude of date is 0, 90, 180 and 270 degrees."""
    if not scene.choice.among([Body.SUN]).size:
        return []
    angles = np.array([0.0, 90.0, 180.0, 270.0])
    longitude = scene.samples.longitude_deg(SUN, ECLIPTIC)

    def from_point(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        at = scene.sky.longitude_deg(np.full(jd.size, SUN), jd, ECLIPTIC, order=1)
        return wrapped_deg(at[0] - angles[row]), at[1]

    values = wrapped_deg(longitude[0] - angles[:, None])
    slopes = np.broadcast_to(longitude[1], values.shape)
    roots = find_roots(from_point, scene.samples.jd, values, slopes, period=360.0)
    sun = np.full(roots.jd.size, SUN)
    return [batch(Kind.SEASON_POINT, ECLIPTIC, roots.jd, sun, detail=roots.function, details=SEASON_DETAILS)]


def _at_angles(scene: Scene, targets: Ints, angles_deg: Sequence[float]) -> Roots:
    """Find where targets stand at angles east of the Sun; function number = target row * angles + angle."""
    angles = np.array(angles_deg)
    if targets.size == 0:
        return Roots(targets, np.empty(0), np.empty(0, dtype=np.bool_))
    sun = scene.samples.longitude_deg(SUN, ECLIPTIC)
    east = scene.samples.longitudes_deg(targets.tolist(), ECLIPTIC) - sun
    values = wrapped_deg(east[:, None, 0] - angles[None, :, None])
    slopes = np.broadcast_to(east[:, None, 1], values.shape)

    def from_angle(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        sun_there = np.full(jd.size, SUN)
        east_of, rate = scene.sky.lead_deg(targets[row // angles.size], sun_there, jd, ECLIPTIC)
        return wrapped_deg(east_of - angles[row % angles.size]), rate

    shape = (-1, scene.samples.jd.size)
    return find_roots(
        from_angle, scene.samples.jd, values.reshape(shape), slopes.reshape(shape), period=360.0
    )
