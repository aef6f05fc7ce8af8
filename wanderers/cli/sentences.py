"""Options of commands that write sentences, and the writing of them."""

from __future__ import annotations

import functools
from collections.abc import Callable
from typing import Any, Final, TypeVar

import click
import polars as pl

from wanderers.cli.output import MARKDOWN, Destination, output_and_markdown_options, write_bytes
from wanderers.ephemeris.store import TrackStore
from wanderers.events.old_dates import has_old_dates, with_julian_dates
from wanderers.events.sides import with_sides
from wanderers.report.phrases.language import LENGTHS, REFERENCE, language
from wanderers.report.phrases.markdown import Source, Wording, events_markdown, seasons_markdown

Command = TypeVar("Command", bound=Callable[..., Any])
Write = Callable[[pl.DataFrame, Wording, Source], str]

ALL: Final = "all"
HOW_LONG: Final = (
    f"Length of the sentences of --format markdown: {LENGTHS['short']}, {LENGTHS['medium']} or "
    f"{LENGTHS['long']} characters. [default: all]"
)
WHICH_WORDS: Final = (
    "Language of --format markdown: en, de, or a TOML file of phrases of your own. [default: en]"
)


def sentence_options(command: Command) -> Command:
    """Add output options with Markdown, ``--length`` and ``--language``; the command gets ``wording`` too."""

    @click.option("--length", type=click.Choice([*LENGTHS, ALL]), help=HOW_LONG)
    @click.option("--language", "language_name", metavar="NAME|FILE", help=WHICH_WORDS)
    @output_and_markdown_options
    @functools.wraps(command)
    def wrapped(
        *args: Any, destination: Destination, length: str | None, language_name: str | None, **kwargs: Any
    ) -> Any:
        given = {"--length": length, "--language": language_name}
        for option, value in given.items():
            if value is not None and destination.format != MARKDOWN:
                raise click.UsageError(f"{option} is for --format {MARKDOWN} only: add that or leave it out")
        lengths = tuple(LENGTHS) if length in (None, ALL) else (str(length),)
        wording = Wording(language(language_name or REFERENCE), lengths)
        return command(*args, destination=destination, wording=wording, **kwargs)

    return wrapped  # type: ignore[return-value]


def write_event_sentences(
    table: pl.DataFrame, store: TrackStore, wording: Wording, destination: Destination
) -> None:
    """Write an event table as sentences, with the sides on which things stand."""
    _write(events_markdown, with_sides(store, table), store, wording, destination)


def write_season_sentences(
    table: pl.DataFrame, store: TrackStore, wording: Wording, destination: Destination
) -> None:
    """Write a table of retrograde seasons as sentences."""
    _write(seasons_markdown, table, store, wording, destination)


def _write(
    text: Write, table: pl.DataFrame, store: TrackStore, wording: Wording, destination: Destination
) -> None:
    old_calendar = destination.calendar if has_old_dates(table) else None
    if old_calendar == "julian":
        table = with_julian_dates(table)
    source = Source(store.kernel.name, old_calendar)
    write_bytes(text(table, wording, source).encode(), destination)
