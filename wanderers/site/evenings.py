"""Evenings: from one local noon to the next, named by the date on which they begin."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
import numpy.typing as npt

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site.places import Site
from wanderers.site.zones import UNIX_EPOCH_JD, Days, Zone, zone_named

FARTHEST_CLOCK_HOURS: Final = 5.0
"""How far a clock may stand off the Sun before noon by it means nothing. Real zones stay within 4 hours; a
clock in UTC at the other side of the Earth would cut every night in two."""
POLAR_DEG: Final = 89.0
"""Latitude beyond which any clock will do."""


@dataclass(frozen=True, slots=True)
class Evenings:
    """Evenings at a site, in order of time; between two of them others may be left out.

    Attributes:
        site: where.
        zone: the clock.
        days: local calendar date on which each begins, datetime64[D], shape (n,).
        start_jd: TT at the noon at which each begins, shape (n,), rising.
        end_jd: TT at the noon at which each ends, shape (n,).
        by_sun: whether noon is that of the mean Sun, because the clock is far off it.
    """

    site: Site
    zone: Zone
    days: Days
    start_jd: Floats
    end_jd: Floats
    by_sun: bool = False

    @property
    def count(self) -> int:
        """How many."""
        return int(self.days.size)

    @property
    def edges_jd(self) -> Floats:
        """TT at every noon, rising: n + 1 where none is left out."""
        return np.union1d(self.start_jd, self.end_jd)

    @property
    def middle_jd(self) -> Floats:
        """TT in the middle of each, shape (n,)."""
        return np.asarray((self.start_jd + self.end_jd) / 2.0)

    def chosen(self, which: Bools | Ints | slice) -> Evenings:
        """Return some of them."""
        days, start, end = self.days[which], self.start_jd[which], self.end_jd[which]
        return replace(self, days=days, start_jd=start, end_jd=end)

    def index_of(self, jd: Floats) -> Ints:
        """Return the evening of each instant, shape (n,); -1 where it is in none."""
        if self.count == 0:
            return np.full(np.shape(jd), -1)
        index = np.searchsorted(self.start_jd, jd, side="right") - 1
        return np.asarray(np.where((index >= 0) & (jd < self.end_jd[index]), index, -1))

    def first_in(self, jd: Floats) -> Floats:
        """Return the first of some instants in each evening, shape (count,), NaN where there is none."""
        out = np.full(self.count, np.nan)
        evening = self.index_of(jd)
        np.fmin.at(out, evening[evening >= 0], jd[evening >= 0])
        return out

    def raster(self, steps: int) -> Floats:
        """Return the beginnings of equal steps of every evening, shape (count, steps).

        Each evening is cut by itself, so that what is found in it does not depend on where a span begins.
        """
        parts = np.arange(steps) / steps
        return self.start_jd[:, None] + (self.end_jd - self.start_jd)[:, None] * parts

    def grid(self, steps: int) -> Floats:
        """Return the raster with every evening's end, rising; where two evenings meet, their noon once."""
        with_ends = np.column_stack([self.raster(steps), self.end_jd])
        met_again = np.append(self.start_jd[1:] == self.end_jd[:-1], False)
        kept = np.ones(with_ends.shape, dtype=np.bool_)
        kept[:, -1] = ~met_again
        return with_ends[kept]


def evenings(site: Site, first: np.datetime64, end: np.datetime64) -> Evenings:
    """Return the evenings whose dates lie in a half-open range of local calendar dates.

    A date that a place skipped (when it moved across the date line) has no evening.
    """
    zone = zone_named(site.zone)
    days = np.arange(first, end + np.timedelta64(1, "D"), dtype="datetime64[D]")
    noons: Floats = zone.noon_jd_utc(days)
    by_sun = _off_the_sun(site, days, noons)
    if by_sun:
        noons = np.asarray(UNIX_EPOCH_JD + days.astype(np.int64) + 0.5 - site.longitude_deg / 360.0)
    lasts = np.diff(noons) > 0.5
    kept = np.append(lasts, True)
    edges = jd_tt_from_utc(noons[kept])
    return Evenings(site, zone, days[:-1][lasts], edges[:-1], edges[1:], by_sun)


def _off_the_sun(site: Site, days: npt.NDArray[np.datetime64], noons_jd_utc: Floats) -> bool:
    """Return whether the clock's noon is nowhere near the Sun's on any of the days."""
    if abs(site.latitude_deg) > POLAR_DEG:
        return False
    by_clock = noons_jd_utc - UNIX_EPOCH_JD - days.astype(np.int64)
    hours = 24.0 * (by_clock - 0.5 + site.longitude_deg / 360.0)
    off = (hours + 12.0) % 24.0 - 12.0
    return bool(np.any(np.abs(off) > FARTHEST_CLOCK_HOURS))
