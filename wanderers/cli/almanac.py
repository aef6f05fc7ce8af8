"""``wanderers almanac``: the event table."""

from __future__ import annotations

import click

from wanderers.cli.options import (
    Span,
    Workplace,
    body_option,
    frame_option,
    kind_option,
    require_in_kernel,
    span_options,
    workplace_options,
)
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits
from wanderers.report.tables import almanac_heading


@click.command("almanac")
@span_options(default_years=1)
@body_option
@kind_option
@frame_option
@click.option("--within", type=click.FloatRange(0.0, 180.0, min_open=True), metavar="DEG", help="Largest separation of an appulse. [default: 10; Moon 6, stars 5]")
@workplace_options
@output_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    kinds: tuple[Kind, ...],
    frames: tuple[Frame, ...],
    within: float | None,
    workplace: Workplace,
    destination: Destination,
) -> None:
    """Print every event of a span: stations, oppositions, conjunctions, appulses and the rest.

    \b
    Example: all stations and conjunctions of Mars in 2027
        wanderers almanac --from 2027 --to 2028 --body mars --kind station --kind conjunction
    """
    require_in_kernel(workplace, span)
    limits = Limits() if within is None else Limits(within, within, within)
    query = Query(
        span.jd_from, span.jd_to, frozenset(kinds), frozenset(frames), Choice(bodies or BODIES, limits=limits)
    )
    table = almanac(workplace.store, query)
    write_table(table, destination, almanac_heading(table, workplace.store.kernel.name))
