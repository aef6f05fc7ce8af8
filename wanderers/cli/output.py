"""Where tables go: standard output or a file, in the format asked."""

from __future__ import annotations

import functools
import io
import sys
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, BinaryIO, Final, TypeVar

import click
import polars as pl

from wanderers.errors import OutputError, UsageProblem
from wanderers.events.old_dates import has_old_dates, with_julian_dates
from wanderers.files import reported_as_output_error, require_writable, write_atomically, write_output
from wanderers.report.tables import print_table

Command = TypeVar("Command", bound=Callable[..., Any])

FORMATS: Final = ("table", "csv", "parquet", "json")
MARKDOWN: Final = "markdown"
"""Sentences to paste; only of commands that take ``--length`` and ``--language``."""
CALENDAR_WORDS: Final = {"gregorian": "proleptic Gregorian", "julian": "Julian"}
SUFFIXES: Final = {".csv": "csv", ".parquet": "parquet", ".json": "json", ".txt": "table"}
MARKDOWN_SUFFIXES: Final = {".md": MARKDOWN, ".markdown": MARKDOWN}


@dataclass(frozen=True, slots=True)
class Destination:
    """Where a table goes, and how.

    Attributes:
        format: one of FORMATS, or MARKDOWN.
        path: the file, or None for standard output.
        calendar: in which dates before 1582-10-15 are printed.
    """

    format: str
    path: Path | None
    calendar: str = "gregorian"


def output_options(command: Command) -> Command:
    """Add ``--format`` and ``--out``; the command receives ``destination``, already checked."""
    return _with_formats(command, FORMATS, SUFFIXES)


def output_and_markdown_options(command: Command) -> Command:
    """Add what :func:`output_options` adds, with Markdown among the formats."""
    return _with_formats(command, (*FORMATS, MARKDOWN), SUFFIXES | MARKDOWN_SUFFIXES)


def _with_formats(command: Command, formats: Sequence[str], suffixes: Mapping[str, str]) -> Command:
    @click.option(
        "--format",
        "form",
        type=click.Choice(formats),
        help="How to write it. [default: by the ending of --out, else table]",
    )
    @click.option(
        "--out",
        "path",
        type=click.Path(path_type=Path),
        metavar="PATH",
        help="File to write. [default: standard output]",
    )
    @click.option(
        "--calendar",
        type=click.Choice(["gregorian", "julian"]),
        default="gregorian",
        show_default=True,
        help="Calendar in which dates before 1582-10-15 are printed; dates given are always Gregorian.",
    )
    @functools.wraps(command)
    def wrapped(*args: Any, form: str | None, path: Path | None, calendar: str, **kwargs: Any) -> Any:
        if path is not None:
            require_folder(path)
            require_writable(path)
        ending = path.suffix.lower() if path else ""
        if ending and form is None and ending not in suffixes:
            raise UsageProblem(
                f"no format ends in {ending}: name the file with {', '.join(suffixes)}, or give --format"
            )
        chosen = form or suffixes.get(ending, "table")
        return command(*args, destination=Destination(chosen, path, calendar), **kwargs)

    return wrapped  # type: ignore[return-value]


def require_folder(path: Path) -> None:
    """Check that the folder of a file to be written is there.

    Raises:
        OutputError: it is not.
    """
    if not path.parent.is_dir():
        raise OutputError(f"cannot write {path}: there is no folder {path.parent}; make it or choose another")


def write_table(table: pl.DataFrame, destination: Destination, heading: str) -> None:
    """Write a table; ``heading`` stands above the printed form only."""
    if has_old_dates(table):
        heading = f"{heading}; dates before 1582-10-15 in the {CALENDAR_WORDS[destination.calendar]} calendar"
        table = with_julian_dates(table) if destination.calendar == "julian" else table
    if destination.path is None:
        _write_to_stdout(table, destination.format, heading)
        return
    with reported_as_output_error(destination.path):
        write_atomically(destination.path, lambda file: _encode(table, destination.format, heading, file))


def write_bytes(content: bytes, destination: Destination) -> None:
    """Write finished content to where it goes."""
    if destination.path is None:
        click.echo(content, nl=False)
        return
    write_output(destination.path, content)


def _write_to_stdout(table: pl.DataFrame, form: str, heading: str) -> None:
    if form == "table":
        print_table(table, heading, sys.stdout)
        return
    buffer = io.BytesIO()
    _encode(table, form, heading, buffer)
    click.echo(buffer.getvalue(), nl=False)


def _encode(table: pl.DataFrame, form: str, heading: str, file: BinaryIO) -> None:
    """Write a table in a format."""
    if form == "table":
        text = io.StringIO()
        print_table(table, heading, text)
        file.write(text.getvalue().encode())
    elif form == "csv":
        table.write_csv(file)
    elif form == "parquet":
        table.write_parquet(file)
    else:
        file.write(table.write_json().encode())
