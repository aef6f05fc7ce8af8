"""Retrograde seasons: marks, arcs, shapes, and what happens at the ends of a kernel."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

import numpy as np
import polars as pl
import pytest
from skyfield.jpllib import SpiceKernel

from tests.direct import Direct, wrapped_deg
from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.seasons import seasons

SPAN = (2_447_892.5, 2_462_502.5)  # 1990 to 2030
MARKS = [f"{mark}_jd_tt" for mark in schema.SEASON_MARKS]

# Measured over 1600 to 2400 by the author of the ranges with Skyfield, rounded outward: degrees moved back,
# days backwards, days from first mark to last. None where nothing is published.
RANGES = {
    "mercury": ((8.5, 17.0), (19.5, 24.5), (53.0, 58.5)),
    "venus": ((14.5, 17.0), (40.5, 43.5), (103.5, 111.5)),
    "mars": ((9.5, 20.0), (59.5, 81.5), (143.0, 215.5)),
    "jupiter": ((9.5, 10.5), (117.0, 124.5), (285.0, 300.5)),
    "saturn": ((6.5, 7.5), (133.5, 141.5), (323.0, 336.5)),
    "uranus": ((3.5, 4.5), (148.5, 155.0), None),
    "neptune": ((2.5, 3.0), (155.5, 161.0), None),
}


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return seasons(store, *SPAN, frames=tuple(Frame))


@pytest.fixture(scope="module")
def direct(kernel: Kernel) -> Iterator[Direct]:
    planets = SpiceKernel(str(kernel.path))
    yield Direct(planets)
    planets.close()


def test_columns_are_those_of_the_schema(table: pl.DataFrame) -> None:
    assert table.schema == pl.Schema(schema.SEASON_COLUMNS)
    assert set(table["body"]) == {body.value for body in PLANETS}
    assert table["season_id"].is_unique().all()


def test_marks_come_in_order(table: pl.DataFrame) -> None:
    for earlier, later in itertools.pairwise(MARKS):
        assert (table[earlier] < table[later]).all()
    assert table["retrograde_days"].equals(table[MARKS[3]] - table[MARKS[1]])


def test_instants_are_printed_twice_and_alike(table: pl.DataFrame) -> None:
    for mark in schema.SEASON_MARKS:
        printed = table[f"{mark}_utc"].str.to_datetime("%Y-%m-%dT%H:%M:%S%.fZ").dt.epoch("ms") / 86_400_000.0
        apart_s = (table[f"{mark}_jd_tt"] - 2_440_587.5 - printed) * 86_400.0
        assert apart_s.is_between(50.0, 100.0).all()  # TT - UTC, 57 to 70 s in these years


@pytest.mark.parametrize("body", RANGES)
def test_arcs_and_lengths_lie_in_the_published_ranges(table: pl.DataFrame, body: str) -> None:
    own = table.filter(body=body, frame="ecliptic")
    for name, limits in zip(("arc_deg", "retrograde_days", "threefold_days"), RANGES[body], strict=True):
        assert limits is None or own[name].is_between(*limits).all(), name


def test_stations_and_middles_are_those_of_the_almanac(store: TrackStore, table: pl.DataFrame) -> None:
    kinds = frozenset({Kind.STATION, Kind.OPPOSITION, Kind.SOLAR_CONJUNCTION})
    wider = (SPAN[0] - 400.0, SPAN[1] + 400.0)
    events = almanac(store, Query(*wider, kinds, frozenset(Frame), Choice(PLANETS, stars_for=())))
    for name, chosen in (
        (MARKS[1], events.filter(detail="retrograde")),
        (MARKS[3], events.filter(detail="direct")),
        (MARKS[2], events.filter((pl.col("kind") == "opposition") | (pl.col("detail") == "inferior"))),
    ):
        near = table.select("body", name).sort(name).join_asof(
            chosen.select("body", pl.col("jd_tt").alias("event_jd")).sort("event_jd"),
            left_on=name, right_on="event_jd", by="body", strategy="nearest", check_sortedness=False,
        )  # fmt: skip
        assert (near[name] - near["event_jd"]).abs().max() < 1e-7


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", [Body.MERCURY, Body.MARS, Body.SATURN])
def test_first_and_last_mark_have_the_longitudes_of_the_stations(
    table: pl.DataFrame, direct: Direct, body: Body, frame: Frame
) -> None:
    own = table.filter(body=body.value, frame=frame.value)
    first, retrograde, _, station, last = (own[name].to_numpy() for name in MARKS)
    for mark, turn in ((first, station), (last, retrograde)):
        apart = direct.longitude_deg(body, mark, frame) - direct.longitude_deg(body, turn, frame)
        # A hundredth of an arcsecond: a second's motion of Mercury.
        np.testing.assert_allclose(wrapped_deg(apart), 0.0, rtol=0.0, atol=1e-5)


def crosses_itself(longitude_deg: Floats, latitude_deg: Floats) -> bool:
    """Tell whether a path on the sky, flattened, has two segments that cross; every pair is tried."""
    x = np.degrees(np.unwrap(np.radians(longitude_deg)))
    x = (x - x.mean()) * np.cos(np.radians(latitude_deg.mean()))
    point = np.stack([x, latitude_deg], axis=1)
    start, way = point[:-1], np.diff(point, axis=0)

    def side(origin: Floats, along: Floats, of: Floats) -> Floats:
        line = of[None, :, :] - origin[:, None, :]
        return along[:, None, 0] * line[..., 1] - along[:, None, 1] * line[..., 0]

    one = side(start, way, point[:-1]) * side(start, way, point[1:]) < 0.0
    crossing = one & one.T
    apart = np.abs(np.subtract.outer(np.arange(len(way)), np.arange(len(way)))) > 1
    return bool((crossing & apart).any())


SHAPED = [(Body.VENUS, 2015), (Body.MARS, 2003), (Body.MARS, 2005), (Body.MARS, 2016), (Body.MARS, 2018),
          (Body.JUPITER, 2010), (Body.JUPITER, 2012), (Body.MERCURY, 2005), (Body.SATURN, 2004),
          (Body.SATURN, 2010)]  # fmt: skip


@pytest.mark.parametrize(("body", "year"), SHAPED)
def test_path_shape_is_what_the_drawn_path_shows(
    table: pl.DataFrame, direct: Direct, body: Body, year: int
) -> None:
    own = table.filter(pl.col("body") == body.value, pl.col("middle_utc").str.starts_with(str(year)))
    for row in own.filter(frame="ecliptic").iter_rows(named=True):
        jd = np.linspace(row[MARKS[0]], row[MARKS[-1]], 1500)
        crossed = crosses_itself(*direct.place_deg(body, jd))
        assert row["path_shape"] == ("loop" if crossed else "zigzag"), row["middle_utc"]


def test_both_shapes_are_among_those_compared(table: pl.DataFrame) -> None:
    shapes = {
        shape
        for body, year in SHAPED
        for shape in table.filter(
            pl.col("body") == body.value,
            pl.col("frame") == "ecliptic",
            pl.col("middle_utc").str.starts_with(str(year)),
        )["path_shape"]
    }
    assert shapes == {"loop", "zigzag"}


def test_closest_mars_of_2003_is_published(table: pl.DataFrame) -> None:
    # 2003 August 27, 55.758 million km = 0.37272 au, 25.1 arcsec, magnitude -2.9 (press, from memory).
    row = table.filter(pl.col("body") == "mars", pl.col("middle_utc").str.starts_with("2003")).row(
        0, named=True
    )
    assert row["closest_au"] == pytest.approx(0.37272, abs=1e-5)
    assert row["peak_diameter_arcsec"] == pytest.approx(25.1, abs=0.06)
    assert row["peak_magnitude"] == pytest.approx(-2.9, abs=0.06)
    assert row["constellations"] == "Aqr"


def test_adjoining_spans_share_no_season_and_lose_none(store: TrackStore, table: pl.DataFrame) -> None:
    edges = (SPAN[0], 2_450_001.0, 2_452_879.0, SPAN[1])
    parts = [seasons(store, *span) for span in itertools.pairwise(edges)]
    ids = pl.concat(parts)["season_id"]
    assert sorted(ids) == sorted(table.filter(frame="ecliptic")["season_id"])


def test_marks_beyond_the_kernel_are_null_and_never_guessed(store: TrackStore) -> None:
    low, high = store.span_jd
    early, late = seasons(store, low, low + 800.0), seasons(store, high - 800.0, high)
    for edge, mark in ((early, "first_pass_start"), (late, "third_pass_end")):
        unknown = edge.filter(pl.col(f"{mark}_jd_tt").is_null())
        assert unknown.height > 0
        assert unknown[f"{mark}_utc"].null_count() == unknown.height
        assert unknown["threefold_days"].null_count() == unknown.height
        assert edge[f"{mark}_jd_tt"].drop_nulls().is_between(low, high).all()
    for name in ("station_retrograde_jd_tt", "middle_jd_tt", "station_direct_jd_tt"):
        assert early[name].null_count() == late[name].null_count() == 0


def test_touching_adds_the_seasons_that_reach_in(store: TrackStore, table: pl.DataFrame) -> None:
    row = table.filter(body="mars", frame="ecliptic").row(3, named=True)
    day = row[MARKS[2]] + 5.0  # after the middle, before the direct station
    asked = {"bodies": (Body.MARS,)}
    assert seasons(store, day, day + 1.0, **asked).height == 0
    assert seasons(store, day, day + 1.0, touching=True, **asked)["season_id"].to_list() == [row["season_id"]]
