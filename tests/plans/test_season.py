"""The season of a campaign and its moments, against skyfield's positions and published dates."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from skyfield.api import load

from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import SpanError, UsageProblem
from wanderers.plans.path import arc_length_deg, outermost_crossing, turning_deg
from wanderers.plans.season import (
    CROSSING_FIRST,
    CROSSING_SECOND,
    MIDDLE,
    STATION_DIRECT,
    STATION_RETROGRADE,
    CampaignSeason,
    campaign_season,
    date_of,
)


def season_of(store: TrackStore, body: Body, which: str, since: str = "2026-03-01") -> CampaignSeason:
    return campaign_season(store, body, which, now_jd=parse_date(since))


def moment_jd(season: CampaignSeason, name: str) -> float:
    return next(moment.jd_tt for moment in season.moments if moment.name == name)


def test_moments_of_mars_in_2027_fall_on_the_published_dates(store: TrackStore) -> None:
    # Opposition 2027 February 19 and stationary points January 10 and April 1: general almanacs, from memory.
    season = season_of(store, Body.MARS, "2027")
    assert date_of(moment_jd(season, MIDDLE)) == "2027-02-19"
    assert date_of(moment_jd(season, STATION_RETROGRADE)) == "2027-01-10"
    assert date_of(moment_jd(season, STATION_DIRECT)) == "2027-04-01"


def test_a_campaign_begins_before_the_first_pass_and_ends_after_the_third(store: TrackStore) -> None:
    season = campaign_season(
        store, Body.JUPITER, "2027", now_jd=parse_date("2026"), lead_days=12.0, tail_days=7.0
    )
    assert season.start_jd == pytest.approx(season.row["first_pass_start_jd_tt"] - 12.0)
    assert season.end_jd == pytest.approx(season.row["third_pass_end_jd_tt"] + 7.0)
    times = [moment.jd_tt for moment in season.moments]
    assert times == sorted(times)


@pytest.mark.parametrize(
    ("body", "target", "year"),
    [
        (Body.MARS, "mars barycenter", "2027"),
        (Body.MARS, "mars barycenter", "2025"),
        (Body.SATURN, "saturn barycenter", "2027"),
        (Body.VENUS, "venus", "2026"),
        (Body.MERCURY, "mercury", "2026"),
    ],
)
def test_the_path_passes_its_crossing_twice_by_skyfields_positions(
    store: TrackStore, opened: Any, body: Body, target: str, year: str
) -> None:
    season = season_of(store, body, year)
    times = load.timescale(builtin=True).tt_jd(
        [moment_jd(season, CROSSING_FIRST), moment_jd(season, CROSSING_SECOND)]
    )
    places = opened["earth"].at(times).observe(opened[target]).apparent().position.au
    places = places / np.linalg.norm(places, axis=0)
    apart_arcsec = np.degrees(np.linalg.norm(places[:, 0] - places[:, 1])) * 3_600.0
    assert apart_arcsec < 0.01


def test_every_season_called_a_loop_has_a_crossing(store: TrackStore) -> None:
    shapes = set()
    for year in ("2003", "2005", "2007", "2012", "2014", "2016", "2018", "2020", "2022"):
        season = season_of(store, Body.MARS, year)
        crossed = any(moment.name == CROSSING_FIRST for moment in season.moments)
        shapes.add(season.row["path_shape"])
        assert crossed or season.row["path_shape"] == "zigzag"
    assert shapes == {"loop", "zigzag"}


def test_a_zigzag_has_no_crossing_and_says_so(store: TrackStore) -> None:
    season = season_of(store, Body.VENUS, "2028")
    assert season.row["path_shape"] == "zigzag"
    assert all(moment.name != CROSSING_FIRST for moment in season.moments)
    assert any("zigzag" in note for note in season.notes)


def test_the_middle_of_an_inner_planet_is_lost_and_no_must(store: TrackStore) -> None:
    season = season_of(store, Body.MERCURY, "next")
    middle = next(moment for moment in season.moments if moment.name == MIDDLE)
    assert not middle.must and any("lost in the Sun" in note for note in season.notes)
    assert next(m for m in season_of(store, Body.MARS, "next").moments if m.name == MIDDLE).must


def test_next_is_the_first_season_that_has_not_turned_back(store: TrackStore) -> None:
    before = season_of(store, Body.MARS, "next", "2027-01-09")
    after = season_of(store, Body.MARS, "next", "2027-01-12")
    assert before.row["season_id"] == "mars-ecliptic-s13"
    assert date_of(moment_jd(after, MIDDLE)).startswith("2029-03")
    under_way = campaign_season(store, Body.MARS, "next", now_jd=parse_date("2027-05-01"), under_way=True)
    assert under_way.row["season_id"] == "mars-ecliptic-s13"


def test_a_season_is_found_by_its_id(store: TrackStore) -> None:
    for frame in ("ecliptic", "equator", "j2000"):
        assert season_of(store, Body.MARS, f"mars-{frame}-s13").row["season_id"] == f"mars-{frame}-s13"
    assert season_of(store, Body.MERCURY, "mercury-ecliptic-s84").row["season_id"] == "mercury-ecliptic-s84"


def test_a_year_with_several_seasons_takes_the_first_and_names_the_others(store: TrackStore) -> None:
    season = season_of(store, Body.MERCURY, "2026")
    assert season.row["season_id"] == "mercury-ecliptic-s82"
    assert any("mercury-ecliptic-s84" in note for note in season.notes)


@pytest.mark.parametrize(
    ("which", "said"),
    [
        ("2026", "2025-01, 2027-02"),
        ("soon", "names no season"),
        ("mars-sideways-s13", "names no season"),
        ("venus-ecliptic-s16", "not of mars"),
        ("mars-ecliptic-s99999", "holds no season"),
    ],
)
def test_seasons_that_do_not_exist_are_refused_with_advice(store: TrackStore, which: str, said: str) -> None:
    with pytest.raises(UsageProblem, match=said):
        season_of(store, Body.MARS, which)


def test_what_never_turns_back_has_no_season(store: TrackStore) -> None:
    with pytest.raises(UsageProblem, match="never turns back"):
        season_of(store, Body.MOON, "next")


def test_outside_the_kernel_nothing_is_guessed(de421_store: TrackStore) -> None:
    with pytest.raises(SpanError):
        season_of(de421_store, Body.MARS, "next", "2053-09-01")


def test_a_great_circle_is_as_long_as_its_angle_and_does_not_turn() -> None:
    angle = np.radians(np.linspace(0.0, 30.0, 61))
    circle = np.stack([np.cos(angle), np.sin(angle), np.zeros(61)])
    assert arc_length_deg(circle)[-1] == pytest.approx(30.0)
    assert turning_deg(circle)[-1] == pytest.approx(0.0, abs=1e-5)
    back = np.concatenate([circle, circle[:, -2::-1]], axis=1)
    assert turning_deg(back)[-1] == pytest.approx(180.0, abs=1e-5)


def test_a_small_circle_turns_by_the_excess_of_spherical_geometry() -> None:
    # Gauss and Bonnet: once round, the turning is 360 degrees times the cosine of the radius.
    angle, radius = np.linspace(0.0, 2.0 * np.pi, 2_001), np.radians(5.0)
    circle = np.stack(
        [
            np.sin(radius) * np.cos(angle),
            np.sin(radius) * np.sin(angle),
            np.full(angle.size, np.cos(radius)),
        ]
    )
    assert arc_length_deg(circle)[-1] == pytest.approx(360.0 * np.sin(radius), rel=1e-5)
    assert turning_deg(circle)[-1] == pytest.approx(360.0 * np.cos(radius), rel=1e-3)


def test_a_chain_that_crosses_itself_is_found_and_one_that_does_not_is_not() -> None:
    loop = np.array([[0.0, 3.0, 3.0, 1.0, 1.0], [0.0, 0.0, 2.0, 2.0, -1.0]])
    assert outermost_crossing(loop) == (0, 3)
    assert outermost_crossing(loop[:, :4]) is None
