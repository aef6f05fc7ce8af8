"""What stands near what, seen from a site at one moment."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.vectors import separation_deg
from wanderers.site.look import View
from wanderers.site.pairs import PLACEMENTS, bearing_deg, placement

NEIGHBOUR_DEG: Final = 10.0


@dataclass(frozen=True, slots=True)
class Targets:
    """What is looked for: numbers as in :mod:`wanderers.ephemeris.sky`, names and kinds, n of each."""

    number: Ints
    name: tuple[str, ...]
    kind: tuple[str, ...]


def company(direction: Floats, seen: View, targets: Targets, up: Bools) -> dict[str, pl.Series]:
    """Return what stands near each target: neighbours in words, the nearest bright star and how far it is."""
    apart = all_separations_deg(direction)
    np.fill_diagonal(apart, np.inf)
    bearing = bearing_deg(
        seen.altitude_deg[:, None], seen.place.azimuth_deg[:, None], seen.altitude_deg, seen.place.azimuth_deg
    )
    where = placement(bearing)
    is_star = np.array([kind == "star" for kind in targets.kind])
    star_apart = np.where(is_star & up, apart, np.inf)
    nearest = np.argmin(star_apart, axis=1)
    least = np.take_along_axis(star_apart, nearest[:, None], axis=1)[:, 0]
    return {
        "neighbours": pl.Series(
            [_neighbours(targets, apart[i], where[i], up) for i in range(up.size)], dtype=pl.String
        ),
        "nearest_star": pl.Series([targets.name[i] for i in nearest.tolist()]).zip_with(
            pl.Series(np.isfinite(least)), pl.Series([None], dtype=pl.String)
        ),
        "nearest_star_separation_deg": pl.Series(
            np.where(np.isfinite(least), least, np.nan), nan_to_null=True
        ),
    }


def all_separations_deg(direction: Floats) -> Floats:
    """Return the angle between every two unit vectors, shape (n, n), from shape (3, n)."""
    count = direction.shape[1]
    first, second = np.repeat(direction, count, axis=1), np.tile(direction, count)
    return separation_deg(first, second).reshape(count, count)


def _neighbours(targets: Targets, apart: Floats, where: Ints, up: Bools) -> str | None:
    """Say which targets that are up stand near one, nearest first, and on which side of it."""
    near = [i for i in np.argsort(apart).tolist() if up[i] and apart[i] <= NEIGHBOUR_DEG]
    words = [f"{_label(targets.name[i])} {apart[i]:.1f} degrees {PLACEMENTS[where[i]]}" for i in near]
    return "; ".join(words) or None


def _label(name: str) -> str:
    return name.capitalize() if name.islower() else name
