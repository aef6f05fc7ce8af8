"""Instants as the clock of a place shows them."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris.dates import Instants, datetime64_from_jd
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.events.almanac import time_texts
from wanderers.site.zones import UNIX_EPOCH_JD, Zone

MS_PER_DAY: Final = 86_400_000.0
LAST_PLAIN_YEAR: Final = 9_999
"""Later years carry a sign, as ISO 8601 writes them."""
HALF_MINUTE_DAYS: Final = 30.0 / SECONDS_PER_DAY
HALF_SECOND_DAYS: Final = 0.5 / SECONDS_PER_DAY


def utc_texts(jd_tt: Floats) -> pl.Series:
    """Return instants in UTC, ISO 8601 to the millisecond, null where NaN."""
    return time_texts(jd_utc_from_tt(jd_tt), "Z")


def local_texts(zone: Zone, jd_tt: Floats) -> pl.Series:
    """Return instants by the local clock, ISO 8601 to the millisecond with its offset, null where NaN."""
    jd_utc = jd_utc_from_tt(jd_tt)
    offset_s = zone.offset_s(jd_utc)
    # Whole seconds added to what UTC prints: both name the same millisecond.
    clock = _texts(datetime64_from_jd(jd_utc) + offset_s.astype("timedelta64[s]"))
    return pl.select(pl.concat_str(clock, offset_texts(offset_s))).to_series()


def local_dates_and_times(zone: Zone, jd_tt: Floats) -> tuple[pl.Series, pl.Series]:
    """Return the local calendar date, and the time of day to the second, null where NaN."""
    texts = local_texts(zone, jd_tt + HALF_SECOND_DAYS)
    clock = texts.str.extract(r"^(.*)T(\d\d:\d\d:\d\d)", 2)
    return texts.str.extract(r"^(.*)T", 1), clock


def local_minutes(zone: Zone, jd_tt: Floats) -> pl.Series:
    """Return the local time of day to the nearest minute, as 18:32, null where NaN."""
    return local_texts(zone, jd_tt + HALF_MINUTE_DAYS).str.extract(r"T(\d\d:\d\d)", 1)


def local_dates_and_minutes(zone: Zone, jd_tt: Floats) -> tuple[pl.Series, pl.Series]:
    """Return local dates with the time to the nearest minute, as 2027-01-10 18:32, and offsets, as +01:00.

    Both are null where NaN.
    """
    texts = local_texts(zone, jd_tt + HALF_MINUTE_DAYS)
    shown = texts.str.extract(r"^(.*T\d\d:\d\d)", 1).str.replace("T", " ", literal=True)
    return shown, texts.str.extract(r"(.{6})$", 1)


def _texts(instants: Instants) -> pl.Series:
    """Print instants to the millisecond, null for NaT."""
    years = instants.astype("datetime64[Y]").astype(np.int64) + 1970
    known = ~np.isnat(instants)
    if not known.any() or (years[known].min() >= 0 and years[known].max() <= LAST_PLAIN_YEAR):
        return pl.Series(instants, dtype=pl.Datetime("ms")).dt.to_string("%Y-%m-%dT%H:%M:%S%.3f")
    jd = UNIX_EPOCH_JD + instants.astype(np.int64) / MS_PER_DAY
    return time_texts(np.where(known, jd, np.nan), "")


def offset_texts(offset_s: Ints) -> pl.Series:
    """Return offsets from UTC as ISO 8601 writes them, +01:00."""
    distinct, place = np.unique(offset_s // 60, return_inverse=True)
    texts = [
        f"{'-' if minutes < 0 else '+'}{abs(minutes) // 60:02d}:{abs(minutes) % 60:02d}"
        for minutes in distinct.tolist()
    ]
    return pl.Series(texts, dtype=pl.String).gather(place)
