"""Sentences from a site: the instant by the local clock, when and where to look, or why not."""

from __future__ import annotations

import re
from typing import Any

import polars as pl
import pytest

from tests.report.calendar_samples import CONJUNCTION, STAR, STATION, TRANSIT, event
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.sides import with_sides
from wanderers.report.phrases import notes, sight
from wanderers.report.phrases.language import LENGTHS, language
from wanderers.report.phrases.sentences import Sentences, sentences
from wanderers.site.almanac import almanac_from_site
from wanderers.site.compass import POINTS
from wanderers.site.pairs import PLACEMENTS
from wanderers.site.places import Site

FROM, DAYS = 2_461_406.5, 120.0  # 2027, TT
SITES = (
    Site("Lantern Hill", 52.13, 11.62, 80.0, "Europe/Berlin"),
    Site("Saltwind Point", -34.9, 138.6, 10.0, "Australia/Adelaide"),
    Site("Frost Dome", 70.0, 25.0, 10.0, "Europe/Oslo"),
)
SEEN: dict[str, Any] = {
    "site": "Lantern Hill",
    "zone": "Europe/Berlin",
    "local_date": "2027-08-25",
    "local_time": "08:00:31",
    "best_local": "2027-08-25T05:12:40.000+02:00",
    "altitude_deg": 12.3,
    "compass": "east-northeast",
    "verdict": "naked_eye",
    "verdict_reason": "both easy to see, low in the east-northeast, in twilight",
    "caution": None,
    "seen_separation_deg": 0.61,
    "seen_placement": "to the lower left",
}
PAIR = CONJUNCTION | {"pair_side": "north"} | SEEN
HIDDEN = PAIR | {
    "verdict": "not_visible", "best_local": None, "altitude_deg": None, "compass": None,
    "verdict_reason": "Venus: sets 20 minutes after the Sun",
}  # fmt: skip
LOCAL_CONTACTS = {"local_contact1_local": "2027-05-01T21:10:20.000+02:00",
                  "local_contact4_local": "2027-05-01T22:04:50.000+02:00",
                  "circumstances": "hidden from 21:10 to 22:05"}  # fmt: skip


def told(row: dict[str, Any], code: str = "en") -> Sentences:
    return sentences(row, language(code))


def test_the_long_sentence_says_when_and_where_to_look() -> None:
    assert told(PAIR).long == (
        "On 25 August 2027 Venus is 25′ north of Saturn (conjunction in RA). Look at 05:13, 12° up in the "
        "east-northeast, Saturn to the lower left."
    )
    assert told(PAIR, "de").long == (
        "Am 25. August 2027 steht Venus 25′ nördlich von Saturn (Konj. in RA). Zu sehen um 05:13, 12° hoch "
        "im Ostnordosten, Saturn links unterhalb."
    )


def test_the_medium_sentence_says_so_in_short() -> None:
    assert told(PAIR).medium == "Venus 25′ north of Saturn (conj. in RA); look 05:13 ENE"
    assert told(PAIR, "de").medium == "Venus 25′ nördlich von Saturn (Konj. in RA); Blick 05:13 ONO"
    assert told(PAIR).short == "Venus 25′ N of Saturn"


def test_the_evening_is_dated_where_it_is_not_the_instants_day() -> None:
    row = PAIR | {"best_local": "2027-08-24T21:05:00.000+02:00"}
    assert "On 25 August 2027" in told(row).long and "on 24 August at 21:05" in told(row).long
    assert "am 24. August um 21:05" in told(row, "de").long
    assert "look 24 Aug, 21:05" in told(row).medium


@pytest.mark.parametrize(
    ("verdict", "aid"), [("binoculars", "with binoculars "), ("telescope", "with a telescope ")]
)
def test_what_the_eye_does_not_show_names_the_aid(verdict: str, aid: str) -> None:
    assert f"Look {aid}at 05:13" in told(PAIR | {"verdict": verdict}).long


def test_what_cannot_be_seen_says_why() -> None:
    assert told(HIDDEN).long.endswith(" Not visible from here (Venus: sets 20 minutes after the Sun).")
    assert told(HIDDEN, "de").long.endswith(
        " Von hier nicht zu sehen (Venus: geht 20 Minuten nach der Sonne unter)."
    )
    assert told(HIDDEN).medium.endswith("; not visible here")


def test_a_reason_without_words_in_the_language_is_left_out() -> None:
    row = HIDDEN | {"verdict_reason": "for a reason nobody translated"}
    assert told(row, "de").long.endswith(" Von hier nicht zu sehen.")


def test_times_are_local_and_say_so() -> None:
    row = STATION | {"local_date": "2027-01-10", "local_time": "13:59:03", "zone": "Europe/Berlin"}
    assert told(row).medium == "Mars turns retrograde in longitude, 14h local time"
    assert "gegen 14 Uhr Ortszeit" in told(row, "de").long
    assert "UTC" not in "".join((told(row).medium, told(row).long))


def test_midnight_is_that_of_the_local_clock() -> None:
    row = STATION | {"local_date": "2027-01-10", "local_time": "23:40:00", "zone": "Asia/Tokyo"}
    assert "just before 24h local time" in told(row).long
    assert any("midnight" in line for line in notes.notes(row, language("en")))
    assert not any(
        "midnight" in line
        for line in notes.notes(STATION | {"utc": "2027-01-10T14:40:00.000Z"}, language("en"))
    )


def test_columns_may_be_absent_or_null() -> None:
    bare = {
        name: PAIR[name] for name in PAIR if name not in ("seen_separation_deg", "seen_placement", "compass")
    }
    for row in (bare, bare | {"altitude_deg": None}, PAIR | dict.fromkeys(SEEN), {**CONJUNCTION}):
        said = told(row)
        for length, most in LENGTHS.items():
            assert 0 < len(getattr(said, length)) <= most
            assert "None" not in getattr(said, length)


def test_contacts_of_an_occultation_are_the_sites_own() -> None:
    row = (
        STAR
        | {"other": "Spica"}
        | SEEN
        | {"local_date": "2027-05-01", "local_time": "21:40:00"}
        | LOCAL_CONTACTS
    )
    assert " From here 21:10 to 22:05" in told(row).long
    assert told(row).medium.endswith("; here 21:10–22:05")
    sets = row | {"local_contact4_altitude_deg": -3.0}
    assert "From here it begins at 21:10" in told(sets).long and "22:05" not in told(sets).long
    assert "hier ab 21:10" in told(sets, "de").medium


def test_an_occultation_that_misses_the_site_says_by_how_much() -> None:
    row = STAR | {"other": "Spica"} | SEEN | {"circumstances": "misses here by 11 arcminutes"}
    assert told(row).long.endswith(" From here it misses by 11′.")
    assert told(row, "de").medium.endswith("; hier um 11′ verfehlt")


def test_a_transit_never_tells_to_look_without_the_caution() -> None:
    row = TRANSIT | SEEN | {"local_date": "2032-11-13", "local_time": "09:54:00"}
    assert notes.notes(row, language("en"))[-1] == language("en").phrase("notes", "sun")
    assert notes.notes(row, language("de"))[-1] == language("de").phrase("notes", "sun")


def test_nobody_is_told_to_look_at_the_sun_or_at_a_point_of_an_orbit() -> None:
    sun = (
        event(
            "constellation_entry", "2027-03-12T10:00:00.000Z", body="sun", detail="Aqr", constellation="Psc"
        )
        | SEEN
    )
    point = event("perihelion", "2027-02-06T07:44:00.000Z", body="mercury", elongation_deg=17.7) | SEEN
    for row in (sun, point):
        assert "Look" not in told(row).long and "look" not in told(row).medium


@pytest.mark.parametrize("code", ["en", "de"])
def test_every_direction_and_placement_has_words(code: str) -> None:
    words = language(code)
    assert set(words.table("toward")) == set(words.table("toward_brief")) == set(POINTS)
    assert set(words.table("placements")) == set(PLACEMENTS)
    assert len(set(words.table("toward").values())) == len(POINTS)


@pytest.fixture(scope="module", params=SITES, ids=lambda site: site.name)
def seen(request: pytest.FixtureRequest, store: TrackStore) -> pl.DataFrame:
    query = Query(FROM, FROM + DAYS, frozenset(Kind), frozenset({Frame.EQUATOR}), Choice(BODIES))
    return with_sides(store, almanac_from_site(store, query, request.param))


@pytest.mark.parametrize("code", ["en", "de"])
def test_what_the_program_sees_from_three_latitudes_fits_and_is_translated(
    seen: pl.DataFrame, code: str
) -> None:
    words = language(code)
    assert {"not_visible", "naked_eye", "binoculars"} <= set(seen["verdict"])
    for row in seen.iter_rows(named=True):
        said = told(row, code)
        for length, most in LENGTHS.items():
            assert 0 < len(getattr(said, length)) <= most
            assert not re.search(r"None|[{}\\[\\]_…]|  ", getattr(said, length))
        if row["verdict"] == "not_visible" and row["body"] != "sun":
            reason = row["verdict_reason"]
            assert sight.reason_text(reason, words) or reason.startswith("an instant of the Sun"), reason


def test_the_clock_of_the_sentence_is_the_tables(seen: pl.DataFrame) -> None:
    for row in seen.filter(pl.col("kind") == "moon_phase").iter_rows(named=True):
        hour, minute, second = (int(part) for part in row["local_time"].split(":"))
        rounded = min(hour * 60 + minute + (second >= 30), 1_439)
        bare = told(row | {"verdict": None}).long
        assert f"at {rounded // 60:02d}:{rounded % 60:02d} local time" in bare


@pytest.mark.parametrize("code", ["en", "de"])
def test_by_day_the_caution_is_of_the_sun_that_is_up_not_of_nearness(code: str) -> None:
    words = language(code)
    up = "The Sun is up: no binoculars or telescope, after sunset at 18:00"
    by_day = PAIR | {"elongation_deg": 90.0, "caution": up}
    assert notes.caution(by_day, words) == words.phrase("notes", "daylight")
    assert notes.caution(by_day | {"elongation_deg": 15.0}, words) == words.phrase("notes", "near_sun")
    assert notes.caution(by_day | {"caution": None}, words) is None
