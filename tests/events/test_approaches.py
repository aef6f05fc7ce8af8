"""Least and greatest separations: appulses, greatest elongations, and which appulses are quasi."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from skyfield.api import Star

from tests.direct import SUN_ALONE, Direct, angle_rad, wrapped_deg
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, INNER, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits

SPAN = (2_457_023.5, 2_460_676.5)  # 2015 to 2025
HOUR_DAYS = 1.0 / 24.0


@pytest.fixture(scope="module")
def appulses(store: TrackStore) -> pl.DataFrame:
    query = Query(*SPAN, frozenset({Kind.APPULSE}), choice=Choice(stars_for=()))
    return almanac(store, query)


@pytest.fixture(scope="module")
def elongations(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*SPAN, frozenset({Kind.GREATEST_ELONGATION})))


def separations(direct: Direct, table: pl.DataFrame, days: float) -> Floats:
    """Separation of every event's pair so long after it, degrees."""
    out = np.empty(table.height)
    for (one, two), rows in table.with_row_index().group_by("body", "other"):
        jd = rows["jd_tt"].to_numpy() + days
        out[rows["index"].to_numpy()] = direct.separation_deg(Body(one), Body(two), jd)
    return out


def test_separation_is_skyfields(direct: Direct, appulses: pl.DataFrame) -> None:
    found = appulses["separation_deg"].to_numpy()
    np.testing.assert_allclose(separations(direct, appulses, 0.0), found, atol=2e-8)


def test_separation_is_least_at_an_appulse(direct: Direct, appulses: pl.DataFrame) -> None:
    # An hour (for slow pairs a day) before and after it is greater, within the second that is promised.
    least = separations(direct, appulses, 0.0)
    slow = appulses["body"].is_in([body.value for body in BODIES[5:]]).to_numpy()
    for side in (-1.0, 1.0):
        soon, later = (separations(direct, appulses, side * days) for days in (HOUR_DAYS, 1.0))
        assert (np.where(slow, later, soon) > least).all()


def test_square_of_the_separation_turns_within_the_promised_second(
    direct: Direct, appulses: pl.DataFrame
) -> None:
    # Its vertex by five instants over two hours (Abramowitz and Stegun 1964, 25.3.6 and 25.3.24). Pairs of
    # slow planets are left to the dense search: their separation changes too little within hours.
    some = appulses.filter(~appulses["body"].is_in([body.value for body in BODIES[4:]]))
    h = HOUR_DAYS / 2.0
    f = [separations(direct, some, n * h) ** 2 for n in (-2.0, -1.0, 0.0, 1.0, 2.0)]
    rate = (f[0] - 8.0 * f[1] + 8.0 * f[3] - f[4]) / (12.0 * h)
    bend = (-f[0] + 16.0 * f[1] - 30.0 * f[2] + 16.0 * f[3] - f[4]) / (12.0 * h**2)
    assert np.abs(rate / bend * 86_400.0).max() < 2.0


def test_limits_are_ten_degrees_and_six_for_the_moon(appulses: pl.DataFrame) -> None:
    moon = appulses.filter(body="moon")["separation_deg"]
    others = appulses.filter(pl.col("body") != "moon")["separation_deg"]
    assert 5.0 < moon.max() < 6.0
    assert 9.0 < others.max() < 10.0


def test_wider_limits_add_appulses_and_take_none_away(store: TrackStore, appulses: pl.DataFrame) -> None:
    wide = Choice(stars_for=(), limits=Limits(20.0, 12.0))
    more = almanac(store, Query(*SPAN, frozenset({Kind.APPULSE}), choice=wide))
    assert set(appulses["event_id"]) < set(more["event_id"])
    inside = more.filter(
        pl.col("separation_deg") < pl.when(pl.col("body") == "moon").then(6.0).otherwise(10.0)
    )
    assert inside["event_id"].to_list() == appulses["event_id"].to_list()


def test_the_sun_has_no_appulses(appulses: pl.DataFrame) -> None:
    assert "sun" not in set(appulses["body"]) | set(appulses["other"])


# ---- greatest elongations


@pytest.mark.parametrize("body", INNER)
def test_greatest_elongation_is_greatest(direct: Direct, elongations: pl.DataFrame, body: Body) -> None:
    jd = elongations.filter(body=body.value)["jd_tt"].to_numpy()
    now = direct.separation_deg(body, Body.SUN, jd)
    for days in (-0.25, 0.25):
        assert (direct.separation_deg(body, Body.SUN, jd + days) < now).all()
    found = elongations.filter(body=body.value)["elongation_deg"].to_numpy()
    np.testing.assert_allclose(found, now, atol=2e-8)


@pytest.mark.parametrize("body", INNER)
def test_east_is_where_the_planet_sets_after_the_sun(
    direct: Direct, elongations: pl.DataFrame, body: Body
) -> None:
    own = elongations.filter(body=body.value)
    jd = own["jd_tt"].to_numpy()
    ahead = wrapped_deg(direct.longitude_deg(body, jd) - direct.longitude_deg(Body.SUN, jd))
    assert own["detail"].to_list() == ["east" if one > 0.0 else "west" for one in ahead]


@pytest.mark.parametrize(
    ("body", "low", "high"),
    # Mercury 17.9 to 27.8 degrees, Venus 45.4 to 47.3: handbooks (e.g. Explanatory Supplement), from memory.
    [("mercury", 17.8, 27.9), ("venus", 45.3, 47.4)],
)
def test_greatest_elongations_lie_in_the_handbooks_range(
    elongations: pl.DataFrame, body: str, low: float, high: float
) -> None:
    found = elongations.filter(body=body)["elongation_deg"]
    assert found.len() > 10
    assert found.is_between(low, high).all()


# ---- to which conjunction an appulse belongs


def path(direct: Direct, name: str, jd: Floats) -> Floats:
    """Apparent directions of a body or a packaged star by Skyfield, shape (3, n)."""
    if name in list(Body):
        return direct.direction(Body(name), jd)
    catalogue = ecliptic_stars()
    place = catalogue.name.index(name)
    star = Star(
        ra_hours=catalogue.ra_deg[place] / 15.0,
        dec_degrees=catalogue.dec_deg[place],
        ra_mas_per_year=catalogue.pm_ra_cosdec_mas_per_year[place],
        dec_mas_per_year=catalogue.pm_dec_mas_per_year[place],
        parallax_mas=catalogue.parallax_mas[place],
    )
    earth = direct.planets["earth"].at(direct.time(jd))
    seen = earth.observe(star).apparent(deflectors=SUN_ALONE).xyz.au
    return np.asarray(seen / np.linalg.norm(seen, axis=0))


def lonely_by_definition(direct: Direct, met: pl.DataFrame, pair: tuple[str, str]) -> list[bool]:
    """Whether no conjunction lies between the greatest separations beside a pair's appulses."""
    grid = np.arange(SPAN[0] - 900.0, SPAN[1] + 900.0, 0.5)
    apart = angle_rad(path(direct, pair[0], grid), path(direct, pair[1], grid))
    greatest = grid[1:-1][(apart[1:-1] > apart[:-2]) & (apart[1:-1] >= apart[2:])]
    own = met.filter(body=pair[0], other=pair[1])
    conjunctions = np.searchsorted(greatest, own.filter(kind="conjunction")["jd_tt"].to_numpy())
    inside = own.filter(pl.col("kind") == "appulse", pl.col("jd_tt").is_between(*SPAN, closed="left"))
    return [int(n) not in set(conjunctions.tolist()) for n in np.searchsorted(greatest, inside["jd_tt"])]


def marked_quasi(table: pl.DataFrame, pair: tuple[str, str]) -> list[bool]:
    own = table.filter(kind="appulse", body=pair[0], other=pair[1])
    return [detail == "quasi" for detail in own["detail"]]


@pytest.fixture(scope="module")
def met(store: TrackStore) -> pl.DataFrame:
    """Conjunctions and appulses of planets with planets and stars, with some years to both sides."""
    kinds, planets = frozenset({Kind.CONJUNCTION, Kind.APPULSE}), BODIES[2:]
    query = Query(SPAN[0] - 900.0, SPAN[1] + 900.0, kinds, frozenset(Frame), Choice(planets, planets))
    return almanac(store, query)


PAIRS = [
    ("mercury", "venus"),
    ("mercury", "mars"),
    ("venus", "mars"),
    ("venus", "jupiter"),
    ("mars", "saturn"),
]


@pytest.mark.parametrize("pair", PAIRS, ids="-".join)
def test_appulses_of_planets_without_a_conjunction_are_quasi(
    direct: Direct, met: pl.DataFrame, pair: tuple[str, str]
) -> None:
    inside = met.filter(pl.col("jd_tt").is_between(*SPAN, closed="left"))
    assert marked_quasi(inside, pair) == lonely_by_definition(direct, met, pair)


def test_there_are_quasi_appulses_among_those_compared(met: pl.DataFrame) -> None:
    assert any(any(marked_quasi(met, pair)) for pair in PAIRS)


STAR_PAIRS = [
    ("mars", "Beehive"),  # 2024-12-03: Mars turned back at 2.1 degrees and met it only in May 2025
    ("venus", "Spica"),
    ("venus", "Regulus"),
    ("mercury", "Antares"),
    ("mercury", "Zubenelgenubi"),
    ("jupiter", "Regulus"),
]


@pytest.mark.parametrize("pair", STAR_PAIRS, ids="-".join)
def test_appulses_with_stars_without_a_conjunction_are_quasi(
    direct: Direct, met: pl.DataFrame, pair: tuple[str, str]
) -> None:
    inside = met.filter(pl.col("jd_tt").is_between(*SPAN, closed="left"))
    assert marked_quasi(inside, pair) == lonely_by_definition(direct, met, pair)
