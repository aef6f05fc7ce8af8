"""Lineups: against skyfield's altitudes, and what must hold of runs and moments."""

from __future__ import annotations

import datetime as dt
from itertools import combinations
from typing import Any

import numpy as np
import polars as pl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from polars.testing import assert_frame_equal
from skyfield.api import load

from tests.site.places import ATOLL, CAPE, HILL, PLATEAU, POLE, RIDGE, SUMMIT, skyfield_place
from wanderers.ephemeris.bodies import BODIES, NAKED_EYE_PLANETS, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.errors import SpanError
from wanderers.site import columns
from wanderers.site.compass import POINTS
from wanderers.site.evenings import evenings
from wanderers.site.lineup_nights import Aid, Part, Together, Wanted
from wanderers.site.lineup_summary import lineups_heading, lineups_summary, why_none
from wanderers.site.lineups import lineups, runs_of, together
from wanderers.site.nights import nights
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.rules import Rules

SYSTEMS = ("mars", "jupiter", "saturn")
PLANETS = tuple(body.order for body in NAKED_EYE_PLANETS)
TWO_YEARS = (np.datetime64("2027-01-01"), np.datetime64("2029-01-01"))
SPRING = (np.datetime64("2028-02-01"), np.datetime64("2028-04-15"))
AUTUMN = (np.datetime64("2028-10-01"), np.datetime64("2028-11-15"))


def heights(jpl: Any, site: Site, name: str, time: Any) -> np.ndarray:
    observer = jpl["earth"] + skyfield_place(site)
    target = jpl[f"{name} barycenter" if name in SYSTEMS else name]
    airless = observer.at(time).observe(target).apparent().altaz()[0].degrees
    return np.asarray(airless if name == "sun" else refracted_deg(np.atleast_1d(airless), site.elevation_m))


def skyfield_times(texts: pl.Series) -> Any:
    jd = np.array([parse_date(text) for text in texts])
    return load.timescale(builtin=True).tt_jd(jd_tt_from_utc(jd))


@pytest.mark.parametrize("site", [HILL, RIDGE, CAPE, ATOLL, SUMMIT], ids=lambda site: site.name)
@pytest.mark.parametrize("at_least", [3, 4])
def test_runs_are_those_of_skyfields_altitudes(
    store: TrackStore, jpl: Any, site: Site, at_least: int
) -> None:
    # Every five minutes of every evening, by height alone; where half a degree decides is left out.
    whole = evenings(site, *AUTUMN)
    found = together(store, whole, Wanted(PLANETS, at_least, aid=Aid.ANY)).count
    raster = whole.raster(288)
    time = load.timescale(builtin=True).tt_jd(raster.ravel())
    sun = heights(jpl, site, "sun", time)
    high = np.stack([heights(jpl, site, body.value, time) for body in NAKED_EYE_PLANETS])
    counts = []
    for slack in (0.6, -0.6):  # half of what the sky turns between two moments
        up = np.count_nonzero(high > 10.0 + slack, axis=0) * (sun < -6.0 - slack)
        counts.append(up.reshape(raster.shape).max(axis=1))
    surely, perhaps = counts
    expected = np.where(surely >= at_least, surely, 0)
    clear = surely == perhaps
    assert np.count_nonzero(clear) > 20
    np.testing.assert_array_equal(found[clear], expected[clear])


@pytest.mark.parametrize("site", [HILL, RIDGE], ids=lambda site: site.name)
def test_best_moments_hold_as_many_bodies_as_said_by_skyfield(
    store: TrackStore, jpl: Any, site: Site
) -> None:
    table = lineups(store, site, TWO_YEARS, Wanted(PLANETS))
    assert table.height >= 3
    observer = jpl["earth"] + skyfield_place(site)
    for name in ("best", "first", "last"):
        time = skyfield_times(table[f"{name}_utc"])
        sun = heights(jpl, site, "sun", time)
        assert (sun < -6.0).all()
        for index, bodies in enumerate(table["bodies" if name == "best" else f"{name}_bodies"]):
            altitudes = [heights(jpl, site, body, time[index])[0] for body in bodies.split("+")]
            assert len(altitudes) >= 3 and min(altitudes) > 10.0 - 1e-4
            if name == "best":
                assert table["lowest_altitude_deg"][index] == pytest.approx(min(altitudes), abs=1e-4)
                assert table["highest_altitude_deg"][index] == pytest.approx(max(altitudes), abs=1e-4)
                assert table["sun_altitude_deg"][index] == pytest.approx(sun[index], abs=1e-4)
                assert table["body_count"][index] == len(altitudes)
    time = skyfield_times(table["best_utc"])
    for index, bodies in enumerate(table["bodies"]):
        at = observer.at(time[index])
        seen = {
            body: at.observe(jpl[f"{body} barycenter" if body in SYSTEMS else body]).apparent()
            for body in bodies.split("+")
        }
        arcs = {pair: seen[pair[0]].separation_from(seen[pair[1]]).degrees for pair in combinations(seen, 2)}
        assert table["arc_deg"][index] == pytest.approx(max(arcs.values()), abs=1e-4)
        ends = max(arcs, key=arcs.__getitem__)
        assert {table["from_body"][index], table["to_body"][index]} == set(ends)
        azimuth = {body: place.altaz()[1].degrees for body, place in seen.items()}
        for end in ("from", "to"):
            centre = POINTS.index(table[f"{end}_compass"][index]) * 22.5
            away = (azimuth[table[f"{end}_body"][index]] - centre + 180.0) % 360.0 - 180.0
            assert abs(away) <= 11.26
        # Who faces them has the first on the left: azimuth grows to the right, north or south.
        turn = (azimuth[table["to_body"][index]] - azimuth[table["from_body"][index]]) % 360.0
        assert turn < 180.0


def test_the_columns_are_those_promised(store: TrackStore) -> None:
    table = lineups(store, HILL, TWO_YEARS, Wanted(PLANETS))
    assert dict(table.schema) == columns.LINEUP_COLUMNS
    assert table.drop("caution", "sunset_local", "sunrise_local").null_count().sum_horizontal().item() == 0
    empty = lineups(store, HILL, SPRING, Wanted(PLANETS, 5))
    assert empty.is_empty() and dict(empty.schema) == columns.LINEUP_COLUMNS


@pytest.mark.parametrize("site", [HILL, RIDGE, CAPE], ids=lambda site: site.name)
def test_runs_are_whole_and_apart(store: TrackStore, site: Site) -> None:
    table = lineups(store, site, TWO_YEARS, Wanted(PLANETS)).with_columns(
        pl.col("first_evening", "last_evening", "best_evening").str.to_date()
    )
    days = table["last_evening"] - table["first_evening"]
    assert days.dt.total_days().to_list() == [count - 1 for count in table["evenings"]]
    assert (table["first_evening"][1:] - table["last_evening"][:-1] > dt.timedelta(days=1)).all()
    assert (table["best_evening"].is_between(table["first_evening"], table["last_evening"])).all()
    assert (table["evenings_with_most"].is_between(1, table["evenings"])).all()
    halves = table["evenings_before_midnight"] + table["evenings_after_midnight"]
    assert (halves >= table["evenings"]).all()


def test_best_evening_has_most_bodies_and_first_and_last_belong_to_their_evenings(store: TrackStore) -> None:
    table = lineups(store, HILL, TWO_YEARS, Wanted(PLANETS))
    for row in table.iter_rows(named=True):
        assert len(row["first_bodies"].split("+")) <= row["body_count"] >= len(row["last_bodies"].split("+"))
        for name in ("first", "last", "best"):
            noon = dt.datetime.fromisoformat(row[f"{name}_evening"]) + dt.timedelta(hours=12)
            moment = dt.datetime.fromisoformat(row[f"{name}_local"])
            assert dt.timedelta() <= moment.replace(tzinfo=None) - noon < dt.timedelta(days=1)
            assert moment == dt.datetime.fromisoformat(row[f"{name}_utc"])


def test_morning_and_evening_follow_the_clock(store: TrackStore) -> None:
    for site in (HILL, RIDGE, SUMMIT):
        table = lineups(store, site, TWO_YEARS, Wanted(PLANETS))
        hour = table["best_local"].str.slice(11, 2).cast(pl.Int64)
        said = table["morning_or_evening"]
        assert (hour.filter(said == "evening") >= 15).all()
        assert (hour.filter(said == "morning") <= 9).all()


def test_parts_of_the_night_add_up(store: TrackStore) -> None:
    whole = evenings(HILL, *TWO_YEARS)
    any_time, evening, morning = (together(store, whole, Wanted(PLANETS, part=part)).count for part in Part)
    np.testing.assert_array_equal(any_time, np.maximum(evening, morning))
    assert (evening > 0).any() and (morning > 0).any()


def test_each_must_be_visible_and_height_alone_finds_more(store: TrackStore) -> None:
    whole = evenings(HILL, *AUTUMN)
    eye, glass, height = (together(store, whole, Wanted(PLANETS, 4, aid=aid)).count for aid in Aid)
    assert (eye <= glass).all() and (glass <= height).all()
    assert np.count_nonzero(eye) < np.count_nonzero(height)
    table = lineups(store, HILL, AUTUMN, Wanted(PLANETS, 3))
    assert (table["verdict"] == "naked_eye").all()


def test_who_takes_part_is_visible_in_the_table_of_nights_too(store: TrackStore) -> None:
    for row in lineups(store, HILL, TWO_YEARS, Wanted(PLANETS)).iter_rows(named=True):
        day = np.datetime64(row["best_evening"])
        table = nights(store, HILL, (day, day + 1), NAKED_EYE_PLANETS)
        seen = set(table.filter(pl.col("verdict") == "naked_eye")["body"])
        assert set(row["bodies"].split("+")) <= seen


@settings(max_examples=8, deadline=None)
@given(low=st.floats(0.0, 30.0), more=st.floats(0.1, 20.0))
def test_a_higher_limit_never_adds_a_body(low: float, more: float) -> None:
    whole = evenings(RIDGE, *AUTUMN)
    counts = [
        together(SHARED[0], whole, Wanted(PLANETS, 2, Rules(limit), Aid.ANY)).count
        for limit in (low, low + more)
    ]
    assert (counts[0] >= counts[1]).all()


SHARED: list[TrackStore] = []


@pytest.fixture(autouse=True)
def shared(store: TrackStore) -> None:
    SHARED[:] = [store]


def test_splitting_a_span_cuts_runs_and_changes_no_evening(store: TrackStore) -> None:
    middle = np.datetime64("2028-10-24")
    wanted = Wanted(PLANETS, 3)
    parts = [
        together(store, evenings(HILL, *span), wanted) for span in ((AUTUMN[0], middle), (middle, AUTUMN[1]))
    ]
    whole = together(store, evenings(HILL, *AUTUMN), wanted)
    np.testing.assert_array_equal(whole.count, np.concatenate([part.count for part in parts]))
    np.testing.assert_allclose(whole.jd, np.concatenate([part.jd for part in parts]), atol=1e-7)
    table = lineups(store, HILL, (AUTUMN[0], middle), wanted)
    assert table["cut_at_end"][-1] and table["last_evening"][-1] == "2028-10-23"


def test_a_hair_north_and_a_hair_south_of_the_equator_see_one_sky(
    store: TrackStore,
) -> None:
    # Left and right are told by azimuth, never by the hemisphere.
    north, south = (
        Site(name, latitude, 20.0, 0.0, "Africa/Kampala") for name, latitude in (("n", 1e-6), ("s", -1e-6))
    )
    one, two = (lineups(store, site, TWO_YEARS, Wanted(PLANETS)).drop("site") for site in (north, south))
    assert one.height > 0
    angles = [name for name in one.columns if name.endswith("_deg")]
    assert_frame_equal(one.select(angles), two.select(angles), abs_tol=1e-3)
    assert one["bodies"].to_list() == two["bodies"].to_list()


def test_evenings_stand_in_the_west_and_mornings_in_the_east_where_venus_leads(store: TrackStore) -> None:
    # Venus is never far from the Sun: in the evening in the west, in the morning in the east, on both halves.
    for site in (HILL, RIDGE):
        table = lineups(store, site, TWO_YEARS, Wanted(PLANETS)).filter(
            pl.col("bodies").str.contains("venus")
        )
        assert set(table["morning_or_evening"]) == {"evening", "morning"}
        for row in table.iter_rows(named=True):
            (place,) = [part for part in row["places"].split("; ") if part.startswith("venus")]
            high = float(place.split()[1]) > 25.0  # the higher, the nearer to the meridian
            side = "west" if row["morning_or_evening"] == "evening" else "east"
            assert side in place or high, place


def test_polar_day_has_none_and_polar_night_may(store: TrackStore) -> None:
    summer = (np.datetime64("2028-06-01"), np.datetime64("2028-07-15"))
    assert lineups(store, CAPE, summer, Wanted(PLANETS, 2, aid=Aid.ANY)).is_empty()
    said = why_none(store, CAPE, summer, Wanted(PLANETS, 2))
    assert "the Sun is never" in said
    winter = (np.datetime64("2031-01-01"), np.datetime64("2032-01-01"))  # Mars and Jupiter far south
    for site, span in ((POLE, TWO_YEARS), (PLATEAU, winter)):
        year = lineups(store, site, span, Wanted(PLANETS, 2, aid=Aid.ANY))
        assert not year.is_empty()
        assert set(year["best_utc"].str.slice(5, 2).cast(pl.Int64)) <= (
            {9, 10, 11, 12, 1, 2, 3} if site is POLE else {3, 4, 5, 6, 7, 8, 9}
        )


def test_the_moon_may_take_part_and_the_sun_never(store: TrackStore) -> None:
    bodies = (Body.MOON.order, *PLANETS)
    table = lineups(store, HILL, SPRING, Wanted(bodies, 4))
    assert table.height >= 1 and table["bodies"].str.contains("moon").any()
    without = lineups(store, HILL, SPRING, Wanted((Body.SUN.order, *PLANETS), 3, aid=Aid.ANY))
    assert not without["bodies"].str.contains("sun").any()


def test_hills_hide_what_stands_behind_them(store: TrackStore) -> None:
    wall = HorizonProfile(((0.0, 0.0), (200.0, 0.0), (201.0, 30.0), (359.0, 30.0)))
    walled = Site("walled", HILL.latitude_deg, HILL.longitude_deg, HILL.elevation_m, HILL.zone, wall)
    free, cut = (lineups(store, site, SPRING, Wanted(PLANETS)) for site in (HILL, walled))
    assert free["to_compass"].str.contains("west").any()
    assert cut.is_empty() or cut["evenings"].sum() < free["evenings"].sum()


def test_near_the_sun_there_is_a_caution_with_sunset_or_sunrise(store: TrackStore) -> None:
    table = lineups(store, HILL, TWO_YEARS, Wanted(PLANETS, 4))
    near = table.filter(pl.col("elongation_deg") < 20.0)
    assert near.height >= 1
    for row in near.iter_rows(named=True):
        sunrise = dt.datetime.fromisoformat(row["sunrise_local"]) + dt.timedelta(seconds=30)
        assert f"sunrise at {sunrise:%H:%M}" in row["caution"]
    assert table.filter(pl.col("elongation_deg") >= 20.0)["caution"].is_null().all()


def test_all_five_at_once_and_why_not(store: TrackStore) -> None:
    # April 2036: all five in the evening sky. Seen against altitudes in the test above; here the words.
    span = (np.datetime64("2036-03-15"), np.datetime64("2036-05-15"))
    table = lineups(store, HILL, span, Wanted(PLANETS, 5))
    assert table["bodies"].to_list() == ["+".join(body.value for body in NAKED_EYE_PLANETS)]
    said = why_none(store, HILL, AUTUMN, Wanted(PLANETS, 5))
    whole = evenings(HILL, *AUTUMN)
    four = np.count_nonzero(together(store, whole, Wanted(PLANETS, 4)).count)
    assert f"with 4: {four} evenings" in said
    free = np.count_nonzero(together(store, whole, Wanted(PLANETS, 5, Rules(0.0))).count)
    assert f"down to the horizon: {free if free else 'none'}" in said


def test_runs_of_a_made_up_list() -> None:
    count = np.array([0, 3, 4, 4, 0, 0, 3, 0, 5])
    merit = np.array([np.nan, 9.0, 1.0, 2.0, np.nan, np.nan, 0.0, np.nan, 7.0])
    some = np.zeros(9, dtype=np.bool_)
    runs = runs_of(Together(count, merit, merit, merit, merit, some, some))
    assert runs.first.tolist() == [1, 6, 8]
    assert runs.best.tolist() == [3, 6, 8]
    assert runs.last.tolist() == [3, 6, 8]
    none = np.zeros(9, dtype=np.int64)
    assert runs_of(Together(none, merit, merit, merit, merit, some, some)).first.size == 0


def test_outside_the_kernel_is_refused(store: TrackStore) -> None:
    with pytest.raises(SpanError):
        lineups(store, HILL, (np.datetime64("2700-01-01"), np.datetime64("2700-02-01")), Wanted(PLANETS))


def test_the_printed_table_says_who_where_and_whether_the_run_is_cut(store: TrackStore) -> None:
    table = lineups(store, HILL, TWO_YEARS, Wanted(PLANETS))
    words = lineups_summary(table)
    assert words["What"][0] == "Venus, Mars, Jupiter; may begin earlier"
    assert words["Across"].str.contains(r"^[NESW]{1,3}–[NESW]{1,3}$").all()
    assert words["Best"].to_list() == [f"{text[:10]} {text[11:16]}" for text in table["best_local"]]
    heading = lineups_heading(table, HILL, Wanted(PLANETS), "DE440")
    assert all(body.label in heading for body in BODIES[2:7]) and "at least 3" in heading
