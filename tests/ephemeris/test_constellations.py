"""Behaviour of the constellation look-up and of the boundary lines taken from its grid."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from skyfield.api import load_constellation_map, position_of_radec
from skyfield.constellationlib import load_constellation_names
from skyfield.positionlib import ICRF
from skyfield.timelib import Time

from wanderers.arrays import Floats
from wanderers.ephemeris.constellations import (
    ABBREVIATIONS,
    B1875_JD,
    b1875_coordinates,
    b1875_rotation,
    boundary_lines,
    boundary_segments,
    constellation_at,
    constellation_at_b1875,
    directions_of_b1875,
    full_name,
)
from wanderers.ephemeris.frames import ecliptic_of_j2000
from wanderers.errors import UnknownNameError

ARCSEC = np.radians(1.0 / 3600.0)


def random_directions(count: int) -> Floats:
    return np.random.default_rng(88).normal(size=(3, count))


def parallel_of_the_ecliptic(latitude_deg: float, count: int) -> Floats:
    longitude = np.linspace(0.0, 2.0 * np.pi, count)
    latitude = np.radians(latitude_deg)
    of_ecliptic = [np.cos(latitude) * np.cos(longitude), np.cos(latitude) * np.sin(longitude)]
    return ecliptic_of_j2000().T @ np.stack([*of_ecliptic, np.full(count, np.sin(latitude))])


def test_there_are_88_constellations_and_the_sky_shows_all_of_them() -> None:
    # IAU 1922; Delporte 1930.
    assert len(set(ABBREVIATIONS)) == 88
    assert set(constellation_at(random_directions(100_000))) == set(range(88))


def test_thirteen_constellations_lie_on_the_ecliptic() -> None:
    # Twelve of the zodiac and Ophiuchus: common knowledge since the boundaries of 1930, no source.
    found = {ABBREVIATIONS[index] for index in constellation_at(parallel_of_the_ecliptic(0.0, 36_001))}
    assert found == {
        "Ari",
        "Tau",
        "Gem",
        "Cnc",
        "Leo",
        "Vir",
        "Lib",
        "Sco",
        "Oph",
        "Sgr",
        "Cap",
        "Aqr",
        "Psc",
    }


@pytest.mark.parametrize(
    ("ra_hours", "dec_deg", "name"),
    # Bright stars and their constellations, J2000 to a tenth of a degree; from memory.
    [
        (6.752, -16.716, "CMa"),
        (18.616, 38.784, "Lyr"),
        (10.139, 11.967, "Leo"),
        (16.490, -26.432, "Sco"),
        (2.530, 89.264, "UMi"),
        (14.660, -60.834, "Cen"),
        (0.140, 29.090, "And"),
    ],
)
def test_bright_stars_stand_in_their_constellations(ra_hours: float, dec_deg: float, name: str) -> None:
    direction = position_of_radec(ra_hours, dec_deg).xyz.au[:, np.newaxis]
    assert ABBREVIATIONS[constellation_at(direction)[0]] == name


def test_result_is_a_small_integer_array_and_length_does_not_matter() -> None:
    directions = random_directions(50)
    assert constellation_at(directions).dtype == np.int16
    np.testing.assert_array_equal(constellation_at(directions), constellation_at(directions * 1e-9))


def test_rotation_is_the_mean_equator_of_b1875() -> None:
    # pyerfa's pmat06: bias and precession, IAU 2006, an implementation of its own. 1 milliarcsecond.
    np.testing.assert_allclose(b1875_rotation(), erfa.pmat06(B1875_JD, 0.0), rtol=0.0, atol=1e-3 * ARCSEC)


def test_shared_rotation_cannot_be_changed() -> None:
    with pytest.raises(ValueError, match="read-only"):
        b1875_rotation()[0, 0] = 0.0


def test_coordinates_and_directions_are_inverse() -> None:
    ra_deg, dec_deg = np.array([0.0, 123.4, 359.999]), np.array([-89.0, 0.0, 45.6])
    back_ra, back_dec = b1875_coordinates(5.0 * directions_of_b1875(ra_deg, dec_deg))
    np.testing.assert_allclose((back_ra - ra_deg + 180.0) % 360.0, 180.0, atol=1e-9)
    np.testing.assert_allclose(back_dec, dec_deg, atol=1e-9)


def test_skyfield_looks_up_on_the_true_equator_of_1875() -> None:
    # Documents why skyfield's look-up is not used as it stands: it is ours with the nutation of that day
    # added, 10 arcseconds away; 1 arcsecond either side of a boundary (Pegasus and Pisces) it sees no change.
    true_equator = Time(None, B1875_JD).M
    angle = np.linalg.norm(true_equator @ b1875_rotation().T - np.eye(3)) / np.sqrt(2.0)
    assert 9.0 < angle / ARCSEC < 11.0
    look_up = load_constellation_map()
    directions = random_directions(20_000)
    x, y, z = true_equator @ directions
    ra_deg, dec_deg = np.degrees(np.arctan2(y, x)) % 360.0, np.degrees(np.arctan2(z, np.hypot(x, y)))
    ours = np.array(ABBREVIATIONS)[constellation_at_b1875(ra_deg, dec_deg)]
    np.testing.assert_array_equal(ours, look_up(ICRF(directions)))
    both_sides = directions_of_b1875(np.array([-1.0, 1.0]) / 3600.0, np.array([11.0, 11.0]))
    assert len(set(constellation_at(both_sides))) == 2
    assert len(set(look_up(ICRF(both_sides)))) == 1


def test_abbreviations_and_names_are_those_skyfield_packages() -> None:
    assert {name: full_name(name) for name in ABBREVIATIONS} == dict(load_constellation_names())


def test_full_name_takes_any_case_and_suggests_neighbours() -> None:
    assert full_name("uma") == full_name("UMA") == "Ursa Major"
    with pytest.raises(UnknownNameError) as caught:
        full_name("umb")
    assert {"uma", "umi"} & set(caught.value.nearest)


@pytest.mark.parametrize("latitude_deg", [-18.0, -9.0, -3.0, 0.0, 5.3, 9.0, 18.0])
def test_every_change_of_constellation_crosses_a_boundary_line(latitude_deg: float) -> None:
    directions = parallel_of_the_ecliptic(latitude_deg, 50_001)
    constellation = constellation_at(directions)
    ra_deg, dec_deg = b1875_coordinates(directions)
    ra_lines, dec_lines = boundary_lines()
    step = np.diff(ra_deg) % 360.0  # the path runs eastward
    ahead = np.min((ra_lines[:, np.newaxis] - ra_deg[:-1]) % 360.0, axis=0)
    between = np.sort(np.stack([dec_deg[:-1], dec_deg[1:]]), axis=0)
    crosses_dec = np.diff(np.searchsorted(dec_lines, between), axis=0)[0] > 0
    changes = constellation[1:] != constellation[:-1]
    assert changes.sum() > 12
    assert np.all((ahead <= step) | crosses_dec, where=changes)


def test_boundary_lines_are_distinct_rising_and_grow_with_the_limit() -> None:
    near, wide, whole = (boundary_lines(limit) for limit in (5.0, 20.0, 90.0))
    for lines in (*near, *wide, *whole):
        assert np.all(np.diff(lines) > 0.0)
    for few, more, all_of_them in zip(near, wide, whole, strict=True):
        assert set(few) < set(more) < set(all_of_them)


def test_right_ascension_zero_divides_pegasus_from_pisces() -> None:
    # The packaged list of right ascensions leaves out 0, where the grid closes.
    assert boundary_lines()[0][0] == 0.0
    sides = constellation_at_b1875(np.array([359.999, 0.001]), np.array([11.0, 11.0]))
    assert [ABBREVIATIONS[index] for index in sides] == ["Peg", "Psc"]


@pytest.mark.parametrize("dec_deg", [-77.3, -41.41, -0.7, 11.1, 29.29, 66.1])
def test_segments_along_right_ascension_are_all_the_changes_on_a_parallel(dec_deg: float) -> None:
    ra1, dec1, ra2, dec2 = boundary_segments().T
    met = (ra1 == ra2) & (np.minimum(dec1, dec2) < dec_deg) & (dec_deg < np.maximum(dec1, dec2))
    ra_deg = np.array(
        (np.arange(86_400.0) + 0.5) / 240.0, dtype=np.float64
    )  # every second of time; no two lines are nearer
    constellation = constellation_at_b1875(ra_deg, np.full(ra_deg.size, dec_deg))
    changes = np.flatnonzero(constellation != np.roll(constellation, 1))
    np.testing.assert_allclose(np.sort(ra1[met]), changes / 240.0, rtol=0.0, atol=1e-9)


@pytest.mark.parametrize("ra_deg", [0.3, 91.1, 187.7, 270.9, 359.5])
def test_segments_along_declination_are_all_the_changes_on_a_meridian(ra_deg: float) -> None:
    ra1, dec1, ra2, dec2 = boundary_segments().T
    met = (dec1 == dec2) & (ra1 < ra_deg) & (ra_deg < ra2)
    dec_deg = np.array(
        -90.0 + (np.arange(10_800.0) + 0.5) / 60.0, dtype=np.float64
    )  # every arcminute; no two lines are nearer
    constellation = constellation_at_b1875(np.full(dec_deg.size, ra_deg), dec_deg)
    changes = 1 + np.flatnonzero(constellation[1:] != constellation[:-1])
    np.testing.assert_allclose(np.sort(dec1[met]), -90.0 + changes / 60.0, rtol=0.0, atol=1e-9)


def test_neighbouring_pieces_of_a_line_are_joined() -> None:
    segments = boundary_segments().round(6)
    for same, other in ((0, 2), (1, 3)):
        line = segments[segments[:, same] == segments[:, other]]
        ends, starts = ({tuple(row) for row in line[:, pair]} for pair in ([2, 3], [0, 1]))
        assert len(starts) == len(line) > 88
        assert ends & starts == set()
