"""The printable year: a PDF with a page a month and, after them, a page a year."""

from __future__ import annotations

import datetime as dt
from collections import Counter
from io import BytesIO
from typing import Final

import polars as pl
from matplotlib.backends.backend_pdf import PdfPages

from wanderers.ephemeris.kernels import Kernel
from wanderers.errors import DateError, UsageProblem
from wanderers.report.charts.style import LIGHT, in_force
from wanderers.report.wall.edition import Edition
from wanderers.report.wall.entries import wall_of
from wanderers.report.wall.layout import Paper, Sheet, months_between
from wanderers.report.wall.month import month_page
from wanderers.report.wall.text import printable
from wanderers.report.wall.year import year_page
from wanderers.site.places import Site
from wanderers.site.zones import zone_named

MOST_MONTHS: Final = 120
"""More pages than anybody hangs up; a guard against typing errors."""
WORTH_A_GLANCE: Final = 2
"""Months of a year from which it gets a page of its own."""


def printable_year(
    events: pl.DataFrame,
    seasons: pl.DataFrame,
    *,
    first_day: dt.date,
    end_day: dt.date,
    paper: Paper | str = Paper.A4,
    kernel: Kernel,
    site: Site | None = None,
    zone: str = "UTC",
) -> bytes:
    """Return month grids to hang on a wall: a landscape page a month, vector, fonts embedded.

    The same tables give the same bytes.

    Args:
        events: columns of ``schema.EVENT_COLUMNS``; with those of ``site.columns.SITE_COLUMNS`` behind, the
            pages show what can be seen from the site, else the geocentric edition.
        seasons: columns of ``schema.SEASON_COLUMNS``: the bars. Give all that touch the span.
        first_day: first date of the calendar, by the clock of ``zone``.
        end_day: the date after the last. The months touched are printed whole, other days grey and empty.
        paper: ``a4`` or ``letter``.
        kernel: what the tables were computed from.
        site: whose sky it is.
        zone: IANA name of the clock.

    Returns:
        the octets of a PDF.

    Raises:
        DateError: no day in the span.
        UsageProblem: more than ``MOST_MONTHS`` months, or another paper.
        UnknownNameError: the zone does not exist.
    """
    months = pages_of(first_day, end_day)
    sees = site is not None and "verdict" in events.columns
    clock = zone_named(zone)
    edition = Edition(_paper(paper), kernel, site, clock, sees, first_day, end_day)
    wall = wall_of(events, seasons, first_day, end_day, clock)
    years = Counter(month.year for month in months)
    out = BytesIO()
    with in_force(LIGHT), PdfPages(out, metadata=_metadata(edition)) as pdf:
        for month in months:
            _add(pdf, month_page(month, wall, edition))
        for year in sorted(year for year, count in years.items() if count >= WORTH_A_GLANCE):
            _add(pdf, year_page(year, wall, edition))
    return out.getvalue()


def pages_of(first_day: dt.date, end_day: dt.date) -> list[dt.date]:
    """Return the first days of the months of a span, a page each.

    Raises:
        DateError: no day in the span.
        UsageProblem: more than ``MOST_MONTHS`` months.
    """
    if end_day <= first_day:
        raise DateError(f"{end_day} is not after {first_day}: a printable calendar needs at least one day")
    months = months_between(first_day, end_day)
    if len(months) > MOST_MONTHS:
        raise UsageProblem(
            f"{len(months)} months are {len(months)} pages: choose dates at most {MOST_MONTHS} months apart"
        )
    return months


def _paper(name: Paper | str) -> Paper:
    try:
        return Paper(str(name).lower())
    except ValueError:
        raise UsageProblem(f"unknown paper '{name}': choose a4 or letter") from None


def _metadata(edition: Edition) -> dict[str, str | None]:
    """Return what the file says of itself: no time, and nothing that depends on a library's version."""
    whose = edition.titles()[0]
    first, last = edition.first_day, edition.end_day - dt.timedelta(days=1)
    return {
        "Title": printable(f"Sky calendar, {first} to {last}"),
        "Subject": whose,
        "CreationDate": None,
        "Creator": None,
        "Producer": None,
    }


def _add(pdf: PdfPages, sheet: Sheet) -> None:
    pdf.savefig(sheet.figure)  # type: ignore[no-untyped-call, unused-ignore]
