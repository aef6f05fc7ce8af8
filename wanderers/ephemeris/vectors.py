"""Vectors that carry their own derivatives.

A *stack* is an array whose first axis is the order of the time derivative: ``stack[0]`` the value,
``stack[1]`` the rate per day, ``stack[2]`` the second derivative. Vector stacks have shape
(order + 1, 3, n), scalar stacks (order + 1, n). The product rule does the rest.
"""

from __future__ import annotations

from math import comb

import numpy as np

from wanderers.arrays import Floats


def dot(a: Floats, b: Floats) -> Floats:
    """Return the scalar stack of the dot product of two vector stacks of equal order."""
    out = np.zeros((a.shape[0], a.shape[-1]))
    for d in range(a.shape[0]):
        for k in range(d + 1):
            out[d] += comb(d, k) * np.einsum("in,in->n", a[k], b[d - k])
    return out


def square_root(a: Floats) -> Floats:
    """Return the stack of the square root of a positive scalar stack, order at most 2."""
    out = np.empty_like(a)
    out[0] = np.sqrt(a[0])
    if a.shape[0] > 1:
        out[1] = a[1] / (2.0 * out[0])
    if a.shape[0] > 2:
        out[2] = (a[2] - 2.0 * out[1] ** 2) / (2.0 * out[0])
    return out


def unit(a: Floats) -> Floats:
    """Return the stack of the unit vector along a vector stack, order at most 2."""
    size = square_root(dot(a, a))
    out = np.empty_like(a)
    out[0] = a[0] / size[0]
    if a.shape[0] > 1:
        out[1] = (a[1] - size[1] * out[0]) / size[0]
    if a.shape[0] > 2:
        out[2] = (a[2] - 2.0 * size[1] * out[1] - size[2] * out[0]) / size[0]
    return out


def rotate(rotation: Floats, a: Floats) -> Floats:
    """Return a vector stack seen in a rotating frame.

    Args:
        rotation: shape (order + 1, 3, 3, n), or (3, 3) when it does not change; or some rows of it.
        a: shape (order + 1, 3, n).
    """
    if rotation.ndim == 2:
        return np.asarray(np.einsum("ij,djn->din", rotation, a))
    out = np.zeros((a.shape[0], rotation.shape[1], a.shape[-1]))
    for d in range(a.shape[0]):
        for k in range(d + 1):
            out[d] += comb(d, k) * np.einsum("ijn,jn->in", rotation[k], a[d - k])
    return out


def scaled(factor: Floats, a: Floats) -> Floats:
    """Return the stack of a scalar stack, shape (order + 1, n), times a vector stack of the same order."""
    out = np.zeros_like(a)
    for d in range(a.shape[0]):
        for k in range(d + 1):
            out[d] += (comb(d, k) * factor[k]) * a[d - k]
    return out


def longitude_in(rotation: Floats, a: Floats) -> Floats:
    """Return the stack of the longitude of a vector stack in a rotating frame; see :func:`rotate`."""
    rows = rotation[:2] if rotation.ndim == 2 else rotation[:, :2]  # a longitude needs no height
    return longitude_deg(rotate(rows, a))


def turned_about_x(a: Floats, angle_rad: Floats) -> Floats:
    """Return vectors, shape (1, 3, n), in axes turned back about x by an angle, shape (n,).

    By the obliquity it leads from the ecliptic to the equator.
    """
    c, s = np.cos(angle_rad), np.sin(angle_rad)
    x, y, z = a[0]
    return np.stack([x, c * y - s * z, s * y + c * z])[None]


def longitude_deg(a: Floats) -> Floats:
    """Return the stack of the longitude of a vector stack: value in [0, 360), rates in deg/day^order."""
    x, y = a[:, 0], a[:, 1]
    out = np.empty((a.shape[0], a.shape[-1]))
    out[0] = np.degrees(np.arctan2(y[0], x[0])) % 360.0
    if a.shape[0] > 1:
        square = x[0] ** 2 + y[0] ** 2
        rate = (x[0] * y[1] - y[0] * x[1]) / square
        out[1] = np.degrees(rate)
        if a.shape[0] > 2:
            stretch = 2.0 * (x[0] * x[1] + y[0] * y[1])
            out[2] = np.degrees((x[0] * y[2] - y[0] * x[2] - rate * stretch) / square)
    return out


def latitude_deg(a: Floats) -> Floats:
    """Return the stack of the latitude of a unit vector stack, order at most 1."""
    out = np.empty((a.shape[0], a.shape[-1]))
    out[0] = np.degrees(np.arctan2(a[0, 2], np.hypot(a[0, 0], a[0, 1])))
    if a.shape[0] > 1:
        out[1] = np.degrees(a[1, 2] / np.sqrt(np.maximum(1.0 - a[0, 2] ** 2, 1e-30)))
    return out


def unit_vectors(longitude_deg: Floats, latitude_deg: Floats) -> Floats:
    """Return unit vectors of directions given by two angles, shape (3, n)."""
    longitude, latitude = np.radians(longitude_deg), np.radians(latitude_deg)
    along = np.cos(latitude)
    return np.stack([along * np.cos(longitude), along * np.sin(longitude), np.sin(latitude)])


def separation_deg(a: Floats, b: Floats) -> Floats:
    """Return the angle between unit vectors, shape (3, n) each, exact for small and large angles.

    Source: Kahan, How Futile are Mindless Assessments of Roundoff (2006), section 12.
    """
    near = np.sqrt(np.einsum("in,in->n", a - b, a - b))
    far = np.sqrt(np.einsum("in,in->n", a + b, a + b))
    return np.asarray(np.degrees(2.0 * np.arctan2(near, far)))


def wrapped_deg(angle: Floats) -> Floats:
    """Return angles brought into (-180, 180]."""
    return np.asarray(angle - 360.0 * np.ceil((angle - 180.0) / 360.0))
