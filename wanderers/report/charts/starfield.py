"""The stars of a chart, the constellations and the ecliptic, drawn and named."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris import stars
from wanderers.ephemeris.constellations import ABBREVIATIONS, full_name
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.report.charts import field, labels
from wanderers.report.charts.field import SkyField
from wanderers.report.charts.style import Style

STAR_LIMIT: Final = 6.5
NAMED_STARS: Final = 14
APART_PT: Final = 26.0
"""Least distance between two stars that are both named."""

CLUSTER_PT: Final = 22.0
"""Diameter of the ring round a star cluster."""

BOXED_TO: Final = 4.5
"""Stars to this magnitude are never covered by text."""

CROWD_COST: Final = 30.0
CROWD_PT: Final = 25.0
"""What it costs the name of a constellation to stand on the path, and how far off most of that is gone."""

BOUNDARY_DASH: Final = (1.0, 2.2)
ECLIPTIC_DASH: Final = (7.0, 4.0)

RIM: Final = np.array([[-0.55, -0.6], [0.0, -0.6], [0.55, -0.6], [-0.55, 0.6], [0.0, 0.6], [0.55, 0.6]])
"""Where about a constellation's name its own ground is asked for, in sizes of the name."""

GREEK: Final = dict(
    zip(
        (
            "alpha beta gamma delta epsilon zeta eta theta iota kappa lambda mu nu xi omicron pi rho sigma "
            "tau upsilon phi chi psi omega"
        ).split(),
        "αβγδεζηθικλμνξοπρστυφχψω",
        strict=True,
    )
)
RAISED: Final = str.maketrans("123456789", "¹²³⁴⁵⁶⁷⁸⁹")


def draw_lines(ax: Axes, sky: SkyField, style: Style) -> None:
    """Draw the constellation boundaries and the ecliptic."""
    for flat, dash in ((field.boundaries_in(sky), BOUNDARY_DASH), (field.ecliptic_in(sky), ECLIPTIC_DASH)):
        x, y = sky.on_axes(flat).T
        ax.plot(x, y, color=style.quiet_ink, linewidth=0.8, linestyle=(0, dash), zorder=1.2)


def draw_stars(ax: Axes, sky: SkyField, jd_tt: float, style: Style) -> tuple[StarCatalogue, Floats]:
    """Draw the stars; return them, brightest first, and their dots, shape (n, 2)."""
    catalogue, flat = field.stars_in(sky, jd_tt)
    seen = catalogue.v_mag <= STAR_LIMIT
    catalogue, places = catalogue.take(seen), sky.on_axes(flat[seen])
    sizes = star_size_pt(catalogue.v_mag) ** 2
    ax.scatter(
        places[:, 0], places[:, 1], s=sizes, color=style.ink, edgecolors=style.paper, linewidths=0.5, zorder=2
    )
    return catalogue, np.asarray(ax.transData.transform(places)).reshape(-1, 2)


def star_size_pt(magnitude: Floats) -> Floats:
    """Return the diameters of stars' dots in points, shape (n,)."""
    return np.asarray(1.5 + 1.35 * np.maximum(STAR_LIMIT - magnitude, 0.0))


def star_boxes(catalogue: StarCatalogue, dots: Floats, unit: float) -> Floats:
    """Return boxes round the brighter stars, shape (k, 4); ``unit`` is the resolution in dots a point."""
    bright = catalogue.v_mag < BOXED_TO
    half = star_size_pt(catalogue.v_mag[bright])[:, np.newaxis] * unit / 2.0
    return np.hstack([dots[bright] - half, dots[bright] + half])


def star_labels(ax: Axes, catalogue: StarCatalogue, dots: Floats, style: Style) -> list[labels.Label]:
    """Return the names of the brightest stars; without any, Hipparcos numbers of the first three."""
    names = [star_name(catalogue, number) for number in range(len(catalogue))]
    chosen = _apart([number for number, name in enumerate(names) if name], dots, ax)[:NAMED_STARS]
    if not chosen:
        names = list(catalogue.labels)
        chosen = list(range(min(3, len(names))))
    look = style.note(style="italic")
    away = star_size_pt(catalogue.v_mag) / 2.0 - 2.0
    return [
        labels.label_at(
            ax,
            names[number],
            tuple(dots[number]),
            (0.0, 180.0),
            look,
            nearest_pt=float(away[number]),
            dearest=30.0,
        )
        for number in chosen
    ]


def _apart(candidates: list[int], dots: Floats, ax: Axes) -> list[int]:
    """Return those stars, the brightest first, that no brighter one of them stands beside."""
    least = APART_PT * labels.dots_per_pt(ax)
    chosen: list[int] = []
    for number in candidates:
        if not chosen or np.min(np.hypot(*(dots[chosen] - dots[number]).T)) > least:
            chosen.append(number)
    return chosen


def draw_clusters(ax: Axes, sky: SkyField, style: Style) -> list[labels.Label]:
    """Draw rings round the clusters that planets pass; return their names."""
    catalogue = stars.ecliptic_stars()
    catalogue = catalogue.take(np.array([kind == "cluster" for kind in catalogue.kind]))
    flat = sky.flat(catalogue.ra_deg, catalogue.dec_deg)
    inside = np.flatnonzero(sky.holds(flat))
    places = sky.on_axes(flat[inside])
    ring: dict[str, Any] = {
        "facecolors": "none",
        "edgecolors": style.ink,
        "linewidths": 0.9,
        "linestyles": [(0, (1.0, 1.6))],
    }
    ax.scatter(places[:, 0], places[:, 1], s=CLUSTER_PT**2, zorder=2, **ring)
    look = style.note(style="italic")
    return [
        labels.label_at(
            ax, catalogue.name[number], tuple(dot), (0.0, 180.0), look, nearest_pt=0.5 * CLUSTER_PT - 2.0
        )
        for number, dot in zip(inside.tolist(), ax.transData.transform(places), strict=True)
    ]


def star_name(catalogue: StarCatalogue, number: int) -> str:
    """Return what to call a star on a chart: its proper name, else its designation; empty if it has none."""
    if catalogue.name[number]:
        return catalogue.name[number]
    letter, _, constellation = catalogue.bayer[number].partition(" ")
    bare = letter.rstrip("123456789") or letter
    return f"{GREEK.get(bare, bare)}{letter[len(bare) :].translate(RAISED)} {constellation}".strip()


def constellation_labels(ax: Axes, sky: SkyField, path_dots: Floats, style: Style) -> list[labels.Label]:
    """Return the names of the constellations, each for wherever there is room in its own part of the field.

    They keep away from the path, whose own labels come before them.
    """
    across = np.linspace(-0.96, 0.96, 49)
    east, north = np.meshgrid(across * sky.half_width_deg, across[::2] * sky.half_height_deg)
    mesh = np.stack([east.ravel(), north.ravel()], axis=1)
    over = field.constellations_over(sky, mesh)
    dots = np.asarray(ax.transData.transform(sky.on_axes(mesh)))
    away = np.min(np.hypot(*(dots[:, np.newaxis] - path_dots).transpose(2, 0, 1)), axis=1)
    crowded = CROWD_COST * np.exp(-away / (CROWD_PT * labels.dots_per_pt(ax)))
    look = style.note(color=style.quiet_ink, fontsize=style.type_pt) | {"bbox": None}
    wanted = []
    for number in np.unique(over).tolist():
        own, places = dots[over == number], mesh[over == number]
        middle = np.median(own, axis=0)
        cost = 20.0 * np.hypot(*((own - middle) / np.ptp(dots[:, 0])).T) + crowded[over == number]
        for name in (full_name(ABBREVIATIONS[number]), ABBREVIATIONS[number]):
            text = " ".join(name.upper())
            size = labels.measure(ax, text, look)
            holds = _within(ax, sky, number, places, size)
            if holds.any():
                chosen = np.where(holds, cost, np.inf)
                wanted.append(
                    labels.Label(text, tuple(middle), own, chosen, size, look, leads=False, dearest=45.0)
                )
                break
    return wanted


def _within(ax: Axes, sky: SkyField, number: int, places: Floats, size: tuple[float, float]) -> Bools:
    """Return at which flat places a text of that size in dots lies on the ground of one constellation."""
    degrees_a_dot = 2.0 * sky.half_width_deg / ax.get_window_extent().width
    rim = places[:, np.newaxis] + RIM * np.array(size) * degrees_a_dot
    over = field.constellations_over(sky, rim.reshape(-1, 2)).reshape(-1, len(RIM))
    return np.asarray(np.all(over == number, axis=1) & sky.holds(rim[:, 0]) & sky.holds(rim[:, -1]))


def ecliptic_label(ax: Axes, sky: SkyField, style: Style) -> list[labels.Label]:
    """Return the name of the ecliptic, to stand anywhere along it; nothing where it is not in the field."""
    line = field.ecliptic_in(sky)
    line = line[sky.holds(line)]
    if len(line) < 2:
        return []
    look = style.note(color=style.quiet_ink)
    size, unit = labels.measure(ax, "ecliptic", look), labels.dots_per_pt(ax)
    dots = np.asarray(ax.transData.transform(sky.on_axes(line[:: max(1, len(line) // 20)])))
    parts = [labels.around(tuple(at), size, (90.0, 270.0), unit) for at in dots]
    centres, costs = (np.concatenate(half) for half in zip(*parts, strict=True))
    return [labels.Label("ecliptic", tuple(dots[0]), centres, costs, size, look, leads=False, dearest=14.0)]


def boundary_dots(ax: Axes, sky: SkyField) -> Floats:
    """Return dots along the boundaries and the ecliptic, which text should rather not cover, shape (n, 2)."""
    lines = (field.boundaries_in(sky), field.ecliptic_in(sky))
    return np.concatenate([labels.dense(ax.transData.transform(sky.on_axes(flat)), 3.0) for flat in lines])


def star_handles(style: Style) -> list[Any]:
    """Return what a key tells of the stars' sizes and of the boundaries."""
    look: dict[str, Any] = {
        "linestyle": "none",
        "marker": "o",
        "markerfacecolor": style.ink,
        "markeredgewidth": 0.0,
    }
    handles = []
    for magnitude in range(7):
        size = float(star_size_pt(np.array([float(magnitude)]))[0])
        name = f"{magnitude}" if magnitude else "stars of magnitude 0"
        handles.append(Line2D([], [], markersize=size, label=name, **look))
    dash: dict[str, Any] = {"color": style.quiet_ink, "linewidth": 0.8, "linestyle": (0, BOUNDARY_DASH)}
    return [*handles, Line2D([], [], label="constellation boundary", **dash)]
