"""Conjunctions: two bodies at one longitude, or at one right ascension."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.vectors import wrapped_deg
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import find_roots

FRAMES = (Frame.ECLIPTIC, Frame.EQUATOR)


def find_conjunctions(scene: Scene) -> list[Batch]:
    """Find the conjunctions of every chosen pair of Moon and planets, in longitude and in right ascension.

    Some pairs' meetings cannot be named without both, so theirs are found in both whatever is wanted.
    """
    pairs = scene.held_pairs(BODIES[1:])
    if pairs.shape[1] == 0:
        return []
    in_frames = [
        (frame, pairs if scene.approaches or frame in scene.frames else scene.named_by_approaches(pairs))
        for frame in FRAMES
    ]
    return [_conjunctions_in(scene, some, frame) for frame, some in in_frames if some.size]


def _conjunctions_in(scene: Scene, pairs: Ints, frame: Frame) -> Batch:
    first, second = pairs
    targets = np.unique(pairs)
    longitudes = scene.samples.longitudes_deg(targets.tolist(), frame)
    a, b = np.searchsorted(targets, first), np.searchsorted(targets, second)
    values = wrapped_deg(longitudes[a, 0] - longitudes[b, 0])
    slopes = longitudes[a, 1] - longitudes[b, 1]

    def ahead(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        return scene.sky.lead_deg(first[row], second[row], jd, frame)

    bends = longitudes[a, 2] - longitudes[b, 2]
    roots = find_roots(ahead, scene.samples.jd, values, slopes, period=360.0, bends=bends)
    row = roots.function
    return batch(Kind.CONJUNCTION, frame, roots.jd, first[row], other=second[row])
