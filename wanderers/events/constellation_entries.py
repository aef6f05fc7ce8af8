"""Constellation entries: crossings of the IAU boundaries.

The boundaries run along circles of right ascension and declination of 1875. Every crossing of such a circle
is found, corners that a planet clips between two samples included; those across which the constellation
changes are entries.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import constellations, vectors
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.constellations import constellation_at_b1875
from wanderers.ephemeris.frames import Frame
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import Brackets, Candidates, level_crossings, solve

ACROSS_DEG = 1e-9
"""How far beside a boundary the constellations on both sides are looked up."""

DOUBT_DEG = 0.25
"""Error that the cubic through two samples may make in the other coordinate; the Moon's stays below."""


@dataclass(frozen=True, slots=True)
class Circles:
    """The circles of one coordinate: 0 right ascension, 1 declination."""

    axis: int
    levels_deg: Floats


def find_constellation_entries(scene: Scene) -> list[Batch]:
    """Find where Sun, Moon and planets pass from one constellation into another."""
    bodies = scene.held(scene.choice.among(BODIES))
    right_ascensions, declinations = constellations.boundary_lines()
    turns = np.concatenate([right_ascensions + 360.0 * turn for turn in range(-2, 3)])
    found = [
        _entries(scene, body, circles)
        for body in bodies.tolist()
        for circles in (Circles(0, turns), Circles(1, declinations))
    ]
    return [one for one in found if one.jd.size] or [_as_batch(scene, 0, np.empty(0), np.empty((2, 0), np.int64))]


def _entries(scene: Scene, body: int, circles: Circles) -> Batch:
    """Find one body's entries across one family of circles."""
    jd = scene.samples.jd
    placed = _placed(scene.samples.directions[body])
    if circles.axis == 0:
        start = np.floor(placed[0, 0, 0] / 360.0) * 360.0
        placed[0, 0] = np.degrees(np.unwrap(np.radians(placed[0, 0]))) - start
    found = level_crossings(jd, placed[circles.axis, 0], placed[circles.axis, 1], circles.levels_deg)
    found = Candidates(
        _real(found.crossing, circles, jd, placed), _real(found.turning, circles, jd, placed)
    )

    def beyond(row: Ints, at: Floats) -> tuple[Floats, Floats]:
        value, slope = _placed(scene.sky.apparent(np.full(at.size, body), at, order=1))[circles.axis]
        return vectors.wrapped_deg(value - circles.levels_deg[row]), slope

    roots = solve(beyond, [found])
    at = _placed(scene.sky.apparent(np.full(roots.jd.size, body), roots.jd, order=1))[:, 0]
    level = circles.levels_deg[roots.function]
    lower, upper = _sides(circles, level, at[1 - circles.axis])
    sides = np.where(roots.rising, [lower, upper], [upper, lower])
    changes = sides[0] != sides[1]
    return _as_batch(scene, body, roots.jd[changes], sides[:, changes])


def _as_batch(scene: Scene, body: int, jd: Floats, sides: Ints) -> Batch:
    """Compose entries; ``sides`` holds the constellations left and entered, shape (2, n)."""
    target = np.full(jd.size, body)
    longitude = scene.sky.longitude_deg(target, jd, Frame.ECLIPTIC)[0] if jd.size else jd
    entries = batch(
        Kind.CONSTELLATION_ENTRY,
        None,
        jd,
        target,
        detail=sides[0].astype(np.int64),
        details=constellations.ABBREVIATIONS,
        figure_deg=longitude,
    )
    return replace(entries, entered=sides[1].astype(np.int64))


def _placed(direction: Floats) -> Floats:
    """Return right ascension and declination of 1875 with their rates, shape (2, 2, n)."""
    placed = vectors.rotate(constellations.b1875_rotation(), direction[:2])
    return np.stack([vectors.longitude_deg(placed), vectors.latitude_deg(placed)])


def _sides(circles: Circles, level: Floats, other: Floats) -> tuple[Ints, Ints]:
    """Return the constellations just below and just above a circle, at the other coordinate."""
    sides = []
    for side in (-ACROSS_DEG, ACROSS_DEG):
        ra, dec = ((level + side) % 360.0, other) if circles.axis == 0 else (other % 360.0, level + side)
        sides.append(np.asarray(constellation_at_b1875(ra, dec), dtype=np.int64))
    return sides[0], sides[1]


def _real(brackets: Brackets, circles: Circles, jd: Floats, placed: Floats) -> Brackets:
    """Keep the brackets near which the circle parts two constellations."""
    other = _interpolated(jd, placed[1 - circles.axis], brackets.guess)
    level = circles.levels_deg[brackets.function]
    keep: Bools = np.zeros(level.size, dtype=np.bool_)
    for doubt in (-DOUBT_DEG, 0.0, DOUBT_DEG):
        lower, upper = _sides(circles, level, other + doubt)
        keep |= lower != upper
    return Brackets(*(getattr(brackets, name)[keep] for name in brackets.__slots__))


def _interpolated(jd: Floats, coordinate: Floats, at: Floats) -> Floats:
    """Return a coordinate by the cubic through the samples on both sides, shape (n,)."""
    column = np.clip(np.searchsorted(jd, at, side="right") - 1, 0, jd.size - 2)
    step = jd[column + 1] - jd[column]
    s = (at - jd[column]) / step
    left, rise = coordinate[0, column], vectors.wrapped_deg(coordinate[0, column + 1] - coordinate[0, column])
    a, b = step * coordinate[1, column], step * coordinate[1, column + 1]
    return np.asarray(left + s * (a + s * (3.0 * rise - 2.0 * a - b + s * (a + b - 2.0 * rise))))
