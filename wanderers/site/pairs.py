"""How two things stand to each other with the horizon level: above or below, left or right."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints

PLACEMENTS: Final = (
    "above",
    "to the upper right",
    "to the right",
    "to the lower right",
    "below",
    "to the lower left",
    "to the left",
    "to the upper left",
)
"""Where the second stands, seen from the first by someone who faces it, on either half of the Earth."""


def bearing_deg(
    altitude_deg: Floats, azimuth_deg: Floats, other_altitude_deg: Floats, other_azimuth_deg: Floats
) -> Floats:
    """Return in which direction the second lies from the first, shape (n,): 0 up, 90 right, [0, 360).

    Source: the spherical triangle of the zenith and both; azimuth grows to the right.
    """
    here, there = np.radians(altitude_deg), np.radians(other_altitude_deg)
    turn = np.radians(other_azimuth_deg - azimuth_deg)
    right = np.sin(turn) * np.cos(there)
    up = np.cos(here) * np.sin(there) - np.sin(here) * np.cos(there) * np.cos(turn)
    return np.asarray(np.degrees(np.arctan2(right, up)) % 360.0)


def placement(bearing: Floats) -> Ints:
    """Return bearings as indices into PLACEMENTS, shape (n,)."""
    return np.asarray(np.floor(bearing / 45.0 + 0.5).astype(np.int64) % len(PLACEMENTS))
