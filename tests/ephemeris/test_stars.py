"""The packaged stars, and how they move."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.arrays import Floats
from wanderers.constants import J2000_JD
from wanderers.ephemeris import stars
from wanderers.ephemeris.stars import RAD_PER_MAS, StarCatalogue
from wanderers.errors import UnknownNameError

JD_1550, JD_2650 = 2_287_184.5, 2_688_976.5

EPOCHS = np.linspace(JD_1550, JD_2650, 23)


@st.composite
def one_star(draw: st.DrawFn) -> StarCatalogue:
    """Any star: all over the sky, up to the swiftest motion known (10.4 arcsec a year, Barnard's star)."""
    number = {
        "ra_deg": draw(st.floats(0.0, 359.999)),
        "dec_deg": draw(st.floats(-89.9, 89.9)),
        "pm_ra_cosdec_mas_per_year": draw(st.floats(-1e4, 1e4)),
        "pm_dec_mas_per_year": draw(st.floats(-1e4, 1e4)),
        "parallax_mas": draw(st.floats(-5.0, 800.0)),
        "v_mag": 0.0,
        "b_v": 0.0,
    }
    return StarCatalogue(
        hip=np.array([1]),
        name=("",),
        bayer=("",),
        constellation=("Ori",),
        kind=("star",),
        cluster=("",),
        **{key: np.array([value]) for key, value in number.items()},
    )


def angle_mas(a: Floats, b: Floats) -> Floats:
    """The angle between unit vectors, whose components stand along the last axis but one."""
    across, along = np.linalg.norm(np.cross(a, b, axis=-2), axis=-2), np.sum(a * b, axis=-2)
    return np.arctan2(across, along) / RAD_PER_MAS


def test_field_stars_reach_beyond_the_naked_eye() -> None:
    field = stars.field_stars()
    # Hoffleit and Warren 1991, The Bright Star Catalogue, 5th edition: 9,110 entries, nearly all stars to
    # V 6.5 and some hundreds of fainter companions (from memory).
    assert 8_500 <= np.count_nonzero(field.v_mag <= 6.5) <= 9_110
    assert field.v_mag.max() <= 6.6
    assert set(field.kind) == {"star"}
    assert len(set(field.constellation)) == 88


@pytest.mark.parametrize(
    "catalogue", [stars.field_stars(), stars.ecliptic_stars()], ids=["field", "ecliptic"]
)
class TestEveryCatalogue:
    def test_entries_are_ordered_by_brightness(self, catalogue: StarCatalogue) -> None:
        assert np.all(np.diff(catalogue.v_mag) >= 0.0)

    def test_labels_and_numbers_are_unique(self, catalogue: StarCatalogue) -> None:
        numbers = catalogue.hip[catalogue.hip > 0]
        assert len(set(numbers.tolist())) == numbers.size
        assert len({label.lower() for label in catalogue.labels}) == len(catalogue)

    def test_numbers_are_within_their_ranges(self, catalogue: StarCatalogue) -> None:
        assert np.all((catalogue.ra_deg >= 0.0) & (catalogue.ra_deg < 360.0))
        assert np.all(np.abs(catalogue.dec_deg) <= 90.0)
        # The swiftest star of this brightness is Groombridge 1830, 7.06 arcsec a year; the nearest is alpha
        # Centauri, 755 mas; the worst parallax is of a star in the Trapezium, -53 mas (van Leeuwen 2007).
        assert np.hypot(catalogue.pm_ra_cosdec_mas_per_year, catalogue.pm_dec_mas_per_year).max() < 7_100.0
        assert catalogue.parallax_mas.min() > -60.0
        assert catalogue.parallax_mas.max() < 800.0
        known = catalogue.b_v[~np.isnan(catalogue.b_v)]
        assert np.all((known > -0.4) & (known < 4.0))

    def test_arrays_cannot_be_changed_by_one_of_their_readers(self, catalogue: StarCatalogue) -> None:
        with pytest.raises(ValueError, match="read-only"):
            catalogue.ra_deg[0] = 1.0


def test_clusters_have_no_number_and_their_stars_point_to_them() -> None:
    catalogue = stars.ecliptic_stars()
    clusters = [i for i, kind in enumerate(catalogue.kind) if kind == "cluster"]
    assert {catalogue.name[i] for i in clusters} == {"Pleiades", "Beehive"}
    assert np.array_equal(np.flatnonzero(catalogue.hip == 0), clusters)
    members = {name for name, cluster in zip(catalogue.name, catalogue.cluster, strict=True) if cluster}
    assert members == {"Alcyone"}


def test_both_catalogues_tell_the_same_of_a_star() -> None:
    near, field = stars.ecliptic_stars(), stars.field_stars()
    near = near.take(near.hip > 0)
    rows = np.array([np.flatnonzero(field.hip == hip)[0] for hip in near.hip])
    for column in stars.NUMBER_COLUMNS:
        np.testing.assert_array_equal(getattr(field, column)[rows], getattr(near, column))
    assert field.take(rows).labels == near.name


def test_a_star_is_found_by_name_or_number_in_any_case() -> None:
    field = stars.field_stars()
    assert field.hip[field.index_of("sPiCa")] == 65474
    assert field.bayer[field.index_of("hip 49583")] == "eta Leo"
    with pytest.raises(UnknownNameError, match="spica"):
        field.index_of("Spicca")


def test_take_follows_indices_and_masks() -> None:
    catalogue = stars.ecliptic_stars()
    assert catalogue.take(np.array([4, 0])).name == (catalogue.name[4], catalogue.name[0])
    bright = catalogue.take(catalogue.v_mag < 1.0)
    assert bright.name == ("Aldebaran", "Antares", "Spica")
    assert bright.ra_deg.shape == (3,)


def test_columns_of_unequal_length_are_refused() -> None:
    with pytest.raises(ValueError, match=r"name has 1 entries, hip has 42"):
        replace(stars.ecliptic_stars(), name=("Spica",))


def test_directions_at_the_epoch_are_the_listed_places() -> None:
    catalogue = stars.ecliptic_stars()
    x, y, z = np.moveaxis(stars.barycentric_directions(catalogue, np.array([J2000_JD])), 1, 0)[..., 0]
    np.testing.assert_allclose(np.degrees(np.arctan2(y, x)) % 360.0, catalogue.ra_deg, atol=1e-12)
    np.testing.assert_allclose(np.degrees(np.arcsin(z)), catalogue.dec_deg, atol=1e-12)


@given(one_star())
def test_directions_are_unit_vectors_and_rates_lie_across_them(catalogue: StarCatalogue) -> None:
    direction = stars.barycentric_directions(catalogue, EPOCHS)
    rate = stars.barycentric_direction_rates(catalogue, EPOCHS)
    assert direction.shape == rate.shape == (1, 3, EPOCHS.size)
    np.testing.assert_allclose(np.linalg.norm(direction, axis=1), 1.0, rtol=1e-14)
    # A rate is at most 1.9e-7 rad a day; 16 digits of it leave 5e-23, and this is twice as much.
    np.testing.assert_allclose(np.sum(direction * rate, axis=1), 0.0, atol=1e-22)


@given(one_star())
def test_rates_are_the_derivative_of_directions(catalogue: StarCatalogue) -> None:
    step_days = 365.25
    after = stars.barycentric_directions(catalogue, EPOCHS + step_days)
    before = stars.barycentric_directions(catalogue, EPOCHS - step_days)
    rate = stars.barycentric_direction_rates(catalogue, EPOCHS)
    # Central differences: rounding 1e-16 / 365 days, and the cube of 14 arcsec, 4e-13 / 365 days.
    np.testing.assert_allclose((after - before) / (2.0 * step_days), rate, atol=3e-15)


@given(one_star())
def test_a_star_departs_steadily_and_slows_down_as_it_recedes(catalogue: StarCatalogue) -> None:
    years = np.arange(0.0, 700.0, 50.0)
    direction = stars.barycentric_directions(catalogue, J2000_JD + 365.25 * years)
    away_mas = angle_mas(direction, direction[..., :1])[0]
    motion = np.hypot(catalogue.pm_ra_cosdec_mas_per_year, catalogue.pm_dec_mas_per_year)[0]
    # An even motion along a straight line at distance 1 is seen under the arc tangent of the way gone;
    # vectors of 16 digits hold an angle to 5e-8 mas.
    np.testing.assert_allclose(
        np.tan(away_mas * RAD_PER_MAS) / RAD_PER_MAS, motion * years, rtol=1e-6, atol=1e-6
    )


@given(one_star())
def test_a_change_of_epoch_keeps_a_star_on_its_way(catalogue: StarCatalogue) -> None:
    moved = stars.at_epoch(catalogue, J2000_JD - 3_196.0)
    assert moved.epoch_jd_tdb == J2000_JD - 3_196.0
    away_mas = angle_mas(
        stars.barycentric_directions(catalogue, EPOCHS), stars.barycentric_directions(moved, EPOCHS)
    )
    # Dropped is the radial velocity that arises in 8.75 years, pace^2 * 8.75 years of the distance a year; by
    # a time t it has shortened the way gone, pace * t, by that share times t. Rounding leaves 1e-5 mas.
    pace = np.hypot(catalogue.pm_ra_cosdec_mas_per_year, catalogue.pm_dec_mas_per_year)[0] * RAD_PER_MAS
    assert away_mas.max() <= 1e-5 + 1.01 * pace**3 * 8.75 * 660.0**2 / RAD_PER_MAS


@given(one_star())
def test_an_observer_at_the_barycentre_sees_no_parallax(catalogue: StarCatalogue) -> None:
    observer = np.zeros((3, EPOCHS.size))
    np.testing.assert_array_equal(
        stars.astrometric_directions(catalogue, EPOCHS, observer),
        stars.barycentric_directions(catalogue, EPOCHS),
    )


def test_one_au_across_the_line_of_sight_shifts_a_star_by_its_parallax() -> None:
    catalogue = stars.ecliptic_stars()
    when = np.array([J2000_JD])
    seen = stars.barycentric_directions(catalogue, when)
    for i in range(len(catalogue)):
        across = np.cross(seen[i, :, 0], [0.0, 0.0, 1.0])
        observer = (across / np.linalg.norm(across))[:, np.newaxis]
        shifted = stars.astrometric_directions(catalogue, when, observer)
        assert angle_mas(shifted, seen)[i, 0] == pytest.approx(catalogue.parallax_mas[i], rel=1e-6)
        assert np.dot(shifted[i, :, 0] - seen[i, :, 0], observer[:, 0]) < 0.0  # it shifts the other way


def test_a_parallax_below_zero_counts_as_zero() -> None:
    field = stars.field_stars()
    distant = field.take(field.parallax_mas <= 0.0)
    assert len(distant) > 10
    observer = np.full((3, EPOCHS.size), 0.5)
    np.testing.assert_array_equal(
        stars.astrometric_directions(distant, EPOCHS, observer), stars.barycentric_directions(distant, EPOCHS)
    )


def test_one_star_an_instant_is_the_diagonal_of_all_stars_at_all_instants() -> None:
    catalogue = stars.ecliptic_stars()
    star = np.arange(EPOCHS.size) % len(catalogue)
    observer = np.stack([np.cos(EPOCHS), np.sin(EPOCHS), 0.1 * np.cos(EPOCHS)])
    every = stars.astrometric_directions(catalogue, EPOCHS, observer)
    each = stars.astrometric_directions_each(catalogue, star, EPOCHS, observer)
    np.testing.assert_allclose(each, every[star, :, np.arange(EPOCHS.size)].T, atol=1e-15)
