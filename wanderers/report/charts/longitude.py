"""One planet: longitude against time, with every season shaded, marked and dated."""

from __future__ import annotations

from typing import Any, Final, Literal

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection
from matplotlib.figure import Figure

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.report.charts import curves, labels, marks, timeaxis
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
Notes = Literal["words", "dates", "numbers"]


def draw_longitude(
    body: Body, track: pl.DataFrame, seasons: pl.DataFrame, *, span_jd: Span | None = None, style: Style = LIGHT
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
    panels = found if _needs_panels(track, found) else []
    rows = -(-len(panels) // _panels_a_row(len(panels)))
    with in_force(style):
        below = 1.05 + (0.1 + rows * PANEL_HEIGHT_IN if rows else 0.0)
        figure = new_figure((4.6 if rows else 6.2) + below, style)
        ax = axes_at(figure, LEFT_IN, RIGHT_IN, below, 0.8)
        plot_longitude(body, track, own, ax, span_jd=span_jd, notes=_notes(found, panels), style=style)
        for number, season in enumerate(panels):
            _panel(figure, number, len(panels), track, season, style)
        low, high = ax.get_xlim()
        write_title(
            figure,
            f"{body.label}: longitude, {timeaxis.day_text(low)} to {timeaxis.day_text(high)}",
            "Apparent geocentric longitude, true ecliptic and equinox of date. Days of retrograde motion are shaded"
            + (" and numbered as below." if panels else "."),
            style,
        )
        handles = marks.key_handles(body, style, middle=marks.middle_words(found), framed=True)
        if found:
            marks.draw_key(ax, handles, 0.72, style)
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
        notes: what stands beside the marks: words and dates, dates, or a number a season and no marks.
        style: the look.

    Returns:
        the axes.
    """
    found = marks.seasons_of(seasons)
    line = curves.time_of(track), curves.unwrapped(track["longitude_deg"].to_numpy())
    low, high = (line[0][0], line[0][-1]) if span_jd is None else timeaxis.utc_days(span_jd).tolist()
    shown = line[1][(line[0] >= low) & (line[0] <= high)]
    cut = _cut(shown, found)
    _draw_line(ax, body, line, curves.runs_back(track), cut, style)
    _set_heights(ax, shown, cut)
    timeaxis.set_time_axis(ax, low, high)
    tidy(ax, style)
    _draw_spans(ax, found, line, cut, style)
    if notes == "numbers":
        _number_seasons(ax, found, style)
    else:
        _note_marks(ax, found, _draw_marks(ax, found, line, cut, style), notes, style)
    return ax


def longitude_alt_text(body: Body, track: pl.DataFrame, seasons: pl.DataFrame, *, span_jd: Span | None = None) -> str:
    """Return what the chart of one planet's longitude shows, in one or two sentences."""
    found = marks.seasons_of(seasons, body)
    x = curves.time_of(track)
    low, high = (x[0], x[-1]) if span_jd is None else timeaxis.utc_days(span_jd).tolist()
    head = (
        f"Ecliptic longitude of {body.label} against time, {timeaxis.long_day_text(low)} "
        f"to {timeaxis.long_day_text(high)}."
    )
    if not found:
        return f"{head} It does not run backwards."
    if len(found) == 1:
        return f"{head} {season_sentence(found[0])}"
    arcs = [season.arc_deg for season in found]
    stretches = [
        f"{timeaxis.long_day_text(season.turns_back)} to {timeaxis.long_day_text(season.turns_on)}" for season in found
    ]
    spread = f"{min(arcs):.1f} to {max(arcs):.1f}"
    return f"{head} It runs backwards {len(found)} times, by {spread} degrees: {listed(stretches)}."


def plot_season(body: Body, track: pl.DataFrame, season: Season, ax: Axes, *, notes: Notes = "words", style: Style = LIGHT) -> Axes:
    """Draw one season's longitude against time, from a little before its first mark to a little after its last."""
    x, longitude = curves.time_of(track), curves.unwrapped(track["longitude_deg"].to_numpy())
    room = 0.12 * (season.end - season.start)
    low, high = season.start - room, season.end + room
    inside = (x >= low) & (x <= high)
    _draw_line(ax, body, (x, longitude), curves.runs_back(track), None, style)
    direct = _branch(season.direct_deg, season.turns_on, x, longitude)
    seen = longitude[inside] if inside.any() else np.array([direct, direct + season.arc_deg])
    top, bottom = max(seen.max(), direct + season.arc_deg), min(seen.min(), direct)
    ax.set_ylim(bottom - 0.12 * (top - bottom), top + 0.16 * (top - bottom))
    timeaxis.set_time_axis(ax, low, high, least_pt=30.0)
    ax.set_xlabel("")
    _draw_spans(ax, [season], (x, longitude), None, style)
    _degree_ticks(ax, 5)
    tidy(ax, style)
    _note_marks(ax, [season], _draw_marks(ax, [season], (x, longitude), None, style), notes, style)
    return ax


def _notes(found: list[Season], panels: list[Season]) -> Notes:
    """Return what stands beside the marks of the upper chart."""
    if panels:
        return "numbers"
    return "words" if len(found) <= MOST_WORDED else "dates"


def _panels_a_row(count: int) -> int:
    """Return how many panels stand side by side."""
    return min(max(count, 1), 3 if count <= 6 else 4)


def _panel(figure: Figure, number: int, count: int, track: pl.DataFrame, season: Season, style: Style) -> None:
    """Draw one season's panel in its place below the chart."""
    columns = _panels_a_row(count)
    row, place = divmod(number, columns)
    width, height = figure.get_size_inches().tolist()
    wide = (width - LEFT_IN - RIGHT_IN + BETWEEN_IN) / columns
    left = LEFT_IN + place * wide
    bottom = 0.5 + (-(-count // columns) - 1 - row) * PANEL_HEIGHT_IN
    ax = axes_at(figure, left, width - left - wide + BETWEEN_IN, bottom, height - bottom - PANEL_HEIGHT_IN + 0.8)
    notes: Notes = "words" if columns <= ROOMY_PANELS else "dates"
    plot_season(season.body, track, season, ax, notes=notes, style=style)
    year = timeaxis.calendar_days(season.turns_back).year[0]
    ax.set_title(f"{number + 1}   {timeaxis.year_text(int(year))}", loc="left", fontsize=style.type_pt, weight="bold")


def _needs_panels(track: pl.DataFrame, found: list[Season]) -> bool:
    travelled = float(np.ptp(curves.unwrapped(track["longitude_deg"].to_numpy())))
    shown = min(travelled, 360.0)
    return bool(found) and len(found) <= MOST_PANELS and min(s.arc_deg for s in found) < FLAT_ARC * shown


def _cut(longitude: Floats, found: list[Season]) -> float | None:
    """Return where the circle is cut; None where the planet does not go round it."""
    if longitude.size == 0 or float(np.ptp(longitude)) <= ROUND_DEG:
        return None
    return curves.quietest_cut(np.array([s.direct_deg + part * s.arc_deg for s in found for part in (0.0, 0.5, 1.0)]))


def _draw_line(
    ax: Axes, body: Body, line: tuple[Floats, Floats], back: Any, cut: float | None, style: Style
) -> None:
    x, y = line
    for values, look in ((x, style.line(body, dashed=False)), (curves.only(x, back), style.back_line(body))):
        if cut is None:
            ax.plot(values, y, zorder=3, **look)
        else:
            ax.plot(*curves.wrapped_line(values, y, cut), zorder=3, **look)


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


def _branch(longitude_deg: float, at: float, x: Floats, longitude: Floats) -> float:
    """Return a longitude on the turn of an unwrapped line at that time."""
    near = float(np.interp(at, x, longitude))
    return near + float(180.0 - (180.0 - (longitude_deg - near)) % 360.0)


def _draw_spans(
    ax: Axes, found: list[Season], line: tuple[Floats, Floats], cut: float | None, style: Style
) -> None:
    """Shade the days of retrograde motion over the whole height, and frame the threefold spans."""
    if not found:
        return
    bottom, top = ax.get_ylim()
    bands = [_rectangle(s.turns_back, s.turns_on, bottom, top) for s in found]
    ax.add_collection(PolyCollection(bands, facecolor=style.back_fill, edgecolor="none", zorder=0.4), autolim=False)
    frames = []
    for season in found:
        if np.isnan(season.instants["first_pass_start"]) or np.isnan(season.instants["third_pass_end"]):
            continue
        direct = _branch(season.direct_deg, season.turns_on, *line)
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
    ax: Axes, found: list[Season], line: tuple[Floats, Floats], cut: float | None, style: Style
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


def _mark_height(season: Season, mark: str, line: tuple[Floats, Floats]) -> float:
    """Return the unwrapped longitude at a mark: the table's where it has one, else the line's."""
    at = season.instants[mark]
    if np.isnan(at):
        return float("nan")
    if mark == "middle":
        return float(np.interp(at, *line))
    direct = mark in ("station_direct", "first_pass_start")
    return _branch(season.direct_deg if direct else season.retrograde_deg, at, *line)


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
