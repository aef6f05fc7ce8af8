"""The wording of events: frames named, figures as coarse as people read them, nothing unsure claimed."""

from __future__ import annotations

import itertools
from typing import Any

import pytest

from tests.report.calendar_samples import CONJUNCTION, NEAR_SUN, ONE_OF_EVERY_KIND, STAR, STATION, TRANSIT
from wanderers.report import words
from wanderers.report.definitions import definition

ROWS = list(ONE_OF_EVERY_KIND.iter_rows(named=True))
FRAMES = ("ecliptic", "equator", "j2000")


def lines(row: dict[str, Any]) -> list[str]:
    return [words.summary(row), definition(row), *words.figures(row), *words.cautions(row)]


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["kind"])
def test_every_kind_reads_as_plain_sentences(row: dict[str, Any]) -> None:
    for line in lines(row):
        assert line[0].isupper()
        assert not any(mark in line for mark in ("None", "nan", "_", "{", "  "))
    assert len(words.summary(row)) <= 75
    assert all(line.endswith(".") for line in lines(row)[1:])


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["kind"])
def test_a_degree_sign_in_a_headline_has_the_word_in_the_text(row: dict[str, Any]) -> None:
    headline, *text = lines(row)
    assert "°" not in headline or "degrees" in " ".join(text)
    assert all("°" not in line for line in text)


@pytest.mark.parametrize("row", [STATION, CONJUNCTION], ids=["station", "conjunction"])
def test_the_frame_of_a_station_or_conjunction_is_named(row: dict[str, Any]) -> None:
    texts = [(words.summary(row | {"frame": frame}), definition(row | {"frame": frame})) for frame in FRAMES]
    for one, other in itertools.combinations(texts, 2):
        assert one[0] != other[0]
        assert one[1] != other[1]


@pytest.mark.parametrize(
    ("separation_deg", "headline", "figure"),
    [
        (6.34, "6.3° apart", "6.3 degrees."),
        (1.0, "1.0° apart", "1.0 degrees."),
        (0.42, "0.4° apart", "0.42 degrees (25 arcminutes)."),
        (0.1, "0.1° apart", "0.10 degrees (6 arcminutes)."),
        (0.05, "3 arcminutes apart", "3 arcminutes."),
        (0.02, "72 arcseconds apart", "72 arcseconds."),
        (0.001, "4 arcseconds apart", "4 arcseconds."),
    ],
)
def test_small_separations_take_smaller_units(separation_deg: float, headline: str, figure: str) -> None:
    row = CONJUNCTION | {"separation_deg": separation_deg}
    assert words.summary(row) == f"Venus and Saturn {headline}, conjunction in right ascension"
    assert f"Separation: {figure}" in words.figures(row)


@pytest.mark.parametrize(
    ("body", "other", "headline"),
    [
        ("moon", "mars", "Moon passes in front of Mars"),
        ("venus", "jupiter", "Venus passes in front of Jupiter"),
        # Distances from the Earth overlap: Mercury 0.5-1.5 au, Venus 0.3-1.7, Mars 0.4-2.7; so do
        # those of Neptune and Pluto.
        ("mercury", "venus", "Mercury and Venus: one passes in front of the other"),
        ("venus", "mars", "Venus and Mars: one passes in front of the other"),
        ("neptune", "pluto", "Neptune and Pluto: one passes in front of the other"),
    ],
)
def test_who_is_in_front_is_said_only_where_it_is_certain(body: str, other: str, headline: str) -> None:
    row = STAR | {"body": body, "other": other, "detail": "moon" if body == "moon" else "planet"}
    assert words.summary(row) == headline


def test_a_star_keeps_its_name() -> None:
    assert words.summary(STAR | {"other": "HIP 92041"}) == "Moon passes in front of phi Sgr"


def test_an_approach_without_a_conjunction_says_so() -> None:
    assert "No conjunction" in definition(NEAR_SUN)
    assert "No conjunction" not in definition(NEAR_SUN | {"detail": None})


@pytest.mark.parametrize(
    ("side", "sky"), [("east", "evening"), ("west", "morning")]
)  # east elongation = evening sky: common practice, no source
def test_an_elongation_names_the_sky_it_is_seen_in(side: str, sky: str) -> None:
    row = STATION | {"kind": "greatest_elongation", "body": "venus", "detail": side, "elongation_deg": 46.95}
    assert words.summary(row) == f"Venus 47.0° from the Sun, greatest {side}ern elongation"
    assert f"in the {sky} sky" in definition(row)


@pytest.mark.parametrize(
    ("seconds", "text"),
    [(1.04, "1 second"), (1.94, "1.9 seconds"), (37.2, "37 seconds"), (119.0, "120 seconds"),
     (130.0, "2.2 minutes"), (4_000.0, "67 minutes"), (7_300.0, "2 hours"), (500_000.0, "5.8 days")],
)  # fmt: skip
def test_doubt_is_told_in_two_digits_and_the_unit_people_use(seconds: float, text: str) -> None:
    assert f"uncertain by about {text}:" in str(words.uncertainty(TRANSIT | {"utc_uncertainty_s": seconds}))


def test_magnitudes_have_no_negative_zero() -> None:
    assert "magnitude 0.0" in words.figures(STATION | {"magnitude": -0.04})[0]
    assert "magnitude -0.1" in words.figures(STATION | {"magnitude": -0.06})[0]


def test_the_distance_of_the_moon_is_told_in_kilometres() -> None:
    # 384 400 km, the Moon's mean distance, is 0.002570 au (IAU 2012 au).
    assert "384,400 km from the Earth" in words.figures(STAR | {"distance_au": 384_400.0 / 149_597_870.7})[1]


@pytest.mark.parametrize(
    ("names", "text"), [((), ""), (("A",), "A"), (("A", "B"), "A and B"), (("A", "B", "C"), "A, B and C")]
)
def test_names_are_listed_as_in_a_sentence(names: tuple[str, ...], text: str) -> None:
    assert words.listed(names) == text


def test_looking_at_the_sun_is_warned_of_but_not_at_the_turn_of_a_season() -> None:
    warned = {row["kind"] for row in ROWS if words.SUN_CAUTION in words.cautions(row)}
    assert warned == {"perigee", "transit"}  # of the sample; its perigee is the Sun's


@pytest.mark.parametrize(("detail", "way"), [("retrograde", "westward"), ("direct", "eastward")])
def test_retrograde_is_westward(detail: str, way: str) -> None:
    # Astronomical Almanac, section M glossary: direct motion is eastward, retrograde westward (from memory).
    assert f"moves {way}" in definition(STATION | {"detail": detail})


@pytest.mark.parametrize(
    ("kind", "detail", "degrees"),
    [
        ("moon_phase", "new", 0),
        ("moon_phase", "first_quarter", 90),
        ("moon_phase", "full", 180),
        ("moon_phase", "last_quarter", 270),
        ("season_point", "equinox_march", 0),
        ("season_point", "solstice_june", 90),
        ("season_point", "equinox_september", 180),
        ("season_point", "solstice_december", 270),
    ],
)
def test_phases_and_seasons_are_told_by_longitude(kind: str, detail: str, degrees: int) -> None:
    # Astronomical Almanac, section M glossary: phases, equinox, solstice (from memory).
    row = STATION | {"kind": kind, "body": "moon" if kind == "moon_phase" else "sun", "detail": detail}
    assert f" is {degrees} degrees" in definition(row)


@pytest.mark.parametrize(("detail", "way"), [("ascending", "northward"), ("descending", "southward")])
def test_a_node_is_crossed_northward_when_ascending(detail: str, way: str) -> None:
    assert words.summary(STATION | {"kind": "node", "detail": detail}) == f"Mars crosses the ecliptic {way}"


@pytest.mark.parametrize(
    ("kind", "headline"),
    [("perigee", "Moon closest to the Earth"), ("apogee", "Moon farthest from the Earth")],
)
def test_perigee_is_closest(kind: str, headline: str) -> None:
    row = STATION | {"kind": kind, "body": "moon", "distance_au": 0.0024}
    assert words.summary(row).startswith(f"{headline}, ")
    assert kind in definition(row)
