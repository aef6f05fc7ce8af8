"""The IAU constellation of a direction, and the boundaries between constellations.

Delporte drew the boundaries (1930, Délimitation scientifique des constellations) along right ascensions
and declinations of the mean equator and equinox of B1875.0. The lines come from Roman 1987, PASP 99, 695,
restored to whole seconds of right ascension and minutes of declination, as a grid of cells that skyfield
packages.

Directions are turned to the mean equator, as Roman does. skyfield's own look-up asks for the epoch 1875 and
thereby gets the true equator: the nutation of that day (6 arcseconds in longitude, 8 in obliquity) moves
its boundaries by up to 10 arcseconds, four minutes of the Sun's motion and hours of Neptune's.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray
from skyfield.constellationlib import load_constellation_names
from skyfield.framelib import ICRS_to_J2000
from skyfield.functions import load_bundled_npy
from skyfield.precessionlib import compute_precession

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.frames import ecliptic_of_j2000
from wanderers.errors import UnknownNameError

Indices = NDArray[np.int16]

B1875_JD: Final = 2_415_020.31352 - 25.0 * 365.242198781
"""Besselian epoch 1875.0, days. Lieske 1979, A&A 73, 282, eq. 3."""

ABBREVIATIONS: Final = tuple(
    (
        "And Ant Aps Aql Aqr Ara Ari Aur Boo CMa CMi CVn Cae Cam Cap Car Cas Cen Cep Cet Cha Cir "
        "Cnc Col Com CrA CrB Crt Cru Crv Cyg Del Dor Dra Equ Eri For Gem Gru Her Hor Hya Hyi Ind "
        "LMi Lac Leo Lep Lib Lup Lyn Lyr Men Mic Mon Mus Nor Oct Oph Ori Pav Peg Per Phe Pic PsA "
        "Psc Pup Pyx Ret Scl Sco Sct Ser Sex Sge Sgr Tau Tel TrA Tri Tuc UMa UMi Vel Vir Vol Vul"
    ).split()
)
"""The three-letter names of the 88 constellations; the look-up returns indices into this tuple.

IAU 1922, Transactions 1, 158, with the spelling in use since.
"""

SAMPLES_PER_PIECE: Final = 9
"""Points at which the ecliptic latitude of a piece of boundary is tried; pieces there are below 8 degrees."""


@dataclass(frozen=True, slots=True)
class _Cells:
    """The sky of B1875 cut at every boundary value.

    Attributes:
        ra_deg: edges from 0 to 360, shape (rows + 1,), rising.
        dec_deg: edges from -90 to 90, shape (columns + 1,), rising.
        constellation: index into ABBREVIATIONS of each cell, shape (rows, columns).
    """

    ra_deg: Floats
    dec_deg: Floats
    constellation: Indices


def constellation_at(gcrs_directions: Floats) -> Indices:
    """Return the constellation of each direction as an index into ABBREVIATIONS.

    Args:
        gcrs_directions: ICRS or GCRS axes, any positive length, shape (3, n).

    Returns:
        shape (n,).
    """
    return constellation_at_b1875(*b1875_coordinates(gcrs_directions))


def constellation_at_b1875(ra_deg: Floats, dec_deg: Floats) -> Indices:
    """Return the constellation of coordinates on the mean equator and equinox of B1875.0.

    Args:
        ra_deg: right ascension, [0, 360), shape (n,).
        dec_deg: declination, shape (n,).

    Returns:
        index into ABBREVIATIONS, shape (n,).
    """
    cells = _cells()
    row = np.searchsorted(cells.ra_deg[1:-1], ra_deg)
    column = np.searchsorted(cells.dec_deg[1:-1], dec_deg, side="right")
    return np.asarray(cells.constellation[row, column])


def full_name(abbreviation: str) -> str:
    """Return the Latin name of a constellation.

    Args:
        abbreviation: one of ABBREVIATIONS, in any case.

    Raises:
        UnknownNameError: with the nearest abbreviations.
    """
    names = _full_names()
    if abbreviation.lower() not in names:
        raise UnknownNameError("constellation", abbreviation, names)
    return names[abbreviation.lower()]


@cache
def b1875_rotation() -> Floats:
    """Return the rotation, shape (3, 3), from GCRS axes to the mean equator and equinox of B1875.0.

    Precession IAU 2006 (Capitaine et al. 2003, A&A 412, 567) and frame bias; no nutation. TT stands in for
    TDB. The array is read-only.
    """
    rotation = np.asarray(compute_precession(B1875_JD) @ ICRS_to_J2000)
    rotation.setflags(write=False)
    return rotation


def b1875_coordinates(gcrs_directions: Floats) -> tuple[Floats, Floats]:
    """Return right ascension [0, 360) and declination on the mean equator and equinox of B1875.0.

    Args:
        gcrs_directions: any positive length, shape (3, n).

    Returns:
        degrees, shape (n,) each.
    """
    x, y, z = b1875_rotation() @ gcrs_directions
    return np.degrees(np.arctan2(y, x)) % 360.0, np.degrees(np.arctan2(z, np.sqrt(x * x + y * y)))


def directions_of_b1875(ra_deg: Floats, dec_deg: Floats) -> Floats:
    """Return unit vectors in GCRS axes, shape (3, n), of B1875 coordinates in degrees, shape (n,) each."""
    ra, dec = np.radians(ra_deg), np.radians(dec_deg)
    of_date = np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
    return np.asarray(b1875_rotation().T @ of_date)


def boundary_lines(ecliptic_latitude_limit_deg: float = 20.0) -> tuple[Floats, Floats]:
    """Return the right ascensions and declinations at which a wanderer may change constellation.

    Right ascension 0 is among them, so a search for crossings must compare angles, not plain numbers. A
    crossing of a line may lie off the part that divides: compare the constellations on either side.

    Args:
        ecliptic_latitude_limit_deg: lines are kept where a dividing part of them comes this close to the
            ecliptic of J2000; 20 degrees holds all bodies (Pluto reaches 18).

    Returns:
        distinct right ascensions and declinations, degrees, B1875, rising, shape (k,) and (m,).
    """
    pieces = _dividing_pieces()
    part = np.linspace(0.0, 1.0, SAMPLES_PER_PIECE)[:, np.newaxis]
    ra = (1.0 - part) * pieces[:, 0] + part * pieces[:, 2]
    dec = (1.0 - part) * pieces[:, 1] + part * pieces[:, 3]
    ecliptic = ecliptic_of_j2000() @ directions_of_b1875(ra.ravel(), dec.ravel())
    latitude_deg = np.degrees(np.arcsin(ecliptic[2])).reshape(ra.shape)
    near = pieces[np.abs(latitude_deg).min(axis=0) <= ecliptic_latitude_limit_deg]
    along_ra = near[:, 0] == near[:, 2]
    return np.unique(near[along_ra, 0]), np.unique(near[~along_ra, 1])


def boundary_segments() -> Floats:
    """Return the boundaries as straight pieces along right ascensions and declinations of B1875.0.

    Returns:
        columns ra1, dec1, ra2, dec2, degrees, shape (k, 4); ra2 may be 360. Pieces are as long as they can
        be without passing right ascension 0; along a declination they are no great circles, so a chart needs
        points in between (``directions_of_b1875`` turns them).
    """
    cells = _cells()
    divides_ra, divides_dec = _divisions(cells.constellation)
    line, first, last = _runs(divides_ra)
    along_ra = (cells.ra_deg[line], cells.dec_deg[first], cells.ra_deg[line], cells.dec_deg[last])
    line, first, last = _runs(divides_dec.T)
    along_dec = (cells.ra_deg[first], cells.dec_deg[line + 1], cells.ra_deg[last], cells.dec_deg[line + 1])
    return np.vstack([np.column_stack(along_ra), np.column_stack(along_dec)])


def _divisions(constellation: Indices) -> tuple[Bools, Bools]:
    """Return where cells differ from those at smaller right ascension and at greater declination.

    Returns:
        shape (rows, columns), row 0 being compared with the last, and shape (rows, columns - 1).
    """
    return constellation != np.roll(constellation, 1, axis=0), constellation[:, 1:] != constellation[:, :-1]


def _dividing_pieces() -> Floats:
    """Return every side of a cell that divides two constellations: ra1, dec1, ra2, dec2, shape (k, 4)."""
    cells = _cells()
    divides_ra, divides_dec = _divisions(cells.constellation)
    i, j = np.nonzero(divides_ra)
    along_ra = (cells.ra_deg[i], cells.dec_deg[j], cells.ra_deg[i], cells.dec_deg[j + 1])
    i, j = np.nonzero(divides_dec)
    along_dec = (cells.ra_deg[i], cells.dec_deg[j + 1], cells.ra_deg[i + 1], cells.dec_deg[j + 1])
    return np.vstack([np.column_stack(along_ra), np.column_stack(along_dec)])


def _runs(flags: Bools) -> tuple[Ints, Ints, Ints]:
    """Return each unbroken run of true values along rows: its row, first column and column after its last."""
    steps = np.diff(np.pad(flags, ((0, 0), (1, 1))).astype(np.int8), axis=1)
    row, first = np.nonzero(steps == 1)
    _, last = np.nonzero(steps == -1)
    return row, first, last


@cache
def _cells() -> _Cells:
    """Read the packaged grid; its last two columns lie beyond the pole and are dropped."""
    packaged = load_bundled_npy("constellations.npz")
    index_here = [ABBREVIATIONS.index(str(name)) for name in packaged["indexed_abbreviations"]]
    columns = packaged["sorted_dec"].size + 1
    constellation = np.array(index_here, dtype=np.int16)[packaged["radec_to_index"][:, :columns]]
    return _Cells(
        ra_deg=np.concatenate([[0.0], 15.0 * packaged["sorted_ra"], [360.0]]),
        dec_deg=np.concatenate([[-90.0], packaged["sorted_dec"], [90.0]]),
        constellation=constellation,
    )


@cache
def _full_names() -> dict[str, str]:
    """Return the Latin names by lower-case abbreviation."""
    return {abbreviation.lower(): name for abbreviation, name in load_constellation_names()}
