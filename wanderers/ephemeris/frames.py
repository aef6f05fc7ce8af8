"""The three frames in which longitudes are counted, as rotations of GCRS axes."""

from __future__ import annotations

from enum import StrEnum

import numpy as np
from skyfield import framelib, nutationlib
from skyfield.timelib import Time

from wanderers import constants
from wanderers.arrays import Floats


class Frame(StrEnum):
    """Where a longitude is counted; see each member's comment for pole and origin."""

    ECLIPTIC = "ecliptic"  # true ecliptic and equinox of date
    EQUATOR = "equator"  # true equator and equinox of date: right ascension
    J2000 = "j2000"  # fixed mean ecliptic and equinox of J2000: motion against the stars


def rotation_about_x(angle_rad: float) -> Floats:
    """Return the 3x3 matrix that turns the axes by an angle about x, positive from equator to ecliptic."""
    c, s = np.cos(angle_rad), np.sin(angle_rad)
    return np.array([[1.0, 0.0, 0.0], [0.0, c, s], [0.0, -s, c]])


def ecliptic_of_j2000() -> Floats:
    """Return the 3x3 rotation from GCRS axes to the mean ecliptic and equinox of J2000.

    Frame bias: IERS Conventions (2003), chapter 5; obliquity: IAU 2006.
    """
    obliquity = np.radians(constants.J2000_OBLIQUITY_ARCSEC / constants.ARCSEC_PER_DEG)
    return np.asarray(rotation_about_x(float(obliquity)) @ framelib.ICRS_to_J2000)


def ecliptic_of_date(time: Time, nutation: tuple[Floats, Floats] | None = None) -> tuple[Floats, Floats]:
    """Return the rotation from GCRS axes to the true ecliptic of date, and the true obliquity.

    Precession IAU 2006 (Capitaine et al. 2003) and nutation IAU 2000A, all 1365 terms, as skyfield
    implements them. This is the dear part of every position, hence evaluated only at the tracks' nodes.

    Args:
        time: a skyfield time, n instants.
        nutation: in longitude and obliquity, radians, where it is known already.

    Returns:
        rotation, shape (3, 3, n), and obliquity in radians, shape (n,).
    """
    in_longitude, in_obliquity = nutationlib.iau2000a_radians(time) if nutation is None else nutation
    mean = np.radians(nutationlib.mean_obliquity(time.tdb) / constants.ARCSEC_PER_DEG)
    to_mean_equator = np.einsum("ijn,jk->ikn", time.precession_matrix(), framelib.ICRS_to_J2000)
    to_mean_ecliptic = turned(to_mean_equator, mean, (1, 2))
    return turned(to_mean_ecliptic, -in_longitude, (0, 1)), np.asarray(mean + in_obliquity)


def turned(rotation: Floats, angle_rad: Floats, rows: tuple[int, int]) -> Floats:
    """Turn the axes of rotations, shape (3, 3, n), by an angle in the plane of two of their rows."""
    a, b = rows
    c, s = np.cos(angle_rad), np.sin(angle_rad)
    out = np.array(rotation)
    out[a] = c * rotation[a] + s * rotation[b]
    out[b] = c * rotation[b] - s * rotation[a]
    return out
