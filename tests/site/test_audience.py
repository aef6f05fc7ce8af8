"""Events chosen for an audience: what each limit takes away, and what is left."""

from __future__ import annotations

import datetime as dt

import polars as pl
import pytest
from polars.testing import assert_frame_equal

from tests.site.places import HILL, RIDGE
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.site.almanac import seen_from_site
from wanderers.site.audience import (
    Audience,
    Removed,
    chosen_by_figures,
    chosen_from_site,
    removed_words,
)
from wanderers.site.hours import Opening
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
    store: TrackStore, events: pl.DataFrame, figures_of_2027: pl.DataFrame
) -> None:
    bright, far = Audience(brighter=1.5), Audience(least_elongation_deg=25.0)
    both, _ = chosen_by_figures(store, events, Audience(brighter=1.5, least_elongation_deg=25.0))
    for first, second in ((bright, far), (far, bright)):
        once, _ = chosen_by_figures(store, events, first)
        twice, _ = chosen_by_figures(store, once, second)
        assert_frame_equal(twice, both)
    told = figures_of_2027.filter(pl.col("event_id").is_in(both["event_id"].implode()))
    assert both.height == told.height > 20
    assert told["faintest_magnitude"].max() <= 1.5  # type: ignore[operator]
    assert told["least_elongation_deg"].min() >= 25.0  # type: ignore[operator]


def test_what_nobody_knows_the_magnitude_of_is_not_called_bright(
    store: TrackStore, figures_of_2027: pl.DataFrame
) -> None:
    unknown = figures_of_2027.filter(pl.col("faintest_magnitude").is_null())
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
