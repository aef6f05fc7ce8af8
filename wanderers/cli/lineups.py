"""``wanderers lineups``: runs of evenings on which several bodies stand up at once."""

from __future__ import annotations

import click

from wanderers.cli.evening_options import aid_option, evening_options
from wanderers.cli.options import BODY, Workplace, workplace_options
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.cli.party_options import BodyList, party_options, require_enough
from wanderers.cli.site_options import parse_evenings, rules_options, site_options
from wanderers.ephemeris import kernels
from wanderers.ephemeris.bodies import Body
from wanderers.site.lineup_nights import Aid, Part, Wanted
from wanderers.site.lineup_summary import lineups_heading, lineups_summary, why_none
from wanderers.site.lineups import lineups
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.zones import zone_named

DEFAULT_EVENINGS = 365
SKY_BODIES = BodyList(
    2, "a lineup needs at least two different bodies other than the Sun, as moon,venus", without=Body.SUN
)
ONE_BY_ONE = "The same one by one; may be repeated."
WITH_WHAT = "With what each must be visible; any: height alone counts."
WHICH_PART = "Part of the night: evening ends when the Sun passes below the pole."


@click.command("lineups")
@site_options(required=True)
@evening_options("a year")
@party_options(SKY_BODIES)
@click.option("--body", "named", type=BODY, multiple=True, metavar="BODY", help=ONE_BY_ONE)
@aid_option(WITH_WHAT)
@click.option(
    "--part",
    type=click.Choice([part.value for part in Part]),
    default=Part.ANY.value,
    show_default=True,
    help=WHICH_PART,
)
@rules_options
@workplace_options
@output_options
def command(
    *,
    site: Site,
    from_text: str | None,
    to_text: str | None,
    bodies: tuple[Body, ...],
    named: tuple[Body, ...],
    at_least: int,
    aid: str,
    part: str,
    rules: Rules,
    workplace: Workplace,
    destination: Destination,
) -> None:
    r"""Find runs of evenings on which several bodies stand up at one moment, and the best moment of each.

    \b
    Example: when are all five naked-eye planets up at once, low ones included?
        wanderers lineups --site 52.13,11.62,120 --zone Europe/Berlin --from 2027 --to 2047 \
            --at-least 5 --min-altitude 5
    """
    if named:
        bodies = SKY_BODIES(",".join(named))
    require_enough(bodies, at_least)
    kernels.require_bodies(workplace.store.kernel, bodies)
    span = parse_evenings(from_text, to_text, zone_named(site.zone), DEFAULT_EVENINGS)
    numbers = tuple(body.order for body in bodies)
    wanted = Wanted(numbers, at_least, rules, Aid(aid), Part(part))
    table = lineups(workplace.store, site, span, wanted)
    if table.is_empty():
        click.echo(f"wanderers: {why_none(workplace.store, site, span, wanted)}", err=True)
    if destination.format != "table":
        write_table(table, destination, "")
        return
    heading = lineups_heading(table, site, wanted, workplace.store.kernel.name)
    write_table(lineups_summary(table), destination, heading)
