"""Meetings of Moon and planets with bright stars and clusters near the ecliptic."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import FIRST_STAR
from wanderers.ephemeris.vectors import wrapped_deg
from wanderers.events.approaches import appulses_and_occultations, closing
from wanderers.events.conjunctions import FRAMES
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.sampling import sample_stars
from wanderers.events.scene import Scene
from wanderers.events.search import Roots, candidates, solve

REACH_DEG = 40.0
"""Approaches are followed so far out: every body passes every star of the list well within."""
MOON_REACH_DEG = 70.0


@dataclass(frozen=True, slots=True)
class Pairing:
    """All pairs of bodies and stars: row = body's place * stars + star's place."""

    bodies: Ints
    stars: Ints

    def targets(self, row: Ints) -> tuple[Ints, Ints]:
        """Return the target numbers of the body and the star of each row."""
        return self.bodies[row // self.stars.size], self.stars[row % self.stars.size]


def find_star_meetings(scene: Scene) -> list[Batch]:
    """Find conjunctions with stars in both frames, least separations and occultations.

    Where a star is the heart of a listed cluster, the cluster speaks for it, but only the star can be hidden.
    """
    catalogue = scene.sky.catalogue
    wanted = [body for body in scene.choice.stars_for if body in scene.choice.bodies]
    bodies = scene.held(np.array([b.order for b in BODIES[1:] if b in wanted], dtype=np.int64))
    if catalogue is None or bodies.size == 0:
        return []
    spoken_for = np.array([bool(cluster) for cluster in catalogue.cluster])
    extended = np.array([kind == "cluster" for kind in catalogue.kind])
    pairing = Pairing(bodies, FIRST_STAR + np.arange(spoken_for.size))
    directions = sample_stars(scene.samples)
    frames = [frame for frame in FRAMES if scene.approaches or frame in scene.frames]
    conjunctions = [_conjunctions(scene, pairing, directions, frame) for frame in frames]
    if not scene.approaches:
        return [one.chosen(~spoken_for[one.other - FIRST_STAR]) for one in conjunctions]
    roots = _extrema(scene, pairing, directions)
    every = np.stack(pairing.targets(roots.function))
    numbered = Roots(np.arange(roots.jd.size), roots.jd, roots.rising)
    appulses, occultations = appulses_and_occultations(scene, every, numbered)
    met = [one.chosen(~spoken_for[one.other - FIRST_STAR]) for one in (*conjunctions, appulses)]
    return [*met, occultations.chosen(~extended[occultations.other - FIRST_STAR])]


def _conjunctions(scene: Scene, pairing: Pairing, directions: Floats, frame: Frame) -> Batch:
    """Find where bodies have a star's longitude or right ascension."""
    rotation = scene.samples.rotations[frame][:2]
    star = np.stack([vectors.longitude_in(rotation, one) for one in directions])
    found = []
    for place, body in enumerate(pairing.bodies.tolist()):
        moving = scene.samples.longitude_deg(body, frame)
        ahead = wrapped_deg(moving[0] - star[:, 0])
        near = np.abs(ahead) < (MOON_REACH_DEG if body == Body.MOON.order else REACH_DEG)
        found.append(
            candidates(
                scene.samples.jd,
                ahead,
                moving[1] - star[:, 1],
                bends=np.broadcast_to(moving[2], ahead.shape),
                usable=near[:, :-1] & near[:, 1:],
                first_function=place * pairing.stars.size,
            )
        )

    def ahead_of(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        return scene.sky.lead_deg(*pairing.targets(row), jd, frame)

    roots = solve(ahead_of, found)
    first, second = pairing.targets(roots.function)
    return batch(Kind.CONJUNCTION, frame, roots.jd, first, other=second)


def _extrema(scene: Scene, pairing: Pairing, directions: Floats) -> Roots:
    """Find the extrema of the separations from stars, within reach."""
    found = []
    for place, body in enumerate(pairing.bodies.tolist()):
        reach = MOON_REACH_DEG if body == Body.MOON.order else REACH_DEG
        moving = scene.samples.directions[body]
        near = _dot(moving[0], directions[:, 0]) > np.cos(np.radians(reach))
        values, slopes = _closing(moving, directions)
        found.append(
            candidates(
                scene.samples.jd,
                values,
                slopes,
                usable=near[:, :-1] & near[:, 1:],
                first_function=place * pairing.stars.size,
            )
        )

    def rate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        return closing(*scene.sky.pair(*pairing.targets(row), jd, order=2))[:2]

    return solve(rate, found)


def _closing(moving: Floats, directions: Floats) -> tuple[Floats, Floats]:
    """Return the closing rate of one body to every star and its slope, shape (stars, n) each.

    Chord times chord rate, with what vanishes left out: a unit vector is square to its rate.
    """
    place, rate, bend = moving
    value = -(_dot(place, directions[:, 1]) + _dot(rate, directions[:, 0]))
    own = np.einsum("in,in->n", rate, rate) + np.einsum("in,in->n", place, bend)
    return value, own - _dot(bend, directions[:, 0]) - 2.0 * _dot(rate, directions[:, 1])


def _dot(one: Floats, each: Floats) -> Floats:
    """Return the dot products of one body's vectors, shape (3, n), with every star's, shape (stars, 3, n)."""
    return np.asarray(np.einsum("in,sin->sn", one, each))
