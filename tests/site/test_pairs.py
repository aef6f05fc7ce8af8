"""Directions in words, for one thing and for two."""

from __future__ import annotations

import numpy as np
import pytest
from astropy import units
from astropy.coordinates import position_angle

from wanderers.site.compass import LETTERS, POINTS, compass_point
from wanderers.site.pairs import PLACEMENTS, bearing_deg, placement


@pytest.mark.parametrize(
    ("azimuth", "point", "letters"),
    [
        (0.0, "north", "N"),
        (359.0, "north", "N"),
        (90.0, "east", "E"),
        (180.0, "south", "S"),
        (270.0, "west", "W"),
        (225.0, "southwest", "SW"),
        (250.0, "west-southwest", "WSW"),
        (11.24, "north", "N"),
        (11.26, "north-northeast", "NNE"),
        (348.76, "north", "N"),
    ],
)
def test_compass_point_is_the_nearest(azimuth: float, point: str, letters: str) -> None:
    (index,) = compass_point(np.array([azimuth]))
    assert (POINTS[index], LETTERS[index]) == (point, letters)


def test_bearing_is_astropys_position_angle_in_the_horizontal_frame() -> None:
    generator = np.random.default_rng(5)
    altitude, other_altitude = generator.uniform(-89.0, 89.0, (2, 200))
    azimuth, other_azimuth = generator.uniform(0.0, 360.0, (2, 200))
    expected = position_angle(
        azimuth * units.deg, altitude * units.deg, other_azimuth * units.deg, other_altitude * units.deg
    )
    ours = bearing_deg(altitude, azimuth, other_altitude, other_azimuth)
    np.testing.assert_allclose((ours - expected.to_value(units.deg) + 180.0) % 360.0 - 180.0, 0.0, atol=1e-9)


@pytest.mark.parametrize(
    ("other_altitude", "other_azimuth", "words"),
    # Whoever faces a thing has larger azimuths on the right, in the north and in the south.
    [
        (15.0, 200.0, "above"),
        (5.0, 200.0, "below"),
        (10.0, 205.0, "to the right"),
        (10.0, 195.0, "to the left"),
        (13.5, 203.5, "to the upper right"),
        (6.5, 203.5, "to the lower right"),
        (6.5, 196.5, "to the lower left"),
        (13.5, 196.5, "to the upper left"),
    ],
)
def test_placement_is_as_one_sees_it_facing_the_first(
    other_altitude: float, other_azimuth: float, words: str
) -> None:
    bearing = bearing_deg(*(np.array([value]) for value in (10.0, 200.0, other_altitude, other_azimuth)))
    assert PLACEMENTS[placement(bearing)[0]] == words


def test_left_and_right_hold_across_north() -> None:
    bearing = bearing_deg(np.array([10.0]), np.array([358.0]), np.array([10.0]), np.array([3.0]))
    assert PLACEMENTS[placement(bearing)[0]] == "to the right"
