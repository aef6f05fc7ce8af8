"""How bodies and stars stand at the dark moments of many evenings: each evening and target looked at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris import appearance
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.site.earth import Vantage, vantage
from wanderers.site.evenings import Evenings
from wanderers.site.look import MOON, Heaven, View, heaven, margins_of, view
from wanderers.site.refraction import refracted_deg
from wanderers.site.rules import Rules
from wanderers.site.topocentric import Sight, horizontal, see_body, see_each, see_fixed
from wanderers.site.twilight import find_crossings, rise_level, steps_for
from wanderers.site.visibility import Margins
from wanderers.site.windows import Bounds, Moments, Stretches, bounding_levels, dark_moments, dark_stretches

RASTER_STEPS: Final = 72
"""Moments looked at in an evening: every twenty minutes from noon, and when the Sun passes its limit."""


@dataclass(frozen=True, slots=True)
class Watch:
    """Who watches from where, on which evenings, and the moments dark enough to look.

    Attributes:
        sky: tracks and stars.
        evenings: n of them.
        rules: what counts as watchable.
        dark: when the Sun is low enough.
        moments: the moments looked at, in order of time.
        first: place in ``moments`` of each evening's first, and their number, shape (n + 1,).
        stretch: the dark stretch that holds each moment, shape (m,).
        sunset_jd: TT, NaN where the Sun does not set, shape (n,).
        sunrise_jd: likewise.
        noon_magnitude: of the bodies at the noons before and after, shape (bodies, 2, n); NaN for those that
            the kernel lacks.
    """

    sky: Sky
    evenings: Evenings
    rules: Rules
    dark: Stretches
    moments: Moments
    first: Ints
    stretch: Ints
    sunset_jd: Floats
    sunrise_jd: Floats
    noon_magnitude: Floats

    @property
    def jd(self) -> Floats:
        """TT of the moments, shape (m,)."""
        return self.moments.over.at.jd

    @property
    def count(self) -> Ints:
        """How many moments each evening has, shape (n,)."""
        return np.diff(self.first)


@dataclass(frozen=True, slots=True)
class Sightings:
    """Targets at all moments of evenings; pairs of evening and target in order of both, p in all.

    Attributes:
        evening: of each pair, shape (p,).
        target: target number of each pair, shape (p,).
        first: place of each pair's first moment in the arrays below, and their length, shape (p + 1,).
        altitude_deg: as seen.
        high: whether it stands high enough and above the site's horizon.
        margin: by how many magnitudes it can be seen; NaN where it is not high.
    """

    evening: Ints
    target: Ints
    first: Ints
    altitude_deg: Floats
    high: Bools
    margin: Floats

    def place_of(self, evening: Ints, target: Ints) -> Ints:
        """Return the place of pairs that are there, shape (k,)."""
        return np.asarray(np.searchsorted(_key(self.evening, self.target), _key(evening, target)))

    def watchable(self) -> Bools:
        """Return whether each target stands high at some moment of its evening, shape (p,)."""
        return np.bincount(self._pair[self.high], minlength=self.target.size) > 0

    def highest_deg(self) -> Floats:
        """Return how high each climbs while it is dark, shape (p,); NaN where it never is."""
        out = np.full(self.target.size, np.nan)
        np.fmax.at(out, self._pair, self.altitude_deg)
        return out

    @property
    def _pair(self) -> Ints:
        return np.repeat(np.arange(self.target.size), np.diff(self.first))


def watch(sky: Sky, evenings: Evenings, rules: Rules, open_to: Stretches | None = None) -> Watch:
    """Return the dark moments of evenings, and when the Sun sets and rises in them.

    Args:
        sky: tracks and stars.
        evenings: which.
        rules: what counts as watchable.
        open_to: hours of each evening, one stretch each, outside which nobody watches; None is always.
    """
    site = evenings.site
    levels = [rise_level(SUN), *bounding_levels(site, [], rules)]
    crossings = find_crossings(sky, site, evenings.grid(steps_for(levels)), levels)
    sun_jd = crossings.jd[crossings.function == 1]
    dark = dark_stretches(sky, Bounds(evenings, (), sun_jd, ()), rules)
    dark = dark if open_to is None else clipped(dark, open_to)
    moments = dark_moments(sky, evenings, dark, RASTER_STEPS)
    rises = crossings.function == 0
    return Watch(
        sky,
        evenings,
        rules,
        dark,
        moments,
        np.searchsorted(moments.evening, np.arange(evenings.count + 1)),
        dark.holding(moments.evening, moments.over.at.jd),
        evenings.first_in(crossings.jd[rises & ~crossings.rising]),
        evenings.first_in(crossings.jd[rises & crossings.rising]),
        _noon_magnitudes(sky, evenings),
    )


def clipped(stretches: Stretches, open_to: Stretches) -> Stretches:
    """Return the parts of stretches within one stretch an evening."""
    start = np.maximum(stretches.start_jd, open_to.start_jd[stretches.evening])
    end = np.minimum(stretches.end_jd, open_to.end_jd[stretches.evening])
    return Stretches(stretches.evening, start, end).chosen(start < end)


def look(watched: Watch, evening: Ints, target: Ints) -> Sightings:
    """Look at targets on evenings.

    Args:
        watched: the moments.
        evening: numbers of evenings, shape (k,), any order, repeated or not.
        target: target numbers, shape (k,).
    """
    keys = np.unique(_key(evening, target))
    evening, target = keys // _TARGETS, keys % _TARGETS
    count = watched.count[evening]
    first = np.concatenate([[0], np.cumsum(count)])
    moment = np.arange(first[-1]) + np.repeat(watched.first[evening] - first[:-1], count)
    pair = np.repeat(np.arange(keys.size), count)
    altitude, margin = np.full((2, moment.size), np.nan)
    high = np.zeros(moment.size, dtype=np.bool_)
    for number in np.unique(target).tolist():
        own = np.flatnonzero(target[pair] == number)
        if own.size:
            parts = _looked_at(watched, number, evening[pair[own]], moment[own])
            altitude[own], high[own], margin[own] = parts
    return Sightings(evening, target, first, altitude, high, margin)


def _looked_at(watched: Watch, target: int, evening: Ints, moment: Ints) -> tuple[Floats, Bools, Floats]:
    """Return altitude, whether it is high, and margin of one target at moments, shape (k,) each."""
    over = watched.moments.over.chosen(moment)
    seen = view(over, _sight(watched, target, evening, over.at), is_moon=target == MOON)
    high = (_above_floor_deg(watched, seen.altitude_deg, seen.place.azimuth_deg) > 0.0) & (target != SUN)
    margin = np.full(moment.size, np.nan)
    if high.any():
        numbers = np.full(int(high.sum()), target)
        brightness = _magnitudes(watched, numbers, evening[high], over.at.jd[high])
        margin[high] = _margins(watched, seen.chosen(high), target == MOON, brightness).least
    return seen.altitude_deg, high, margin


def headroom_deg(watched: Watch, target: Ints, jd: Floats) -> Floats:
    """Return how far targets, one an instant, stand above what is asked of them, shape (n,)."""
    at = vantage(watched.sky, watched.evenings.site, jd)
    place = horizontal(at, see_each(watched.sky, at, target).direction[0])
    altitude = refracted_deg(place.airless_altitude_deg, watched.evenings.site.elevation_m)
    return _above_floor_deg(watched, altitude, place.azimuth_deg)


def _above_floor_deg(watched: Watch, altitude_deg: Floats, azimuth_deg: Floats) -> Floats:
    """Return how far altitudes lie above the least one asked and above the site's horizon, shape (n,)."""
    hills = watched.evenings.site.horizon.altitude_deg(azimuth_deg)
    return np.asarray(altitude_deg - np.maximum(watched.rules.min_altitude_deg, hills))


def look_exactly(watched: Watch, target: Ints, jd: Floats) -> tuple[Heaven, View, Margins, Floats]:
    """Look at one target an instant: lights, view, margins and magnitude, shape (n,)."""
    over = heaven(watched.sky, watched.evenings.site, jd)
    seen = view(over, see_each(watched.sky, over.at, target), is_moon=target == MOON)
    brightness = _magnitudes(watched, target, watched.evenings.index_of(jd), jd)
    return over, seen, _margins(watched, seen, target == MOON, brightness), brightness


def _margins(watched: Watch, seen: View, is_moon: Bools | bool, magnitude: Floats) -> Margins:
    site, criteria = watched.evenings.site, watched.rules.criteria
    return margins_of(seen, magnitude, criteria, site, is_moon=is_moon)


def _sight(watched: Watch, target: int, evening: Ints, at: Vantage) -> Sight:
    """See a target at moments; a star where the middle of each evening has it, right to 0.3 arcseconds."""
    if target < FIRST_STAR:
        return see_body(watched.sky, at, target)
    which, place = np.unique(evening, return_inverse=True)
    middle = watched.evenings.middle_jd[which]
    direction = watched.sky.apparent(np.full(which.size, target), middle)[0]
    return see_fixed(at, direction[:, place])


def _magnitudes(watched: Watch, target: Ints, evening: Ints, jd: Floats) -> Floats:
    """Return magnitudes, one target an instant, of bodies by straight lines between noons, shape (k,)."""
    out = np.full(jd.size, np.nan)
    is_star = target >= FIRST_STAR
    if is_star.any() and watched.sky.catalogue is not None:
        out[is_star] = watched.sky.catalogue.v_mag[target[is_star] - FIRST_STAR]
    body, evening = target[~is_star], evening[~is_star]
    start, end = watched.evenings.start_jd[evening], watched.evenings.end_jd[evening]
    part = (jd[~is_star] - start) / (end - start)
    before, after = watched.noon_magnitude[body, 0, evening], watched.noon_magnitude[body, 1, evening]
    out[~is_star] = before * (1.0 - part) + after * part
    return out


def _noon_magnitudes(sky: Sky, evenings: Evenings) -> Floats:
    """Return the magnitudes of all bodies at the noons around evenings, shape (bodies, 2, n)."""
    held = [
        body.order for body in (*sky.tracks.bodies, *([Body.MOON] if sky.tracks.moon is not None else []))
    ]
    out = np.full((len(BODIES), 2, evenings.count), np.nan)
    jd = np.stack([evenings.start_jd, evenings.end_jd]).ravel()
    targets = np.repeat(held, jd.size)
    found = appearance.magnitude(sky, targets, np.tile(jd, len(held)))
    out[held] = found.reshape(len(held), 2, evenings.count)
    return out


_TARGETS: Final = 1 << 20
"""More than there will ever be targets: evenings and targets make one sortable number."""


def _key(evening: Ints, target: Ints) -> Ints:
    return np.asarray(evening.astype(np.int64) * _TARGETS + target)
