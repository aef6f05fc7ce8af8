"""The table of nights: against skyfield, and what must hold in every row."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import polars as pl
import pytest
from skyfield.api import load, load_constellation_map
from skyfield.magnitudelib import planetary_magnitude

from tests.site.places import ATOLL, CAPE, HILL, RIDGE, skyfield_place
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site import columns
from wanderers.site.compass import POINTS
from wanderers.site.nights import nights
from wanderers.site.places import Site
from wanderers.site.refraction import refracted_deg

SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune")
MARCH = (np.datetime64("2027-03-01"), np.datetime64("2027-04-01"))
YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))
TIME_COLUMNS = (*columns.SUN_TIMES, *columns.BODY_TIMES, "window_start", "best", "window_end")


@pytest.fixture(scope="module", params=[HILL, RIDGE, CAPE, ATOLL], ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def table(store: TrackStore, site: Site) -> pl.DataFrame:
    return nights(store, site, MARCH, BODIES[:9])


def instants(table: pl.DataFrame, name: str) -> list[dt.datetime]:
    return [dt.datetime.fromisoformat(text) for text in table[name].drop_nulls()]


def skyfield_time(table: pl.DataFrame, name: str) -> Any:
    # The tables' UTC is UT1 beyond the packaged leap seconds, see timescales: read it back the same way.
    jd = [parse_date(text) for text in table[name].drop_nulls()]
    return load.timescale(builtin=True).tt_jd(jd_tt_from_utc(np.array(jd)))


def target_of(jpl: Any, name: str) -> Any:
    return jpl[f"{name} barycenter" if name in SYSTEMS else name]


def airless(jpl: Any, site: Site, name: str, time: Any) -> np.ndarray:
    observer = jpl["earth"] + skyfield_place(site)
    return np.asarray(observer.at(time).observe(target_of(jpl, name)).apparent().altaz()[0].degrees)


def test_there_is_a_row_for_each_evening_and_body_in_order(table: pl.DataFrame, site: Site) -> None:
    assert table.columns == list(columns.NIGHT_COLUMNS)
    assert [table.schema[name] for name in table.columns] == list(columns.NIGHT_COLUMNS.values())
    days = np.arange(*MARCH, dtype="datetime64[D]").astype(str).tolist()
    assert table["evening_date"].to_list() == [day for day in days for _ in range(9)]
    assert table["body"].to_list() == [body.value for body in BODIES[:9]] * len(days)
    assert table["site"].unique().to_list() == [site.name]
    assert table["zone"].unique().to_list() == [site.zone]


@pytest.mark.parametrize("name", TIME_COLUMNS)
def test_local_times_are_the_same_instants_as_utc(table: pl.DataFrame, name: str) -> None:
    utc, local = instants(table, f"{name}_utc"), instants(table, f"{name}_local")
    assert utc and utc == local
    assert {instant.tzinfo for instant in utc} == {dt.UTC}


@pytest.mark.parametrize("name", TIME_COLUMNS)
def test_everything_lies_between_the_noons_of_its_evening(table: pl.DataFrame, name: str) -> None:
    some = table.filter(pl.col(f"{name}_local").is_not_null())
    for day, instant in zip(some["evening_date"], instants(some, f"{name}_local"), strict=True):
        clock = instant.replace(tzinfo=None) - dt.datetime.fromisoformat(day)
        assert dt.timedelta(hours=12) <= clock < dt.timedelta(hours=36)


def test_windows_open_and_close_where_sun_or_body_pass_their_limits(
    table: pl.DataFrame, jpl: Any, site: Site
) -> None:
    some = table.filter(pl.col("best_utc").is_not_null())
    for name in ("window_start_utc", "window_end_utc"):
        for body, rows in some.group_by("body"):
            time = skyfield_time(rows, name)
            height = refracted_deg(airless(jpl, site, str(body[0]), time), site.elevation_m)
            sun = airless(jpl, site, "sun", time)
            # A second of time is at most 15 arcseconds; texts are cut at the millisecond.
            inside = (height > 10.0 - 1e-3) & (sun < -6.0 + 1e-3)
            at_limit = (np.abs(height - 10.0) < 1e-3) | (np.abs(sun + 6.0) < 1e-3)
            noon = np.array([text[11:16] == "12:00" for text in rows[name.replace("utc", "local")]])
            assert inside.all() and (at_limit | noon).all()


def test_the_best_moment_lies_in_the_window_and_above_its_limits(table: pl.DataFrame) -> None:
    some = table.filter(pl.col("best_utc").is_not_null())
    assert some.select(
        pl.col("best_utc").is_between("window_start_utc", "window_end_utc").all()
        & (pl.col("altitude_deg") > 10.0 - 1e-6).all()
        & (pl.col("sun_altitude_deg") < -6.0 + 1e-6).all()
    ).item()


def test_no_window_is_missed(table: pl.DataFrame, jpl: Any, site: Site) -> None:
    # Independently: skyfield's altitudes every ten minutes of the month.
    time_scale = load.timescale(builtin=True)
    edges = table.filter(pl.col("body") == "sun")["culmination_utc"]
    start = dt.datetime.fromisoformat(edges[0])
    moments = [start + dt.timedelta(minutes=10 * step) for step in range(6 * 24 * 28)]
    time = time_scale.from_datetimes(moments)
    dark = airless(jpl, site, "sun", time) < -6.05
    for name in ("mercury", "venus", "jupiter"):
        high = refracted_deg(airless(jpl, site, name, time), site.elevation_m) > 10.05
        rows = table.filter((pl.col("body") == name) & pl.col("best_utc").is_not_null())
        opens, closes = instants(rows, "window_start_utc"), instants(rows, "window_end_utc")
        several = rows["remark"].fill_null("").str.contains("a second window").any()
        for moment in np.array(moments)[dark & high]:
            found = any(a <= moment <= b for a, b in zip(opens, closes, strict=True))
            assert found or several, (name, moment)


def test_angles_at_the_best_moment_agree_with_skyfield(table: pl.DataFrame, jpl: Any, site: Site) -> None:
    observer = jpl["earth"] + skyfield_place(site)
    for body, rows in table.filter(pl.col("best_utc").is_not_null()).group_by("body"):
        time = skyfield_time(rows, "best_utc")
        seen = observer.at(time).observe(target_of(jpl, str(body[0]))).apparent()
        moon = observer.at(time).observe(jpl["moon"]).apparent()
        altitude, azimuth, _ = seen.altaz()
        np.testing.assert_allclose(rows["airless_altitude_deg"], altitude.degrees, atol=1e-5)
        apart = (rows["azimuth_deg"].to_numpy() - azimuth.degrees + 180.0) % 360.0 - 180.0
        np.testing.assert_allclose(apart * np.cos(np.radians(altitude.degrees)), 0.0, atol=1e-5)
        np.testing.assert_allclose(rows["sun_altitude_deg"], airless(jpl, site, "sun", time), atol=1e-5)
        np.testing.assert_allclose(
            rows["moon_altitude_deg"],
            refracted_deg(moon.altaz()[0].degrees, site.elevation_m),
            atol=1e-4,
        )
        # Seen from the Earth's centre the phase angle differs by up to a degree.
        lit = moon.fraction_illuminated(jpl["sun"])
        np.testing.assert_allclose(rows["moon_illuminated"], lit, atol=0.002)
        if body[0] != "moon":
            np.testing.assert_allclose(
                rows["moon_separation_deg"], seen.separation_from(moon).degrees, atol=1e-5
            )
        else:
            assert rows["moon_separation_deg"].is_null().all()


def test_magnitudes_are_dimmed_by_published_air_mass_and_extinction(
    table: pl.DataFrame, jpl: Any, site: Site
) -> None:
    some = table.filter(pl.col("body") == "jupiter").filter(pl.col("best_utc").is_not_null())
    time = skyfield_time(some, "best_utc")
    magnitude = planetary_magnitude(jpl["earth"].at(time).observe(jpl["jupiter barycenter"]))
    np.testing.assert_allclose(some["magnitude"], magnitude, atol=0.01)
    altitude = some["altitude_deg"].to_numpy()
    # Kasten and Young 1989; Green 1992.
    airmass = 1.0 / (np.sin(np.radians(altitude)) + 0.50572 * (altitude + 6.07995) ** -1.6364)
    loss = 0.016 + 0.1451 * np.exp(-site.elevation_m / 7_996.0) + 0.12 * np.exp(-site.elevation_m / 1_500.0)
    np.testing.assert_allclose(some["airmass"], airmass, rtol=1e-9)
    np.testing.assert_allclose(
        some["dimmed_magnitude"], some["magnitude"].to_numpy() + loss * airmass, atol=1e-9
    )


def test_compass_words_follow_the_azimuth(table: pl.DataFrame) -> None:
    some = table.filter(pl.col("best_utc").is_not_null())
    for azimuth, word in zip(some["azimuth_deg"], some["compass"], strict=True):
        centre = POINTS.index(word) * 22.5
        assert abs((azimuth - centre + 180.0) % 360.0 - 180.0) <= 11.25


def test_evening_bodies_stand_in_the_west_and_morning_bodies_in_the_east_on_both_halves(
    store: TrackStore,
) -> None:
    # Venus is never far from the Sun: in the evening it follows it down in the west.
    for site in (HILL, RIDGE):
        venus = nights(store, site, YEAR, [Body.VENUS]).filter(pl.col("best_utc").is_not_null())
        evening = venus["local_time"] > "12:00:00"
        assert evening.any() and not evening.all()
        assert venus.filter(evening)["compass"].str.contains("west").all()
        assert venus.filter(~evening)["compass"].str.contains("east").all()


def test_bodies_culminate_in_the_south_of_the_north_and_in_the_north_of_the_south(store: TrackStore) -> None:
    def way(site: Site) -> list[str]:
        saturn = nights(
            store, site, (np.datetime64("2027-11-01"), np.datetime64("2027-11-10")), [Body.SATURN]
        )
        return saturn["compass"].unique().to_list()

    assert way(HILL) == ["south"] and way(RIDGE) == ["north"]


def test_constellations_are_given(table: pl.DataFrame, jpl: Any) -> None:
    some = table.filter((pl.col("body") == "jupiter") & pl.col("best_utc").is_not_null())
    time = skyfield_time(some, "best_utc")
    at = load_constellation_map()
    assert some["constellation"].to_list() == list(
        at(jpl["earth"].at(time).observe(jpl["jupiter barycenter"]))
    )
