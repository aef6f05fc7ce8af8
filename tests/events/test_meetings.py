"""Meetings of planets that were published, and the events of other kinds with known dates."""

from __future__ import annotations

from collections.abc import Callable

import polars as pl
import pytest

from tests.reference.published import jd_of_date

Almanac = Callable[[float, float, list[str], list[str], list[str]], pl.DataFrame]
BOTH = ["ecliptic", "equator"]


def days(table: pl.DataFrame) -> list[str]:
    return [text[:10] for text in table.sort("jd_tt")["utc"]]


def conjunctions(almanac: Almanac, pair: list[str], first: str, last: str, frame: str) -> pl.DataFrame:
    span = jd_of_date(first), jd_of_date(last)
    found = almanac(*span, ["conjunction"], BOTH, pair)
    found = found.filter(pl.col("other") == pair[1])
    assert set(found["body"]) <= set(pair[:1])
    return found.filter(frame=frame).sort("jd_tt")


@pytest.mark.parametrize("frame", BOTH)
def test_jupiter_and_saturn_met_three_times_in_1980_and_1981(published_almanac: Almanac, frame: str) -> None:
    # Meeus, Mathematical Astronomy Morsels, triple conjunctions (dates: tests/reference/data).
    found = conjunctions(published_almanac, ["jupiter", "saturn"], "1980-06-01", "1982-01-01", frame)
    assert found["meeting_part"].to_list() == ["1 of 3", "2 of 3", "3 of 3"]
    assert found["meeting_id"].n_unique() == 1


def test_both_definitions_and_the_least_separations_of_an_encounter_are_one_meeting(
    published_almanac: Almanac,
) -> None:
    span = jd_of_date("2020-01-01"), jd_of_date("2021-12-31")
    found = published_almanac(*span, ["conjunction", "appulse"], BOTH, ["jupiter", "saturn"])
    found = found.filter((pl.col("other") == "saturn") & pl.col("detail").is_null())
    assert found.height == 3
    assert found["meeting_id"].n_unique() == 1
    assert set(found["meeting_part"]) == {"1 of 1"}


def test_part_of_a_meeting_is_numbered_as_in_the_whole(published_almanac: Almanac) -> None:
    found = conjunctions(published_almanac, ["jupiter", "saturn"], "1981-02-01", "1981-04-01", "ecliptic")
    assert found["meeting_part"].to_list() == ["2 of 3"]


def test_uranus_and_neptune_had_no_conjunction_in_right_ascension_in_september_1993(
    published_almanac: Almanac,
) -> None:
    # Longitude: triple in 1993 (published). In right ascension they met only near its first and last parts.
    span = jd_of_date("1993-09-01"), jd_of_date("1993-10-15")
    found = published_almanac(*span, ["conjunction"], BOTH, ["uranus", "neptune"])
    assert found.filter(frame="equator").is_empty()


def test_mars_and_uranus_meet_twice_in_right_ascension_in_march_2042(published_almanac: Almanac) -> None:
    found = conjunctions(published_almanac, ["mars", "uranus"], "2042-03-01", "2042-04-01", "equator")
    assert days(found) == ["2042-03-16", "2042-03-18"]


def test_five_planets_gather_in_september_2040(published_almanac: Almanac) -> None:
    # Gathering within 9.31 degrees on 2040-09-08; published lists of planetary groupings, from memory.
    five = ["mercury", "venus", "mars", "jupiter", "saturn"]
    span = jd_of_date("2040-08-15"), jd_of_date("2040-10-01")
    found = published_almanac(*span, ["gathering"], ["ecliptic"], five)
    whole = found.filter(pl.col("detail") == "+".join(five))
    assert days(whole) == ["2040-09-08"]
    assert whole["separation_deg"][0] == pytest.approx(9.31, abs=0.01)
    assert found.filter(pl.col("detail") != "+".join(five))["separation_deg"].min() < 9.31


TRANSITS = {
    # Espenak, NASA GSFC, geocentric; times are checked to the minute in tests/reference.
    "venus": ("2000-01-01", "2020-01-01", ["2004-06-08", "2012-06-06"]),
    "mercury": ("2000-01-01", "2020-01-01", ["2003-05-07", "2006-11-08", "2016-05-09", "2019-11-11"]),
}


@pytest.mark.parametrize("body", TRANSITS)
def test_transits_fall_on_the_published_days_and_no_others(published_almanac: Almanac, body: str) -> None:
    first, last, wanted = TRANSITS[body]
    found = published_almanac(jd_of_date(first), jd_of_date(last), ["transit"], ["ecliptic"], ["sun", body])
    assert days(found) == wanted
    assert set(found["detail"]) == {body}
    for row in found.iter_rows(named=True):
        contacts = [row[f"contact{number}_utc"] for number in (1, 2, 3, 4)]
        assert [*contacts[:2], row["utc"], *contacts[2:]] == sorted([*contacts, row["utc"]])


def test_earth_passed_saturns_ring_plane_three_times_in_1995_and_1996_and_once_in_2009(
    published_almanac: Almanac,
) -> None:
    # Dates from memory: 1995 May 22, August 10, 1996 February 11; 2009 September 4; Sun 1995 November 19 and
    # 2009 August 10 or 11. A day and a half is allowed: printed to the day, the plane moves a hair a day.
    wanted = {
        "earth": ["1995-05-22", "1995-08-10", "1996-02-11", "2009-09-04"],
        "sun": ["1995-11-19", "2009-08-11"],
    }
    span = jd_of_date("1990-01-01"), jd_of_date("2015-01-01")
    found = published_almanac(*span, ["ring_plane_crossing"], ["ecliptic"], ["saturn"])
    for detail, dates in wanted.items():
        own = found.filter(detail=detail)["jd_tt"].to_list()
        assert own == pytest.approx([jd_of_date(f"{day}T12:00") for day in dates], rel=0.0, abs=1.5)


def test_planets_further_out_have_one_perihelion_an_orbit(published_almanac: Almanac) -> None:
    # Sidereal periods 11.86 and 29.46 years: in 1900 to 2100 no more than 17 and 7 (common practice).
    span = jd_of_date("1900-01-01"), jd_of_date("2100-01-01")
    found = published_almanac(*span, ["perihelion", "aphelion"], ["ecliptic"], ["jupiter", "saturn"])
    for body, years in (("jupiter", 11.86), ("saturn", 29.46)):
        for kind in ("perihelion", "aphelion"):
            gaps = found.filter(body=body, kind=kind)["jd_tt"].diff().drop_nulls() / 365.25
            assert gaps.is_between(0.97 * years, 1.03 * years).all()
            assert gaps.len() >= 200 / years - 2


def test_sun_enters_no_constellation_off_the_ecliptic(published_almanac: Almanac) -> None:
    span = jd_of_date("2020-01-01"), jd_of_date("2030-01-01")
    found = published_almanac(*span, ["constellation_entry"], ["ecliptic"], ["sun"]).sort("jd_tt")
    # Each entry leaves what the one before entered; thirteen constellations, Ophiuchus among them.
    assert found["detail"].to_list()[1:] == found["constellation"].to_list()[:-1]
    assert found["constellation"].n_unique() == 13
    assert found.height == 130


@pytest.mark.parametrize("body", ["mercury", "mars", "jupiter", "pluto", "moon"])
def test_each_constellation_left_is_the_one_last_entered(published_almanac: Almanac, body: str) -> None:
    span = jd_of_date("2020-01-01"), jd_of_date("2030-01-01")
    found = published_almanac(*span, ["constellation_entry"], ["ecliptic"], [body]).sort("jd_tt")
    assert found.height > 2
    assert found["detail"].to_list()[1:] == found["constellation"].to_list()[:-1]
