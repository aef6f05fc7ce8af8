"""What frames a page: its heading above; what cannot be seen, the legend and the footer below."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Final

from wanderers.ephemeris.bodies import Body
from wanderers.report import words
from wanderers.report.charts.style import LIGHT
from wanderers.report.wall import bars, moon, names
from wanderers.report.wall.edition import Edition
from wanderers.report.wall.layout import HEAD, Box, Sheet
from wanderers.report.wall.text import LEADING, width_pt, wrapped

SMALL: Final = 6.2
TITLE: Final = 24.0
EDITION: Final = 9.0
GAP: Final = 3.0
ITEM_GAP: Final = 11.0
MOON_RADIUS: Final = 3.2
BAR_WIDTH: Final = 30.0
LEGEND_LINE: Final = 10.0
Draw = Callable[[Sheet, float, float], None]


@dataclass(frozen=True, slots=True)
class Sign:
    """One sign of the legend: what is drawn (x, and the line its text stands on), how wide, what it means."""

    draw: Draw | None
    wide: float
    means: str
    bold: str = ""

    @property
    def width(self) -> float:
        """Drawing and text together."""
        bold = width_pt(f"{self.bold} ", SMALL, bold=True) if self.bold else 0.0
        return self.wide + bold + width_pt(self.means, SMALL)


@dataclass(frozen=True, slots=True)
class Needs:
    """Which signs a page uses."""

    near_sun: bool = False
    at_the_sun: bool = False
    near_midnight: bool = False
    bars: bool = False
    moons: bool = False
    watched: bool = False
    small_hours: bool = False
    moments: bool = False


def draw_head(sheet: Sheet, title: str, edition: Edition) -> float:
    """Write the title to the left and the edition to the right; return where the page goes on below."""
    body = sheet.body
    taken = sheet.text(body.left, body.top - 0.76 * TITLE, title, TITLE, bold=True, ink=LIGHT.ink)
    room = body.width - taken - 24.0
    whose, where = edition.titles()
    y = body.top - EDITION
    for text, size, ink in ((whose, EDITION, LIGHT.ink), (where, 7.5, LIGHT.quiet_ink)):
        for line in wrapped(text, size, room):
            sheet.text(body.right, y, line, size, ink=ink, align="right")
            y -= 1.25 * size
    return min(body.top - HEAD + 10.0, y)


def signs(edition: Edition, needs: Needs) -> list[Sign]:
    """Return the legend of a page: only what is on it."""
    found: list[Sign] = []
    if needs.watched:
        look = names.LEGEND_SMALL_HOURS if needs.small_hours else names.LEGEND_LOOK
        found.append(Sign(None, 0.0, look, "18:45"))
    if needs.moments:
        found.append(Sign(None, 0.0, f"13:42 or 13 h: {names.LEGEND_MOMENT}"))
    if needs.moons:
        phases = [Sign(_moon(n, edition), 9.0, name) for n, name in enumerate(moon.NAMES)]
        whose = names.SOUTHERN_MOON if edition.southern else names.NORTHERN_MOON
        found += [*phases[:3], Sign(phases[3].draw, 9.0, f"{phases[3].means}: {whose}")]
    if needs.bars:
        found.append(Sign(_bar, BAR_WIDTH + 4.0, names.LEGEND_STATIONS))
    marks = (
        (needs.near_sun or needs.at_the_sun, names.LEGEND_NEAR_SUN),
        (needs.near_midnight, names.LEGEND_MIDNIGHT),
        (True, names.LEGEND_TABLE),
        (True, names.LEGEND_WEEKS),
    )
    return [*found, *(Sign(None, 0.0, text) for needed, text in marks if needed)]


def legend_rows(found: Sequence[Sign], width: float) -> list[list[Sign]]:
    """Arrange signs in rows."""
    rows: list[list[Sign]] = [[]]
    for sign in found:
        taken = sum(other.width + ITEM_GAP for other in rows[-1])
        if rows[-1] and taken + sign.width > width:
            rows.append([])
        rows[-1].append(sign)
    return rows


def draw_legend(sheet: Sheet, rows: Sequence[Sequence[Sign]], top: float) -> float:
    """Draw the legend below a height; return where it ends."""
    y = top - LEGEND_LINE + 2.5
    for row in rows:
        x = sheet.body.left
        for sign in row:
            if sign.draw:
                sign.draw(sheet, x, y)
            start = x + sign.wide
            if sign.bold:
                start += sheet.text(start, y, sign.bold, SMALL, bold=True, ink=LIGHT.ink)
                start += width_pt(" ", SMALL)
            sheet.text(start, y, sign.means, SMALL, ink=LIGHT.ink)
            x += sign.width + ITEM_GAP
        y -= LEGEND_LINE
    return y


def cautions(needs: Needs) -> list[str]:
    """Return what has to be said about optics on a page."""
    lines = [f"{names.WARNING_SIGN} {words.NEAR_SUN_CAUTION}"] if needs.near_sun else []
    return [*lines, *([f"{names.WARNING_SIGN} {words.SUN_CAUTION}"] if needs.at_the_sun else [])]


def small_lines(paragraphs: Sequence[str], width: float) -> list[str]:
    """Break paragraphs of small type into lines."""
    return [line for text in paragraphs for line in wrapped(text, SMALL, width, hang=0.0)]


def small_height(lines: Sequence[str]) -> float:
    """Return how high lines of small type are."""
    return LEADING * SMALL * len(lines)


def draw_small(sheet: Sheet, lines: Sequence[str], top: float, ink: str = LIGHT.ink) -> float:
    """Write small lines below a height; return where they end."""
    sheet.lines(sheet.body.left, top - SMALL, lines, SMALL, ink)
    return top - small_height(lines)


def _moon(phase: int, edition: Edition) -> Draw:
    def draw(sheet: Sheet, x: float, y: float) -> None:
        height = y + 0.36 * SMALL
        moon.draw_moon(sheet, x + MOON_RADIUS, height, MOON_RADIUS, phase, southern=edition.southern)

    return draw


def _bar(sheet: Sheet, x: float, y: float) -> None:
    colour = LIGHT.colours[Body.JUPITER]
    box = Box(x, y - 1.2, x + BAR_WIDTH, y - 1.2 + bars.HEIGHT)
    sheet.fill(box, bars.tint(colour), zorder=1.8)
    for edge in (box.bottom, box.top):
        sheet.rule((box.left, box.right), (edge, edge), color=colour, linewidth=0.7, zorder=2.0)
    bars.draw_tips(sheet, box, colour, starts=True, ends=True)
