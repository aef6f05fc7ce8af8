"""One planet: distance, magnitude and apparent diameter against time, one above the other."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.events.parabola import least_within
from wanderers.report.charts import curves, labels, marks, timeaxis
from wanderers.report.charts.marks import Season
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title

Span = tuple[float, float]

TURNS: Final = ("station_retrograde", "middle", "station_direct")
PANEL_IN: Final = 2.25
GAP_IN: Final = 0.18
MOST_MARKED: Final = 24
"""Seasons up to which the marks are drawn; beyond, the shading alone tells."""


@dataclass(frozen=True, slots=True)
class Quantity:
    """What one panel shows.

    Attributes:
        column: the track's column.
        axis: what stands along the axis.
        unit: what follows a value.
        decimals: how it is rounded.
        most_is_least: whether the notable extreme, nearest or brightest, is the smallest value.
        word: what the notable extreme is called.
    """

    column: str
    axis: str
    unit: str
    decimals: int
    most_is_least: bool
    word: str

    def text(self, value: float) -> str:
        """Return a value with its unit."""
        number = f"{value:.{self.decimals}f}".replace("-", "\N{MINUS SIGN}")
        return f"magnitude {number}" if not self.unit else f"{number}{self.unit}"


QUANTITIES: Final = (
    Quantity("distance_au", "distance (au)", " au", 3, True, "nearest"),
    Quantity("magnitude", "magnitude (brighter upward)", "", 1, True, "brightest"),
    Quantity("diameter_arcsec", "diameter (arcseconds)", "″", 1, False, "largest"),
)


def draw_brightness(
    body: Body,
    track: pl.DataFrame,
    seasons: pl.DataFrame,
    *,
    span_jd: Span | None = None,
    style: Style = LIGHT,
) -> Figure:
    """Return the chart of a planet's distance, brightness and size; arguments as for ``plot_brightness``."""
    with in_force(style):
        height = 3 * PANEL_IN + 2 * GAP_IN + 1.05 + 0.8
        figure = new_figure(height, style)
        axes = []
        for number in range(len(QUANTITIES)):
            top = 0.8 + number * (PANEL_IN + GAP_IN)
            axes.append(axes_at(figure, 0.95, 0.3, height - top - PANEL_IN, top))
        plot_brightness(body, track, seasons, axes, span_jd=span_jd, style=style)
        low, high = axes[0].get_xlim()
        write_title(
            figure,
            f"{body.label}: distance, brightness and size, {timeaxis.span_text(low, high)}",
            "Geometric distance from the Earth's centre, model magnitude, equatorial diameter of the disc.",
            style,
        )
        found = marks.seasons_of(seasons, body)
        if found:
            handles = marks.key_handles(body, style, middle=marks.middle_words(found), framed=False)[1:]
            shade = Patch(facecolor=style.back_fill, label="days of retrograde motion")
            marks.draw_key(axes[-1], [*handles, shade], 0.72, style)
    return figure


def plot_brightness(
    body: Body,
    track: pl.DataFrame,
    seasons: pl.DataFrame,
    axes: list[Axes],
    *,
    span_jd: Span | None = None,
    style: Style = LIGHT,
) -> list[Axes]:
    """Draw distance, magnitude and diameter against time.

    Args:
        body: the planet.
        track: ``schema.TRACK_COLUMNS``.
        seasons: ``schema.SEASON_COLUMNS``; those of other bodies are left out.
        axes: three, from the top; time is written under the last.
        span_jd: TT Julian dates between which they are drawn; by default all of the track.
        style: the look.

    Returns:
        the axes.
    """
    found = marks.seasons_of(seasons, body)
    x = curves.time_of(track)
    low, high = (x[0], x[-1]) if span_jd is None else timeaxis.utc_days(span_jd).tolist()
    for ax, quantity in zip(axes, QUANTITIES, strict=True):
        y = curves.column(track, quantity.column)
        ax.plot(x, y, zorder=3, **style.line(body, dashed=False))
        ax.set_ylabel(quantity.axis)
        _set_heights(ax, y[(x >= low) & (x <= high)], upside_down=quantity.column == "magnitude")
        timeaxis.set_time_axis(ax, low, high, labelled=ax is axes[-1])
        tidy(ax, style)
        _mark(ax, found, (x, y), style)
        _note_extreme(ax, quantity, (x, y), style)
    return axes


def brightness_alt_text(body: Body, track: pl.DataFrame, *, span_jd: Span | None = None) -> str:
    """Return what the chart of distance, brightness and size shows, in two sentences."""
    x = curves.time_of(track)
    low, high = (x[0], x[-1]) if span_jd is None else timeaxis.utc_days(span_jd).tolist()
    told = []
    for quantity in QUANTITIES:
        extreme = _extreme(quantity, x, curves.column(track, quantity.column), (low, high))
        if extreme is not None:
            told.append(
                f"{quantity.word} on {timeaxis.long_day_text(extreme[0])} ({_spoken(quantity, extreme[1])})"
            )
    head = f"Distance, magnitude and diameter of {body.label}, {timeaxis.long_span_text(low, high)}."
    return f"{head} It is {'; '.join(told)}." if told else head


def _spoken(quantity: Quantity, value: float) -> str:
    """Return a value as a reader aloud should say it."""
    return quantity.text(value).replace("\N{MINUS SIGN}", "minus ").replace("″", " arcseconds")


def _set_heights(ax: Axes, values: Floats, *, upside_down: bool) -> None:
    """Give the line room above and below; magnitudes grow downward."""
    known = values[np.isfinite(values)]
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, 1.0)
    room = 0.14 * max(high - low, 0.02)
    ax.set_ylim(*((high + room, low - room) if upside_down else (low - room, high + room)))
    ax.locator_params(axis="y", nbins=6)


def _mark(ax: Axes, found: list[Season], line: tuple[Floats, Floats], style: Style) -> None:
    """Shade the days of retrograde motion and mark turns and middles on the line."""
    low, high = ax.get_xlim()
    bands = [(s.turns_back, s.turns_on - s.turns_back) for s in found]
    ax.broken_barh(
        bands, (0.0, 1.0), transform=ax.get_xaxis_transform(), facecolor=style.back_fill, zorder=0.4
    )
    ax.set_xlim(low, high)
    if len(found) > MOST_MARKED:
        return
    for mark in TURNS:
        at = np.array([season.instants[mark] for season in found])
        marks.draw_marks(ax, mark, at, np.interp(at, *line, left=np.nan, right=np.nan), style)


def _extreme(
    quantity: Quantity, x: Floats, y: Floats, within: tuple[float, float]
) -> tuple[float, float] | None:
    """Return when the quantity is at its notable extreme, and the value; None where nothing is known.

    The samples are joined by a parabola, so that the date does not depend on the hour they are taken at.
    """
    sign = 1.0 if quantity.most_is_least else -1.0
    least = least_within(x, sign * y, within)
    return None if least is None else (least[0], sign * least[1])


def _note_extreme(ax: Axes, quantity: Quantity, line: tuple[Floats, Floats], style: Style) -> None:
    """Write the notable extreme beside the line."""
    low, high = ax.get_xlim()
    extreme = _extreme(quantity, *line, (low, high))
    if extreme is None:
        return
    dot = tuple(ax.transData.transform(extreme))
    text = f"{quantity.word}: {quantity.text(extreme[1])}, {timeaxis.day_text(extreme[0])}"
    xy = np.column_stack(line)
    points = labels.dense(ax.transData.transform(xy), 4.0)
    prefer = (270.0,) if quantity.column == "distance_au" else (90.0,)
    note = labels.label_at(ax, text, dot, prefer, style.note(), nearest_pt=3.0)
    labels.write_labels(ax, [note], labels.ground_of(ax, points, _mark_boxes(ax)))


def _mark_boxes(ax: Axes) -> Floats:
    """Return boxes round the marks drawn so far, shape (n, 4)."""
    boxes = []
    for drawn in ax.lines:
        if drawn.get_linestyle() == "None":
            xy = np.column_stack([np.asarray(drawn.get_xdata()), np.asarray(drawn.get_ydata())])
            dots = ax.transData.transform(xy.astype(np.float64))
            boxes.append(labels.boxes_around(dots[np.isfinite(dots).all(axis=1)], (18.0, 18.0)))
    return np.concatenate(boxes) if boxes else np.zeros((0, 4))
