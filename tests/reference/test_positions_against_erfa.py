"""Apparent places against jplephem and ERFA, the open SOFA, over the whole kernel.

Source: JPL's DE440 read by jplephem; light-time, deflection by the Sun, aberration, precession (IAU 2006) and
nutation (IAU 2000A) by the routines of ERFA, composed in tests/oracle/places.py without any of the program's
code.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest

from tests.direct import MAS_PER_RAD, SEMIDIAMETER_OF_SUN_DEG, angle_rad, wrapped_deg
from tests.oracle import places
from wanderers.arrays import Floats
from wanderers.ephemeris.blocks import BLOCK_DAYS, block_start_jd
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

BLOCKS = (2, 18, 33)
"""1600 to 1625, 2001 to 2026 and 2376 to 2401."""

DIRECTION_MAS = 0.02
"""The fit is good to 0.004; TDB - TT by two different series differs by 10 microseconds, which the Moon
turns into 0.006."""

NEAR_SUN_MAS = 0.5
"""Within a degree of the Sun, where deflection magnifies: a difference in distance of 1e-10 counts."""

FRAME_MAS = 0.1
"""Two sets of polynomials for one precession: alike near J2000, 0.02 milliarcseconds apart in 1600 and 2400
in latitude; right ascension magnifies by the cosine of the declination."""


@pytest.fixture(scope="module")
def independent(kernel: Kernel) -> Iterator[places.Sky]:
    with places.open_sky(kernel.path) as opened:
        yield opened


def instants(index: int) -> Floats:
    start = block_start_jd(index)
    return np.sort(np.random.default_rng(100 + index).uniform(start, start + BLOCK_DAYS, 300))


@pytest.mark.parametrize("body", BODIES)
@pytest.mark.parametrize("index", BLOCKS)
def test_apparent_directions(store: TrackStore, independent: places.Sky, index: int, body: Body) -> None:
    jd = instants(index)
    expected = independent.apparent(body.value, jd).T
    sky = Sky(store.tracks(float(jd[0]), float(jd[-1])))
    found = sky.apparent(np.full(jd.size, body.order), jd)[0]
    away = angle_rad(found, expected) * MAS_PER_RAD
    elongation = np.degrees(angle_rad(expected, independent.apparent("sun", jd).T))
    outside = (elongation > 1.0) | (body is Body.SUN)
    assert away[outside].max() < DIRECTION_MAS
    near = ~outside & (elongation > SEMIDIAMETER_OF_SUN_DEG)
    assert away[near].max(initial=0.0) < NEAR_SUN_MAS


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("index", BLOCKS)
def test_longitudes_and_latitudes(
    store: TrackStore, independent: places.Sky, index: int, frame: Frame
) -> None:
    jd = instants(index)
    sky = Sky(store.tracks(float(jd[0]), float(jd[-1])))
    matrix = places.frame_matrix(frame.value, jd)
    for body in (Body.SUN, Body.MOON, Body.MARS, Body.NEPTUNE):
        direction = independent.apparent(body.value, jd)
        target = np.full(jd.size, body.order)
        elongation = np.degrees(angle_rad(direction.T, independent.apparent("sun", jd).T))
        fair = (elongation > 1.0) | (body is Body.SUN)
        longitude = sky.longitude_deg(target, jd, frame)[0] - places.longitude_deg(matrix, direction)
        latitude = sky.latitude_deg(target, jd, frame) - places.latitude_deg(matrix, direction)
        for away in (wrapped_deg(longitude), latitude):
            assert np.abs(away[fair]).max() * 3.6e6 < FRAME_MAS


@pytest.mark.parametrize("index", BLOCKS)
def test_geometric_distances(store: TrackStore, independent: places.Sky, index: int) -> None:
    jd = instants(index)
    sky = Sky(store.tracks(float(jd[0]), float(jd[-1])))
    for body in BODIES:
        found = sky.earth_distance_au(np.full(jd.size, body.order), jd)[0]
        # 0.1 km; the promise is 1 km. TDB by two series differs by 10 microseconds, 0.6 m at 60 km/s.
        np.testing.assert_allclose(found, independent.distance_au(body.value, jd), rtol=0.0, atol=7e-10)
