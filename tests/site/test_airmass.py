"""Air mass and what it costs."""

from __future__ import annotations

import numpy as np
import pytest

from wanderers.site.airmass import airmass, dimmed_magnitude, extinction_mag


def test_air_mass_is_one_overhead_and_the_secant_high_up() -> None:
    # The plane-parallel atmosphere, good to half a per cent above 30 degrees (geometry).
    altitude = np.array([90.0, 60.0, 45.0, 30.0])
    np.testing.assert_allclose(airmass(altitude), 1.0 / np.sin(np.radians(altitude)), rtol=5e-3)


def test_there_is_no_air_mass_below_the_horizon() -> None:
    below = airmass(np.array([-0.001, 0.0, 5.0]))
    assert np.isnan(below[0]) and np.isfinite(below[1:]).all()


@pytest.mark.parametrize(
    ("elevation_m", "loss_mag"),
    # Green 1992, International Comet Quarterly 14, 55, table of average extinction by elevation; from memory.
    [(0.0, 0.28), (500.0, 0.24), (1_000.0, 0.21), (2_000.0, 0.16), (3_000.0, 0.13)],
)
def test_extinction_by_elevation_is_the_published_one(elevation_m: float, loss_mag: float) -> None:
    assert extinction_mag(elevation_m) == pytest.approx(loss_mag, abs=0.006)


def test_fifteen_degrees_cost_what_observers_say() -> None:
    # 0.25 magnitudes per air mass: 0.7 magnitudes at 15 degrees against the zenith (common practice, no
    # source).
    low, overhead = dimmed_magnitude(np.array([1.0, 1.0]), np.array([15.0, 90.0]), 0.25)
    assert low - overhead == pytest.approx(0.7, abs=0.05)
