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
    axes = np.concatenate([_between_two(points), *_around_three(points)])
    reach = np.zeros((axes.shape[0], points.shape[-1]))
    for point in points:
        np.maximum(reach, ((point - axes) ** 2).sum(axis=1), out=reach)
    winner, instant = reach.argmin(axis=0), np.arange(points.shape[-1])
    radius = 2.0 * np.arcsin(np.minimum(np.sqrt(reach[winner, instant]) / 2.0, 1.0))
    return np.degrees(2.0 * radius), axes[winner, :, instant].T


def _between_two(points: Floats) -> Floats:
    """Return the centres of the circles that have two points as ends of a diameter, shape (pairs, 3, n)."""
    first, second = np.array(list(combinations(range(points.shape[0]), 2))).T
    return _unit(points[first] + points[second])


def _around_three(points: Floats) -> list[Floats]:
    """Return the centres of the circles through three points, shape (triples, 3, n), if there are three."""
    triples = np.array(list(combinations(range(points.shape[0]), 3)), dtype=np.int64).reshape(-1, 3)
    if triples.size == 0:
        return []
    one, two, three = (points[places] for places in triples.T)
    axis = _cross(two - one, three - one)
    return [_unit(axis * np.where(_dot(axis, one)[:, None] < 0.0, -1.0, 1.0))]


def _cross(a: Floats, b: Floats) -> Floats:
    """Return cross products of vectors, shape (k, 3, n)."""
    (x, y, z), (u, v, w) = a.transpose(1, 0, 2), b.transpose(1, 0, 2)
    return np.stack([y * w - z * v, z * u - x * w, x * v - y * u], axis=1)


def _dot(a: Floats, b: Floats) -> Floats:
    """Return dot products of vectors, shape (k, n)."""
    return np.asarray(np.einsum("kin,kin->kn", a, b))


def _unit(axis: Floats) -> Floats:
    """Return vectors brought to unit length, zero where they vanish, shape (k, 3, n)."""
    size = np.sqrt(_dot(axis, axis))[:, None]
    return np.asarray(np.divide(axis, size, out=np.zeros_like(axis), where=size > 0.0))
