"""``wanderers gatherings``: several bodies within a small circle, over centuries."""

from __future__ import annotations

import click

from wanderers.cli.options import Span, Workplace, require_in_kernel, span_options, workplace_options
from wanderers.cli.output import MARKDOWN, Destination, write_table
from wanderers.cli.party_options import BodyList, party_options, require_enough
from wanderers.cli.sentences import sentence_options, write_event_sentences
from wanderers.ephemeris.bodies import Body
from wanderers.events.gathering_table import FewestAndWidest, gatherings, removals_in_words
from wanderers.report.phrases.markdown import Wording
from wanderers.report.tables import gatherings_heading

GATHERED = BodyList(3, "a gathering needs at least three different bodies, as venus,mars,jupiter")


@click.command("gatherings")
@span_options(default_years=100)
@party_options(GATHERED)
@click.option(
    "--within",
    type=click.FloatRange(0.0, 60.0, min_open=True),
    default=10.0,
    show_default=True,
    metavar="DEG",
    help="Largest diameter of the circle.",
)
@click.option(
    "--least-elongation",
    type=click.FloatRange(0.0, 180.0),
    default=0.0,
    metavar="DEG",
    help="Least distance of every body from the Sun. [default: any]",
)
@click.option(
    "--sort",
    type=click.Choice(["date", "tightness"]),
    default="date",
    show_default=True,
    help="Order of the rows.",
)
@click.option(
    "--standing",
    is_flag=True,
    help="Add the nearest tighter gatherings of the same bodies, earlier and later, in the whole kernel.",
)
@workplace_options
@sentence_options
def command(
    *,
    span: Span,
    bodies: tuple[Body, ...],
    at_least: int,
    within: float,
    least_elongation: float,
    sort: str,
    standing: bool,
    workplace: Workplace,
    destination: Destination,
    wording: Wording,
) -> None:
    r"""Find when several bodies stand within a small circle, over years or centuries.

    \b
    Example: every gathering of all five naked-eye planets within 25 degrees in the kernel
        wanderers gatherings --from 1550 --to 2650 --at-least 5 --within 25
    """
    require_in_kernel(workplace, span, bodies)
    require_enough(bodies, at_least)
    wanted = FewestAndWidest(bodies, at_least, within, least_elongation)
    table, removals = gatherings(workplace.store, span.jd_from, span.jd_to, wanted, standing=standing)
    if sort == "tightness":
        table = table.sort("separation_deg", "jd_tt")
    if not workplace.quiet:
        click.echo(f"wanderers: {removals_in_words(removals)}", err=True)
    if destination.format == MARKDOWN:
        write_event_sentences(table, workplace.store, wording, destination)
        return
    write_table(table, destination, gatherings_heading(table, workplace.store.kernel.name))
