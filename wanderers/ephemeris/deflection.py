"""Bending of light by the Sun, from a body's own track and the Sun's."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Floats

STRENGTH_AU: Final = (
    2.0 * constants.GM_SUN_KM3_PER_S2 / constants.SPEED_OF_LIGHT_KM_PER_S**2 / constants.AU_KM
)
"""Twice the gravitational radius of the Sun's mass, GM/c^2, in au."""

LIMITER: Final = 1e-6
"""Least denominator of the formula at 1 au: reached 5 arcminutes from the Sun's centre, well inside its
disc, where the formula for a point mass would throw images about that nobody sees. SOFA, iauLdsun."""
TANGENT_STEP_DAYS: Final = 1e-3


def deflection(position: Floats, sun: Floats, *, at_infinity: bool = False) -> Floats:
    """Return the shift of a unit direction, shape (3, n), by the Sun's gravity.

    Args:
        position: from the Earth to the body, au, shape (3, n).
        sun: from the Earth to the Sun, au, shape (3, n).
        at_infinity: the body is a star, so that its light reaches Sun and Earth in parallel.

    Source: Explanatory Supplement, 3rd ed., eq. 7.38; Klioner 2003, AJ 125, 1580, eq. 70, Sun only.
    """
    sun_distance = _length(sun)
    to_body = position / _length(position)
    from_sun_to_earth = -sun / sun_distance
    from_sun_to_body = to_body if at_infinity else (position - sun) / _length(position - sun)
    limiter = LIMITER / np.maximum(sun_distance**2, 1.0)
    closeness = np.maximum(1.0 + _dot(from_sun_to_body, from_sun_to_earth), limiter)
    bend = (
        _dot(to_body, from_sun_to_body) * from_sun_to_earth
        - _dot(from_sun_to_earth, to_body) * from_sun_to_body
    )
    return np.asarray(STRENGTH_AU / sun_distance / closeness * bend)


def deflection_rate(position: Floats, sun: Floats, *, at_infinity: bool = False) -> Floats:
    """Return the rate of the shift, rad/day, shape (3, n).

    Args:
        position: position and rate, au and au/day, shape (2, 3, n).
        sun: likewise.
        at_infinity: as for :func:`deflection`.

    The derivative is taken along the tangent of both motions, so no second position is needed.
    """
    h = TANGENT_STEP_DAYS
    after = deflection(position[0] + h * position[1], sun[0] + h * sun[1], at_infinity=at_infinity)
    before = deflection(position[0] - h * position[1], sun[0] - h * sun[1], at_infinity=at_infinity)
    return np.asarray((after - before) / (2.0 * h))


def _dot(a: Floats, b: Floats) -> Floats:
    return np.asarray(np.einsum("in,in->n", a, b))


def _length(a: Floats) -> Floats:
    return np.asarray(np.sqrt(_dot(a, a)))
