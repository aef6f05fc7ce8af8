"""Saturn's ring plane passing through the Earth and the Sun."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.appearance import triangle
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.kernels import open_kernel
from wanderers.ephemeris.magnitudes import pole_directions
from wanderers.ephemeris.orbits import sun_to_body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.sampling import grid
from wanderers.events.scene import Choice, Scene
from wanderers.events.search import Roots, find_roots

SATURN: Final = Body.SATURN.order
DETAILS: Final = ("earth", "sun")
SUN_STEP_DAYS: Final = 32.0
SLOPE_STEP_DAYS: Final = 0.25

Height = Callable[[Floats], Floats]


def find_earth_crossings(scene: Scene) -> list[Batch]:
    """Find where the Earth stands in the plane of Saturn's rings, as the light received then shows it.

    Light-time is in, aberration is not: it shifts the planet and its rings together.
    """
    if SATURN not in scene.samples.directions or SATURN not in scene.choice.among([Body.SATURN]):
        return []

    def height(jd: Floats) -> Floats:
        return _height(triangle(scene.sky, np.full(jd.size, SATURN), jd).earth_to_body, jd)

    limits = (scene.sky.tracks.start_jd, scene.sky.tracks.end_jd)
    return [_as_batch(_roots(height, scene.samples.jd, limits), DETAILS.index("earth"))]


def find_sun_crossings(store: TrackStore, choice: Choice, jd_from: float, jd_to: float) -> list[Batch]:
    """Find where the Sun stands in the plane of Saturn's rings, Sun and Saturn both at that instant."""
    if Body.SATURN not in choice.bodies or Body.SATURN not in store.kernel.bodies:
        return []
    jd = grid(jd_from, jd_to, SUN_STEP_DAYS, store.span_jd)
    with open_kernel(store.kernel) as spk:

        def height(at: Floats) -> Floats:
            return _height(sun_to_body(spk, Body.SATURN, at)[0], at)

        return [_as_batch(_roots(height, jd, store.span_jd), DETAILS.index("sun")).within(jd_from, jd_to)]


def _roots(height: Height, jd: Floats, limits: tuple[float, float]) -> Roots:
    """Find where a height above the plane is zero, its slope taken by differences."""

    def with_slope(_: Ints, at: Floats) -> tuple[Floats, Floats]:
        before, after = (at - SLOPE_STEP_DAYS).clip(*limits), (at + SLOPE_STEP_DAYS).clip(*limits)
        return height(at), (height(after) - height(before)) / (after - before)

    values, slopes = with_slope(np.zeros(jd.size, dtype=np.int64), jd)
    return find_roots(with_slope, jd, values[None], slopes[None])


def _height(line: Floats, jd: Floats) -> Floats:
    """Return the sine of the angle above Saturn's ring plane of where a line to Saturn comes from."""
    along = (pole_directions(Body.SATURN, jd) * line).sum(axis=0)
    return np.asarray(-along / np.sqrt((line * line).sum(axis=0)))


def _as_batch(roots: Roots, detail: int) -> Batch:
    saturn = np.full(roots.jd.size, SATURN)
    return batch(
        Kind.RING_PLANE_CROSSING,
        None,
        roots.jd,
        saturn,
        detail=np.full(roots.jd.size, detail),
        details=DETAILS,
    )
