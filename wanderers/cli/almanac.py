"""``wanderers almanac``: the event table."""

from __future__ import annotations

import click

from wanderers.cli.event_options import Wanted, event_options
from wanderers.cli.options import Workplace
from wanderers.cli.output import MARKDOWN, Destination, write_table
from wanderers.cli.sentences import sentence_options, write_event_sentences
from wanderers.cli.view_options import View, heading_of, tell_removed, view_options, viewed
from wanderers.errors import UsageProblem
from wanderers.events.catalogue import Query
from wanderers.events.side_by_side import side_by_side as definitions_side_by_side
from wanderers.events.standing import with_standing
from wanderers.report.phrases.markdown import Wording
from wanderers.report.tables import side_by_side_heading

HOW_IT_STANDS = (
    "Add the nearest better events of the same kind and bodies, earlier and later, in the whole kernel."
)
FOR_THE_WHOLE_EARTH = (
    "--side-by-side compares definitions for the whole Earth: leave out --site and what limits events for an "
    "audience"
)
ALL_DEFINITIONS = "Print stations and meetings with their definitions next to each other."


@click.command("almanac")
@event_options(years=1, stars="all")
@view_options
@click.option("--standing", is_flag=True, help=HOW_IT_STANDS)
@click.option("--side-by-side", is_flag=True, help=ALL_DEFINITIONS)
@sentence_options
def command(
    *,
    wanted: Wanted,
    view: View,
    standing: bool,
    side_by_side: bool,
    workplace: Workplace,
    destination: Destination,
    wording: Wording,
) -> None:
    r"""Print every event of a span: stations, oppositions, conjunctions, appulses and the rest.

    \b
    Example: all stations and conjunctions of Mars in 2027
        wanderers almanac --from 2027 --to 2028 --body mars --kind station --kind conjunction
    \b
    Example: close pairs for an audience that comes on Fridays and Saturdays after half past six
        wanderers almanac --from 2027 --to 2028 --kind appulse --within 1 --stars none \
            --site hilltop --weekdays fri,sat --after 18:30
    """
    query = wanted.query(workplace)
    if side_by_side:
        if view != View(rules=view.rules):
            raise UsageProblem(FOR_THE_WHOLE_EARTH)
        _print_side_by_side(query, workplace, destination)
        return
    table, removed = viewed(workplace.store, query, view, wanted.within_deg)
    if standing:
        table = with_standing(workplace.store, query, table)
    if destination.format == MARKDOWN:
        write_event_sentences(table, workplace.store, wording, destination)
    else:
        write_table(table, destination, heading_of(table, view, workplace.store.kernel.name, removed))
    if destination.format != "table" and not workplace.quiet:
        tell_removed(removed)


def _print_side_by_side(query: Query, workplace: Workplace, destination: Destination) -> None:
    if destination.format == MARKDOWN:
        raise UsageProblem("--side-by-side is a table: choose another --format or leave it out")
    compared = definitions_side_by_side(workplace.store, query)
    write_table(compared, destination, side_by_side_heading(compared, workplace.store.kernel.name))
