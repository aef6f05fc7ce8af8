"""The path of a body among the stars: how far it has come along it, how it bends, where it crosses itself.

Directions are geocentric, apparent and in GCRS axes (J2000 to 0.02 arcseconds). A site's parallax moves a
planet by half an arcminute at most and is left out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

STEP_DAYS: Final = 0.25
"""A planet moves half a degree in that time at most, and no path bends noticeably within it."""
CROSSING_STRIDE: Final = 4
"""Samples from which a crossing is first looked for: one a day; a loop takes weeks."""
NEWTON_ROUNDS: Final = 8
CROSSED_DEG: Final = 1e-6
"""Both passages must come to one place within this, else there is no crossing."""


@dataclass(frozen=True, slots=True)
class Path:
    """A body's path, arrays of shape (n,).

    Attributes:
        body: whose.
        jd: TT, rising.
        direction: unit vectors in GCRS axes, shape (3, n).
        along_deg: arc length from the first sample.
        turned_deg: by how much the direction of motion has turned since, all turns counted positive.
    """

    body: Body
    jd: Floats
    direction: Floats
    along_deg: Floats
    turned_deg: Floats

    def along_at(self, jd: Floats) -> Floats:
        """Return the arc length at instants, shape (k,), degrees."""
        return np.asarray(np.interp(jd, self.jd, self.along_deg))

    def reached_deg(self, jd_tt: float) -> float:
        """Return the arc length at one instant, degrees."""
        return float(self.along_at(np.array([jd_tt]))[0])

    def turned_at(self, jd: Floats) -> Floats:
        """Return the sum of all turns at instants, shape (k,), degrees."""
        return np.asarray(np.interp(jd, self.jd, self.turned_deg))

    def bend_at(self, jd: Floats) -> Floats:
        """Return the curvature at instants, shape (k,): degrees of turning a degree of path, over a day."""
        turned = self.turned_at(jd + 0.5) - self.turned_at(jd - 0.5)
        moved = self.along_at(jd + 0.5) - self.along_at(jd - 0.5)
        return np.asarray(turned / np.maximum(moved, 1e-9))


def path_of(store: TrackStore, body: Body, jd_from: float, jd_to: float) -> Path:
    """Follow a body over a span, TT."""
    sky = Sky(store.tracks(jd_from, jd_to))
    jd = np.linspace(jd_from, jd_to, int(np.ceil((jd_to - jd_from) / STEP_DAYS)) + 1)
    direction = direction_at(sky, body, jd)
    return Path(body, jd, direction, arc_length_deg(direction), turning_deg(direction))


def arc_length_deg(direction: Floats) -> Floats:
    """Return the cumulative length of a chain of unit vectors, shape (3, n), degrees, shape (n,)."""
    steps = vectors.separation_deg(direction[:, :-1], direction[:, 1:])
    return np.concatenate([[0.0], np.cumsum(steps)])


def turning_deg(direction: Floats) -> Floats:
    """Return the cumulative turning of a chain of unit vectors, shape (3, n), degrees, shape (n,).

    The turn at a sample is the angle between the great circles through it and its two neighbours.
    """
    normal = np.cross(direction[:, :-1], direction[:, 1:], axis=0)
    across = np.linalg.norm(np.cross(normal[:, :-1], normal[:, 1:], axis=0), axis=0)
    along = np.einsum("in,in->n", normal[:, :-1], normal[:, 1:])
    turn = np.degrees(np.arctan2(across, along))
    return np.concatenate([[0.0], np.cumsum(turn), [np.sum(turn)]])


def direction_at(sky: Sky, body: Body, jd: Floats) -> Floats:
    """Return apparent unit directions in GCRS axes, shape (3, n)."""
    return np.asarray(sky.apparent(np.full(jd.size, body.order), jd)[0])


def crossing_jd(store: TrackStore, path: Path) -> tuple[float, float] | None:
    """Find the two instants at which a body passes the place where its path crosses itself.

    The path is drawn on the plane that touches the sphere at its middle, where great circles are straight
    lines; every pair of its daily pieces is tried, the outermost crossing taken and both instants refined
    on the real path.

    Returns:
        TT of the first and the second passage, or None where the path does not cross itself.
    """
    axes = _axes(path.direction)
    plane = _project(axes, path.direction[:, ::CROSSING_STRIDE])
    pair = outermost_crossing(plane)
    if pair is None:
        return None
    sky = Sky(store.tracks(float(path.jd[0]), float(path.jd[-1])))
    jd = path.jd[::CROSSING_STRIDE][np.array(pair)] + CROSSING_STRIDE * STEP_DAYS / 2.0
    return _refined(sky, path.body, axes, jd)


def outermost_crossing(plane: Floats) -> tuple[int, int] | None:
    """Return the pieces of a chain of points that cross and lie farthest apart in it.

    Args:
        plane: points, shape (2, n); piece ``k`` runs from point ``k`` to the next.
    """
    start, end = plane[:, :-1], plane[:, 1:]
    side_of_start, side_of_end = _sides(start, end, start), _sides(start, end, end)
    parted = side_of_start * side_of_end < 0.0  # [i, j]: piece j lies on both sides of the line of piece i
    first, second = np.nonzero(np.triu(parted & parted.T, k=2))
    if first.size == 0:
        return None
    widest = int(np.argmax(second - first))
    return int(first[widest]), int(second[widest])


def _sides(start: Floats, end: Floats, point: Floats) -> Floats:
    """Return on which side of each piece's line (rows) each point (columns) lies."""
    along = (end - start)[:, :, None]
    to_point = point[:, None, :] - start[:, :, None]
    return np.asarray(along[0] * to_point[1] - along[1] * to_point[0])


def _refined(sky: Sky, body: Body, axes: Floats, jd: Floats) -> tuple[float, float] | None:
    """Bring two instants to one place by Newton steps in the plane."""
    target: Ints = np.full(2, body.order)
    for _ in range(NEWTON_ROUNDS):
        place = vectors.rotate(axes, sky.apparent(target, jd, 1))
        flat = place[0, :2] / place[0, 2]
        rate = (place[1, :2] - flat * place[1, 2]) / place[0, 2]
        matrix = np.stack([rate[:, 0], -rate[:, 1]], axis=1)
        if abs(np.linalg.det(matrix)) < 1e-18:
            return None
        jd = jd - np.linalg.solve(matrix, flat[:, 0] - flat[:, 1])
    met: Bools = (
        vectors.separation_deg(*(direction_at(sky, body, jd[k : k + 1]) for k in (0, 1))) < CROSSED_DEG
    )
    return (float(jd[0]), float(jd[1])) if met[0] else None


def _axes(direction: Floats) -> Floats:
    """Return the rotation that brings the middle of directions, shape (3, n), to the third axis."""
    middle = direction.mean(axis=1)
    middle = middle / np.linalg.norm(middle)
    across = np.cross([0.0, 0.0, 1.0], middle)
    across = across / np.linalg.norm(across)
    return np.stack([across, np.cross(middle, across), middle])


def _project(axes: Floats, direction: Floats) -> Floats:
    """Project directions on the plane that touches the sphere at the third axis, shape (2, n)."""
    turned = axes @ direction
    return np.asarray(turned[:2] / turned[2])
