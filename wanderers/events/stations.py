"""Stations: where a planet's motion in longitude turns back or forward again."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.frames import Frame
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import find_roots

DETAILS = ("retrograde", "direct")


def find_stations(scene: Scene) -> list[Batch]:
    """Find every station of the chosen planets in the frames wanted.

    The rate is that of the apparent longitude itself: light-time, aberration, deflection and nutation all
    change with time, and near a station their rates decide the hour.
    """
    if scene.planets().size == 0:
        return []
    return [_stations_in(scene, frame) for frame in Frame if frame in scene.frames]


def _stations_in(scene: Scene, frame: Frame) -> Batch:
    planets = scene.planets()

    def rate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        longitude = scene.sky.longitude_deg(planets[row], jd, frame, order=2)
        return longitude[1], longitude[2]

    sampled = scene.samples.longitudes_deg(planets.tolist(), frame)
    roots = find_roots(rate, scene.samples.jd, sampled[:, 1], sampled[:, 2])
    body = planets[roots.function]
    return batch(Kind.STATION, frame, roots.jd, body, detail=roots.rising.astype(np.int64), details=DETAILS)
