"""Where a body stands in the sky of a site: parallax, aberration, altitude and azimuth.

Directions are apparent and topocentric: light-time to the site, annual and diurnal aberration and the
Sun's deflection are in them; refraction is added last (:mod:`wanderers.site.refraction`).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.deflection import deflection
from wanderers.ephemeris.places import aberrated, length
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.ephemeris.tracks import POSITION
from wanderers.site.earth import Vantage, sampled

C: Final = constants.SPEED_OF_LIGHT_AU_PER_DAY


@dataclass(frozen=True, slots=True)
class Sight:
    """Something seen from a site at n instants.

    Attributes:
        direction: apparent unit vectors in GCRS axes and their rates per day, shape (2, 3, n). The rate
            steers root finders: it leaves out how aberration changes, a ten-thousandth of it.
        distance_au: from the site, as light shows it, shape (n,); infinite for a star.
    """

    direction: Floats
    distance_au: Floats

    def chosen(self, keep: Bools | Ints) -> Sight:
        """Return some of the instants."""
        return Sight(self.direction[..., keep], self.distance_au[keep])


@dataclass(frozen=True, slots=True)
class Horizontal:
    """Directions on the horizon of a site without refraction, arrays of shape (n,).

    Attributes:
        airless_altitude_deg: up from the horizontal plane.
        azimuth_deg: from north through east, [0, 360).
        hour_angle_deg: west of the meridian, (-180, 180].
        declination_deg: topocentric, from the true equator of date.
    """

    airless_altitude_deg: Floats
    azimuth_deg: Floats
    hour_angle_deg: Floats
    declination_deg: Floats


def see_body(sky: Sky, at: Vantage, body: int) -> Sight:
    """See one target, by number, at all instants."""
    if body >= FIRST_STAR:
        return see_each(sky, at, np.full(at.jd.size, body))
    position = _track(sky, BODIES[body], at.jd)
    sun = position if body == SUN else _track(sky, Body.SUN, at.jd)
    return _seen(position, sun[0], at, np.full(at.jd.size, body == SUN))


def see_each(sky: Sky, at: Vantage, target: Ints) -> Sight:
    """See one target, body or star of the sky's catalogue, an instant: as root finders ask.

    Args:
        sky: tracks and stars.
        at: the site at n instants.
        target: target numbers as in :mod:`wanderers.ephemeris.sky`, shape (n,).
    """
    is_star = target >= FIRST_STAR
    if not is_star.any():
        return _see_bodies(sky, at, target)
    geocentric = sky.apparent(target, at.jd, 1)
    direction = np.stack([aberrated(geocentric[0], at.position[1]), geocentric[1]])
    sight = Sight(direction, np.full(at.jd.size, np.inf))
    bodies = ~is_star
    if bodies.any():
        some = _see_bodies(sky, at.chosen(bodies), target[bodies])
        sight.direction[..., bodies] = some.direction
        sight.distance_au[bodies] = some.distance_au
    return sight


def see_fixed(at: Vantage, direction: Floats) -> Sight:
    """See what is too far for parallax and hardly moves, at apparent geocentric directions, shape (3, n)."""
    moved = aberrated(direction, at.position[1])
    return Sight(np.stack([moved, np.zeros_like(moved)]), np.full(at.jd.size, np.inf))


def _track(sky: Sky, body: Body, jd: Floats) -> Floats:
    """Return a body's track and its rate, shape (2, 3, n)."""
    if body is not Body.MOON:
        return sampled(sky.tracks.planets, sky.tracks.bodies.index(body), jd, POSITION)
    if sky.tracks.moon is None:
        raise LookupError("the kernel holds no Moon")
    return sampled(sky.tracks.moon, 0, jd, POSITION)


def _see_bodies(sky: Sky, at: Vantage, body: Ints) -> Sight:
    position = sky.tracks.evaluate_each(body, at.jd, POSITION, 1)
    sun = sky.tracks.evaluate_each(np.full(at.jd.size, SUN), at.jd, POSITION)
    return _seen(position, sun[0], at, body == SUN)


def _seen(position: Floats, sun: Floats, at: Vantage, is_sun: np.ndarray) -> Sight:
    """Move geocentric track positions to the site.

    Aberration is taken out exactly (the inverse of a Lorentz boost is the boost back), the site's place
    subtracted, the light-time from the site rather than from the Earth's centre applied (up to 21 ms, 0.4
    arcseconds of the Moon), and aberration put in again with the site's own velocity.

    Args:
        position: aberrated direction times distance, au, and its rate, shape (2, 3, n).
        sun: the Sun's, shape (3, n).
        at: the site.
        is_sun: where the body is the Sun itself and nothing bends, shape (n,).
    """
    distance = length(position[0])
    straight = aberrated(position[0] / distance, -at.earth[1]) * distance
    from_site = straight - at.position[0]
    later_days = (length(from_site) - distance) / C
    from_site -= (at.earth[1] + position[1]) * later_days
    near = length(from_site)
    direction = aberrated(from_site / near, at.velocity)
    bend = deflection(direction * near, sun)
    direction += np.where(is_sun, 0.0, bend)
    motion = position[1] - at.position[1]
    rate = (motion - direction * np.einsum("in,in->n", direction, motion)) / near
    return Sight(np.stack([direction, rate]), near)


def horizontal(at: Vantage, direction: Floats) -> Horizontal:
    """Return altitudes and azimuths of apparent unit directions in GCRS axes, shape (3, n)."""
    north, east, up = np.einsum("ijn,jn->in", at.to_horizon[0], direction)
    latitude = np.radians(at.site.latitude_deg)
    toward_equator = np.cos(latitude) * up - np.sin(latitude) * north
    along_axis = np.sin(latitude) * up + np.cos(latitude) * north
    return Horizontal(
        np.degrees(np.arctan2(up, np.hypot(north, east))),
        np.degrees(np.arctan2(east, north)) % 360.0,
        np.degrees(np.arctan2(-east, toward_equator)),
        np.degrees(np.arctan2(along_axis, np.hypot(toward_equator, east))),
    )


def parallactic_angle_deg(place: Horizontal, latitude_deg: float) -> Floats:
    """Return the angle at the body from the celestial pole to the zenith, eastward, (-180, 180], shape (n,).

    Negative before the meridian in the north. Without refraction.
    Source: Meeus, Astronomical Algorithms, 2nd ed. (1998), equation 14.1.
    """
    latitude, declination = np.radians(latitude_deg), np.radians(place.declination_deg)
    hour_angle = np.radians(place.hour_angle_deg)
    across = np.cos(latitude) * np.sin(hour_angle)
    along = np.sin(latitude) * np.cos(declination) - np.cos(latitude) * np.sin(declination) * np.cos(
        hour_angle
    )
    return np.asarray(np.degrees(np.arctan2(across, along)))
