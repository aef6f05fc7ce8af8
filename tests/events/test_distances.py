"""Perigees and apogees: extremes of the geometric distance, by Skyfield."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest

from tests.direct import Direct
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind

AU_KM = 149_597_870.7
SPAN = (2_457_023.5, 2_460_676.5)  # 2015 to 2025
KINDS = frozenset({Kind.PERIGEE, Kind.APOGEE})


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(*SPAN, KINDS))


@pytest.mark.parametrize("body", BODIES)
def test_distance_is_extreme(direct: Direct, table: pl.DataFrame, body: Body) -> None:
    own = table.filter(body=body.value)
    jd = own["jd_tt"].to_numpy()
    assert jd.size >= 8
    farther = np.where(own["kind"].to_numpy() == "perigee", 1.0, -1.0)
    here = direct.distance_km(body, jd)
    # An hour and half a day away; the Sun's changes by 20 m in an hour.
    for days in (-0.5, -1.0 / 24.0, 1.0 / 24.0, 0.5):
        assert (farther * (direct.distance_km(body, jd + days) - here) > 0.0).all()
    np.testing.assert_allclose(own["distance_au"] * AU_KM, here, rtol=0.0, atol=0.1)


@pytest.mark.parametrize("body", BODIES)
def test_rate_of_distance_passes_through_zero_within_a_second(
    direct: Direct, table: pl.DataFrame, body: Body
) -> None:
    jd = table.filter(body=body.value)["jd_tt"].to_numpy()
    h = 0.05
    at = [direct.distance_km(body, jd + n * h) for n in (-2.0, -1.0, 0.0, 1.0, 2.0)]
    # Abramowitz and Stegun (1964), 25.3.6 and 25.3.24.
    rate = (at[0] - 8.0 * at[1] + 8.0 * at[3] - at[4]) / (12.0 * h)
    bend = (-at[0] + 16.0 * at[1] - 30.0 * at[2] + 16.0 * at[3] - at[4]) / (12.0 * h**2)
    assert np.abs(rate / bend).max() * 86_400.0 < 1.0


def test_light_time_distance_would_be_another_instant(direct: Direct, table: pl.DataFrame) -> None:
    # Almanacs print the geometric one; for Venus and Mars the two differ by many minutes.
    jd = table.filter(kind="perigee", body="mars")["jd_tt"].to_numpy()
    h = 0.1
    target = direct._target(Body.MARS)
    travelled = [
        direct.planets["earth"].at(direct.time(jd + n * h)).observe(target).distance().km
        for n in (-1.0, 0.0, 1.0)
    ]
    away = h * (travelled[0] - travelled[2]) / (2.0 * (travelled[0] - 2.0 * travelled[1] + travelled[2]))
    assert (np.abs(away) * 1_440.0).min() > 2.0


def test_moon_and_sun_keep_to_the_printed_ranges(table: pl.DataFrame) -> None:
    # Moon: 356 400 to 370 400 and 404 000 to 406 720 km (Meeus, Astronomical Algorithms, chapter 50); the
    # Earth at perihelion and aphelion 0.98324 to 0.98337 and 1.01662 to 1.01675 au (chapter 38), its swing
    # about the barycentre of Earth and Moon included; both from memory.
    limits = {
        ("moon", "perigee"): (356_400.0, 370_400.0),
        ("moon", "apogee"): (404_000.0, 406_720.0),
        ("sun", "perigee"): (0.98322 * AU_KM, 0.98339 * AU_KM),
        ("sun", "apogee"): (1.01660 * AU_KM, 1.01677 * AU_KM),
    }
    for (body, kind), (low, high) in limits.items():
        found = table.filter(body=body, kind=kind)["distance_au"] * AU_KM
        assert found.len() >= 9
        assert found.is_between(low, high).all()


@pytest.mark.parametrize(
    ("body", "days", "slack_days"),
    # Anomalistic month and year: 27.5546 and 365.2596 days (The Astronomical Almanac, from memory). Single
    # months last 24.7 to 28.6 days (Meeus, Morsels, from memory).
    [("moon", 27.5546, 0.05), ("sun", 365.2596, 0.5)],
)
def test_perigees_return_after_the_anomalistic_period(
    table: pl.DataFrame, body: str, days: float, slack_days: float
) -> None:
    jd = table.filter(body=body, kind="perigee")["jd_tt"].to_numpy()
    assert (jd[-1] - jd[0]) / (jd.size - 1) == pytest.approx(days, abs=slack_days)


def test_events_of_distance_have_no_frame(table: pl.DataFrame) -> None:
    assert table["frame"].null_count() == table.height
