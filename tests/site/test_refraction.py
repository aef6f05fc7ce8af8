"""Refraction against skyfield's and SOFA's, and what must hold at any altitude."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from skyfield.earthlib import refract

from wanderers.site.refraction import (
    airless_deg,
    refracted_deg,
    refraction_deg,
    refraction_of_apparent_deg,
    standard_pressure_hpa,
)


def test_lift_is_that_of_bennetts_formula_turned_round() -> None:
    # Skyfield turns Bennett's formula round by iteration. Saemundsson's agrees within 0.1 arcminutes (Meeus,
    # chapter 16), and at the horizon, where both were fitted to the same tables, within 0.3.
    airless = np.linspace(0.0, 89.0, 300)
    theirs = refract(airless, 10.0, 1_010.0) - airless
    error_arcmin = 60.0 * np.abs(refraction_deg(airless) - theirs)
    assert error_arcmin.max() < 0.3 and error_arcmin[airless > 5.0].max() < 0.1


@pytest.mark.parametrize(("pressure", "temperature"), [(1_010.0, 10.0), (700.0, -5.0), (1_030.0, 30.0)])
def test_lift_high_up_is_that_of_sofa(pressure: float, temperature: float) -> None:
    # iauRefco: A tan z + B tan^3 z in yellow light and dry air, good to an arcsecond above 15 degrees.
    # Bennett's formula strays by up to 0.07 arcminutes, 4.2 arcseconds (Meeus, chapter 16).
    a, b = erfa.refco(pressure, temperature, 0.0, 0.57)
    apparent = np.linspace(20.0, 85.0, 40)
    tangent = np.tan(np.radians(90.0 - apparent))
    theirs = np.degrees(a * tangent + b * tangent**3)
    ours = refraction_of_apparent_deg(apparent, pressure, temperature)
    assert np.abs(ours - theirs).max() * 3_600.0 < 4.3


@pytest.mark.parametrize(
    ("elevation_m", "pressure_hpa"),
    # ISO 2533:1975, sea level 1013.25 hPa: 898.76 at 1000 m, 794.95 at 2000 m, 701.09 at 3000 m; from memory.
    [(0.0, 1_013.25), (1_000.0, 898.76), (2_000.0, 794.95), (3_000.0, 701.09)],
)
def test_pressure_falls_as_in_the_standard_atmosphere(elevation_m: float, pressure_hpa: float) -> None:
    ratio = standard_pressure_hpa(elevation_m) / 1_010.0
    assert ratio == pytest.approx(pressure_hpa / 1_013.25, rel=1e-4)


@given(st.lists(st.floats(-30.0, 90.0), min_size=2, max_size=30, unique=True), st.floats(0.0, 4_000.0))
def test_what_stands_higher_is_seen_higher(altitudes: list[float], elevation_m: float) -> None:
    airless = np.sort(np.array(altitudes))
    seen = refracted_deg(airless, elevation_m)
    assert (np.diff(seen) >= 0.0).all()
    assert (seen >= airless).all()


@given(st.floats(-2.0, 89.9), st.floats(0.0, 4_000.0))
def test_taking_the_air_away_undoes_it(altitude_deg: float, elevation_m: float) -> None:
    seen = refracted_deg(np.array([altitude_deg]), elevation_m)
    assert airless_deg(seen, elevation_m)[0] == pytest.approx(altitude_deg, abs=1e-5)


def test_far_below_the_horizon_nothing_is_lifted() -> None:
    deep = np.array([-3.0, -10.0, -90.0])
    assert (refraction_deg(deep) == 0.0).all()
    assert (airless_deg(deep, 100.0) == deep).all()
