"""The three frames in which longitudes are counted, as rotations of GCRS axes."""

from __future__ import annotations

from enum import StrEnum
from typing import Final

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


BIAS_AND_PRECESSION_ARCSEC: Final = {
    "gamma": (-0.052928, 10.556378, 0.4932044, -0.00031238, -0.000002788, 0.0000000260),
    "phi": (84_381.412819, -46.811016, 0.0511268, 0.00053289, -0.000000440, -0.0000000176),
    "psi": (-0.041775, 5_038.481484, 1.5584175, -0.00018522, -0.000026452, -0.0000000148),
    "obliquity": (84_381.406, -46.836769, -0.0001831, 0.00200340, -0.000000576, -0.0000000434),
}
"""Fukushima-Williams angles from the GCRS to the mean equator and equinox of date, by powers of centuries of
TT since J2000. IAU 2006: Hilton et al. 2006, Celest. Mech. Dyn. Astron. 94, 351; with the bias: Wallace and
Capitaine 2006, A&A 459, 981, table 1. From memory; a test compares with ERFA to the last digit."""


def ecliptic_of_date(time: Time, nutation: tuple[Floats, Floats] | None = None) -> tuple[Floats, Floats]:
    """Return the rotation from GCRS axes to the true ecliptic of date, and the true obliquity.

    Precession IAU 2006 and nutation IAU 2000A, all 1365 terms, coefficients as skyfield packages them.

    Args:
        time: a skyfield time, n instants.
        nutation: in longitude and obliquity, radians, where it is known already.

    Returns:
        rotation, shape (3, 3, n), and obliquity in radians, shape (n,).
    """
    in_longitude, in_obliquity = nutationlib.iau2000a_radians(time) if nutation is None else nutation
    century = (time.tt - constants.J2000_JD) / constants.DAYS_PER_CENTURY
    gamma, phi, psi, mean = (
        np.radians(np.polynomial.polynomial.polyval(century, series) / constants.ARCSEC_PER_DEG)
        for series in BIAS_AND_PRECESSION_ARCSEC.values()
    )
    gcrs = np.repeat(np.eye(3)[..., None], century.size, axis=-1)
    to_mean_ecliptic = turned(turned(gcrs, gamma, (0, 1)), phi, (1, 2))
    return turned(to_mean_ecliptic, -(psi + in_longitude), (0, 1)), np.asarray(mean + in_obliquity)


def turned(rotation: Floats, angle_rad: Floats, rows: tuple[int, int]) -> Floats:
    """Turn the axes of rotations, shape (3, 3, n), by an angle in the plane of two of their rows."""
    a, b = rows
    c, s = np.cos(angle_rad), np.sin(angle_rad)
    out = np.array(rotation)
    out[a] = c * rotation[a] + s * rotation[b]
    out[b] = c * rotation[b] - s * rotation[a]
    return out
