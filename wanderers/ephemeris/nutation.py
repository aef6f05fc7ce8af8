"""Nutation at the nodes of many short segments at once.

The series is IAU 2000A with all its 1365 terms (IERS Conventions (2003), chapter 5), its coefficients those
that skyfield packages. Every term is the sine and cosine of an angle that grows steadily through a segment of
days, so by the addition theorem

    sin(A + B) = sin A cos B + cos A sin B,   A at the segment's middle, B grown since,

the sum over the terms is a matrix product of segments by nodes, and angles are taken once a segment instead
of once a node: the same figures at a tenth of the work.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from typing import Final

import numpy as np
from skyfield import nutationlib

from wanderers.arrays import Floats
from wanderers.constants import J2000_JD

DAYS_PER_CENTURY: Final = 36_525.0
RAD_PER_UNIT: Final = float(np.radians(1e-7 / 3600.0))
"""The series is in tenths of a microsecond of arc."""

SEGMENTS_AT_ONCE: Final = 64
"""Segments that share the angles' rates: over 1000 days these drift by a second of arc a century at most, so
that a term is off by less than a hundred-millionth of itself at the end of a segment of 16 days."""


@dataclass(frozen=True, slots=True)
class _Series:
    """Terms: ``multiples`` of the 19 arguments, shape (terms, 19), and factors, shape (2, terms) each.

    The factors are those of the longitude and of the obliquity.
    """

    multiples: Floats
    of_sine: Floats
    of_cosine: Floats


def nutation_at_nodes(middle_jd: Floats, half_days: Floats, nodes: Floats) -> tuple[Floats, Floats]:
    """Return nutation in longitude and obliquity, radians.

    Args:
        middle_jd: TT, middles of the segments, rising, shape (s,).
        half_days: half their lengths, 8 days at most, shape (s,).
        nodes: places in [-1, 1], shape (k,).

    Returns:
        shape (s, k) each.
    """
    out = np.empty((2, middle_jd.size, nodes.size))
    unequal = (np.flatnonzero(np.diff(half_days)) + 1).tolist()
    edges = sorted({*range(0, middle_jd.size, SEGMENTS_AT_ONCE), *unequal, middle_jd.size})
    for first, last in pairwise(edges):
        out[:, first:last] = _of_equal_segments(middle_jd[first:last], half_days[first] * nodes)
    return out[0], out[1]


def _of_equal_segments(middle_jd: Floats, since_middle_days: Floats) -> Floats:
    """Return nutation in longitude and obliquity, radians, shape (2, s, k)."""
    middle, since = (middle_jd - J2000_JD) / DAYS_PER_CENTURY, since_middle_days / DAYS_PER_CENTURY
    steady, growing = (_sums(series, middle, since) for series in _series())
    return np.asarray((steady + growing * np.add.outer(middle, since)) * RAD_PER_UNIT)


def _sums(series: _Series, middle: Floats, since: Floats) -> Floats:
    """Sum the terms at centuries ``middle`` + ``since``, shape (2, s, k)."""
    angle = _arguments(middle).T @ series.multiples.T
    grown = np.outer(series.multiples @ _rates(float(middle.mean())), since)
    sine, cosine, basis = np.sin(angle), np.cos(angle), np.vstack([np.cos(grown), np.sin(grown)])
    return np.stack(
        [
            np.hstack([p * sine + q * cosine, p * cosine - q * sine]) @ basis
            for p, q in zip(series.of_sine, series.of_cosine, strict=True)
        ]
    )


def _arguments(centuries: Floats) -> Floats:
    """Return Delaunay's arguments, the planets' longitudes and general precession, rad, shape (19, s)."""
    planetary = np.outer(nutationlib.anomaly_coefficient, centuries) + nutationlib.anomaly_constant[:, None]
    planetary[-1] *= centuries
    return np.vstack([nutationlib.fundamental_arguments(centuries), planetary])


def _rates(centuries: float) -> Floats:
    """Return how the arguments grow, rad per century, shape (19,)."""
    powers = (nutationlib.fa1, nutationlib.fa2, nutationlib.fa3, nutationlib.fa4)
    delaunay = sum(power[:, 0] * (n + 1) * centuries**n for n, power in enumerate(powers))
    planetary = nutationlib.anomaly_coefficient.copy()
    planetary[-1] = 2.0 * planetary[-1] * centuries + nutationlib.anomaly_constant[-1]
    return np.concatenate([np.radians(delaunay / 3600.0), planetary])


@cache
def _series() -> tuple[_Series, _Series]:
    """Return the steady terms, lunisolar and planetary, and how the few that grow do so per century."""
    moon, planets = nutationlib.nals_t, nutationlib.napl_t
    multiples = np.zeros((len(moon) + len(planets), moon.shape[1] + planets.shape[1]))
    multiples[: len(moon), : moon.shape[1]] = moon
    multiples[len(moon) :, moon.shape[1] :] = planets
    longitude = nutationlib.lunisolar_longitude_coefficients.T
    obliquity = nutationlib.lunisolar_obliquity_coefficients.T
    grows = (longitude[1] != 0.0) | (obliquity[1] != 0.0)
    still = np.zeros(grows.sum())
    growing = _Series(
        multiples[: len(moon)][grows],
        np.stack([longitude[1][grows], still]),
        np.stack([still, obliquity[1][grows]]),
    )
    of_sine, of_cosine = np.zeros((2, 2, len(multiples)))
    of_sine[:, : len(moon)] = longitude[0], obliquity[2]
    of_cosine[:, : len(moon)] = longitude[2], obliquity[0]
    by_planets = (nutationlib.nutation_coefficients_longitude, nutationlib.nutation_coefficients_obliquity)
    for row, coefficients in enumerate(by_planets):
        of_sine[row, len(moon) :], of_cosine[row, len(moon) :] = coefficients.T
    return _Series(multiples, of_sine, of_cosine), growing
