"""The smallest circle that holds several directions on the sky, for many instants at once."""

from __future__ import annotations

from itertools import combinations
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats

SLACK: Final = 1e-13
"""By how much a point on the circle may seem to lie outside, in the cosine."""


def smallest_circles(points: Floats) -> tuple[Floats, Floats]:
    """Return the diameter and the centre of the smallest circle around points.

    The circle rests on two points, as a diameter, or on three: every such circle is tried, and the smallest
    that holds all points wins. Points must fit into half a sky.

    Args:
        points: unit vectors, shape (bodies, 3, n), at least two bodies.

    Returns:
        diameter in degrees, shape (n,), and centre as unit vectors, shape (3, n).
    """
    count, _, instants = points.shape
    best = np.full(instants, -2.0)  # cosine of the radius: the greatest is the smallest circle
    centre = np.zeros((3, instants))
    supports = [*combinations(range(count), 2), *combinations(range(count), 3)]
    for support in supports:
        axis = _axis(points[list(support)])
        cosine = np.einsum("in,in->n", axis, points[support[0]])
        wins = (cosine > best) & _holds(axis, cosine, points)
        best = np.where(wins, cosine, best)
        centre = np.where(wins, axis, centre)
    radius = _angle(centre, points)
    return np.asarray(2.0 * radius), centre


def _axis(support: Floats) -> Floats:
    """Return the centre of the circle through two points as a diameter, or through three, shape (3, n)."""
    if support.shape[0] == 2:
        axis = support[0] + support[1]
    else:
        axis = np.cross(support[1] - support[0], support[2] - support[0], axis=0)
        axis = axis * np.where(np.einsum("in,in->n", axis, support[0]) < 0.0, -1.0, 1.0)
    size = np.sqrt(np.einsum("in,in->n", axis, axis))
    return np.asarray(np.divide(axis, size, out=np.zeros_like(axis), where=size > 0.0))


def _holds(axis: Floats, cosine: Floats, points: Floats) -> Bools:
    """Return where the circle holds every point."""
    return np.asarray((np.einsum("in,bin->bn", axis, points) >= cosine - SLACK).all(axis=0))


def _angle(centre: Floats, points: Floats) -> Floats:
    """Return the largest angle between the centre and any point, degrees, exact for small ones."""
    chord = np.sqrt(((points - centre) ** 2).sum(axis=1))
    return np.asarray(np.degrees(2.0 * np.arcsin(np.minimum(chord / 2.0, 1.0))).max(axis=0))
