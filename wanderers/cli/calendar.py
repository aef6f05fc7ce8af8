"""``wanderers calendar``: events as an iCalendar file, issued anew or brought up to date."""

from __future__ import annotations

import datetime as dt
import os
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import BinaryIO, Final

import click
import numpy as np
import polars as pl

from wanderers.cli.options import (
    Span,
    Workplace,
    body_option,
    frame_option,
    kind_option,
    require_in_kernel,
    span_options,
    warn,
    workplace_options,
)
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import datetime64_from_jd, iso_strings
from wanderers.ephemeris.frames import Frame
from wanderers.errors import UsageProblem
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.files import reported_as_output_error, require_writable, write_atomically
from wanderers.report import calendars
from wanderers.report.calendar_parts import PARTS, is_part, part_title, split
from wanderers.report.calendar_update import CalendarFileError, Published, UtcSpan, read_calendar
from wanderers.report.calendars import Issue, Style, issue

DEFAULT_NAME: Final = "Sun, Moon and planets"
SPLIT_FOLDER: Final = Path("reports") / "calendars"
LONGEST_ALARM_MINUTES: Final = 4 * 7 * 24 * 60
JUST_BEFORE_DAYS: Final = 1e-3
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


def calendar_options(command: Callable[..., None]) -> Callable[..., None]:
    """Add the options of this command alone."""
    options = (
        click.option(
            "--name",
            help=f"Title that calendar programs show. [default: {DEFAULT_NAME}, or the title of --update]",
        ),
        click.option(
            "--alarm",
            "alarms_minutes",
            type=click.IntRange(0, LONGEST_ALARM_MINUTES),
            multiple=True,
            metavar="MINUTES",
            help="Show an alarm so long before each event; may be repeated. [default: none]",
        ),
        click.option(
            "--split",
            "part",
            type=click.Choice(PARTS),
            help="Write one file for each first body, kind or year into the folder --out. "
            f"[default folder: {SPLIT_FOLDER}]",
        ),
        click.option(
            "--update",
            type=click.Path(path_type=Path),
            metavar="FILE",
            help="Bring FILE, written by this command, up to date: unchanged entries and those outside the "
            "span stay as they are; those in the span that are no longer found or asked for are cancelled. "
            "Written to --out if given, else to FILE; the changes are listed on standard error. With --split "
            "a folder.",
        ),
        click.option(
            "--out",
            type=click.Path(path_type=Path),
            metavar="PATH",
            help="File to write; with --split a folder. [default: standard output]",
        ),
    )
    for option in reversed(options):
        command = option(command)
    return command


@click.command("calendar")
@span_options(default_years=1)
@body_option
@kind_option
@frame_option
@calendar_options
@workplace_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    kinds: tuple[Kind, ...],
    frames: tuple[Frame, ...],
    name: str | None,
    alarms_minutes: tuple[int, ...],
    part: str | None,
    update: Path | None,
    out: Path | None,
    workplace: Workplace,
) -> None:
    """Write events as an iCalendar file (RFC 5545) to import or to subscribe to.

    Entries stand at the instant in UTC, to the minute, and do not block time. Without --update the same
    request gives the same file, octet by octet.

    \b
    Example: a year of oppositions and stations, later the corrected issue of the same file
        wanderers calendar --from 2027 --to 2028 --kind opposition --kind station --out sky.ics
        wanderers calendar --from 2027 --to 2028 --kind opposition --kind station --update sky.ics
    """  # noqa: D301  (click takes the backspace itself as a mark)
    plan = Plan(out, update, part)
    previous = _previous(plan)
    if plan.target is not None:
        require_writable(plan.target, folder=part is not None)
    require_in_kernel(workplace, span)
    calendars.require_possible_years(_texts(span))
    query = Query(span.jd_from, span.jd_to, frozenset(kinds), frozenset(frames), Choice(bodies or BODIES))
    events = almanac(workplace.store, query)
    style = Style(name or "", workplace.store.kernel, tuple(sorted(set(alarms_minutes))))
    issues = _issues(events, style, plan, previous, _utc(span))
    _write(issues, plan)
    _warn(events, plan)
    if update is not None and not workplace.quiet:
        _tell(issues)


def _previous(plan: Plan) -> dict[str, Published]:
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


def _issues(
    events: pl.DataFrame, style: Style, plan: Plan, previous: Mapping[str, Published], span: UtcSpan
) -> dict[str, Issue]:
    """Return the calendars by part; where there is a previous one, brought up to date."""
    tables = split(events, plan.part) if plan.part else {"": events}
    stamp = _stamp()
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


def _write(issues: Mapping[str, Issue], plan: Plan) -> None:
    """Write every calendar; a file that holds the same octets already is not touched."""
    if plan.target is None:
        click.echo(issues[""].content, nl=False)
        return
    for part, calendar in issues.items():
        path = plan.target / f"{part}.ics" if part else plan.target
        with reported_as_output_error(path):
            path.parent.mkdir(parents=True, exist_ok=True)
            if not (path.is_file() and path.read_bytes() == calendar.content):
                write_atomically(path, _writer(calendar.content))


def _writer(content: bytes) -> Callable[[BinaryIO], None]:
    def write(file: BinaryIO) -> None:
        file.write(content)

    return write


def _warn(events: pl.DataFrame, plan: Plan) -> None:
    """Say what subscribers may meet with."""
    tables = list(split(events, plan.part).values()) if plan.part else []
    lines = [line for table in tables or [events] for line in calendars.warnings_about(table)]
    for line in dict.fromkeys(lines):
        warn(line)


def _tell(issues: Mapping[str, Issue]) -> None:
    """List what changed since the previous issue."""
    for part, calendar in issues.items():
        counts = Counter(change.what for change in calendar.changes)
        words = [f"{count} {what}" for what, count in counts.items()]
        of = f"{part}: " if part else ""
        for change in calendar.changes:
            click.echo(f"{of}{change}", err=True)
        click.echo(f"{of}{', '.join([*words, f'{calendar.unchanged} unchanged'])}", err=True)


def _stamp() -> dt.datetime:
    """Return the instant to stamp changes with, to the second."""
    given = os.environ.get(STAMP_VARIABLE, "")
    now = dt.datetime.fromtimestamp(int(given), dt.UTC) if given.isdecimal() else dt.datetime.now(dt.UTC)
    return now.replace(microsecond=0)


def _texts(span: Span) -> list[str]:
    """Print the first and the last instant of a span, UTC; its end itself is not in it."""
    jd = np.array([span.jd_from, max(span.jd_from, span.jd_to - JUST_BEFORE_DAYS)])
    return [str(text) for text in iso_strings(timescales.jd_utc_from_tt(jd))]


def _utc(span: Span) -> UtcSpan:
    """Return a span inside the years of calendars as instants."""
    start, end = datetime64_from_jd(timescales.jd_utc_from_tt(np.array([span.jd_from, span.jd_to])))
    last = np.datetime64(dt.datetime.max.replace(microsecond=0), "ms")
    return start.item().replace(tzinfo=dt.UTC), min(end, last).item().replace(tzinfo=dt.UTC)
