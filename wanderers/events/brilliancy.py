"""Greatest brilliancy of Venus, between greatest elongation and inferior conjunction."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.appearance import magnitude, triangle
from wanderers.ephemeris.bodies import Body
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import find_roots

VENUS = Body.VENUS.order
CRESCENT_DEG = (90.0, 150.0)
"""Phase angles at which the maximum that is meant can lie; it comes near 118 degrees."""

DIFFERENCE_DAYS = 0.5
"""Half the base of the differences: the light curve turns over weeks, so the third derivative moves the
instant by less than a second, and the differences stay far above rounding."""


def find_greatest_brilliancies(scene: Scene) -> list[Batch]:
    """Find the brightest instants of Venus's crescent, by the magnitude formula in use.

    Left out are the maximum at full phase near superior conjunction, and the thin crescent's last flash, by
    scattering in the clouds, within some 15 degrees of inferior conjunction.
    """
    if VENUS not in scene.samples.directions or VENUS not in scene.choice.among([Body.VENUS]):
        return []
    low, high = scene.sky.tracks.start_jd + DIFFERENCE_DAYS, scene.sky.tracks.end_jd - DIFFERENCE_DAYS
    jd = scene.samples.jd[(scene.samples.jd >= low) & (scene.samples.jd <= high)]

    def fading(_: Ints, at: Floats) -> tuple[Floats, Floats]:
        return _rates(scene, at)

    values, slopes = _rates(scene, jd)
    roots = find_roots(fading, jd, values[None], slopes[None])
    brightest = roots.jd[roots.rising]
    phase_angle = triangle(scene.sky, np.full(brightest.size, VENUS), brightest).phase_angle_deg
    jd = brightest[(phase_angle > CRESCENT_DEG[0]) & (phase_angle < CRESCENT_DEG[1])]
    return [batch(Kind.GREATEST_BRILLIANCY, None, jd, np.full(jd.size, VENUS))]


def _rates(scene: Scene, jd: Floats) -> tuple[Floats, Floats]:
    """Return how fast the magnitude grows, per day, and how fast that grows, shape (n,) each.

    Five-point differences. Source: Abramowitz and Stegun (1964), 25.3.6 and 25.3.23.
    """
    h = DIFFERENCE_DAYS / 2.0
    at = (jd[None] + h * np.arange(-2, 3)[:, None]).ravel()
    m = magnitude(scene.sky, np.full(at.size, VENUS), at).reshape(5, -1)
    rate = (m[0] - 8.0 * m[1] + 8.0 * m[3] - m[4]) / (12.0 * h)
    bend = (-m[0] + 16.0 * m[1] - 30.0 * m[2] + 16.0 * m[3] - m[4]) / (12.0 * h**2)
    return rate, bend
