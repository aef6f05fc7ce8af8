"""A campaign's path drawn once more, longitude against latitude, its heights stretched so nights part."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes

from wanderers.arrays import Floats
from wanderers.ephemeris import frames
from wanderers.plans.frame import coordinates
from wanderers.plans.rows import directions
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts import campaign_nights, labels, timeaxis
from wanderers.report.charts.campaign_backdrop import Plane
from wanderers.report.charts.curves import unwrapped
from wanderers.report.charts.path import angle_text
from wanderers.report.charts.style import LIGHT, Style, tidy

FLAT: Final = 0.15
"""Height of a path over its length below which it is drawn once more."""
ROOM: Final = (0.04, 0.24)
"""Room beside and above the path, as parts of its extents."""
STEPS_DEG: Final = np.array([1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0, 60.0, 120.0, 300.0]) / 60.0


def plan_places(plane: Plane, table: pl.DataFrame) -> Floats:
    """Return places of nights in the picture, shape (n, 2)."""
    return plane.places(directions(table))


def stretch(contents: CampaignContents) -> bool:
    """Return whether a path is so flat that it is drawn once more."""
    longitude, latitude = _ecliptic(contents.path)
    return bool(np.ptp(latitude) < FLAT * np.ptp(unwrapped(longitude)))


def draw_stretched(contents: CampaignContents, ax: Axes, *, style: Style = LIGHT) -> Axes:
    """Draw the path with the planned nights, all numbered, the same way up as the picture.

    Args:
        contents: the campaign.
        ax: the axes: ecliptic longitude and latitude of J2000.
        style: the look.
    """
    longitude, y = _ecliptic(contents.path)
    x = unwrapped(longitude)
    times = _set_axes(ax, x, y, contents.is_turned_over, style)
    body = contents.campaign.season.body
    ax.plot(x, y, color=style.colours[body], linewidth=1.0, zorder=3)
    ax.plot(x, y, linestyle="none", marker=".", markersize=2.6, color=style.colours[body], zorder=3.1)
    for table in (contents.spares, contents.plan):
        nights, places = campaign_nights.nights_of(table), _on_axes(table, x)
        campaign_nights.draw(ax, nights, places, style)
    dots = np.asarray(ax.transData.transform(places)).reshape(-1, 2)
    line = np.stack([x, y], axis=1)
    points = labels.dense(ax.transData.transform(line), 2.5)
    wanted = [
        *campaign_nights.number_labels(ax, nights, dots, style),
        *_month_labels(ax, contents, line, style),
    ]
    labels.write_labels(ax, wanted, labels.ground_of(ax, points, campaign_nights.dot_boxes(dots, ax)))
    ax.set_title(
        f"The path with heights drawn {times} times larger; all planned nights",
        loc="left",
        fontsize=style.type_pt,
        weight="bold",
    )
    return ax


def _set_axes(ax: Axes, x: Floats, y: Floats, turned_over: bool, style: Style) -> str:
    """Set limits and ticks; return how many times heights are larger."""
    side, above = ROOM[0] * np.ptp(x), ROOM[1] * np.ptp(y)
    left, right = float(x.max() + side), float(x.min() - side)
    low, high = float(y.min() - above), float(y.max() + above)
    ax.set_xlim(*((right, left) if turned_over else (left, right)))
    ax.set_ylim(*((high, low) if turned_over else (low, high)))
    box = ax.get_window_extent()
    times = (box.height / (high - low)) / (box.width / (left - right))
    for axis, ends, most in (("x", (right, left), 10), ("y", (low, high), 6)):
        enough = (ends[1] - ends[0]) / STEPS_DEG <= most
        step = float(STEPS_DEG[int(np.argmax(enough))]) if enough.any() else 10.0
        at = np.arange(np.ceil(ends[0] / step), np.floor(ends[1] / step) + 1.0) * step
        texts = [
            angle_text(value % 360.0).removeprefix("+") if axis == "x" else angle_text(value)
            for value in at.tolist()
        ]
        getattr(ax, f"set_{axis}ticks")(at, texts)
    way = "right" if turned_over else "left"
    ax.set_xlabel(f"ecliptic longitude (degrees, J2000), growing to the {way}, eastward")
    ax.set_ylabel("latitude")
    tidy(ax, style)
    ax.spines[["top", "right"]].set_visible(True)
    return f"{times:.2g}"


def _month_labels(ax: Axes, contents: CampaignContents, line: Floats, style: Style) -> list[labels.Label]:
    """Return the first days of months along the path, with small strokes drawn where they are."""
    days = timeaxis.utc_days(contents.path_jd)
    at = timeaxis.ticks(float(days[0]), float(days[-1]), timeaxis.DIVISIONS[4])
    x, y = (np.interp(at, days, column) for column in line.T)
    ax.plot(
        x, y, linestyle="none", marker="+", markersize=6.0, color=style.ink, markeredgewidth=0.8, zorder=3.2
    )
    look = style.note(color=style.quiet_ink)
    dots = np.asarray(ax.transData.transform(np.stack([x, y], axis=1)))
    return [
        labels.label_at(
            ax, timeaxis.day_text(instant, year=False), tuple(dot), (90.0, 270.0), look, dearest=30.0
        )
        for instant, dot in zip(at.tolist(), dots, strict=True)
    ]


def _on_axes(table: pl.DataFrame, x: Floats) -> Floats:
    """Return longitude (on the same turn as the path's) and latitude of nights, shape (n, 2)."""
    longitude, latitude = _ecliptic(directions(table))
    middle = 0.5 * (float(x.min()) + float(x.max()))
    return np.stack([middle + (longitude - middle + 180.0) % 360.0 - 180.0, latitude], axis=1)


def _ecliptic(direction: Floats) -> tuple[Floats, Floats]:
    """Return longitude and latitude on the mean ecliptic of J2000, shape (n,) each."""
    return coordinates(frames.ecliptic_of_j2000() @ direction)
