"""Sites and horizons as values: what is read, what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.errors import UsageProblem
from wanderers.site.places import (
    HorizonProfile,
    Site,
    SiteError,
    horizon_of,
    looks_like_coordinates,
    parse_coordinates,
    parse_horizon,
)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("52.13,11.62", (52.13, 11.62, 0.0)),
        ("52.13,11.62,120", (52.13, 11.62, 120.0)),
        (" -35.3 , +149.1 , 780 m ", (-35.3, 149.1, 780.0)),
        ("0,180,-3.5", (0.0, 180.0, -3.5)),
        (".5,-.25", (0.5, -0.25, 0.0)),
    ],
)
def test_coordinates_are_read(text: str, expected: tuple[float, float, float]) -> None:
    assert looks_like_coordinates(text)
    assert parse_coordinates(text) == expected


@pytest.mark.parametrize("text", ["52.13", "52.13;11.62", "52,11,3,4", "52.1.3,11", "--5,11", ","])
def test_numbers_that_are_no_place_are_refused(text: str) -> None:
    assert looks_like_coordinates(text)
    with pytest.raises(SiteError, match="write LATITUDE,LONGITUDE"):
        parse_coordinates(text)


@pytest.mark.parametrize("text", ["hilltop", "Saint-Denis", "52N,11E", "Springfield, US"])
def test_names_are_no_coordinates(text: str) -> None:
    assert not looks_like_coordinates(text)


@pytest.mark.parametrize(
    ("latitude", "longitude", "elevation", "what"),
    [
        (90.01, 0.0, 0.0, "latitude 90.01 is beyond 90"),
        (-91.0, 0.0, 0.0, "latitude -91 is beyond 90"),
        (float("nan"), 0.0, 0.0, "latitude"),
        (0.0, 361.0, 0.0, "longitude 361"),
        (0.0, -181.0, 0.0, "longitude -181"),
        (0.0, 0.0, 9_001.0, "elevation 9001 m"),
        (0.0, 0.0, float("nan"), "elevation"),
    ],
)
def test_what_is_no_place_on_the_earth_is_refused(
    latitude: float, longitude: float, elevation: float, what: str
) -> None:
    with pytest.raises(SiteError, match=what) as caught:
        Site("nowhere", latitude, longitude, elevation)
    assert isinstance(caught.value, UsageProblem)


@given(st.floats(-180.0, 360.0))
def test_longitudes_are_brought_into_one_turn_and_stay_the_same_place(longitude: float) -> None:
    site = Site("somewhere", 10.0, longitude)
    assert -180.0 < site.longitude_deg <= 180.0
    assert (site.longitude_deg - longitude) % 360.0 == 0.0


def test_horizon_runs_straight_between_its_points_and_all_round() -> None:
    horizon = parse_horizon("90:6, 270:2,350:4")
    at = np.array([90.0, 180.0, 270.0, 310.0, 350.0, 0.0, 40.0])
    # From 350 to 90 the way leads through north: 100 degrees, two degrees up.
    np.testing.assert_allclose(horizon.altitude_deg(at), [6.0, 4.0, 2.0, 3.0, 4.0, 4.2, 5.0])


def test_one_point_is_a_horizon_of_one_height() -> None:
    np.testing.assert_allclose(horizon_of([(123.0, 3.5)]).altitude_deg(np.array([0.0, 200.0])), 3.5)


def test_an_unknown_horizon_hides_nothing() -> None:
    assert parse_horizon("  ").is_level
    assert (HorizonProfile().altitude_deg(np.array([0.0, 90.0])) == -90.0).all()


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("90", "AZIMUTH:ALTITUDE"),
        ("90:6:1", "AZIMUTH:ALTITUDE"),
        ("east:6", "AZIMUTH:ALTITUDE"),
        ("360:2", "azimuths from 0"),
        ("-10:2", "azimuths from 0"),
        ("90:2,90:3", "each azimuth once"),
        ("90:91", "altitudes from -10"),
        ("90:-11", "altitudes from -10"),
        ("nan:2", "azimuths from 0"),
    ],
)
def test_what_is_no_horizon_is_refused(text: str, what: str) -> None:
    with pytest.raises(SiteError, match=what):
        parse_horizon(text)
