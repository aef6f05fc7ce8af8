"""What a report holds before it is written: the request, and every table it asks for."""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Final

import polars as pl

from wanderers import schema
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.dates import iso_strings
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import Query
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits
from wanderers.events.season_study import Study, study_seasons
from wanderers.events.seasons import seasons
from wanderers.events.side_by_side import COLUMNS, side_by_side
from wanderers.events.timeseries import time_series
from wanderers.report.charts.path import path_span
from wanderers.site.almanac import almanac_from_site
from wanderers.site.places import Site
from wanderers.site.rules import Rules

Progress = Callable[[str], None]
"""Told what is being done, in a few words."""

TRACK_STEPS_DAYS: Final = (1.0, 0.25, 1.0 / 24.0, 1.0 / 1_440.0)
"""Steps of a track, the first that gives LEAST_ROWS."""
LEAST_ROWS: Final = 100

PATHS_AT_MOST: Final = 120
"""Seasons whose path is drawn, the first of a span: some thirteen years of all planets."""
DOSSIERS_AT_MOST: Final = 60
"""Seasons that have a dossier, the first of a span: some six years of all planets."""
ROWS_BEYOND: Final = 800
"""Rows of a course beyond the span at most: two years of days, the longest season."""
NAMES_IN_STEM: Final = 3


@dataclass(frozen=True, slots=True)
class Request:
    """What was asked.

    Attributes:
        jd_from: first TT Julian date.
        jd_to: end of the half-open span.
        scale: ``utc`` or ``tt``, the scale in which the span was given.
        bodies: bodies wanted, in the written order.
        kinds: kinds of events wanted.
        frames: frames wanted; the first leads: tracks, paths and pictures are in it.
        stars_for: bodies whose meetings with stars are wanted.
        limits: largest separations.
        site: from where the events are watched; None for the Earth's centre alone.
        rules: what counts as watchable there.
    """

    jd_from: float
    jd_to: float
    scale: str
    bodies: tuple[Body, ...]
    kinds: tuple[Kind, ...]
    frames: tuple[Frame, ...]
    stars_for: tuple[Body, ...] = PLANETS
    limits: Limits = field(default_factory=Limits)
    site: Site | None = None
    rules: Rules = field(default_factory=Rules)

    @property
    def planets(self) -> tuple[Body, ...]:
        """The planets among the bodies wanted."""
        return tuple(body for body in self.bodies if body in PLANETS)

    @property
    def ends(self) -> tuple[str, str]:
        """The ends of the span in the scale it was given in, midnights as bare dates."""
        jd = [self.jd_from, self.jd_to]
        first, last = iso_strings(timescales.jd_utc_from_tt(jd) if self.scale == "utc" else jd).tolist()
        return _shortened(first), _shortened(last)

    @property
    def stem(self) -> str:
        """A readable name made of the span and of what else was chosen."""
        first, last = (end.replace(":", "") for end in self.ends)
        chosen = (
            (self.bodies, len(BODIES), "bodies"),
            (self.kinds, len(Kind), "kinds"),
            (self.frames if self.frames != (Frame.ECLIPTIC,) else (), 0, "frames"),
        )
        extras = [
            "+".join(names) if len(names) <= NAMES_IN_STEM else f"{len(names)}-{noun}"
            for names, of, noun in chosen
            if names and len(names) != of
        ]
        if self.site is not None:
            extras.append(re.sub(r"[^\w.+-]+", "-", self.site.name).strip("-") or "site")
        return "_".join((f"{first}_to_{last}", *extras, *(["tt"] if self.scale == "tt" else [])))


@dataclass(frozen=True, slots=True)
class Contents:
    """All tables of a report.

    Attributes:
        request: what was asked.
        kernel: what it was computed from.
        events: ``schema.EVENT_COLUMNS``, and from a site what it sees of each.
        seasons: ``schema.SEASON_COLUMNS``: those whose retrograde stretch reaches into the span.
        tracks: ``schema.TRACK_COLUMNS`` over the span in the leading frame, by planet.
        definitions: stations and meetings of planets by every definition, ``side_by_side.COLUMNS``.
        arcs: the seasons on the ecliptic of date, for pictures.
        courses: tracks on the ecliptic of date, the Sun's with them, beyond the span as far as seasons reach;
            empty when no planet is wanted.
        paths: tracks against the stars (J2000) through the leading frame's seasons, by ``season_id``;
            PATHS_AT_MOST of them.
        study: what the dossiers of the leading frame's seasons are made of; DOSSIERS_AT_MOST of them.
    """

    request: Request
    kernel: Kernel
    events: pl.DataFrame
    seasons: pl.DataFrame
    tracks: dict[Body, pl.DataFrame]
    definitions: pl.DataFrame
    arcs: pl.DataFrame
    courses: dict[Body, pl.DataFrame]
    paths: dict[str, pl.DataFrame]
    study: Study = field(default_factory=Study)

    def within_span(self, course: pl.DataFrame) -> pl.DataFrame:
        """Return the part of a course that lies in the span."""
        ends = self.request.jd_from, self.request.jd_to
        return course.filter(pl.col("jd_tt").is_between(*ends, closed="left"))


def gather(store: TrackStore, request: Request, progress: Progress = lambda words: None) -> Contents:
    """Compute every table of a report."""
    planets = tuple(body for body in request.planets if body in store.kernel.bodies)
    span, lead = (request.jd_from, request.jd_to), request.frames[0]
    progress("finding events")
    events = _events(store, request)
    progress("measuring seasons")
    frames = tuple({Frame.ECLIPTIC: None} | dict.fromkeys(request.frames))
    found = seasons(store, *span, bodies=planets, frames=frames, touching=True)
    wanted = found.filter(pl.col("frame").is_in([frame.value for frame in request.frames]))
    arcs = found.filter(pl.col("frame") == Frame.ECLIPTIC.value)
    progress("computing tracks")
    step = track_step_days(span[1] - span[0])
    drawn = wanted.filter(pl.col("frame") == lead.value).head(PATHS_AT_MOST)
    compared = (Body.SUN, *planets) if planets else ()
    paths = {season.item(0, "season_id"): path_track(store, season) for season in drawn.iter_slices(1)}
    progress("studying seasons")
    studied = drawn.head(DOSSIERS_AT_MOST)
    instants = {season_id: paths[season_id]["jd_tt"].to_numpy() for season_id in studied["season_id"]}
    return Contents(
        request,
        store.kernel,
        events,
        wanted,
        {body: time_series(store, body, *span, step, lead) for body in planets},
        definitions_of(store, request),
        arcs,
        {body: course_of(store, body, arcs, span, step) for body in compared},
        paths,
        study_seasons(store, studied, instants, span),
    )


def _events(store: TrackStore, request: Request) -> pl.DataFrame:
    if request.site is None:
        return kept_almanac(store, _query(request))
    return almanac_from_site(store, _query(request), request.site, request.rules)


def _query(request: Request) -> Query:
    return Query(
        request.jd_from,
        request.jd_to,
        frozenset(request.kinds),
        frozenset(request.frames),
        Choice(request.bodies, stars_for=request.stars_for, limits=request.limits),
    )


def definitions_of(store: TrackStore, request: Request) -> pl.DataFrame:
    """Return stations and meetings of the planets wanted, by every definition side by side."""
    names = [planet.value for planet in PLANETS]
    query = replace(_query(request), choice=Choice(request.planets, stars_for=()))
    table = side_by_side(store, query) if request.planets else pl.DataFrame(schema=COLUMNS)
    of_planets = pl.col("body").is_in(names) & (pl.col("other").is_null() | pl.col("other").is_in(names))
    return table.filter(of_planets)


def course_of(
    store: TrackStore, body: Body, arcs: pl.DataFrame, span: tuple[float, float], step_days: float
) -> pl.DataFrame:
    """Return a body's track on the ecliptic of date over a span and as far beyond as its seasons reach.

    Its rows stand whole steps from the span's beginning, at most ROWS_BEYOND of them on either side.
    """
    low, high = store.span_jd
    own = arcs.filter(pl.col("body") == body.value)
    marks = own.select(f"{mark}_jd_tt" for mark in schema.SEASON_MARKS).unpivot()["value"].drop_nulls()
    first = max(min([span[0], *marks]) - step_days, low)
    last = min(max([span[1], *marks]) + step_days, high)
    start = span[0] - min(math.floor((span[0] - first) / step_days), ROWS_BEYOND) * step_days
    end = min(last, span[1] + ROWS_BEYOND * step_days)
    return time_series(store, body, start, end, step_days, Frame.ECLIPTIC)


def path_track(store: TrackStore, season: pl.DataFrame) -> pl.DataFrame:
    """Return the track against the stars that the picture of a season (one row) wants, within the kernel."""
    low, high = store.span_jd
    start, end, step = path_span(season)
    body = Body(season.item(0, "body"))
    return time_series(store, body, max(start, low), min(end, high), step, Frame.J2000)


def _shortened(instant: str) -> str:
    """Return an ISO 8601 instant without the zeros at its end."""
    return instant.removesuffix(".000").removesuffix(":00").removesuffix("T00:00")


def track_step_days(span_days: float) -> float:
    """Return the longest usual step that still gives a track of LEAST_ROWS rows."""
    fitting = [step for step in TRACK_STEPS_DAYS if span_days / step >= LEAST_ROWS]
    return fitting[0] if fitting else TRACK_STEPS_DAYS[-1]
