"""Dense samples of apparent places on an even grid of instants."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tests.oracle.places import Sky, frame_matrix, latitude_deg, longitude_deg

Floats = NDArray[np.float64]

FRAMES = ("ecliptic", "equator", "j2000")


@dataclass(frozen=True, slots=True)
class Grid:
    """Directions and frames at each sample.

    Attributes:
        jd_tt: shape (n,), TT days.
        step_days: between samples.
        direction: for each body the apparent unit directions, shape (n, 3), GCRS axes.
        matrix: for each frame the rotations from GCRS axes, shape (n, 3, 3).
    """

    jd_tt: Floats
    step_days: float
    direction: dict[str, Floats]
    matrix: dict[str, Floats]

    def longitude_deg(self, frame: str, body: str) -> Floats:
        """Give longitudes (right ascensions) of a body at the samples, [0, 360)."""
        return longitude_deg(self.matrix[frame], self.direction[body])

    def latitude_deg(self, frame: str, body: str) -> Floats:
        """Give latitudes (declinations) of a body at the samples."""
        return latitude_deg(self.matrix[frame], self.direction[body])


def sample(
    sky: Sky, bodies: tuple[str, ...], span: tuple[float, float], step_days: float, margin: int
) -> Grid:
    """Evaluate bodies and frames over a span and some samples beyond it on either side."""
    count = int(np.ceil((span[1] - span[0]) / step_days)) + 1
    jd_tt = span[0] + step_days * np.arange(-margin, count + margin, dtype=np.float64)
    return Grid(
        jd_tt,
        step_days,
        {body: sky.apparent(body, jd_tt) for body in bodies},
        {frame: frame_matrix(frame, jd_tt) for frame in FRAMES},
    )
