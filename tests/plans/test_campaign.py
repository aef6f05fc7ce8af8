"""Whole campaigns: every planned night keeps every rule, moments are served, what happened is respected."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import date, timedelta
from typing import Any

import numpy as np
import polars as pl
import pytest
from scipy.stats import binom

from tests.plans.places import ATOLL, CAPE, HILL, INHABITED, RIDGE, Watcher
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import UsageProblem
from wanderers.plans.campaign import Campaign, plan_campaign
from wanderers.plans.columns import CHANGE_COLUMNS, PLAN_COLUMNS
from wanderers.plans.replan import LoggedNight, Status
from wanderers.plans.request import CampaignRequest, paces
from wanderers.plans.rules import CampaignRules
from wanderers.site.places import Site

NOW = date(2026, 3, 1)
MARS = CampaignRequest(Body.MARS, NOW, "2027")
REPORTED_ALIKE = [name for name in PLAN_COLUMNS if name not in ("status", "spares", "move_deg", "night")]
"""What a past row keeps, whatever happened since."""

Plan = Callable[..., Campaign]


@pytest.fixture(scope="module")
def plan(store: TrackStore) -> Plan:
    """Plan a campaign, each asked for computed once."""
    known: dict[Any, Campaign] = {}

    def planned(request: CampaignRequest = MARS, site: Site = HILL) -> Campaign:
        key = (request, site)
        if key not in known:
            known[key] = plan_campaign(store, site, request)
        return known[key]

    return planned


@pytest.mark.parametrize("site", INHABITED, ids=lambda site: site.name)
@pytest.mark.parametrize("body", ["mars", "jupiter", "saturn"])
def test_planned_nights_and_spares_keep_every_rule_by_skyfield(
    plan: Plan, opened: Any, site: Site, body: str
) -> None:
    campaign = plan(CampaignRequest(Body(body), NOW, "2027"), site)
    watcher = Watcher(opened, site)
    assert campaign.plan.height > 20 and campaign.spares.height > 20
    for utc in [*campaign.plan["recommended_utc"][::10], *campaign.spares["recommended_utc"][::20]]:
        assert watcher.altitude_deg(body, utc, refracted=True) > 20.0 - 0.01
        assert watcher.altitude_deg("sun", utc, refracted=False) < -12.0
        limit = 30.0 if watcher.moon_lit(utc) > 0.5 else 10.0
        moon_down = watcher.altitude_deg("moon", utc, refracted=False) < 0.0
        assert moon_down or watcher.separation_deg(body, "moon", utc) > limit - 0.01


def test_planned_nights_are_usable_and_inside_their_window(plan: Plan) -> None:
    for site in INHABITED:
        campaign = plan(MARS, site)
        usable = set(campaign.nights.filter("usable")["evening_date"])
        table = campaign.plan
        assert set(table["evening_date"]) <= usable
        assert table["evening_date"].is_sorted() and table["evening_date"].is_unique().all()
        assert (table["window_start_utc"] < table["recommended_utc"]).all()
        assert (table["recommended_utc"] < table["window_end_utc"]).all()
        assert table.schema == pl.Schema(PLAN_COLUMNS) == campaign.spares.schema
        assert table["reasons"].null_count() == 0 and table["score"].is_between(0, 100).all()


@pytest.mark.parametrize("site", INHABITED, ids=lambda site: site.name)
def test_both_turns_the_middle_and_the_crossing_have_their_nights(plan: Plan, site: Site) -> None:
    campaign = plan(MARS, site)
    musts = campaign.plan.filter(pl.col("role") == "must")
    named = "+".join(musts["moment"].to_list()).split("+")
    wanted = {moment.name for moment in campaign.season.moments if moment.must}
    assert wanted <= set(named) and len(wanted) == 5
    for moment in campaign.season.moments:
        if moment.must:
            row = musts.filter(pl.col("moment").str.contains(moment.name)).row(0, named=True)
            assert abs(row["recommended_jd_tt"] - moment.jd_tt) < 4.0


def test_steps_are_even_along_the_path_and_closer_at_the_turns(plan: Plan) -> None:
    campaign = plan()
    table = campaign.plan.with_columns(step=pl.col("path_deg").diff())
    turns = [moment.jd_tt for moment in campaign.season.moments if moment.name.startswith("station")]
    near = pl.any_horizontal(*((pl.col("recommended_jd_tt") - jd).abs() < 16.0 for jd in turns))
    straight = table.filter(~near)["step"].drop_nulls()
    assert straight.max() < 1.4 * straight.median()  # type: ignore[operator]
    assert straight.min() > 0.6 * straight.median()  # type: ignore[operator]
    assert table.filter(near)["step"].mean() < 0.75 * straight.median()  # type: ignore[operator]
    # Even in time it is not: near the turns a step takes twice as long.
    days = table["recommended_jd_tt"].diff().drop_nulls()
    assert days.max() > 2.0 * days.min()  # type: ignore[operator]


def test_spares_are_free_usable_nights_near_the_one_they_stand_in_for(plan: Plan) -> None:
    campaign = plan()
    usable = set(campaign.nights.filter("usable")["evening_date"])
    spares = campaign.spares
    assert spares["evening_date"].is_unique().all()
    assert set(spares["evening_date"]) <= usable - set(campaign.plan["evening_date"])
    listed = {
        (day, row["evening_date"])
        for row in campaign.plan.iter_rows(named=True)
        for day in (row["spares"] or "").split()
    }
    assert listed == set(zip(spares["evening_date"], spares["spare_for"], strict=True))
    place = dict(zip(campaign.nights["evening_date"], campaign.nights["path_deg"], strict=True))
    for day, planned in listed:
        assert abs(place[day] - place[planned]) < campaign.aim.step_deg


def test_nights_and_steps_asked_for(plan: Plan) -> None:
    assert plan(replace(MARS, nights=12)).plan.height == 12
    fine, coarse = (plan(replace(MARS, every_deg=step)).plan.height for step in (1.0, 3.0))
    assert 2.0 * coarse < fine < 4.0 * coarse
    fridays = plan(replace(MARS, rules=CampaignRules(weekdays=(4,))))
    assert set(fridays.plan["weekday"]) == {"Friday"}
    assert plan(replace(MARS, nights=5_000)).plan.height == plan().nights["usable"].sum()


def test_paces_count_positions_a_step_apart() -> None:
    assert paces(np.arange(10.0), 1.0) == 10
    assert paces(np.arange(10.0), 3.0) == 4
    assert paces(np.zeros(0), 1.0) == 0


def test_chances_follow_the_binomial_law(plan: Plan) -> None:
    campaign = plan(replace(MARS, cloudy=2.0 / 3.0))
    chances = campaign.chances
    assert chances.expected_frames == pytest.approx(binom.mean(campaign.plan.height, 1.0 / 3.0))
    for moment in chances.moments:
        assert moment.chance == pytest.approx(binom.sf(0, moment.tries, 1.0 / 3.0)) and moment.tries >= 1
    back, forth = (moment.chance for moment in chances.moments if moment.name.startswith("station"))
    assert chances.both_turns == pytest.approx(back * forth)  # weeks apart, they share no night
    assert chances.expected_longest_hole_deg > chances.longest_hole_deg
    with_more = plan(replace(MARS, cloudy=2.0 / 3.0, spares=6)).chances
    assert with_more.both_turns >= chances.both_turns
    assert with_more.expected_frames_with_spares >= chances.expected_frames_with_spares
    assert plan(replace(MARS, cloudy=0.0)).chances.both_turns == 1.0


def rows_by_date(campaign: Campaign) -> dict[str, dict[str, Any]]:
    return {row["evening_date"]: row for row in campaign.plan.iter_rows(named=True)}


@pytest.mark.parametrize("number", [3, 11, 17, 25])
def test_a_skipped_night_changes_only_what_it_says(plan: Plan, number: int) -> None:
    before = plan()
    skipped = before.plan["evening_date"][number]
    after = plan(replace(MARS, skip=(date.fromisoformat(skipped),)))
    old, new = rows_by_date(before), rows_by_date(after)
    changed = after.changes.filter(pl.col("change") != "kept")
    assert after.changes.schema == pl.Schema(CHANGE_COLUMNS)
    assert changed.filter(pl.col("change") == "dropped")["evening_date"].to_list() == [skipped]
    added = changed.filter(pl.col("change") == "added")["evening_date"].to_list()
    assert set(old) - set(new) == {skipped} and set(new) - set(old) == set(added) and len(added) <= 1
    dates = sorted(old)
    neighbours = {dates[number - 1], dates[number + 1]}
    assert all(min(neighbours) < day < max(neighbours) for day in added)
    for day in set(old) & set(new) - neighbours:
        assert old[day] == new[day] | {"night": old[day]["night"]}
    told = {row["evening_date"] for row in after.changes.iter_rows(named=True) if "also for" in row["reason"]}
    for day in neighbours - told:
        assert {name: old[day][name] for name in REPORTED_ALIKE} == {
            name: new[day][name] for name in REPORTED_ALIKE
        }
    assert skipped not in " ".join(after.plan["spares"].drop_nulls())


def test_skipping_a_night_that_is_not_planned_says_so(plan: Plan) -> None:
    before = plan()
    spare = before.spares["evening_date"][4]
    after = plan(replace(MARS, skip=(date.fromisoformat(spare), date(2035, 1, 1))))
    assert after.plan["evening_date"].to_list() == before.plan["evening_date"].to_list()
    assert any(f"{spare} was not planned" in note for note in after.notes)
    assert any("2035-01-01" in note for note in after.notes)
    assert spare not in after.spares["evening_date"].to_list()


def test_past_rows_stay_and_only_the_rest_is_planned(plan: Plan) -> None:
    before = plan()
    dates = [date.fromisoformat(day) for day in before.plan["evening_date"]]
    log = (*(LoggedNight(day) for day in dates[:6]), LoggedNight(dates[7], Status.LOST))
    after = plan(replace(MARS, log=log))
    old, new = rows_by_date(before), rows_by_date(after)
    for number, day in enumerate(day.isoformat() for day in dates[:8]):
        assert new[day]["status"] == ("done" if number < 6 else "lost")
        assert {name: old[day][name] for name in REPORTED_ALIKE} == {
            name: new[day][name] for name in REPORTED_ALIKE
        }
    assert set(old) <= set(new)  # nothing still to come is taken away
    last = dates[7].isoformat()
    added = after.changes.filter(pl.col("change") == "added")["evening_date"].to_list()
    assert all(last < day < dates[8].isoformat() for day in added)
    assert after.chances.expected_frames == pytest.approx(6.0 + 0.5 * (len(new) - 8))


def test_after_ten_cloudy_nights_the_plan_goes_on_with_the_turn_still_to_come(plan: Plan) -> None:
    before = plan()
    station = before.plan.filter(pl.col("moment") == "station_retrograde")["evening_date"][0]
    turn = date.fromisoformat(station)
    early = [LoggedNight(date.fromisoformat(day)) for day in before.plan["evening_date"] if day < station]
    cloudy = [LoggedNight(turn + timedelta(days=k), Status.LOST) for k in range(-1, 2)]
    after = plan(replace(MARS, log=(*early, *cloudy)))
    replaced = after.plan.filter(
        (pl.col("status") == "planned") & pl.col("moment").fill_null("").str.contains("station_retrograde")
    )
    assert replaced.height == 1 and replaced["role"][0] == "must"
    assert date.fromisoformat(replaced["evening_date"][0]) == turn + timedelta(days=2)


def test_a_night_done_beside_the_plan_serves_its_moment(plan: Plan) -> None:
    before = plan()
    station = before.plan.filter(pl.col("moment") == "station_direct")
    spare = station["spares"][0].split()[0]
    log = (
        LoggedNight(date.fromisoformat(station["evening_date"][0]), Status.LOST),
        LoggedNight(date.fromisoformat(spare)),
    )
    after = plan(replace(MARS, log=log))
    row = rows_by_date(after)[spare]
    assert (row["status"], row["role"], row["moment"]) == ("done", "must", "station_direct")
    assert next(m.chance for m in after.chances.moments if m.name == "station_direct") == 1.0


def test_the_middle_of_venus_is_not_promised(plan: Plan) -> None:
    campaign = plan(CampaignRequest(Body.VENUS, NOW, "2028"), ATOLL)
    assert not campaign.plan["moment"].fill_null("").str.contains("middle").any()
    assert any("no whole loop" in note for note in campaign.notes)
    assert campaign.plan.filter(pl.col("role") == "must").height >= 2
    low = campaign.plan.filter(pl.col("elongation_deg") < 20.0)
    assert (low["caution"].is_not_null()).all()


def test_a_planet_that_never_climbs_high_enough_says_what_would_help(plan: Plan) -> None:
    campaign = plan(replace(MARS, rules=CampaignRules(min_altitude_deg=60.0)))
    assert campaign.is_empty and campaign.plan.schema == pl.Schema(PLAN_COLUMNS)
    assert campaign.chances.both_turns == 0.0 and campaign.chances.planned == 0
    assert any("No night can be used: no higher than" in note for note in campaign.notes)
    for line in campaign.advice:
        if "least altitude of 15" in line and "with a Sun" not in line:
            promised = int(line.split("give ")[1].split()[0])
            lower = plan(replace(MARS, rules=CampaignRules(min_altitude_deg=15.0)))
            assert lower.nights["usable"].sum() == promised
            break
    else:
        pytest.fail("no word of a lower altitude")


def test_a_planet_that_never_rises_in_the_dark_says_so(plan: Plan) -> None:
    campaign = plan(CampaignRequest(Body.SATURN, NOW, "2018"), CAPE)  # 22 degrees south of the equator
    assert campaign.is_empty
    assert any("the Sun is never 12 degrees or more below the horizon" in note for note in campaign.notes)
    assert any("another season, or a site nearer the equator" in line for line in campaign.advice)


def test_missing_moments_are_named_with_what_would_serve_them(plan: Plan) -> None:
    campaign = plan(CampaignRequest(Body.VENUS, NOW, "2026"), RIDGE)
    assert any("No night for the turn to forward motion" in note for note in campaign.notes)
    assert any("would serve the turn to forward motion" in line for line in campaign.advice)
    assert not plan().advice


def test_next_plans_nothing_that_is_past(plan: Plan) -> None:
    campaign = plan(CampaignRequest(Body.MARS, date(2026, 12, 1), "next"))
    assert campaign.season.row["season_id"] == "mars-ecliptic-s13"
    assert campaign.plan["evening_date"].min() >= "2026-12-01"  # type: ignore[operator]
    assert any("are past" in note for note in campaign.notes)


def test_a_plan_is_the_same_every_time(store: TrackStore, plan: Plan) -> None:
    again = plan_campaign(store, HILL, MARS)
    assert again.plan.equals(plan().plan) and again.chances == plan().chances


@pytest.mark.parametrize(
    "wrong",
    [
        {"nights": 3, "every_deg": 1.0},
        {"nights": 0},
        {"every_deg": 0.0},
        {"cloudy": 1.0},
        {"spares": -1},
    ],
)
def test_requests_that_no_plan_can_follow_are_refused(wrong: dict[str, Any]) -> None:
    with pytest.raises(UsageProblem):
        replace(MARS, **wrong)


def test_too_few_nights_ask_for_more_and_not_for_easier_rules(plan: Plan) -> None:
    advice = plan(replace(MARS, nights=3)).advice
    assert len(advice) == 1 and advice[0].startswith("More nights")
