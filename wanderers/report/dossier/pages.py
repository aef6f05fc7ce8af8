"""The dossiers of a report: what is drawn for them, and the files they become."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any, Final

import polars as pl

from wanderers.ephemeris.bodies import Body
from wanderers.report import facts
from wanderers.report.charts import above, season
from wanderers.report.contents import Contents
from wanderers.report.dossier.page import Dossier, dossier_of
from wanderers.report.dossier.sources import FILES, FOLDER, address, season_rows
from wanderers.report.pictures import Job, Picture
from wanderers.report.render import rendered_beside
from wanderers.site.zones import Zone

TEMPLATE: Final = "dossier.html.j2"


def dossier_jobs(contents: Contents) -> list[Job]:
    """Return what is to be drawn for the dossiers."""
    return [job for one in _studied(contents).iter_slices(1) for job in _season_jobs(contents, one)]


def write_dossiers(
    contents: Contents,
    pictures: Sequence[Picture],
    folder: Path,
    zone: Zone | None = None,
) -> tuple[tuple[str, str], ...]:
    """Write a page a season, and the tables behind them, into a folder below a report's.

    Args:
        contents: the report's tables.
        pictures: all that were drawn into ``folder/pictures``.
        folder: of the report; ``seasons/`` is made in it.
        zone: the clock by which local times are given beside UTC.

    Returns:
        names of the table files and what they hold; none where there is no season.
    """
    studied = _studied(contents)
    if studied.is_empty():
        return ()
    (folder / FOLDER).mkdir()
    for file, name, _ in FILES:
        getattr(contents.study, name).write_csv(folder / file)
    drawn = {picture.stem: picture for picture in pictures}
    for row in studied.iter_rows(named=True):
        own = {kind: drawn.get(stem) for kind, stem in stems(row).items()}
        shown = {kind: _with_svg(picture, folder) for kind, picture in own.items() if picture is not None}
        page = dossier_of(season_rows(contents.study, row), shown, contents.kernel, zone)
        (folder / address(row["season_id"])).write_text(rendered(page), encoding="utf-8")
    return tuple((file, holds) for file, _, holds in FILES)


def stems(row: Mapping[str, Any]) -> dict[str, str]:
    """Return the names of a season's pictures, without their endings."""
    day = facts.day(row["station_retrograde_utc"])
    return {kind: f"{row['body']}_{kind}_{day}" for kind in ("path", "above", "curves")}


def rendered(page: Dossier) -> str:
    """Return a dossier as HTML that holds everything it needs."""
    return rendered_beside(page, TEMPLATE, "dossier.css")


def _studied(contents: Contents) -> pl.DataFrame:
    """Return the seasons that have a dossier."""
    return contents.seasons.filter(pl.col("season_id").is_in(list(contents.study.tracks)))


def _season_jobs(contents: Contents, one: pl.DataFrame) -> list[Job]:
    row = one.row(0, named=True)
    season_id, body, names = row["season_id"], Body(row["body"]), stems(row)
    view, track = contents.study.views[season_id], contents.study.tracks[season_id]
    month = facts.spoken_month(row["middle_utc"] or row["station_retrograde_utc"])
    from_above = Picture(
        names["above"],
        f"{body.label} from above, {month}",
        above.above_alt_text(view, one),
        body,
        season_id,
    )
    against_time = Picture(
        names["curves"],
        f"{body.label} through the season, {month}",
        season.season_alt_text(track, one),
        body,
        season_id,
    )
    return [
        Job(from_above, above.draw_above, (view, one)),
        Job(against_time, season.draw_season, (track, one), formats=("svg",)),
    ]


def _with_svg(picture: Picture, folder: Path) -> Picture:
    """Return a picture with its drawing, read from its file where the report's page left it out."""
    if picture.svg:
        return picture
    return replace(picture, svg=(folder / "pictures" / f"{picture.stem}.svg").read_text(encoding="utf-8"))
