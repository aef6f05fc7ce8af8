"""Sentences about events: every kind in every language, true to the table, never longer than asked."""

from __future__ import annotations

import calendar
import datetime as dt
import itertools
import math
import re
from typing import Any

import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.report.calendar_samples import CONJUNCTION, NEAR_SUN, ONE_OF_EVERY_KIND, STATION, TRANSIT, event
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.seasons import seasons
from wanderers.events.sides import with_sides
from wanderers.report.phrases import figures, notes
from wanderers.report.phrases.language import LENGTHS, language
from wanderers.report.phrases.seasons import season_sentences
from wanderers.report.phrases.sentences import VARIANTS, sentences, variant

LANGUAGES = ("en", "de")
FROM, TO = 2_458_849.5, 2_466_520.5  # 2020 to 2040, TT
LEFT_OVER = ("{", "}", "[", "]", "_", "  ", " ,", " .", "…")
SIDES = {"en": {"N": "north", "S": "south"}, "de": {"nördl.": "north", "südl.": "south"}}

# The details that a reader of the contract may meet, written down apart from the program.
DETAILS: dict[str, tuple[str | None, ...]] = {
    "station": ("retrograde", "direct"),
    "solar_conjunction": ("superior", "inferior", None),
    "quadrature": ("east", "west"),
    "greatest_elongation": ("east", "west"),
    "appulse": ("quasi", None),
    "occultation": ("planet", "star", "moon"),
    "transit": ("mercury", "venus"),
    "gathering": ("mercury+venus+mars", "sun+moon+mercury+venus+mars+jupiter+saturn+uranus+neptune+pluto"),
    "constellation_entry": ("Leo", "Oph"),
    "node": ("ascending", "descending"),
    "season_point": ("equinox_march", "solstice_june", "equinox_september", "solstice_december"),
    "ring_plane_crossing": ("earth", "sun"),
    "moon_phase": ("new", "first_quarter", "full", "last_quarter"),
}
PAIRED = ("conjunction", "appulse", "occultation")
STARS = ("Zubenelgenubi", "Kaus Borealis", "Pleiades", "Beehive", "HIP 92041")
FRAMES: dict[str, tuple[Frame, ...]] = {"station": tuple(Frame), "conjunction": tuple(Frame)}
CAST = {"greatest_brilliancy": ("venus",), "ring_plane_crossing": ("saturn",)} | dict.fromkeys(
    ("transit", "greatest_elongation"), ("mercury", "venus")
)
"""Kinds that only some bodies have, by their definitions."""


def casts(kind: str) -> list[tuple[str, str | None]]:
    """Return every body, or pair, that a kind may be about."""
    bodies = [body.value for body in BODIES]
    if kind in PAIRED:
        return [*itertools.combinations(bodies[1:], 2), *itertools.product(bodies[1:], STARS)]
    return [(body, None) for body in CAST.get(kind, bodies)]


@pytest.fixture(scope="module")
def events(store: TrackStore) -> pl.DataFrame:
    """Every event of 2020 to 2040 in all frames, stars and all."""
    query = Query(FROM, TO, frozenset(Kind), frozenset(Frame), Choice(BODIES))
    return with_sides(store, almanac(store, query))


def told(row: dict[str, Any], code: str = "en") -> dict[str, str]:
    said = sentences(row, language(code))
    return {"short": said.short, "medium": said.medium, "long": said.long}


def check(texts: dict[str, str], row: dict[str, Any]) -> None:
    for length, most in (("short", 25), ("medium", 60), ("long", 140)):
        text = texts[length]
        assert 0 < len(text) <= most, (length, text)
        assert text[0].isupper() or text[0].isdigit(), text
        assert not any(mark in text for mark in LEFT_OVER), text
        assert not re.search(r"\b(None|nan)\b", text), text
    assert texts["long"].endswith("."), texts["long"]
    assert texts["long"].count("(") == texts["long"].count(")")
    assert row["kind"] in set(Kind)


@pytest.mark.parametrize("code", LANGUAGES)
@pytest.mark.parametrize("kind", list(Kind))
def test_every_kind_detail_frame_and_body_has_phrases(kind: Kind, code: str) -> None:
    for detail, (body, other) in itertools.product(DETAILS.get(kind, (None,)), casts(kind)):
        if kind == "occultation" and (detail == "star") != (other in STARS):
            continue
        if kind == "occultation" and (detail == "moon") != (body == "moon" and other not in STARS):
            continue
        for frame, side in itertools.product(FRAMES.get(kind, (None,)), ("north", "south", None)):
            row = event(
                kind, "2027-09-28T13:31:00.000Z", body=body, other=other, detail=detail, frame=frame,
                separation_deg=9.94, elongation_deg=88.8, magnitude=-12.74, distance_au=30.123,
                diameter_arcsec=2000.0, constellation="Oph", pair_side=side, solar_side="west",
            )  # fmt: skip
            check(told(row, code), row)


@pytest.mark.parametrize("code", LANGUAGES)
@pytest.mark.parametrize("every", [pytest.param(1, marks=pytest.mark.long), 13])
def test_no_event_of_two_decades_is_longer_than_asked(events: pl.DataFrame, code: str, every: int) -> None:
    assert events.height > 50_000
    for row in events.gather_every(every).iter_rows(named=True):
        check(told(row, code), row)


@pytest.mark.parametrize("code", LANGUAGES)
def test_figures_and_sides_of_pairs_are_those_of_the_table(events: pl.DataFrame, code: str) -> None:
    pairs = events.filter(pl.col("kind").is_in(["conjunction", "appulse"])).gather_every(5)
    pattern = re.compile(r"(?<!under)(?<!unter) (\d+[.,]?\d*)([°′]) (N|S|nördl\.|südl\.) ")
    seen = 0
    for row in pairs.iter_rows(named=True):
        match = pattern.search(told(row, code)["short"])
        if match is None:
            continue
        seen += 1
        value, unit = float(match[1].replace(",", ".")), match[2]
        exact = row["separation_deg"] * (1.0 if unit == "°" else 60.0)
        assert abs(value - exact) <= (0.05 if unit == "°" else 0.5) + 1e-9
        assert unit == ("°" if row["separation_deg"] >= 59.5 / 60.0 else "′")
        assert SIDES[code][match[3]] == row["pair_side"]
    assert seen > 2_000


def test_east_is_the_evening_and_west_the_morning(events: pl.DataFrame) -> None:
    # Definition of elongation: Explanatory Supplement to the Astronomical Almanac, 3rd ed., glossary (from
    # memory); a body east of the Sun sets after it. A first-quarter Moon stands in the evening sky.
    for row in events.filter(pl.col("kind") == "greatest_elongation").iter_rows(named=True):
        sky = "evening" if row["detail"] == "east" else "morning"
        assert f"{row['detail']} of the Sun in the {sky} sky" in told(row)["long"]
        assert row["solar_side"] == row["detail"]
    phases = {"first_quarter": "east", "last_quarter": "west"}
    quarters = events.filter(pl.col("kind") == "moon_phase", pl.col("detail").is_in(list(phases)))
    assert all(phases[row["detail"]] == row["solar_side"] for row in quarters.iter_rows(named=True))


@pytest.mark.parametrize("code", LANGUAGES)
def test_dates_are_those_of_the_instant(events: pl.DataFrame, code: str) -> None:
    months = language(code).table("dates")["months"]
    if code == "en":
        assert months == list(calendar.month_name)[1:]
    for row in events.sample(2_000, seed=1).iter_rows(named=True):
        date = dt.datetime.fromisoformat(row["utc"]).date()
        dot = "." if code == "de" else ""
        assert f" {date.day}{dot} {months[date.month - 1]} {date.year}" in told(row, code)["long"]


@given(st.floats(0.0, 180.0))
def test_angles_round_to_what_they_say(degrees: float) -> None:
    for code in LANGUAGES:
        text = figures.angle(degrees, language(code), "signs").replace(",", ".")
        number, unit = re.fullmatch(r"(?:\w+ )?([\d.]+)([°′])", text).groups()  # type: ignore[union-attr]
        if " " in text:
            assert degrees < 1.0 / 60.0
        elif unit == "°":
            assert abs(float(number) - degrees) <= 0.05 + 1e-9 and float(number) >= 1.0
        else:
            assert abs(float(number) - degrees * 60.0) <= 0.5 + 1e-9 and 1.0 <= float(number) <= 59.0


@pytest.mark.parametrize(
    ("degrees", "en", "de"),
    [
        (6.34, "6.3 degrees", "6,3 Grad"),
        (1.0, "1.0 degrees", "1,0 Grad"),
        (0.9916, "59 arcminutes", "59 Bogenminuten"),
        (0.9918, "1.0 degrees", "1,0 Grad"),
        (0.42, "25 arcminutes", "25 Bogenminuten"),
        (1.2 / 60.0, "1 arcminute", "1 Bogenminute"),
        (0.3 / 60.0, "under 1 arcminute", "unter 1 Bogenminute"),
    ],
)
def test_units_of_small_angles_and_their_singular(degrees: float, en: str, de: str) -> None:
    assert figures.angle(degrees, language("en"), "units") == en
    assert figures.angle(degrees, language("de"), "units") == de


# Printed precision: stations, oppositions, conjunctions and elongations to the hour, Moon phases to the
# minute: Planetary and Lunar Coordinates 2001-2020, HM Nautical Almanac Office, publisher's description.
BY_THE_HOUR = (
    "station",
    "opposition",
    "conjunction",
    "solar_conjunction",
    "greatest_elongation",
    "quadrature",
)


@pytest.mark.parametrize("kind", BY_THE_HOUR)
def test_almanac_events_are_told_to_the_hour(kind: str) -> None:
    detail = DETAILS.get(kind, (None,))[0]
    row = event(
        kind, "2027-01-10T12:59:03.120Z", detail=detail, frame="ecliptic", body="venus",
        other="saturn" if kind == "conjunction" else None, separation_deg=1.0, elongation_deg=40.0,
    )  # fmt: skip
    texts = told(row)
    assert "about 13h UTC" in texts["long"] and not re.search(r"\d\d:\d\d", "".join(texts.values()))


def test_moon_phases_are_told_to_the_minute() -> None:
    row = event("moon_phase", "2027-01-07T20:24:31.000Z", detail="new", frame="ecliptic", body="moon")
    assert told(row)["short"] == "New Moon 20:25 UTC"
    assert told(row, "de")["short"] == "Neumond 20:25 UTC"


@pytest.mark.parametrize("code", LANGUAGES)
def test_greatest_brilliancy_is_a_day(code: str) -> None:
    row = event(
        "greatest_brilliancy", "2028-04-30T00:02:00.000Z", body="venus", elongation_deg=37.5, magnitude=-4.76
    )
    assert not any("UTC" in text for text in told(row, code).values())
    assert notes.notes(row, language(code)) == []


@given(st.integers(0, 86_399))
def test_what_happens_near_midnight_is_marked_and_keeps_its_date(second: int) -> None:
    clock = (dt.datetime(2027, 1, 10) + dt.timedelta(seconds=second)).isoformat(timespec="milliseconds")
    row = STATION | {"utc": f"{clock}Z"}
    for code, word in (("en", "midnight"), ("de", "Mitternacht")):
        marked = any(word in line for line in notes.notes(row, language(code)))
        assert marked == (min(second, 86_400 - second) <= 1_800)
    long = told(row)["long"]
    assert "On 10 January 2027 " in long
    assert ("just before 24h" in long) == (second >= 84_600)
    assert ("just after 0h" in long) == (second <= 1_800)


@pytest.mark.parametrize(
    ("error_s", "time", "note"),
    [
        (None, "13h UTC", False),
        (59.0, "13h UTC", False),
        (61.0, "13h UTC ±1 min", True),
        (1_500.0, "13h UTC ±25 min", True),
        (7_200.0, None, True),
    ],
)
def test_an_uncertain_time_says_so(error_s: float | None, time: str | None, note: bool) -> None:
    row = STATION | {"utc_uncertainty_s": error_s, "delta_t_s": 5_000.0}
    medium = told(row)["medium"]
    assert medium == "Mars turns retrograde in longitude" + (f", {time}" if time else "")
    assert any("uncertain by ±" in line for line in notes.notes(row, language("en"))) == note


def test_a_date_uncertain_by_days_carries_its_uncertainty() -> None:
    row = STATION | {
        "utc": "-5000-03-04T12:00:00.000Z",
        "utc_uncertainty_s": 2.0 * 86_400.0,
        "delta_t_s": 1.6e5,
    }
    assert "On 4 March 5001 BCE ±2 d Mars" in told(row)["long"]
    assert "4. März 5001 v. Chr. ±2 d" in told(row, "de")["long"]


@pytest.mark.parametrize("code", LANGUAGES)
def test_events_near_the_sun_carry_a_caution(events: pl.DataFrame, code: str) -> None:
    words = language(code)
    for row in events.sample(4_000, seed=2).iter_rows(named=True):
        nearest = (row["elongation_deg"] or math.inf) - (row["separation_deg"] or 0.0)
        lines = notes.notes(row, words)
        if nearest < 20.0 and row["body"] != "sun" and row["kind"] != "transit":
            assert lines[-1] == words.phrase("notes", "near_sun")
    assert notes.notes(TRANSIT, words) == [words.phrase("notes", "sun")]
    assert notes.notes(NEAR_SUN | {"utc": "2027-03-05T10:00:00.000Z"}, words)[-1] == words.phrase(
        "notes", "near_sun"
    )


def test_a_transit_gives_the_range_of_its_contacts() -> None:
    assert told(TRANSIT)["medium"] == "Mercury crosses the Sun, 06:41 to 11:07 UTC"
    assert "von 06:41 bis 11:07 UTC zieht Merkur vor der Sonne vorbei" in told(TRANSIT, "de")["long"]


def test_frames_are_told_apart() -> None:
    for row, code in itertools.product((STATION, CONJUNCTION), LANGUAGES):
        texts = [told(row | {"frame": frame}, code) for frame in ("ecliptic", "equator", "j2000")]
        for one, other in itertools.combinations(texts, 2):
            assert one["long"] != other["long"] and one["medium"] != other["medium"]


def test_german_is_german() -> None:
    assert told(STATION, "de")["short"] == "Mars wird rückläufig"
    assert told(CONJUNCTION | {"pair_side": "north"}, "de")["long"].startswith(
        "Am 25. August 2027 gegen 6 Uhr UTC steht Venus 25 Bogenminuten nördlich von Saturn (Konjunktion in "
    )
    elongation = next(row for row in ONE_OF_EVERY_KIND.to_dicts() if row["kind"] == "greatest_elongation")
    assert (
        "Venus die größte westliche Elongation, 47,0° von der Sonne am Morgenhimmel"
        in told(elongation, "de")["long"]
    )
    moon = CONJUNCTION | {"body": "moon", "other": "Pleiades", "pair_side": "south"}
    assert "steht der Mond 25 Bogenminuten südlich von den Plejaden" in told(moon, "de")["long"]


def test_a_pair_without_a_side_is_only_said_to_be_apart() -> None:
    texts = told(CONJUNCTION)
    assert not any(word in text for text in texts.values() for word in ("north", "south", " N ", " S "))
    assert "Venus and Saturn are 25 arcminutes apart" in texts["long"]


def test_every_variant_of_every_kind_is_reached(events: pl.DataFrame) -> None:
    reached = {(Kind(row["kind"]), variant(row)) for row in events.iter_rows(named=True)}
    missing = {(kind, name) for kind, names in VARIANTS.items() for name in names} - reached
    assert missing <= {
        (Kind.OCCULTATION, "any")
    }  # two planets of which either may be in front: once a century


@pytest.mark.parametrize("code", LANGUAGES)
def test_no_season_of_two_decades_is_longer_than_asked(store: TrackStore, code: str) -> None:
    table = seasons(store, FROM, TO, frames=tuple(Frame))
    assert table.height > 500
    for row in table.iter_rows(named=True):
        said = season_sentences(row, language(code))
        check({name: getattr(said, name) for name in LENGTHS}, row | {"kind": "station"})
        start, end = (
            dt.datetime.fromisoformat(row[f"station_{name}_utc"]) for name in ("retrograde", "direct")
        )
        assert f"{start.day}" in said.long and f"{end.day}" in said.long and f"{end.year}" in said.long
        assert abs(float(re.search(r": (\d+) ", said.long)[1]) - row["retrograde_days"]) <= 0.5  # type: ignore[index]


def test_a_season_without_its_stations_says_no_dates_of_them(store: TrackStore) -> None:
    row = seasons(store, FROM, FROM + 400.0).to_dicts()[0] | {
        "station_retrograde_utc": None, "retrograde_days": None, "arc_deg": None,
    }  # fmt: skip
    said = season_sentences(row, language("en"))
    assert said.short == f"{row['body'].capitalize()} retrograde"
    assert "around its" in said.long and "from" not in said.long
