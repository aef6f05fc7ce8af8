"""The brightness of the sky and the faintest star on it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.arrays import Floats
from wanderers.site import skylight
from wanderers.site.airmass import airmass
from wanderers.site.skylight import Lights
from wanderers.site.visibility import Criteria, Looks, margins

MOON_DOWN = -30.0
LOSS_MAG = 0.28


def lights(
    altitude: float,
    sun_altitude: float,
    sun_separation: float = 90.0,
    moon_altitude: float = MOON_DOWN,
    moon_separation: float = 60.0,
    moon_phase_angle: float = 0.0,
) -> Lights:
    values = (altitude, sun_altitude, sun_separation, moon_altitude, moon_separation, moon_phase_angle)
    return Lights(*(np.array([value]) for value in values))


def mag_per_square_arcsec(brightness_nl: Floats) -> float:
    return float((20.7233 - np.log(brightness_nl[0] / 34.08)) / 0.92104)


def test_dark_zenith_of_the_paper_is_79_nanolamberts() -> None:
    # Krisciunas and Schaefer 1991: V = 21.587 and B = 79.0 nL at the zenith of a dark site; from memory.
    assert skylight.nanolamberts(21.587) == pytest.approx(79.0, abs=0.1)


def test_eyes_reach_the_sixth_magnitude_at_a_dark_zenith() -> None:
    # Common practice, no source: 6 to 6.5.
    night = skylight.night_nl(np.array([90.0]), LOSS_MAG, 21.587)
    assert 6.0 < skylight.faintest_magnitude(night)[0] - LOSS_MAG < 6.5


def test_the_full_moon_brightens_the_sky_by_magnitudes() -> None:
    # Krisciunas and Schaefer 1991, table 2 and figures: near the full Moon the dark sky of Mauna Kea
    # brightens by 3 to 4 magnitudes at 60 degrees from it, about half as much at the quarters; from memory.
    dark = skylight.sky_brightness_nl(lights(60.0, -40.0), 0.172, 21.587)
    full, quarter = (
        skylight.sky_brightness_nl(lights(60.0, -40.0, 90.0, 60.0, 60.0, angle), 0.172, 21.587)
        for angle in (0.0, 90.0)
    )
    brighter = [mag_per_square_arcsec(dark) - mag_per_square_arcsec(sky) for sky in (full, quarter)]
    assert 2.5 < brighter[0] < 4.0
    assert 0.5 < brighter[1] < 2.0


def test_the_moon_does_not_outshine_itself_and_lights_nothing_from_below() -> None:
    high = lights(40.0, -40.0, moon_altitude=40.0, moon_separation=float("nan"))
    assert skylight.moonlight_nl(high, LOSS_MAG)[0] == 0.0
    assert skylight.moonlight_nl(lights(40.0, -40.0), LOSS_MAG)[0] == 0.0


@pytest.mark.parametrize(
    ("magnitude", "altitude", "elongation", "appears_at"),
    # Common practice, no source: Sun altitude at which an eye that looks for it finds it. Venus 0 to -4,
    # Jupiter -4 to -6, Mercury when bright -5 to -7, Mars and Saturn -7 to -10, stars of second magnitude -9.
    # The model of twilight is good to a factor of two, a degree of the Sun, and has Jupiter out before people
    # look for it.
    [
        (-4.0, 20.0, 40.0, (-4.0, 0.0)),
        (-2.2, 30.0, 90.0, (-6.0, 0.0)),
        (-0.5, 8.0, 20.0, (-8.0, -5.0)),
        (0.8, 20.0, 90.0, (-10.0, -5.0)),
        (2.0, 45.0, 90.0, (-10.0, -6.0)),
    ],
)
def test_bodies_come_out_at_the_twilight_observers_report(
    magnitude: float, altitude: float, elongation: float, appears_at: tuple[float, float]
) -> None:
    depths = np.arange(3.0, -18.0, -0.1)
    size = depths.size
    where = Lights(
        np.full(size, altitude),
        depths,
        np.full(size, elongation),
        *(np.full(size, v) for v in (-30.0, 90.0, 90.0)),
    )
    looks = Looks(
        np.full(size, magnitude), np.full(size, altitude), where, np.zeros(size, bool), np.ones(size)
    )
    shows = margins(looks, Criteria(), LOSS_MAG).sky >= 0.0
    appears = depths[np.argmax(shows)]
    assert appears_at[0] <= appears <= appears_at[1]


@given(
    altitude=st.floats(1.0, 90.0),
    separation=st.floats(1.0, 180.0),
    depths=st.lists(st.floats(-40.0, 0.0), min_size=2, max_size=8, unique=True),
)
def test_the_sky_never_darkens_as_the_sun_climbs_to_the_horizon(
    altitude: float, separation: float, depths: list[float]
) -> None:
    sun = np.sort(np.array(depths))
    size = sun.size
    where = Lights(
        np.full(size, altitude),
        sun,
        np.full(size, separation),
        *(np.full(size, v) for v in (-30.0, 90.0, 90.0)),
    )
    light = skylight.sunlight_nl(where, LOSS_MAG)
    assert (np.diff(light) >= -1e-9 * light[1:]).all()


@given(st.lists(st.floats(1.0, 1e9), min_size=2, max_size=20, unique=True))
def test_a_brighter_sky_never_shows_fainter_stars(brightness: list[float]) -> None:
    limit = skylight.faintest_magnitude(np.sort(np.array(brightness)))
    # Rods hand over to cones at 1500 nL, where the two published curves miss each other by a tenth.
    assert (np.diff(limit) <= 0.1).all()


def test_an_eye_at_noon_sees_venus_at_best() -> None:
    # Venus is found by day by those who know where to look, stars are not (common practice, no source).
    noon = skylight.sky_brightness_nl(lights(50.0, 40.0, 45.0), LOSS_MAG, 21.0)
    reach = skylight.faintest_magnitude(noon)[0] - LOSS_MAG * airmass(np.array([50.0]))[0]
    assert -5.0 < reach < -2.0
