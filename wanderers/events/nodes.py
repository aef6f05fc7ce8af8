"""Nodes: where a body passes through the ecliptic."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.frames import Frame
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import find_roots

DETAILS = ("descending", "ascending")


def find_nodes(scene: Scene) -> list[Batch]:
    """Find where the apparent latitude of date of the Moon and the planets passes through zero."""
    bodies = scene.held(scene.choice.among(BODIES[1:]))
    if bodies.size == 0:
        return []
    sampled = [_height(scene.samples.rotations[Frame.ECLIPTIC], scene.samples.directions[b]) for b in bodies]
    values, slopes = (np.stack(part) for part in zip(*sampled, strict=True))

    def height(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        rotation = scene.sky.rotation(Frame.ECLIPTIC, jd, order=1)
        return _height(rotation, scene.sky.apparent(bodies[row], jd, order=1))

    roots = find_roots(height, scene.samples.jd, values, slopes)
    ascending = roots.rising.astype(np.int64)
    body = bodies[roots.function]
    return [batch(Kind.NODE, Frame.ECLIPTIC, roots.jd, body, detail=ascending, details=DETAILS)]


def _height(rotation: Floats, direction: Floats) -> tuple[Floats, Floats]:
    """Return the sine of the latitude and its rate per day, shape (n,) each."""
    placed = vectors.rotate(rotation[:2], direction[:2])
    return placed[0, 2], placed[1, 2]
