"""Retrograde seasons: from the first pass over a stretch of longitude to the last."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import constellations, timescales, vectors
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.bodies import BODIES, INNER, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.events import cycles
from wanderers.events.almanac import time_texts
from wanderers.events.catalogue import Query, scene_of
from wanderers.events.scene import Choice, Scene
from wanderers.events.search import Brackets, refine
from wanderers.events.solar_aspects import find_oppositions, find_solar_conjunctions
from wanderers.events.stations import find_stations

PASS_SAMPLES: Final = 400
"""Longitudes at which the three passes are compared: a loop narrower than 1/400 of its arc is a zigzag."""

SEASON_PAD_DAYS: Final = 2600.0
"""How far beyond a span the path is followed: Pluto takes up to 1,700 days from first mark to last, and the
loop before and after must be seen to tell which passage is the first and which the last."""

LOOP_ALLOWANCE: Final = 1.1
"""How much longer, at most, a neighbouring season's arc is taken to be."""

RUN_SAMPLES: Final = 257
"""Instants at which distance and brightness are sampled before their extremum is refined."""


@dataclass(frozen=True, slots=True)
class Turns:
    """Pairs of stations in one frame: shape (n,) each; a season each."""

    body: Ints
    retrograde_jd: Floats
    direct_jd: Floats

    def chosen(self, keep: Bools) -> Turns:
        """Return the seasons where ``keep`` is true."""
        return Turns(self.body[keep], self.retrograde_jd[keep], self.direct_jd[keep])


@dataclass(frozen=True, slots=True)
class Season:
    """What belongs to the seasons of one frame: shape (n,) each, NaN where unknown.

    The run of a season reaches from its first mark to its last, or to its neighbour's station if that comes
    between, as it does for slow planets, whose seasons overlap.
    """

    turns: Turns
    middle_jd: Floats
    first_pass_start_jd: Floats
    third_pass_end_jd: Floats
    run_start_jd: Floats
    run_end_jd: Floats
    retrograde_longitude_deg: Floats
    direct_longitude_deg: Floats

    @property
    def arc_deg(self) -> Floats:
        """How far the planet moves back, positive."""
        return vectors.wrapped_deg(self.retrograde_longitude_deg - self.direct_longitude_deg)

    def chosen(self, keep: Bools) -> Season:
        """Return the seasons where ``keep`` is true."""
        arrays = (getattr(self, name.name) for name in fields(self)[1:])
        return Season(self.turns.chosen(keep), *(values[keep] for values in arrays))


def seasons(
    store: TrackStore,
    jd_from: float,
    jd_to: float,
    *,
    bodies: tuple[Body, ...] = PLANETS,
    frames: tuple[Frame, ...] = (Frame.ECLIPTIC,),
    touching: bool = False,
) -> pl.DataFrame:
    """Return the retrograde seasons of a span, one row a season and frame.

    Args:
        store: the tracks.
        jd_from: first TT Julian date.
        jd_to: end of the half-open span.
        bodies: planets wanted.
        frames: frames wanted.
        touching: also give the seasons whose retrograde stretch only reaches into the span; else a season
            belongs to the span that holds its middle, so that adjoining spans share none.

    Returns:
        table with ``schema.SEASON_COLUMNS``, in order of the retrograde stations.
    """
    low, high = store.span_jd
    start, end = max(jd_from - SEASON_PAD_DAYS, low), min(jd_to + SEASON_PAD_DAYS, high)
    scene = scene_of(
        store, start, end, Query(jd_from, jd_to, frames=frozenset(frames), choice=Choice(bodies))
    )
    middles = _middles(scene)
    parts = []
    for batch in find_stations(scene):
        if batch.frame is None or batch.frame not in frames:
            continue
        turns = paired(batch.body, batch.jd, batch.detail)
        middle = _middle_of(turns, middles)
        inside = (middle >= jd_from) & (middle < jd_to)
        if touching:
            inside = (turns.direct_jd >= jd_from) & (turns.retrograde_jd < jd_to)
        parts.append(
            _table(scene.sky, batch.frame, described(scene, batch.frame, turns, middle).chosen(inside))
        )
    table = pl.concat(parts) if parts else pl.DataFrame(schema=schema.SEASON_COLUMNS)
    return table.sort("station_retrograde_jd_tt", "season_id")


def paired(body: Ints, jd: Floats, is_direct: Ints) -> Turns:
    """Pair every retrograde station with the direct station of the same body that follows it."""
    order = np.lexsort((jd, body))
    body, jd, is_direct = body[order], jd[order], is_direct[order]
    turns_back = (is_direct[:-1] == 0) & (is_direct[1:] == 1) & (body[:-1] == body[1:])
    return Turns(body[:-1][turns_back], jd[:-1][turns_back], jd[1:][turns_back])


def described(scene: Scene, frame: Frame, turns: Turns, middle_jd: Floats) -> Season:
    """Find the marks of seasons on the real path."""
    sky = scene.sky
    retrograde = sky.longitude_deg(turns.body, turns.retrograde_jd, frame)[0]
    direct = sky.longitude_deg(turns.body, turns.direct_jd, frame)[0]
    start, end = np.full(turns.body.size, np.nan), np.full(turns.body.size, np.nan)
    for body in np.unique(turns.body).tolist():
        own = turns.body == body
        start[own], end[own] = _threefold(scene, frame, turns.chosen(own))
    before, after = neighbours(turns)
    run_start = np.fmax(np.where(np.isnan(start), scene.samples.jd[0], start), before)
    run_end = np.fmin(np.where(np.isnan(end), scene.samples.jd[-1], end), after)
    return Season(turns, middle_jd, start, end, run_start, run_end, retrograde, direct)


def _middles(scene: Scene) -> tuple[Ints, Floats]:
    """Return bodies and instants of all oppositions and inferior conjunctions."""
    opposition = find_oppositions(scene)[0]
    conjunction = find_solar_conjunctions(scene)[0]
    inferior = conjunction.chosen(conjunction.detail == conjunction.details.index("inferior"))
    return np.concatenate([opposition.body, inferior.body]), np.concatenate([opposition.jd, inferior.jd])


def _middle_of(turns: Turns, middles: tuple[Ints, Floats]) -> Floats:
    """Return the middle that lies between each season's stations, NaN where there is none."""
    out = np.full(turns.body.size, np.nan)
    for body in np.unique(turns.body).tolist():
        own = turns.body == body
        instants = np.append(np.sort(middles[1][middles[0] == body]), np.inf)
        candidate = instants[np.searchsorted(instants, turns.retrograde_jd[own])]
        out[own] = np.where(candidate < turns.direct_jd[own], candidate, np.nan)
    return out


def _threefold(scene: Scene, frame: Frame, turns: Turns) -> tuple[Floats, Floats]:
    """Return when one body first reaches the longitude of its direct station, and last leaves the other.

    Longitude is unwrapped along the grid. Its running maximum first reaches a level where the longitude
    does; seen from the far end, its running minimum tells when a level is left for good. NaN where the grid,
    which ends with the kernel, begins or ends too near to tell.
    """
    body = int(turns.body[0])
    jd = scene.samples.jd
    path = np.degrees(np.unwrap(np.radians(scene.samples.longitude_deg(body, frame)[0])))
    retrograde = _level(scene, frame, body, turns.retrograde_jd, path)
    direct = _level(scene, frame, body, turns.direct_jd, path)
    reached = np.searchsorted(np.maximum.accumulate(path), direct, side="left")
    left = np.searchsorted(np.minimum.accumulate(path[::-1])[::-1], retrograde, side="right")
    start = _crossing(scene, frame, body, direct, (reached - 1, reached), path)
    end = _crossing(scene, frame, body, retrograde, (left - 1, left), path)
    # Beyond the grid's ends the planet may have been ahead, or behind, by the arc of one more loop.
    arc = LOOP_ALLOWANCE * (retrograde - direct)
    start[(reached == 0) | (path[0] + arc >= direct)] = np.nan
    end[(left == jd.size) | (path[-1] - arc <= retrograde)] = np.nan
    return start, end


def _level(scene: Scene, frame: Frame, body: int, jd: Floats, path: Floats) -> Floats:
    """Return the unwrapped longitude at instants, shape (n,)."""
    longitude = scene.sky.longitude_deg(np.full(jd.size, body), jd, frame)[0]
    near = np.interp(jd, scene.samples.jd, path)
    return np.asarray(near + vectors.wrapped_deg(longitude - near))


def _crossing(
    scene: Scene, frame: Frame, body: int, level: Floats, columns: tuple[Ints, Ints], path: Floats
) -> Floats:
    """Return when the longitude passes each level between two neighbouring samples, shape (n,)."""
    jd = scene.samples.jd
    before, after = (np.clip(column, 0, jd.size - 1) for column in columns)

    def above(row: Ints, at: Floats) -> tuple[Floats, Floats]:
        longitude = scene.sky.longitude_deg(np.full(at.size, body), at, frame, order=1)
        return vectors.wrapped_deg(longitude[0] - level[row]), longitude[1]

    ends = (jd[before], jd[after], path[before] - level, path[after] - level)
    return refine(above, Brackets(np.arange(level.size), *ends, guess=(jd[before] + jd[after]) / 2.0))


def neighbours(turns: Turns) -> tuple[Floats, Floats]:
    """Return the direct station before each season and the retrograde station after it, infinite if none."""
    before, after = np.full(turns.body.size, -np.inf), np.full(turns.body.size, np.inf)
    for body in np.unique(turns.body).tolist():
        own = np.flatnonzero(turns.body == body)
        before[own[1:]] = turns.direct_jd[own[:-1]]
        after[own[:-1]] = turns.retrograde_jd[own[1:]]
    return before, after


def _loops(sky: Sky, frame: Frame, season: Season) -> Bools:
    """Return where the path crosses itself: two of its three passes at one latitude and longitude.

    Each pass is monotonic in longitude, so its latitude is a function of longitude; all three are compared
    at common longitudes, a hundredth of the arc left out at each end, where two passes join.
    """
    turns = season.turns
    if turns.body.size == 0:
        return np.zeros(0, dtype=np.bool_)
    runs = (
        (season.run_start_jd, turns.retrograde_jd),
        (turns.direct_jd, turns.retrograde_jd),
        (turns.direct_jd, season.run_end_jd),
    )
    one, two, three = (_latitudes_along(sky, frame, season, *run) for run in runs)
    return _meet(one, two) | _meet(two, three) | _meet(one, three)


def _latitudes_along(sky: Sky, frame: Frame, season: Season, low_jd: Floats, high_jd: Floats) -> Floats:
    """Return the latitude at common longitudes of a pass from low to high longitude.

    Returns:
        shape (seasons, PASS_SAMPLES), NaN where the pass does not reach.
    """
    count = season.turns.body.size
    jd = low_jd[:, None] + (high_jd - low_jd)[:, None] * np.linspace(0.0, 1.0, PASS_SAMPLES)
    body = np.repeat(season.turns.body, PASS_SAMPLES)
    place = vectors.rotate(sky.rotation(frame, jd.ravel()), sky.apparent(body, jd.ravel()))
    longitude = vectors.longitude_deg(place)[0].reshape(jd.shape)
    latitude = vectors.latitude_deg(place)[0]
    part = vectors.wrapped_deg(longitude - season.direct_longitude_deg[:, None]) / season.arc_deg[:, None]
    wanted = np.linspace(0.01, 0.99, PASS_SAMPLES)
    apart = 10.0 * np.arange(count)[:, None]  # rows set apart, so that one interpolation serves them all
    along = np.maximum.accumulate((part + apart).ravel())
    out = np.interp((wanted + apart).ravel(), along, latitude).reshape(count, PASS_SAMPLES)
    out[(wanted < part[:, :1]) | (wanted > part[:, -1:])] = np.nan
    return np.asarray(out)


def _meet(one: Floats, two: Floats) -> Bools:
    """Return, by row, whether two latitudes change sides anywhere."""
    side = np.sign(one - two)
    return np.asarray((side[:, 1:] * side[:, :-1] < 0.0).any(axis=1))


@dataclass(frozen=True, slots=True)
class Extremes:
    """Closest, brightest and largest within seasons, and the constellations passed: shape (n,) each."""

    closest_au: Floats
    peak_magnitude: Floats
    peak_diameter_arcsec: Floats
    constellations: tuple[str, ...]


def extremes(sky: Sky, season: Season) -> Extremes:
    """Find the extremes over each season's own run, from its first mark to its last.

    Where slow planets' seasons overlap, a run ends at the neighbour's station. Each extremum is the vertex of
    the parabola through the best of RUN_SAMPLES instants and its neighbours: for a run of 100 days that is
    good to metres in a thousand kilometres and to far less than a thousandth of a magnitude.
    """
    count = season.turns.body.size
    fraction = np.linspace(0.0, 1.0, RUN_SAMPLES)
    start, length = season.run_start_jd, season.run_end_jd - season.run_start_jd
    jd = start[:, None] + length[:, None] * fraction
    seen = appearance(sky, np.repeat(season.turns.body, RUN_SAMPLES), jd.ravel())
    distance, magnitude, diameter = (
        values.reshape(count, RUN_SAMPLES)
        for values in (seen.distance_au, seen.magnitude, seen.diameter_arcsec)
    )
    passed = seen.constellation.reshape(count, RUN_SAMPLES)
    names = tuple("+".join(_in_order(row)) for row in passed)
    return Extremes(_least(distance), _least(magnitude), -_least(-diameter), names)


def _in_order(indices: Ints) -> list[str]:
    """Return abbreviations in the order in which a path first enters the constellations."""
    first = {int(index): None for index in indices}
    return [constellations.ABBREVIATIONS[index] for index in first]


def _least(values: Floats) -> Floats:
    """Return the least value of each row, by a parabola through the least sample and its neighbours."""
    row = np.arange(values.shape[0])
    at = np.clip(np.argmin(np.nan_to_num(values, nan=np.inf), axis=1), 1, values.shape[1] - 2)
    before, middle, after = values[row, at - 1], values[row, at], values[row, at + 1]
    bend = before - 2.0 * middle + after
    shift = np.divide(before - after, 2.0 * bend, out=np.zeros_like(bend), where=bend > 0.0)
    inside = np.abs(shift) <= 1.0
    vertex = np.where(inside, middle - 0.25 * (before - after) * shift, np.inf)
    return np.asarray(np.fmin(np.fmin(vertex, middle), np.fmin(before, after)))


def _table(sky: Sky, frame: Frame, season: Season) -> pl.DataFrame:
    """Print the seasons of one frame."""
    turns = season.turns
    names = pl.Series([body.value for body in BODIES])
    inner = pl.Series(np.isin(turns.body, [body.order for body in INNER]))
    most = extremes(sky, season)
    rounds = np.round(cycles.synodic_phase(turns.body, turns.retrograde_jd)).astype(np.int64)
    marks = dict(
        zip(
            schema.SEASON_MARKS,
            (
                season.first_pass_start_jd,
                turns.retrograde_jd,
                season.middle_jd,
                turns.direct_jd,
                season.third_pass_end_jd,
            ),
            strict=True,
        )
    )
    body = names.gather(turns.body)
    middle_kind = pl.Series(["opposition", "inferior_conjunction"]).gather(inner.cast(pl.UInt32))
    table = pl.DataFrame(
        {
            "season_id": body
            + pl.Series([f"-{frame.value}-s{number}" for number in rounds], dtype=pl.String),
            "body": body,
            "frame": pl.repeat(frame.value, turns.body.size, eager=True),
            "middle_kind": middle_kind,
            "arc_deg": season.arc_deg,
            "retrograde_days": turns.direct_jd - turns.retrograde_jd,
            "threefold_days": _nulls(season.third_pass_end_jd - season.first_pass_start_jd),
            "station_retrograde_longitude_deg": season.retrograde_longitude_deg,
            "station_direct_longitude_deg": season.direct_longitude_deg,
            "path_shape": pl.Series(["zigzag", "loop"]).gather(_loops(sky, frame, season).astype(np.uint32)),
            "closest_au": most.closest_au,
            "peak_magnitude": _nulls(most.peak_magnitude),
            "peak_diameter_arcsec": most.peak_diameter_arcsec,
            "constellations": pl.Series(most.constellations, dtype=pl.String),
        }
        | {f"{mark}_jd_tt": _nulls(jd) for mark, jd in marks.items()}
        | {f"{mark}_utc": time_texts(timescales.jd_utc_from_tt(jd), "Z") for mark, jd in marks.items()}
    )
    return table.select(pl.col(name).cast(kind) for name, kind in schema.SEASON_COLUMNS.items())


def _nulls(values: Floats) -> pl.Series:
    return pl.Series(values, nan_to_null=True)
