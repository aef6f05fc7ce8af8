"""An upright page to print: text, rules and boxes in points, y growing upward from the lower edge.

Widths come from the outlines of the font that is embedded, so that what was measured is what is printed.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle

from wanderers.report.wall import text as type_setting
from wanderers.report.wall.layout import MM, Page, Paper

MARGIN: Final = 10.0 * MM
INK: Final = "#000000"
RULE: Final = "#555555"


class Leaf(Page):
    """One page, long side upright, written from the top down."""

    def __init__(self, paper: Paper) -> None:
        """Take a fresh page."""
        super().__init__(*reversed(paper.size_pt))
        self.y = self.height - MARGIN

    @property
    def left(self) -> float:
        """Left end of the lines."""
        return MARGIN

    @property
    def right(self) -> float:
        """Right end of the lines."""
        return self.width - MARGIN

    @property
    def room(self) -> float:
        """Height that is still free."""
        return self.y - MARGIN

    def text(
        self, x: float, y: float, words: str, size: float, *, bold: bool = False, ink: str = INK,
        align: str = "left",
    ) -> float:  # fmt: skip
        """Write one line that stands on y, letters that the font lacks as squares; return its width."""
        return super().text(x, y, type_setting.printable(words), size, bold=bold, ink=ink, align=align)

    def line(self, words: str, size: float, *, bold: bool = False, gap: float = 0.0) -> None:
        """Write one line below the last."""
        self.y -= gap + type_setting.LEADING * size
        self.text(self.left, self.y, words, size, bold=bold)

    def paragraph(self, words: str, size: float, *, gap: float = 0.0, hang: float = 0.0) -> None:
        """Write a text below the last line, broken to the width of the page."""
        self.y -= gap
        for number, line in enumerate(wrapped(words, size, self.right - self.left, hang)):
            self.y -= type_setting.LEADING * size
            self.text(self.left + (hang if number else 0.0), self.y, line, size)

    def rule(self, y: float, *, ends: tuple[float, float] | None = None, width: float = 0.6) -> None:
        """Draw a level line."""
        self.ax.add_line(Line2D(ends or (self.left, self.right), (y, y), color=RULE, linewidth=width))

    def upright(self, x: float, ends: tuple[float, float], width: float = 0.6) -> None:
        """Draw an upright line."""
        self.ax.add_line(Line2D((x, x), ends, color=RULE, linewidth=width))

    def box(self, x: float, y: float, side: float, *, filled: bool = False) -> None:
        """Draw a square whose lower left corner is given: empty, to tick, or filled."""
        face = INK if filled else "none"
        self.ax.add_patch(Rectangle((x, y), side, side, facecolor=face, edgecolor=INK, linewidth=0.9))


def wrapped(words: str, size: float, width: float, hang: float = 0.0) -> list[str]:
    """Break a text into lines no wider than a width; those after the first leave ``hang`` free."""
    return type_setting.wrapped(type_setting.printable(words), size, width, hang=hang)


def paragraph_height(texts: Sequence[str], size: float, width: float, gap: float, hang: float = 0.0) -> float:
    """Return how high texts stand when printed one below the other, each after a gap."""
    lines = sum(len(wrapped(words, size, width, hang)) for words in texts)
    return lines * type_setting.LEADING * size + gap * len(texts)
