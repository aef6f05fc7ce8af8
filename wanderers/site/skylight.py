"""How bright the sky is, and the faintest star that shows on it.

Brightness of the sky is in nanolamberts. Altitudes are as seen; zenith distances follow from them.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Floats

NANOLAMBERT_OF_CGS: Final = 1.11e-15
"""erg/s/cm2/um/arcsec2 in V that make one nanolambert. Schaefer 1993, Vistas in Astronomy 36, 311; from
memory."""
SUN_MAG: Final = -26.74
ZERO_POINT_MAG: Final = -11.05
"""Of V in those units: Schaefer 1993; from memory."""
LOWEST_ALTITUDE_DEG: Final = 0.0
BRIGHT_SKY_NL: Final = 1_500.0
"""Where the eye changes from rods to cones: Schaefer 1990, PASP 102, 212, after Hecht 1947."""


@dataclass(frozen=True, slots=True)
class Lights:
    """What lights the sky at n instants and places, arrays of shape (n,).

    Attributes:
        altitude_deg: of the place looked at, as seen.
        sun_altitude_deg: without air.
        sun_separation_deg: of the place from the Sun.
        moon_altitude_deg: as seen.
        moon_separation_deg: of the place from the Moon; NaN if it is the Moon.
        moon_phase_angle_deg: 0 when full.
    """

    altitude_deg: Floats
    sun_altitude_deg: Floats
    sun_separation_deg: Floats
    moon_altitude_deg: Floats
    moon_separation_deg: Floats
    moon_phase_angle_deg: Floats


def sky_brightness_nl(lights: Lights, extinction_mag: float, dark_zenith_mag: float) -> Floats:
    """Return the brightness of the sky, shape (n,).

    Args:
        lights: where to look, and what shines.
        extinction_mag: per air mass.
        dark_zenith_mag: the moonless night's zenith, magnitudes a square arcsecond.
    """
    night = night_nl(lights.altitude_deg, extinction_mag, dark_zenith_mag)
    return np.asarray(night + moonlight_nl(lights, extinction_mag) + sunlight_nl(lights, extinction_mag))


def nanolamberts(mag_per_square_arcsec: float) -> float:
    """Return a brightness given in magnitudes a square arcsecond.

    Source: Krisciunas and Schaefer 1991, PASP 103, 1033, equation 1 (Garstang 1989).
    """
    return float(34.08 * np.exp(20.7233 - 0.92104 * mag_per_square_arcsec))


def night_nl(altitude_deg: Floats, extinction_mag: float, dark_zenith_mag: float) -> Floats:
    """Return the moonless night sky, shape (n,).

    Source: Krisciunas and Schaefer 1991, equations 2 and 3.
    """
    path = scattering_airmass(altitude_deg)
    return np.asarray(nanolamberts(dark_zenith_mag) * path * _passed(extinction_mag, path - 1.0))


def moonlight_nl(lights: Lights, extinction_mag: float) -> Floats:
    """Return moonlight scattered by the air, shape (n,); none with the Moon down or where one looks at it.

    Source: Krisciunas and Schaefer 1991, equations 15, 18, 20 and 21. Accuracy: 23 per cent by their data.
    """
    phase = np.abs(lights.moon_phase_angle_deg)
    illuminance = 10.0 ** (-0.4 * (3.84 + 0.026 * phase + 4e-9 * phase**4))
    apart = np.nan_to_num(lights.moon_separation_deg, nan=180.0)
    source, target = (
        scattering_airmass(altitude) for altitude in (lights.moon_altitude_deg, lights.altitude_deg)
    )
    light = scattering(apart) * illuminance * _passed(extinction_mag, source)
    shines = (lights.moon_altitude_deg > 0.0) & np.isfinite(lights.moon_separation_deg)
    return np.asarray(np.where(shines, light * (1.0 - _passed(extinction_mag, target)), 0.0))


def sunlight_nl(lights: Lights, extinction_mag: float) -> Floats:
    """Return twilight or daylight, whichever is less, shape (n,).

    Source: Schaefer 1993, Vistas in Astronomy 36, 311, as restated in Sky & Telescope 95 (5), 57 (1998); from
        memory. Accuracy: a factor of two; twilight at one depression of the Sun differs that much by itself.
    """
    path = scattering_airmass(lights.altitude_deg)
    lit = (1.0 - _passed(extinction_mag, path)) / NANOLAMBERT_OF_CGS
    zenith_distance = 90.0 - np.maximum(lights.altitude_deg, LOWEST_ALTITUDE_DEG)
    apart = np.maximum(lights.sun_separation_deg, 1.0)
    depth = 32.5 - lights.sun_altitude_deg - zenith_distance / (360.0 * extinction_mag)
    twilight = 10.0 ** (-0.4 * (SUN_MAG - ZERO_POINT_MAG + depth)) * 100.0 / apart * lit
    kept = _passed(extinction_mag, scattering_airmass(lights.sun_altitude_deg))
    spread = scattering(apart) * kept + 440_000.0 * (1.0 - kept)
    daylight = 10.0 ** (-0.4 * (SUN_MAG - ZERO_POINT_MAG + 43.27)) * spread * lit
    return np.asarray(np.minimum(twilight, daylight))


def scattering(separation_deg: Floats) -> Floats:
    """Return how much light the air scatters by an angle, shape (n,): Rayleigh and Mie parts.

    Source: Krisciunas and Schaefer 1991, equations 16 to 19.
    """
    apart = np.maximum(separation_deg, 1.0)
    rayleigh = 10.0**5.36 * (1.06 + np.cos(np.radians(apart)) ** 2)
    mie = np.where(apart >= 10.0, 10.0 ** (6.15 - apart / 40.0), 6.2e7 / apart**2)
    return np.asarray(rayleigh + mie)


def scattering_airmass(altitude_deg: Floats) -> Floats:
    """Return the length of a line of sight through a thin shell of air, shape (n,): 5 at the horizon.

    Source: Krisciunas and Schaefer 1991, equation 3.
    """
    altitude = np.maximum(altitude_deg, LOWEST_ALTITUDE_DEG)
    return np.asarray(1.0 / np.sqrt(1.0 - 0.96 * np.cos(np.radians(altitude)) ** 2))


def faintest_magnitude(brightness_nl: Floats) -> Floats:
    """Return the faintest star, as dimmed by the air, that the eye picks out of a sky, shape (n,).

    For eyes that know where to look.

    Source: Schaefer 1990, PASP 102, 212, equations 2 to 6 (thresholds of Hecht 1947); from memory.
    """
    bright = brightness_nl >= BRIGHT_SKY_NL
    base = np.where(bright, 10.0**-8.35, 10.0**-9.80)
    gain = np.where(bright, 10.0**-5.90, 10.0**-1.90)
    threshold = base * (1.0 + np.sqrt(gain * brightness_nl)) ** 2
    return np.asarray(-16.57 - 2.5 * np.log10(threshold))


def _passed(extinction_mag: float, path: Floats) -> Floats:
    """Return the part of light that air lets through."""
    return np.asarray(10.0 ** (-0.4 * extinction_mag * path))
