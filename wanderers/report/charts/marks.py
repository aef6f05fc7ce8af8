"""The marks of a retrograde season, as every chart draws and words them.

A turn is a triangle whose tip shows which way the planet goes on: left, backwards, westward; right, forwards.
The middle is a filled lozenge (a disc would pass for a star), the ends of the threefold span are short bars.
All are drawn in black and white.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from matplotlib.patches import Patch

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.report.charts.curves import column
from wanderers.report.charts.style import Style
from wanderers.report.charts.timeaxis import utc_days
from wanderers.schema import SEASON_MARKS

MARK_PT: Final = 8.0

MARKERS: Final[dict[str, str]] = {
    "first_pass_start": "|",
    "station_retrograde": "<",
    "middle": "D",
    "station_direct": ">",
    "third_pass_end": "|",
}

MIDDLES: Final[dict[str, str]] = {
    "opposition": "opposition",
    "inferior_conjunction": "inferior conjunction",
}


@dataclass(frozen=True, slots=True)
class Season:
    """One retrograde season as a chart needs it; instants in UTC as Julian Day numbers, NaN where unknown."""

    body: Body
    instants: dict[str, float]
    middle_kind: str
    retrograde_deg: float
    direct_deg: float
    arc_deg: float
    retrograde_days: float
    path_shape: str
    constellations: tuple[str, ...]

    @property
    def start(self) -> float:
        """When the first pass begins, or the retrograde station where that is not known."""
        return _known(self.instants["first_pass_start"], self.instants["station_retrograde"])

    @property
    def end(self) -> float:
        """When the third pass ends, or the direct station where that is not known."""
        return _known(self.instants["third_pass_end"], self.instants["station_direct"])

    @property
    def turns_back(self) -> float:
        """When the planet turns retrograde."""
        return self.instants["station_retrograde"]

    @property
    def turns_on(self) -> float:
        """When the planet turns direct."""
        return self.instants["station_direct"]

    @property
    def middle_word(self) -> str:
        """What the middle is."""
        return MIDDLES[self.middle_kind]


def seasons_of(table: pl.DataFrame, body: Body | None = None) -> list[Season]:
    """Return the seasons of a table, in its order; those of one body if one is given."""
    chosen = table if body is None else table.filter(pl.col("body") == body.value)
    instants = {mark: utc_days(column(chosen, f"{mark}_jd_tt")).tolist() for mark in SEASON_MARKS}
    return [
        Season(
            body=Body(row["body"]),
            instants={mark: instants[mark][number] for mark in SEASON_MARKS},
            middle_kind=row["middle_kind"],
            retrograde_deg=row["station_retrograde_longitude_deg"],
            direct_deg=row["station_direct_longitude_deg"],
            arc_deg=row["arc_deg"],
            retrograde_days=row["retrograde_days"],
            path_shape=row["path_shape"],
            constellations=tuple(row["constellations"].split("+")),
        )
        for number, row in enumerate(chosen.iter_rows(named=True))
    ]


def season_frame(table: pl.DataFrame) -> str | None:
    """Return the frame of a table of seasons; None when it is empty."""
    return None if table.is_empty() else str(table["frame"][0])


def mark_look(mark: str, style: Style) -> dict[str, Any]:
    """Return how a mark is drawn: keywords of a line without a line."""
    filled = mark == "middle"
    return {
        "linestyle": "none",
        "marker": MARKERS[mark],
        "markersize": MARK_PT * {"|": 1.5, "D": 0.9}.get(MARKERS[mark], 1.0),
        "markerfacecolor": style.ink if filled else style.paper,
        "markeredgecolor": style.paper if filled else style.ink,
        "markeredgewidth": 1.2 if not filled else 0.8,
    }


def bar_look(style: Style) -> dict[str, Any]:
    """Return how the ends of a threefold span are drawn."""
    return mark_look("first_pass_start", style) | {"markeredgecolor": style.ink, "markeredgewidth": 1.6}


def draw_marks(ax: Axes, mark: str, x: Floats, y: Floats, style: Style) -> None:
    """Draw one mark at several places, shape (n,) each."""
    look = bar_look(style) if MARKERS[mark] == "|" else mark_look(mark, style)
    ax.plot(x, y, zorder=4, **look)


def mark_words(season: Season, mark: str) -> str:
    """Return what happens at a mark, in few words."""
    return {
        "first_pass_start": "first pass begins",
        "station_retrograde": "turns retrograde",
        "middle": season.middle_word,
        "station_direct": "turns direct",
        "third_pass_end": "third pass ends",
    }[mark]


def frame_look(style: Style) -> dict[str, Any]:
    """Return how the frame round a threefold span is drawn."""
    return {"edgecolor": style.quiet_ink, "linewidth": 0.9, "linestyle": (0, (4.0, 2.5))}


def key_handles(body: Body, style: Style, *, middle: str, framed: bool) -> list[Line2D | Patch]:
    """Return what a key explains: the heavy line and the marks; with ``framed`` the threefold frame too."""
    handles: list[Line2D | Patch] = [
        Line2D([], [], **style.back_line(body), label="retrograde"),
        Line2D([], [], **mark_look("station_retrograde", style), label="turns retrograde"),
        Line2D([], [], **mark_look("middle", style), label=middle),
        Line2D([], [], **mark_look("station_direct", style), label="turns direct"),
    ]
    if framed:
        handles.append(Patch(facecolor="none", **frame_look(style), label="longitudes covered three times"))
    return handles


def draw_key(ax: Axes, handles: list[Any], below_in: float, style: Style) -> None:
    """Write a key in one row under axes, so many inches below them."""
    figure = ax.figure
    box = ax.get_window_extent()
    x = box.x0 / figure.bbox.width
    y = (box.y0 - below_in * figure.dpi) / figure.bbox.height
    figure.legend(
        handles=handles,
        loc="upper left",
        bbox_to_anchor=(x, y),
        ncols=len(handles),
        borderaxespad=0.0,
        borderpad=0.0,
        handletextpad=0.5,
        columnspacing=1.6,
        labelcolor=style.ink,
    )


def middle_words(seasons: list[Season]) -> str:
    """Return what the middles of these seasons are."""
    return seasons[0].middle_word if seasons else "middle"


def _known(value: float, other: float) -> float:
    return other if np.isnan(value) else value
