"""``wanderers nights``: per evening, what can be seen from a site, when, how high; or at one moment."""

from __future__ import annotations

from dataclasses import replace

import click

from wanderers.cli.evening_options import evening_options
from wanderers.cli.options import BODY, Workplace, workplace_options
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.cli.site_options import parse_evenings, parse_moment, rules_options, site_options
from wanderers.ephemeris.bodies import Body
from wanderers.errors import UsageProblem
from wanderers.site import summary
from wanderers.site.evenings import evenings
from wanderers.site.moment import LISTED, everything_up
from wanderers.site.nights import WATCHED, nights
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.zones import zone_named

DEFAULT_EVENINGS = 7
AT_ONE_MOMENT = (
    "List instead everything up at this time by the site's clock, as 2027-03-05T20:00 or 20:00, however low "
    "unless --min-altitude is given; Z or an offset may follow."
)
WHICH_BODIES = "Body wanted; may be repeated. [default: the Moon and the planets to Neptune]"


@click.command("nights")
@site_options(required=True)
@evening_options(f"{DEFAULT_EVENINGS} evenings")
@click.option("--at", "at_text", metavar="TIME", help=AT_ONE_MOMENT)
@click.option("--body", "bodies", type=BODY, multiple=True, metavar="BODY", help=WHICH_BODIES)
@rules_options
@workplace_options
@output_options
@click.pass_context
def command(
    context: click.Context,
    *,
    site: Site,
    from_text: str | None,
    to_text: str | None,
    at_text: str | None,
    bodies: tuple[Body, ...],
    rules: Rules,
    workplace: Workplace,
    destination: Destination,
) -> None:
    """Print per evening what can be seen from a site: when, how high, where, how well and why.

    An evening runs from local noon to local noon and bears the date on which it begins.

    \b
    Example: the planets from a hill in the first week of March
        wanderers nights --site 52.13,11.62,120 --zone Europe/Berlin --from 2027-03-01 --to 2027-03-08
    \b
    Example: what was bright in the east last night at eight?
        wanderers nights --site hilltop --at 2027-03-05T20:00
    """  # noqa: D301  click reads the mark
    if at_text is None:
        _print_nights(site, (from_text, to_text), bodies, rules, workplace, destination)
        return
    if from_text is not None or to_text is not None:
        raise UsageProblem("--at asks for one moment: leave out --from and --to")
    upward = replace(rules, min_altitude_deg=context.params["min_altitude"] or 0.0)
    jd = parse_moment(at_text, zone_named(site.zone))
    table = everything_up(workplace.store, site, jd, bodies or LISTED, upward)
    if destination.format == "table":
        local = summary.local_moment(site, jd)
        heading = summary.moment_heading(table, local, site, workplace.store.kernel.name)
        write_table(summary.moment_summary(table), destination, heading)
    else:
        write_table(table, destination, "")


def _print_nights(
    site: Site,
    span: tuple[str | None, str | None],
    bodies: tuple[Body, ...],
    rules: Rules,
    workplace: Workplace,
    destination: Destination,
) -> None:
    first, end = parse_evenings(*span, zone_named(site.zone), DEFAULT_EVENINGS)
    table = nights(workplace.store, site, (first, end), bodies or WATCHED, rules)
    if destination.format != "table":
        write_table(table, destination, "")
        return
    by_sun = evenings(site, first, first + 1).by_sun
    heading = summary.nights_heading(table, site, rules, workplace.store.kernel.name, by_sun=by_sun)
    write_table(summary.nights_summary(table), destination, heading)
