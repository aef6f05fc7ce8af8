"""``wanderers apparitions``: when each planet comes out of the Sun's light, and when it stands best."""

from __future__ import annotations

import re
from typing import Any

import click

from wanderers.cli.evening_options import aid_option, evening_options
from wanderers.cli.options import BODY, Workplace, workplace_options
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.cli.site_options import parse_evenings, rules_options, site_options
from wanderers.ephemeris import kernels
from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, PLANETS, Body
from wanderers.errors import UsageProblem
from wanderers.site.apparition_summary import apparitions_heading, apparitions_summary
from wanderers.site.apparitions import Habits, apparitions
from wanderers.site.lineup_nights import Aid
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.sight_moments import Hours
from wanderers.site.zones import zone_named

DEFAULT_EVENINGS = 365
WHICH = "Planet wanted; may be repeated. [default: the five the naked eye sees]"
CLOCK = re.compile(r"([01]?\d|2[0-4])(?::([0-5]\d))?")


class ClockTime(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """A time of day as hh:mm, turned into hours."""

    name = "time"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        """Return the hour, 0 to 24."""
        match = CLOCK.fullmatch(str(value).strip())
        hours = int(match[1]) + int(match[2] or 0) / 60.0 if match else 25.0
        if hours > 24.0:
            self.fail(f"'{value}' is no time of day: write hh:mm, as 22:00", param, ctx)
        return hours


@click.command("apparitions")
@site_options(required=True)
@click.option("--body", "bodies", type=BODY, multiple=True, metavar="BODY", help=WHICH)
@evening_options("a year")
@click.option(
    "--until",
    type=ClockTime(),
    default="22:00",
    show_default=True,
    metavar="TIME",
    help="How late in the evening people still watch.",
)
@click.option(
    "--morning-from",
    type=ClockTime(),
    default="05:00",
    show_default=True,
    metavar="TIME",
    help="How early in the morning they begin.",
)
@aid_option("With what to look; any: a telescope.")
@rules_options
@workplace_options
@output_options
def command(
    *,
    site: Site,
    bodies: tuple[Body, ...],
    from_text: str | None,
    to_text: str | None,
    until: float,
    morning_from: float,
    aid: str,
    rules: Rules,
    workplace: Workplace,
    destination: Destination,
) -> None:
    r"""Print each planet's apparitions: first and last sight as ranges of dates, and when it stands best.

    First and last sights are looked for down to the horizon as soon as the Sun is as low as observers report;
    --min-altitude is for the weeks when a planet stands best, --sun-below is not used.

    \b
    Example: when is Mercury easiest this year, and what does haze cost?
        wanderers apparitions --site 52.13,11.62,120 --zone Europe/Berlin --body mercury \
            --from 2027 --to 2028
    """
    wrong = [body for body in bodies if body not in PLANETS]
    if wrong:
        raise UsageProblem(f"{wrong[0].label} has no apparitions: name planets, as mercury or venus")
    chosen = tuple(body for body in PLANETS if body in bodies) or NAKED_EYE_PLANETS
    kernels.require_bodies(workplace.store.kernel, chosen)
    span = parse_evenings(from_text, to_text, zone_named(site.zone), DEFAULT_EVENINGS)
    habits = Habits(rules, Aid(aid), Hours(until, morning_from))
    table = apparitions(workplace.store, site, span, chosen, habits)
    if destination.format != "table":
        write_table(table, destination, "")
        return
    heading = apparitions_heading(table, site, habits, workplace.store.kernel.name)
    write_table(apparitions_summary(table), destination, heading)
