"""The field of a campaign as its camera sees it: path, planned nights, stars, the edge of the picture."""

from __future__ import annotations

from typing import Final

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from wanderers.ephemeris.bodies import INNER
from wanderers.ephemeris.constellations import ABBREVIATIONS, constellation_at, full_name
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts import campaign_backdrop, campaign_nights, campaign_strip, labels, timeaxis
from wanderers.report.charts.campaign_backdrop import Plane
from wanderers.report.charts.campaign_path import draw_stretched, plan_places, stretch
from wanderers.report.charts.path import SUN_CAUTION, angle_text, ra_text
from wanderers.report.charts.style import LIGHT, WIDTH_IN, Style, axes_at, in_force, new_figure, write_title
from wanderers.report.charts.wording import listed

SIDE_IN: Final = 0.3
TOP_IN: Final = 1.35
HIGHEST_IN: Final = 7.2
STRIP_IN: Final = 1.1
PANEL_IN: Final = 2.9
BETWEEN_IN: Final = 0.4
LOWEST_IN: Final = 0.7
LEFT_IN: Final = 0.95
SLIGHT_DEG: Final = 40.0
"""Turn up to which north still counts as up, or down."""
BORDER: Final = 0.03
"""How much sky is shown beyond the picture's edge, as a part of its width."""
SPARSE_DEAREST: Final = 14.0
"""What a number may cost beside a path that is drawn once more, larger: only what stands there freely."""


def draw_campaign_field(contents: CampaignContents, *, style: Style = LIGHT) -> Figure:
    """Return the chart of the field; a flat path is drawn once more below, its heights stretched.

    Args:
        contents: the campaign.
        style: the look.
    """
    with in_force(style):
        is_flat = stretch(contents)
        wide, high = _size_in(contents)
        below = STRIP_IN + (PANEL_IN + BETWEEN_IN + LOWEST_IN if is_flat else 0.0)
        figure = new_figure(TOP_IN + high + below, style)
        side = (WIDTH_IN - wide) / 2.0
        ax = axes_at(figure, side, side, below, TOP_IN)
        limit = plot_campaign_field(contents, ax, numbered=not is_flat, style=style)
        if is_flat:
            top = TOP_IN + high + STRIP_IN + BETWEEN_IN
            draw_stretched(contents, axes_at(figure, LEFT_IN, SIDE_IN, LOWEST_IN, top), style=style)
        campaign_strip.draw_compass(figure, contents, ax, style)
        campaign_strip.write_key(figure, contents, ax, limit, style)
        _write_about(figure, contents, limit, style)
    return figure


def plot_campaign_field(
    contents: CampaignContents, ax: Axes, *, numbered: bool = True, style: Style = LIGHT
) -> float:
    """Draw the field into axes, which must have the shape of the picture with its border.

    Args:
        contents: the campaign.
        ax: the axes: right and up in the picture, in tangents of the angle from its middle.
        numbered: whether every night has its number; else only where there is ample room.
        style: the look.

    Returns:
        the faintest magnitude drawn.
    """
    plane = Plane.of(contents, ax, BORDER)
    campaign_backdrop.draw_lines(ax, plane, style)
    stars = campaign_backdrop.draw_stars(ax, contents, plane, style)
    _draw_edge(ax, plane, style)
    line = plane.places(contents.path)
    body = contents.campaign.season.body
    ax.plot(line[:, 0], line[:, 1], color=style.colours[body], linewidth=0.9, zorder=3)
    ax.plot(
        line[:, 0],
        line[:, 1],
        linestyle="none",
        marker=".",
        markersize=2.4,
        color=style.colours[body],
        zorder=3.1,
    )
    spares = campaign_nights.nights_of(contents.spares)
    campaign_nights.draw(ax, spares, plan_places(plane, contents.spares), style)
    nights = campaign_nights.nights_of(contents.plan)
    places = plan_places(plane, contents.plan)
    campaign_nights.draw(ax, nights, places, style)
    dots = np.asarray(ax.transData.transform(places)).reshape(-1, 2)
    path_dots = labels.dense(ax.transData.transform(line), 2.5)
    marked = campaign_backdrop.draw_registration(ax, contents, plane, style)
    wanted = [
        *campaign_nights.number_labels(
            ax, nights, dots, style, dearest=90.0 if numbered else SPARSE_DEAREST, musts_at_any_cost=numbered
        ),
        *campaign_backdrop.registration_labels(ax, contents, marked, style),
        *campaign_backdrop.star_labels(ax, contents, stars, style),
        *campaign_backdrop.constellation_labels(ax, plane, path_dots[::10], style),
    ]
    points = [path_dots, stars.dots, campaign_backdrop.line_dots(ax, plane)]
    boxes = [campaign_nights.dot_boxes(dots, ax), campaign_nights.dot_boxes(marked, ax, 11.0)]
    ground = labels.Ground(_bounds(ax, plane), np.concatenate(points), np.concatenate(boxes))
    labels.write_labels(ax, wanted, ground)
    return stars.limit


def campaign_field_alt_text(contents: CampaignContents) -> str:
    """Return what the chart of the field shows."""
    campaign, framing = contents.campaign, contents.framing
    number = np.unique(constellation_at(contents.path), return_index=True)
    names = [full_name(ABBREVIATIONS[one]) for one in number[0][np.argsort(number[1])].tolist()]
    held = (
        "holds the whole path with its margin"
        if framing.fits
        else "does not hold the whole path with its margin"
    )
    return (
        f"Path of {campaign.season.body.label} in {listed(names)} with {contents.plan.height} planned "
        f"nights, in the frame of a {framing.lens_mm:g} mm lens, {contents.frame.width_deg:.1f} by "
        f"{contents.frame.height_deg:.1f} degrees. The frame {held}. {turned_words(contents)}"
    )


def turned_words(contents: CampaignContents) -> str:
    """Return which way up the picture is."""
    roll = contents.frame.position_angle_deg
    east = "right" if contents.is_turned_over else "left"
    north = "down" if contents.is_turned_over else "up"
    turn = min(roll % 360.0, 360.0 - roll % 360.0)
    turn = 180.0 - turn if contents.is_turned_over else turn
    exact = f"North {north}, east to the {east}" if turn < SLIGHT_DEG else "Turned as the arrows show"
    over = "Turned over, as the sky stands there. " if contents.is_turned_over else ""
    return f"{over}{exact}, the upper edge at position angle {roll % 360.0:.0f} degrees."


def lens_words(contents: CampaignContents) -> str:
    """Return sensor, lens, field and scale in numbers."""
    framing = contents.framing
    sensor = framing.sensor
    name = f"{sensor.name[:1].upper()}{sensor.name[1:]}"
    return (
        f"{name} ({sensor.width_mm:g} × {sensor.height_mm:g} mm, {sensor.columns} × {sensor.rows} px), "
        f"{framing.lens_mm:.4g} mm: {contents.frame.width_deg:.1f}° × {contents.frame.height_deg:.1f}°, "
        f"{framing.scale_arcsec_per_px:.1f}″ a pixel"
    )


def _size_in(contents: CampaignContents) -> tuple[float, float]:
    """Return width and height of the axes: the picture's shape with an equal border all round."""
    shape = picture_shape(contents)
    wide = min(WIDTH_IN - 2.0 * SIDE_IN, HIGHEST_IN / shape)
    return wide, wide * shape


def picture_shape(contents: CampaignContents) -> float:
    """Return height over width of the picture with its border, which is equally broad all round."""
    half = contents.frame.half_sizes
    return float((half[1] + BORDER * half[0]) / (half[0] * (1.0 + BORDER)))


def _bounds(ax: Axes, plane: Plane) -> tuple[float, float, float, float]:
    """Return the dots within which text may stand: the picture without its edge."""
    low, high = ax.transData.transform(np.stack([-plane.half, plane.half]))
    inset = 3.0 * labels.dots_per_pt(ax)
    return (*(low + inset).tolist(), *(high - inset).tolist())


def _draw_edge(ax: Axes, plane: Plane, style: Style) -> None:
    """Draw the edge of the picture, and the margin within which the path was meant to stay."""
    half = plane.half
    ax.add_patch(
        Rectangle(tuple(-half), *(2.0 * half), fill=False, edgecolor=style.ink, linewidth=1.6, zorder=3.5)
    )
    inner = half * (1.0 - 2.0 * plane.margin)
    ax.add_patch(
        Rectangle(
            tuple(-inner),
            *(2.0 * inner),
            fill=False,
            edgecolor=style.quiet_ink,
            linewidth=0.6,
            linestyle=(0, (1.0, 4.0)),
            zorder=1.3,
        )
    )


def _write_about(figure: Figure, contents: CampaignContents, limit: float, style: Style) -> None:
    season, frame = contents.campaign.season, contents.frame
    low, high = timeaxis.utc_days(np.array([season.start_jd, season.end_jd])).tolist()
    title = f"{season.body.label} in the frame, {timeaxis.month_span_text(low, high)}"
    middle = f"Middle {ra_text(frame.ra_deg)}, {angle_text(frame.dec_deg)} (J2000)."
    remark = f"{lens_words(contents)}.\n{middle} {turned_words(contents)}"
    third = f"Points on the path: once a day. Dotted: the margin. Stars to magnitude {limit:g}"
    if limit > campaign_backdrop.FIELD_LIMIT:
        third += f" within 5° of the ecliptic, elsewhere to {campaign_backdrop.FIELD_LIMIT:g}"
    third += f".\n{SUN_CAUTION}" if season.body in INNER else "."
    write_title(figure, title, f"{remark}\n{third}", style)
