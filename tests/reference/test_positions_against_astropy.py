"""Apparent places against astropy, on the same kernel.

Source: astropy (get_body, GCRS; ERFA's light-time and aberration). astropy bends the light of planets by the
Sun as if they were stars at infinity, so bodies are compared well away from the Sun, where all deflection
is below 10 milliarcseconds and the difference below 5.
"""

from __future__ import annotations

import numpy as np
import pytest
from astropy.coordinates import get_body, solar_system_ephemeris
from astropy.time import Time
from astropy.utils import iers

from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

SPAN = (2_455_197.5, 2_457_023.5)  # 2010 to 2015
TOLERANCE_MAS = 12.0
FAR_FROM_SUN_DEG = 60.0


@pytest.mark.parametrize("body", [Body.MOON, Body.MARS, Body.JUPITER, Body.SATURN, Body.URANUS, Body.NEPTUNE])
def test_geocentric_directions_agree(store: TrackStore, body: Body) -> None:
    jd = np.sort(np.random.default_rng(body.order).uniform(*SPAN, 60))
    sky = Sky(store.tracks(*SPAN))
    target, sun = np.full(jd.size, body.order), np.zeros(jd.size, dtype=np.int64)
    ours = sky.apparent(target, jd)[0]
    far = vectors.separation_deg(ours, sky.apparent(sun, jd)[0]) > FAR_FROM_SUN_DEG
    kernel = str(store.kernel.path)
    with iers.conf.set_temp("auto_download", False), solar_system_ephemeris.set(kernel):
        seen = get_body(body.value, Time(jd, format="jd", scale="tt"))
    theirs = seen.cartesian.xyz.value
    theirs = theirs / np.linalg.norm(theirs, axis=0)
    off = vectors.separation_deg(ours, theirs)[far] * 3.6e6
    assert off.size > 10
    assert off.max() < TOLERANCE_MAS
