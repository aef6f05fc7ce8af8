"""Lineups: runs of evenings on which several bodies stand up at once, and how they then stand."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import kernels
from wanderers.ephemeris.appearance import lit_part
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.site import clock, columns, reasons
from wanderers.site.airmass import dimmed_magnitude
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.ledger import passages
from wanderers.site.lineup_nights import (
    Lineup,
    Part,
    Together,
    Wanted,
    best_together,
    chosen,
    closer,
    joined,
    lineup_at,
    sun_is_west,
    up_within,
)
from wanderers.site.places import Site
from wanderers.site.topocentric import see_body
from wanderers.site.twilight import STEPS_A_DAY, SUN_RISE_DEG, find_crossings, rise_level
from wanderers.site.visibility import VERDICTS

EVENINGS_AT_ONCE: Final = 400


@dataclass(frozen=True, slots=True)
class Runs:
    """Runs of consecutive evenings, each with a place in the list of evenings, shape (runs,)."""

    first: Ints
    best: Ints
    last: Ints


def lineups(
    store: TrackStore,
    site: Site,
    span: tuple[np.datetime64, np.datetime64],
    wanted: Wanted,
) -> pl.DataFrame:
    """Return one row a run of evenings; columns: ``columns.LINEUP_COLUMNS``.

    Args:
        store: the tracks.
        site: from where.
        span: first local date, and the date after the last.
        wanted: what makes a lineup.

    Raises:
        SpanError: an evening outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    whole = evenings(site, *span)
    found = together(store, whole, wanted)
    runs = runs_of(found)
    if runs.first.size == 0:
        return pl.DataFrame(schema=columns.LINEUP_COLUMNS)
    return _table(store, whole, found, runs, wanted)


def together(store: TrackStore, whole: Evenings, wanted: Wanted) -> Together:
    """Return the best moment of each evening, worked a handful at a time.

    Raises:
        SpanError: an evening outside the kernel.
    """
    kernels.require_span(store.kernel, float(whole.start_jd[0]), float(whole.end_jd[-1]))
    parts = []
    for first in range(0, whole.count, EVENINGS_AT_ONCE):
        some = whole.chosen(slice(first, first + EVENINGS_AT_ONCE))
        parts.append(best_together(_sky(store, some), some, wanted))
    return joined(parts)


def runs_of(found: Together) -> Runs:
    """Return the runs of evenings that have a moment, and the best evening of each.

    Best is the evening with most bodies; of several the one on which the worst placed stands best.
    """
    has = np.concatenate([[False], found.count > 0, [False]])
    (turns,) = np.nonzero(has[1:] != has[:-1])
    first, after = turns[::2], turns[1::2]
    (evening,) = np.nonzero(found.count)
    run = np.searchsorted(first, evening, side="right") - 1
    order = np.lexsort((evening, -found.merit[evening], -found.count[evening], run))
    best = evening[order][np.searchsorted(run[order], np.arange(first.size))]
    return Runs(first, best, after - 1)


def _sky(store: TrackStore, some: Evenings) -> Sky:
    return Sky(store.tracks(float(some.start_jd[0]), float(some.end_jd[-1])))


@dataclass(frozen=True, slots=True)
class _Scene:
    """The evenings at one end of every run, or at their best: shape (runs,) each."""

    sky: Sky
    evenings: Evenings
    jd: Floats
    lineup: Lineup


def _scene(sky: Sky, whole: Evenings, found: Together, at: Ints, wanted: Wanted) -> _Scene:
    """Look again, closer, at chosen evenings."""
    some, best = whole.chosen(at), chosen(found, at)
    up = up_within(sky, some, best, wanted)
    jd = closer(sky, some, best, up, wanted)
    return _Scene(sky, some, jd, lineup_at(sky, some, jd, up, wanted))


def _table(store: TrackStore, whole: Evenings, found: Together, runs: Runs, wanted: Wanted) -> pl.DataFrame:
    sky = _sky(store, whole)
    best, first, last = (_scene(sky, whole, found, at, wanted) for at in (runs.best, runs.first, runs.last))
    table = pl.DataFrame(
        _frame(whole, found, runs)
        | _moment("best", best)
        | _moment("first", first)
        | _moment("last", last)
        | {"bodies": _names(best.lineup, wanted)}
        | {f"{name}_bodies": _names(one.lineup, wanted) for name, one in (("first", first), ("last", last))}
        | _heights(best, wanted)
        | _arc(best, wanted)
        | _light(best, wanted)
    )
    table = table.with_columns(caution=reasons.caution(wanted.rules))
    return columns.arranged(table, columns.LINEUP_COLUMNS)


def _frame(whole: Evenings, found: Together, runs: Runs) -> dict[str, pl.Series]:
    """Return which evenings, and how many of what."""
    days = pl.Series(np.datetime_as_string(whole.days))
    evening, morning, most = (
        _sum_over(runs, values) for values in (found.evening, found.morning, _is_most(found, runs))
    )
    return {
        "first_evening": days.gather(runs.first),
        "last_evening": days.gather(runs.last),
        "best_evening": days.gather(runs.best),
        "evenings": pl.Series(runs.last - runs.first + 1),
        "body_count": pl.Series(found.count[runs.best]),
        "evenings_with_most": pl.Series(most),
        "evenings_before_midnight": pl.Series(evening),
        "evenings_after_midnight": pl.Series(morning),
        "cut_at_start": pl.Series(runs.first == 0),
        "cut_at_end": pl.Series(runs.last == whole.count - 1),
        "site": pl.repeat(whole.site.name, runs.first.size, eager=True),
        "zone": pl.repeat(whole.zone.name, runs.first.size, eager=True),
    }


def _is_most(found: Together, runs: Runs) -> Bools:
    """Return on which evenings as many are up as on the best of their run."""
    most = np.zeros(found.count.size, dtype=np.int64)
    most[runs.first] = found.count[runs.best]
    start = np.zeros_like(most)
    start[runs.first] = runs.first
    most = most[np.maximum.accumulate(start)]
    return np.asarray((found.count > 0) & (found.count == most))


def _sum_over(runs: Runs, values: Bools) -> Ints:
    total = np.concatenate([[0], np.cumsum(values)])
    return np.asarray(total[runs.last + 1] - total[runs.first])


def _moment(name: str, scene: _Scene) -> dict[str, pl.Series]:
    return {
        f"{name}_utc": clock.utc_texts(scene.jd),
        f"{name}_local": clock.local_texts(scene.evenings.zone, scene.jd),
    }


def _names(lineup: Lineup, wanted: Wanted) -> pl.Series:
    """Return the bodies that take part, joined by ``+``."""
    names = np.array([BODIES[body].value for body in wanted.bodies])
    return pl.Series(["+".join(names[row].tolist()) for row in lineup.counted.T], dtype=pl.String)


def _heights(scene: _Scene, wanted: Wanted) -> dict[str, pl.Series]:
    """Return the lowest and the highest of them, and where every one stands, in words."""
    lineup = scene.lineup
    names = np.array([BODIES[body].value for body in wanted.bodies])
    altitude = np.stack([view.altitude_deg for view in lineup.views])
    low = np.where(lineup.counted, altitude, np.inf)
    high = np.where(lineup.counted, altitude, -np.inf)
    loss = wanted.rules.criteria.extinction_at(scene.evenings.site.elevation_m)
    dimmed = dimmed_magnitude(lineup.magnitude, np.maximum(altitude, 0.0), loss)
    faint = np.where(lineup.counted, dimmed, -np.inf)
    worst = np.max(np.where(lineup.counted, lineup.verdict, 0), axis=0)
    return {
        "lowest_body": pl.Series(names[np.argmin(low, axis=0)]),
        "lowest_altitude_deg": pl.Series(np.min(low, axis=0)),
        "highest_body": pl.Series(names[np.argmax(high, axis=0)]),
        "highest_altitude_deg": pl.Series(np.max(high, axis=0)),
        "faintest_body": pl.Series(names[np.argmax(faint, axis=0)]),
        "faintest_dimmed_magnitude": pl.Series(np.max(faint, axis=0), nan_to_null=True),
        "verdict": pl.Series([VERDICTS[index].value for index in worst.tolist()]),
        "places": _places(lineup, names.tolist(), altitude),
    }


def _places(lineup: Lineup, names: Sequence[str], altitude: Floats) -> pl.Series:
    """Say where every body stands, as ``venus 21 degrees up in the west``, in order of azimuth."""
    azimuth = np.stack([view.place.azimuth_deg for view in lineup.views])
    point = compass_point(azimuth)
    texts = []
    for column in range(altitude.shape[1]):
        own = np.flatnonzero(lineup.counted[:, column])
        start = azimuth[_left_end(azimuth[own, column], own), column]
        order = own[np.argsort((azimuth[own, column] - start) % 360.0)]
        words = [
            f"{names[row]} {altitude[row, column]:.0f} degrees up in the {POINTS[point[row, column]]}"
            for row in order.tolist()
        ]
        texts.append("; ".join(words))
    return pl.Series(texts, dtype=pl.String)


def _left_end(azimuth_deg: Floats, rows: Ints) -> int:
    """Return the row after the widest gap around the horizon: the leftmost for who faces the others."""
    order = np.argsort(azimuth_deg)
    ahead = azimuth_deg[order]
    gap = (ahead - np.roll(ahead, 1)) % 360.0 if ahead.size > 1 else np.zeros(1)
    return int(rows[order[np.argmax(gap)]])


def _arc(scene: _Scene, wanted: Wanted) -> dict[str, pl.Series]:
    """Return the widest angle between two of them, and the two, the left one first."""
    lineup, over = scene.lineup, scene.lineup.over
    direction = [see_body(scene.sky, over.at, body).direction[0] for body in wanted.bodies]
    pairs = np.array(list(combinations(range(len(wanted.bodies)), 2)))
    apart = np.stack(
        [
            np.where(lineup.counted[a] & lineup.counted[b], separation_deg(direction[a], direction[b]), -1.0)
            for a, b in pairs.tolist()
        ]
    )
    widest = np.argmax(apart, axis=0)
    azimuth = np.stack([view.place.azimuth_deg for view in lineup.views])
    column = np.arange(widest.size)
    one, two = pairs[widest].T
    turned = (azimuth[two, column] - azimuth[one, column]) % 360.0 > 180.0
    left, right = np.where(turned, two, one), np.where(turned, one, two)
    names, points = np.array([BODIES[body].value for body in wanted.bodies]), pl.Series(POINTS)
    return {
        "arc_deg": pl.Series(apart[widest, column]),
        "from_body": pl.Series(names[left]),
        "from_compass": points.gather(pl.Series(compass_point(azimuth[left, column]))),
        "to_body": pl.Series(names[right]),
        "to_compass": points.gather(pl.Series(compass_point(azimuth[right, column]))),
    }


def _light(scene: _Scene, wanted: Wanted) -> dict[str, pl.Series]:
    """Return Sun and Moon, and what a caution needs."""
    some, over = scene.evenings, scene.lineup.over
    roots = find_crossings(scene.sky, some.site, some.grid(STEPS_A_DAY), [rise_level(SUN)])
    sunset = passages(some, roots.jd[~roots.rising]).first_jd
    sunrise = passages(some, roots.jd[roots.rising]).first_jd
    near = np.stack([view.lights.sun_separation_deg for view in scene.lineup.views])
    part = np.where(sun_is_west(over), Part.EVENING.value, Part.MORNING.value)
    size = scene.jd.size
    return {
        "sun_altitude_deg": pl.Series(over.sun_altitude_deg),
        "morning_or_evening": pl.Series(part.tolist(), dtype=pl.String),
        "elongation_deg": pl.Series(np.min(np.where(scene.lineup.counted, near, np.inf), axis=0)),
        "moon_altitude_deg": pl.Series(over.moon_altitude_deg, nan_to_null=True),
        "moon_illuminated": pl.Series(lit_part(over.moon_phase_angle_deg)).fill_nan(None),
        "sunset_local": clock.local_texts(some.zone, sunset),
        "sunrise_local": clock.local_texts(some.zone, sunrise),
        "sunset_clock": clock.local_minutes(some.zone, sunset),
        "sunrise_clock": clock.local_minutes(some.zone, sunrise),
        "sun_up": pl.Series(over.sun_altitude_deg > SUN_RISE_DEG),
        "best_jd": pl.Series(scene.jd),
        "body": pl.repeat("several", size, dtype=pl.String, eager=True),
    }
