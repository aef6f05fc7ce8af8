"""``wanderers report``: the report folder of a span."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Final

import click

from wanderers.cli.event_options import Wanted, event_options
from wanderers.cli.options import Workplace
from wanderers.cli.site_options import rules_options, site_options
from wanderers.report.contents import Progress, Request, gather
from wanderers.report.folder import PAGE, require_replaceable, write_report
from wanderers.site.places import Site
from wanderers.site.rules import Rules

REPORTS: Final = Path("reports")
LINE_WIDTH: Final = 60
WHERE_TO: Final = (
    "Folder to write; an older report there is replaced as a whole. [default: reports/ and the span]"
)


@click.command("report")
@event_options(years=2, stars="planets")
@site_options(required=False)
@rules_options
@click.option("--out", type=click.Path(path_type=Path), metavar="FOLDER", help=WHERE_TO)
@click.pass_context
def command(
    context: click.Context,
    *,
    wanted: Wanted,
    site: Site | None,
    rules: Rules,
    workplace: Workplace,
    out: Path | None,
) -> None:
    r"""Write the report of a span: a page to open in a browser, tables, pictures and a calendar.

    With --site it opens with what can be watched from there, in local time.

    \b
    Example: everything of 2027 and 2028, in reports/2027-01-01_to_2029-01-01/index.html
        wanderers report --from 2027 --to 2029
    """
    query = wanted.query(workplace)
    request = Request(
        query.jd_from,
        query.jd_to,
        context.params["scale"],
        wanted.bodies,
        wanted.kinds,
        wanted.frames,
        wanted.stars_for,
        query.choice.limits,
        site,
        rules,
    )
    folder = out or REPORTS / request.stem
    require_replaceable(folder)
    progress = progress_line(workplace.quiet)
    write_report(gather(workplace.store, request, progress), folder, progress)
    progress("")
    click.echo(folder / PAGE)


def progress_line(quiet: bool) -> Progress:
    """Return what redraws one line of progress on standard error, if that is a terminal."""
    if quiet or not sys.stderr.isatty():
        return lambda words: None
    return lambda words: click.echo(f"\r{words:<{LINE_WIDTH}}" + ("" if words else "\r"), nl=False, err=True)
