"""One season: the path among the stars, with its turns, dates and direction."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.arrays import Floats
from wanderers.ephemeris.constellations import full_name
from wanderers.report.charts import curves, field, labels, marks, starfield, timeaxis, way
from wanderers.report.charts.field import SkyField
from wanderers.report.charts.style import (
    LIGHT,
    WIDTH_IN,
    Style,
    axes_at,
    in_force,
    new_figure,
    tidy,
    write_title,
)
from wanderers.report.charts.wording import listed, season_sentence

MARGIN: Final = 0.16
"""Room about the path, as a part of its larger extent: what a photographer's frame is advised to leave."""

LEAST_WIDTH_DEG: Final = 5.0
"""Narrowest field: below it hardly a star of the catalogue is left."""

SHAPES: Final = (1.6, 2.3)
"""Least and greatest ratio of a field's width to its height."""

BEYOND: Final = 0.06
"""How far the path is drawn before the first pass and after the third, as a part of the threefold span."""

PATH_POINTS: Final = 600
LEFT_IN: Final = 0.95
RIGHT_IN: Final = 0.36
BOTTOM_IN: Final = 1.4
TOP_IN: Final = 0.8
LATITUDE_IN: Final = 2.6
BETWEEN_IN: Final = 1.0

SUN_CAUTION: Final = (
    "The Sun passes near: never sweep this field with binoculars or a telescope while the Sun is up."
)

SIDE_ROOM: Final = 0.06
UPPER_ROOM: Final = 0.25
"""Room beside and above the path in the panel of latitudes, as a part of its extent."""

MAGNIFIED: Final = (3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30, 40, 50, 60, 80, 100, 150, 200)
"""How many times latitudes may be drawn larger than longitudes; with less the panel would not be new."""


def path_span(season: pl.DataFrame) -> tuple[float, float, float]:
    """Return the track a season's chart wants: first and last TT Julian date, and the step in days.

    Args:
        season: one row, ``schema.SEASON_COLUMNS``. Where a mark lies outside the kernel, half the retrograde
            stretch stands in; the caller keeps the span within the kernel.
    """
    row = season.row(0, named=True)
    back, on = row["station_retrograde_jd_tt"], row["station_direct_jd_tt"]
    start, end = row["first_pass_start_jd_tt"], row["third_pass_end_jd_tt"]
    start = back - 0.5 * (on - back) if start is None else start
    end = on + 0.5 * (on - back) if end is None else end
    beyond = BEYOND * (end - start)
    return start - beyond, end + beyond, (end - start + 2.0 * beyond) / PATH_POINTS


def draw_path(track_j2000: pl.DataFrame, season: pl.DataFrame, *, style: Style = LIGHT) -> Figure:
    """Return the chart of a season's path among the stars; arguments as for ``plot_path``.

    A flat path is drawn once more below, longitude against latitude, the latitudes magnified: else nobody
    sees whether it is a loop or a zigzag. The dates stand there.
    """
    with in_force(style):
        sky = _field_of(track_j2000)
        times = magnification(track_j2000)
        below = BOTTOM_IN + (LATITUDE_IN + BETWEEN_IN if times else 0.0)
        wide = WIDTH_IN - LEFT_IN - RIGHT_IN
        above = TOP_IN + (0.2 if _remark(season).count("\n") else 0.0)
        figure = new_figure(wide * sky.half_height_deg / sky.half_width_deg + below + above, style)
        ax = axes_at(figure, LEFT_IN, RIGHT_IN, below, above)
        plot_path(track_j2000, season, ax, dated=not times, style=style)
        lowest = ax
        if times:
            top = float(figure.get_size_inches()[1]) - BOTTOM_IN - LATITUDE_IN
            lowest = axes_at(figure, LEFT_IN, RIGHT_IN, BOTTOM_IN, top)
            plot_latitude(track_j2000, season, lowest, times, style=style)
        _write_about(figure, lowest, season, style)
    return figure


def plot_path(
    track_j2000: pl.DataFrame, season: pl.DataFrame, ax: Axes, *, dated: bool = True, style: Style = LIGHT
) -> Axes:
    """Draw a season's path among the stars, on the equator and equinox of J2000.

    Args:
        track_j2000: the planet's track in the j2000 frame, ``schema.TRACK_COLUMNS`` with longitude and
            latitude on the ecliptic of J2000, over ``path_span``.
        season: one row, ``schema.SEASON_COLUMNS``.
        ax: axes; the field is widened to fill them, at one scale in both directions at its middle.
        dated: whether round dates are written along the path.
        style: the look.

    Returns:
        the axes; right ascension grows to the left.
    """
    found = marks.seasons_of(season)[0]
    sky = _fit(ax, _field_of(track_j2000))
    _set_coordinates(ax, sky, style)
    places = sky.on_axes(sky.flat(*_equatorial(track_j2000)))
    line = way.way_of(ax, curves.time_of(track_j2000), places, curves.runs_back(track_j2000))
    starfield.draw_lines(ax, sky, style)
    middle = float(track_j2000["jd_tt"].to_numpy().mean())
    catalogue, star_dots = starfield.draw_stars(ax, sky, middle, style)
    way.draw_line(ax, line, found, style)
    with_date = way.draw_strokes(ax, line, found, style) if dated else np.zeros(0)
    way.draw_arrows(ax, line, found, style)
    boxes = [
        way.draw_marks(ax, line, found, style),
        starfield.star_boxes(catalogue, star_dots, labels.dots_per_pt(ax)),
    ]
    points = [labels.dense(line.dots, 2.5), star_dots, starfield.boundary_dots(ax, sky)]
    wanted = [
        *way.mark_labels(ax, line, found, style),
        *way.date_labels(ax, line, found, with_date, style),
        *starfield.draw_clusters(ax, sky, style),
        *starfield.star_labels(ax, catalogue, star_dots, style),
        *starfield.constellation_labels(ax, sky, line.dots[::10], style),
        *starfield.ecliptic_label(ax, sky, style),
    ]
    labels.write_labels(ax, wanted, labels.ground_of(ax, np.concatenate(points), np.concatenate(boxes)))
    return ax


def plot_latitude(
    track_j2000: pl.DataFrame, season: pl.DataFrame, ax: Axes, times: int, *, style: Style = LIGHT
) -> Axes:
    """Draw a season's path as longitude against latitude, the latitudes so many times larger.

    Args:
        track_j2000: as for ``plot_path``.
        season: one row, ``schema.SEASON_COLUMNS``.
        ax: the axes.
        times: how many times; ``magnification`` tells what fits.
        style: the look.

    Returns:
        the axes; longitude grows to the left.
    """
    found = marks.seasons_of(season)[0]
    x, y = curves.unwrapped(track_j2000["longitude_deg"].to_numpy()), track_j2000["latitude_deg"].to_numpy()
    box = ax.get_window_extent()
    half_width = 0.5 * np.ptp(x) * (1.0 + 2.0 * SIDE_ROOM)
    half_height = half_width * box.height / box.width / times
    x_middle, y_middle = 0.5 * (x.min() + x.max()), 0.5 * (y.min() + y.max())
    ax.set_xlim(x_middle + half_width, x_middle - half_width)
    ax.set_ylim(y_middle - half_height, y_middle + half_height)
    _degree_axes(ax, times, style)
    line = way.way_of(
        ax, curves.time_of(track_j2000), np.stack([x, y], axis=1), curves.runs_back(track_j2000)
    )
    way.draw_line(ax, line, found, style)
    with_date = way.draw_strokes(ax, line, found, style)
    way.draw_arrows(ax, line, found, style)
    boxes = way.draw_marks(ax, line, found, style)
    wanted = [
        *way.mark_labels(ax, line, found, style, worded=False),
        *way.date_labels(ax, line, found, with_date, style),
    ]
    labels.write_labels(ax, wanted, labels.ground_of(ax, labels.dense(line.dots, 2.5), boxes))
    return ax


def magnification(track_j2000: pl.DataFrame) -> int:
    """Return how many times larger latitudes are drawn in the lower panel; 0 where the path needs none."""
    longitude = curves.unwrapped(track_j2000["longitude_deg"].to_numpy())
    latitude = track_j2000["latitude_deg"].to_numpy()
    shape = (WIDTH_IN - LEFT_IN - RIGHT_IN) / LATITUDE_IN
    width = np.ptp(longitude) * (1.0 + 2.0 * SIDE_ROOM)
    height = np.ptp(latitude) * (1.0 + 2.0 * UPPER_ROOM)
    fitting = [times for times in MAGNIFIED if times * height * shape <= width]
    return max(fitting, default=0)


def path_alt_text(season: pl.DataFrame) -> str:
    """Return what the chart of a season's path shows, in three sentences."""
    found = marks.seasons_of(season)[0]
    names = listed([full_name(name) for name in found.constellations])
    head = (
        f"Path of {found.body.label} among the stars of {names}, "
        f"{timeaxis.long_span_text(found.start, found.end)}."
    )
    shape = "The path crosses itself in a loop." if found.path_shape == "loop" else "The path is a zigzag."
    return f"{head} {season_sentence(found)} {shape}"


def _write_about(figure: Figure, lowest: Axes, season: pl.DataFrame, style: Style) -> None:
    """Write title and keys."""
    found = marks.seasons_of(season)[0]
    write_title(
        figure,
        f"{found.body.label} among the stars, {timeaxis.month_span_text(found.start, found.end)}",
        _remark(season),
        style,
    )
    handles = marks.key_handles(found.body, style, middle=found.middle_word, framed=False)
    bars = Line2D([], [], **marks.bar_look(style), label="threefold span begins, ends")
    marks.draw_key(lowest, [*handles, bars], 0.74, style)
    marks.draw_key(lowest, starfield.star_handles(style), 1.06, style)


def _remark(season: pl.DataFrame) -> str:
    """Return how the chart is to be read; for the inner planets with a caution."""
    text = (
        "Apparent geocentric path against the stars; north up, east left. Strokes at 0 h UTC. "
        "Dotted: before and after the season."
    )
    if season["station_retrograde_jd_tt"][0] < timeaxis.GREGORIAN_FROM_JD:
        text += " Gregorian calendar."
    return f"{text}\n{SUN_CAUTION}" if season["middle_kind"][0] == "inferior_conjunction" else text


def _equatorial(track: pl.DataFrame) -> tuple[Floats, Floats]:
    """Return right ascension and declination, J2000, of a track in the j2000 frame."""
    return field.coordinates_of_j2000(track["longitude_deg"].to_numpy(), track["latitude_deg"].to_numpy())


def _field_of(track: pl.DataFrame) -> SkyField:
    """Return the field that holds a path."""
    return field.field_around(
        *_equatorial(track), margin=MARGIN, least_width_deg=LEAST_WIDTH_DEG, shapes=SHAPES
    )


def _fit(ax: Axes, sky: SkyField) -> SkyField:
    """Return the field widened to the shape of axes."""
    box = ax.get_window_extent()
    wide = max(sky.half_width_deg, sky.half_height_deg * box.width / box.height)
    return SkyField(sky.ra_deg, sky.dec_deg, wide, wide * box.height / box.width)


def _set_coordinates(ax: Axes, sky: SkyField, style: Style) -> None:
    """Set limits, right ascension growing to the left, and round ticks."""
    wide = sky.half_width_deg / sky.squeeze
    ax.set_xlim(sky.ra_deg + wide, sky.ra_deg - wide)
    ax.set_ylim(sky.dec_deg - sky.half_height_deg, sky.dec_deg + sky.half_height_deg)
    quarters = (
        np.array([1.0, 2.0, 4.0, 5.0, 10.0, 20.0, 30.0, 60.0, 120.0]) / 4.0
    )  # minutes of right ascension
    hours = _round_ticks(sky.ra_deg - wide, sky.ra_deg + wide, quarters, 9)
    degrees = _round_ticks(*ax.get_ylim(), np.array([0.25, 0.5, 1.0, 2.0, 5.0, 10.0]), 8)
    ax.set_xticks(hours, [ra_text(value) for value in hours.tolist()])
    ax.set_yticks(degrees, [angle_text(value) for value in degrees.tolist()])
    ax.set_xlabel("right ascension (hours and minutes, J2000), growing to the left, eastward")
    ax.set_ylabel("declination (degrees, J2000)")
    tidy(ax, style, framed=True)


def _degree_axes(ax: Axes, times: int, style: Style) -> None:
    """Set round ticks of longitude and latitude."""
    high, low = ax.get_xlim()
    steps = np.array([0.25, 0.5, 1.0, 2.0, 5.0, 10.0])
    longitudes = _round_ticks(low, high, steps, 10)
    latitudes = _round_ticks(
        *ax.get_ylim(), np.array([1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0, 60.0, 120.0]) / 60.0, 5
    )
    ax.set_xticks(longitudes, [angle_text(value % 360.0).removeprefix("+") for value in longitudes.tolist()])
    ax.set_yticks(latitudes, [angle_text(value) for value in latitudes.tolist()])
    ax.set_xlabel("ecliptic longitude (degrees, J2000), growing to the left")
    ax.set_ylabel("latitude (degrees, J2000)")
    ax.set_title(
        f"The same path, heights drawn {times} times larger",
        loc="left",
        fontsize=style.type_pt,
        weight="bold",
    )
    tidy(ax, style, framed=True)


def _round_ticks(low: float, high: float, steps: Floats, most: int) -> Floats:
    """Return round values between two limits: of the steps the smallest that gives no more than ``most``."""
    return curves.multiples(low, high, curves.round_step(high - low, steps, most))


def ra_text(ra_deg: float) -> str:
    """Return a right ascension in hours and minutes: ``10h 30m``."""
    minutes = round((ra_deg % 360.0) * 4.0)
    return f"{minutes // 60 % 24}h {minutes % 60:02d}m" if minutes % 60 else f"{minutes // 60 % 24}h"


def angle_text(angle_deg: float) -> str:
    """Return a signed angle in degrees and minutes: ``−2° 30′``."""
    minutes = round(abs(angle_deg) * 60.0)
    sign = "" if minutes == 0 else "+" if angle_deg > 0 else "\N{MINUS SIGN}"
    if 0 < minutes < 60:
        return f"{sign}{minutes}′"
    return f"{sign}{minutes // 60}°" + (f" {minutes % 60:02d}′" if minutes % 60 else "")
