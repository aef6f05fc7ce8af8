"""When in each night a body stands high enough and the Sun low enough, and the best moment of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.events.search import Roots
from wanderers.site.earth import vantage
from wanderers.site.evenings import Evenings
from wanderers.site.look import MOON, Heaven, heaven, margins_of, sun_altitude_deg, view_body
from wanderers.site.places import Site
from wanderers.site.refraction import airless_deg, refracted_deg
from wanderers.site.rules import Rules
from wanderers.site.topocentric import horizontal, see_body
from wanderers.site.twilight import Level, find_crossings, steps_for
from wanderers.site.visibility import merit, verdicts

RASTER_STEPS: Final = 144
"""Moments tried in an evening: every ten minutes from noon, and when the Sun passes its limit. They do not
depend on the altitude limit, so that of two limits the higher one never finds a better moment."""
CLOSER_SAMPLES: Final = 9
"""Moments then tried around the best: two and a half minutes apart."""


@dataclass(frozen=True, slots=True)
class Stretches:
    """Stretches of time in evenings, in order of time, arrays of shape (k,).

    Attributes:
        evening: which evening.
        start_jd: TT.
        end_jd: TT.
    """

    evening: Ints
    start_jd: Floats
    end_jd: Floats

    def chosen(self, keep: Bools | Ints) -> Stretches:
        """Return some of them."""
        return Stretches(self.evening[keep], self.start_jd[keep], self.end_jd[keep])

    def holding(self, evening: Ints, jd: Floats) -> Ints:
        """Return which stretch of its evening holds each moment, shape (m,); -1 where none does."""
        if self.evening.size == 0:
            return np.full(jd.size, -1)
        at = np.maximum(np.searchsorted(self.start_jd, jd, side="right") - 1, 0)
        # Where one stretch ends at a noon and the next begins there, the moment may belong to the former.
        at -= (at > 0) & (self.evening[at] != evening)
        held = (self.evening[at] == evening) & (self.start_jd[at] <= jd) & (jd <= self.end_jd[at])
        return np.where(held, at, -1)


@dataclass(frozen=True, slots=True)
class Moments:
    """Moments of dark enough sky at which bodies are looked at, in order of time, m in all.

    Attributes:
        evening: which evening each belongs to, shape (m,).
        over: Sun and Moon then.
    """

    evening: Ints
    over: Heaven


@dataclass(frozen=True, slots=True)
class Windows:
    """For each evening the best window of one body, and how many there are, arrays of shape (evenings,).

    Attributes:
        start_jd: TT; NaN where there is none.
        best_jd: TT; likewise.
        end_jd: TT; likewise.
        count: windows in the evening.
    """

    start_jd: Floats
    best_jd: Floats
    end_jd: Floats
    count: Ints


@dataclass(frozen=True, slots=True)
class Bounds:
    """Everything that opens or closes a window, found once for all bodies.

    Attributes:
        evenings: the evenings.
        bodies: numbers of the bodies.
        sun_jd: when the Sun passes its highest altitude.
        bodies_jd: when each body passes its lowest.
    """

    evenings: Evenings
    bodies: tuple[int, ...]
    sun_jd: Floats
    bodies_jd: tuple[Floats, ...]


def bounding_levels(site: Site, bodies: Sequence[int], rules: Rules) -> list[Level]:
    """Return the levels that bound windows: the Sun's highest altitude, then each body's lowest."""
    lowest = float(airless_deg(np.array([rules.min_altitude_deg]), site.elevation_m)[0])
    return [Level(SUN, rules.sun_below_deg), *(Level(body, lowest, horizon=site.horizon) for body in bodies)]


def bounds_of(evenings: Evenings, bodies: Sequence[int], crossings: Roots, first: int) -> Bounds:
    """Return the bounds from crossings of many levels, of which ``bounding_levels`` begin at ``first``."""
    jd = [crossings.jd[crossings.function == first + index] for index in range(len(bodies) + 1)]
    return Bounds(evenings, tuple(bodies), jd[0], tuple(jd[1:]))


def dark_stretches(sky: Sky, bounds: Bounds, rules: Rules) -> Stretches:
    """Return when the Sun is low enough."""
    stretches = _between(bounds.evenings, bounds.sun_jd)
    at = vantage(sky, bounds.evenings.site, _middle(stretches))
    return stretches.chosen(sun_altitude_deg(sky, at) < rules.sun_below_deg)


def watchable_stretches(sky: Sky, bounds: Bounds, index: int, rules: Rules) -> Stretches:
    """Return when the Sun is low enough and one of the bodies, by its place in the list, high enough."""
    site = bounds.evenings.site
    stretches = _between(bounds.evenings, bounds.sun_jd, bounds.bodies_jd[index])
    at = vantage(sky, site, _middle(stretches))
    dark = sun_altitude_deg(sky, at) < rules.sun_below_deg
    place = horizontal(at, see_body(sky, at, bounds.bodies[index]).direction[0])
    floor = np.maximum(rules.min_altitude_deg, site.horizon.altitude_deg(place.azimuth_deg))
    high = refracted_deg(place.airless_altitude_deg, site.elevation_m) > floor
    return stretches.chosen(dark & high & (bounds.bodies[index] != SUN))


def body_hours(sky: Sky, evenings: Evenings, body: int, rules: Rules) -> Floats:
    """Return how many hours of each evening a body is high in a dark sky, shape (evenings,)."""
    levels = bounding_levels(evenings.site, [body], rules)
    crossings = find_crossings(sky, evenings.site, evenings.grid(steps_for(levels)), levels)
    found = watchable_stretches(sky, bounds_of(evenings, [body], crossings, 0), 0, rules)
    hours = (found.end_jd - found.start_jd) * 24.0
    return np.asarray(np.bincount(found.evening, weights=hours, minlength=evenings.count))


def dark_moments(sky: Sky, evenings: Evenings, dark: Stretches, steps: int = RASTER_STEPS) -> Moments:
    """Return the moments to be tried: the raster within the dark stretches, and their ends."""
    raster = evenings.raster(steps).ravel()
    evening = np.repeat(np.arange(evenings.count), steps)
    inside = dark.holding(evening, raster) >= 0
    jd = np.concatenate([raster[inside], dark.start_jd, dark.end_jd])
    evening = np.concatenate([evening[inside], dark.evening, dark.evening])
    order = np.lexsort((jd, evening))
    return Moments(evening[order], heaven(sky, evenings.site, jd[order]))


def best_windows(
    sky: Sky, evenings: Evenings, body: int, stretches: Stretches, tried: Moments, rules: Rules
) -> Windows:
    """Return the best window of each evening and its best moment.

    Best is where :func:`wanderers.site.visibility.merit` is greatest: as well seen and as high as can be.
    """
    start, best, end = np.full((3, evenings.count), np.nan)
    out = Windows(start, best, end, np.bincount(stretches.evening, minlength=evenings.count))
    if stretches.evening.size == 0:
        return out
    look = _Look(sky, evenings.site, body, _magnitudes(sky, body, evenings), rules)
    window, scored = _tried(look, stretches, tried)
    order = np.lexsort((scored.jd, -scored.merit, stretches.evening[window]))
    first = order[_first_of_runs(stretches.evening[window][order])]
    kept = stretches.chosen(window[first])
    out.start_jd[kept.evening], out.end_jd[kept.evening] = kept.start_jd, kept.end_jd
    out.best_jd[kept.evening] = _closer(look, kept, scored.chosen(first))
    return out


def highest_deg(sky: Sky, evenings: Evenings, body: int, tried: Moments, wanted: Bools) -> Floats:
    """Return how high a body climbs, as seen, in the dark of wanted evenings, shape (evenings,); else NaN."""
    out = np.full(evenings.count, np.nan)
    some = wanted[tried.evening]
    at = tried.over.at.chosen(some)
    airless = horizontal(at, see_body(sky, at, body).direction[0]).airless_altitude_deg
    np.fmax.at(out, tried.evening[some], refracted_deg(airless, evenings.site.elevation_m))
    return out


@dataclass(frozen=True, slots=True)
class _Magnitudes:
    """A body's magnitude at the noons around evenings: straight lines between them, whatever the window."""

    edges_jd: Floats
    magnitude: Floats

    def at(self, jd: Floats) -> Floats:
        return np.asarray(np.interp(jd, self.edges_jd, self.magnitude))


@dataclass(frozen=True, slots=True)
class _Look:
    """Who looks at what, from where, by which rules."""

    sky: Sky
    site: Site
    body: int
    magnitudes: _Magnitudes
    rules: Rules


@dataclass(frozen=True, slots=True)
class _Scored:
    """Moments with their verdict and merit, shape (k,) each."""

    jd: Floats
    verdict: Ints
    merit: Floats

    def chosen(self, which: Ints) -> _Scored:
        return _Scored(self.jd[which], self.verdict[which], self.merit[which])

    def followed_by(self, other: _Scored) -> _Scored:
        return _Scored(
            np.concatenate([self.jd, other.jd]),
            np.concatenate([self.verdict, other.verdict]),
            np.concatenate([self.merit, other.merit]),
        )


def _scored(look: _Look, over: Heaven) -> _Scored:
    """Judge a body at moments."""
    jd, criteria = over.at.jd, look.rules.criteria
    seen = view_body(look.sky, over, look.body)
    is_moon = look.body == MOON
    margin = margins_of(seen, look.magnitudes.at(jd), criteria, look.site, is_moon=is_moon).least
    verdict = verdicts(margin, criteria, over.sun_altitude_deg)
    return _Scored(jd, verdict, merit(margin, seen.altitude_deg, verdict, criteria))


def _tried(look: _Look, stretches: Stretches, tried: Moments) -> tuple[Ints, _Scored]:
    """Return the window of every moment tried in some window, shape (k,), and how it was judged.

    A window too short to hold a moment of the raster is tried in its middle.
    """
    held = stretches.holding(tried.evening, tried.over.at.jd)
    inside = held >= 0
    window, scored = held[inside], _scored(look, tried.over.chosen(inside))
    empty = np.setdiff1d(np.arange(stretches.evening.size), window)
    if empty.size == 0:
        return window, scored
    middle = heaven(look.sky, look.site, _middle(stretches.chosen(empty)))
    return np.concatenate([window, empty]), scored.followed_by(_scored(look, middle))


def _closer(look: _Look, kept: Stretches, best: _Scored) -> Floats:
    """Return the best instants near the best moments tried that share their verdict, shape (k,)."""
    step = 1.0 / RASTER_STEPS
    parts = np.linspace(-step, step, CLOSER_SAMPLES)
    near = np.clip(best.jd[:, None] + parts, kept.start_jd[:, None], kept.end_jd[:, None])
    scored = _scored(look, heaven(look.sky, look.site, near.ravel()))
    same = scored.verdict.reshape(near.shape) == best.verdict[:, None]
    finer = np.where(same, scored.merit.reshape(near.shape), -np.inf)
    return np.asarray(near[np.arange(best.jd.size), np.argmax(finer, axis=1)])


def _between(evenings: Evenings, *crossings_jd: Floats) -> Stretches:
    """Cut the evenings at instants."""
    cuts = np.unique(np.concatenate([evenings.edges_jd, *crossings_jd]))
    start, end = cuts[:-1], cuts[1:]
    evening = evenings.index_of((start + end) / 2.0)
    return Stretches(evening, start, end).chosen(evening >= 0)


def _magnitudes(sky: Sky, body: int, evenings: Evenings) -> _Magnitudes:
    jd = evenings.edges_jd
    return _Magnitudes(jd, appearance(sky, np.full(jd.size, body), jd).magnitude)


def _middle(stretches: Stretches) -> Floats:
    return np.asarray((stretches.start_jd + stretches.end_jd) / 2.0)


def _first_of_runs(ordered: Ints) -> Bools:
    """Return where a sorted array changes, its first element included."""
    return (
        np.concatenate([[True], ordered[1:] != ordered[:-1]]) if ordered.size else np.zeros(0, dtype=np.bool_)
    )
