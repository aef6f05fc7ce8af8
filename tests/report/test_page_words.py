"""Figures in words: rounding, changes of unit, and what stands beside an event."""

from __future__ import annotations

import polars as pl
import pytest

from tests.report.calendar_samples import (
    CONJUNCTION,
    NEAR_SUN,
    ONE_OF_EVERY_KIND,
    STATION,
    TRANSIT,
    event,
    table,
)
from tests.report.report_samples import MARS_SEASON, REQUEST, made_up, seasons_table, with_instants
from wanderers.ephemeris.bodies import Body
from wanderers.events.kinds import Kind
from wanderers.events.side_by_side import COLUMNS
from wanderers.report import facts, words
from wanderers.report.comparison import compared, later
from wanderers.report.glance import NONE_FOUND, at_a_glance
from wanderers.report.glossary import MEANINGS, glossary
from wanderers.report.planets import event_row, own_events, season_sheet


@pytest.mark.parametrize(
    ("degrees", "words_of_it"),
    [(None, ""), (12.34, "12.3°"), (1.0, "1.0°"), (0.9996, "1.0°"), (0.5, "30′"), (0.01, "36″"), (0.0, "0″")],
)
def test_an_angle_is_told_in_the_unit_that_bears_it(degrees: float | None, words_of_it: str) -> None:
    assert facts.angle(degrees) == words_of_it


def test_a_figure_below_zero_has_a_real_minus_sign() -> None:
    assert facts.signed(-1.26, 1) == "\N{MINUS SIGN}1.3"
    assert facts.signed(None, 1) == ""


def test_an_astronomical_unit_is_149_6_million_km_and_499_light_seconds() -> None:
    # IAU 2012 Resolution B2: 149 597 870 700 m exactly; light takes 499.004784 s (IERS Conventions 2010,
    # table 1.1, from memory).
    assert facts.million_km(1.0) == "150 million km"
    assert facts.light_time(1.0) == f"{499.004784 / 60.0:.1f} light-minutes"
    assert facts.light_time(30.0) == f"{30.0 * 499.004784 / 3600.0:.1f} light-hours"


def test_five_magnitudes_are_a_hundred_times() -> None:
    # Pogson 1856, MNRAS 17, 12: the definition of the scale.
    assert facts.times_brighter(5.0) == "100 times"
    assert facts.times_brighter(1.0) == "2.5 times"


@pytest.mark.parametrize(
    ("utc", "told"),
    [
        ("2027-01-10T12:59:31.000Z", "2027-01-10 13:00"),
        ("2027-01-10T23:59:59.999Z", "2027-01-10 23:59"),
        ("-0500-03-02T01:02:03.000Z", "-0500-03-02 01:02"),
    ],
)
def test_an_instant_is_rounded_to_the_minute_within_its_day(utc: str, told: str) -> None:
    assert facts.minute(utc) == told


def test_days_and_months_are_spoken_where_there_are_words_for_them() -> None:
    assert facts.spoken_day("2027-01-10T12:59:03.000Z") == "10 January 2027"
    assert facts.spoken_month("2027-01-10T12:59:03.000Z") == "January 2027"
    assert facts.spoken_day("-0500-03-02T01:02:03.000Z") == "-0500-03-02"
    assert facts.spoken_month("-0500-03-02T01:02:03.000Z") == "-0500-03-02"


def test_a_range_is_told_once_where_its_ends_agree() -> None:
    assert facts.spread(pl.Series([81.05]), "day") == "81 days"
    assert facts.spread(pl.Series([23.9, 20.6]), "day") == "21 to 24 days"
    assert facts.spread(pl.Series([1.0]), "degree") == "1 degree"


def test_every_event_near_the_sun_carries_the_caution_and_no_other_does() -> None:
    for row in ONE_OF_EVERY_KIND.iter_rows(named=True):
        elongation = row["elongation_deg"]
        near = elongation is not None and elongation - (row["separation_deg"] or 0.0) < 20.0
        at_the_sun = row["kind"] == "transit" or (row["body"] == "sun" and row["kind"] != "season_point")
        assert (facts.NEAR_SUN_NOTE in facts.note(row)) == (near and not at_the_sun), row["event_id"]
        assert (facts.SUN_NOTE in facts.note(row)) == at_the_sun, row["event_id"]


@pytest.mark.parametrize(("elongation", "cautioned"), [(19.99, True), (20.0, False)])
def test_the_caution_begins_below_twenty_degrees(elongation: float, cautioned: bool) -> None:
    row = event(
        "station", "2027-01-10T12:59:03.120Z", detail="direct", frame="ecliptic", elongation_deg=elongation
    )
    assert (facts.NEAR_SUN_NOTE in facts.note(row)) == cautioned


UP = "The Sun is up: no binoculars or telescope, after sunset at 18:00"
WITHIN = "Within 20 degrees of the Sun: no binoculars or telescope, after sunset at 18:00"


@pytest.mark.parametrize(
    ("from_site", "elongation", "near"),
    [
        ({}, 24.0, True),  # the other body may stand at 19
        ({"caution": None}, 24.0, False),  # a site that looked at both found it does not
        ({"caution": WITHIN}, 24.0, True),
        ({"caution": UP}, 90.0, False),  # by day, but far from the Sun
        ({"caution": UP}, 24.0, True),
        ({"caution": None}, 19.0, True),
    ],
)
def test_a_site_that_looked_at_both_bodies_settles_whether_one_is_near_the_sun(
    from_site: dict[str, str | None], elongation: float, near: bool
) -> None:
    pair = CONJUNCTION | {"elongation_deg": elongation, "separation_deg": 5.0} | from_site
    assert words.near_the_sun(pair) is near


def test_the_short_cautions_defer_to_local_rules_as_the_long_ones_do() -> None:
    for long, short in facts.SHORT_NOTES.items():
        assert "local rules" in long.lower()
        assert "local rules" in short.lower()
        assert len(short) < len(long) / 2


def test_doubtful_time_is_told_beside_the_event() -> None:
    assert "uncertain" in facts.note(TRANSIT)
    assert facts.note(CONJUNCTION) == ""


def test_a_row_prints_what_applies_and_leaves_the_rest_empty() -> None:
    row = event_row(STATION)
    assert (row.when, row.constellation, row.separation) == ("2027-01-10 12:59", "Leo", "")
    assert (row.elongation, row.magnitude) == ("129.5°", "\N{MINUS SIGN}0.4")
    assert row.what == words.summary(STATION)


def test_a_planets_own_events_leave_the_moon_and_stars_out_but_not_gatherings() -> None:
    with_moon = event("conjunction", "2027-02-01T00:00:00.000Z", body="moon", other="venus", frame="ecliptic")
    with_star = event("appulse", "2027-02-02T00:00:00.000Z", body="venus", other="Spica")
    own = own_events(table(*ONE_OF_EVERY_KIND.iter_rows(named=True), with_moon, with_star), Body.VENUS)
    assert set(own["kind"]) == {"conjunction", "greatest_elongation", "greatest_brilliancy", "gathering"}
    assert "moon" not in own["body"].to_list()


def test_at_a_glance_tells_the_first_of_each_sort() -> None:
    early = event(
        "conjunction", "2027-02-01T00:00:00.000Z", body="moon", other="venus", frame="ecliptic",
        separation_deg=0.9, elongation_deg=45.0,
    )  # fmt: skip
    contents = made_up(table(*ONE_OF_EVERY_KIND.iter_rows(named=True), early), [MARS_SEASON])
    lines = {
        line.label: line
        for line in at_a_glance(contents.events, contents.seasons, REQUEST.jd_from, REQUEST.kinds)
    }
    assert lines["Next station"].event_id == STATION["event_id"]
    assert lines["Next conjunction under 1 degree"].event_id == early["event_id"]
    assert lines["Next of two planets under 1 degree"].event_id == CONJUNCTION["event_id"]
    assert (
        lines["Next transit"].caution.startswith("Not observable")
        or facts.SUN_NOTE in lines["Next transit"].caution
    )
    assert lines["Next inferior conjunction"].what == NONE_FOUND
    assert lines["Retrograde as the span begins"].what == "no planet"


def test_at_a_glance_knows_who_is_retrograde_when_the_span_begins() -> None:
    season = MARS_SEASON | {"station_retrograde_utc": "2026-12-01T00:00:00.000Z"}
    lines = at_a_glance(
        with_instants(ONE_OF_EVERY_KIND), seasons_table(season), REQUEST.jd_from, REQUEST.kinds
    )
    assert lines[0].what == "Mars"


def test_at_a_glance_does_not_speak_of_kinds_that_were_not_asked_for() -> None:
    lines = at_a_glance(table(), seasons_table(), REQUEST.jd_from, (Kind.STATION,))
    assert [line.label for line in lines] == ["Retrograde as the span begins", "Next station"]
    from_a_site = table().with_columns(verdict=pl.lit(None, pl.String))
    assert at_a_glance(from_a_site, seasons_table(), REQUEST.jd_from, (Kind.STATION,)) == lines


def test_the_closest_pair_is_one_that_glare_does_not_hide() -> None:
    hidden = event(
        "conjunction", "2027-04-01T00:00:00.000Z", body="mercury", other="mars", frame="ecliptic",
        separation_deg=0.1, elongation_deg=5.0,
    )  # fmt: skip
    lines = at_a_glance(
        with_instants(table(hidden, CONJUNCTION)), seasons_table(), REQUEST.jd_from, REQUEST.kinds
    )
    assert lines[-1].event_id == CONJUNCTION["event_id"]


def test_a_season_sheet_rounds_each_figure_and_names_its_column() -> None:
    (season,) = seasons_table(MARS_SEASON).iter_rows(named=True)
    track = pl.DataFrame(
        {
            "jd_tt": [season["station_retrograde_jd_tt"], season["station_direct_jd_tt"]],
            "magnitude": [-0.35, -0.34],
        }
    )
    sheet = season_sheet(season, track, None)
    told = {fact.name: fact for fact in sheet.facts}
    assert sheet.title == "10 January 2027 to 1 April 2027, in longitude"
    assert told["Moves back"].words == "19.5°, about 39 Moon widths"
    assert told["Closest"].words == "0.678 au: 101 million km, 5.6 light-minutes"
    # 10^(0.4 x 0.90) = 2.3
    assert told["Brightest"].words.endswith("2.3 times as bright as at the first turn")
    assert {fact.source for fact in sheet.facts} >= {
        "retrograde_days",
        "arc_deg",
        "closest_au",
        "peak_magnitude",
    }
    assert sheet.caution == ""


def test_a_season_of_an_inner_planet_carries_the_caution() -> None:
    row = MARS_SEASON | {"body": "venus", "middle_kind": "inferior_conjunction"}
    (season,) = seasons_table(row).iter_rows(named=True)
    assert facts.NEAR_SUN_NOTE in season_sheet(season, None, None).caution


def test_a_mark_outside_the_kernel_stays_empty() -> None:
    (season,) = seasons_table(MARS_SEASON | {"first_pass_start_utc": None}).iter_rows(named=True)
    assert season_sheet(season, None, None).marks[0] == ("First pass begins", "", "")


def test_every_kind_of_event_is_explained() -> None:
    assert set(MEANINGS) == set(Kind)
    assert len(glossary([Kind.STATION])) == len(glossary([])) + 1


def test_definitions_side_by_side_tell_how_much_later_each_instant_is() -> None:
    row: dict[str, object] = dict.fromkeys(COLUMNS)
    station = row | {
        "kind": "station",
        "body": "mars",
        "detail": "retrograde",
        "longitude_utc": "2027-01-10T12:59:00.000Z",
        "right_ascension_utc": "2027-01-12T01:00:00.000Z",
        "right_ascension_minus_longitude_hours": 36.02,
    }
    (line,) = compared(pl.DataFrame([station], schema=COLUMNS))
    assert line.what == "Mars turns retrograde"
    assert [(instant.when, instant.later) for instant in line.instants] == [
        ("2027-01-10 12:59", ""),
        ("2027-01-12 01:00", "+36.0 h"),
        ("", ""),
        ("", ""),
    ]
    assert later(-72.0) == "\N{MINUS SIGN}3.0 d"


def test_near_sun_follows_the_nearer_body_of_a_pair() -> None:
    assert facts.NEAR_SUN_NOTE in facts.note(NEAR_SUN)  # 22.5 degrees, the other perhaps at 19.5
