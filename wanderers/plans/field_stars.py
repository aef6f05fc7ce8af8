"""Registration stars: the ones on which the pictures of a season are laid over each other.

They should be bright, stand all over the frame and away from the path. The frame is cut into cells, each
cell offers its brightest, and of these one after the other is taken that stands farthest from those already
taken, a faint one only if it stands that much farther (Gonzalez 1985, Theoretical Computer Science 38, 293:
farthest point first is at most twice as sparse as the best choice).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.stars import StarCatalogue, barycentric_directions, deep_stars
from wanderers.plans.frame import CameraFrame

FEWEST: Final = 8
MOST: Final = 15
"""Common practice, no source."""

CELLS: Final = (4, 3)
"""Cells along the longer and the shorter side."""
OFFERED_PER_CELL: Final = 3

EDGE_ROOM: Final = 0.03
"""Part of each side where no star is taken: the frame is never aimed alike to the pixel."""
CLEAR_OF_PATH: Final = 0.005
"""How far stars keep from the path, as a part of the frame's longer side: 30 of 6000 pixels."""
CLEAR_OF_STARS: Final = 0.003
NEARLY_AS_BRIGHT_MAG: Final = 2.0
"""A star with a neighbour nearer than that, at most so much fainter, is no sharp mark."""
WORTH_PER_MAG: Final = 0.05
"""How much farther from the others, as a part of the diagonal, a star must stand for each magnitude."""
LEAST_GAP: Final = 0.13
"""Once there are enough, no star is taken nearer than that to another, as a part of the diagonal."""


@dataclass(frozen=True, slots=True, eq=False)
class RegistrationStars:
    """The stars chosen, in the order of the choice: the first few of them already spread over the frame.

    Attributes:
        stars: their catalogue entries, k of them.
        place_px: x from the left edge, y down from the upper edge, shape (k, 2).
        seen: every star in the frame, brightest first, for charts.
        seen_px: their places.
        message: why there are fewer than eight; else empty.
    """

    stars: StarCatalogue
    place_px: Floats
    seen: StarCatalogue
    seen_px: Floats
    message: str

    def table(self) -> pl.DataFrame:
        """Return one row a star."""
        return pl.DataFrame(
            {
                "number": np.arange(1, len(self.stars) + 1),
                "star": star_names(self.stars),
                "hip": self.stars.hip,
                "constellation": self.stars.constellation,
                "v_mag": self.stars.v_mag,
                "b_v": pl.Series(self.stars.b_v, nan_to_null=True),
                "ra_deg": self.stars.ra_deg,
                "dec_deg": self.stars.dec_deg,
                "x_px": self.place_px[:, 0],
                "y_px": self.place_px[:, 1],
            }
        )


def star_names(stars: StarCatalogue) -> list[str]:
    """Return proper names, else designations, else catalogue numbers."""
    names = zip(stars.labels, stars.bayer, strict=True)
    return [bayer if bayer and label.startswith("HIP ") else label for label, bayer in names]


def registration_stars(
    frame: CameraFrame,
    path: Floats,
    jd_tt: float,
    columns: int,
    rows: int,
    *,
    fewest: int = FEWEST,
    most: int = MOST,
) -> RegistrationStars:
    """Choose stars spread over a frame.

    Args:
        frame: what the camera sees.
        path: the planet's places in order, unit vectors in ICRS axes, shape (3, n); lines are drawn between.
        jd_tt: when, for proper motion.
        columns: pixels of the picture, left to right.
        rows: top to bottom.
        fewest: as many are taken, however near to each other, as long as there are stars.
        most: no more are taken.
    """
    stars, places = stars_in(frame, jd_tt, columns, rows)
    size = np.array([columns, rows], dtype=np.float64)
    path_px = frame.pixels(path, columns, rows)
    usable = _usable(places, stars.v_mag, path_px[np.all(np.isfinite(path_px), axis=1)], size)
    offered = np.flatnonzero(usable)[_brightest_of_cells(places[usable], size)]
    chosen = offered[_spread(places[offered], stars.v_mag[offered], size, fewest, most)]
    message = ""
    if chosen.size < fewest:
        message = (
            f"only {chosen.size} of {len(stars)} listed stars in this frame stand clear of path, edges "
            "and each other: use fainter ones as well"
        )
    return RegistrationStars(stars.take(chosen), places[chosen], stars, places, message)


def stars_in(frame: CameraFrame, jd_tt: float, columns: int, rows: int) -> tuple[StarCatalogue, Floats]:
    """Return every listed star in a frame, brightest first, and its place in the picture, shape (n, 2).

    To V 6.6 all over the sky, to V 9.0 within 5 degrees of the ecliptic.
    """
    catalogue = deep_stars()
    directions = barycentric_directions(catalogue, np.array([jd_tt]))[..., 0].T
    inside = frame.holds(directions)
    return catalogue.take(inside), frame.pixels(directions[:, inside], columns, rows)


def distance_to_path(places: Floats, path: Floats) -> Floats:
    """Return how far places, shape (k, 2), are from a broken line, shape (n, 2), n at least 1; shape (k,)."""
    start, step = path[:-1], np.diff(path, axis=0)
    if not len(step):
        return np.asarray(np.hypot(*(places - path[0]).T))
    square = np.maximum(np.sum(step**2, axis=1), 1e-30)
    from_start = places[:, np.newaxis] - start
    along = np.clip(np.sum(from_start * step, axis=2) / square, 0.0, 1.0)
    away = from_start - along[..., np.newaxis] * step
    return np.asarray(np.sqrt(np.min(np.sum(away**2, axis=2), axis=1)))


def _usable(places: Floats, v_mag: Floats, path: Floats, size: Floats) -> Bools:
    """Return which stars stand clear of the edges, of the path and of stars nearly as bright, shape (n,)."""
    longer = float(size.max())
    clear = np.all((places >= EDGE_ROOM * size) & (places <= (1.0 - EDGE_ROOM) * size), axis=1)
    if len(path):
        clear &= distance_to_path(places, path) >= CLEAR_OF_PATH * longer
    apart = np.hypot(*(places[:, np.newaxis] - places).transpose(2, 0, 1))
    rival = v_mag[np.newaxis] <= v_mag[:, np.newaxis] + NEARLY_AS_BRIGHT_MAG
    np.fill_diagonal(rival, False)
    return np.asarray(clear & ~np.any(rival & (apart < CLEAR_OF_STARS * longer), axis=1))


def _brightest_of_cells(places: Floats, size: Floats) -> Ints:
    """Return the indices of the brightest few of each cell, rising, from places ordered by brightness."""
    counts = np.array(CELLS if size[0] >= size[1] else CELLS[::-1])
    cell = np.minimum((places / size * counts).astype(np.int64), counts - 1) @ np.array([counts[1], 1])
    order = np.argsort(cell, kind="stable")
    ordered = cell[order]
    rank = np.arange(order.size) - np.searchsorted(ordered, ordered)
    return np.sort(order[rank < OFFERED_PER_CELL])


def _spread(places: Floats, v_mag: Floats, size: Floats, fewest: int, most: int) -> Ints:
    """Return which places to take, the brightest first, then the farthest from those taken."""
    if not len(places):
        return np.zeros(0, dtype=np.int64)
    diagonal = float(np.hypot(*size))
    worth = -WORTH_PER_MAG * v_mag
    chosen = [0]
    gap = np.hypot(*(places - places[0]).T) / diagonal
    while len(chosen) < min(most, len(places)):
        allowed = gap > 0.0 if len(chosen) < fewest else gap >= LEAST_GAP
        if not allowed.any():
            break
        best = int(np.argmax(np.where(allowed, gap + worth, -np.inf)))
        chosen.append(best)
        gap = np.minimum(gap, np.hypot(*(places - places[best]).T) / diagonal)
    return np.array(chosen, dtype=np.int64)
