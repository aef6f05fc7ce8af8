"""The event table as a whole: what must hold whatever span, order, limit or kernel is asked."""

from __future__ import annotations

import itertools
from dataclasses import replace

import polars as pl
import pytest
from polars.testing import assert_frame_equal

from tests.ephemeris.kernel_files import DE421
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits

SPAN = (2_447_892.5, 2_455_197.5)  # 1990 to 2010
EDGES = (2_447_892.5, 2_448_700.25, 2_450_123.0, 2_452_000.5, 2_453_371.75, 2_455_197.5)
SAME_INSTANT_DAYS = 1e-7

ALL = Query(*SPAN, frames=frozenset(Frame))

APART_S = {
    "station": 6.0,
    "conjunction": 60.0,
    "appulse": 60.0,
    "opposition": 1.0,
    "quadrature": 1.0,
    "solar_conjunction": 1.0,
    "greatest_elongation": 0.1,
    "greatest_brilliancy": 0.1,
    "transit": 0.1,
}
"""Seconds, somewhat above what DE440 and DE421 were measured to differ by in 1990 to 2010: 44 s for
conjunctions and 35 s for appulses of Uranus with Neptune, 0.02 s for greatest elongations."""


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return almanac(store, ALL)


def test_columns_are_those_of_the_schema(table: pl.DataFrame) -> None:
    assert table.schema == pl.Schema(schema.EVENT_COLUMNS)
    assert set(table["kind"]) == {kind.value for kind in Kind}


def test_rows_come_in_order_of_time_inside_the_span(table: pl.DataFrame) -> None:
    assert table["jd_tt"].is_sorted()
    assert table["jd_tt"].is_between(*SPAN, closed="left").all()


def test_event_ids_are_unique(table: pl.DataFrame) -> None:
    assert table["event_id"].is_unique().all()


def test_pairs_are_written_in_the_order_of_bodies(table: pl.DataFrame) -> None:
    order = {body.value: body.order for body in Body}
    pairs = table.filter(pl.col("other").is_in(list(order)), pl.col("kind") != "transit")
    first, second = (pairs[name].replace_strict(order) for name in ("body", "other"))
    assert (first < second).all()


def test_separation_equal_to_what_positions_of_one_frame_give(table: pl.DataFrame) -> None:
    # In a conjunction the two differ in the other coordinate alone: never less than the latitudes' gap.
    assert table.filter(kind="conjunction")["separation_deg"].is_between(0.0, 180.0).all()
    assert table.filter(kind="appulse")["separation_deg"].max() < 10.0


def test_parts_of_a_span_put_together_are_the_whole(store: TrackStore, table: pl.DataFrame) -> None:
    parts = [almanac(store, replace(ALL, jd_from=low, jd_to=high)) for low, high in itertools.pairwise(EDGES)]
    joined = pl.concat(parts)
    named = ["event_id", "kind", "detail", "body", "other", "frame", "meeting_id", "meeting_part"]
    assert_frame_equal(joined.sort("event_id").select(named), table.sort("event_id").select(named))
    both = joined.join(table, on="event_id", suffix="_whole")
    assert (both["jd_tt"] - both["jd_tt_whole"]).abs().max() < SAME_INSTANT_DAYS


def test_a_span_that_begins_at_an_event_holds_it_and_one_that_ends_there_does_not(
    store: TrackStore, table: pl.DataFrame
) -> None:
    event = table.filter(kind="opposition", body="mars").row(1, named=True)
    asked = replace(ALL, kinds=frozenset({Kind.OPPOSITION}), jd_from=event["jd_tt"] - 1e-6)
    assert event["event_id"] in almanac(store, asked)["event_id"]
    before = replace(asked, jd_from=SPAN[0], jd_to=event["jd_tt"] - 1e-6)
    assert event["event_id"] not in almanac(store, before)["event_id"]


def test_asking_for_some_kinds_gives_the_same_events_as_asking_for_all(
    store: TrackStore, table: pl.DataFrame
) -> None:
    some = frozenset({Kind.STATION, Kind.APPULSE, Kind.TRANSIT, Kind.NODE, Kind.CONSTELLATION_ENTRY})
    alone = almanac(store, replace(ALL, kinds=some))
    same = table.filter(pl.col("kind").is_in([kind.value for kind in some]))
    assert_frame_equal(alone.sort("event_id"), same.sort("event_id"))


def test_asking_for_one_body_gives_the_same_names(store: TrackStore, table: pl.DataFrame) -> None:
    alone = almanac(store, replace(ALL, choice=Choice((Body.MARS,)), kinds=ALL.kinds - {Kind.GATHERING}))
    met = (pl.col("body") == "mars") | (pl.col("other") == "mars")
    same = table.filter(met, pl.col("kind") != "gathering")
    columns = ["event_id", "meeting_id", "meeting_part", "jd_tt"]
    assert_frame_equal(alone.sort("event_id").select(columns), same.sort("event_id").select(columns))


@pytest.mark.parametrize("limit", [1.0, 30.0])
def test_limits_change_which_events_are_listed_and_not_their_names(
    store: TrackStore, table: pl.DataFrame, limit: float
) -> None:
    met = frozenset({Kind.CONJUNCTION, Kind.APPULSE})
    limits = Limits(limit, limit, limit, limit)
    other = almanac(store, replace(ALL, kinds=met, choice=Choice(limits=limits)))
    assert other.filter(kind="appulse")["separation_deg"].max() < limit
    both = other.join(table, on="event_id", suffix="_usual")
    least = min(other.filter(kind="appulse").height, table.filter(kind="appulse").height)
    assert both.filter(kind="appulse").height >= 0.8 * least
    for name in ("jd_tt", "meeting_id", "meeting_part", "detail"):
        assert both[name].equals(both[f"{name}_usual"], null_equal=True)
    conjunctions = [one.filter(kind="conjunction")["event_id"] for one in (other, table)]
    assert set(conjunctions[0]) == set(conjunctions[1])


def test_another_kernel_gives_the_same_events_under_the_same_names(
    store: TrackStore, table: pl.DataFrame
) -> None:
    other = TrackStore(inspect_kernel(DE421, store.folder), store.folder)
    theirs = almanac(other, replace(ALL, kinds=frozenset(Kind(name) for name in APART_S)))
    ours = table.filter(pl.col("kind").is_in(list(APART_S)))
    assert set(theirs["event_id"]) == set(ours["event_id"])
    both = ours.join(theirs, on="event_id", suffix="_theirs").with_columns(
        apart_s=(pl.col("jd_tt") - pl.col("jd_tt_theirs")).abs() * 86_400.0,
        allowed_s=pl.col("kind").replace_strict(APART_S),
    )
    assert both.filter(pl.col("apart_s") > pl.col("allowed_s")).is_empty()
    assert both["meeting_part"].equals(both["meeting_part_theirs"], null_equal=True)


def test_nothing_asked_gives_an_empty_table_with_all_columns(store: TrackStore) -> None:
    empty = almanac(store, replace(ALL, kinds=frozenset({Kind.TRANSIT}), jd_to=SPAN[0] + 1.0))
    assert empty.height == 0
    assert empty.schema == pl.Schema(schema.EVENT_COLUMNS)
