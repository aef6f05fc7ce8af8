"""Time scales: there and back, the two joins, unknown instants, shapes."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import parse_date

DAY_S = 86_400.0
RESOLUTION_S = 3e-4  # float64 steps by 8e-5 s at the ends of DE441; three roundings
FIRST_JD, LAST_JD = -3_027_215.5, 7_930_192.5  # DE441, 13200 BCE to 17191 CE
DE440_JD = (2_287_184.5, 2_688_976.5)  # 1550 to 2650
INSTANTS = st.floats(min_value=FIRST_JD, max_value=LAST_JD)


def end_of_utc() -> float:
    return parse_date(timescales.time_scale_facts().leap_seconds_until.isoformat())


@given(INSTANTS)
def test_tt_comes_back_from_utc_but_for_leap_seconds_and_joins(jd_tt: float) -> None:
    # Within a second of a leap second or a join UTC stands still or jumps, by a second at most.
    back = float(timescales.jd_tt_from_utc(timescales.jd_utc_from_tt(jd_tt)))
    to_midnight_s = abs(jd_tt % 1.0 - 0.5) * DAY_S
    tolerance_s = RESOLUTION_S if to_midnight_s > 120.0 else 1.001
    assert (back - jd_tt) * DAY_S == pytest.approx(0.0, abs=tolerance_s)


@given(INSTANTS)
def test_utc_comes_back_from_tt(jd_utc: float) -> None:
    # Only the 94 ms or so that the jump at the end skips have no TT of their own.
    back = float(timescales.jd_utc_from_tt(timescales.jd_tt_from_utc(jd_utc)))
    tolerance_s = RESOLUTION_S if abs(jd_utc - end_of_utc()) * DAY_S > 2.0 else 0.5
    assert (back - jd_utc) * DAY_S == pytest.approx(0.0, abs=tolerance_s)


def test_utc_never_runs_backwards() -> None:
    rough = np.linspace(FIRST_JD, LAST_JD, 200_000)
    near = [
        join + np.linspace(-200.0, 200.0, 4_001) / DAY_S
        for join in (timescales.UTC_START_JD, parse_date("1972-07-01"), end_of_utc())
    ]
    for jd_tt in (rough, *near):
        assert np.all(np.diff(timescales.jd_utc_from_tt(jd_tt)) >= 0.0)


def test_utc_is_ut1_outside_the_leap_second_era() -> None:
    rng = np.random.default_rng(1846)
    before = rng.uniform(FIRST_JD, timescales.UTC_START_JD, 1_000)
    after = rng.uniform(end_of_utc() + 1.0, LAST_JD, 1_000)
    for jd_tt in (before, after):
        np.testing.assert_array_equal(timescales.jd_utc_from_tt(jd_tt), timescales.jd_ut1_from_tt(jd_tt))
        ut1_back = jd_tt - timescales.delta_t_s(jd_tt) / DAY_S
        np.testing.assert_allclose(timescales.jd_ut1_from_tt(jd_tt), ut1_back, rtol=0.0, atol=1e-9)


def test_joins_are_as_small_as_stated() -> None:
    # Start: TT - UTC is 42.184 s by definition, the Delta-T curve 42.145 s; UTC waits for the difference.
    start = timescales.UTC_START_JD
    waiting = timescales.jd_utc_from_tt(start + np.array([42.15, 42.16, 42.17, 42.18]) / DAY_S)
    np.testing.assert_array_equal(waiting, start)
    # End: within the 0.9 s to which |UT1 - UTC| is kept (ITU-R TF.460-6).
    around_end = timescales.jd_utc_from_tt(end_of_utc() + np.array([69.184 - 0.001, 69.184 + 0.001]) / DAY_S)
    jump_s = (np.diff(around_end) * DAY_S - 0.002).item()
    assert 0.0 <= jump_s < 0.9
    assert jump_s == pytest.approx(69.184 - float(timescales.delta_t_s(end_of_utc())), abs=RESOLUTION_S)


def test_ut1_stays_within_nine_tenths_of_a_second_of_utc_in_the_era() -> None:
    # ITU-R TF.460-6: |UT1 - UTC| below 0.9 s.
    jd_tt = np.linspace(timescales.UTC_START_JD + 1.0, end_of_utc() - 1.0, 50_000)
    difference_s = (timescales.jd_ut1_from_tt(jd_tt) - timescales.jd_utc_from_tt(jd_tt)) * DAY_S
    assert np.abs(difference_s).max() < 0.9
    assert difference_s.min() < -0.5 and difference_s.max() > 0.5


def test_tdb_agrees_with_the_full_series_of_sofa() -> None:
    # erfa.dtdb: Fairhead and Bretagnon 1990, 787 terms, at the geocentre. Circular 179 states 10 microseconds
    # for 1600 to 2200; over the longer span of DE440 the same is allowed, and a tenth for its rounding.
    jd_tt = np.linspace(*DE440_JD, 5_000)
    expected_s = erfa.dtdb(jd_tt, np.zeros_like(jd_tt), 0.0, 0.0, 0.0, 0.0)
    np.testing.assert_allclose(timescales.tdb_minus_tt_days(jd_tt) * DAY_S, expected_s, rtol=0.0, atol=1.1e-5)
    added_s = (timescales.jd_tdb_from_tt(jd_tt) - jd_tt) * DAY_S
    np.testing.assert_allclose(added_s, expected_s, rtol=0.0, atol=1e-4)
    assert np.abs(expected_s).max() > 1e-3


def test_uncertainty_is_none_in_the_era_and_some_on_both_sides() -> None:
    year_days = 365.25
    inside = np.linspace(timescales.UTC_START_JD + 1.0, end_of_utc() - 1.0, 100)
    before = timescales.UTC_START_JD - np.arange(1.0, 15_000.0, 10.0) * year_days
    after = end_of_utc() + 1.0 + np.arange(0.0, 15_000.0, 10.0) * year_days
    np.testing.assert_array_equal(timescales.utc_uncertainty_s(inside), 0.0)
    assert np.all(timescales.utc_uncertainty_s(before) >= 0.1)
    assert np.all(np.diff(timescales.utc_uncertainty_s(after)) > 0.0)


FUNCTIONS = [
    timescales.delta_t_s,
    timescales.jd_ut1_from_tt,
    timescales.jd_utc_from_tt,
    timescales.jd_tt_from_utc,
    timescales.jd_tdb_from_tt,
    timescales.tdb_minus_tt_days,
    timescales.utc_uncertainty_s,
]


@pytest.mark.parametrize("function", FUNCTIONS, ids=lambda function: function.__name__)
def test_any_shape_gives_the_same_values_and_nan_stays_nan(function: object) -> None:
    assert callable(function)
    jd = np.array([[2_300_000.5, np.nan, 2_445_000.5], [2_600_000.5, 1_000_000.5, 2_451_545.0]])
    values = function(jd)
    assert values.shape == jd.shape and values.dtype == np.float64
    one_by_one = [float(function(float(x))) for x in jd.ravel()]
    np.testing.assert_array_equal(values.ravel(), one_by_one)
    np.testing.assert_array_equal(np.isnan(values), np.isnan(jd))
    assert function([]).shape == (0,)


def test_facts_state_the_reach_of_the_tables_in_words() -> None:
    facts = timescales.time_scale_facts()
    assert facts.delta_t_measured_until.isoformat() in facts.source
    assert facts.leap_seconds_until.isoformat() in facts.source
    assert "UT1" in facts.source and "skyfield" in facts.source
