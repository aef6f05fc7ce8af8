"""Apparent geocentric places straight from a kernel, evaluated anew at every instant asked for.

An instant is a pair of float64: ``jd_tt`` plus ``offset_days``, so that searches can move in steps
far below the 40 microseconds that a Julian date alone resolves.

Source: the chain light-time, deflection by the Sun, aberration, frame bias, precession, nutation as
in the Explanatory Supplement to the Astronomical Almanac, 3rd ed. (2013), section 7.2, with the
routines of ERFA (the open SOFA) and the kernel read by jplephem.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import erfa
import numpy as np
from jplephem.spk import SPK
from numpy.typing import NDArray

Floats = NDArray[np.float64]

AU_KM = 149597870.7  # IAU 2012 resolution B2
LIGHT_AU_PER_DAY = 299792.458 * 86400.0 / AU_KM
J2000_OBLIQUITY_ARCSEC = 84381.406  # IAU 2006 precession
B1875_JD = sum(erfa.epb2jd(1875.0))

BODIES = (
    "sun",
    "moon",
    "mercury",
    "venus",
    "mars",
    "jupiter",
    "saturn",
    "uranus",
    "neptune",
    "pluto",
)
PLANETS = BODIES[2:]
OUTER = BODIES[4:]

# Chains of kernel segments from the solar-system barycentre; Mars to Pluto are system barycentres.
CHAINS: dict[str, tuple[tuple[int, int], ...]] = {
    "sun": ((0, 10),),
    "earth": ((0, 3), (3, 399)),
    "moon": ((0, 3), (3, 301)),
    "mercury": ((0, 1), (1, 199)),
    "venus": ((0, 2), (2, 299)),
    "mars": ((0, 4),),
    "jupiter": ((0, 5),),
    "saturn": ((0, 6),),
    "uranus": ((0, 7),),
    "neptune": ((0, 8),),
    "pluto": ((0, 9),),
}

# Equatorial radii: Archinal et al., WGCCRE report 2015, Celest. Mech. Dyn. Astron. 130:22 (2018), from
# memory; the Sun's is the nominal radius of IAU 2015 resolution B3.
RADII_KM: Mapping[str, float] = {
    "sun": 695700.0,
    "moon": 1737.4,
    "mercury": 2440.53,
    "venus": 6051.8,
    "mars": 3396.19,
    "jupiter": 71492.0,
    "saturn": 60268.0,
    "uranus": 25559.0,
    "neptune": 24764.0,
    "pluto": 1188.3,
}

# The point-mass formula diverges behind the Sun's centre; within about 290 arcseconds of it, well inside
# the disc, ERFA's ldsun lets the deflection fall to zero instead, and so does this module. Without a
# limiter a planet seen through the Sun's centre would seem to turn back for half an hour.
DEFLECTION_LIMITER = 1e-6
LIGHT_TIME_PRECISION_DAYS = 1e-13


@dataclass(frozen=True, slots=True)
class Astrometric:
    """Where a body was when the light that arrives now left it.

    Attributes:
        vector_au: shape (n, 3), from the Earth now to the body then, GCRS axes.
        light_time_days: shape (n,).
        body_au: shape (n, 3), barycentric position of the body then.
    """

    vector_au: Floats
    light_time_days: Floats
    body_au: Floats


@dataclass(frozen=True, slots=True)
class Sky:
    """An open kernel and the places that follow from it.

    Attributes:
        kernel: as opened by jplephem.
        radii_km: of the bodies, for their discs.
        deflection_limiter: see ``DEFLECTION_LIMITER``.
    """

    kernel: Any
    radii_km: Mapping[str, float]
    deflection_limiter: float = DEFLECTION_LIMITER

    def barycentric(self, body: str, tdb: Floats, offset_days: Floats) -> tuple[Floats, Floats]:
        """Give position (au) and velocity (au/day) from the barycentre, shapes (n, 3)."""
        position, velocity = 0.0, 0.0
        for link in CHAINS[body]:
            x_km, v_km = self.kernel[link].compute_and_differentiate(tdb, offset_days)
            position, velocity = position + x_km, velocity + v_km
        return np.asarray(position).T / AU_KM, np.asarray(velocity).T / AU_KM

    def position(self, body: str, tdb: Floats, offset_days: Floats) -> Floats:
        """Give the position alone, au, shape (n, 3)."""
        position = 0.0
        for link in CHAINS[body]:
            position = position + self.kernel[link].compute(tdb, offset_days)
        return np.asarray(position).T / AU_KM

    def astrometric(self, body: str, tdb: Floats, tdb_offset: Floats) -> Astrometric:
        """Iterate the light-time of a body until it no longer changes; the instants are in TDB."""
        earth = self.position("earth", tdb, tdb_offset)
        light_time = np.zeros_like(tdb_offset)
        for _ in range(20):
            then = self.position(body, tdb, tdb_offset - light_time)
            vector = then - earth
            previous, light_time = light_time, norm(vector) / LIGHT_AU_PER_DAY
            if np.all(np.abs(light_time - previous) < LIGHT_TIME_PRECISION_DAYS):
                return Astrometric(vector, light_time, then)
        raise ArithmeticError(f"the light-time of {body} does not converge")

    def apparent(self, body: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
        """Give the apparent geocentric unit direction on GCRS axes, shape (n, 3).

        Light-time, deflection by the Sun alone (not of the Sun) and annual aberration are applied.
        """
        jd_tt, offset_days = broadcast(jd_tt, offset_days)
        tdb_offset = offset_days + tdb_minus_tt_days(jd_tt, offset_days)
        seen = self.astrometric(body, jd_tt, tdb_offset)
        earth, earth_velocity = self.barycentric("earth", jd_tt, tdb_offset)
        # The Sun moves 8 km in its own light-time: any nearby instant serves for the deflector.
        sun = self.position("sun", jd_tt, tdb_offset - 0.0058)
        sun_to_earth = earth - sun
        sun_distance = norm(sun_to_earth)
        direction = unit(seen.vector_au)
        if body != "sun":
            limiter = self.deflection_limiter / np.maximum(sun_distance**2, 1.0)
            direction = erfa.ld(
                1.0, direction, unit(seen.body_au - sun), unit(sun_to_earth), sun_distance, limiter
            )
            direction = unit(direction)
        velocity = earth_velocity / LIGHT_AU_PER_DAY
        lorentz = np.sqrt(1.0 - np.sum(velocity**2, axis=-1))
        return np.asarray(erfa.ab(direction, velocity, sun_distance, lorentz))

    def distance_au(self, body: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
        """Give the geometric geocentric distance at the instant, au."""
        return norm(self.geometric(body, "earth", jd_tt, offset_days))

    def light_time_distance_au(self, body: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
        """Give the distance that the arriving light has travelled, au."""
        jd_tt, offset_days = broadcast(jd_tt, offset_days)
        tdb_offset = offset_days + tdb_minus_tt_days(jd_tt, offset_days)
        return norm(self.astrometric(body, jd_tt, tdb_offset).vector_au)

    def heliocentric_au(self, body: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
        """Give the geometric distance from the Sun at the instant, au."""
        return norm(self.geometric(body, "sun", jd_tt, offset_days))

    def geometric(self, body: str, centre: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
        """Give the vector from one body to another at one instant, au, shape (n, 3), GCRS axes."""
        jd_tt, offset_days = broadcast(jd_tt, offset_days)
        tdb_offset = offset_days + tdb_minus_tt_days(jd_tt, offset_days)
        return self.position(body, jd_tt, tdb_offset) - self.position(centre, jd_tt, tdb_offset)


@contextmanager
def open_sky(
    kernel_path: str | Path,
    *,
    radii_km: Mapping[str, float] | None = None,
    deflection_limiter: float = DEFLECTION_LIMITER,
) -> Iterator[Sky]:
    """Open an SPK kernel for the length of a ``with`` block; given radii replace the usual ones."""
    kernel = SPK.open(str(kernel_path))
    try:
        yield Sky(kernel, {**RADII_KM, **(radii_km or {})}, deflection_limiter)
    finally:
        kernel.close()


def tdb_minus_tt_days(jd_tt: Floats, offset_days: Floats) -> Floats:
    """Give TDB-TT at the geocentre (Fairhead & Bretagnon 1990, in ERFA's dtdb), days."""
    return np.asarray(erfa.dtdb(jd_tt, offset_days, 0.0, 0.0, 0.0, 0.0)) / 86400.0


def frame_matrix(frame: str, jd_tt: Floats, offset_days: Floats | float = 0.0) -> Floats:
    """Give the rotation from GCRS axes to a frame, shape (n, 3, 3).

    Args:
        frame: ``equator`` (true, of date), ``ecliptic`` (true, of date), ``j2000`` (mean ecliptic of
            J2000) or ``b1875`` (mean equator of B1875, in which constellations are bounded).
        jd_tt: shape (n,), TT days.
        offset_days: shape (n,) or a number, added to ``jd_tt``.

    Source: IAU 2006 precession and frame bias, IAU 2000A nutation (ERFA pn06 and nut00a).
    """
    jd_tt, offset_days = broadcast(jd_tt, offset_days)
    if frame == "j2000":
        bias = erfa.bp06(2451545.0, 0.0)[0]
        tilt = rotate_x(np.radians(J2000_OBLIQUITY_ARCSEC / 3600.0))
        return np.broadcast_to(tilt @ bias, (*jd_tt.shape, 3, 3))
    if frame == "b1875":
        return np.broadcast_to(erfa.pmat06(B1875_JD, 0.0), (*jd_tt.shape, 3, 3))
    longitude, obliquity = erfa.nut00a(jd_tt, offset_days)
    mean_obliquity, *_, to_equator = erfa.pn06(jd_tt, offset_days, longitude, obliquity)
    if frame == "equator":
        return np.asarray(to_equator)
    if frame == "ecliptic":
        return np.asarray(rotate_x(mean_obliquity + obliquity) @ to_equator)
    raise LookupError(f"no frame {frame!r}")


def rotate_x(angle: Floats | float) -> Floats:
    """Give the matrix that turns the axes about x by an angle in radians, shape (..., 3, 3)."""
    angle = np.asarray(angle)
    zero, one = np.zeros_like(angle), np.ones_like(angle)
    cosine, sine = np.cos(angle), np.sin(angle)
    rows = [[one, zero, zero], [zero, cosine, sine], [zero, -sine, cosine]]
    return np.stack([np.stack(row, axis=-1) for row in rows], axis=-2)


def longitude_deg(matrix: Floats, direction: Floats) -> Floats:
    """Give the longitude (or right ascension) of directions in a frame, [0, 360)."""
    x, y, _ = turned(matrix, direction)
    return np.asarray(np.degrees(np.arctan2(y, x)) % 360.0)


def latitude_deg(matrix: Floats, direction: Floats) -> Floats:
    """Give the latitude (or declination) of directions in a frame."""
    x, y, z = turned(matrix, direction)
    return np.asarray(np.degrees(np.arctan2(z, np.hypot(x, y))))


def turned(matrix: Floats, direction: Floats) -> Floats:
    """Apply one matrix to each direction, shape (3, n)."""
    return np.asarray(np.einsum("nij,nj->in", matrix, direction))


def separation_deg(first: Floats, second: Floats) -> Floats:
    """Give the angle between unit directions, exact for small and large angles alike."""
    return np.degrees(2.0 * np.arctan2(norm(first - second), norm(first + second)))


def norm(vector: Floats) -> Floats:
    """Give the length of vectors along the last axis."""
    return np.asarray(np.sqrt(np.sum(vector**2, axis=-1)))


def unit(vector: Floats) -> Floats:
    """Give vectors of length one along the last axis."""
    return vector / norm(vector)[..., np.newaxis]


def broadcast(jd_tt: Floats, offset_days: Floats | float) -> tuple[Floats, Floats]:
    """Give both parts of the instants as float64 arrays of one shape (n,)."""
    jd, offset = np.broadcast_arrays(np.atleast_1d(jd_tt), offset_days)
    return np.array(jd, dtype=np.float64), np.array(offset, dtype=np.float64)
