"""Discs that meet: occultations and transits, with their contacts.

A contact is an instant at which the separation of two centres equals the sum (first and fourth) or the
difference (second and third) of the two semidiameters, as seen from the Earth's centre.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.appearance import diameter_arcsec
from wanderers.ephemeris.bodies import SUN_SEMIDIAMETER_AT_1_AU_ARCSEC, Body
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.search import Brackets, refine

OCCULTATION_DETAILS: Final = ("planet", "star", "moon")
TRANSIT_DETAILS: Final = ("mercury", "venus")
DOUBLINGS: Final = 12
SLOPE_STEP_DAYS: Final = 1e-4

EDGE_OF: Final = np.array([0, 1, 1, 0])
"""By contact: 0 where the outer edges touch, 1 where one disc is just inside the other."""

SIDE_OF: Final = np.array([-1.0, -1.0, 1.0, 1.0])
"""By contact: before or after the least separation."""


@dataclass(frozen=True, slots=True)
class Pairs:
    """Pairs of targets at their least separation: shape (n,) each."""

    first: Ints
    second: Ints
    jd: Floats

    def chosen(self, keep: Bools | Ints) -> Pairs:
        """Return the pairs where ``keep`` is true, or of those rows."""
        return Pairs(self.first[keep], self.second[keep], self.jd[keep])


def semidiameter_deg(sky: Sky, target: Ints, jd: Floats) -> Floats:
    """Return the angular radius of one target an instant, zero for stars, shape (n,)."""
    star = target >= FIRST_STAR
    body = np.where(star, SUN, target)
    distance = sky.earth_distance_au(body, jd)[0]
    arcsec = np.where(
        body == SUN, SUN_SEMIDIAMETER_AT_1_AU_ARCSEC / distance, diameter_arcsec(body, distance) / 2.0
    )
    return np.where(star, 0.0, arcsec / constants.ARCSEC_PER_DEG)


def overlapping(sky: Sky, pairs: Pairs) -> Bools:
    """Return whose discs overlap at the least separation."""
    return np.asarray(_gaps(sky, pairs, pairs.jd)[0] < 0.0)


def occultations(sky: Sky, pairs: Pairs) -> Batch:
    """Return the occultations among pairs of Moon, planets and stars at their least separations.

    ``moon``: the Moon hides a planet. ``star``: a planet or the Moon hides a star. ``planet``: one planet
    hides another.
    """
    met = pairs.chosen(overlapping(sky, pairs))
    by_moon = np.where(met.first == Body.MOON.order, 2, 0)
    detail = np.where(met.second >= FIRST_STAR, 1, by_moon)
    return batch(
        Kind.OCCULTATION,
        None,
        met.jd,
        met.first,
        other=met.second,
        detail=detail,
        details=OCCULTATION_DETAILS,
        contacts_jd=contacts(geocentric_gaps(sky), met, span_of(sky)),
    )


def transits(sky: Sky, pairs: Pairs) -> Batch:
    """Return the transits among least separations of the Sun (first) and an inner planet (second)."""
    nearer = (
        sky.earth_distance_au(pairs.second, pairs.jd)[0] < sky.earth_distance_au(pairs.first, pairs.jd)[0]
    )
    met = pairs.chosen(nearer & overlapping(sky, pairs))
    detail = (met.second == Body.VENUS.order).astype(np.int64)
    return batch(
        Kind.TRANSIT,
        None,
        met.jd,
        met.second,
        detail=detail,
        details=TRANSIT_DETAILS,
        contacts_jd=contacts(geocentric_gaps(sky), met, span_of(sky)),
        figure_deg=_separations(sky, met, met.jd),
    )


Gaps = Callable[[Pairs, Floats], Floats]
"""Takes pairs and instants, n of each; returns the separation of their centres less the sum, and less the
difference, of their semidiameters, in degrees, shape (2, n)."""


def contacts(gaps: Gaps, met: Pairs, span_jd: tuple[float, float]) -> Floats:
    """Return the four contacts of overlapping discs, shape (n, 4), NaN where one disc stays outside.

    Args:
        gaps: how far the discs are apart, for whoever looks.
        met: pairs, at their least separations.
        span_jd: outside which nothing is known.
    """
    now = gaps(met, met.jd)
    reach = _reach_days(gaps, met, span_jd)
    pair, contact = np.nonzero(np.stack([now[EDGE_OF[number]] < 0.0 for number in range(4)], axis=1))
    edge, side = EDGE_OF[contact], SIDE_OF[contact]
    far = (met.jd[pair] + side * reach[pair]).clip(*span_jd)

    def gap(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        some, h = met.chosen(pair[row]), SLOPE_STEP_DAYS
        three = Pairs(np.tile(some.first, 3), np.tile(some.second, 3), np.tile(jd, 3))
        at_three = gaps(three, (jd + h * np.array([-1.0, 0.0, 1.0])[:, None]).ravel())
        before, at, after = np.split(at_three, 3, axis=1)
        own = edge[row], np.arange(jd.size)
        return at[own], (after[own] - before[own]) / (2.0 * h)

    gap_now = now[edge, pair]
    gap_far = gaps(met.chosen(pair), far)[edge, np.arange(pair.size)]
    later = side > 0
    brackets = Brackets(
        np.arange(pair.size),
        np.minimum(met.jd[pair], far),
        np.maximum(met.jd[pair], far),
        np.where(later, gap_now, gap_far),
        np.where(later, gap_far, gap_now),
        (met.jd[pair] + far) / 2.0,
    )
    out = np.full((met.jd.size, 4), np.nan)
    out[pair, contact] = refine(gap, brackets)
    return out


def _reach_days(gaps: Gaps, met: Pairs, span_jd: tuple[float, float]) -> Floats:
    """Return how long after (and before) the middle the discs are surely apart, shape (n,)."""
    reach = np.full(met.jd.size, 0.02)
    for _ in range(DOUBLINGS):
        near = np.zeros(met.jd.size, dtype=np.bool_)
        for side in (-1.0, 1.0):
            near |= gaps(met, (met.jd + side * reach).clip(*span_jd))[0] <= 0.0
        if not near.any():
            break
        reach = np.where(near, 2.0 * reach, reach)
    return reach


def span_of(sky: Sky) -> tuple[float, float]:
    """Return between which instants a sky is known, TT."""
    return sky.tracks.start_jd, sky.tracks.end_jd


def geocentric_gaps(sky: Sky) -> Gaps:
    """Return the gaps seen from the Earth's centre."""
    return lambda pairs, jd: _gaps(sky, pairs, jd)


def _gaps(sky: Sky, met: Pairs, jd: Floats) -> Floats:
    """Return separation less the sum, and the difference, of the semidiameters, degrees, shape (2, n)."""
    apart = _separations(sky, met, jd)
    one, two = semidiameter_deg(sky, met.first, jd), semidiameter_deg(sky, met.second, jd)
    return np.stack([apart - (one + two), apart - np.abs(one - two)])


def _separations(sky: Sky, met: Pairs, jd: Floats) -> Floats:
    one, two = sky.pair(met.first, met.second, jd)
    return separation_deg(one[0], two[0])
