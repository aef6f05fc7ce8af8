"""What a body looks like from the Earth's centre: place, distance, brightness, size, constellation."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import constellations, vectors
from wanderers.ephemeris.bodies import BODIES, EQUATORIAL_RADIUS_KM, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.magnitudes import Circumstances, apparent_magnitude, pole_latitudes_deg
from wanderers.ephemeris.sky import SUN, Sky, bent, rotation_from
from wanderers.ephemeris.tracks import EARTH_DISTANCE, EARTH_POSITION, OBLIQUITY, POSITION, ROTATION

TILTED: Final = (Body.SATURN, Body.URANUS)
RADII_KM: Final = np.array([EQUATORIAL_RADIUS_KM[body] for body in BODIES])


@dataclass(frozen=True, slots=True)
class Appearance:
    """Geocentric apparent circumstances of bodies, arrays of shape (n,); see the contract's columns.

    ``elongation_deg`` is NaN for the Sun, ``magnitude`` NaN outside its formula's range, ``constellation``
    an index into :data:`wanderers.ephemeris.constellations.ABBREVIATIONS`; ``direction`` is a unit vector in
    GCRS axes, shape (3, n).
    """

    longitude_deg: Floats
    latitude_deg: Floats
    ra_deg: Floats
    dec_deg: Floats
    elongation_deg: Floats
    distance_au: Floats
    magnitude: Floats
    diameter_arcsec: Floats
    illuminated_fraction: Floats
    constellation: Ints
    direction: Floats


@dataclass(frozen=True, slots=True)
class Triangle:
    """Sun, body and Earth as light shows them: astrometric vectors in au, shape (3, n) each."""

    earth_to_body: Floats
    sun_to_body: Floats

    @property
    def phase_angle_deg(self) -> Floats:
        """Angle at the body between Sun and Earth, shape (n,); zero for the Sun itself."""
        from_earth, from_sun = self.earth_to_body, self.sun_to_body
        across = np.cross(from_earth, from_sun, axis=0)
        along = np.einsum("in,in->n", from_earth, from_sun)
        return np.asarray(np.degrees(np.arctan2(np.sqrt(np.einsum("in,in->n", across, across)), along)))


def appearance(sky: Sky, body: Ints, jd: Floats) -> Appearance:
    """Describe one body an instant.

    Args:
        sky: the tracks.
        body: places in the bodies' written order, shape (n,).
        jd: TT, shape (n,).
    """
    located = sky.tracks.locate(jd, 1)
    track, sun = (
        sky.tracks.evaluate_each(rows, jd, slice(POSITION.start, EARTH_DISTANCE.stop), 0, located)
        for rows in (body, np.full(jd.size, SUN))
    )
    apparent = bent(track[:, POSITION], sun[:, POSITION], body == SUN)
    rotation = rotation_from(sky.tracks.observer.evaluate(0, jd, ROTATION, 0, located), Frame.ECLIPTIC)
    ecliptic = vectors.rotate(rotation, apparent)
    obliquity = sky.tracks.observer.evaluate(0, jd, OBLIQUITY, 0, located)[0, 0]
    equator = vectors.turned_about_x(ecliptic, obliquity)
    distance = track[0, EARTH_DISTANCE][0]
    elongation = vectors.separation_deg(apparent[0], vectors.unit(sun[:, POSITION])[0])
    velocity = sky.tracks.observer.evaluate(0, jd, EARTH_POSITION, 1, located)[1]
    shape = _triangle(track[0, POSITION], sun[0, POSITION], velocity)
    phase_angle = shape.phase_angle_deg
    return Appearance(
        vectors.longitude_deg(ecliptic)[0],
        vectors.latitude_deg(ecliptic)[0],
        vectors.longitude_deg(equator)[0],
        vectors.latitude_deg(equator)[0],
        np.where(body == SUN, np.nan, elongation),
        distance,
        _magnitudes(body, jd, shape, phase_angle),
        diameter_arcsec(body, distance),
        lit_part(phase_angle),
        np.asarray(constellations.constellation_at(apparent[0]), dtype=np.int64),
        apparent[0],
    )


def lit_part(phase_angle_deg: Floats) -> Floats:
    """Return the illuminated part of a disc at a phase angle, shape (n,): cos^2(i / 2)."""
    return np.asarray(np.cos(np.radians(phase_angle_deg / 2.0)) ** 2)


def triangle(sky: Sky, body: Ints, jd: Floats) -> Triangle:
    """Return the triangle behind phase and brightness, the observer's aberration taken out again."""
    located = sky.tracks.locate(jd, 1)
    velocity = sky.tracks.observer.evaluate(0, jd, EARTH_POSITION, 1, located)[1]
    seen, sun = (
        sky.tracks.evaluate_each(rows, jd, POSITION, 0, located)[0] for rows in (body, np.full(jd.size, SUN))
    )
    return _triangle(seen, sun, velocity)


def _triangle(seen: Floats, sun: Floats, velocity: Floats) -> Triangle:
    """Take aberration out of track positions; to first order, which leaves a billionth of a radian."""
    seen, sun = _without_aberration(seen, velocity), _without_aberration(sun, velocity)
    return Triangle(seen, seen - sun)


def diameter_arcsec(body: Ints, distance_au: Floats) -> Floats:
    """Return apparent equatorial diameters, shape (n,)."""
    radius_au = RADII_KM[body] / constants.AU_KM
    return np.asarray(np.degrees(2.0 * np.arcsin(radius_au / distance_au)) * constants.ARCSEC_PER_DEG)


def magnitude(sky: Sky, body: Ints, jd: Floats) -> Floats:
    """Return apparent V magnitudes, one body an instant, shape (n,); NaN outside a formula's range."""
    shape = triangle(sky, body, jd)
    return _magnitudes(body, jd, shape, shape.phase_angle_deg)


def _without_aberration(position: Floats, velocity: Floats) -> Floats:
    distance = np.sqrt(np.einsum("in,in->n", position, position))
    beta = velocity / constants.SPEED_OF_LIGHT_AU_PER_DAY
    direction = position / distance
    direction = direction - beta + np.einsum("in,in->n", direction, beta) * direction
    return np.asarray(direction * distance)


def _magnitudes(body: Ints, jd: Floats, shape: Triangle, phase_angle: Floats) -> Floats:
    """Apply each planet's own formula to its own instants."""
    out = np.empty(jd.size)
    sun_distance = np.sqrt(np.einsum("in,in->n", shape.sun_to_body, shape.sun_to_body))
    earth_distance = np.sqrt(np.einsum("in,in->n", shape.earth_to_body, shape.earth_to_body))
    for number in np.unique(body).tolist():
        own = body == number
        tilts: tuple[Floats | None, Floats | None] = (None, None)
        if BODIES[number] in TILTED:
            tilts = pole_latitudes_deg(
                BODIES[number], shape.sun_to_body[:, own], shape.earth_to_body[:, own], jd[own]
            )
        circumstances = Circumstances(
            sun_distance[own], earth_distance[own], phase_angle[own], jd[own], *tilts
        )
        out[own] = apparent_magnitude(BODIES[number], circumstances)
    return out
