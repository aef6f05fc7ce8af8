"""Documents of sentences to paste: Markdown, a heading a day or month, the event's id beside it."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Final

import polars as pl

from wanderers.report.phrases import notes, seasons
from wanderers.report.phrases.language import LENGTHS, Language
from wanderers.report.phrases.moments import (
    Moment,
    Row,
    date_text,
    event_date,
    moment_of,
    read_moment,
    time_text,
)
from wanderers.report.phrases.sentences import Sentences, sentences
from wanderers.site.zones import zone_data_version

MONTH: Final = "## {text}\n"
DAY: Final = "### {text}\n"


@dataclass(frozen=True, slots=True)
class Wording:
    """How sentences are wanted.

    Attributes:
        words: the language.
        lengths: names of the lengths, from LENGTHS.
    """

    words: Language
    lengths: tuple[str, ...] = tuple(LENGTHS)


@dataclass(frozen=True, slots=True)
class Source:
    """What stands in the head of a document.

    Attributes:
        kernel: what everything was computed from.
        old_calendar: calendar of dates before 1582-10-15, ``gregorian`` or ``julian``; None without any.
    """

    kernel: str
    old_calendar: str | None = None


@dataclass(frozen=True, slots=True)
class Paragraph:
    """One row of a table, ready to be printed.

    Attributes:
        moment: by which it is sorted into months.
        when: its date, and its time where that is printed.
        said: its sentences.
        beside: lines that belong to it.
        row_id: the row it came from.
    """

    moment: Moment
    when: str
    said: Sentences
    beside: Sequence[str]
    row_id: str


def events_markdown(table: pl.DataFrame, wording: Wording, source: Source) -> str:
    """Return every event of a table as sentences.

    Args:
        table: an event table; see :func:`wanderers.report.phrases.sentences.sentences` for what
            further columns add.
        wording: language and lengths.
        source: what to say in the head.
    """
    words = wording.words
    clocks = [*_distinct(table, "site"), *_distinct(table, "zone")]
    about = words.phrase("document", "about_local" if clocks else "about_events").format(
        count=_counted(words, "event", table.height),
        kernel=source.kernel,
        zone=", ".join(clocks),
        version=zone_data_version(),
    )
    rows = (_event_paragraph(row, words) for row in table.sort("jd_tt").iter_rows(named=True))
    return "\n".join(_document("events", about, rows, wording, source))


def seasons_markdown(table: pl.DataFrame, wording: Wording, source: Source) -> str:
    """Return every retrograde season of a table as sentences; arguments as :func:`events_markdown`."""
    words = wording.words
    count = _counted(words, "season", table.height)
    about = words.phrase("document", "about_seasons").format(count=count, kernel=source.kernel)
    ordered = table.sort("middle_jd_tt", "season_id")
    rows = (_season_paragraph(row, words) for row in ordered.iter_rows(named=True))
    return "\n".join(_document("seasons", about, rows, wording, source))


def _distinct(table: pl.DataFrame, column: str) -> list[str]:
    """Return the different values of a column, none where there is no such column."""
    return sorted(table[column].drop_nulls().unique().to_list()) if column in table.columns else []


def _counted(words: Language, unit: str, count: int) -> str:
    return words.counted(unit, words.number(count, 0))


def _event_paragraph(event: Row, words: Language) -> Paragraph:
    day, time = event_date(event, words, "full"), time_text(event, words, "time")
    when = day if time is None else f"{day}, {time}"
    beside = notes.notes(event, words)
    return Paragraph(moment_of(event), when, sentences(event, words), beside, event["event_id"])


def _season_paragraph(season: Row, words: Language) -> Paragraph:
    when = read_moment(season["middle_utc"])
    beside = [words.phrase("notes", "midnight_station")] if seasons.is_near_midnight(season) else []
    said = seasons.season_sentences(season, words)
    return Paragraph(when, date_text(when, words, "full"), said, beside, season["season_id"])


def _document(
    title: str, about: str, rows: Iterator[Paragraph], wording: Wording, source: Source
) -> Iterator[str]:
    words = wording.words
    yield f"# {words.phrase('document', title)}\n"
    yield f"{about}\n"
    if source.old_calendar is not None:
        yield words.phrase("document", f"calendar_{source.old_calendar}") + "\n"
    several = len(wording.lengths) > 1
    if several:
        yield words.phrase("document", "lengths") + "\n"
    printed: Callable[[Paragraph, Wording], str] = _section if several else _item
    rows, probe = itertools.tee(rows)
    if next(probe, None) is None:
        yield words.phrase("document", "nothing") + "\n"
    for _, month in itertools.groupby(rows, key=lambda row: row.moment.date[:2]):
        some = list(month)
        yield MONTH.format(text=date_text(some[0].moment, words, "month"))
        yield from (printed(row, wording) for row in some)
        if not several:
            yield ""


def _section(row: Paragraph, wording: Wording) -> str:
    """Return a row under a heading of its own, each length a paragraph to be copied whole."""
    lines = [DAY.format(text=row.when), *(f"{text}\n" for text in row.said.of(wording.lengths))]
    if row.beside:
        lines.append("\n>\n".join(f"> {line}" for line in row.beside) + "\n")
    return "\n".join([*lines, f"<!-- {row.row_id} -->\n"])


def _item(row: Paragraph, wording: Wording) -> str:
    """Return a row as an item of a list; a long sentence tells its date itself."""
    (text,) = row.said.of(wording.lengths)
    when = "" if "long" in wording.lengths else f"**{row.when}:** "
    first = f"- {when}{text} <!-- {row.row_id} -->"
    return "\n".join([first, *(f"  - {line}" for line in row.beside)])
