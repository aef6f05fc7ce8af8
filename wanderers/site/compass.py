"""Directions in words."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints

POINTS: Final = (
    "north",
    "north-northeast",
    "northeast",
    "east-northeast",
    "east",
    "east-southeast",
    "southeast",
    "south-southeast",
    "south",
    "south-southwest",
    "southwest",
    "west-southwest",
    "west",
    "west-northwest",
    "northwest",
    "north-northwest",
)
LETTERS: Final = tuple(
    point.replace("-", "")
    .replace("north", "N")
    .replace("south", "S")
    .replace("east", "E")
    .replace("west", "W")
    for point in POINTS
)


def compass_point(azimuth_deg: Floats) -> Ints:
    """Return the nearest of the sixteen points of the compass as an index into POINTS, shape (n,)."""
    return np.asarray(np.floor(azimuth_deg / 22.5 + 0.5).astype(np.int64) % len(POINTS))
