"""Perihelia and aphelia: one of each an orbit."""

from __future__ import annotations

from typing import Final

import numpy as np
from jplephem.spk import SPK

from wanderers import processes
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.kernels import open_kernel
from wanderers.ephemeris.orbits import sun_distance
from wanderers.ephemeris.store import TrackStore
from wanderers.events import cycles
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.sampling import GRID_ORIGIN_JD
from wanderers.events.scene import Choice
from wanderers.events.search import Roots, find_roots

STEPS_PER_ORBIT: Final = 64
LONGEST_STEP_DAYS: Final = 16.0
"""The quickest wobble that matters far out is the Sun's motion by Mercury, 88 days."""

SLOPE_STEP_DAYS: Final = 0.25


def find_apsides(store: TrackStore, choice: Choice, jd_from: float, jd_to: float) -> list[Batch]:
    """Find the perihelion and aphelion of every orbit of the chosen planets in a span.

    Of the several extrema that an outer planet's wobbling distance has around one perihelion the deepest is
    meant, so whole orbits are searched as far as the kernel reaches; where it ends within an eighth of an
    orbit of an extremum, a deeper one may lie beyond, and nothing is claimed.
    """
    planets = [body for body in PLANETS if body in choice.bodies and body in store.kernel.bodies]

    def search(body: Body) -> tuple[Floats, Floats]:
        with open_kernel(store.kernel) as spk:
            return _apsides_of(spk, body, jd_from, jd_to, store.span_jd)

    found = list(processes.side_by_side(search, planets))
    return [
        batch(
            kind,
            None,
            np.concatenate([jd[number] for jd in found] or [np.empty(0)]),
            np.repeat([body.order for body in planets], [jd[number].size for jd in found]).astype(np.int64),
        )
        for number, kind in enumerate((Kind.PERIHELION, Kind.APHELION))
    ]


def _apsides_of(
    spk: SPK, body: Body, jd_from: float, jd_to: float, limits: tuple[float, float]
) -> tuple[Floats, Floats]:
    """Return the perihelia and aphelia of one planet in a span."""
    orbit = cycles.anomalistic_days(body)
    low, high = max(jd_from - orbit, limits[0]), min(jd_to + orbit, limits[1])
    roots = _extrema(spk, body, low, high, min(orbit / STEPS_PER_ORBIT, LONGEST_STEP_DAYS), limits)
    distance, _ = sun_distance(spk, body, roots.jd)
    phase = cycles.anomalistic_phase(np.full(roots.jd.size, body.order), roots.jd)
    near = roots.rising
    perihelion = near & _deepest(distance, np.round(phase).astype(np.int64), near)
    aphelion = ~near & _deepest(-distance, np.floor(phase).astype(np.int64), ~near)
    inside = (roots.jd >= jd_from) & (roots.jd < jd_to)
    if body.order >= Body.JUPITER.order:
        inside &= (roots.jd >= limits[0] + orbit / 8.0) & (roots.jd <= limits[1] - orbit / 8.0)
    return roots.jd[perihelion & inside], roots.jd[aphelion & inside]


def _extrema(
    spk: SPK, body: Body, low: float, high: float, step: float, limits: tuple[float, float]
) -> Roots:
    """Find every extremum of the distance; rising roots are minima."""
    first, last = np.floor((low - GRID_ORIGIN_JD) / step), np.ceil((high - GRID_ORIGIN_JD) / step)
    jd = np.unique(np.clip(GRID_ORIGIN_JD + step * np.arange(first, last + 1), *limits))

    def rate(_: Ints, at: Floats) -> tuple[Floats, Floats]:
        ends = np.stack([at - SLOPE_STEP_DAYS, at + SLOPE_STEP_DAYS]).clip(*limits)
        before, after = (sun_distance(spk, body, end)[1] for end in ends)
        return sun_distance(spk, body, at)[1], (after - before) / (ends[1] - ends[0])

    values, slopes = rate(np.zeros(jd.size, dtype=np.int64), jd)
    return find_roots(rate, jd, values[None], slopes[None])


def _deepest(distance: Floats, orbit: Ints, candidate: Bools) -> Bools:
    """Return, among the candidates of each orbit, where the least distance stands."""
    weighed = np.where(candidate, distance, np.inf)
    order = np.lexsort((weighed, orbit))
    first = np.ones(orbit.size, dtype=np.bool_)
    first[1:] = np.diff(orbit[order]) != 0
    out = np.zeros(orbit.size, dtype=np.bool_)
    out[order] = first
    return out & candidate
