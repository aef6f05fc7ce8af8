"""What lies behind a campaign's path in the frame: stars, boundaries, constellations."""

from __future__ import annotations

import string
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from matplotlib.axes import Axes

from wanderers.arrays import Floats
from wanderers.ephemeris.constellations import ABBREVIATIONS, constellation_at, full_name
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.ephemeris.vectors import unit_vectors
from wanderers.plans.field_stars import star_names, stars_in
from wanderers.plans.frame import CameraFrame
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts import field, labels
from wanderers.report.charts.field import SkyField
from wanderers.report.charts.starfield import BOUNDARY_DASH, ECLIPTIC_DASH
from wanderers.report.charts.style import Style

MOST_STARS: Final = 420
"""Stars drawn, the brightest: as many as a field on paper can hold."""
FIELD_LIMIT: Final = 6.6
"""To this magnitude the catalogue holds the whole sky, beyond it a band along the ecliptic."""
NAMED: Final = 8
NAMED_TO: Final = 4.5
LETTERS: Final = string.ascii_uppercase
CROWD_COST: Final = 30.0
CROWD_PT: Final = 25.0
NAME_MESH: Final = (41, 27)


@dataclass(frozen=True, slots=True, eq=False)
class Plane:
    """The plane a picture is drawn on.

    Attributes:
        frame: the picture.
        wider: what the axes hold, the border beyond the picture's edge included.
        half: half the picture's sides as tangents, shape (2,).
        margin: the part of each side that the path leaves free.
    """

    frame: CameraFrame
    wider: CameraFrame
    half: Floats
    margin: float

    @staticmethod
    def of(contents: CampaignContents, ax: Axes, border: float) -> Plane:
        """Set the limits of axes to a picture with its border, and return its plane."""
        frame = contents.frame
        half = frame.half_sizes
        reach = half + border * half[0]
        ax.set_xlim(-reach[0], reach[0])
        ax.set_ylim(-reach[1], reach[1])
        ax.set_xticks([])
        ax.set_yticks([])
        width, height = np.degrees(2.0 * np.arctan(reach)).tolist()
        wider = CameraFrame(frame.ra_deg, frame.dec_deg, frame.position_angle_deg, width, height)
        return Plane(frame, wider, half, contents.framing.margin)

    def places(self, directions: Floats) -> Floats:
        """Return places of directions, shape (n, 2), NaN behind the camera."""
        return self.frame.on_plane(directions) * self.half

    def sky(self) -> SkyField:
        """Return a field upright on the equator that surely holds the picture."""
        reach = float(np.hypot(self.wider.width_deg, self.wider.height_deg)) / 2.0 + 1.0
        return SkyField(self.frame.ra_deg, self.frame.dec_deg, reach, reach)

    def lines(self) -> tuple[Floats, Floats]:
        """Return the constellation boundaries and the ecliptic as broken lines, shape (n, 2) each."""
        sky = self.sky()
        ecliptic = sky.on_axes(field.ecliptic_in(sky))
        boundaries = sky.on_axes(field.boundaries_in(sky))
        return self.places(unit_vectors(*boundaries.T)), self.places(unit_vectors(*ecliptic.T))


@dataclass(frozen=True, slots=True, eq=False)
class DrawnStars:
    """Stars of a picture, brightest first, and their dots, shape (n, 2); faintest magnitude drawn."""

    stars: StarCatalogue
    dots: Floats
    limit: float


def star_limit(magnitudes: Floats) -> float:
    """Return the faintest magnitude of a chart of at most ``MOST_STARS`` stars, to half a magnitude."""
    if magnitudes.size <= MOST_STARS:
        return float(np.ceil(2.0 * magnitudes.max(initial=6.5)) / 2.0)
    return float(np.floor(2.0 * np.sort(magnitudes)[MOST_STARS]) / 2.0)


def star_size_pt(magnitude: Floats, limit: float) -> Floats:
    """Return the diameters of stars' dots in points, shape (n,)."""
    return np.asarray(1.2 + 1.25 * np.maximum(limit - magnitude, 0.0) * 6.5 / max(limit, 6.5))


def draw_lines(ax: Axes, plane: Plane, style: Style) -> None:
    """Draw the constellation boundaries and the ecliptic."""
    for line, dash in zip(plane.lines(), (BOUNDARY_DASH, ECLIPTIC_DASH), strict=True):
        ax.plot(line[:, 0], line[:, 1], color=style.quiet_ink, linewidth=0.8, linestyle=(0, dash), zorder=1.2)


def line_dots(ax: Axes, plane: Plane) -> Floats:
    """Return dots along boundaries and ecliptic within the axes, shape (n, 2)."""
    box = ax.get_window_extent()
    dots = np.concatenate([labels.dense(ax.transData.transform(line), 3.0) for line in plane.lines()])
    inside = (dots[:, 0] > box.x0) & (dots[:, 0] < box.x1) & (dots[:, 1] > box.y0) & (dots[:, 1] < box.y1)
    return np.asarray(dots[inside])


def draw_stars(ax: Axes, contents: CampaignContents, plane: Plane, style: Style) -> DrawnStars:
    """Draw the stars to the useful limit, sized by magnitude."""
    middle = float(contents.path_jd[contents.path_jd.size // 2])
    stars, pixels = stars_in(plane.wider, middle, 2, 2)
    limit = star_limit(stars.v_mag)
    kept = stars.v_mag <= limit
    stars, pixels = stars.take(kept), pixels[kept]
    places = np.stack([pixels[:, 0] - 1.0, 1.0 - pixels[:, 1]], axis=1) * plane.wider.half_sizes
    size = star_size_pt(stars.v_mag, limit)
    ax.scatter(
        places[:, 0],
        places[:, 1],
        s=size**2,
        color=style.ink,
        edgecolors=style.paper,
        linewidths=0.4,
        zorder=2,
    )
    return DrawnStars(stars, np.asarray(ax.transData.transform(places)).reshape(-1, 2), limit)


def draw_registration(ax: Axes, contents: CampaignContents, plane: Plane, style: Style) -> Floats:
    """Draw squares round the registration stars; return their dots, shape (k, 2)."""
    sensor = contents.framing.sensor
    half = np.array([sensor.columns, sensor.rows]) / 2.0
    places = (contents.registration.place_px / half - 1.0) * np.array([1.0, -1.0]) * plane.half
    look: dict[str, Any] = {
        "linestyle": "none",
        "marker": "s",
        "markersize": 11.0,
        "markerfacecolor": "none",
        "markeredgecolor": style.ink,
        "markeredgewidth": 0.8,
    }
    ax.plot(places[:, 0], places[:, 1], zorder=2.5, **look)
    return np.asarray(ax.transData.transform(places)).reshape(-1, 2)


def registration_labels(
    ax: Axes, contents: CampaignContents, dots: Floats, style: Style
) -> list[labels.Label]:
    """Return letter and name of every registration star."""
    names = star_names(contents.registration.stars)
    return [
        labels.label_at(
            ax, f"{LETTERS[place]} {name}", tuple(dots[place]), (0.0, 180.0), style.note(), nearest_pt=3.5
        )
        for place, name in enumerate(names)
    ]


def star_labels(ax: Axes, contents: CampaignContents, drawn: DrawnStars, style: Style) -> list[labels.Label]:
    """Return the names of a few more bright stars."""
    taken = set(contents.registration.stars.hip.tolist())
    box = ax.get_window_extent()
    within = np.all((drawn.dots > (box.x0, box.y0)) & (drawn.dots < (box.x1, box.y1)), axis=1)
    named = [
        place
        for place, name in enumerate(drawn.stars.name)
        if name and not name.startswith("HIP ") and within[place]
        if drawn.stars.v_mag[place] <= NAMED_TO and int(drawn.stars.hip[place]) not in taken
    ]
    look = style.note(style="italic", color=style.quiet_ink)
    away = star_size_pt(drawn.stars.v_mag, drawn.limit) / 2.0 - 2.0
    return [
        labels.label_at(
            ax,
            drawn.stars.name[place],
            tuple(drawn.dots[place]),
            (0.0, 180.0),
            look,
            nearest_pt=float(away[place]),
            dearest=24.0,
        )
        for place in named[:NAMED]
    ]


def constellation_labels(ax: Axes, plane: Plane, path_dots: Floats, style: Style) -> list[labels.Label]:
    """Return the names of the constellations, each for somewhere in its own part of the picture."""
    across = np.stack(np.meshgrid(*(np.linspace(-0.92, 0.92, count) for count in NAME_MESH)), axis=-1)
    mesh = across.reshape(-1, 2)
    over = constellation_at(plane.frame.directions_at(mesh))
    dots = np.asarray(ax.transData.transform(mesh * plane.half))
    away = np.min(np.hypot(*(dots[:, np.newaxis] - path_dots).transpose(2, 0, 1)), axis=1)
    crowded = CROWD_COST * np.exp(-away / (CROWD_PT * labels.dots_per_pt(ax)))
    look = style.note(color=style.quiet_ink, fontsize=style.type_pt) | {"bbox": None}
    wanted = []
    for number in np.unique(over).tolist():
        own = over == number
        middle = np.median(dots[own], axis=0)
        cost = 20.0 * np.hypot(*((dots[own] - middle) / np.ptp(dots[:, 0])).T) + crowded[own]
        for name in (full_name(ABBREVIATIONS[number]), ABBREVIATIONS[number]):
            text = " ".join(name.upper())
            size = labels.measure(ax, text, look)
            holds = _within(plane, number, mesh[own], np.array(size), ax)
            if holds.any():
                chosen = np.where(holds, cost, np.inf)
                wanted.append(
                    labels.Label(
                        text, tuple(middle), dots[own], chosen, size, look, leads=False, dearest=45.0
                    )
                )
                break
    return wanted


def _within(plane: Plane, number: int, mesh: Floats, size: Floats, ax: Axes) -> np.ndarray:
    """Return at which places of a mesh a text of that size in dots lies within one constellation."""
    box = ax.get_window_extent()
    part = size / np.array([box.width, box.height]) * (plane.wider.half_sizes / plane.half)
    corners = np.array([[-1.0, -1.0], [0.0, -1.0], [1.0, -1.0], [-1.0, 1.0], [0.0, 1.0], [1.0, 1.0]])
    rim = (mesh[:, np.newaxis] + corners * part).reshape(-1, 2)
    over = constellation_at(plane.frame.directions_at(rim)).reshape(-1, len(corners))
    inside = np.all(np.abs(rim) < 0.98, axis=1).reshape(-1, len(corners))
    return np.asarray(np.all((over == number) & inside, axis=1))
