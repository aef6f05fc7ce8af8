"""Gatherings: three or more bodies within a small circle."""

from __future__ import annotations

from itertools import combinations
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.bodies import BODIES, NAKED_EYE_PLANETS, Body
from wanderers.ephemeris.sky import Sky
from wanderers.events.circles import smallest_circles
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import STEP_DAYS, Scene

FINE_STEPS: Final = 8
FINE_STEPS_WITH_MOON: Final = 48
"""Samples in a step of the grid, wherever the bodies are near: six hours, an hour with the Moon. The circle's
diameter has corners where its support changes, so it is sampled closely instead of followed by its slope."""

MARGIN_DEG: Final = 5.0
"""How much wider than the limit two planets may stand at both ends of a step and yet meet it within."""
MOON_MARGIN_DEG: Final = 30.0

GOLDEN: Final = (np.sqrt(5.0) - 1.0) / 2.0
GOLDEN_STEPS: Final = 32
"""From twelve hours to a hundredth of a second."""


def find_gatherings(scene: Scene) -> list[Batch]:
    """Find the tightest instants of every subset of three or more bodies, within the limit.

    Where no bodies were chosen the five planets that the naked eye sees are meant.
    """
    bodies = scene.held(scene.choice.among(NAKED_EYE_PLANETS if scene.choice.bodies == BODIES else BODIES))
    subsets = [
        subset
        for size in range(scene.choice.fewest_gathered, bodies.size + 1)
        for subset in combinations(bodies.tolist(), size)
    ]
    near = _near_pairs(scene, bodies.tolist())
    found = [_tightest(scene, subset, _all_near(near, subset)) for subset in subsets]
    return [one for one in found if one.jd.size]


def _near_pairs(scene: Scene, bodies: list[int]) -> dict[tuple[int, int], Bools]:
    """Return, by pair, in which steps of the grid two bodies may stand within the limit, shape (n - 1,)."""
    directions, limit = scene.samples.directions, scene.choice.limits.gathering_deg
    out = {}
    for a, b in combinations(bodies, 2):
        margin = MOON_MARGIN_DEG if Body.MOON.order in (a, b) else MARGIN_DEG
        cosine = np.einsum("in,in->n", directions[a][0], directions[b][0])
        close = cosine >= np.cos(np.radians(min(limit + margin, 180.0)))
        out[a, b] = close[:-1] | close[1:]
    return out


def _all_near(near: dict[tuple[int, int], Bools], subset: tuple[int, ...]) -> Bools:
    return np.logical_and.reduce([near[pair] for pair in combinations(subset, 2)])


def _tightest(scene: Scene, subset: tuple[int, ...], near: Bools) -> Batch:
    """Find the local minima of the diameter of one subset's circle."""
    word = "+".join(BODIES[body].value for body in subset)
    pieces = FINE_STEPS_WITH_MOON if Body.MOON.order in subset else FINE_STEPS
    jd = _fine_grid(scene.samples.jd, near, pieces)
    lowest = _local_minima(jd, diameter_deg(scene.sky, subset, jd), STEP_DAYS / pieces) if jd.size else np.empty((2, 0))
    at = _golden(scene.sky, subset, *lowest)
    figure = diameter_deg(scene.sky, subset, at)
    keep = figure < scene.choice.limits.gathering_deg
    first = np.full(int(keep.sum()), subset[0])
    return batch(Kind.GATHERING, None, at[keep], first, details=(word,), figure_deg=figure[keep])


def diameter_deg(sky: Sky, subset: tuple[int, ...], jd: Floats) -> Floats:
    """Return the diameter of the smallest circle around bodies, degrees, shape (n,)."""
    if jd.size == 0:
        return np.empty(0)
    return smallest_circles(np.stack([sky.apparent(np.full(jd.size, body), jd)[0] for body in subset]))[0]


def _fine_grid(jd: Floats, near: Bools, pieces: int) -> Floats:
    """Return fine samples of the steps marked, and of one step on each side of them, rising."""
    wide = near.copy()
    wide[1:] |= near[:-1]
    wide[:-1] |= near[1:]
    step = np.flatnonzero(wide)
    parts = np.arange(pieces) / pieces
    return np.asarray((jd[step, None] + np.diff(jd)[step, None] * parts).ravel())


def _local_minima(jd: Floats, values: Floats, step_days: float) -> Floats:
    """Return the samples before and after every local minimum, shape (2, k)."""
    together = np.diff(jd) < 1.5 * step_days
    falls, rises = values[1:-1] <= values[:-2], values[1:-1] < values[2:]
    at = np.flatnonzero(falls & rises & together[:-1] & together[1:]) + 1
    return np.stack([jd[at - 1], jd[at + 1]])


def _golden(sky: Sky, subset: tuple[int, ...], low: Floats, high: Floats) -> Floats:
    """Return minima by golden section, all at once. Source: Numerical Recipes, 3rd ed., section 10.2."""
    inner = [high - GOLDEN * (high - low), low + GOLDEN * (high - low)]
    value = [diameter_deg(sky, subset, at) for at in inner]
    for _ in range(GOLDEN_STEPS):
        left = value[0] < value[1]
        low, high = np.where(left, low, inner[0]), np.where(left, inner[1], high)
        kept, kept_value = np.where(left, inner[0], inner[1]), np.where(left, value[0], value[1])
        fresh = np.where(left, high - GOLDEN * (high - low), low + GOLDEN * (high - low))
        fresh_value = diameter_deg(sky, subset, fresh)
        inner = [np.where(left, fresh, kept), np.where(left, kept, fresh)]
        value = [np.where(left, fresh_value, kept_value), np.where(left, kept_value, fresh_value)]
    return np.asarray((low + high) / 2.0)


