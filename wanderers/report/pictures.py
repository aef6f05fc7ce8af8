"""The pictures of a report: which are drawn, on all cores, and how they reach page and folder."""

from __future__ import annotations

import os
import re
import signal
import threading
import urllib.parse
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from functools import partial
from multiprocessing import connection, get_context, parent_process
from pathlib import Path
from typing import Any, Final

import polars as pl
from matplotlib.figure import Figure

from wanderers.ephemeris.bodies import Body
from wanderers.report import facts
from wanderers.report.charts import brightness, longitude, overview, path
from wanderers.report.charts.export import Format, save
from wanderers.report.contents import Contents, Progress

INLINE_BYTES: Final = 4_000_000
"""Pictures that stand in the page itself; what comes after stands in its file only."""
WORTH_WORKERS: Final = 6
"""Fewer pictures are drawn sooner than further processes have started."""
FONTS: Final = "'DejaVu Sans', Verdana, sans-serif"
"""The font that the drawings were measured with, and what comes near it where it is missing."""
SIZE: Final = re.compile(r'<svg[^>]* viewBox="0 0 ([\d.]+) ([\d.]+)"')


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture; drawn once ``svg`` is there.

    Attributes:
        stem: file name without its ending.
        title: what it shows.
        alt: what it says, for those who do not see it.
        body: the planet it is about, None for all.
        season_id: the season it is about, if one.
        svg: the drawing, empty where it stands in its file only, so that the page stays light.
    """

    stem: str
    title: str
    alt: str
    body: Body | None = None
    season_id: str = ""
    svg: str = ""

    @property
    def size(self) -> tuple[int, int]:
        """Width and height of the drawing in its own dots, so that a page can keep room for it."""
        found = SIZE.search(self.svg)
        return (round(float(found[1])), round(float(found[2]))) if found else (0, 0)

    @property
    def source(self) -> str:
        """The drawing as an address that needs no file."""
        return "data:image/svg+xml," + urllib.parse.quote(self.svg, safe=" ;:=/,.()-_!*~$@?+")


@dataclass(frozen=True, slots=True)
class Job:
    """A picture to be drawn, by a function that can be handed to another process; svg among its formats."""

    picture: Picture
    draw: Callable[..., Figure]
    arguments: tuple[Any, ...]
    options: dict[str, Any] = field(default_factory=dict)
    formats: tuple[Format, ...] = ("png", "svg", "pdf")


def draw(
    contents: Contents,
    folder: Path,
    progress: Progress = lambda words: None,
    more: Sequence[Job] = (),
) -> tuple[Picture, ...]:
    """Draw every picture of a report, and ``more`` after them, into a folder, which is made."""
    folder.mkdir()
    wanted = [*jobs(contents), *more]
    drawn = []
    room = INLINE_BYTES
    with _mapping(len(wanted)) as mapped:
        for picture in mapped(partial(drawn_into, folder), wanted):
            room -= len(picture.source)
            drawn.append(picture if room >= 0 else replace(picture, svg=""))
            progress(f"drawing: {len(drawn)} of {len(wanted)} pictures")
    return tuple(drawn)


def jobs(contents: Contents) -> list[Job]:
    """Return what is to be drawn, the most important first."""
    if not contents.tracks:
        return []
    own = [job for body in contents.tracks for job in _planet_jobs(contents, body)]
    drawn = contents.seasons.filter(pl.col("season_id").is_in(list(contents.paths)))
    return [_overview_job(contents), *own, *(_path_job(contents, season) for season in drawn.iter_slices(1))]


def _overview_job(contents: Contents) -> Job:
    tracks = {body: contents.within_span(course) for body, course in contents.courses.items()}
    span = {"span_jd": (contents.request.jd_from, contents.request.jd_to)}
    alt = overview.overview_alt_text(tracks, contents.arcs, contents.events, **span)
    picture = Picture("overview", "Ecliptic longitude of all planets", alt)
    return Job(picture, overview.draw_overview, (tracks, overview.planet_conjunctions(contents.events)), span)


def _planet_jobs(contents: Contents, body: Body) -> list[Job]:
    course, arcs = contents.courses[body], contents.arcs.filter(pl.col("body") == body.value)
    options = {"span_jd": (contents.request.jd_from, contents.request.jd_to)}
    along = Picture(
        f"{body.value}_longitude",
        f"{body.label}: ecliptic longitude",
        longitude.longitude_alt_text(body, course, arcs, **options),
        body,
    )
    bright = Picture(
        f"{body.value}_distance_magnitude_diameter",
        f"{body.label}: distance, magnitude and diameter",
        brightness.brightness_alt_text(body, course, **options),
        body,
    )
    arguments = (body, course, arcs)
    return [
        Job(along, longitude.draw_longitude, arguments, options),
        Job(bright, brightness.draw_brightness, arguments, options),
    ]


def _path_job(contents: Contents, season: pl.DataFrame) -> Job:
    row = season.row(0, named=True)
    body, middle = Body(row["body"]), row["middle_utc"] or row["station_retrograde_utc"]
    picture = Picture(
        f"{body.value}_path_{facts.day(row['station_retrograde_utc'])}",
        f"{body.label}: path among the stars, {facts.spoken_month(middle)}",
        path.path_alt_text(season),
        body,
        row["season_id"],
    )
    return Job(picture, path.draw_path, (contents.paths[row["season_id"]], season))


def drawn_into(folder: Path, job: Job) -> Picture:
    """Draw one picture into its files, and return it with its drawing."""
    save(job.draw(*job.arguments, **job.options), job.picture.stem, folder, formats=job.formats)
    file = folder / f"{job.picture.stem}.svg"
    svg = lean(file.read_text(encoding="utf-8"))
    file.write_text(svg, encoding="utf-8")
    return replace(job.picture, svg=svg)


def lean(svg: str) -> str:
    """Return a drawing without what nobody sees: decimals beyond a hundredth of a dot, notes, blank lines.

    Only tags lose decimals: what stands between them is text that people read.
    """
    bare = re.sub(r"<\?xml.*?\?>|<!DOCTYPE.*?>|<!--.*?-->|<metadata>.*?</metadata>", "", svg, flags=re.DOTALL)
    shorter = re.sub(r"<[^>]+>", lambda tag: re.sub(r"(\d\.\d\d)\d+", r"\1", tag[0]), bare)
    return re.sub(r"\s*\n\s*", "\n", shorter).strip().replace("'DejaVu Sans'", FONTS) + "\n"


Mapping = Callable[[Callable[[Job], Picture], list[Job]], Iterator[Picture]]


@contextmanager
def _mapping(count: int) -> Iterator[Mapping]:
    """Give a ``map`` that works on all cores, or in this process where that is not worth it."""
    workers = min(_cores(), count)
    if workers < 2 or count < WORTH_WORKERS:
        yield map
        return
    # Started afresh: a copy of a process that runs threads, as polars does, may hang.
    pool = ProcessPoolExecutor(workers, get_context("spawn"), initializer=_be_a_worker)
    try:
        yield pool.map
    finally:
        pool.shutdown(cancel_futures=True)


def _cores() -> int:
    """Return how many cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def _be_a_worker() -> None:
    """Leave interrupts to the parent process, and end when it ends."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    parent = parent_process()
    if parent is not None:
        threading.Thread(target=_end_with, args=(parent.sentinel,), daemon=True).start()


def _end_with(sentinel: int) -> None:
    connection.wait([sentinel])
    os._exit(1)
