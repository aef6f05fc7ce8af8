"""The smallest circle that holds several directions on the sky, for many instants at once."""

from __future__ import annotations

from itertools import combinations

import numpy as np

from wanderers.arrays import Floats


def smallest_circles(points: Floats) -> tuple[Floats, Floats]:
    """Return the diameter and the centre of the smallest circle around points.

    The circle rests on two points, as a diameter, or on three. Each such circle's centre is tried: the one
    from which the farthest point is nearest wins. Points must fit into half a sky.

    Args:
        points: unit vectors, shape (bodies, 3, n), at least two bodies.

    Returns:
        diameter in degrees, shape (n,), and centre as unit vectors, shape (3, n).
    """
    count, _, instants = points.shape
    best, centre = np.full(instants, np.inf), np.zeros((3, instants))
    supports = [*combinations(range(count), 2), *combinations(range(count), 3)]
    for support in supports:
        axis = _axis(points[list(support)])
        reach = ((points - axis) ** 2).sum(axis=1).max(axis=0)
        wins = reach < best
        best = np.where(wins, reach, best)
        centre = np.where(wins, axis, centre)
    radius = 2.0 * np.arcsin(np.minimum(np.sqrt(best) / 2.0, 1.0))
    return np.degrees(2.0 * radius), centre


def _axis(support: Floats) -> Floats:
    """Return the centre of the circle through two points as a diameter, or through three, shape (3, n)."""
    if support.shape[0] == 2:
        axis = support[0] + support[1]
    else:
        axis = np.cross(support[1] - support[0], support[2] - support[0], axis=0)
        axis = axis * np.where(np.einsum("in,in->n", axis, support[0]) < 0.0, -1.0, 1.0)
    size = np.sqrt(np.einsum("in,in->n", axis, axis))
    return np.asarray(np.divide(axis, size, out=np.zeros_like(axis), where=size > 0.0))
