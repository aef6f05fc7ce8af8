"""The list of what a site can watch: one line a meeting, by aid, in time, in words that fit the clock."""

from __future__ import annotations

import datetime as dt
from typing import Any
from zoneinfo import ZoneInfo

import polars as pl
import pytest

from tests.site.places import CAPE, HILL, RIDGE
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.report.site_list import GROUPS, SIGHTS, Sight, SightGroup, one_a_meeting, sight_groups
from wanderers.site.almanac import seen_from_site
from wanderers.site.places import Site

DAYS = "Monday Tuesday Wednesday Thursday Friday Saturday Sunday".split()
BODY_NAMES = [body.value for body in BODIES]


@pytest.fixture(scope="module")
def events(store: TrackStore) -> pl.DataFrame:
    """Three months with stars, over a change of the clocks."""
    return almanac(store, Query(parse_date("2027-02-01"), parse_date("2027-05-01")))


@pytest.fixture(scope="module", params=[HILL, RIDGE, CAPE], ids=lambda site: site.name)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="module")
def seen(store: TrackStore, events: pl.DataFrame, site: Site) -> pl.DataFrame:
    return seen_from_site(store, site, events)


@pytest.fixture(scope="module")
def groups(seen: pl.DataFrame) -> tuple[SightGroup, ...]:
    return sight_groups(seen)


@pytest.fixture(scope="module")
def rows(seen: pl.DataFrame) -> dict[str, dict[str, Any]]:
    return {row["event_id"]: row for row in seen.iter_rows(named=True)}


def sights(groups: tuple[SightGroup, ...]) -> list[Sight]:
    return [sight for group in groups for sight in group.sights]


def of_bodies(row: dict[str, Any]) -> bool:
    return row["other"] is None or row["other"] in BODY_NAMES


def test_every_meeting_stands_in_one_line(groups: tuple[SightGroup, ...], seen: pl.DataFrame) -> None:
    wanted = {
        row["meeting_id"] or row["event_id"]
        for row in seen.iter_rows(named=True)
        if row["kind"] in {kind.value for kind in SIGHTS} and of_bodies(row)
    }
    by_id = {row["event_id"]: row["meeting_id"] or row["event_id"] for row in seen.iter_rows(named=True)}
    listed = [by_id[sight.event_id] for sight in sights(groups)]
    assert len(listed) == len(set(listed)) > 20
    assert set(listed) == wanted


def test_of_a_meeting_the_closest_moment_stands_for_it(seen: pl.DataFrame) -> None:
    chosen = one_a_meeting(seen)
    assert chosen["jd_tt"].is_sorted() and chosen.columns == seen.columns
    several = 0
    for row in chosen.drop_nulls("meeting_id").iter_rows(named=True):
        parts = seen.filter(pl.col("meeting_id") == row["meeting_id"])
        appulses = parts.filter(pl.col("kind") == "appulse")
        several += parts.height > 1
        if appulses.height:
            assert row["kind"] == "appulse"
            assert row["separation_deg"] == appulses["separation_deg"].min()
        else:
            assert row["separation_deg"] == parts["separation_deg"].min()
    assert several > 10


def test_events_without_a_meeting_all_stay() -> None:
    table = pl.DataFrame(
        {
            "event_id": ["a", "b", "c"],
            "meeting_id": [None, None, None],
            "kind": ["opposition"] * 3,
            "separation_deg": [None, 2.0, 1.0],
            "jd_tt": [3.0, 1.0, 2.0],
        },
        schema={
            "event_id": pl.String,
            "meeting_id": pl.String,
            "kind": pl.String,
            "separation_deg": pl.Float64,
            "jd_tt": pl.Float64,
        },
    )
    assert one_a_meeting(table)["event_id"].to_list() == ["b", "c", "a"]


def test_groups_stand_from_easy_to_unseen_each_by_its_verdict(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]]
) -> None:
    titles = [title for _, title in GROUPS]
    verdicts = {title: verdict.value for verdict, title in GROUPS}
    assert [verdict.value for verdict, _ in GROUPS] == ["naked_eye", "binoculars", "telescope", "not_visible"]
    found = [group.title for group in groups]
    assert found == [title for title in titles if title in found] and len(found) >= 2
    for group in groups:
        assert group.sights
        assert {rows[sight.event_id]["verdict"] for sight in group.sights} == {verdicts[group.title]}


def test_within_a_group_lines_stand_in_order_of_time(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]]
) -> None:
    for group in groups:
        moments = [rows[sight.event_id]["best_utc"] or rows[sight.event_id]["utc"] for sight in group.sights]
        assert moments == sorted(moments)


def test_days_and_hours_are_those_of_the_clock(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]], site: Site
) -> None:
    nights = 0
    for sight in sights(groups):
        row = rows[sight.event_id]
        if row["verdict"] == "not_visible":
            assert (sight.hours, sight.best, sight.where) == ("", "", "")
            date = local(row["utc"], site, dt.timedelta()).date()
            assert sight.day == f"{DAYS[date.weekday()]} {date}"
            continue
        start, best, end = (
            local(row[f"{name}_utc"], site) for name in ("window_start", "best", "window_end")
        )
        assert sight.hours == f"{start:%H:%M}–{end:%H:%M}"
        assert sight.best == f"{best:%H:%M}"
        assert sight.where == f"{row['altitude_deg']:.0f}° {row['compass']}"
        over_midnight = start.date() != end.date()
        nights += over_midnight
        assert sight.day == f"{'night after ' * over_midnight}{DAYS[start.weekday()]} {start.date()}"
    assert nights > 0


def local(utc: str, site: Site, ahead: dt.timedelta = dt.timedelta(seconds=30)) -> dt.datetime:
    """An instant by the site's clock, to the nearest minute."""
    return (dt.datetime.fromisoformat(utc) + ahead).astimezone(ZoneInfo(site.zone))


def test_the_instant_is_told_to_the_nearest_minute_of_its_day(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]], site: Site
) -> None:
    rounded_up = 0
    for sight in sights(groups):
        exact = local(rows[sight.event_id]["utc"], site, dt.timedelta())
        told = dt.datetime.fromisoformat(sight.instant).replace(tzinfo=exact.tzinfo, fold=exact.fold)
        assert abs((told - exact).total_seconds()) <= 30.5 or f"{exact:%H:%M}" == "23:59"
        assert told.date() == exact.date()
        rounded_up += told > exact
    assert rounded_up > 0


def test_how_it_shows_opens_with_the_reason_and_ends_in_full_stops(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]]
) -> None:
    placed = 0
    for sight in sights(groups):
        row = rows[sight.event_id]
        reason = row["verdict_reason"]
        assert sight.how.startswith(f"{reason[0].upper()}{reason[1:]}.")
        assert sight.how.endswith(".") and ".." not in sight.how and "None" not in sight.how
        if row["verdict"] != "not_visible" and row["seen_placement"]:
            assert f"is then {row['seen_separation_deg']:.1f} degrees {row['seen_placement']}" in sight.how
            assert "of Moon" not in sight.how and "above Moon" not in sight.how
            placed += 1
        else:
            assert "is then" not in sight.how
    assert placed > 3


@pytest.mark.parametrize(
    ("told", "is_shown"),
    [
        ("hidden from 19:04 to 20:11 local time, behind the dark limb first", True),
        ("partly on the Sun's disc as it rises", True),
        ("on the Sun's disc from 07:41 to sunset", True),
        ("passes 12 arcminutes north of the Moon's limb", False),
    ],
)
def test_what_becomes_of_discs_is_told(seen: pl.DataFrame, told: str, is_shown: bool) -> None:
    some = seen.filter(pl.col("kind") == "appulse", pl.col("other").is_in(BODY_NAMES))
    listed = sights(sight_groups(some.with_columns(circumstances=pl.lit(told))))
    assert listed
    for sight in listed:
        assert sight.how.endswith(f" {told[0].upper()}{told[1:]}.") is is_shown


def test_cautions_are_kept(groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]]) -> None:
    near = 0
    for sight in sights(groups):
        text = rows[sight.event_id]["caution"]
        assert sight.caution == (f"CAUTION: {text}." if text else "")
        near += bool(text)
    assert near > 0


def test_stars_and_lesser_kinds_stay_in_the_whole_table(
    groups: tuple[SightGroup, ...], rows: dict[str, dict[str, Any]]
) -> None:
    kinds = {rows[sight.event_id]["kind"] for sight in sights(groups)}
    assert kinds <= {kind.value for kind in SIGHTS}
    assert not kinds & {"station", "node", "constellation_entry", "moon_phase", "perigee"}
    assert all(of_bodies(rows[sight.event_id]) for sight in sights(groups))


def test_no_events_give_no_groups(seen: pl.DataFrame) -> None:
    assert sight_groups(seen.clear()) == ()
