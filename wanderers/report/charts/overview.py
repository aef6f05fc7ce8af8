"""All planets at once: longitude against time, where lines cross a conjunction."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.report.charts import curves, field, labels, marks, timeaxis
from wanderers.report.charts.curves import Line
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title
from wanderers.report.charts.wording import listed, separation_text, separation_words

TOO_FAST: Final = (
    (40.0 * 365.25, (Body.SUN, Body.MERCURY, Body.VENUS, Body.MARS)),
    (12.0 * 365.25, (Body.SUN, Body.MERCURY, Body.VENUS)),
)
"""Length of the span in days from which these bodies are left out."""

YEARLESS_DAYS: Final = 1000.0
"""Length of the span up to which the axis tells the year of a date clearly enough."""

CROSSINGS: Final = "Lines that cross: equal longitude, not always close together."

Span = tuple[float, float]
Tracks = Mapping[Body, pl.DataFrame]
Lines = Mapping[Body, Line]

CLOSE_DEG: Final = 1.0
"""Separation below which a conjunction is drawn as a full dot."""

NAMED: Final = 8
"""How many of the closest conjunctions are named, as far as there is room."""

LONG_RUN: Final = 0.12
"""Part of the span that a line must run from edge to edge of the circle to be named on its way."""

STRIP_IN: Final = 1.25
NAMES_IN: Final = 1.5
MOST_RANGE_DEG: Final = 300.0


def draw_overview(
    tracks: Tracks, events: pl.DataFrame, *, span_jd: Span | None = None, style: Style = LIGHT
) -> Figure:
    """Return the chart of all planets; arguments as for ``plot_overview``."""
    with in_force(style):
        figure = new_figure(8.2, style)
        ax = axes_at(figure, 0.85 + STRIP_IN, NAMES_IN, 1.05, 0.85)
        plot_overview(tracks, events, ax, span_jd=span_jd, style=style)
        left_out = [body.label for body in tracks if body not in shown_tracks(tracks, span_jd)]
        write_title(
            figure,
            f"The planets along the ecliptic, {timeaxis.span_text(*ax.get_xlim())}",
            "Apparent geocentric longitude, true ecliptic and equinox of date. "
            + (f"Left out, too fast for so long a span: {listed(left_out)}." if left_out else CROSSINGS),
            style,
        )
        marks.draw_key(ax, _key(style, with_sun=not left_out), 0.72, style)
    return figure


def plot_overview(
    tracks: Tracks, events: pl.DataFrame, ax: Axes, *, span_jd: Span | None = None, style: Style = LIGHT
) -> Axes:
    """Draw longitudes against time, retrograde stretches heavy, and conjunctions where lines cross.

    Args:
        tracks: of the Sun and the planets wanted, in longitude of date; ``schema.TRACK_COLUMNS``.
        events: of the span; conjunctions of two planets in longitude are used. ``schema.EVENT_COLUMNS``.
        ax: axes with room at the left for the constellations and at the right for the names.
        span_jd: first and last TT Julian date; by default those of the tracks.
        style: the look.

    Returns:
        the axes.
    """
    low, high = _bounds(tracks, span_jd)
    shown = shown_tracks(tracks, span_jd)
    lines = {body: curves.line_of(track).cropped(low, high) for body, track in shown.items()}
    cut = _cut(lines)
    for body, line in lines.items():
        _draw_line(ax, body, line, cut, style)
    meetings = _within(planet_conjunctions(events, tuple(shown)), low, high)
    x = timeaxis.utc_days(meetings["jd_tt"].to_numpy())
    y = curves.cut_at(curves.column(meetings, "longitude_deg"), cut)
    _draw_meetings(ax, x, y, curves.column(meetings, "separation_deg") < CLOSE_DEG, style)
    ax.set_ylim(cut, cut + 360.0)
    timeaxis.set_time_axis(ax, low, high)
    _longitude_ticks(ax, cut)
    tidy(ax, style, grid="x")
    _draw_constellations(ax, cut, 0.5 * (low + high), style)
    _name_lines(ax, lines, cut, style)
    _name_inside(ax, meetings, np.stack([x, y], axis=1), _rounds(lines, cut), style)
    return ax


def overview_alt_text(
    tracks: Tracks, seasons: pl.DataFrame, events: pl.DataFrame, *, span_jd: Span | None = None
) -> str:
    """Return what the chart of all planets shows, in two or three sentences."""
    shown = shown_tracks(tracks, span_jd)
    low, high = _bounds(tracks, span_jd)
    meetings = _within(planet_conjunctions(events, tuple(shown)), low, high)
    planets = [body for body in shown if body is not Body.SUN]
    text = (
        f"Ecliptic longitude against time for {len(planets)} planet{'' if len(planets) == 1 else 's'}"
        f"{' and the Sun' if Body.SUN in shown else ''}, "
        f"{timeaxis.long_span_text(low, high)}. "
        f"{meetings.height or 'No'} conjunction{'' if meetings.height == 1 else 's'} of two planets"
    )
    if not meetings.is_empty():
        best = meetings.sort("separation_deg").row(0, named=True)
        text += (
            f"; the closest is {Body(best['body']).label} with {Body(best['other']).label}, "
            f"{separation_words(best['separation_deg'])} apart on "
            f"{timeaxis.long_day_text(float(timeaxis.utc_days(best['jd_tt'])))}"
        )
    return f"{text}. {_seasons_words(seasons, planets)}"


def planet_conjunctions(events: pl.DataFrame, bodies: tuple[Body, ...] = PLANETS) -> pl.DataFrame:
    """Return the conjunctions of two of these planets in ecliptic longitude."""
    planets = [body.value for body in bodies if body in PLANETS]
    return events.filter(
        pl.col("kind") == "conjunction",
        pl.col("frame") == "ecliptic",
        pl.col("body").is_in(planets),
        pl.col("other").is_in(planets),
    )


def _within(events: pl.DataFrame, low: float, high: float) -> pl.DataFrame:
    """Return the events between two instants on the time axis."""
    at = timeaxis.utc_days(events["jd_tt"].to_numpy())
    return events.filter(pl.Series((at >= low) & (at <= high)))


def shown_tracks(tracks: Tracks, span_jd: Span | None = None) -> Tracks:
    """Return the tracks that are drawn: over long spans the fast bodies would cover all others."""
    low, high = _bounds(tracks, span_jd)
    hidden = next((bodies for days, bodies in TOO_FAST if high - low > days), ())
    kept = {body: track for body, track in tracks.items() if body not in hidden}
    return kept or tracks


def _bounds(tracks: Tracks, span_jd: Span | None) -> tuple[float, float]:
    """Return between which instants the chart is drawn, on the time axis."""
    if span_jd is None:
        ends = [(track["jd_tt"][0], track["jd_tt"][-1]) for track in tracks.values()]
        span_jd = min(first for first, _ in ends), max(last for _, last in ends)
    low, high = timeaxis.utc_days(span_jd).tolist()
    return low, high


def _seasons_words(seasons: pl.DataFrame, planets: Sequence[Body]) -> str:
    """Return how often each planet runs backwards."""
    number = Counter(seasons["body"].to_list())
    told = [f"{body.label} {number[body.value]}" for body in planets if body.value in number]
    if not told:
        return "No planet runs backwards."
    return f"Retrograde stretches, drawn heavy: {', '.join(told)}."


def _cut(lines: Lines) -> float:
    """Return where to cut the circle: away from planets that never go round it."""
    slow = [line.longitude_deg for line in lines.values() if np.ptp(line.longitude_deg) < MOST_RANGE_DEG]
    return curves.quietest_cut(np.concatenate(slow)) if slow else 0.0


def _draw_line(ax: Axes, body: Body, line: Line, cut: float, style: Style) -> None:
    ax.plot(*line.laid(cut), zorder=2, **style.line(body))
    if body is not Body.SUN and line.back.any():
        ax.plot(*line.laid(cut, back_only=True), zorder=2.5, **style.back_line(body))


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


def _key(style: Style, *, with_sun: bool) -> list[Any]:
    heavy: dict[str, Any] = {
        "color": style.quiet_ink,
        "linewidth": style.back_line_pt,
        "solid_capstyle": "butt",
    }
    sun = [Line2D([], [], **style.line(Body.SUN), label="the Sun, for comparison")] if with_sun else []
    return [
        Line2D([], [], **heavy, label="retrograde"),
        *sun,
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
    strip = STRIP_IN / (ax.get_window_extent().width / ax.figure.dpi)
    look: dict[str, Any] = {"transform": ax.get_yaxis_transform(), "color": style.rule, "linewidth": 0.7}
    ax.hlines(at, -strip, 1.0, clip_on=False, zorder=1, **look)
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


def _name_lines(ax: Axes, lines: Lines, cut: float, style: Style) -> None:
    """Name the lines at their right ends, one below the other."""
    ends = curves.cut_at(np.array([line.longitude_deg[-1] for line in lines.values()]), cut)
    box = ax.get_window_extent()
    unit = labels.dots_per_pt(ax)
    wanted = np.asarray(ax.transData.transform(np.stack([np.zeros_like(ends), ends], axis=1)))[:, 1]
    gap = 1.35 * style.type_pt * unit
    heights = labels.spread(wanted, gap, box.y0 + gap / 2.0, box.y1 - gap / 2.0)
    starts, stops = (wanted - box.y0) / box.height, (heights - box.y0) / box.height
    reach = 1.0 + np.array([0.0, 6.0, 26.0, 30.0]) * unit / box.width
    look: dict[str, Any] = {"transform": ax.transAxes}
    for body, start, stop in zip(lines, starts, stops, strict=True):
        ax.plot(reach[:3], [start, stop, stop], zorder=3, clip_on=False, **look, **style.line(body))
        colour = style.name_colour(body)
        ax.text(reach[3], stop, body.label, color=colour, va="center", weight="bold", **look)


def _name_inside(
    ax: Axes, meetings: pl.DataFrame, places: Floats, rounds: list[tuple[Body, Floats]], style: Style
) -> None:
    """Name the closest conjunctions beside their dots, and the lines that have left the circle's edge."""
    nearest = np.argsort(curves.column(meetings, "separation_deg"), kind="stable")[:NAMED]
    dots = ax.transData.transform(places) if places.size else np.zeros((0, 2))
    look = style.note()
    with_year = bool(np.ptp(ax.get_xlim()) > YEARLESS_DAYS)
    wanted = []
    for number in nearest.tolist():
        text = _meeting_text(meetings.row(number, named=True), with_year=with_year)
        wanted.append(labels.label_at(ax, text, tuple(dots[number]), (135.0, 315.0), look, nearest_pt=4.0))
    wanted += [_round_label(ax, body, ax.transData.transform(run), style) for body, run in rounds]
    rings = labels.boxes_around(dots, (14.0, 14.0))
    labels.write_labels(ax, wanted, labels.ground_of(ax, _line_dots(ax), rings))


def _meeting_text(event: dict[str, Any], *, with_year: bool) -> str:
    when = timeaxis.day_text(float(timeaxis.utc_days(event["jd_tt"])), year=with_year)
    pair = f"{Body(event['body']).label}–{Body(event['other']).label}"
    return f"{pair}\n{when}, {separation_text(event['separation_deg'])}"


def _rounds(lines: Lines, cut: float) -> list[tuple[Body, Floats]]:
    """Return the long runs of lines from edge to edge of the circle, shape (n, 2) each, but the last ones."""
    found = []
    for body, line in lines.items():
        longitude = curves.cut_at(line.longitude_deg, cut)
        places = np.column_stack([line.time, longitude])
        runs = np.split(places, np.flatnonzero(np.abs(np.diff(longitude)) > 180.0) + 1)
        found += [(body, run) for run in runs[:-1] if len(run) > LONG_RUN * len(places)]
    return found


def _round_label(ax: Axes, body: Body, run: Floats, style: Style) -> labels.Label:
    """Return the name of a line, to stand close beside it anywhere along its way."""
    look = style.note(color=style.name_colour(body), weight="bold")
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
