"""``wanderers gatherings``: several bodies within a small circle, over centuries."""

from __future__ import annotations

from typing import Any

import click

from wanderers.cli.options import BODY, Span, Workplace, require_in_kernel, span_options, workplace_options
from wanderers.cli.output import MARKDOWN, Destination, write_table
from wanderers.cli.sentences import sentence_options, write_event_sentences
from wanderers.ephemeris.bodies import BODIES, NAKED_EYE_PLANETS, Body
from wanderers.events.gathering_table import FewestAndWidest, gatherings, removals_in_words
from wanderers.report.phrases.markdown import Wording
from wanderers.report.tables import gatherings_heading


class BodyList(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """Bodies separated by commas."""

    name = "bodies"

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> tuple[Body, ...]:
        """Return the bodies in their written order, each once."""
        if isinstance(value, tuple):
            return value
        named = {BODY.convert(name, param, ctx) for name in str(value).split(",") if name.strip()}
        if len(named) < 3:
            self.fail("a gathering needs at least three different bodies, as venus,mars,jupiter", param, ctx)
        return tuple(body for body in BODIES if body in named)


@click.command("gatherings")
@span_options(default_years=100)
@click.option(
    "--bodies",
    type=BodyList(),
    default=",".join(NAKED_EYE_PLANETS),
    metavar="LIST",
    help="Bodies that may take part, separated by commas. [default: the five planets the naked eye sees]",
)
@click.option(
    "--at-least",
    type=click.IntRange(3),
    default=3,
    show_default=True,
    metavar="N",
    help="Fewest bodies together.",
)
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
    if at_least > len(bodies):
        raise click.UsageError(
            f"--at-least {at_least} is more than the {len(bodies)} bodies named by --bodies"
        )
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
