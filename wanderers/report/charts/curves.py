"""From table columns to the lines of a chart: longitudes without jumps, stretches that run backwards."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.report.charts.timeaxis import utc_days

CUT_STEP_DEG: Final = 5.0


@dataclass(frozen=True, slots=True)
class Line:
    """A planet's longitude against time, without jumps.

    Attributes:
        time: UTC as Julian Day numbers, shape (n,).
        longitude_deg: unwrapped, shape (n,).
        back: where it runs backwards, shape (n,).
    """

    time: Floats
    longitude_deg: Floats
    back: Bools

    def at(self, instant: float) -> float:
        """Return the unwrapped longitude at an instant."""
        return float(np.interp(instant, self.time, self.longitude_deg))

    def near(self, longitude_deg: float, instant: float) -> float:
        """Return a longitude on the turn of the circle on which the line is at an instant."""
        here = self.at(instant)
        return here + float(180.0 - (180.0 - (longitude_deg - here)) % 360.0)

    def within(self, low: float, high: float) -> Floats:
        """Return the unwrapped longitudes between two instants, shape (k,)."""
        return self.longitude_deg[(self.time >= low) & (self.time <= high)]

    def cropped(self, low: float, high: float) -> Line:
        """Return the part between two instants, to the very edges where the line reaches beyond them."""
        inner = (self.time > low) & (self.time < high)
        edges = [edge for edge in (low, high) if self.time[0] <= edge <= self.time[-1]]
        time = np.sort(np.concatenate([self.time[inner], edges]))
        nearest = np.clip(np.searchsorted(self.time, time), 0, self.time.size - 1)
        return Line(time, np.interp(time, self.time, self.longitude_deg), self.back[nearest])

    def laid(self, cut_deg: float | None, *, back_only: bool = False) -> tuple[Floats, Floats]:
        """Return the line as it is drawn on a circle cut at a longitude; None leaves it whole."""
        time = only(self.time, self.back) if back_only else self.time
        if cut_deg is None:
            return time, self.longitude_deg
        return wrapped_line(time, self.longitude_deg, cut_deg)


def line_of(track: pl.DataFrame) -> Line:
    """Return the line of a track's longitude."""
    return Line(time_of(track), unwrapped(track["longitude_deg"].to_numpy()), runs_back(track))


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


def round_step(extent: float, steps: Floats, most: int) -> float:
    """Return the smallest step that divides an extent into no more than ``most``; else the largest."""
    enough = extent / steps <= most
    return float(steps[int(np.argmax(enough))]) if enough.any() else float(steps[-1])


def multiples(low: float, high: float, step: float) -> Floats:
    """Return the multiples of a step between two limits, shape (k,)."""
    return np.asarray(np.arange(np.ceil(low / step), np.floor(high / step) + 1.0) * step)


def column(table: pl.DataFrame, name: str) -> Floats:
    """Return a column as floats, NaN for null, shape (n,)."""
    return np.asarray(table[name].cast(pl.Float64).fill_null(float("nan")).to_numpy(), dtype=np.float64)
