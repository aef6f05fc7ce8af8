"""A month's page: a box a day with what happens and what can be seen, bars of retrograde stretches across."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from wanderers.report.charts.style import LIGHT
from wanderers.report.wall import bars, furniture, names
from wanderers.report.wall.bars import Piece
from wanderers.report.wall.edition import Edition
from wanderers.report.wall.entries import Entry, Phase, State, Wall
from wanderers.report.wall.furniture import Needs
from wanderers.report.wall.layout import DAY_NAMES, DAYS, WEEK_COLUMN, Box, Grid, Sheet, weeks_of
from wanderers.report.wall.moon import NAMES, draw_moon
from wanderers.report.wall.text import ASCENT, Item, Type, fitted, width_pt, wrapped

ENTRY_SIZES: Final = (8.6, 8.2, 7.8, 7.4, 7.0)
"""Sizes of type in the boxes; a page takes the largest that tells as much as the smallest."""
TOLD: Final = 0.97
"""Share of the letters from which that counts as much."""
PHASE: Final = 6.2
NUMBER: Final = 13.0
HEADER: Final = 16.0
"""Height of a box's first line, with the day's number and the Moon."""
DISC: Final = 6.3
SMALL_HOURS_MINUTES: Final = 240
"""Until then a time may be taken for that of the evening before."""
PAD: Final = 3.0
WEEKEND: Final = "#f3f3f3"
OUTSIDE: Final = "#e6e6e6"
FOOT_RANK: Final = 3
"""Lowest rank worth naming where it cannot be seen."""
FOOT_LINES: Final = 3


@dataclass(frozen=True, slots=True)
class Day:
    """What a box holds: entries with the lines that are printed, None for those left out."""

    box: Box
    day: dt.date
    phase: Phase | None
    southern: bool
    kind: Type
    entries: Sequence[Entry]
    lines: Sequence[list[str] | None]

    @property
    def left_out(self) -> int:
        """How many entries found no room."""
        return sum(lines is None for lines in self.lines)

    @property
    def letters(self) -> int:
        """How many letters are printed."""
        return sum(len(line) for lines in self.lines for line in lines or ())


def month_page(month: dt.date, wall: Wall, edition: Edition) -> Sheet:
    """Draw the page of a month.

    Args:
        month: its first day.
        wall: what the days show.
        edition: whose wall it is.
    """
    sheet = Sheet(edition.paper)
    top = furniture.draw_head(sheet, f"{names.MONTHS[month.month - 1]} {month.year}", edition) - DAY_NAMES
    weeks = weeks_of(month)
    shown = [day for week in weeks for day in week if day is not None]
    hidden = _hidden(shown, wall, edition)
    needs = _needs(shown, hidden, wall, edition)
    below = _Below.of(sheet, month, hidden, needs, wall, edition)
    grid = Grid(Box(sheet.body.left + WEEK_COLUMN, below.top, sheet.body.right, top), weeks)
    _draw_frame(sheet, grid, edition)
    for day in _best_set(grid, wall, edition):
        _draw_day(sheet, day)
    for week in range(len(weeks)):
        lanes = _lanes(grid, week, wall, edition)
        bars.draw_lanes(sheet, grid.week_box(week), lanes, _reach(grid, week))
    below.draw(sheet)
    return sheet


def _needs(shown: Sequence[dt.date], hidden: Sequence[Entry], wall: Wall, edition: Edition) -> Needs:
    """Return which signs a month uses."""
    entries = [entry for day in shown for entry in _boxed(day, wall, edition)]
    phases = [wall.phases[day] for day in shown if day in wall.phases]
    start = max(shown[0], edition.first_day).toordinal()
    end = min(shown[-1].toordinal() + 1, edition.end_day.toordinal())
    watched = [entry for entry in entries if entry.state is State.WATCHED]
    timed = [entry for entry in entries if entry.state is State.FACT and entry.clock]
    return Needs(
        near_sun=any(entry.near_sun and not entry.at_the_sun for entry in [*entries, *hidden]),
        at_the_sun=any(entry.at_the_sun for entry in [*entries, *hidden]),
        near_midnight=any(e.near_midnight for e in entries) or any(p.near_midnight for p in phases),
        bars=any(bars.is_drawn(s, start, end) for s in wall.stretches),
        moons=bool(phases),
        watched=bool(watched),
        small_hours=any(entry.minute < SMALL_HOURS_MINUTES for entry in watched),
        moments=bool(timed or phases),
    )


def _boxed(day: dt.date, wall: Wall, edition: Edition) -> list[Entry]:
    """Return what belongs into the box of a day."""
    if not edition.shows(day):
        return []
    return [entry for entry in wall.entries.get(day, ()) if entry.state is not State.HIDDEN]


def _hidden(shown: Sequence[dt.date], wall: Wall, edition: Edition) -> list[Entry]:
    """Return what a month holds that cannot be seen, in order of time."""
    return [
        entry
        for day in shown
        if edition.shows(day)
        for entry in wall.entries.get(day, ())
        if entry.state is State.HIDDEN
    ]


@dataclass(frozen=True, slots=True)
class _Below:
    """What stands below the boxes: lines on what cannot be seen, the legend, the footer."""

    top: float
    foot: list[str]
    legend: list[list[furniture.Sign]]
    cautions: list[str]
    footer: list[str]

    @classmethod
    def of(
        cls, sheet: Sheet, month: dt.date, hidden: Sequence[Entry], needs: Needs, wall: Wall, edition: Edition
    ) -> _Below:
        """Compose it; ``top`` is where the boxes end."""
        width = sheet.body.width
        last = max(day for week in weeks_of(month) for day in week if day is not None)
        foot = foot_lines(hidden, wall.unprinted.get(month, 0), width, edition)
        legend = furniture.legend_rows(furniture.signs(edition, needs), width)
        cautions = furniture.small_lines(furniture.cautions(needs), width)
        footer = furniture.small_lines([" ".join(edition.statements(month, last))], width)
        text = furniture.small_height([*foot, *cautions, *footer])
        height = text + furniture.LEGEND_LINE * len(legend) + 3.0 * furniture.GAP
        return cls(sheet.body.bottom + height, foot, legend, cautions, footer)

    def draw(self, sheet: Sheet) -> None:
        """Write it."""
        y = furniture.draw_small(sheet, self.foot, self.top - furniture.GAP)
        y = furniture.draw_legend(sheet, self.legend, y - furniture.GAP)
        y = sheet.body.bottom + furniture.small_height([*self.cautions, *self.footer])
        y = furniture.draw_small(sheet, self.cautions, y)
        furniture.draw_small(sheet, self.footer, y, LIGHT.quiet_ink)


def foot_lines(hidden: Sequence[Entry], unprinted: int, width: float, edition: Edition) -> list[str]:
    """Return small lines on what cannot be seen and what stands in the table only.

    The most important are named, as many as three lines hold; the others are counted.
    """
    lead = names.FOOT_SITE if edition.sees else names.FOOT_GEOCENTRIC
    worth = sorted((e for e in hidden if e.rank <= FOOT_RANK), key=lambda e: e.rank)
    for count in range(len(worth), -1, -1):
        more = unprinted + len(hidden) - count
        named = sorted(worth[:count], key=lambda e: (e.day, e.minute))
        parts = [f"{entry.day.day}\N{NO-BREAK SPACE}{_short(entry)}" for entry in named]
        told = [f"{lead} {'; '.join(parts)}."] if parts else []
        rest = [names.UNPRINTED_ONE if more == 1 else names.UNPRINTED.format(count=more)] if more else []
        lines = wrapped(" ".join([*told, *rest]), furniture.SMALL, width)
        if len(lines) <= FOOT_LINES:
            return lines
    return []


def _short(entry: Entry) -> str:
    return f"{entry.plain[-1]}{_marks(entry)}"


def _marks(entry: Entry) -> str:
    """Return the signs behind an entry."""
    return f"\N{NO-BREAK SPACE}{names.WARNING_SIGN}" if entry.near_sun else ""


def _clock(entry: Entry | Phase) -> str:
    return f"{entry.clock}{names.MIDNIGHT_MARK if entry.near_midnight else ''}"


def _draw_frame(sheet: Sheet, grid: Grid, edition: Edition) -> None:
    """Draw the names of the days, the numbers of the weeks and the rules between boxes."""
    for weekday, name in enumerate(names.WEEKDAYS):
        middle = grid.area.left + (weekday + 0.5) * grid.day_width
        sheet.text(middle, grid.area.top + 4.0, name, 8.5, bold=True, ink=LIGHT.ink, align="center")
    left = sheet.body.left
    sheet.text(left, grid.area.top + 4.0, names.WEEK, 6.2, ink=LIGHT.quiet_ink)
    for week, days in enumerate(grid.weeks):
        row = grid.week_box(week)
        number = next(day for day in days if day is not None).isocalendar().week
        sheet.text(left + 1.0, row.top - 11.0, str(number), 8.0, ink=LIGHT.quiet_ink)
        for weekday, day in enumerate(days):
            box = grid.day_box(week, weekday)
            if day is None or not edition.shows(day):
                sheet.fill(box, OUTSIDE)
                if day is not None:
                    sheet.text(box.left + PAD, box.top - 12.0, str(day.day), NUMBER, ink=LIGHT.quiet_ink)
            elif weekday >= DAYS - 2:
                sheet.fill(box, WEEKEND)
    for week in range(len(grid.weeks) + 1):
        y = grid.area.top - week * grid.week_height
        sheet.rule((left, grid.area.right), (y, y))
    for weekday in range(DAYS + 1):
        x = grid.area.left + weekday * grid.day_width
        sheet.rule((x, x), (grid.area.bottom, grid.area.top))


def _lanes(grid: Grid, week: int, wall: Wall, edition: Edition) -> list[list[Piece]]:
    """Return the bars of a week."""
    return bars.pieces(wall.stretches, grid, week, edition.first_day, edition.end_day)


def _reach(grid: Grid, week: int) -> tuple[float, float]:
    """Return between which x names may stand beside bars: within the month."""
    inside = [n for n, day in enumerate(grid.weeks[week]) if day is not None]
    return grid.day_box(week, inside[0]).left + 1.0, grid.day_box(week, inside[-1]).right - 1.0


def _best_set(grid: Grid, wall: Wall, edition: Edition) -> list[Day]:
    """Return the boxes of a month in the largest type that tells as much as the smallest."""
    sets = [_set(grid, wall, edition, size) for size in ENTRY_SIZES]
    least = sum(day.left_out for day in sets[-1])
    most = sum(day.letters for day in sets[-1])
    return next(
        days
        for days in sets
        if sum(day.left_out for day in days) <= least and sum(day.letters for day in days) >= TOLD * most
    )


def _set(grid: Grid, wall: Wall, edition: Edition, size: float) -> list[Day]:
    """Return the boxes of a month in type of one size."""
    return [
        _composed(grid.day_box(week, weekday), day, wall, edition, lanes, size)
        for week, days in enumerate(grid.weeks)
        for lanes in [len(_lanes(grid, week, wall, edition))]
        for weekday, day in enumerate(days)
        if day is not None and edition.shows(day)
    ]


def _composed(box: Box, day: dt.date, wall: Wall, edition: Edition, lanes: int, size: float) -> Day:
    """Choose what a box prints, above a number of bars."""
    entries = _boxed(day, wall, edition)
    kind = Type(size, box.width - 2.0 * PAD)
    room = box.height - HEADER - lanes * bars.LANE - 2.0
    items = [
        Item(
            _clock(entry),
            tuple(f"{text}{_marks(entry)}" for text in entry.wordings),
            _give_way(entry),
            bold=entry.state is State.WATCHED,
        )
        for entry in entries
    ]
    lines = fitted(items, kind, max(int(room / kind.leading), 0))
    return Day(box, day, wall.phases.get(day), edition.southern, kind, entries, lines)


def _give_way(entry: Entry) -> int:
    """Return the order in which entries give way: what cannot be watched before what can, of one rank."""
    return 2 * entry.rank + (entry.state is not State.WATCHED)


def _draw_day(sheet: Sheet, day: Day) -> None:
    """Write a box."""
    box = day.box
    wide = sheet.text(box.left + PAD, box.top - 12.0, str(day.day.day), NUMBER, bold=True, ink=LIGHT.ink)
    if day.phase is not None:
        draw_moon(sheet, box.right - PAD - DISC, box.top - 8.2, DISC, day.phase.index, southern=day.southern)
        _write_phase(sheet, day.phase, box, wide)
    size = day.kind.size_pt
    y = box.top - HEADER - ASCENT * size
    for entry, lines in zip(day.entries, day.lines, strict=True):
        if lines is not None:
            y = _write_entry(sheet, entry, lines, day.kind, (box.left + PAD, y))
    if day.left_out:
        more = names.MORE.format(count=day.left_out)
        fits = width_pt(more, size) <= day.kind.width
        text = more if fits else names.FEW_MORE.format(count=day.left_out)
        sheet.text(box.left + PAD, y, text, size, ink=LIGHT.quiet_ink)


def _write_phase(sheet: Sheet, phase: Phase, box: Box, taken: float) -> None:
    """Write a phase's name and time before its disc, the name left out where there is no room."""
    right = box.right - 2.0 * PAD - 2.0 * DISC
    room = right - box.left - PAD - taken - 4.0
    for words in (f"{NAMES[phase.index]} {_clock(phase)}", _clock(phase)):
        if width_pt(words, PHASE) <= room:
            sheet.text(right, box.top - 10.5, words, PHASE, ink=LIGHT.ink, align="right")
            return


def _write_entry(
    sheet: Sheet, entry: Entry, lines: Sequence[str], kind: Type, place: tuple[float, float]
) -> float:
    """Write an entry, its time bold if that is when to look; return where the next line stands."""
    x, y = place
    clock, watched = _clock(entry), entry.state is State.WATCHED
    if clock:
        sheet.text(x, y, clock, kind.size_pt, bold=watched, ink=LIGHT.ink)
    for index, line in enumerate(lines):
        start = x + (kind.hang if index else kind.lead_width(clock, bold=watched))
        if line:
            sheet.text(start, y, line, kind.size_pt, ink=LIGHT.ink)
        y -= kind.leading
    return y
