"""How text is measured, broken and fitted: nothing is cut, nothing is lost, the most important stays."""

from __future__ import annotations

import string
from pathlib import Path

import pytest
from fontTools.ttLib import TTFont
from hypothesis import given
from hypothesis import strategies as st
from matplotlib.font_manager import FontProperties, findfont

from wanderers.report.wall.text import Item, Type, fitted, printable, width_pt, wrapped

WORDS = st.lists(
    st.text(alphabet=string.ascii_letters + "0123456789°′", min_size=1, max_size=30), max_size=12
)


@given(WORDS, st.floats(20.0, 200.0), st.floats(0.0, 10.0), st.floats(0.0, 15.0))
def test_lines_are_never_wider_than_the_column_and_hold_every_letter(
    words: list[str], width: float, hang: float, first: float
) -> None:
    lines = wrapped(" ".join(words), 7.0, width, first=first, hang=hang)
    for index, line in enumerate(lines):
        assert width_pt(line, 7.0) <= width - (hang if index else first) + 1e-9
    # Words that fill more than a line are parted by hyphens; the samples hold none of their own.
    assert "".join(lines).replace("-", "").replace(" ", "") == "".join(words)


def test_an_easy_text_breaks_between_words() -> None:
    room = width_pt("Venus and", 7.0) + 0.1
    assert wrapped("Venus and Mars", 7.0, room) == ["Venus and", "Mars"]
    assert wrapped("Venus and\N{NO-BREAK SPACE}Mars", 7.0, width_pt("and\N{NO-BREAK SPACE}Mars", 7.0)) == [
        "Venus",
        "and\N{NO-BREAK SPACE}Mars",
    ]
    assert wrapped("", 7.0, 50.0) == []


@pytest.mark.parametrize("bold", [False, True])
@pytest.mark.parametrize("text", ["Saturn", "18:45", "52.13° N, 11.62° E", "west-southwest"])
def test_widths_are_those_of_the_font_itself(text: str, bold: bool) -> None:
    # fontTools reads the advance widths from the font's hmtx table (OpenType specification); kerning, which
    # it does not apply, narrows these words by less than a fiftieth.
    weight = "bold" if bold else "normal"
    font = TTFont(Path(findfont(FontProperties(family="DejaVu Sans", weight=weight))))
    names = font.getBestCmap()
    advance = sum(font["hmtx"][names[ord(letter)]][0] for letter in text)
    expected = advance / font["head"].unitsPerEm * 7.0
    assert 0.98 * expected <= width_pt(text, 7.0, bold=bold) <= 1.001 * expected


def test_letters_that_the_font_lacks_become_squares() -> None:
    assert printable(" Théâtre\n\N{CJK UNIFIED IDEOGRAPH-661F}  °") == "Théâtre □ °"


RANKS = st.lists(st.integers(0, 5), max_size=9)


@given(RANKS, st.integers(0, 12))
def test_a_box_keeps_its_most_important_entries_within_its_lines(ranks: list[int], room: int) -> None:
    items = [Item("18:45", ("word " * (3 + 4 * n), "word " * 2), rank) for n, rank in enumerate(ranks)]
    kind = Type(7.0, 60.0)
    lines = fitted(items, kind, room)
    left_out = [ranks[n] for n, line in enumerate(lines) if line is None]
    kept = [ranks[n] for n, line in enumerate(lines) if line is not None]
    assert sum(len(line) for line in lines if line) + bool(kept and left_out) <= room
    assert not (kept and left_out) or max(kept) <= min(left_out)
    # One more would not have fitted, even in its shortest wording.
    if left_out:
        shortest = len(kind.lines(items[0], 1))
        assert (len(kept) + 1) * shortest + (len(left_out) > 1) > room


def test_the_least_important_is_shortened_first() -> None:
    long, short = "Venus and Saturn are one degree apart", "Venus, Saturn"
    items = [Item("", (long, short), 2), Item("", (long, short), 1)]
    kind = Type(7.0, 60.0, hang=0.0)
    full = len(kind.lines(items[0], 0))
    assert full > 1
    lines = fitted(items, kind, full + 1)
    assert lines[0] == [short]
    assert " ".join(lines[1] or ()) == long
