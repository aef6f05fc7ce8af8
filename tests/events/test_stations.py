"""Stations and the Sun's aspects: how they must follow each other, whatever their instants."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

import numpy as np
import polars as pl
import pytest
from skyfield.jpllib import SpiceKernel

from tests.direct import Direct, wrapped_deg
from wanderers.ephemeris.bodies import INNER, OUTER, PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

SPAN = (2_447_892.5, 2_455_197.5)  # 1990 to 2010
KINDS = frozenset(
    {
        Kind.STATION,
        Kind.OPPOSITION,
        Kind.SOLAR_CONJUNCTION,
        Kind.QUADRATURE,
        Kind.GREATEST_ELONGATION,
        Kind.PERIGEE,
        Kind.APOGEE,
        Kind.GREATEST_BRILLIANCY,
        Kind.NODE,
    }
)


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*SPAN, KINDS, frozenset(Frame), Choice(PLANETS, stars_for=())))


@pytest.fixture(scope="module")
def direct(kernel: Kernel) -> Iterator[Direct]:
    planets = SpiceKernel(str(kernel.path))
    yield Direct(planets)
    planets.close()


def alternates(words: list[str]) -> bool:
    return all(one != two for one, two in itertools.pairwise(words))


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", PLANETS)
def test_stations_alternate(table: pl.DataFrame, body: str, frame: str) -> None:
    own = table.filter(kind="station", body=body, frame=frame).sort("jd_tt")
    assert set(own["detail"]) == {"retrograde", "direct"}
    assert alternates(own["detail"].to_list())


@pytest.mark.parametrize("body", PLANETS)
def test_every_retrogradation_holds_one_middle(table: pl.DataFrame, body: str) -> None:
    # The Earth passes an outer planet, or is passed by an inner one, once a loop (common practice).
    own = table.filter(kind="station", body=body, frame="ecliptic").sort("jd_tt")
    middles = table.filter(
        (pl.col("body") == body) & ((pl.col("kind") == "opposition") | (pl.col("detail") == "inferior"))
    )["jd_tt"].to_numpy()
    starts = own.filter(detail="retrograde")["jd_tt"].to_numpy()
    ends = own.filter(detail="direct")["jd_tt"].to_numpy()
    ends = ends[ends > starts[0]]
    starts = starts[: ends.size]
    held = [int(((middles > low) & (middles < high)).sum()) for low, high in zip(starts, ends, strict=True)]
    assert held == [1] * len(held)
    between = (middles > starts[0]) & (middles < ends[-1])
    assert int(between.sum()) == len(held)


@pytest.mark.parametrize("body", OUTER)
def test_opposition_and_conjunction_of_outer_planets_alternate(table: pl.DataFrame, body: str) -> None:
    own = table.filter(pl.col("body") == body, pl.col("kind").is_in(["opposition", "solar_conjunction"]))
    assert alternates(own.sort("jd_tt")["kind"].to_list())
    assert set(own.filter(kind="solar_conjunction")["detail"]) == {None}


@pytest.mark.parametrize("body", INNER)
def test_inferior_and_superior_conjunctions_alternate(table: pl.DataFrame, body: str) -> None:
    own = table.filter(kind="solar_conjunction", body=body).sort("jd_tt")
    assert alternates(own["detail"].to_list())


@pytest.mark.parametrize("body", INNER)
def test_greatest_elongations_stand_east_before_inferior_conjunction(table: pl.DataFrame, body: str) -> None:
    own = table.filter(
        (pl.col("body") == body)
        & ((pl.col("kind") == "greatest_elongation") | (pl.col("detail") == "inferior"))
    ).sort("jd_tt")
    # East of the Sun is the evening side: an inner planet passes from there to the morning side.
    words = own["detail"].to_list()
    first = words.index("east")
    cycle = words[first:]
    assert all(word == ("east", "inferior", "west")[place % 3] for place, word in enumerate(cycle))


@pytest.mark.parametrize("body", OUTER)
def test_quadratures_alternate(table: pl.DataFrame, body: str) -> None:
    assert alternates(table.filter(kind="quadrature", body=body).sort("jd_tt")["detail"].to_list())


@pytest.mark.parametrize("body", PLANETS)
def test_nodes_alternate(table: pl.DataFrame, body: str) -> None:
    assert alternates(table.filter(kind="node", body=body).sort("jd_tt")["detail"].to_list())


@pytest.mark.parametrize("body", PLANETS)
def test_perigees_and_apogees_alternate(table: pl.DataFrame, body: str) -> None:
    own = table.filter(pl.col("body") == body, pl.col("kind").is_in(["perigee", "apogee"]))
    assert alternates(own.sort("jd_tt")["kind"].to_list())


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", ["mercury", "mars", "saturn"])
def test_longitude_turns_at_a_station(table: pl.DataFrame, direct: Direct, body: str, frame: Frame) -> None:
    # Skyfield's own longitudes an eighth of a day to both sides lie on the one side of the station's.
    own = table.filter(kind="station", body=body, frame=frame.value)
    jd = own["jd_tt"].to_numpy()
    (planet,) = (one for one in PLANETS if one == body)
    at, before, after = (direct.longitude_deg(planet, jd + days, frame) for days in (0.0, -0.125, 0.125))
    sign = np.where(own["detail"].to_numpy() == "retrograde", 1.0, -1.0)
    assert (sign * wrapped_deg(at - before) > 0.0).all()
    assert (sign * wrapped_deg(at - after) > 0.0).all()


def test_venus_is_brightest_between_elongation_and_inferior_conjunction(table: pl.DataFrame) -> None:
    venus = table.filter(body="venus").sort("jd_tt")
    brightest = venus.filter(kind="greatest_brilliancy")["jd_tt"].to_numpy()
    inferior = venus.filter(detail="inferior")["jd_tt"].to_numpy()
    east, west = (
        venus.filter(kind="greatest_elongation", detail=side)["jd_tt"].to_numpy() for side in ("east", "west")
    )
    near = inferior[np.abs(brightest[:, None] - inferior).argmin(axis=1)]
    assert (np.abs(brightest - near) < 60.0).all()
    for jd, middle in zip(brightest, near, strict=True):
        edge = (
            east[east < middle].max(initial=-np.inf)
            if jd < middle
            else west[west > middle].min(initial=np.inf)
        )
        assert abs(jd - middle) < abs(edge - middle)
