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
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.seasons import seasons
from wanderers.report.tables import seasons_heading


@click.command("seasons")
@span_options(default_years=2)
@body_option
@frame_option
@workplace_options
@output_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    frames: tuple[Frame, ...],
    workplace: Workplace,
    destination: Destination,
) -> None:
    r"""Print the retrograde seasons whose middle lies in a span, one row each.

    \b
    Example: the next seasons of Mars and Jupiter
        wanderers seasons --from 2027 --to 2032 --body mars --body jupiter
    """
    require_in_kernel(workplace, span, bodies)
    planets = tuple(body for body in bodies if body in PLANETS)
    table = seasons(workplace.store, span.jd_from, span.jd_to, bodies=planets, frames=frames)
    write_table(table, destination, seasons_heading(table, workplace.store.kernel.name))
