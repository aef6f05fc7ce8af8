"""One season seen from north of the ecliptic, to scale: Sun, Earth and planet at its dated moments.

The view is turned so that the line of sight of the middle points up. The far sky is then at the top and
longitudes grow to the left in it, as on every sky chart; the strip above the view reads off each direction.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import INNER
from wanderers.ephemeris.frames import Frame
from wanderers.report.charts import curves, labels, marks, timeaxis
from wanderers.report.charts.above_labels import (
    body_labels,
    dot_look,
    place_labels,
    scale_label,
    sight_labels,
)
from wanderers.report.charts.above_scene import (
    ORDER,
    Box,
    Scene,
    dots_of,
    fit,
    is_small,
    panels,
    scene_of,
    to_edge,
    within,
)
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

EDGE_IN: Final = 0.3
TOP_IN: Final = 1.15
STRIP_IN: Final = 2.3
BETWEEN_IN: Final = 0.8
BELOW_IN: Final = 0.75
LEFT_IN: Final = 1.4
HEIGHTS_IN: Final = (5.0, 7.4)
"""Least and greatest height of the view."""
ARROW_LONG_PT: Final = 11.0
ARROW_WIDE_PT: Final = 8.0
PARALLEL: Final = (
    ";\nonly its slant counts: lines 1 and 4 are parallel and end at one place, and so are 2 and 5."
)
HEADS: Final = (0.12, 0.37, 0.63, 0.88)
"""Where along the way through a season its direction is shown, as parts of it."""
CLEAR_PT: Final = 15.0
"""Room between an arrowhead and a dated place."""


def draw_above(view: pl.DataFrame, season: pl.DataFrame, *, style: Style = LIGHT) -> Figure:
    """Return the view from above that explains a season's loop, with the far sky above it.

    Args:
        view: ``season_view.VIEW_COLUMNS`` of the season.
        season: one row, ``schema.SEASON_COLUMNS``.
        style: the look.
    """
    with in_force(style):
        scene = scene_of(view, season)
        boxes = panels(scene)
        wide = WIDTH_IN - 2.0 * EDGE_IN
        widths = [wide] if len(boxes) == 1 else [0.40 * wide, 0.60 * wide - 0.2]
        high = _height(boxes[0], widths[0])
        figure = new_figure(TOP_IN + STRIP_IN + BETWEEN_IN + high + BELOW_IN, style)
        total = float(figure.get_size_inches()[1])
        strip = axes_at(figure, LEFT_IN, EDGE_IN, total - TOP_IN - STRIP_IN, TOP_IN)
        plot_far_sky(view, season, strip, style=style)
        left = EDGE_IN
        for number, (box, width) in enumerate(zip(boxes, widths, strict=True)):
            ax = axes_at(figure, left, WIDTH_IN - left - width, BELOW_IN, total - BELOW_IN - high)
            plot_above(view, season, ax, box, enlarged=number > 0, style=style)
            left += width + 0.2
        _write_about(figure, scene, season["frame"][0], style)
    return figure


def plot_far_sky(view: pl.DataFrame, season: pl.DataFrame, ax: Axes, *, style: Style = LIGHT) -> Axes:
    """Draw in which direction of the far sky the planet is seen, against time running down.

    Args:
        view: ``season_view.VIEW_COLUMNS``.
        season: one row, ``schema.SEASON_COLUMNS``.
        ax: the axes.
        style: the look.

    Returns:
        the axes; longitude grows to the left.
    """
    scene = scene_of(view, season)
    seen = view["direction_deg"].is_not_null().to_numpy()
    longitude = curves.unwrapped(view["direction_deg"].drop_nulls().to_numpy())
    time, back, own = scene.jd_utc[seen], scene.back[seen], scene.own[seen]
    _set_far_sky(ax, time, longitude, style)
    look = style.line(scene.season.body, dashed=False)
    ax.plot(longitude, time, zorder=3, **look | {"linewidth": 1.1, "linestyle": (0, (1.5, 1.5))})
    ax.plot(curves.only(longitude, own), time, zorder=3, **look)
    ax.plot(curves.only(longitude, back), time, zorder=3.1, **style.back_line(scene.season.body))
    line = np.asarray(ax.transData.transform(np.stack([longitude, time], axis=1)))
    wanted = []
    for number in scene.numbers:
        instant = scene.season.instants[ORDER[number - 1]]
        x = float(np.interp(instant, time, longitude))
        ax.plot([x], [instant], zorder=5, **dot_look(style, filled=True))
        dot = tuple(ax.transData.transform((x, instant)))
        text = f"{number}: {marks.mark_words(scene.season, ORDER[number - 1])}, {timeaxis.day_text(instant)}"
        wanted.append(labels.label_at(ax, text, dot, (0.0, 180.0), style.note(), nearest_pt=3.0))
    ground = labels.ground_of(ax, labels.dense(line, 2.5), _dot_boxes(ax, scene, time, longitude))
    labels.write_labels(ax, wanted, ground)
    return ax


def plot_above(
    view: pl.DataFrame,
    season: pl.DataFrame,
    ax: Axes,
    box: Box,
    *,
    enlarged: bool = False,
    style: Style = LIGHT,
) -> Axes:
    """Draw Sun, Earth, planet and lines of sight at the dated moments, from north of the ecliptic.

    Args:
        view: ``season_view.VIEW_COLUMNS``.
        season: one row, ``schema.SEASON_COLUMNS``.
        ax: the axes; their limits are set so that one scale holds in both directions.
        box: what they shall hold; see ``panels``.
        enlarged: whether this is the Earth's orbit alone.
        style: the look.

    Returns:
        the axes; places in au, the Sun at (0, 0).
    """
    scene = scene_of(view, season)
    fit(ax, box)
    ax.set_xticks([])
    ax.set_yticks([])
    crowd = [*_draw_orbits(ax, scene, style), *_draw_sights(ax, scene, style)]
    _draw_sun(ax, style, small=is_small(ax))
    wanted, boxes = place_labels(ax, scene, enlarged, style)
    if enlarged or scene.season.body in INNER:
        wanted += sight_labels(ax, scene, style)
    wanted += body_labels(ax, scene, enlarged, style)
    wanted.append(scale_label(ax, style))
    points = labels.dense(np.concatenate(crowd), 3.0)
    ground = labels.ground_of(ax, points[within(ax, points)], boxes)
    labels.write_labels(ax, wanted, ground)
    return ax


def above_alt_text(view: pl.DataFrame, season: pl.DataFrame) -> str:
    """Return what the view from above shows and how it explains the loop."""
    scene = scene_of(view, season)
    found, name = scene.season, scene.season.body.label
    inner = found.body in INNER
    ahead, behind = (name, "the Earth") if inner else ("The Earth", name)
    moments = "; ".join(
        f"{number}, {marks.mark_words(found, ORDER[number - 1])}, "
        f"{timeaxis.long_day_text(found.instants[ORDER[number - 1]])}"
        for number in scene.numbers
    )
    return (
        f"Sun, Earth and {name} seen from north of the ecliptic, to scale, with lines of sight at numbered "
        f"moments: {moments}. {ahead}, on the inner and faster track, overtakes {behind}: between the turns "
        f"the line of sight swings back by {found.arc_deg:.1f} degrees, though both planets go on "
        "counterclockwise all the time."
    )


def _height(box: Box, width_in: float) -> float:
    """Return the height in inches that shows a box in that width, within bounds."""
    return float(np.clip(width_in * (box[3] - box[1]) / (box[2] - box[0]), *HEIGHTS_IN))


def _set_far_sky(ax: Axes, time: Floats, longitude: Floats, style: Style) -> None:
    """Set the axes of the strip: longitude to the left, time down."""
    room = 0.22 * float(np.ptp(longitude))
    ax.set_xlim(longitude.max() + room, longitude.min() - room)
    late = 0.07 * float(np.ptp(time))
    ax.set_ylim(time[-1] + late, time[0] - late)
    division = timeaxis.division_for(float(time[0]), float(time[-1]), 7)
    at = timeaxis.ticks(float(time[0]), float(time[-1]), division)
    ax.set_yticks(at, [text.replace("\n", " ") for text in timeaxis.tick_texts(at, division)])
    steps = np.array([0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0])
    step = curves.round_step(float(np.ptp(longitude)), steps, 10)
    high, low = ax.get_xlim()
    ticks = curves.multiples(low, high, step)
    ax.set_xticks(ticks, [f"{value % 360.0:.{0 if step >= 1.0 else 1}f}°" for value in ticks.tolist()])
    ax.set_xlabel("direction on the far sky: ecliptic longitude (J2000), growing to the left, eastward")
    ax.set_ylabel("date (UTC), downward")
    tidy(ax, style, framed=True)


def _draw_orbits(ax: Axes, scene: Scene, style: Style) -> list[Floats]:
    """Draw both orbits, the ways through the season and their direction; return their dots."""
    crowd = []
    every = np.ones_like(scene.around)
    for (places, look), drawn in zip(_travellers(scene, style), (scene.around, every), strict=True):
        ax.plot(*places[drawn].T, color=style.quiet_ink, linewidth=0.8, linestyle=(0, (1.5, 2.0)), zorder=1.5)
        for part, width in ((scene.own, style.line_pt), (scene.back, style.back_line_pt)):
            ax.plot(*places[part].T, color=look, linewidth=width, solid_capstyle="butt", zorder=2.5)
        _draw_heads(ax, scene, places[scene.own], look, style)
        crowd.append(np.vstack([dots_of(ax, places[drawn]), [[np.nan, np.nan]]]))
    return crowd


def _travellers(scene: Scene, style: Style) -> tuple[tuple[Floats, str], ...]:
    return (scene.earth, style.ink), (scene.planet, style.colours[scene.season.body])


def _draw_heads(ax: Axes, scene: Scene, way: Floats, colour: str, style: Style) -> None:
    """Draw arrowheads along a way, where neither mark nor the edge of the axes is near."""
    dots, unit = dots_of(ax, way), labels.dots_per_pt(ax)
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(dots, axis=0).T))])
    if length[-1] < 6.0 * ARROW_LONG_PT * unit:
        return
    turn = 2.0 * np.pi * float(np.hypot(*(dots - dots_of(ax, np.zeros((1, 2)))).T).mean())
    at = np.array(HEADS) * min(float(length[-1]), turn)
    number = np.clip(np.searchsorted(length, at), 1, len(dots) - 1)
    marked = dots_of(ax, np.concatenate([side[list(scene.numbers.values())] for side in scene.sides]))
    gap = np.hypot(*(dots[number][:, np.newaxis] - marked).transpose(2, 0, 1)).min(axis=1)
    number = number[gap > CLEAR_PT * unit]
    if number.size == 0:
        return
    step = dots[number] - dots[number - 1]
    along = step / np.hypot(*step.T)[:, np.newaxis]
    across = np.stack([-along[:, 1], along[:, 0]], axis=1) * (0.5 * ARROW_WIDE_PT * unit)
    along = along * (0.5 * ARROW_LONG_PT * unit)
    middle = dots[number]
    corners = np.stack([middle + along, middle - along + across, middle - along - across], axis=1)
    places = ax.transData.inverted().transform(corners.reshape(-1, 2)).reshape(corners.shape)
    heads = PolyCollection(list(places), facecolor=colour, edgecolor=style.paper, linewidth=0.5, zorder=2.8)
    ax.add_collection(heads, autolim=False)


def _draw_sights(ax: Axes, scene: Scene, style: Style) -> list[Floats]:
    """Draw the lines of sight, unbroken to the planet and dashed beyond; return their dots."""
    crowd = []
    for number, row in scene.numbers.items():
        start, planet = scene.earth[row], scene.planet[row]
        end = to_edge(ax, start, planet)
        beyond = np.stack([planet, end])
        turn = ORDER[number - 1].startswith("station")
        width = 1.3 if turn else 0.8
        ax.plot(*np.stack([start, planet]).T, color=style.ink, linewidth=width, zorder=2)
        ax.plot(*beyond.T, color=style.ink, linewidth=width, linestyle=(0, (6.0, 3.0)), zorder=1.9)
        ax.annotate(
            "",
            xy=tuple(end),
            xytext=tuple(end - 0.02 * (end - start)),
            arrowprops={"arrowstyle": "-|>", "color": style.ink, "shrinkA": 0.0, "shrinkB": 0.0},
            annotation_clip=False,
        )
        crowd.append(np.vstack([dots_of(ax, np.stack([start, end])), [[np.nan, np.nan]]]))
    return crowd


def _draw_sun(ax: Axes, style: Style, *, small: bool = False) -> None:
    """Draw the Sun as its old sign, a ring with a point; not to scale."""
    ring: dict[str, Any] = {"linestyle": "none", "marker": "o", "zorder": 4, "markeredgecolor": style.ink}
    if not small:
        ax.plot([0.0], [0.0], markersize=13.0, markerfacecolor=style.paper, markeredgewidth=1.4, **ring)
    ax.plot([0.0], [0.0], markersize=3.0, markerfacecolor=style.ink, markeredgewidth=0.0, **ring)


def _dot_boxes(ax: Axes, scene: Scene, time: Floats, longitude: Floats) -> Floats:
    instants = np.array([scene.season.instants[ORDER[number - 1]] for number in scene.numbers])
    places = np.stack([np.interp(instants, time, longitude), instants], axis=1)
    return labels.boxes_around(dots_of(ax, places), (16.0, 16.0))


def _write_about(figure: Figure, scene: Scene, frame: str, style: Style) -> None:
    """Write title, how the view is to be read, and the key."""
    found = scene.season
    remark = (
        "Seen from north of the ecliptic, to scale (Sun and dots are not). Both planets go counterclockwise "
        "all the time.\nHeavy: while the planet seems to run back. The strip shows where on the far sky each "
        "numbered line of sight ends"
    )
    whole = len(scene.numbers) == len(ORDER) and frame != Frame.EQUATOR
    span = timeaxis.month_span_text(found.start, found.end)
    title = f"{found.body.label} from above: why it seems to run back, {span}"
    write_title(figure, title, f"{remark}{PARALLEL if whole else '.'}", style)
    _write_key(figure, scene, style)


def _write_key(figure: Figure, scene: Scene, style: Style) -> None:
    """Write what the signs stand for, under the view."""
    handles: Sequence[Line2D] = (
        Line2D([], [], **dot_look(style, filled=False), label="Earth on the date"),
        Line2D([], [], **dot_look(style, filled=True), label=f"{scene.season.body.label} on the date"),
        Line2D([], [], color=style.ink, linewidth=1.3, label="line of sight"),
        Line2D([], [], color=style.ink, linewidth=1.3, linestyle=(0, (6.0, 3.0)), label="on to the far sky"),
    )
    width, height = figure.get_size_inches()
    figure.legend(
        handles=list(handles),
        loc="upper left",
        bbox_to_anchor=(EDGE_IN / width, (BELOW_IN - 0.12) / height),
        ncols=len(handles),
        borderaxespad=0.0,
        borderpad=0.0,
        handletextpad=0.5,
        columnspacing=1.6,
        labelcolor=style.ink,
    )
    text = (
        f"Up is ecliptic longitude {scene.up_deg:.0f}° (J2000). Geometric places; distances in astronomical "
        "units (1 au = 149.6 million km)."
    )
    figure.text(EDGE_IN / width, 0.18 / height, text, fontsize=style.small_pt, color=style.quiet_ink)
