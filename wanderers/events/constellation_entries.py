"""Constellation entries: crossings of the IAU boundaries.

The boundaries run along circles of right ascension and declination of 1875. Every crossing of such a circle
is found, corners that a planet clips between two samples included; those across which the constellation
changes are entries.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

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

DOUBTS_DEG = (0.3, 3.0)
"""How far from the expected crossing a boundary may lie along a circle, by axis: the cubic through two
samples is off by hundredths of a degree, but a body that crosses a circle of declination near its farthest
north or south moves far in right ascension meanwhile."""

BIN_DEG = 0.05


@dataclass(frozen=True, slots=True)
class Circles:
    """The circles of one coordinate: 0 right ascension, 1 declination."""

    axis: int
    levels_deg: Floats


def find_constellation_entries(scene: Scene) -> list[Batch]:
    """Find where Sun, Moon and planets pass from one constellation into another."""
    bodies = scene.held(scene.choice.among(BODIES))
    if bodies.size == 0:
        return []
    placed = [_placed(scene.samples.directions[body]) for body in bodies.tolist()]
    right_ascensions, declinations = constellations.boundary_lines()
    return [
        _entries(scene, bodies, placed, Circles(0, right_ascensions)),
        _entries(scene, bodies, placed, Circles(1, declinations)),
    ]


def _entries(scene: Scene, bodies: Ints, placed: list[Floats], circles: Circles) -> Batch:
    """Find entries across one family of circles; function number = body's place * circles + circle."""
    count = circles.levels_deg.size
    found = [
        _candidates(scene.samples.jd, one, circles).renumbered(place * count)
        for place, one in enumerate(placed)
    ]

    def beyond(row: Ints, at: Floats) -> tuple[Floats, Floats]:
        value, slope = _placed(scene.sky.apparent(bodies[row // count], at, order=1))[circles.axis]
        return vectors.wrapped_deg(value - circles.levels_deg[row % count]), slope

    roots = solve(beyond, found)
    body, level = bodies[roots.function // count], circles.levels_deg[roots.function % count]
    at = _placed(scene.sky.apparent(body, roots.jd, order=1))[:, 0]
    lower, upper = _sides(circles, level, at[1 - circles.axis])
    sides = np.where(roots.rising, [lower, upper], [upper, lower])
    changes = sides[0] != sides[1]
    return _as_batch(scene, body[changes], roots.jd[changes], sides[:, changes])


def _candidates(jd: Floats, placed: Floats, circles: Circles) -> Candidates:
    """Bracket one body's crossings of one family of circles, where these part constellations."""
    value, count = placed[circles.axis, 0], circles.levels_deg.size
    family = circles
    if circles.axis == 0:
        value = np.degrees(np.unwrap(np.radians(value)))
        family = _on_every_turn(circles, value)
    found = level_crossings(jd, value, placed[circles.axis, 1], family.levels_deg)
    crossing = replace(found.crossing, function=found.crossing.function % count)
    turning = replace(found.turning, function=found.turning.function % count)
    return Candidates(_real(crossing, circles, jd, placed), turning)


def _on_every_turn(circles: Circles, right_ascension_deg: Floats) -> Circles:
    """Repeat circles of right ascension for every turn that an unwrapped right ascension makes."""
    first, last = np.floor(right_ascension_deg.min() / 360.0), np.floor(right_ascension_deg.max() / 360.0)
    turns = 360.0 * np.arange(first, last + 1)
    return Circles(circles.axis, (turns[:, None] + circles.levels_deg).ravel())


def _as_batch(scene: Scene, body: Ints, jd: Floats, sides: Ints) -> Batch:
    """Compose entries; ``sides`` holds the constellations left and entered, shape (2, n)."""
    entries = batch(
        Kind.CONSTELLATION_ENTRY,
        None,
        jd,
        body,
        detail=sides[0].astype(np.int64),
        details=constellations.ABBREVIATIONS,
        figure_deg=scene.sky.longitude_deg(body, jd, Frame.ECLIPTIC)[0],
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
    keep: Bools = _parted(circles.axis)[brackets.function, _bin(other)]
    return Brackets(*(getattr(brackets, name)[keep] for name in brackets.__slots__))


@cache
def _parted(axis: int) -> Bools:
    """Return, for the circles of an axis, in which bins along each it comes near to parting two."""
    levels = constellations.boundary_lines()[axis]
    parted = np.zeros((levels.size, round(540.0 / BIN_DEG)), dtype=np.bool_)
    for piece in constellations.boundary_segments():
        fixed, ends = piece[[axis, axis + 2]], np.sort(piece[[1 - axis, 3 - axis]])
        level = np.flatnonzero(np.abs(vectors.wrapped_deg(levels - fixed[0])) < ACROSS_DEG)
        if fixed[0] == fixed[1] and level.size:
            low, high = _bin(ends + DOUBTS_DEG[axis] * np.array([-1.0, 1.0]))
            parted[level, max(low, 0) : high + 1] = True
            if axis == 1:
                _mark_across_zero(parted, int(level[0]), int(low), int(high))
    return parted


def _mark_across_zero(parted: Bools, level: int, low: int, high: int) -> None:
    """Repeat a marked stretch of right ascension on the other side of 0h."""
    turn = round(360.0 / BIN_DEG)
    for shifted in (low - turn, low + turn):
        parted[level, max(shifted, 0) : max(shifted + high - low + 1, 0)] = True


def _bin(angle_deg: Floats) -> Ints:
    """Return the bin of an angle between -90 and 450 degrees."""
    return np.floor((angle_deg + 90.0) / BIN_DEG).astype(np.int64)


def _interpolated(jd: Floats, coordinate: Floats, at: Floats) -> Floats:
    """Return a coordinate by the cubic through the samples on both sides, shape (n,)."""
    column = np.clip(np.searchsorted(jd, at, side="right") - 1, 0, jd.size - 2)
    step = jd[column + 1] - jd[column]
    s = (at - jd[column]) / step
    left, rise = coordinate[0, column], vectors.wrapped_deg(coordinate[0, column + 1] - coordinate[0, column])
    a, b = step * coordinate[1, column], step * coordinate[1, column + 1]
    return np.asarray(left + s * (a + s * (3.0 * rise - 2.0 * a - b + s * (a + b - 2.0 * rise))))
