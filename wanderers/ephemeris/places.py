"""Direct positions from the kernel: what the tracks are fitted to.

Geocentric places with light-time and annual aberration, before gravitational deflection: near the Sun
deflection changes too fast for a short polynomial, while without it every body moves smoothly.
Method: Explanatory Supplement to the Astronomical Almanac, 3rd ed. (2013), sections 7.2.3 and 7.4.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from jplephem.spk import SPK

from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import EARTH_CHAIN, NAIF_CHAINS, Body

C = constants.SPEED_OF_LIGHT_AU_PER_DAY


@dataclass(frozen=True, slots=True)
class Instants:
    """TDB instants as two floats, so that no part of a second is lost: ``day + part``, shape (n,) each."""

    day: Floats
    part: Floats


def barycentric(spk: SPK, chain: tuple[tuple[int, int], ...], at: Instants) -> tuple[Floats, Floats]:
    """Return position (au) and velocity (au/day) from the solar-system barycentre, ICRS, shape (3, n)."""
    position, velocity = np.zeros((3, at.day.size)), np.zeros((3, at.day.size))
    for pair in chain:
        step, rate = spk[pair].compute_and_differentiate(at.day, at.part)
        position += step
        velocity += rate
    return position / constants.AU_KM, velocity / constants.AU_KM


def barycentric_position(spk: SPK, chain: tuple[tuple[int, int], ...], at: Instants) -> Floats:
    """Return the position alone, au, shape (3, n)."""
    steps = [spk[pair].compute(at.day, at.part) for pair in chain]
    return np.asarray(sum(steps) / constants.AU_KM)


@dataclass(frozen=True, slots=True)
class Observer:
    """The Earth's centre at n instants: barycentric position (au) and velocity (au/day), shape (3, n)."""

    at: Instants
    position: Floats
    velocity: Floats


def observer_at(spk: SPK, at: Instants) -> Observer:
    """Return the geocentre's motion."""
    return Observer(at, *barycentric(spk, EARTH_CHAIN, at))


def length(vectors: Floats) -> Floats:
    """Return the lengths of vectors, shape (3, n) to (n,)."""
    return np.asarray(np.sqrt(np.einsum("in,in->n", vectors, vectors)))


def aberrated(direction: Floats, velocity: Floats) -> Floats:
    """Return unit directions, shape (3, n), as an observer with that velocity (au/day) sees them.

    Source: Explanatory Supplement, 3rd ed., eq. 7.40 (special relativity, all orders).
    """
    beta = velocity / C
    inverse_gamma = np.sqrt(1.0 - np.einsum("in,in->n", beta, beta))
    along = np.einsum("in,in->n", direction, beta)
    return np.asarray(
        (inverse_gamma * direction + (1.0 + along / (1.0 + inverse_gamma)) * beta) / (1.0 + along)
    )


def geocentric_place(spk: SPK, body: Body, observer: Observer) -> Floats:
    """Return what a track keeps of a body.

    Args:
        spk: the open kernel.
        body: which body.
        observer: the Earth at n instants.

    Returns:
        shape (4, n): the aberrated direction times the light-time distance (au, GCRS axes), and the geometric
        geocentric distance (au).

    Accuracy: one light-time step from a position and velocity leaves half the acceleration times the
    light-time squared, below 10 km for Mercury, hence below 1 m in the final position.
    """
    chain = NAIF_CHAINS[body]
    now, velocity = barycentric(spk, chain, observer.at)
    relative = now - observer.position
    light_time = length(relative) / C
    for _ in range(2):
        light_time = length(relative - velocity * light_time) / C
    then = barycentric_position(spk, chain, Instants(observer.at.day, observer.at.part - light_time))
    seen = then - observer.position
    distance = length(seen)
    direction = aberrated(seen / distance, observer.velocity)
    return np.vstack([direction * distance, length(relative)])
