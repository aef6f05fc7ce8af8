"""Rise, set, twilight and culmination against skyfield's almanac functions."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from skyfield import almanac
from skyfield.api import load

from tests.site.conftest import SkyAt
from tests.site.places import ATOLL, CAPE, HILL, INHABITED, PLATEAU, POLE, RIDGE, skyfield_place
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.events.search import Roots
from wanderers.site.earth import vantage
from wanderers.site.evenings import evenings
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.topocentric import horizontal, see_body
from wanderers.site.twilight import (
    ASTRONOMICAL_DEG,
    CIVIL_DEG,
    NAUTICAL_DEG,
    STEPS_A_DAY,
    Level,
    find_crossings,
    find_culminations,
    rise_level,
    steps_for,
)

ONE_SECOND = 1.0 / 86_400.0
YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))
WANDERERS = BODIES[:9]
SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune")
TWILIGHTS = (CIVIL_DEG, NAUTICAL_DEG, ASTRONOMICAL_DEG)


def target_of(jpl: Any, body: Body) -> Any:
    return jpl[f"{body.value} barycenter" if body.value in SYSTEMS else body.value]


def grid_of(site: Site, span: tuple[np.datetime64, np.datetime64] = YEAR) -> Floats:
    return evenings(site, *span).grid(STEPS_A_DAY)


def of_level(roots: Roots, number: int, *, rising: bool) -> Floats:
    return roots.jd[(roots.function == number) & (roots.rising == rising)]


@pytest.mark.parametrize("site", INHABITED, ids=lambda site: site.name)
def test_rise_set_and_twilight_agree_with_skyfield_within_a_second(
    sky_at: SkyAt, jpl: Any, site: Site
) -> None:
    # Skyfield's defaults: Sun -50 arcminutes, planets -34, Moon -34 less its own radius then.
    jd = grid_of(site)
    levels = [rise_level(body.order) for body in WANDERERS] + [Level(0, degrees) for degrees in TWILIGHTS]
    found = find_crossings(sky_at(jd), site, jd, levels)
    time_scale = load.timescale(builtin=True)
    ends = (time_scale.tt_jd(jd[0]), time_scale.tt_jd(jd[-1]))
    observer = jpl["earth"] + skyfield_place(site)
    for number, level in enumerate(levels):
        degrees = None if number < len(WANDERERS) else level.airless_altitude_deg
        target = target_of(jpl, BODIES[level.body])
        for rising, search in ((True, almanac.find_risings), (False, almanac.find_settings)):
            times, crosses = search(observer, target, *ends, degrees)
            ours, theirs = of_level(found, number, rising=rising), times.tt[crosses]
            if ours.size < theirs.size and BODIES[level.body] is Body.MOON:
                apart = np.abs(theirs[:, None] - ours).min(axis=1)
                missed = [jd for jd in theirs[apart > ONE_SECOND] if is_near_miss(observer, target, jd)]
                theirs = np.setdiff1d(theirs, missed)
            assert ours.size == theirs.size, (BODIES[level.body], degrees, rising)
            assert np.abs(ours - theirs).max(initial=0.0) < ONE_SECOND


def is_near_miss(observer: Any, target: Any, jd_tt: float) -> bool:
    """Return whether skyfield lists a rise or set where its own altitudes stay on one side for an hour.

    It does where the Moon turns within a hundredth of a degree above the level.
    """
    time = load.timescale(builtin=True).tt_jd(jd_tt + np.linspace(-0.04, 0.04, 193))
    altitude, _, distance = observer.at(time).observe(target).apparent().altaz()
    above = altitude.degrees + 34.0 / 60.0 + np.degrees(1_737.4 / distance.km)
    return bool(np.all(above > 0.0) or np.all(above < 0.0))


@pytest.mark.parametrize("site", [*INHABITED, PLATEAU], ids=lambda site: site.name)
def test_culminations_agree_with_skyfield_within_a_second(sky_at: SkyAt, jpl: Any, site: Site) -> None:
    jd = grid_of(site)
    found = find_culminations(sky_at(jd), site, jd, [body.order for body in WANDERERS])
    time_scale = load.timescale(builtin=True)
    ends = (time_scale.tt_jd(jd[0]), time_scale.tt_jd(jd[-1]))
    observer = jpl["earth"] + skyfield_place(site)
    for number, body in enumerate(WANDERERS):
        expected = almanac.find_transits(observer, target_of(jpl, body), *ends).tt
        ours = found.jd[found.function == number]
        assert ours.size == expected.size
        assert np.abs(ours - expected).max() < ONE_SECOND


@pytest.mark.parametrize("site", [POLE, PLATEAU], ids=lambda site: site.name)
def test_the_one_sunrise_of_the_year_at_a_pole_agrees_with_skyfield(
    sky_at: SkyAt, jpl: Any, site: Site
) -> None:
    # Skyfield's quick search looks for the hour angle and finds nothing there; its general one does.
    jd = grid_of(site)
    found = find_crossings(sky_at(jd), site, jd, [rise_level(Body.SUN.order)])
    time_scale = load.timescale(builtin=True)
    place = skyfield_place(site)
    up = almanac.risings_and_settings(jpl, jpl["sun"], place, horizon_degrees=-50.0 / 60.0)
    times, rises = almanac.find_discrete(time_scale.tt_jd(jd[0]), time_scale.tt_jd(jd[-1]), up)
    assert len(times) == 2
    for rising in (True, False):
        ours = of_level(found, 0, rising=rising)
        # The Sun takes a quarter of an hour for each arcsecond it climbs there, and skyfield's general search
        # uses the short nutation: 1 milliarcsecond of altitude is 4 seconds.
        np.testing.assert_allclose(ours, times.tt[rises == int(rising)], atol=10.0 * ONE_SECOND)


@pytest.mark.parametrize("site", [HILL, CAPE, PLATEAU, ATOLL], ids=lambda site: site.name)
def test_bodies_stand_at_the_level_when_they_cross_it(sky_at: SkyAt, site: Site) -> None:
    jd = grid_of(site, (np.datetime64("2027-02-01"), np.datetime64("2027-04-01")))
    levels = [Level(Body.VENUS.order, -0.5), Level(Body.SUN.order, -6.0), Level(Body.MARS.order, 7.0)]
    found = find_crossings(sky_at(jd), site, jd, levels)
    for number, level in enumerate(levels):
        own = found.jd[found.function == number]
        at = vantage(sky_at(jd), site, own)
        height = horizontal(at, see_body(sky_at(jd), at, level.body).direction[0]).airless_altitude_deg
        np.testing.assert_allclose(height, level.airless_altitude_deg, atol=1e-6)


def test_a_body_rises_and_sets_in_turn(sky_at: SkyAt) -> None:
    for site in (HILL, RIDGE, CAPE, PLATEAU):
        jd = grid_of(site)
        found = find_crossings(sky_at(jd), site, jd, [rise_level(body.order) for body in WANDERERS])
        for number in range(len(WANDERERS)):
            directions = found.rising[found.function == number]
            assert (directions[1:] != directions[:-1]).all()


def test_hills_delay_the_rise_and_hasten_the_set(sky_at: SkyAt) -> None:
    jd = grid_of(HILL, (np.datetime64("2027-03-01"), np.datetime64("2027-03-20")))
    hills = HorizonProfile(((0.0, 3.0), (90.0, 8.0), (180.0, 2.0), (270.0, 5.0)))
    bare, hilly = Level(Body.SUN.order, 0.0), Level(Body.SUN.order, 0.0, horizon=hills)
    fine = evenings(HILL, np.datetime64("2027-03-01"), np.datetime64("2027-03-20")).grid(steps_for([hilly]))
    found = find_crossings(sky_at(jd), HILL, fine, [bare, hilly])
    for rising, sign in ((True, 1.0), (False, -1.0)):
        delay = sign * (of_level(found, 1, rising=rising) - of_level(found, 0, rising=rising))
        assert (delay > 20.0 * 60.0 * ONE_SECOND).all()
    own = found.jd[found.function == 1]
    at = vantage(sky_at(jd), HILL, own)
    place = horizontal(at, see_body(sky_at(jd), at, Body.SUN.order).direction[0])
    seen = refracted_deg(place.airless_altitude_deg, HILL.elevation_m)
    np.testing.assert_allclose(seen, hills.altitude_deg(place.azimuth_deg), atol=1e-5)


def test_a_gap_between_hills_lets_a_body_through_twice(sky_at: SkyAt) -> None:
    # A notch in a high ridge, where the Sun passes at noon: it shows for a while and hides again.
    notch = HorizonProfile(((0.0, 60.0), (170.0, 60.0), (175.0, 5.0), (185.0, 5.0), (190.0, 60.0)))
    level = Level(Body.SUN.order, 0.0, horizon=notch)
    fine = evenings(HILL, np.datetime64("2027-03-01"), np.datetime64("2027-03-11")).grid(steps_for([level]))
    found = find_crossings(sky_at(fine), HILL, fine, [level])
    # The Sun enters the notch a minute after clock noon at first, a minute before it at last: eleven times.
    assert of_level(found, 0, rising=False).size == 10
    assert of_level(found, 0, rising=True).size == 11
