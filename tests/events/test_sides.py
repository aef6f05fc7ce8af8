"""On which side things stand, held against Skyfield's own positions."""

from __future__ import annotations

import numpy as np
import polars as pl

from tests.direct import Direct
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.sides import SIDE_COLUMNS, with_sides

FROM, TO = 2_459_215.5, 2_459_580.5  # 2021, TT
GREAT_CONJUNCTION = 2_459_205.0  # noon of 2020 December 21


def table(store: TrackStore, jd_from: float = FROM, jd_to: float = TO) -> pl.DataFrame:
    kinds = frozenset({Kind.CONJUNCTION, Kind.APPULSE, Kind.OPPOSITION, Kind.SEASON_POINT})
    choice = Choice(BODIES, stars_for=())
    return with_sides(store, almanac(store, Query(jd_from, jd_to, kinds, frozenset(Frame), choice)))


def test_north_is_the_larger_latitude_of_the_frame(store: TrackStore, direct: Direct) -> None:
    pairs = table(store).filter(pl.col("other").is_not_null())
    assert set(pairs["pair_side"].to_list()) >= {"north", "south"}
    for row in pairs.iter_rows(named=True):
        frame = Frame.ECLIPTIC if row["frame"] == "ecliptic" else Frame.EQUATOR
        jd = np.array([row["jd_tt"]])
        (body,), (other,) = (direct.place_deg(Body(row[name]), jd, frame)[1] for name in ("body", "other"))
        if row["pair_side"] is None:
            assert row["kind"] == "appulse" and abs(body - other) < 0.5 * row["separation_deg"] + 1e-6
        else:
            assert row["pair_side"] == ("north" if body > other else "south")


def test_east_of_the_sun_is_the_larger_longitude(store: TrackStore, direct: Direct) -> None:
    rows = table(store).filter(pl.col("elongation_deg").is_not_null(), pl.col("kind") != "opposition")
    assert rows.height > 100
    for row in rows.iter_rows(named=True):
        jd = np.array([row["jd_tt"]])
        body, sun = (direct.longitude_deg(Body(name), jd)[0] for name in (row["body"], "sun"))
        assert row["solar_side"] == ("east" if (body - sun) % 360.0 < 180.0 else "west")


def test_the_sun_has_no_side_of_itself_and_single_bodies_none_of_a_pair(store: TrackStore) -> None:
    points = table(store).filter(pl.col("kind") == "season_point")
    assert points["solar_side"].null_count() == points["pair_side"].null_count() == points.height == 4


def test_jupiter_passed_south_of_saturn_in_2020(store: TrackStore) -> None:
    # The great conjunction of 2020 December 21, Jupiter 0.1 degree south of Saturn: printed so in almanacs of
    # the year (from memory).
    near = table(store, GREAT_CONJUNCTION - 2.0, GREAT_CONJUNCTION + 2.0)
    pair = near.filter(pl.col("body") == "jupiter", pl.col("other") == "saturn")
    assert pair.height == 3
    assert pair["pair_side"].to_list() == ["south"] * 3


def test_rows_keep_their_order_whatever_it_is(store: TrackStore) -> None:
    rising = table(store)
    shuffled = rising.drop(SIDE_COLUMNS).sample(fraction=1.0, shuffle=True, seed=1)
    assert with_sides(store, shuffled).sort("jd_tt", "event_id").equals(rising.sort("jd_tt", "event_id"))


def test_an_empty_table_gets_the_columns(store: TrackStore) -> None:
    empty = with_sides(store, table(store).drop(SIDE_COLUMNS).clear())
    assert empty.height == 0
    assert {name: empty.schema[name] for name in SIDE_COLUMNS} == SIDE_COLUMNS
