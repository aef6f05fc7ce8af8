"""Editions of the command line: one set of events for several places, clocks and languages in one run."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Final

import click
import polars as pl

from wanderers.cli.options import Workplace
from wanderers.cli.view_options import View, selected
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import UsageProblem
from wanderers.events.catalogue import Query
from wanderers.events.kept import kept_almanac
from wanderers.events.sides import with_sides
from wanderers.files import write_output
from wanderers.report import calendars
from wanderers.report.calendars import Style
from wanderers.report.editions import Edition, read_editions
from wanderers.report.phrases.markdown import Source, Wording, events_markdown
from wanderers.site import clock, site_files
from wanderers.site.almanac import with_local_occultations
from wanderers.site.finding import find_site
from wanderers.site.places import Site
from wanderers.site.zones import Zone

FOLDER: Final = Path("reports") / "editions"


def write_editions(
    path: Path, folder: Path | None, query: Query, view: View, style: Style, workplace: Workplace
) -> None:
    """Write calendar, sentences and table of every edition of a file, from one set of events.

    Args:
        path: the file of editions.
        folder: where to write; None for FOLDER.
        query: what events.
        view: for whom they are chosen; the place is each edition's own.
        style: title, kernel and alarms of the calendars.
        workplace: the tracks.

    Raises:
        EditionError, EditionFileError, SiteError: the file names what does not exist.
        OutputError: a file cannot be written.
    """
    wanted = [(edition, _site(edition)) for edition in read_editions(path)]
    for edition, site in wanted:
        if site is None and view.audience.must_see:
            raise UsageProblem(f"edition {edition.name} has no site: leave out --visible and the like")
    store, target = workplace.store, folder or FOLDER
    events = with_sides(store, kept_almanac(store, query))
    for edition, site in wanted:
        table = _seen(store, query, events, replace(view, site=site), edition)
        for ending, content in _files(table, edition, site, style, store.kernel.name).items():
            write_output(target / f"{edition.name}.{ending}", content)
        if not workplace.quiet:
            click.echo(f"wanderers: {edition.name}: {table.height} events", err=True)
    click.echo(target)


def _site(edition: Edition) -> Site | None:
    if edition.site is None:
        return None
    zone = None if edition.zone is None else edition.zone.name
    return find_site(edition.site, zone, site_files.site_files()).site


def _seen(
    store: TrackStore, query: Query, events: pl.DataFrame, view: View, edition: Edition
) -> pl.DataFrame:
    """Return the events as one edition tells them."""
    if view.site is not None:
        own = with_local_occultations(store, query, view.site, events.drop("pair_side", "solar_side"))
        return with_sides(store, selected(store, own, view)[0])
    table, _ = selected(store, events, view)
    return table if edition.zone is None else _by_clock(table, edition.zone)


def _by_clock(table: pl.DataFrame, zone: Zone) -> pl.DataFrame:
    """Return events with their dates and times by a clock alone."""
    date, time = clock.local_dates_and_times(zone, table["jd_tt"].to_numpy())
    return table.with_columns(zone=pl.lit(zone.name), local_date=date, local_time=time)


def _files(
    table: pl.DataFrame, edition: Edition, site: Site | None, style: Style, kernel: str
) -> dict[str, bytes]:
    """Return the contents of an edition's files by their endings."""
    titled = replace(style, name=f"{style.name}: {edition.name}", site=site, words=edition.words)
    calendars.require_possible_years(table["utc"])
    return {
        "ics": calendars.issue(table, titled).content,
        "md": events_markdown(table, Wording(edition.words), Source(kernel)).encode(),
        "csv": table.write_csv().encode(),
    }
