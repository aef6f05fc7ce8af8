"""Which round of its cycle an event belongs to: a whole number that no better kernel will change.

An event's name must stay the same in every run, span and version, so it is not made from its time. Mean
longitudes count revolutions: at a conjunction of two bodies the difference of their *mean* longitudes is
within half a turn of a whole number of turns, which is the number of the encounter; synodic, anomalistic
and draconic rounds are counted likewise.

Mean elements of date: Meeus, Astronomical Algorithms, 2nd ed. (1998), Table 31.A and chapter 47; Pluto:
Standish, Keplerian elements for approximate positions of the major planets. From memory: they only
count turns, so a degree would do.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import INNER, Body

Element = tuple[float, float]
"""Degrees at J2000 and degrees a Julian century."""

MEAN_LONGITUDE: Final[dict[Body, Element]] = {
    Body.SUN: (280.46645, 36_000.76983),
    Body.MOON: (218.31645, 481_267.88123),
    Body.MERCURY: (252.25091, 149_474.07225),
    Body.VENUS: (181.97980, 58_519.21303),
    Body.MARS: (355.43300, 19_141.69645),
    Body.JUPITER: (34.35152, 3_036.30277),
    Body.SATURN: (50.07744, 1_223.51107),
    Body.URANUS: (314.05501, 429.86406),
    Body.NEPTUNE: (304.34867, 219.88331),
    Body.PLUTO: (238.92881, 146.60480),
}
"""Geocentric for Sun and Moon, heliocentric for the planets."""

PERIHELION: Final[dict[Body, Element]] = {
    Body.SUN: (282.93735, 1.71954),
    Body.MOON: (83.35324, 4_069.01371),
    Body.MERCURY: (77.45612, 1.55648),
    Body.VENUS: (131.56370, 1.40223),
    Body.MARS: (336.06023, 1.84104),
    Body.JUPITER: (14.33121, 1.61264),
    Body.SATURN: (93.05724, 1.96376),
    Body.URANUS: (173.00529, 1.48638),
    Body.NEPTUNE: (48.12028, 1.42630),
    Body.PLUTO: (224.06676, 1.39700),
}
"""Longitude of perihelion; of perigee for Sun and Moon."""

ASCENDING_NODE: Final[dict[Body, Element]] = {
    Body.MOON: (125.04456, -1_934.13618),
    Body.MERCURY: (48.33089, 1.18619),
    Body.VENUS: (76.67992, 0.90112),
    Body.MARS: (49.55809, 0.77210),
    Body.JUPITER: (100.46441, 1.02098),
    Body.SATURN: (113.66550, 0.87709),
    Body.URANUS: (74.00596, 0.52113),
    Body.NEPTUNE: (131.78406, 1.10220),
    Body.PLUTO: (110.30347, 1.39700),
}

BODIES: Final = tuple(Body)
PRECESSION: Final[Element] = (0.0, 1.39697)
"""General precession in longitude, by which a star's longitude grows."""

SEAM_DEG: Final = 70.0
"""Longitude at which a round among the constellations begins: mid Taurus, far from every boundary."""


def centuries(jd: Floats) -> Floats:
    """Return Julian centuries of TT from J2000, shape (n,)."""
    return np.asarray((jd - constants.J2000_JD) / constants.DAYS_PER_CENTURY)


def synodic_phase(body: Ints, jd: Floats) -> Floats:
    """Return the turns between a planet and the Earth: whole at opposition or inferior conjunction.

    Counted so that it grows with time: an inner planet laps the Earth, the Earth laps an outer planet.
    """
    ahead = (_mean(MEAN_LONGITUDE, body, jd) - _sun(jd)) / 360.0 - 0.5
    return np.where(np.isin(body, _INNER), ahead, -ahead)


def lunation_phase(jd: Floats) -> Floats:
    """Return the turns the Moon gained on the Sun: whole at new moon."""
    moon = np.full(jd.size, Body.MOON.order)
    return (_mean(MEAN_LONGITUDE, moon, jd) - _sun(jd)) / 360.0


def solar_year(jd: Floats) -> Floats:
    """Return the Sun's mean longitude of date in turns: whole near the March equinox."""
    return _sun(jd) / 360.0


def anomalistic_phase(body: Ints, jd: Floats) -> Floats:
    """Return turns of mean anomaly: whole at perihelion (perigee of Sun and Moon)."""
    return (_mean(MEAN_LONGITUDE, body, jd) - _mean(PERIHELION, body, jd)) / 360.0


def anomalistic_days(body: Body) -> float:
    """Return the length of an orbit from perihelion to perihelion, days."""
    motion = MEAN_LONGITUDE[body][1] - PERIHELION[body][1]
    return 360.0 * constants.DAYS_PER_CENTURY / motion


def draconic_phase(body: Ints, jd: Floats) -> Floats:
    """Return turns from the ascending node: whole near it."""
    return (_mean(MEAN_LONGITUDE, body, jd) - _mean(ASCENDING_NODE, body, jd)) / 360.0


def encounter_phase(first: Ints, second: Ints, jd: Floats, star_longitude_deg: Floats) -> Floats:
    """Return the turns by which one body's mean geocentric longitude leads another's.

    Args:
        first: bodies, shape (n,).
        second: bodies, or beyond their numbers stars, shape (n,).
        jd: TT, shape (n,).
        star_longitude_deg: J2000 longitude where ``second`` is a star, else ignored, shape (n,).

    Mercury and Venus both keep to the Sun and never lap each other: their meetings are counted by
    Mercury's synodic round instead.
    """
    is_star = second >= len(BODIES)
    stars = star_longitude_deg + PRECESSION[1] * centuries(jd)
    led = np.where(is_star, stars, _geocentric(np.where(is_star, 0, second), jd))
    phase = (_geocentric(first, jd) - led) / 360.0
    both_inner = np.isin(first, _INNER) & np.isin(second, _INNER)
    return np.where(both_inner, synodic_phase(np.full(jd.size, Body.MERCURY.order), jd), phase)


def constellation_round(body: Ints, jd: Floats, longitude_deg: Floats) -> Ints:
    """Return how often a body at a longitude of date has gone round the constellations."""
    fixed = (longitude_deg - PRECESSION[1] * centuries(jd) - SEAM_DEG) % 360.0
    mean = _geocentric(body, jd) - PRECESSION[1] * centuries(jd) - SEAM_DEG
    return np.round((mean - fixed) / 360.0).astype(np.int64)


_INNER = [body.order for body in INNER]


def _mean(elements: dict[Body, Element], body: Ints, jd: Floats) -> Floats:
    """Return a mean element, one body an instant, degrees without reduction to one turn."""
    table = np.array([elements.get(b, (0.0, 0.0)) for b in BODIES])
    return np.asarray(table[body, 0] + table[body, 1] * centuries(jd))


def _sun(jd: Floats) -> Floats:
    return _mean(MEAN_LONGITUDE, np.zeros(jd.size, dtype=np.int64), jd)


def _geocentric(body: Ints, jd: Floats) -> Floats:
    """Return the mean geocentric longitude: an inner planet's is the Sun's."""
    return np.where(np.isin(body, _INNER), _sun(jd), _mean(MEAN_LONGITUDE, body, jd))
