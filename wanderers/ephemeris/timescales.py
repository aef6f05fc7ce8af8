"""TT, UTC, UT1 and TDB of Julian Day numbers, and how far a UTC can be trusted.

What "UTC" means here, in every file and table the program writes:

* from 1972-01-01 until the end of the packaged Earth rotation data: UTC with its leap seconds;
* before, and after that end: UT1 = TT - Delta-T, because UTC with leap seconds did not exist yet, or the
  leap seconds are not known.

The joins: at the start UT1 by the Delta-T curve runs 40 ms ahead of UTC, so it waits at 1972-01-01T00:00
until UTC arrives; at the end "UTC" jumps by TT - UTC less Delta-T (94 ms forward with the data that end on
2027-01-23). A Julian Day number has no room for a leap second: during one, UTC stands at the 00:00:00 that
follows it. So UTC never runs backwards as TT runs on.
"""

from __future__ import annotations

import datetime as dt
import functools
from collections.abc import Callable
from dataclasses import dataclass
from importlib import metadata, resources
from typing import Final

import numpy as np
import numpy.typing as npt
from skyfield import timelib

from wanderers.arrays import Floats
from wanderers.constants import DAYS_PER_JULIAN_YEAR, J2000_JD, SECONDS_PER_DAY
from wanderers.ephemeris.dates import datetime64_from_jd

UTC_START_JD: Final = 2_441_317.5
"""1972-01-01T00:00 UTC, the first day of UTC with leap seconds. ITU-R TF.460-6, annex 1."""

_TT_MINUS_TAI_S: Final = 32.184
"""Exact by definition. IAU 1991 Resolution A4."""
_TAI_MINUS_UTC_1972_S: Final = 10.0
_PREDICTED_DAYS: Final = 365
"""IERS finals2000A closes with one year of predictions. From memory; a test holds it to a later issue."""

_HUBER_Q_MS2_PER_YEAR: Final = 0.058
_HUBER_M_YEARS: Final = 2_500.0


@dataclass(frozen=True, slots=True)
class TimeScaleFacts:
    """How far the packaged tables reach, for a footnote wherever UTC is printed.

    The leap second table has no expiry date of its own. It is cut from the same Earth rotation file as
    Delta-T, predictions included, so its last day is the last one on which a leap second would have shown.
    """

    last_leap_second: dt.date
    leap_seconds_until: dt.date
    delta_t_measured_until: dt.date
    source: str


@dataclass(frozen=True, slots=True)
class _EarthRotation:
    """The packaged tables: leap seconds, Delta-T and where they end."""

    leap_jd_utc: Floats
    tt_minus_utc_days: Floats  # one longer: the first holds before the first leap second
    delta_t_s: Callable[[Floats], Floats]
    end_jd_utc: float
    measured_until_jd: float

    @property
    def end_jd_tt(self) -> float:
        return self.end_jd_utc + float(self.tt_minus_utc_days[-1])

    @property
    def start_jd_tt(self) -> float:
        return UTC_START_JD + float(self.tt_minus_utc_days[0])


def delta_t_s(jd_tt: npt.ArrayLike) -> Floats:
    """Return Delta-T = TT - UT1 in seconds.

    Args:
        jd_tt: any shape, TT days; NaN gives NaN.

    Returns:
        Seconds, same shape.

    Source: skyfield's built-in curve: daily IERS values and predictions from 1973, before them the splines
        of Morrison, Stephenson, Hohenkerk and Zawilski 2021, Proc. R. Soc. A 477, 20200776 (Table S15.2020),
        outside -720 to the present joined to the parabola -320 s + 32.5 s ((year - 1825)/100)^2 of
        Stephenson, Morrison and Hohenkerk 2016, Proc. R. Soc. A 472, 20160404.
    Accuracy: see utc_uncertainty_s; between 1955 and 1972 the curve strays up to 0.7 s from observed values.
    """
    jd_tt = np.asarray(jd_tt, dtype=np.float64)
    known = np.isfinite(jd_tt)
    curve = _earth_rotation().delta_t_s(np.where(known, jd_tt, J2000_JD).ravel())
    return np.where(known, np.asarray(curve).reshape(jd_tt.shape), np.nan)


def jd_ut1_from_tt(jd_tt: npt.ArrayLike) -> Floats:
    """Return UT1 of TT, days, any shape."""
    return np.asarray(jd_tt, dtype=np.float64) - delta_t_s(jd_tt) / SECONDS_PER_DAY


def jd_utc_from_tt(jd_tt: npt.ArrayLike) -> Floats:
    """Return UTC of TT: leap seconds from 1972 to the end of the packaged data, UT1 outside.

    Args:
        jd_tt: any shape, TT days; NaN gives NaN.

    Returns:
        Days, same shape; never falling as jd_tt rises. The module's docstring states the joins.

    Accuracy: the float64 of a Julian Day number, 40 microseconds near the present; the uncertainty of
        Delta-T outside the leap-second era is utc_uncertainty_s.
    """
    jd_tt = np.asarray(jd_tt, dtype=np.float64)
    tables = _earth_rotation()
    ut1 = jd_ut1_from_tt(jd_tt)
    outside = np.where(jd_tt < tables.start_jd_tt, np.minimum(ut1, UTC_START_JD), ut1)
    leap_jd_tt = tables.leap_jd_utc + tables.tt_minus_utc_days[1:]
    passed = np.searchsorted(leap_jd_tt, jd_tt, side="right")
    next_leap = np.append(tables.leap_jd_utc, np.inf)[passed]
    inside = np.minimum(jd_tt - tables.tt_minus_utc_days[passed], next_leap)
    return np.where((jd_tt >= tables.start_jd_tt) & (jd_tt < tables.end_jd_tt), inside, outside)


def jd_tt_from_utc(jd_utc: npt.ArrayLike) -> Floats:
    """Return TT of UTC: leap seconds from 1972 to the end of the packaged data, UT1 outside.

    Args:
        jd_utc: any shape, days; NaN gives NaN.

    Returns:
        TT days, same shape; the inverse of jd_utc_from_tt but for the leap seconds themselves and the
        fraction of a second by which the joins jump.
    """
    jd_utc = np.asarray(jd_utc, dtype=np.float64)
    tables = _earth_rotation()
    passed = np.searchsorted(tables.leap_jd_utc, jd_utc, side="right")
    inside = jd_utc + tables.tt_minus_utc_days[passed]
    return np.where((jd_utc >= UTC_START_JD) & (jd_utc < tables.end_jd_utc), inside, _tt_from_ut1(jd_utc))


def tdb_minus_tt_days(jd_tt: npt.ArrayLike) -> Floats:
    """Return TDB - TT in days, any shape: at most 2 ms in our centuries.

    Source: USNO Circular 179 (Kaplan 2005), equation 2.6. Accuracy: 10 microseconds from 1600 to 2200.
    """
    return np.asarray(timelib.tdb_minus_tt(np.asarray(jd_tt, dtype=np.float64)) / SECONDS_PER_DAY)


def jd_tdb_from_tt(jd_tt: npt.ArrayLike) -> Floats:
    """Return TDB of TT, days, any shape."""
    return np.asarray(jd_tt, dtype=np.float64) + tdb_minus_tt_days(jd_tt)


def utc_uncertainty_s(jd_tt: npt.ArrayLike) -> Floats:
    """Return the standard uncertainty (one sigma) of the UTC printed for an instant of TT, in seconds.

    Zero in the leap-second era. From -1000 to 1972 the published standard error of Delta-T, or, where that
    is larger, the distance between that table and the newer curve of delta_t_s: the solutions of 2004 and
    2021 differ by more than the errors printed (190 s at 1300, 4.4 s at 1800). Before -1000 and after the
    last measured Delta-T, the growth of a random walk in the length of the day, calibrated on 2500 years.

    Args:
        jd_tt: any shape, TT days; NaN gives NaN.

    Returns:
        Seconds, same shape.

    Source: Morrison and Stephenson 2004, JHA 35, 327, Table 1 (wanderers/data/delta_t_errors.csv); Huber
        2000, as given on NASA's page on the uncertainty in Delta-T (from memory): sigma in seconds =
        365.25 N sqrt(N Q/3 (1 + N/M))/1000, N years of extrapolation, Q = 0.058 ms^2 per year, M = 2500.
    """
    jd_tt = np.asarray(jd_tt, dtype=np.float64)
    tables = _earth_rotation()
    year, sigma_s = _published_errors()
    when = _julian_year(jd_tt)
    before = np.hypot(np.interp(when, year, sigma_s), _extrapolation_error_s(year[0] - when))
    after = _extrapolation_error_s(when - _julian_year(np.asarray(tables.measured_until_jd)))
    during = np.where(jd_tt < tables.end_jd_tt, 0.0, after)
    # Where no comparison holds, at NaN, the sum must stay NaN.
    return np.where(jd_tt < tables.start_jd_tt, before, during) + 0.0 * jd_tt


def time_scale_facts() -> TimeScaleFacts:
    """Return how far leap seconds and measured Delta-T reach, and the words for a report's footnote."""
    tables = _earth_rotation()
    until, measured = _date(tables.end_jd_utc), _date(tables.measured_until_jd)
    source = (
        "Leap seconds and Delta-T: IERS Earth rotation data packaged with skyfield "
        f"{metadata.version('skyfield')}, measured to {measured}, predicted to {until}. "
        f"Before 1972-01-01 and from {until} on, UTC stands for UT1 = TT - Delta-T: "
        "Morrison, Stephenson, Hohenkerk and Zawilski 2021 in the past, extrapolated in the future."
    )
    return TimeScaleFacts(_date(float(tables.leap_jd_utc[-1])), until, measured, source)


@functools.cache
def _earth_rotation() -> _EarthRotation:
    """Read skyfield's offline tables, once a process.

    The import stands here because skyfield.api costs more to start than all the rest of this module.
    """
    from skyfield.api import load

    timescale = load.timescale(builtin=True)
    tai_minus_utc_s = np.append(_TAI_MINUS_UTC_1972_S, timescale.leap_offsets)
    tt_minus_utc_days = (tai_minus_utc_s + _TT_MINUS_TAI_S) / SECONDS_PER_DAY
    # The table's rows stand at 0h UTC, given in TT: the nearest half day undoes the float error.
    end_jd_utc = np.rint((timescale.delta_t_table[0][-1] - tt_minus_utc_days[-1]) * 2.0) / 2.0
    return _EarthRotation(
        leap_jd_utc=np.asarray(timescale.leap_dates, dtype=np.float64),
        tt_minus_utc_days=tt_minus_utc_days,
        delta_t_s=timescale.delta_t_function,
        end_jd_utc=float(end_jd_utc),
        measured_until_jd=float(end_jd_utc) - _PREDICTED_DAYS,
    )


@functools.cache
def _published_errors() -> tuple[Floats, Floats]:
    """Return years, shape (k,), and the standard uncertainty of Delta-T there; see utc_uncertainty_s."""
    text = resources.files("wanderers").joinpath("data/delta_t_errors.csv").read_text(encoding="utf-8")
    rows = [line for line in text.splitlines() if not line.startswith("#")][1:]
    year, published_s, error_s = np.loadtxt(rows, delimiter=",", unpack=True)
    curve_s = delta_t_s(J2000_JD + (year - 2000.0) * DAYS_PER_JULIAN_YEAR)
    return year, np.maximum(error_s, np.abs(curve_s - published_s))


def _extrapolation_error_s(years: Floats) -> Floats:
    """Return the standard error of Delta-T in seconds, years beyond the last data; zero within them."""
    n = np.maximum(years, 0.0)
    growth_ms2 = n * _HUBER_Q_MS2_PER_YEAR / 3.0 * (1.0 + n / _HUBER_M_YEARS)
    return np.asarray(DAYS_PER_JULIAN_YEAR * n * np.sqrt(growth_ms2) / 1_000.0)


def _tt_from_ut1(jd_ut1: Floats) -> Floats:
    """Solve TT = UT1 + Delta-T(TT) by iteration.

    Delta-T changes by at most 3e-6 of the time that passes (13000 BCE), so from an error of Delta-T itself
    (8 days there) three rounds leave less than a microsecond.
    """
    jd_tt = jd_ut1
    for _ in range(3):
        jd_tt = jd_ut1 + delta_t_s(jd_tt) / SECONDS_PER_DAY
    return jd_tt


def _julian_year(jd_tt: Floats) -> Floats:
    """Return the year with its decimals, counted in Julian years from J2000."""
    return np.asarray(2_000.0 + (jd_tt - J2000_JD) / DAYS_PER_JULIAN_YEAR)


def _date(jd: float) -> dt.date:
    """Return the calendar day of a Julian Day number between the years 1 and 9999."""
    day: dt.date = datetime64_from_jd(jd).astype("datetime64[D]").item()
    return day
