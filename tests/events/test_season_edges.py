"""Seasons at the ends of a kernel, seen from a longer one: known marks are right, unknown ones null."""

from __future__ import annotations

import itertools

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

from wanderers import schema
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.seasons import seasons

EDGE_DAYS = 1800.0  # a season of Pluto takes up to 1683 days from its first mark to its last
MARKS = [f"{mark}_jd_tt" for mark in schema.SEASON_MARKS]

APART_S = {"uranus": 15.0, "neptune": 20.0, "pluto": 150.0}
"""Seconds, twice what DE421 and DE440 were measured to differ by at the ends of DE421; others differ by less
than a second. A slow planet takes 28 s for a hundredth of an arcsecond."""


@pytest.fixture(scope="module", params=["start", "end"])
def both(request: pytest.FixtureRequest, store: TrackStore, de421_store: TrackStore) -> pl.DataFrame:
    """The seasons near one end of DE421, by DE421 and by DE440, which reaches centuries further."""
    low, high = de421_store.span_jd
    span = (low, low + EDGE_DAYS) if request.param == "start" else (high - EDGE_DAYS, high)
    short, long = (seasons(one, *span, frames=tuple(Frame)) for one in (de421_store, store))
    return short.join(long, on="season_id", suffix="_long")


def test_every_planet_has_seasons_at_the_ends_of_a_kernel(both: pl.DataFrame) -> None:
    assert both["season_id"].is_unique().all()
    assert set(both["body"]) == {body.value for body in PLANETS}
    assert both.height > 40


@pytest.mark.parametrize("mark", MARKS)
def test_a_mark_is_the_longer_kernels_or_null(both: pl.DataFrame, mark: str) -> None:
    apart = both.select(
        "season_id",
        apart=(pl.col(mark) - pl.col(f"{mark}_long")).abs() * 86_400.0,
        allowed=pl.col("body").replace_strict(APART_S, default=1.0),
    )
    wrong = apart.filter(pl.col("apart") > pl.col("allowed"))
    assert wrong.is_empty(), wrong


def test_a_season_without_a_mark_has_no_threefold_length(both: pl.DataFrame) -> None:
    unknown = both[MARKS[0]].is_null() | both[MARKS[-1]].is_null()
    assert (both["threefold_days"].is_null() == unknown).all()


def test_the_longer_kernel_knows_every_mark(both: pl.DataFrame) -> None:
    assert all(both[f"{mark}_long"].null_count() == 0 for mark in MARKS)


def test_a_season_is_the_same_whatever_span_it_was_asked_in(store: TrackStore) -> None:
    years = 2_469_807.5 + 365.25 * np.arange(6)  # 2050 to 2055
    whole = seasons(store, years[0], years[-1], frames=tuple(Frame))
    parts = pl.concat([seasons(store, *span, frames=tuple(Frame)) for span in itertools.pairwise(years)])
    assert_frame_equal(
        parts.sort("season_id"), whole.sort("season_id"), check_exact=False, rel_tol=0.0, abs_tol=2e-9
    )
