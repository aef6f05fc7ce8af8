"""The names, numbers and dates in a view from above."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from matplotlib.axes import Axes

from wanderers.arrays import Floats
from wanderers.report.charts import labels, timeaxis
from wanderers.report.charts.above_scene import ORDER, Scene, dots_of, is_small, to_edge, within
from wanderers.report.charts.style import Style

INWARD_COST: Final = 6.0
"""What it costs a number to stand on the side of its line where the other lines are, in points."""
SCALE_BARS_AU: Final = (0.1, 0.2, 0.25, 0.5, 1.0, 2.0, 5.0, 10.0)


def dot_look(style: Style, *, filled: bool) -> dict[str, Any]:
    """Return how a dated place is drawn: the planet's full, the Earth's open."""
    return {
        "linestyle": "none",
        "marker": "o",
        "markersize": 7.0,
        "markerfacecolor": style.ink if filled else style.paper,
        "markeredgecolor": style.paper if filled else style.ink,
        "markeredgewidth": 0.8 if filled else 1.4,
    }


def place_labels(ax: Axes, scene: Scene, enlarged: bool, style: Style) -> tuple[list[labels.Label], Floats]:
    """Draw the dated places; return their labels, and boxes that no text may cover, shape (n, 4)."""
    wanted, dots = [], []
    small = is_small(ax)
    for places, filled in ((scene.earth, False), (scene.planet, True)):
        if small and not filled:
            continue
        for number, row in scene.numbers.items():
            place = places[row]
            dot = dots_of(ax, place)[0]
            if not within(ax, dot[np.newaxis])[0]:
                continue
            ax.plot(*place[:, np.newaxis], zorder=4.5, **dot_look(style, filled=filled))
            dots.append(dot)
            day = timeaxis.day_text(scene.season.instants[ORDER[number - 1]])
            text = f"{number}: {day}" if _dated(scene, enlarged, filled) else f"{number}"
            outward = float(np.degrees(np.arctan2(place[1], place[0])))
            look = style.note(weight="bold" if filled else "normal")
            wanted.append(
                labels.label_at(ax, text, tuple(dot), (outward, outward + 180.0), look, nearest_pt=1.0)
            )
    return wanted, labels.boxes_around(np.array(dots).reshape(-1, 2), (16.0, 16.0))


def _dated(scene: Scene, enlarged: bool, filled: bool) -> bool:
    """Return whether a panel writes dates: at the Earth, where its orbit is large enough."""
    return not filled and (enlarged or not scene.far)


def sight_labels(ax: Axes, scene: Scene, style: Style) -> list[labels.Label]:
    """Return the numbers at the far ends of the lines of sight, to stand beside or along them."""
    wanted = []
    unit = labels.dots_per_pt(ax)
    starts = [dots_of(ax, scene.earth[row])[0] for row in scene.numbers.values()]
    ends = [
        dots_of(ax, to_edge(ax, scene.earth[row], scene.planet[row]))[0] for row in scene.numbers.values()
    ]
    centre = float(np.mean([end[0] for end in ends]))
    back, aside = (one.ravel() for one in np.meshgrid(np.arange(16.0, 90.0, 6.0), np.array([10.0, -10.0])))
    for number, start, end in zip(scene.numbers, starts, ends, strict=True):
        way = (end - start) / np.hypot(*(end - start))
        across = np.array([-way[1], way[0]])
        look = style.note(weight="bold")
        size = labels.measure(ax, f"{number}", look)
        places = end - unit * (back[:, np.newaxis] * way - aside[:, np.newaxis] * across)
        inward = (places[:, 0] - end[0]) * (end[0] - centre) < 0.0
        costs = 0.25 * back + np.where(inward, INWARD_COST, 0.0)
        wanted.append(labels.Label(f"{number}", tuple(end), places, costs, size, look, leads=False))
    return wanted


def body_labels(ax: Axes, scene: Scene, enlarged: bool, style: Style) -> list[labels.Label]:
    """Return the names of Sun, Earth and planet."""
    body = scene.season.body
    sun = tuple(dots_of(ax, np.zeros(2))[0])
    wanted = [labels.label_at(ax, "Sun", sun, (225.0, 315.0), style.note(), nearest_pt=5.0)]
    named = [(scene.earth, "Earth's orbit", style.ink)]
    if not enlarged:
        named.append((scene.planet, f"{body.label}'s orbit", style.name_colour(body)))
    for places, text, colour in named:
        dots = dots_of(ax, places)
        dots = dots[within(ax, dots)]
        if not len(dots):
            continue
        look = style.note(color=colour, style="italic")
        size, unit = labels.measure(ax, text, look), labels.dots_per_pt(ax)
        parts = [
            labels.around(tuple(at), size, (0.0, 180.0), unit) for at in dots[:: max(1, len(dots) // 24)]
        ]
        centres, costs = (np.concatenate(half) for half in zip(*parts, strict=True))
        wanted.append(labels.Label(text, tuple(dots[0]), centres, costs, size, look, leads=False))
    return wanted


def scale_label(ax: Axes, style: Style) -> labels.Label:
    """Draw a scale bar in the lower left corner, and return its words."""
    low, high = ax.get_xlim()
    bar = max(length for length in SCALE_BARS_AU if length <= 0.3 * (high - low))
    bottom, top = ax.get_ylim()
    x, y = low + 0.03 * (high - low), bottom + 0.03 * (top - bottom)
    look: dict[str, Any] = {"color": style.ink, "linewidth": 1.6, "solid_capstyle": "butt", "zorder": 4}
    ax.plot([x, x + bar], [y, y], **look)
    tick = 0.004 * (high - low)
    for end in (x, x + bar):
        ax.plot([end, end], [y - tick, y + tick], **look)
    text, words = f"{bar:g} au", style.note()
    size = labels.measure(ax, text, words)
    dot = dots_of(ax, np.array([x + 0.5 * bar, y]))[0]
    centre = dot + np.array([0.0, 0.5 * size[1] + 3.0 * labels.dots_per_pt(ax)])
    at = centre[np.newaxis]
    return labels.Label(text, tuple(dot), at, np.zeros(1), size, words, leads=False, dearest=np.inf)
