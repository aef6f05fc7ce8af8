"""Figures and sentences of a dossier: rounding, origins, and what must never be said."""

from __future__ import annotations

import csv
import math
import re
from pathlib import Path

import polars as pl
import pytest

from tests.report.season_samples import two_years
from wanderers.report import facts as spoken
from wanderers.report.contents import Contents
from wanderers.report.dossier import facts, sentences
from wanderers.report.dossier.sources import SeasonRows, season_rows

SPEED_OF_LIGHT_M_PER_S = 299_792_458  # exact: BIPM, SI brochure, 9th edition, table 1
AU_M = 149_597_870_700  # exact: IAU 2012 Resolution B2


@pytest.fixture(scope="module")
def contents(cache_folder: Path) -> Contents:
    return two_years(cache_folder)


@pytest.fixture(scope="module")
def every(contents: Contents) -> dict[str, SeasonRows]:
    rows = contents.seasons.iter_rows(named=True)
    return {row["season_id"]: season_rows(contents.study, row) for row in rows}


def of_body(every: dict[str, SeasonRows], body: str) -> SeasonRows:
    return next(rows for season_id, rows in every.items() if season_id.startswith(body))


def told(rows: SeasonRows) -> str:
    return " ".join(sentence.text for sentence in sentences.sentences(rows))


@pytest.mark.parametrize("au", [0.2884, 0.677919, 1.0, 4.36, 28.868])
def test_light_minutes_follow_from_the_defined_speed_of_light(au: float) -> None:
    assert facts.light_minutes(au) == pytest.approx(au * AU_M / SPEED_OF_LIGHT_M_PER_S / 60.0, rel=1e-12)


def test_one_au_is_eight_light_minutes_nineteen_seconds() -> None:
    # 499.004784 s: light-time for unit distance, Astronomical Almanac, section K (from memory).
    assert facts.light_minutes(1.0) * 60.0 == pytest.approx(499.004784, abs=1e-6)
    assert spoken.light_time(1.0) == "8.3 light-minutes"
    assert spoken.light_time(28.868) == "4.0 light-hours"


@pytest.mark.parametrize(
    ("au", "said"),
    [
        (0.677919, "101 million km"),
        (0.2884, "43.1 million km"),
        (28.868, "4,320 million km"),
        (1.0, "150 million km"),
    ],
)
def test_kilometres_are_said_to_three_digits(au: float, said: str) -> None:
    assert facts.spoken_million_km(au) == said


def test_five_magnitudes_are_a_hundred_times() -> None:
    # Pogson's definition: five magnitudes are a ratio of exactly 100.
    assert facts.times_brighter(3.0, -2.0) == pytest.approx(100.0)
    assert facts.times_brighter(1.0, 0.0) == pytest.approx(2.512, abs=5e-4)
    assert spoken.times_brighter(5.0) == "100 times"
    assert spoken.times_brighter(0.9156) == "2.3 times"


@pytest.mark.parametrize(
    ("degrees", "said"),
    [
        (19.5, "about 39 Moon widths"),
        (2.8, "about 6 Moon widths"),
        (2.43, "about 5 Moon widths"),
        (0.5, "about 1 Moon width"),
    ],
)
def test_moon_widths_are_half_degrees(degrees: float, said: str) -> None:
    assert facts.moon_widths(degrees) == said


def test_every_figure_is_what_its_row_and_column_say(
    contents: Contents, every: dict[str, SeasonRows]
) -> None:
    tables = {
        "seasons.csv": contents.seasons,
        "seasons/marks.csv": contents.study.marks,
    }
    direct = 0
    for rows in every.values():
        for figure in facts.figures(rows):
            values = []
            for origin in figure.origins:
                season_id, _, rest = origin.row.partition(" ")
                table = tables[origin.file].filter(pl.col("season_id") == season_id)
                table = table.filter(pl.col("mark") == rest) if rest else table
                values.append(table.item(0, origin.column))
            if not figure.how:
                assert values == [figure.value]
                direct += 1
            assert re.search(r"\d|hardly|within an hour", figure.spoken)
    assert direct > 5 * len(every)


def test_derived_figures_follow_from_their_origins(every: dict[str, SeasonRows]) -> None:
    rows = of_body(every, "mars")
    by_name = {figure.name: figure for figure in facts.figures(rows)}
    assert by_name["In Moon widths"].value == pytest.approx(rows.season["arc_deg"] / 0.5)
    closest = rows.season["closest_au"]
    assert by_name["In light's time"].value == pytest.approx(closest * AU_M / SPEED_OF_LIGHT_M_PER_S / 60.0)
    ratio = by_name["At its brightest, against the first turn"].value
    difference = rows.marks["station_retrograde"]["magnitude"] - rows.season["peak_magnitude"]
    assert 2.5 * math.log10(ratio) == pytest.approx(difference)


def test_figures_of_mars_in_2027_are_those_of_handbooks(every: dict[str, SeasonRows]) -> None:
    # Opposition of 2027 February 19: 0.678 au, 13.8 arcseconds, magnitude -1.2 (handbook lists, from memory).
    by_name = {figure.name: figure for figure in facts.figures(of_body(every, "mars"))}
    assert by_name["Least distance"].spoken == "0.678 au"
    assert by_name["Largest disc"].spoken == "13.8 arcseconds"
    assert by_name["Greatest brightness"].value == pytest.approx(-1.2, abs=0.1)
    assert by_name["Runs backwards for"].spoken == "81 days"


def test_least_distance_is_never_put_on_the_day_of_opposition_as_such(every: dict[str, SeasonRows]) -> None:
    for rows in every.values():
        text = told(rows)
        assert "losest at opposition" not in text
        assert "rightest at opposition" not in text
        for sentence in sentences.sentences(rows):
            if sentence.text.startswith("Least distance"):
                assert re.search(r"(\d+ (hours?|days?) (after|before)|within an hour of) ", sentence.text)


def test_no_planet_turns_round(every: dict[str, SeasonRows]) -> None:
    for rows in every.values():
        text = told(rows)
        assert "turns round" not in text and "turns around" not in text
        assert "itself never reverses" in text


def test_constellations_are_named_as_such_and_no_sign_is_said(every: dict[str, SeasonRows]) -> None:
    # English names of signs that differ from the constellations' Latin ones.
    for rows in every.values():
        text = told(rows)
        assert "constellation" in text
        assert not re.search(r"\b(sign|zodiac|Scorpio|Capricorn)\b", text)
    # Jupiter's, Neptune's paths reach beyond the twelve: Cetus is off the ecliptic, Orion too.
    assert "Cetus" in told(of_body(every, "neptune"))


def test_the_overtaking_is_told_the_right_way(every: dict[str, SeasonRows]) -> None:
    assert "it overtakes the Earth" in told(of_body(every, "venus"))
    assert "the Earth overtakes Mars" in told(of_body(every, "mars"))


def test_inner_planets_are_not_sent_to_the_eyepiece_at_the_middle(every: dict[str, SeasonRows]) -> None:
    for body in ("mercury", "venus"):
        assert "lost in the Sun's glare" in told(of_body(every, body))


def test_brightness_at_a_season_edge_is_not_called_a_peak(every: dict[str, SeasonRows]) -> None:
    mercury = of_body(every, "mercury")
    assert facts.is_at_edge(mercury, "brightest")
    assert "at its very edge" in told(mercury)
    assert not facts.is_at_edge(of_body(every, "mars"), "brightest")


def test_a_claim_of_rank_names_the_span_searched(every: dict[str, SeasonRows]) -> None:
    for rows in every.values():
        ranked = [one.text for one in sentences.sentences(rows) if one.text.startswith("It is the ")]
        assert ranked
        for text in ranked:
            assert re.search(
                r"of the \d+ seasons of \w+ with their middle between \d+ \w+ \d+ and \d+ \w+ \d+", text
            )


@pytest.mark.parametrize(
    ("number", "said"),
    [
        (1, "1st"),
        (2, "2nd"),
        (3, "3rd"),
        (4, "4th"),
        (11, "11th"),
        (12, "12th"),
        (13, "13th"),
        (21, "21st"),
        (112, "112th"),
    ],
)
def test_ordinals(number: int, said: str) -> None:
    assert sentences.ordinal(number) == said


@pytest.mark.parametrize(
    ("first", "last", "said"),
    [
        ("2027-01-10T12:59:00Z", "2027-04-01T14:08:00Z", "10 January to 1 April 2027"),
        ("2027-10-07T14:00:00Z", "2027-10-28T14:00:00Z", "7 to 28 October 2027"),
        ("2026-12-13T00:56:00Z", "2027-04-13T02:11:00Z", "13 December 2026 to 13 April 2027"),
    ],
)
def test_ranges_of_days(first: str, last: str, said: str) -> None:
    assert sentences.day_range(first, last) == said


def test_one_is_singular() -> None:
    assert facts.counted(1.2, "hour") == "1 hour"
    assert facts.counted(0.4, "day") == "0 days"
    assert facts.counted(81.05, "day") == "81 days"


def test_a_star_without_a_name_is_called_by_its_letter_or_left_out() -> None:
    row = {"star": "HIP 49583", "designation": "eta Leo", "kind": "star", "constellation": "Leo"}
    assert sentences.spoken_star(row) == "the star eta in Leo"
    assert sentences.spoken_star(row | {"designation": ""}) == ""
    assert sentences.spoken_star(row | {"designation": "27 Tau"}) == ""
    cluster = {"star": "Pleiades", "designation": "M45", "kind": "cluster"}
    assert sentences.spoken_star(cluster) == "the Pleiades"


def test_tables_on_disk_hold_the_rows_that_are_cited(
    contents: Contents, every: dict[str, SeasonRows], tmp_path: Path
) -> None:
    path = tmp_path / "stars.csv"
    contents.study.stars.write_csv(path)
    with path.open(encoding="utf-8", newline="") as file:
        held = {(row["season_id"], row["star"]) for row in csv.DictReader(file)}
    cited = {
        tuple(origin.row.split(" ", 1))
        for rows in every.values()
        for sentence in sentences.sentences(rows)
        for origin in sentence.origins
        if origin.file == "seasons/stars.csv"
    }
    assert cited and cited <= held
