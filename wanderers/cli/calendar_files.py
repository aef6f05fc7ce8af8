"""Calendar files of the command line: what is to be updated, what is written where, what is told of it."""

from __future__ import annotations

import datetime as dt
import os
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Final

import click
import polars as pl

from wanderers.cli.options import warn
from wanderers.errors import UsageProblem
from wanderers.files import reported_as_output_error, write_output
from wanderers.report import calendars
from wanderers.report.calendar_parts import is_part, part_title, split
from wanderers.report.calendar_update import CalendarFileError, Published, UtcSpan, read_calendar
from wanderers.report.calendars import Issue, Style, issue

DEFAULT_NAME: Final = "Sun, Moon and planets"
SPLIT_FOLDER: Final = Path("reports") / "calendars"
STAMP_VARIABLE: Final = "SOURCE_DATE_EPOCH"
"""Seconds since 1970 to stamp changed entries with, for runs that must repeat to the octet.

Source: reproducible-builds.org, SOURCE_DATE_EPOCH specification 1.1 (from memory).
"""


@dataclass(frozen=True, slots=True)
class Plan:
    """Where calendars go, and what they bring up to date.

    Attributes:
        out: file or folder asked for, if any.
        update: previous file or folder, if any.
        part: what calendars are split by, if at all.
    """

    out: Path | None
    update: Path | None
    part: str | None

    @property
    def target(self) -> Path | None:
        """Where to write; None is standard output."""
        return self.out or self.update or (SPLIT_FOLDER if self.part else None)


def read_previous(plan: Plan) -> dict[str, Published]:
    """Read the calendars to be updated, by part; a single one has no name.

    Raises:
        UsageProblem: a file where a folder is meant, or the other way round.
        CalendarFileError: not there, not readable, no calendar, or another program's.
    """
    if plan.update is None:
        return {}
    if plan.part and plan.update.is_file():
        raise UsageProblem(f"--update {plan.update} is a file: with --split give the folder of all parts")
    if not plan.part and plan.update.is_dir():
        raise UsageProblem(f"--update {plan.update} is a folder: name a calendar file in it, or add --split")
    if not plan.part:
        return {"": _read(plan.update)}
    files = sorted(plan.update.glob("*.ics"))
    return {file.stem: _read(file) for file in files if is_part(file.stem, plan.part)}


def _read(file: Path) -> Published:
    try:
        content = file.read_bytes()
    except OSError as error:
        raise CalendarFileError(
            f"cannot read {file}: {error.strerror or error}; write a first calendar without --update"
        ) from error
    return read_calendar(content, str(file))


def issues_of(
    events: pl.DataFrame,
    style: Style,
    plan: Plan,
    previous: Mapping[str, Published],
    span: UtcSpan,
) -> dict[str, Issue]:
    """Return the calendars by part; where there is a previous one, brought up to date."""
    tables = split(events, plan.part) if plan.part else {"": events}
    stamp = stamp_now()
    return {
        part: issue(
            tables.get(part, events.clear()),
            replace(style, name=_title(style.name, part, previous.get(part))),
            published=previous.get(part),
            span=span,
            stamp=stamp,
        )
        for part in (*tables, *(part for part in previous if part not in tables))
    }


def _title(given: str, part: str, published: Published | None) -> str:
    """Return the title of a calendar: the one asked for, else the one it had, else a plain one."""
    if published is not None and published.name and not given:
        return published.name
    whole = given or DEFAULT_NAME
    return f"{whole}: {part_title(part)}" if part else whole


def write_calendars(issues: Mapping[str, Issue], plan: Plan) -> None:
    """Write every calendar; a file that holds the same octets already is not touched."""
    if plan.target is None:
        click.echo(issues[""].content, nl=False)
        return
    for part, calendar in issues.items():
        path = plan.target / f"{part}.ics" if part else plan.target
        with reported_as_output_error(path):
            same = path.is_file() and path.read_bytes() == calendar.content
        if not same:
            write_output(path, calendar.content)


def warn_about(events: pl.DataFrame, plan: Plan) -> None:
    """Say what subscribers may meet with."""
    tables = list(split(events, plan.part).values()) if plan.part else []
    lines = [line for table in tables or [events] for line in calendars.warnings_about(table)]
    for line in dict.fromkeys(lines):
        warn(line)


def tell_changes(issues: Mapping[str, Issue]) -> None:
    """List what changed since the previous issue."""
    for part, calendar in issues.items():
        counts = Counter(change.what for change in calendar.changes)
        words = [f"{count} {what}" for what, count in counts.items()]
        of = f"{part}: " if part else ""
        for change in calendar.changes:
            click.echo(f"{of}{change}", err=True)
        click.echo(f"{of}{', '.join([*words, f'{calendar.unchanged} unchanged'])}", err=True)


def stamp_now() -> dt.datetime:
    """Return the instant to stamp changes with, to the second.

    Raises:
        UsageProblem: SOURCE_DATE_EPOCH is no time.
    """
    given = os.environ.get(STAMP_VARIABLE, "")
    try:
        now = dt.datetime.fromtimestamp(int(given), dt.UTC) if given else dt.datetime.now(dt.UTC)
    except (ValueError, OverflowError, OSError) as error:
        raise UsageProblem(
            f"{STAMP_VARIABLE}={given} is no time: give seconds since 1970, or unset it"
        ) from error
    return now.replace(microsecond=0)
