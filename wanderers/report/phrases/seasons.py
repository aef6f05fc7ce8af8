"""A retrograde season as a sentence in three lengths."""

from __future__ import annotations

from typing import Final

from wanderers.report.phrases import figures
from wanderers.report.phrases.facts import Fact, Facts, constellation_form, figure
from wanderers.report.phrases.language import LENGTHS, Language
from wanderers.report.phrases.moments import (
    NEAR_MIDNIGHT_S,
    Moment,
    Row,
    date_text,
    range_text,
    read_moment,
)
from wanderers.report.phrases.sentences import Sentences
from wanderers.report.phrases.templates import composed

MIDDLES: Final = ("opposition", "inferior_conjunction")
STATIONS: Final = ("station_retrograde_utc", "station_direct_utc")


def season_sentences(season: Row, words: Language) -> Sentences:
    """Return a retrograde season as sentences.

    Args:
        season: a row of the table of seasons.
        words: the language.
    """
    named = dict(season) | {"other": None, "kind": "", "constellation": None, "detail": None}
    facts = Facts(named, words, SOURCES)
    phrases = words.table("season", str(season["middle_kind"]))
    return Sentences(*(composed(phrases[length], facts, most) for length, most in LENGTHS.items()))


def stations(season: Row) -> tuple[Moment, Moment] | None:
    """Return when the planet turns back and turns again, None where one falls outside the kernel."""
    first, last = (season[name] for name in STATIONS)
    return None if first is None or last is None else (read_moment(first), read_moment(last))


def is_near_midnight(season: Row) -> bool:
    """Return whether the date of a station changes within half an hour."""
    known = (season[name] for name in STATIONS)
    return any(read_moment(text).from_midnight_s <= NEAR_MIDNIGHT_S for text in known if text is not None)


def _range(forms: tuple[str, str], joint: str) -> Fact:
    def text(season: Row, words: Language) -> str | None:
        ends = stations(season)
        return None if ends is None else range_text(*ends, words, forms, joint)

    return text


def _date(column: str, form: str) -> Fact:
    def text(season: Row, words: Language) -> str | None:
        value = season[column]
        return None if value is None else date_text(read_moment(value), words, form)

    return text


def _days(season: Row, words: Language) -> str | None:
    value = season["retrograde_days"]
    return None if value is None else words.counted("day", words.number(value, 0))


def _constellations(season: Row, words: Language) -> str | None:
    """Return where the planet moves back."""
    if not season["constellations"]:
        return None
    form = words.phrase("document", "among_form")
    names = season["constellations"].split("+")
    listed = words.listed(tuple(constellation_form(name, words, form) for name in names))
    return words.phrase("document", "among").format(names=listed)


def _frame_mark(season: Row, words: Language) -> str | None:
    """Return the frame in few words, None for the usual one."""
    mark = words.table("frame_marks").get(season["frame"])
    return None if mark is None else str(mark)


def _frame(table: str) -> Fact:
    return lambda season, words: words.phrase(table, season["frame"])


SOURCES: Final[dict[str, Fact]] = {
    "range": _range(("full", "day"), "range"),
    "range_brief": _range(("brief", "brief_day"), "brief_range"),
    "middle": _date("middle_utc", "day"),
    "middle_date": _date("middle_utc", "full"),
    "days": _days,
    "arc": figure("arc_deg", figures.fine_degrees),
    "constellations_in": _constellations,
    "frame": _frame("frames"),
    "frame_brief": _frame("brief_frames"),
    "frame_mark": _frame_mark,
}
"""Fields of the phrases of seasons."""
