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
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits
from wanderers.events.side_by_side import side_by_side as definitions_side_by_side
from wanderers.events.standing import with_standing
from wanderers.report.tables import almanac_heading, side_by_side_heading

STARS_FOR = {"all": BODIES[1:], "planets": PLANETS, "none": ()}


@click.command("almanac")
@span_options(default_years=1)
@body_option
@kind_option
@frame_option
@click.option(
    "--within",
    type=click.FloatRange(0.0, 180.0, min_open=True),
    metavar="DEG",
    help="Largest separation of an appulse, largest diameter of a gathering. [default: 10; Moon 6, stars 5]",
)
@click.option(
    "--stars",
    type=click.Choice(["all", "planets", "none"]),
    default="all",
    show_default=True,
    help="Whose meetings with stars to list: Moon's and planets', planets' only, nobody's.",
)
@click.option(
    "--standing",
    is_flag=True,
    help="Add the nearest better events of the same kind and bodies, earlier and later, in the whole kernel.",
)
@click.option(
    "--side-by-side",
    is_flag=True,
    help="Print stations and meetings with their definitions next to each other.",
)
@workplace_options
@output_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    kinds: tuple[Kind, ...],
    frames: tuple[Frame, ...],
    within: float | None,
    stars: str,
    standing: bool,
    side_by_side: bool,
    workplace: Workplace,
    destination: Destination,
) -> None:
    r"""Print every event of a span: stations, oppositions, conjunctions, appulses and the rest.

    \b
    Example: all stations and conjunctions of Mars in 2027
        wanderers almanac --from 2027 --to 2028 --body mars --kind station --kind conjunction
    """
    require_in_kernel(workplace, span, bodies)
    limits = Limits() if within is None else Limits(within, within, within, within)
    choice = Choice(bodies, STARS_FOR[stars], limits)
    query = Query(span.jd_from, span.jd_to, frozenset(kinds), frozenset(frames), choice)
    kernel = workplace.store.kernel.name
    if side_by_side:
        compared = definitions_side_by_side(workplace.store, query)
        write_table(compared, destination, side_by_side_heading(compared, kernel))
        return
    table = almanac(workplace.store, query)
    if standing:
        table = with_standing(workplace.store, query, table)
    write_table(table, destination, almanac_heading(table, kernel))
