"""The catalogue: runs the finders over a span, stretch by stretch, and names what they found."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, Final

import numpy as np

from wanderers import processes
from wanderers.arrays import Bools, Ints
from wanderers.ephemeris.blocks import BLOCK_DAYS, block_start_jd
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.stars import StarCatalogue, ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events import identity, kinds, meetings
from wanderers.events.approaches import APPULSE_DETAILS, find_appulses, find_solar_approaches
from wanderers.events.apsides import find_apsides
from wanderers.events.brilliancy import find_greatest_brilliancies
from wanderers.events.conjunctions import FRAMES as CONJUNCTION_FRAMES
from wanderers.events.conjunctions import find_conjunctions
from wanderers.events.constellation_entries import find_constellation_entries
from wanderers.events.distances import find_perigees_and_apogees
from wanderers.events.gatherings import find_gatherings
from wanderers.events.kinds import Batch, Kind
from wanderers.events.meetings import Meeting
from wanderers.events.nodes import find_nodes
from wanderers.events.ring_plane import find_earth_crossings, find_sun_crossings
from wanderers.events.sampling import grid, sample
from wanderers.events.scene import STEP_DAYS, Choice, Scene
from wanderers.events.solar_aspects import (
    find_moon_phases,
    find_oppositions,
    find_quadratures,
    find_season_points,
    find_solar_conjunctions,
)
from wanderers.events.star_meetings import find_star_meetings
from wanderers.events.stations import find_stations

Finder = Callable[[Scene], list[Batch]]

FINDERS: Final[tuple[tuple[frozenset[Kind], Finder], ...]] = (
    (frozenset({Kind.STATION}), find_stations),
    (frozenset({Kind.OPPOSITION}), find_oppositions),
    (frozenset({Kind.SOLAR_CONJUNCTION}), find_solar_conjunctions),
    (frozenset({Kind.QUADRATURE}), find_quadratures),
    (frozenset({Kind.GREATEST_ELONGATION, Kind.TRANSIT}), find_solar_approaches),
    (frozenset({Kind.PERIGEE, Kind.APOGEE}), find_perigees_and_apogees),
    (frozenset({Kind.CONJUNCTION}), find_conjunctions),
    (frozenset({Kind.APPULSE, Kind.OCCULTATION}), find_appulses),
    (frozenset({Kind.CONJUNCTION, Kind.APPULSE, Kind.OCCULTATION}), find_star_meetings),
    (frozenset({Kind.GREATEST_BRILLIANCY}), find_greatest_brilliancies),
    (frozenset({Kind.GATHERING}), find_gatherings),
    (frozenset({Kind.CONSTELLATION_ENTRY}), find_constellation_entries),
    (frozenset({Kind.NODE}), find_nodes),
    (frozenset({Kind.RING_PLANE_CROSSING}), find_earth_crossings),
    (frozenset({Kind.MOON_PHASE}), find_moon_phases),
    (frozenset({Kind.SEASON_POINT}), find_season_points),
)
"""A new kind of event is a module with one such function, and a line here."""

SlowFinder = Callable[[TrackStore, Choice, float, float], list[Batch]]

SLOW_FINDERS: Final[tuple[tuple[frozenset[Kind], SlowFinder], ...]] = (
    (frozenset({Kind.PERIHELION, Kind.APHELION}), find_apsides),
    (frozenset({Kind.RING_PLANE_CROSSING}), find_sun_crossings),
)
"""Finders of what happens around the Sun: they read the kernel itself, over whole orbits."""

PAD_DAYS: Final = 1100.0
"""How far beyond a span events are looked for, so that a meeting of slow planets, which may take two
years, is always seen whole and its parts are numbered alike in every span."""


@dataclass(frozen=True, slots=True)
class Query:
    """What is asked of the catalogue.

    Attributes:
        jd_from: first TT Julian date.
        jd_to: end of the half-open span.
        kinds: kinds wanted.
        frames: frames wanted, for kinds that have one; events of the ecliptic alone are never left out.
        choice: bodies and limits.
    """

    jd_from: float
    jd_to: float
    kinds: frozenset[Kind] = frozenset(Kind)
    frames: frozenset[Frame] = frozenset({Frame.ECLIPTIC})
    choice: Choice = field(default_factory=Choice)

    @property
    def needs_approaches(self) -> bool:
        """Whether all least separations must be found: to be listed, or to part approaches."""
        compared = Kind.CONJUNCTION in self.kinds and self.frames >= MEETING_FRAMES
        return compared or bool(self.kinds & {Kind.APPULSE, Kind.OCCULTATION})


@dataclass(frozen=True, slots=True)
class Found:
    """A batch and the names of its events.

    Attributes:
        batch: the events.
        rounds: number of the cycle, shape (n,).
        ordinals: number within bodies, detail and cycle, shape (n,).
        meeting: for conjunctions and appulses, the encounter they belong to.
    """

    batch: Batch
    rounds: Ints
    ordinals: Ints
    meeting: Meeting | None = None

    def chosen(self, keep: Bools | slice) -> Found:
        """Return the events where ``keep`` is true, or of a slice."""
        meeting = None if self.meeting is None else self.meeting.chosen(keep)
        return Found(self.batch.chosen(keep), self.rounds[keep], self.ordinals[keep], meeting)


def find_events(store: TrackStore, query: Query) -> list[Found]:
    """Return every event of a span, named; one batch a kind and frame, in order of time."""
    low, high = store.span_jd
    jd_from, jd_to = max(query.jd_from - PAD_DAYS, low), min(query.jd_to + PAD_DAYS, high)
    store.ensure(store.block_indices(jd_from, jd_to))
    batches = _searched(store, query, stretches(store, jd_from, jd_to))
    for found_kinds, finder in SLOW_FINDERS:
        if found_kinds & query.kinds:
            batches += finder(store, query.choice, jd_from, jd_to)
    named = _with_meetings([name_events(batch) for batch in _joined(batches)])
    return [one.chosen(_wanted(one.batch, query)) for one in named if _asked_for(one.batch, query)]


def stretches(store: TrackStore, jd_from: float, jd_to: float) -> list[tuple[float, float]]:
    """Cut a span where the blocks meet: memory stays that of a block, and blocks are worked side by side."""
    starts = [block_start_jd(index) for index in store.block_indices(jd_from, jd_to)]
    return [(max(start, jd_from), min(start + BLOCK_DAYS, jd_to)) for start in starts]


def scene_of(store: TrackStore, jd_from: float, jd_to: float, query: Query) -> Scene:
    """Sample the sky over a stretch and a little beyond."""
    margin = 4.0 * STEP_DAYS
    sky = sky_of(store, jd_from - margin, jd_to + margin)
    jd = grid(jd_from, jd_to, STEP_DAYS, store.span_jd)
    held = [body.order for body in query.choice.concerned() if body in store.kernel.bodies]
    return Scene(sky, sample(sky, jd, held), query.choice, query.frames, query.needs_approaches)


def sky_of(store: TrackStore, jd_from: float, jd_to: float) -> Sky:
    """Return the sky over a span, with the stars that planets meet."""
    return Sky(store.tracks(jd_from, jd_to), stars_met())


def stars_met() -> StarCatalogue:
    """Return the stars and clusters near the ecliptic."""
    return ecliptic_stars()


def _searched(store: TrackStore, query: Query, cuts: Sequence[tuple[float, float]]) -> list[Batch]:
    """Run the wanted finders over every stretch, and join their batches."""
    needed = query.kinds | (MET if query.kinds & MET else frozenset())
    finders = [finder for found_kinds, finder in FINDERS if found_kinds & needed]

    def search(cut: tuple[float, float]) -> list[Batch]:
        scene = scene_of(store, *cut, query)
        return [batch.within(*cut) for finder in finders for batch in finder(scene)]

    return _joined([batch for part in processes.side_by_side(search, cuts) for batch in part])


def _joined(batches: Iterable[Batch]) -> list[Batch]:
    """Join batches of one kind, frame and vocabulary, in order of time."""
    groups: dict[tuple[Kind, Frame | None, tuple[str, ...]], list[Batch]] = {}
    for batch in batches:
        groups.setdefault((batch.kind, batch.frame, batch.details), []).append(batch)
    return [_concatenated(group) for group in groups.values()]


def _concatenated(group: list[Batch]) -> Batch:
    """Join batches of one kind, frame and vocabulary, in order of time."""
    whole = replace(group[0], **{name: _column(group, name) for name in ARRAYS})
    order = np.argsort(whole.jd, kind="stable")
    return replace(whole, **{name: _ordered(getattr(whole, name), order) for name in ARRAYS})


ARRAYS: Final = ("jd", "body", "other", "detail", "contacts_jd", "figure_deg", "entered")


def _column(group: list[Batch], name: str) -> Any:
    parts = [getattr(batch, name) for batch in group]
    return None if parts[0] is None else np.concatenate(parts)


def _ordered(column: Any, order: Ints) -> Any:
    return None if column is None else column[order]


def name_events(batch: Batch) -> Found:
    """Give a batch its names."""
    rounds = identity.round_numbers(batch, stars_met())
    return Found(batch, rounds, identity.ordinals(batch, rounds))


def _with_meetings(named: list[Found]) -> list[Found]:
    """Say of every conjunction and appulse which meeting it belongs to, and mark the quasi ones."""
    conjunctions = [one for one in named if one.batch.kind is Kind.CONJUNCTION]
    appulses = [one for one in named if one.batch.kind is Kind.APPULSE]
    if not conjunctions and not appulses:
        return named
    appulse = appulses[0] if appulses else name_events(NO_APPULSES)
    batches = [one.batch for one in conjunctions]
    laps = [identity.encounters(batch, stars_met()) for batch in (*batches, appulse.batch)]
    laps = meetings.inner_clusters(batches, appulse.batch, laps)
    marked = replace(appulse, batch=meetings.marked_quasi(batches, appulse.batch))
    met = [
        replace(one, meeting=meetings.meetings_of(one.batch, numbers, appulse.batch))
        for one, numbers in zip((*conjunctions, marked), laps, strict=True)
    ]
    met[-1] = met[-1].chosen(marked.batch.detail != meetings.FARTHEST)
    return [one for one in named if one.batch.kind not in MET] + met


def _wanted(batch: Batch, query: Query) -> Bools:
    """Return which events of a batch lie in the span and within the limits."""
    inside = (batch.jd >= query.jd_from) & (batch.jd < query.jd_to)
    if batch.kind is Kind.APPULSE and batch.figure_deg is not None:
        inside &= batch.figure_deg < query.choice.limits.of(batch.body, batch.other)
    return inside


def _asked_for(batch: Batch, query: Query) -> bool:
    return batch.kind in query.kinds and (batch.frame in query.frames or batch.kind not in FRAMED)


FRAMED: Final = frozenset({Kind.STATION, Kind.CONJUNCTION})
"""Kinds that exist in several frames; the others are listed whatever frames are asked."""

MET: Final = frozenset({Kind.CONJUNCTION, Kind.APPULSE})
"""Kinds that make up meetings: searched together, whatever was asked."""

MEETING_FRAMES: Final = frozenset(CONJUNCTION_FRAMES)
NO_APPULSES: Final = kinds.batch(
    Kind.APPULSE,
    None,
    np.empty(0),
    np.empty(0, dtype=np.int64),
    details=APPULSE_DETAILS,
    figure_deg=np.empty(0),
)
