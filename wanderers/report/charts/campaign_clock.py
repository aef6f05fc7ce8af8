"""A campaign's season as clock time against date: twilight, Moon, when the planet is high, the nights."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
import polars as pl
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch

from wanderers.arrays import Floats, Ints
from wanderers.plans.replan import Status
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.campaign.sky_clock import SkyClock
from wanderers.report.charts import campaign_nights, labels, timeaxis
from wanderers.report.charts.campaign_nights import Nights
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, write_title
from wanderers.site.twilight import ASTRONOMICAL_DEG, CIVIL_DEG, NAUTICAL_DEG, SUN_RISE_DEG

HEIGHT_IN: Final = 6.9
LEFT_IN, RIGHT_IN, BOTTOM_IN, TOP_IN = 0.95, 0.3, 1.55, 1.15
LEVELS: Final = (ASTRONOMICAL_DEG, NAUTICAL_DEG, CIVIL_DEG, SUN_RISE_DEG)
GREYS: Final = ("#f4f4f4", "#e9e9e9", "#dddddd", "#cecece")
REDS: Final = ("#160000", "#2a0000", "#3f0000", "#560000")
"""Fills of astronomical, nautical, civil twilight and day; night itself is the paper."""
MOON_PART: Final = 0.62
"""Width of the Moon's stroke on an evening when it is full, as a part of the room an evening has."""
ROOM_HOURS: Final = 0.7
PHASE_ROW: Final = 1.03
CULMINATION_DASH: Final = (1.5, 1.8)
DARK_DEG: Final = 90.0


def draw_campaign_clock(contents: CampaignContents, *, style: Style = LIGHT) -> Figure:
    """Return the chart of a season by the clock.

    Args:
        contents: the campaign.
        style: the look.
    """
    campaign = contents.campaign
    with in_force(style):
        figure = new_figure(HEIGHT_IN, style)
        ax = axes_at(figure, LEFT_IN, RIGHT_IN, BOTTOM_IN, TOP_IN)
        plot_campaign_clock(contents, ax, style=style)
        low, high = contents.clock.day_jd[[0, -1]].tolist()
        write_title(
            figure,
            f"{campaign.season.body.label} by the clock from {campaign.site.name}, "
            f"{timeaxis.month_span_text(low, high)}",
            f"Clock of {campaign.site.zone}; a night runs upward from its evening date. Upright strokes: the "
            "Moon is up, the broader the more of it is lit.\nBetween the heavy lines the planet stands "
            f"{campaign.rules.min_altitude_deg:g}° up or more; numbers are those of the plan.",
            style,
        )
        _write_key(figure, contents, style)
    return figure


def plot_campaign_clock(contents: CampaignContents, ax: Axes, *, style: Style = LIGHT) -> Axes:
    """Draw the season by the clock into axes; dates run to the right, a night upward."""
    clock = contents.clock
    _set_axes(ax, clock, style)
    _draw_light(ax, clock, style)
    _draw_moon(ax, clock, style)
    heavy = _draw_planet(ax, contents, style)
    nights = campaign_nights.nights_of(contents.plan)
    spares = campaign_nights.nights_of(contents.spares)
    campaign_nights.draw(ax, spares, _places(clock, spares), style)
    places = _places(clock, nights)
    campaign_nights.draw(ax, nights, places, style)
    dots = np.asarray(ax.transData.transform(places)).reshape(-1, 2)
    wanted = campaign_nights.number_labels(ax, nights, dots, style)
    points = np.concatenate([labels.dense(ax.transData.transform(line), 3.0) for line in heavy] + [dots[:0]])
    boxes = campaign_nights.dot_boxes(dots, ax)
    labels.write_labels(ax, wanted, labels.ground_of(ax, points, boxes))
    return ax


def campaign_clock_alt_text(contents: CampaignContents) -> str:
    """Return what the chart of the season by the clock shows."""
    campaign, plan = contents.campaign, contents.plan
    low, high = contents.clock.day_jd[[0, -1]].tolist()
    head = (
        f"Clock time against date from {campaign.site.name}, {timeaxis.long_span_text(low, high)}: "
        f"twilight, the Moon, when {campaign.season.body.label} stands "
        f"{campaign.rules.min_altitude_deg:g} degrees up or more, and the planned nights."
    )
    timed = plan.drop_nulls("recommended_local").filter(pl.col("status") != Status.LOST.value)
    if timed.is_empty():
        return f"{head} No night can be planned."
    first, last = (timed["recommended_local"][place] for place in (0, -1))
    return (
        f"{head} The recommended time moves from {first[11:16]} on the first planned night "
        f"to {last[11:16]} on the last."
    )


def _set_axes(ax: Axes, clock: SkyClock, style: Style) -> None:
    low, high = _hours_shown(clock)
    days = clock.day_jd
    campaign_nights.set_date_axis(ax, float(days[0]), float(days[-1]))
    ax.set_ylim(low, high)
    step = 1 if high - low <= 14.0 else 2
    at = np.arange(np.ceil(low), np.floor(high) + 1.0)
    at = at[at % step == 0]
    ax.set_yticks(at, [f"{int(hour) % 24:02d}:00" for hour in at.tolist()])
    ax.set_ylabel("local time, evening to morning upward")
    ax.grid(True, axis="both", color=style.rule, linewidth=0.5)
    ax.set_axisbelow(False)
    for line in (*ax.get_xgridlines(), *ax.get_ygridlines()):
        line.set_zorder(1.1)


def _hours_shown(clock: SkyClock) -> tuple[float, float]:
    """Return the clock times between which the Sun is ever down, with some room; all day if it never sets."""
    down = np.flatnonzero((clock.sun_altitude_deg < SUN_RISE_DEG).any(axis=1))
    if down.size == 0:
        return float(clock.hour[0]), float(clock.hour[-1])
    first, last = clock.hour[down[[0, -1]]].tolist()
    return max(first - ROOM_HOURS, float(clock.hour[0])), min(last + ROOM_HOURS, float(clock.hour[-1]))


def _draw_light(ax: Axes, clock: SkyClock, style: Style) -> None:
    """Fill day and the twilights, and draw their limits."""
    fills = GREYS if style.name == LIGHT.name else REDS
    at = (clock.day_jd, clock.hour, clock.sun_altitude_deg)
    ax.contourf(*at, levels=[*LEVELS, DARK_DEG], colors=list(fills), zorder=0.5)
    shown = [level for level in LEVELS if at[2].min() < level < at[2].max()]
    if shown:
        ax.contour(*at, levels=shown, colors=style.quiet_ink, linewidths=0.5, linestyles="solid", zorder=1.2)


def _draw_moon(ax: Axes, clock: SkyClock, style: Style) -> None:
    """Draw a stroke for each evening while the Moon is up and the Sun down; full and new Moons on top."""
    evening, start, end = _moon_up(clock)
    days = clock.day_jd[evening]
    strokes = np.stack([np.stack([days, start], axis=1), np.stack([days, end], axis=1)], axis=1)
    room_pt = ax.get_window_extent().width / labels.dots_per_pt(ax) / max(clock.day_jd.size - 1, 1)
    collection = LineCollection(
        list(strokes),
        colors="#8a8a8a" if style.name == LIGHT.name else "#900000",
        linewidths=np.maximum(MOON_PART * room_pt * clock.moon_illuminated[evening], 0.15),
        capstyle="butt",
        zorder=1.0,
    )
    ax.add_collection(collection, autolim=False)
    for turn, look in zip(_phases(clock), _phase_looks(style), strict=True):
        x = clock.day_jd[turn]
        ax.plot(
            x, np.full(x.size, PHASE_ROW), transform=ax.get_xaxis_transform(), clip_on=False, zorder=5, **look
        )


def _moon_up(clock: SkyClock) -> tuple[Ints, Floats, Floats]:
    """Return the stretches with the Moon up and the Sun down: evening, first and last hour, shape (k,)."""
    margin = np.fmin(clock.moon_altitude_deg, SUN_RISE_DEG - clock.sun_altitude_deg).T
    up = np.pad(margin > 0.0, ((0, 0), (1, 1)))
    turns = np.diff(up.astype(np.int8), axis=1)
    evening, first = np.nonzero(turns == 1)
    _, after = np.nonzero(turns == -1)
    last = margin.shape[1] - 1
    ends = []
    for here, there in ((first, np.maximum(first - 1, 0)), (after - 1, np.minimum(after, last))):
        inside, outside = margin[evening, here], margin[evening, there]
        part = np.where(here == there, 0.0, inside / np.where(here == there, 1.0, inside - outside))
        ends.append(clock.hour[here] + part * (clock.hour[there] - clock.hour[here]))
    return evening, ends[0], ends[1]


def _phases(clock: SkyClock) -> tuple[Ints, Ints]:
    """Return the places of the evenings of full and of new Moon."""
    lit = clock.moon_illuminated
    inner, before, after = lit[1:-1], lit[:-2], lit[2:]
    full = 1 + np.flatnonzero((inner >= before) & (inner > after) & (inner > 0.5))
    new = 1 + np.flatnonzero((inner <= before) & (inner < after) & (inner < 0.5))
    return full, new


def _phase_looks(style: Style) -> tuple[dict[str, Any], dict[str, Any]]:
    ring: dict[str, Any] = {
        "linestyle": "none",
        "marker": "o",
        "markersize": 7.0,
        "markeredgecolor": style.ink,
        "markeredgewidth": 1.0,
    }
    open_ring, disc = ring | {"markerfacecolor": style.paper}, ring | {"markerfacecolor": style.ink}
    # What is bright is bare paper in print, and ink on a dark screen.
    return (open_ring, disc) if style.name == LIGHT.name else (disc, open_ring)


def _draw_planet(ax: Axes, contents: CampaignContents, style: Style) -> list[Floats]:
    """Draw the limit of altitude and the culmination; return the limit's lines."""
    clock, body = contents.clock, contents.campaign.season.body
    above = clock.above_limit_deg
    lines: list[Floats] = []
    if above.min() < 0.0 < above.max():
        drawn = ax.contour(
            clock.day_jd,
            clock.hour,
            above,
            levels=[0.0],
            colors=[style.colours[body]],
            linewidths=2.2,
            zorder=3,
        )
        lines = [np.asarray(part) for part in drawn.allsegs[0] if len(part) > 1]
    table = contents.campaign.nights
    culminates = table["culmination_jd"].fill_null(np.nan).to_numpy().astype(np.float64)
    hour = clock.hour_of(clock.day_jd, culminates)
    hour = np.where(np.abs(np.diff(hour, prepend=hour[:1])) > 2.0, np.nan, hour)
    ax.plot(
        clock.day_jd,
        hour,
        color=style.colours[body],
        linewidth=1.2,
        linestyle=(0, CULMINATION_DASH),
        zorder=2.9,
    )
    return lines


def _places(clock: SkyClock, nights: Nights) -> Floats:
    return np.stack([nights.day_jd, clock.hour_of(nights.day_jd, nights.jd)], axis=1)


def _write_key(figure: Figure, contents: CampaignContents, style: Style) -> None:
    """Write what signs and lines stand for, under the axes, in two rows."""
    body = contents.campaign.season.body
    full, new = _phase_looks(style)
    limit = contents.campaign.rules.min_altitude_deg
    nights = campaign_nights.nights_of(pl.concat([contents.plan, contents.spares], how="vertical"))
    lines = [
        Line2D([], [], color=style.colours[body], linewidth=2.2, label=f"{body.label} {limit:g}° up"),
        Line2D(
            [],
            [],
            color=style.colours[body],
            linewidth=1.2,
            linestyle=(0, CULMINATION_DASH),
            label="culminates",
        ),
        Line2D([], [], **full, label="full Moon"),
        Line2D([], [], **new, label="new Moon"),
    ]
    fills = GREYS if style.name == LIGHT.name else REDS
    words = ("astronomical twilight", "nautical", "civil", "day")
    patches = [
        Patch(facecolor=fill, edgecolor=style.quiet_ink, linewidth=0.5, label=word)
        for fill, word in zip(fills, words, strict=True)
    ]
    rows: tuple[list[Artist], ...] = (
        [*campaign_nights.handles(nights.sorts, style), *lines[:2]],
        [*patches, *lines[2:]],
    )
    width, height = figure.get_size_inches()
    for number, row in enumerate(rows):
        figure.legend(
            handles=row,
            loc="upper left",
            bbox_to_anchor=(LEFT_IN / width, (0.68 - 0.3 * number) / height),
            ncols=len(row),
            borderaxespad=0.0,
            borderpad=0.0,
            handletextpad=0.5,
            columnspacing=1.4,
            labelcolor=style.ink,
        )
