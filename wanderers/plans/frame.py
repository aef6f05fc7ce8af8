"""The smallest camera frame that holds a whole path among the stars.

A camera with a straight-line (rectilinear) lens shows the sky on a plane that touches it where the lens
points: the gnomonic projection. Calabretta and Greisen 2002, A&A 395, 1077, section 5.1.3 (TAN). Directions
are unit vectors in ICRS axes, shape (3, n); the equator and equinox of J2000 lie within 0.03 arcsec of them.
Position angles run from north through east, as the IAU counts them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.vectors import latitude_deg, longitude_deg
from wanderers.errors import UsageProblem

DEFAULT_MARGIN: Final = 0.15
FULL_ASPECT: Final = 1.5
"""Width to height of the usual sensors. Common practice, no source."""

WIDEST_REACH_DEG: Final = 60.0
"""How far from its middle a path may reach: few straight-line lenses show 120 degrees. Common practice."""

ROLL_STEP_DEG: Final = 0.5
ROLL_ZOOMS: Final = 10
ROLLS_PER_ZOOM: Final = 21
"""Each zoom shrinks its reach fivefold, to twice the step before: the last step is 3e-8 degrees."""
VALLEYS: Final = 16
"""So many valleys of the first scan are followed, the lowest first: the extents of a path have a few."""
EQUALLY_GOOD: Final = 1.0 + 1e-6
"""Rolls within this factor of the best count as equal; of these the one nearest to north up wins."""

SMALLEST: Final = 1e-9
"""Sizes below this on the tangent plane, 0.2 milliarcseconds, are those of a single place."""

SLACK: Final = 1e-9
"""Part of a side by which rounding may push a place over the margin."""

NORTH_POLE: Final = np.array([0.0, 0.0, 1.0])

CENTRING_TURNS: Final = 60
CENTRED: Final = 1e-13


class FrameError(UsageProblem):
    """A frame that cannot be had."""


@dataclass(frozen=True, slots=True)
class CameraFrame:
    """A rectangle of sky as a camera sees it: upright, not mirrored, so that east is left of north.

    Attributes:
        ra_deg: right ascension of the middle, [0, 360).
        dec_deg: declination of the middle.
        position_angle_deg: of the side that is up in the picture, at the middle, [0, 360).
        width_deg: angle across the middle, left to right.
        height_deg: angle across the middle, bottom to top.
    """

    ra_deg: float
    dec_deg: float
    position_angle_deg: float
    width_deg: float
    height_deg: float

    @property
    def axes(self) -> Floats:
        """Unit vectors right, up and out along the line of sight, one a row, shape (3, 3)."""
        north, east = _north_and_east(self.ra_deg, self.dec_deg)
        angle = np.radians(self.position_angle_deg)
        up = np.cos(angle) * north + np.sin(angle) * east
        return np.stack([np.sin(angle) * north - np.cos(angle) * east, up, np.cross(north, -east)])

    @property
    def half_sizes(self) -> Floats:
        """Half the width and height on the tangent plane, in units of its distance, shape (2,)."""
        return np.asarray(np.tan(np.radians([self.width_deg, self.height_deg]) / 2.0), dtype=np.float64)

    def on_plane(self, directions: Floats) -> Floats:
        """Return places right of and above the middle, in units of half the frame, shape (n, 2).

        The edges are at -1 and 1; what stands 90 degrees and more from the middle is not a number.
        """
        right, up, out = self.axes @ directions
        out = np.where(out > 0.0, out, np.nan)
        return np.asarray(np.stack([right / out, up / out], axis=1) / np.maximum(self.half_sizes, SMALLEST))

    def pixels(self, directions: Floats, columns: int, rows: int) -> Floats:
        """Return places in the picture, shape (n, 2): x from its left edge, y down from its upper edge.

        The upper left pixel reaches from 0 to 1 in both, so its middle is at 0.5.
        """
        x, y = self.on_plane(directions).T
        return np.stack([(1.0 + x) * columns / 2.0, (1.0 - y) * rows / 2.0], axis=1)

    def directions_at(self, places: Floats) -> Floats:
        """Return the directions of places given as :meth:`on_plane` returns them, shape (3, n)."""
        flat = places * self.half_sizes
        vectors = self.axes.T @ np.vstack([flat.T, np.ones(len(flat))])
        return np.asarray(vectors / np.linalg.norm(vectors, axis=0))

    def room(self, directions: Floats) -> Floats:
        """Return how far directions are from the nearest edge, as a part of the side, shape (n,).

        0.5 in the middle, 0 on an edge, below zero outside; minus infinity behind the camera.
        """
        away = np.max(np.abs(self.on_plane(directions)), axis=1)
        return np.asarray((1.0 - np.nan_to_num(away, nan=np.inf, posinf=np.inf)) / 2.0)

    def holds(self, directions: Floats, margin: float = 0.0) -> Bools:
        """Return which directions lie in the frame, with that part of each side free, shape (n,)."""
        return np.asarray(self.room(directions) >= margin - SLACK)

    def turned_over(self) -> CameraFrame:
        """Return the same frame held the other way up, as from the other hemisphere."""
        return replace(self, position_angle_deg=(self.position_angle_deg + 180.0) % 360.0)

    def corners(self) -> Floats:
        """Return the directions of the corners, clockwise from the upper left, shape (3, 4)."""
        return self.directions_at(np.array([[-1.0, 1.0], [1.0, 1.0], [1.0, -1.0], [-1.0, -1.0]]))


def smallest_frame(
    path: Floats,
    *,
    aspect: float | None = FULL_ASPECT,
    margin: float = DEFAULT_MARGIN,
    position_angle_deg: float | None = None,
) -> CameraFrame:
    """Return the smallest frame that holds every direction of a path, the path centred both ways.

    With an aspect, the smallest frame is the one that allows the longest lens; without, the one of the least
    area on its tangent plane. The middle is moved until the path reaches equally far to both sides on the
    plane that touches there. Of rolls equally good, the one nearest to north up is taken.

    Args:
        path: unit vectors, shape (3, n), n at least 1.
        aspect: width over height of the sensor; None for a rectangle of any shape.
        margin: the part of each side that stays free at either end of it.
        position_angle_deg: of the side that is up; None to turn the frame freely.

    Raises:
        FrameError: no path, a margin outside 0 to 0.5, an aspect not above zero, or a path too wide.

    Accuracy: the path is held to 1e-9 of a side. No roll allows a lens longer by more than 1e-4 of it, which
        valleys nearer than the first scan can tell apart may cost. A path need not be centred: giving that up
        would lengthen the lens by less than 0.5 per cent for paths to 25 degrees across (a test measures it).
    """
    _check(path, aspect, margin)
    start = _middle(path)
    measure = _measure(aspect)
    pole = NORTH_POLE
    if position_angle_deg is not None:
        roll = float(position_angle_deg) % 360.0
    else:
        pole, _ = _north_and_east(*_coordinates_of(start))
        roll = _best_roll(path, start, pole, measure)
    middle, half = _centred(path, start, np.array([roll]), pole)
    half = half[0] / (1.0 - 2.0 * margin)
    if aspect is not None:
        height = max(half[0] / aspect, half[1])
        half = np.array([height * aspect, height])
    width, height = np.degrees(2.0 * np.arctan(half)).tolist()
    ra, dec = _coordinates_of(middle[0])
    if position_angle_deg is None:
        north, east = _north_and_east(ra, dec)
        _, up, _ = _axes(middle, np.array([roll]), pole)[0]
        roll = round(float(np.degrees(np.arctan2(up @ east, up @ north))), 9) % 360.0
    return CameraFrame(ra, dec, roll, width, height)


def coordinates(directions: Floats) -> tuple[Floats, Floats]:
    """Return right ascension [0, 360) and declination of vectors, shape (3, n)."""
    stack = directions[np.newaxis]
    ra = longitude_deg(stack)[0]  # just below zero this rounds to 360
    return np.where(ra < 360.0, ra, 0.0), latitude_deg(stack)[0]


def _coordinates_of(direction: Floats) -> tuple[float, float]:
    ra, dec = coordinates(direction[:, np.newaxis])
    return float(ra[0]), float(dec[0])


def _check(path: Floats, aspect: float | None, margin: float) -> None:
    """Refuse what no frame can be made of."""
    if path.ndim != 2 or path.shape[0] != 3 or not path.shape[1] or not np.all(np.isfinite(path)):
        raise FrameError("a frame needs a path: at least one direction, none unknown")
    if not 0.0 <= margin < 0.5:
        raise FrameError(f"a margin of {margin:g} is not a part of each side: give 0 up to 0.5, as 0.15")
    if aspect is not None and not (0.0 < aspect < np.inf):
        raise FrameError(f"{aspect:g} is no ratio of width to height: give a number above 0, as 1.5")


def _middle(path: Floats) -> Floats:
    """Return a direction near the middle of a path, shape (3,), however unevenly the path is sampled.

    Source: Badoiu and Clarkson 2003, Smaller core-sets for balls: step towards the farthest, ever less.

    Raises:
        FrameError: the path reaches farther than a flat picture can show.
    """
    middle = path[:, 0]
    for turn in range(1, 100):
        farthest = path[:, np.argmin(middle @ path)]
        middle = middle + (farthest - middle) / (turn + 1.0)
        size = float(np.linalg.norm(middle))
        if size < 1e-6:
            break
        middle = middle / size
    if float(np.min(middle @ path)) < np.cos(np.radians(WIDEST_REACH_DEG)):
        raise FrameError(
            f"the path reaches more than {WIDEST_REACH_DEG:.0f} degrees from its middle, too far for one "
            "frame: plan a shorter span"
        )
    return np.asarray(middle)


def _north_and_east(ra_deg: float, dec_deg: float) -> tuple[Floats, Floats]:
    """Return the unit vectors towards north and east at a place, shape (3,) each; at a pole by its RA."""
    ra, dec = np.radians(ra_deg), np.radians(dec_deg)
    north = np.array([-np.sin(dec) * np.cos(ra), -np.sin(dec) * np.sin(ra), np.cos(dec)])
    return north, np.array([-np.sin(ra), np.cos(ra), 0.0])


def _axes(middle: Floats, roll_deg: Floats, pole: Floats) -> Floats:
    """Return right, up and out for middles, shape (k, 3), and rolls, shape (k,); result (k, 3, 3).

    Rolls are counted from the direction towards ``pole``, shape (3,), not from north: where a path lies about
    the pole of the sky, north turns as the middle moves.
    """
    toward = pole - (middle @ pole)[:, np.newaxis] * middle
    size = np.linalg.norm(toward, axis=1, keepdims=True)
    north = np.where(size > SMALLEST, toward / np.maximum(size, SMALLEST), [1.0, 0.0, 0.0])
    east = np.cross(north, middle)
    c, s = np.cos(np.radians(roll_deg))[:, np.newaxis], np.sin(np.radians(roll_deg))[:, np.newaxis]
    return np.stack([s * north - c * east, c * north + s * east, middle], axis=1)


def _centred(path: Floats, start: Floats, roll_deg: Floats, pole: Floats) -> tuple[Floats, Floats]:
    """Move the middle for each roll until the path is centred on the plane that touches there.

    Args:
        path: shape (3, n).
        start: a direction near the middle, shape (3,).
        roll_deg: shape (k,).
        pole: from where rolls are counted, shape (3,).

    Returns:
        middles, shape (k, 3), and half the extents to the right and up on the plane, shape (k, 2).
    """
    middle = np.tile(start, (roll_deg.size, 1))
    for _ in range(CENTRING_TURNS):
        axes = _axes(middle, roll_deg, pole)
        right, up, out = np.moveaxis(axes @ path, 1, 0)
        x, y = right / out, up / out
        low, high = (np.stack([edge(x, axis=1), edge(y, axis=1)], axis=1) for edge in (np.min, np.max))
        # Halving angles, not lengths on the plane, converges in wide fields too.
        shift = np.tan((np.arctan(low) + np.arctan(high)) / 2.0)
        if np.max(np.abs(shift)) < CENTRED:
            break
        moved = middle + np.einsum("kj,kji->ki", shift, axes[:, :2])
        middle = moved / np.linalg.norm(moved, axis=1, keepdims=True)
    return middle, (high - low) / 2.0


def _measure(aspect: float | None) -> Callable[[Floats], Floats]:
    """Return what to make small, from half extents, shape (k, 2): the height needed, or the area."""
    if aspect is None:
        return lambda half: np.asarray(half[:, 0] * half[:, 1])
    return lambda half: np.asarray(np.maximum(half[:, 0] / aspect, half[:, 1]))


def _best_roll(path: Floats, start: Floats, pole: Floats, measure: Callable[[Floats], Floats]) -> float:
    """Return the roll with the least measure, [0, 360), within 90 degrees of the pole up."""
    hull = _hull(path, start, pole)
    if np.max(np.abs(hull - hull[:, :1])) < SMALLEST:
        return 0.0

    def sizes(rolls: Floats) -> Floats:
        return measure(_centred(hull, start, rolls, pole)[1])

    rolls = np.arange(-90.0, 90.0, ROLL_STEP_DEG)
    scan = sizes(rolls)
    valley = (scan <= np.roll(scan, 1)) & (scan <= np.roll(scan, -1))
    lowest = np.flatnonzero(valley)[np.argsort(scan[valley], kind="stable")][:VALLEYS]
    found, size = _zoomed(sizes, rolls[lowest])
    best = found[size <= size.min() * EQUALLY_GOOD + SMALLEST**2]
    return float(best[np.lexsort([best, np.abs(best)])[0]] % 360.0)


def _zoomed(sizes: Callable[[Floats], Floats], rolls: Floats) -> tuple[Floats, Floats]:
    """Return the rolls at the bottom of valleys, in [-90, 90), and their measures, shape (k,) each."""
    step = ROLL_STEP_DEG
    across = np.linspace(-1.0, 1.0, ROLLS_PER_ZOOM)
    size = np.full(rolls.size, np.inf)
    for _ in range(ROLL_ZOOMS):
        near = rolls[:, np.newaxis] + step * across
        scan = sizes(near.ravel()).reshape(near.shape)
        least = np.argmin(scan, axis=1, keepdims=True)
        rolls, size = (np.take_along_axis(one, least, axis=1)[:, 0] for one in (near, scan))
        step /= ROLLS_PER_ZOOM // 4
    return (rolls + 90.0) % 180.0 - 90.0, size


def _hull(path: Floats, start: Floats, pole: Floats) -> Floats:
    """Return the directions at the corners of the path's convex hull, shape (3, k).

    Great circles are straight on every tangent plane, so the hull is the same on all.

    Source: Andrew 1979, Information Processing Letters 9, 216 (monotone chain).
    """
    axes = _axes(start[np.newaxis], np.zeros(1), pole)[0]
    right, up, out = axes @ path
    x, y = right / out, up / out
    order = np.lexsort([y, x])
    places = [(float(x[i]), float(y[i]), int(i)) for i in order]
    corners = _chain(places) + _chain(places[::-1])
    return np.asarray(path[:, sorted({number for _, _, number in corners})])


def _chain(places: list[tuple[float, float, int]]) -> list[tuple[float, float, int]]:
    """Return the corners on one side of places in order."""
    chain: list[tuple[float, float, int]] = []
    for place in places:
        while len(chain) > 1 and _turns_right(chain[-2], chain[-1], place):
            chain.pop()
        chain.append(place)
    return chain


def _turns_right(
    a: tuple[float, float, int], b: tuple[float, float, int], c: tuple[float, float, int]
) -> bool:
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]) <= 0.0
