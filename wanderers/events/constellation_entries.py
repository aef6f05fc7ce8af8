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
    right_ascensions, declinations = constellations.boundary_lines()
    found = [
        _entries(scene, body, circles)
        for body in bodies.tolist()
        for circles in (Circles(0, right_ascensions), Circles(1, declinations))
    ]
    return [one for one in found if one.jd.size] or [_as_batch(scene, 0, np.empty(0), np.empty((2, 0), np.int64))]


def _entries(scene: Scene, body: int, circles: Circles) -> Batch:
    """Find one body's entries across one family of circles."""
    jd = scene.samples.jd
    placed = _placed(scene.samples.directions[body])
    if circles.axis == 0:
        placed[0, 0] = np.degrees(np.unwrap(np.radians(placed[0, 0])))
        circles = _on_every_turn(circles, placed[0, 0])
    found = level_crossings(jd, placed[circles.axis, 0], placed[circles.axis, 1], circles.levels_deg)
    found = Candidates(_real(found.crossing, circles, jd, placed), found.turning)

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


def _on_every_turn(circles: Circles, right_ascension_deg: Floats) -> Circles:
    """Repeat circles of right ascension for every turn that an unwrapped right ascension makes."""
    first, last = np.floor(right_ascension_deg.min() / 360.0), np.floor(right_ascension_deg.max() / 360.0)
    turns = 360.0 * np.arange(first, last + 1)
    return Circles(circles.axis, (turns[:, None] + circles.levels_deg).ravel())


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
    levels, parted = _parted(circles.axis)
    level = np.searchsorted(levels, circles.levels_deg[brackets.function] % 360.0 if circles.axis == 0 else circles.levels_deg[brackets.function])
    keep: Bools = parted[np.minimum(level, levels.size - 1), _bin(other)]
    return Brackets(*(getattr(brackets, name)[keep] for name in brackets.__slots__))


@cache
def _parted(axis: int) -> tuple[Floats, Bools]:
    """Return the circles of an axis, and in which bins along each it comes near to parting constellations."""
    levels = constellations.boundary_lines()[axis]
    parted = np.zeros((levels.size, round(540.0 / BIN_DEG)), dtype=np.bool_)
    for piece in constellations.boundary_segments():
        fixed, ends = piece[[axis, axis + 2]], np.sort(piece[[1 - axis, 3 - axis]])
        level = np.flatnonzero(np.abs(levels - fixed[0] % 360.0 if axis == 0 else levels - fixed[0]) < ACROSS_DEG)
        if fixed[0] == fixed[1] and level.size:
            low, high = _bin(ends + DOUBTS_DEG[axis] * np.array([-1.0, 1.0]))
            parted[level, max(low, 0) : high + 1] = True
            if axis == 1:
                _mark_across_zero(parted, int(level[0]), int(low), int(high))
    return levels, parted


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
