"""The event table's columns: what is printed agrees with what is known otherwise."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from skyfield.api import load

from tests.direct import Direct, wrapped_deg
from wanderers import schema
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.constellations import ABBREVIATIONS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac, event_table, time_texts
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind

AU_KM = 149_597_870.7
YEARS = (2_458_849.5, 2_460_676.5)  # 2020 to 2025
DISCS = ("occultation", "transit")


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*YEARS, frozenset(Kind), frozenset(Frame)))


def milliseconds(texts: pl.Series) -> np.ndarray:
    return texts.str.strip_suffix("Z").str.to_datetime("%Y-%m-%dT%H:%M:%S%.3f").dt.epoch("ms").to_numpy()


def test_tt_is_the_julian_date_to_the_millisecond(table: pl.DataFrame) -> None:
    expected = (table["jd_tt"].to_numpy() - 2_440_587.5) * 86_400_000.0
    np.testing.assert_allclose(milliseconds(table["tt"]), expected, rtol=0.0, atol=0.55)


def test_utc_is_skyfields(table: pl.DataFrame) -> None:
    # Skyfield's own leap seconds: TT - UTC is 69.184 s in these years (IERS Bulletin C).
    theirs = load.timescale(builtin=True).tt_jd(table["jd_tt"].to_numpy()).utc_datetime()
    expected = [one.timestamp() * 1000.0 for one in theirs]
    np.testing.assert_allclose(milliseconds(table["utc"]), expected, rtol=0.0, atol=1.1)
    assert (milliseconds(table["tt"]) - milliseconds(table["utc"]) - 69_184 <= 1).all()


def test_places_are_the_bodys_by_skyfield(direct: Direct, table: pl.DataFrame) -> None:
    for (name,), rows in table.sample(3000, seed=4).group_by("body"):
        body, jd = Body(name), rows["jd_tt"].to_numpy()
        outside = rows["elongation_deg"].fill_null(180.0).to_numpy() > 1.0
        for frame, longitude, latitude in (
            (Frame.ECLIPTIC, "longitude_deg", "latitude_deg"),
            (Frame.EQUATOR, "ra_deg", "dec_deg"),
        ):
            expected = direct.place_deg(body, jd, frame)
            away = wrapped_deg(rows[longitude].to_numpy() - expected[0])
            np.testing.assert_allclose(away[outside], 0.0, atol=1e-7)
            np.testing.assert_allclose(rows[latitude].to_numpy()[outside], expected[1][outside], atol=1e-7)
        distance_km = rows["distance_au"].to_numpy() * AU_KM
        np.testing.assert_allclose(distance_km, direct.distance_km(body, jd), rtol=0.0, atol=0.1)


def test_elongation_is_the_true_angle_and_null_for_the_sun(direct: Direct, table: pl.DataFrame) -> None:
    assert table.filter(body="sun")["elongation_deg"].null_count() == table.filter(body="sun").height
    assert table.filter(pl.col("body") != "sun")["elongation_deg"].null_count() == 0
    mars = table.filter(body="mars")
    expected = direct.separation_deg(Body.MARS, Body.SUN, mars["jd_tt"].to_numpy())
    np.testing.assert_allclose(mars["elongation_deg"], expected, atol=1e-7)


def test_separation_is_there_where_two_meet(table: pl.DataFrame) -> None:
    has = table["separation_deg"].is_not_null()
    expected = table["other"].is_not_null() | table["kind"].is_in(["gathering", "transit"])
    assert (has == expected).all()


def test_meetings_are_named_where_two_meet_and_nowhere_else(table: pl.DataFrame) -> None:
    met = table["kind"].is_in(["conjunction", "appulse"])
    assert (table["meeting_id"].is_not_null() == met).all()
    assert table.filter(met, pl.col("kind") == "conjunction")["meeting_part"].null_count() == 0
    quasi = table.filter(detail="quasi")
    assert quasi.height > 0 and quasi["meeting_part"].null_count() == quasi.height


def test_contacts_are_there_where_discs_meet_and_come_in_order(table: pl.DataFrame) -> None:
    contacts = [f"contact{number}_utc" for number in (1, 2, 3, 4)]
    discs = table.filter(pl.col("kind").is_in(DISCS))
    others = table.filter(~pl.col("kind").is_in(DISCS))
    assert all(others[name].null_count() == others.height for name in contacts)
    assert discs.height > 50
    for row in discs.iter_rows(named=True):
        instants = [row[name] for name in contacts if row[name]]
        assert len(instants) in (2, 4)
        assert instants == sorted(instants)
        assert instants[0] < row["utc"] < instants[-1]


@pytest.mark.parametrize(
    ("kind", "details"),
    [
        ("station", {"retrograde", "direct"}),
        ("solar_conjunction", {"superior", "inferior", None}),
        ("quadrature", {"east", "west"}),
        ("greatest_elongation", {"east", "west"}),
        ("node", {"ascending", "descending"}),
        ("moon_phase", {"new", "first_quarter", "full", "last_quarter"}),
        ("season_point", {"equinox_march", "solstice_june", "equinox_september", "solstice_december"}),
        ("appulse", {None, "quasi"}),
        ("occultation", {"star", "moon"}),
        ("conjunction", {None}),
    ],
)
def test_details_are_the_words_promised(table: pl.DataFrame, kind: str, details: set[str | None]) -> None:
    assert set(table.filter(kind=kind)["detail"]) == details


@pytest.mark.parametrize(
    ("kind", "frames"),
    [
        ("station", {"ecliptic", "equator", "j2000"}),
        ("conjunction", {"ecliptic", "equator"}),
        ("opposition", {"ecliptic"}),
        ("node", {"ecliptic"}),
        ("appulse", {None}),
        ("perigee", {None}),
        ("greatest_elongation", {None}),
        ("occultation", {None}),
    ],
)
def test_frames_are_those_of_the_definition(table: pl.DataFrame, kind: str, frames: set[str | None]) -> None:
    assert set(table.filter(kind=kind)["frame"]) == frames


def test_constellations_are_iau_abbreviations(table: pl.DataFrame) -> None:
    assert set(table["constellation"]) <= set(ABBREVIATIONS)
    assert table["constellation"].null_count() == 0


def test_longitudes_run_from_0_to_360(table: pl.DataFrame) -> None:
    for name in ("longitude_deg", "ra_deg"):
        assert table[name].is_between(0.0, 360.0, closed="left").all()


# ---- what is not sure


def test_near_the_present_utc_is_sure_and_says_nothing(table: pl.DataFrame) -> None:
    assert table["delta_t_s"].null_count() == table["utc_uncertainty_s"].null_count() == table.height


@pytest.mark.parametrize(
    ("jd_tt", "delta_t_s", "slack_s"),
    # Delta-T of 1600: 109 s (Morrison et al. 2021, Table S15.2020); of 2500 by the same authors' parabola,
    # -320 + 32.5 ((2500 - 1825)/100)^2 = 1161 s. From memory.
    [(2_305_447.5, 109.0, 3.0), (2_634_166.5, 1161.0, 15.0)],
)
def test_in_far_years_delta_t_is_printed_with_how_sure_it_is(
    store: TrackStore, jd_tt: float, delta_t_s: float, slack_s: float
) -> None:
    far = almanac(store, Query(jd_tt, jd_tt + 365.0, frozenset({Kind.OPPOSITION, Kind.STATION})))
    assert far.height > 10
    assert far["utc_uncertainty_s"].null_count() == 0
    assert (far["utc_uncertainty_s"] > 1.0).all()
    np.testing.assert_allclose(far["delta_t_s"], delta_t_s, atol=slack_s)
    apart_s = (milliseconds(far["tt"]) - milliseconds(far["utc"])) / 1000.0
    np.testing.assert_allclose(apart_s, far["delta_t_s"], atol=0.002)


# ---- printing


def test_nothing_found_is_an_empty_table_with_all_columns(store: TrackStore) -> None:
    assert event_table(store, []).schema == pl.Schema(schema.EVENT_COLUMNS)


@pytest.mark.parametrize(
    ("jd", "text"),
    [
        (2_451_545.0, "2000-01-01T12:00:00.000Z"),
        (2_305_447.5, "1600-01-01T00:00:00.000Z"),
        (1_721_059.5, "0000-01-01T00:00:00.000Z"),
        (1_538_438.5, "-0500-01-01T00:00:00.000Z"),
        (1_721_058.5, "-0001-12-31T00:00:00.000Z"),
    ],
)
def test_years_are_astronomical_and_dates_gregorian(jd: float, text: str) -> None:
    # Julian Day numbers: Meeus, Astronomical Algorithms, equation 7.1 with B of the Gregorian calendar.
    assert time_texts(np.array([jd]), "Z")[0] == text


def test_an_instant_that_is_not_known_is_null_beside_others_that_are() -> None:
    for other in (2_451_545.0, 1_600_000.5):
        texts = time_texts(np.array([np.nan, other]), "Z")
        assert texts[0] is None and texts[1] is not None
    assert time_texts(np.full(2, np.nan), "Z").null_count() == 2


def test_milliseconds_are_rounded_and_carried_over() -> None:
    almost = 2_451_544.5 - 0.0004 / 86_400.0
    assert time_texts(np.array([almost]), "")[0] == "2000-01-01T00:00:00.000"


def test_bodies_of_the_table_are_bodies(table: pl.DataFrame) -> None:
    assert set(table["body"]) <= {body.value for body in BODIES}
