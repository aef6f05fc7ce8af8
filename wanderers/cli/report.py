"""``wanderers report``: the report folder of a span."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Final

import click

from wanderers.cli.almanac import STARS_FOR
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
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.kinds import Kind
from wanderers.report.contents import Progress, Request, gather
from wanderers.report.folder import PAGE, require_replaceable, write_report

REPORTS: Final = Path("reports")
LINE_WIDTH: Final = 60


@click.command("report")
@span_options(default_years=2)
@body_option
@kind_option
@frame_option
@click.option(
    "--stars",
    type=click.Choice(list(STARS_FOR)),
    default="planets",
    show_default=True,
    help="Whose meetings with stars to list: Moon's and planets', planets' only, nobody's.",
)
@workplace_options
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="FOLDER",
    help="Folder to write; an older report there is replaced as a whole. [default: reports/ and the span]",
)
@click.pass_context
def command(
    context: click.Context,
    *,
    span: Span,
    bodies: tuple[Body, ...],
    kinds: tuple[Kind, ...],
    frames: tuple[Frame, ...],
    stars: str,
    workplace: Workplace,
    out: Path | None,
) -> None:
    """Write the report of a span: a page to open in a browser, tables, pictures and a calendar.

    \b
    Example: everything of 2027 and 2028, in reports/2027-01-01_to_2029-01-01/index.html
        wanderers report --from 2027 --to 2029
    """  # noqa: D301 - click reads the backspace as "do not wrap"
    request = Request(
        span.jd_from, span.jd_to, context.params["scale"], bodies, kinds, frames, STARS_FOR[stars]
    )
    folder = out or REPORTS / request.stem
    require_replaceable(folder)
    require_in_kernel(workplace, span, bodies)
    progress = progress_line(workplace.quiet)
    write_report(gather(workplace.store, request, progress), folder, progress)
    progress("")
    click.echo(folder / PAGE)


def progress_line(quiet: bool) -> Progress:
    """Return what redraws one line of progress on standard error, if that is a terminal."""
    if quiet or not sys.stderr.isatty():
        return lambda words: None
    return lambda words: click.echo(f"\r{words:<{LINE_WIDTH}}" + ("" if words else "\r"), nl=False, err=True)
