"""``wanderers calendar``: events as an iCalendar file, issued anew or brought up to date."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from pathlib import Path
from typing import Final

import click
import numpy as np

from wanderers.cli.calendar_files import (
    DEFAULT_NAME,
    SPLIT_FOLDER,
    Plan,
    issues_of,
    read_previous,
    tell_changes,
    warn_about,
    write_calendars,
)
from wanderers.cli.editions import write_editions
from wanderers.cli.event_options import Wanted, event_options
from wanderers.cli.options import Span, Workplace
from wanderers.cli.printable import Printable, printable_options, write_printable
from wanderers.cli.view_options import View, tell_removed, view_options, viewed
from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import datetime64_from_jd, iso_strings
from wanderers.errors import UsageProblem
from wanderers.files import require_writable
from wanderers.report import calendars
from wanderers.report.calendar_parts import PARTS
from wanderers.report.calendar_update import UtcSpan
from wanderers.report.calendars import Style

LONGEST_ALARM_MINUTES: Final = 4 * 7 * 24 * 60
JUST_BEFORE_DAYS: Final = 1e-3


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
            "--editions",
            type=click.Path(path_type=Path),
            metavar="FILE.toml",
            help="Write calendar, sentences and table of every edition (site, clock, language) that the file "
            "names, with the same ids, into the folder --out. [default folder: reports/editions]",
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
@event_options(years=1, stars="all")
@view_options
@calendar_options
@printable_options
def command(
    *,
    wanted: Wanted,
    view: View,
    name: str | None,
    alarms_minutes: tuple[int, ...],
    part: str | None,
    update: Path | None,
    editions: Path | None,
    out: Path | None,
    printable: Printable | None,
    workplace: Workplace,
) -> None:
    """Write events as an iCalendar file (RFC 5545) to import or to subscribe to.

    Entries stand at the instant in UTC, to the minute; with --site, what can be seen stands at the time to
    watch by the site's clock. They do not block time. Without --update the same request gives the same file,
    octet by octet.

    \b
    Example: a year of oppositions and stations, later the corrected issue of the same file
        wanderers calendar --from 2027 --to 2028 --kind opposition --kind station --out sky.ics
        wanderers calendar --from 2027 --to 2028 --kind opposition --kind station --update sky.ics
    \b
    Example: what a hill can see, and the same year for the wall
        wanderers calendar --from 2027 --to 2028 --site hilltop --stars none --visible --out hilltop.ics
        wanderers calendar --from 2027 --to 2028 --site hilltop --stars none --printable wall.pdf
    """  # noqa: D301  (click takes the backspace itself as a mark)
    if editions is not None:
        if update is not None or part is not None or printable is not None or view.site is not None:
            raise UsageProblem("--editions stands alone: leave out --update, --split, --printable and --site")
        style = Style(name or DEFAULT_NAME, workplace.store.kernel, tuple(sorted(set(alarms_minutes))))
        write_editions(editions, out, wanted.query(workplace), view, style, workplace)
        return
    plan = Plan(out, update, part)
    previous = read_previous(plan)
    if plan.target is not None:
        require_writable(plan.target, folder=part is not None)
    query = wanted.query(workplace)
    calendars.require_possible_years(_texts(wanted.span))
    if printable is not None:
        left_out = write_printable(printable, query, workplace, view, wanted.within_deg)
        if plan.target is None:
            tell_removed([] if workplace.quiet else left_out)
            return
    events, removed = viewed(workplace.store, query, view, wanted.within_deg)
    alarms = tuple(sorted(set(alarms_minutes)))
    style = Style(name or "", workplace.store.kernel, alarms, view.site)
    issues = issues_of(events, style, plan, previous, _utc(wanted.span))
    write_calendars(issues, plan)
    warn_about(events, plan)
    if not workplace.quiet:
        tell_removed(removed)
    if update is not None and not workplace.quiet:
        tell_changes(issues)


def _texts(span: Span) -> list[str]:
    """Print the first and the last instant of a span, UTC; its end itself is not in it."""
    jd = np.array([span.jd_from, max(span.jd_from, span.jd_to - JUST_BEFORE_DAYS)])
    return [str(text) for text in iso_strings(timescales.jd_utc_from_tt(jd))]


def _utc(span: Span) -> UtcSpan:
    """Return a span inside the years of calendars as instants."""
    start, end = datetime64_from_jd(timescales.jd_utc_from_tt(np.array([span.jd_from, span.jd_to])))
    last = np.datetime64(dt.datetime.max.replace(microsecond=0), "ms")
    return start.item().replace(tzinfo=dt.UTC), min(end, last).item().replace(tzinfo=dt.UTC)
