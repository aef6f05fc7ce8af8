"""Magnitude and diameter over a campaign's season, with the planned nights."""

from __future__ import annotations

from typing import Final

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from wanderers.arrays import Floats
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts import campaign_nights, labels, timeaxis
from wanderers.report.charts.style import LIGHT, Style, axes_at, in_force, new_figure, tidy, write_title

PANEL_IN: Final = 2.5
GAP_IN: Final = 0.2
LEFT_IN, RIGHT_IN, TOP_IN, BOTTOM_IN = 0.95, 0.3, 0.85, 1.15
COLUMNS: Final = (("magnitude", "magnitude (brighter upward)"), ("diameter_arcsec", "diameter (arcseconds)"))


def draw_campaign_light(contents: CampaignContents, *, style: Style = LIGHT) -> Figure:
    """Return the chart of magnitude and diameter against evening date.

    Args:
        contents: the campaign.
        style: the look.
    """
    with in_force(style):
        height = TOP_IN + 2 * PANEL_IN + GAP_IN + BOTTOM_IN
        figure = new_figure(height, style)
        for number, (column, words) in enumerate(COLUMNS):
            top = TOP_IN + number * (PANEL_IN + GAP_IN)
            ax = axes_at(figure, LEFT_IN, RIGHT_IN, height - top - PANEL_IN, top)
            ax.set_ylabel(words)
            plot_course(contents, ax, column, labelled=number == 1, style=style)
        low, high = contents.clock.day_jd[[0, -1]].tolist()
        name, span = contents.campaign.season.body.label, timeaxis.month_span_text(low, high)
        remark = (
            "Model magnitude outside the air, diameter of the disc at its equator. Numbers as in the plan."
        )
        write_title(figure, f"{name}: brightness and size, {span}", remark, style)
        nights = campaign_nights.nights_of(contents.plan)
        width = float(figure.get_size_inches()[0])
        figure.legend(
            handles=campaign_nights.handles(nights.sorts, style),
            loc="upper left",
            bbox_to_anchor=(LEFT_IN / width, 0.34 / height),
            ncols=max(len(nights.sorts), 1),
            borderaxespad=0.0,
            borderpad=0.0,
            handletextpad=0.5,
            labelcolor=style.ink,
        )
    return figure


def plot_course(
    contents: CampaignContents, ax: Axes, column: str, *, labelled: bool = True, style: Style = LIGHT
) -> Axes:
    """Draw one figure of the planet against evening date, and the planned nights on it.

    Args:
        contents: the campaign.
        ax: the axes.
        column: ``magnitude`` or ``diameter_arcsec``.
        labelled: whether dates are written.
        style: the look.
    """
    table = contents.campaign.nights
    x, y = campaign_nights.day_jd(table["evening_date"]), _values(contents, column)
    campaign_nights.set_date_axis(ax, float(x[0]) - 1.0, float(x[-1]) + 1.0, labelled=labelled)
    known = y[np.isfinite(y)]
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, 1.0)
    room = max(0.22 * (high - low), 0.02)
    ax.set_ylim(*((high + room, low - room) if column == "magnitude" else (low - room, high + room)))
    ax.locator_params(axis="y", nbins=6)
    tidy(ax, style)
    ax.plot(x, y, zorder=3, **style.line(contents.campaign.season.body, dashed=False))
    nights = campaign_nights.nights_of(contents.plan)
    places = np.stack([nights.day_jd, np.interp(nights.day_jd, x, y)], axis=1)
    campaign_nights.draw(ax, nights, places, style)
    dots = np.asarray(ax.transData.transform(places)).reshape(-1, 2)
    wanted = campaign_nights.number_labels(ax, nights, dots, style)
    line = labels.dense(ax.transData.transform(np.stack([x, y], axis=1)), 3.0)
    labels.write_labels(ax, wanted, labels.ground_of(ax, line, campaign_nights.dot_boxes(dots, ax)))
    return ax


def campaign_light_alt_text(contents: CampaignContents) -> str:
    """Return what the chart of magnitude and diameter shows."""
    name = contents.campaign.season.body.label
    low, high = contents.clock.day_jd[[0, -1]].tolist()
    head = f"Magnitude and diameter of {name}, {timeaxis.long_span_text(low, high)}, with the planned nights."
    days, told = contents.clock.day_jd, []
    for column, sign, word, unit in (
        ("magnitude", 1.0, "brightest", "magnitude {:.1f}"),
        ("diameter_arcsec", -1.0, "largest", "{:.1f} arcseconds"),
    ):
        values = _values(contents, column)
        if np.isfinite(values).any():
            best = int(np.nanargmin(sign * values))
            value = unit.format(values[best]).replace("-", "minus ")
            told.append(f"{word} on {timeaxis.long_day_text(days[best])} ({value})")
    return f"{head} It is {' and '.join(told)}." if told else head


def _values(contents: CampaignContents, column: str) -> Floats:
    return np.asarray(contents.campaign.nights[column].fill_null(np.nan).to_numpy(), dtype=np.float64)
