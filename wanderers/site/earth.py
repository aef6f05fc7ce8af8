"""Where a place on the turning Earth is, and which way its horizon lies.

Polar motion (below 0.6 arcseconds) is left out: no table of it is packaged, and it cannot be foretold.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.chebyshev import Series
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky, rotation_from
from wanderers.ephemeris.timescales import jd_ut1_from_tt
from wanderers.ephemeris.tracks import EARTH_POSITION
from wanderers.site.places import Site

EQUATORIAL_RADIUS_M: Final = 6_378_137.0
FLATTENING: Final = 1.0 / 298.257223563
"""WGS 84: NGA.STND.0036 (2014), table 3.1."""

METRES_PER_AU: Final = constants.AU_KM * 1_000.0
RATE_RAD_PER_DAY: Final = 2.0 * np.pi * 1.00273781191135448
"""Turns of the Earth a day of UT1. IERS Conventions (2010), equation 5.15."""
RAD_PER_MICROARCSEC: Final = float(np.radians(1e-6 / constants.ARCSEC_PER_DEG))
S_POLYNOMIAL_MICROARCSEC: Final = (94.0, 3_808.65, -122.68, -72_574.11, 27.98, 15.62)
"""s + XY/2 by powers of centuries of TT. IERS Conventions (2010), table 5.2d."""


@dataclass(frozen=True, slots=True)
class Vantage:
    """A site at n instants: where it is among the planets, and how its horizon is turned.

    Attributes:
        site: the site.
        jd: TT, shape (n,).
        to_horizon: rotation from GCRS axes to north, east and up, and its rate per day, shape (2, 3, 3, n).
        position: from the Earth's centre, au, GCRS axes, and its rate in au/day, shape (2, 3, n).
        earth: the Earth's barycentric position and velocity, au and au/day, shape (2, 3, n).
    """

    site: Site
    jd: Floats
    to_horizon: Floats
    position: Floats
    earth: Floats

    @property
    def velocity(self) -> Floats:
        """Barycentric velocity of the site, au/day, shape (3, n)."""
        return np.asarray(self.earth[1] + self.position[1])

    def chosen(self, keep: Bools | Ints) -> Vantage:
        """Return some of the instants."""
        parts = (self.jd, self.to_horizon, self.position, self.earth)
        return Vantage(self.site, *(part[..., keep] for part in parts))


def vantage(sky: Sky, site: Site, jd: Floats) -> Vantage:
    """Return a site at instants, shape (n,), TT."""
    observer = sampled(sky.tracks.observer, 0, jd, slice(0, EARTH_POSITION.stop))
    equator = rotation_from(observer[:1, :10], Frame.EQUATOR)[0]
    turned = _turned(equator, earth_rotation_rad(jd, equator))
    axes = horizon_axes(site.latitude_deg, site.longitude_deg)
    place = site_position_au(site)
    return Vantage(
        site,
        jd,
        np.einsum("ij,djkn->dikn", axes, turned),
        np.einsum("djkn,j->dkn", turned, place),
        observer[:, EARTH_POSITION],
    )


def sampled(series: Series, function: int, jd: Floats, components: slice) -> Floats:
    """Evaluate a function of a series and its rate, shape (2, components, n), fast where time rises."""
    if jd.size > 1 and np.all(jd[1:] >= jd[:-1]):
        return np.asarray(series.evaluate_grid(np.array([function]), jd, components, 1)[0])
    return series.evaluate(function, jd, components, 1)


def site_position_au(site: Site) -> Floats:
    """Return a site's position in the Earth's own axes (ITRS), au, shape (3,).

    Source: Explanatory Supplement, 3rd ed. (2013), section 5.2.2 (geodetic to geocentric).
    """
    latitude, longitude = np.radians(site.latitude_deg), np.radians(site.longitude_deg)
    squashed = (1.0 - FLATTENING) ** 2
    curvature_m = EQUATORIAL_RADIUS_M / np.sqrt(np.cos(latitude) ** 2 + squashed * np.sin(latitude) ** 2)
    from_axis_m = (curvature_m + site.elevation_m) * np.cos(latitude)
    along_axis_m = (curvature_m * squashed + site.elevation_m) * np.sin(latitude)
    place_m = [from_axis_m * np.cos(longitude), from_axis_m * np.sin(longitude), along_axis_m]
    return np.array(place_m) / METRES_PER_AU


def horizon_axes(latitude_deg: float, longitude_deg: float) -> Floats:
    """Return the unit vectors north, east and up of a place in the Earth's own axes, one a row, shape (3, 3).

    At a pole "north" is what it is just before the pole on the meridian given.
    """
    latitude, longitude = np.radians(latitude_deg), np.radians(longitude_deg)
    sin_latitude, cos_latitude = np.sin(latitude), np.cos(latitude)
    sin_longitude, cos_longitude = np.sin(longitude), np.cos(longitude)
    return np.array(
        [
            [-sin_latitude * cos_longitude, -sin_latitude * sin_longitude, cos_latitude],
            [-sin_longitude, cos_longitude, 0.0],
            [cos_latitude * cos_longitude, cos_latitude * sin_longitude, sin_latitude],
        ]
    )


def earth_rotation_rad(jd: Floats, equator: Floats) -> Floats:
    """Return Greenwich apparent sidereal time, shape (n,), radians, not wrapped.

    Args:
        jd: TT, shape (n,).
        equator: rotation from GCRS to the true equator and equinox of date then, shape (3, 3, n).

    Source: Earth rotation angle less the equation of the origins, IERS Conventions (2010), equations 5.15
        and 5.31; the latter from the rotation itself: Wallace and Capitaine 2006, A&A 459, 981, equation 16.
    Accuracy: against the full series 0.1 milliarcseconds from 1900 to 2100.
    """
    since_j2000 = jd_ut1_from_tt(jd) - constants.J2000_JD
    angle = 0.7790572732640 + since_j2000 % 1.0 + 0.00273781191135448 * since_j2000
    return np.asarray(2.0 * np.pi * angle - equation_of_the_origins_rad(jd, equator))


def equation_of_the_origins_rad(jd: Floats, equator: Floats) -> Floats:
    """Return the angle from the equinox of date to the origin of Earth rotation, shape (n,)."""
    x, y, z = equator[2]
    scale = x / (1.0 + z)
    origin = np.stack([1.0 - scale * x, -scale * y, -x])
    along, across = np.einsum("ijn,jn->in", equator[:2], origin)
    return np.asarray(_cio_locator_rad(jd, x, y) - np.arctan2(across, along))


def _cio_locator_rad(jd: Floats, x: Floats, y: Floats) -> Floats:
    """Return s: its polynomial and its three largest periodic terms, all others are below 12 microarcseconds.

    Source: IERS Conventions (2010), table 5.2d; node of the Moon's orbit, equation 5.43.
    """
    century = (jd - constants.J2000_JD) / constants.DAYS_PER_CENTURY
    node = np.radians(125.04455501 - 1_934.1362619 * century)
    series = np.polynomial.polynomial.polyval(century, S_POLYNOMIAL_MICROARCSEC)
    series = series - 2_640.73 * np.sin(node) - 63.53 * np.sin(2.0 * node)
    series = series + 743.52 * century**2 * np.sin(node)
    return np.asarray(series * RAD_PER_MICROARCSEC - x * y / 2.0)


def _turned(equator: Floats, angle: Floats) -> Floats:
    """Turn equator axes about the pole by an angle, with the rate, shape (2, 3, 3, n).

    The rate leaves out precession and nutation, a millionth of the whole.
    """
    c, s = np.cos(angle), np.sin(angle)
    out = np.zeros((2, *equator.shape))
    out[0, 0] = c * equator[0] + s * equator[1]
    out[0, 1] = c * equator[1] - s * equator[0]
    out[0, 2] = equator[2]
    out[1, 0] = RATE_RAD_PER_DAY * out[0, 1]
    out[1, 1] = -RATE_RAD_PER_DAY * out[0, 0]
    return out
