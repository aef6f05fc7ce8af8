"""One season against time: distance, magnitude, size and speed, one above the other."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.events.season_marks import run_of
from wanderers.report.charts import brightness, curves, labels, marks, timeaxis
from wanderers.report.charts.marks import Season
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title
from wanderers.report.charts.wording import season_sentence

PANEL_IN: Final = 1.75
GAP_IN: Final = 0.2
TOP_IN: Final = 0.8
BELOW_IN: Final = 1.1
LEFT_IN: Final = 1.05
DATE_ROOM_PT: Final = 46.0
NAMES: Final = (
    "distance\n(au)",
    "magnitude\n(brighter upward)",
    "diameter\n(arcseconds)",
    "speed\n(degrees a day)",
)
RIGHT_IN: Final = 0.3


def draw_season(track: pl.DataFrame, season: pl.DataFrame, *, style: Style = LIGHT) -> Figure:
    """Return the chart of a season's distance, magnitude, size and speed.

    Args:
        track: through the season, ``schema.TRACK_COLUMNS``, in the season's frame.
        season: one row, ``schema.SEASON_COLUMNS``.
        style: the look.
    """
    body = Body(season["body"][0])
    with in_force(style):
        count = len(brightness.QUANTITIES) + 1
        figure = new_figure(TOP_IN + count * PANEL_IN + (count - 1) * GAP_IN + BELOW_IN, style)
        height = float(figure.get_size_inches()[1])
        tops = [TOP_IN + number * (PANEL_IN + GAP_IN) for number in range(count)]
        axes = [axes_at(figure, LEFT_IN, RIGHT_IN, height - top - PANEL_IN, top) for top in tops]
        found = marks.seasons_of(season)[0]
        run_jd = run_of(track, season.row(0, named=True))
        brightness.plot_brightness(body, track, season, axes[:-1], span_jd=run_jd, style=style)
        low, high = axes[0].get_xlim()
        plot_speed(track, found, axes[-1], (low, high), style=style)
        for ax, name in zip(axes, NAMES, strict=True):
            ax.set_ylabel(name)
            timeaxis.set_time_axis(ax, low, high, labelled=ax is axes[-1], least_pt=DATE_ROOM_PT)
            if ax is not axes[-1]:
                ax.set_xlabel("")
        figure.align_ylabels(axes)
        write_title(
            figure,
            f"{body.label} through the season, {timeaxis.month_span_text(found.start, found.end)}",
            "Geometric distance from the Earth's centre, model magnitude, equatorial diameter of the disc, "
            "daily motion in longitude.",
            style,
        )
        handles = marks.key_handles(body, style, middle=found.middle_word, framed=False)[1:]
        shade = Patch(facecolor=style.back_fill, label="days of retrograde motion")
        marks.draw_key(axes[-1], [*handles, shade], 0.78, style)
    return figure


def plot_speed(
    track: pl.DataFrame, season: Season, ax: Axes, span: tuple[float, float], *, style: Style = LIGHT
) -> Axes:
    """Draw the daily motion in longitude: below zero the planet runs backwards.

    Args:
        track: ``schema.TRACK_COLUMNS``.
        season: its marks.
        ax: the axes; time runs to the right.
        span: UTC as Julian Day numbers between which it is drawn.
        style: the look.

    Returns:
        the axes.
    """
    x, y = curves.time_of(track), track["longitude_rate_deg_per_day"].to_numpy()
    inside = (x >= span[0]) & (x <= span[1])
    x, y = x[inside], y[inside]
    ax.plot(x, y, zorder=3, **style.line(season.body, dashed=False))
    room = 0.16 * float(np.ptp(y))
    ax.set_ylim(float(y.min()) - room, float(y.max()) + room)
    ax.axhline(0.0, color=style.quiet_ink, linewidth=1.0, zorder=2)
    ax.locator_params(axis="y", nbins=6)
    ax.yaxis.set_major_formatter(lambda value, _: f"{value:g}".replace("-", "\N{MINUS SIGN}"))
    ax.set_xlim(*span)
    tidy(ax, style)
    back = (season.turns_back, season.turns_on - season.turns_back)
    ax.broken_barh(
        [back], (0.0, 1.0), transform=ax.get_xaxis_transform(), facecolor=style.back_fill, zorder=0.4
    )
    ax.set_xlim(*span)
    for mark in brightness.TURNS:
        at = np.array([season.instants[mark]])
        marks.draw_marks(ax, mark, at, np.interp(at, x, y, left=np.nan, right=np.nan), style)
    _note_fastest(ax, season, x, y, style)
    return ax


def season_alt_text(track: pl.DataFrame, season: pl.DataFrame) -> str:
    """Return what the chart of a season against time shows."""
    found = marks.seasons_of(season)[0]
    run_jd = run_of(track, season.row(0, named=True))
    x, y = curves.time_of(track), track["longitude_rate_deg_per_day"].to_numpy()
    own = (x >= found.turns_back) & (x <= found.turns_on)
    curves_told = brightness.brightness_alt_text(found.body, track, span_jd=run_jd)
    fastest = f"Its fastest run backwards is {-float(y[own].min()):.3f} degrees a day."
    return f"{curves_told} {season_sentence(found)} {fastest}"


def _note_fastest(ax: Axes, season: Season, x: Floats, y: Floats, style: Style) -> None:
    """Write the fastest run backwards beside the line."""
    own = np.where((x >= season.turns_back) & (x <= season.turns_on), y, np.inf)
    best = int(np.argmin(own))
    dot = tuple(ax.transData.transform((x[best], y[best])))
    text = f"fastest backwards: {-y[best]:.3f}° a day, {timeaxis.day_text(float(x[best]))}"
    points = labels.dense(ax.transData.transform(np.column_stack([x, y])), 4.0)
    at = np.array([season.instants[mark] for mark in brightness.TURNS])
    at = at[np.isfinite(at)]
    dots = ax.transData.transform(np.column_stack([at, np.interp(at, x, y)]))
    boxes = labels.boxes_around(np.asarray(dots), (18.0, 18.0))
    note = labels.label_at(ax, text, dot, (90.0,), style.note(), nearest_pt=3.0)
    labels.write_labels(ax, [note], labels.ground_of(ax, points, boxes))
