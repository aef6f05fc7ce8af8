"""Angles to the Sun at the instants found, by Skyfield; phases and seasons by its own search."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from skyfield import almanac as skyfield_almanac

from tests.direct import Direct, wrapped_deg
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import INNER, OUTER, Body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

SPAN = (2_457_023.5, 2_460_676.5)  # 2015 to 2025
SECOND_DAYS = 1.0 / 86_400.0
KINDS = frozenset(
    {Kind.OPPOSITION, Kind.SOLAR_CONJUNCTION, Kind.QUADRATURE, Kind.MOON_PHASE, Kind.SEASON_POINT}
)


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*SPAN, KINDS, choice=Choice(stars_for=())))


def ahead_deg(direct: Direct, body: Body, jd: Floats) -> Floats:
    """By how much a body's apparent longitude leads the Sun's, [-180, 180)."""
    return wrapped_deg(direct.longitude_deg(body, jd) - direct.longitude_deg(Body.SUN, jd))


def assert_passes(direct: Direct, body: Body, jd: Floats, angle_deg: Floats | float) -> None:
    """The angle is passed within a second of each instant."""
    sides = [wrapped_deg(ahead_deg(direct, body, jd + s * SECOND_DAYS) - angle_deg) for s in (-1.0, 1.0)]
    assert (np.sign(sides[0]) == -np.sign(sides[1])).all()
    assert np.abs(sides).max() < 1e-3


@pytest.mark.parametrize("body", OUTER)
def test_oppositions_are_half_a_turn_from_the_sun(direct: Direct, table: pl.DataFrame, body: Body) -> None:
    jd = table.filter(kind="opposition", body=body.value)["jd_tt"].to_numpy()
    assert jd.size >= 4
    assert_passes(direct, body, jd, 180.0)


@pytest.mark.parametrize("body", OUTER)
def test_quadratures_are_a_right_angle_east_or_west(direct: Direct, table: pl.DataFrame, body: Body) -> None:
    own = table.filter(kind="quadrature", body=body.value)
    assert own.height >= 8
    angle = np.where(own["detail"].to_numpy() == "east", 90.0, -90.0)
    assert_passes(direct, body, own["jd_tt"].to_numpy(), angle)


@pytest.mark.parametrize("body", [*INNER, *OUTER])
def test_conjunctions_have_the_suns_longitude(direct: Direct, table: pl.DataFrame, body: Body) -> None:
    jd = table.filter(kind="solar_conjunction", body=body.value)["jd_tt"].to_numpy()
    assert jd.size >= 4
    assert_passes(direct, body, jd, 0.0)


@pytest.mark.parametrize("body", INNER)
def test_at_inferior_conjunction_the_planet_is_nearer_than_the_sun(
    direct: Direct, table: pl.DataFrame, body: Body
) -> None:
    own = table.filter(kind="solar_conjunction", body=body.value)
    jd = own["jd_tt"].to_numpy()
    nearer = direct.distance_km(body, jd) < direct.distance_km(Body.SUN, jd)
    assert own["detail"].to_list() == ["inferior" if one else "superior" for one in nearer]


def test_inner_planets_have_neither_oppositions_nor_quadratures(table: pl.DataFrame) -> None:
    outer = {body.value for body in OUTER}
    assert set(table.filter(pl.col("kind").is_in(["opposition", "quadrature"]))["body"]) == outer


def test_phases_are_skyfields_own(direct: Direct, table: pl.DataFrame) -> None:
    phases = skyfield_almanac.moon_phases(direct.planets)
    times, numbers = skyfield_almanac.find_discrete(*direct.time(np.array(SPAN)), phases)
    own = table.filter(kind="moon_phase")
    words = ["new", "first_quarter", "full", "last_quarter"]
    assert own["detail"].to_list() == [words[number] for number in numbers]
    # Skyfield searches to a millisecond; the Moon takes 0.1 s for what Jupiter's deflection changes.
    np.testing.assert_allclose(own["jd_tt"], times.tt, rtol=0.0, atol=0.1 * SECOND_DAYS)


def test_seasons_are_skyfields_own(direct: Direct, table: pl.DataFrame) -> None:
    seasons = skyfield_almanac.seasons(direct.planets)
    times, numbers = skyfield_almanac.find_discrete(*direct.time(np.array(SPAN)), seasons)
    own = table.filter(kind="season_point")
    words = ["equinox_march", "solstice_june", "equinox_september", "solstice_december"]
    assert own["detail"].to_list() == [words[number] for number in numbers]
    # Skyfield lets the Earth and Jupiter bend the Sun's light: 0.5 milliarcseconds, 12 ms.
    np.testing.assert_allclose(own["jd_tt"], times.tt, rtol=0.0, atol=0.1 * SECOND_DAYS)


def test_events_concern_the_body_and_not_the_sun(table: pl.DataFrame) -> None:
    assert set(table.filter(pl.col("kind") != "season_point")["body"]).isdisjoint({"sun"})
    assert set(table.filter(kind="season_point")["body"]) == {"sun"}
    assert table["other"].null_count() == table.height
    assert set(table["frame"]) == {"ecliptic"}
