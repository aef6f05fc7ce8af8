"""One season: the path among the stars, with its turns, dates and direction."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection, PolyCollection
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.constellations import ABBREVIATIONS, full_name
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.report.charts import curves, field, labels, marks, timeaxis
from wanderers.report.charts.field import SkyField
from wanderers.report.charts.marks import Season
from wanderers.report.charts.style import LIGHT, WIDTH_IN, Style, axes_at, in_force, new_figure, tidy, write_title
from wanderers.report.charts.wording import listed, season_sentence

MARGIN: Final = 0.17
"""Room about the path, as a part of its larger extent: what a photographer's frame is advised to leave."""

LEAST_WIDTH_DEG: Final = 5.0
"""Narrowest field: below it hardly a star of the catalogue is left."""

SHAPES: Final = (1.45, 2.3)
"""Least and greatest ratio of a field's width to its height."""

BEYOND: Final = 0.06
"""How far the path is drawn before the first pass and after the third, as a part of the threefold span."""

PATH_POINTS: Final = 600
STAR_LIMIT: Final = 6.5
NAMED_STARS: Final = 14
ARROWS: Final = 5
LEFT_IN: Final = 0.95
RIGHT_IN: Final = 0.3
BOTTOM_IN: Final = 1.45
TOP_IN: Final = 0.8

GREEK: Final = dict(
    zip(
        (
            "alpha beta gamma delta epsilon zeta eta theta iota kappa lambda mu nu xi omicron pi rho sigma tau "
            "upsilon phi chi psi omega"
        ).split(),
        "αβγδεζηθικλμνξοπρστυφχψω",
        strict=True,
    )
)
RAISED: Final = str.maketrans("123456789", "¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True, slots=True)
class Path:
    """A planet's way through a field: time on the axis and flat places, shape (n,), (n, 2), (n,)."""

    time: Floats
    flat: Floats
    back: Bools

    def at(self, instants: Floats) -> Floats:
        """Return flat places at instants on the time axis, shape (k, 2); NaN outside the path."""
        columns = [
            np.interp(instants, self.time, self.flat[:, side], left=np.nan, right=np.nan) for side in range(2)
        ]
        return np.stack(columns, axis=1)

    def headings(self, instants: Floats) -> Floats:
        """Return unit vectors along the path at instants, shape (k, 2)."""
        number = np.clip(np.searchsorted(self.time, instants), 1, self.time.size - 1)
        step = self.flat[number] - self.flat[number - 1]
        return np.asarray(step / np.hypot(step[:, 0], step[:, 1])[:, np.newaxis])


def path_span(season: pl.DataFrame) -> tuple[float, float, float]:
    """Return the track a season's chart wants: first and last TT Julian date, and the step in days.

    Args:
        season: one row, ``schema.SEASON_COLUMNS``. Marks that lie outside the kernel are replaced by the
            stations and as much time again; the caller keeps the span within the kernel.
    """
    row = season.row(0, named=True)
    back, on = row["station_retrograde_jd_tt"], row["station_direct_jd_tt"]
    start = row["first_pass_start_jd_tt"] or back - 0.5 * (on - back)
    end = row["third_pass_end_jd_tt"] or on + 0.5 * (on - back)
    beyond = BEYOND * (end - start)
    return start - beyond, end + beyond, (end - start + 2.0 * beyond) / PATH_POINTS


def draw_path(track_j2000: pl.DataFrame, season: pl.DataFrame, *, style: Style = LIGHT) -> Figure:
    """Return the chart of a season's path among the stars; arguments as for ``plot_path``."""
    with in_force(style):
        sky = _field_of(track_j2000)
        wide = WIDTH_IN - LEFT_IN - RIGHT_IN
        figure = new_figure(wide * sky.half_height_deg / sky.half_width_deg + BOTTOM_IN + TOP_IN, style)
        ax = axes_at(figure, LEFT_IN, RIGHT_IN, BOTTOM_IN, TOP_IN)
        plot_path(track_j2000, season, ax, style=style)
        found = marks.seasons_of(season)[0]
        write_title(
            figure,
            f"{found.body.label} among the stars, {timeaxis.month_text(found.start)} "
            f"to {timeaxis.month_text(found.end)}",
            "Apparent geocentric path against the stars. North is up, east is left. Dates are at 0 h UTC.",
            style,
        )
        handles = marks.key_handles(found.body, style, middle=found.middle_word, framed=False)
        bars = Line2D([], [], **marks.bar_look(style), label="threefold span begins, ends")
        marks.draw_key(ax, [*handles, bars], 0.76, style)
        marks.draw_key(ax, _star_handles(style), 1.08, style)
    return figure


def plot_path(track_j2000: pl.DataFrame, season: pl.DataFrame, ax: Axes, *, style: Style = LIGHT) -> Axes:
    """Draw a season's path among the stars, on the equator and equinox of J2000.

    Args:
        track_j2000: the planet's track in the j2000 frame, ``schema.TRACK_COLUMNS`` with longitude and
            latitude on the ecliptic of J2000, over ``path_span``.
        season: one row, ``schema.SEASON_COLUMNS``.
        ax: axes; the field is widened to fill them, at one scale in both directions.
        style: the look.

    Returns:
        the axes; right ascension grows to the left.
    """
    found = marks.seasons_of(season)[0]
    sky = _fit(ax, _field_of(track_j2000))
    path = _path(track_j2000, sky)
    _set_coordinates(ax, sky, style)
    _draw_boundaries(ax, sky, style)
    catalogue, places = _draw_stars(ax, sky, float(track_j2000["jd_tt"].mean()), style)  # type: ignore[arg-type]
    _draw_line(ax, sky, path, found, style)
    ticks = _draw_ticks(ax, sky, path, style)
    _draw_arrows(ax, sky, path, found, style)
    dots = {mark: _draw_mark(ax, sky, path, found, mark, style) for mark in marks.MARKERS}
    _write_notes(ax, sky, _Notes(path, found, ticks, dots, catalogue, places), style)
    return ax


def path_alt_text(season: pl.DataFrame) -> str:
    """Return what the chart of a season's path shows, in two or three sentences."""
    found = marks.seasons_of(season)[0]
    names = listed([full_name(name) for name in found.constellations])
    head = (
        f"Path of {found.body.label} among the stars of {names}, {timeaxis.long_day_text(found.start)} "
        f"to {timeaxis.long_day_text(found.end)}."
    )
    shape = "The path crosses itself in a loop." if found.path_shape == "loop" else "The path is a zigzag."
    return f"{head} {season_sentence(found)} {shape}"


def _field_of(track: pl.DataFrame) -> SkyField:
    """Return the field that holds a path."""
    ra, dec = field.coordinates_of_j2000(track["longitude_deg"].to_numpy(), track["latitude_deg"].to_numpy())
    return field.field_around(ra, dec, margin=MARGIN, least_width_deg=LEAST_WIDTH_DEG, shapes=SHAPES)


def _fit(ax: Axes, sky: SkyField) -> SkyField:
    """Return the field widened to the shape of axes."""
    box = ax.get_window_extent()
    wide = max(sky.half_width_deg, sky.half_height_deg * box.width / box.height)
    return SkyField(sky.ra_deg, sky.dec_deg, wide, wide * box.height / box.width)


def _path(track: pl.DataFrame, sky: SkyField) -> Path:
    ra, dec = field.coordinates_of_j2000(track["longitude_deg"].to_numpy(), track["latitude_deg"].to_numpy())
    return Path(curves.time_of(track), sky.flat(ra, dec), curves.runs_back(track))


def _set_coordinates(ax: Axes, sky: SkyField, style: Style) -> None:
    """Set limits, right ascension growing to the left, and round ticks."""
    wide = sky.half_width_deg / sky.squeeze
    ax.set_xlim(sky.ra_deg + wide, sky.ra_deg - wide)
    ax.set_ylim(sky.dec_deg - sky.half_height_deg, sky.dec_deg + sky.half_height_deg)
    ax.set_aspect(1.0 / sky.squeeze, adjustable="box")
    hours = _round_ticks(sky.ra_deg - wide, sky.ra_deg + wide, np.array([1, 2, 4, 5, 10, 20, 30, 60, 120]) / 4.0, 9)
    degrees = _round_ticks(*ax.get_ylim(), np.array([0.25, 0.5, 1.0, 2.0, 5.0, 10.0]), 8)
    ax.set_xticks(hours, [_ra_text(value) for value in hours])
    ax.set_yticks(degrees, [_dec_text(value) for value in degrees])
    ax.set_xlabel("right ascension (hours and minutes, J2000), growing to the left, eastward")
    ax.set_ylabel("declination (degrees, J2000)")
    tidy(ax, style)
    ax.spines[["top", "right"]].set_visible(True)


def _round_ticks(low: float, high: float, steps: Floats, most: int) -> Floats:
    step = float(steps[int(np.argmax((high - low) / steps <= most))])
    return np.asarray(np.arange(np.ceil(low / step), np.floor(high / step) + 1.0) * step)


def _ra_text(ra_deg: float) -> str:
    minutes = round((ra_deg % 360.0) * 4.0 * 60.0) / 60.0
    hour, minute = divmod(minutes, 60.0)
    return f"{hour % 24:.0f}h {minute:02.0f}m" if minute else f"{hour % 24:.0f}h"


def _dec_text(dec_deg: float) -> str:
    minutes = round(abs(dec_deg) * 60.0)
    sign = "\N{MINUS SIGN}" if dec_deg < 0 and minutes else "+" if minutes else ""
    return f"{sign}{minutes // 60}°" + (f" {minutes % 60:02d}′" if minutes % 60 else "")


def _draw_boundaries(ax: Axes, sky: SkyField, style: Style) -> None:
    """Draw the constellation boundaries and the ecliptic."""
    lines = sky.on_axes(field.boundaries_in(sky))
    ax.plot(lines[:, 0], lines[:, 1], color=style.quiet_ink, linewidth=0.8, linestyle=(0, (1.0, 2.2)), zorder=1.2)
    ecliptic = sky.on_axes(field.ecliptic_in(sky))
    ax.plot(ecliptic[:, 0], ecliptic[:, 1], color=style.quiet_ink, linewidth=0.8, linestyle=(0, (7.0, 4.0)), zorder=1.2)


def _star_size_pt(magnitude: Floats) -> Floats:
    """Return the diameter of a star's dot in points."""
    return np.asarray(1.5 + 1.35 * np.maximum(STAR_LIMIT - magnitude, 0.0))


def _draw_stars(ax: Axes, sky: SkyField, jd: float, style: Style) -> tuple[StarCatalogue, Floats]:
    """Draw the stars; return them, brightest first, and their flat places."""
    catalogue, flat = field.stars_in(sky, jd)
    seen = catalogue.v_mag <= STAR_LIMIT
    catalogue, flat = catalogue.take(seen), flat[seen]
    on_axes = sky.on_axes(flat)
    sizes = _star_size_pt(catalogue.v_mag) ** 2
    ax.scatter(
        on_axes[:, 0], on_axes[:, 1], s=sizes, color=style.ink, edgecolors=style.paper, linewidths=0.5, zorder=2
    )
    return catalogue, flat


def _draw_line(ax: Axes, sky: SkyField, path: Path, season: Season, style: Style) -> None:
    """Draw the path: thin outside the threefold span, heavy where it runs backwards."""
    on_axes = sky.on_axes(path.flat)
    threefold = (path.time >= season.start) & (path.time <= season.end)
    look = style.line(season.body, dashed=False)
    x, y = on_axes[:, 0], on_axes[:, 1]
    ax.plot(x, y, zorder=3, **look | {"linewidth": 1.0, "linestyle": (0, (1.5, 1.5))})
    ax.plot(curves.only(x, threefold), y, zorder=3, **look)
    ax.plot(curves.only(x, path.back), y, zorder=3.1, **style.back_line(season.body))


def _dates(path: Path) -> tuple[Floats, Floats]:
    """Return which days are ticked, and which of them are dated, on the time axis."""
    low, high = float(path.time[0]), float(path.time[-1])
    days = high - low
    if days < 130.0:
        dated, ticked = timeaxis.DIVISIONS[3], timeaxis.DIVISIONS[2]
    elif days < 500.0:
        dated, ticked = timeaxis.DIVISIONS[4], timeaxis.DIVISIONS[3]
    else:
        dated, ticked = timeaxis.DIVISIONS[6], timeaxis.DIVISIONS[4]
    return timeaxis.ticks(low, high, ticked), timeaxis.ticks(low, high, dated)


def _draw_ticks(ax: Axes, sky: SkyField, path: Path, style: Style) -> Floats:
    """Draw short strokes across the path at round dates; return the instants that get a date."""
    ticked, dated = _dates(path)
    degrees_a_pt = 2.0 * sky.half_width_deg / (ax.get_window_extent().width / labels.dots_per_pt(ax))
    half = np.where(np.isin(ticked, dated), 4.5, 2.5) * degrees_a_pt
    heading = path.headings(ticked)
    across = np.stack([-heading[:, 1], heading[:, 0]], axis=1) * half[:, np.newaxis]
    at = path.at(ticked)
    strokes = sky.on_axes(np.stack([at - across, at + across], axis=1))
    ax.add_collection(LineCollection(list(strokes), colors=style.ink, linewidths=0.9, zorder=3.5), autolim=False)
    return dated


def _draw_arrows(ax: Axes, sky: SkyField, path: Path, season: Season, style: Style) -> None:
    """Draw arrowheads along the path, spaced evenly over its length and away from the marks."""
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(path.flat, axis=0).T))])
    at = np.interp(np.linspace(0.02, 0.98, 15) * length[-1], length, path.time)
    marked = path.at(np.array([season.instants[mark] for mark in marks.MARKERS]))
    gap = path.at(at)[:, np.newaxis] - marked
    degrees_a_pt = 2.0 * sky.half_width_deg / (ax.get_window_extent().width / labels.dots_per_pt(ax))
    clear = np.nanmin(np.hypot(gap[..., 0], gap[..., 1]), axis=1) > 14.0 * degrees_a_pt
    at = at[clear][:: max(1, int(clear.sum()) // (ARROWS + 2))]
    heading, tip = path.headings(at), path.at(at)
    across = np.stack([-heading[:, 1], heading[:, 0]], axis=1)
    long, half = 11.0 * degrees_a_pt, 4.6 * degrees_a_pt
    corners = np.stack([tip + 0.5 * long * heading, tip - 0.5 * long * heading + half * across,
                        tip - 0.5 * long * heading - half * across], axis=1)
    look = {"facecolor": style.colours[season.body], "edgecolor": style.paper, "linewidth": 0.6}
    ax.add_collection(PolyCollection(list(sky.on_axes(corners)), zorder=3.4, **look), autolim=False)


def _draw_mark(ax: Axes, sky: SkyField, path: Path, season: Season, mark: str, style: Style) -> Floats:
    """Draw one mark; return its flat place, NaN where the date is not known."""
    flat = path.at(np.array([season.instants[mark]]))
    on_axes = sky.on_axes(flat)
    marks.draw_marks(ax, mark, on_axes[:, 0], on_axes[:, 1], style)
    return np.asarray(flat[0])


@dataclass(frozen=True, slots=True)
class _Notes:
    """What there is to name in a chart."""

    path: Path
    season: Season
    dated: Floats
    marks: dict[str, Floats]
    stars: StarCatalogue
    star_places: Floats


def _write_notes(ax: Axes, sky: SkyField, notes: _Notes, style: Style) -> None:
    """Write marks, dates, names of stars and constellations, in this order of rank."""

    def dots(flat: Floats) -> Floats:
        return np.asarray(ax.transData.transform(sky.on_axes(flat)))

    star_dots = dots(notes.star_places)
    named = [place for place in notes.marks.values() if np.isfinite(place).all()]
    boxes = np.vstack(
        [
            labels.boxes_around(dots(np.array(named)), (18.0, 18.0)) if named else np.zeros((0, 4)),
            _star_boxes(star_dots, notes.stars, labels.dots_per_pt(ax)),
        ]
    )
    path_dots = labels.dense(dots(notes.path.flat), 2.5)
    boundary_dots = labels.dense(dots(field.boundaries_in(sky)), 8.0)
    ground = labels.ground_of(ax, np.concatenate([path_dots, boundary_dots, star_dots]), boxes)
    wanted = [
        *_mark_labels(ax, notes, dots, style),
        *_date_labels(ax, notes, dots, style),
        *_star_labels(ax, notes, star_dots, style),
        *_constellation_labels(ax, sky, dots, style),
        *_ecliptic_label(ax, sky, dots, style),
    ]
    labels.write_labels(ax, wanted, ground)


def _star_boxes(star_dots: Floats, catalogue: StarCatalogue, unit: float) -> Floats:
    """Return boxes round the brighter stars, which no text may cover, shape (n, 4)."""
    bright = catalogue.v_mag < 4.5
    half = _star_size_pt(catalogue.v_mag[bright])[:, np.newaxis] * unit / 2.0
    return np.hstack([star_dots[bright] - half, star_dots[bright] + half])


def _mark_labels(ax: Axes, notes: _Notes, dots: Any, style: Style) -> list[labels.Label]:
    """Return the labels of the marks: what happens and when."""
    order = ("station_retrograde", "station_direct", "middle", "first_pass_start", "third_pass_end")
    wanted = []
    for mark in order:
        place = notes.marks[mark]
        if not np.isfinite(place).all():
            continue
        when = timeaxis.day_text(notes.season.instants[mark])
        text = f"{marks.mark_words(notes.season, mark)}\n{when}"
        prefer = _sides(notes.path, notes.season.instants[mark])
        weight = "normal" if mark.endswith(("start", "end")) else "bold"
        look = style.note(weight=weight)
        wanted.append(labels.label_at(ax, text, tuple(dots(place)), prefer, look, nearest_pt=3.0))
    return wanted


def _sides(path: Path, instant: float) -> tuple[float, float]:
    """Return the two directions across the path on the chart, degrees counter-clockwise from the right."""
    east, north = path.headings(np.array([instant]))[0]
    along = float(np.degrees(np.arctan2(north, -east)))  # east is left
    return along + 90.0, along - 90.0


def _date_labels(ax: Axes, notes: _Notes, dots: Any, style: Style) -> list[labels.Label]:
    """Return the labels of dated ticks; the year stands with January and with the first."""
    at = notes.dated
    date = timeaxis.calendar_days(at) if at.size else None
    look = style.note(color=style.quiet_ink)
    wanted = []
    for number, instant in enumerate(at.tolist()):
        assert date is not None
        new_year = number == 0 or date.year[number] != date.year[number - 1]
        text = timeaxis.day_text(instant, year=new_year)
        place = tuple(dots(notes.path.at(np.array([instant]))[0]))
        sides = _sides(notes.path, instant)
        wanted.append(labels.label_at(ax, text, place, sides, look, nearest_pt=1.0, dearest=34.0))
    return wanted


def _star_labels(ax: Axes, notes: _Notes, star_dots: Floats, style: Style) -> list[labels.Label]:
    """Return the names of the brightest stars."""
    look = style.note(style="italic")
    names = [star_name(notes.stars, number) for number in range(len(notes.stars))]
    chosen = [number for number, name in enumerate(names) if name][:NAMED_STARS]
    if not chosen:
        names = list(notes.stars.labels)
        chosen = list(range(min(3, len(names))))
    sizes = _star_size_pt(notes.stars.v_mag)
    return [
        labels.label_at(
            ax,
            names[number],
            tuple(star_dots[number]),
            (0.0, 180.0),
            look,
            nearest_pt=float(sizes[number]) / 2.0 - 2.0,
            dearest=30.0,
        )
        for number in chosen
    ]


def star_name(catalogue: StarCatalogue, number: int) -> str:
    """Return what to call a star on a chart: its proper name, else its designation; empty if it has none."""
    if catalogue.name[number]:
        return catalogue.name[number]
    letter, _, constellation = catalogue.bayer[number].partition(" ")
    bare = letter.rstrip("123456789")
    return f"{GREEK.get(bare, bare)}{letter[len(bare):].translate(RAISED)} {constellation}".strip()


def _constellation_labels(ax: Axes, sky: SkyField, dots: Any, style: Style) -> list[labels.Label]:
    """Return the names of the constellations, each wherever it finds room within its own part of the field."""
    across = np.linspace(-0.94, 0.94, 41)
    east, north = np.meshgrid(across * sky.half_width_deg, across[::2] * sky.half_height_deg)
    mesh = np.stack([east.ravel(), north.ravel()], axis=1)
    over = field.constellations_over(sky, mesh)
    look = style.note(color=style.quiet_ink, fontsize=style.type_pt) | {"bbox": None}
    wanted = []
    for number in np.unique(over).tolist():
        own = mesh[over == number]
        name = " ".join(full_name(ABBREVIATIONS[number]).upper())
        middle = np.median(own, axis=0)
        off = np.hypot(*((own - middle) / sky.half_width_deg).T)
        centres = dots(own)
        size = labels.measure(ax, name, look)
        wanted.append(
            labels.Label(name, tuple(dots(middle)), centres, 20.0 * off, size, look, leads=False, dearest=60.0)
        )
    return wanted


def _ecliptic_label(ax: Axes, sky: SkyField, dots: Any, style: Style) -> list[labels.Label]:
    """Return the name of the ecliptic, to stand along it near an edge."""
    line = field.ecliptic_in(sky)
    line = line[sky.holds(line)]
    if len(line) < 2:
        return []
    look = style.note(color=style.quiet_ink)
    size = labels.measure(ax, "ecliptic", look)
    unit = labels.dots_per_pt(ax)
    parts = [labels.around(tuple(at), size, (90.0, 270.0), unit) for at in dots(line[:: max(1, len(line) // 20)])]
    centres, costs = (np.concatenate(half) for half in zip(*parts, strict=True))
    return [labels.Label("ecliptic", tuple(dots(line[0])), centres, costs, size, look, leads=False, dearest=14.0)]


def _star_handles(style: Style) -> list[Line2D]:
    """Return the key to the sizes of stars."""
    handles = []
    for magnitude in (0, 1, 2, 3, 4, 5, 6):
        size = float(_star_size_pt(np.array([float(magnitude)]))[0])
        look = {"linestyle": "none", "marker": "o", "markerfacecolor": style.ink, "markeredgewidth": 0.0}
        name = f"star of magnitude {magnitude}" if magnitude == 0 else str(magnitude)
        handles.append(Line2D([], [], markersize=size, label=name, **look))
    dash = {"color": style.quiet_ink, "linewidth": 0.8}
    handles.append(Line2D([], [], linestyle=(0, (1.0, 2.2)), label="constellation boundary", **dash))
    return handles
