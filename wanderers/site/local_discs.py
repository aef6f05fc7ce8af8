"""Occultations and transits as one site has them: least separation, contacts, which limb.

Seconds depend on hills and valleys along the Moon's limb, which are left out: common practice, no source.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import BODIES, EQUATORIAL_RADIUS_KM, SUN_SEMIDIAMETER_AT_1_AU_ARCSEC
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.discs import Gaps, Pairs, contacts, span_of
from wanderers.site.earth import vantage
from wanderers.site.places import Site
from wanderers.site.topocentric import Sight, see_body, see_each

PARALLAX_DEG: Final = 1.35
"""Farther apart from the Earth's centre Moon and star meet nowhere: parallax of 1.02 and the Moon's radius of
0.28 degrees, with a little to spare."""
SEARCH_DAYS: Final = 0.15
"""How far a site's least separation may lie from the Earth's: parallax against the Moon's half degree an hour
gives two hours at most, the site's own turning a little more."""
SEARCH_STEPS: Final = 33
FINER: Final = (1e-3, 1e-4)
"""Steps in days of the parabolas through the least separation: it ends a millisecond from it."""
RADII_AU: Final = np.array([EQUATORIAL_RADIUS_KM[body] for body in BODIES]) / constants.AU_KM


@dataclass(frozen=True, slots=True)
class LocalDiscs:
    """What becomes of pairs of discs at a site, arrays of shape (n,), or (n, 4) by contact.

    Attributes:
        closest_jd: TT of the least separation of the centres.
        separation_deg: then.
        gap_deg: between the limbs then, negative where they overlap.
        contacts_jd: TT of the contacts; NaN where one does not happen.
        by_dark_limb: whether the contact is at the Moon's dark limb; meaningless where it does not happen.
    """

    closest_jd: Floats
    separation_deg: Floats
    gap_deg: Floats
    contacts_jd: Floats
    by_dark_limb: Bools


def local_discs(sky: Sky, site: Site, pairs: Pairs) -> LocalDiscs:
    """Follow pairs around their least geocentric separations.

    Args:
        sky: tracks and stars, half a day around the pairs and more.
        site: from where.
        pairs: the nearer body first (Moon or planet; the Sun for a transit), at their least separations seen
            from the Earth's centre.
    """
    gaps = _gaps_from(sky, site)
    closest = _closest(sky, site, pairs)
    here = Pairs(pairs.first, pairs.second, closest)
    gap = gaps(here, closest)
    out = np.full((closest.size, 4), np.nan)
    met = gap[0] < 0.0
    if met.any():
        out[met] = contacts(gaps, here.chosen(met), span_of(sky))
    apart = _separations(sky, site, pairs, closest)
    return LocalDiscs(closest, apart, gap[0], out, _by_dark_limb(sky, site, pairs, out))


def _closest(sky: Sky, site: Site, pairs: Pairs) -> Floats:
    """Return when pairs are closest as seen from the site, shape (n,)."""
    offsets = np.linspace(-SEARCH_DAYS, SEARCH_DAYS, SEARCH_STEPS)
    rows = np.repeat(np.arange(pairs.jd.size), offsets.size)
    low, high = span_of(sky)
    jd = np.clip((pairs.jd[:, None] + offsets).ravel(), low, high)
    apart = _separations(sky, site, pairs.chosen(rows), jd).reshape(-1, offsets.size)
    best = jd.reshape(apart.shape)[np.arange(apart.shape[0]), np.argmin(apart, axis=1)]
    for step in (2.0 * SEARCH_DAYS / (SEARCH_STEPS - 1), *FINER):
        before, at, after = (
            _separations(sky, site, pairs, np.clip(best + side * step, low, high)) ** 2 for side in (-1, 0, 1)
        )
        bend = before - 2.0 * at + after
        shift = np.divide(before - after, 2.0 * bend, out=np.zeros_like(at), where=bend > 0.0)
        best = best + step * np.clip(shift, -1.0, 1.0)
    return np.asarray(np.clip(best, low, high))


def _gaps_from(sky: Sky, site: Site) -> Gaps:
    def gaps(pairs: Pairs, jd: Floats) -> Floats:
        one, two = _both(sky, site, pairs, jd)
        apart = separation_deg(one.direction[0], two.direction[0])
        first = _semidiameter_deg(pairs.first, one.distance_au)
        second = _semidiameter_deg(pairs.second, two.distance_au)
        return np.asarray(np.stack([apart - (first + second), apart - np.abs(first - second)]))

    return gaps


def _semidiameter_deg(target: Ints, distance_au: Floats) -> Floats:
    """Return angular radii at distances from the site, zero for stars, shape (n,)."""
    body = np.where(target >= FIRST_STAR, SUN, target)
    radius = np.degrees(np.arcsin(RADII_AU[body] / np.maximum(distance_au, RADII_AU[body])))
    sun = SUN_SEMIDIAMETER_AT_1_AU_ARCSEC / constants.ARCSEC_PER_DEG / distance_au
    return np.where(target >= FIRST_STAR, 0.0, np.where(target == SUN, sun, radius))


def _separations(sky: Sky, site: Site, pairs: Pairs, jd: Floats) -> Floats:
    one, two = _both(sky, site, pairs, jd)
    return np.asarray(separation_deg(one.direction[0], two.direction[0]))


def _both(sky: Sky, site: Site, pairs: Pairs, jd: Floats) -> tuple[Sight, Sight]:
    at = vantage(sky, site, jd)
    return see_each(sky, at, pairs.first), see_each(sky, at, pairs.second)


def _by_dark_limb(sky: Sky, site: Site, pairs: Pairs, contacts_jd: Floats) -> Bools:
    """Return whether contacts are at the half of the first body's limb that is turned away from the Sun."""
    out = np.zeros(contacts_jd.shape, dtype=np.bool_)
    row, contact = np.nonzero(np.isfinite(contacts_jd))
    if row.size == 0:
        return out
    jd = contacts_jd[row, contact]
    at = vantage(sky, site, jd)
    centre, met = (see_each(sky, at, target[row]).direction[0] for target in (pairs.first, pairs.second))
    sun = see_body(sky, at, SUN).direction[0]
    toward_met, toward_sun = (_across(centre, other) for other in (met, sun))
    out[row, contact] = np.einsum("in,in->n", toward_met, toward_sun) < 0.0
    return out


def _across(centre: Floats, other: Floats) -> Floats:
    """Return in which direction on the sky one thing lies from another, not of unit length, shape (3, n)."""
    return np.asarray(other - centre * np.einsum("in,in->n", centre, other))
