"""The packaged stars and where they stand: straight motion through space, parallax apart.

A star moves along a straight line at constant speed, so its direction is (u + m t) made a unit vector, u the
direction and m the proper motion at the epoch (ESA 1997, The Hipparcos and Tycho Catalogues, SP-1200, vol. 1,
section 1.5.5, with the radial velocity zero). No radial velocities are packaged; leaving them out moves
Porrima by 0.5 arcsec and any other listed star near the ecliptic by at most 0.25 arcsec until 2650, which is
what the proper motions themselves are good for. Directions are in ICRS axes; deflection and aberration are
not in them.
"""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from functools import cache
from importlib.resources import files
from typing import Any, Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.constants import DAYS_PER_JULIAN_YEAR, J2000_JD
from wanderers.errors import UnknownNameError

RAD_PER_MAS: Final = float(np.radians(1.0 / 3_600_000.0))

TEXT_COLUMNS: Final = ("name", "bayer", "constellation", "kind", "cluster")
NUMBER_COLUMNS: Final = (
    "ra_deg",
    "dec_deg",
    "pm_ra_cosdec_mas_per_year",
    "pm_dec_mas_per_year",
    "parallax_mas",
    "v_mag",
    "b_v",
)
ABSENT_TEXT: Final = {"kind": "star"}
"""What stands for a column that a file does not have; else the empty text."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class StarCatalogue:
    """Stars and star clusters, one entry each, n in all; the arrays are read-only.

    Attributes:
        hip: Hipparcos number, 0 for a cluster, shape (n,).
        name: proper name; without one the empty text or "HIP n", as in the file.
        bayer: Bayer, Flamsteed, variable-star or Messier designation where packaged, else the empty text.
        constellation: three-letter abbreviation.
        kind: "star" or "cluster".
        cluster: name of the listed cluster that a star belongs to and would be met with, else the empty text.
        ra_deg: ICRS right ascension at the epoch, [0, 360), shape (n,).
        dec_deg: ICRS declination at the epoch, shape (n,).
        pm_ra_cosdec_mas_per_year: motion in right ascension times cosine of declination, shape (n,).
        pm_dec_mas_per_year: proper motion in declination, shape (n,).
        parallax_mas: as measured, hence below zero for some distant stars, shape (n,).
        v_mag: visual magnitude, shape (n,).
        b_v: colour index B-V, not a number where unknown, shape (n,).
        epoch_jd_tdb: instant of the places and motions.
    """

    hip: Ints
    name: tuple[str, ...]
    bayer: tuple[str, ...]
    constellation: tuple[str, ...]
    kind: tuple[str, ...]
    cluster: tuple[str, ...]
    ra_deg: Floats
    dec_deg: Floats
    pm_ra_cosdec_mas_per_year: Floats
    pm_dec_mas_per_year: Floats
    parallax_mas: Floats
    v_mag: Floats
    b_v: Floats
    epoch_jd_tdb: float = J2000_JD

    def __post_init__(self) -> None:
        """Refuse columns of unequal length and lock the arrays, which callers share."""
        for field in fields(self):
            column = getattr(self, field.name)
            if isinstance(column, np.ndarray):
                column.setflags(write=False)
            if field.name != "epoch_jd_tdb" and len(column) != self.hip.size:
                raise ValueError(f"{field.name} has {len(column)} entries, hip has {self.hip.size}")

    def __len__(self) -> int:
        return int(self.hip.size)

    @property
    def labels(self) -> tuple[str, ...]:
        """What to call each entry: its proper name, else "HIP n"."""
        return tuple(name or f"HIP {hip}" for name, hip in zip(self.name, self.hip.tolist(), strict=True))

    def index_of(self, label: str) -> int:
        """Return the index of a label, whatever its case.

        Raises:
            UnknownNameError: with the nearest labels.
        """
        labels = [known.lower() for known in self.labels]
        if label.lower() not in labels:
            raise UnknownNameError("star", label, labels)
        return labels.index(label.lower())

    def take(self, chosen: Ints | Bools) -> StarCatalogue:
        """Return the entries at the indices given, or where a mask is true, in that order."""
        indices = np.arange(len(self))[chosen]
        columns: dict[str, Any] = {key: getattr(self, key)[indices] for key in ("hip", *NUMBER_COLUMNS)}
        columns |= {key: tuple(getattr(self, key)[i] for i in indices) for key in TEXT_COLUMNS}
        return replace(self, **columns)


@cache
def field_stars() -> StarCatalogue:
    """Return every star to V 6.6, brightest first: the background of charts and of a camera's field."""
    return read_catalogue("stars.csv")


@cache
def deep_stars() -> StarCatalogue:
    """Return the field stars and, within 5 degrees of the ecliptic, those to V 9.0, brightest first.

    The frames of Uranus and Neptune hold few brighter ones. Beyond V 7.3 some stars are missing.
    """
    return joined(field_stars(), read_catalogue("faint_ecliptic_stars.csv"))


@cache
def variable_hips() -> Ints:
    """Return the Hipparcos numbers of packaged stars too variable to compare brightness with, rising."""
    text = (files("wanderers.data") / "variable_stars.csv").read_text(encoding="utf-8")
    numbers = np.array([int(line) for line in text.splitlines()[1:]], dtype=np.int64)
    numbers.setflags(write=False)
    return numbers


@cache
def ecliptic_stars() -> StarCatalogue:
    """Return the bright stars and the clusters that the Moon and the planets meet, brightest first."""
    return read_catalogue("ecliptic_stars.csv")


@cache
def star_letters() -> dict[str, str]:
    """Return what to call the stars that are met and have no proper name: their letter, as ``phi Sgr``."""
    stars = ecliptic_stars()
    pairs = zip(stars.labels, stars.bayer, strict=True)
    return {label: bayer for label, bayer in pairs if label.startswith("HIP ") and bayer}


def read_catalogue(file_name: str) -> StarCatalogue:
    """Read a packaged table of stars; its epoch is J2000.0.

    Args:
        file_name: a file of the data package in the columns that its README describes.
    """
    text = (files("wanderers.data") / file_name).read_text(encoding="utf-8")
    header, *lines = text.splitlines()
    table = dict(zip(header.split(","), zip(*(line.split(",") for line in lines), strict=True), strict=True))
    columns: dict[str, Any] = {
        key: np.array([cell or "nan" for cell in table[key]], dtype=np.float64) for key in NUMBER_COLUMNS
    }
    columns |= {key: table.get(key, (ABSENT_TEXT.get(key, ""),) * len(lines)) for key in TEXT_COLUMNS}
    return StarCatalogue(hip=np.array([int(cell or 0) for cell in table["hip"]], dtype=np.int64), **columns)


def joined(first: StarCatalogue, second: StarCatalogue) -> StarCatalogue:
    """Return the entries of two catalogues of one epoch."""
    columns: dict[str, Any] = {key: getattr(first, key) + getattr(second, key) for key in TEXT_COLUMNS}
    for key in ("hip", *NUMBER_COLUMNS):
        columns[key] = np.concatenate([getattr(first, key), getattr(second, key)])
    return replace(first, **columns)


def barycentric_directions(catalogue: StarCatalogue, jd_tdb: Floats) -> Floats:
    """Return the directions of stars as seen from the barycentre of the solar system.

    Args:
        catalogue: n stars.
        jd_tdb: TDB days, shape (t,).

    Returns:
        unit vectors in ICRS axes, shape (n, 3, t).

    Accuracy: 0.01 mas from 1550 to 2650 against a relativistic treatment of the same data.
    """
    return _unit(_along_lines(catalogue, jd_tdb))


def barycentric_direction_rates(catalogue: StarCatalogue, jd_tdb: Floats) -> Floats:
    """Return how fast the barycentric directions turn.

    Args:
        catalogue: n stars.
        jd_tdb: TDB days, shape (t,).

    Returns:
        radians per day, across the direction, in ICRS axes, shape (n, 3, t).
    """
    line = _along_lines(catalogue, jd_tdb)
    size = np.linalg.norm(line, axis=1, keepdims=True)
    direction = line / size
    motion = _epoch_motions(catalogue)[:, :, np.newaxis]
    return np.asarray((motion - direction * np.sum(direction * motion, axis=1, keepdims=True)) / size)


def astrometric_directions(catalogue: StarCatalogue, jd_tdb: Floats, observer_au: Floats) -> Floats:
    """Return the directions of stars from an observer: proper motion and parallax in, no aberration.

    Args:
        catalogue: n stars. A parallax below zero means a distance too great to measure and counts as zero.
        jd_tdb: TDB days, shape (t,).
        observer_au: barycentric position of the observer in ICRS axes, shape (3, t).

    Returns:
        unit vectors in ICRS axes, shape (n, 3, t).
    """
    parallax = _parallaxes(catalogue)[:, np.newaxis, np.newaxis]
    return _unit(_along_lines(catalogue, jd_tdb) - parallax * observer_au)


def astrometric_directions_each(
    catalogue: StarCatalogue, star: Ints, jd_tdb: Floats, observer_au: Floats
) -> Floats:
    """Return astrometric directions of one star an instant, as a root finder asks for them.

    Args:
        catalogue: the stars.
        star: index into the catalogue, shape (t,).
        jd_tdb: TDB days, shape (t,).
        observer_au: barycentric position of the observer in ICRS axes, shape (3, t).

    Returns:
        unit vectors in ICRS axes, shape (3, t).
    """
    days = jd_tdb - catalogue.epoch_jd_tdb
    line = _epoch_directions(catalogue)[star].T + _epoch_motions(catalogue)[star].T * days
    line -= _parallaxes(catalogue)[star] * observer_au
    return np.asarray(line / np.linalg.norm(line, axis=0))


def at_epoch(catalogue: StarCatalogue, jd_tdb: float) -> StarCatalogue:
    """Return the same stars with places, proper motions and parallaxes of another epoch.

    The motion through space stays as it is; the small radial velocity that it has by then is dropped again.

    Args:
        catalogue: n stars.
        jd_tdb: the new epoch, TDB days.
    """
    when = np.array([jd_tdb])
    direction = barycentric_directions(catalogue, when)[..., 0]
    rate = barycentric_direction_rates(catalogue, when)[..., 0] * DAYS_PER_JULIAN_YEAR / RAD_PER_MAS
    x, y, z = direction.T
    ra, dec = np.arctan2(y, x), np.arctan2(z, np.hypot(x, y))
    east, north = _tangents(ra, dec)
    return replace(
        catalogue,
        ra_deg=np.degrees(ra) % 360.0,
        dec_deg=np.degrees(dec),
        pm_ra_cosdec_mas_per_year=np.sum(rate * east, axis=1),
        pm_dec_mas_per_year=np.sum(rate * north, axis=1),
        parallax_mas=catalogue.parallax_mas / np.linalg.norm(_along_lines(catalogue, when)[..., 0], axis=1),
        epoch_jd_tdb=jd_tdb,
    )


def _along_lines(catalogue: StarCatalogue, jd_tdb: Floats) -> Floats:
    """Return barycentric positions in units of each star's distance at the epoch, shape (n, 3, t)."""
    days = jd_tdb - catalogue.epoch_jd_tdb
    return np.asarray(
        _epoch_directions(catalogue)[:, :, np.newaxis] + _epoch_motions(catalogue)[:, :, np.newaxis] * days
    )


def _epoch_directions(catalogue: StarCatalogue) -> Floats:
    """Return unit vectors at the epoch, shape (n, 3)."""
    ra, dec = np.radians(catalogue.ra_deg), np.radians(catalogue.dec_deg)
    return np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)], axis=1)


def _epoch_motions(catalogue: StarCatalogue) -> Floats:
    """Return the proper motions as vectors, radians per day, shape (n, 3)."""
    east, north = _tangents(np.radians(catalogue.ra_deg), np.radians(catalogue.dec_deg))
    mas_per_year = (
        catalogue.pm_ra_cosdec_mas_per_year[:, np.newaxis] * east
        + catalogue.pm_dec_mas_per_year[:, np.newaxis] * north
    )
    return np.asarray(mas_per_year * (RAD_PER_MAS / DAYS_PER_JULIAN_YEAR))


def _tangents(ra_rad: Floats, dec_rad: Floats) -> tuple[Floats, Floats]:
    """Return the unit vectors towards east and north at each direction, shape (n, 3) each."""
    zero = np.zeros_like(ra_rad)
    east = np.stack([-np.sin(ra_rad), np.cos(ra_rad), zero], axis=1)
    north = np.stack(
        [-np.sin(dec_rad) * np.cos(ra_rad), -np.sin(dec_rad) * np.sin(ra_rad), np.cos(dec_rad)], axis=1
    )
    return east, north


def _parallaxes(catalogue: StarCatalogue) -> Floats:
    """Return the inverse of each star's distance in au, none below zero, shape (n,)."""
    return np.asarray(np.maximum(catalogue.parallax_mas, 0.0) * RAD_PER_MAS)


def _unit(vectors: Floats) -> Floats:
    """Return vectors, shape (n, 3, t), brought to unit length."""
    return np.asarray(vectors / np.linalg.norm(vectors, axis=1, keepdims=True))
