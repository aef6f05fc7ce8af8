"""Every target sampled once on a grid; all finders read the same samples."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Floats
from wanderers.ephemeris import places, stars, vectors
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.deflection import deflection
from wanderers.ephemeris.frames import Frame, ecliptic_of_j2000
from wanderers.ephemeris.sky import SUN, Sky, bent, rotation_from
from wanderers.ephemeris.tracks import EARTH_POSITION, POSITION

GRID_ORIGIN_JD: Final = 2_287_184.5
"""Grids are cut from one raster, so that results do not depend on where a span begins."""


@dataclass(frozen=True, slots=True)
class Samples:
    """Stacks of derivatives up to the second on one grid.

    Attributes:
        sky: what was sampled.
        jd: TT, shape (n,).
        directions: by target number, apparent unit directions in GCRS axes, shape (3, 3, n).
        rotations: by frame, as :meth:`wanderers.ephemeris.sky.Sky.rotation` returns them.
    """

    sky: Sky
    jd: Floats
    directions: Mapping[int, Floats]
    rotations: Mapping[Frame, Floats]

    def longitude_deg(self, target: int, frame: Frame) -> Floats:
        """Return the stack of longitude or right ascension of a target, shape (3, n)."""
        return vectors.longitude_in(self.rotations[frame], self.directions[target])

    def longitudes_deg(self, targets: Sequence[int], frame: Frame) -> Floats:
        """Return the stacks of several targets, shape (targets, 3, n)."""
        return np.stack([self.longitude_deg(target, frame) for target in targets])


def grid(jd_from: float, jd_to: float, step_days: float, limits: tuple[float, float]) -> Floats:
    """Return the raster points around a span, two steps beyond each end, cut to the limits.

    The limits themselves stand in for raster points beyond them.
    """
    first = np.floor((jd_from - GRID_ORIGIN_JD) / step_days) - 2
    last = np.ceil((jd_to - GRID_ORIGIN_JD) / step_days) + 2
    points = GRID_ORIGIN_JD + step_days * np.arange(first, last + 1)
    return np.unique(np.clip(points, *limits))


def sample(sky: Sky, jd: Floats, targets: Sequence[int]) -> Samples:
    """Sample bodies on a grid, second derivatives included."""
    sun = sky.tracks.evaluate_grid(BODIES[SUN], jd, POSITION, 2)
    observer = sky.tracks.observer.evaluate_grid(np.array([0]), jd, slice(0, 10), 2)[0]
    nowhere = np.zeros(jd.size, dtype=np.bool_)
    directions = {}
    for target in targets:
        position = sun if target == SUN else sky.tracks.evaluate_grid(BODIES[target], jd, POSITION, 2)
        directions[target] = bent(position, sun[:2], ~nowhere if target == SUN else nowhere)
    rotations = {frame: rotation_from(observer, frame) for frame in (Frame.ECLIPTIC, Frame.EQUATOR)}
    return Samples(sky, jd, directions, rotations | {Frame.J2000: ecliptic_of_j2000()})


def sample_stars(samples: Samples) -> Floats:
    """Sample the sky's stars on the grid of other samples.

    Returns:
        apparent unit directions in GCRS axes and their rates, shape (stars, 2, 3, n); the rates are
        differences along the grid, good enough to steer a search.
    """
    sky, jd = samples.sky, samples.jd
    if sky.catalogue is None:
        raise LookupError("this sky holds no stars")
    earth = sky.tracks.observer.evaluate_grid(np.array([0]), jd, EARTH_POSITION, 1)[0]
    sun = sky.tracks.evaluate_grid(BODIES[SUN], jd, POSITION)[0]
    lines = stars.astrometric_directions(sky.catalogue, jd, earth[0])
    count = lines.shape[0]
    flat = np.ascontiguousarray(lines.transpose(1, 0, 2)).reshape(3, -1)
    seen = places.aberrated(flat, np.tile(earth[1], count))
    seen += deflection(seen, np.tile(sun, count), at_infinity=True)
    directions = seen.reshape(3, count, -1).transpose(1, 0, 2)
    return np.stack([directions, np.gradient(directions, jd, axis=2)], axis=1)
