"""Evenings: from one local noon to the next, named by the date on which they begin."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import numpy.typing as npt

from wanderers.arrays import Floats, Ints
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
    """Consecutive evenings at a site.

    Attributes:
        site: where.
        zone: the clock.
        days: local calendar date on which each begins, datetime64[D], shape (n,).
        edges_jd: TT at each noon, the last one's end included, shape (n + 1,), rising.
        by_sun: whether noon is that of the mean Sun, because the clock is far off it.
    """

    site: Site
    zone: Zone
    days: Days
    edges_jd: Floats
    by_sun: bool = False

    @property
    def count(self) -> int:
        """How many."""
        return int(self.days.size)

    def index_of(self, jd: Floats) -> Ints:
        """Return the evening of each instant, shape (n,); -1 and ``count`` before and after all."""
        return np.asarray(np.searchsorted(self.edges_jd, jd, side="right") - 1)

    def grid(self, steps: int) -> Floats:
        """Return instants that cut every evening into equal steps, shape (count * steps + 1,).

        Each evening is cut by itself, so that what is found in it does not depend on where a span begins.
        """
        parts = np.arange(steps) / steps
        inside = self.edges_jd[:-1, None] + np.diff(self.edges_jd)[:, None] * parts
        return np.append(inside.ravel(), self.edges_jd[-1])


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
    return Evenings(site, zone, days[:-1][lasts], jd_tt_from_utc(noons[kept]), by_sun)


def _off_the_sun(site: Site, days: npt.NDArray[np.datetime64], noons_jd_utc: Floats) -> bool:
    """Return whether the clock's noon is nowhere near the Sun's on any of the days."""
    if abs(site.latitude_deg) > POLAR_DEG:
        return False
    by_clock = noons_jd_utc - UNIX_EPOCH_JD - days.astype(np.int64)
    hours = 24.0 * (by_clock - 0.5 + site.longitude_deg / 360.0)
    off = (hours + 12.0) % 24.0 - 12.0
    return bool(np.any(np.abs(off) > FARTHEST_CLOCK_HOURS))
