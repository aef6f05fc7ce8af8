"""A planet's way across a chart: its line, dated strokes, arrowheads and marks, in any plane.

All distances that must look alike on paper are worked out in dots; places go back into the axes as parts of
their width and height, so that they hold at every resolution.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection, PolyCollection

from wanderers.arrays import Bools, Floats
from wanderers.report.charts import curves, labels, marks, timeaxis
from wanderers.report.charts.marks import Season
from wanderers.report.charts.style import Style

ARROWS: Final = 6
ARROW_LONG_PT: Final = 11.0
ARROW_WIDE_PT: Final = 9.0
CLEAR_PT: Final = 15.0
"""Room between an arrowhead and a mark."""

STROKE_PT: Final = 5.0
DATED_STROKE_PT: Final = 9.0
NEAR_A_MARK: Final = 0.02
"""Part of the path's time within which a round date is not written beside a mark that has its own."""

ORDER: Final = ("station_retrograde", "station_direct", "middle", "first_pass_start", "third_pass_end")
"""Which marks choose their label's place first."""

DATES: Final = ((130.0, 3, 2), (450.0, 4, 3), (np.inf, 5, 4))
"""Longest run in days, and which of ``timeaxis.DIVISIONS`` date its strokes and set them."""


@dataclass(frozen=True, slots=True)
class Way:
    """A path in a chart.

    Attributes:
        time: UTC as Julian Day numbers, shape (n,), rising.
        places: in the coordinates of the axes, shape (n, 2).
        dots: the same in dots, shape (n, 2).
        back: where it runs backwards, shape (n,).
    """

    time: Floats
    places: Floats
    dots: Floats
    back: Bools

    def at(self, instants: Floats, *, in_dots: bool = True) -> Floats:
        """Return where the planet is at instants, shape (k, 2); NaN outside the path."""
        line = self.dots if in_dots else self.places
        sides = [np.interp(instants, self.time, line[:, side], left=np.nan, right=np.nan) for side in (0, 1)]
        return np.stack(sides, axis=1)

    def headings(self, instants: Floats) -> Floats:
        """Return unit vectors along the path at instants, in dots, shape (k, 2)."""
        number = np.clip(np.searchsorted(self.time, instants), 1, self.time.size - 1)
        step = self.dots[number] - self.dots[number - 1]
        return np.asarray(step / np.hypot(step[:, 0], step[:, 1])[:, np.newaxis])

    def own_run(self, season: Season) -> Bools:
        """Return where the path belongs to a season: between its first and last mark, and no other's turn."""
        turns = self.time[1:][np.diff(self.back.astype(np.int8)) != 0]
        slack = 0.05 * season.retrograde_days
        before, after = turns[turns < season.turns_back - slack], turns[turns > season.turns_on + slack]
        start = max(season.start, float(before[-1])) if before.size else season.start
        end = min(season.end, float(after[0])) if after.size else season.end
        return np.asarray((self.time >= start) & (self.time <= end))


def way_of(ax: Axes, time: Floats, places: Floats, back: Bools) -> Way:
    """Return a path as axes show it; their limits must be set by now."""
    return Way(time, places, np.asarray(ax.transData.transform(places)), back)


def draw_line(ax: Axes, way: Way, season: Season, style: Style) -> None:
    """Draw the path: dotted where it is not the season's, heavy where the season runs backwards."""
    own = way.own_run(season)
    back = own & (way.time >= season.turns_back) & (way.time <= season.turns_on)
    look = style.line(season.body, dashed=False)
    x, y = way.places.T
    ax.plot(x, y, zorder=3, **look | {"linewidth": 1.1, "linestyle": (0, (1.5, 1.5))})
    ax.plot(curves.only(x, own), y, zorder=3, **look)
    ax.plot(curves.only(x, back), y, zorder=3.1, **style.back_line(season.body))


def draw_strokes(ax: Axes, way: Way, season: Season, style: Style) -> Floats:
    """Draw short strokes across the path at round dates; return the instants that deserve a date."""
    own = way.time[way.own_run(season)]
    days = float(own[-1] - own[0])
    dated, set_by = next((dated, strokes) for longest, dated, strokes in DATES if days < longest)
    at = timeaxis.ticks(float(way.time[0]), float(way.time[-1]), timeaxis.DIVISIONS[set_by])
    with_date = timeaxis.ticks(float(own[0]), float(own[-1]), timeaxis.DIVISIONS[dated])
    half = 0.5 * labels.dots_per_pt(ax) * np.where(np.isin(at, with_date), DATED_STROKE_PT, STROKE_PT)
    reach = _across(way.headings(at)) * half[:, np.newaxis]
    middle = way.at(at)
    ends = _to_axes(ax, np.stack([middle - reach, middle + reach], axis=1))
    strokes = LineCollection(list(ends), colors=style.ink, linewidths=0.9, zorder=3.5, transform=ax.transAxes)
    ax.add_collection(strokes, autolim=False)
    return with_date


def draw_arrows(ax: Axes, way: Way, season: Season, style: Style) -> None:
    """Draw arrowheads along the path, evenly over its length and clear of the marks."""
    unit = labels.dots_per_pt(ax)
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(way.dots, axis=0).T))])
    at = np.interp(np.linspace(0.03, 0.97, 3 * ARROWS) * length[-1], length, way.time)
    gap = way.at(at)[:, np.newaxis] - way.at(np.array([season.instants[mark] for mark in marks.MARKERS]))
    clear = np.nanmin(np.hypot(gap[..., 0], gap[..., 1]), axis=1) > CLEAR_PT * unit
    at = at[clear][1 :: max(1, int(clear.sum()) // ARROWS)]
    along = way.headings(at) * (0.5 * ARROW_LONG_PT * unit)
    aside = _across(way.headings(at)) * (0.5 * ARROW_WIDE_PT * unit)
    middle = way.at(at)
    corners = np.stack([middle + along, middle - along + aside, middle - along - aside], axis=1)
    look: dict[str, Any] = {
        "facecolor": style.colours[season.body],
        "edgecolor": style.paper,
        "linewidth": 0.5,
    }
    heads = PolyCollection(list(_to_axes(ax, corners)), zorder=3.4, transform=ax.transAxes, **look)
    ax.add_collection(heads, autolim=False)


def draw_marks(ax: Axes, way: Way, season: Season, style: Style) -> Floats:
    """Draw the season's marks; return boxes round them that no text may cover, shape (k, 4)."""
    for mark in marks.MARKERS:
        place = way.at(np.array([season.instants[mark]]), in_dots=False)
        marks.draw_marks(ax, mark, place[:, 0], place[:, 1], style)
    dots = way.at(np.array([season.instants[mark] for mark in marks.MARKERS]))
    return labels.boxes_around(dots[np.isfinite(dots).all(axis=1)], (18.0, 18.0))


def mark_labels(
    ax: Axes, way: Way, season: Season, style: Style, *, worded: bool = True
) -> list[labels.Label]:
    """Return the labels of the marks: what happens and when; or when alone."""
    wanted = []
    for mark in ORDER:
        instant = season.instants[mark]
        dot = way.at(np.array([instant]))[0]
        if np.isfinite(dot).all():
            when = timeaxis.day_text(instant)
            text = f"{marks.mark_words(season, mark)}\n{when}" if worded else when
            look = style.note(weight="normal" if mark.endswith(("start", "end")) else "bold")
            wanted.append(labels.label_at(ax, text, tuple(dot), _sides(way, instant), look, nearest_pt=3.0))
    return wanted


def date_labels(ax: Axes, way: Way, season: Season, dated: Floats, style: Style) -> list[labels.Label]:
    """Return the labels of dated strokes; the year stands where it is new, or always on a path of years."""
    marked = np.array([season.instants[mark] for mark in marks.MARKERS])
    days = float(way.time[-1] - way.time[0])
    apart = np.nanmin(np.abs(dated[:, np.newaxis] - marked), axis=1) if dated.size else dated
    instants = dated[apart > NEAR_A_MARK * days]
    year = timeaxis.calendar_days(instants).year if instants.size else np.zeros(0, np.int64)
    look = style.note(color=style.quiet_ink)
    wanted = []
    for number, instant in enumerate(instants.tolist()):
        new = number == 0 or year[number] != year[number - 1] or days > DATES[1][0]
        dot = tuple(way.at(np.array([instant]))[0])
        text, sides = timeaxis.day_text(instant, year=bool(new)), _sides(way, instant)
        wanted.append(labels.label_at(ax, text, dot, sides, look, nearest_pt=1.0, dearest=36.0))
    return wanted


def _sides(way: Way, instant: float) -> tuple[float, float]:
    """Return the two directions across the path, degrees counter-clockwise from the right."""
    right, up = way.headings(np.array([instant]))[0]
    along = float(np.degrees(np.arctan2(up, right)))
    return along + 90.0, along - 90.0


def _across(heading: Floats) -> Floats:
    """Return unit vectors turned a quarter to the left, shape (k, 2)."""
    return np.stack([-heading[:, 1], heading[:, 0]], axis=1)


def _to_axes(ax: Axes, dots: Floats) -> Floats:
    """Return dots, shape (..., 2), as parts of the axes' width and height."""
    flat = ax.transAxes.inverted().transform(dots.reshape(-1, 2))
    return np.asarray(flat).reshape(dots.shape)
