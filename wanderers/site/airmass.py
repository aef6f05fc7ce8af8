"""How much air starlight passes, and what that costs."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers.arrays import Floats

HAYES_LATHAM: Final = ((0.1451, 7_996.0), (0.120, 1_500.0))
"""Extinction at sea level, magnitudes per air mass, and scale height in metres: of air itself (Rayleigh), and
of haze on an average night. With 0.016 for ozone: Green 1992, International Comet Quarterly 14, 55, after
Hayes and Latham 1975, ApJ 197, 593; from memory. Lowland 0.28, a mountain of 2000 m 0.16."""
OZONE_MAG: Final = 0.016


def airmass(altitude_deg: Floats) -> Floats:
    """Return the air mass at altitudes as seen, refraction included, shape (n,); NaN below the horizon.

    Source: Kasten and Young 1989, Applied Optics 28, 4735. Accuracy: 0.5 per cent of their table.
    """
    altitude = np.where(altitude_deg >= 0.0, altitude_deg, np.nan)
    return np.asarray(1.0 / (np.sin(np.radians(altitude)) + 0.50572 * (altitude + 6.07995) ** -1.6364))


def extinction_mag(elevation_m: float) -> float:
    """Return what one air mass takes away in visual light on an average clear night, magnitudes."""
    return OZONE_MAG + sum(float(mag * np.exp(-elevation_m / scale_m)) for mag, scale_m in HAYES_LATHAM)


def dimmed_magnitude(magnitude: Floats, altitude_deg: Floats, per_airmass_mag: float) -> Floats:
    """Return magnitudes as they arrive at the ground, shape (n,); NaN below the horizon."""
    return np.asarray(magnitude + per_airmass_mag * airmass(altitude_deg))
