"""Gatherings: local minima of the smallest circle on the sky that holds several bodies.

The smallest circle is found among all circles spanned by two bodies or through three of them, as the
smallest of those that hold the rest: slow, and obvious.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np
import polars as pl
from numpy.typing import NDArray

from tests.oracle.places import Floats, Sky, separation_deg, unit
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import refine

STEP_DAYS = 0.002  # of the differences: at 0.02 the third derivative moved minima by up to four seconds
LIMIT_DEG = 30.0  # diameter
SLACK_DEG = 1e-12  # bodies on the circle count as held


def circle_diameters_deg(directions: Floats) -> tuple[Floats, Floats]:
    """Give every candidate circle, and whether it holds all bodies.

    Args:
        directions: shape (bodies, n, 3), unit vectors.

    Returns:
        diameters in degrees, shape (circles, n), pairs first, then triples; and the same with
        infinity where a body lies outside.
    """
    centres = []
    spanned = []
    for i, j in combinations(range(len(directions)), 2):
        centres.append(unit(directions[i] + directions[j]))
        spanned.append(i)
    for i, j, k in combinations(range(len(directions)), 3):
        across = np.cross(directions[j] - directions[i], directions[k] - directions[i])
        centre = unit(across)
        centres.append(centre * np.sign(np.sum(centre * directions[i], axis=-1))[..., np.newaxis])
        spanned.append(i)
    radius = np.stack([separation_deg(c, directions[i]) for c, i in zip(centres, spanned, strict=True)])
    reach = np.stack([np.max([separation_deg(c, body) for body in directions], axis=0) for c in centres])
    return 2.0 * radius, np.where(reach <= radius + SLACK_DEG, 2.0 * radius, np.inf)


def smallest_circle_deg(directions: Floats) -> tuple[Floats, NDArray[np.int64]]:
    """Give the diameter of the smallest circle and which candidate it is, shapes (n,)."""
    holding = circle_diameters_deg(directions)[1]
    which = np.argmin(holding, axis=0)
    return holding[which, np.arange(which.size)], which


def gathering(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find local minima of the smallest circle's diameter, below ``LIMIT_DEG``.

    The diameter has kinks where one circle takes over from another. Searched is the rate of change of
    the circle that holds at the instant: it passes zero at a smooth minimum and jumps over it at a kink.
    """

    def directions(jd: Floats, offset: Floats) -> Floats:
        return np.stack([sky.apparent(body, jd, offset) for body in subject])

    def trend(jd: Floats, offset: Floats) -> Floats:
        which = smallest_circle_deg(directions(jd, offset))[1]
        column = np.arange(which.size)
        ahead = circle_diameters_deg(directions(jd, offset + STEP_DAYS))[0][which, column]
        behind = circle_diameters_deg(directions(jd, offset - STEP_DAYS))[0][which, column]
        return ahead - behind

    diameter = smallest_circle_deg(np.stack([grid.direction[body] for body in subject]))[0]
    middle = diameter[1:-1]
    lowest = (middle <= diameter[:-2]) & (middle < diameter[2:]) & (middle < LIMIT_DEG + 2.0)
    jd = grid.jd_tt[1:-1][lowest]
    step = np.full(jd.shape, grid.step_days)
    found = refine(trend, jd, -step, step)
    diameter = smallest_circle_deg(directions(found, np.zeros_like(found)))[0]
    kept = diameter < LIMIT_DEG
    return events("gathering", found[kept], detail="+".join(subject), separation_deg=diameter[kept])
