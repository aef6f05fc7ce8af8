"""``wanderers lineups``: runs of evenings on which several bodies stand up at once."""

from __future__ import annotations

from typing import Any

import click

from wanderers.cli.options import BODY, Workplace, workplace_options
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.cli.site_options import parse_evenings, rules_options, site_options
from wanderers.ephemeris import kernels
from wanderers.ephemeris.bodies import BODIES, NAKED_EYE_PLANETS, Body
from wanderers.site.lineup_nights import Aid, Part, Wanted
from wanderers.site.lineup_summary import lineups_heading, lineups_summary, why_none
from wanderers.site.lineups import lineups
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.zones import zone_named

DEFAULT_EVENINGS = 365
WHICH = "Bodies that may take part, separated by commas. [default: the five planets the naked eye sees]"
ONE_BY_ONE = "The same one by one; may be repeated."
WITH_WHAT = "With what each must be visible; any: height alone counts."
WHICH_PART = "Part of the night: evening ends when the Sun passes below the pole."


class SkyBodies(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """Bodies of the night separated by commas, at least two."""

    name = "bodies"

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> tuple[Body, ...]:
        """Return the bodies in their written order, each once."""
        if isinstance(value, tuple):
            return value
        named = {BODY.convert(name, param, ctx) for name in str(value).split(",") if name.strip()}
        if Body.SUN in named or len(named) < 2:
            self.fail(
                "a lineup needs at least two different bodies other than the Sun, as moon,venus", param, ctx
            )
        return tuple(body for body in BODIES if body in named)


@click.command("lineups")
@site_options(required=True)
@click.option("--from", "from_text", metavar="DATE", help="First evening, a local date. [default: today]")
@click.option("--to", "to_text", metavar="DATE", help="Date after the last evening. [default: a year on]")
@click.option("--bodies", type=SkyBodies(), default=",".join(NAKED_EYE_PLANETS), metavar="LIST", help=WHICH)
@click.option("--body", "named", type=BODY, multiple=True, metavar="BODY", help=ONE_BY_ONE)
@click.option(
    "--at-least",
    type=click.IntRange(2),
    default=3,
    show_default=True,
    metavar="N",
    help="Fewest bodies together.",
)
@click.option(
    "--aid",
    type=click.Choice([aid.value for aid in Aid]),
    default=Aid.NAKED_EYE.value,
    show_default=True,
    help=WITH_WHAT,
)
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
    min_altitude: float | None,
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
        bodies = SkyBodies()(",".join(named))
    if at_least > len(bodies):
        raise click.UsageError(
            f"--at-least {at_least} is more than the {len(bodies)} bodies named by --bodies"
        )
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
