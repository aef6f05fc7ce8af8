"""Apparitions: against historical heliacal values and skyfield, and what must hold of every row."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import polars as pl
import pytest
from skyfield.api import load

from tests.reference.published import rows
from tests.site.places import ATOLL, CAPE, HILL, PLATEAU, RIDGE, SUMMIT, skyfield_place
from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, OUTER, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.errors import SpanError
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.site import columns
from wanderers.site.apparition_summary import apparitions_heading, apparitions_summary
from wanderers.site.apparitions import Habits, apparitions
from wanderers.site.lineup_nights import Aid
from wanderers.site.nights import nights
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.sight_moments import Hours, air_at, sun_limits_deg
from wanderers.site.visibility import Criteria

YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))
EIGHT_YEARS = (np.datetime64("2027-01-01"), np.datetime64("2035-01-01"))
BABYLON = Site("river plain", 32.54, 44.42, 30.0, "Asia/Baghdad")
CLEAR_PLAIN = Habits(Rules(criteria=Criteria(extinction_mag=0.2)))
SPREAD_DEG = 4.0
"""How far historical values of one planet lie apart; see tests/reference/test_heliacal.py."""
SIGHTS = [f"{name}_sight_{which}" for name in ("first", "last") for which in ("earliest", "likely", "latest")]


@pytest.fixture(scope="module", params=[HILL, RIDGE, CAPE, ATOLL, SUMMIT], ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def table(store: TrackStore, site: Site) -> pl.DataFrame:
    return apparitions(store, site, YEAR)


@pytest.fixture(scope="module")
def at_babylon(store: TrackStore) -> pl.DataFrame:
    return apparitions(store, BABYLON, EIGHT_YEARS, habits=CLEAR_PLAIN)


HISTORICAL = [row for row in rows("heliacal") if row["measure"] == "arcus_visionis"]


@pytest.mark.parametrize("row", HISTORICAL, ids=lambda row: row["id"])
def test_arcus_of_sights_at_babylon_is_the_historical_one(
    at_babylon: pl.DataFrame, row: dict[str, str]
) -> None:
    # Ptolemy, Almagest XIII.7; Schoch 1924 (MNRAS 84, 731) as tabulated in Neugebauer 1929.
    which, _, when = row["phenomenon"].partition(" visibility, ")
    own = at_babylon.filter(pl.col("body") == row["body"])
    if row["body"] in ("mercury", "venus") and when:
        own = own.filter(pl.col("kind") == when)
    names = [f"{which}_sight_arcus_deg"] if which else ["first_sight_arcus_deg", "last_sight_arcus_deg"]
    arcus = pl.concat([own[name] for name in names]).drop_nulls()
    assert arcus.len() >= 3
    assert arcus.mean() == pytest.approx(float(row["published_deg"]), abs=SPREAD_DEG)


def test_sights_at_babylon_come_in_the_order_of_ptolemy(at_babylon: pl.DataFrame) -> None:
    # Venus 5, Jupiter 10, Saturn 11, Mars 11.5 (Almagest XIII.7); Mercury's changes too much with its light.
    arcus = {
        body: at_babylon.filter(pl.col("body") == body)["first_sight_arcus_deg"].mean()
        for body in ("venus", "jupiter", "saturn", "mars")
    }
    assert sorted(arcus, key=arcus.__getitem__) == ["venus", "jupiter", "saturn", "mars"]


def test_jupiter_is_first_seen_as_long_after_conjunction_as_babylonians_took_it(
    store: TrackStore, at_babylon: pl.DataFrame
) -> None:
    # Babylonian texts: Jupiter is hidden for about a month, 29 to 33 days, Saturn for about 35 (from memory).
    # Both ends together, so twice the distance from conjunction.
    query = Query(
        *(jd_tt_from_utc(parse_date(str(day))) for day in EIGHT_YEARS), frozenset({Kind.SOLAR_CONJUNCTION})
    )
    conjunctions = almanac(store, query)
    for body, shortest, longest in (("jupiter", 24, 40), ("saturn", 28, 48)):
        own = at_babylon.filter(pl.col("body") == body).sort("first_sight_likely")
        lost, found = own["last_sight_likely"].str.to_date()[:-1], own["first_sight_likely"].str.to_date()[1:]
        hidden = (found - lost).dt.total_days()
        assert hidden.is_between(shortest, longest).all(), hidden
        when = conjunctions.filter(pl.col("body") == body)["utc"].str.slice(0, 10).str.to_date()
        for day in when:
            assert ((lost < day) & (found > day)).sum() <= 1
    assert conjunctions.height > 0


def test_the_columns_are_those_promised(table: pl.DataFrame, site: Site) -> None:
    assert dict(table.schema) == columns.APPARITION_COLUMNS
    assert table["site"].unique().to_list() == [site.name]
    order = [body.value for body in NAKED_EYE_PLANETS]
    assert table["body"].to_list() == sorted(table["body"], key=order.index)
    assert table["criterion"].str.contains("arcus visionis 10.5 + 1.4 m", literal=True).all()
    assert (table["extinction_clear_mag"] < table["extinction_mag"]).all()
    assert (table["extinction_hazy_mag"] > table["extinction_mag"]).all()


def test_ranges_are_in_order_and_hold_no_minute(table: pl.DataFrame) -> None:
    for name in ("first_sight", "last_sight"):
        early, likely, late = (table[f"{name}_{which}"] for which in ("earliest", "likely", "latest"))
        assert (early <= likely).fill_null(True).all() and (likely <= late).fill_null(True).all()
    both = table.drop_nulls(["first_sight_likely", "last_sight_likely"])
    assert both.height >= 8 and (both["first_sight_likely"] <= both["last_sight_likely"]).all()
    for name in SIGHTS:
        assert table[name].drop_nulls().str.contains(r"^\d{4}-\d{2}-\d{2}$").all()


def test_haze_shortens_and_clear_air_lengthens(store: TrackStore, table: pl.DataFrame, site: Site) -> None:
    for name in columns.APPARITION_COLUMNS:
        if name.endswith(("haze_days", "clear_days")):
            assert (table[name].drop_nulls() >= 0).all()
    assert table["first_sight_haze_days"].drop_nulls().sum() > 0
    # What the columns say of haze is what that extinction gives when asked for.
    hazy = Habits(Rules(criteria=Criteria(extinction_mag=float(table["extinction_hazy_mag"][0]))))
    other = apparitions(store, site, YEAR, [Body.JUPITER, Body.VENUS], hazy)
    both = table.join(other, on=["body", "event_id"], suffix="_hazy").drop_nulls("first_sight_haze_days")
    assert both.height >= 2
    later = both["first_sight_likely_hazy"].str.to_date() - both["first_sight_likely"].str.to_date()
    assert later.dt.total_days().to_list() == both["first_sight_haze_days"].to_list()


def test_angles_at_a_sight_agree_with_skyfield_and_with_the_sun_down(
    store: TrackStore, jpl: Any, table: pl.DataFrame, site: Site
) -> None:
    # The moment is not printed, on purpose: somewhere on that date the planet and the Sun stand so.
    observer = jpl["earth"] + skyfield_place(site)
    some = table.drop_nulls("first_sight_altitude_deg").filter(pl.col("body").is_in(["venus", "jupiter"]))
    zone_days = some["first_sight_likely"].to_list()
    for index, day in enumerate(zone_days):
        noon = jd_tt_from_utc(parse_date(day)) + 0.5 - site.longitude_deg / 360.0
        time = load.timescale(builtin=True).tt_jd(noon + np.linspace(-0.75, 0.75, 2161))
        name = some["body"][index]
        target = jpl["jupiter barycenter" if name == "jupiter" else name]
        sun, planet = (
            observer.at(time).observe(one).apparent().altaz()[0].degrees for one in (jpl["sun"], target)
        )
        arcus, depth = some["first_sight_arcus_deg"][index], some["first_sight_sun_altitude_deg"][index]
        away = np.hypot(planet - sun - arcus, sun - depth)
        assert away.min() < 0.15, (name, day)
    assert (some["first_sight_sun_altitude_deg"] < -50.0 / 60.0).all()


def test_the_sun_is_as_low_as_observers_report(table: pl.DataFrame) -> None:
    # Common practice, no source: Venus 0 to -4, Jupiter -4 to -6, Mercury -5 to -7, others -7 to -10.
    middle = {"mercury": -6.0, "venus": -2.0, "mars": -8.5, "jupiter": -5.0, "saturn": -8.5}
    for name in ("first", "last"):
        some = table.drop_nulls(f"{name}_sight_sun_altitude_deg")
        limit = some["body"].replace_strict(middle, return_dtype=pl.Float64)
        assert (some[f"{name}_sight_sun_altitude_deg"] <= limit).all()
    assert sun_limits_deg(Body.JUPITER, Aid.NAKED_EYE) == (-4.0, -5.0, -6.0)


def test_every_apparition_holds_its_elongation_or_opposition(table: pl.DataFrame) -> None:
    inner = table.filter(pl.col("body").is_in(["mercury", "venus"]))
    assert (inner["event_kind"] == "greatest_elongation").all()
    side = pl.when(pl.col("kind") == "evening").then(pl.lit("east")).otherwise(pl.lit("west"))
    assert inner.select(pl.col("event_id").str.contains(side)).to_series().all()
    outer = table.filter(~pl.col("body").is_in(["mercury", "venus"]))
    assert (outer["event_kind"] == "opposition").all() and (outer["kind"] == "morning_to_evening").all()
    assert outer["event_elongation_deg"].min() > 170.0
    seen = table.drop_nulls(["first_sight_earliest", "last_sight_latest", "first_sight_likely"])
    outside = seen.filter(
        ~pl.col("event_utc").str.slice(0, 10).is_between("first_sight_earliest", "last_sight_latest")
    )
    assert set(outside["body"]) <= {"mercury", "mars"} or seen["site"][0] == "cape"


def test_ids_and_instants_are_those_of_the_almanac(store: TrackStore, table: pl.DataFrame) -> None:
    span = [jd_tt_from_utc(parse_date(text)) for text in ("2026-01-01", "2030-01-01")]
    events = almanac(store, Query(*span, frozenset({Kind.OPPOSITION, Kind.GREATEST_ELONGATION})))
    joined = table.join(events, on="event_id", how="left")
    assert joined["event_utc"].to_list() == joined["utc"].to_list()
    assert joined["utc"].null_count() == 0


def test_mercury_is_easiest_in_spring_evenings_and_autumn_mornings_on_both_halves(store: TrackStore) -> None:
    # Common practice, no source: the ecliptic stands steep on spring evenings and autumn mornings.
    for site, spring, autumn in (
        (HILL, (1, 2, 3, 4, 5), (8, 9, 10, 11, 12)),
        (RIDGE, (7, 8, 9, 10), (2, 3, 4, 5)),
    ):
        some = apparitions(store, site, EIGHT_YEARS, [Body.MERCURY]).filter(pl.col("ease_rank") <= 6)
        for row in some.iter_rows(named=True):
            month = int(row["best_evening"][5:7])
            assert month in (spring if row["kind"] == "evening" else autumn), row["best_local"]


def test_the_best_evening_is_one_of_the_weeks_and_of_the_table_of_nights(
    store: TrackStore, site: Site, table: pl.DataFrame
) -> None:
    some = table.filter(pl.col("weeks_nights") > 0)
    assert some.height >= 4
    assert (some["best_evening"].is_between(some["weeks_from"], some["weeks_to"])).all()
    assert (some["best_altitude_deg"] >= 10.0).all() and some["best_at_civil_hour"].all()
    for row in some.iter_rows(named=True):
        day = np.datetime64(row["best_evening"])
        (night,) = nights(store, site, (day, day + 1), [Body(row["body"])]).iter_rows(named=True)
        if night["best_utc"] is not None and row["weeks_nights"] > 2:  # with the Sun below -6, not by a hair
            assert night["verdict"] == "naked_eye", row["body"]
        weeks = np.datetime64(row["weeks_to"]) - np.datetime64(row["weeks_from"])
        assert weeks.astype(int) + 1 == row["weeks_nights"]


def test_civil_hours_are_kept(store: TrackStore) -> None:
    early = Habits(hours=Hours(evening_until=19.0, morning_from=7.0))
    for site in (HILL, RIDGE):
        table = apparitions(store, site, YEAR, habits=early).filter("best_at_civil_hour")
        hour = table["best_local"].str.slice(11, 5)
        evening = table["kind"] != "morning"
        assert (hour.filter(evening).is_between(pl.lit("15:00"), pl.lit("19:00"))).all()
        assert (hour.filter(~evening) >= "07:00").all()
        late = apparitions(store, site, YEAR)
        joined = late.join(table, on="event_id", suffix="_early")
        assert (joined["weeks_nights_early"] <= joined["weeks_nights"]).all()


def test_evenings_are_in_the_west_and_mornings_in_the_east_on_both_halves(store: TrackStore) -> None:
    for site in (HILL, RIDGE, SUMMIT):
        table = apparitions(store, site, YEAR, [Body.MERCURY, Body.VENUS]).drop_nulls("best_compass")
        evening = table["kind"] == "evening"
        assert evening.any() and not evening.all()
        assert table["best_compass"].filter(evening).str.contains("west").all()
        assert table["best_compass"].filter(~evening).str.contains("east").all()


def test_mornings_bear_their_own_date(store: TrackStore) -> None:
    table = apparitions(store, RIDGE, YEAR, [Body.VENUS, Body.MERCURY]).drop_nulls("best_local")
    own, evening = table["best_local"].str.slice(0, 10).str.to_date(), table["best_evening"].str.to_date()
    later = (own - evening).dt.total_days()
    assert later.to_list() == [int(kind == "morning") for kind in table["kind"]]


def test_what_stands_near_the_sun_carries_a_caution_with_sunset_or_sunrise(table: pl.DataFrame) -> None:
    near = table.filter(
        (pl.col("first_sight_elongation_deg") < 20.0)
        | (pl.col("last_sight_elongation_deg") < 20.0)
        | (pl.col("best_elongation_deg") < 20.0)
    )
    assert near.height >= 3
    assert near["caution"].str.contains(r"no binoculars or telescope while any of it is up").all()
    assert near["caution"].str.contains(r"sun(set|rise) \d\d:\d\d").all()


def test_high_north_the_light_nights_are_said(store: TrackStore) -> None:
    table = apparitions(store, CAPE, YEAR)
    saturn = table.filter(pl.col("body") == "saturn")
    assert saturn["remark"].str.contains("darker nights").all()
    mercury = table.filter(pl.col("body") == "mercury")
    assert mercury["remark"].str.contains("cannot be seen from here").any()
    unseen = table.filter(pl.col("remark").fill_null("").str.contains("cannot be seen"))
    assert unseen.select(pl.all_horizontal(pl.col(SIGHTS).is_null())).to_series().all()


def test_near_a_pole_nothing_fails_and_no_date_falls_into_the_polar_day(store: TrackStore) -> None:
    table = apparitions(store, PLATEAU, YEAR)
    months = table["first_sight_likely"].drop_nulls().str.slice(5, 2).cast(pl.Int64)
    assert months.is_between(3, 9).all()


def test_the_date_line_keeps_local_dates(store: TrackStore) -> None:
    # The same place by two clocks a day apart: dates differ by one day, or not, but never by more.
    west, east = (Site("reef", -14.0, -172.0, 3.0, zone) for zone in ("Pacific/Apia", "Pacific/Pago_Pago"))
    one, two = (apparitions(store, site, YEAR, [Body.VENUS]) for site in (west, east))
    for name in SIGHTS:
        days = (one[name].str.to_date() - two[name].str.to_date()).dt.total_days()
        assert days.drop_nulls().to_list() == [1] * days.drop_nulls().len()


def test_a_neighbouring_span_gives_the_same_apparition(store: TrackStore) -> None:
    one = apparitions(store, HILL, YEAR, [Body.JUPITER])
    two = apparitions(store, HILL, (YEAR[1], YEAR[1] + 200), [Body.JUPITER])
    shared = one.join(two, on="event_id", suffix="_again")
    assert shared.height >= 1
    for name in (*SIGHTS, "best_local", "weeks_from", "weeks_to"):
        assert shared[name].to_list() == shared[f"{name}_again"].to_list()


def test_with_optics_it_is_seen_sooner_and_faint_planets_at_all(store: TrackStore) -> None:
    eye, glass = (
        apparitions(store, HILL, YEAR, habits=Habits(aid=aid)) for aid in (Aid.NAKED_EYE, Aid.BINOCULARS)
    )
    joined = eye.join(glass, on="event_id", suffix="_glass").drop_nulls(["first_sight_likely"])
    assert (joined["first_sight_likely_glass"] <= joined["first_sight_likely"]).all()
    neptune = apparitions(store, HILL, YEAR, [Body.NEPTUNE])
    assert neptune["remark"].str.contains("cannot be seen").all()
    seen = apparitions(store, HILL, YEAR, [Body.NEPTUNE], Habits(aid=Aid.ANY))
    assert seen["first_sight_likely"].null_count() == 0


def test_the_kernels_ends_are_no_sights(store: TrackStore) -> None:
    early = apparitions(store, HILL, (np.datetime64("1550-02-01"), np.datetime64("1550-03-01")), OUTER[:3])
    assert early["remark"].str.contains("begins before the kernel").any()
    cut = early.filter(pl.col("remark").fill_null("").str.contains("begins before"))
    assert cut["first_sight_likely"].is_null().all() and cut["first_sight_earliest"].is_null().all()
    with pytest.raises(SpanError):
        apparitions(store, HILL, (np.datetime64("2700-01-01"), np.datetime64("2700-12-01")))


def test_clear_air_is_never_clearer_than_air_without_haze() -> None:
    # Rayleigh 0.1451 at sea level and ozone 0.016: Green 1992, International Comet Quarterly 14, 55.
    assert air_at(0.0, Criteria()).clear == pytest.approx(0.1811, abs=1e-4)
    high = air_at(4_000.0, Criteria())
    assert high.clear == pytest.approx(0.016 + 0.1451 * np.exp(-4_000.0 / 7_996.0), abs=1e-4)
    assert high.hazy == pytest.approx(high.usual + 0.1)


def test_the_printed_table_gives_days_around_likely_dates(store: TrackStore) -> None:
    table = apparitions(store, HILL, YEAR, [Body.MERCURY])
    words = apparitions_summary(table)
    first = table.row(0, named=True)
    likely, early, late = (
        dt.date.fromisoformat(first[f"first_sight_{which}"]) for which in ("likely", "earliest", "latest")
    )
    assert words["First sight"][0] == f"{likely} −{(likely - early).days}/+{(late - likely).days}"
    assert "cannot be seen from here" in words["What"].to_list()
    heading = apparitions_heading(table, HILL, Habits(), "DE440")
    easiest = table.filter(pl.col("ease_rank") == 1).row(0, named=True)
    assert f"Mercury is easiest in the {easiest['kind']}" in heading
