"""What a report holds before it is written: the request, and every table it asks for."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Final

import polars as pl

from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.dates import iso_strings
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.seasons import seasons
from wanderers.events.timeseries import time_series

Progress = Callable[[str], None]
"""Told what is being done, in a few words."""

TRACK_STEPS_DAYS: Final = (1.0, 0.25, 1.0 / 24.0, 1.0 / 1_440.0)
"""Steps of a track, the first that gives LEAST_ROWS."""
LEAST_ROWS: Final = 100

PATHS_AT_MOST: Final = 120
"""Seasons whose path is drawn, the first of a span: some thirteen years of all planets."""
PATH_ROWS: Final = 480
PATH_MARGIN: Final = 0.08
"""Part of a season's length that its path shows before the first pass and after the last."""
NAMES_IN_STEM: Final = 3
HALF_RUN: Final = 0.6
"""Stands for an unknown first or last mark: that part of the retrograde stretch beyond a station."""


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
    """

    jd_from: float
    jd_to: float
    scale: str
    bodies: tuple[Body, ...]
    kinds: tuple[Kind, ...]
    frames: tuple[Frame, ...]

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
        return "_".join((f"{first}_to_{last}", *extras, *(["tt"] if self.scale == "tt" else [])))


@dataclass(frozen=True, slots=True)
class Contents:
    """All tables of a report.

    Attributes:
        request: what was asked.
        kernel: what it was computed from.
        events: ``schema.EVENT_COLUMNS``.
        seasons: ``schema.SEASON_COLUMNS``: those whose retrograde stretch reaches into the span.
        tracks: ``schema.TRACK_COLUMNS`` over the span in the leading frame, by planet.
        longitudes: the same on the ecliptic of date, the Sun with them; empty when no planet is wanted.
        paths: ``schema.TRACK_COLUMNS`` over a whole season in its own frame, by ``season_id``; the leading
            frame's seasons, PATHS_AT_MOST of them.
    """

    request: Request
    kernel: Kernel
    events: pl.DataFrame
    seasons: pl.DataFrame
    tracks: dict[Body, pl.DataFrame]
    longitudes: dict[Body, pl.DataFrame]
    paths: dict[str, pl.DataFrame]


def gather(store: TrackStore, request: Request, progress: Progress = lambda words: None) -> Contents:
    """Compute every table of a report."""
    planets = tuple(body for body in request.planets if body in store.kernel.bodies)
    progress("finding events")
    query = Query(
        request.jd_from,
        request.jd_to,
        frozenset(request.kinds),
        frozenset(request.frames),
        Choice(request.bodies),
    )
    events = almanac(store, query)
    progress("measuring seasons")
    found = seasons(
        store, request.jd_from, request.jd_to, bodies=planets, frames=request.frames, touching=True
    )
    progress("computing tracks")
    step = track_step_days(request.jd_to - request.jd_from)
    lead = request.frames[0]

    def track(body: Body, frame: Frame) -> pl.DataFrame:
        return time_series(store, body, request.jd_from, request.jd_to, step, frame)

    tracks = {body: track(body, lead) for body in planets}
    compared = (Body.SUN, *planets) if planets else ()
    longitudes = {
        body: tracks[body] if lead is Frame.ECLIPTIC and body in tracks else track(body, Frame.ECLIPTIC)
        for body in compared
    }
    drawn = found.filter(pl.col("frame") == lead.value).head(PATHS_AT_MOST)
    paths = {season["season_id"]: path_of(store, season, lead) for season in drawn.iter_rows(named=True)}
    return Contents(request, store.kernel, events, found, tracks, longitudes, paths)


def _shortened(instant: str) -> str:
    """Return an ISO 8601 instant without the zeros at its end."""
    return instant.removesuffix(".000").removesuffix(":00").removesuffix("T00:00")


def track_step_days(span_days: float) -> float:
    """Return the longest usual step that still gives a track of LEAST_ROWS rows."""
    fitting = [step for step in TRACK_STEPS_DAYS if span_days / step >= LEAST_ROWS]
    return fitting[0] if fitting else TRACK_STEPS_DAYS[-1]


def path_of(store: TrackStore, season: dict[str, Any], frame: Frame) -> pl.DataFrame:
    """Return the planet's track from a little before a season's first mark to a little after its last."""
    low, high = store.span_jd
    retrograde, direct = season["station_retrograde_jd_tt"], season["station_direct_jd_tt"]
    run = HALF_RUN * (direct - retrograde)
    start = season["first_pass_start_jd_tt"] or retrograde - run
    end = season["third_pass_end_jd_tt"] or direct + run
    margin = PATH_MARGIN * (end - start)
    start, end = max(start - margin, low), min(end + margin, high)
    return time_series(store, Body(season["body"]), start, end, (end - start) / PATH_ROWS, frame)
