"""``wanderers campaign``: the night-by-night plan of a retrograde season from a site."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path
from typing import Any, Final

import click
import polars as pl

from wanderers.cli.campaign_options import camera_options, night_options
from wanderers.cli.options import BODY, Workplace, workplace_options
from wanderers.cli.report import REPORTS, progress_line
from wanderers.cli.site_options import site_options, today
from wanderers.ephemeris.bodies import Body
from wanderers.files import read_text
from wanderers.plans.campaign import Campaign, plan_campaign
from wanderers.plans.replan import parse_evening, read_log
from wanderers.plans.request import CampaignRequest
from wanderers.plans.season import LEAD_DAYS, NEXT, TAIL_DAYS
from wanderers.report.campaign.contents import CameraChoice
from wanderers.report.campaign.folder import CAMPAIGN, write_campaign
from wanderers.report.folder import require_replaceable
from wanderers.site.places import Site
from wanderers.site.summary import counted
from wanderers.site.zones import zone_named

WHICH_SEASON: Final = "Season: next, a year, or a season_id of the seasons table."
BEFORE: Final = "Days before the first pass at which to begin."
AFTER: Final = "Days after the last pass at which to end."
WHAT_HAPPENED: Final = (
    "CSV of nights that have passed: evening_date, and status done or lost. They stay as they are, the rest "
    "is planned anew and the changes are listed."
)
WHAT_CANNOT: Final = "Evening that cannot be used, a local date; may be repeated."
DAYS: Final[dict[str, Any]] = {"type": click.FloatRange(0.0), "show_default": True, "metavar": "DAYS"}
WHERE_TO: Final = "Folder to write; an older plan there is replaced. [default: reports/ and the season]"


@click.command("campaign")
@click.argument("body", type=BODY, metavar="BODY")
@site_options(required=True)
@click.option("--season", default=NEXT, show_default=True, metavar="WHICH", help=WHICH_SEASON)
@click.option("--lead", default=LEAD_DAYS, **DAYS, help=BEFORE)
@click.option("--tail", default=TAIL_DAYS, **DAYS, help=AFTER)
@night_options
@camera_options
@click.option("--done", type=click.Path(path_type=Path), metavar="FILE", help=WHAT_HAPPENED)
@click.option("--skip", "skipped", multiple=True, metavar="DATE", help=WHAT_CANNOT)
@workplace_options
@click.option("--out", type=click.Path(path_type=Path), metavar="FOLDER", help=WHERE_TO)
def command(
    *,
    body: Body,
    site: Site,
    season: str,
    lead: float,
    tail: float,
    request: CampaignRequest,
    camera: CameraChoice,
    done: Path | None,
    skipped: tuple[str, ...],
    workplace: Workplace,
    out: Path | None,
) -> None:
    r"""Plan a retrograde season night by night: which nights, when, where, and what if it is cloudy.

    Writes a folder with a page, a field sheet to print, charts, the plan as table and calendar, and stars.

    \b
    Example: the next loop of Mars with a 135 mm lens; later what became of it
        wanderers campaign mars --site hilltop --lens 135
        wanderers campaign mars --site hilltop --lens 135 --done nights.csv --skip 2027-02-27
    """
    asked = replace(
        request,
        body=body,
        now=today(zone_named(site.zone)),
        season=season,
        lead_days=lead,
        tail_days=tail,
        log=() if done is None else read_log(read_text(done), str(done)),
        skip=tuple(parse_evening(text, "--skip") for text in skipped),
    )
    if out is not None:
        require_replaceable(out, CAMPAIGN)
    progress = progress_line(workplace.quiet)
    progress("planning the nights")
    campaign = plan_campaign(workplace.store, site, asked)
    folder = out or REPORTS / stem_of(campaign)
    page = write_campaign(workplace.store, campaign, folder, camera=camera, progress=progress)
    progress("")
    if not workplace.quiet:
        for line in told(campaign):
            click.echo(f"wanderers: {line}", err=True)
    click.echo(page)


def stem_of(campaign: Campaign) -> str:
    """Return a readable name made of the season and the site."""
    site = re.sub(r"[^\w.+-]+", "-", campaign.site.name).strip("-") or "site"
    return f"campaign_{campaign.season.row['season_id']}_{site}"


def told(campaign: Campaign) -> list[str]:
    """Return what is said of a plan: how many nights, what changed; or why there is none, what would help."""
    if campaign.is_empty:
        return ["no night can serve this plan", *campaign.notes, *campaign.advice]
    dates = sorted(campaign.plan["evening_date"].to_list())
    lines = [f"{counted(len(dates), 'night')} from {dates[0]} to {dates[-1]}"]
    changes = campaign.changes.filter(pl.col("change") != "kept")
    lines += [f"{row['change']}: {row['evening_date']}" for row in changes.iter_rows(named=True)]
    if campaign.changes.height:
        lines.append(f"kept: {counted(campaign.changes.height - changes.height, 'night')}")
    return [*lines, *campaign.advice]
