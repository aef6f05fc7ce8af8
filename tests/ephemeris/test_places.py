"""Direct positions: composed from the kernel, with light-time and aberration, without deflection."""

from __future__ import annotations

from collections.abc import Iterator

import erfa
import numpy as np
import pytest
from jplephem.spk import SPK

from tests.direct import MAS_PER_RAD, Direct, angle_rad
from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, NAIF_CHAINS, Body
from wanderers.ephemeris.kernels import Kernel, open_kernel
from wanderers.ephemeris.places import (
    Instants,
    Observer,
    aberrated,
    barycentric,
    geocentric_place,
    length,
    observer_at,
)

JD_TT = np.sort(np.random.default_rng(20).uniform(2_287_250.5, 2_688_900.5, 200))


@pytest.fixture(scope="module")
def spk(kernel: Kernel) -> Iterator[SPK]:
    with open_kernel(kernel) as opened:
        yield opened


@pytest.fixture(scope="module")
def instants() -> Instants:
    time = Direct.time(JD_TT)
    return Instants(np.asarray(time.whole), np.asarray(time.tdb_fraction))


@pytest.fixture(scope="module")
def observer(spk: SPK, instants: Instants) -> Observer:
    return observer_at(spk, instants)


def test_observer_moves_as_skyfield_says(observer: Observer, direct: Direct) -> None:
    earth = direct.planets["earth"].at(direct.time(JD_TT))
    np.testing.assert_allclose(observer.position, earth.position.au, atol=1e-14)
    np.testing.assert_allclose(observer.velocity, earth.velocity.au_per_d, atol=1e-15)


@pytest.mark.parametrize("body", BODIES)
def test_place_is_that_of_skyfield_before_deflection(
    spk: SPK, observer: Observer, direct: Direct, body: Body
) -> None:
    place = geocentric_place(spk, body, observer)
    target = direct._target(body)
    expected = direct.planets["earth"].at(direct.time(JD_TT)).observe(target).apparent(deflectors=())
    seen = expected.xyz.au / np.linalg.norm(expected.xyz.au, axis=0)
    ours = place[:3] / length(place[:3])
    # The one light-time step taken here leaves 3 m for Mercury: 0.004 milliarcseconds where it is nearest.
    np.testing.assert_allclose(angle_rad(ours, seen) * MAS_PER_RAD, 0.0, atol=5e-3)
    np.testing.assert_allclose(place[3] * constants.AU_KM, direct.distance_km(body, JD_TT), atol=1e-3)


def test_length_of_a_place_is_the_distance_that_light_travelled(spk: SPK, observer: Observer) -> None:
    for body in (Body.MOON, Body.MERCURY, Body.PLUTO):
        distance = length(geocentric_place(spk, body, observer)[:3])
        light_time = distance / constants.SPEED_OF_LIGHT_AU_PER_DAY
        left = Instants(observer.at.day, observer.at.part - light_time)
        then, _ = barycentric(spk, NAIF_CHAINS[body], left)
        away_m = (length(then - observer.position) - distance) * constants.AU_KM * 1e3
        # Metres: one step from a velocity leaves half the acceleration (0.06 m/s2 for Mercury at perihelion)
        # times the square of 700 s, 15 km, and of that the body's speed over the speed of light.
        np.testing.assert_allclose(away_m, 0.0, atol=3.0)


def test_light_time_of_the_sun_spans_one_au_and_the_eccentricity(spk: SPK, observer: Observer) -> None:
    # 499.004784 s for 1 au: The Astronomical Almanac, section K, from memory. The eccentricity is 0.0167, and
    # the Moon swings the Earth by 4670 km, the planets the Sun by no more than that against it.
    distance = geocentric_place(spk, Body.SUN, observer)[3]
    seconds = distance / constants.SPEED_OF_LIGHT_AU_PER_DAY * 86_400.0
    assert seconds.min() == pytest.approx(499.004784 * (1.0 - 0.0167), abs=0.5)
    assert seconds.max() == pytest.approx(499.004784 * (1.0 + 0.0167), abs=0.5)


def random_directions(count: int) -> Floats:
    vectors = np.random.default_rng(7).normal(size=(3, count))
    return np.asarray(vectors / np.linalg.norm(vectors, axis=0))


@pytest.mark.parametrize("speed", [1e-4, 0.1, 0.9])
def test_aberration_is_that_of_special_relativity(speed: float) -> None:
    # ERFA ab, with the Sun's potential, which ab adds, made vanish by a very distant Sun.
    directions = random_directions(50)
    beta = speed * np.array([0.3, -0.5, np.sqrt(1.0 - 0.34)])
    velocity = np.repeat(beta[:, None], 50, axis=1) * constants.SPEED_OF_LIGHT_AU_PER_DAY
    expected = erfa.ab(directions.T, np.tile(beta, (50, 1)), 1e30, np.sqrt(1.0 - speed**2))
    np.testing.assert_allclose(aberrated(directions, velocity), expected.T, atol=1e-14)


def test_aberration_at_a_right_angle_is_the_constant_of_aberration() -> None:
    # 20.49552 arcseconds for the Earth's mean motion of 29.78469 km/s over sqrt(1 - e^2), e = 0.01671: IAU
    # (1976), from memory.
    speed = 29.784_69 / np.sqrt(1.0 - 0.016_71**2) / constants.AU_KM * 86_400.0
    seen = aberrated(np.array([[1.0], [0.0], [0.0]]), np.array([[0.0], [speed], [0.0]]))
    assert np.degrees(np.arctan2(seen[1, 0], seen[0, 0])) * 3600.0 == pytest.approx(20.4955, abs=1e-3)


def test_a_resting_observer_sees_no_aberration() -> None:
    directions = random_directions(20)
    np.testing.assert_allclose(aberrated(directions, np.zeros((3, 20))), directions, atol=1e-16)
