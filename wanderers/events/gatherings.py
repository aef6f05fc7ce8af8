"""Gatherings: three or more bodies within a small circle."""

from __future__ import annotations

from itertools import combinations
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
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
    sizes = sorted({len(subset) for subset in subsets})
    return [one for size in sizes for one in _tightest(scene, [s for s in subsets if len(s) == size], near)]


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
    return np.asarray(np.logical_and.reduce([near[pair] for pair in combinations(subset, 2)]))


def _tightest(
    scene: Scene, subsets: list[tuple[int, ...]], near: dict[tuple[int, int], Bools]
) -> list[Batch]:
    """Find the local minima of the diameters of the circles of several subsets of one size."""
    windows = [_windows(scene, subset, _all_near(near, subset)) for subset in subsets]
    group = np.repeat(np.arange(len(subsets)), [low.size for low, _ in windows])
    low, high = (np.concatenate([window[end] for window in windows]) for end in (0, 1))
    members = np.array(subsets)[group].T
    at = _golden(scene.sky, members, low, high)
    figure = diameters_deg(scene.sky, members, at)
    keep = figure < scene.choice.limits.gathering_deg
    return [
        batch(
            Kind.GATHERING,
            None,
            at[own],
            np.full(int(own.sum()), subset[0]),
            details=("+".join(BODIES[body].value for body in subset),),
            figure_deg=figure[own],
        )
        for number, subset in enumerate(subsets)
        if (own := keep & (group == number)).any()
    ]


def _windows(scene: Scene, subset: tuple[int, ...], near: Bools) -> tuple[Floats, Floats]:
    """Return the samples before and after every local minimum of one subset's circle, shape (k,) each."""
    pieces = FINE_STEPS_WITH_MOON if Body.MOON.order in subset else FINE_STEPS
    jd = _fine_grid(scene.samples.jd, near, pieces)
    if jd.size == 0:
        return jd, jd
    return _local_minima(jd, diameter_deg(scene.sky, subset, jd), STEP_DAYS / pieces)


def diameter_deg(sky: Sky, subset: tuple[int, ...], jd: Floats) -> Floats:
    """Return the diameter of the smallest circle around bodies, degrees, shape (n,)."""
    return diameters_deg(sky, np.tile(np.array(subset)[:, None], jd.size), jd)


def diameters_deg(sky: Sky, members: Ints, jd: Floats) -> Floats:
    """Return the diameters of the smallest circles around bodies that may differ by instant.

    Args:
        sky: the tracks.
        members: places in the bodies' written order, shape (bodies, n).
        jd: TT, shape (n,).
    """
    if jd.size == 0:
        return np.empty(0)
    count = members.shape[0]
    seen = sky.apparent(members.ravel(), np.tile(jd, count))[0]
    return smallest_circles(seen.reshape(3, count, -1).transpose(1, 0, 2))[0]


def _fine_grid(jd: Floats, near: Bools, pieces: int) -> Floats:
    """Return fine samples of the steps marked, and of one step on each side of them, rising."""
    wide = near.copy()
    wide[1:] |= near[:-1]
    wide[:-1] |= near[1:]
    step = np.flatnonzero(wide)
    parts = np.arange(pieces) / pieces
    return np.asarray((jd[step, None] + np.diff(jd)[step, None] * parts).ravel())


def _local_minima(jd: Floats, values: Floats, step_days: float) -> tuple[Floats, Floats]:
    """Return the samples before and after every local minimum, shape (k,) each."""
    together = np.diff(jd) < 1.5 * step_days
    falls, rises = values[1:-1] <= values[:-2], values[1:-1] < values[2:]
    at = np.flatnonzero(falls & rises & together[:-1] & together[1:]) + 1
    return jd[at - 1], jd[at + 1]


def _golden(sky: Sky, members: Ints, low: Floats, high: Floats) -> Floats:
    """Return minima by golden section, all at once. Source: Numerical Recipes, 3rd ed., section 10.2."""
    inner = [high - GOLDEN * (high - low), low + GOLDEN * (high - low)]
    value = [diameters_deg(sky, members, at) for at in inner]
    for _ in range(GOLDEN_STEPS):
        left = value[0] < value[1]
        low, high = np.where(left, low, inner[0]), np.where(left, inner[1], high)
        kept, kept_value = np.where(left, inner[0], inner[1]), np.where(left, value[0], value[1])
        fresh = np.where(left, high - GOLDEN * (high - low), low + GOLDEN * (high - low))
        fresh_value = diameters_deg(sky, members, fresh)
        inner = [np.where(left, fresh, kept), np.where(left, kept, fresh)]
        value = [np.where(left, fresh_value, kept_value), np.where(left, kept_value, fresh_value)]
    return np.asarray((low + high) / 2.0)
