"""Apparent places straight from Skyfield, evaluated anew at every instant: what the program is held against.

The Sun alone bends light (``deflectors=(10,)``), and nothing bends the Sun's own; see the contract of the
frames in wanderers/ephemeris/frames.py.
"""

from __future__ import annotations

from dataclasses import dataclass

import erfa
import numpy as np
from skyfield.api import load
from skyfield.framelib import ecliptic_frame, true_equator_and_equinox_of_date
from skyfield.jpllib import SpiceKernel
from skyfield.timelib import Time

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import OUTER, Body
from wanderers.ephemeris.frames import Frame

MAS_PER_RAD = np.degrees(1.0) * 3.6e6
SUN_ALONE = (10,)
J2000_OBLIQUITY_RAD = np.radians(84_381.406 / 3600.0)  # IAU 2006 precession
SEMIDIAMETER_OF_SUN_DEG = 0.2725  # largest, early in January: 16.35 arcminutes


@dataclass(frozen=True)
class Direct:
    """An open kernel and what Skyfield computes from it; times are TT Julian dates, shape (n,)."""

    planets: SpiceKernel

    @staticmethod
    def time(jd_tt: Floats) -> Time:
        return load.timescale(builtin=True).tt_jd(jd_tt)

    def _target(self, body: Body) -> object:
        return self.planets[f"{body} barycenter" if body in OUTER else body.value]

    def _apparent(self, body: Body, jd_tt: Floats) -> object:
        observed = self.planets["earth"].at(self.time(jd_tt)).observe(self._target(body))
        return observed.apparent(deflectors=() if body is Body.SUN else SUN_ALONE)

    def direction(self, body: Body, jd_tt: Floats) -> Floats:
        """Apparent unit directions, GCRS axes, shape (3, n)."""
        place = self._apparent(body, jd_tt).xyz.au
        return np.asarray(place / np.linalg.norm(place, axis=0))

    def longitude_deg(self, body: Body, jd_tt: Floats, frame: Frame = Frame.ECLIPTIC) -> Floats:
        """Apparent longitudes (right ascensions on the equator), shape (n,)."""
        return self.place_deg(body, jd_tt, frame)[0]

    def place_deg(self, body: Body, jd_tt: Floats, frame: Frame = Frame.ECLIPTIC) -> tuple[Floats, Floats]:
        """Apparent longitude and latitude, or right ascension and declination, shape (n,) each."""
        if frame is Frame.J2000:
            x, y, z = ecliptic_of_j2000() @ self.direction(body, jd_tt)
            return np.degrees(np.arctan2(y, x)) % 360.0, np.degrees(np.arctan2(z, np.hypot(x, y)))
        theirs = ecliptic_frame if frame is Frame.ECLIPTIC else true_equator_and_equinox_of_date
        latitude, longitude, _ = self._apparent(body, jd_tt).frame_latlon(theirs)
        return longitude.degrees, latitude.degrees

    def distance_km(self, body: Body, jd_tt: Floats) -> Floats:
        """Geometric geocentric distances at the instants themselves, shape (n,)."""
        line = (self._target(body) - self.planets["earth"]).at(self.time(jd_tt))
        return np.asarray(np.linalg.norm(line.position.km, axis=0))

    def separation_deg(self, one: Body, two: Body, jd_tt: Floats) -> Floats:
        """Angles between apparent directions, shape (n,)."""
        return angle_rad(self.direction(one, jd_tt), self.direction(two, jd_tt)) * np.degrees(1.0)


def ecliptic_of_j2000() -> Floats:
    """Rotation from GCRS axes to the mean ecliptic of J2000, by ERFA: frame bias, then the obliquity."""
    c, s = np.cos(J2000_OBLIQUITY_RAD), np.sin(J2000_OBLIQUITY_RAD)
    bias = erfa.bp06(2_451_545.0, 0.0)[0]
    return np.asarray(np.array([[1.0, 0.0, 0.0], [0.0, c, s], [0.0, -s, c]]) @ bias)


def angle_rad(one: Floats, two: Floats) -> Floats:
    """Angles between unit vectors, shape (3, n) each, exact for small ones too."""
    near, far = np.linalg.norm(one - two, axis=0), np.linalg.norm(one + two, axis=0)
    return np.asarray(2.0 * np.arctan2(near, far))


def wrapped_deg(angle: Floats) -> Floats:
    """Angles brought into [-180, 180)."""
    return np.asarray((angle + 180.0) % 360.0 - 180.0)
