"""Direct functions of time that the kinds search: differences of longitude, separations, latitudes."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tests.oracle.places import Sky, frame_matrix, latitude_deg, longitude_deg, norm, separation_deg
from tests.oracle.search import Direct, wrapped

Floats = NDArray[np.float64]

CIRCLE = 360.0


def longitude(sky: Sky, frame: str, body: str) -> Direct:
    """Give the apparent longitude (or right ascension) of a body as a function of time, degrees."""
    return lambda jd, offset: longitude_deg(frame_matrix(frame, jd, offset), sky.apparent(body, jd, offset))


def latitude(sky: Sky, frame: str, body: str) -> Direct:
    """Give the apparent latitude of a body as a function of time, degrees."""
    return lambda jd, offset: latitude_deg(frame_matrix(frame, jd, offset), sky.apparent(body, jd, offset))


def longitude_difference(sky: Sky, frame: str, body: str, other: str, target_deg: float = 0.0) -> Direct:
    """Give the longitude of ``body`` minus that of ``other`` minus a target, wrapped to +-180 degrees."""

    def difference(jd: Floats, offset: Floats) -> Floats:
        matrix = frame_matrix(frame, jd, offset)
        first = longitude_deg(matrix, sky.apparent(body, jd, offset))
        second = longitude_deg(matrix, sky.apparent(other, jd, offset))
        return wrapped(first - second - target_deg, CIRCLE)

    return difference


def separation(sky: Sky, body: str, other: str) -> Direct:
    """Give the apparent angle between two bodies as a function of time, degrees."""
    return lambda jd, offset: separation_deg(sky.apparent(body, jd, offset), sky.apparent(other, jd, offset))


def squared_chord(sky: Sky, body: str, other: str) -> Direct:
    """Give the squared chord between two directions: extreme with their angle, and smooth at zero."""
    return lambda jd, offset: norm(sky.apparent(body, jd, offset) - sky.apparent(other, jd, offset)) ** 2
