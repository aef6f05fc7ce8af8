"""The sheet of paper and where things stand on it. Lengths are points; y grows upward from the lower edge."""

from __future__ import annotations

import calendar
import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from typing import Any, Final

from matplotlib.axes import Axes
from matplotlib.backends.backend_pdf import FigureCanvasPdf
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Polygon, Rectangle

from wanderers.report.wall import text as type_setting

PT_PER_IN: Final = 72.0
MM: Final = 72.0 / 25.4
MARGIN: Final = 9.0 * MM
"""Free all round: home printers reach to 5 or 6 mm of the edge. Common practice, no source."""
HEAD: Final = 40.0
DAY_NAMES: Final = 13.0
WEEK_COLUMN: Final = 17.0
DAYS: Final = 7


class Paper(StrEnum):
    """Sizes of paper, printed with the long side level."""

    A4 = "a4"
    LETTER = "letter"

    @property
    def size_pt(self) -> tuple[float, float]:
        """Width and height. ISO 216 (210 x 297 mm); ANSI Y14.1 size A (8.5 x 11 in); both from memory."""
        return (297.0 * MM, 210.0 * MM) if self is Paper.A4 else (11.0 * PT_PER_IN, 8.5 * PT_PER_IN)


@dataclass(frozen=True, slots=True)
class Box:
    """A rectangle on the paper."""

    left: float
    bottom: float
    right: float
    top: float

    @property
    def width(self) -> float:
        """From left to right."""
        return self.right - self.left

    @property
    def height(self) -> float:
        """From bottom to top."""
        return self.top - self.bottom

    def inset(self, gap: float) -> Box:
        """Return the rectangle within, a gap from every edge."""
        return Box(self.left + gap, self.bottom + gap, self.right - gap, self.top - gap)


class Page:
    """One page to draw on."""

    def __init__(self, width: float, height: float) -> None:
        """Take a fresh page of a size."""
        self.width, self.height = width, height
        self.figure = Figure(figsize=(self.width / PT_PER_IN, self.height / PT_PER_IN), dpi=PT_PER_IN)
        FigureCanvasPdf(self.figure)
        self.ax: Axes = self.figure.add_axes((0.0, 0.0, 1.0, 1.0))
        self.ax.set(xlim=(0.0, self.width), ylim=(0.0, self.height))
        self.ax.set_axis_off()
        self.printed: list[tuple[str, Box]] = []

    def text(
        self, x: float, y: float, words: str, size: float, *, bold: bool = False, ink: str = "#000000",
        align: str = "left",
    ) -> float:  # fmt: skip
        """Write one line that stands on y; return its width."""
        wide = type_setting.width_pt(words, size, bold=bold)
        left = {"left": x, "right": x - wide, "center": x - wide / 2.0}[align]
        self.ax.text(
            left,
            y,
            words,
            fontsize=size,
            weight="bold" if bold else "normal",
            color=ink,
            ha="left",
            va="baseline",
            parse_math=False,
        )
        reach = Box(left, y - type_setting.DESCENT * size, left + wide, y + type_setting.ASCENT * size)
        self.printed.append((words, reach))
        return wide


class Sheet(Page):
    """A page of the wall calendar, long side level."""

    def __init__(self, paper: Paper) -> None:
        """Take a fresh page."""
        super().__init__(*paper.size_pt)

    @property
    def body(self) -> Box:
        """What lies within the margins."""
        return Box(MARGIN, MARGIN, self.width - MARGIN, self.height - MARGIN)

    def lines(self, x: float, y: float, lines: Sequence[str], size: float, ink: str = "#000000") -> float:
        """Write lines below each other, the first on y; return where the next would stand."""
        for line in lines:
            self.text(x, y, line, size, ink=ink)
            y -= type_setting.LEADING * size
        return y

    def fill(self, box: Box, colour: str, **look: Any) -> None:
        """Fill a rectangle."""
        settings: dict[str, Any] = {
            "facecolor": colour,
            "edgecolor": "none",
            "linewidth": 0.0,
            "zorder": 0.5,
        } | look
        self.ax.add_patch(Rectangle((box.left, box.bottom), box.width, box.height, **settings))

    def rule(self, x: tuple[float, float], y: tuple[float, float], **look: Any) -> None:
        """Draw a straight line."""
        settings: dict[str, Any] = {
            "color": "#6b6b6b",
            "linewidth": 0.6,
            "solid_capstyle": "butt",
            "zorder": 1.5,
        } | look
        self.ax.add_line(Line2D(x, y, **settings))

    def shape(self, corners: Sequence[tuple[float, float]], **look: Any) -> None:
        """Draw a closed shape."""
        self.ax.add_patch(Polygon(corners, closed=True, **({"linewidth": 0.5, "zorder": 2.5} | look)))


@dataclass(frozen=True, slots=True)
class Grid:
    """The boxes of a month.

    Attributes:
        area: the boxes of all days, the column of week numbers not among them.
        weeks: the days of each week, Monday first, those of other months included.
    """

    area: Box
    weeks: tuple[tuple[dt.date | None, ...], ...]

    @property
    def day_width(self) -> float:
        """Width of a box."""
        return self.area.width / DAYS

    @property
    def week_height(self) -> float:
        """Height of a box."""
        return self.area.height / len(self.weeks)

    def week_box(self, week: int) -> Box:
        """Return the row of a week."""
        top = self.area.top - week * self.week_height
        return Box(self.area.left, top - self.week_height, self.area.right, top)

    def day_box(self, week: int, weekday: int) -> Box:
        """Return the box of a day."""
        row = self.week_box(week)
        left = row.left + weekday * self.day_width
        return Box(left, row.bottom, left + self.day_width, row.top)


def weeks_of(month: dt.date) -> tuple[tuple[dt.date | None, ...], ...]:
    """Return the weeks that a month touches, Monday first, None for days of other months."""
    numbers = calendar.Calendar().monthdayscalendar(month.year, month.month)
    return tuple(tuple(month.replace(day=day) if day else None for day in week) for week in numbers)


def months_between(first_day: dt.date, end_day: dt.date) -> list[dt.date]:
    """Return the first days of the months that a half-open range of dates touches."""
    first = first_day.year * 12 + first_day.month - 1
    last_day = end_day - dt.timedelta(days=1)
    last = last_day.year * 12 + last_day.month - 1
    return [dt.date(number // 12, number % 12 + 1, 1) for number in range(first, last + 1)]
