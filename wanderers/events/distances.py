"""Nearest to and farthest from the Earth."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.tracks import EARTH_DISTANCE
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import find_roots


def find_perigees_and_apogees(scene: Scene) -> list[Batch]:
    """Find the extrema of the geometric geocentric distance of every chosen body, Sun and Moon included."""
    bodies = scene.held(scene.choice.among(BODIES))
    if bodies.size == 0:
        return []
    tracks, jd = scene.sky.tracks, scene.samples.jd
    sampled = np.stack(
        [tracks.evaluate_grid(BODIES[body], jd, EARTH_DISTANCE, 2)[:, 0] for body in bodies.tolist()]
    )

    def rate(row: Ints, at: Floats) -> tuple[Floats, Floats]:
        distance = scene.sky.earth_distance_au(bodies[row], at, order=2)
        return distance[1], distance[2]

    roots = find_roots(rate, jd, sampled[:, 1], sampled[:, 2])
    body, nearest = bodies[roots.function], roots.rising
    return [
        batch(Kind.PERIGEE, None, roots.jd[nearest], body[nearest]),
        batch(Kind.APOGEE, None, roots.jd[~nearest], body[~nearest]),
    ]
