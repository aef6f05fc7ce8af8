"""Apparent directions and their rates, of bodies and stars, against Skyfield."""

from __future__ import annotations

import numpy as np
import pytest
from skyfield.api import Star

from tests.direct import MAS_PER_RAD, SUN_ALONE, Direct, angle_rad, wrapped_deg
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore

SPAN = (2_458_849.5, 2_462_502.5)  # 2020 to 2030
STARS = ("Regulus", "Spica", "Antares", "Aldebaran", "Zubenelgenubi")


@pytest.fixture(scope="module")
def sky(store: TrackStore) -> Sky:
    return Sky(store.tracks(*SPAN), ecliptic_stars())


def instants(count: int = 400, seed: int = 5) -> Floats:
    return np.sort(np.random.default_rng(seed).uniform(SPAN[0] + 2.0, SPAN[1] - 2.0, count))


def of(body: Body, jd: Floats) -> Ints:
    return np.full(jd.size, body.order)


def star_number(name: str) -> int:
    return FIRST_STAR + ecliptic_stars().name.index(name)


# ---- rates


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", BODIES)
def test_rate_of_longitude_is_the_rate_of_the_apparent_longitude_itself(
    sky: Sky, direct: Direct, body: Body, frame: Frame
) -> None:
    # Differences of Skyfield's apparent longitudes over a tenth of a day; away from the Sun, where
    # deflection bends the course of the longitude within hours.
    jd, half = instants(), 0.05
    elongation = np.degrees(angle_rad(direct.direction(body, jd), direct.direction(Body.SUN, jd)))
    jd = jd[(elongation > 2.0) | (body is Body.SUN)]
    far_before, before, after, far_after = (
        direct.longitude_deg(body, jd + side * half, frame) for side in (-2.0, -1.0, 1.0, 2.0)
    )
    # Abramowitz and Stegun (1964), 25.3.6: five points.
    expected = (8.0 * wrapped_deg(after - before) - wrapped_deg(far_after - far_before)) / (12.0 * half)
    found = sky.longitude_deg(of(body, jd), jd, frame, order=1)[1]
    # A Julian date's last digit, 40 microseconds, beside a step of 0.1 day; ten times that for the Moon.
    np.testing.assert_allclose(found, expected, atol=1e-6 if body is Body.MOON else 1e-7)


def test_rate_leaves_out_neither_aberration_nor_nutation(sky: Sky, direct: Direct) -> None:
    # At Neptune's stations Skyfield's rate of a place (light-time and nutation held fast) is off by hours.
    jd = instants()
    place = direct.planets["earth"].at(direct.time(jd)).observe(direct.planets["neptune barycenter"])
    from skyfield.framelib import ecliptic_frame

    rates = place.apparent(deflectors=SUN_ALONE).frame_latlon_and_rates(ecliptic_frame)
    held_fast = rates[4].degrees.per_day
    found = sky.longitude_deg(of(Body.NEPTUNE, jd), jd, Frame.ECLIPTIC, order=1)[1]
    bend_deg_per_day2 = 1.5 / 3600.0
    assert np.abs(found - held_fast).max() / bend_deg_per_day2 * 24.0 > 1.0  # hours


@pytest.mark.parametrize("body", BODIES)
def test_directions_differentiate(sky: Sky, body: Body) -> None:
    jd, half = instants(100), 0.01
    stack = sky.apparent(of(body, jd), jd, order=2)
    before, after = (sky.apparent(of(body, jd), jd + side, order=1) for side in (-half, half))
    away_from_sun = np.degrees(angle_rad(stack[0], sky.apparent(of(Body.SUN, jd), jd)[0])) > 2.0
    away_from_sun |= body is Body.SUN
    slack = 100.0 if body is Body.MOON else 1.0
    rate, bend = ((after[d] - before[d]) / (2.0 * half) for d in (0, 1))
    np.testing.assert_allclose(stack[1][:, away_from_sun], rate[:, away_from_sun], atol=2e-8 * slack)
    # The second derivative leaves out how deflection is accelerated.
    np.testing.assert_allclose(stack[2][:, away_from_sun], bend[:, away_from_sun], atol=1e-6 * slack)


# ---- several at once


def test_mixed_targets_come_out_as_each_alone(sky: Sky) -> None:
    jd = instants(60)
    stars = np.array([star_number(name) for name in STARS])
    target = np.where(np.arange(60) % 2 == 0, np.arange(60) % 10, stars[np.arange(60) % stars.size])
    together = sky.apparent(target, jd, order=2)
    alone = np.concatenate(
        [sky.apparent(target[n : n + 1], jd[n : n + 1], order=2) for n in range(60)], axis=2
    )
    np.testing.assert_allclose(together, alone, rtol=1e-12, atol=1e-14)


@pytest.mark.parametrize("frame", list(Frame))
def test_lead_is_the_difference_of_two_longitudes(sky: Sky, frame: Frame) -> None:
    jd = instants(200)
    one, two = np.arange(200) % 10, (np.arange(200) + 3) % 10
    lead, rate = sky.lead_deg(one, two, jd, frame)
    first, second = (sky.longitude_deg(target, jd, frame, order=1) for target in (one, two))
    np.testing.assert_allclose(wrapped_deg(lead - (first[0] - second[0])), 0.0, atol=1e-12)
    assert (lead > -180.0).all() and (lead <= 180.0).all()
    # The steering rate leaves deflection out: below a hundred-thousandth of a degree a day away from the Sun.
    assert np.quantile(np.abs(rate - (first[1] - second[1])), 0.9) < 1e-5


def test_steering_spoils_no_direction(sky: Sky) -> None:
    jd = instants(100)
    one, two = np.full(100, Body.VENUS.order), np.full(100, star_number("Spica"))
    for exact, steered in zip(
        sky.pair(one, two, jd, 2), sky.pair(one, two, jd, 2, steering=True), strict=True
    ):
        np.testing.assert_array_equal(exact[0], steered[0])
        assert np.abs(exact[1] - steered[1]).max() < 1e-6


# ---- stars


@pytest.mark.parametrize("name", STARS)
def test_stars_stand_where_skyfield_sees_them(sky: Sky, direct: Direct, name: str) -> None:
    catalogue, place = ecliptic_stars(), star_number(name) - FIRST_STAR
    star = Star(
        ra_hours=catalogue.ra_deg[place] / 15.0,
        dec_degrees=catalogue.dec_deg[place],
        ra_mas_per_year=catalogue.pm_ra_cosdec_mas_per_year[place],
        dec_mas_per_year=catalogue.pm_dec_mas_per_year[place],
        parallax_mas=catalogue.parallax_mas[place],
        epoch=2_451_545.0,
    )
    jd = instants(200)
    seen = direct.planets["earth"].at(direct.time(jd)).observe(star).apparent(deflectors=SUN_ALONE).xyz.au
    expected = seen / np.linalg.norm(seen, axis=0)
    away = angle_rad(sky.apparent(np.full(jd.size, star_number(name)), jd)[0], expected) * MAS_PER_RAD
    outside = np.degrees(angle_rad(expected, direct.direction(Body.SUN, jd))) > 1.0
    assert away[outside].max() < 1.0


def test_a_stars_rate_is_its_aberrations(sky: Sky) -> None:
    jd, half = instants(100), 0.5
    target = np.full(jd.size, star_number("Regulus"))
    before, after = (sky.apparent(target, jd + side)[0] for side in (-half, half))
    found = sky.apparent(target, jd, order=1)[1]
    # Regulus stands half a degree from the ecliptic: next to the Sun deflection turns within a day.
    away = np.degrees(angle_rad(sky.apparent(target, jd)[0], sky.apparent(of(Body.SUN, jd), jd)[0])) > 5.0
    np.testing.assert_allclose(found[:, away], (after - before)[:, away], atol=1e-9)


def test_a_sky_without_stars_says_so(store: TrackStore) -> None:
    empty = Sky(store.tracks(*SPAN))
    with pytest.raises(LookupError, match="no stars"):
        empty.apparent(np.array([FIRST_STAR]), np.array([SPAN[0] + 5.0]))


# ---- distances


@pytest.mark.parametrize("body", [Body.SUN, Body.MOON, *PLANETS])
def test_rate_of_distance_is_its_derivative(sky: Sky, body: Body) -> None:
    jd, half = instants(100), 0.01
    stack = sky.earth_distance_au(of(body, jd), jd, order=2)
    before, after = (sky.earth_distance_au(of(body, jd), jd + side, order=1) for side in (-half, half))
    np.testing.assert_allclose(stack[1], (after[0] - before[0]) / (2.0 * half), atol=2e-8)
    np.testing.assert_allclose(stack[2], (after[1] - before[1]) / (2.0 * half), atol=2e-8)
