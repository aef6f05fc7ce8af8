"""A season's places as the view from above draws them: turned, in au, and as dots of its axes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes

from wanderers.arrays import Bools, Floats
from wanderers.report.charts import labels, marks, timeaxis
from wanderers.report.charts.marks import Season

ORDER: Final = tuple(marks.MARKERS)
"""The dated moments, numbered from 1 in this order."""
ENLARGED_FROM_AU: Final = 3.0
"""Planets beyond are shown twice: whole, and the Earth's orbit enlarged beside it."""
ROOM: Final = 0.07
"""Room about what a panel holds, as a part of its larger extent."""
HALF_A_YEAR_DAYS: Final = 185.0
SMALL_ORBIT_PT: Final = 60.0
"""Below this diameter the Earth's orbit is only hinted at: the enlarged one beside it has all."""

Box = tuple[float, float, float, float]
"""Left, bottom, right, top, in au."""


@dataclass(frozen=True, slots=True)
class Scene:
    """A season's places in the plane of the ecliptic, turned so that the middle line of sight points up.

    Attributes:
        season: its marks.
        jd_utc: UTC as Julian Day numbers, shape (n,).
        earth: au, right and up from the Sun, shape (n, 2).
        planet: the same.
        numbers: the dated moments by number, as rows.
        own: where the season runs, shape (n,).
        back: where it runs backwards, shape (n,).
        around: within half a year of the middle, once round for the Earth, shape (n,).
        up_deg: J2000 longitude that points up.
    """

    season: Season
    jd_utc: Floats
    earth: Floats
    planet: Floats
    numbers: dict[int, int]
    own: Bools
    back: Bools
    around: Bools
    up_deg: float

    @property
    def sides(self) -> tuple[Floats, Floats]:
        """The Earth's places and the planet's."""
        return self.earth, self.planet

    @property
    def far(self) -> bool:
        """Whether the planet is so far out that the Earth's orbit is shown once more, enlarged."""
        return bool(np.hypot(*self.planet[self.own].T).max() > ENLARGED_FROM_AU)


def scene_of(view: pl.DataFrame, season: pl.DataFrame) -> Scene:
    """Turn a view so that the middle line of sight points up."""
    found = marks.seasons_of(season)[0]
    marked = view["mark"].to_list()
    numbers = {number: marked.index(name) for number, name in enumerate(ORDER, 1) if name in marked}
    places = [view.select(f"{who}_x_au", f"{who}_y_au").to_numpy() for who in ("earth", "planet")]
    jd_utc = timeaxis.utc_days(view["jd_tt"].to_numpy())
    middle = found.instants["middle"]
    middle = 0.5 * (found.turns_back + found.turns_on) if np.isnan(middle) else middle
    at = int(np.argmin(np.abs(jd_utc - middle)))
    line = places[1][at] - places[0][at]
    up = float(np.arctan2(line[1], line[0]))
    c, s = np.cos(np.pi / 2.0 - up), np.sin(np.pi / 2.0 - up)
    turn = np.array([[c, s], [-s, c]])  # row vectors
    own = (jd_utc >= found.start) & (jd_utc <= found.end)
    back = (jd_utc >= found.turns_back) & (jd_utc <= found.turns_on)
    up_deg = float(np.degrees(up) % 360.0)
    around = np.abs(jd_utc - middle) <= HALF_A_YEAR_DAYS
    return Scene(found, jd_utc, places[0] @ turn, places[1] @ turn, numbers, own, back, around, up_deg)


def panels(scene: Scene) -> list[Box]:
    """Return what the panels hold: all; and for a far planet the Earth's orbit once more."""
    orbit = np.array([[-1.02, -1.02], [1.02, 1.02]])
    points = np.concatenate([orbit, scene.planet[scene.own]])
    low, high = points.min(axis=0), points.max(axis=0)
    room = ROOM * float((high - low).max())
    whole = (low[0] - room, low[1] - room, high[0] + room, high[1] + 1.6 * room)
    return [whole, (-1.3, -1.2, 1.3, 2.0)] if scene.far else [whole]


def fit(ax: Axes, box: Box) -> None:
    """Set limits that hold a box at one scale in both directions."""
    frame = ax.get_window_extent()
    au_per_dot = max((box[2] - box[0]) / frame.width, (box[3] - box[1]) / frame.height)
    x, y = 0.5 * (box[0] + box[2]), 0.5 * (box[1] + box[3])
    half_width, half_height = 0.5 * au_per_dot * frame.width, 0.5 * au_per_dot * frame.height
    ax.set_xlim(x - half_width, x + half_width)
    ax.set_ylim(y - half_height, y + half_height)


def dots_of(ax: Axes, places: Floats) -> Floats:
    """Return places as dots, shape (n, 2)."""
    return np.asarray(ax.transData.transform(places)).reshape(-1, 2)


def within(ax: Axes, dots: Floats) -> Bools:
    """Return which dots lie within the axes, shape (n,)."""
    frame = ax.get_window_extent()
    low, high = np.array([frame.x0, frame.y0]), np.array([frame.x1, frame.y1])
    return np.asarray(np.all((dots >= low) & (dots <= high), axis=1))


def to_edge(ax: Axes, start: Floats, through: Floats) -> Floats:
    """Return where the ray from one place through another leaves the axes."""
    way = through - start
    limits = np.array([ax.get_xlim(), ax.get_ylim()])
    ahead = np.where(way > 0.0, limits[:, 1], limits[:, 0]) - start
    with np.errstate(divide="ignore", invalid="ignore"):
        reach = np.where(way == 0.0, np.inf, ahead / way)
    return np.asarray(start + way * float(reach.min()))


def is_small(ax: Axes) -> bool:
    """Return whether the Earth's orbit is too small in these axes for marks of its own."""
    across = float(np.ptp(dots_of(ax, np.array([[-1.0, 0.0], [1.0, 0.0]]))[:, 0]))
    return across < SMALL_ORBIT_PT * labels.dots_per_pt(ax)
