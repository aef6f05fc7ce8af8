"""``wanderers seasons``: one row a retrograde season."""

from __future__ import annotations

from typing import Final

import click
from click.core import ParameterSource

from wanderers.cli.options import (
    EACH_BODY,
    Span,
    Workplace,
    body_option,
    frame_option,
    require_in_kernel,
    span_options,
    workplace_options,
)
from wanderers.cli.output import MARKDOWN, Destination, write_table
from wanderers.cli.sentences import sentence_options, write_season_sentences
from wanderers.cli.site_options import rules_options, site_options
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.errors import UsageProblem
from wanderers.events.seasons import seasons
from wanderers.plans.outlook import DARK_DEG, HIGH_DEG
from wanderers.plans.outlook import outlook as compared
from wanderers.report.outlook_table import outlook_heading
from wanderers.report.phrases.markdown import Wording
from wanderers.report.tables import seasons_heading
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.season_view import seasons_from_site
from wanderers.site.summary import place_words, zone_words

BESIDE_OTHERS = (
    "Set the seasons of the span beside those of so many years before and after, as --site sees them, ranked."
)

FIXED_BY_OUTLOOK: Final = {
    "frames_given": "--frame",
    "min_altitude": "--min-altitude",
    "sun_below": "--sun-below",
    "extinction": "--extinction",
    "dark_sky": "--dark-sky",
}
"""Options by parameter that an outlook does not heed."""


@click.command("seasons")
@span_options(default_years=2)
@body_option(EACH_BODY)
@frame_option
@click.option("--outlook", type=click.FloatRange(1.0, 500.0), metavar="YEARS", help=BESIDE_OTHERS)
@site_options(required=False)
@rules_options
@workplace_options
@sentence_options
@click.pass_context
def command(
    context: click.Context,
    *,
    span: Span,
    bodies: tuple[Body, ...],
    frames: tuple[Frame, ...],
    outlook: float | None,
    site: Site | None,
    rules: Rules,
    workplace: Workplace,
    destination: Destination,
    wording: Wording,
) -> None:
    r"""Print the retrograde seasons whose middle lies in a span, one row each.

    \b
    Example: the next seasons of Mars and Jupiter
        wanderers seasons --from 2027 --to 2032 --body mars --body jupiter
    \b
    Example: how they stand from a site at their middles, and beside those of 20 years around
        wanderers seasons --from 2027 --to 2032 --body mars --site hilltop
        wanderers seasons --from 2027 --to 2028 --body mars --site hilltop --outlook 20
    """
    require_in_kernel(workplace, span, bodies)
    if outlook is not None:
        _refuse_other_measures(context)
        _print_outlook(span, bodies, outlook, site, workplace, destination)
        return
    planets = tuple(body for body in bodies if body in PLANETS)
    table = seasons(workplace.store, span.jd_from, span.jd_to, bodies=planets, frames=frames)
    if destination.format == MARKDOWN:
        if site is not None:
            raise UsageProblem(
                "sentences about seasons know no site: leave out --site or choose another --format"
            )
        write_season_sentences(table, workplace.store, wording, destination)
        return
    heading = seasons_heading(table, workplace.store.kernel.name)
    if site is not None:
        table = seasons_from_site(workplace.store, site, table, rules)
        heading = (
            f"{heading}; at the middle, as seen from {place_words(site)}, local times {zone_words(site)}"
        )
    write_table(table, destination, heading)


def _refuse_other_measures(context: click.Context) -> None:
    """Refuse options that would change nothing: seasons are compared by measures of the outlook's own."""
    given = [
        option
        for name, option in FIXED_BY_OUTLOOK.items()
        if context.get_parameter_source(name) is ParameterSource.COMMANDLINE
    ]
    if given:
        raise UsageProblem(
            f"--outlook compares seasons in the ecliptic, by hours above {HIGH_DEG:.0f} degrees with the Sun "
            f"below {DARK_DEG:.0f}: leave out {' and '.join(given)}"
        )


def _print_outlook(
    span: Span,
    bodies: tuple[Body, ...],
    years: float,
    site: Site | None,
    workplace: Workplace,
    destination: Destination,
) -> None:
    if site is None:
        raise UsageProblem("--outlook compares what a site sees: give --site")
    if destination.format == MARKDOWN:
        raise UsageProblem("--outlook is a table: choose another --format or leave it out")
    planets = tuple(body for body in bodies if body in PLANETS)
    table = compared(workplace.store, site, (span.jd_from, span.jd_to), years, planets)
    write_table(table, destination, outlook_heading(table, site, workplace.store.kernel.name))
