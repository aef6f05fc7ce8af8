"""The retrograde stretches of a year on one axis of time, a row a planet, stations dated."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.report.charts.style import LIGHT
from wanderers.report.wall import names
from wanderers.report.wall.bars import PAD, TIP, draw_tips, tint
from wanderers.report.wall.edition import Edition
from wanderers.report.wall.entries import Stretch
from wanderers.report.wall.layout import Box, Sheet
from wanderers.report.wall.text import width_pt

HEAD: Final = 13.0
AXIS: Final = 10.0
ROW: Final = 12.0
BAR: Final = 8.4
NAME_COLUMN: Final = 48.0
TYPE: Final = 6.2
LOZENGE: Final = 2.6
TITLE: Final = (
    "Retrograde: the planet moves westward among the stars between the dates of its stations in longitude; "
    "lozenge: opposition or inferior conjunction"
)


def timeline_height(stretches: Sequence[Stretch]) -> float:
    """Return how high the timeline is; nothing without stretches."""
    rows = len({stretch.body for stretch in stretches})
    return HEAD + AXIS + ROW * rows if rows else 0.0


@dataclass(frozen=True, slots=True)
class Axis:
    """Where days of a year stand: x of its first instant, points a day; x of the span's two ends."""

    left: float
    right: float
    first: float
    days: float
    span: tuple[float, float]

    def x(self, day: float) -> float:
        """Return where a local day, counted as ``date.toordinal`` does, stands."""
        return self.left + (self.right - self.left) * (day - self.first) / self.days


def draw_timeline(sheet: Sheet, stretches: Sequence[Stretch], year: int, edition: Edition, box: Box) -> None:
    """Draw the timeline of a year into a box."""
    first = dt.date(year, 1, 1).toordinal()
    last = dt.date(year, 12, 31).toordinal() + 1
    span = max(first, edition.first_day.toordinal()), min(last, edition.end_day.toordinal())
    axis = Axis(box.left + NAME_COLUMN, box.right, float(first), float(last - first), (span[0], span[1]))
    sheet.text(box.left, box.top - 8.0, TITLE, 7.0, ink=LIGHT.ink)
    rows = Box(box.left, box.bottom, box.right, box.top - HEAD - AXIS)
    _draw_months(sheet, axis, rows, year)
    bodies = sorted({stretch.body for stretch in stretches}, key=lambda body: body.order)
    for index, body in enumerate(bodies):
        top = rows.top - ROW * index
        row = Box(rows.left, top - ROW, rows.right, top)
        sheet.text(row.left, row.bottom + 3.4, body.label, 7.0, bold=True, ink=LIGHT.ink)
        for stretch in (s for s in stretches if s.body is body):
            _draw_stretch(sheet, axis, row, stretch)


def _draw_months(sheet: Sheet, axis: Axis, rows: Box, year: int) -> None:
    """Draw the axis: the months, and a grey ground where the edition has no pages."""
    for left, right in ((axis.first, axis.span[0]), (axis.span[1], axis.first + axis.days)):
        if right > left:
            sheet.fill(Box(axis.x(left), rows.bottom, axis.x(right), rows.top), "#e6e6e6")
    starts = [float(dt.date(year, month, 1).toordinal()) for month in range(1, 13)]
    for month, start in enumerate(starts):
        end = starts[month + 1] if month < 11 else axis.first + axis.days
        middle = 0.5 * (axis.x(start) + axis.x(end))
        sheet.text(middle, rows.top + 3.0, names.MONTHS[month][:3], TYPE, ink=LIGHT.quiet_ink, align="center")
        _upright(sheet, axis.x(start), rows)
    _upright(sheet, axis.right, rows)
    for y in np.arange(rows.top, rows.bottom - 0.5 * ROW, -ROW):
        sheet.rule((rows.left, rows.right), (float(y), float(y)), color=LIGHT.rule, linewidth=0.5)


def _upright(sheet: Sheet, x: float, rows: Box) -> None:
    sheet.rule((x, x), (rows.bottom, rows.top), color=LIGHT.rule, linewidth=0.5, zorder=0.8)


def _draw_stretch(sheet: Sheet, axis: Axis, row: Box, stretch: Stretch) -> None:
    """Draw one bar with its dates."""
    start, end = max(stretch.start, axis.span[0]), min(stretch.end, axis.span[1])
    if end <= start:
        return
    bottom = row.bottom + 0.5 * (ROW - BAR)
    box = Box(axis.x(start), bottom, axis.x(end), bottom + BAR)
    colour = LIGHT.colours[stretch.body]
    sheet.fill(box, tint(colour), zorder=1.8)
    for y in (box.bottom, box.top):
        sheet.rule((box.left, box.right), (y, y), color=colour, linewidth=0.8, zorder=2.0)
    starts, ends = stretch.start >= axis.span[0], stretch.end <= axis.span[1]
    draw_tips(sheet, box, colour, starts=starts, ends=ends)
    first = day_text(stretch.start) if starts else ""
    last = day_text(stretch.end) if ends else ""
    free = _write_dates(sheet, axis, box, first, last)
    middle = axis.x(stretch.middle) if axis.span[0] <= stretch.middle < axis.span[1] else np.nan
    if free[0] + LOZENGE <= middle <= free[1] - LOZENGE:
        _lozenge(sheet, middle, 0.5 * (box.bottom + box.top))


def _write_dates(sheet: Sheet, axis: Axis, box: Box, first: str, last: str) -> tuple[float, float]:
    """Write the dates of the stations in a bar, or beside it; return what of the bar stays free."""
    wide = [width_pt(text, TYPE) if text else 0.0 for text in (first, last)]
    left = box.left + (TIP + PAD if first else 0.0)
    right = box.right - (TIP + PAD if last else 0.0)
    y = box.bottom + 0.5 * (BAR - 0.73 * TYPE)
    if sum(wide) + 4.0 * PAD + 2.0 * LOZENGE <= right - left:
        _write(sheet, left, y, first, "left")
        _write(sheet, right, y, last, "right")
        return left + wide[0] + PAD * bool(first), right - wide[1] - PAD * bool(last)
    outside = box.left - PAD, box.right + PAD
    if outside[0] - wide[0] >= axis.left and outside[1] + wide[1] <= axis.right:
        _write(sheet, outside[0], y, first, "right")
        _write(sheet, outside[1], y, last, "left")
        return left, right
    both = " – ".join(filter(None, (first, last)))
    if outside[1] + width_pt(both, TYPE) <= axis.right:
        _write(sheet, outside[1], y, both, "left")
    else:
        _write(sheet, outside[0], y, both, "right")
    return left, right


def _write(sheet: Sheet, x: float, y: float, words: str, align: str) -> None:
    if words:
        sheet.text(x, y, words, TYPE, ink=LIGHT.ink, align=align)


def _lozenge(sheet: Sheet, x: float, y: float) -> None:
    corners = [(x - LOZENGE, y), (x, y + LOZENGE), (x + LOZENGE, y), (x, y - LOZENGE)]
    sheet.shape(corners, facecolor=LIGHT.ink, edgecolor=LIGHT.ink)


def day_text(day: float) -> str:
    """Return a local day as ``10 Jan``."""
    date = dt.date.fromordinal(int(np.floor(day)))
    return f"{date.day} {names.MONTHS[date.month - 1][:3]}"
