"""For each evening the one moment at which most of several bodies stand up together, and stand best."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, fields
from enum import StrEnum
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.site.earth import Vantage, vantage
from wanderers.site.evenings import Evenings
from wanderers.site.look import MOON, Heaven, View, heaven, margins_of, sun_altitude_deg, view_body
from wanderers.site.refraction import refracted_deg
from wanderers.site.rules import Rules
from wanderers.site.topocentric import horizontal, see_body
from wanderers.site.twilight import find_crossings, steps_for
from wanderers.site.visibility import VERDICTS, Verdict, merit, verdicts
from wanderers.site.windows import Stretches, bounding_levels

RASTER_STEPS: Final = 144
"""Moments tried in an evening, every ten minutes, besides both ends and the middle of every stretch between
which bodies or the Sun pass their limits: so no height and no darkness is missed, however short."""
INSIDE_DAYS: Final = 1.0 / SECONDS_PER_DAY
"""How far from such a limit its end is tried."""
CLOSER_SAMPLES: Final = 9
"""Moments then tried around the best: two and a half minutes apart."""


class Aid(StrEnum):
    """What an observer may use: the bare eye, binoculars, or whatever it takes (height alone counts)."""

    NAKED_EYE = "naked_eye"
    BINOCULARS = "binoculars"
    ANY = "any"

    @property
    def last_verdict(self) -> int:
        """The worst verdict that still counts, as an index into VERDICTS."""
        return {Aid.NAKED_EYE: 0, Aid.BINOCULARS: VERDICTS.index(Verdict.BINOCULARS)}.get(
            self, len(VERDICTS) - 1
        )


class Part(StrEnum):
    """Part of the night: the Sun west of the meridian, east of it, or either."""

    ANY = "any"
    EVENING = "evening"
    MORNING = "morning"


@dataclass(frozen=True, slots=True)
class Wanted:
    """What makes a lineup.

    Attributes:
        bodies: numbers of the bodies that may take part, rising.
        at_least: fewest together.
        rules: least altitude, darkness, what counts as visible.
        aid: with what each body must be visible.
        part: of the night.
    """

    bodies: tuple[int, ...]
    at_least: int = 3
    rules: Rules = field(default_factory=Rules)
    aid: Aid = Aid.NAKED_EYE
    part: Part = Part.ANY


@dataclass(frozen=True, slots=True)
class Together:
    """The best moment of each of n evenings, arrays of shape (n,).

    Attributes:
        count: most bodies up at one moment; 0 where fewer than asked for.
        merit: of the worst placed of them at the best moment; NaN without one.
        jd: the best moment, TT; likewise.
        start_jd: since when no body and no Sun passed its limit; likewise.
        end_jd: until when; likewise.
        evening: whether some moment before the middle of the night will do.
        morning: likewise after it.
    """

    count: Ints
    merit: Floats
    jd: Floats
    start_jd: Floats
    end_jd: Floats
    evening: Bools
    morning: Bools


def chosen(found: Together, which: Ints) -> Together:
    """Return some of the evenings."""
    return Together(*(getattr(found, each.name)[which] for each in fields(Together)))


def joined(parts: Sequence[Together]) -> Together:
    """Return evenings one after the other."""
    return Together(
        *(np.concatenate([getattr(part, each.name) for part in parts]) for each in fields(Together))
    )


@dataclass(frozen=True, slots=True)
class Lineup:
    """Bodies at k moments.

    Attributes:
        over: Sun and Moon then.
        views: of each body wanted.
        magnitude: of each, shape (bodies, k).
        verdict: of each as an index into VERDICTS, shape (bodies, k).
        merit: of each, shape (bodies, k).
        counted: whether it takes part, shape (bodies, k).
    """

    over: Heaven
    views: tuple[View, ...]
    magnitude: Floats
    verdict: Ints
    merit: Floats
    counted: Bools

    @property
    def count(self) -> Ints:
        """How many take part, shape (k,)."""
        return np.asarray(np.count_nonzero(self.counted, axis=0))

    @property
    def least_merit(self) -> Floats:
        """Merit of the worst placed of them, shape (k,)."""
        return np.asarray(np.min(np.where(self.counted, self.merit, np.inf), axis=0))


def best_together(sky: Sky, some: Evenings, wanted: Wanted) -> Together:
    """Return the best moment of each evening."""
    stretches, up = _stretches_with_enough(sky, some, wanted)
    jd, stretch = _moments(some, stretches)
    if jd.size == 0:
        return _nothing(some.count)
    lineup = lineup_at(sky, some, jd, up[:, stretch], wanted)
    early = sun_is_west(lineup.over)
    fits = (lineup.count >= wanted.at_least) & _in_part(early, wanted.part)
    evening = stretches.evening[stretch]
    return _best_of(some.count, stretches, stretch, jd, lineup, fits, evening, early)


def _best_of(
    evenings: int,
    stretches: Stretches,
    stretch: Ints,
    jd: Floats,
    lineup: Lineup,
    fits: Bools,
    evening: Ints,
    early: Bools,
) -> Together:
    out = _nothing(evenings)
    out.evening[evening[fits & early]] = True
    out.morning[evening[fits & ~early]] = True
    places = np.flatnonzero(fits)
    count, least = lineup.count[places], lineup.least_merit[places]
    order = places[np.lexsort((jd[places], -least, -count, evening[places]))]
    first = order[np.append(True, np.diff(evening[order]) > 0)[: order.size]]
    at = evening[first]
    out.count[at], out.merit[at], out.jd[at] = lineup.count[first], lineup.least_merit[first], jd[first]
    out.start_jd[at], out.end_jd[at] = stretches.start_jd[stretch[first]], stretches.end_jd[stretch[first]]
    return out


def _nothing(evenings: int) -> Together:
    merit, jd, start, end = np.full((4, evenings), np.nan)
    no = np.zeros((2, evenings), dtype=np.bool_)
    return Together(np.zeros(evenings, dtype=np.int64), merit, jd, start, end, no[0], no[1])


def _stretches_with_enough(sky: Sky, some: Evenings, wanted: Wanted) -> tuple[Stretches, Bools]:
    """Return dark stretches with enough bodies above their limit, and which, shape (bodies, stretches).

    Nobody passes a limit within a stretch, so its middle tells.
    """
    levels = bounding_levels(some.site, wanted.bodies, wanted.rules)
    crossings = find_crossings(sky, some.site, some.grid(steps_for(levels)), levels)
    cuts = np.unique(np.concatenate([some.start_jd, some.end_jd, crossings.jd]))
    middle = (cuts[:-1] + cuts[1:]) / 2.0
    evening = some.index_of(middle)
    inside = evening >= 0
    at = vantage(sky, some.site, middle[inside])
    up = np.stack([_is_high(sky, at, body, wanted.rules) for body in wanted.bodies])
    enough = np.count_nonzero(up, axis=0) >= wanted.at_least
    enough &= sun_altitude_deg(sky, at) < wanted.rules.sun_below_deg
    stretches = Stretches(evening, cuts[:-1], cuts[1:]).chosen(np.flatnonzero(inside)[enough])
    return stretches, up[:, enough]


def _is_high(sky: Sky, at: Vantage, body: int, rules: Rules) -> Bools:
    """Return whether a body stands above its limit, and above the site's horizon, shape (n,)."""
    place = horizontal(at, see_body(sky, at, body).direction[0])
    floor = np.maximum(rules.min_altitude_deg, at.site.horizon.altitude_deg(place.azimuth_deg))
    return np.asarray(
        (refracted_deg(place.airless_altitude_deg, at.site.elevation_m) > floor) & (body != SUN)
    )


def _moments(some: Evenings, stretches: Stretches) -> tuple[Floats, Ints]:
    """Return the moments to be tried, in order of time, and the stretch of each, shape (m,) each."""
    if stretches.evening.size == 0:
        return np.empty(0), np.empty(0, dtype=np.int64)
    busy = np.unique(stretches.evening)
    raster = some.chosen(busy).raster(RASTER_STEPS).ravel()
    held = stretches.holding(np.repeat(busy, RASTER_STEPS), raster)
    length = stretches.end_jd - stretches.start_jd
    inward = np.minimum(INSIDE_DAYS, length / 4.0)
    own = np.arange(stretches.evening.size)
    ends = (stretches.start_jd + inward, stretches.start_jd + length / 2.0, stretches.end_jd - inward)
    jd = np.concatenate([raster[held >= 0], *ends])
    stretch = np.concatenate([held[held >= 0], own, own, own])
    order = np.argsort(jd, kind="stable")
    return jd[order], stretch[order]


def lineup_at(sky: Sky, some: Evenings, jd: Floats, up: Bools, wanted: Wanted) -> Lineup:
    """Judge every body at moments, shape (k,).

    Args:
        sky: the tracks.
        some: the evenings around the moments.
        jd: TT.
        up: which bodies stand high enough, shape (bodies, k).
        wanted: what makes a lineup.
    """
    over, criteria = heaven(sky, some.site, jd), wanted.rules.criteria
    views = tuple(view_body(sky, over, body) for body in wanted.bodies)
    magnitude = np.stack([_magnitudes(sky, body, some, jd) for body in wanted.bodies])
    margin = np.stack(
        [
            margins_of(seen, magnitude[row], criteria, some.site, is_moon=body == MOON).least
            for row, (body, seen) in enumerate(zip(wanted.bodies, views, strict=True))
        ]
    )
    verdict = verdicts(margin, criteria, over.sun_altitude_deg)
    altitude = np.stack([seen.altitude_deg for seen in views])
    counted = up & (verdict <= wanted.aid.last_verdict)
    return Lineup(over, views, magnitude, verdict, merit(margin, altitude, verdict, criteria), counted)


def _magnitudes(sky: Sky, body: int, some: Evenings, jd: Floats) -> Floats:
    """Return magnitudes by straight lines between those at the noons around evenings, shape (k,)."""
    noons = some.edges_jd
    return np.asarray(np.interp(jd, noons, appearance(sky, np.full(noons.size, body), noons).magnitude))


def sun_is_west(over: Heaven) -> Bools:
    """Return where the night has not yet come to its middle: the Sun west of the meridian, shape (n,)."""
    return np.asarray(horizontal(over.at, over.sun.direction[0]).hour_angle_deg >= 0.0)


def _in_part(early: Bools, part: Part) -> Bools:
    if part is Part.ANY:
        return np.ones_like(early)
    return early if part is Part.EVENING else ~early


def up_within(sky: Sky, some: Evenings, best: Together, wanted: Wanted) -> Bools:
    """Return which bodies stand high enough around the best moments, shape (bodies, n)."""
    at = vantage(sky, some.site, (best.start_jd + best.end_jd) / 2.0)
    return np.stack([_is_high(sky, at, body, wanted.rules) for body in wanted.bodies])


def closer(sky: Sky, some: Evenings, best: Together, up: Bools, wanted: Wanted) -> Floats:
    """Return the best instants near the best moments that hold as many bodies, TT, shape (n,).

    Args:
        sky: the tracks.
        some: n evenings.
        best: their best moments, none NaN.
        up: which bodies stand high enough, shape (bodies, n).
        wanted: what makes a lineup.
    """
    parts = np.linspace(-1.0, 1.0, CLOSER_SAMPLES) / RASTER_STEPS
    inward = np.minimum(INSIDE_DAYS, (best.end_jd - best.start_jd) / 4.0)
    low, high = best.start_jd + inward, best.end_jd - inward
    near = np.clip(best.jd[:, None] + parts, low[:, None], high[:, None])
    lineup = lineup_at(sky, some, near.ravel(), np.repeat(up, CLOSER_SAMPLES, axis=1), wanted)
    as_many = lineup.count.reshape(near.shape) == best.count[:, None]
    as_many &= _in_part(sun_is_west(lineup.over), wanted.part).reshape(near.shape)
    finer = np.where(as_many, lineup.least_merit.reshape(near.shape), -np.inf)
    return np.asarray(near[np.arange(best.jd.size), np.argmax(finer, axis=1)])
