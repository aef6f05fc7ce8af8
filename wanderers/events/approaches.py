"""Extrema of the true angle between two bodies: appulses and greatest elongations.

The angle itself has a corner where two bodies meet head on and is nearly flat in the cosine; half the
square of the chord between the two unit directions has neither fault. Its rate is chord times chord rate.
"""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import BODIES, INNER
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import SUN
from wanderers.ephemeris.vectors import separation_deg, wrapped_deg
from wanderers.events.discs import Pairs, occultations, transits
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.scene import Scene
from wanderers.events.search import Roots, find_roots

APPULSE_DETAILS = ("", "quasi", "farthest")
LARGEST_DISCS_DEG = 0.35
"""No two discs in the sky overlap whose centres are farther apart."""

ELONGATION_DETAILS = ("east", "west")


def find_appulses(scene: Scene) -> list[Batch]:
    """Find all least separations of every chosen pair of Moon and planets, however wide.

    The catalogue leaves out those beyond the limits, after it has numbered them: a name must not depend on
    a limit. The greatest separations between them come along under the detail "farthest": they part one
    approach from the next, and are dropped when that has been used.
    """
    pairs = scene.held_pairs(BODIES[1:])
    pairs = pairs if scene.approaches else scene.named_by_approaches(pairs)
    if pairs.shape[1] == 0:
        return []
    roots = chord_extrema(scene, pairs, np.full(pairs.shape[1], 180.0))
    return appulses_and_occultations(scene, pairs, roots)


def appulses_and_occultations(scene: Scene, pairs: Ints, roots: Roots) -> list[Batch]:
    """Turn extrema of separations into appulses, and those in which discs overlap into occultations too."""
    met = Pairs(pairs[0][roots.function], pairs[1][roots.function], roots.jd)
    apart = separation_of(scene, met.first, met.second, met.jd)
    close = roots.rising & (apart < LARGEST_DISCS_DEG)
    return [
        batch(
            Kind.APPULSE,
            None,
            met.jd,
            met.first,
            other=met.second,
            detail=np.where(roots.rising, 0, APPULSE_DETAILS.index("farthest")),
            details=APPULSE_DETAILS,
            figure_deg=apart,
        ),
        occultations(scene.sky, met.chosen(close)),
    ]


def find_solar_approaches(scene: Scene) -> list[Batch]:
    """Find the greatest elongations of Mercury and Venus, and their transits over the Sun's disc."""
    planets = scene.held(scene.choice.among(INNER))
    if planets.size == 0:
        return []
    pairs = np.stack([np.full(planets.size, SUN), planets])
    roots = chord_extrema(scene, pairs, np.full(planets.size, 180.0))
    met = Pairs(pairs[0][roots.function], pairs[1][roots.function], roots.jd)
    close = roots.rising & (separation_of(scene, met.first, met.second, met.jd) < LARGEST_DISCS_DEG)
    return [_greatest_elongations(scene, met.chosen(~roots.rising)), transits(scene.sky, met.chosen(close))]


def _greatest_elongations(scene: Scene, met: Pairs) -> Batch:
    longitude = scene.sky.longitude_deg(met.second, met.jd, Frame.ECLIPTIC)[0]
    sun = scene.sky.longitude_deg(met.first, met.jd, Frame.ECLIPTIC)[0]
    west = (wrapped_deg(longitude - sun) < 0.0).astype(np.int64)
    return batch(Kind.GREATEST_ELONGATION, None, met.jd, met.second, detail=west, details=ELONGATION_DETAILS)


def separation_of(scene: Scene, first: Ints, second: Ints, jd: Floats) -> Floats:
    """Return the apparent separation of two targets an instant, degrees, shape (n,)."""
    one, two = scene.sky.pair(first, second, jd)
    return separation_deg(one[0], two[0])


def chord_extrema(scene: Scene, pairs: Ints, within_deg: Floats) -> Roots:
    """Find the extrema of the separation of pairs.

    Args:
        scene: where to look.
        pairs: target numbers, shape (2, pairs).
        within_deg: intervals with both ends farther apart than this are passed over, shape (pairs,).

    Returns:
        roots whose function is the pair and which rise at a least separation.
    """
    directions = scene.samples.directions
    sampled = [closing(directions[a], directions[b]) for a, b in pairs.T.tolist()]
    values = np.stack([value for value, _, _ in sampled])
    slopes = np.stack([slope for _, slope, _ in sampled])
    near = np.stack([chord for _, _, chord in sampled]) < 2.0 * np.sin(np.radians(within_deg / 2.0))[:, None]
    usable: Bools = near[:, :-1] | near[:, 1:]

    def rate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        value, slope, _ = closing(*scene.sky.pair(pairs[0][row], pairs[1][row], jd, order=2))
        return value, slope

    return find_roots(rate, scene.samples.jd, values, slopes, usable=usable)


def closing(one: Floats, two: Floats) -> tuple[Floats, Floats, Floats]:
    """Return half the square of the chord's rate, that rate's slope, and the chord, shape (n,) each."""
    chord = one - two
    value = np.einsum("in,in->n", chord[0], chord[1])
    slope = np.einsum("in,in->n", chord[1], chord[1]) + np.einsum("in,in->n", chord[0], chord[2])
    return value, slope, np.sqrt(np.einsum("in,in->n", chord[0], chord[0]))
