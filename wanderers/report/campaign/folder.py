"""The folder of a campaign: page, field sheets, charts, tables, calendar; built beside, then renamed."""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any, Final

import polars as pl
from matplotlib.figure import Figure

from wanderers import __version__
from wanderers.ephemeris.checksums import sha256_of
from wanderers.ephemeris.store import TrackStore
from wanderers.files import reported_as_output_error
from wanderers.plans.campaign import Campaign
from wanderers.report.campaign import log
from wanderers.report.campaign.calendar import campaign_calendar, earlier_issue, is_possible
from wanderers.report.campaign.contents import CameraChoice, CampaignContents, gather_campaign
from wanderers.report.campaign.page import page_of, rendered
from wanderers.report.campaign.sheet import field_sheet
from wanderers.report.charts import campaign_clock, campaign_field, campaign_light
from wanderers.report.charts.campaign_nights import RED
from wanderers.report.charts.export import Format, save
from wanderers.report.contents import Progress
from wanderers.report.folder import Mark, built_beside, manifest_of, require_replaceable
from wanderers.report.pictures import Picture, lean
from wanderers.report.wall.layout import Paper

PAGE: Final = "index.html"
CALENDAR: Final = "plan.ics"
CAMPAIGN: Final = Mark("campaign.json", "wanderers campaign")
"""Lists the files of a campaign; by it a folder is known as one."""
CHARTS: Final = "charts"
KEPT: Final = "kept"
"""Holds what the observer wrote into the files of an earlier plan in the same folder."""
FORMATS: Final[tuple[Format, ...]] = ("png", "svg", "pdf")
DRAWN: Final[tuple[tuple[str, str, Callable[..., Figure], Callable[[CampaignContents], str]], ...]] = (
    ("field", "The field", campaign_field.draw_campaign_field, campaign_field.campaign_field_alt_text),
    (
        "clock",
        "The season by the clock",
        campaign_clock.draw_campaign_clock,
        campaign_clock.campaign_clock_alt_text,
    ),
    (
        "light",
        "Brightness and size",
        campaign_light.draw_campaign_light,
        campaign_light.campaign_light_alt_text,
    ),
)


def write_campaign(
    store: TrackStore,
    campaign: Campaign,
    folder: Path,
    *,
    camera: CameraChoice | None = None,
    progress: Progress = lambda words: None,
) -> Path:
    """Write the folder of a campaign; an older one there is replaced, what was written into it by hand kept.

    Args:
        store: the tracks.
        campaign: the plan; an empty one gives a folder that says why.
        folder: where it shall stand; folders above it are made.
        camera: sensor, lens, margin and roll; None for full frame with the longest usual lens.
        progress: told what is being done.

    Returns:
        the page.

    Raises:
        FrameError: no frame holds the path.
        UsageProblem: a focal length no lens has.
        OutputError: it cannot be written, or is in the way; nothing half-written stays.
    """
    require_replaceable(folder, CAMPAIGN)
    progress("framing the path")
    contents = gather_campaign(store, campaign, camera or CameraChoice())
    final = Path(os.path.realpath(folder))
    with reported_as_output_error(folder), built_beside(final, CAMPAIGN) as building:
        kept = _keep_handwriting(final, building)
        files = _write_tables(contents, building) | _write_calendar(contents, final, building)
        progress("drawing the charts")
        pictures = draw_charts(contents, building / CHARTS, progress)
        progress("printing the field sheet")
        for paper in Paper:
            (building / sheet_name(paper)).write_bytes(field_sheet(contents, paper))
        page = page_of(contents, pictures, _sheets() | files | kept)
        (building / PAGE).write_text(rendered(page), encoding="utf-8")
        _write_manifest(contents, building)
    return folder / PAGE


def sheet_name(paper: Paper) -> str:
    """Return the file name of a field sheet."""
    return f"field_sheet_{paper.value}.pdf"


def draw_charts(
    contents: CampaignContents, folder: Path, progress: Progress = lambda words: None
) -> tuple[Picture, ...]:
    """Draw the charts into a folder, which is made: for print as NAME, for the field as NAME_red.

    Returns:
        those for print, with their drawing.
    """
    folder.mkdir()
    pictures = []
    for number, (stem, title, draw, alt) in enumerate(DRAWN, 1):
        paths = save(draw(contents), stem, folder, formats=FORMATS)
        save(draw(contents, style=RED), f"{stem}_red", folder, formats=FORMATS, style=RED)
        svg = lean(paths["svg"].read_text(encoding="utf-8"))
        pictures.append(Picture(stem, title, alt(contents), contents.campaign.season.body, svg=svg))
        progress(f"drawing the charts: {number} of {len(DRAWN)}")
    return tuple(pictures)


def _sheets() -> dict[str, str]:
    return {sheet_name(paper): f"the field sheet to print, {paper.name}" for paper in Paper}


def _write_tables(contents: CampaignContents, folder: Path) -> dict[str, str]:
    """Write the tables; return the files' names and what they hold."""
    plan = "a row a planned night; fill in its status and give it to --done to plan anew"
    changes = contents.campaign.changes
    tables: tuple[tuple[str, pl.DataFrame, str], ...] = (
        ("plan.csv", contents.plan, plan),
        ("plan.parquet", contents.plan, "the same as Parquet"),
        ("spares.csv", contents.spares, "a row a spare night"),
        ("stars.csv", log.lettered(contents), "registration stars, with their letters on the chart"),
        ("comparison_stars.csv", log.compared(contents), "comparison stars by night"),
        ("brightness_log.csv", log.blank_log(contents), "a log of brightness estimates to fill in"),
        *(() if changes.is_empty() else (("changes.csv", changes, "what planning anew changed"),)),
    )
    for name, table, _ in tables:
        if name.endswith(".csv"):
            table.write_csv(folder / name)
        else:
            table.write_parquet(folder / name)
    return {name: holds for name, _, holds in tables}


def _write_calendar(contents: CampaignContents, earlier: Path, folder: Path) -> dict[str, str]:
    """Write the calendar, the next issue of the one in the earlier folder if that is the same campaign's."""
    if not is_possible(contents):
        return {}
    published = earlier_issue(contents, earlier / CALENDAR)
    (folder / CALENDAR).write_bytes(campaign_calendar(contents, published))
    return {CALENDAR: "the nights as a calendar, iCalendar (RFC 5545); spares are tentative"}


def _keep_handwriting(earlier: Path, building: Path) -> dict[str, str]:
    """Carry over files of an earlier plan that were changed by hand since; return their names."""
    listed = manifest_of(earlier, CAMPAIGN).get("sha256", {}) if earlier.is_dir() else {}
    changed = [
        name
        for name, digest in sorted(listed.items())
        if (earlier / name).is_file() and (name.startswith(f"{KEPT}/") or sha256_of(earlier / name) != digest)
    ]
    kept = {}
    for name in changed:
        target = _free_name(building / KEPT, Path(name).name)
        target.parent.mkdir(exist_ok=True)
        shutil.copy2(earlier / name, target)
        kept[target.relative_to(building).as_posix()] = "written by hand into the plan before this one"
    return kept


def _free_name(folder: Path, name: str) -> Path:
    """Return a path in a folder that is not taken: NAME, else with a number."""
    first = folder / name
    taken = (folder / f"{first.stem}_{number}{first.suffix}" for number in range(2, 10_000))
    return first if not first.exists() else next(path for path in taken if not path.exists())


def _write_manifest(contents: CampaignContents, folder: Path) -> None:
    """Write the list of files with their checksums, and what they were made from."""
    campaign, kernel = contents.campaign, contents.kernel
    paths = {path.relative_to(folder).as_posix(): path for path in folder.rglob("*") if path.is_file()}
    manifest: dict[str, Any] = {
        "made_by": CAMPAIGN.made_by,
        "version": __version__,
        "season": campaign.season.row["season_id"],
        "site": campaign.site.name,
        "planned_as_of": (campaign.request.first_open or campaign.request.now).isoformat(),
        "kernel": kernel.name,
        "kernel_sha256": kernel.sha256,
        "files": sorted(paths),
        "sha256": {name: sha256_of(path) for name, path in sorted(paths.items())},
    }
    (folder / CAMPAIGN.manifest).write_text(json.dumps(manifest, indent=1) + "\n", encoding="utf-8")
