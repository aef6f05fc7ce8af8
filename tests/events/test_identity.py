"""Names of events: told by the round, not by the clock, and never twice."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import polars as pl
import pytest

from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events import identity
from wanderers.events.almanac import event_table
from wanderers.events.catalogue import Found, Query, find_events
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.events.ledger import event_ids

HOUR_DAYS = 1.0 / 24.0
DAY_KINDS = (Kind.GATHERING, Kind.RING_PLANE_CROSSING)
"""Kinds that belong to no cycle and are named by their day."""

FAR_APART = (2_305_447.5, 2_451_544.5, 2_597_641.5)  # 1600, 2000, 2400
YEARS_DAYS = 4_000.0


@pytest.fixture(scope="module", params=FAR_APART)
def found(request: pytest.FixtureRequest, store: TrackStore) -> list[Found]:
    """Everything of eleven years, in three far centuries."""
    return find_events(
        store, Query(request.param, request.param + YEARS_DAYS, frozenset(Kind), frozenset(Frame))
    )


def test_every_kind_is_among_those_compared(found: list[Found]) -> None:
    kinds = {one.batch.kind for one in found if one.batch.jd.size}
    assert set(Kind) - kinds <= {Kind.TRANSIT, Kind.RING_PLANE_CROSSING}


def margin_days(one: Batch) -> np.ndarray:
    """Days by which an event may move and keep its round: two, which is a fiftieth of Mercury's synodic turn.

    Half a day for the Moon; an hour for meetings and entries, some of which come at the edge of a round.
    """
    if one.kind in (Kind.CONJUNCTION, Kind.APPULSE, Kind.OCCULTATION, Kind.CONSTELLATION_ENTRY):
        return np.full(one.jd.size, HOUR_DAYS)
    return np.where(one.body == Body.MOON.order, 0.5, 2.0)


def test_no_round_hangs_by_a_hair(found: list[Found]) -> None:
    # No better kernel will move an event of these centuries by an hour.
    for one in found:
        if one.batch.kind in DAY_KINDS:
            continue
        for side in (-1.0, 1.0):
            moved = replace(one.batch, jd=one.batch.jd + side * margin_days(one.batch))
            rounds = identity.round_numbers(moved, ecliptic_stars())
            assert np.array_equal(rounds, one.rounds), one.batch.kind


def test_events_of_a_day_are_named_by_that_day(found: list[Found]) -> None:
    for one in found:
        if one.batch.kind in DAY_KINDS:
            assert (one.rounds == np.floor(one.batch.jd + 0.5)).all()


def test_no_name_is_given_twice(found: list[Found]) -> None:
    ids = pl.concat([event_ids(one) for one in found if one.batch.jd.size])
    assert ids.is_unique().all()


def test_names_are_of_letters_that_any_file_or_feed_can_carry(found: list[Found]) -> None:
    ids = pl.concat([event_ids(one) for one in found if one.batch.jd.size])
    assert ids.str.contains(r"^[a-z0-9+_-]+$").all()
    assert ids.str.len_chars().max() < 100


def test_names_tell_kind_frame_bodies_and_detail(store: TrackStore, found: list[Found]) -> None:
    table = event_table(store, [one for one in found if one.batch.kind in (Kind.STATION, Kind.CONJUNCTION)])
    for row in table.sample(200, seed=1).iter_rows(named=True):
        parts = [row["kind"], row["frame"], row["body"], row["other"], row["detail"]]
        start = "-".join(part for part in parts if part).lower().replace(" ", "_")
        assert row["event_id"].startswith(f"{start}-c")


def test_names_do_not_tell_whether_an_appulse_is_quasi(found: list[Found]) -> None:
    # A conjunction that a better kernel undoes must not rename the appulse beside it.
    (appulses,) = (one for one in found if one.batch.kind is Kind.APPULSE)
    assert "quasi" in {appulses.batch.details[number] for number in appulses.batch.detail}
    assert not event_ids(appulses).str.contains("quasi").any()


# ---- ordinals


def events(jd: list[float], *, other: list[int] | None = None, detail: list[int] | None = None) -> Batch:
    size = len(jd)
    return batch(
        Kind.CONJUNCTION,
        Frame.ECLIPTIC,
        np.array(jd),
        np.full(size, Body.JUPITER.order),
        other=np.array(other or [Body.SATURN.order] * size),
        detail=np.array(detail or [0] * size),
        details=("", "other"),
    )


def test_events_of_one_round_are_counted_in_order_of_time() -> None:
    one = events([30.0, 10.0, 20.0, 40.0])
    assert identity.ordinals(one, np.array([7, 7, 7, 8])).tolist() == [3, 1, 2, 1]


def test_other_bodies_and_details_are_counted_apart() -> None:
    one = events([1.0, 2.0, 3.0, 4.0], other=[6, 7, 6, 7], detail=[0, 0, 1, 0])
    assert identity.ordinals(one, np.array([5, 5, 5, 5])).tolist() == [1, 1, 1, 2]


def test_quasi_appulses_are_counted_with_the_others_and_greatest_separations_apart() -> None:
    one = replace(
        events([1.0, 2.0, 3.0, 4.0], detail=[0, 2, 1, 2]),
        kind=Kind.APPULSE,
        details=("", "quasi", "farthest"),
    )
    assert identity.ordinals(one, np.array([5, 5, 5, 5])).tolist() == [1, 1, 2, 2]


def test_nothing_has_no_numbers() -> None:
    assert identity.ordinals(events([]), np.empty(0, dtype=np.int64)).size == 0
