"""The turning Earth against SOFA's own series (pyerfa) and astropy."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from astropy import units
from astropy.coordinates import EarthLocation

from tests.site.conftest import SkyAt
from tests.site.places import ATOLL, EVERYWHERE, HILL, SUMMIT
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.timescales import jd_ut1_from_tt
from wanderers.site import earth
from wanderers.site.places import Site

MAS = np.radians(1.0 / 3.6e6)


@pytest.mark.parametrize(
    ("year", "tolerance_mas"),
    # Polynomials and three terms of s stand for the full series; they drift apart over centuries.
    [(1900.0, 0.5), (2000.0, 0.5), (2027.0, 0.5), (2099.0, 0.5), (1600.0, 3.0), (2500.0, 6.0)],
)
def test_sidereal_time_is_that_of_sofa(sky_at: SkyAt, year: float, tolerance_mas: float) -> None:
    jd = 2_451_545.0 + (year - 2000.0) * 365.25 + np.linspace(0.0, 340.0, 60)
    equator = sky_at(jd).rotation(Frame.EQUATOR, jd)[0]
    ut1 = jd_ut1_from_tt(jd)
    expected = erfa.gst06a(ut1, np.zeros_like(ut1), jd, np.zeros_like(jd))
    error = (earth.earth_rotation_rad(jd, equator) - expected + np.pi) % (2.0 * np.pi) - np.pi
    assert np.abs(error).max() < tolerance_mas * MAS


@pytest.mark.parametrize("site", EVERYWHERE, ids=lambda site: site.name)
def test_position_on_the_ellipsoid_is_that_of_astropy(site: Site) -> None:
    place = EarthLocation.from_geodetic(
        site.longitude_deg * units.deg, site.latitude_deg * units.deg, site.elevation_m * units.m
    )
    expected_m = [coordinate.to_value(units.m) for coordinate in place.geocentric]
    np.testing.assert_allclose(earth.site_position_au(site) * earth.METRES_PER_AU, expected_m, atol=1e-3)


@pytest.mark.parametrize("site", EVERYWHERE, ids=lambda site: site.name)
def test_north_east_and_up_are_square_to_each_other(site: Site) -> None:
    axes = earth.horizon_axes(site.latitude_deg, site.longitude_deg)
    np.testing.assert_allclose(axes @ axes.T, np.eye(3), atol=1e-15)
    assert np.linalg.det(axes) == pytest.approx(-1.0)  # north, east, up is a left-handed set


def test_up_points_away_from_the_ellipsoid() -> None:
    above = Site("above", HILL.latitude_deg, HILL.longitude_deg, HILL.elevation_m + 1_000.0)
    step_m = (earth.site_position_au(above) - earth.site_position_au(HILL)) * earth.METRES_PER_AU
    up = earth.horizon_axes(HILL.latitude_deg, HILL.longitude_deg)[2]
    np.testing.assert_allclose(step_m, 1_000.0 * up, atol=1e-6)


@pytest.mark.parametrize("site", [HILL, ATOLL, SUMMIT], ids=lambda site: site.name)
def test_rates_are_those_of_the_values(sky_at: SkyAt, site: Site) -> None:
    jd, step = np.array([2_461_500.3, 2_461_600.7]), 1e-3
    at, before, after = (earth.vantage(sky_at(jd), site, jd + shift) for shift in (0.0, -step, step))
    for name in ("to_horizon", "position"):
        slope = (getattr(after, name)[0] - getattr(before, name)[0]) / (2.0 * step)
        # The difference quotient of a sine over 0.36 degrees errs by 7e-6 of it.
        scale = np.abs(slope).max()
        np.testing.assert_allclose(getattr(at, name)[1], slope, atol=2e-5 * scale)


def test_the_ground_moves_east_at_the_published_speed(sky_at: SkyAt) -> None:
    # 465.1 m/s at the equator: 40075.017 km in a sidereal day of 86164.1 s (from memory).
    jd = np.array([2_461_500.3])
    at = earth.vantage(sky_at(jd), Site("shore", 0.0, 20.0, 0.0), jd)
    speed = at.position[1] * earth.METRES_PER_AU / 86_400.0
    np.testing.assert_allclose(at.to_horizon[0, :, :, 0] @ speed[:, 0], [0.0, 465.1, 0.0], atol=0.05)
