"""A year on one page: twelve small months with what not to miss, and every planet's retrograde stretches."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from typing import Final

from matplotlib.patches import Circle

from wanderers.report.charts.style import LIGHT
from wanderers.report.wall import furniture, names
from wanderers.report.wall.edition import Edition
from wanderers.report.wall.entries import Entry, State, Wall
from wanderers.report.wall.importance import HEADLINE
from wanderers.report.wall.layout import DAYS, Box, Sheet, weeks_of
from wanderers.report.wall.moon import DARK, LIT
from wanderers.report.wall.text import Item, Type, fitted
from wanderers.report.wall.timeline import draw_timeline, timeline_height

COLUMNS: Final = 6
ROWS: Final = 2
GAP: Final = 9.0
DAY_TYPE: Final = 7.4
DAY_LINE: Final = 11.2
DISC: Final = 5.2
CALENDAR: Final = 26.0 + 6 * DAY_LINE
"""Height of a small month of six weeks, its name included."""
LIST_SIZES: Final = (8.2, 7.8, 7.4, 7.0, 6.6, 6.2)
NEW, FULL = 0, 2
"""The phases that are marked."""


def year_page(year: int, wall: Wall, edition: Edition) -> Sheet:
    """Draw the page of a year.

    Args:
        year: which.
        wall: what the days show.
        edition: whose wall it is.
    """
    sheet = Sheet(edition.paper)
    top = furniture.draw_head(sheet, f"{year} at a glance", edition)
    chosen = [_headlines(month, wall, edition) for month in _months(year)]
    notes = _notes(year, [entry for month in chosen for entry in month], edition, sheet.body.width)
    base = sheet.body.bottom + furniture.small_height(notes)
    furniture.draw_small(sheet, notes, base, LIGHT.quiet_ink)
    stretches = [s for s in wall.stretches if s.end > _start(year) and s.start < _start(year + 1)]
    floor = base + GAP + timeline_height(stretches)
    if stretches:
        draw_timeline(
            sheet, stretches, year, edition, Box(sheet.body.left, base + GAP, sheet.body.right, floor)
        )
    area = Box(sheet.body.left, floor + GAP, sheet.body.right, top)
    place = _place(area, 0)
    kind = _list_size(chosen, place.width, place.height - CALENDAR)
    for index, (month, entries) in enumerate(zip(_months(year), chosen, strict=True)):
        place = _place(area, index)
        _draw_month(sheet, place, month, entries, wall, edition)
        below = Box(place.left, place.bottom, place.right, place.top - CALENDAR)
        _list_entries(sheet, entries, below, kind)
    return sheet


def _months(year: int) -> list[dt.date]:
    return [dt.date(year, month, 1) for month in range(1, 13)]


def _start(year: int) -> float:
    """Return the first day of a year as a number, of the year 10000 too."""
    return float(dt.date(year, 1, 1).toordinal() if year <= dt.MAXYEAR else dt.date.max.toordinal() + 1)


def _headlines(month: dt.date, wall: Wall, edition: Edition) -> list[Entry]:
    """Return what not to miss in a month."""
    days = [day for week in weeks_of(month) for day in week if day is not None and edition.shows(day)]
    return [
        entry
        for day in days
        for entry in wall.entries.get(day, ())
        if entry.rank <= HEADLINE and entry.state is not State.HIDDEN
    ]


def _notes(year: int, entries: Sequence[Entry], edition: Edition, width: float) -> list[str]:
    """Return the small lines below: what the signs mean, cautions, clock and source."""
    needs = furniture.Needs(
        near_sun=any(entry.near_sun and not entry.at_the_sun for entry in entries),
        at_the_sun=any(entry.at_the_sun for entry in entries),
    )
    signs = "Bold number: something listed below the month. Open circle: full Moon. Dark disc: new Moon."
    if entries:
        signs += " Times to look and all that is less important stand on the pages of the months."
    last = min(dt.date(year, 12, 31), edition.end_day - dt.timedelta(days=1))
    first = max(dt.date(year, 1, 1), edition.first_day)
    paragraphs = [signs, *furniture.cautions(needs), " ".join(edition.statements(first, last))]
    return furniture.small_lines(paragraphs, width)


def _place(area: Box, index: int) -> Box:
    """Return the room of a month, January first, six side by side."""
    row, column = divmod(index, COLUMNS)
    width = (area.width - (COLUMNS - 1) * GAP) / COLUMNS
    height = (area.height - (ROWS - 1) * GAP) / ROWS
    left, top = area.left + column * (width + GAP), area.top - row * (height + GAP)
    return Box(left, top - height, left + width, top)


def _draw_month(
    sheet: Sheet, box: Box, month: dt.date, entries: Sequence[Entry], wall: Wall, edition: Edition
) -> None:
    """Draw a small month."""
    sheet.rule((box.left, box.right), (box.top, box.top), linewidth=0.8)
    sheet.text(box.left, box.top - 10.0, names.MONTHS[month.month - 1], 9.0, bold=True, ink=LIGHT.ink)
    step = box.width / DAYS
    y = box.top - 20.0
    for weekday, name in enumerate(names.WEEKDAYS_SHORT):
        x = box.left + (weekday + 0.5) * step
        sheet.text(x, y, name, 5.8, ink=LIGHT.quiet_ink, align="center")
    marked = {entry.day for entry in entries}
    for week in weeks_of(month):
        y -= DAY_LINE
        for weekday, day in enumerate(week):
            if day is not None:
                x = box.left + (weekday + 0.5) * step
                _draw_number(sheet, x, y, day, bold=day in marked, wall=wall, edition=edition)


def _draw_number(
    sheet: Sheet, x: float, y: float, day: dt.date, *, bold: bool, wall: Wall, edition: Edition
) -> None:
    """Write the number of a day, in a disc where the Moon is new or full."""
    if not edition.shows(day):
        sheet.text(x, y, str(day.day), DAY_TYPE, ink="#9a9a9a", align="center")
        return
    phase = wall.phases.get(day)
    ink = LIGHT.ink
    if phase is not None and phase.index in (NEW, FULL):
        ground = LIT if phase.index == FULL else DARK
        ink = LIGHT.ink if phase.index == FULL else LIT
        middle = (x, y + 0.37 * DAY_TYPE)
        sheet.ax.add_patch(Circle(middle, DISC, facecolor=ground, edgecolor=DARK, linewidth=0.7, zorder=2.0))
    sheet.text(x, y, str(day.day), DAY_TYPE, bold=bold, ink=ink, align="center")


def _list_size(chosen: Sequence[Sequence[Entry]], width: float, room: float) -> Type:
    """Return the largest type in which every month's list fits as well as in the smallest."""
    kinds = [Type(size, width, hang=1.8 * size) for size in LIST_SIZES]
    left_out = [
        sum(lines is None for entries in chosen for lines in fitted(_items(entries), kind, _rows(room, kind)))
        for kind in kinds
    ]
    return kinds[left_out.index(left_out[-1])]


def _rows(room: float, kind: Type) -> int:
    return max(int(room / kind.leading), 0)


def _items(entries: Sequence[Entry]) -> list[Item]:
    return [Item(f"{entry.day.day}", _wordings(entry), _give_way(entry)) for entry in entries]


def _list_entries(sheet: Sheet, entries: Sequence[Entry], box: Box, kind: Type) -> None:
    """Write what not to miss in a month, as much as there is room for."""
    items = _items(entries)
    lines = fitted(items, kind, _rows(box.height, kind))
    y, size = box.top - kind.size_pt, kind.size_pt
    for item, printed in zip(items, lines, strict=True):
        for index, line in enumerate(printed or ()):
            if index == 0:
                sheet.text(box.left, y, item.lead, size, bold=True, ink=LIGHT.ink)
            start = kind.hang if index else kind.lead_width(item.lead)
            sheet.text(box.left + start, y, line, size, ink=LIGHT.ink)
            y -= kind.leading
    left_out = sum(printed is None for printed in lines)
    if left_out:
        sheet.text(box.left, y, names.FEW_MORE.format(count=left_out), size, ink=LIGHT.quiet_ink)


def _wordings(entry: Entry) -> tuple[str, ...]:
    """Return the shorter wordings of an entry, with its sign."""
    sign = f"\N{NO-BREAK SPACE}{names.WARNING_SIGN}" if entry.near_sun else ""
    return tuple(f"{text}{sign}" for text in entry.plain[-2:])


def _give_way(entry: Entry) -> int:
    return 2 * entry.rank + (entry.state is not State.WATCHED)
