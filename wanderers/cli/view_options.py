"""Options of commands that list events: from where they are looked at, and for whom they are chosen."""

from __future__ import annotations

import datetime as dt
import functools
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Any, Final, TypeVar

import click
import polars as pl

from wanderers.cli.site_options import rules_options, site_options
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import UsageProblem
from wanderers.events.catalogue import Query
from wanderers.events.kept import kept_almanac
from wanderers.report.site_tables import site_heading
from wanderers.report.tables import almanac_heading
from wanderers.site.almanac import events_of_site, with_parallax
from wanderers.site.audience import Audience, Removed, chosen_by_figures, chosen_from_site, removed_words
from wanderers.site.hours import WEEKDAYS, Opening
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.summary import counted

Command = TypeVar("Command", bound=Callable[..., Any])

ONLY_VISIBLE: Final = "Only what can be seen from --site, with whatever aid."
NOT_BEFORE: Final = "Only what can be seen from --site after this time of the local clock, as 18:30."
NOT_AFTER: Final = "Only what can be seen from --site by this time; before noon means the next morning."
ON_WHICH: Final = "Only what can be seen from --site on evenings of these weekdays, as fri,sat."
HOW_BRIGHT: Final = "Only where all that takes part is of this magnitude or brighter."
HOW_FAR: Final = "Only where all that takes part is at least so far from the Sun."


@dataclass(frozen=True, slots=True)
class View:
    """From where events are looked at, and for whom they are chosen.

    Attributes:
        site: None for the Earth's centre.
        rules: what counts as watchable.
        audience: what is wanted.
    """

    site: Site | None = None
    rules: Rules = field(default_factory=Rules)
    audience: Audience = field(default_factory=Audience)


class ClockTime(click.ParamType):  # type: ignore[type-arg]
    """A time of day, as 18:30."""

    name = "time"

    def convert(self, value: Any, param: click.Parameter | None, context: click.Context | None) -> dt.time:
        """Return the time typed."""
        if isinstance(value, dt.time):
            return value
        try:
            return dt.datetime.strptime(value, "%H:%M").time()
        except ValueError:
            self.fail(f"{value!r} is no time of day: write it as 18:30", param, context)


class Weekdays(click.ParamType):  # type: ignore[type-arg]
    """Days of the week, as fri,sat or mon-thu."""

    name = "weekdays"

    def convert(
        self, value: Any, param: click.Parameter | None, context: click.Context | None
    ) -> frozenset[int]:
        """Return the days typed, Monday is 0."""
        if isinstance(value, frozenset):
            return value
        days: set[int] = set()
        for part in value.lower().split(","):
            first, dash, last = (end.strip()[:3] for end in part.partition("-"))
            if first not in WEEKDAYS or (dash and last not in WEEKDAYS):
                self.fail(f"{part.strip()!r} is no weekday: write {', '.join(WEEKDAYS)}", param, context)
            start = WEEKDAYS.index(first)
            count = (WEEKDAYS.index(last) - start) % 7 if dash else 0
            days |= {(start + step) % 7 for step in range(count + 1)}
        return frozenset(days)


def view_options(command: Command) -> Command:
    """Add where from and for whom; the command receives ``view``."""

    @site_options(required=False)
    @rules_options
    @click.option("--visible", is_flag=True, help=ONLY_VISIBLE)
    @click.option("--after", type=ClockTime(), metavar="TIME", help=NOT_BEFORE)
    @click.option("--by", type=ClockTime(), metavar="TIME", help=NOT_AFTER)
    @click.option("--weekdays", type=Weekdays(), metavar="DAYS", default=frozenset(), help=ON_WHICH)
    @click.option("--brighter", type=float, metavar="MAG", help=HOW_BRIGHT)
    @click.option("--least-elongation", type=click.FloatRange(0.0, 180.0), metavar="DEG", help=HOW_FAR)
    @functools.wraps(command)
    def wrapped(
        *args: Any,
        site: Site | None,
        rules: Rules,
        visible: bool,
        after: dt.time | None,
        by: dt.time | None,
        weekdays: frozenset[int],
        brighter: float | None,
        least_elongation: float | None,
        **kwargs: Any,
    ) -> Any:
        audience = Audience(visible, Opening(weekdays, after, by), brighter, least_elongation)
        if audience.must_see and site is None:
            raise UsageProblem("--visible, --after, --by and --weekdays ask what can be seen: give --site")
        return command(*args, view=View(site, rules, audience), **kwargs)

    return wrapped  # type: ignore[return-value]


def viewed(
    store: TrackStore, query: Query, view: View, within_deg: float | None = None
) -> tuple[pl.DataFrame, list[Removed]]:
    """Return the events of a query as they are wanted, and what the limits took away.

    Args:
        store: the tracks.
        query: what is asked.
        view: from where, and for whom.
        within_deg: largest separation, where one was given: of what must be seen it limits what is seen, for
            parallax moves the Moon.
    """
    site = view.site
    if site is not None and within_deg is not None and view.audience.must_see:
        view = replace(view, audience=replace(view.audience, within_deg=within_deg))
        query = with_parallax(query)
    events = kept_almanac(store, query) if site is None else events_of_site(store, query, site)
    return selected(store, events, view)


def selected(store: TrackStore, events: pl.DataFrame, view: View) -> tuple[pl.DataFrame, list[Removed]]:
    """Return events as they are wanted, from a site with all it sees of them, and what limits took away."""
    events, removed = chosen_by_figures(store, events, view.audience)
    if view.site is None:
        return events, removed
    seen, more = chosen_from_site(store, view.site, events, view.rules, view.audience)
    return seen, removed + more


def heading_of(table: pl.DataFrame, view: View, kernel: str, removed: list[Removed]) -> str:
    """Say what a table of events is, and what was left out."""
    left_out = removed_words(removed)
    if view.site is None:
        heading = almanac_heading(table, kernel)
        return f"{heading}. {left_out}" if left_out else heading
    return site_heading(table, view.site, view.rules, f"{counted(table.height, 'event')}, {kernel}", left_out)


def tell_removed(removed: list[Removed]) -> None:
    """Say on standard error what was left out, where the output itself has no place for it."""
    left_out = removed_words(removed)
    if left_out:
        click.echo(f"wanderers: {left_out[0].lower()}{left_out[1:]}", err=True)
