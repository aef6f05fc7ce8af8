"""Apparent V magnitudes of the wanderers: pure functions of distances, phase angle and tilt.

Planets: Mallama and Hilton 2018, Computing apparent planetary magnitudes for The Astronomical Almanac,
Astronomy and Computing 25, 10, in the form of the authors' program Ap_Mag V3. Equation numbers from memory
save those of Saturn and Neptune. The phase angle must be the one at the true Sun.

Limits: phases beyond those observed (Mercury below 2 or above 170 degrees, Venus above 179, Jupiter above
130) are extrapolated, as the authors' own check values do. Where the authors give nothing the answer is nan.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body

SUN_V_AT_1_AU: Final = -26.74
"""Allen, Astrophysical Quantities, 3rd ed. (1973), section 75. From memory."""

MOON_MEAN_DISTANCE_AU: Final = 384_400.0 / constants.AU_KM
"""The distance for which the phase law of the Moon holds."""

MOON_PHASE_LIMIT_DEG: Final = 160.0
SATURN_PHASE_LIMIT_DEG: Final = 6.5
SATURN_TILT_LIMIT_DEG: Final = 27.0
NEPTUNE_PHASE_LIMIT_DEG: Final = 1.9
NEPTUNE_PHASE_SEEN_DEG: Final = 2.0

POLES_DEG: Final[dict[Body, tuple[float, float, float, float]]] = {
    Body.SATURN: (40.589, -0.036, 83.537, -0.004),
    Body.URANUS: (257.311, 0.0, -15.175, 0.0),
}
"""North pole: right ascension (deg), its change a century, declination (deg), its change a century; ICRS.

Archinal et al. 2018, Celest. Mech. Dyn. Astr. 130, 22, Table 1. Saturn's is also the pole of its rings.
"""

URANUS_AXIS_RATIO: Final = 25_559.0 / 24_973.0
"""Equatorial over polar radius. Archinal et al. 2018, Table 4."""


@dataclass(frozen=True, slots=True)
class Circumstances:
    """How a body stands to the Sun and the Earth at n instants.

    Attributes:
        sun_distance_au: shape (n,); not read for the Sun.
        earth_distance_au: shape (n,).
        phase_angle_deg: Sun-body-Earth angle, shape (n,), 0 when full; not read for the Sun.
        jd_tt: TT days, shape (n,); read for Neptune, which has brightened.
        sun_latitude_deg: latitude under the Sun, shape (n,), Saturn and Uranus only: planetocentric for
            Saturn, planetographic for Uranus, as ``pole_latitudes_deg`` returns them.
        earth_latitude_deg: the same under the Earth.
    """

    sun_distance_au: Floats
    earth_distance_au: Floats
    phase_angle_deg: Floats
    jd_tt: Floats
    sun_latitude_deg: Floats | None = None
    earth_latitude_deg: Floats | None = None

    def latitudes_deg(self) -> tuple[Floats, Floats]:
        """Return both latitudes.

        Raises:
            ValueError: one of them was not given.
        """
        if self.sun_latitude_deg is None or self.earth_latitude_deg is None:
            raise ValueError("Saturn and Uranus need the latitudes under the Sun and the Earth: give both")
        return self.sun_latitude_deg, self.earth_latitude_deg


def apparent_magnitude(body: Body, circumstances: Circumstances) -> Floats:
    """Return the apparent V magnitude of a body, Saturn with its rings.

    Args:
        body: any of the bodies.
        circumstances: n instants.

    Returns:
        shape (n,); nan where the source gives no value (each function says where) or a distance is not
        positive or a phase angle not within 0 to 180 degrees.

    Raises:
        ValueError: Saturn or Uranus without latitudes.
    """
    return _MAGNITUDE_OF[body](circumstances)


def saturn_globe_magnitude(circumstances: Circumstances) -> Floats:
    """Return the apparent V magnitude of Saturn's globe alone, as if it had no rings.

    Source: Mallama and Hilton 2018, eq. 11 up to the phase limit of 6.5 degrees, eq. 12 beyond.
    """
    phase = circumstances.phase_angle_deg
    near = -8.95 + _polynomial(phase, 0.0, -3.7e-4, 6.16e-4)
    far = -8.94 + _polynomial(phase, 0.0, 2.446e-4, 2.672e-4, -1.506e-6, 4.767e-9)
    return _at_distance(np.where(phase <= SATURN_PHASE_LIMIT_DEG, near, far), circumstances)


def pole_directions(body: Body, jd_tt: Floats) -> Floats:
    """Return unit vectors to the north pole of Saturn (and of its rings) or Uranus in ICRS axes.

    Args:
        body: Saturn or Uranus.
        jd_tt: shape (n,); TT stands in for TDB, which changes nothing here.

    Returns:
        shape (3, n).

    Source: Archinal et al. 2018, Table 1.
    """
    ra_deg, ra_rate, dec_deg, dec_rate = POLES_DEG[body]
    centuries = (jd_tt - constants.J2000_JD) / constants.DAYS_PER_CENTURY
    ra, dec = np.radians(ra_deg + ra_rate * centuries), np.radians(dec_deg + dec_rate * centuries)
    return np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])


def pole_latitudes_deg(
    body: Body, sun_to_planet: Floats, earth_to_planet: Floats, jd_tt: Floats | None = None
) -> tuple[Floats, Floats]:
    """Return the latitudes of the points of Saturn or Uranus under the Sun and under the Earth.

    Args:
        body: Saturn (planetocentric, which is also the tilt of the rings) or Uranus (planetographic).
        sun_to_planet: ICRS axes, any unit of length, shape (3, n).
        earth_to_planet: the same.
        jd_tt: shape (n,), for the slow motion of Saturn's pole (0.004 degrees a century); J2000 if not given.

    Returns:
        under the Sun and under the Earth, degrees, north positive, shape (n,) each.
    """
    pole = pole_directions(body, np.array([constants.J2000_JD]) if jd_tt is None else jd_tt)
    sines = [-_cosine_between(pole, vectors) for vectors in (sun_to_planet, earth_to_planet)]
    latitudes = [np.degrees(np.arcsin(np.clip(sine, -1.0, 1.0))) for sine in sines]
    if body is Body.URANUS:
        latitudes = [_planetographic(latitude, URANUS_AXIS_RATIO) for latitude in latitudes]
    return latitudes[0], latitudes[1]


def _cosine_between(pole: Floats, vectors: Floats) -> Floats:
    """Return the cosine of the angle between unit vectors and vectors, shape (3, n) each."""
    return np.asarray((pole * vectors).sum(axis=0) / np.sqrt((vectors * vectors).sum(axis=0)))


def _planetographic(centric_deg: Floats, axis_ratio: float) -> Floats:
    """Return the latitude of the surface's normal at a planetocentric latitude."""
    centric = np.radians(centric_deg)
    return np.degrees(np.arctan2(axis_ratio**2 * np.sin(centric), np.cos(centric)))


def _polynomial(x: Floats, *coefficients: float) -> Floats:
    """Return c0 + c1 x + c2 x^2 + ... by Horner's rule."""
    total = np.full_like(x, coefficients[-1])
    for coefficient in reversed(coefficients[:-1]):
        total *= x
        total += coefficient
    return total


def _at_distance(at_unit_distances: Floats, circumstances: Circumstances) -> Floats:
    """Carry a magnitude at 1 au from Sun and Earth to the real distances (eq. 1); nan for bad input."""
    product = circumstances.sun_distance_au * circumstances.earth_distance_au
    phase = circumstances.phase_angle_deg
    possible = (product > 0.0) & (phase >= 0.0) & (phase <= 180.0)
    return np.asarray(at_unit_distances + 5.0 * np.log10(np.where(possible, product, np.nan)))


def _sun(circumstances: Circumstances) -> Floats:
    """Return the Sun's magnitude by the inverse square of its distance."""
    distance = circumstances.earth_distance_au
    return np.asarray(SUN_V_AT_1_AU + 5.0 * np.log10(np.where(distance > 0.0, distance, np.nan)))


def _moon(circumstances: Circumstances) -> Floats:
    """Return the Moon's magnitude; nan beyond a phase angle of 160 degrees, where the law was never fitted.

    Source: the law of V against phase angle in Krisciunas and Schaefer 1991, PASP 103, 1033, after Allen,
    Astrophysical Quantities, 3rd ed. (1973), section 68, for the mean distance.
    Limits: the surge within 7 degrees of full (up to 0.3 mag brighter) and eclipses are left out; from 150
    to 160 degrees the law is up to 0.7 mag too bright. Waxing and waning moons differ by about 0.1 mag.
    """
    phase = circumstances.phase_angle_deg
    law = _polynomial(phase, -12.73, 0.026, 0.0, 0.0, 4.0e-9)
    at_unit_distances = law - 5.0 * np.log10(MOON_MEAN_DISTANCE_AU)
    return _at_distance(np.where(phase <= MOON_PHASE_LIMIT_DEG, at_unit_distances, np.nan), circumstances)


def _mercury(circumstances: Circumstances) -> Floats:
    """Return Mercury's magnitude. Source: eq. 2, observed between phase angles of 2 and 170 degrees."""
    terms = (-0.613, 6.3280e-2, -1.6336e-3, 3.3644e-5, -3.4265e-7, 1.6893e-9, -3.0334e-12)
    return _at_distance(_polynomial(circumstances.phase_angle_deg, *terms), circumstances)


def _venus(circumstances: Circumstances) -> Floats:
    """Return Venus's magnitude. Source: eq. 3 up to a phase angle of 163.7 degrees, eq. 4 beyond.

    The two meet within 0.01 mag. Droplets in its air scatter light forward: the thin crescent brightens again
    to a second, lesser maximum near 168 degrees, which is not the greatest brilliancy.
    """
    phase = circumstances.phase_angle_deg
    crescent = _polynomial(phase, -4.384, -1.044e-3, 3.687e-4, -2.814e-6, 8.938e-9)
    thin = _polynomial(phase, 236.05828, -2.81914, 8.39034e-3)
    return _at_distance(np.where(phase < 163.7, crescent, thin), circumstances)


def _mars(circumstances: Circumstances) -> Floats:
    """Return the mean magnitude of Mars. Source: eq. 6 up to a phase angle of 50 degrees, eq. 7 beyond.

    Left out: the side turned to the Earth (about 0.06 mag) and the season on Mars (less than 0.1 mag),
    whose tables average to zero. Storms of dust can add some tenths.
    """
    phase = circumstances.phase_angle_deg
    near = _polynomial(phase, -1.601, 2.267e-2, -1.302e-4)
    far = _polynomial(phase, -0.367, -0.02573, 3.445e-4)
    return _at_distance(np.where(phase <= 50.0, near, far), circumstances)


def _jupiter(circumstances: Circumstances) -> Floats:
    """Return Jupiter's magnitude. Source: eq. 8 up to a phase angle of 12 degrees, eq. 9 beyond."""
    phase = circumstances.phase_angle_deg
    near = _polynomial(phase, -9.395, -3.7e-4, 6.16e-4)
    if not np.any(phase > 12.0):  # the Earth is never that far out: spare a logarithm
        return _at_distance(near, circumstances)
    inside = np.clip(phase, 0.0, 180.0) / 180.0
    light = _polynomial(inside, 1.0, -1.507, -0.363, -0.062, 2.809, -1.876)
    return _at_distance(np.where(phase <= 12.0, near, -9.428 - 2.5 * np.log10(light)), circumstances)


def _saturn(circumstances: Circumstances) -> Floats:
    """Return Saturn's magnitude, globe and rings together.

    Nan beyond a phase angle of 6.5 or a tilt of 27 degrees, which the Earth does not see. The rings count
    nothing while the Sun and the Earth are on different sides of them.

    Source: eq. 10, with the geometric mean of both planetocentric latitudes as the tilt.
    """
    under_sun, under_earth = circumstances.latitudes_deg()
    phase = circumstances.phase_angle_deg
    tilt_deg = np.sqrt(np.maximum(under_sun * under_earth, 0.0))
    sine = np.sin(np.radians(tilt_deg))
    surge = np.exp(-2.25 * np.maximum(phase, 0.0))
    with_rings = -8.914 - 1.825 * sine + 0.026 * phase - 0.378 * sine * surge
    within = (phase <= SATURN_PHASE_LIMIT_DEG) & (tilt_deg <= SATURN_TILT_LIMIT_DEG)
    return _at_distance(np.where(within, with_rings, np.nan), circumstances)


def _uranus(circumstances: Circumstances) -> Floats:
    """Return the magnitude of Uranus: brighter with a pole in view.

    Source: eq. 14, with the mean of both planetographic latitudes taken positive; eq. 15 for phase angles
    beyond 3.1 degrees, where the source steps by 0.021 mag: the Earth sees up to 3.19, near perihelion.
    """
    under_sun, under_earth = circumstances.latitudes_deg()
    phase = circumstances.phase_angle_deg
    full = -7.110 - 0.00084 * (np.abs(under_sun) + np.abs(under_earth)) / 2.0
    dimming = np.where(phase > 3.1, _polynomial(phase, 0.0, 6.587e-3, 1.045e-4), 0.0)
    return _at_distance(full + dimming, circumstances)


def _neptune(circumstances: Circumstances) -> Floats:
    """Return Neptune's magnitude, which rose from 1980 to 2000 and is taken as constant before and after.

    Before 2000 the source gives no term for phase angles beyond 1.9 degrees. The Earth sees up to 1.96, near
    quadrature: there the magnitude is left undimmed (0.016 mag at most); nan beyond 2 degrees.

    Source: eq. 16 (its straight line is followed to -7.00, reached in mid-2000, where the source steps by
    0.002 mag) and eq. 17 beyond 1.9 degrees, where the source steps by 0.016 mag.
    """
    phase = circumstances.phase_angle_deg
    year = 2000.0 + (circumstances.jd_tt - constants.J2000_JD) / constants.DAYS_PER_JULIAN_YEAR
    full = np.clip(-6.89 - 0.0054 * (year - 1980.0), -7.00, -6.89)
    dimmed = full + _polynomial(phase, 0.0, 7.944e-3, 9.617e-5)
    old = np.where(phase <= NEPTUNE_PHASE_SEEN_DEG, full, np.nan)
    beyond = np.where(year >= 2000.0, dimmed, old)
    return _at_distance(np.where(phase <= NEPTUNE_PHASE_LIMIT_DEG, full, beyond), circumstances)


def _pluto(circumstances: Circumstances) -> Floats:
    """Return the magnitude of Pluto and Charon together.

    Source: V(1,0) = -1.00, Meeus, Astronomical Algorithms, 2nd ed. (1998), chapter 41; phase coefficient
    0.037 mag/deg of both bodies, Tholen and Tedesco 1994, Icarus 108, 200. From memory. Left out: the light
    curve of the rotation, 0.15 mag either way. Nan beyond 2 degrees, which the Earth does not see.
    """
    phase = circumstances.phase_angle_deg
    full = _polynomial(phase, -1.00, 0.037)
    return _at_distance(np.where(phase <= 2.0, full, np.nan), circumstances)


_MAGNITUDE_OF: Final[dict[Body, Callable[[Circumstances], Floats]]] = {
    Body.SUN: _sun,
    Body.MOON: _moon,
    Body.MERCURY: _mercury,
    Body.VENUS: _venus,
    Body.MARS: _mars,
    Body.JUPITER: _jupiter,
    Body.SATURN: _saturn,
    Body.URANUS: _uranus,
    Body.NEPTUNE: _neptune,
    Body.PLUTO: _pluto,
}
