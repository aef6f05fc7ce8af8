"""Apparent directions of anything in the list of targets, as stacks of derivatives.

Targets are numbered: 0 to 9 the bodies in their written order, from 10 on the stars of a catalogue.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import frames, places, stars, vectors
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.chebyshev import Located
from wanderers.ephemeris.deflection import deflection, deflection_rate
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.ephemeris.tracks import (
    EARTH_DISTANCE,
    EARTH_POSITION,
    OBLIQUITY,
    POSITION,
    ROTATION,
    Tracks,
)

FIRST_STAR: Final = len(BODIES)
SUN: Final = Body.SUN.order
STAR_TANGENT_DAYS: Final = 1e-2


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What directions of several targets at the same instants share.

    Attributes:
        located: the instants prepared for evaluating tracks.
        sun: the Sun's position stack, au, order at most 1.
    """

    located: Located
    sun: Floats

    def chosen(self, keep: Bools) -> Surroundings:
        """Return the instants where ``keep`` is true."""
        return Surroundings(self.located.chosen(keep), self.sun[..., keep])


@dataclass(frozen=True, slots=True)
class Sky:
    """Tracks, and the stars among which they run."""

    tracks: Tracks
    catalogue: StarCatalogue | None = None

    def apparent(self, target: Ints, jd: Floats, order: int = 0) -> Floats:
        """Return apparent geocentric directions, one target an instant.

        Args:
            target: target numbers, shape (n,).
            jd: TT, shape (n,).
            order: highest derivative, 0 to 2. The second leaves out how deflection (and, for a star,
                aberration) is accelerated: it steers root finders and is no result.

        Returns:
            unit vectors in GCRS axes, shape (order + 1, 3, n).
        """
        return self._apparent(target, jd, order, self._surroundings(jd, order), steering=False)

    def pair(
        self, first: Ints, second: Ints, jd: Floats, order: int = 0, *, steering: bool = False
    ) -> tuple[Floats, Floats]:
        """Return apparent directions of two targets an instant, as :meth:`apparent` does.

        Args:
            first: target numbers, shape (n,).
            second: likewise.
            jd: TT, shape (n,).
            order: highest derivative.
            steering: leave deflection out of the rates too: quicker, and good enough to steer a search for an
                instant that the values decide.
        """
        around = self._surroundings(jd, order)
        return (
            self._apparent(first, jd, order, around, steering=steering),
            self._apparent(second, jd, order, around, steering=steering),
        )

    def lead_deg(self, first: Ints, second: Ints, jd: Floats, frame: Frame) -> tuple[Floats, Floats]:
        """Return by how much one target's longitude leads another's, in (-180, 180], and a steering rate.

        Args:
            first: target numbers, shape (n,).
            second: likewise.
            jd: TT, shape (n,).
            frame: where longitudes are counted.
        """
        around = self._surroundings(jd, 1)
        rotation = self._rotation(frame, jd, 1, around.located)
        one, two = (
            vectors.longitude_in(rotation, self._apparent(target, jd, 1, around, steering=True))
            for target in (first, second)
        )
        return vectors.wrapped_deg(one[0] - two[0]), one[1] - two[1]

    def rotation(self, frame: Frame, jd: Floats, order: int = 0) -> Floats:
        """Return the rotation from GCRS axes to a frame: (order + 1, 3, 3, n), or (3, 3) if fixed."""
        return self._rotation(frame, jd, order, None)

    def longitude_deg(self, target: Ints, jd: Floats, frame: Frame, order: int = 0) -> Floats:
        """Return the stack of apparent longitude (right ascension on the equator), shape (order + 1, n)."""
        around = self._surroundings(jd, order)
        rotation = self._rotation(frame, jd, order, around.located)
        return vectors.longitude_in(rotation, self._apparent(target, jd, order, around, steering=False))

    def latitude_deg(self, target: Ints, jd: Floats, frame: Frame) -> Floats:
        """Return apparent latitudes (declinations on the equator), shape (n,)."""
        place = vectors.rotate(self.rotation(frame, jd), self.apparent(target, jd))
        return np.asarray(vectors.latitude_deg(place)[0])

    def earth_distance_au(self, target: Ints, jd: Floats, order: int = 0) -> Floats:
        """Return the stack of geometric geocentric distance of bodies, shape (order + 1, n)."""
        return np.asarray(self.tracks.evaluate_each(target, jd, EARTH_DISTANCE, order)[:, 0])

    def _rotation(self, frame: Frame, jd: Floats, order: int, located: Located | None) -> Floats:
        if frame is Frame.J2000:
            return frames.ecliptic_of_j2000()
        parts = ROTATION if frame is Frame.ECLIPTIC else slice(ROTATION.start, OBLIQUITY.stop)
        return rotation_from(self.tracks.observer.evaluate(0, jd, parts, order, located), frame)

    def _surroundings(self, jd: Floats, order: int) -> Surroundings:
        """Prepare what every direction at these instants needs: the segments' polynomials and the Sun."""
        located = self.tracks.locate(jd, order)
        sun = self.tracks.evaluate_each(np.full(jd.size, SUN), jd, POSITION, min(order, 1), located)
        return Surroundings(located, sun)

    def _apparent(
        self, target: Ints, jd: Floats, order: int, around: Surroundings, *, steering: bool
    ) -> Floats:
        is_star = target >= FIRST_STAR
        if not is_star.any():
            return self._apparent_bodies(target, jd, order, around, steering=steering)
        if is_star.all():
            return self._apparent_stars(target - FIRST_STAR, jd, order, around, steering=steering)
        out = np.empty((order + 1, 3, jd.size))
        for some, seen in ((is_star, self._apparent_stars), (~is_star, self._apparent_bodies)):
            numbers = np.where(is_star, target - FIRST_STAR, target)[some]
            out[..., some] = seen(numbers, jd[some], order, around.chosen(some), steering=steering)
        return out

    def _apparent_bodies(
        self, target: Ints, jd: Floats, order: int, around: Surroundings, *, steering: bool
    ) -> Floats:
        position = self.tracks.evaluate_each(target, jd, POSITION, order, around.located)
        return bent(position, around.sun, target == SUN, steering=steering)

    def _apparent_stars(
        self, star: Ints, jd: Floats, order: int, around: Surroundings, *, steering: bool
    ) -> Floats:
        if self.catalogue is None:
            raise LookupError("this sky holds no stars")
        highest = 2 if order else 1
        located = around.located if around.located.polynomials.shape[0] > highest else None
        earth = self.tracks.observer.evaluate(0, jd, EARTH_POSITION, highest, located)
        seen = bent_star(self.catalogue, star, jd, earth, around.sun, steering=steering)
        return seen[: order + 1]


def rotation_from(observer: Floats, frame: Frame) -> Floats:
    """Turn an observer's track, components 0 to 9, into rotations of date, shape (order + 1, 3, 3, n)."""
    ecliptic = observer[:, ROTATION].reshape(observer.shape[0], 3, 3, -1)
    if frame is Frame.ECLIPTIC:
        return np.asarray(ecliptic)
    cosine, sine = _cosine_and_sine(observer[:, OBLIQUITY][:, 0])
    y, z = ecliptic[:, 1], ecliptic[:, 2]
    rows = (
        ecliptic[:, 0],
        vectors.scaled(cosine, y) - vectors.scaled(sine, z),
        vectors.scaled(sine, y) + vectors.scaled(cosine, z),
    )
    return np.stack(rows, axis=1)


def _cosine_and_sine(angle: Floats) -> tuple[Floats, Floats]:
    """Return the stacks of cosine and sine of a stack of angles, shape (order + 1, n) each."""
    cosine, sine = np.empty_like(angle), np.empty_like(angle)
    cosine[0], sine[0] = np.cos(angle[0]), np.sin(angle[0])
    if angle.shape[0] > 1:
        cosine[1], sine[1] = -sine[0] * angle[1], cosine[0] * angle[1]
    if angle.shape[0] > 2:
        cosine[2] = -sine[0] * angle[2] - cosine[0] * angle[1] ** 2
        sine[2] = cosine[0] * angle[2] - sine[0] * angle[1] ** 2
    return cosine, sine


def bent(position: Floats, sun: Floats, is_sun: Bools, *, steering: bool = False) -> Floats:
    """Return apparent unit directions of bodies: track positions with the Sun's deflection added.

    Args:
        position: stack in au, shape (order + 1, 3, n).
        sun: the Sun's, order at most 1.
        is_sun: shape (n,), where the body is the Sun itself and nothing bends.
        steering: leave the deflection's rate out.
    """
    out = vectors.unit(position)
    bends = ~is_sun
    if not bends.any():
        return out
    some_position, some_sun = position[..., bends], sun[..., bends]
    out[0][:, bends] += deflection(some_position[0], some_sun[0])
    if position.shape[0] > 1 and not steering:
        out[1][:, bends] += deflection_rate(some_position[:2], some_sun)
    return out


def bent_star(
    catalogue: StarCatalogue, star: Ints, jd: Floats, earth: Floats, sun: Floats, *, steering: bool = False
) -> Floats:
    """Return the stack of apparent unit directions of stars, shape (3, 3, n).

    Args:
        catalogue: the stars.
        star: rows of the catalogue, shape (n,).
        jd: TT (a star does not notice the 2 ms to TDB), shape (n,).
        earth: the Earth's barycentric position stack, au; order 2, or 1 for stars taken to stand still.
        sun: the Sun's geocentric position stack, au.
        steering: leave the deflection's rate out.

    The rate follows proper motion, parallax and aberration along the tangent of the Earth's motion; the
    second derivative is left zero: next to a planet's it is nothing.
    """
    out = np.zeros((3, 3, jd.size))
    direction = stars.astrometric_directions_each(catalogue, star, jd, earth[0])
    out[0] = places.aberrated(direction, earth[1])
    if earth.shape[0] > 2:
        out[1] = _star_rate(catalogue, star, jd, earth)
        if sun.shape[0] > 1 and not steering:
            out[1] += deflection_rate(out[:2], sun, at_infinity=True)
    out[0] += deflection(out[0], sun[0], at_infinity=True)
    return out


def _star_rate(catalogue: StarCatalogue, star: Ints, jd: Floats, earth: Floats) -> Floats:
    """Return how stars move before deflection, per day, shape (3, n)."""
    h = STAR_TANGENT_DAYS

    def at(days: float) -> Floats:
        position = earth[0] + days * earth[1] + (days**2 / 2.0) * earth[2]
        direction = stars.astrometric_directions_each(catalogue, star, jd + days, position)
        return places.aberrated(direction, earth[1] + days * earth[2])

    return np.asarray((at(h) - at(-h)) / (2.0 * h))
