"""What is asked decides what is searched, but never what an event is called or when it happens."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

SPAN = (2_449_000.5, 2_449_900.5)
CHOICE = Choice(stars_for=PLANETS)
FRAMED = [Kind.STATION.value, Kind.CONJUNCTION.value]


@pytest.fixture(scope="module")
def whole(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*SPAN, frames=frozenset(Frame), choice=CHOICE))


@pytest.mark.parametrize(
    ("kinds", "frames"),
    [
        ({Kind.CONJUNCTION}, {Frame.ECLIPTIC}),
        ({Kind.CONJUNCTION}, {Frame.EQUATOR}),
        ({Kind.CONJUNCTION}, set(Frame)),
        ({Kind.CONJUNCTION, Kind.STATION}, {Frame.ECLIPTIC, Frame.J2000}),
        ({Kind.CONJUNCTION, Kind.OCCULTATION}, {Frame.ECLIPTIC}),
        ({Kind.APPULSE}, {Frame.ECLIPTIC}),
        ({Kind.STATION}, {Frame.J2000}),
        ({Kind.PERIHELION, Kind.GATHERING}, set(Frame)),
    ],
)
def test_a_part_of_a_query_gives_that_part_of_its_events(
    store: TrackStore, whole: pl.DataFrame, kinds: set[Kind], frames: set[Frame]
) -> None:
    part = almanac(store, Query(*SPAN, frozenset(kinds), frozenset(frames), CHOICE))
    chosen = pl.col("kind").is_in([kind.value for kind in kinds])
    in_frame = ~pl.col("kind").is_in(FRAMED) | pl.col("frame").is_in([frame.value for frame in frames])
    expected = whole.filter(chosen & in_frame)
    assert part.height > 0
    assert_frame_equal(part.drop("jd_tt"), expected.drop("jd_tt"))
    np.testing.assert_allclose(part["jd_tt"].to_numpy(), expected["jd_tt"].to_numpy(), rtol=0, atol=1e-8)


def test_bodies_left_out_change_nothing_for_the_others(store: TrackStore, whole: pl.DataFrame) -> None:
    some = PLANETS[:4]
    names = [body.value for body in some]
    query = Query(*SPAN, frozenset({Kind.CONJUNCTION}), choice=Choice(some, stars_for=()))
    both = pl.col("body").is_in(names) & pl.col("other").is_in(names)
    expected = whole.filter(both & (pl.col("kind") == "conjunction") & (pl.col("frame") == "ecliptic"))
    assert_frame_equal(almanac(store, query), expected)
