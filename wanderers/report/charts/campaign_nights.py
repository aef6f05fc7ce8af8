"""The nights of a campaign as every chart draws them, and the red look for the field.

A night to come is an open ring, a must-night a filled square (a disc would pass for a star), a night done a
ring with a point, a lost one a cross, a spare a short stroke. Numbers are those of the plan.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from matplotlib.path import Path

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.bodies import BODIES
from wanderers.plans.replan import Status
from wanderers.plans.rows import MUST
from wanderers.report.charts import labels, timeaxis
from wanderers.report.charts.style import NIGHT, Style
from wanderers.site.zones import UNIX_EPOCH_JD

RED: Final = replace(
    NIGHT,
    name="red",
    ink="#f40000",
    quiet_ink="#ee0000",
    rule="#6e0000",
    back_fill="#300000",
    colours=MappingProxyType(dict.fromkeys(BODIES, "#d00000")),
)
"""For screens in the field: nothing but red on black; text at least 4.5:1, lines 3:1 (WCAG 2.1)."""

SIZES: Final = {"good": 6.5, "must": 7.0, "done": 6.5, "lost": 6.5, "spare": 5.0}
RING_WITH_POINT: Final = Path.make_compound_path(Path.unit_circle(), Path.circle(radius=0.16))
MARKERS: Final[dict[str, str | Path]] = {
    "good": "o",
    "must": "s",
    "done": RING_WITH_POINT,
    "lost": "x",
    "spare": "|",
}
KEY_WORDS: Final = {
    "good": "planned night",
    "must": "must-night",
    "done": "done",
    "lost": "lost",
    "spare": "spare night",
}
DATE_AXIS: Final = "evening date (the night of 5 to 6 March is 5 March)"


@dataclass(frozen=True, slots=True)
class Nights:
    """Nights as a chart needs them, n of them in order of date.

    Attributes:
        number: of the plan, empty for spares.
        sort: one of ``KEY_WORDS``.
        day_jd: evening date as a Julian Day number, shape (n,).
        jd: TT of the recommended time, NaN where there is none, shape (n,).
    """

    number: tuple[str, ...]
    sort: tuple[str, ...]
    day_jd: Floats
    jd: Floats

    @property
    def sorts(self) -> tuple[str, ...]:
        """Those that occur, in the order of a key."""
        return tuple(name for name in KEY_WORDS if name in self.sort)

    def of(self, sort: str) -> Bools:
        """Return which nights are of a sort, shape (n,)."""
        return np.array([one == sort for one in self.sort], dtype=np.bool_)

    @property
    def order(self) -> list[int]:
        """Places in the order in which they choose room for their number: must-nights first."""
        return sorted(range(len(self.sort)), key=lambda place: self.sort[place] != MUST)


def nights_of(table: pl.DataFrame) -> Nights:
    """Return the nights of a plan or of a table of spares."""
    sort = [
        row["status"] if row["status"] != Status.PLANNED.value else row["role"]
        for row in table.iter_rows(named=True)
    ]
    number = ["" if one is None else str(one) for one in table["night"].to_list()]
    return Nights(
        number=tuple(number),
        sort=tuple(sort),
        day_jd=day_jd(table["evening_date"]),
        jd=table["recommended_jd_tt"].fill_null(np.nan).to_numpy().astype(np.float64),
    )


def day_jd(dates: pl.Series) -> Floats:
    """Return calendar dates as Julian Day numbers at 0 h, shape (n,)."""
    return np.asarray(UNIX_EPOCH_JD + dates.to_numpy().astype("datetime64[D]").astype(np.int64))


def look(sort: str, style: Style) -> dict[str, Any]:
    """Return how nights of a sort are drawn: keywords of a line without a line."""
    common: dict[str, Any] = {
        "linestyle": "none",
        "marker": MARKERS[sort],
        "markersize": SIZES[sort],
        "markeredgecolor": style.ink,
        "markerfacecolor": style.ink if sort == MUST else style.paper,
        "markeredgewidth": 1.2,
    }
    if sort == MUST:
        common |= {"markeredgecolor": style.paper, "markeredgewidth": 0.8, "markersize": SIZES[sort] + 1.0}
    if sort == "spare":
        common |= {"markeredgecolor": style.quiet_ink, "markeredgewidth": 0.9}
    return common


def draw(ax: Axes, nights: Nights, places: Floats, style: Style) -> None:
    """Draw nights at places of the axes, shape (n, 2); must-nights on top."""
    for sort in reversed(nights.sorts):
        own = places[nights.of(sort)]
        zorder = 4.5 if sort == MUST else 4.0
        ax.plot(own[:, 0], own[:, 1], zorder=zorder, **look(sort, style))


def number_labels(
    ax: Axes,
    nights: Nights,
    dots: Floats,
    style: Style,
    *,
    prefer_deg: Sequence[float] = (90.0, 270.0),
    dearest: float = 90.0,
    musts_at_any_cost: bool = True,
) -> list[labels.Label]:
    """Return the numbers of nights drawn at dots, shape (n, 2), must-nights first and bold."""
    wanted = []
    for place in nights.order:
        if not nights.number[place] or not np.all(np.isfinite(dots[place])):
            continue
        must = nights.sort[place] == MUST
        written = style.note(weight="bold" if must else "normal")
        limit = 90.0 if must and musts_at_any_cost else dearest
        wanted.append(
            labels.label_at(
                ax,
                nights.number[place],
                (float(dots[place, 0]), float(dots[place, 1])),
                prefer_deg,
                written,
                dearest=limit,
            )
        )
    return wanted


def dot_boxes(dots: Floats, ax: Axes, size_pt: float = 7.5) -> Floats:
    """Return boxes round dots, shape (k, 4), which no text must cover."""
    side = size_pt * labels.dots_per_pt(ax)
    return labels.boxes_around(dots[np.all(np.isfinite(dots), axis=1)], (side, side))


def handles(sorts: Sequence[str], style: Style) -> list[Line2D]:
    """Return what a key explains of nights."""
    return [Line2D([], [], **look(sort, style), label=KEY_WORDS[sort]) for sort in sorts]


def set_date_axis(ax: Axes, low: float, high: float, *, labelled: bool = True) -> None:
    """Make the horizontal axis one of local evening dates with ticks at months."""
    timeaxis.set_time_axis(ax, low, high, labelled=labelled)
    if labelled:
        ax.set_xlabel(DATE_AXIS)
