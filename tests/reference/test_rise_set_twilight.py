"""Rising, setting, culmination and place against published worked examples; sources in the data file."""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest

from tests.reference.published import jd_of_date, jd_tt_of_date, rows
from wanderers.ephemeris import kernels
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_ut1_from_tt
from wanderers.site import refraction, twilight
from wanderers.site.earth import vantage
from wanderers.site.places import Site
from wanderers.site.topocentric import horizontal, see_body

ROWS = rows("rise_set_twilight")
LEVELS = {
    "civil": twilight.CIVIL_DEG,
    "nautical": twilight.NAUTICAL_DEG,
    "astronomical": twilight.ASTRONOMICAL_DEG,
    "sun": twilight.rise_level(Body.SUN.order).airless_altitude_deg,
    "planet": twilight.rise_level(Body.MARS.order).airless_altitude_deg,
}


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> TrackStore:
    folder: Path = tmp_path_factory.mktemp("tracks")
    environment = {name: value for name, value in os.environ.items() if name != "WANDERERS_KERNEL"}
    return TrackStore(kernels.inspect_kernel(kernels.find_kernel(None, folder, environment), folder), folder)


def of_kind(*kinds: str) -> list[dict[str, str]]:
    return [row for row in ROWS if row["kind"] in kinds]


def site_of(row: dict[str, str]) -> Site:
    return Site(
        row["group"], *(float(row[name]) for name in ("latitude_deg", "longitude_deg", "elevation_m"))
    )


@pytest.mark.parametrize("row", of_kind("rise", "set", "culmination"), ids=lambda row: row["id"])
def test_instant_is_the_published_one(store: TrackStore, row: dict[str, str]) -> None:
    site, body = site_of(row), Body(row["body"]).order
    near = jd_tt_of_date(row["published"], "UT")
    jd = near + np.linspace(-0.4, 0.4, 11)
    sky = Sky(store.tracks(float(jd[0]), float(jd[-1])))
    if row["kind"] == "culmination":
        found = twilight.find_culminations(sky, site, jd, [body]).jd
    else:
        crossings = twilight.find_crossings(sky, site, jd, [twilight.rise_level(body)])
        found = crossings.jd[crossings.rising == (row["kind"] == "rise")]
    assert found.size == 1
    error_min = float(jd_ut1_from_tt(found)[0] - jd_of_date(row["published"])) * 1_440.0
    assert error_min == pytest.approx(0.0, abs=float(row["tolerance"])), row["tolerance_reason"]


@pytest.mark.parametrize("row", of_kind("apparent_zenith_angle", "azimuth"), ids=lambda row: row["id"])
def test_place_is_the_published_one(store: TrackStore, row: dict[str, str]) -> None:
    site = site_of(row)
    jd = np.array([jd_tt_of_date(row["when_ut"], "UT")])
    sky = Sky(store.tracks(float(jd[0]) - 1.0, float(jd[0]) + 1.0))
    at = vantage(sky, site, jd)
    place = horizontal(at, see_body(sky, at, Body(row["body"]).order).direction[0])
    if row["kind"] == "azimuth":
        found = place.azimuth_deg[0]
    else:
        air = (float(row["pressure_hpa"]), float(row["temperature_c"]))
        found = (
            90.0
            - (place.airless_altitude_deg + refraction.refraction_deg(place.airless_altitude_deg, *air))[0]
        )
    assert found == pytest.approx(float(row["published"]), abs=float(row["tolerance"])), row[
        "tolerance_reason"
    ]


@pytest.mark.parametrize("row", of_kind("definition"), ids=lambda row: row["id"])
def test_altitudes_are_the_defined_ones(row: dict[str, str]) -> None:
    unit_deg = {"deg": 1.0, "arcmin": 1.0 / 60.0}[row["unit"]]
    assert LEVELS[row["group"]] == pytest.approx(float(row["published"]) * unit_deg, abs=1e-12)
