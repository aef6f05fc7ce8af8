"""The strip below a campaign's field: what its signs stand for, a scale, and where north and east are."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts import campaign_nights
from wanderers.report.charts.campaign_backdrop import star_size_pt
from wanderers.report.charts.starfield import BOUNDARY_DASH, ECLIPTIC_DASH
from wanderers.report.charts.style import Style

SCALES_DEG: Final = (0.25, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0)
SCALE_PART: Final = 0.14
"""Longest scale bar as a part of the picture's width."""
KEY_IN, COMPASS_IN, SCALE_IN = 0.4, 1.0, 2.0
"""Where in the strip below the picture the key begins, from the left; compass and scale, from the right."""


def draw_compass(figure: Figure, contents: CampaignContents, ax: Axes, style: Style) -> None:
    """Draw arrows to north and east and a scale bar into the strip below the picture, at its right."""
    frame, box = contents.frame, ax.get_window_extent()
    unit = float(figure.dpi)
    width, height = figure.bbox.size
    roll = np.radians(frame.position_angle_deg)
    centre = np.array([width - COMPASS_IN * unit, box.y0 - 0.58 * unit])
    # In the picture north lies at the position angle to the right of up, east a quarter turn to its left.
    ways = {"N": (np.sin(roll), np.cos(roll)), "E": (-np.cos(roll), np.sin(roll))}
    for letter, way in ways.items():
        tip = centre + 0.28 * unit * np.array(way)
        ax.annotate(
            "",
            xy=tuple(tip),
            xytext=tuple(centre),
            xycoords="figure pixels",
            textcoords="figure pixels",
            arrowprops={"arrowstyle": "-|>", "color": style.ink, "shrinkA": 0.0, "shrinkB": 0.0},
            annotation_clip=False,
        )
        at = centre + 0.40 * unit * np.array(way)
        figure.text(
            at[0] / width,
            at[1] / height,
            letter,
            ha="center",
            va="center",
            fontsize=style.type_pt,
            weight="bold",
        )
    _draw_scale(figure, contents, ax, style)


def _draw_scale(figure: Figure, contents: CampaignContents, ax: Axes, style: Style) -> None:
    """Draw a bar of whole degrees, true in the middle of the picture."""
    box, unit = ax.get_window_extent(), float(figure.dpi)
    width, height = figure.bbox.size
    dots_per_tangent = box.width / (ax.get_xlim()[1] - ax.get_xlim()[0])
    fitting = [deg for deg in SCALES_DEG if deg <= SCALE_PART * contents.frame.width_deg]
    degrees = max(fitting, default=SCALES_DEG[0])
    long = 2.0 * np.tan(np.radians(degrees / 2.0)) * dots_per_tangent
    x1, y = width - SCALE_IN * unit, box.y0 - 0.66 * unit
    for ends, heights in (
        ((x1 - long, x1), (y, y)),
        *(((x, x), (y - 6.0, y + 6.0)) for x in (x1 - long, x1)),
    ):
        figure.add_artist(
            Line2D(
                np.array(ends) / width,
                np.array(heights) / height,
                color=style.ink,
                linewidth=1.4,
                solid_capstyle="butt",
            )
        )
    text = f"{degrees:g}°" if degrees >= 1.0 else f"{degrees * 60.0:.0f}′"
    figure.text(
        (x1 - long / 2.0) / width,
        (y + 9.0) / height,
        text,
        ha="center",
        va="bottom",
        fontsize=style.type_pt,
    )


def write_key(figure: Figure, contents: CampaignContents, ax: Axes, limit: float, style: Style) -> None:
    """Write what the signs stand for into the strip below the picture."""
    nights = campaign_nights.nights_of(pl.concat([contents.plan, contents.spares]))
    square = Line2D(
        [],
        [],
        linestyle="none",
        marker="s",
        markersize=9.0,
        markerfacecolor="none",
        markeredgecolor=style.ink,
        label="registration star",
    )
    dash: dict[str, Any] = {"color": style.quiet_ink, "linewidth": 0.8}
    lines = [
        Line2D([], [], **dash, linestyle=(0, BOUNDARY_DASH), label="boundary"),
        Line2D([], [], **dash, linestyle=(0, ECLIPTIC_DASH), label="ecliptic"),
    ]
    box = ax.get_window_extent()
    width, height = figure.bbox.size
    rows = ([*campaign_nights.handles(nights.sorts, style), square], [*_magnitudes(limit, style), *lines])
    for number, row in enumerate(rows):
        top = box.y0 - (0.2 + 0.32 * number) * figure.dpi
        figure.legend(
            handles=row,
            loc="upper left",
            bbox_to_anchor=(KEY_IN * figure.dpi / width, top / height),
            ncols=len(row),
            borderaxespad=0.0,
            borderpad=0.0,
            handletextpad=0.4,
            handlelength=1.8,
            columnspacing=1.1,
            labelcolor=style.ink,
        )


def _magnitudes(limit: float, style: Style) -> list[Line2D]:
    look: dict[str, Any] = {
        "linestyle": "none",
        "marker": "o",
        "markerfacecolor": style.ink,
        "markeredgewidth": 0.0,
    }
    shown = np.arange(1.0, np.floor(limit) + 0.5, 1.0 if limit < 7.0 else 2.0)
    sizes = star_size_pt(shown, limit).tolist()
    return [
        Line2D([], [], markersize=size, label=f"{'magnitude ' if not place else ''}{value:g}", **look)
        for place, (value, size) in enumerate(zip(shown.tolist(), sizes, strict=True))
    ]
