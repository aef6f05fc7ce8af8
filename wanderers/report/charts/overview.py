"""All planets at once: longitude against time, where lines cross a conjunction."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.report.charts import curves, field, labels, marks, timeaxis
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title

Tracks = Mapping[Body, pl.DataFrame]

CLOSE_DEG: Final = 1.0
"""Separation below which a conjunction is drawn as a full dot."""

NAMED: Final = 8
"""How many of the closest conjunctions are named, as far as there is room."""

LONG_RUN: Final = 0.12
"""Part of the span that a line must run from edge to edge of the circle to be named on its way."""

STRIP_IN: Final = 1.25
NAMES_IN: Final = 1.5
MOST_RANGE_DEG: Final = 300.0


def draw_overview(tracks: Tracks, events: pl.DataFrame, *, style: Style = LIGHT) -> Figure:
    """Return the chart of all planets; arguments as for ``plot_overview``."""
    with in_force(style):
        figure = new_figure(8.2, style)
        ax = axes_at(figure, 0.85 + STRIP_IN, NAMES_IN, 1.05, 0.85)
        plot_overview(tracks, events, ax, style=style)
        low, high = ax.get_xlim()
        write_title(
            figure,
            f"The planets along the ecliptic, {_span_words(low, high)}",
            "Apparent geocentric longitude, true ecliptic and equinox of date. Lines that cross: "
            "equal longitude, not always close together.",
            style,
        )
        marks.draw_key(ax, _key(style), 0.72, style)
    return figure


def plot_overview(tracks: Tracks, events: pl.DataFrame, ax: Axes, *, style: Style = LIGHT) -> Axes:
    """Draw longitudes against time, retrograde stretches heavy, and conjunctions where lines cross.

    Args:
        tracks: of the Sun and the planets wanted, in longitude of date; ``schema.TRACK_COLUMNS``.
        events: of the span; conjunctions of two planets in longitude are used. ``schema.EVENT_COLUMNS``.
        ax: axes with room at the left for the constellations and at the right for the names.
        style: the look.

    Returns:
        the axes.
    """
    times = {body: curves.time_of(track) for body, track in tracks.items()}
    low, high = min(t[0] for t in times.values()), max(t[-1] for t in times.values())
    cut = _cut(tracks)
    for body, track in tracks.items():
        _draw_line(ax, body, times[body], track, cut, style)
    meetings = planet_conjunctions(events)
    x, y = timeaxis.utc_days(meetings["jd_tt"].to_numpy()), curves.cut_at(curves.column(meetings, "longitude_deg"), cut)
    _draw_meetings(ax, x, y, curves.column(meetings, "separation_deg") < CLOSE_DEG, style)
    ax.set_ylim(cut, cut + 360.0)
    timeaxis.set_time_axis(ax, low, high)
    _longitude_ticks(ax, cut)
    tidy(ax, style, grid="x")
    _draw_constellations(ax, cut, 0.5 * (low + high), style)
    _name_lines(ax, tracks, cut, style)
    _name_inside(ax, meetings, np.stack([x, y], axis=1), _rounds(tracks, times, cut), style)
    return ax


def overview_alt_text(tracks: Tracks, seasons: pl.DataFrame, events: pl.DataFrame) -> str:
    """Return what the chart of all planets shows, in two or three sentences."""
    first = next(iter(tracks.values()))
    days = curves.time_of(first)
    planets = [body for body in tracks if body is not Body.SUN]
    meetings = planet_conjunctions(events)
    text = (
        f"Ecliptic longitude against time for {len(planets)} planets"
        f"{' and the Sun' if Body.SUN in tracks else ''}, "
        f"{timeaxis.long_day_text(days[0])} to {timeaxis.long_day_text(days[-1])}. "
        f"{meetings.height or 'No'} conjunction{'' if meetings.height == 1 else 's'} of two planets"
    )
    if not meetings.is_empty():
        best = meetings.sort("separation_deg").row(0, named=True)
        text += (
            f"; the closest is {Body(best['body']).label} with {Body(best['other']).label}, "
            f"{best['separation_deg']:.1f} degrees apart on "
            f"{timeaxis.long_day_text(float(timeaxis.utc_days(best['jd_tt'])))}"
        )
    return f"{text}. {_seasons_words(seasons)}"


def planet_conjunctions(events: pl.DataFrame) -> pl.DataFrame:
    """Return the conjunctions of two planets in ecliptic longitude."""
    planets = [body.value for body in PLANETS]
    return events.filter(
        pl.col("kind") == "conjunction",
        pl.col("frame") == "ecliptic",
        pl.col("body").is_in(planets),
        pl.col("other").is_in(planets),
    )


def _seasons_words(seasons: pl.DataFrame) -> str:
    counts = seasons["body"].value_counts() if not seasons.is_empty() else pl.DataFrame({"body": [], "count": []})
    number = dict(zip(counts["body"].to_list(), counts["count"].to_list(), strict=True))
    told = [f"{body.label} {number[body.value]}" for body in PLANETS if body.value in number]
    if not told:
        return "No planet runs backwards."
    return f"Retrograde stretches, drawn heavy: {', '.join(told)}."


def _span_words(low: float, high: float) -> str:
    return f"{timeaxis.day_text(low)} to {timeaxis.day_text(high)}"


def _cut(tracks: Tracks) -> float:
    """Return where to cut the circle: away from planets that never go round it."""
    slow = [
        track["longitude_deg"].to_numpy()
        for track in tracks.values()
        if np.ptp(curves.unwrapped(track["longitude_deg"].to_numpy())) < MOST_RANGE_DEG
    ]
    return curves.quietest_cut(np.concatenate(slow)) if slow else 0.0


def _draw_line(ax: Axes, body: Body, x: Floats, track: pl.DataFrame, cut: float, style: Style) -> None:
    longitude = track["longitude_deg"].to_numpy()
    ax.plot(*curves.wrapped_line(x, longitude, cut), zorder=2, **style.line(body))
    back = curves.runs_back(track)
    if body is not Body.SUN and back.any():
        ax.plot(*curves.wrapped_line(curves.only(x, back), longitude, cut), zorder=2.5, **style.back_line(body))


def _draw_meetings(ax: Axes, x: Floats, y: Floats, close: Any, style: Style) -> None:
    for chosen, look in ((~close, _ring(style)), (close, _dot(style))):
        ax.plot(x[chosen], y[chosen], zorder=4, **look)


def _ring(style: Style) -> dict[str, Any]:
    return {
        "linestyle": "none",
        "marker": "o",
        "markersize": 6.5,
        "markerfacecolor": style.paper,
        "markeredgecolor": style.ink,
        "markeredgewidth": 1.1,
    }


def _dot(style: Style) -> dict[str, Any]:
    return _ring(style) | {"markerfacecolor": style.ink, "markeredgecolor": style.paper, "markersize": 7.5}


def _key(style: Style) -> list[Any]:
    heavy = {"color": style.quiet_ink, "linewidth": style.back_line_pt, "solid_capstyle": "butt"}
    return [
        Line2D([], [], **heavy, label="retrograde"),
        Line2D([], [], **style.line(Body.SUN), label="the Sun, for comparison"),
        Line2D([], [], **_ring(style), label="conjunction of two planets"),
        Line2D([], [], **_dot(style), label=f"closer than {CLOSE_DEG:.0f}°"),
    ]


def _longitude_ticks(ax: Axes, cut: float) -> None:
    at = np.arange(np.ceil(cut / 30.0) * 30.0, cut + 360.1, 30.0)
    ax.set_yticks(at, [f"{value % 360.0:.0f}°" for value in at])
    ax.tick_params(axis="y", pad=STRIP_IN * 72.0 + 4.0)
    ax.set_ylabel("ecliptic longitude (degrees)", labelpad=4.0)


def _draw_constellations(ax: Axes, cut: float, jd: float, style: Style) -> None:
    """Name the constellations of the ecliptic in a strip at the left, and rule their limits."""
    edges, names = field.ecliptic_constellations(jd)
    at = np.sort(curves.cut_at(edges, cut))
    ax.hlines(at, 0.0, 1.0, transform=ax.get_yaxis_transform(), color=style.rule, linewidth=0.7, zorder=1)
    strip = STRIP_IN / (ax.get_window_extent().width / ax.figure.dpi)
    ax.hlines(at, -strip, 0.0, transform=ax.get_yaxis_transform(), color=style.rule, linewidth=0.7, clip_on=False)
    order = np.argsort(curves.cut_at(edges, cut))
    bounds = np.concatenate([[cut], at, [cut + 360.0]])
    named = [names[order[number - 1]] for number in range(order.size + 1)]  # the first begins before the cut
    heights = np.diff(bounds)
    if named[0] == named[-1]:  # cut in two: named once, on its larger part
        heights[0 if heights[0] < heights[-1] else -1] = 0.0
    for low, height, name in zip(bounds[:-1], heights, named, strict=True):
        if height > 4.0:
            ax.text(
                -strip * 0.5,
                low + height / 2.0,
                name,
                transform=ax.get_yaxis_transform(),
                ha="center",
                va="center",
                color=style.quiet_ink,
                fontsize=style.small_pt,
            )


def _name_lines(ax: Axes, tracks: Tracks, cut: float, style: Style) -> None:
    """Name the lines at their right ends."""
    bodies = list(tracks)
    ends = np.array([curves.cut_at(tracks[body]["longitude_deg"].to_numpy()[-1:], cut)[0] for body in bodies])
    box = ax.get_window_extent()
    unit = labels.dots_per_pt(ax)
    wanted = ax.transData.transform(np.stack([np.zeros_like(ends), ends], axis=1))[:, 1]
    gap = 1.35 * style.type_pt * unit
    heights = labels.spread(wanted, gap, box.y0 + gap / 2.0, box.y1 - gap / 2.0)
    for body, end, height in zip(bodies, (wanted - box.y0) / box.height, (heights - box.y0) / box.height, strict=True):
        look = style.line(body) | {"zorder": 3}
        reach = np.array([0.0, 6.0, 26.0]) * unit / box.width
        ax.plot(1.0 + reach, [end, height, height], transform=ax.transAxes, clip_on=False, **look)
        ax.text(
            1.0 + 30.0 * unit / box.width,
            height,
            body.label,
            transform=ax.transAxes,
            color=style.colours[body],
            va="center",
            weight="bold",
        )


def _name_inside(
    ax: Axes, meetings: pl.DataFrame, places: Floats, rounds: list[tuple[Body, Floats]], style: Style
) -> None:
    """Name the closest conjunctions beside their dots, and the lines that have left the circle's edge."""
    nearest = np.argsort(curves.column(meetings, "separation_deg"), kind="stable")[:NAMED]
    dots = ax.transData.transform(places) if places.size else np.zeros((0, 2))
    look = style.note()
    wanted = []
    for number in nearest.tolist():
        text = _meeting_text(meetings.row(number, named=True))
        wanted.append(labels.label_at(ax, text, tuple(dots[number]), (135.0, 315.0), look, nearest_pt=4.0))
    wanted += [_round_label(ax, body, ax.transData.transform(run), style) for body, run in rounds]
    rings = labels.boxes_around(dots, (14.0, 14.0))
    labels.write_labels(ax, wanted, labels.ground_of(ax, _line_dots(ax), rings))


def _meeting_text(event: dict[str, Any]) -> str:
    when = timeaxis.day_text(float(timeaxis.utc_days(event["jd_tt"])), year=False)
    pair = f"{Body(event['body']).label}–{Body(event['other']).label}"
    return f"{pair}\n{when}, {event['separation_deg']:.1f}°"


def _rounds(tracks: Tracks, times: Mapping[Body, Floats], cut: float) -> list[tuple[Body, Floats]]:
    """Return the long runs of lines from edge to edge of the circle, shape (n, 2) each, the last ones left out."""
    found = []
    for body, track in tracks.items():
        longitude = curves.cut_at(track["longitude_deg"].to_numpy(), cut)
        line = np.column_stack([times[body], longitude])
        runs = np.split(line, np.flatnonzero(np.abs(np.diff(longitude)) > 180.0) + 1)
        found += [(body, run) for run in runs[:-1] if len(run) > LONG_RUN * len(line)]
    return found


def _round_label(ax: Axes, body: Body, run: Floats, style: Style) -> labels.Label:
    """Return the name of a line, to stand close beside it anywhere along its way."""
    look = style.note(color=style.colours[body], weight="bold")
    size = labels.measure(ax, body.label, look)
    unit = labels.dots_per_pt(ax)
    anchors = run[(len(run) * np.linspace(0.1, 0.9, 17)).astype(np.int64)]
    parts = [labels.around(tuple(anchor), size, (135.0, 315.0), unit) for anchor in anchors]
    centres, costs = (np.concatenate(half) for half in zip(*parts, strict=True))
    middle = tuple(run[len(run) // 2])
    return labels.Label(body.label, middle, centres, costs, size, look, leads=False, dearest=18.0)


def _line_dots(ax: Axes) -> Floats:
    """Return the dots of all lines in the axes, a few dots apart."""
    parts = []
    for line in ax.lines:
        if line.get_linestyle() == "None":
            continue
        xy = np.column_stack([np.asarray(line.get_xdata()), np.asarray(line.get_ydata())]).astype(np.float64)
        parts.append(labels.dense(line.get_transform().transform(xy), 5.0))
    return np.concatenate(parts) if parts else np.zeros((0, 2))
