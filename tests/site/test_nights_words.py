"""The table of nights in words: reasons, remarks and cautions of a year, and of nights at their hardest."""

from __future__ import annotations

import datetime as dt
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import polars as pl
import pytest
from skyfield import almanac
from skyfield.api import load

from tests.site.places import ATOLL, CAPE, HILL, PLATEAU, POLE, RIDGE, skyfield_place
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.store import TrackStore
from wanderers.site import columns
from wanderers.site.nights import nights
from wanderers.site.places import Site
from wanderers.site.rules import Rules

MARCH = (np.datetime64("2027-03-01"), np.datetime64("2027-04-01"))
YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))


@pytest.fixture(scope="module", params=[HILL, RIDGE, CAPE, ATOLL], ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def year(store: TrackStore, site: Site) -> pl.DataFrame:
    return nights(store, site, YEAR)


def offset(site: Site, noon: dt.datetime) -> dt.timedelta:
    found = noon.replace(tzinfo=ZoneInfo(site.zone)).utcoffset()
    assert found is not None
    return found


def test_what_has_no_window_has_no_angles_and_a_reason(year: pl.DataFrame) -> None:
    none = year.filter(pl.col("best_utc").is_null())
    assert none.height > 0
    for name in (*columns.WINDOW_COLUMNS, *columns.PLACE_COLUMNS, "local_date", "magnitude", "constellation"):
        assert none[name].is_null().all(), name
    assert (none["verdict"] == "not_visible").all()
    assert year["verdict_reason"].null_count() == 0
    assert not year["verdict_reason"].str.contains(r"nan|null|-\d+ minutes|None").any()


def test_the_caution_stands_wherever_the_sun_is_near_or_up(year: pl.DataFrame, jpl: Any, site: Site) -> None:
    some = year.filter(pl.col("best_utc").is_not_null())
    near = (some["elongation_deg"] < 20.0) | (some["sun_altitude_deg"] > -50.0 / 60.0)
    assert (some["caution"].is_not_null() == near).all()
    # Without a best moment: the middle of the evening decides.
    observer = jpl["earth"] + skyfield_place(site)
    none = year.filter(pl.col("best_utc").is_null() & (pl.col("body") == "mercury"))
    noons = [dt.datetime.fromisoformat(day) for day in none["evening_date"]]
    middle = [noon.replace(tzinfo=dt.UTC) + dt.timedelta(days=1) - offset(site, noon) for noon in noons]
    at = observer.at(load.timescale(builtin=True).from_datetimes(middle))
    sun, mercury = (at.observe(jpl[name]).apparent() for name in ("sun", "mercury"))
    elongation, height = mercury.separation_from(sun).degrees, sun.altaz()[0].degrees
    due = (elongation < 20.0) | (height > -50.0 / 60.0)
    clear = (np.abs(elongation - 20.0) > 0.1) & (np.abs(height + 50.0 / 60.0) > 1.0)
    assert (none["caution"].is_not_null().to_numpy() == due)[clear].all()


def test_cautions_give_local_sunset_and_sunrise(year: pl.DataFrame) -> None:
    some = year.filter(pl.col("caution").is_not_null() & pl.col("sunset_local").is_not_null())
    for row in some.iter_rows(named=True):
        sunset = dt.datetime.fromisoformat(row["sunset_local"]) + dt.timedelta(seconds=30)
        assert f"sunset at {sunset:%H:%M}" in row["caution"]


def test_morning_watches_bear_the_date_of_the_evening_before(year: pl.DataFrame) -> None:
    some = year.filter(pl.col("best_utc").is_not_null()).with_columns(
        pl.col("local_date", "evening_date").str.to_date(), morning=pl.col("local_time") < "12:00:00"
    )
    later = some["local_date"] - some["evening_date"]
    assert some["morning"].any() and not some["morning"].all()
    assert (later == pl.Series(np.where(some["morning"], 1, 0)).cast(pl.Int64) * dt.timedelta(days=1)).all()


def test_a_midsummer_night_without_darkness_says_so(store: TrackStore) -> None:
    june = nights(store, CAPE, (np.datetime64("2027-06-20"), np.datetime64("2027-06-21")))
    assert june["sunset_utc"].is_null().all() and june["sunrise_utc"].is_null().all()
    assert (june["verdict_reason"] == "the Sun is never 6 degrees or more below the horizon").all()
    assert june["remark"].str.contains("the Sun does not set").all()
    assert june["caution"].str.contains("The Sun is up").all()
    hill = nights(store, HILL, (np.datetime64("2027-06-20"), np.datetime64("2027-06-21")))
    assert hill["sunset_utc"].null_count() == 0  # but no end of twilight at 52 degrees north
    assert hill["astronomical_dusk_utc"].is_null().all() and hill["astronomical_dawn_utc"].is_null().all()


def test_a_polar_night_has_no_sunset_and_long_windows(store: TrackStore) -> None:
    december = nights(store, CAPE, (np.datetime64("2027-12-20"), np.datetime64("2027-12-21")), BODIES[:9])
    assert december["sunset_utc"].is_null().all()
    sun, mars, saturn = (december.filter(pl.col("body") == name) for name in ("sun", "mars", "saturn"))
    assert sun["remark"][0] == "does not rise"
    assert mars["verdict_reason"][0] == "does not rise" and mars["rise_utc"][0] is None
    assert saturn["best_utc"][0] is not None
    assert "the Sun does not rise" in saturn["remark"][0]


def test_at_a_pole_bodies_neither_rise_nor_set_for_weeks(store: TrackStore) -> None:
    for site in (POLE, PLATEAU):
        june = nights(store, site, (np.datetime64("2027-06-19"), np.datetime64("2027-06-22")), BODIES[:9])
        mars = june.filter(pl.col("body") == "jupiter")  # ten degrees north of the equator
        assert mars["rise_utc"].is_null().all() and mars["set_utc"].is_null().all()
        said = "does not set" if site is POLE else "does not rise"
        assert mars["remark"].str.starts_with(said).all()
    # In the dark of the southern winter something is up for days: one window from noon to noon.
    moon = nights(store, PLATEAU, (np.datetime64("2027-06-19"), np.datetime64("2027-06-20")), [Body.MOON])
    assert (moon["window_start_local"][0][11:16], moon["window_end_local"][0][11:16]) == ("12:00", "12:00")


def test_the_moon_skips_a_rising_and_a_setting_each_month(store: TrackStore) -> None:
    # It comes to the meridian 50 minutes later every day, so one day in 29 has no rise (general knowledge).
    moon = nights(store, ATOLL, YEAR, [Body.MOON])
    assert 11 <= moon["rise_utc"].null_count() <= 14 and 11 <= moon["set_utc"].null_count() <= 14
    skipped = moon.filter(pl.col("rise_utc").is_null())
    assert (skipped["remark"] == "does not rise between these noons").all()


def test_a_body_that_sets_twice_between_two_noons_is_said_to(store: TrackStore, jpl: Any) -> None:
    # Outer planets set four minutes earlier every day: once a year twice in an evening.
    jupiter = nights(store, HILL, YEAR, [Body.JUPITER])
    twice = jupiter.filter(pl.col("remark").fill_null("").str.contains("twice"))
    assert twice.height >= 1
    time_scale = load.timescale(builtin=True)
    observer = jpl["earth"] + skyfield_place(HILL)
    for row in twice.iter_rows(named=True):
        noon = dt.datetime.fromisoformat(row["evening_date"]) + dt.timedelta(hours=12)
        ends = [
            time_scale.from_datetime((day - offset(HILL, day)).replace(tzinfo=dt.UTC))
            for day in (noon, noon + dt.timedelta(days=1))
        ]
        search = almanac.find_settings if "sets twice" in row["remark"] else almanac.find_risings
        times, _ = search(observer, jpl["jupiter barycenter"], *ends)
        assert len(times) == 2
        again = times[1].utc_datetime() + offset(HILL, noon) + dt.timedelta(seconds=30)
        assert f"again at {again:%H:%M}" in row["remark"]


def test_the_reason_counts_the_minutes_to_the_sun(store: TrackStore) -> None:
    year = nights(store, HILL, YEAR, [Body.MERCURY, Body.VENUS, Body.SATURN])
    some = year.filter(pl.col("verdict_reason").str.contains(r"sets \d+ minutes after the Sun"))
    assert some.height > 20
    for row in some.iter_rows(named=True):
        later = dt.datetime.fromisoformat(row["set_utc"]) - dt.datetime.fromisoformat(row["sunset_utc"])
        minutes = round(later.total_seconds() / 60.0)
        assert f"sets {minutes} minutes after the Sun" in row["verdict_reason"]


def test_by_day_the_window_carries_the_caution(store: TrackStore) -> None:
    day = nights(store, HILL, MARCH, [Body.VENUS], Rules(sun_below_deg=20.0))
    some = day.filter(pl.col("best_utc").is_not_null())
    assert some.height > 0 and some["caution"].str.contains("Sun is up").all()


def test_the_sun_is_listed_when_asked_for_and_never_to_be_watched(store: TrackStore) -> None:
    sun = nights(store, HILL, MARCH, [Body.SUN], Rules(sun_below_deg=90.0))
    assert sun["best_utc"].is_null().all() and (sun["verdict"] == "not_visible").all()
    assert sun["caution"].str.contains("filter").all()
    assert sun["set_utc"].to_list() == sun["sunset_utc"].to_list()
