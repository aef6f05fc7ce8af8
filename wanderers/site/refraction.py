"""How much the air lifts what is seen through it."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers.arrays import Floats

STANDARD_PRESSURE_HPA: Final = 1_010.0
STANDARD_TEMPERATURE_C: Final = 10.0
"""What the formulas hold for. Meeus, Astronomical Algorithms, 2nd ed. (1998), chapter 16."""
LOWEST_DEG: Final = -1.0
"""Down to here the formula is used; below, no horizon on land lets a line of sight through."""
FADED_DEG: Final = -3.0
"""Where refraction has faded to nothing: no source, it keeps altitudes continuous and rising."""
TABLE_STEP_DEG: Final = 0.01


def standard_pressure_hpa(elevation_m: float) -> float:
    """Return the pressure of the air at an elevation, from the standard one at sea level.

    Source: ICAO standard atmosphere (ISO 2533:1975), troposphere; from memory.
    """
    return float(STANDARD_PRESSURE_HPA * (1.0 - 2.25577e-5 * elevation_m) ** 5.25588)


def refraction_deg(
    airless_altitude_deg: Floats,
    pressure_hpa: float = STANDARD_PRESSURE_HPA,
    temperature_c: float = STANDARD_TEMPERATURE_C,
) -> Floats:
    """Return by how much the air lifts something, shape (n,), from its altitude without air.

    Source: Saemundsson 1986, Sky & Telescope 72, 70; factors for air: Meeus, 2nd ed., chapter 16.
    Accuracy: 0.1 arcminutes against Bennett's formula from the horizon up; real air at the horizon strays
        by several arcminutes.
    """
    altitude = np.clip(airless_altitude_deg, LOWEST_DEG, 90.0)
    arcmin = 1.02 / np.tan(np.radians(altitude + 10.3 / (altitude + 5.11)))
    faded = np.clip((airless_altitude_deg - FADED_DEG) / (LOWEST_DEG - FADED_DEG), 0.0, 1.0)
    return np.asarray(np.maximum(arcmin, 0.0) / 60.0 * faded * _air(pressure_hpa, temperature_c))


def refraction_of_apparent_deg(
    apparent_altitude_deg: Floats,
    pressure_hpa: float = STANDARD_PRESSURE_HPA,
    temperature_c: float = STANDARD_TEMPERATURE_C,
) -> Floats:
    """Return by how much something seen at an altitude is lifted, shape (n,), from the horizon up.

    Source: Bennett 1982, Journal of Navigation 35, 255; Meeus, 2nd ed., equation 16.3.
    """
    arcmin = 1.0 / np.tan(np.radians(apparent_altitude_deg + 7.31 / (apparent_altitude_deg + 4.4)))
    return np.asarray(arcmin / 60.0 * _air(pressure_hpa, temperature_c))


def refracted_deg(airless_altitude_deg: Floats, elevation_m: float) -> Floats:
    """Return altitudes as seen through standard air at an elevation, shape (n,)."""
    lift = refraction_deg(airless_altitude_deg, standard_pressure_hpa(elevation_m))
    return np.asarray(airless_altitude_deg + lift)


def airless_deg(altitude_deg: Floats, elevation_m: float) -> Floats:
    """Return altitudes without air of what is seen at altitudes, shape (n,): the inverse of refracted_deg.

    Accuracy: 1e-6 degrees, from a table of both.
    """
    airless = np.arange(FADED_DEG, 90.0 + TABLE_STEP_DEG, TABLE_STEP_DEG)
    lift = np.interp(altitude_deg, refracted_deg(airless, elevation_m), airless) - altitude_deg
    return np.asarray(altitude_deg + np.where(altitude_deg < FADED_DEG, 0.0, lift))


def _air(pressure_hpa: float, temperature_c: float) -> float:
    return pressure_hpa / 1_010.0 * 283.0 / (273.0 + temperature_c)
