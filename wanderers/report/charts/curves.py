"""From table columns to the lines of a chart: longitudes without jumps, stretches that run backwards."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.report.charts.timeaxis import utc_days

CUT_STEP_DEG: Final = 5.0


def unwrapped(longitude_deg: Floats) -> Floats:
    """Return longitudes without jumps at 0 and 360, shape (n,)."""
    return np.asarray(np.unwrap(longitude_deg, period=360.0))


def cut_at(longitude_deg: Floats, cut_deg: float) -> Floats:
    """Return longitudes counted from a cut: [cut, cut + 360), any shape."""
    return np.asarray(cut_deg + (longitude_deg - cut_deg) % 360.0)


def quietest_cut(kept_deg: Floats) -> float:
    """Return the longitude at which to cut the circle so that it lies far from those given, shape (n,).

    It is a multiple of CUT_STEP_DEG; 0 when none is given.
    """
    if kept_deg.size == 0:
        return 0.0
    cuts = np.arange(0.0, 360.0, CUT_STEP_DEG)
    off = np.abs(180.0 - (180.0 - (kept_deg - cuts[:, np.newaxis])) % 360.0)
    return float(cuts[int(np.argmax(np.min(off, axis=1)))])


def wrapped_line(x: Floats, longitude_deg: Floats, cut_deg: float) -> tuple[Floats, Floats]:
    """Return a line that leaves one edge of a cut circle and comes in at the other, NaN between.

    Args:
        x: shape (n,); NaN where the line is interrupted.
        longitude_deg: shape (n,).
        cut_deg: where the circle is cut.

    Returns:
        shape (n + 3 k,) each, for k crossings of the cut.
    """
    y = cut_at(longitude_deg, cut_deg)
    jump = np.flatnonzero(np.abs(np.diff(y)) > 180.0)
    rising = y[jump] > y[jump + 1]
    leave = np.where(rising, cut_deg + 360.0, cut_deg)
    enter = np.where(rising, cut_deg, cut_deg + 360.0)
    far = y[jump + 1] + np.where(rising, 360.0, -360.0)
    part = (leave - y[jump]) / (far - y[jump])
    at = x[jump] + part * (x[jump + 1] - x[jump])
    nothing = np.full(jump.size, np.nan)
    where = np.repeat(jump + 1, 3)
    return (
        np.insert(x, where, np.stack([at, nothing, at], axis=1).ravel()),
        np.insert(y, where, np.stack([leave, nothing, enter], axis=1).ravel()),
    )


def only(values: Floats, keep: Bools) -> Floats:
    """Return values with NaN where they are not kept, shape (n,)."""
    return np.where(keep, values, np.nan)


def runs_back(track: pl.DataFrame) -> Bools:
    """Return where a track runs backwards in the longitude of its frame, shape (n,)."""
    return np.asarray(track["longitude_rate_deg_per_day"].to_numpy() < 0.0)


def time_of(track: pl.DataFrame) -> Floats:
    """Return a track's place on the time axis, shape (n,)."""
    return utc_days(track["jd_tt"].to_numpy())


def column(table: pl.DataFrame, name: str) -> Floats:
    """Return a column as floats, NaN for null, shape (n,)."""
    return np.asarray(table[name].cast(pl.Float64).fill_null(float("nan")).to_numpy(), dtype=np.float64)
