"""Events from a site: against skyfield, against the table of nights, and what must hold in every row."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal
from skyfield.api import load

from tests.site.places import ATOLL, CAPE, HILL, PLATEAU, RIDGE, skyfield_place
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.events.kinds import Kind
from wanderers.site import columns
from wanderers.site.event_view import from_site
from wanderers.site.hours import Opening
from wanderers.site.nights import nights
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.visibility import VERDICTS

SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune", "pluto")
EVERYWHERE = [HILL, RIDGE, ATOLL, CAPE]
ORDER = {verdict.value: place for place, verdict in enumerate(VERDICTS)}
ONE_BODY = ["station", "opposition", "greatest_elongation", "node", "perigee", "quadrature"]


@pytest.fixture(scope="module", params=EVERYWHERE, ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def seen(store: TrackStore, events_of_2027: pl.DataFrame, site: Site) -> pl.DataFrame:
    return from_site(store, site, events_of_2027)


def watchable(table: pl.DataFrame) -> pl.DataFrame:
    return table.filter(pl.col("best_utc").is_not_null())


def skyfield_times(texts: pl.Series) -> Any:
    # The tables' UTC is UT1 beyond the packaged leap seconds, see timescales: read it back the same way.
    jd = [parse_date(text) for text in texts]
    return load.timescale(builtin=True).tt_jd(jd_tt_from_utc(np.array(jd)))


def apparent(kernel: Any, site: Site, name: str, time: Any) -> Any:
    target = kernel[f"{name} barycenter" if name in SYSTEMS else name]
    return (kernel["earth"] + skyfield_place(site)).at(time).observe(target).apparent()


def test_the_table_keeps_every_event_and_adds_the_promised_columns(
    seen: pl.DataFrame, events_of_2027: pl.DataFrame
) -> None:
    assert_frame_equal(seen.select(list(schema.EVENT_COLUMNS)), events_of_2027)
    added = seen.drop(list(schema.EVENT_COLUMNS))
    assert dict(added.schema) == columns.EVENT_VIEW_COLUMNS
    assert added["verdict"].null_count() == added["verdict_reason"].null_count() == 0


def test_bodies_stand_where_skyfield_has_them(seen: pl.DataFrame, site: Site, jpl: Any) -> None:
    pairs = watchable(seen).filter(pl.col("other").is_in([body.value for body in Body])).head(25)
    assert pairs.height >= 5
    for row in pairs.iter_rows(named=True):
        time = skyfield_times(pl.Series([row["best_utc"]]))
        one, two = (apparent(jpl, site, row[name], time) for name in ("body", "other"))
        altitude, azimuth, _ = one.altaz()
        # UT1 of the two libraries differs by a third of a second: 5 arcseconds.
        assert row["airless_altitude_deg"] == pytest.approx(altitude.degrees[0], abs=6.0 / 3600.0)
        turn = (row["azimuth_deg"] - azimuth.degrees[0] + 180.0) % 360.0 - 180.0
        assert abs(turn) * np.cos(altitude.radians[0]) < 6.0 / 3600.0
        apart = one.separation_from(two).degrees[0]
        assert row["seen_separation_deg"] == pytest.approx(apart, abs=2.0 / 3600.0)


def test_upper_and_left_are_what_who_faces_them_sees(seen: pl.DataFrame, site: Site, jpl: Any) -> None:
    pairs = watchable(seen).filter(pl.col("other").is_in([body.value for body in Body]))
    assert pairs["left"].n_unique() >= 2
    for row in pairs.head(25).iter_rows(named=True):
        time = skyfield_times(pl.Series([row["best_utc"]]))
        places = {name: apparent(jpl, site, row[name], time).altaz() for name in ("body", "other")}
        higher = "other" if places["other"][0].degrees[0] > places["body"][0].degrees[0] else "body"
        assert row["upper"] == row[higher]
        turn = (places["other"][1].degrees[0] - places["body"][1].degrees[0] + 180.0) % 360.0 - 180.0
        if abs(turn) > 0.05:  # whom a greater azimuth shows stands to the right, whichever way one faces
            assert row["left"] == row["body" if turn > 0.0 else "other"]


def test_single_bodies_have_the_windows_of_the_table_of_nights(
    store: TrackStore, seen: pl.DataFrame, site: Site
) -> None:
    single = watchable(seen).filter(pl.col("kind").is_in(ONE_BODY), pl.col("body") != "moon")
    table = nights(store, site, (np.datetime64("2026-12-29"), np.datetime64("2027-07-04")))
    joined = single.join(table, on=["evening_date", "body"], suffix="_nights")
    assert joined.height == single.filter(pl.col("body") != "pluto").height > 5
    for name in ("window_start_utc", "window_end_utc", "best_utc"):
        ours, theirs = (
            joined[column].str.to_datetime("%Y-%m-%dT%H:%M:%S%.fZ") for column in (name, f"{name}_nights")
        )
        limit_s = 60.0 * 11.0 if name == "best_utc" else 1.0  # the raster there is finer
        assert ((ours - theirs).dt.total_milliseconds().abs() / 1000.0).max() <= limit_s, name
    assert joined["verdict"].to_list() == joined["verdict_nights"].to_list()


def test_what_nights_cannot_show_events_cannot(store: TrackStore, seen: pl.DataFrame, site: Site) -> None:
    unseen = seen.filter(
        pl.col("best_utc").is_null(), pl.col("kind").is_in(ONE_BODY), ~pl.col("body").is_in(["moon", "sun"])
    )
    table = nights(store, site, (np.datetime64("2026-12-29"), np.datetime64("2027-07-04")))
    joined = unseen.join(table, on=["evening_date", "body"], suffix="_nights")
    assert joined["best_utc_nights"].null_count() == joined.height > 0


def test_a_window_lies_on_its_evening_and_holds_its_best_moment(seen: pl.DataFrame, site: Site) -> None:
    some = watchable(seen)
    assert (some["window_start_utc"] <= some["best_utc"]).all()
    assert (some["best_utc"] <= some["window_end_utc"]).all()
    for row in some.iter_rows(named=True):
        noon = dt.datetime.fromisoformat(row["evening_date"]) + dt.timedelta(hours=12)
        best = dt.datetime.fromisoformat(row["best_local"]).replace(tzinfo=None)
        assert noon <= best <= noon + dt.timedelta(days=1, hours=1), row["event_id"]


def test_nothing_is_watched_too_low_or_in_too_bright_a_sky(seen: pl.DataFrame) -> None:
    some = watchable(seen)
    assert some["altitude_deg"].min() >= Rules().min_altitude_deg - 1e-3  # type: ignore[operator]
    assert some["sun_altitude_deg"].max() <= Rules().sun_below_deg + 1e-3  # type: ignore[operator]


def test_the_evening_is_one_beside_the_instant(seen: pl.DataFrame) -> None:
    some = watchable(seen)
    best, utc = (some[name].str.to_datetime("%Y-%m-%dT%H:%M:%S%.fZ") for name in ("best_utc", "utc"))
    assert ((best - utc).dt.total_hours().abs()).max() <= 36


def test_no_verdict_improves_when_the_altitude_limit_rises(
    store: TrackStore, events_of_2027: pl.DataFrame, site: Site
) -> None:
    some = events_of_2027.filter(pl.col("other").is_null() | (pl.col("body") != "moon"))
    verdicts = [
        from_site(store, site, some, Rules(min_altitude_deg=limit))["verdict"].replace_strict(ORDER)
        for limit in (5.0, 10.0, 25.0)
    ]
    assert (verdicts[0] <= verdicts[1]).all()
    assert (verdicts[1] <= verdicts[2]).all()


def test_splitting_a_table_changes_nothing(store: TrackStore, events_of_2027: pl.DataFrame) -> None:
    some = events_of_2027.sample(300, seed=7)
    whole = from_site(store, HILL, some)
    parts = [from_site(store, HILL, part) for part in (some.head(100), some.tail(200))]
    assert_frame_equal(whole, pl.concat(parts), abs_tol=1e-7)


def test_an_empty_table_gets_its_columns(store: TrackStore) -> None:
    empty = from_site(store, HILL, pl.DataFrame(schema=schema.EVENT_COLUMNS))
    assert dict(empty.schema) == schema.EVENT_COLUMNS | columns.EVENT_VIEW_COLUMNS
    assert empty.is_empty()


def test_opening_hours_and_weekdays_hold(store: TrackStore, events_of_2027: pl.DataFrame) -> None:
    opening = Opening(frozenset({4, 5}), dt.time(18, 30), dt.time(21, 0))
    some = watchable(from_site(store, HILL, events_of_2027, opening=opening))
    assert some.height > 20
    for row in some.iter_rows(named=True):
        evening = dt.date.fromisoformat(row["evening_date"])
        assert evening.weekday() in (4, 5)
        for name in ("window_start_local", "best_local", "window_end_local"):
            local = dt.datetime.fromisoformat(row[name]).replace(tzinfo=None)
            early = dt.datetime.combine(evening, dt.time(18, 30)) - dt.timedelta(seconds=1)
            assert early <= local <= dt.datetime.combine(evening, dt.time(21, 0, 1))


def test_hours_before_noon_are_those_of_the_next_morning(
    store: TrackStore, events_of_2027: pl.DataFrame
) -> None:
    opening = Opening(after=dt.time(4, 0), by=dt.time(6, 0))
    some = watchable(from_site(store, HILL, events_of_2027, opening=opening))
    assert some.height > 20
    clocks = some["best_local"].str.slice(11, 5)
    assert clocks.min() >= "04:00" and clocks.max() <= "06:00"  # type: ignore[operator]


def test_polar_summer_says_that_the_sun_does_not_set(store: TrackStore, events_of_2027: pl.DataFrame) -> None:
    june = events_of_2027.filter(pl.col("utc") > "2027-06-01", pl.col("kind") == Kind.NODE.value)
    seen = from_site(store, CAPE, june)
    assert june.height > 0
    assert (seen["verdict"] == "not_visible").all()
    assert set(seen["verdict_reason"]) <= {
        "the Sun is never 6 degrees or more below the horizon",
        "the Sun itself: only through a filter made for it",
    }


def test_polar_winter_needs_no_evening_twilight(store: TrackStore, events_of_2027: pl.DataFrame) -> None:
    june = events_of_2027.filter(
        pl.col("utc") > "2027-06-01", pl.col("kind") == Kind.CONSTELLATION_ENTRY.value
    )
    seen = watchable(from_site(store, PLATEAU, june))
    assert seen.height > 0


def test_everything_near_the_sun_is_cautioned(seen: pl.DataFrame) -> None:
    near = seen.filter(pl.col("elongation_deg") < 20.0)
    assert near.height > 50
    assert near["caution"].null_count() == 0


def test_north_and_south_see_the_same_pair_turned_over(
    store: TrackStore, events_of_2027: pl.DataFrame
) -> None:
    # On one meridian at opposite latitudes what is to the left here is to the right there: common practice.
    far = replace(HILL, latitude_deg=-HILL.latitude_deg, name="mirror")
    pairs = events_of_2027.filter(
        pl.col("kind") == "appulse", pl.col("other").is_in([body.value for body in Body])
    )
    north, south = (watchable(from_site(store, site, pairs)) for site in (HILL, far))
    both = north.join(south, on="event_id", suffix="_south")
    facing_south = (both["azimuth_deg"] - 180.0).abs() < 60.0
    facing_north = ((both["azimuth_deg_south"] + 180.0) % 360.0 - 180.0).abs() < 60.0
    clear = both.filter(facing_south & facing_north & (both["seen_separation_deg"] > 2.0))
    assert clear.height >= 3
    turned = (clear["left"] != clear["left_south"]) | (clear["upper"] != clear["upper_south"])
    assert turned.all()
