"""TT and UTC in the leap-second era, against the IERS list and the IAU's SOFA routines (pyerfa)."""

from __future__ import annotations

import csv
import datetime as dt
from pathlib import Path

import erfa
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import parse_date

DATA = Path(__file__).parent / "data" / "leap_seconds.csv"
LINES = [line for line in DATA.read_text(encoding="utf-8").splitlines() if not line.startswith("#")]
ROWS = list(csv.DictReader(LINES))
DAY_S = 86_400.0
RESOLUTION_S = 1e-4  # a Julian Day number in float64 steps by 4e-5 s; a sum of two may be off by two steps


def tt_minus_utc_s(jd_utc: float) -> float:
    return (float(timescales.jd_tt_from_utc(jd_utc)) - jd_utc) * DAY_S


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["first_day"])
def test_tai_minus_utc_takes_its_published_value_on_the_published_day(row: dict[str, str]) -> None:
    jd_utc = parse_date(row["first_day"])
    assert tt_minus_utc_s(jd_utc) == pytest.approx(32.184 + float(row["tai_minus_utc_s"]), abs=RESOLUTION_S)


@pytest.mark.parametrize("row", ROWS[1:], ids=lambda row: row["first_day"])
def test_the_day_before_still_has_one_second_less(row: dict[str, str]) -> None:
    jd_utc = parse_date(row["first_day"]) - 1.0 / DAY_S
    assert tt_minus_utc_s(jd_utc) == pytest.approx(31.184 + float(row["tai_minus_utc_s"]), abs=RESOLUTION_S)


@pytest.mark.parametrize("row", ROWS[1:], ids=lambda row: row["first_day"])
def test_utc_stands_still_during_a_leap_second(row: dict[str, str]) -> None:
    midnight = parse_date(row["first_day"])
    after = midnight + (32.184 + float(row["tai_minus_utc_s"])) / DAY_S
    before_during_after = after + np.array([-1.5, -0.9, -0.5, -0.1, 0.5]) / DAY_S
    seconds = (timescales.jd_utc_from_tt(before_during_after) - midnight) * DAY_S
    np.testing.assert_allclose(seconds, [-0.5, 0.0, 0.0, 0.0, 0.5], rtol=0.0, atol=RESOLUTION_S)


def test_the_last_leap_second_is_the_last_of_the_published_list() -> None:
    # A newer list than the packaged one would fail here: the packaged one is then out of date.
    facts = timescales.time_scale_facts()
    assert facts.last_leap_second.isoformat() == ROWS[-1]["first_day"]
    assert facts.delta_t_measured_until < facts.leap_seconds_until


@given(st.datetimes(min_value=dt.datetime(1972, 1, 1), max_value=dt.datetime(2026, 12, 31)))
def test_tt_of_utc_agrees_with_sofa(instant: dt.datetime) -> None:
    second = instant.second + instant.microsecond / 1e6
    day, part = erfa.dtf2d(
        "UTC", instant.year, instant.month, instant.day, instant.hour, instant.minute, second
    )
    day, part = erfa.taitt(*erfa.utctai(day, part))
    jd_utc = parse_date(instant.isoformat())
    assert (float(timescales.jd_tt_from_utc(jd_utc)) - day - part) * DAY_S == pytest.approx(
        0.0, abs=RESOLUTION_S
    )


def test_utc_of_tt_agrees_with_sofa() -> None:
    # 20,000 instants of TT over the era; SOFA's UTC as calendar fields, so that stretched days do not enter.
    jd_tt = np.random.default_rng(1972).uniform(2_441_318.5, 2_461_405.5, 20_000)
    utc_day, utc_part = erfa.taiutc(*erfa.tttai(jd_tt, np.zeros_like(jd_tt)))
    year, month, day, clock = erfa.d2dtf("UTC", 6, utc_day, utc_part)
    second = clock["s"] + clock["f"] / 1e6
    ordinary = clock["s"] < 60
    seconds_of_day = clock["h"] * 3_600.0 + clock["m"] * 60.0 + second
    midnight, zero = erfa.cal2jd(year, month, day)
    expected = midnight + zero + seconds_of_day / DAY_S
    difference_s = (timescales.jd_utc_from_tt(jd_tt) - expected)[ordinary] * DAY_S
    assert ordinary.sum() > 19_900
    np.testing.assert_allclose(difference_s, 0.0, rtol=0.0, atol=RESOLUTION_S)
