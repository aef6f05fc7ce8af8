"""The printable year of the command line: its options, the dates it covers, and how it is written."""

from __future__ import annotations

import datetime as dt
import functools
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Final, TypeVar

import click
import numpy as np
import polars as pl

from wanderers import schema
from wanderers.cli.options import Span, Workplace
from wanderers.cli.view_options import View, viewed
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.seasons import seasons
from wanderers.files import require_writable, write_output
from wanderers.site.audience import Removed

Command = TypeVar("Command", bound=Callable[..., Any])

PAPERS: Final = ("a4", "letter")
CLOCKS_APART_DAYS: Final = 2.0
"""Local dates begin up to 14 hours before and 12 after those of UTC; the best moment may lie a day and a half
from the instant."""
ALWAYS_SHOWN: Final = frozenset({Kind.MOON_PHASE, Kind.SEASON_POINT})
"""Kinds that no limit on what can be seen takes away: the frame of the year."""
ROUNDING_DAYS: Final = 0.02
"""A date given in TT falls a minute before the same date in UTC."""


@dataclass(frozen=True, slots=True)
class Printable:
    """Where a printable year goes, and on which paper."""

    path: Path
    paper: str


def printable_options(command: Command) -> Command:
    """Add ``--printable`` and ``--paper``; the command receives ``printable``, None where it is not wanted.

    Raises:
        OutputError: the file cannot be written.
    """

    @click.option(
        "--printable",
        "printable_path",
        type=click.Path(path_type=Path),
        metavar="FILE.pdf",
        help="Draw a calendar for the wall: a landscape page a month, and the year at a glance. No iCalendar "
        "file is written then unless --out, --update or --split asks for one.",
    )
    @click.option("--paper", type=click.Choice(PAPERS), help="Paper of --printable. [default: a4]")
    @functools.wraps(command)
    def wrapped(*args: Any, printable_path: Path | None, paper: str | None, **kwargs: Any) -> Any:
        if printable_path is None and paper is not None:
            raise click.UsageError("--paper is for --printable: add --printable FILE.pdf or leave it out")
        if printable_path is not None:
            require_writable(printable_path)
            if printable_path.suffix.lower() != ".pdf":
                raise click.UsageError(f"--printable draws a PDF file: name it {printable_path.stem}.pdf")
        wanted = None if printable_path is None else Printable(printable_path, paper or PAPERS[0])
        return command(*args, printable=wanted, **kwargs)

    return wrapped  # type: ignore[return-value]


def write_printable(
    printable: Printable, query: Query, workplace: Workplace, view: View, within_deg: float | None = None
) -> list[Removed]:
    """Draw and write the printable year of a query, by the clock of the site, else in UTC.

    Args:
        printable: where to.
        query: what is asked; its dates are meant by that clock.
        workplace: the tracks.
        view: from where, and for whom.
        within_deg: largest separation, where one was given.

    Returns:
        what the audience's limits took away.

    Raises:
        OutputError: the file cannot be written.
        UsageProblem: too many pages.
    """
    # Loaded only here: drawing takes half a second to load, and iCalendar files need none of it.
    from wanderers.report.wall import pages_of, printable_year

    first_day, end_day = local_dates(Span(query.jd_from, query.jd_to))
    pages_of(first_day, end_day)  # refuses too many before long work starts
    events, removed = _events(_padded(query, workplace), workplace, view, within_deg)
    content = printable_year(
        events,
        _seasons(query, workplace),
        first_day=first_day,
        end_day=end_day,
        paper=printable.paper,
        kernel=workplace.store.kernel,
        site=view.site,
        zone="UTC" if view.site is None else view.site.zone,
    )
    write_output(printable.path, content)
    return removed


def local_dates(span: Span) -> tuple[dt.date, dt.date]:
    """Return the dates of a span as they were typed; they are meant by the clock of the calendar."""
    ends = timescales.jd_utc_from_tt(np.array([span.jd_from + ROUNDING_DAYS, span.jd_to - ROUNDING_DAYS]))
    first, last = datetime64_from_jd(ends).astype("datetime64[D]")
    end = min(last + np.timedelta64(1, "D"), np.datetime64(dt.date.max))
    return first.item(), max(end, first + np.timedelta64(1, "D")).item()


def _padded(query: Query, workplace: Workplace) -> Query:
    """Return the same request over all instants that fall on its dates by some clock."""
    low, high = workplace.store.span_jd
    return replace(
        query,
        jd_from=max(query.jd_from - CLOCKS_APART_DAYS, low),
        jd_to=min(query.jd_to + CLOCKS_APART_DAYS, high),
    )


def _events(
    padded: Query, workplace: Workplace, view: View, within_deg: float | None
) -> tuple[pl.DataFrame, list[Removed]]:
    """Return the events as they are wanted; what every wall calendar shows is kept from the limits."""
    store, always = workplace.store, padded.kinds & ALWAYS_SHOWN
    frame = almanac(store, replace(padded, kinds=always)) if always else None
    if padded.kinds == always and frame is not None:
        return frame, []
    events, removed = viewed(store, replace(padded, kinds=padded.kinds - always), view, within_deg)
    return events if frame is None else pl.concat([events, frame], how="diagonal"), removed


def _seasons(query: Query, workplace: Workplace) -> pl.DataFrame:
    """Return the seasons whose retrograde stretches touch the span."""
    planets = tuple(body for body in query.choice.bodies if body in PLANETS)
    if not planets:
        return pl.DataFrame(schema=schema.SEASON_COLUMNS)
    padded = _padded(query, workplace)
    frames = tuple(sorted(query.frames))
    store = workplace.store
    return seasons(store, padded.jd_from, padded.jd_to, bodies=planets, frames=frames, touching=True)
