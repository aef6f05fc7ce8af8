"""Every night of a campaign: usable or not, why, and when, against skyfield and the rules."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import polars as pl
import pytest

from tests.plans.places import ATOLL, CAPE, HILL, INHABITED, RIDGE, Watcher
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import UsageProblem
from wanderers.plans.path import Path, path_of
from wanderers.plans.rules import CampaignRules, default_rules
from wanderers.plans.usable import all_nights
from wanderers.site.clock import utc_texts
from wanderers.site.hours import weekdays_of
from wanderers.site.places import Site

SPAN = (np.datetime64("2026-10-26"), np.datetime64("2027-06-19"))


@pytest.fixture(scope="module")
def path(store: TrackStore) -> Path:
    return path_of(store, Body.MARS, parse_date("2026-10-24"), parse_date("2027-06-22"))


def nights_at(store: TrackStore, path: Path, site: Site, rules: CampaignRules | None = None) -> pl.DataFrame:
    return all_nights(store, site, path, SPAN, rules or CampaignRules())


@pytest.mark.parametrize("site", INHABITED, ids=lambda site: site.name)
def test_usable_nights_keep_every_rule_by_skyfield(
    store: TrackStore, path: Path, opened: Any, site: Site
) -> None:
    rules, watcher = CampaignRules(), Watcher(opened, site)
    nights = nights_at(store, path, site)
    some = nights.filter("usable")[::12]
    assert some.height >= 12
    for utc in utc_texts(some["recommended_jd"].to_numpy()).to_list():
        assert watcher.altitude_deg("mars", utc, refracted=True) > rules.min_altitude_deg - 0.01
        assert watcher.altitude_deg("sun", utc, refracted=False) < rules.sun_below_deg
        limit = rules.moon_bright_deg if watcher.moon_lit(utc) > 0.5 else rules.moon_faint_deg
        apart = watcher.separation_deg("mars", "moon", utc)
        assert watcher.altitude_deg("moon", utc, refracted=False) < 0.0 or apart > limit - 0.01


@pytest.mark.parametrize("site", INHABITED, ids=lambda site: site.name)
def test_nights_rejected_for_the_moon_have_it_too_near_all_through(
    store: TrackStore, path: Path, opened: Any, site: Site
) -> None:
    watcher = Watcher(opened, site)
    spoilt = nights_at(store, path, site).filter(pl.col("reason").str.contains("Moon"))
    assert spoilt.height >= 10
    for row in spoilt[::5].iter_rows(named=True):
        inside = np.linspace(row["window_start_jd"] + 0.005, row["window_end_jd"] - 0.005, 5)
        for utc in utc_texts(inside).to_list():
            limit = 30.0 if watcher.moon_lit(utc) > 0.5 else 10.0
            assert watcher.separation_deg("mars", "moon", utc) < limit + 0.01


def test_every_night_is_usable_or_says_why_not(store: TrackStore, path: Path) -> None:
    for site in (*INHABITED, CAPE):
        nights = nights_at(store, path, site)
        assert nights.height == int((SPAN[1] - SPAN[0]) / np.timedelta64(1, "D"))
        assert (nights["usable"] == nights["reason"].is_null()).all()
        assert nights.filter(~pl.col("usable"))["reason"].str.len_chars().min() > 10


def test_the_recommended_time_is_culmination_where_the_window_holds_it(store: TrackStore, path: Path) -> None:
    nights = nights_at(store, path, HILL).filter("usable")
    open_at = (nights["window_start_jd"] + 0.004 < nights["culmination_jd"]) & (
        nights["culmination_jd"] < nights["window_end_jd"] - 0.004
    )
    moonless = nights.filter(
        open_at & ((pl.col("moon_altitude_deg") < 0) | (pl.col("moon_separation_deg") > 40))
    )
    assert moonless.height > 60
    # Hour angle zero: the field stands upright every time, to the hundredth of a degree.
    assert moonless["hour_angle_deg"].abs().max() < 0.01
    assert moonless["parallactic_angle_deg"].abs().max() < 0.02


def test_before_the_middle_it_is_a_morning_object_filed_under_the_evening_before(
    store: TrackStore, path: Path
) -> None:
    nights = nights_at(store, path, HILL).filter("usable")
    early = nights.filter(pl.col("evening_date") < "2027-01-15")
    midnight = np.array(early["evening_date"].to_list(), dtype="datetime64[D]").astype(np.int64) + 2_440_588.5
    assert (early["recommended_jd"].to_numpy() > midnight).all()
    late = nights.filter(pl.col("evening_date") > "2027-03-10")
    midnight = np.array(late["evening_date"].to_list(), dtype="datetime64[D]").astype(np.int64) + 2_440_588.5
    assert (late["recommended_jd"].to_numpy() < midnight).all()


def test_places_against_the_stars_are_skyfields(store: TrackStore, path: Path, opened: Any) -> None:
    nights = nights_at(store, path, ATOLL).filter("usable")[::25]
    watcher = Watcher(opened, ATOLL)
    for row, utc in zip(
        nights.iter_rows(named=True), utc_texts(nights["recommended_jd"].to_numpy()).to_list(), strict=True
    ):
        place = opened["earth"].at(watcher.time(utc)).observe(opened["mars barycenter"]).apparent().radec()
        assert row["ra_j2000_deg"] == pytest.approx(place[0]._degrees, abs=1e-5)
        assert row["dec_j2000_deg"] == pytest.approx(place[1].degrees, abs=1e-5)


def test_stricter_rules_never_add_a_night(store: TrackStore, path: Path) -> None:
    easy = nights_at(store, path, HILL)["usable"]
    for stricter in (
        CampaignRules(min_altitude_deg=35.0),
        CampaignRules(sun_below_deg=-18.0),
        CampaignRules(weekdays=(4, 5)),
        CampaignRules(min_window_minutes=120.0),
    ):
        hard = nights_at(store, path, HILL, stricter)["usable"]
        if stricter.sun_below_deg < -12.0 or stricter.min_altitude_deg > 20.0:
            # Another window may hold another moment; a night that the Moon spoilt may not come back.
            spoilt = nights_at(store, path, HILL)["reason"].fill_null("").str.contains("Moon")
            assert not (hard & ~easy & ~spoilt).any()
        else:
            assert not (hard & ~easy).any()
        assert hard.sum() < easy.sum()


def test_weekdays_are_those_of_the_evening_date(store: TrackStore, path: Path) -> None:
    days = np.array(["2027-01-01", "2027-01-02", "1969-12-31", "2000-02-29"], dtype="datetime64[D]")
    assert weekdays_of(days).tolist() == [day.weekday() for day in days.tolist()]
    nights = nights_at(store, path, RIDGE, CampaignRules(weekdays=(5,))).filter("usable")
    assert set(nights["evening_date"].str.to_date().dt.weekday().to_list()) == {6}  # Saturday in ISO 8601
    other = nights_at(store, path, RIDGE, CampaignRules(weekdays=(5,))).filter(pl.col("weekday") == 1)
    assert other["reason"].str.contains("a Tuesday, not Saturday").all()


def test_the_moons_rules_can_be_left_out(store: TrackStore, path: Path) -> None:
    free = replace(CampaignRules(), moon_bright_deg=0.0, moon_faint_deg=0.0)
    assert not nights_at(store, path, HILL, free)["reason"].fill_null("").str.contains("Moon").any()


def test_inner_planets_are_watched_low_and_in_twilight() -> None:
    assert default_rules(Body.VENUS).sun_below_deg == -6.0 > default_rules(Body.MARS).sun_below_deg
    assert default_rules(Body.MERCURY).min_altitude_deg < default_rules(Body.SATURN).min_altitude_deg


@pytest.mark.parametrize(
    "wrong",
    [
        {"min_altitude_deg": 95.0},
        {"sun_below_deg": 3.0},
        {"moon_bright_deg": -1.0},
        {"weekdays": ()},
        {"weekdays": (7,)},
    ],
)
def test_rules_that_nothing_can_keep_are_refused(wrong: dict[str, Any]) -> None:
    with pytest.raises(UsageProblem):
        CampaignRules(**wrong)
