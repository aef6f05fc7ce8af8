"""Retrograde stretches as bars across the days: the planet's name and its own dash, tips at the stations."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from matplotlib.colors import to_hex, to_rgb

from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, Body
from wanderers.report.charts.style import DASHES, LIGHT
from wanderers.report.wall import names
from wanderers.report.wall.entries import Stretch
from wanderers.report.wall.layout import Box, Grid, Sheet
from wanderers.report.wall.text import width_pt

LANE: Final = 8.8
HEIGHT: Final = 7.8
TYPE: Final = 6.0
PAD: Final = 2.5
TIP: Final = 5.0
"""Length of the triangle that marks a station."""
TINT: Final = 0.16


@dataclass(frozen=True, slots=True)
class Piece:
    """What lies of a stretch in one week: from x to x, and whether it starts and ends there."""

    stretch: Stretch
    left: float
    right: float
    starts: bool
    ends: bool


def pieces(
    stretches: Sequence[Stretch], grid: Grid, week: int, first_day: dt.date, end_day: dt.date
) -> list[list[Piece]]:
    """Return what lies of the planets' stretches in a week, a lane a planet.

    Args:
        stretches: in the order of the planets.
        grid: the month.
        week: which of its weeks.
        first_day: first date that is shown.
        end_day: the date after the last that is shown.
    """
    days = [day for day in grid.weeks[week] if day is not None and first_day <= day < end_day]
    if not days:
        return []
    lanes: dict[Body, list[Piece]] = {}
    start, end = float(days[0].toordinal()), float(days[-1].toordinal() + 1)
    origin = start - grid.weeks[week].index(days[0])
    for stretch in stretches:
        if not is_drawn(stretch, start, end):
            continue
        left, right = (
            grid.area.left + grid.day_width * (day - origin)
            for day in (max(stretch.start, start), min(stretch.end, end))
        )
        piece = Piece(stretch, left, right, stretch.start >= start, stretch.end <= end)
        lanes.setdefault(stretch.body, []).append(piece)
    return list(lanes.values())


def is_drawn(stretch: Stretch, start: float, end: float) -> bool:
    """Return whether the pages of the months show a stretch between two local days."""
    return stretch.body in NAKED_EYE_PLANETS and stretch.end > start and stretch.start < end


def draw_lanes(sheet: Sheet, row: Box, lanes: Sequence[Sequence[Piece]], within: tuple[float, float]) -> None:
    """Draw the bars of a week, the first lane lowest."""
    for index, lane in enumerate(lanes):
        bottom = row.bottom + 1.2 + index * LANE
        for piece in lane:
            draw_bar(sheet, piece, bottom, within)


def draw_bar(sheet: Sheet, piece: Piece, bottom: float, within: tuple[float, float]) -> None:
    """Draw one bar, its name inside or, where there is no room, beside it."""
    colour = LIGHT.colours[piece.stretch.body]
    box = Box(piece.left, bottom, piece.right, bottom + HEIGHT)
    sheet.fill(box, tint(colour), zorder=1.8)
    for y in (box.bottom, box.top):
        sheet.rule((box.left, box.right), (y, y), color=colour, linewidth=0.7, zorder=2.0)
    draw_tips(sheet, box, colour, starts=piece.starts, ends=piece.ends)
    left = box.left + (TIP if piece.starts else 0.0) + PAD
    right = box.right - (TIP if piece.ends else 0.0) - PAD
    baseline = bottom + 0.5 * (HEIGHT - 0.73 * TYPE)
    planet = piece.stretch.body.label
    for words in (names.RETROGRADE.format(planet=planet), planet):
        wide = width_pt(words, TYPE)
        if wide <= right - left:
            sheet.text(left, baseline, words, TYPE, ink=LIGHT.ink)
            _dashes(sheet, piece.stretch.body, left + wide + PAD, right, box)
            return
    _beside(sheet, planet, box, baseline, within)


def draw_tips(sheet: Sheet, box: Box, colour: str, *, starts: bool, ends: bool) -> None:
    """Mark the stations at the ends of a bar: tips show which way the planet goes on, left is backwards."""
    middle, tip = 0.5 * (box.bottom + box.top), min(TIP, box.width)
    look = {"facecolor": colour, "edgecolor": colour}
    if starts:
        corner = box.left + tip
        sheet.shape([(box.left, middle), (corner, box.bottom), (corner, box.top)], **look)
    if ends:
        corner = box.right - tip
        sheet.shape([(box.right, middle), (corner, box.bottom), (corner, box.top)], **look)


def tint(colour: str) -> str:
    """Return a colour mixed with much white."""
    red, green, blue = (1.0 - TINT * (1.0 - part) for part in to_rgb(colour))
    return str(to_hex((red, green, blue)))


def _dashes(sheet: Sheet, body: Body, left: float, right: float, box: Box) -> None:
    """Draw the planet's dash through the rest of its bar."""
    if right - left < 6.0:
        return
    middle = 0.5 * (box.bottom + box.top)
    dash = DASHES[body]
    style = (0, dash) if dash else "-"
    colour = LIGHT.colours[body]
    sheet.rule((left, right), (middle, middle), color=colour, linewidth=1.1, linestyle=style, zorder=2.2)


def _beside(sheet: Sheet, words: str, box: Box, baseline: float, within: tuple[float, float]) -> None:
    """Write the name beside a bar too short for it, on the side where there is room; the lane is its own."""
    wide = width_pt(words, TYPE)
    if box.right + PAD + wide <= within[1]:
        sheet.text(box.right + PAD, baseline, words, TYPE, ink=LIGHT.ink)
    elif box.left - PAD - wide >= within[0]:
        sheet.text(box.left - PAD, baseline, words, TYPE, ink=LIGHT.ink, align="right")
