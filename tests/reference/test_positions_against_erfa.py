"""Apparent places against jplephem with ERFA (the open SOFA): nothing in common with skyfield.

Source: ERFA 2.0 (IAU 2006/2000A), through the dense search's own places; kernel JPL DE440.
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.oracle.places import open_sky
from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

MAS_PER_DEG = 3.6e6
TOLERANCE_MAS = 1.0  # the promise; light-time, aberration, deflection, precession and nutation all in it
ERAS = ((2_447_892.5, 2_448_900.5), (2_305_447.5, 2_306_400.5), (2_597_641.5, 2_598_600.5))


@pytest.mark.parametrize("era", ERAS, ids=["1990", "1600", "2400"])
@pytest.mark.parametrize("body", BODIES)
def test_direction_and_distance_agree(store: TrackStore, body: Body, era: tuple[float, float]) -> None:
    jd = np.sort(np.random.default_rng(body.order).uniform(*era, 200))
    sky = Sky(store.tracks(*era))
    ours = sky.apparent(np.full(jd.size, body.order), jd)[0]
    sun = sky.apparent(np.zeros(jd.size, dtype=np.int64), jd)[0]
    distance = sky.earth_distance_au(np.full(jd.size, body.order), jd)[0]
    with open_sky(store.kernel.path) as independent:
        theirs = independent.apparent(body.value, jd).T
        geometric = independent.distance_au(body.value, jd)
    off = vectors.separation_deg(ours, theirs) * MAS_PER_DEG
    outside = (vectors.separation_deg(ours, sun) > 0.3) | (body is Body.SUN)
    assert off[outside].max() < TOLERANCE_MAS
    assert np.abs(distance - geometric).max() * 149_597_870.7 < 1.0
