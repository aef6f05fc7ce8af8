"""Apparent places against astropy: GCRS, true ecliptic and true equator of date.

Source: astropy.coordinates.get_body with JPL's DE440, no download of Earth rotation data (geocentric places
need none). Astropy bends the light of a planet as that of a star, infinitely far behind the Sun; for a body
at a finite distance that is too much, by as much as the whole deflection where the planet stands beside or
before the Sun. So the tolerance is that deflection, 4.07 milliarcseconds times the cotangent of half the
elongation, beside what the two computations differ by otherwise. The Sun, whose own light is bent too there,
is left to the comparison with ERFA.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from astropy.coordinates import (
    TETE,
    GeocentricTrueEcliptic,
    SkyCoord,
    get_body,
    solar_system_ephemeris,
)
from astropy.time import Time
from astropy.utils import iers

from tests.direct import MAS_PER_RAD, angle_rad, wrapped_deg
from wanderers.arrays import Floats
from wanderers.constants import SPEED_OF_LIGHT_AU_PER_DAY
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.tracks import EARTH_POSITION

JD_TT = np.sort(np.random.default_rng(12).uniform(2_441_683.5, 2_460_310.5, 250))  # 1973 to 2024
AT_RIGHT_ANGLE_MAS = 4.072
OTHERWISE_MAS = 0.2
"""Astropy iterates light-time to 1e-8 of a day, 0.9 milliseconds: 0.04 milliarcseconds of Mercury's motion,
0.5 of the Moon's; its TDB and nutation (2000A adjusted to 2006) differ by microarcseconds."""


@pytest.fixture(scope="module")
def times(kernel: Kernel) -> Iterator[Time]:
    with (
        iers.conf.set_temp("auto_download", False),
        iers.conf.set_temp("iers_degraded_accuracy", "ignore"),
        solar_system_ephemeris.set(str(kernel.path)),
    ):
        yield Time(JD_TT, format="jd", scale="tt")


@pytest.fixture(scope="module", params=BODIES[1:])
def pair(request: pytest.FixtureRequest, times: Time) -> tuple[Body, SkyCoord]:
    """A body and where astropy sees it. Its names of Mars to Pluto are the barycentres of their systems."""
    return request.param, get_body(request.param.value, times)


@pytest.fixture(scope="module")
def sky(store: TrackStore) -> Sky:
    return Sky(store.tracks(float(JD_TT[0]), float(JD_TT[-1])))


def unit(place: SkyCoord) -> Floats:
    xyz = place.cartesian.xyz.value
    return np.asarray(xyz / np.linalg.norm(xyz, axis=0))


def targets(body: Body) -> np.ndarray:
    return np.full(JD_TT.size, body.order)


@pytest.fixture(scope="module")
def tolerance_mas(pair: tuple[Body, SkyCoord], sky: Sky) -> Floats:
    """See the head of this file; instants within 3 degrees of the Sun are not compared: infinite there."""
    body, place = pair
    elongation = angle_rad(unit(place), sky.apparent(targets(Body.SUN), JD_TT)[0])
    bent = AT_RIGHT_ANGLE_MAS / np.tan(elongation / 2.0)
    limit = OTHERWISE_MAS + bent + (0.6 if body is Body.MOON else 0.0)
    return np.where(elongation > np.radians(3.0), limit, np.inf)


def test_directions_are_astropys(pair: tuple[Body, SkyCoord], sky: Sky, tolerance_mas: Floats) -> None:
    body, place = pair
    away = angle_rad(sky.apparent(targets(body), JD_TT)[0], unit(place)) * MAS_PER_RAD
    assert (away < tolerance_mas).all()


def test_far_from_the_sun_outer_planets_agree_to_a_milliarcsecond(
    pair: tuple[Body, SkyCoord], sky: Sky
) -> None:
    # Beyond 90 degrees of elongation a planet is bent by less than 4, and Uranus to Pluto nearly as stars.
    body, place = pair
    if body not in (Body.URANUS, Body.NEPTUNE, Body.PLUTO):
        pytest.skip("nearer bodies are bent otherwise than stars")
    found = sky.apparent(targets(body), JD_TT)[0]
    far = angle_rad(found, sky.apparent(targets(Body.SUN), JD_TT)[0]) > np.pi / 2.0
    assert (angle_rad(found, unit(place)) * MAS_PER_RAD)[far].max() < 1.0


def test_ecliptic_places_are_astropys(
    pair: tuple[Body, SkyCoord], times: Time, sky: Sky, tolerance_mas: Floats
) -> None:
    body, place = pair
    ecliptic = place.transform_to(GeocentricTrueEcliptic(equinox=times, obstime=times))
    longitude = sky.longitude_deg(targets(body), JD_TT, Frame.ECLIPTIC)[0] - ecliptic.lon.deg
    latitude = sky.latitude_deg(targets(body), JD_TT, Frame.ECLIPTIC) - ecliptic.lat.deg
    # Latitudes stay below 18 degrees: longitudes are magnified by no more than a twentieth.
    assert (np.abs(wrapped_deg(longitude)) * 3.6e6 < 1.06 * tolerance_mas + 0.1).all()
    assert (np.abs(latitude) * 3.6e6 < tolerance_mas + 0.1).all()


def test_equatorial_places_are_astropys(
    pair: tuple[Body, SkyCoord], times: Time, sky: Sky, tolerance_mas: Floats
) -> None:
    body, place = pair
    equator = place.transform_to(TETE(obstime=times))
    ra = sky.longitude_deg(targets(body), JD_TT, Frame.EQUATOR)[0] - equator.ra.deg
    dec = sky.latitude_deg(targets(body), JD_TT, Frame.EQUATOR) - equator.dec.deg
    # Declinations stay below 29 degrees: right ascensions are magnified by a seventh.
    assert (np.abs(wrapped_deg(ra)) * 3.6e6 < 1.15 * tolerance_mas + 0.1).all()
    assert (np.abs(dec) * 3.6e6 < tolerance_mas + 0.1).all()


def test_the_tolerances_would_notice_what_is_left_out(
    pair: tuple[Body, SkyCoord], sky: Sky, tolerance_mas: Floats
) -> None:
    # A second of time, or a hundredth of aberration, is far more than is allowed at most instants.
    body, place = pair
    if body in (Body.MERCURY, Body.VENUS, Body.MARS, Body.MOON):
        second = sky.apparent(targets(body), JD_TT + 1.0 / 86_400.0)[0]
        away = angle_rad(second, unit(place)) * MAS_PER_RAD
        assert np.median(away / tolerance_mas) > 1.0
    velocity_au_per_day = sky.tracks.observer.evaluate(0, JD_TT, EARTH_POSITION, 1)[1]
    unaberrated = unit(place) - 1e-2 * velocity_au_per_day / SPEED_OF_LIGHT_AU_PER_DAY
    away = angle_rad(unaberrated / np.linalg.norm(unaberrated, axis=0), unit(place)) * MAS_PER_RAD
    assert np.median(away / tolerance_mas) > 1.0
