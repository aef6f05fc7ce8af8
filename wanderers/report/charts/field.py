"""The sky behind a path: which part of it a chart shows, its stars, boundaries and constellations.

Everything is turned to the equator and equinox of J2000 (ICRS axes), which stand still among the stars.
Stars stand at their places of the date, proper motion in, aberration out: at most 20 arcseconds off what
is seen beside the planet, less than the dot of a star.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Final

import numpy as np
from skyfield.framelib import ICRS_to_J2000
from skyfield.nutationlib import mean_obliquity
from skyfield.precessionlib import compute_precession

from wanderers.arrays import Floats, Ints
from wanderers.constants import ARCSEC_PER_DEG
from wanderers.ephemeris import constellations, frames, stars
from wanderers.ephemeris.stars import StarCatalogue

BOUNDARY_STEP_DEG: Final = 1.0
ECLIPTIC_STEP_DEG: Final = 0.1


@dataclass(frozen=True, slots=True)
class SkyField:
    """A part of the sky, upright on the equator, at one scale in both directions at its middle.

    Attributes:
        ra_deg: right ascension of the middle.
        dec_deg: declination of the middle.
        half_width_deg: from the middle to the left edge, along the parallel, true degrees.
        half_height_deg: from the middle to the upper edge.
    """

    ra_deg: float
    dec_deg: float
    half_width_deg: float
    half_height_deg: float

    @property
    def squeeze(self) -> float:
        """How much shorter a degree of right ascension is than one of declination."""
        return float(np.cos(np.radians(self.dec_deg)))

    def flat(self, ra_deg: Floats, dec_deg: Floats) -> Floats:
        """Return degrees east and north of the middle, true to scale there, shape (n, 2)."""
        east = (180.0 - (180.0 - (ra_deg - self.ra_deg)) % 360.0) * self.squeeze
        return np.stack([east, dec_deg - self.dec_deg], axis=-1)

    def on_axes(self, flat: Floats) -> Floats:
        """Return right ascension (without a jump) and declination of flat places, shape (n, 2)."""
        return np.stack([self.ra_deg + flat[..., 0] / self.squeeze, self.dec_deg + flat[..., 1]], axis=-1)

    def holds(self, flat: Floats, slack_deg: float = 0.0) -> np.ndarray:
        """Return which flat places lie within the field, shape (n,)."""
        wide = self.half_width_deg + slack_deg
        return np.asarray(
            (np.abs(flat[:, 0]) <= wide) & (np.abs(flat[:, 1]) <= self.half_height_deg + slack_deg)
        )


def field_around(
    ra_deg: Floats, dec_deg: Floats, *, margin: float, least_width_deg: float, shapes: tuple[float, float]
) -> SkyField:
    """Return the field that holds a path.

    Args:
        ra_deg: shape (n,).
        dec_deg: shape (n,).
        margin: room on every side, as a part of the path's larger extent.
        least_width_deg: the field is at least this wide.
        shapes: least and greatest ratio of width to height.
    """
    start = SkyField(float(ra_deg[0]), float(np.mean([dec_deg.min(), dec_deg.max()])), 0.0, 0.0)
    flat = start.flat(ra_deg, dec_deg)
    low, high = flat.min(axis=0), flat.max(axis=0)
    room = margin * float(np.max(high - low))
    width, height = (high - low + 2.0 * room).tolist()
    width = max(width, least_width_deg, height * shapes[0])
    height = max(height, width / shapes[1])
    middle = start.on_axes((low + high) / 2.0)
    return SkyField(float(middle[0]) % 360.0, float(middle[1]), width / 2.0, height / 2.0)


def coordinates_of_j2000(longitude_deg: Floats, latitude_deg: Floats) -> tuple[Floats, Floats]:
    """Return right ascension and declination of places on the mean ecliptic of J2000, shape (n,) each."""
    longitude, latitude = np.radians(longitude_deg), np.radians(latitude_deg)
    c = np.cos(latitude)
    direction = np.stack([c * np.cos(longitude), c * np.sin(longitude), np.sin(latitude)])
    return coordinates(frames.ecliptic_of_j2000().T @ direction)


def coordinates(directions: Floats) -> tuple[Floats, Floats]:
    """Return right ascension [0, 360) and declination of unit vectors in ICRS axes, shape (3, n)."""
    x, y, z = directions
    return np.degrees(np.arctan2(y, x)) % 360.0, np.degrees(np.arctan2(z, np.hypot(x, y)))


def stars_in(sky: SkyField, jd_tt: float) -> tuple[StarCatalogue, Floats]:
    """Return the stars of a field, brightest first, and their flat places at a date, shape (n, 2)."""
    catalogue = stars.field_stars()
    rough = sky.holds(sky.flat(catalogue.ra_deg, catalogue.dec_deg), slack_deg=2.0)
    near = catalogue.take(rough)
    directions = stars.barycentric_directions(near, np.array([jd_tt]))[:, :, 0]
    flat = sky.flat(*coordinates(directions.T))
    inside = sky.holds(flat)
    return near.take(inside), flat[inside]


def boundaries_in(sky: SkyField) -> Floats:
    """Return the constellation boundaries about a field as flat broken lines, NaN between, shape (n, 2)."""
    ra, dec, piece = _boundary_points()
    flat = sky.flat(ra, dec)
    touched = np.unique(piece[sky.holds(flat, slack_deg=2.0 * BOUNDARY_STEP_DEG)])
    kept = np.isin(piece, touched)
    return np.insert(flat[kept], np.flatnonzero(np.diff(piece[kept])) + 1, np.nan, axis=0)


def constellations_over(sky: SkyField, flat: Floats) -> Ints:
    """Return the constellation of flat places, as indices into ``constellations.ABBREVIATIONS``."""
    ra, dec = np.radians(sky.on_axes(flat)).T
    directions = np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
    return np.asarray(constellations.constellation_at(directions), dtype=np.int64)


def ecliptic_in(sky: SkyField) -> Floats:
    """Return the ecliptic of J2000 across a field, in order of longitude, shape (n, 2), perhaps empty."""
    longitude = np.arange(0.0, 360.0, 0.25)
    flat = sky.flat(*coordinates_of_j2000(longitude, np.zeros_like(longitude)))
    near = flat[sky.holds(flat, slack_deg=1.0)]
    return np.asarray(near[np.argsort(near[:, 0])])


def ecliptic_constellations(jd_tt: float) -> tuple[Floats, list[str]]:
    """Return where constellations begin along the mean ecliptic of date, and their names.

    Args:
        jd_tt: the date.

    Returns:
        longitudes of date, rising, to a tenth of a degree, shape (k,), and the Latin name of the
        constellation that begins at each.
    """
    to_equator = compute_precession(jd_tt) @ ICRS_to_J2000
    obliquity = np.radians(mean_obliquity(jd_tt) / ARCSEC_PER_DEG)
    to_ecliptic = frames.rotation_about_x(float(obliquity)) @ to_equator
    longitude = np.arange(0.0, 360.0, ECLIPTIC_STEP_DEG)
    angle = np.radians(longitude)
    along = constellations.constellation_at(
        to_ecliptic.T @ np.stack([np.cos(angle), np.sin(angle), 0.0 * angle])
    )
    begins = np.flatnonzero(along != np.roll(along, 1))
    names = [constellations.full_name(constellations.ABBREVIATIONS[along[number]]) for number in begins]
    return longitude[begins], names


@cache
def _boundary_points() -> tuple[Floats, Floats, Ints]:
    """Return points along all boundaries: right ascension, declination (ICRS), number of the piece."""
    pieces = constellations.boundary_segments()
    longest = np.max(np.abs(pieces[:, 2:] - pieces[:, :2]), axis=1)
    count = np.ceil(longest / BOUNDARY_STEP_DEG).astype(np.int64) + 1
    piece = np.repeat(np.arange(count.size), count)
    step = np.arange(piece.size) - np.repeat(np.cumsum(count) - count, count)
    part = (step / (count[piece] - 1))[:, np.newaxis]
    places = (1.0 - part) * pieces[piece, :2] + part * pieces[piece, 2:]
    ra, dec = coordinates(constellations.directions_of_b1875(places[:, 0], places[:, 1]))
    return ra, dec, piece
