"""``wanderers seasons``: one row a retrograde season."""

from __future__ import annotations

import click

from wanderers.cli.options import (
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
from wanderers.report.phrases.markdown import Wording
from wanderers.report.tables import seasons_heading
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.season_view import seasons_from_site
from wanderers.site.summary import place_words, zone_words


@click.command("seasons")
@span_options(default_years=2)
@body_option
@frame_option
@site_options(required=False)
@rules_options
@workplace_options
@sentence_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    frames: tuple[Frame, ...],
    site: Site | None,
    rules: Rules,
    min_altitude: float | None,
    workplace: Workplace,
    destination: Destination,
    wording: Wording,
) -> None:
    r"""Print the retrograde seasons whose middle lies in a span, one row each.

    \b
    Example: the next seasons of Mars and Jupiter
        wanderers seasons --from 2027 --to 2032 --body mars --body jupiter
    \b
    Example: how they stand from a site at their middles
        wanderers seasons --from 2027 --to 2032 --body mars --site hilltop
    """
    require_in_kernel(workplace, span, bodies)
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
