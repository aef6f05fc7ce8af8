"""Text on paper: how wide it is, where it breaks, how much of it fits. Lengths are points.

Widths come from the outlines of the font that is embedded, so that what was measured is what is printed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache, lru_cache
from itertools import chain
from typing import Any, Final

from matplotlib.font_manager import FontProperties, findfont
from matplotlib.ft2font import FT2Font, LoadFlags

FAMILY: Final = "DejaVu Sans"
UNITS_PER_PT: Final = 100.0
"""Type is measured at a hundred times its size: widths are then exact to a hundredth of a point."""
LEADING: Final = 1.17
"""Distance of two lines, in sizes of the type."""
ASCENT: Final = 0.76
DESCENT: Final = 0.24
"""How far letters reach above and below the line they stand on, in sizes of the type."""
NO_GLYPH: Final = "\N{WHITE SQUARE}"


@cache
def _font(bold: bool) -> Any:
    return FT2Font(findfont(FontProperties(family=FAMILY, weight="bold" if bold else "normal")))


@cache
def _glyphs() -> frozenset[int]:
    """Return the characters that both weights of the font have."""
    return frozenset(_font(False).get_charmap()) & frozenset(_font(True).get_charmap())


def printable(text: str) -> str:
    """Return a text on one line, with a square for every letter that the font lacks."""
    line = " ".join(text.split())
    return "".join(letter if ord(letter) in _glyphs() else NO_GLYPH for letter in line)


@lru_cache(maxsize=20_000)
def width_pt(text: str, size_pt: float, *, bold: bool = False) -> float:
    """Return how wide a text is when printed."""
    font = _font(bold)
    font.set_size(size_pt * UNITS_PER_PT, 72)
    font.set_text(text, 0.0, flags=LoadFlags.NO_HINTING)
    return float(font.get_width_height()[0]) / 64.0 / UNITS_PER_PT


def wrapped(text: str, size_pt: float, width: float, *, first: float = 0.0, hang: float = 0.0) -> list[str]:
    """Break a text into lines that are no wider than a width; a word too long for a line is cut in two.

    Args:
        text: words with single spaces between them; a no-break space does not break.
        size_pt: size of the type.
        width: of the column.
        first: what the first line leaves free on its left.
        hang: what the others leave free.

    Returns:
        the lines, none for an empty text.
    """
    lines: list[str] = []
    line = ""
    words = (_pieces(word, size_pt, width - hang) for word in text.split(" ") if word)
    for word in chain.from_iterable(words):
        longer = f"{line} {word}" if line else word
        room = width - (hang if lines else first)
        if width_pt(longer, size_pt) <= room:
            line = longer
            continue
        if line or not lines:
            lines.append(line)
        line = word
    return [*lines, line] if line else lines


def _pieces(word: str, size_pt: float, width: float) -> list[str]:
    """Cut a word so that each piece fits a line of its own; a hyphen shows where."""
    if width_pt(word, size_pt) <= width or len(word) < 2:
        return [word]
    cut = next(
        (n for n in range(len(word) - 1, 1, -1) if width_pt(f"{word[:n]}-", size_pt) <= width),
        1,
    )
    return [f"{word[:cut]}-", *_pieces(word[cut:], size_pt, width)]


@dataclass(frozen=True, slots=True)
class Item:
    """Something that wants room in a box.

    Attributes:
        lead: what stands before it in its first line, as a time.
        wordings: what it says, the longest wording first.
        rank: what must give way, from 0; the smallest stays longest.
        bold: whether the lead is set bold.
    """

    lead: str
    wordings: tuple[str, ...]
    rank: int
    bold: bool = True


@dataclass(frozen=True, slots=True)
class Type:
    """How the text of a box is set: size, width of the column, left edge of lines after the first."""

    size_pt: float
    width: float
    hang: float = 5.0
    most_lines: int = 3

    @property
    def leading(self) -> float:
        """Distance of two lines."""
        return LEADING * self.size_pt

    def lines(self, item: Item, wording: int) -> list[str]:
        """Return the lines of an item in one of its wordings."""
        return _lines(self.lead_width(item.lead, bold=item.bold), item.wordings[wording], self)

    def lead_width(self, lead: str, *, bold: bool = True) -> float:
        """Return how far a lead pushes the first line to the right."""
        return width_pt(f"{lead}\N{NO-BREAK SPACE}", self.size_pt, bold=bold) if lead else 0.0


@lru_cache(maxsize=20_000)
def _lines(first: float, text: str, kind: Type) -> list[str]:
    return wrapped(text, kind.size_pt, kind.width, first=first, hang=kind.hang)


def fitted(items: Sequence[Item], kind: Type, room: int) -> list[list[str] | None]:
    """Choose what is printed in a box, and in which wording.

    As many items as possible are kept, the lowest ranks first; then those of the highest rank are shortened
    until all fit. A line is kept free to say how many were left out.

    Args:
        items: in any order.
        kind: the type.
        room: lines that the box holds.

    Returns:
        the lines of each item, None where it is left out.
    """
    by_rank = sorted(range(len(items)), key=lambda n: (items[n].rank, n))
    for count in range(len(items), 0, -1):
        kept = by_rank[:count]
        free = room - (count < len(items))
        lines = _shortened([items[n] for n in kept], kind, free)
        if lines is not None:
            chosen = dict(zip(kept, lines, strict=True))
            return [chosen.get(n) for n in range(len(items))]
    return [None] * len(items)


def _shortened(items: Sequence[Item], kind: Type, room: int) -> list[list[str]] | None:
    """Return lines of all items within room, the last shortened first; None where even that is too much."""
    wording = [_first_short_enough(item, kind) for item in items]
    lines = [kind.lines(item, n) for item, n in zip(items, wording, strict=True)]
    for index in reversed(range(len(items))):
        for shorter in range(wording[index], len(items[index].wordings)):
            lines[index] = kind.lines(items[index], shorter)
            if sum(map(len, lines)) <= room:
                return lines
    return lines if sum(map(len, lines)) <= room else None


def _first_short_enough(item: Item, kind: Type) -> int:
    last = len(item.wordings) - 1
    return next((n for n in range(last) if len(kind.lines(item, n)) <= kind.most_lines), last)
