"""One planet: longitude against time, with every season shaded, marked and dated."""

from __future__ import annotations

from typing import Final, Literal

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection
from matplotlib.figure import Figure

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.report.charts import curves, labels, marks, timeaxis
from wanderers.report.charts.curves import Line
from wanderers.report.charts.marks import Season
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title
from wanderers.report.charts.wording import listed, season_sentence

FLAT_ARC: Final = 0.07
"""Part of the chart's height below which an arc needs a panel of its own to be seen."""

MOST_PANELS: Final = 20
PANEL_HEIGHT_IN: Final = 2.75
LEFT_IN: Final = 0.95
RIGHT_IN: Final = 0.3
BETWEEN_IN: Final = 0.6
ROOMY_PANELS: Final = 2
"""Panels in one row up to which the marks are worded, not only dated."""

ROUND_DEG: Final = 330.0
MOST_WORDED: Final = 6
MOST_MARKED: Final = 40
MOST_TOLD: Final = 4
MARK_DIRECTIONS: Final[dict[str, tuple[float, ...]]] = {
    "station_retrograde": (112.0,),
    "middle": (45.0,),
    "station_direct": (292.0,),
    "first_pass_start": (315.0,),
    "third_pass_end": (135.0,),
}
"""Where labels prefer to stand: the line comes from the lower left and goes to the upper right."""

ORDER: Final = ("station_retrograde", "station_direct", "middle", "first_pass_start", "third_pass_end")
"""Which marks choose their label's place first."""

Span = tuple[float, float]
Notes = Literal["words", "dates", "numbers", "none"]


def draw_longitude(
    body: Body,
    track: pl.DataFrame,
    seasons: pl.DataFrame,
    *,
    span_jd: Span | None = None,
    style: Style = LIGHT,
) -> Figure:
    """Return a planet's longitude over the span, with a panel for each season too flat to be read there.

    Args:
        body: the planet.
        track: ``schema.TRACK_COLUMNS``, longitude of date; may reach beyond the span, so that seasons at
            its edges are drawn whole in their panels.
        seasons: in the ecliptic frame, ``schema.SEASON_COLUMNS``; those of other bodies are left out.
        span_jd: first and last TT Julian date of the upper chart; by default those of the track.
        style: the look.
    """
    own = seasons.filter(pl.col("body") == body.value)
    found = marks.seasons_of(own)
    panels = found if _needs_panels(curves.line_of(track).within(*_bounds(track, span_jd)), found) else []
    rows = -(-len(panels) // _panels_a_row(len(panels)))
    with in_force(style):
        below = 1.05 + (0.1 + rows * PANEL_HEIGHT_IN if rows else 0.0)
        figure = new_figure((4.6 if rows else 6.2) + below, style)
        ax = axes_at(figure, LEFT_IN, RIGHT_IN, below, 0.8)
        notes = _notes(found, panels)
        plot_longitude(body, track, own, ax, span_jd=span_jd, notes=notes, style=style)
        for number, season in enumerate(panels):
            panel = _panel_axes(figure, number, len(panels), season, style)
            plot_season(track, season, panel, notes=_panel_notes(len(panels)), style=style)
        low, high = ax.get_xlim()
        write_title(
            figure,
            f"{body.label}: longitude, {timeaxis.span_text(low, high)}",
            f"Apparent geocentric longitude, true ecliptic and equinox of date. {_remark(found, notes)}",
            style,
        )
        if found:
            handles = marks.key_handles(body, style, middle=marks.middle_words(found), framed=True)
            marks.draw_key(ax, handles[:1] if notes == "none" else handles, 0.72, style)
    return figure


def plot_longitude(
    body: Body,
    track: pl.DataFrame,
    seasons: pl.DataFrame,
    ax: Axes,
    *,
    span_jd: Span | None = None,
    notes: Notes = "words",
    style: Style = LIGHT,
) -> Axes:
    """Draw a planet's longitude of date against time.

    The retrograde stretch is heavy and its days are shaded; a frame holds the threefold span: the line
    enters at its lower left corner and leaves at its upper right.

    Args:
        body: the planet.
        track: ``schema.TRACK_COLUMNS``.
        seasons: of this planet, ``schema.SEASON_COLUMNS``.
        ax: the axes.
        span_jd: TT Julian dates between which it is drawn.
        notes: what stands beside the marks: words and dates, or dates; or no marks, with a number a season
            or nothing.
        style: the look.

    Returns:
        the axes.
    """
    found = marks.seasons_of(seasons)
    line = curves.line_of(track)
    low, high = _bounds(track, span_jd)
    shown = line.within(low, high)
    cut = _cut(shown, found)
    _draw_line(ax, body, line, cut, style)
    _set_heights(ax, shown, cut)
    timeaxis.set_time_axis(ax, low, high)
    tidy(ax, style)
    if notes == "none":
        return ax
    _draw_spans(ax, found, line, cut, style)
    if notes == "numbers":
        _number_seasons(ax, found, style)
    else:
        _note_marks(ax, found, _draw_marks(ax, found, line, cut, style), notes, style)
    return ax


def longitude_alt_text(
    body: Body, track: pl.DataFrame, seasons: pl.DataFrame, *, span_jd: Span | None = None
) -> str:
    """Return what the chart of one planet's longitude shows, in one or two sentences."""
    found = marks.seasons_of(seasons, body)
    low, high = _bounds(track, span_jd)
    head = f"Ecliptic longitude of {body.label} against time, {timeaxis.long_span_text(low, high)}."
    if not found:
        return f"{head} It does not run backwards."
    if len(found) == 1:
        return f"{head} {season_sentence(found[0])}"
    arcs = sorted(season.arc_deg for season in found)
    spread = f"{arcs[0]:.1f}" if f"{arcs[0]:.1f}" == f"{arcs[-1]:.1f}" else f"{arcs[0]:.1f} to {arcs[-1]:.1f}"
    stretches = [timeaxis.long_span_text(season.turns_back, season.turns_on) for season in found]
    told = listed(stretches) if len(found) <= MOST_TOLD else f"first {stretches[0]}, last {stretches[-1]}"
    often = "twice" if len(found) == 2 else f"{len(found)} times"
    return f"{head} It runs backwards {often}, by {spread} degrees: {told}."


def plot_season(
    track: pl.DataFrame, season: Season, ax: Axes, *, notes: Notes = "words", style: Style = LIGHT
) -> Axes:
    """Draw one season's longitude against time, over a little more than its marks.

    Args:
        track: of the season's planet, ``schema.TRACK_COLUMNS``, longitude of date.
        season: out of ``marks.seasons_of``.
        ax: the axes.
        notes: what stands beside the marks.
        style: the look.

    Returns:
        the axes.
    """
    line = curves.line_of(track)
    room = 0.12 * (season.end - season.start)
    low, high = season.start - room, season.end + room
    _draw_line(ax, season.body, line, None, style)
    direct = line.near(season.direct_deg, season.turns_on)
    heights = np.append(line.within(low, high), [direct, direct + season.arc_deg])
    bottom, tall = float(heights.min()), float(np.ptp(heights))
    ax.set_ylim(bottom - 0.12 * tall, bottom + 1.16 * tall)
    timeaxis.set_time_axis(ax, low, high, least_pt=30.0)
    ax.set_xlabel("")
    _draw_spans(ax, [season], line, None, style)
    _degree_ticks(ax, 5)
    tidy(ax, style)
    _note_marks(ax, [season], _draw_marks(ax, [season], line, None, style), notes, style)
    return ax


def _remark(found: list[Season], notes: Notes) -> str:
    """Return how retrograde motion is shown."""
    if not found:
        return "No retrograde motion in this span."
    if notes == "none":
        return "Retrograde stretches are heavy."
    return f"Days of retrograde motion are shaded{' and numbered as below' if notes == 'numbers' else ''}."


def _notes(found: list[Season], panels: list[Season]) -> Notes:
    """Return what stands beside the marks of the upper chart."""
    if panels:
        return "numbers"
    if len(found) > MOST_MARKED:
        return "none"
    return "words" if len(found) <= MOST_WORDED else "dates"


def _panels_a_row(count: int) -> int:
    """Return how many panels stand side by side."""
    return min(max(count, 1), 3 if count <= 6 else 4)


def _panel_notes(count: int) -> Notes:
    """Return what stands beside the marks of a panel, by how many there are."""
    return "words" if _panels_a_row(count) <= ROOMY_PANELS else "dates"


def _panel_axes(figure: Figure, number: int, count: int, season: Season, style: Style) -> Axes:
    """Return axes for one season in its place below the chart, with its number and year above."""
    columns = _panels_a_row(count)
    row, place = divmod(number, columns)
    width, height = figure.get_size_inches().tolist()
    wide = (width - LEFT_IN - RIGHT_IN + BETWEEN_IN) / columns
    left = LEFT_IN + place * wide
    bottom = 0.5 + (-(-count // columns) - 1 - row) * PANEL_HEIGHT_IN
    top = height - bottom - PANEL_HEIGHT_IN + 0.8
    ax = axes_at(figure, left, width - left - wide + BETWEEN_IN, bottom, top)
    year = timeaxis.year_text(int(timeaxis.calendar_days(season.turns_back).year[0]))
    ax.set_title(f"{number + 1}   {year}", loc="left", fontsize=style.type_pt, weight="bold")
    return ax


def _bounds(track: pl.DataFrame, span_jd: Span | None) -> tuple[float, float]:
    """Return between which instants a track is drawn, on the time axis."""
    ends = (track["jd_tt"][0], track["jd_tt"][-1]) if span_jd is None else span_jd
    low, high = timeaxis.utc_days(ends).tolist()
    return low, high


def _needs_panels(shown: Floats, found: list[Season]) -> bool:
    """Return whether the least arc would hardly be seen on the whole chart."""
    travelled = min(float(np.ptp(shown)), 360.0) if shown.size else 360.0
    return 0 < len(found) <= MOST_PANELS and min(season.arc_deg for season in found) < FLAT_ARC * travelled


def _cut(longitude: Floats, found: list[Season]) -> float | None:
    """Return where the circle is cut, far from all arcs; None where the planet does not go round it."""
    if longitude.size == 0 or float(np.ptp(longitude)) <= ROUND_DEG:
        return None
    arcs = [season.direct_deg + part * season.arc_deg for season in found for part in (0.0, 0.5, 1.0)]
    return curves.quietest_cut(np.array(arcs))


def _draw_line(ax: Axes, body: Body, line: Line, cut: float | None, style: Style) -> None:
    ax.plot(*line.laid(cut), zorder=3, **style.line(body, dashed=False))
    ax.plot(*line.laid(cut, back_only=True), zorder=3, **style.back_line(body))


def _set_heights(ax: Axes, longitude: Floats, cut: float | None) -> None:
    if cut is not None:
        ax.set_ylim(cut, cut + 360.0)
        at = np.arange(np.ceil(cut / 30.0) * 30.0, cut + 360.1, 30.0)
        ax.set_yticks(at, [f"{value % 360.0:.0f}°" for value in at])
    else:
        low, high = (float(longitude.min()), float(longitude.max())) if longitude.size else (0.0, 1.0)
        room = 0.10 * max(high - low, 1.0)
        ax.set_ylim(low - room, high + room)
        _degree_ticks(ax, 9)
    ax.set_ylabel("ecliptic longitude (degrees)")


def _degree_ticks(ax: Axes, most: int) -> None:
    """Put ticks at round longitudes, written from 0 to 360."""
    low, high = ax.get_ylim()
    steps = np.array([0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 30.0, 60.0, 90.0])
    step = float(steps[np.argmax((high - low) / steps <= most)])
    at = np.arange(np.ceil(low / step) * step, high, step)
    decimals = 0 if step >= 1.0 else 1
    ax.set_yticks(at, [f"{value % 360.0:.{decimals}f}°" for value in at])


def _draw_spans(ax: Axes, found: list[Season], line: Line, cut: float | None, style: Style) -> None:
    """Shade the days of retrograde motion over the whole height, and frame the threefold spans."""
    if not found:
        return
    bottom, top = ax.get_ylim()
    bands = [_rectangle(s.turns_back, s.turns_on, bottom, top) for s in found]
    ax.add_collection(
        PolyCollection(bands, facecolor=style.back_fill, edgecolor="none", zorder=0.4), autolim=False
    )
    frames = []
    for season in found:
        if np.isnan(season.instants["first_pass_start"]) or np.isnan(season.instants["third_pass_end"]):
            continue
        direct = line.near(season.direct_deg, season.turns_on)
        if cut is None:
            lows = [direct]
        else:
            base = float(curves.cut_at(np.array([direct]), cut)[0])
            lows = [base, base - 360.0]
        frames += [_rectangle(season.start, season.end, low, low + season.arc_deg) for low in lows]
    drawn = PolyCollection(frames, facecolor="none", zorder=1.5, **marks.frame_look(style))
    ax.add_collection(drawn, autolim=False)


def _rectangle(left: float, right: float, low: float, high: float) -> Floats:
    return np.array([[left, low], [right, low], [right, high], [left, high]])


def _draw_marks(
    ax: Axes, found: list[Season], line: Line, cut: float | None, style: Style
) -> dict[str, Floats]:
    """Draw the marks of all seasons; return their places, shape (seasons, 2), by mark."""
    places = {}
    for mark in ORDER:
        x = np.array([season.instants[mark] for season in found])
        y = np.array([_mark_height(season, mark, line) for season in found])
        y = y if cut is None else curves.cut_at(y, cut)
        places[mark] = np.column_stack([x, y])
        marks.draw_marks(ax, mark, x, y, style)
    return places


def _mark_height(season: Season, mark: str, line: Line) -> float:
    """Return the unwrapped longitude at a mark: the table's where it has one, else the line's."""
    at = season.instants[mark]
    if np.isnan(at):
        return float("nan")
    if mark == "middle":
        return line.at(at)
    direct = mark in ("station_direct", "first_pass_start")
    return line.near(season.direct_deg if direct else season.retrograde_deg, at)


def _note_marks(ax: Axes, found: list[Season], places: dict[str, Floats], notes: Notes, style: Style) -> None:
    """Write what happens and when beside the marks; where all does not fit, the turns come first."""
    look = style.note()
    low, high = ax.get_xlim()
    wanted, boxes = [], []
    for mark in ORDER:
        for season, place in zip(found, places[mark], strict=True):
            if not low <= place[0] <= high:
                continue
            dot = tuple(ax.transData.transform(place))
            boxes.append(labels.boxes_around(np.array([dot]), (16.0, 16.0)))
            text = timeaxis.day_text(float(place[0]), year=False)
            if notes == "words":
                text = f"{marks.mark_words(season, mark)}\n{text}"
            wanted.append(labels.label_at(ax, text, dot, MARK_DIRECTIONS[mark], look, nearest_pt=4.0))
    ground = labels.ground_of(ax, _line_dots(ax), np.concatenate(boxes) if boxes else None)
    labels.write_labels(ax, wanted, ground)


def _number_seasons(ax: Axes, found: list[Season], style: Style) -> None:
    """Number the shaded seasons along the upper edge."""
    low, high = ax.get_xlim()
    for number, season in enumerate(found, start=1):
        left, right = max(season.turns_back, low), min(season.turns_on, high)
        if left < right:
            ax.text(
                (left + right) / 2.0,
                0.985,
                str(number),
                transform=ax.get_xaxis_transform(),
                ha="center",
                va="top",
                weight="bold",
                bbox={"boxstyle": "square,pad=0.1", "facecolor": style.back_fill, "edgecolor": "none"},
            )


def _line_dots(ax: Axes) -> Floats:
    """Return the dots of the planet's line."""
    xy = np.column_stack([np.asarray(ax.lines[0].get_xdata()), np.asarray(ax.lines[0].get_ydata())])
    return labels.dense(ax.transData.transform(xy.astype(np.float64)), 4.0)
